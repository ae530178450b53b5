package airflow

import "math"

// Tables of power: 2^(i/128), and for the mantissas m in [1 + i/128, 1 + (i+1)/128)
// a number near 1/m with its logarithm.
const tableBits = 7

var (
	rootOfTwo [1 << tableBits]float64
	inverse   [1 << tableBits]struct{ of, log2 float64 }
)

func init() {
	for i := range rootOfTwo {
		rootOfTwo[i] = math.Exp2(float64(i) / (1 << tableBits))
		inv := 1 / (1 + (float64(i)+0.5)/(1<<tableBits))
		inverse[i].of, inverse[i].log2 = inv, -math.Log2(inv)
	}
}

// power is x^y for x >= 0: the monthly flows are little else. For y 0 to 2 its
// relative error is below 1.1e-15 + 1.6e-16 |y log2(x)|: the first part is made by
// table and series, the second by rounding log2(x) and its product with y. That
// is 3e-15 for any flow of air. math.Pow takes two to three times as long, and on
// amd64 goes through an exponential that picks fused multiplication by the
// processor it finds; here every product is rounded, so the bits are the same
// everywhere.
func power(x, y float64) float64 {
	const (
		mantissaBits = 52
		bias         = 1023
		one          = bias << mantissaBits
		shift        = mantissaBits - tableBits
		mask         = 1<<tableBits - 1
	)
	bits := math.Float64bits(x)
	if bits-1<<mantissaBits >= 2046<<mantissaBits { // zero, subnormal, negative, infinite, NaN
		return math.Pow(x, y)
	}
	// log2(x) = exponent - log2(inv) + log2(1 + r), m inv = 1 + r, |r| < 1/256: six
	// terms of the series are within 2e-18.
	e := float64(int64(bits>>mantissaBits) - bias)
	m := math.Float64frombits(bits&(1<<mantissaBits-1) | one)
	inv := &inverse[bits>>shift&mask]
	r := float64(m*inv.of) - 1
	r2 := r * r
	series := r + float64(r2*(float64(r*(1./3))-0.5+float64(r2*(float64(r*(1./5))-1./4-float64(r2*(1./6))))))
	log2 := e + (inv.log2 + float64(series*math.Log2E))

	// 2^t = 2^(k/128) 2^s, |s| <= 1/256.
	t := y * log2
	if !(math.Abs(t) < 1000) {
		return math.Pow(x, y)
	}
	const round = 3 << 51 // brings the units of a float64 to its last bit
	k := float64(t*(1<<tableBits)) + round
	i := int64(math.Float64bits(k)) << 12 >> 12
	z := (t - (k-round)*(1./(1<<tableBits))) * math.Ln2
	z2 := z * z
	grow := z + float64(z2*(0.5+float64(z*(1./6))+float64(z2*(1./24+float64(z*(1./120))))))
	root := rootOfTwo[i&mask]
	return float64(root+float64(root*grow)) * math.Float64frombits(uint64(i>>tableBits+bias)<<mantissaBits)
}
