package solar

import (
	"math"
	"testing"
)

// BeamShare's pieces put together by hand give Vertical.
func TestVerticalIsBeamShareOfTheAverageDay(t *testing.T) {
	t.Parallel()
	const phi, month, hours, horizontal, rho = 52.0, 3, 744.0, 73.7, 0.2
	delta := Declination(75)
	k := horizontal / (31 * ExtraterrestrialKWhM2(phi, month))
	fd := DiffuseShare(k, SunsetHourAngle(phi, delta))
	on := func(az float64) float64 {
		return horizontal * (BeamShare(phi, delta, 90, az, fd, true) + fd/2 + rho/2)
	}
	n, e, s, w := Vertical(phi, month, hours, horizontal, rho)
	near(t, "north", n, on(180), 1e-9)
	near(t, "east", e, on(-90), 1e-9)
	near(t, "south", s, on(0), 1e-9)
	near(t, "west", w, on(90), 1e-9)
}

// Derived: 52 N, K_T .30, .40, .48 with the rows of BeamShare's test: the beam
// share there plus f_d/2 plus rho/2. Tolerance 2.5 % of the beam share,
// what normalising r_t changes, and the 0.003 of those rows.
func TestVerticalAgainstDerivedBeamShares(t *testing.T) {
	t.Parallel()
	for _, c := range []struct {
		month                    int
		hours, clearness         float64
		south, west, north, diff float64
	}{
		{1, 744, 0.30, 1.4015, .3056, 0, .642},
		{3, 744, 0.40, .6581, .2821, 0, math.NaN()},
		{6, 720, 0.48, .2072, .2880, .0903, .449},
	} {
		h := c.clearness * c.hours / 24 * ExtraterrestrialKWhM2(52, c.month)
		n, e, s, w := Vertical(52, c.month, c.hours, h, 0.2)
		fd := c.diff
		if math.IsNaN(fd) {
			fd = DiffuseShare(c.clearness, SunsetHourAngle(52, Declination(75)))
		}
		near(t, "south", s/h, c.south+fd/2+0.1, 0.025*c.south+0.003)
		near(t, "west", w/h, c.west+fd/2+0.1, 0.025*c.west+0.003)
		near(t, "north", n/h, c.north+fd/2+0.1, 0.025*c.north+0.003)
		if e != w {
			t.Errorf("east %g, west %g", e, w)
		}
	}
}

// Planes keep their compass names south of the equator: the mirror image of a
// day swaps north and south. Day 75 and day 258 have declinations of about
// -2.4 and 2.2, and months 6 and 12 mirror each other to a tenth of a degree.
func TestVerticalSouthernHemisphere(t *testing.T) {
	t.Parallel()
	h := 0.3 * 30 * ExtraterrestrialKWhM2(52, 12)
	n1, e1, s1, _ := Vertical(52, 12, 720, h, 0.2)
	n2, e2, s2, _ := Vertical(-52, 6, 720, h, 0.2)
	if !(s1 > 2*n1 && n2 > 2*s2) {
		t.Errorf("the sun is on the wrong side: north %g/%g, south %g/%g", n1, n2, s1, s2)
	}
	// H0 differs by the distance to the sun (6.5 %) and by 0.05 degrees of
	// declination; clearness, and with it the beam share, follow. Exact
	// mirroring is checked below.
	near(t, "sunny side", n2/s1, 1, 0.1)
	near(t, "shady side", s2/n1, 1, 0.1)
	near(t, "east", e2/e1, 1, 0.1)

	for m := 1; m <= 12; m++ {
		delta := Declination(AverageDay(m))
		for _, az := range azimuths {
			near(t, "mirror", BeamShare(-52, -delta, 90, 180-az, 0.5, true), BeamShare(52, delta, 90, az, 0.5, true), 1e-9)
		}
	}
}

// No sun, no irradiation; nonsense gives nothing and never NaN.
func TestVerticalWithoutSun(t *testing.T) {
	t.Parallel()
	for _, c := range []struct {
		latitude     float64
		month        int
		hours, horiz float64
	}{
		{52, 1, 744, 0}, {52, 1, 744, -3}, {52, 0, 744, 20}, {52, 13, 744, 20}, {52, 1, 0, 20},
		{math.NaN(), 1, 744, 0}, {91, 1, 744, 20}, {52, 1, math.NaN(), 20}, {52, 1, 744, math.NaN()}, {52, 1, 744, math.Inf(1)},
	} {
		n, e, s, w := Vertical(c.latitude, c.month, c.hours, c.horiz, 0.2)
		if n != 0 || e != 0 || s != 0 || w != 0 {
			t.Errorf("%+v: %g %g %g %g", c, n, e, s, w)
		}
	}
	// Twilight of the polar night is diffuse: half of it and half of the ground's.
	n, e, s, w := Vertical(78, 12, 744, 0.5, 0.2)
	for _, v := range []float64{n, e, s, w} {
		near(t, "polar night", v, 0.5*0.6, 1e-12)
	}
}

// Everywhere and in every month: finite, not below what sky and ground give a
// plane without sun, not above what is left of the sun outside the atmosphere
// on a plane that follows it; rising with the horizontal.
func TestVerticalBounds(t *testing.T) {
	t.Parallel()
	for phi := -90.0; phi <= 90; phi += 2.5 {
		for m := 1; m <= 12; m++ {
			h0 := 30 * ExtraterrestrialKWhM2(phi, m)
			follow := 30 * 2 * SunsetHourAngle(phi, Declination(AverageDay(m))) / 15 * ConstantWM2 * 1.035 / 1000
			last := [4]float64{}
			for _, k := range []float64{0.1, 0.2, 0.3, 0.45, 0.6, 0.75} {
				h := k * h0
				var v [4]float64
				v[0], v[1], v[2], v[3] = Vertical(phi, m, 720, h, 0.2)
				for i, x := range v {
					if math.IsNaN(x) || x < 0.1*h-1e-9 || x > follow+0.6*h+1e-9 {
						t.Errorf("%g, month %d, K %g: plane %d gets %g of %g", phi, m, k, i, x, h)
					}
					if x < last[i]*0.9 {
						t.Errorf("%g, month %d, K %g: plane %d falls from %g to %g", phi, m, k, i, last[i], x)
					}
				}
				last = v
			}
		}
	}
}
