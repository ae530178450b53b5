package programme

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// portfolio invents buildings with up to a number of packages: sets of twelve
// measures that cost by size and save by a factor each.
func portfolio(seed uint64, n, most int) []Building {
	rnd := rand.New(rand.NewPCG(seed, 1))
	districts := []string{"North", "South", "Harbour", "Hill"}
	out := make([]Building, n)
	for i := range out {
		size := math.Exp(rnd.NormFloat64()*0.8) * 500
		use := size * (80 + 200*rnd.Float64())
		var price, factor [12]float64
		for m := range price {
			price[m] = size * (10 + 150*rnd.Float64())
			factor[m] = 1 - 0.25*rnd.Float64()
		}
		b := Building{ID: fmt.Sprintf("b%06d", i), District: districts[rnd.IntN(len(districts))]}
		for range 1 + rnd.IntN(most) {
			set := rnd.Uint64() & rnd.Uint64() & (1<<12 - 1)
			pk := Package{Measures: set}
			left := 1.0
			for m := range price {
				if set>>m&1 == 1 {
					pk.Cost += price[m]
					left *= factor[m]
				}
			}
			pk.Cost = math.Round(pk.Cost)
			pk.Value = math.Round(use*(1-left)*10) / 10
			b.Packages = append(b.Packages, pk)
		}
		out[i] = b
	}
	return out
}

// cost is what all buildings' dearest packages cost.
func cost(buildings []Building) float64 {
	sum := 0.0
	for _, b := range buildings {
		most := 0.0
		for _, p := range b.Packages {
			most = max(most, p.Cost)
		}
		sum += most
	}
	return sum
}

func BenchmarkSolve(b *testing.B) {
	buildings := portfolio(1, 100_000, 24)
	all := cost(buildings)
	for _, c := range []struct {
		name string
		opt  Options
	}{
		{"one year", Options{Budgets: []float64{math.Round(all / 20)}}},
		{"five years", Options{Budgets: []float64{math.Round(all / 50), math.Round(all / 60), math.Round(all / 60), math.Round(all / 50), math.Round(all / 50)}}},
		{"small budget", Options{Budgets: []float64{math.Round(all / 1e5)}}},
		{"shares", Options{Budgets: []float64{math.Round(all / 50), math.Round(all / 50)}, MinShare: map[string]float64{"North": 0.4, "Hill": 0.3}}},
		{"capacities", Options{Budgets: []float64{math.Round(all / 50), math.Round(all / 50), math.Round(all / 60)}, Capacities: []Capacity{{Measures: 1, Buildings: 500}, {Measures: 6, Buildings: 2000}}}},
		// Few buildings of many: where a plan is improved longest.
		{"small budgets, shares, capacities", Options{Budgets: []float64{math.Round(all / 1e5), math.Round(all / 2e5), math.Round(all / 1e5), math.Round(all / 2e5), math.Round(all / 1e5)},
			MinShare: map[string]float64{"North": 0.4, "Hill": 0.3}, Capacities: []Capacity{{Measures: 1, Buildings: 3}, {Measures: 6, Buildings: 10}}}},
	} {
		b.Run(c.name, func(b *testing.B) {
			b.ReportAllocs()
			var plan *Plan
			for range b.N {
				var err error
				if plan, err = Solve(context.Background(), buildings, c.opt); err != nil {
					b.Fatal(err)
				}
			}
			b.ReportMetric(float64(b.Elapsed().Milliseconds())/float64(b.N), "ms")
			b.ReportMetric(plan.Gap*1e6, "gap-ppm")
		})
	}
}
