package estimate

import (
	"fmt"
	"math"

	"kelvinrow/estimate/airflow"
	"kelvinrow/estimate/archetype"
	"kelvinrow/estimate/building"
	"kelvinrow/estimate/climate"
	"kelvinrow/estimate/fabric"
	"kelvinrow/estimate/geometry"
	"kelvinrow/estimate/ground"
	"kelvinrow/estimate/measure"
	"kelvinrow/estimate/state"
)

// Constants of the model that no rule varies.
const (
	groundConductivityWMK = 2.0    // sand or gravel, the default of ISO 13370:2017
	ventAreaM2M           = 0.0015 // void ventilation openings per metre of perimeter, ISO 13370
	voidHeightM           = 0.3    // floor above outside ground; judgement
	voidWallUWM2K         = 1.7    // wall of the void; judgement, old brickwork
	voidWindMS            = 4.0    // wind at 10 m for the void, before shielding; the usual value in ISO 13370
	basementDepthM        = 2.2    // heated basement below ground; judgement
	ductDischarge         = 0.6    // discharge coefficient of a passive-stack duct; common practice
	ductAboveRoofM        = 1.0    // duct outlet above the eaves; judgement
)

// Model is a building ready for the balance.
type Model struct {
	State *state.State
	Facts measure.Facts
	Notes []string

	years      years
	attachment building.Attachment
	meteredKWh float64
	shares     [building.NumKinds]float64
}

// years are the years that matter for each part.
type years struct{ built, wall, roof, floor, windows int }

// Model fills what is not known of a building and builds its state.
func (b *Basis) Model(bl *building.Building) (*Model, error) {
	return b.model(&reader{b: bl, set: b.Set})
}

func (b *Basis) model(r *reader) (*Model, error) {
	m := &Model{State: &state.State{}}
	s := m.State
	r.key.Region = r.b.Text(building.Region)

	m.Facts.Use = r.use()
	r.key.Use = m.Facts.Use
	m.years = r.years()
	y := m.years
	if i, ok := building.WordIndex(building.AttachmentField,
		r.word(building.AttachmentField, archetype.AttachmentWord, y.built, "")); ok {
		m.attachment = building.Attachment(i)
		r.key.Attachment = m.attachment
	}
	m.Facts.YearBuilt = y.built
	m.Facts.WallConstruction = r.word(building.WallConstruction, archetype.WallWord, y.built, "")
	m.Facts.RoofType = r.word(building.RoofType, archetype.RoofWord, y.built, "")
	m.Facts.FloorType = r.word(building.FloorType, archetype.FloorWord, y.built, "")
	m.Facts.Protected = r.yes(building.Protected)
	m.Facts.FacadeStays = r.yes(building.FacadeStays)
	if i, ok := building.WordIndex(building.ExposureField,
		r.word(building.ExposureField, archetype.ExposureWord, y.built, "")); ok {
		m.Facts.Exposure = building.Exposure(i)
	}

	g, err := b.geometry(r, m)
	if err != nil {
		return nil, err
	}
	s.FloorAreaM2, s.VolumeM3, s.Storeys = g.FloorAreaM2, g.VolumeM3, g.Storeys
	if d, ok := r.known(building.Dwellings); ok {
		m.Facts.Dwellings = d
	} else if m.Facts.Use.IsHousing() && !m.Facts.Use.IsHouse() {
		m.Facts.Dwellings = math.Max(1, math.Round(g.FloorAreaM2/
			r.rule("area_per_dwelling", "m2", archetype.AreaPerDwelling, y.built, "")))
	} else {
		m.Facts.Dwellings = 1
	}

	if err := b.envelope(r, m, g); err != nil {
		return nil, err
	}
	b.conditions(r, m)
	b.air(r, m, g)
	b.system(r, m)
	if r.err != nil {
		return nil, r.err
	}
	m.shares = inputShares(r.b)
	m.meteredKWh, _ = r.known(building.MeteredHeat)
	return m, nil
}

// use returns the building's use; without one, what the dwellings and the size
// make likely.
func (r *reader) use() building.Use {
	if k, ok := r.b.Get(building.UseField); ok {
		if i, valid := building.WordIndex(building.UseField, k.Text); valid {
			r.note(k)
			return building.Use(i)
		}
	}
	use := building.DetachedHouse
	dwellings, _ := r.b.Number(building.Dwellings)
	area, _ := r.b.Number(building.FloorArea)
	attachment := r.b.Text(building.AttachmentField)
	switch {
	case dwellings > 2, area > 400:
		use = building.ApartmentBlock
	case attachment == building.OneSideShared.String():
		use = building.SemiDetachedHouse
	case attachment == building.TwoSidesShared.String():
		use = building.TerracedHouse
	}
	r.stated("use", "", use.String(), "use-unknown", "judgement: more than two dwellings or 400 m2 is an apartment block, else a house by its attachment")
	return use
}

// years returns the years of the parts: when renewed, else when built; without
// any, the year assumed for the use.
func (r *reader) years() years {
	built, ok := r.known(building.YearBuilt)
	if !ok {
		built = r.rule("year_built", "", archetype.AssumedYear, 0, "")
	}
	part := func(f building.Field) int {
		if v, ok := r.known(f); ok {
			// A part cannot be older than the building; a register that says so
			// means the year built.
			return int(math.Max(v, built))
		}
		return int(built)
	}
	y := years{
		built: int(built),
		wall:  part(building.YearWall), roof: part(building.YearRoof),
		floor: part(building.YearFloor), windows: part(building.YearWindows),
	}
	if !r.has(building.YearWindows) {
		y.windows = max(y.windows, int(r.rule("windows_not_before", "", archetype.WindowsNotBefore, y.built, "")))
	}
	return y
}

func (r *reader) yes(f building.Field) bool {
	v, ok := r.known(f)
	return ok && v != 0
}

// envelope builds the elements: opaque ones from build-ups or from a U-value
// the building has, windows from their glazing.
func (b *Basis) envelope(r *reader, m *Model, g *geometry.Output) error {
	s, y, f := m.State, m.years, &m.Facts
	rse := fabric.OutsideResistance(siteWind[f.Exposure])

	wall, err := b.element(r, state.Wall, building.WallU, archetype.WallBuildup, y.wall, f.WallConstruction, rse)
	if err != nil {
		return err
	}
	wall.AreaM2 = g.WallM2

	roof, err := b.element(r, state.Roof, building.RoofU, archetype.RoofBuildup, y.roof, f.RoofType, rse)
	if err != nil {
		return err
	}
	roof.AreaM2 = g.RoofM2
	roof.Adjustment = r.rule("roof_adjustment", "", archetype.AdjustRoof, y.roof, f.RoofType)

	floor, err := b.element(r, state.Floor, building.FloorU, archetype.FloorBuildup, y.floor, f.FloorType, rse)
	if err != nil {
		return err
	}
	floor.AreaM2 = g.GroundFloorM2
	floor.Adjustment = r.rule("floor_adjustment", "", archetype.AdjustFloor, y.floor, f.FloorType)
	elements := append(make([]state.Element, 0, 10), wall, roof)
	if _, measured := r.b.Get(building.FloorU); !measured && f.FloorType != "unheated cellar" {
		floor.OnGround = true
		floor.Adjustment = 1
		floor.Ground = ground.Slab{
			AreaM2:                g.GroundFloorM2,
			PerimeterM:            g.ExposedPerimeterM,
			WallThicknessM:        r.rule("wall_thickness", "m", archetype.WallThickness, y.built, f.WallConstruction),
			GroundConductivityWMK: groundConductivityWMK,
		}
		switch f.FloorType {
		case "suspended floor":
			floor.VoidHeightM, floor.VentAreaM2M, floor.VoidWallUWM2K = voidHeightM, ventAreaM2M, voidWallUWM2K
			floor.VoidWindMS, floor.VoidShelter = voidWindMS, voidShelter[f.Exposure]
		case "heated basement":
			floor.BasementDepthM = basementDepthM
		}
		if err := floor.Recompute(); err != nil {
			return fmt.Errorf("ground floor: %w", err)
		}
	}
	elements = append(elements, floor)
	if floor.BasementDepthM > 0 && g.ExposedPerimeterM > 0 {
		bw := wall
		bw.Name, bw.OnGround, bw.Ground = "basement "+wall.Name, true, floor.Ground
		bw.BasementDepthM = floor.BasementDepthM
		bw.AreaM2 = g.ExposedPerimeterM * basementDepthM
		if err := bw.Recompute(); err != nil {
			return fmt.Errorf("basement wall: %w", err)
		}
		elements = append(elements, bw)
	}

	glazing := r.word(building.Glazing, archetype.GlazingWord, y.windows, "")
	window := state.Element{
		Kind: state.Window, Name: glazing, Adjustment: 1,
		UWM2K:      r.number(building.WindowU, archetype.WindowUValue, y.windows, glazing),
		G:          r.rule("window_g", "", archetype.WindowG, y.windows, glazing),
		FrameShare: r.rule("frame_share", "", archetype.FrameShare, y.windows, glazing),
		Shading:    r.rule("shading", "", archetype.Shading, y.windows, ""),
	}
	longSides := r.rule("front_back", "", archetype.FrontBack, y.built, "")
	shares := [climate.NumOrientations]float64{
		climate.North: longSides / 2, climate.South: longSides / 2,
		climate.East: (1 - longSides) / 2, climate.West: (1 - longSides) / 2,
	}
	for o, share := range shares {
		if area := g.WindowM2 * share; area > 0 {
			window.Orientation, window.AreaM2 = climate.Orientation(o), area
			elements = append(elements, window)
		}
	}
	if g.DoorM2 > 0 {
		elements = append(elements, state.Element{
			Kind: state.Door, Name: "outside door", AreaM2: g.DoorM2, Adjustment: 1,
			UWM2K: r.rule("door_u", "W/(m2K)", archetype.DoorUValue, y.built, ""),
		})
	}
	// Elements without area carry nothing and would only clutter the account.
	s.Elements = elements[:0]
	for _, e := range elements {
		if e.AreaM2 > 0 {
			s.Elements = append(s.Elements, e)
		}
	}
	s.BridgeUWM2K = r.rule("bridge_u", "W/(m2K)", archetype.BridgeU, y.built, f.WallConstruction)
	return nil
}

// siteWind is the wind speed next to surfaces by exposure, m/s: it sets R_se
// (ISO 6946:2017, annex C).
var siteWind = [building.NumExposures]float64{
	building.NormalExposure: 4, building.Sheltered: 2, building.Exposed: 7,
}

// voidShelter is the wind shielding factor f_w of ISO 13370.
var voidShelter = [building.NumExposures]float64{
	building.NormalExposure: 0.05, building.Sheltered: 0.02, building.Exposed: 0.10,
}

// element makes an opaque element without its area. A U-value that the building
// has stands as one layer of the resistance that gives it, so that a measure
// can add another.
func (b *Basis) element(r *reader, kind state.Path, known building.Field, p archetype.Property, year int, construction string, rse float64) (state.Element, error) {
	e := state.Element{Kind: kind, Adjustment: 1, RseM2KW: rse, Name: construction}
	direction := map[state.Path]fabric.Direction{state.Wall: fabric.Horizontal, state.Roof: fabric.Up, state.Floor: fabric.Down}[kind]
	e.RsiM2KW = fabric.InsideResistance(direction)
	if u, ok := r.known(known); ok {
		e.UWM2K = u
		rest := 1/u - e.RsiM2KW - e.RseM2KW
		if rest <= 0 {
			return e, nil // lets through more than its surfaces alone would: no layer left to name
		}
		e.Layers = []fabric.Layer{{Name: "as found, by its U-value", ResistanceM2KW: rest}}
		return e, nil
	}
	rule := r.find(p, year, construction)
	if rule == nil {
		return e, r.err
	}
	up, ok := b.Set.Buildup(rule.Word)
	if !ok {
		return e, fmt.Errorf("rule %s names a build-up %q that does not exist", rule.ID, rule.Word)
	}
	r.stated(string(p), "", rule.Word, rule.ID, rule.Source)
	e.Name = up.Name
	e.Layers = up.Layers
	if up.BothInside {
		e.RseM2KW = e.RsiM2KW
	}
	if kind == state.Floor && construction != "unheated cellar" {
		return e, nil // the ground model gives the U-value
	}
	if err := e.Recompute(); err != nil {
		return e, fmt.Errorf("build-up %s: %w", up.Name, err)
	}
	return e, nil
}

// conditions sets what the use asks for.
func (b *Basis) conditions(r *reader, m *Model) {
	s := m.State
	u := &b.Set.Uses[m.Facts.Use]
	s.IndoorC, s.InternalGainWM2, s.SetpointShare = u.IndoorC, u.InternalGainWM2, u.SetpointShare
	r.stated("indoor_temperature", "C", u.IndoorC, "use: "+u.Word, u.Source)
	r.stated("internal_gains", "W/m2", u.InternalGainWM2, "use: "+u.Word, u.Source)
	r.stated("setpoint_share", "", u.SetpointShare, "use: "+u.Word, u.Source)
	s.CapacityJK = 1000 * s.FloorAreaM2 *
		r.rule("capacity", "kJ/(m2K)", archetype.CapacityKJM2K, m.years.built, m.Facts.WallConstruction)
}

// air sets leakage, stack, wind and the flows of the ventilation.
func (b *Basis) air(r *reader, m *Model, g *geometry.Output) {
	s, y, f := m.State, m.years, &m.Facts
	a := &s.Air
	switch q50, ok := r.known(building.Q50); {
	case ok && !r.has(building.N50):
		a.N50PerH = airflow.N50FromQ50(q50, s.EnvelopeM2(), s.VolumeM3)
	default:
		a.N50PerH = r.number(building.N50, archetype.N50Rule, y.built, f.WallConstruction)
	}
	a.FlowExponent = r.rule("flow_exponent", "", archetype.FlowExponent, y.built, "")
	connected := g.Storeys
	if !f.Use.IsHouse() {
		share := r.rule("connected_storeys", "", archetype.ConnectedStoreys, y.built, "")
		connected = 1 + share*math.Max(0, g.Storeys-1)
	}
	a.StackHeightM = g.StoreyHeightM * connected
	switch { // Walker and Wilson (1998): leakage shares by storeys
	case connected < 1.5:
		a.LeakageR = 0.5
	case connected < 2.5:
		a.LeakageR = 0.3
	default:
		a.LeakageR = 0.25
	}
	a.Shelter = r.rule("shelter", "", archetype.ShelterRule, y.built, f.Exposure.String())
	a.EavesHeightM = g.EavesHeightM
	a.WindFactor = airflow.EavesWindFactor(b.Climate.Terrain, g.EavesHeightM)

	vent := r.ventilation(y.built)
	a.Ventilation = vent
	w := vent.String()
	area := s.FloorAreaM2
	a.SupplyM3H, a.ExtractM3H = r.flows(vent, area, y.built)
	if vent == building.DemandControlled {
		k := r.rule("demand_factor", "", archetype.DemandFactor, y.built, w)
		a.SupplyM3H *= k
		a.ExtractM3H *= k
	}
	if vent == building.BalancedRecovery {
		a.HeatRecovery = r.number(building.HeatRecovery, archetype.RecoveryRule, y.built, w) *
			r.rule("recovery_cut", "", archetype.RecoveryCut, y.built, w)
	}
	if a.SupplyM3H+a.ExtractM3H > 0 {
		a.FanPowerWM3H = r.number(building.FanPower, archetype.FanPowerRule, y.built, w)
	}
	a.AiringM3H = area * r.rule("airing_rate", "m3/(h m2)", archetype.AiringRate, y.built, w)
	if vent == building.PassiveStack {
		a.StackDuctM2 = area * r.rule("duct_area", "m2/m2", archetype.DuctM2PerM2, y.built, w)
		a.StackDuctCd = ductDischarge
		// Each storey has its own duct up to the roof: their mean height counts.
		a.StackDuctM = g.EavesHeightM/2 + ductAboveRoofM
	}
	u := &b.Set.Uses[f.Use]
	occupants, ok := r.known(building.Occupants)
	if !ok {
		occupants = area / u.AreaPerPersonM2
		r.stated("occupants", "", occupants, "use: "+u.Word, u.Source)
	}
	a.MinimumM3H = 3.6 * math.Max(u.MinAirLSM2*area, u.MinAirLSPerson*occupants)
}

func (r *reader) has(f building.Field) bool {
	_, ok := r.b.Get(f)
	return ok
}

// ventilation returns the type stated, else what stated flows tell, else the
// rule's.
func (r *reader) ventilation(year int) building.Ventilation {
	if k, ok := r.b.Get(building.VentilationField); ok {
		if i, valid := building.WordIndex(building.VentilationField, k.Text); valid && i > 0 {
			r.note(k)
			return building.Ventilation(i)
		}
	}
	guess := building.VentilationUnknown
	switch {
	case r.has(building.HeatRecovery):
		guess = building.BalancedRecovery
	case r.has(building.SupplyAirflow):
		guess = building.Balanced
	case r.has(building.ExtractAirflow):
		guess = building.ExtractFan
	}
	if guess != building.VentilationUnknown {
		r.stated("ventilation", "", guess.String(), "ventilation-from-flows", "the building states flows or heat recovery but no type")
		return guess
	}
	rule := r.find(archetype.VentilationWord, year, "")
	if rule == nil {
		return building.Natural
	}
	r.stated("ventilation", "", rule.Word, rule.ID, rule.Source)
	i, _ := building.WordIndex(building.VentilationField, rule.Word)
	return building.Ventilation(i)
}

// flows returns supply and extract, m3/h: stated ones, else by floor area.
// Balanced ventilation with one flow stated has the other alike.
func (r *reader) flows(v building.Ventilation, area float64, year int) (supply, extract float64) {
	get := func(f building.Field, p archetype.Property) float64 {
		if q, ok := r.known(f); ok {
			return q
		}
		return area * r.rule(f.Key()+"_rate", "m3/(h m2)", p, year, v.String())
	}
	switch v {
	case building.ExtractFan, building.DemandControlled:
		return 0, get(building.ExtractAirflow, archetype.ExtractRate)
	case building.SupplyFan:
		return get(building.SupplyAirflow, archetype.SupplyRate), 0
	case building.Balanced, building.BalancedRecovery:
		switch s, e := r.has(building.SupplyAirflow), r.has(building.ExtractAirflow); {
		case s && !e:
			supply = get(building.SupplyAirflow, archetype.SupplyRate)
			return supply, supply
		case e && !s:
			extract = get(building.ExtractAirflow, archetype.ExtractRate)
			return extract, extract
		}
		return get(building.SupplyAirflow, archetype.SupplyRate), get(building.ExtractAirflow, archetype.ExtractRate)
	}
	return 0, 0
}

// system sets generator, distribution, carrier and hot water.
func (b *Basis) system(r *reader, m *Model) {
	s, y := m.State, m.years
	u := &b.Set.Uses[m.Facts.Use]
	sys := &s.System
	sys.Heating = r.word(building.HeatingSystem, archetype.HeatingWord, y.built, "")
	sys.Carrier = r.word(building.CarrierField, archetype.CarrierWord, y.built, sys.Heating)
	sys.Generation = r.number(building.Efficiency, archetype.GeneratorRule, y.built, sys.Heating)
	sys.Distribution = r.rule("distribution_efficiency", "", archetype.DistributionRule, y.built, sys.Heating)
	sys.HotWaterKWh = u.HotWaterKWhM2 * s.FloorAreaM2
	r.stated("hot_water", "kWh/(m2 a)", u.HotWaterKWhM2, "use: "+u.Word, u.Source)
}
