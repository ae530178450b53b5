package estimate

import (
	"fmt"

	"kelvinrow/estimate/archetype"
	"kelvinrow/estimate/building"
	"kelvinrow/estimate/geometry"
)

// geometry derives the shape from what the building has and the rules say.
func (b *Basis) geometry(r *reader, m *Model) (*geometry.Output, error) {
	y := m.years.built
	given := func(f building.Field) geometry.Given {
		if v, ok := r.known(f); ok {
			return geometry.Known(v)
		}
		return geometry.Given{}
	}
	in := geometry.Input{
		Use: m.Facts.Use, Attachment: m.attachment, RoofType: m.Facts.RoofType,
		FloorAreaM2: given(building.FloorArea), VolumeM3: given(building.Volume),
		GrossVolumeM3: given(building.GrossVolume), Storeys: given(building.Storeys),
		StoreyHeightM: given(building.StoreyHeight), FootprintM2: given(building.Footprint),
		PerimeterM: given(building.Perimeter), WallM2: given(building.WallArea),
		RoofM2: given(building.RoofArea), GroundFloorM2: given(building.GroundFloorArea),
		WindowM2: given(building.WindowArea), DoorM2: given(building.DoorArea),
	}
	// Only rules that are needed enter the account of inputs, except the few that
	// any shape needs.
	in.RuleStoreyHeightM = r.ruleUnless(in.StoreyHeightM.Known, "storey_height", "m", archetype.StoreyHeightM, y, "")
	in.RuleStoreys = r.ruleUnless(in.Storeys.Known, "storeys", "", archetype.StoreyCount, y, "")
	in.FloorThicknessM = r.rule("floor_thickness", "m", archetype.FloorThicknessM, y, "")
	in.AspectRatio = r.rule("aspect_ratio", "", archetype.AspectRatio, y, "")
	in.MaxDepthM = r.ruleUnless(in.PerimeterM.Known, "max_depth", "m", archetype.MaxDepthM, y, "")
	in.WindowRatio = r.ruleUnless(in.WindowM2.Known, "window_ratio", "m2/m2", archetype.WindowRatio, y, "")
	in.DoorRatio = r.ruleUnless(in.DoorM2.Known, "door_ratio", "m2/m2", archetype.DoorRatio, y, "")
	in.RoofPitchDeg = r.rule("roof_pitch", "degrees", archetype.RoofPitchDeg, y, m.Facts.RoofType)
	if r.err != nil {
		return nil, r.err
	}
	out, err := geometry.Derive(in)
	if err != nil {
		return nil, fmt.Errorf("shape: %w", err)
	}
	m.Notes = append(m.Notes, out.Notes...)
	if r.trail != nil {
		// Not stored in the set of rules: they follow from the values above.
		for _, d := range [...]struct {
			name, unit string
			given      bool
			v          float64
		}{
			{"floor_area", "m2", in.FloorAreaM2.Known, out.FloorAreaM2},
			{"volume", "m3", in.VolumeM3.Known, out.VolumeM3},
			{"footprint", "m2", in.FootprintM2.Known, out.FootprintM2},
			{"perimeter", "m", in.PerimeterM.Known, out.PerimeterM},
			{"exposed_perimeter", "m", false, out.ExposedPerimeterM},
			{"wall_area", "m2", in.WallM2.Known, out.WallM2},
			{"roof_area", "m2", in.RoofM2.Known, out.RoofM2},
			{"ground_floor_area", "m2", in.GroundFloorM2.Known, out.GroundFloorM2},
			{"window_area", "m2", in.WindowM2.Known, out.WindowM2},
			{"door_area", "m2", in.DoorM2.Known, out.DoorM2},
		} {
			if !d.given {
				r.stated(d.name, d.unit, d.v, "shape", "derived from floor area, volume, storeys and the rules for shape")
			}
		}
	}
	return &out, nil
}

// ruleUnless returns a rule's number, and leaves it out of the account where the
// building has its own: the shape falls back on it only if that is impossible.
func (r *reader) ruleUnless(known bool, name, unit string, p archetype.Property, year int, construction string) float64 {
	if known {
		if rule := r.find(p, year, construction); rule != nil {
			return rule.Typical
		}
		return 0
	}
	return r.rule(name, unit, p, year, construction)
}
