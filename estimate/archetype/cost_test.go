package archetype

import (
	"math"
	"testing"
)

// Economies of size, by hand: 1,000 + 100 x 400 up to 400 units; 800 units are twice
// as many, each 2^-0.1 = 0.93303 of the price.
func TestCostFallsWithSize(t *testing.T) {
	m := Measure{FixedCost: 1000, UnitCost: 100, SizeFrom: 400, SizeExponent: 0.1}
	for q, want := range map[float64]float64{0: 1000, 100: 11000, 400: 41000, 800: 1000 + 80000*0.9330329915368074} {
		if got := m.Cost(q); math.Abs(got-want) > 1e-6 {
			t.Errorf("%g units cost %g, want %g", q, got, want)
		}
	}
	last := 0.0
	for q := 1.0; q < 1e6; q *= 1.1 {
		if c := m.Cost(q); c <= last {
			t.Fatalf("%g units cost %g, fewer cost %g", q, c, last)
		} else {
			last = c
		}
	}
	m.SizeExponent = 0
	if m.Cost(1e6) != 1000+1e8 {
		t.Error("without an exponent every unit costs the same")
	}
}
