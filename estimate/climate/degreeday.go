package climate

import "math"

// HitchinK is the constant k of Hitchin's formula, 1/K, that fits the United
// Kingdom's mean spread of daily temperatures (CIBSE TM41).
const HitchinK = 0.71

// DegreeDay returns the degree days in Kd of a day of mean temperature meanC:
// base - mean, nothing above the base.
func DegreeDay(baseC, meanC float64) float64 {
	return math.Max(0, baseC-meanC)
}

// DegreeDayThreshold returns the degree days of a day that counts only where
// its mean is at or below the heating threshold; with base 18 and threshold 15
// the definition of the statistical office of the European Union.
func DegreeDayThreshold(baseC, thresholdC, meanC float64) float64 {
	if meanC > thresholdC {
		return 0
	}
	return DegreeDay(baseC, meanC)
}

// DegreeDayMinMax returns the degree days of a day from its lowest and highest
// temperature by the four cases of the British meteorological office, which
// count the part of the day below the base.
func DegreeDayMinMax(baseC, lowC, highC float64) float64 {
	mean := (lowC + highC) / 2
	switch {
	case lowC > baseC:
		return 0
	case mean > baseC:
		return (baseC - lowC) / 4
	case highC >= baseC:
		return (baseC-lowC)/2 - (highC-baseC)/4
	}
	return baseC - mean
}

// DegreeDaysHitchin returns the degree days of a month in Kd from its mean
// temperature:
//
//	DD = N (T_b - T_m)/(1 - exp(-k (T_b - T_m))), N/k at T_m = T_b
//
// k in 1/K is HitchinK or 2.5/sigma, sigma the spread of the month's daily
// means; it must be positive.
//
// Source: Hitchin (1983) as in CIBSE TM41.
func DegreeDaysHitchin(baseC, meanC, days, k float64) float64 {
	x := baseC - meanC
	if !(math.Abs(k*x) > 1e-12) {
		return days / k
	}
	return -days * x / math.Expm1(-k*x)
}

// DegreeDays returns the year's degree days in Kd to a base temperature, from
// the monthly means by Hitchin's formula with HitchinK.
func (c *Climate) DegreeDays(baseC float64) float64 {
	sum := 0.0
	for i := range c.Months {
		m := &c.Months[i]
		sum += DegreeDaysHitchin(baseC, m.OutdoorC, m.Hours/24, HitchinK)
	}
	return sum
}
