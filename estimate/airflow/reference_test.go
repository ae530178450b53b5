package airflow

import (
	"math"
	"testing"
)

// stackByIntegration integrates the power law for unit stack pressure over a
// house of unit height: floor, ceiling, evenly leaking walls and a flue filled
// with indoor air. The neutral level comes from bisection; density differs in
// the driving pressure alone.
func stackByIntegration(h House) float64 {
	n := h.Exponent
	power1 := func(d float64) float64 { return math.Pow(d, n+1) / (n + 1) }
	flows := func(level float64) (in, out float64) {
		put := func(c, z float64) {
			if d := z - level; d > 0 {
				out += c * math.Pow(d, n)
			} else {
				in += c * math.Pow(-d, n)
			}
		}
		put((h.R-h.X)/2, 0)
		put((h.R+h.X)/2, 1)
		if h.Flue > 0 {
			put(h.Flue, h.FlueHeight)
		}
		walls := 1 - h.R - h.Flue
		in += walls * (power1(math.Max(0, level)) - power1(math.Max(0, level-1)))
		out += walls * (power1(math.Max(0, 1-level)) - power1(math.Max(0, -level)))
		return in, out
	}
	low, high := 0.0, math.Max(1, h.FlueHeight)
	for range 60 {
		mid := (low + high) / 2
		if in, out := flows(mid); in > out {
			high = mid
		} else {
			low = mid
		}
	}
	in, _ := flows((low + high) / 2)
	return in
}

// The stack factor against first principles, derived: exact where X is 0, up to
// 4.5 % high where floor and ceiling leak unequally (5 % in a house that leaks
// hardly at all through its walls, n 0.6), and 1.002 with a flue of a fifth of the
// leakage half as high again as the house.
func TestStackFactorAgainstIntegration(t *testing.T) {
	t.Parallel()
	lowX, highX := 2.0, 0.0
	for _, n := range []float64{0.6, 0.67, 0.7} {
		for i := range 9 {
			r := float64(i) / 10
			h := House{Exponent: n, R: r}
			near(t, "f_s at X = 0 over the integral", h.StackFactor()/stackByIntegration(h), 1, 0.001)
			for _, x := range []float64{-0.5, -0.25, 0.25, 0.5} {
				if math.Abs(x) > r {
					continue
				}
				h := House{Exponent: n, R: r, X: x}
				ratio := h.StackFactor() / stackByIntegration(h)
				tolerance := 0.045
				if n == 0.6 && r == 0.8 {
					tolerance = 0.05
				}
				near(t, "f_s at X over the integral", ratio, 1, tolerance)
				lowX, highX = math.Min(lowX, ratio), math.Max(highX, ratio)
			}
		}
	}
	flue := House{Exponent: 0.67, R: 0.5, Flue: 0.2, FlueHeight: 1.5}
	near(t, "f_s with a flue over the integral", flue.StackFactor()/stackByIntegration(flue), 1.002, 0.0005)
	// Away from there the flue's term is an approximation, good to 3 %.
	for _, n := range []float64{0.6, 0.67, 0.7} {
		for i := range 7 {
			h := House{Exponent: n, R: 0.2 + float64(i)/10, Flue: 0.2, FlueHeight: 1.5}
			near(t, "f_s with a flue over the integral", h.StackFactor()/stackByIntegration(h), 1, 0.03)
		}
	}
	t.Logf("model over integral: X = 0 exact, |X| to 0.5 %.3f to %.3f", lowX, highX)
}

// The wind factor against the mass balance of a detached house and of one in a
// row, with pressure coefficients .6/-.65/-.65/-.3 (sides of the row -.2), the
// ceiling at their mean: .200 and .170, derived. The model was fitted to detached
// houses; 15 % is its authors' accuracy where wind dominates.
func TestWindFactorAgainstMassBalance(t *testing.T) {
	t.Parallel()
	f := WindFactor(0.67, 0.5, 0)
	near(t, "f_w of the model", f, 0.221, 0.0005)
	balance := solve(zone(0.5, 5, [4]float64{0.6, -0.65, -0.3, -0.65}, -0.25), 0.67, 20, 20, 1)
	near(t, "detached, mass balance", balance, 0.200, 0.001)
	near(t, "model over balance", f/balance, 1, 0.15)
	near(t, "row, mass balance", solve(zone(0.5, 5, [4]float64{0.6, -0.2, -0.3, -0.2}, -0.025), 0.67, 20, 20, 1), 0.170, 0.001)
}

// The stack coefficients of the basic model follow from Sherman and Grimsrud's
// factor at R 0.5, X 0, T 293 K. From memory against memory; 0.5 % is the last
// digit of the smallest.
func TestBasicCoefficientsFollow(t *testing.T) {
	t.Parallel()
	for height, want := range map[float64]float64{2.5: 0.000145, 5: 0.000290, 7.5: 0.000435} {
		f := BasicStackFactor(0.5, 0, height, 293) // m/(s K^0.5); L/s per cm2 is 0.1 m/s
		near(t, "C_s over the table's", 0.01*f*f/want, 1, 0.005)
	}
}

// The worked example of Portland (ASHRAE Fundamentals, from memory) in SI: 107 in2,
// 9000 ft3, 30 F, 6 mph, one storey, shelter class 4 -> 0.55 1/h, two digits.
func TestBasicModelInSI(t *testing.T) {
	t.Parallel()
	const inch2, foot3, mph = 6.4516, 0.028316847, 0.44704
	ls := BasicModelLS(107*inch2, 0.000145, 0.000104, 30/1.8, 6*mph)
	near(t, "Portland, 1/h", 3.6*ls/(9000*foot3), 0.55, 0.005)
}

// One house over a crawl space, derived from the equations of Walker and Wilson
// (1998), to the digits given: a change detector.
func TestCrawlSpaceByHand(t *testing.T) {
	t.Parallel()
	const n = 0.67
	c := FlowCoefficient(6, 250, n)
	near(t, "C", c, 0.030303, 1e-6)
	s := 3600 * LeakageM3S(c, n, StackPressure(5, 20, 0)) * StackFactor(n, 0.5, 0) / 250
	w := 3600 * LeakageM3S(c, n, WindPressure(0, 0.5*2.36)) * CrawlSpaceWindFactor(n, 0.5, 0) / 250
	near(t, "stack, 1/h", s, 0.2924, 2e-4)
	near(t, "together, 1/h", Superpose(s, w, n), 0.2944, 2e-4)
}

// Without flue the full model is the one the estimate uses; a flue adds stack
// flow.
func TestHouseWithoutFlue(t *testing.T) {
	t.Parallel()
	for _, n := range []float64{0.5, 0.65, 1} {
		for _, r := range []float64{0, 0.3, 1} {
			for _, x := range []float64{-r, -r / 2, 0, r / 3, r} {
				h := House{Exponent: n, R: r, X: x}
				near(t, "f_s", StackFactor(n, r, x), h.StackFactor(), 1e-14)
				near(t, "f_w", WindFactor(n, r, x), h.WindFactor(), 1e-14)
			}
		}
	}
	h := House{Exponent: 0.67, R: 0.4, Flue: 0.2, FlueHeight: 1.5}
	if plain := (House{Exponent: 0.67, R: 0.4}); h.StackFactor() <= plain.StackFactor() {
		t.Errorf("a flue lowers f_s from %g to %g", plain.StackFactor(), h.StackFactor())
	}
	// S0 0.7 (1 - 0.2) + 1 (1.5 0.2), by hand.
	near(t, "shelter with flue", h.Shelter(0.7, 1), 0.86, 1e-12)
	near(t, "shelter without", House{}.Shelter(0.7, 1), 0.7, 1e-12)
}

// Identities of leakage, derived; the total with an extract fan that is in
// excess is the fan's flow and the infiltration of the ISO 13789 form.
func TestLeakage(t *testing.T) {
	t.Parallel()
	c := FlowCoefficient(6, 250, 0.65)
	near(t, "flow at 50 Pa, 1/h", 3600*LeakageM3S(c, 0.65, 50)/250, 6, 1e-12)
	near(t, "flow at 4 Pa over that at 50", LeakageM3S(c, 0.65, 4)/LeakageM3S(c, 0.65, 50), math.Pow(4.0/50, 0.65), 1e-12)
	near(t, "n50 of q50 3 on 400 m2 and 500 m3", N50FromQ50(3, 400, 500), 2.4, 1e-12)
	near(t, "rule of thumb", InfiltrationRuleOfThumb(6), 0.3, 1e-15)
	near(t, "normalised leakage at 2.5 m", NormalisedLeakage(500, 100, 2.5), 0.5, 1e-12)
	near(t, "normalised leakage over 5 m and 2.5 m", NormalisedLeakage(500, 100, 5)/NormalisedLeakage(500, 100, 2.5), math.Pow(2, 0.3), 1e-12)
	for fan, want := range map[float64]float64{50: 76.9, 100: 110.9} {
		near(t, "fan and infiltration", fan+StandardInfiltrationM3H(250, 3, 0.07, 15, fan), want, 0.05)
	}
}

// Stack pressure over 10 m at 20/0 C: by the meteorological constant
// (liquisearch.com, read) 8.65 Pa, to a digit more than printed; wind of 5 m/s at
// 1.2 kg/m3: 15 Pa, exact.
func TestPressuresByHand(t *testing.T) {
	t.Parallel()
	near(t, "stack, by the constant", 0.0342*101325*10*(1/273.15-1/293.15), 8.65, 0.01)
	near(t, "stack", StackPressure(10, 20, 0), 8.65, 0.01)
	near(t, "stack at -10 C", StackPressure(10, 20, -10), 13.5, 0.05)
	near(t, "wind", WindPressure(densityK/1.2-zeroK, 5), 15, 1e-12)
}
