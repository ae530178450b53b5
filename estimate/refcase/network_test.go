package refcase

import (
	"math"
	"testing"
)

// In weather that never changes the network is a chain of resistances, whatever
// the capacity: with ventilation alone, and with the surfaces held by operative
// temperature, what comes in goes out. Derived.
func TestNetworkConservesHeat(t *testing.T) {
	t.Parallel()
	hours := make([]Hour, 8760)
	for i := range hours {
		hours[i] = Hour{Month: i * 12 / len(hours), OutdoorC: -3}
		hours[i].FacadeWhM2[South] = 40
	}
	n := Network{
		FloorAreaM2: 100, CapacityJK: 165e3 * 100, MassAreaM2: 250, LightWK: 40, OpaqueWK: 120, IndoorC: 20, Convective: 0.5,
		GainW: 300, AirWK: func(float64, float64) float64 { return 50 },
	}
	n.ApertureM2[South] = 5
	// Follow the last hour by hand: the sum of what the mass, the windows and the air
	// lose is what heating, people and the sun give, but for the little that the
	// annex lets the windows throw straight out.
	need := n.NeedKWh(hours)
	power := 0.0
	for _, q := range need {
		power += q / 8760 * 1000
	}
	_, mass := n.hour(&hours[0], n.IndoorC, power)
	for range 5000 {
		_, mass = n.hour(&hours[0], mass, power)
	}
	op, again := n.hour(&hours[0], mass, power)
	if math.Abs(again-mass) > 1e-9 || math.Abs(op-20) > 0.01 {
		t.Fatalf("no steady state: mass %g then %g, operative %g", mass, again, op)
	}
	hem := 1 / (1/n.OpaqueWK - 1/(massSurfaceWM2K*n.MassAreaM2))
	surfaces := surfacesPerFloor * n.FloorAreaM2
	radiant := n.GainW/2 + 200 + power/2
	thrown := n.LightWK / (massSurfaceWM2K * surfaces) * radiant
	his := airSurfaceWM2K * surfaces
	// Solve air and surface from the operative temperature and the air's balance.
	air := n.GainW/2 + power/2
	s := op
	for range 100 {
		a := (his*s + 50*-3 + air) / (his + 50)
		s = (op - operativeAir*a) / (1 - operativeAir)
	}
	a := (his*s + 50*-3 + air) / (his + 50)
	out := hem*(mass+3) + n.LightWK*(s+3) + 50*(a+3)
	in := n.GainW + 200 + power - thrown
	if math.Abs(out/in-1) > 1e-6 {
		t.Errorf("%.3f W go out, %.3f W come in", out, in)
	}
}

// Without capacity to speak of, without gains, and with strong coupling inside, the
// need is that of the degree hours.
func TestNetworkWithoutMassCountsDegreeHours(t *testing.T) {
	t.Parallel()
	hours := make([]Hour, 240)
	want := 0.0
	for i := range hours {
		hours[i].OutdoorC = 10 + 15*math.Sin(float64(i)/7)
		want += 60 * math.Max(0, 20-hours[i].OutdoorC) / 1000
	}
	n := Network{FloorAreaM2: 1000, CapacityJK: 1e5, MassAreaM2: 2500, LightWK: 0.001, OpaqueWK: 10, IndoorC: 20, Convective: 1,
		AirWK: func(float64, float64) float64 { return 50 }}
	got := n.NeedKWh(hours)[0]
	if math.Abs(got/want-1) > 0.01 {
		t.Errorf("%.2f kWh, degree hours give %.2f", got, want)
	}
}
