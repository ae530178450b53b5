package finance

import (
	"math"
	"testing"
)

func near(t *testing.T, what string, got, want, tolerance float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tolerance) {
		t.Errorf("%s = %.10g, want %g within %g", what, got, want, tolerance)
	}
}

// Present value of one a year and its inverse: standard annuity tables, from
// memory, four and five decimals; the annuity's formula was read
// (danielrsoto.com, capital recovery factor).
func TestAnnuityTable(t *testing.T) {
	t.Parallel()
	for _, row := range []struct{ rate, years, factor, recovery float64 }{
		{0.03, 20, 14.8775, 0.06722}, {0.03, 30, 19.6004, 0.05102}, {0.04, 25, 15.6221, 0.06401},
		{0.05, 15, 10.3797, 0.09634}, {0.05, 30, 15.3725, 0.06505}, {0.07, 20, 10.5940, 0.09439},
		{0.08, 10, 6.7101, 0.14903},
	} {
		near(t, "present-value factor", PresentValueFactor(row.rate, 0, row.years), row.factor, 5e-5)
		near(t, "capital recovery", CapitalRecovery(row.rate, row.years), row.recovery, 5e-6)
	}
	if f := PresentValueFactor(0, 0, 17); f != 17 {
		t.Errorf("without interest %g, want the years", f)
	}
}

// The expected values below are derived: recomputed from the equations apart from
// this program. Tolerance: half a unit of the last digit given, unless said.

func TestNetPresentValueByHand(t *testing.T) {
	t.Parallel()
	near(t, "NPV at 3 %", NetPresentValue(10_000, 900, 0, 0.03, 0, 20), 3389.73, 0.005)
	// The internal rate of return is 6.395 %: there the NPV is nothing. Half of its
	// last digit moves the NPV by 0.45.
	near(t, "NPV at the internal rate", NetPresentValue(10_000, 900, 0, 0.06395, 0, 20), 0, 0.45)
	near(t, "factor with price rise", PresentValueFactor(0.04, 0.02, 20), 16.413, 5e-4)
	near(t, "real rate", RealRate(0.05, 0.02), 0.0294118, 5e-8)
}

func TestPaybackByHand(t *testing.T) {
	t.Parallel()
	near(t, "1000 a year, simple", SimplePayback(10_000, 1000), 10, 1e-12)
	near(t, "1000 a year at 5 %", DiscountedPayback(10_000, 1000, 0.05), 14.21, 0.005)
	near(t, "900 a year, simple", SimplePayback(10_000, 900), 11.1, 0.05)
	near(t, "900 a year at 3 %", DiscountedPayback(10_000, 900, 0.03), 13.72, 0.005)
	if p := PaybackWords(DiscountedPayback(10_000, 400, 0.05)); p != "never" {
		t.Errorf("400 a year at 5 %%: %s", p)
	}
	if p := PaybackWords(DiscountedPayback(10_000, 900, 0.03)); p != "13.7 years" {
		t.Errorf("900 a year at 3 %%: %s", p)
	}
}

func TestCostOfSavedEnergyByHand(t *testing.T) {
	t.Parallel()
	// 0.1276 was worked with the annuity rounded to 0.05102; unrounded it is 0.12755,
	// hence a whole last digit.
	near(t, "per kWh", CostOfSavedEnergy(10_000, 0, 4000, 0.03, 30), 0.1276, 1e-4)
	near(t, "with upkeep of 80", CostOfSavedEnergy(10_000, 80, 4000, 0.03, 30), 0.1276+0.02, 1e-4)
	near(t, "per t of CO2", AbatementCost(20_000, 6000*0.10, 6000*0.24/1000, 0.03, 30), 291.9, 0.05)
	near(t, "per t, 8000 due anyway", AbatementCost(12_000, 6000*0.10, 6000*0.24/1000, 0.03, 30), 8.5, 0.05)
}

// No published example of EN 15459-1 was found.
func TestGlobalCostByHand(t *testing.T) {
	t.Parallel()
	g := GlobalCostOver(25_000, 1200, []Component{{Cost: 5000, LifeYears: 20}}, 0.03, 0, 30)
	near(t, "running", g.Running, 23_520.5, 0.05)
	near(t, "replacement", g.Replacement, 2768.4, 0.05)
	near(t, "residual", g.Residual, 1030.0, 0.05)
	near(t, "total", g.Total(), 50_258.9, 0.1)
}

func TestLearningByHand(t *testing.T) {
	t.Parallel()
	near(t, "b", math.Log2(1-0.2), -0.3219, 5e-5)
	near(t, "four times", LearnedCost(1, 4, 0.2), 0.64, 1e-12)
	near(t, "ten times", LearnedCost(1, 10, 0.2), 0.4765, 5e-5)
}

// Unit normal loss: table of Bayesian decision theory, from memory, four decimals.
// Mean 500 and deviation 1000 against doing nothing: 197.8, confirmed by 4 million
// random draws (197.5); derived.
func TestUnitNormalLossTable(t *testing.T) {
	t.Parallel()
	for _, row := range []struct{ z, want float64 }{{0, 0.3989}, {0.5, 0.1978}, {1, 0.0833}, {1.5, 0.0293}, {2, 0.0085}} {
		near(t, "L", UnitNormalLoss(row.z), row.want, 6e-5)
	}
	near(t, "value of knowing", 1000*UnitNormalLoss(500.0/1000), 197.8, 0.05)
}
