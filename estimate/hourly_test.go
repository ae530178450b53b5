package estimate

import (
	"math"
	"testing"

	"kelvinrow/estimate/airflow"
	"kelvinrow/estimate/building"
	"kelvinrow/estimate/climate"
	"kelvinrow/estimate/refcase"
	"kelvinrow/estimate/state"
)

// network makes the five-resistance model of a state.
func network(s *state.State, in *airflow.Input, convective float64) refcase.Network {
	air := airflow.Prepare(in)
	n := refcase.Network{
		FloorAreaM2: s.FloorAreaM2, CapacityJK: s.CapacityJK, IndoorC: s.IndoorC, Convective: convective,
		OpaqueWK: s.BridgeWK(), GainW: s.InternalGainWM2 * s.FloorAreaM2, AirWK: air.HeatWK,
	}
	// A_m by class of capacity: ISO 13790:2008, table 12.
	switch perM2 := s.CapacityJK / s.FloorAreaM2; {
	case perM2 >= 370e3:
		n.MassAreaM2 = 3.5 * s.FloorAreaM2
	case perM2 >= 260e3:
		n.MassAreaM2 = 3.0 * s.FloorAreaM2
	default:
		n.MassAreaM2 = 2.5 * s.FloorAreaM2
	}
	side := [climate.NumOrientations]int{climate.North: refcase.North, climate.East: refcase.East, climate.South: refcase.South, climate.West: refcase.West}
	for i := range s.Elements {
		e := &s.Elements[i]
		wk := e.Adjustment * e.UWM2K * e.AreaM2
		switch e.Kind {
		case state.Window:
			n.LightWK += wk
			n.ApertureM2[side[e.Orientation]] += e.AreaM2 * e.G * 0.9 * (1 - e.FrameShare) * e.Shading
		case state.Door:
			n.LightWK += wk
		default:
			n.OpaqueWK += wk
		}
	}
	return n
}

// Fourteen dwellings of the starter rules through the 8,760 hours of Amsterdam: the
// year's need by months against the hourly method of ISO 13790:2008, annex C, with
// the same elements, air (driven by each hour's wind and temperature) and gains.
//
// The annex gives the heat of the heating to the air; with half of it radiant, as
// radiators give it, the walls are warmer and the need is higher.
//
// ISO 13790:2008, annex H, and comparisons of the monthly method with dynamic
// simulation (Corrado, Mechri and Fabrizio 2007; van Dijk, Spiekman and de Wilde
// 2005, both from memory) put its deviation for heated dwellings at about 10 to
// 15 %. Buildings of present codes need so little that a share of it says little:
// for needs below 50 kWh/m2 the bound is 15 % of 50 kWh/m2.
func TestDwellingsAgainstHours(t *testing.T) {
	t.Parallel()
	hours := refcase.Amsterdam(t)
	c, err := climate.Load(refcase.Shared(t, refcase.AmsterdamFile))
	if err != nil {
		t.Fatal(err)
	}
	base := testBasis(t)
	b, err := NewBasis(base.Set, c)
	if err != nil {
		t.Fatal(err)
	}
	// The same months with the sun of the hours: what is left then is the
	// utilisation and what averaging wind and temperature loses.
	own := *c
	for m := range own.Months {
		own.Months[m].VerticalKWhM2 = [climate.NumOrientations]float64{}
	}
	for _, h := range hours {
		v := &own.Months[h.Month].VerticalKWhM2
		v[climate.North] += h.FacadeWhM2[refcase.North] / 1000
		v[climate.East] += h.FacadeWhM2[refcase.East] / 1000
		v[climate.South] += h.FacadeWhM2[refcase.South] / 1000
		v[climate.West] += h.FacadeWhM2[refcase.West] / 1000
	}
	sunny, err := NewBasis(base.Set, &own)
	if err != nil {
		t.Fatal(err)
	}

	low, high := math.Inf(1), math.Inf(-1)
	for _, d := range []struct {
		use    string
		year   int
		wall   string
		areaM2 float64
		floors float64
	}{
		{"detached house", 1895, "stone", 150, 2},
		{"detached house", 1910, "solid brick", 140, 2},
		{"detached house", 1935, "cavity brick", 120, 2},
		{"detached house", 1958, "hollow block", 110, 1.5},
		{"detached house", 1973, "timber frame", 130, 1},
		{"detached house", 1985, "timber frame", 140, 1.5},
		{"detached house", 2001, "aerated concrete", 150, 2},
		{"detached house", 2016, "timber frame", 150, 2},
		{"terraced house", 1930, "solid brick", 95, 2},
		{"terraced house", 1968, "cavity brick", 105, 2},
		{"apartment block", 1910, "solid brick", 900, 4},
		{"apartment block", 1966, "concrete panel", 1800, 5},
		{"apartment block", 1988, "concrete panel", 1500, 4},
		{"apartment block", 2015, "in-situ concrete", 1500, 4},
	} {
		bl := testBuilding("x", values{
			building.UseField: d.use, building.YearBuilt: d.year, building.WallConstruction: d.wall,
			building.FloorArea: d.areaM2, building.Storeys: d.floors,
		})
		m, err := b.Model(bl)
		if err != nil {
			t.Fatal(err)
		}
		var o, withHours outcome
		b.run(m.State, &o)
		sunny.run(m.State, &withHours)
		perM2 := o.needKWh / d.areaM2
		for _, convective := range []float64{1, 0.5} {
			n := network(m.State, &o.in.Air, convective)
			hourly := 0.0
			for _, q := range n.NeedKWh(hours) {
				hourly += q / d.areaM2
			}
			deviation := perM2/hourly - 1
			t.Logf("%-16s %d %-16s tau %3.0f h, %3.0f %% to the air: %6.1f kWh/m2 by months, %6.1f by hours (%+.1f %%; with the hours' sun %+.1f %%)",
				d.use, d.year, d.wall, o.months[0].TimeConstantH, 100*convective, perM2, hourly, 100*deviation,
				100*(withHours.needKWh/d.areaM2/hourly-1))
			if math.Abs(perM2-hourly) > 0.15*math.Max(50, hourly) {
				t.Errorf("%s of %d: %.1f kWh/m2 by months, %.1f by hours", d.use, d.year, perM2, hourly)
			}
			low, high = math.Min(low, deviation), math.Max(high, deviation)
		}
	}
	t.Logf("by months %+.1f to %+.1f %% of that by hours", 100*low, 100*high)
}
