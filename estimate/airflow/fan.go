package airflow

import "math"

// Quadrature puts an unbalanced fan flow and infiltration together:
// sqrt(V_u^2 + V_inf^2). Source: ASHRAE Fundamentals. The estimate uses this rule.
func Quadrature(unbalanced, infiltration float64) float64 {
	return math.Sqrt(float64(unbalanced*unbalanced) + float64(infiltration*infiltration))
}

// HalfFan puts them together as V_inf + V_u/2 while the fan moves less than twice
// the infiltration, as V_u above. Source: Palmiter and Bond.
func HalfFan(infiltration, unbalanced float64) float64 {
	if unbalanced < 2*infiltration {
		return infiltration + unbalanced/2
	}
	return unbalanced
}

// SuperposedFan puts them together as V_u + phi V_inf, phi = V_inf/(V_inf + V_u).
// Source: ASHRAE 62.2.
func SuperposedFan(infiltration, unbalanced float64) float64 {
	if infiltration <= 0 {
		return unbalanced
	}
	return unbalanced + infiltration*infiltration/(infiltration+unbalanced)
}
