package estimate

import (
	"testing"

	"kelvinrow/estimate/building"
)

// TestOrderOfMagnitude holds typical buildings of the starter rules to what is
// published of calculated heating needs: around 225 kWh/(m2 a) on the average of
// 3,400 German homes, with poor ones near 300 to 500 and good ones below 100
// (ratings in Sunikka-Blank and Galvin 2012, from memory; they include hot water
// and system losses, so needs lie lower). Bounds are wide on purpose: they catch a
// wrong unit or a lost factor, not a rule that is ten per cent off.
func TestOrderOfMagnitude(t *testing.T) {
	b := testBasis(t)
	for _, c := range []struct {
		use       string
		year      int
		areaM2    float64
		storeys   float64
		low, high float64 // kWh/(m2 a)
	}{
		{"detached house", 1910, 140, 2, 200, 420},
		{"detached house", 1960, 140, 1.5, 170, 380},
		{"detached house", 1985, 140, 1.5, 90, 200},
		{"detached house", 2015, 140, 2, 25, 90},
		{"terraced house", 1960, 105, 2, 100, 260},
		{"apartment block", 1910, 900, 4, 110, 260},
		{"apartment block", 1965, 1500, 4, 90, 220},
		{"apartment block", 2015, 1500, 4, 15, 70},
		{"school", 1970, 4000, 2, 60, 200},
		{"church", 1880, 500, 1, 80, 420},
		{"office", 2015, 3000, 4, 10, 70},
	} {
		r := b.Evaluate(testBuilding("x", values{
			building.UseField: c.use, building.YearBuilt: c.year, building.FloorArea: c.areaM2, building.Storeys: c.storeys,
			building.YearWindows: c.year, // as built
		}))
		if r.Failed != "" {
			t.Errorf("%s of %d: %s", c.use, c.year, r.Failed)
			continue
		}
		if q := r.NeedKWh / r.FloorAreaM2; q < c.low || q > c.high {
			t.Errorf("%s of %d needs %.0f kWh/(m2 a), outside %g to %g", c.use, c.year, q, c.low, c.high)
		} else {
			t.Logf("%s of %d: %.0f kWh/(m2 a), %.2f air changes per hour", c.use, c.year, q, r.AirChangesPerH)
		}
	}
}
