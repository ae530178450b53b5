package airflow

import (
	"math"
	"testing"
)

// leak is one opening: power law with its share of C, height, and pressure
// coefficient of its side.
type leak struct{ share, height, cp float64 }

// zone builds the leaks of a box: ceiling, and walls spread evenly over height
// and four sides; those of a floor on the ground are its joints with the walls,
// at the foot of each side.
func zone(r, height float64, cps [4]float64, ceiling float64) []leak {
	leaks := []leak{{r / 2, height, ceiling}}
	for _, cp := range cps {
		leaks = append(leaks, leak{r / 8, 0, cp})
	}
	const steps = 40
	for i := range steps {
		for _, cp := range cps {
			leaks = append(leaks, leak{(1 - r) / (4 * steps), (float64(i) + 0.5) / steps * height, cp})
		}
	}
	return leaks
}

// solve finds the inside pressure at which as much air comes in as goes out, by
// bisection, and returns the flow in for C = 1, in units of mass per inside
// density: the single-zone mass balance, from first principles.
func solve(leaks []leak, n, indoorC, outdoorC, windPa float64) float64 {
	rhoO := AirDensity(outdoorC + zeroK)
	rhoI := AirDensity(indoorC + zeroK)
	flows := func(p float64) (in, net float64) {
		for _, l := range leaks {
			dp := l.cp*windPa - (rhoO-rhoI)*gravity*l.height - p
			q := l.share * math.Pow(math.Abs(dp), n)
			if dp > 0 {
				in += q
				net += q
			} else {
				net -= q
			}
		}
		return in, net
	}
	low, high := -500.0, 500.0
	for range 60 {
		mid := (low + high) / 2
		if _, net := flows(mid); net > 0 {
			low = mid
		} else {
			high = mid
		}
	}
	in, _ := flows((low + high) / 2)
	return in
}

// TestAgainstMassBalance compares the algebraic model with the mass balance over
// the range that the rules can produce. Its authors state, from 3,400 h of
// measurements, bias and scatter below 7 % where stack dominates and below 15 %
// where wind does (Walker and Wilson 1998, abstract, from memory).
func TestAgainstMassBalance(t *testing.T) {
	// Average pressure coefficients of a detached low-rise house in the open, by
	// side; a ceiling under a vented roof feels their mean (AIVC guide, from memory,
	// medium confidence).
	house := [4]float64{0.6, -0.65, -0.3, -0.65}
	mean := (house[0] + house[1] + house[2] + house[3]) / 4
	worst := map[string]float64{}
	for n := 0.55; n < 0.76; n += 0.05 {
		for _, r := range []float64{0.2, 0.25, 0.3, 0.5} {
			for _, h := range []float64{2.5, 5, 8, 12, 20, 30} {
				leaks := zone(r, h, house, mean)
				for _, dT := range []float64{-10, 0, 5, 15, 25, 40} {
					for _, wind := range []float64{0, 0.5, 1, 2, 4, 6, 10} {
						if dT == 0 && wind == 0 {
							continue
						}
						in := Input{VolumeM3: 3600, N50PerH: math.Pow(50, n), FlowExponent: n, StackHeightM: h, LeakageR: r, Shelter: 1, WindFactor: 1, IndoorC: 20}
						c := Prepare(&in)
						var f Flow
						c.At(20-dT, wind, &f)
						got := f.InfiltrationM3H / 3600
						want := solve(leaks, n, 20, 20-dT, WindPressure(20-dT, wind))
						deviation := math.Abs(got/want - 1)
						kind := "mixed"
						switch s, w := f.StackM3H, f.WindM3H; {
						case w < 0.1*s:
							kind = "stack"
						case s < 0.1*w:
							kind = "wind"
							if n < 0.59 || n > 0.71 {
								kind = "wind, unusual exponent"
							}
						}
						worst[kind] = math.Max(worst[kind], deviation)
					}
				}
			}
		}
	}
	t.Logf("largest deviation from the mass balance: stack-dominated %.1f %%, wind-dominated %.1f %% (%.1f %% with unusual exponents), mixed %.1f %%",
		100*worst["stack"], 100*worst["wind"], 100*worst["wind, unusual exponent"], 100*worst["mixed"])
	if worst["stack"] > 0.07 {
		t.Errorf("stack-dominated flows deviate by %.1f %%, the authors state 7 %%", 100*worst["stack"])
	}
	if worst["wind"] > 0.15 {
		t.Errorf("wind-dominated flows deviate by %.1f %%, the authors state 15 %%", 100*worst["wind"])
	}
	// Exponents below 0.6 and above 0.7 are outside the houses measured, and outside
	// the starter rules' typical values.
	if worst["wind, unusual exponent"] > 0.20 {
		t.Errorf("wind-dominated flows with unusual exponents deviate by %.1f %%", 100*worst["wind, unusual exponent"])
	}
	// For flows of like size no accuracy is stated: the interaction was fitted to
	// measurements with changing wind directions, and the balance here has one.
	if worst["mixed"] > 0.30 {
		t.Errorf("mixed flows deviate by %.1f %%", 100*worst["mixed"])
	}
}

// TestStackFactorIsExact integrates the power law over floor, ceiling and evenly
// leaking walls: at X = 0 the stack factor is exact.
func TestStackFactorIsExact(t *testing.T) {
	for _, n := range []float64{0.6, 0.67, 0.7} {
		for r := 0.0; r <= 0.8; r += 0.1 {
			// Unit stack pressure over unit height; neutral at half height.
			const steps = 200000
			in := r / 2 * math.Pow(0.5, n)
			for i := range steps {
				z := (float64(i) + 0.5) / steps
				if z < 0.5 {
					in += (1 - r) / steps * math.Pow(0.5-z, n)
				}
			}
			near(t, "f_s over the exact one", StackFactor(n, r, 0)/in, 1, 0.001)
		}
	}
}

func TestFlowProperties(t *testing.T) {
	for _, in := range []Input{
		{VolumeM3: 300, N50PerH: 5, FlowExponent: 0.65, StackHeightM: 5, LeakageR: 0.3, Shelter: 0.7, WindFactor: 0.6, IndoorC: 20, AiringM3H: 50},
		{VolumeM3: 300, N50PerH: 5, FlowExponent: 0.55, StackHeightM: 12, LeakageR: 0.25, Shelter: 1, WindFactor: 0.9, IndoorC: 21, ExtractM3H: 120},
		{VolumeM3: 300, N50PerH: 1, FlowExponent: 0.75, StackHeightM: 2.5, LeakageR: 0.5, Shelter: 0.3, WindFactor: 0.5, IndoorC: 18, SupplyM3H: 200, ExtractM3H: 150, HeatRecovery: 0.7},
		{VolumeM3: 300, N50PerH: 3, FlowExponent: 0.65, StackHeightM: 5, LeakageR: 0.3, Shelter: 0.7, WindFactor: 0.6, IndoorC: 20, StackDuctM2: 0.02, StackDuctCd: 0.6, StackDuctM: 6},
	} {
		c := Prepare(&in)
		for outdoor := -20.0; outdoor <= 30; outdoor += 1.7 {
			last := -1.0
			for wind := 0.0; wind <= 12; wind += 0.7 {
				var f Flow
				c.At(outdoor, wind, &f)
				if f.HeatWK != c.HeatWK(outdoor, wind) {
					t.Fatalf("At and HeatWK differ at %g C, %g m/s", outdoor, wind)
				}
				for _, v := range []float64{f.StackM3H, f.WindM3H, f.InfiltrationM3H, f.OutdoorAirM3H, f.HeatWK} {
					if math.IsNaN(v) || math.IsInf(v, 0) || v < 0 {
						t.Fatalf("at %g C, %g m/s: %+v", outdoor, wind, f)
					}
				}
				if f.InfiltrationM3H > (f.StackM3H+f.WindM3H)*(1+1e-12) {
					t.Errorf("together %g exceed the sum of %g and %g", f.InfiltrationM3H, f.StackM3H, f.WindM3H)
				}
				near(t, "superposition", f.InfiltrationM3H, 3600*Superpose(f.StackM3H/3600, f.WindM3H/3600, in.FlowExponent), 1e-9*(1+f.InfiltrationM3H))
				if wind > 1 && wind > 0 && f.WindM3H > f.StackM3H && f.OutdoorAirM3H < last {
					t.Errorf("more wind brings less air at %g C, %g m/s", outdoor, wind)
				}
				last = f.OutdoorAirM3H
			}
		}
	}
}
