package balance

import (
	"math"
	"math/big"
	"testing"
)

const referenceBits = 400

// eta and the share unmet as printed in the standard, in 400-bit arithmetic: near
// gamma = 1 the difference of powers loses a hundred bits and more, and far above
// 1 they overflow every float64. a is a multiple of 1/8, so that the power needs
// roots and products alone.
func utiliseExactly(gamma float64, eighths int) (eta, unmet *big.Float) {
	number := func(x float64) *big.Float { return new(big.Float).SetPrec(referenceBits).SetFloat64(x) }
	one, g := number(1), number(gamma)
	root := number(gamma)
	for range 3 {
		root.Sqrt(root)
	}
	p := number(1)
	for range eighths {
		p.Mul(p, root)
	}
	up := new(big.Float).Sub(one, p)
	down := new(big.Float).Sub(one, new(big.Float).Mul(p, g))
	if down.Sign() == 0 {
		a := number(float64(eighths) / 8)
		eta = new(big.Float).Quo(a, new(big.Float).Add(a, one))
	} else {
		eta = up.Quo(up, down)
	}
	return eta, new(big.Float).Sub(one, new(big.Float).Mul(eta, g))
}

func relative(got float64, want *big.Float) float64 {
	d := new(big.Float).SetPrec(referenceBits).SetFloat64(got)
	d.Sub(d, want)
	e, _ := d.Quo(d, want).Float64()
	return math.Abs(e)
}

// ladder is gamma on both sides of 1 from the next float64 outwards.
func ladder() (gammas []float64) {
	for _, d := range []float64{0.5, 0.1, 1e-2, 1e-3, 3e-5, 1e-6, 1e-8, 1e-10, 1e-12, 1e-14} {
		gammas = append(gammas, 1-d)
	}
	gammas = append(gammas, math.Nextafter(1, 0), 1, math.Nextafter(1, 2))
	for _, d := range []float64{1e-14, 1e-12, 1e-10, 1e-8, 1e-6, 3e-5, 1e-3, 1e-2, 0.1, 0.5} {
		gammas = append(gammas, 1+d)
	}
	return gammas
}

// Both shares keep their digits on both sides of 1; in the form printed in the
// standard, eta is off by a tenth and more next to it.
func TestUtilisationAgainstHighPrecision(t *testing.T) {
	t.Parallel()
	gammas := append(ladder(), 1e-9, 1e-4, 0.02, 0.2, 0.37, 0.9, 1.7, 3, 11, 100, 1e5)
	worstEta, worstUnmet, naive := 0.0, 0.0, 0.0
	for _, gamma := range gammas {
		for _, eighths := range []int{8, 9, 12, 20, 24, 63, 160, 400} {
			a := float64(eighths) / 8
			eta, unmet := utilise(gamma, a)
			exactEta, exactUnmet := utiliseExactly(gamma, eighths)
			worstEta = math.Max(worstEta, relative(eta, exactEta))
			left, _ := exactUnmet.Float64()
			near(t, "unmet", unmet, left, 4e-16)
			if gamma <= 1 { // above, it is a power that was near 1 less that power
				worstUnmet = math.Max(worstUnmet, relative(unmet, exactUnmet))
			}
			if gamma != 1 && math.Abs(gamma-1) < 1e-13 {
				naive = math.Max(naive, relative((1-math.Pow(gamma, a))/(1-math.Pow(gamma, a+1)), exactEta))
			}
		}
	}
	t.Logf("largest relative error: eta %.1e, share unmet up to 1 %.1e; eta as printed, next to 1: %.1e", worstEta, worstUnmet, naive)
	if worstEta > 2e-15 { // logarithm, product, expm1, sum and quotient: nine roundings at most
		t.Errorf("relative error of eta %g", worstEta)
	}
	if worstUnmet > 2e-15 {
		t.Errorf("relative error of the share unmet %g", worstUnmet)
	}
	if naive < 0.1 {
		t.Errorf("eta as printed is off by %g only: the stable form has no reason", naive)
	}
}

// Across gamma = 1, eta and the share unmet fall strictly and without a step: at
// every rung they follow the line with the derivative -a/(2 (a + 1)) as far as the
// curve's second order allows.
func TestUtilisationIsSmoothAtOne(t *testing.T) {
	t.Parallel()
	for _, a := range []float64{1, 1.3, 2.4667, 5, 14, 41} {
		lastEta, lastUnmet := 2.0, 2.0
		for _, gamma := range ladder() {
			eta, unmet := utilise(gamma, a)
			if d := math.Abs(gamma - 1); d < 1e-2 {
				line := a/(a+1) - a/(2*(a+1))*(gamma-1)
				near(t, "eta", eta, line, a*d*d+4e-16)
				near(t, "unmet", unmet, 1-line*gamma, a*d*d+4e-16)
			}
			far := math.Abs(gamma-1) > 1e-13 // a rung of the last digits may round to one value
			if eta > lastEta || unmet > lastUnmet || far && (eta == lastEta || unmet == lastUnmet) {
				t.Errorf("a %g, gamma 1%+g: eta %.17g after %.17g, unmet %.17g after %.17g", a, gamma-1, eta, lastEta, unmet, lastUnmet)
			}
			lastEta, lastUnmet = eta, unmet
		}
	}
}

// eta is in 0..1, falls with gamma, rises with a; the share unmet is in 0..1, falls
// with both; together they make the loss.
func TestUtilisationProperties(t *testing.T) {
	t.Parallel()
	for a := 1.0; a < 60; a *= 1.17 {
		last, lastUnmet := 1.0, 1.0
		for gamma := 0.0; gamma < 80; gamma += 0.0137 {
			eta, unmet := utilise(gamma, a)
			near(t, "eta gamma + unmet", eta*gamma+unmet, 1, 4e-16*(1+gamma))
			if eta > last || unmet > lastUnmet+2e-16 || eta < 0 || unmet < 0 {
				t.Fatalf("a %g, gamma %g: eta %g after %g, unmet %g after %g", a, gamma, eta, last, unmet, lastUnmet)
			}
			last, lastUnmet = eta, unmet
			if eta2, unmet2 := utilise(gamma, a*1.1); eta2 < eta*(1-1e-15) || unmet2 > unmet*(1+1e-15)+1e-16 {
				t.Fatalf("gamma %g: with a %g to %g eta goes from %g to %g, unmet from %g to %g", gamma, a, a*1.1, eta, eta2, unmet, unmet2)
			}
		}
	}
}

func TestUtilisationAtTheEnds(t *testing.T) {
	t.Parallel()
	inf := math.Inf(1)
	for _, row := range []struct{ gamma, a, want float64 }{
		{0, 1, 1}, {0, 3, 1}, {0, inf, 1}, {0.5, inf, 1}, {1, inf, 1}, {4, inf, 0.25}, {inf, 3, 0},
		{math.MaxFloat64, 3, 0}, {5e-324, 3, 1}, {-2, 3, -0.5}, {0.3, 1e300, 1}, {1, 0, 0},
	} {
		near(t, "eta at an end", Utilisation(row.gamma, row.a), row.want, 1e-15)
	}
}

func TestIntermittencyFactorProperties(t *testing.T) {
	t.Parallel()
	for _, tau := range []float64{0, 1, 15, 40, 200, math.MaxFloat64} {
		for _, gamma := range []float64{0, 0.1, 1, 10, math.MaxFloat64, -1} {
			if f := IntermittencyFactor(tau, gamma, 1); f != 1 {
				t.Errorf("heated always, tau %g, gamma %g: %g", tau, gamma, f)
			}
			last := 0.0
			for share := 0.0; share <= 1; share += 0.05 {
				f := IntermittencyFactor(tau, gamma, share)
				if !(f >= share && f <= 1) || f < last-1e-15 {
					t.Errorf("tau %g, gamma %g, f_hr %g: %g after %g", tau, gamma, share, f, last)
				}
				last = f
			}
		}
	}
}

func TestSetBackMeanProperties(t *testing.T) {
	t.Parallel()
	near(t, "no capacity", SetBackMean(20, 0, 16, 0, 12), 18, 1e-12)
	near(t, "no capacity, nothing held", SetBackMean(20, 0, -10, 0, 12), 10, 1e-12)
	near(t, "never set back", SetBackMean(20, 0, 16, 40, 0), 20, 1e-12)
	near(t, "no set-back", SetBackMean(20, 0, 20, 40, 8), 20, 1e-12)
	near(t, "warmer outside", SetBackMean(20, 25, 16, 40, 8), 20, 1e-12)
	near(t, "vast capacity", SetBackMean(20, 0, 16, 1e9, 8), 20, 1e-6)
	last := 0.0
	for tau := 0.0; tau < 400; tau += 3 {
		mean := SetBackMean(20, -5, 15, tau, 10)
		if mean < last || mean > 20 {
			t.Errorf("tau %g: %g after %g", tau, mean, last)
		}
		last = mean
	}
	// Against an Euler step of 1 s, whose own error is below the tolerance.
	sum, temp := 0.0, 20.0
	for range 8 * 3600 {
		sum += temp
		temp = math.Max(17, temp-(temp+3)/(30*3600))
	}
	near(t, "against steps", SetBackMean(20, -3, 17, 30, 8), (sum/3600+16*20)/24, 1e-4)
}
