package finance

import "math"

// Component is a part of the investment that does not last for ever.
type Component struct {
	Cost      float64 // in today's money
	LifeYears float64
}

// GlobalCost is what a building costs over a calculation period, by part, in
// today's money.
type GlobalCost struct {
	Initial     float64
	Running     float64 // energy and upkeep
	Replacement float64
	Residual    float64 // what components are still worth at the end
}

// Total is C_G = C_I + running + replacement - residual.
func (g GlobalCost) Total() float64 { return g.Initial + g.Running + g.Replacement - g.Residual }

// GlobalCostOver returns the global cost over a period in years: the initial
// investment, a yearly cost that rises by e, each component's replacements within
// the period, less the linear residual value of its last one,
// V_0 (life - age)/life (1+i)^-period. Components are part of the initial
// investment; those without a life last for ever and are worth nothing at the
// end. One due at the very end is not replaced. Source: EN 15459-1.
func GlobalCostOver(initial, yearly float64, components []Component, rate, rise, period float64) GlobalCost {
	g := GlobalCost{Initial: initial, Running: yearly * PresentValueFactor(rate, rise, period)}
	perYear := -math.Log1p(rate) // logarithm of the discount factor of a year
	for _, c := range components {
		if !(c.LifeYears > 0) {
			continue
		}
		// A part in 10^9 of a life is rounding, not one more replacement.
		n := math.Max(0, math.Ceil(period/c.LifeYears*(1-1e-9))-1)
		g.Replacement += c.Cost * replacements(perYear*c.LifeYears, n)
		age := period - n*c.LifeYears
		g.Residual += c.Cost * math.Max(0, c.LifeYears-age) / c.LifeYears * math.Exp(perYear*period)
	}
	return g
}

// replacements is the sum of d^k over k = 1..n, d the discount factor of a life,
// from its logarithm.
func replacements(perLife, n float64) float64 {
	if perLife == 0 {
		return n
	}
	return math.Exp(perLife) * math.Expm1(n*perLife) / math.Expm1(perLife)
}
