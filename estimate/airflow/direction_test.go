package airflow

import (
	"math"
	"testing"
)

// squarePlan returns the pressure coefficients of the walls of a square plan in
// wind at an angle to one of them, by Swami and Chandra, and their mean.
func squarePlan(degrees float64) (cps [4]float64, mean float64) {
	for side := range cps {
		a := math.Mod(degrees+90*float64(side), 360)
		if a > 180 {
			a = 360 - a
		}
		cps[side] = 0.6 * SwamiChandra(a*math.Pi/180, 0)
		mean += cps[side] / 4
	}
	return cps, mean
}

// overDirections is the mass balance averaged over the wind's directions; by
// symmetry half a quadrant of a square plan is enough.
func overDirections(n, r, height, indoorC, outdoorC, windPa float64) float64 {
	sum, weights := 0.0, 0.0
	for a := 0.0; a <= 45; a += 7.5 {
		w := 1.0
		if a == 0 || a == 45 {
			w = 0.5
		}
		cps, mean := squarePlan(a)
		sum += w * solve(zone(r, height, cps, mean), n, indoorC, outdoorC, windPa)
		weights += w
	}
	return sum / weights
}

// The algebraic model, which knows no wind direction, against the mass balance
// averaged over directions. Where one driver prevails it stays within what its
// authors state (7 % stack, 15 % wind; Walker and Wilson 1998, abstract, from
// memory). Where they are alike no figure is stated: beta weakens the sum by less
// than stack and wind cancel in the balance, so the model is higher there, never
// lower by more than a few per cent, and so errs towards more air.
func TestAgainstMassBalanceOverDirections(t *testing.T) {
	t.Parallel()
	stack, wind, mixedHigh, mixedLow := 0.0, 0.0, 0.0, 0.0
	for _, n := range []float64{0.55, 0.65, 0.75} {
		for _, r := range []float64{0.2, 0.35, 0.5} {
			for _, height := range []float64{2.5, 12} {
				in := Input{VolumeM3: 3600, N50PerH: math.Pow(50, n), FlowExponent: n, StackHeightM: height,
					LeakageR: r, Shelter: 1, WindFactor: 1, IndoorC: 20}
				c := Prepare(&in)
				for _, dT := range []float64{0, 10, 35} {
					for _, v := range []float64{0, 0.7, 1.5, 3, 5, 10} {
						if dT == 0 && v == 0 {
							continue
						}
						var f Flow
						c.At(20-dT, v, &f)
						d := f.InfiltrationM3H/3600/overDirections(n, r, height, 20, 20-dT, WindPressure(20-dT, v)) - 1
						switch {
						case f.WindM3H < 0.1*f.StackM3H:
							stack = math.Max(stack, math.Abs(d))
						case f.StackM3H < 0.1*f.WindM3H:
							wind = math.Max(wind, math.Abs(d))
						default:
							mixedHigh, mixedLow = math.Max(mixedHigh, d), math.Min(mixedLow, d)
						}
					}
				}
			}
		}
	}
	t.Logf("model over mean of directions: stack within %.1f %%, wind within %.1f %%, both alike %+.1f to %+.1f %%",
		100*stack, 100*wind, 100*mixedLow, 100*mixedHigh)
	if stack > 0.07 || wind > 0.15 {
		t.Errorf("stack %.3f (authors: 0.07), wind %.3f (authors: 0.15)", stack, wind)
	}
	if mixedHigh > 0.25 || mixedLow < -0.05 {
		t.Errorf("stack and wind alike: %+.3f to %+.3f", mixedLow, mixedHigh)
	}
}

// The model takes flow in and out as equal volumes. Equal masses of cold and warm
// air raise the share of the pressure above and draw in less, which no user of the
// model corrects for. Derived for a house that leaks through floor and ceiling
// alone (R 1), where the balance has a closed form: z/(1 - z) = (rho_i/rho_o)^(1/n),
// z the part of the pressure over the floor.
func TestEqualVolumesForEqualMasses(t *testing.T) {
	t.Parallel()
	const n = 0.65
	for dT, less := range map[float64]float64{10: 0.017, 20: 0.036, 35: 0.065} {
		k := math.Pow(AirDensity(20+zeroK)/AirDensity(20-dT+zeroK), 1/n)
		masses := 0.5 * math.Pow(k/(1+k), n)
		near(t, "share less than the model", 1-masses/StackFactor(n, 1, 0), less, 0.0005)
	}
}
