package programme

import (
	"context"
	"math"
	"slices"
)

// CurvePoint is what can be had for a budget.
type CurvePoint struct {
	Budget, Value float64
	// Marginal is what one more unit of money would add.
	Marginal float64
}

// Curve returns the most that any budget brings if packages may be done in parts:
// the frontier between money and value. It rises, ever more slowly, from the
// cheapest choice, which is nothing but for must-do buildings, to the best package
// everywhere. points is how many points are wanted, evenly spaced by budget; below
// 2 all corners are returned. Programmes that do not do packages in parts lie on or
// below it, see Plan.Gap.
//
// Source: Kellerer, Pferschy and Pisinger, Knapsack Problems (2004), 11.2.1.
func Curve(ctx context.Context, buildings []Building, points int) ([]CurvePoint, error) {
	// A budget nothing exceeds.
	all := 0.0
	for i := range buildings {
		most := 0.0
		for _, pk := range buildings[i].Packages {
			if finite(pk.Cost) {
				most = max(most, pk.Cost)
			}
		}
		all += most
	}
	p, err := newProblem(ctx, buildings, Options{Budgets: []float64{min(2*all+1, math.MaxFloat64)}}, false)
	if err != nil {
		return nil, err
	}
	r := &relaxation{}
	if err := p.climb(ctx, r, make([]float64, len(p.masks))); err != nil {
		return nil, err
	}
	var at CurvePoint
	for i := range p.order {
		o := p.option(i, r.base[i])
		at.Budget += o.cost
		at.Value += o.value
	}
	corners := []CurvePoint{at}
	for _, s := range r.steps {
		last := &corners[len(corners)-1]
		if last.Marginal == 0 || s.efficiency < last.Marginal {
			last.Marginal = s.efficiency
		}
		at.Budget += s.cost
		at.Value += s.value
		corners = append(corners, CurvePoint{Budget: at.Budget, Value: at.Value})
	}
	if points < 2 {
		return corners, nil
	}
	return spaced(corners, points), nil
}

// spaced reads a curve at evenly spaced budgets.
func spaced(corners []CurvePoint, points int) []CurvePoint {
	first, last := corners[0], corners[len(corners)-1]
	out := make([]CurvePoint, 0, points)
	for n := range points {
		b := first.Budget + float64((last.Budget-first.Budget)*float64(n)/float64(points-1))
		// The last corner at or below b.
		k, _ := slices.BinarySearchFunc(corners, b, func(c CurvePoint, b float64) int {
			if c.Budget <= b {
				return -1
			}
			return 1
		})
		c := corners[k-1]
		out = append(out, CurvePoint{b, c.Value + float64(c.Marginal*(b-c.Budget)), c.Marginal})
	}
	out[points-1] = last
	return out
}
