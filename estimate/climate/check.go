package climate

import (
	"errors"
	"fmt"
	"math"
	"strings"

	"kelvinrow/estimate/solar"
)

// Bounds of what is plausible for a monthly climate of an inhabited place.
const (
	lowestMonthC     = -60.0
	highestMonthC    = 45.0
	lowestDesignC    = -70.0
	highestDesignC   = 30.0
	highestWindMS    = 30.0
	lowestAltitudeM  = -450.0
	highestAltitudeM = 5500.0

	yearHours     = 8760.0
	leapYearHours = 8784.0

	// outsideSlackKWhM2 lets a month in which the sun first rises or last sets
	// near the pole have more than its average day would give.
	outsideSlackKWhM2 = 5.0
)

// FillVertical sets every month's irradiation on vertical planes from that on
// the horizontal, over snow-free ground; see solar.Vertical.
func (c *Climate) FillVertical() {
	for i := range c.Months {
		m := &c.Months[i]
		v := &m.VerticalKWhM2
		v[North], v[East], v[South], v[West] = solar.Vertical(
			c.LatitudeDeg, i+1, m.Hours, m.HorizontalKWhM2, solar.GroundReflectance)
	}
}

// Validate returns everything in the climate that cannot be, joined, or nil.
func (c *Climate) Validate() error {
	var problems []error
	complain := func(format string, args ...any) {
		problems = append(problems, fmt.Errorf(format, args...))
	}
	within := func(what string, x, low, high float64, unit string) {
		if !(x >= low && x <= high) { // NaN is not within anything
			complain("%s: %g %s is not between %g and %g", what, x, unit, low, high)
		}
	}

	if strings.TrimSpace(c.Name) == "" {
		complain("name is missing")
	}
	within("latitude", c.LatitudeDeg, -90, 90, "degrees")
	within("altitude", c.AltitudeM, lowestAltitudeM, highestAltitudeM, "m")
	within("design outdoor temperature", c.DesignOutdoorC, lowestDesignC, highestDesignC, "C")
	if int(c.Terrain) >= NumTerrains {
		complain("terrain: %d is unknown", c.Terrain)
	}

	hours, coldest := 0.0, math.Inf(1)
	for i := range c.Months {
		m := &c.Months[i]
		what := func(quantity string) string { return fmt.Sprintf("month %d: %s", i+1, quantity) }
		if !(m.Hours > 0) {
			complain("%s: %g h is not positive", what("length"), m.Hours)
		}
		hours += m.Hours
		if m.OutdoorC < coldest { // a NaN, complained of below, is not
			coldest = m.OutdoorC
		}
		within(what("outdoor temperature"), m.OutdoorC, lowestMonthC, highestMonthC, "C")
		within(what("wind"), m.Wind10M, 0, highestWindMS, "m/s")
		// More than the sun sends is nearly always a wrong unit: MJ for kWh. It
		// can only be told where latitude and length are right.
		tellable := math.Abs(c.LatitudeDeg) <= 90 && m.Hours > 0
		most := m.Hours/24*solar.ExtraterrestrialKWhM2(c.LatitudeDeg, i+1) + outsideSlackKWhM2
		switch h := m.HorizontalKWhM2; {
		case !(h >= 0) || math.IsInf(h, 0):
			complain("%s: %g kWh/m2 is not zero or more", what("horizontal irradiation"), h)
		case tellable && h > most:
			complain("%s: %.4g kWh/m2 is more than the %.4g outside the atmosphere at latitude %g",
				what("horizontal irradiation"), h, most, c.LatitudeDeg)
		}
		for o, v := range m.VerticalKWhM2 {
			if !(v >= 0) || math.IsInf(v, 0) {
				complain("%s: %g kWh/m2 is not zero or more", what("irradiation on "+Orientation(o).String()), v)
			}
		}
	}
	if !(math.Abs(hours-yearHours) < 1e-6 || math.Abs(hours-leapYearHours) < 1e-6) {
		complain("months add up to %g h, not %g or %g", hours, yearHours, leapYearHours)
	}
	if c.DesignOutdoorC > coldest {
		complain("design outdoor temperature: %g C is warmer than the coldest month's mean, %.4g C", c.DesignOutdoorC, coldest)
	}
	return errors.Join(problems...)
}
