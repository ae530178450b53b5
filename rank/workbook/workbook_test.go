package workbook

import (
	"bytes"
	"context"
	"encoding/xml"
	"errors"
	"fmt"
	"io"
	"math"
	"os"
	"regexp"
	"strconv"
	"strings"
	"testing"

	"kelvinrow/estimate/result"
	"kelvinrow/ingest/finding"
	"kelvinrow/rank"
)

func TestSameInputSameBytes(t *testing.T) {
	t.Parallel()
	in := portfolio(t, 40)
	first := written(t, in)
	for range 5 {
		if !bytes.Equal(first, written(t, in)) {
			t.Fatal("the same input gave different bytes")
		}
	}
}

func TestInputIsOnlyRead(t *testing.T) {
	t.Parallel()
	in := portfolio(t, 12)
	before := fmt.Sprintf("%+v %+v %+v", in.Run, in.Buildings, in.Findings)
	written(t, in)
	if after := fmt.Sprintf("%+v %+v %+v", in.Run, in.Buildings, in.Findings); after != before {
		t.Error("writing changed the input")
	}
}

func TestPartsAreWellFormed(t *testing.T) {
	t.Parallel()
	o := open(t, written(t, portfolio(t, 40)))
	for name, content := range o.parts {
		d := xml.NewDecoder(bytes.NewReader(content))
		for {
			if _, err := d.Token(); errors.Is(err, io.EOF) {
				break
			} else if err != nil {
				t.Fatalf("%s: %v", name, err)
			}
		}
	}
	if len(o.sheets) < 20 {
		t.Errorf("only %d sheets", len(o.sheets))
	}
	seen := map[string]bool{}
	for _, s := range o.sheets {
		if utf16Len(s) > maxSheetName || seen[strings.ToLower(s)] {
			t.Errorf("sheet name %q is too long or used twice", s)
		}
		seen[strings.ToLower(s)] = true
	}
}

// What begins with = + - @ must be text, and come out as it went in but for
// control characters.
func TestTextStaysText(t *testing.T) {
	t.Parallel()
	in := portfolio(t, 40)
	o := open(t, written(t, in))
	id, name := o.column(t, "Buildings", "Building"), o.column(t, "Buildings", "Name")
	for i := range in.Buildings {
		b := &in.Buildings[i]
		cell := o.cells["Buildings"][id+itoa(listFirst+i)]
		if cell.formula != "" || cell.typ != "inlineStr" || cell.value != b.ID {
			t.Errorf("building %q stands as %+v", b.ID, cell)
		}
		want := strings.ReplaceAll(strings.ReplaceAll(b.Name, "\x07", ""), "\t", " ")
		if cell := o.cells["Buildings"][name+itoa(listFirst+i)]; cell.formula != "" || cell.value != want {
			t.Errorf("name %q stands as %+v", b.Name, cell)
		}
	}
	said := o.cells["Data issues"][o.column(t, "Data issues", "What the cell said")+itoa(listFirst+1)]
	if said.formula != "" || said.value != "=1+1" {
		t.Errorf("what a cell said stands as %+v", said)
	}
	for sheet, cells := range o.cells {
		for at, c := range cells {
			if c.typ == "inlineStr" && c.formula != "" {
				t.Errorf("%s!%s is text and formula", sheet, at)
			}
		}
	}
}

var nameInFormula = regexp.MustCompile(`[A-Za-z_][A-Za-z0-9_]*`)

// Every name that a formula uses is defined and leads to a cell with a number.
func TestNamesResolve(t *testing.T) {
	t.Parallel()
	o := open(t, written(t, portfolio(t, 40)))
	cellLike := regexp.MustCompile(`^[A-Z]{1,3}[0-9]+$`)
	used := 0
	for sheet, cells := range o.cells {
		for at, c := range cells {
			formula := regexp.MustCompile(`"[^"]*"|'[^']*'`).ReplaceAllString(c.formula, "")
			for _, n := range nameInFormula.FindAllString(formula, -1) {
				if n == "IF" || cellLike.MatchString(n) {
					continue
				}
				used++
				s, cell := follow(o.names[n])
				if v, err := strconv.ParseFloat(o.cells[s][cell].value, 64); err != nil || math.IsNaN(v) {
					t.Fatalf("%s!%s uses %s, which leads to %q: %v", sheet, at, n, o.names[n], err)
				}
			}
		}
	}
	if used < 1000 {
		t.Errorf("only %d uses of names: formulas are missing", used)
	}
	for _, n := range []string{
		"price_gas", "price_district_heat", "rise_electricity", "discount_rate",
		"cost_outside_wall_insulation_unit", "cost_outside_wall_insulation_fixed", "life_new_windows", "upkeep_heat_generator",
	} {
		if o.names[n] == "" {
			t.Errorf("no cell is called %s", n)
		}
	}
}

// The link of each row leads to the row of the same building.
func TestLinksLeadToTheBuilding(t *testing.T) {
	t.Parallel()
	in := portfolio(t, 40)
	o := open(t, written(t, in))
	id := o.column(t, "Buildings", "Building")
	measureSheets := 0
	for _, sheet := range o.sheets {
		if o.cells[sheet][cellName(1, listHead)].value != "Rank" {
			continue
		}
		measureSheets++
		own := o.column(t, sheet, "Building")
		for row := listFirst; o.cells[sheet][own+itoa(row)].value != ""; row++ {
			to, cell := follow(o.links[sheet][own+itoa(row)])
			if to != "Buildings" || o.cells[to][id+strings.TrimLeft(cell, "A")].value != o.cells[sheet][own+itoa(row)].value {
				t.Fatalf("%s row %d leads to %s %s", sheet, row, to, cell)
			}
		}
	}
	if measureSheets != len(in.Run.Measures) {
		t.Errorf("%d measure sheets for %d measures", measureSheets, len(in.Run.Measures))
	}
	best := o.column(t, "Buildings", "Measure that does most")
	for i := range in.Buildings {
		if rank.Best(&in.Buildings[i], in.Yardstick) < 0 {
			continue
		}
		to, cell := follow(o.links["Buildings"][best+itoa(listFirst+i)])
		if got := o.cells[to][o.column(t, to, "Building")+strings.TrimLeft(cell, "A")].value; got != in.Buildings[i].ID {
			t.Errorf("%s: the best measure leads to %s %s, which is %q", in.Buildings[i].ID, to, cell, got)
		}
	}
	for _, sheet := range o.sheets {
		for at, target := range o.links[sheet] {
			to, cell := follow(target)
			if o.cells[to] == nil || cell == "" {
				t.Errorf("%s!%s leads nowhere: %q", sheet, at, target)
			}
		}
	}
}

// Ranks and energy are those of the results; money is what the results say, up
// to the rounding of energy to a thousandth of a kWh.
func TestRowsSayWhatTheResultsSay(t *testing.T) {
	t.Parallel()
	in := portfolio(t, 60)
	o := open(t, written(t, in))
	companions, changed, never := 0, 0, 0
	for m, key := range in.Run.Measures {
		terms, _ := in.Set.Measure(key)
		sheet := ""
		for _, s := range o.sheets {
			if o.cells[s][cellName(1, listHead)].value == "Rank" && o.cells[s]["A1"].value == terms.Label {
				sheet = s
			}
		}
		number := func(head string, row int) float64 {
			v := o.cells[sheet][o.column(t, sheet, head)+itoa(row)].value
			if v == "never" {
				return math.Inf(1)
			}
			x, err := strconv.ParseFloat(v, 64)
			if err != nil {
				t.Fatalf("%s %s row %d: %v", sheet, head, row, err)
			}
			return x
		}
		list := rank.List(in.Buildings, m, in.Yardstick)
		for k, want := range list {
			row, b := listFirst+k, &in.Buildings[want.Index]
			r := &b.Measures[m]
			if got := o.cells[sheet][cellName(2, row)].value; got != b.ID {
				t.Fatalf("%s row %d is %q, want %q", sheet, row, got, b.ID)
			}
			for head, x := range map[string]float64{
				"Rank": float64(want.Rank), "Saving (kWh/a)": r.SavingKWh, "Cost (EUR)": r.Cost, "Money saved (EUR/a)": r.MoneyPerYear,
				"Net present value (EUR)": r.NPV, "Cost of saved energy (EUR/kWh)": r.CostOfSavedKWh, "Upkeep (EUR/a)": r.UpkeepPerYear,
				"Payback (years)": r.PaybackYears, "Default (share)": b.InputShare[0], "CO₂ saved (kg/a)": r.CO2Kg,
			} {
				// The sheet rounds energy to 0.0005 kWh and amounts to 5e-7 units. With
				// prices below 0.3, unit costs below 1,000 and present value factors below
				// 30 that is at most 4 * 0.0005 * 0.3 * 30 + 0.001 = 0.02. Payback and cost
				// per kWh divide by what may be small.
				tolerance := 0.02
				switch head {
				case "Rank":
					tolerance = 0
				case "Payback (years)":
					tolerance = math.Max(1e-6, 1e-3*x)
				case "Cost of saved energy (EUR/kWh)", "Default (share)":
					tolerance = 1e-3 * (1 + x)
				}
				got := number(head, row)
				if got != x && !(math.Abs(got-x) <= tolerance) {
					t.Errorf("%s, %s, %s: sheet %v, result %v", sheet, b.ID, head, got, x)
				}
			}
			if r.CompanionQuantity > 0 {
				companions++
			}
			if r.CarrierAfter != b.Carrier {
				changed++
			}
			if math.IsInf(r.PaybackYears, 1) {
				never++
			}
		}
		if o.cells[sheet][cellName(2, listFirst+len(list))].value != "" {
			t.Errorf("%s has more rows than the ranking", sheet)
		}
	}
	if companions == 0 || changed == 0 || never == 0 {
		t.Errorf("the portfolio does not try everything: %d bring ventilation, %d change carrier, %d never pay", companions, changed, never)
	}
}

func TestTopAndSplitSheets(t *testing.T) {
	t.Parallel()
	in := portfolio(t, 40)
	in.Top = 7
	o := open(t, written(t, in))
	if got := o.cells["New windows"][cellName(1, listFirst+6)].value; got != "7" {
		t.Errorf("row 7 of the top 7 says %q", got)
	}
	if got := o.cells["New windows"][cellName(1, listFirst+7)].value; got != "" {
		t.Errorf("row 8 of the top 7 says %q", got)
	}

	in.Top = 0
	var buf bytes.Buffer
	const rowsOfSheet = listHead + 15
	if err := write(t.Context(), &buf, in, rowsOfSheet); err != nil {
		t.Fatal(err)
	}
	o = open(t, buf.Bytes())
	for _, s := range []string{"Buildings", "Buildings 2", "Buildings 3"} {
		if o.cells[s] == nil {
			t.Fatalf("no sheet %q in %q", s, o.sheets)
		}
	}
	if got := o.cells["Buildings 3"][cellName(1, listFirst+9)].value; got != in.Buildings[39].ID {
		t.Errorf("the last building is %q", got)
	}
	if got := o.cells["New windows 2"][cellName(1, listFirst)].value; got != "16" {
		t.Errorf("the second sheet begins with rank %q", got)
	}
	led := map[string]bool{}
	for k, r := range rank.List(in.Buildings, 6, in.Yardstick)[15:30] {
		to, cell := follow(o.links["New windows 2"]["B"+itoa(listFirst+k)])
		if got := o.cells[to][cell].value; got != in.Buildings[r.Index].ID {
			t.Errorf("the link across sheets leads to %s %s: %q", to, cell, got)
		}
		led[to] = true
	}
	if len(led) != 3 {
		t.Errorf("the links lead to %d sheets of buildings, not to all 3", len(led))
	}
	for s, cells := range o.cells {
		for at := range cells {
			if n := atoi(strings.TrimLeft(at, "ABCDEFGHIJKLMNOPQRSTUVWXYZ")); n > rowsOfSheet && (strings.HasPrefix(s, "Buildings") || strings.HasPrefix(s, "New")) {
				t.Fatalf("%s has row %d", s, n)
			}
		}
	}
}

func TestOddInputs(t *testing.T) {
	t.Parallel()
	t.Run("NoBuildings", func(t *testing.T) {
		t.Parallel()
		in := portfolio(t, 1)
		in.Buildings, in.Findings = nil, nil
		in.Programme = &Programme{By: rank.NPV, Budgets: []float64{0}}
		o := open(t, written(t, in))
		noErrorsOrNaN(t, o)
	})
	t.Run("AllFailed", func(t *testing.T) {
		t.Parallel()
		in := portfolio(t, 3)
		for i := range in.Buildings {
			in.Buildings[i] = result.Building{ID: in.Buildings[i].ID, Failed: "no floor area and no volume"}
		}
		in.Programme = invest(in.Buildings)
		o := open(t, written(t, in))
		noErrorsOrNaN(t, o)
		if !strings.Contains(o.cells["Buildings"][o.column(t, "Buildings", "Cautions, or why there is no estimate")+"6"].value, "no floor area") {
			t.Error("the reason is not said")
		}
	})
	t.Run("UnknownCarrier", func(t *testing.T) {
		t.Parallel()
		in := portfolio(t, 3)
		in.Buildings[1].Carrier = "peat"
		if err := Write(t.Context(), io.Discard, in); err == nil || !strings.Contains(err.Error(), "peat") {
			t.Errorf("got %v", err)
		}
	})
	t.Run("UnknownMeasure", func(t *testing.T) {
		t.Parallel()
		in := portfolio(t, 1)
		in.Run.Measures = append(in.Run.Measures, "thatching")
		if err := Write(t.Context(), io.Discard, in); err == nil {
			t.Error("a measure without terms was written")
		}
	})
	t.Run("Cancelled", func(t *testing.T) {
		t.Parallel()
		ctx, cancel := context.WithCancel(t.Context())
		cancel()
		if err := Write(ctx, io.Discard, portfolio(t, 3)); !errors.Is(err, context.Canceled) {
			t.Errorf("got %v", err)
		}
	})
	t.Run("WriterFails", func(t *testing.T) {
		t.Parallel()
		full := errors.New("disk full")
		if err := Write(t.Context(), failing{full}, portfolio(t, 3)); !errors.Is(err, full) {
			t.Errorf("got %v", err)
		}
	})
	t.Run("UnknownSeverityAndField", func(t *testing.T) {
		t.Parallel()
		in := portfolio(t, 2)
		in.Findings = append(in.Findings, finding.Finding{Text: strings.Repeat("long ", 9000), Field: "no such field"})
		noErrorsOrNaN(t, open(t, written(t, in)))
	})
}

type failing struct{ err error }

func (f failing) Write([]byte) (int, error) { return 0, f.err }

func noErrorsOrNaN(t *testing.T, o *opened) {
	t.Helper()
	for sheet, cells := range o.cells {
		for at, c := range cells {
			if c.typ == "e" || strings.HasSuffix(c.value, "NaN") || strings.HasSuffix(c.value, "Inf") || c.typ == "" && c.formula != "" && c.value == "" {
				t.Errorf("%s!%s: %+v", sheet, at, c)
			}
			if utf16Len(c.value) > maxCellText {
				t.Errorf("%s!%s holds more than a cell can", sheet, at)
			}
		}
	}
}

func TestNoNaNLeaves(t *testing.T) {
	t.Parallel()
	noErrorsOrNaN(t, open(t, written(t, portfolio(t, 60))))
}

// Temporary files of large sheets do not stay behind.
func TestSpoolsAreRemoved(t *testing.T) {
	dir := t.TempDir()
	t.Setenv("TMPDIR", dir)
	var s spool
	big := bytes.Repeat([]byte("kelvin"), spoolLimit/3)
	if _, err := s.Write(big[:len(big)/2]); err != nil {
		t.Fatal(err)
	}
	if _, err := s.Write(big[len(big)/2:]); err != nil {
		t.Fatal(err)
	}
	if left, _ := os.ReadDir(dir); len(left) != 1 {
		t.Fatalf("%d temporary files, want 1", len(left))
	}
	var out bytes.Buffer
	if err := s.copyTo(&out); err != nil || !bytes.Equal(out.Bytes(), big) || s.size != int64(len(big)) {
		t.Errorf("what went in did not come out: %v", err)
	}
	s.remove()
	if left, _ := os.ReadDir(dir); len(left) != 0 {
		t.Errorf("%d temporary files stay behind", len(left))
	}
}

func BenchmarkWrite(b *testing.B) {
	for _, n := range []int{100, 1000} {
		b.Run(fmt.Sprintf("buildings=%d", n), func(b *testing.B) {
			in := portfolio(b, n)
			b.ResetTimer()
			for b.Loop() {
				if err := Write(b.Context(), io.Discard, in); err != nil {
					b.Fatal(err)
				}
			}
			b.ReportMetric(float64(n*b.N)/b.Elapsed().Seconds(), "buildings/s")
		})
	}
}
