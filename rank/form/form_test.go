package form

import (
	"bytes"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"

	"kelvinrow/estimate/archetype"
	"kelvinrow/estimate/building"
	"kelvinrow/ingest"
	"kelvinrow/ingest/finding"
)

// stock is three buildings: one well known, one hardly, one whose texts look like
// formulas.
func stock() *Input {
	sheet := &building.Sheet{File: "register.xlsx", Name: "Buildings", FileDate: "2024-03-01"}
	sheet.Columns[building.FloorArea] = "H"
	number := func(f building.Field, v float64) building.Value {
		return building.Value{Field: f, Kind: building.Registered, Number: v}
	}
	text := func(f building.Field, s string) building.Value {
		return building.Value{Field: f, Kind: building.Registered, Text: s}
	}
	year := func(f building.Field, low, high float64) building.Value {
		return building.Value{Field: f, Kind: building.Certified, Number: (low + high) / 2, Low: low, High: high}
	}
	merge := func(id string, row int, values ...building.Value) *building.Building {
		return building.Merge(id, []building.Record{{Building: id, Sheet: sheet, Row: row, Values: values}})
	}
	return &Input{
		Portfolio: "north", Date: "2026-12-01", Choice: "The 3 buildings named one by one.", Currency: "EUR",
		Surveys: []archetype.SurveyCost{{Group: "geometry", Cost: 250}, {Group: "air", Cost: 700}},
		Buildings: []*building.Building{
			merge("A-1", 12, text(building.Name, "Linden School"), text(building.Street, "Quay 1"), text(building.Town, "Nordhafen"),
				number(building.FloorArea, 812.5432), number(building.Storeys, 3), year(building.YearBuilt, 1960, 1969), year(building.YearRoof, 2004, 2004),
				text(building.WallConstruction, "solid brick"), number(building.HeatRecovery, 0.745), number(building.Efficiency, 3.2), number(building.SupplyAirflow, 0),
				building.Value{Field: building.Protected, Kind: building.Registered, Number: 1}, number(building.WallU, 1.2345678)),
			merge("00017", 13, number(building.FloorArea, 90)),
			merge("=1+1", 14, text(building.Name, "@Hall"), number(building.FloorArea, 90), text(building.Restrictions, "-none said-")),
		},
	}
}

func written(t *testing.T, in *Input) []byte {
	t.Helper()
	var b bytes.Buffer
	if _, err := Write(t.Context(), &b, in); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

// book opens a form to fill it in.
type book struct {
	*excelize.File
	t *testing.T
}

func open(t *testing.T, content []byte) *book {
	t.Helper()
	f, err := excelize.OpenReader(bytes.NewReader(content))
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { f.Close() })
	return &book{f, t}
}

// at is the cell of a building and a column.
func (b *book) at(id, key string) string {
	b.t.Helper()
	rows, err := b.GetRows(ingest.FormSheet)
	if err != nil {
		b.t.Fatal(err)
	}
	for r := headRow; r < len(rows); r++ {
		if rows[r][0] != id {
			continue
		}
		for i := range columns {
			if columns[i].key == key {
				return at(i, r+1)
			}
		}
	}
	b.t.Fatalf("no cell for %s of %s", key, id)
	return ""
}

func (b *book) put(id, key string, v any) {
	b.t.Helper()
	if err := b.SetCellValue(ingest.FormSheet, b.at(id, key), v); err != nil {
		b.t.Fatal(err)
	}
}

func (b *book) saved(name string) string {
	b.t.Helper()
	p := filepath.Join(b.t.TempDir(), name)
	if err := b.SaveAs(p); err != nil {
		b.t.Fatal(err)
	}
	return p
}

// taken is what ingest makes of a file.
type taken struct {
	*ingest.Report
	records []building.Record
}

func (s *taken) Sheet(*building.Sheet) error { return nil }
func (s *taken) Record(r *building.Record) error {
	c := *r
	c.Values = append([]building.Value(nil), r.Values...)
	s.records = append(s.records, c)
	return nil
}

func read(t *testing.T, path string) *taken {
	t.Helper()
	s := &taken{}
	var err error
	if s.Report, err = ingest.ReadFile(t.Context(), path, ingest.Options{Today: "2026-12-01", Portfolio: "north"}, s); err != nil {
		t.Fatal(err)
	}
	return s
}

// got says what came of a building: "floor_area=900 surveyed".
func (s *taken) got(id string) map[string]building.Value {
	out := map[string]building.Value{}
	for _, r := range s.records {
		if r.Building == id {
			for _, v := range r.Values {
				out[v.Field.Key()] = v
			}
		}
	}
	return out
}

func (s *taken) said(check string) []finding.Finding {
	var out []finding.Finding
	for _, f := range s.Findings {
		if f.Check == check {
			out = append(out, f)
		}
	}
	return out
}

func save(t *testing.T, content []byte) string {
	t.Helper()
	p := filepath.Join(t.TempDir(), "survey.xlsx")
	if err := os.WriteFile(p, content, 0o600); err != nil {
		t.Fatal(err)
	}
	return p
}

func TestSameInputSameBytes(t *testing.T) {
	t.Parallel()
	if !bytes.Equal(written(t, stock()), written(t, stock())) {
		t.Error("two forms of one input differ")
	}
	other := stock()
	other.Choice = "Others."
	if number(other) == number(stock()) {
		t.Error("another form has the same number")
	}
}

func TestUntouchedFormSaysNothing(t *testing.T) {
	t.Parallel()
	s := read(t, save(t, written(t, stock())))
	if !s.Form || s.Rows != 0 || len(s.records) != 0 || len(s.said("form-empty")) != 1 || len(s.Findings) != 1 {
		t.Errorf("form %v, %d rows, %d records, %v", s.Form, s.Rows, len(s.records), s.Findings)
	}
}

func TestWhatIsKnownStandsOnTheForm(t *testing.T) {
	t.Parallel()
	b := open(t, written(t, stock()))
	for key, want := range map[string]string{
		"floor_area": "812.5", "storeys": "3", "year_built": "1960-1969", "year_roof": "2004", "wall_construction": "solid brick",
		"heat_recovery": "75", "efficiency": "320", "protected": "yes", "wall_u": "1.235", "supply_airflow": "0", "n50": "",
	} {
		if got, err := b.GetCellValue(ingest.FormSheet, b.at("A-1", key), excelize.Options{RawCellValue: true}); err != nil || got != want {
			t.Errorf("%s is %q, want %q (%v)", key, got, want, err)
		}
	}
	comments, err := b.GetComments(ingest.FormSheet)
	if err != nil {
		t.Fatal(err)
	}
	notes := map[string]string{}
	for _, c := range comments {
		notes[c.Cell] = c.Text
	}
	note := notes[b.at("A-1", "floor_area")]
	for _, want := range []string{"812.5 m²", "register.xlsx", "sheet Buildings", "row 12", "column H", "2024-03-01", "registered"} {
		if !strings.Contains(note, want) {
			t.Errorf("the note of the floor area does not say %q: %q", want, note)
		}
	}
	if note := notes[b.at("A-1", "n50")]; note != "" {
		t.Errorf("what is not known has a note: %q", note)
	}
	for _, id := range []string{"00017", "=1+1"} {
		row := b.at(id, "id")
		if f, _ := b.GetCellFormula(ingest.FormSheet, row); f != "" {
			t.Errorf("%s became the formula %q", id, f)
		}
	}
}

func TestOnlyCellsToFillAreOpen(t *testing.T) {
	t.Parallel()
	b := open(t, written(t, stock()))
	locked := func(cell string) bool {
		id, err := b.GetCellStyle(ingest.FormSheet, cell)
		if err != nil {
			t.Fatal(err)
		}
		st, err := b.GetStyle(id)
		if err != nil {
			t.Fatal(err)
		}
		return st.Protection == nil || st.Protection.Locked
	}
	for _, cell := range []string{"A1", "A8", "B8", "C8", "D8", "G7", "G6", "A4"} {
		if !locked(cell) {
			t.Errorf("%s can be changed", cell)
		}
	}
	for _, cell := range []string{"C4", "F4", "E8", b.at("A-1", "floor_area"), b.at("A-1", "n50"), b.at("=1+1", "remarks")} {
		if locked(cell) {
			t.Errorf("%s cannot be changed", cell)
		}
	}
	for _, name := range []string{ingest.FormRecord, listsSheet} {
		if v, err := b.GetSheetVisible(name); err != nil || v {
			t.Errorf("sheet %q is shown (%v)", name, err)
		}
	}
	if p, err := b.GetSheetProtection(ingest.FormSheet); err != nil || !p.SelectUnlockedCells || p.FormatCells || p.Password != "" {
		t.Errorf("protection %+v, %v", p, err)
	}
}

// Every column to fill but texts says what it takes, and takes what is known.
func TestCellsSayWhatTheyTake(t *testing.T) {
	t.Parallel()
	b := open(t, written(t, stock()))
	rules, err := b.GetDataValidations(ingest.FormSheet)
	if err != nil {
		t.Fatal(err)
	}
	byColumn := map[string]*excelize.DataValidation{}
	for _, r := range rules {
		byColumn[strings.TrimRight(strings.Split(r.Sqref, ":")[0], "0123456789")] = r
	}
	for i := locked; i < len(columns); i++ {
		c := &columns[i]
		r := byColumn[letters(i)]
		free := c.isField && c.field.Info().Type == building.Text || c.key == ingest.FormRemarks
		if (r == nil) != free {
			t.Errorf("%s: rule %v", c.head, r)
			continue
		}
		if r == nil {
			continue
		}
		if c.isField && len(offered(c.field)) > 0 && r.Type != "list" {
			t.Errorf("%s takes %s, not words of a list", c.head, r.Type)
		}
	}
	if r := byColumn[letters(column0("wall_u"))]; r.Formula1 != "0.05" || r.Formula2 != "7" {
		t.Errorf("U-values from %s to %s", r.Formula1, r.Formula2)
	}
	if r := byColumn[letters(column0("heat_recovery"))]; r.Formula1 != "0" || r.Formula2 != "98" {
		t.Errorf("heat recovery from %s to %s %%", r.Formula1, r.Formula2)
	}
}

func column0(key string) int {
	for i := range columns {
		if columns[i].key == key {
			return i
		}
	}
	return -1
}

func TestTooManyBuildings(t *testing.T) {
	t.Parallel()
	in := stock()
	for len(in.Buildings) <= MostBuildings {
		in.Buildings = append(in.Buildings, in.Buildings[0])
	}
	if _, err := Write(t.Context(), &bytes.Buffer{}, in); err == nil {
		t.Error("written")
	}
	in.Buildings = nil
	if _, err := Write(t.Context(), &bytes.Buffer{}, in); err == nil {
		t.Error("a form of nothing was written")
	}
}

// The header of a page may have 255 characters; a program refuses the file beyond.
func TestLongNamesFitThePageHeader(t *testing.T) {
	t.Parallel()
	in := stock()
	in.Portfolio, in.Choice = strings.Repeat("A&B ", 50), strings.Repeat("Größe & Form 𝛑 ", 40)
	b := open(t, written(t, in))
	h, err := b.GetHeaderFooter(ingest.FormSheet)
	if err != nil || h == nil {
		t.Fatal(h, err)
	}
	if n := len([]rune(h.OddHeader)); n > 255 || !strings.Contains(h.OddHeader, "A&&B") {
		t.Errorf("%d characters: %q", n, h.OddHeader)
	}
}
