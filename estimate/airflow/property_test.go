package airflow

import (
	"math"
	"math/rand/v2"
	"testing"

	"kelvinrow/estimate/climate"
)

// The bracket of the superposition is at least (1 + beta/2)(s + w), by the
// inequality of the means, so the one power of the kernel has no negative base.
func TestSuperpositionIsNeverNegative(t *testing.T) {
	t.Parallel()
	const least = 1 + beta/2
	random := rand.New(rand.NewPCG(1, 2))
	for range 100_000 {
		s, w := math.Exp(60*random.Float64()-30), math.Exp(60*random.Float64()-30)
		if random.IntN(10) == 0 {
			w = s // where the bound is reached
		}
		bracket := s + w + beta*math.Sqrt(s*w)
		if bracket < least*(s+w)*(1-1e-15) {
			t.Fatalf("s %g, w %g: %g is less than %g", s, w, bracket, least*(s+w))
		}
	}
	if least <= 0 {
		t.Fatal("the bound itself is not positive")
	}
}

// Whatever finite input of a building, zeros and shares beyond their definition
// included, comes out finite and not negative.
func TestFlowsAreFinite(t *testing.T) {
	t.Parallel()
	random := rand.New(rand.NewPCG(3, 4))
	pick := func(low, high float64) float64 {
		switch random.IntN(6) {
		case 0:
			return 0
		case 1:
			return low
		case 2:
			return high
		}
		return low + (high-low)*random.Float64()
	}
	for range 100_000 {
		in := Input{
			VolumeM3: pick(0, 1e6), N50PerH: pick(0, 50), FlowExponent: pick(-1, 3), StackHeightM: pick(-5, 100),
			LeakageR: pick(-1, 2), LeakageX: pick(-2, 2), Shelter: pick(0, 2), WindFactor: pick(0, 3), IndoorC: pick(-20, 40),
			SupplyM3H: pick(0, 1e5), ExtractM3H: pick(0, 1e5), HeatRecovery: pick(0, 1), AiringM3H: pick(0, 1e5),
			StackDuctM2: pick(0, 10), StackDuctCd: pick(0, 1), StackDuctM: pick(-5, 50),
		}
		c := Prepare(&in)
		var f Flow
		outdoor, wind := pick(-60, 50), pick(0, 40)
		c.At(outdoor, wind, &f)
		for _, v := range []float64{f.WindMS, f.StackM3H, f.WindM3H, f.InfiltrationM3H, f.StackDuctM3H, f.BalancedM3H,
			f.UnbalancedM3H, f.OutdoorAirM3H, f.HeatWK, f.AirChangesPerH, f.StackShare} {
			if !(v >= 0) || math.IsInf(v, 0) {
				t.Fatalf("%+v at %g C, %g m/s: %+v", in, outdoor, wind, f)
			}
		}
		if f.HeatWK != c.HeatWK(outdoor, wind) {
			t.Fatalf("%+v: At and HeatWK differ", in)
		}
	}
}

// sample is a building within what rules give.
func sample(random *rand.Rand) Input {
	u := func(low, high float64) float64 { return low + (high-low)*random.Float64() }
	r := u(0.1, 0.7)
	return Input{
		VolumeM3: u(100, 1e4), N50PerH: u(0.5, 15), FlowExponent: u(0.5, 0.8), StackHeightM: u(2.5, 15),
		LeakageR: r, LeakageX: u(-r, r), Shelter: u(0.3, 1), WindFactor: u(0.4, 1.2), IndoorC: u(17, 23),
		SupplyM3H: u(0, 200), ExtractM3H: u(0, 200), HeatRecovery: u(0, 0.9), AiringM3H: u(0, 300),
		StackDuctM2: u(0, 0.1), StackDuctCd: u(0.4, 0.8), StackDuctM: u(2, 12),
	}
}

// At against the formulas as published, one after the other, with math.Pow.
func TestFlowsAgainstFormulas(t *testing.T) {
	t.Parallel()
	random := rand.New(rand.NewPCG(5, 6))
	same := func(what string, got, want float64) {
		t.Helper()
		near(t, what, got, want, 1e-12*math.Max(1, math.Abs(want))) // rounding of another order of operations
	}
	for range 2000 {
		in := sample(random)
		outdoor, wind := 45*random.Float64()-15, 12*random.Float64()
		n := in.FlowExponent
		rho := 353 / (outdoor + 273.15)
		c := in.N50PerH * in.VolumeM3 / math.Pow(50, n) // m3/(h Pa^n)
		ps := rho * 9.81 * in.StackHeightM * math.Abs(in.IndoorC-outdoor) / (in.IndoorC + 273.15)
		fs := (1 + n*in.LeakageR) / (n + 1) *
			math.Pow(0.5-0.5*math.Pow(in.LeakageX*in.LeakageX/(2-in.LeakageR), 1.25), n+1)
		pw := rho / 2 * math.Pow(in.Shelter*in.WindFactor*wind, 2)
		fw := 0.19 * (2 - n) * (1 - math.Pow((in.LeakageX+in.LeakageR)/2, 1.5))
		s, w := c*fs*math.Pow(ps, n), c*fw*math.Pow(pw, n)
		inf := math.Pow(math.Pow(s, 1/n)+math.Pow(w, 1/n)-0.33*math.Pow(s*w, 1/(2*n)), n)
		duct := 0.0
		if in.IndoorC > outdoor {
			dp := rho * 9.81 * in.StackDuctM * (in.IndoorC - outdoor) / (in.IndoorC + 273.15)
			duct = 3600 * in.StackDuctCd * in.StackDuctM2 * math.Sqrt(2*dp/rho)
		}
		balanced, unbalanced := math.Min(in.SupplyM3H, in.ExtractM3H), math.Abs(in.SupplyM3H-in.ExtractM3H)
		root := math.Sqrt(unbalanced*unbalanced + inf*inf)

		var f Flow
		p := Prepare(&in)
		p.At(outdoor, wind, &f)
		same("wind at eaves", f.WindMS, in.WindFactor*wind)
		same("stack", f.StackM3H, s)
		same("wind", f.WindM3H, w)
		same("infiltration", f.InfiltrationM3H, inf)
		same("infiltration by Superpose", Superpose(s, w, n), inf)
		same("duct", f.StackDuctM3H, duct)
		same("outdoor air", f.OutdoorAirM3H, balanced+root+in.AiringM3H+duct)
		same("heat", f.HeatWK, 1200.0/3600*(balanced*(1-in.HeatRecovery)+root+in.AiringM3H+duct))
		same("air changes", f.AirChangesPerH, f.OutdoorAirM3H/in.VolumeM3)
		same("stack's share", f.StackShare, math.Pow(s, 1/n)/(math.Pow(s, 1/n)+math.Pow(w, 1/n)))
	}
}

// More leakage, height, exposure or airing never brings less air; more heat
// recovery never costs more heat.
func TestFlowsAreMonotone(t *testing.T) {
	t.Parallel()
	random := rand.New(rand.NewPCG(7, 8))
	for range 3000 {
		in := sample(random)
		outdoor := 30*random.Float64() - 15
		for what, change := range map[string]func(*Input){
			"leakage":       func(in *Input) { in.N50PerH *= 1.1 },
			"airing":        func(in *Input) { in.AiringM3H += 10 },
			"a duct":        func(in *Input) { in.StackDuctM2 += 0.01 },
			"less recovery": func(in *Input) { in.HeatRecovery *= 0.9 },
			"both fans":     func(in *Input) { in.SupplyM3H += 10; in.ExtractM3H += 10 },
		} {
			more := in
			change(&more)
			a, b := Prepare(&in), Prepare(&more)
			if x, y := a.HeatWK(outdoor, 4), b.HeatWK(outdoor, 4); y < x {
				t.Errorf("%s: heat by air falls from %g to %g, %+v", what, x, y, in)
			}
		}
		// Each driver alone rises with its cause; together they may cancel a little.
		taller, open := in, in
		taller.StackHeightM *= 1.2
		open.Shelter *= 1.2
		var f, h, o Flow
		a, b, c := Prepare(&in), Prepare(&taller), Prepare(&open)
		a.At(outdoor, 4, &f)
		b.At(outdoor, 4, &h)
		c.At(outdoor, 4, &o)
		if h.StackM3H < f.StackM3H || o.WindM3H < f.WindM3H {
			t.Errorf("a driver falls with its cause: %+v", in)
		}
	}
}

// Passive stacks stop when it is warm outside; infiltration by stack does not,
// it turns round.
func TestWarmerOutside(t *testing.T) {
	t.Parallel()
	in := Input{VolumeM3: 300, N50PerH: 4, FlowExponent: 0.65, StackHeightM: 5, LeakageR: 0.3, Shelter: 0.7, WindFactor: 0.6,
		IndoorC: 20, StackDuctM2: 0.02, StackDuctCd: 0.6, StackDuctM: 6}
	c := Prepare(&in)
	var f Flow
	c.At(20, 0, &f)
	if f.StackDuctM3H != 0 || f.InfiltrationM3H != 0 {
		t.Errorf("without wind and difference: %+v", f)
	}
	c.At(25, 0, &f)
	if f.StackDuctM3H != 0 || !(f.InfiltrationM3H > 0) {
		t.Errorf("5 K warmer outside: %+v", f)
	}
	// By hand: 3600 0.6 0.02 sqrt(2 9.81 6 10/293.15) = 86.57 m3/h at 10 K.
	near(t, "duct at 10 K", StackDuctM3H(0.6, 0.02, 6, 20, 10), 86.57, 0.005)
}

func TestSharesBeyondTheirDefinition(t *testing.T) {
	t.Parallel()
	heat := func(n, r, x float64) float64 {
		in := Input{VolumeM3: 300, N50PerH: 4, FlowExponent: n, StackHeightM: 5, LeakageR: r, LeakageX: x, Shelter: 0.7, WindFactor: 0.6, IndoorC: 20}
		c := Prepare(&in)
		return c.HeatWK(0, 4)
	}
	for _, row := range []struct{ n, r, x, asN, asR, asX float64 }{
		{0.3, 0.3, 0, 0.5, 0.3, 0},
		{1.4, 0.3, 0, 1, 0.3, 0},
		{0.65, 1.5, 0, 0.65, 1, 0},
		{0.65, 0.3, -0.8, 0.65, 0.3, -0.3},
	} {
		if got, want := heat(row.n, row.r, row.x), heat(row.asN, row.asR, row.asX); got != want {
			t.Errorf("n %g, R %g, X %g: %g, want that of the nearest allowed, %g", row.n, row.r, row.x, got, want)
		}
	}
}

func TestEavesWindRises(t *testing.T) {
	t.Parallel()
	for terrain := range climate.NumTerrains {
		last := 0.0
		for h := 0.0; h < 100; h += 2 {
			f := EavesWindFactor(climate.Terrain(terrain), h)
			if f < last || math.IsNaN(f) {
				t.Errorf("%v at %g m: %g after %g", climate.Terrain(terrain), h, f, last)
			}
			last = f
		}
		if f := EavesWindFactor(climate.Terrain(terrain), -3); f != 0 {
			t.Errorf("below ground %g", f)
		}
	}
}

// Fan rules agree at their ends: no infiltration leaves the fan's flow, no fan
// leaves infiltration; none adds more than the sum.
func TestFanRules(t *testing.T) {
	t.Parallel()
	for what, rule := range map[string]func(infiltration, fan float64) float64{
		"quadrature": Quadrature, "half fan": HalfFan, "superposed": SuperposedFan,
	} {
		near(t, what+" without infiltration", rule(0, 50), 50, 1e-12)
		near(t, what+" without fan", rule(40, 0), 40, 1e-12)
		for fan := 1.0; fan < 300; fan += 7 {
			if q := rule(40, fan); q > 40+fan || q < math.Max(40, fan) {
				t.Errorf("%s of 40 and %g is %g", what, fan, q)
			}
		}
	}
}

func TestNothingIsAllocated(t *testing.T) {
	random := rand.New(rand.NewPCG(9, 10))
	in := sample(random)
	var f Flow
	if n := testing.AllocsPerRun(100, func() {
		c := Prepare(&in)
		c.At(3, 4, &f)
		_ = c.HeatWK(3, 4)
	}); n != 0 {
		t.Errorf("%g allocations", n)
	}
}
