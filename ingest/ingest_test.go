package ingest

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/xuri/excelize/v2"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/finding"
	"kelvinrow/ingest/header"
)

const shared = "../../shared/data"

// keeper keeps what a sink gets.
type keeper struct {
	sheets  []*building.Sheet
	records []building.Record
	stop    error
}

func (k *keeper) Sheet(s *building.Sheet) error { k.sheets = append(k.sheets, s); return nil }

func (k *keeper) Record(r *building.Record) error {
	if len(k.sheets) == 0 || r.Sheet != k.sheets[len(k.sheets)-1] {
		return errors.New("a record before its sheet")
	}
	c := *r
	c.Values = slices.Clone(r.Values)
	k.records = append(k.records, c)
	return k.stop
}

func (k *keeper) get(id string, f building.Field) (building.Value, bool) {
	for _, r := range k.records {
		for _, v := range r.Values {
			if r.Building == id && v.Field == f {
				return v, true
			}
		}
	}
	return building.Value{}, false
}

func csvFile(t *testing.T, text string) string {
	t.Helper()
	p := filepath.Join(t.TempDir(), "register.csv")
	if err := os.WriteFile(p, []byte(text), 0o600); err != nil {
		t.Fatal(err)
	}
	return p
}

func load(t *testing.T, path string, opt Options) (*Report, *keeper) {
	t.Helper()
	if opt.Today == "" {
		opt.Today = "2026-12-01"
	}
	k := &keeper{}
	r, err := ReadFile(context.Background(), path, opt, k)
	if err != nil {
		t.Fatal(err)
	}
	if r.Used+r.SetAside != r.Rows {
		t.Errorf("%d used and %d set aside of %d rows", r.Used, r.SetAside, r.Rows)
	}
	return r, k
}

// missed are the checks that only say that a column would be good to have.
var missed = []string{"no-use", "no-year"}

func checks(r *Report, sev finding.Severity) string {
	var s []string
	for _, f := range r.Findings {
		if f.Severity == sev && !slices.Contains(missed, f.Check) {
			s = append(s, fmt.Sprintf("%s@%d%s", f.Check, f.Row, f.Column))
		}
	}
	return strings.Join(s, " ")
}

func TestFaultsOfRowsAndSheets(t *testing.T) {
	for _, tc := range []struct {
		name, csv            string
		errors, warnings     string
		rows, used, setAside int
	}{
		{"Sound", "id,floor area (m2),year built,use,ventilation\n1,100,1950,school,natural\n", "", "", 1, 1, 0},
		{"NoHeader", "1,100,1950\n2,200,1960\n", "no-table@0", "", 0, 0, 0},
		{"NoID", "address,floor area,year built,use\nA 1,100,1950,school\n", "missing-id@0A", "", 0, 0, 0},
		{"AmbiguousSize", "id,Wohnfläche,Nutzfläche\n1,100,120\n", "ambiguous-column@0B,C", "", 0, 0, 0},
		{"RowWithoutID", "id,floor area (m2),use,ventilation\n,100,school,natural\n2,100,school,natural\n", "missing-id@2A", "", 2, 1, 1},
		{"NegativeArea", "id,floor area (m2),use,ventilation\n1,-100,school,natural\n", "negative-area@2B", "", 1, 0, 1},
		{"TextAsOnlySize", "id,floor area (m2),use,ventilation\n1,large,school,natural\n", "not-a-number@2B", "", 1, 0, 1},
		{"TextBesideAnotherSize", "id,floor area (m2),volume (m3),ventilation\n1,large,300,natural\n", "", "not-a-number@2B", 1, 1, 0},
		{"TextInAnotherNumber", "id,floor area (m2),storeys,ventilation\n1,100,many,natural\n", "", "not-a-number@2C", 1, 1, 0},
		{"DuplicateID", "id,floor area (m2),use,ventilation\n1,100,school,natural\n1,120,school,natural\n", "duplicate-id@3A", "", 2, 1, 1},
		{"SameRowTwice", "id,floor area (m2),use,ventilation\n1,100,school,natural\n1,100,school,natural\n", "", "", 2, 2, 0},
		{"DatedRows", "id,data year,floor area (m2),ventilation\n1,2014,100,natural\n1,2015,120,natural\n", "", "", 2, 2, 0},
		{"NoVentilation", "id,floor area (m2),use\n1,100,school\n2,100,school\n", "", "no-ventilation@0", 2, 2, 0},
		{"NoSizeColumn", "id,year windows renewed\n1,2015\n", "", "", 1, 1, 0},
		{"UnknownWords", "id,floor area (m2),ventilation\n1,100,magic\n2,90,magic\n", "", "unknown-word@2C", 2, 2, 0},
		{"TotalAndRemark", "id,floor area (m2),ventilation\n1,100,natural\n\nTotal,100,\nSource: the town's archive,,\n", "", "", 1, 1, 0},
		{"WrongUnitInCell", "id,floor area (m2),volume,ventilation\n1,100 kWh,300,natural\n", "", "wrong-unit@2B", 1, 1, 0},
		{"TotalWithOtherWords", "id,name,floor area (m2),ventilation\n1,a,100,natural\nTotal 2024,,100,\nTotal House,Meeting house,100,natural\n", "", "", 2, 2, 0},
		{"ZeroArea", "id,floor area (m2),volume,ventilation\n1,0,300,natural\n", "", "zero-area@2B", 1, 1, 0},
		{"WindowsAboveWalls", "id,floor area (m2),wall area,window area,ventilation\n1,100,50,60,natural\n", "", "window-wall@2D", 1, 1, 0},
	} {
		t.Run(tc.name, func(t *testing.T) {
			t.Parallel()
			r, k := load(t, csvFile(t, tc.csv), Options{})
			if got := checks(r, finding.Error); got != tc.errors {
				t.Errorf("errors %q, want %q", got, tc.errors)
			}
			if got := checks(r, finding.Warning); got != tc.warnings {
				t.Errorf("warnings %q, want %q", got, tc.warnings)
			}
			if r.Rows != tc.rows || r.Used != tc.used || r.SetAside != tc.setAside {
				t.Errorf("rows %d, used %d, set aside %d; want %d, %d, %d", r.Rows, r.Used, r.SetAside, tc.rows, tc.used, tc.setAside)
			}
			if tc.rows == 0 && len(k.sheets) > 0 {
				t.Error("a sheet that is not read was handed on")
			}
			for _, f := range r.Findings {
				if f.File != "register.csv" || f.Text == "" || f.Severity == finding.Error && f.Fix == "" {
					t.Errorf("finding says too little: %+v", f)
				}
			}
		})
	}
}

func TestValues(t *testing.T) {
	const file = `Gebäudeverzeichnis;;;;;;;;
Stand: 1.3.2026;;;;;;;;
Geb.-Nr.;Straße;Wohnfläche [m²];Baujahr;Fenster erneuert;Lüftung;Wärmeverbrauch 2024 (MWh);U-Wert Wand gemessen;Denkmalschutz
007;Am Hang 1;1.234,5;1960-69;2004;Fensterlüftung;120,5;1,35;ja
12;Am Hang 2;ca. 980 m²;vor 1919;?;WRG;k.A.;-;nein
13;Am Hang 3;10.000 sq ft;1978;;Abluft;;;
`
	r, k := load(t, csvFile(t, file), Options{})
	if len(k.records) != 3 || r.Sheets[0].HeaderRow != 3 || r.SetAside != 0 {
		t.Fatalf("%d records, header in row %d, findings %v", len(k.records), r.Sheets[0].HeaderRow, r.Findings)
	}
	if got := k.sheets[0]; got.FileDate != "2026-03-01" || got.File != "register.csv" || got.Columns[building.FloorArea] != "C" {
		t.Errorf("sheet %+v", got)
	}
	want := []building.Value{
		{Field: building.Street, Kind: building.Registered, Text: "Am Hang 1"},
		{Field: building.YearBuilt, Kind: building.Registered, Number: 1964.5, Low: 1960, High: 1969},
		{Field: building.YearWindows, Kind: building.Registered, Number: 2004, Low: 2004, High: 2004},
		{Field: building.FloorArea, Kind: building.Registered, Number: 1234.5},
		{Field: building.WallU, Kind: building.Surveyed, Number: 1.35},
		{Field: building.VentilationField, Kind: building.Registered, Text: "natural"},
		{Field: building.MeteredHeat, Kind: building.Metered, Number: 120500},
		{Field: building.MeteredYear, Kind: building.Metered, Number: 2024, Low: 2024, High: 2024},
		{Field: building.Protected, Kind: building.Registered, Number: 1},
	}
	if k.records[0].Building != "007" || k.records[0].Row != 4 {
		t.Errorf("record of %q in row %d", k.records[0].Building, k.records[0].Row)
	}
	if d := cmp.Diff(want, k.records[0].Values); d != "" {
		t.Error(d)
	}
	if v, _ := k.get("12", building.FloorArea); v.Number != 980 {
		t.Errorf("ca. 980 m²: %v", v)
	}
	// 10.000 is ten thousand in a column that writes 1.234,5; 1 ft2 = 0.09290304 m2 exactly.
	if v, _ := k.get("13", building.FloorArea); math.Abs(v.Number-929.0304) > 1e-9 {
		t.Errorf("10.000 sq ft: %v", v)
	}
	if _, ok := k.get("12", building.MeteredHeat); ok {
		t.Error("k.A. is a value")
	}
}

func TestAmbiguousNumbersFollowTheirColumn(t *testing.T) {
	for _, tc := range []struct {
		name, csv string
		area, u   float64
		noted     bool
	}{
		{"NoEvidence", "id,floor area (m2),wall u-value,x\n1,1.234,1.234,a\n", 1234, 1.234, true},
		{"OwnColumn", "id;floor area (m2);wall u-value\n1;1.234;0.234\n2;2.345,5;1.234\n", 1234, 0.234, false},
		{"OwnColumnOfPoints", "id,floor area (m2),wall u-value\n1,\"1,234\",0.2\n2,120.5,0.3\n", 1234, 0.2, false},
		{"AnotherColumn", "id\tfloor area (m2)\twindow area\n1\t1.234\t12,5\n", 1234, 0, true},
		{"Separator", "id;floor area (m2);wall u-value\n1;1.234;1.234\n", 1234, 1.234, true},
	} {
		t.Run(tc.name, func(t *testing.T) {
			t.Parallel()
			r, k := load(t, csvFile(t, tc.csv), Options{})
			if v, _ := k.get("1", building.FloorArea); v.Number != tc.area {
				t.Errorf("floor area %v, want %v", v.Number, tc.area)
			}
			if v, _ := k.get("1", building.WallU); v.Number != tc.u {
				t.Errorf("U-value %v, want %v", v.Number, tc.u)
			}
			if got := strings.Contains(checks(r, finding.Note), "ambiguous-number"); got != tc.noted {
				t.Errorf("noted %v, want %v: %v", got, tc.noted, r.Findings)
			}
		})
	}
}

func TestSurveyDateMakesRowsSurveyed(t *testing.T) {
	r, k := load(t, csvFile(t, "id,survey date,floor area (m2),n50,metered heat (kWh)\n1,2026-05-04,100,5,9000\n2,,100,5,9000\n"), Options{Kind: building.Certified})
	if len(k.records) != 2 {
		t.Fatalf("findings %v", r.Findings)
	}
	if k.records[0].SurveyDate != "2026-05-04" || k.records[1].SurveyDate != "" {
		t.Errorf("dates %q and %q", k.records[0].SurveyDate, k.records[1].SurveyDate)
	}
	for id, want := range map[string]building.Kind{"1": building.Surveyed, "2": building.Certified} {
		if v, _ := k.get(id, building.N50); v.Kind != want {
			t.Errorf("building %s: n50 is %s, want %s", id, v.Kind, want)
		}
		if v, _ := k.get(id, building.MeteredHeat); v.Kind != building.Metered {
			t.Errorf("building %s: the meter is %s", id, v.Kind)
		}
	}
}

func TestGasBeforeSteam(t *testing.T) {
	_, k := load(t, csvFile(t, "ID,Data Year,Floor area (sq ft),District Steam Use (kBtu),Natural Gas Use (kBtu)\n1,2016,10000,500000,300000\n2,2016,10000,500000,\n"), Options{})
	for id, want := range map[string]struct {
		kbtu    float64
		carrier string
	}{"1": {300000, "gas"}, "2": {500000, "district heat"}} {
		v, _ := k.get(id, building.MeteredHeat)
		if got := v.Number / 0.2930710702; got < want.kbtu*(1-1e-9) || got > want.kbtu*(1+1e-9) {
			t.Errorf("building %s: %v kBtu, want %v", id, got, want.kbtu)
		}
		if v, _ := k.get(id, building.CarrierField); v.Text != want.carrier {
			t.Errorf("building %s: carrier %q, want %q", id, v.Text, want.carrier)
		}
		if v, _ := k.get(id, building.MeteredYear); v.Number != 2016 {
			t.Errorf("building %s: metered in %v", id, v.Number)
		}
	}
	if k.records[0].SurveyDate != "2016-12-31" {
		t.Errorf("dated %q", k.records[0].SurveyDate)
	}
}

func TestMappingFile(t *testing.T) {
	m, err := header.ParseMapping(strings.NewReader("use = constant:\"Schule\"\n[register.csv]\nid = Kennzeichen\nfloor_area [ft2] = B\n"))
	if err != nil {
		t.Fatal(err)
	}
	m.Name = "columns.txt"
	r, k := load(t, csvFile(t, "Kennzeichen,X,year built\nS1,1000,1950\n"), Options{Mapping: m})
	if len(k.records) != 1 {
		t.Fatalf("findings %v", r.Findings)
	}
	if v, _ := k.get("S1", building.UseField); v.Text != "school" || k.sheets[0].Columns[building.UseField] != "constant, line 1 of columns.txt" {
		t.Errorf("use %q from %q", v.Text, k.sheets[0].Columns[building.UseField])
	}
	if v, _ := k.get("S1", building.FloorArea); v.Number != 92.90304 {
		t.Errorf("floor area %v", v.Number)
	}
}

// odd builds a workbook as a department might send it.
func odd(t *testing.T) string {
	t.Helper()
	f := excelize.NewFile()
	set := func(sheet, ref string, v any) {
		t.Helper()
		if err := f.SetCellValue(sheet, ref, v); err != nil {
			t.Fatal(err)
		}
	}
	must := func(err error) {
		t.Helper()
		if err != nil {
			t.Fatal(err)
		}
	}
	must(f.SetSheetName("Sheet1", "Buildings"))
	set("Buildings", "A1", "Register of municipal buildings")
	must(f.MergeCell("Buildings", "A1", "G1"))
	for ref, v := range map[string]any{
		"A3": "Building no", "B3": "Use", "C3": "Floor area", "D3": "Wall", "F3": "Ventilation", "G3": "Surveyed on",
		"D4": "area", "E4": "U-value",
		"C5": "m²", "D5": "m²", "E5": "W/m²K",
		"A6": 101, "B6": "school", "C6": 1200.5, "D6": 800, "E6": 1.4, "F6": "natural",
		"A7": 102.0, "C7": "1 350", "D7": 900, "E7": "1,1",
		"A8": "103", "B8": "office", "C8": 700, "F8": "AHU",
		"A9": "Total", "C9": 3250.5,
	} {
		set("Buildings", ref, v)
	}
	for _, r := range [][2]string{{"A3", "A4"}, {"B3", "B4"}, {"C3", "C4"}, {"F3", "F4"}, {"G3", "G4"}, {"D3", "E3"}, {"B6", "B7"}} {
		must(f.MergeCell("Buildings", r[0], r[1]))
	}
	day, err := f.NewStyle(&excelize.Style{NumFmt: 14})
	must(err)
	set("Buildings", "G8", 46146) // 4 May 2026: 46023 is 1 January, and 123 days follow
	must(f.SetCellStyle("Buildings", "G8", "G8", day))
	must(f.SetCellFormula("Buildings", "H8", "C8*2"))
	_, err = f.NewSheet("Hidden windows")
	must(err)
	for ref, v := range map[string]any{"A1": "Building no", "B1": "Windows renewed", "A2": 101, "B2": 2012} {
		set("Hidden windows", ref, v)
	}
	must(f.SetSheetVisible("Hidden windows", false))
	_, err = f.NewSheet("Read me")
	must(err)
	set("Read me", "A1", "Please fill in.")
	p := filepath.Join(t.TempDir(), "odd.xlsx")
	must(f.SaveAs(p))
	return p
}

func TestOddWorkbook(t *testing.T) {
	r, k := load(t, odd(t), Options{})
	if got := checks(r, finding.Error) + checks(r, finding.Warning); got != "" {
		t.Fatalf("findings %v", r.Findings)
	}
	var ids []string
	for _, x := range k.records {
		ids = append(ids, x.Building)
	}
	if d := cmp.Diff([]string{"101", "102", "103", "101"}, ids); d != "" {
		t.Fatal(d)
	}
	for _, tc := range []struct {
		id string
		f  building.Field
		n  float64
		s  string
	}{
		{"101", building.FloorArea, 1200.5, ""}, {"101", building.WallArea, 800, ""}, {"101", building.WallU, 1.4, ""},
		{"102", building.FloorArea, 1350, ""}, {"102", building.WallU, 1.1, ""}, {"102", building.UseField, 0, "school"},
		{"103", building.VentilationField, 0, "balanced"}, {"101", building.YearWindows, 2012, ""},
	} {
		if v, ok := k.get(tc.id, tc.f); !ok || v.Number != tc.n || v.Text != tc.s {
			t.Errorf("%s %s: %v %q, want %v %q", tc.id, tc.f, v.Number, v.Text, tc.n, tc.s)
		}
	}
	if got := k.records[2]; got.SurveyDate != "2026-05-04" || got.Values[0].Kind != building.Surveyed {
		t.Errorf("103 is dated %q, %s", got.SurveyDate, got.Values[0].Kind)
	}
	if !r.Sheets[1].Hidden || r.Sheets[2].Skipped == "" || !strings.Contains(checks(r, finding.Note), "hidden-sheet@0") {
		t.Errorf("sheets %+v", r.Sheets)
	}
	if r.Sheets[0].HeaderRow != 4 || r.Sheets[0].DataFrom != 6 {
		t.Errorf("header in row %d, data from %d", r.Sheets[0].HeaderRow, r.Sheets[0].DataFrom)
	}
}

func TestRegisters(t *testing.T) {
	for _, tc := range []struct {
		file            string
		rows            int // counted in the files themselves
		id              string
		f               building.Field
		want, tolerance float64
	}{
		// First rows of the files: 319,900 ft2 and 1180 ft2, by 0.09290304 m2/ft2.
		{"city-a-energy-benchmarking.csv", 7278, "157767", building.FloorArea, 29719.682496, 1e-6},
		{"county-house-sales.csv", 21597, "7129300520", building.FloorArea, 109.6255872, 1e-6},
		{"county-house-sales.csv", 21597, "6414100192", building.YearWindows, 1991, 0},
	} {
		path := filepath.Join(shared, "registers", tc.file)
		if _, err := os.Stat(path); err != nil {
			t.Skip("no folder " + shared)
		}
		r, k := load(t, path, Options{})
		if r.Rows != tc.rows || r.Used != tc.rows || len(k.records) != tc.rows {
			t.Errorf("%s: %d rows, %d used, %d records, want %d", tc.file, r.Rows, r.Used, len(k.records), tc.rows)
		}
		if v, ok := k.get(tc.id, tc.f); !ok || v.Number < tc.want-tc.tolerance || v.Number > tc.want+tc.tolerance {
			t.Errorf("%s: %s of %s is %v, want %v", tc.file, tc.f, tc.id, v.Number, tc.want)
		}
		if len(r.Findings) > 500 {
			t.Errorf("%s: %d findings, too many to read", tc.file, len(r.Findings))
		}
	}
}

func TestEveryWorkbookGivesAReport(t *testing.T) {
	paths, _ := filepath.Glob(filepath.Join(shared, "workbooks", "*", "*"))
	if len(paths) == 0 {
		t.Skip("no folder " + shared)
	}
	for _, p := range paths {
		r, err := Inspect(context.Background(), p, Options{Today: "2026-12-01"})
		if err != nil {
			t.Errorf("%s: %v", p, err)
			continue
		}
		if r.Used == 0 && len(r.Findings) == 0 {
			t.Errorf("%s: nothing read and nothing said", p)
		}
		if _, err := json.Marshal(r); err != nil {
			t.Errorf("%s: %v", p, err)
		}
		if name := filepath.Base(p); strings.HasPrefix(name, "encrypt") && checks(r, finding.Error) != "password@0" {
			t.Errorf("%s: %v", name, r.Findings)
		}
	}
}

func TestSinkAndContextEndTheRun(t *testing.T) {
	p := csvFile(t, "id,floor area (m2)\n1,100\n2,200\n")
	stop := errors.New("disk full")
	if _, err := ReadFile(context.Background(), p, Options{}, &keeper{stop: stop}); !errors.Is(err, stop) {
		t.Errorf("error %v", err)
	}
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	if _, err := ReadFile(ctx, p, Options{}, &keeper{}); !errors.Is(err, context.Canceled) {
		t.Errorf("error %v", err)
	}
	r, err := Inspect(context.Background(), filepath.Join(t.TempDir(), "none.csv"), Options{})
	if err != nil || checks(r, finding.Error) != "unreadable@0" {
		t.Errorf("missing file: %v, %v", r, err)
	}
}

func TestExpand(t *testing.T) {
	dir := t.TempDir()
	for _, n := range []string{"b.xlsx", "a.csv", "a-to-fix.csv", ".hidden.csv", "~$b.xlsx", "notes.pdf", "c.TXT"} {
		if err := os.WriteFile(filepath.Join(dir, n), nil, 0o600); err != nil {
			t.Fatal(err)
		}
	}
	in := func(names ...string) (out []string) {
		for _, n := range names {
			out = append(out, filepath.Join(dir, n))
		}
		return out
	}
	for _, tc := range []struct{ give, want []string }{
		{[]string{dir}, in("a.csv", "b.xlsx", "c.TXT")},
		{in("*.csv"), in("a.csv")},
		{in("a-to-fix.csv", "a.csv", "a.csv"), in("a-to-fix.csv", "a.csv")},
	} {
		got, _, err := Expand(tc.give)
		if err != nil {
			t.Fatal(err)
		}
		if d := cmp.Diff(tc.want, got); d != "" {
			t.Error(d)
		}
	}
	for _, bad := range [][]string{in("none.csv"), in("*.ods"), {t.TempDir()}} {
		if _, _, err := Expand(bad); err == nil {
			t.Errorf("%v is no error", bad)
		}
	}
}

func FuzzInspect(f *testing.F) {
	f.Add([]byte("id;floor area;year built\n1;1.234,5;1960-69\n"))
	f.Add([]byte("id,n50,use\n1,,\n1,x,school\n"))
	f.Fuzz(func(t *testing.T, data []byte) {
		p := filepath.Join(t.TempDir(), "a.csv")
		if err := os.WriteFile(p, data, 0o600); err != nil {
			t.Fatal(err)
		}
		r, err := Inspect(context.Background(), p, Options{Today: "2026-12-01"})
		if err != nil {
			t.Fatal(err)
		}
		if r.Used+r.SetAside != r.Rows {
			t.Errorf("%d used and %d set aside of %d rows", r.Used, r.SetAside, r.Rows)
		}
	})
}
