package programme

import (
	"context"
	"math"
	"testing"
)

// example has three buildings with six, two and three packages between them and
// integer costs. Derived: a worked example of the method of Sinha and Zoltners
// (Operations Research 27, 1979) and of Kellerer, Pferschy and Pisinger (Knapsack
// Problems, 2004, chapter 11); the optima were found apart from this program by
// going through all choices, hulls and bounds by hand.
func example() []Building {
	return []Building{
		{ID: "A", Packages: []Package{{Cost: 10, Value: 8}, {Cost: 20, Value: 20}, {Cost: 35, Value: 26}}},
		{ID: "B", Packages: []Package{{Cost: 8, Value: 6}, {Cost: 25, Value: 12}}},
		{ID: "C", Packages: []Package{{Cost: 12, Value: 10}, {Cost: 18, Value: 11}, {Cost: 30, Value: 22}}},
	}
}

func relaxed(t *testing.T, buildings []Building, opt Options) (*problem, *relaxation) {
	t.Helper()
	p, err := newProblem(context.Background(), buildings, opt, false)
	if err != nil {
		t.Fatal(err)
	}
	r, err := p.relax(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	return p, r
}

// Tolerance: the increments are printed to three decimals.
func TestHullsOfTheExample(t *testing.T) {
	t.Parallel()
	p, r := relaxed(t, example(), Options{Budgets: []float64{100}})
	want := []struct {
		id         string
		cost       float64 // of the corner reached
		efficiency float64
	}{
		{"A", 20, 1.000}, {"C", 12, 0.833}, {"B", 8, 0.750}, {"C", 30, 0.667}, {"A", 35, 0.400}, {"B", 25, 0.353},
	}
	if len(r.steps) != len(want) {
		t.Fatalf("%d steps, want %d", len(r.steps), len(want))
	}
	for k, w := range want {
		s := r.steps[k]
		if id := p.id(int(s.building)); id != w.id || p.option(int(s.building), s.to).cost != w.cost || math.Abs(s.efficiency-w.efficiency) > 5e-4 {
			t.Errorf("step %d: %s to %g at %.4f, want %s to %g at %.3f", k, id, p.option(int(s.building), s.to).cost, s.efficiency, w.id, w.cost, w.efficiency)
		}
	}
}

// Optimum and greedy are exact, integers being so; bounds are printed to two
// decimals.
func TestBudgetsOfTheExample(t *testing.T) {
	t.Parallel()
	for _, w := range []struct{ budget, optimum, greedy, bound float64 }{
		{20, 20, 20, 20}, {30, 26, 26, 28.33}, {40, 36, 36, 36}, {50, 42, 36, 42.67}, {58, 48, 48, 48}, {75, 54, 54, 54.71},
	} {
		opt := Options{Budgets: []float64{w.budget}}
		plan, err := Solve(context.Background(), example(), opt)
		if err != nil {
			t.Fatal(err)
		}
		if plan.Value != w.optimum || !plan.Optimal {
			t.Errorf("budget %g: value %g, known optimal: %v, want %g and true", w.budget, plan.Value, plan.Optimal, w.optimum)
		}
		if math.Abs(plan.Bound-w.bound) > 0.005 {
			t.Errorf("budget %g: bound %g, want %g", w.budget, plan.Bound, w.bound)
		}
		if gap := (plan.Bound - w.optimum) / plan.Bound; math.Abs(plan.Gap-gap) > 1e-12 {
			t.Errorf("budget %g: gap %g, want %g", w.budget, plan.Gap, gap)
		}
		p, r := relaxed(t, example(), opt)
		greedy := 0.0
		for i, j := range p.pick(r) {
			greedy += p.option(i, j).value
		}
		if greedy != w.greedy {
			t.Errorf("budget %g: greedy %g, want %g", w.budget, greedy, w.greedy)
		}
	}
}

// At a budget of 50 the hulls alone give 36; A for 20 and C for 30 give 42.
func TestBestOfTheExample(t *testing.T) {
	t.Parallel()
	plan, err := Solve(context.Background(), example(), Options{Budgets: []float64{50}})
	if err != nil {
		t.Fatal(err)
	}
	if len(plan.Choices) != 2 || plan.Choices[0] != (Choice{0, 1, 0}) || plan.Choices[1] != (Choice{2, 2, 0}) || plan.Cost[0] != 50 {
		t.Errorf("got %+v", plan)
	}
	if m := plan.MarginalValue[0]; math.Abs(m-12.0/18) > 1e-15 {
		t.Errorf("one more unit of money is worth %g, want 12/18", m)
	}
}

// Derived from the increments; exact, as all numbers are integers.
func TestCurveOfTheExample(t *testing.T) {
	t.Parallel()
	got, err := Curve(context.Background(), example(), 0)
	if err != nil {
		t.Fatal(err)
	}
	want := []struct{ budget, value float64 }{{0, 0}, {20, 20}, {32, 30}, {40, 36}, {58, 48}, {73, 54}, {90, 60}}
	if len(got) != len(want) {
		t.Fatalf("%d corners, want %d: %v", len(got), len(want), got)
	}
	for k, w := range want {
		if got[k].Budget != w.budget || got[k].Value != w.value {
			t.Errorf("corner %d is %g for %g, want %g for %g", k, got[k].Value, got[k].Budget, w.value, w.budget)
		}
		if k > 1 && got[k].Marginal >= got[k-1].Marginal {
			t.Errorf("corner %d: not concave", k)
		}
	}
}
