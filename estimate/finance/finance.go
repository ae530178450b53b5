// Package finance values investments that save energy: present value with real
// price rises, annuity, payback, cost of saved energy, and global cost in the
// manner of EN 15459-1.
//
// Symbols: i interest rate, e price rise, both real and per year; N years; I
// investment; S saving and M upkeep per year. Left out: tax, subsidies, loans.
package finance

import "math"

// PresentValueFactor is sum over t = 1..years of ((1+e)/(1+i))^t: what one unit
// a year, rising by e, is worth today. For whole years it equals
// (1+e)/(i-e) (1 - ((1+e)/(1+i))^N), and N at e = i.
func PresentValueFactor(rate, rise, years float64) float64 {
	q := (1 + rise) / (1 + rate)
	l := math.Log(q)
	if math.Abs(l) < 1e-12 {
		return years
	}
	// q (1 - q^N)/(1 - q) by expm1, which keeps its digits near q = 1.
	return q * math.Expm1(years*l) / math.Expm1(l)
}

// CapitalRecovery is the annuity of one unit of investment:
// i/(1 - (1+i)^-N), 1/N at i = 0.
func CapitalRecovery(rate, years float64) float64 { return 1 / PresentValueFactor(rate, 0, years) }

// NetPresentValue is -I + sum over t of (S (1+e)^t - M)/(1+i)^t.
func NetPresentValue(investment, saving, upkeep, rate, rise, years float64) float64 {
	return -investment + saving*PresentValueFactor(rate, rise, years) - upkeep*PresentValueFactor(rate, 0, years)
}

// SimplePayback is I/S in years; +Inf, "never", where nothing is saved.
func SimplePayback(investment, saving float64) float64 {
	if saving <= 0 {
		return math.Inf(1)
	}
	return investment / saving
}

// DiscountedPayback is -ln(1 - i I/S)/ln(1 + i) in years; +Inf where i I >= S.
func DiscountedPayback(investment, saving, rate float64) float64 {
	if rate == 0 {
		return SimplePayback(investment, saving)
	}
	if saving <= 0 || rate*investment >= saving {
		return math.Inf(1)
	}
	return -math.Log(1-rate*investment/saving) / math.Log(1+rate)
}

// CostOfSavedEnergy is (a I + M)/saved per unit of energy, a the annuity; +Inf
// where nothing is saved.
func CostOfSavedEnergy(investment, upkeep, savedKWh, rate, years float64) float64 {
	if savedKWh <= 0 {
		return math.Inf(1)
	}
	return (CapitalRecovery(rate, years)*investment + upkeep) / savedKWh
}

// AbatementCost is (I a - S)/dCO2 per unit of CO2.
func AbatementCost(investment, saving, co2, rate, years float64) float64 {
	return (investment*CapitalRecovery(rate, years) - saving) / co2
}

// GlobalCost is what a building costs over a calculation period in today's money: initial
// investment, yearly cost, replacements of a component within it, less the
// linear residual value of its last one. Source: EN 15459-1.
func GlobalCost(initial, component, componentLife, yearly, rate, period float64) float64 {
	cost := initial + yearly*PresentValueFactor(rate, 0, period)
	last := 0.0
	if componentLife > 0 {
		for t := componentLife; t < period; t += componentLife {
			cost += component * math.Pow(1+rate, -t)
			last = t
		}
		cost -= component * (componentLife - (period - last)) / componentLife * math.Pow(1+rate, -period)
	}
	return cost
}

// LearnedCost is c0 (x/x0)^b with b = log2(1 - learning rate): unit cost after
// cumulative volume grew by the ratio.
func LearnedCost(cost, ratio, learningRate float64) float64 {
	return cost * math.Pow(ratio, math.Log2(1-learningRate))
}
