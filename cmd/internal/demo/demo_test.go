package demo

import (
	"bytes"
	"encoding/csv"
	"fmt"
	"os"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"
	"golang.org/x/text/encoding/charmap"
	"golang.org/x/text/encoding/unicode"
)

func written(t *testing.T, opt Options) []string {
	t.Helper()
	paths, err := Write(t.TempDir(), opt)
	if err != nil {
		t.Fatal(err)
	}
	return paths
}

func read(t *testing.T, path string) []byte {
	t.Helper()
	b, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	return b
}

// file is one source as an independent reader sees it.
type file struct {
	book *excelize.File
	rows map[string][][]string // by sheet, "" for text
}

func open(t *testing.T, paths []string, part string) file {
	t.Helper()
	i := slices.IndexFunc(paths, func(p string) bool { return strings.Contains(filepath.Base(p), part) })
	if i < 0 {
		t.Fatalf("no file %q among %q", part, paths)
	}
	f := file{rows: map[string][][]string{}}
	if strings.HasSuffix(paths[i], ".xlsx") {
		book, err := excelize.OpenFile(paths[i])
		if err != nil {
			t.Fatal(err)
		}
		t.Cleanup(func() { book.Close() })
		f.book = book
		for _, s := range book.GetSheetList() {
			rows, err := book.GetRows(s)
			if err != nil {
				t.Fatal(err)
			}
			f.rows[s] = rows
		}
		return f
	}
	b := read(t, paths[i])
	decoder, comma := charmap.Windows1252.NewDecoder(), ';'
	if bytes.HasPrefix(b, []byte{0xff, 0xfe}) {
		decoder, comma = unicode.UTF16(unicode.LittleEndian, unicode.ExpectBOM).NewDecoder(), '\t'
	}
	r := csv.NewReader(decoder.Reader(bytes.NewReader(b)))
	r.Comma = comma
	rows, err := r.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	f.rows[""] = rows
	return f
}

// column returns the cells below a header.
func (f file) column(t *testing.T, sheet, head string) []string {
	t.Helper()
	for i, row := range f.rows[sheet] {
		c := slices.Index(row, head)
		if c < 0 {
			continue
		}
		var out []string
		for _, r := range f.rows[sheet][i+1:] {
			v := ""
			if c < len(r) {
				v = r[c]
			}
			out = append(out, v)
		}
		return out
	}
	t.Fatalf("sheet %q has no column %q", sheet, head)
	return nil
}

var idPattern = regexp.MustCompile(`^[A-H]-\d{4,}$`)

// ids collects the building ids of all files.
func ids(t *testing.T, paths []string) map[string]int {
	t.Helper()
	files := map[string]int{}
	for _, s := range []struct{ file, head string }{
		{"technik", "Objekt-Nr."}, {"ecoles", "Code bâtiment"}, {"register", "Asset ID"},
		{"energy", "Building"}, {"fonster", "Byggnads-ID"}, {"survey", "Building ref"},
	} {
		f := open(t, paths, s.file)
		seen := map[string]bool{}
		for sheet, rows := range f.rows {
			if !slices.ContainsFunc(rows, func(r []string) bool { return slices.Contains(r, s.head) }) {
				continue
			}
			for _, id := range f.column(t, sheet, s.head) {
				if id = strings.TrimSpace(id); idPattern.MatchString(id) {
					seen[id] = true
				}
			}
		}
		for id := range seen {
			files[id]++
		}
	}
	return files
}

func TestSameSeedSameBytes(t *testing.T) {
	t.Parallel()
	opt := Options{Buildings: 300, Seed: 7}
	a, b := written(t, opt), written(t, opt)
	other := written(t, Options{Buildings: 300, Seed: 8})
	for i := range a {
		if !bytes.Equal(read(t, a[i]), read(t, b[i])) {
			t.Errorf("%s differs between two writings", filepath.Base(a[i]))
		}
		if bytes.Equal(read(t, a[i]), read(t, other[i])) {
			t.Errorf("%s is the same for another seed", filepath.Base(a[i]))
		}
	}
}

func TestEveryBuildingIsInOneToThreeFiles(t *testing.T) {
	t.Parallel()
	const n = 2000
	files := ids(t, written(t, Options{Seed: 1}))
	// Rows without id are the only buildings that may be lost.
	if len(files) > n || len(files) < n-5 {
		t.Errorf("%d buildings in the files, want %d but for a few without id", len(files), n)
	}
	var by [4]int
	for id, k := range files {
		if k > maxFiles {
			t.Errorf("%s is in %d files", id, k)
			continue
		}
		by[k]++
	}
	for k := 1; k <= maxFiles; k++ {
		if by[k] < n/20 {
			t.Errorf("%d buildings in %d files", by[k], k)
		}
	}
	if files["A-0412"] == 0 {
		t.Error("the building that the help texts name is not there")
	}
}

func TestSmallPortfolios(t *testing.T) {
	t.Parallel()
	for _, n := range []int{1, 2, 17} {
		if got := len(ids(t, written(t, Options{Buildings: n, Seed: 3}))); got != n {
			t.Errorf("%d buildings of %d in the files", got, n)
		}
	}
	if _, err := Write(t.TempDir(), Options{Buildings: -1}); err == nil {
		t.Error("-1 buildings are written")
	}
	if _, err := Write(filepath.Join(t.TempDir(), "absent"), Options{Buildings: 1}); err == nil {
		t.Error("files are written into a folder that is not there")
	}
}

// The dirt that the reading of spreadsheets has to cope with is there.
func TestDirt(t *testing.T) {
	t.Parallel()
	paths := written(t, Options{Seed: 1})
	register, technical, bureau := open(t, paths, "register"), open(t, paths, "technik"), open(t, paths, "ecoles")
	energy, windows, survey := open(t, paths, "energy"), open(t, paths, "fonster"), open(t, paths, "survey")
	var german []string
	for _, q := range quarters {
		german = append(german, technical.column(t, "Bezirk "+quartersGerman[q], "beheizte Wohn-/Nutzfläche (m²)")...)
	}
	area := register.column(t, "Register", "Heated floor area")
	for _, c := range []struct {
		what     string
		cells    []string
		pattern  string
		from, to int
	}{
		{"no id", register.column(t, "Register", "Asset ID"), `^$`, 2, 10}, // and blank rows
		{"total row", register.column(t, "Register", "Asset ID"), `^Total$`, 1, 1},
		{"negative area", area, `^-\d`, 2, 8},
		{"text for area", area, `^see plan$`, 2, 8},
		{"about", area, `^approx\. \d+$`, 5, 20},
		{"unit in cell", area, `^\d+ m²$`, 8, 25},
		{"not available", area, `^n/a$`, 4, 15},
		{"hole", area, `^$`, 10, 80},
		{"open span", register.column(t, "Register", "Year built"), `^before 1900$`, 20, 200},
		{"about a year", register.column(t, "Register", "Year built"), `^c\. 1\d\d\d$`, 10, 200},
		{"decade", register.column(t, "Register", "Year built"), `^\d{3}0-\d9$`, 30, 150},
		{"impossible year", register.column(t, "Register", "Year built"), `^(2107|19667)$`, 2, 8},
		{"unknown word", register.column(t, "Register", "Ventilation type"), `^see M&E file$`, 1, 6},
		{"square feet", register.column(t, "Commercial", "Heated floor area"), `^\d{3,}$`, 10, 200},
		{"German decimals", german, `^(\d{1,3}\.)?\d{1,3},\d\d$`, 400, 900},
		{"German about", german, `^ca\. `, 2, 15},
		{"French decimals", bureau.column(t, "", "Surface chauffée (m²)"), `^\d+,\d$`, 60, 200},
		{"French about", bureau.column(t, "", "Surface chauffée (m²)"), `^env\. `, 1, 4},
		{"century", bureau.column(t, "", "Année de construction"), `^XIXe siècle$`, 1, 30},
		{"blanks after id", energy.column(t, "Heat 2024", "Building"), `^[A-H]-\d+  $`, 20, 150},
		{"broken meter", energy.column(t, "Heat 2024", "Heat consumption (MWh)"), `^meter broken$`, 3, 20},
		{"blank before id", windows.column(t, "", "Byggnads-ID"), `^ [A-H]-`, 5, 40},
		{"U-value ten times", windows.column(t, "", "U-värde fönster (W/m²K)"), `^\d+,\d+$`, 150, 600},
		{"failed test", survey.column(t, "Survey 2025", "Blower door n50 (1/h)"), `^test failed$`, 1, 3},
		{"date", survey.column(t, "Survey 2025", "Survey date"), `^2025-0[3-6]-\d\d$`, 60, 200},
	} {
		re, n := regexp.MustCompile(c.pattern), 0
		for _, v := range c.cells {
			if re.MatchString(v) {
				n++
			}
		}
		if n < c.from || n > c.to {
			t.Errorf("%s: %d cells match %s, want %d to %d", c.what, n, c.pattern, c.from, c.to)
		}
	}
	surveyed := len(survey.column(t, "Survey 2025", "Building ref"))
	if surveyed < 70 || surveyed > 130 {
		t.Errorf("%d buildings surveyed, want about 5 %% of 2000", surveyed)
	}
}

func TestDoublesInRegister(t *testing.T) {
	t.Parallel()
	f := open(t, written(t, Options{Seed: 1}), "register")
	rows := map[string][]string{}
	same, changed := 0, 0
	for _, row := range f.rows["Register"] {
		if len(row) == 0 || !idPattern.MatchString(row[0]) {
			continue
		}
		text := fmt.Sprint(row)
		switch old := rows[row[0]]; {
		case old == nil:
		case slices.Contains(old, text):
			same++
		default:
			changed++
		}
		rows[row[0]] = append(rows[row[0]], text)
	}
	if same == 0 || changed == 0 {
		t.Errorf("%d rows repeat another and %d contradict one, want some of both", same, changed)
	}
}

func TestFormulasHaveTheirValues(t *testing.T) {
	t.Parallel()
	f := open(t, written(t, Options{Seed: 1}), "register")
	found := 0
	for r := 6; r < 400; r++ {
		cell := fmt.Sprintf("M%d", r)
		text, err := f.book.GetCellFormula("Register", cell)
		if err != nil {
			t.Fatal(err)
		}
		if text == "" {
			continue
		}
		found++
		cached, err := f.book.GetCellValue("Register", cell, excelize.Options{RawCellValue: true})
		if err != nil {
			t.Fatal(err)
		}
		// excelize computes the formula itself: the cached value must agree to
		// the tenth that it is rounded to.
		computed, err := f.book.CalcCellValue("Register", cell, excelize.Options{RawCellValue: true})
		if err != nil {
			t.Fatalf("%s %s: %v", cell, text, err)
		}
		var a, b float64
		if _, err := fmt.Sscan(cached, &a); err != nil {
			t.Fatalf("%s is cached as %q", cell, cached)
		}
		if _, err := fmt.Sscan(computed, &b); err != nil {
			t.Fatalf("%s computes as %q", cell, computed)
		}
		if a < b-0.0501 || a > b+0.0501 {
			t.Errorf("%s: %s gives %v, cached is %v", cell, text, b, a)
		}
	}
	if found < 10 {
		t.Errorf("%d formulas in 400 rows", found)
	}
}

func TestSheetsThatAreNoData(t *testing.T) {
	t.Parallel()
	f := open(t, written(t, Options{Buildings: 50, Seed: 1}), "register")
	for sheet, want := range map[string]bool{"Register": true, "Commercial": true, "Notes": true, "Lists": false} {
		got, err := f.book.GetSheetVisible(sheet)
		if err != nil {
			t.Fatal(err)
		}
		if got != want {
			t.Errorf("sheet %s visible: %v, want %v", sheet, got, want)
		}
	}
	merged, err := f.book.GetMergeCells("Register")
	if err != nil {
		t.Fatal(err)
	}
	if len(merged) == 0 || merged[0].GetStartAxis() != "A1" {
		t.Errorf("the title is not merged: %v", merged)
	}
}

// The truth behind the files must be one that could stand: a reader's checks
// should find the dirt put in, not slips of the stock.
func TestStockIsConsistent(t *testing.T) {
	t.Parallel()
	for _, a := range newStock(Options{Buildings: 5000, Seed: 2}) {
		height := a.volumeM3() / a.floorAreaM2
		heat := a.heatKWh / a.floorAreaM2
		for _, c := range []struct {
			what      string
			v         float64
			low, high float64
		}{
			{"volume / floor area", height, 2.3, 11},
			{"gross / net volume", a.grossVolumeM3() / a.volumeM3(), 1.2, 1.35},
			{"windows / wall", a.windowM2 / a.wallM2, 0.01, 0.5},
			// No plan encloses more than a circle; hardly any is longer than 6 to 1.
			{"perimeter² / footprint", a.perimeterM * a.perimeterM / a.footprintM2, 12.57, 33},
			{"floor area / (footprint storeys)", a.floorAreaM2 / a.footprintM2 / float64(a.storeys), 0.8, 0.95},
			{"roof / footprint", a.roofM2 / a.footprintM2, 0.99, 1.32},
			{"wall U", a.wallU, 0.1, 2.5},
			{"window U", a.windowU, 0.6, 7},
			{"n50", a.n50, 0.4, 20},
			{"heat per m2", heat, 4, 700},
			{"year of windows after building", float64(a.yearWindows - a.year), -3000, 170},
		} {
			if c.v < c.low || c.v > c.high {
				t.Errorf("%s (%s, %d): %s is %.3g, outside %g to %g", a.id, englishUse[a.use], a.year, c.what, c.v, c.low, c.high)
			}
		}
		if a.yearWindows != 0 && a.yearWindows <= a.year || a.let > a.dwellings || a.storeys < 1 {
			t.Errorf("%s: built %d, windows %d, %d of %d dwellings let, %d storeys", a.id, a.year, a.yearWindows, a.let, a.dwellings, a.storeys)
		}
	}
}

func TestBigHasEveryBuildingOnce(t *testing.T) {
	t.Parallel()
	path := filepath.Join(t.TempDir(), "big.xlsx")
	const n = 3000
	if err := Big(path, n, 1); err != nil {
		t.Fatal(err)
	}
	f, err := excelize.OpenFile(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rows, err := f.GetRows("Sheet1")
	if err != nil {
		t.Fatal(err)
	}
	if len(rows) != n+1 || len(rows[0]) != 25 {
		t.Errorf("%d rows of %d columns, want %d of 25", len(rows), len(rows[0]), n+1)
	}
	seen := map[string]bool{}
	for _, row := range rows[1:] {
		if !idPattern.MatchString(row[0]) || seen[row[0]] {
			t.Fatalf("id %q is wrong or double", row[0])
		}
		seen[row[0]] = true
	}
}

func BenchmarkWrite(b *testing.B) {
	for b.Loop() {
		if _, err := Write(b.TempDir(), Options{Seed: 1}); err != nil {
			b.Fatal(err)
		}
	}
}

func BenchmarkBig(b *testing.B) {
	path := filepath.Join(b.TempDir(), "big.xlsx")
	for b.Loop() {
		if err := Big(path, 10000, 1); err != nil {
			b.Fatal(err)
		}
	}
	b.ReportMetric(10000*float64(b.N)/b.Elapsed().Seconds(), "buildings/s")
}
