package programme

import (
	"context"
	"errors"
	"math"
	"math/rand/v2"
	"strings"
	"testing"
)

func TestWishesThatCannotBeGrantedAreAllNamed(t *testing.T) {
	t.Parallel()
	some := []Package{{Cost: 10, Value: 5, Measures: 1}, {Cost: 20, Value: 8, Measures: 2}}
	for _, c := range []struct {
		name      string
		buildings []Building
		opt       Options
		want      []string
	}{
		{"bad input", []Building{
			{ID: "a", Packages: some, Must: true, Never: true}, {ID: "a"}, {ID: "b", Must: true},
			{ID: "c", Packages: some, MustPackages: []int{2}}, {ID: "d", Packages: []Package{{Cost: -1, Value: math.NaN()}}},
		}, Options{
			Budgets: []float64{-1, math.Inf(1)}, MinShare: map[string]float64{"North": 0.7, "South": 0.6, "Hill": 2},
			Capacities: []Capacity{{Buildings: -1}},
		}, []string{
			`"a" is there more than once`, `"a" must be done and must never`, `"b" must be done, but has no package`,
			`"c" must get package 2`, `"d" costs -1`, `"d" is worth NaN`, "year 1 is -1", "year 2 is +Inf", `"Hill" is 2`,
			"sum to 1.3", `"North" has a share of the money, but no building`, `"South" has`, "capacity 1 is -1",
		}},
		{"no years", nil, Options{}, []string{"no year has a budget"}},
		{"musts beyond budget and capacity", []Building{
			{ID: "a", Packages: some, MustPackages: []int{1}}, {ID: "b", Packages: some, MustPackages: []int{1}}, {ID: "c", Packages: some[:1], Must: true},
		}, Options{Budgets: []float64{22, 22}, Capacities: []Capacity{{Name: "roofers", Measures: 2, Buildings: 0}, {Measures: 1, Buildings: 1}}}, []string{
			"must-do buildings cost 50 at least, the budgets sum to 44", `capacity "roofers" 2 times at least, in all years there is 0`,
		}},
		{"must beyond a year", []Building{{ID: "a", Packages: some[1:], Must: true}}, Options{Budgets: []float64{15, 15}}, []string{`"a" must be done, but costs more than any year's money`}},
		{"must beyond what others may spend", []Building{{ID: "a", Packages: some, Must: true}, {ID: "b", District: "North", Packages: some}},
			Options{Budgets: []float64{15}, MinShare: map[string]float64{"North": 0.4}}, []string{"need 10 beside the money kept for districts, of which there is 9"}},
		{"musts that fill no years", []Building{{ID: "a", Packages: some[1:], Must: true}, {ID: "b", Packages: some[1:], Must: true}, {ID: "c", Packages: some[1:], Must: true}},
			Options{Budgets: []float64{30, 30}}, []string{`no year was found for must-do building "c"`}},
	} {
		plan, err := Solve(context.Background(), c.buildings, c.opt)
		if err == nil {
			t.Errorf("%s: no error, but %+v", c.name, plan)
			continue
		}
		for _, w := range c.want {
			if !strings.Contains(err.Error(), w) {
				t.Errorf("%s: no word of %q in:\n%v", c.name, w, err)
			}
		}
		if n := strings.Count(err.Error(), "\n") + 1; n != len(c.want) {
			t.Errorf("%s: %d problems named, want %d:\n%v", c.name, n, len(c.want), err)
		}
	}
}

func TestManyProblemsAreCounted(t *testing.T) {
	t.Parallel()
	buildings := make([]Building, 100)
	for i := range buildings {
		buildings[i] = Building{ID: string(rune('A' + i)), Must: true}
	}
	_, err := Solve(context.Background(), buildings, Options{Budgets: []float64{1}})
	if err == nil || strings.Count(err.Error(), "\n") != 20 || !strings.HasSuffix(err.Error(), "and more of these: must-do buildings without package") {
		t.Errorf("got %v", err)
	}
}

// Must-do buildings that only fit if they are placed with care: 6+4, 5+5 and 7+3.
func TestMustsThatFillYearsExactly(t *testing.T) {
	t.Parallel()
	var buildings []Building
	for i, c := range []float64{6, 4, 5, 5, 7, 3} {
		buildings = append(buildings, Building{ID: string(rune('a' + i)), Packages: []Package{{Cost: c, Value: 1}}, Must: true})
	}
	if plan := solved(t, buildings, Options{Budgets: []float64{10, 10, 10}}); len(plan.Choices) != 6 {
		t.Errorf("got %+v", plan)
	}
}

// Best where the must-do package is worse than nothing, and dearer than another.
func TestMustTakesWhatIsNamed(t *testing.T) {
	t.Parallel()
	packages := []Package{{Cost: 10, Value: 9}, {Cost: 12, Value: -3}, {Cost: 14, Value: 1}}
	plan := solved(t, []Building{{ID: "a", Packages: packages, MustPackages: []int{1}}, {ID: "b", Packages: packages}, {ID: "c", Packages: packages, Never: true}},
		Options{Budgets: []float64{100}})
	if len(plan.Choices) != 2 || plan.Choices[0] != (Choice{0, 1, 0}) || plan.Choices[1] != (Choice{1, 0, 0}) || plan.Value != 6 || plan.Bound != 6 || plan.Gap != 0 {
		t.Errorf("got %+v", plan)
	}
}

// 0.1 + 0.2 is more than 0.3 in floating point, ten times 0.1 is less than 1.
func TestBudgetsAreNotExceededByABit(t *testing.T) {
	t.Parallel()
	var buildings []Building
	for i := range 50 {
		buildings = append(buildings, Building{ID: string(rune(0x1000 + i)), Packages: []Package{{Cost: 0.1, Value: 1}, {Cost: 0.2, Value: 1.9}, {Cost: 0.7, Value: 4}}})
	}
	for _, budget := range []float64{0.1, 0.3, 1, 1.1, 7.7, 100 * 0.1} {
		solved(t, buildings, Options{Budgets: []float64{budget, budget / 3}})
		solved(t, buildings, Options{Budgets: []float64{budget, budget / 3}, CarryOver: true})
	}
	tenth, fifth := 0.1, 0.2
	plan := solved(t, []Building{{ID: "a", Packages: []Package{{Cost: tenth, Value: 1}}}, {ID: "b", Packages: []Package{{Cost: fifth, Value: 1.5}}}}, Options{Budgets: []float64{0.3}})
	if plan.Value != 1.5 {
		t.Errorf("0.1 and 0.2 of 0.3: %+v", plan)
	}
}

// A budget that is the sum of all costs, added up in the order of the choices, is
// enough for all, whatever rounding does.
func TestBudgetsMaySufficeToTheLastBit(t *testing.T) {
	t.Parallel()
	rnd := rand.New(rand.NewPCG(3, 1))
	for range 20 {
		var buildings []Building
		sum := 0.0
		for i := range 300 {
			c := 1e4 * rnd.Float64()
			sum += c
			buildings = append(buildings, Building{ID: string(rune(0x1000 + i)), Packages: []Package{{Cost: c, Value: 1}}, Must: true})
		}
		if plan := solved(t, buildings, Options{Budgets: []float64{sum}}); len(plan.Choices) != 300 || plan.Cost[0] != sum {
			t.Errorf("%d done for %.17g of %.17g", len(plan.Choices), plan.Cost[0], sum)
		}
	}
}

// The shares are of all money; the rest is free.
func TestDistrictsGetTheirShare(t *testing.T) {
	t.Parallel()
	var buildings []Building
	for i := range 20 {
		b := Building{ID: string(rune('a' + i)), District: "South", Packages: []Package{{Cost: 5, Value: 10}}}
		if i%2 == 0 {
			b.District, b.Packages[0].Value = "North", 1
		}
		buildings = append(buildings, b)
	}
	plan := solved(t, buildings, Options{Budgets: []float64{20, 30}, MinShare: map[string]float64{"North": 0.3}})
	if len(plan.Districts) != 1 || plan.Districts[0] != (District{"North", 15, 15}) || plan.Value != 73 {
		t.Errorf("got %+v", plan)
	}
	// Of 16 kept, two buildings use 10; the rest is not for others.
	for i := 4; i < 20; i += 2 {
		buildings[i].Never = true
	}
	plan = solved(t, buildings, Options{Budgets: []float64{20, 20}, MinShare: map[string]float64{"North": 0.4}})
	if plan.Districts[0] != (District{"North", 16, 10}) || plan.Cost[0]+plan.Cost[1] != 30 {
		t.Errorf("got %+v", plan)
	}
}

func TestMoneyIsCarriedOverOnlyOnDemand(t *testing.T) {
	t.Parallel()
	buildings := []Building{{ID: "a", Packages: []Package{{Cost: 15, Value: 1}}}}
	if plan := solved(t, buildings, Options{Budgets: []float64{10, 10}}); len(plan.Choices) != 0 {
		t.Errorf("without: %+v", plan)
	}
	if plan := solved(t, buildings, Options{Budgets: []float64{10, 10}, CarryOver: true}); len(plan.Choices) != 1 || plan.Choices[0].Year != 1 {
		t.Errorf("with: %+v", plan)
	}
}

func TestNothingToDo(t *testing.T) {
	t.Parallel()
	if plan := solved(t, nil, Options{Budgets: []float64{10}}); plan.Value != 0 || plan.Gap != 0 || len(plan.Choices) != 0 {
		t.Errorf("got %+v", plan)
	}
	buildings := []Building{{ID: "a", Packages: []Package{{Cost: 0, Value: 2}, {Cost: 3, Value: 4}}}, {ID: "b"}}
	if plan := solved(t, buildings, Options{Budgets: []float64{0}}); plan.Value != 2 || plan.Gap != 0 {
		t.Errorf("without money: %+v", plan)
	}
	if curve, err := Curve(context.Background(), nil, 0); err != nil || len(curve) != 1 || curve[0] != (CurvePoint{}) {
		t.Errorf("curve of nothing: %v %v", curve, err)
	}
}

func TestCancelled(t *testing.T) {
	t.Parallel()
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	if _, err := Solve(ctx, example(), Options{Budgets: []float64{50}}); !errors.Is(err, context.Canceled) {
		t.Errorf("got %v", err)
	}
}
