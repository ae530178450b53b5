package airflow

import (
	"math"

	"kelvinrow/estimate/climate"
)

// beta is the interaction of wind and stack. Source: Walker and Wilson (1998).
const beta = -0.33

// StackFactor is f_s = (1 + n R)/(n + 1) [1/2 - 1/2 M^(5/4)]^(n+1), M = X^2/(2 - R),
// at most 1, for n 0.5 to 1, R 0 to 1, |X| at most R. Source: Walker and Wilson
// (1998), without flue.
func StackFactor(exponent, r, x float64) float64 {
	m := math.Min(1, x*x/(2-r))
	m *= math.Sqrt(math.Sqrt(m))
	return (1 + exponent*r) / (exponent + 1) * power(0.5-0.5*m, exponent+1)
}

// WindFactor is f_w = 0.19 (2 - n) [1 - ((X + R)/2)^(3/2)], ranges as StackFactor.
// Source: Walker and Wilson (1998), slab or basement, without flue.
func WindFactor(exponent, r, x float64) float64 {
	j := (x + r) / 2
	return 0.19 * (2 - exponent) * (1 - j*math.Sqrt(j))
}

// StackPressure is P_s = rho_o g H |dT|/T_i in Pa. Source: hydrostatics.
func StackPressure(heightM, indoorC, outdoorC float64) float64 {
	return AirDensity(outdoorC+zeroK) * gravity * heightM * math.Abs(indoorC-outdoorC) / (indoorC + zeroK)
}

// WindPressure is P_w = rho_o v^2/2 in Pa, v the sheltered wind S v in m/s.
func WindPressure(outdoorC, sheltered float64) float64 {
	return AirDensity(outdoorC+zeroK) * sheltered * sheltered / 2
}

// Superpose puts stack and wind flow together, in their unit:
// [V_s^(1/n) + V_w^(1/n) + beta (V_s V_w)^(1/(2n))]^n. Source: Walker and Wilson
// (1998).
func Superpose(stack, wind, exponent float64) float64 {
	return math.Pow(math.Pow(stack, 1/exponent)+math.Pow(wind, 1/exponent)+
		beta*math.Pow(stack*wind, 1/(2*exponent)), exponent)
}

// profile is the power law of wind over terrain: exponent and height of the
// boundary layer in m.
var profile = [climate.NumTerrains]struct{ exponent, layerM float64 }{
	climate.Suburb: {0.22, 370},
	climate.Open:   {0.14, 270},
	climate.City:   {0.33, 460},
}

// EavesWindFactor is wind at eaves height h over wind at 10 m in open country:
// (270/10)^0.14 (h/delta)^alpha. Source: ASHRAE Fundamentals, wind profile, as
// used by Walker and Wilson (1998).
func EavesWindFactor(t climate.Terrain, eavesM float64) float64 {
	open, here := profile[climate.Open], profile[t]
	return math.Pow(open.layerM/10, open.exponent) * math.Pow(math.Max(0, eavesM)/here.layerM, here.exponent)
}

// House is the full leakage of the model, with what the estimate leaves out.
type House struct {
	Exponent   float64 // n
	R, X       float64 // shares as in Input, of the whole leakage with the flue's
	Flue       float64 // Y: share of leakage in an open flue
	FlueHeight float64 // beta_f: height of the flue's top over H; at least 1
	CrawlSpace bool    // floor above a vented crawl space, not on a slab or basement
}

// StackFactor is f_s = (1 + n R)/(n + 1) [1/2 - 1/2 M^(5/4)]^(n+1) + F with
//
//	M = min(1, (X + (2 n + 1) Y)^2/(2 - R))
//	F = n Y (b - 1)^((3 n - 1)/3) {1 - 3 (X_c - X)^2 R^(1-n)/[2 (b + 1)]}
//	X_c = R + 2 (1 - R - Y)/(n + 1) - 2 Y (b - 1)^n, b the flue's height over H.
//
// Source: Walker and Wilson (1998).
func (h House) StackFactor() float64 {
	n, r, x, y := h.Exponent, h.R, h.X, h.Flue
	m := x + (2*n+1)*y
	m = math.Min(1, m*m/(2-r))
	f := (1 + n*r) / (n + 1) * math.Pow(0.5-0.5*math.Pow(m, 1.25), n+1)
	if y <= 0 {
		return f
	}
	above := h.FlueHeight - 1
	xc := r + 2*(1-r-y)/(n+1) - 2*y*math.Pow(above, n)
	return f + n*y*math.Pow(above, (3*n-1)/3)*(1-3*(xc-x)*(xc-x)*math.Pow(r, 1-n)/(2*(h.FlueHeight+1)))
}

// WindFactor is, on a slab or basement, f_w = 0.19 (2 - n) [1 - J^(3/2) - (Y/4)(J -
// 2 Y J^4)], J = (X + R + 2 Y)/2; over a crawl space f_w = 0.19 (2 - n) X* R* Y* with
//
//	R* = 1 - R (n/2 + 0.2), Y* = 1 - Y/4, X* = 1 - {[(X - X_s)/(2 - R)]^2}^0.75,
//	X_s = (1 - R)/5 - 1.5 Y.
//
// Source: Walker and Wilson (1998).
func (h House) WindFactor() float64 {
	n, r, x, y := h.Exponent, h.R, h.X, h.Flue
	if h.CrawlSpace {
		d := (x - ((1-r)/5 - 1.5*y)) / (2 - r)
		return 0.19 * (2 - n) * (1 - math.Pow(d*d, 0.75)) * (1 - r*(n/2+0.2)) * (1 - y/4)
	}
	j := (x + r + 2*y) / 2
	return 0.19 * (2 - n) * (1 - math.Pow(j, 1.5) - y/4*(j-2*y*j*j*j*j))
}

// Shelter is S = S_0 (1 - Y) + S_flue (1.5 Y): shelter of the house and of its flue's
// top. Source: Walker and Wilson (1998).
func (h House) Shelter(house, flue float64) float64 { return house*(1-h.Flue) + flue*1.5*h.Flue }
