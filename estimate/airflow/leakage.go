package airflow

import "math"

// FlowCoefficient is C = n50 V / 50^n in m3/(s Pa^n).
func FlowCoefficient(n50PerH, volumeM3, exponent float64) float64 {
	return n50PerH * volumeM3 / 3600 / math.Pow(testPa, exponent)
}

// LeakageM3S is the power law V = C dp^n in m3/s: the flow through leaks at a
// pressure difference in Pa.
func LeakageM3S(coefficient, exponent, pressurePa float64) float64 {
	return coefficient * math.Pow(pressurePa, exponent)
}

// N50FromQ50 turns leakage per envelope area at 50 Pa in m3/(h m2) into air
// changes at 50 Pa, 1/h: q50 A_env/V.
func N50FromQ50(q50, envelopeM2, volumeM3 float64) float64 { return q50 * envelopeM2 / volumeM3 }

// EffectiveLeakageAreaCM2 is the area in cm2 of an orifice that leaks as the
// building at a reference pressure: A_L = C dp^(n-1/2) sqrt(rho/2)/C_D. In use: dp
// 4 Pa with C_D 1, and 10 Pa with 0.611. Source: ASHRAE Fundamentals.
func EffectiveLeakageAreaCM2(coefficient, exponent, densityKgM3, referencePa, discharge float64) float64 {
	return 1e4 * coefficient * math.Pow(referencePa, exponent-0.5) * math.Sqrt(densityKgM3/2) / discharge
}

// NormalisedLeakage is NL = 1000 (A_L/A_floor)(H/2.5 m)^0.3, A_L in cm2 at 4 Pa.
// Source: ASHRAE 119.
func NormalisedLeakage(leakageCM2, floorM2, heightM float64) float64 {
	return 1000 * leakageCM2 / 1e4 / floorM2 * math.Pow(heightM/2.5, 0.3)
}
