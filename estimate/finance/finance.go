// Package finance values investments that save energy: present value with real
// price rises, annuity, payback, cost of saved energy, and global cost in the
// manner of EN 15459-1.
//
// Symbols: i interest rate, e price rise, both real and per year, above -1; N
// years; I investment; S saving and M upkeep per year. Payments fall due at the
// end of each year. Left out: tax, subsidies, loans, internal rate of return.
package finance

import "math"

// RealRate is the interest rate without inflation: (R - R_i)/(1 + R_i). Source:
// EN 15459-1.
func RealRate(marketRate, inflation float64) float64 {
	return (marketRate - inflation) / (1 + inflation)
}

// PresentValueFactor is sum over t = 1..N of ((1+e)/(1+i))^t: what one unit a year,
// rising by e, is worth today. It equals (1+e)/(i-e) (1 - ((1+e)/(1+i))^N), and N
// at e = i; between whole years it is that formula. None for N <= 0.
//
// The formula as it stands loses its digits where e nears i. With q = (1+e)/(1+i) it
// is q (q^N - 1)/(q - 1), made by log1p and expm1, which keep them.
func PresentValueFactor(rate, rise, years float64) float64 {
	if years <= 0 {
		return 0
	}
	q1 := (rise - rate) / (1 + rate) // q - 1
	if q1 == 0 {
		return years
	}
	return (1 + q1) * math.Expm1(years*math.Log1p(q1)) / q1
}

// CapitalRecovery is the yearly cost over N years of one unit invested:
// i/(1 - (1+i)^-N), 1/N at i = 0; +Inf for N <= 0.
func CapitalRecovery(rate, years float64) float64 { return 1 / PresentValueFactor(rate, 0, years) }

// annual is the annuity of an investment; none where nothing is invested, however
// short the years.
func annual(investment, rate, years float64) float64 {
	if investment == 0 {
		return 0
	}
	return investment * CapitalRecovery(rate, years)
}

// NetPresentValue is -I + sum over t of (S (1+e)^t - M)/(1+i)^t: savings rise with
// the price, upkeep does not.
func NetPresentValue(investment, saving, upkeep, rate, rise, years float64) float64 {
	return -investment + saving*PresentValueFactor(rate, rise, years) - upkeep*PresentValueFactor(rate, 0, years)
}

// CostOfSavedEnergy is (a I + M)/saved per unit of energy, a the annuity; +Inf
// where nothing is saved. Where the element is due anyway, I is the extra cost.
func CostOfSavedEnergy(investment, upkeep, savedKWh, rate, years float64) float64 {
	if savedKWh <= 0 {
		return math.Inf(1)
	}
	return (annual(investment, rate, years) + upkeep) / savedKWh
}

// AbatementCost is (I a - S)/dCO2 per unit of CO2 avoided a year; +Inf where none
// is. Measures with negative cost must not be ordered by it: of two that gain the
// same, the one that avoids less looks better.
func AbatementCost(investment, saving, co2, rate, years float64) float64 {
	if co2 <= 0 {
		return math.Inf(1)
	}
	return (annual(investment, rate, years) - saving) / co2
}

// LearnedCost is c0 (x/x0)^b with b = log2(1 - learning rate): unit cost after
// cumulative volume grew by the ratio. Source: experience curve.
func LearnedCost(cost, ratio, learningRate float64) float64 {
	return cost * math.Pow(ratio, math.Log2(1-learningRate))
}

// UnitNormalLoss is L(z) = phi(z) - z (1 - Phi(z)): what knowing beforehand is worth,
// per standard deviation, where the expected benefit of acting is z standard
// deviations from nothing. Source: two actions with linear loss, normal prior.
func UnitNormalLoss(z float64) float64 {
	return math.Exp(-z*z/2)/math.Sqrt(2*math.Pi) - z*math.Erfc(z/math.Sqrt2)/2
}
