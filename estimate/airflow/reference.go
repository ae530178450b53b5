package airflow

import "math"

// InfiltrationRuleOfThumb is the air change by infiltration as n50/20, 1/h, mean
// over a heating season. Source: Kronvall and Persily.
func InfiltrationRuleOfThumb(n50PerH float64) float64 { return n50PerH / 20 }

// StandardInfiltrationM3H is infiltration in m3/h by shielding coefficients e and
// f: V n50 e / (1 + (f/e) [V_u/(V n50)]^2), V_u the excess of supply or extract.
// Source: ISO 13789, annex.
func StandardInfiltrationM3H(volumeM3, n50PerH, e, f, unbalancedM3H float64) float64 {
	at50 := volumeM3 * n50PerH
	u := unbalancedM3H / at50
	return at50 * e / (1 + f/e*u*u)
}

// BasicModelLS is infiltration in L/s by the ASHRAE basic model (Sherman and
// Grimsrud): A_L sqrt(C_s |dT| + C_w v^2), A_L in cm2 at 4 Pa and discharge
// coefficient 1, v in m/s at the weather station; C_s in (L/s)^2/(cm4 K) by
// storeys, C_w in (L/s)^2/(cm4 (m/s)^2) by storeys and shelter.
func BasicModelLS(leakageCM2, stack, wind, differenceK, windMS float64) float64 {
	return leakageCM2 * math.Sqrt(stack*math.Abs(differenceK)+wind*windMS*windMS)
}

// BasicStackFactor is what C_s of the basic model comes from, in m/(s K^0.5):
// (1 + R/2)/3 (1 - X^2/(2 - R)^2)^(3/2) sqrt(g H/T).
func BasicStackFactor(r, x, heightM, k float64) float64 {
	return (1 + r/2) / 3 * math.Pow(1-x*x/((2-r)*(2-r)), 1.5) * math.Sqrt(gravity*heightM/k)
}

// EnhancedModelM3S is infiltration in m3/s by the ASHRAE enhanced model:
// V_s = C C_s |dT|^n, V_w = C C_w v^(2n), sqrt(V_s^2 + V_w^2); C in m3/(s Pa^n), C_s in
// (Pa/K)^n, C_w in (Pa s2/m2)^n, v the sheltered wind in m/s.
func EnhancedModelM3S(coefficient, exponent, stack, wind, differenceK, shelteredMS float64) float64 {
	s := coefficient * stack * math.Pow(math.Abs(differenceK), exponent)
	w := coefficient * wind * math.Pow(shelteredMS, 2*exponent)
	return math.Sqrt(s*s + w*w)
}

// CrawlSpaceWindFactor is House.WindFactor without flue over a crawl space.
func CrawlSpaceWindFactor(exponent, r, x float64) float64 {
	return House{Exponent: exponent, R: r, X: x, CrawlSpace: true}.WindFactor()
}

// SwamiChandra is the wind pressure coefficient of a low building's wall over
// that of the wall square to the wind, at an angle in radians between the wind
// and the wall's normal; g is the logarithm of the plan's side ratio, this wall
// over the next. Source: Swami and Chandra (1987).
func SwamiChandra(angle, g float64) float64 {
	half, whole, twist := math.Sin(angle/2), math.Sin(angle), math.Sin(2*angle*g)
	c := math.Cos(angle / 2)
	return math.Log(1.248 - 0.703*half - 1.175*whole*whole + 0.131*twist*twist*twist +
		0.769*c + 0.07*g*g*half*half + 0.717*c*c)
}
