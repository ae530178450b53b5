package balance

import "math"

// Parameters of the monthly method. Source: ISO 13790:2008, 12.2.1.1 and 13.2.2.1.
const (
	a0     = 1.0
	tau0H  = 15.0
	redB   = 3.0 // b_H,red
	hoursS = 3600.0
)

// TimeConstant is tau = C_m/(H_tr + H_ve) in h, C_m in J/K, H in W/K. Source:
// ISO 13790:2008, 12.2.1.3.
func TimeConstant(capacityJK, heatWK float64) float64 { return capacityJK / hoursS / heatWK }

// exponent is a = 1 + tau/15.
func exponent(tauH float64) float64 { return a0 + tauH/tau0H }

// Utilisation is eta, the share of gains at ratio gamma that replaces heating, with
// a = 1 + tau/15 >= 1: (1 - gamma^a)/(1 - gamma^(a+1)); a/(a+1) at gamma = 1; 1/gamma
// below 0. Source: ISO 13790:2008, 12.2.1.1.
func Utilisation(gamma, a float64) float64 {
	if gamma < 0 {
		return finite(1 / gamma)
	}
	eta, _ := utilise(gamma, a)
	return eta
}

// utilise returns eta, and the share of the loss left for heating, 1 - eta gamma,
// for gamma >= 0.
//
// As printed, numerator and denominator of eta vanish at gamma = 1, and 1 - eta
// gamma cancels above it. With e = gamma^a - 1, made by expm1 of a ln(gamma) so that
// it keeps its digits near 1,
//
//	eta = e/(e gamma + (gamma - 1)), 1 - eta gamma = (gamma - 1)/(e gamma + (gamma - 1))
//
// where both terms of the sum have one sign. Above 1 the same is done with
// gamma^-a - 1, which cannot overflow. Only gamma = 1 itself is apart, as 0/0. So
// there is neither a step nor a window with another formula: eta is within a few
// units of its last digit for every gamma, and the share left within 4e-16.
func utilise(gamma, a float64) (eta, unmet float64) {
	switch {
	case gamma < 1:
		e := math.Expm1(a * math.Log(gamma))
		d := float64(e*gamma) + (gamma - 1)
		return e / d, (gamma - 1) / d
	case gamma > 1:
		e := math.Expm1(-a * math.Log(gamma))
		d := e + (1 - gamma)
		return e / d, (1 - gamma) * (1 + e) / d
	}
	return 1 / (1 + 1/a), 1 / (1 + a)
}

// IntermittencyFactor is a_red = 1 - 3 (15/tau) gamma (1 - f_hr), between f_hr and 1:
// the share of the need left by heating only a share f_hr of the hours. Without
// gains it is 1, without capacity f_hr. Source: ISO 13790:2008, 13.2.2.1 (not
// corroborated).
func IntermittencyFactor(tauH, gamma, setpointShare float64) float64 {
	off := 1 - setpointShare
	if !(off > 0 && gamma > 0) {
		return 1
	}
	if !(tauH > 0) {
		return math.Max(0, setpointShare)
	}
	red := 1 - redB*(tau0H/tauH)*gamma*off
	return math.Min(1, math.Max(math.Max(0, setpointShare), red))
}

// SetBackMean is the mean room temperature of a day with the heating set back for
// some hours: it decays to the outdoor temperature with tau until the set-back
// temperature holds it, and is back at once. Source: one thermal node, Newton's
// law of cooling.
func SetBackMean(indoorC, outdoorC, setBackC, tauH, hours float64) float64 {
	hours = math.Min(24, math.Max(0, hours))
	drop := indoorC - outdoorC
	if !(drop > 0) || !(setBackC < indoorC) {
		return indoorC
	}
	free := hours // until the set-back temperature is reached
	if setBackC > outdoorC {
		free = math.Min(hours, -tauH*math.Log((setBackC-outdoorC)/drop))
	}
	decay := 0.0 // kelvin-hours above outdoors while free
	if tauH > 0 {
		decay = drop * tauH * -math.Expm1(-free/tauH)
	}
	held := math.Max(setBackC, outdoorC) - outdoorC
	return outdoorC + (drop*(24-hours)+decay+held*(hours-free))/24
}
