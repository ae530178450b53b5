package measure

import (
	"math"
	"testing"

	"github.com/google/go-cmp/cmp"

	"kelvinrow/estimate/archetype"
	"kelvinrow/estimate/building"
	"kelvinrow/estimate/caution"
	"kelvinrow/estimate/fabric"
	"kelvinrow/estimate/state"
)

func starter(t *testing.T) map[string]*Measure {
	t.Helper()
	set, err := archetype.Starter()
	if err != nil {
		t.Fatal(err)
	}
	all, err := All(set)
	if err != nil {
		t.Fatal(err)
	}
	out := map[string]*Measure{}
	for i := range all {
		out[all[i].Terms.Key] = &all[i]
	}
	return out
}

func house() (*state.State, *Facts) {
	wall := state.Element{Kind: state.Wall, Name: "cavity", AreaM2: 120, Adjustment: 1, RsiM2KW: 0.13, RseM2KW: 0.04, Layers: []fabric.Layer{
		{Name: "brick", ThicknessM: 0.1, ConductivityWMK: 0.56},
		{Name: "air layer", ThicknessM: 0.05, ResistanceM2KW: 0.18},
		{Name: "brick", ThicknessM: 0.1, ConductivityWMK: 0.77},
	}}
	roof := state.Element{Kind: state.Roof, Name: "found", AreaM2: 60, Adjustment: 0.9, RsiM2KW: 0.10, RseM2KW: 0.10,
		Layers: []fabric.Layer{{Name: "as found", ResistanceM2KW: 0.5}}}
	floor := state.Element{Kind: state.Floor, Name: "found", AreaM2: 60, Adjustment: 0.6, RsiM2KW: 0.17, RseM2KW: 0.17,
		Layers: []fabric.Layer{{Name: "as found", ResistanceM2KW: 0.6}}}
	for _, e := range []*state.Element{&wall, &roof, &floor} {
		if err := e.Recompute(); err != nil {
			panic(err)
		}
	}
	window := state.Element{Kind: state.Window, AreaM2: 20, Adjustment: 1, UWM2K: 2.8, G: 0.75, FrameShare: 0.3, Shading: 0.8}
	return &state.State{
			FloorAreaM2: 120, VolumeM3: 310, IndoorC: 20, BridgeUWM2K: 0.1, SetpointShare: 1,
			Elements: []state.Element{wall, roof, floor, window},
			Air:      state.Air{Ventilation: building.Natural, N50PerH: 8, FlowExponent: 0.65, AiringM3H: 60, MinimumM3H: 151},
			System:   state.System{Heating: "boiler", Carrier: "gas", Generation: 0.82, Distribution: 0.88},
		}, &Facts{WallConstruction: "cavity brick", RoofType: "cold attic", FloorType: "unheated cellar", YearBuilt: 1955,
			Dwellings: 1, DesignLoadW: 9000}
}

func apply(t *testing.T, m *Measure, s *state.State, f *Facts) Effect {
	t.Helper()
	var into state.State
	e, why := m.Apply(s, f, &into)
	if why != "" {
		t.Fatalf("%s does not apply: %s", m.Terms.Key, why)
	}
	return e
}

// TestMeasuresChangeWhatTheySay applies each measure to a house it fits.
func TestMeasuresChangeWhatTheySay(t *testing.T) {
	all := starter(t)
	for key, m := range all {
		s, f := house()
		before, _ := house()
		switch key {
		case "inside-wall-insulation":
			f.WallConstruction = "solid brick"
		case "flat-roof-insulation":
			f.RoofType = "flat"
		}
		e := apply(t, m, s, f)
		if d := cmp.Diff(before, s); d != "" {
			t.Errorf("%s changed the state it was given:\n%s", key, d)
		}
		if cmp.Equal(before, e.State) {
			t.Errorf("%s changes nothing", key)
		}
		if !(e.Quantity > 0) || !(m.Cost(e.Quantity) > 0) {
			t.Errorf("%s: quantity %g", key, e.Quantity)
		}
		for i := range e.State.Elements {
			if is, was := e.State.Elements[i].UWM2K, s.Elements[i].UWM2K; is > was {
				t.Errorf("%s raises U of element %d from %g to %g", key, i, was, is)
			}
		}
		if e.State.Air.N50PerH > s.Air.N50PerH {
			t.Errorf("%s makes the building leakier", key)
		}
		if e.State.Air.N50PerH < s.Air.N50PerH && !e.LessAir {
			t.Errorf("%s tightens the building and does not say so", key)
		}
	}
}

func TestAddedLayerIsInSeries(t *testing.T) {
	s, f := house()
	m := starter(t)["outside-wall-insulation"]
	e := apply(t, m, s, f)
	want := fabric.Retrofitted(s.Elements[0].UWM2K, m.Terms.Target["thickness_m"]/m.Terms.Target["conductivity_w_mk"])
	if got := e.State.Elements[0].UWM2K; math.Abs(got-want) > 1e-12 {
		t.Errorf("U %g, want %g (ISO 6946: resistances in series)", got, want)
	}
	if e.State.BridgeUWM2K >= s.BridgeUWM2K {
		t.Error("outside insulation covers thermal bridges")
	}
}

func TestCavityIsFilledOnce(t *testing.T) {
	s, f := house()
	m := starter(t)["cavity-filling"]
	e := apply(t, m, s, f)
	layers := e.State.Elements[0].Layers
	if len(layers) != 3 || layers[1].Name != "cavity filling" || layers[1].ThicknessM != 0.05 {
		t.Errorf("layers after filling: %+v", layers)
	}
	if _, why := m.Apply(e.State, f, new(state.State)); why == "" {
		t.Error("a filled cavity is filled again")
	}
}

func TestWhereMeasuresDoNotApply(t *testing.T) {
	all := starter(t)
	for _, c := range []struct {
		key    string
		change func(*state.State, *Facts)
	}{
		{"outside-wall-insulation", func(_ *state.State, f *Facts) { f.Protected = true }},
		{"outside-wall-insulation", func(_ *state.State, f *Facts) { f.FacadeStays = true }},
		{"new-windows", func(_ *state.State, f *Facts) { f.Protected = true }},
		{"new-windows", func(s *state.State, _ *Facts) { s.Elements[3].UWM2K = 0.9 }},
		{"cavity-filling", func(_ *state.State, f *Facts) { f.WallConstruction = "timber frame" }},
		{"attic-insulation", func(_ *state.State, f *Facts) { f.RoofType = "flat" }},
		{"flat-roof-insulation", func(_ *state.State, f *Facts) { f.RoofType = "cold attic" }},
		{"floor-insulation", func(_ *state.State, f *Facts) { f.FloorType = "slab on ground" }},
		{"draught-sealing", func(s *state.State, _ *Facts) { s.Air.N50PerH = 1 }},
		{"balanced-recovery", func(s *state.State, _ *Facts) { s.Air.Ventilation = building.BalancedRecovery }},
		{"demand-controlled-extract", func(s *state.State, _ *Facts) { s.Air.Ventilation = building.DemandControlled }},
		{"heating-controls", func(s *state.State, _ *Facts) { s.System.Distribution = 0.99 }},
		{"heat-generator", func(s *state.State, _ *Facts) { s.System.Heating = "heat pump" }},
		{"heat-generator", func(s *state.State, _ *Facts) { s.System.Heating = "district heating" }},
	} {
		s, f := house()
		c.change(s, f)
		if _, why := all[c.key].Apply(s, f, new(state.State)); why == "" {
			t.Errorf("%s applies where it must not", c.key)
		}
	}
}

func TestCautionsStandBesideTheMeasure(t *testing.T) {
	all := starter(t)
	for key, want := range map[string]uint64{
		"outside-wall-insulation":   uint64(caution.Fire | caution.Asbestos | caution.Species | caution.Combustion),
		"attic-insulation":          uint64(caution.Attic | caution.Species),
		"floor-insulation":          uint64(caution.Radon),
		"new-windows":               uint64(caution.Overheating | caution.Asbestos),
		"draught-sealing":           uint64(caution.Combustion | caution.Radon),
		"demand-controlled-extract": uint64(caution.Combustion),
		"heat-generator":            uint64(caution.HeatPump),
		"cavity-filling":            uint64(caution.Cavity),
	} {
		s, f := house()
		e := apply(t, all[key], s, f)
		if uint64(e.Cautions)&want != want {
			t.Errorf("%s: cautions %v lack some of %b", key, caution.Shorts(e.Cautions), want)
		}
	}
}

func TestCompanionGivesTheAirThatIsMissing(t *testing.T) {
	terms := starter(t)[CompanionKey].Terms
	s, _ := house()
	added := Companion(s, terms)
	if got := s.Air.ExtractM3H + s.Air.AiringM3H; math.Abs(got-s.Air.MinimumM3H) > 1e-9 || added <= 0 {
		t.Errorf("fans and airing bring %g m3/h, the use needs %g", got, s.Air.MinimumM3H)
	}
	if again := Companion(s, terms); again != 0 {
		t.Errorf("brings %g m3/h more the second time", again)
	}
	s, _ = house()
	s.Air.Ventilation, s.Air.SupplyM3H, s.Air.ExtractM3H, s.Air.AiringM3H = building.Balanced, 80, 80, 0
	Companion(s, terms)
	if s.Air.SupplyM3H != s.Air.ExtractM3H || math.Abs(s.Air.SupplyM3H-151) > 1e-9 {
		t.Errorf("balanced ventilation becomes %g and %g m3/h", s.Air.SupplyM3H, s.Air.ExtractM3H)
	}
	s, _ = house()
	s.Air.Ventilation, s.Air.SupplyM3H, s.Air.AiringM3H = building.SupplyFan, 80, 20
	if added := Companion(s, terms); math.Abs(added-51) > 1e-9 || math.Abs(s.Air.SupplyM3H-131) > 1e-9 || s.Air.ExtractM3H != 0 {
		t.Errorf("a supply fan of 80 m3/h becomes %g and %g m3/h, %g added", s.Air.SupplyM3H, s.Air.ExtractM3H, added)
	}
}

// Every measure belongs to a group, or packages would never hold it.
func TestEveryMeasureHasAGroup(t *testing.T) {
	for key := range byKey {
		if _, ok := groupOf[key]; !ok {
			t.Errorf("%s is in no group", key)
		}
	}
}
