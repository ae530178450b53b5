package airflow

import (
	"math"
	"math/big"
	"testing"
)

const referenceBits = 160

func wide(x float64) *big.Float { return new(big.Float).SetPrec(referenceBits).SetFloat64(x) }

// logarithm is ln(x) by 2 artanh((m-1)/(m+1)) + k ln 2, to some 45 digits.
func logarithm(x *big.Float) *big.Float {
	m := new(big.Float)
	k := x.MantExp(m) // m in [1/2, 1)
	one := wide(1)
	series := func(m *big.Float) *big.Float {
		s := new(big.Float).Quo(new(big.Float).Sub(m, one), new(big.Float).Add(m, one))
		s2 := new(big.Float).Mul(s, s)
		sum, term := wide(0), new(big.Float).Set(s)
		for i := 1; i < 220; i += 2 {
			sum.Add(sum, new(big.Float).Quo(term, wide(float64(i))))
			term.Mul(term, s2)
		}
		return sum.Mul(sum, wide(2))
	}
	ln2 := new(big.Float).Neg(series(wide(0.5)))
	return new(big.Float).Add(series(m.SetPrec(referenceBits)), ln2.Mul(ln2, wide(float64(k))))
}

// exponential is e^x by its series after halving x sixteen times.
func exponential(x *big.Float) *big.Float {
	small := new(big.Float).SetMantExp(x, -16)
	sum, term := wide(1), wide(1)
	for i := 1; i < 40; i++ {
		term.Mul(term, small)
		term.Quo(term, wide(float64(i)))
		sum.Add(sum, term)
	}
	for range 16 {
		sum.Mul(sum, sum)
	}
	return sum
}

// The reference itself: ln 2 and e, Abramowitz and Stegun, table 1.1.
func TestReference(t *testing.T) {
	for _, row := range []struct {
		what string
		got  *big.Float
		want string
	}{
		{"ln 2", logarithm(wide(2)), "0.6931471805599453094172321214581766"},
		{"ln 10", logarithm(wide(10)), "2.3025850929940456840179914546843642"},
		{"e", exponential(wide(1)), "2.7182818284590452353602874713526625"},
	} {
		want, _, err := big.ParseFloat(row.want, 10, referenceBits, big.ToNearestEven)
		if err != nil {
			t.Fatal(err)
		}
		d, _ := new(big.Float).Sub(row.got, want).Float64()
		if math.Abs(d) > 1e-33 { // digits quoted
			t.Errorf("%s is off by %g", row.what, d)
		}
	}
}

// relativeError is that of got as x^y, against 160-bit arithmetic.
func relativeError(got, x, y float64) float64 {
	want := exponential(new(big.Float).Mul(wide(y), logarithm(wide(x))))
	d := new(big.Float).Quo(new(big.Float).Sub(wide(got), want), want)
	e, _ := d.Float64()
	return math.Abs(e)
}

// power is held to its bound at the edges of its table's cells, next to one, and
// between.
func TestPowerWithinItsBound(t *testing.T) {
	t.Parallel()
	var xs []float64
	for x := 1e-12; x < 1e12; x *= 2.9 {
		xs = append(xs, x)
	}
	for _, edge := range []float64{1, 2, 0.5, 1 + 1.0/128, 2 - 1.0/128, 1.5, 100} {
		xs = append(xs, edge, math.Nextafter(edge, 0), math.Nextafter(edge, 200), edge*(1+1e-9), edge*(1-1e-5))
	}
	for i := range 128 { // the widest r of every cell
		xs = append(xs, math.Nextafter(1+float64(i+1)/128, 0))
	}
	share, ofFlow := 0.0, 0.0
	for _, x := range xs {
		for _, y := range []float64{0.4, 0.5, 0.6, 0.65, 2. / 3, 0.72, 1, 1 / 0.65, 1.65, 2} {
			e := relativeError(power(x, y), x, y)
			if bound := powerBound(x, y); e > bound {
				t.Errorf("relative error of power(%g, %g) is %.2g, more than %.2g", x, y, e, bound)
			} else {
				share = math.Max(share, e/bound)
			}
			if y <= 1 && x > 1e-6 && x < 100 {
				ofFlow = math.Max(ofFlow, e)
			}
		}
	}
	t.Logf("largest error %.2f of its bound; %.1e where flows are", share, ofFlow)
	if ofFlow > 3e-15 {
		t.Errorf("relative error of a flow %.2g exceeds 3e-15", ofFlow)
	}
}

func powerBound(x, y float64) float64 { return 1.1e-15 + 1.6e-16*math.Abs(y*math.Log2(x)) }

// Where there is no power to speak of, power is math.Pow.
func TestPowerOfOddNumbers(t *testing.T) {
	t.Parallel()
	odd := []float64{0, math.Copysign(0, -1), 5e-324, 2e-308, math.MaxFloat64, math.Inf(1), math.Inf(-1), math.NaN(), -1, 1}
	for _, x := range odd {
		for _, y := range []float64{0, 0.5, 1, -1, 2, 700, math.Inf(1), math.NaN()} {
			got, want := power(x, y), math.Pow(x, y)
			same := got == want || math.IsNaN(got) && math.IsNaN(want) ||
				math.Abs(got/want-1) < 1e-12 // huge but finite powers
			if !same {
				t.Errorf("power(%g, %g) = %g, want %g", x, y, got, want)
			}
		}
	}
}

func FuzzPower(f *testing.F) {
	f.Add(1.0, 0.65)
	f.Add(12.5, 1.5)
	f.Fuzz(func(t *testing.T, x, y float64) {
		x, y = math.Abs(x), math.Mod(math.Abs(y), 2)
		got, want := power(x, y), math.Pow(x, y)
		if math.IsNaN(want) || math.IsInf(want, 0) || want < 1e-300 {
			return
		}
		if math.Abs(got/want-1) > 3*powerBound(x, y) { // math.Pow has an error too
			t.Errorf("power(%g, %g) = %g, want %g", x, y, got, want)
		}
	})
}

func BenchmarkPower(b *testing.B) {
	xs := [64]float64{}
	for i := range xs {
		xs[i] = 0.07 * float64(i+1)
	}
	sum := 0.0
	b.Run("power", func(b *testing.B) {
		for i := 0; b.Loop(); i++ {
			sum += power(xs[i&63], 0.65)
		}
	})
	b.Run("math.Pow", func(b *testing.B) {
		for i := 0; b.Loop(); i++ {
			sum += math.Pow(xs[i&63], 0.65)
		}
	})
	if math.IsNaN(sum) {
		b.Fatal(sum)
	}
}

func BenchmarkHeatWK(b *testing.B) {
	in := Input{VolumeM3: 300, N50PerH: 6, FlowExponent: .65, StackHeightM: 5, LeakageR: .3,
		Shelter: .7, WindFactor: .6, IndoorC: 20, AiringM3H: 50}
	c := Prepare(&in)
	sum := 0.0
	b.Run("Prepare", func(b *testing.B) {
		for b.Loop() {
			p := Prepare(&in)
			sum += p.stack
		}
	})
	b.Run("month", func(b *testing.B) {
		for i := 0; b.Loop(); i++ {
			sum += c.HeatWK(float64(i&15), 4)
		}
	})
	if math.IsNaN(sum) {
		b.Fatal(sum)
	}
}
