package climate

import (
	"math"
	"testing"
)

// Derived from Hitchin's formula (CIBSE TM41), base 15.5 C, 31 days, k 0.71.
// Tolerance: half a unit of the printed decimal for the first three, 0.02 for
// the two printed to hundredths.
func TestDegreeDaysHitchin(t *testing.T) {
	t.Parallel()
	for _, c := range []struct{ mean, want, tol float64 }{
		{5.5, 310.3, 0.05}, {10.5, 159.6, 0.05}, {14.5, 61.0, 0.05}, {15.5, 43.66, 0.02}, {18.5, 12.54, 0.02},
	} {
		near(t, "degree days", DegreeDaysHitchin(15.5, c.mean, 31, HitchinK), c.want, c.tol)
	}
}

// Smooth through the base, the plain difference in deep winter, none in a hot
// month, never rising with the mean.
func TestDegreeDaysHitchinLimits(t *testing.T) {
	t.Parallel()
	for _, d := range []float64{1e-13, 1e-9, 1e-6} {
		near(t, "just below", DegreeDaysHitchin(15.5, 15.5-d, 31, HitchinK), 31/HitchinK, 1e-4)
		near(t, "just above", DegreeDaysHitchin(15.5, 15.5+d, 31, HitchinK), 31/HitchinK, 1e-4)
	}
	near(t, "winter", DegreeDaysHitchin(15.5, -20, 31, HitchinK), 31*35.5, 1e-6)
	near(t, "heat", DegreeDaysHitchin(15.5, 2000, 31, HitchinK), 0, 1e-9)
	last := math.Inf(1)
	for mean := -30.0; mean < 40; mean += 0.5 {
		d := DegreeDaysHitchin(15.5, mean, 31, HitchinK)
		if d > last || d < 0 || d < 31*(15.5-mean)-1e-9 {
			t.Errorf("mean %g: %g after %g", mean, d, last)
		}
		last = d
	}
}

// Published: Statistics Netherlands, heating degree days: 18 less the day's
// mean, none above 18 C. Exact: whole numbers.
func TestDegreeDay(t *testing.T) {
	t.Parallel()
	for _, c := range []struct{ mean, want float64 }{{10, 8}, {-4, 22}, {20, 0}} {
		if got := DegreeDay(18, c.mean); got != c.want {
			t.Errorf("%g C: %g, want %g", c.mean, got, c.want)
		}
	}
	// From memory: definition of Eurostat, base 18 C, threshold 15 C.
	for _, c := range []struct{ mean, want float64 }{{10, 8}, {15, 3}, {15.1, 0}, {20, 0}} {
		if got := DegreeDayThreshold(18, 15, c.mean); got != c.want {
			t.Errorf("threshold, %g C: %g, want %g", c.mean, got, c.want)
		}
	}
}

// Published formula (vesma.com, degree-day calculation of the British
// meteorological office), values derived, base 15.5 C. Exact: binary fractions.
func TestDegreeDayMinMax(t *testing.T) {
	t.Parallel()
	for _, c := range []struct{ low, high, want float64 }{
		{2, 8, 10.5}, {11, 16, 2.125}, {13, 19, 0.625}, {16, 22, 0},
	} {
		if got := DegreeDayMinMax(15.5, c.low, c.high); got != c.want {
			t.Errorf("%g to %g C: %g, want %g", c.low, c.high, got, c.want)
		}
	}
	// The four cases meet where they change: highest, mean, lowest at the base.
	for swing := 1.0; swing < 20; swing++ {
		for _, low := range []float64{15.5 - swing, 15.5 - swing/2, 15.5} {
			near(t, "joint", DegreeDayMinMax(15.5, low-1e-9, low+swing-1e-9), DegreeDayMinMax(15.5, low+1e-9, low+swing+1e-9), 1e-8)
		}
	}
}

func TestClimateDegreeDays(t *testing.T) {
	t.Parallel()
	c := Climate{}
	for m := range c.Months {
		c.Months[m].Hours, c.Months[m].OutdoorC = 730, 5.5
	}
	near(t, "year", c.DegreeDays(15.5), DegreeDaysHitchin(15.5, 5.5, 365, HitchinK), 1e-9)
	h := harrowmark(t)
	if lower, higher := h.DegreeDays(12), h.DegreeDays(18); !(lower > 0 && higher > lower) {
		t.Errorf("degree days %g to base 12, %g to base 18", lower, higher)
	}
}
