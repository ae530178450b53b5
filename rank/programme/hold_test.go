package programme

import (
	"math"
	"math/rand/v2"
	"testing"
)

// hold fails unless a plan keeps all limits and says of itself what is so.
func hold(t *testing.T, buildings []Building, opt Options, plan *Plan) {
	t.Helper()
	years := len(opt.Budgets)
	cost := make([]float64, years)
	used := make([][]int, years)
	for y := range used {
		used[y] = make([]int, len(opt.Capacities))
	}
	byDistrict := map[string]float64{}
	got := map[int]int{}
	value := 0.0
	for k, c := range plan.Choices {
		b := buildings[c.Building]
		if k > 0 && buildings[plan.Choices[k-1].Building].ID >= b.ID {
			t.Fatalf("choices are not by id: %v", plan.Choices)
		}
		pk := b.Packages[c.Package]
		got[c.Building] = c.Package
		cost[c.Year] += pk.Cost
		value += pk.Value
		byDistrict[b.District] += pk.Cost
		for k, limit := range opt.Capacities {
			if limit.Measures&pk.Measures != 0 {
				used[c.Year][k]++
			}
		}
	}
	before, money := 0.0, 0.0
	for y, budget := range opt.Budgets {
		if plan.Cost[y] != cost[y] {
			t.Errorf("year %d costs %g, says %g", y, cost[y], plan.Cost[y])
		}
		if !opt.CarryOver {
			before, money = 0, 0
		}
		before += cost[y]
		money += budget
		if before > money {
			t.Errorf("year %d: %.17g spent of %.17g", y, before, money)
		}
		for k, u := range used[y] {
			if u > opt.Capacities[k].Buildings {
				t.Errorf("year %d: capacity %d is taken %d times", y, k, u)
			}
		}
	}
	for i, b := range buildings {
		j, done := got[i]
		switch {
		case b.Never && done:
			t.Errorf("%s must never be done", b.ID)
		case b.Must && !done:
			t.Errorf("%s must be done", b.ID)
		case len(b.MustPackages) > 0 && (!done || !contains(b.MustPackages, j)):
			t.Errorf("%s must get one of %v", b.ID, b.MustPackages)
		}
	}
	total, claimed := 0.0, 0.0
	for _, b := range opt.Budgets {
		total += b
	}
	for d, spent := range byDistrict {
		claimed += max(spent, opt.MinShare[d]*total)
	}
	for d, share := range opt.MinShare {
		if _, spent := byDistrict[d]; !spent {
			claimed += share * total
		}
	}
	if claimed > total*(1+1e-12) {
		t.Errorf("with what is kept for districts %g is spent of %g: %v", claimed, total, byDistrict)
	}
	if value != plan.Value {
		t.Errorf("value is %g, says %g", value, plan.Value)
	}
	if plan.Bound < plan.Value || plan.Gap < 0 {
		t.Errorf("value %g, bound %g, gap %g", plan.Value, plan.Bound, plan.Gap)
	}
}

func contains(xs []int, x int) bool {
	for _, y := range xs {
		if x == y {
			return true
		}
	}
	return false
}

// small invents a few buildings with all kinds of wishes.
func small(rnd *rand.Rand, buildings, packages, years int) ([]Building, Options) {
	var out []Building
	whole := rnd.IntN(2) == 0
	number := func(most float64) float64 {
		if whole {
			return math.Floor(rnd.Float64() * most)
		}
		return math.Round(rnd.Float64()*most*100) / 100
	}
	all := 0.0
	for i := range buildings {
		b := Building{ID: string(rune('a' + i)), District: []string{"North", "South", "Hill"}[rnd.IntN(3)]}
		for range rnd.IntN(packages + 1) {
			b.Packages = append(b.Packages, Package{Cost: number(50), Value: number(60) - 5, Measures: rnd.Uint64() & 7})
			all += b.Packages[len(b.Packages)-1].Cost
		}
		switch rnd.IntN(12) {
		case 0:
			b.Must = len(b.Packages) > 0
		case 1:
			if n := len(b.Packages); n > 0 {
				b.MustPackages = []int{rnd.IntN(n)}
			}
		case 2:
			b.Never = true
		}
		out = append(out, b)
	}
	opt := Options{CarryOver: rnd.IntN(3) == 0}
	for range years {
		opt.Budgets = append(opt.Budgets, number(all/float64(years)))
	}
	if rnd.IntN(3) == 0 {
		opt.MinShare = map[string]float64{}
		for _, b := range out[:min(2, len(out))] {
			opt.MinShare[b.District] = float64(1+rnd.IntN(4)) / 10
		}
	}
	if rnd.IntN(3) == 0 {
		opt.Capacities = []Capacity{{Measures: 1, Buildings: rnd.IntN(3)}}
		if rnd.IntN(2) == 0 {
			opt.Capacities = append(opt.Capacities, Capacity{Name: "roofers", Measures: 6, Buildings: 1 + rnd.IntN(2)})
		}
	}
	return out, opt
}

// brute goes through all programmes and returns the most one is worth, NaN if
// there is none.
func brute(buildings []Building, opt Options) float64 {
	best := math.NaN()
	years := len(opt.Budgets)
	total := 0.0
	for _, b := range opt.Budgets {
		total += b
	}
	spent := make([]float64, years)
	used := make([][]int, years)
	for y := range used {
		used[y] = make([]int, len(opt.Capacities))
	}
	district := map[string]float64{}
	within := func(x, limit float64) bool { return x <= limit+1e-9 } // decimals are not binary
	var deeper func(i int, value float64)
	deeper = func(i int, value float64) {
		if i == len(buildings) {
			claimed := 0.0
			for d, share := range opt.MinShare {
				claimed += max(0, share*total-district[d])
			}
			sum, left := 0.0, 0.0
			for y, x := range spent {
				if !within(x, opt.Budgets[y]+left) {
					return
				}
				if opt.CarryOver {
					left += opt.Budgets[y] - x
				}
				sum += x
			}
			if within(sum+claimed, total) && !(value <= best) {
				best = value
			}
			return
		}
		b := buildings[i]
		if !b.Must && len(b.MustPackages) == 0 {
			deeper(i+1, value)
		}
		if b.Never {
			return
		}
		for j, pk := range b.Packages {
			if len(b.MustPackages) > 0 && !contains(b.MustPackages, j) {
				continue
			}
			for y := range years {
				ok := true
				for k, c := range opt.Capacities {
					if c.Measures&pk.Measures != 0 {
						used[y][k]++
						ok = ok && used[y][k] <= c.Buildings
					}
				}
				if ok {
					was, wasDistrict := spent[y], district[b.District]
					spent[y] += pk.Cost
					district[b.District] += pk.Cost
					deeper(i+1, value+pk.Value)
					spent[y], district[b.District] = was, wasDistrict
				}
				for k, c := range opt.Capacities {
					if c.Measures&pk.Measures != 0 {
						used[y][k]--
					}
				}
			}
		}
	}
	deeper(0, 0)
	return best
}
