package programme

import (
	"context"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"github.com/google/go-cmp/cmp"
)

func solved(t *testing.T, buildings []Building, opt Options) *Plan {
	t.Helper()
	plan, err := Solve(context.Background(), buildings, opt)
	if err != nil {
		t.Fatal(err)
	}
	hold(t, buildings, opt, plan)
	return plan
}

func TestSmallCasesByGoingThroughAll(t *testing.T) {
	t.Parallel()
	rnd := rand.New(rand.NewPCG(7, 8))
	feasible, exact, known := 0, 0, 0
	for n := range 3000 {
		years := 1 + n%2
		buildings, opt := small(rnd, 2+rnd.IntN(7-2*years), 3, years)
		best := brute(buildings, opt)
		plan, err := Solve(context.Background(), buildings, opt)
		if math.IsNaN(best) {
			if err == nil {
				t.Fatalf("case %d: there is no programme, but Solve found one: %+v", n, plan)
			}
			continue
		}
		if err != nil {
			t.Fatalf("case %d: there is a programme worth %g, but %v: %+v %+v", n, best, err, buildings, opt)
		}
		hold(t, buildings, opt, plan)
		// Values are to two decimals and their sums small: 1e-9 is rounding.
		if plan.Value > best+1e-9 || plan.Bound < best-1e-9 {
			t.Fatalf("case %d: value %g, bound %g, but the best is %g: %+v %+v", n, plan.Value, plan.Bound, best, buildings, opt)
		}
		feasible++
		if plan.Value >= best-1e-9 {
			exact++
		} else if plan.Optimal || plan.Gap > enough {
			t.Errorf("case %d: value %g, the best is %g, known optimal: %v, gap %g: %+v %+v", n, plan.Value, best, plan.Optimal, plan.Gap, buildings, opt)
		}
		if plan.Optimal {
			known++
		}
	}
	t.Logf("%d feasible, %d best, %d known to be", feasible, exact, known)
	if feasible < 2000 {
		t.Errorf("only %d cases are feasible", feasible)
	}
}

// limits are the kinds of limits there are, for n buildings that cost all.
func limits(all float64, n int) map[string]Options {
	return map[string]Options{
		"one year":    {Budgets: []float64{all / 10}},
		"small":       {Budgets: []float64{all / 300}},
		"three years": {Budgets: []float64{all / 40, all / 30, all / 60}},
		"carry over":  {Budgets: []float64{all / 60, all / 20, 0}, CarryOver: true},
		"shares":      {Budgets: []float64{all / 30, all / 30}, MinShare: map[string]float64{"North": 0.5, "Hill": 0.3}},
		"all shared":  {Budgets: []float64{all / 10}, MinShare: map[string]float64{"North": 0.1, "Hill": 0.3, "South": 0.4, "Harbour": 0.2}},
		"capacities": {Budgets: []float64{all / 20, all / 20}, Capacities: []Capacity{
			{Measures: 1, Buildings: 1 + n/80}, {Measures: 6, Buildings: 1 + n/20}, {Measures: ^uint64(0), Buildings: 3 + n/13}}},
		"everything": {Budgets: []float64{all / 20, all / 30, all / 20}, CarryOver: true,
			MinShare: map[string]float64{"Harbour": 0.4}, Capacities: []Capacity{{Measures: 3, Buildings: 1 + n/40}}},
	}
}

func names[V any](m map[string]V) []string {
	var out []string
	for k := range m {
		out = append(out, k)
	}
	slices.Sort(out)
	return out
}

// wishes puts some buildings on the lists.
func wishes(buildings []Building) {
	for i := range buildings {
		switch {
		case i%40 == 3:
			buildings[i].Must = true
			buildings[i].Packages = append(buildings[i].Packages, Package{Cost: 100, Value: 1})
		case i%40 == 17:
			buildings[i].Never = true
		}
	}
}

func TestLimitsAreHeld(t *testing.T) {
	t.Parallel()
	for seed := range uint64(3) {
		buildings := portfolio(seed, 400, 10)
		wishes(buildings)
		all := limits(cost(buildings), len(buildings))
		for _, name := range names(all) {
			plan := solved(t, buildings, all[name])
			if len(plan.Choices) == 0 {
				t.Errorf("%s: nothing is done", name)
			}
			// What is lost by not doing packages in parts is small beside hundreds of buildings.
			if plan.Gap > 0.02 {
				t.Errorf("%s: gap %g", name, plan.Gap)
			}
			t.Logf("%d %-12s %3d done, gap %.6f, optimal %v, marginal %.4g", seed, name, len(plan.Choices), plan.Gap, plan.Optimal, plan.MarginalValue)
		}
	}
}

func TestNeitherOrderNorWorkersMatter(t *testing.T) {
	t.Parallel()
	buildings := portfolio(5, 5000, 10)
	// Many ties.
	for i := 1; i < len(buildings); i += 2 {
		buildings[i].Packages = buildings[i-1].Packages
	}
	wishes(buildings)
	type done struct {
		ID            string
		Package, Year int
	}
	ids := func(buildings []Building, plan *Plan) (out []done) {
		for _, c := range plan.Choices {
			out = append(out, done{buildings[c.Building].ID, c.Package, c.Year})
		}
		return out
	}
	rnd := rand.New(rand.NewPCG(1, 2))
	all := limits(cost(buildings), len(buildings))
	for _, name := range names(all) {
		opt := all[name]
		opt.Workers = 1
		plan := solved(t, buildings, opt)
		other := slices.Clone(buildings)
		rnd.Shuffle(len(other), func(i, j int) { other[i], other[j] = other[j], other[i] })
		opt.Workers = 7
		again := solved(t, other, opt)
		if d := cmp.Diff(ids(buildings, plan), ids(other, again)); d != "" {
			t.Errorf("%s: choices (-want +got):\n%s", name, d)
		}
		plan.Choices, again.Choices = nil, nil
		if d := cmp.Diff(plan, again); d != "" {
			t.Errorf("%s: (-want +got):\n%s", name, d)
		}
	}
}

func TestTiesGoToTheFirstAndCheapest(t *testing.T) {
	t.Parallel()
	same := []Package{{Cost: 20, Value: 10}, {Cost: 10, Value: 10}, {Cost: 10, Value: 10}}
	buildings := []Building{{ID: "c", Packages: same}, {ID: "a", Packages: same}, {ID: "b", Packages: same}}
	plan := solved(t, buildings, Options{Budgets: []float64{10, 10}})
	if d := cmp.Diff([]Choice{{1, 1, 0}, {2, 1, 1}}, plan.Choices); d != "" {
		t.Errorf("(-want +got):\n%s", d)
	}
}

func TestCurveIsConcaveAndAbovePlans(t *testing.T) {
	t.Parallel()
	buildings := portfolio(3, 300, 12)
	curve, err := Curve(context.Background(), buildings, 0)
	if err != nil {
		t.Fatal(err)
	}
	for k := 1; k < len(curve); k++ {
		a, b := curve[k-1], curve[k]
		if b.Budget < a.Budget || b.Value < a.Value || b.Marginal > a.Marginal {
			t.Fatalf("corner %d: %+v after %+v", k, b, a)
		}
	}
	even, err := Curve(context.Background(), buildings, 40)
	if err != nil {
		t.Fatal(err)
	}
	if len(even) != 40 || even[0] != curve[0] || even[39] != curve[len(curve)-1] {
		t.Fatalf("%d points from %+v to %+v", len(even), even[0], even[len(even)-1])
	}
	was := 0.0
	for _, at := range even {
		plan := solved(t, buildings, Options{Budgets: []float64{at.Budget}})
		// The two add up the same numbers in different ways.
		if math.Abs(plan.Bound-at.Value) > 1e-9*at.Value {
			t.Errorf("budget %g: bound %g, curve %g", at.Budget, plan.Bound, at.Value)
		}
		if at.Budget > 0 && at.Budget < even[39].Budget && math.Abs(plan.MarginalValue[0]-at.Marginal) > 1e-9*at.Marginal {
			t.Errorf("budget %g: marginal value %g, curve %g", at.Budget, plan.MarginalValue[0], at.Marginal)
		}
		// As plans are within a thousandth of the bound, more money may bring so much less.
		if plan.Value < was*(1-enough) {
			t.Errorf("budget %g brings %g, less money %g", at.Budget, plan.Value, was)
		}
		was = plan.Value
	}
}

func TestMoreMoneyNeverBringsLess(t *testing.T) {
	t.Parallel()
	buildings := portfolio(4, 25, 8)
	all := cost(buildings)
	was, tested := 0.0, 0
	for n := range 60 {
		plan := solved(t, buildings, Options{Budgets: []float64{math.Round(all * float64(n) / 60)}})
		if plan.Optimal && plan.Value < was {
			t.Errorf("step %d: %g, before %g", n, plan.Value, was)
		}
		if plan.Optimal {
			was = plan.Value
			tested++
		}
	}
	if tested < 30 {
		t.Errorf("only %d plans are known to be optimal", tested)
	}
}

// The marginal value is the slope of the bound; between corners a step of money
// changes it in proportion. Tolerance: the dual with capacities is solved to 1e-6
// of the bound, a tenth of what the step brings.
func TestMarginalValueIsTheSlopeOfTheBound(t *testing.T) {
	t.Parallel()
	buildings := portfolio(6, 2000, 10)
	all := limits(cost(buildings), len(buildings))
	for _, name := range names(all) {
		opt := all[name]
		_, r := relaxed(t, buildings, opt)
		for y := range opt.Budgets {
			step := cost(buildings) * 1e-6
			if len(opt.Capacities) > 0 {
				step *= 1000
			}
			more := opt
			more.Budgets = slices.Clone(opt.Budgets)
			more.Budgets[y] += step
			less := opt
			less.Budgets = slices.Clone(opt.Budgets)
			_, s := relaxed(t, buildings, more)
			slope := (s.bound - r.bound) / step
			if m := r.marginal[y]; slope > m*1.01+1e-9 || slope < m*0.9-1e-9 {
				t.Errorf("%s, year %d: marginal value %g, slope %g", name, y, m, slope)
			}
		}
	}
}

func TestPricesGiveTheBound(t *testing.T) {
	t.Parallel()
	buildings := portfolio(8, 300, 10)
	wishes(buildings)
	all := limits(cost(buildings), len(buildings))
	for _, name := range names(all) {
		p, r := relaxed(t, buildings, all[name])
		s := newSchedule(p)
		if _, bound := s.moves(r, 0); math.Abs(bound-r.bound) > 1e-9*r.bound {
			t.Errorf("%s: bound %.12g, by prices %.12g", name, r.bound, bound)
		}
	}
}

func TestEarlierYearsBringMoreForTheirMoney(t *testing.T) {
	t.Parallel()
	for _, n := range []int{200, 4000} {
		buildings := portfolio(9, n, 10)
		all := cost(buildings)
		plan := solved(t, buildings, Options{Budgets: []float64{all / 50, all / 50, all / 50, all / 50}})
		value := make([]float64, 4)
		for _, c := range plan.Choices {
			value[c.Year] += buildings[c.Building].Packages[c.Package].Value
		}
		for y := 1; y < 4; y++ {
			if value[y]/plan.Cost[y] > value[y-1]/plan.Cost[y-1] {
				t.Errorf("%d buildings: year %d brings %g for its money, the one before %g", n, y, value[y]/plan.Cost[y], value[y-1]/plan.Cost[y-1])
			}
			if plan.Cost[y] < 0.95*all/50 {
				t.Errorf("%d buildings: year %d spends %g of %g", n, y, plan.Cost[y], all/50)
			}
		}
	}
}

func TestDominated(t *testing.T) {
	t.Parallel()
	packages := []Package{{Cost: 10, Value: 8}, {Cost: 12, Value: 8}, {Cost: 10, Value: 8}, {Cost: 5, Value: 9}, {Cost: 5, Value: 0}, {Cost: 20, Value: 10}, {Cost: 0, Value: -1}}
	if d := cmp.Diff([]int{0, 1, 2, 4, 6}, Dominated(packages)); d != "" {
		t.Errorf("(-want +got):\n%s", d)
	}
	if got := Dominated(nil); got != nil {
		t.Errorf("of nothing: %v", got)
	}
}
