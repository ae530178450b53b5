package balance

import (
	"math"
	"math/rand/v2"
	"testing"

	"kelvinrow/estimate/airflow"
	"kelvinrow/estimate/climate"
	"kelvinrow/estimate/state"
)

// temperate is a year with wind and sun on all sides.
func temperate() *climate.Climate {
	_, c := constructed()
	for i := range c.Months {
		m := &c.Months[i]
		m.Wind10M = 4.5 - 0.25*math.Abs(float64(i)-6)
		m.HorizontalKWhM2 = 2.1 * m.VerticalKWhM2[climate.North]
		m.VerticalKWhM2[climate.East] = 0.6 * m.VerticalKWhM2[climate.South]
		m.VerticalKWhM2[climate.West] = 0.62 * m.VerticalKWhM2[climate.South]
	}
	return c
}

// sample is a building within what rules give.
func sample(random *rand.Rand) Input {
	u := func(low, high float64) float64 { return low + (high-low)*random.Float64() }
	area := math.Exp(u(math.Log(40), math.Log(2e4)))
	in := Input{
		FloorAreaM2: area, IndoorC: u(16, 23), InternalGainWM2: u(1, 6), CapacityJK: area * u(80e3, 370e3),
		TransmissionWK: area * u(0.3, 4), SetpointShare: 1, ApertureHorizontalM2: area * u(0, 0.01),
	}
	for o := range in.ApertureM2 {
		in.ApertureM2[o] = area * u(0, 0.03)
	}
	r := u(0.1, 0.6)
	in.Air = airflow.Input{
		VolumeM3: 2.6 * area, N50PerH: u(0.5, 12), FlowExponent: u(0.55, 0.75), StackHeightM: u(2.5, 12), LeakageR: r,
		LeakageX: u(-r, r) / 2, Shelter: u(0.3, 1), WindFactor: u(0.4, 1), IndoorC: in.IndoorC, AiringM3H: area * u(0, 1),
	}
	switch random.IntN(4) {
	case 0:
		in.Air.ExtractM3H = area * u(0.3, 1.5)
	case 1:
		in.Air.SupplyM3H, in.Air.ExtractM3H = area*u(0.3, 1.5), area*u(0.3, 1.5)
		in.Air.HeatRecovery = u(0, 0.9)
	case 2:
		in.Air.StackDuctM2, in.Air.StackDuctCd, in.Air.StackDuctM = area*2e-4, 0.6, u(2, 10)
	}
	if random.IntN(2) == 0 {
		in.SetpointShare = u(0.3, 1)
	}
	return in
}

func TestNeedIsYear(t *testing.T) {
	t.Parallel()
	c := temperate()
	random := rand.New(rand.NewPCG(1, 1))
	var out [12]Month
	for range 3000 {
		in := sample(random)
		need, year := Need(&in, c), Year(&in, c, &out)
		if need != year {
			t.Fatalf("Need %.17g, Year %.17g: %+v", need, year, in)
		}
		sum := 0.0
		for i := range out {
			sum += out[i].NeedKWh
		}
		if sum != need {
			t.Fatalf("the months' needs add up to %.17g, not %.17g", sum, need)
		}
		for i := range out {
			m := &out[i]
			gains := m.InternalKWh + m.SolarKWh
			if m.LossKWh <= 0 {
				continue
			}
			want := (m.LossKWh - m.Utilisation*gains) * IntermittencyFactor(m.TimeConstantH, m.GainLossRatio, in.SetpointShare)
			near(t, "need as loss less used gains", m.NeedKWh, want, 1e-14*(m.LossKWh+gains))
			if m.NeedKWh < 0 || m.NeedKWh > m.LossKWh ||
				in.SetpointShare == 1 && m.NeedKWh < (m.LossKWh-gains)*(1-1e-14) {
				t.Fatalf("need is not between loss less gains, and loss: %+v", m)
			}
		}
	}
}

// The parts add up to the whole, for any ventilation.
func TestLossByPathAddsUp(t *testing.T) {
	t.Parallel()
	c := temperate()
	random := rand.New(rand.NewPCG(2, 1))
	var out [12]Month
	for range 1000 {
		in := sample(random)
		var transmission [state.NumPaths]float64
		in.TransmissionWK = 0
		for _, p := range []state.Path{state.Wall, state.Roof, state.Floor, state.Window, state.Door, state.Bridge} {
			transmission[p] = in.FloorAreaM2 * random.Float64()
			in.TransmissionWK += transmission[p]
		}
		Year(&in, c, &out)
		paths := LossByPath(&in, c, &out, transmission)
		whole, parts, sizes := 0.0, 0.0, 0.0
		for i := range out {
			whole += out[i].LossKWh
			sizes += math.Abs(out[i].LossKWh)
		}
		for _, q := range paths {
			parts += q
		}
		near(t, "parts", parts, whole, 1e-13*sizes)
		stack, wind := InfiltrationByDriver(&in, c, &out)
		near(t, "stack and wind", stack+wind, paths[state.Infiltration], 1e-13*sizes)
		if in.Air.SupplyM3H == in.Air.ExtractM3H && math.Abs(paths[state.Fans]) > 1e-13*sizes {
			t.Errorf("no fans, yet %g kWh by fans", paths[state.Fans])
		}
	}
}

// One month by hand: extract fan 300 m3/h, infiltration by wind alone, airing 60
// m3/h, balanced 0. Flows come from the month itself; their split from arithmetic.
func TestLossByPathByHand(t *testing.T) {
	t.Parallel()
	in := Input{IndoorC: 20, TransmissionWK: 100, SetpointShare: 1, Air: airflow.Input{HeatRecovery: 0.8, AiringM3H: 60}}
	months := [12]Month{{Flow: airflow.Flow{
		InfiltrationM3H: 400, UnbalancedM3H: 300, BalancedM3H: 150, StackDuctM3H: 30, StackShare: 0.25,
	}}}
	paths := LossByPath(&in, one(climate.Month{Hours: 1000, OutdoorC: 10}), &months, [state.NumPaths]float64{state.Wall: 70, state.Roof: 30})
	// 10 K for 1000 h: 10 kWh per W/K. Together 500 m3/h: 320 infiltration, 180 fan.
	near(t, "wall", paths[state.Wall], 700, 1e-9)
	near(t, "roof", paths[state.Roof], 300, 1e-9)
	near(t, "infiltration", paths[state.Infiltration], 320.0/3*10, 1e-9)
	near(t, "fans", paths[state.Fans], (180+150*0.2)/3*10, 1e-9)
	near(t, "airing", paths[state.Airing], 90.0/3*10, 1e-9)
	stack, wind := InfiltrationByDriver(&in, one(climate.Month{Hours: 1000, OutdoorC: 10}), &months)
	near(t, "stack", stack, 80.0/3*10, 1e-9)
	near(t, "wind", wind, 240.0/3*10, 1e-9)
}

// Need rises with every loss and falls with every gain and with capacity.
func TestNeedIsMonotone(t *testing.T) {
	t.Parallel()
	c := temperate()
	random := rand.New(rand.NewPCG(3, 1))
	changes := []struct {
		what   string
		change func(*Input)
		sign   float64
	}{
		{"transmission", func(in *Input) { in.TransmissionWK *= 1.05 }, 1},
		{"leakage", func(in *Input) { in.Air.N50PerH *= 1.05 }, 1},
		{"airing", func(in *Input) { in.Air.AiringM3H += 0.1 * in.FloorAreaM2 }, 1},
		{"internal gains", func(in *Input) { in.InternalGainWM2 *= 1.05 }, -1},
		{"sun on the south", func(in *Input) { in.ApertureM2[climate.South] += 0.01 * in.FloorAreaM2 }, -1},
		{"sun from above", func(in *Input) { in.ApertureHorizontalM2 += 0.01 * in.FloorAreaM2 }, -1},
		{"capacity", func(in *Input) { in.CapacityJK *= 1.2 }, -1},
		{"recovery", func(in *Input) { in.Air.HeatRecovery = 0.5 + in.Air.HeatRecovery/2 }, -1},
		{"room temperature", func(in *Input) { in.IndoorC++; in.Air.IndoorC++ }, 1},
	}
	for range 2000 {
		in := sample(random)
		in.SetpointShare = 1
		before := Need(&in, c)
		for _, ch := range changes {
			changed := in
			ch.change(&changed)
			after := Need(&changed, c)
			if ch.sign*(after-before) < -1e-12*before {
				t.Errorf("more %s: need goes from %g to %g, %+v", ch.what, before, after, in)
			}
		}
		// Heating fewer hours never costs more.
		in.SetpointShare = 0.6
		if less := Need(&in, c); less > before || less < 0.6*before*(1-1e-12) {
			t.Errorf("heated 0.6 of the hours: %g of %g", less, before)
		}
	}
}

// Nothing comes out that is not a number, whatever finite input goes in, zeros of
// every kind included; nothing is needed where it is as warm outside as inside.
func TestBalanceIsFinite(t *testing.T) {
	t.Parallel()
	random := rand.New(rand.NewPCG(4, 1))
	pick := func(values ...float64) float64 { return values[random.IntN(len(values))] }
	for range 30_000 {
		in := sample(random)
		in.FloorAreaM2 = pick(0, in.FloorAreaM2, 1e9)
		in.IndoorC = pick(in.IndoorC, 20, -30)
		in.InternalGainWM2 = pick(0, in.InternalGainWM2, 1e6, 5e-324, -3)
		in.CapacityJK = pick(0, in.CapacityJK, 1e15, 5e-324)
		in.TransmissionWK = pick(0, in.TransmissionWK, 1e9, 5e-324)
		in.SetpointShare = pick(0, 1, in.SetpointShare)
		in.Air.N50PerH = pick(0, in.Air.N50PerH)
		in.Air.AiringM3H = pick(0, in.Air.AiringM3H, 5e-324)
		in.Air.VolumeM3 = pick(0, in.Air.VolumeM3)
		c := &climate.Climate{}
		for i := range c.Months {
			m := &c.Months[i]
			m.Hours = pick(0, 720, 744)
			m.OutdoorC = pick(in.IndoorC, 20, 21, math.Nextafter(in.IndoorC, -100), math.Nextafter(in.IndoorC, 100), -20, 40)
			m.Wind10M, m.HorizontalKWhM2 = pick(0, 4, 30), pick(0, 100)
			m.VerticalKWhM2[climate.South] = pick(0, 80)
		}
		var out [12]Month
		need := Year(&in, c, &out)
		if need != Need(&in, c) {
			t.Fatalf("Need and Year differ: %+v", in)
		}
		var transmission [state.NumPaths]float64
		transmission[state.Wall] = in.TransmissionWK
		stack, wind := InfiltrationByDriver(&in, c, &out)
		values := []float64{need, stack, wind}
		paths := LossByPath(&in, c, &out, transmission)
		values = append(values, paths[:]...)
		for i := range out {
			m := &out[i]
			values = append(values, m.LossKWh, m.InternalKWh, m.SolarKWh, m.GainLossRatio, m.TimeConstantH, m.Utilisation, m.NeedKWh,
				IntermittencyFactor(m.TimeConstantH, m.GainLossRatio, in.SetpointShare))
			if m.NeedKWh < 0 || in.IndoorC <= c.Months[i].OutdoorC && m.NeedKWh != 0 {
				t.Fatalf("need %g at %g C inside, %g C outside", m.NeedKWh, in.IndoorC, c.Months[i].OutdoorC)
			}
		}
		for _, v := range values {
			if math.IsNaN(v) || math.IsInf(v, 0) {
				t.Fatalf("%g among\n%+v\n%+v\n%+v", v, in, c.Months, out)
			}
		}
	}
}

// No gains: the need is the loss, to the last bit. Gains below zero add to it.
func TestSpecialMonths(t *testing.T) {
	t.Parallel()
	in := reference()
	in.InternalGainWM2 = 0
	var out [12]Month
	need := Year(&in, one(climate.Month{Hours: 700, OutdoorC: 3}), &out)
	if need != out[0].LossKWh || out[0].Utilisation != 1 {
		t.Errorf("without gains: need %g of %g, eta %g", need, out[0].LossKWh, out[0].Utilisation)
	}
	in.InternalGainWM2 = -1
	need = Year(&in, one(climate.Month{Hours: 700, OutdoorC: 3}), &out)
	near(t, "with gains of -70 kWh", need, out[0].LossKWh+70, 1e-9)
	if need := Year(&in, one(climate.Month{Hours: 700, OutdoorC: 20}), &out); need != 0 || out[0].GainLossRatio != 0 {
		t.Errorf("as warm outside: need %g, gamma %g", need, out[0].GainLossRatio)
	}
	in.InternalGainWM2, in.TransmissionWK = 4, 0
	if need := Year(&in, one(climate.Month{Hours: 700, OutdoorC: 0}), &out); need != 0 || out[0].TimeConstantH != 0 {
		t.Errorf("without heat transfer: need %g, tau %g", need, out[0].TimeConstantH)
	}
}

func TestNeedAllocatesNothing(t *testing.T) {
	in := sample(rand.New(rand.NewPCG(5, 1)))
	c := temperate()
	var out [12]Month
	if n := testing.AllocsPerRun(100, func() { Need(&in, c) }); n != 0 {
		t.Errorf("Need allocates %g times", n)
	}
	if n := testing.AllocsPerRun(100, func() { Year(&in, c, &out) }); n != 0 {
		t.Errorf("Year allocates %g times", n)
	}
}

var sink float64

// BenchmarkNeed runs over many buildings, so that no branch is learnt by heart.
func BenchmarkNeed(b *testing.B) {
	c := temperate()
	random := rand.New(rand.NewPCG(6, 1))
	ins := make([]Input, 1024)
	for i := range ins {
		ins[i] = sample(random)
	}
	var out [12]Month
	for _, kernel := range []struct {
		what string
		run  func(*Input) float64
	}{
		{"Need", func(in *Input) float64 { return Need(in, c) }},
		{"Year", func(in *Input) float64 { return Year(in, c, &out) }},
	} {
		b.Run(kernel.what, func(b *testing.B) {
			b.ReportAllocs()
			n := 0
			for ; b.Loop(); n++ {
				sink += kernel.run(&ins[n&1023])
			}
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(n), "ns/state-year")
		})
	}
}
