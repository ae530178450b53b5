package pipeline

import (
	"math/bits"
	"strings"
	"testing"

	"kelvinrow/estimate/result"
	"kelvinrow/rank"
)

// packaged estimates a part of the demo portfolio with its packages.
func packaged(t *testing.T, by rank.Yardstick) ([]string, []result.Building) {
	t.Helper()
	b := starterBasis(t)
	b.Worth = worth(by)
	stock := demoStock(t)[:300]
	return b.Keys(), estimatedBy(t, b, stock)
}

// A programme keeps to what was asked: budgets, lists, shares, capacities; and says
// how far it may be from the best.
func TestProgrammeKeepsToWhatWasAsked(t *testing.T) {
	t.Parallel()
	for _, by := range []rank.Yardstick{rank.Energy, rank.CO2, rank.NPV} {
		keys, results := packaged(t, by)
		district := ""
		var must string
		for i := range results {
			if results[i].Failed == "" && district == "" {
				district = results[i].District
			}
			// In most cases a building chosen by nobody: an expensive one.
			if len(results[i].Packages) > 3 && results[i].Packages[1].Cost < 5e4 {
				must = results[i].ID
			}
		}
		windows := uint64(0)
		for i, k := range keys {
			if k == "new-windows" {
				windows = 1 << i
			}
		}
		o := &ProgrammeOptions{
			Budgets: []float64{4e5, 3e5}, By: by, Must: []string{must}, Never: []string{results[0].ID},
			Shares: map[string]float64{district: 0.3}, Capacity: map[string]int{"new-windows": 1},
		}
		p, err := decide(t.Context(), o, keys, results, 2)
		if err != nil {
			t.Fatal(err)
		}
		var spent, fitted [2]float64
		seen := map[string]bool{}
		value, outside := 0.0, 0.0
		for _, c := range p.Chosen {
			id := results[c.Building].ID
			if seen[id] || id == results[0].ID {
				t.Errorf("%s: %s is done twice, or although it must not", by, id)
			}
			seen[id] = true
			spent[c.Year-1] += c.Package.Cost
			if c.Package.Set&windows != 0 {
				fitted[c.Year-1]++
			}
			if results[c.Building].District != district {
				outside += c.Package.Cost
			}
			value += worth(by)(&c.Package)
			if bits.OnesCount64(c.Package.Set) == 0 {
				t.Errorf("%s: nothing is done to %s", by, id)
			}
		}
		if !seen[must] {
			t.Errorf("%s: %s must be done and is not", by, must)
		}
		if spent[0] > 4e5 || spent[1] > 3e5 || fitted[0] > 1 || fitted[1] > 1 || outside > 0.7*7e5 {
			t.Errorf("%s: spends %v, windows in %v, outside %s %g", by, spent, fitted, district, outside)
		}
		if value > p.Bound*(1+1e-9) || p.Gap < 0 || p.Gap > 0.05 || len(p.Curve) < 10 {
			t.Errorf("%s: value %g, bound %g, gap %g, %d points of the curve", by, value, p.Bound, p.Gap, len(p.Curve))
		}
		t.Logf("%s: %d buildings, gap %.3g %%", by, len(p.Chosen), 100*p.Gap)
		o.Must, o.Never, o.Shares, o.Capacity = []string{"nobody"}, []string{"nowhere"}, map[string]float64{"Atlantis": 0.1}, map[string]int{"thatching": 1}
		if _, err := decide(t.Context(), o, keys, results, 2); err == nil || strings.Count(err.Error(), "\n") != 3 {
			t.Errorf("four wrong wishes: %v", err)
		}
	}
}
