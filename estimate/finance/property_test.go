package finance

import (
	"math"
	"math/big"
	"testing"
)

// factorExactly sums ((1+e)/(1+i))^t year by year in 300-bit arithmetic.
func factorExactly(rate, rise float64, years int) float64 {
	number := func(x float64) *big.Float { return new(big.Float).SetPrec(300).SetFloat64(x) }
	one := number(1)
	q := new(big.Float).Quo(new(big.Float).Add(one, number(rise)), new(big.Float).Add(one, number(rate)))
	sum, term := number(0), number(1)
	for range years {
		term.Mul(term, q)
		sum.Add(sum, term)
	}
	f, _ := sum.Float64()
	return f
}

// The factor against the sum it stands for, with price rises next to the interest
// rate, where the printed closed form loses its digits, and interest next to none.
func TestPresentValueFactorAgainstSum(t *testing.T) {
	t.Parallel()
	worst, printed := 0.0, 0.0
	for _, rate := range []float64{0, 1e-15, 1e-9, 0.001, 0.03, 0.05, 0.2, -0.02} {
		for _, apart := range []float64{0, 1e-16, 1e-15, 1e-13, 1e-10, 1e-7, 1e-4, 0.01, 0.08, -1e-15, -1e-9, -0.03, -rate} {
			rise := rate + apart
			for _, years := range []int{1, 2, 15, 30, 60} {
				want := factorExactly(rate, rise, years)
				worst = math.Max(worst, math.Abs(PresentValueFactor(rate, rise, float64(years))/want-1))
				if rise != rate {
					q := (1 + rise) / (1 + rate)
					closed := (1 + rise) / (rate - rise) * (1 - math.Pow(q, float64(years)))
					printed = math.Max(printed, math.Abs(closed/want-1))
				}
			}
		}
	}
	t.Logf("largest relative error %.1e; of the formula as printed %.1e", worst, printed)
	if worst > 4e-15 { // sixty years multiply what rounding does to the rate
		t.Errorf("relative error %g", worst)
	}
	if printed < 1e-3 {
		t.Errorf("the printed formula is off by %g only: the stable form has no reason", printed)
	}
}

func TestPresentValueFactorAtTheEnds(t *testing.T) {
	t.Parallel()
	for _, row := range []struct{ rate, rise, years, want float64 }{
		{0.03, 0, 0, 0}, {0.03, 0, -5, 0}, {0.03, -1, 20, 0}, {0.05, 0.05, 33, 33}, {0.05, 0, math.Inf(1), 20},
	} {
		near(t, "factor", PresentValueFactor(row.rate, row.rise, row.years), row.want, 1e-12)
	}
	if !math.IsInf(CapitalRecovery(0.03, 0), 1) {
		t.Error("an investment without life has a finite annuity")
	}
	for what, cost := range map[string]float64{
		"nothing saved": CostOfSavedEnergy(1000, 0, 0, 0.03, 20), "more used": CostOfSavedEnergy(1000, 0, -5, 0.03, 20),
		"no life": CostOfSavedEnergy(1000, 0, 5, 0.03, 0), "no CO2": AbatementCost(1000, 10, 0, 0.03, 20),
	} {
		if !math.IsInf(cost, 1) {
			t.Errorf("%s: %g, want never", what, cost)
		}
	}
	if c := CostOfSavedEnergy(0, 20, 100, 0.03, 0); c != 0.2 {
		t.Errorf("nothing invested: %g, want upkeep over saving", c)
	}
}

// After the discounted payback the NPV is nothing, before it negative.
func TestPaybackIsWhereTheValueTurns(t *testing.T) {
	t.Parallel()
	for _, rate := range []float64{-0.01, 0, 1e-12, 0.02, 0.05, 0.1} {
		for _, rise := range []float64{-0.03, 0, 0.02, 0.05, 0.08} {
			for _, saving := range []float64{1, 100, 700, 5000} {
				p := DiscountedPaybackWithRise(10_000, saving, rate, rise)
				if math.IsInf(p, 1) {
					// Not even the value of all years to come pays.
					if f := saving * PresentValueFactor(rate, rise, 1e6); f > 10_000*(1+1e-9) {
						t.Errorf("rate %g, rise %g, saving %g: never, yet worth %g", rate, rise, saving, f)
					}
					continue
				}
				near(t, "NPV at the payback", NetPresentValue(10_000, saving, 0, rate, rise, p), 0, 1e-6)
				if NetPresentValue(10_000, saving, 0, rate, rise, 0.9*p) >= 0 {
					t.Errorf("rate %g, rise %g, saving %g: paid back before %g years", rate, rise, saving, p)
				}
				if rate > rise && p < SimplePayback(10_000, saving) {
					t.Errorf("discounting shortens the payback to %g", p)
				}
			}
		}
	}
	for _, p := range []float64{SimplePayback(100, 0), SimplePayback(100, -5), SimplePayback(0, 0), DiscountedPayback(100, -5, 0.03), DiscountedPayback(100, 5, 0.05)} {
		if PaybackWords(p) != "never" {
			t.Errorf("%g years, want never", p)
		}
	}
	near(t, "nothing to pay back", DiscountedPayback(0, 5, 0.03), 0, 0)
}

// Global cost by a loop over years, as the standard describes it.
func TestGlobalCostAgainstYears(t *testing.T) {
	t.Parallel()
	for _, rate := range []float64{0, 0.03, 0.08} {
		for _, life := range []int{7, 10, 15, 20, 30, 31, 50} {
			const period = 30
			want := GlobalCost{Initial: 9000}
			age := 0
			for year := 1; year <= period; year++ {
				d := math.Pow(1+rate, -float64(year))
				want.Running += 500 * math.Pow(1.01, float64(year)) * d
				age++
				if age == life && year < period {
					want.Replacement += 4000 * d
					age = 0
				}
			}
			want.Residual = 4000 * float64(life-age) / float64(life) * math.Pow(1+rate, -period)
			got := GlobalCostOver(9000, 500, []Component{{4000, float64(life)}, {100, 0}}, rate, 0.01, period)
			near(t, "running", got.Running, want.Running, 1e-8)
			near(t, "replacement", got.Replacement, want.Replacement, 1e-8)
			near(t, "residual", got.Residual, want.Residual, 1e-8)
			near(t, "total", got.Total(), want.Total(), 1e-7)
		}
	}
	// Three lives of a tenth make three tenths, though 0.3/0.1 is a little less
	// than 3 in binary.
	near(t, "replacements in three lives", GlobalCostOver(0, 0, []Component{{1, 0.1}}, 0, 0, 0.3).Replacement, 2, 0)
}

func TestLearning(t *testing.T) {
	t.Parallel()
	near(t, "one doubling", LearnedCost(50, 2, 0.15), 50*0.85, 1e-12)
	near(t, "no growth", LearnedCost(50, 1, 0.15), 50, 0)
}

// The unit normal loss against its integral of max(0, x - z) over the normal
// density, by Simpson's rule.
func TestUnitNormalLossIsItsIntegral(t *testing.T) {
	t.Parallel()
	for z := -3.0; z <= 3; z += 0.5 {
		const steps, end = 2000, 12.0
		h := (end - z) / steps
		sum := 0.0
		for i := 0; i <= steps; i++ {
			x := z + h*float64(i)
			w := 2.0 + 2*float64(i%2)
			if i == 0 || i == steps {
				w = 1
			}
			sum += w * (x - z) * math.Exp(-x*x/2) / math.Sqrt(2*math.Pi)
		}
		near(t, "L", UnitNormalLoss(z), sum*h/3, 1e-9)
	}
}
