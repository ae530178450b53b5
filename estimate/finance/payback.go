package finance

import (
	"fmt"
	"math"
)

// SimplePayback is I/S in years; +Inf, "never", where nothing is saved; 0 where
// something is and there is nothing to pay back.
func SimplePayback(investment, saving float64) float64 {
	if !(saving > 0) {
		return math.Inf(1)
	}
	return math.Max(0, investment) / saving
}

// DiscountedPayback is -ln(1 - i I/S)/ln(1 + i) in years; +Inf where i I >= S.
func DiscountedPayback(investment, saving, rate float64) float64 {
	return DiscountedPaybackWithRise(investment, saving, rate, 0)
}

// DiscountedPaybackWithRise is the N at which S times the present-value factor
// equals I: ln(1 + (q - 1) I/(q S))/ln(q), q = (1+e)/(1+i); I/S at e = i. +Inf where
// it is never reached.
func DiscountedPaybackWithRise(investment, saving, rate, rise float64) float64 {
	simple := SimplePayback(investment, saving)
	q1 := (rise - rate) / (1 + rate)
	if q1 == 0 || simple == 0 || math.IsInf(simple, 1) {
		return simple
	}
	left := q1 / (1 + q1) * simple
	if left <= -1 {
		return math.Inf(1)
	}
	return math.Log1p(left) / math.Log1p(q1)
}

// PaybackWords says a payback: years with one decimal, or "never".
func PaybackWords(years float64) string {
	if math.IsInf(years, 1) {
		return "never"
	}
	return fmt.Sprintf("%.1f years", years)
}
