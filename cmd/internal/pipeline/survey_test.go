package pipeline

import (
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"

	"kelvinrow/estimate/building"
	"kelvinrow/estimate/result"
	"kelvinrow/ingest"
	"kelvinrow/ingest/finding"
	"kelvinrow/rank"
)

// saves makes a building with one measure.
func saves(id string, saving, cost, defaults float64) result.Building {
	b := result.Building{ID: id, Carrier: "gas", Measures: []result.Measure{{Applies: saving > 0, SavingKWh: saving, Cost: cost, CarrierAfter: "gas"}}}
	b.InputShare[building.Default], b.InputShare[building.Surveyed] = defaults, 1-defaults
	return b
}

// Twelve buildings, the first saving most, each for 10. By hand: the best quarter
// are 3, so that with 2 to choose the list from place 2 to 5 is near its cut (half
// the rank of the cut is 1, and no less than 2 to either side).
func TestNearTheCut(t *testing.T) {
	t.Parallel()
	var buildings []result.Building
	for i := range 12 {
		buildings = append(buildings, saves(fmt.Sprintf("b%02d", i+1), float64(1200-100*i), 10, 0.5))
	}
	run := &result.Run{Measures: []string{"m"}}
	choose := func(budget float64, count int) string {
		return strings.Join(nearTheCut(run, buildings, rank.Energy, budget, count), " ")
	}
	if got := choose(0, 2); got != "b02 b03" {
		t.Errorf("best quarter: %s", got)
	}
	if got := choose(85, 2); got != "b05 b06" { // 8 are paid for, 4 to either side
		t.Errorf("for 85: %s", got)
	}
	buildings[4].InputShare[building.Default] = 1 // 800 against 1100 x 0.5
	if got := choose(0, 2); got != "b05 b02" {
		t.Errorf("by default throughout: %s", got)
	}
	for i := range buildings {
		buildings[i].InputShare[building.Default] = 0
	}
	if got := choose(0, 2); got != "" {
		t.Errorf("with nothing by default: %s", got)
	}
	for i := range buildings {
		buildings[i].InputShare[building.Default], buildings[i].Measures[0].SavingKWh = 0.5, 100
	}
	slices.Reverse(buildings)
	if got := choose(0, 3); got != "b01 b02 b03" {
		t.Errorf("of equals: %s", got)
	}
}

// fill opens a form, changes cells by building and column header, and saves it.
func (b *bench) fill(form, as string, cells map[[2]string]any) string {
	b.t.Helper()
	f, err := excelize.OpenFile(form)
	if err != nil {
		b.t.Fatal(err)
	}
	defer f.Close()
	rows, err := f.GetRows(ingest.FormSheet)
	if err != nil {
		b.t.Fatal(err)
	}
	left := len(cells)
	var heads []string
	for r, row := range rows {
		if len(row) > 0 && row[0] == "Building id" {
			heads = row
			continue
		}
		if heads == nil || len(row) == 0 {
			continue
		}
		for c, h := range heads {
			v, ok := cells[[2]string{row[0], h}]
			if !ok {
				continue
			}
			left--
			at, err := excelize.CoordinatesToCellName(c+1, r+1)
			if err == nil {
				err = f.SetCellValue(ingest.FormSheet, at, v)
			}
			if err != nil {
				b.t.Fatal(err)
			}
		}
	}
	if left != 0 {
		b.t.Fatalf("%d cells are not on the form", left)
	}
	path := filepath.Join(b.dir, as)
	if err := f.SaveAs(path); err != nil {
		b.t.Fatal(err)
	}
	return path
}

func (b *bench) survey(opt SurveyOptions) *SurveyOutcome {
	b.t.Helper()
	opt.Out = filepath.Join(b.dir, "survey.xlsx")
	out, err := b.s.Survey(b.t.Context(), opt)
	if err != nil {
		b.t.Fatal(err)
	}
	return out
}

const stockForSurvey = "id;use;year built;floor area (m2);ventilation;district\nA;school;1970;900;natural;North\nB;school;1975;700;;north\nC;office;1980;500;natural;South\n"

func TestSurveyComesBackIntoTheStore(t *testing.T) {
	t.Parallel()
	b := newBench(t)
	b.files(b.write("r.csv", stockForSurvey))
	out := b.survey(SurveyOptions{IDs: []string{"B", "A"}})
	if !slices.Equal(out.Buildings, []string{"B", "A"}) || out.Known != 5 || out.Choice != "The 2 buildings named one by one." {
		t.Errorf("%+v", out)
	}
	if o := b.files(out.Out); o.Used != 0 || !o.Nothing() {
		t.Errorf("the empty form brought %d rows", o.Used)
	}
	day, who := [2]string{"A", "Survey date"}, [2]string{"A", "Surveyor"}
	path := b.fill(out.Out, "back.xlsx", map[[2]string]any{day: "2026-05-06", who: "R. Brand",
		{"A", "Heated floor area (m²)"}: 950, {"A", "Airtightness n50 (1/h)"}: 5.5, {"B", "Remarks"}: "nobody in"})
	o := b.files(path)
	if o.Used != 1 || o.SetAside != 0 || len(o.ToFix) != 0 {
		t.Errorf("%d used, %d set aside, to fix %v: %v", o.Used, o.SetAside, o.ToFix, o.Findings)
	}
	one, records, err := b.s.Store.Building(t.Context(), "p", "A")
	if err != nil {
		t.Fatal(err)
	}
	for f, want := range map[building.Field]string{
		building.FloorArea: "950 surveyed 2026-05-06 back.xlsx", building.N50: "5.5 surveyed 2026-05-06 back.xlsx", building.YearBuilt: "1970 registered r.csv",
	} {
		k, ok := one.Get(f)
		if !ok {
			t.Errorf("%s is lost", f)
			continue
		}
		got := fmt.Sprintf("%g %s %s %s", k.Number, k.Kind, k.Date, k.Sheet.File)
		if k.Kind == building.Registered {
			got = fmt.Sprintf("%g %s %s", k.Number, k.Kind, k.Sheet.File) // dated by the file
		}
		if got != want {
			t.Errorf("%s: %s, want %s", f, got, want)
		}
	}
	if len(records) != 2 {
		t.Errorf("%d records of A", len(records))
	}
	// The same again changes nothing; a later version takes its place.
	if o := b.files(path); len(o.Already) != 1 || len(o.Reports) != 0 {
		t.Errorf("the same form again: %+v", o)
	}
	b.fill(out.Out, "back.xlsx", map[[2]string]any{day: "2026-05-06", who: "R. Brand", {"A", "Airtightness n50 (1/h)"}: 6})
	if o := b.files(path); len(said(o, finding.Replaced)) != 1 {
		t.Errorf("a later version: %v", o.Findings)
	}
	if n := b.get("A", building.N50).Number; n != 6 {
		t.Errorf("n50 %g after the later version", n)
	}
	if v := b.get("A", building.FloorArea); v.Number != 900 || v.Kind != building.Registered {
		t.Errorf("what the later version leaves as it was: %+v", v)
	}
	// A form of another name adds.
	second := b.fill(out.Out, "other.xlsx", map[[2]string]any{{"B", "Survey date"}: "2026-05-07", {"B", "Surveyor"}: "M. Ostrand", {"B", "Ventilation type"}: "extract fan"})
	b.files(second)
	if b.get("A", building.N50).Number != 6 || b.get("B", building.VentilationField).Text != "extract fan" {
		t.Error("two copies of one form do not both count")
	}
}

func TestSurveyIsNotMixedIntoAnotherPortfolio(t *testing.T) {
	t.Parallel()
	b := newBench(t)
	b.files(b.write("r.csv", stockForSurvey))
	out := b.survey(SurveyOptions{IDs: []string{"A"}})
	path := b.fill(out.Out, "back.xlsx", map[[2]string]any{{"A", "Survey date"}: "2026-05-06", {"A", "Surveyor"}: "R. Brand", {"A", "Storeys"}: 3})
	b.s.Portfolio = "q"
	if o := b.files(path); !o.Nothing() || len(said(o, "form-portfolio")) != 1 {
		t.Errorf("%+v", o)
	}
}

func TestSurveyChoices(t *testing.T) {
	t.Parallel()
	b := newBench(t)
	b.files(b.write("r.csv", stockForSurvey))
	if out := b.survey(SurveyOptions{Districts: []string{"NORTH"}}); !slices.Equal(out.Buildings, []string{"A", "B"}) {
		t.Errorf("district: %v", out.Buildings)
	}
	refused := func(opt SurveyOptions, want string) {
		t.Helper()
		opt.Out = filepath.Join(b.dir, "no.xlsx")
		if _, err := b.s.Survey(t.Context(), opt); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%+v: %v, want %q", opt, err, want)
		}
		if _, err := os.Stat(opt.Out); err == nil {
			t.Error("a form was left behind")
		}
	}
	refused(SurveyOptions{Districts: []string{"west"}}, "North, South, north")
	refused(SurveyOptions{IDs: []string{"a"}}, "did you mean")
	refused(SurveyOptions{Count: 5}, "has no run")
	ranked, err := b.s.Rank(t.Context(), RankOptions{Out: filepath.Join(b.dir, "ranked.xlsx"), Yardstick: rank.Energy}, nil)
	if err != nil {
		t.Fatal(err)
	}
	key := ranked.Run.Measures[0]
	m := rank.List(ranked.Buildings, 0, rank.Energy)
	out := b.survey(SurveyOptions{Measure: key, Top: 2})
	if len(m) < 2 || !slices.Equal(out.Buildings, []string{ranked.Buildings[m[0].Index].ID, ranked.Buildings[m[1].Index].ID}) || !strings.Contains(out.Choice, key) {
		t.Errorf("first of %s: %+v", key, out)
	}
	refused(SurveyOptions{Measure: "moat", Top: 2}, key)
	if out := b.survey(SurveyOptions{Count: 2}); len(out.Buildings) != 2 || !strings.Contains(out.Choice, "the best quarter") {
		t.Errorf("by itself: %+v", out)
	}
	if out := b.survey(SurveyOptions{Count: 2, Budget: 1e6}); !strings.Contains(out.Choice, "1000000") {
		t.Errorf("with a budget: %+v", out)
	}
}
