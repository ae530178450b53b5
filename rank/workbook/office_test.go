package workbook

import (
	"archive/zip"
	"bytes"
	"encoding/csv"
	"io"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"slices"
	"strconv"
	"strings"
	"testing"

	"kelvinrow/estimate/archetype"
)

// office is a LibreOffice with a profile of its own, so that tests can run beside
// each other and beside the user's.
type office struct{ dir string }

// needOffice fails where LibreOffice is absent: a test that silently leaves out
// the one outside judge of the workbook is worth nothing.
func needOffice(t *testing.T) *office {
	t.Helper()
	if _, err := exec.LookPath("soffice"); err != nil {
		if os.Getenv("KELVINROW_WITHOUT_OFFICE") == "1" {
			t.Skip("LibreOffice is not installed and KELVINROW_WITHOUT_OFFICE=1 is set")
		}
		t.Fatal("LibreOffice (soffice) is not installed; install it, or set KELVINROW_WITHOUT_OFFICE=1 to leave these tests out")
	}
	return &office{dir: t.TempDir()}
}

// convert converts a workbook and returns the files it becomes.
func (o *office) convert(t *testing.T, file []byte, to string) map[string][]byte {
	t.Helper()
	in, out := filepath.Join(o.dir, "book.xlsx"), filepath.Join(o.dir, "out")
	if err := os.RemoveAll(out); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(in, file, 0o600); err != nil {
		t.Fatal(err)
	}
	cmd := exec.CommandContext(t.Context(), "soffice", "-env:UserInstallation=file://"+filepath.Join(o.dir, "profile"),
		"--headless", "--norestore", "--convert-to", to, "--outdir", out, in)
	cmd.Env = append(os.Environ(), "HOME="+o.dir)
	if msg, err := cmd.CombinedOutput(); err != nil {
		t.Fatalf("soffice: %v\n%s", err, msg)
	}
	names, err := filepath.Glob(filepath.Join(out, "*"))
	if err != nil || len(names) == 0 {
		t.Fatalf("soffice made nothing of the workbook: %v", err)
	}
	files := map[string][]byte{}
	for _, n := range names {
		if files[filepath.Base(n)], err = os.ReadFile(n); err != nil {
			t.Fatal(err)
		}
	}
	return files
}

var (
	formulaNumber = regexp.MustCompile(`(<c r="[A-Z]+[0-9]+" s="[0-9]+")(?: t="str")?(><f>[^<]*</f>)<v>[^<]*</v>`)
	sheetPart     = regexp.MustCompile(`^xl/worksheets/sheet[0-9]+\.xml$`)
)

// edited returns a workbook with its sheets changed.
func edited(t *testing.T, file []byte, edit func(part string, content []byte) []byte) []byte {
	t.Helper()
	z, err := zip.NewReader(bytes.NewReader(file), int64(len(file)))
	if err != nil {
		t.Fatal(err)
	}
	var out bytes.Buffer
	w := zip.NewWriter(&out)
	for _, f := range z.File {
		r, err := f.Open()
		if err != nil {
			t.Fatal(err)
		}
		content, err := io.ReadAll(r)
		if err != nil {
			t.Fatal(err)
		}
		if sheetPart.MatchString(f.Name) {
			content = edit(f.Name, content)
		}
		p, err := w.Create(f.Name)
		if err != nil {
			t.Fatal(err)
		}
		if _, err := p.Write(content); err != nil {
			t.Fatal(err)
		}
	}
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	return out.Bytes()
}

// withoutCached drops the values that formulas carry, so that what LibreOffice
// shows is what LibreOffice calculated.
func withoutCached(_ string, content []byte) []byte {
	return formulaNumber.ReplaceAll(content, []byte("$1$2"))
}

// sameNumbers compares every formula cell of two workbooks. Both sides compute
// in float64, in the same order but for the present value factors, which Go gets
// by expm1 and the sheet by powers: 1e-9 of the value, or of a unit where the
// value is a small difference of large ones.
func sameNumbers(t *testing.T, want, got *opened) {
	t.Helper()
	compared, words := 0, 0
	for _, sheet := range want.sheets {
		for at, w := range want.cells[sheet] {
			if w.formula == "" {
				continue
			}
			g := got.cells[sheet][at]
			compared++
			if w.typ == "str" {
				words++
				if g.value != w.value {
					t.Errorf("%s!%s (%s): LibreOffice says %q, the workbook %q", sheet, at, w.formula, g.value, w.value)
				}
				continue
			}
			x, err := strconv.ParseFloat(w.value, 64)
			if err != nil {
				t.Fatalf("%s!%s: %v", sheet, at, err)
			}
			y, err := strconv.ParseFloat(g.value, 64)
			if err != nil || !(math.Abs(x-y) <= 1e-9*math.Max(math.Abs(x), 1000)) {
				t.Errorf("%s!%s (%s): LibreOffice says %q, the workbook %q", sheet, at, w.formula, g.value, w.value)
			}
		}
	}
	if compared < 1500 || words == 0 {
		t.Errorf("only %d formulas compared, %d of them with words", compared, words)
	}
}

func noErrorCells(t *testing.T, o *opened) {
	t.Helper()
	for sheet, cells := range o.cells {
		for at, c := range cells {
			if c.typ == "e" || strings.HasPrefix(c.value, "#") || strings.HasPrefix(c.value, "Err:") {
				t.Errorf("%s!%s shows %q for %q", sheet, at, c.value, c.formula)
			}
		}
	}
}

func TestOfficeCalculatesTheSame(t *testing.T) {
	t.Parallel()
	lo := needOffice(t)
	in := portfolio(t, 50)
	file := written(t, in)
	stripped := edited(t, file, withoutCached)
	for _, cells := range open(t, stripped).cells {
		for at, c := range cells {
			if c.formula != "" && c.value != "" {
				t.Fatalf("%s keeps its value %q: the comparison would prove nothing", at, c.value)
			}
		}
	}
	got := open(t, lo.convert(t, stripped, "xlsx")["book.xlsx"])
	noErrorCells(t, got)
	sameNumbers(t, open(t, file), got)
	id := got.cells["Buildings"]["A"+itoa(listFirst+1)]
	if id.formula != "" || id.value != "=1+1" {
		t.Errorf("the building called =1+1 has become %+v", id)
	}
}

// After a reader changed cells on the sheet Assumptions, the sheets show what a
// run with those assumptions shows.
func TestOfficeFollowsChangedCells(t *testing.T) {
	t.Parallel()
	lo := needOffice(t)
	in := portfolio(t, 50)
	file := written(t, in)
	o := open(t, file)

	changed := *in
	changed.Set = in.Set.Clone()
	changes := map[string]float64{
		"price_gas": 0.145, "price_electricity": 0.19, "rise_district_heat": 0.03, "discount_rate": 0.03,
		"cost_new_windows_unit": 410, "cost_demand_controlled_extract_fixed": 1234, "life_heat_generator": 12, "upkeep_draught_sealing": 0.02,
	}
	gas, _ := changed.Set.Carrier("gas")
	gas.PricePerKWh = changes["price_gas"]
	power, _ := changed.Set.Carrier("electricity")
	power.PricePerKWh = changes["price_electricity"]
	district, _ := changed.Set.Carrier("district heat")
	district.PriceRise = changes["rise_district_heat"] // equal to the rate: the other branch of the formula
	changed.Set.Economics.DiscountRate = changes["discount_rate"]
	terms := func(key string) *archetype.Measure {
		m, ok := changed.Set.Measure(key)
		if !ok {
			t.Fatalf("no measure %s", key)
		}
		return m
	}
	terms("new-windows").UnitCost = changes["cost_new_windows_unit"]
	terms("demand-controlled-extract").FixedCost = changes["cost_demand_controlled_extract_fixed"]
	terms("heat-generator").LifeYears = changes["life_heat_generator"]
	terms("draught-sealing").UpkeepShare = changes["upkeep_draught_sealing"]
	want := open(t, written(t, &changed))

	mended := edited(t, file, func(part string, content []byte) []byte {
		content = withoutCached(part, content)
		if part != o.part["Assumptions"] {
			return content
		}
		for name, v := range changes {
			_, cell := follow(o.names[name])
			at := regexp.MustCompile(`(<c r="` + cell + `" s="[0-9]+"><v>)[^<]*(</v>)`)
			if !at.Match(content) {
				t.Fatalf("%s is not a number at %s", name, cell)
			}
			content = at.ReplaceAll(content, []byte("${1}"+strconv.FormatFloat(v, 'g', -1, 64)+"$2"))
		}
		return content
	})
	got := open(t, lo.convert(t, mended, "xlsx")["book.xlsx"])
	noErrorCells(t, got)
	sameNumbers(t, want, got)

	// The comparison must have had something to see.
	moved := 0
	for _, sheet := range o.sheets {
		for at, c := range o.cells[sheet] {
			if c.formula != "" && c.value != want.cells[sheet][at].value {
				moved++
			}
		}
	}
	if moved < 500 {
		t.Errorf("only %d cells moved with the changed assumptions", moved)
	}
}

func TestOfficeExportsTextAsText(t *testing.T) {
	t.Parallel()
	lo := needOffice(t)
	in := portfolio(t, 12)
	// The last -1 writes every sheet.
	files := lo.convert(t, written(t, in), `csv:Text - txt - csv (StarCalc):44,34,76,1,,0,false,true,false,false,false,-1`)
	for _, b := range in.Buildings {
		seen := false
		for name, content := range files {
			if !strings.Contains(name, "Buildings") {
				continue
			}
			r := csv.NewReader(bytes.NewReader(content))
			r.FieldsPerRecord = -1
			all, err := r.ReadAll()
			if err != nil {
				t.Fatal(err)
			}
			seen = seen || slices.ContainsFunc(all, func(row []string) bool { return len(row) > 0 && row[0] == b.ID })
		}
		if !seen {
			t.Errorf("building %q is not in the exported text", b.ID)
		}
	}
}

func TestOfficePrints(t *testing.T) {
	t.Parallel()
	lo := needOffice(t)
	pdf := lo.convert(t, written(t, portfolio(t, 12)), "pdf")["book.pdf"]
	path := filepath.Join(lo.dir, "book.pdf")
	if err := os.WriteFile(path, pdf, 0o600); err != nil {
		t.Fatal(err)
	}
	if _, err := exec.LookPath("pdftotext"); err != nil {
		t.Skip("pdftotext is not installed (poppler-utils)")
	}
	text, err := exec.CommandContext(t.Context(), "pdftotext", "-layout", "-l", "6", path, "-").Output()
	if err != nil {
		t.Fatal(err)
	}
	for _, want := range []string{
		"Fjordby Homes: heat screening", "Where the heat goes", "Heat lost by path", "What each measure would save",
		"The buildings that matter most", "How firm the numbers are", "Cautions", "Contents", "Page 1 of",
	} {
		if !strings.Contains(string(text), want) {
			t.Errorf("the printed opening page does not say %q", want)
		}
	}
}
