package measure

import (
	"kelvinrow/estimate/caution"
	"kelvinrow/estimate/fabric"
	"kelvinrow/estimate/state"
)

// Years from which hazardous materials were out of use in most of Europe
// (common practice in refurbishment surveys; local dates differ).
const asbestosUntil = 2005

func (j *job) oldMaterials() {
	if j.f.YearBuilt < asbestosUntil {
		j.cautions |= caution.Asbestos
	}
}

// insulate adds the measure's layer to the elements that match and still let
// more heat through than the table's limit.
func (j *job) insulate(match func(*state.Element) bool, where state.Side) (found, done bool) {
	layer := fabric.Layer{
		Name:            "added insulation",
		ThicknessM:      j.target("thickness_m"),
		ConductivityWMK: j.target("conductivity_w_mk"),
	}
	for i := range j.s.Elements {
		e := &j.s.Elements[i]
		if !match(e) {
			continue
		}
		found = true
		if e.UWM2K <= j.target("skip_below_u") {
			continue
		}
		if e.AddLayer(layer, where) == nil {
			done = true
			j.quantity += e.AreaM2
		}
	}
	if done {
		j.tighten(j.target("n50_factor"))
		j.s.BridgeUWM2K = max(min(0.02, j.s.BridgeUWM2K), j.s.BridgeUWM2K+j.target("bridge_delta"))
	}
	return found, done
}

// tighten scales the leakage; a factor of 0 or 1 leaves it.
func (j *job) tighten(factor float64) {
	if factor > 0 && factor < 1 {
		j.s.Air.N50PerH *= factor
		j.lessAir = true
		j.cautions |= caution.Combustion
	}
}

const alreadyInsulated = "already insulated well enough"

func isOutsideWall(e *state.Element) bool { return e.Kind == state.Wall && !e.OnGround }

func isRoof(e *state.Element) bool { return e.Kind == state.Roof }

func outsideWall(j *job) string {
	switch {
	case j.f.Protected:
		return "protected building: the outside must not be changed"
	case j.f.FacadeStays:
		return "the facade must stay as it is"
	}
	found, done := j.insulate(isOutsideWall, state.Outside)
	if !done {
		return orNone(found, "no outside wall")
	}
	j.cautions |= caution.Species | caution.Fire
	j.oldMaterials()
	return ""
}

func insideWall(j *job) string {
	switch j.f.WallConstruction {
	case "solid brick", "stone", "half-timbered", "in-situ concrete", "concrete panel", "hollow block", "aerated concrete":
	default:
		return "not for " + j.f.WallConstruction + " walls"
	}
	found, done := j.insulate(isOutsideWall, state.Inside)
	if !done {
		return orNone(found, "no outside wall")
	}
	j.cautions |= caution.InsideWall | caution.Overheating
	if j.f.Protected {
		j.cautions |= caution.Protected
	}
	j.oldMaterials()
	return ""
}

func cavity(j *job) string {
	if j.f.WallConstruction != "cavity brick" {
		return "no empty cavity in " + j.f.WallConstruction + " walls"
	}
	fill := fabric.Layer{
		Name:            "cavity filling",
		ThicknessM:      j.target("thickness_m"),
		ConductivityWMK: j.target("conductivity_w_mk"),
	}
	found := false
	for i := range j.s.Elements {
		e := &j.s.Elements[i]
		if !isOutsideWall(e) {
			continue
		}
		found = true
		if e.UWM2K > j.target("skip_below_u") && e.FillAirLayer(fill) == nil {
			j.quantity += e.AreaM2
		}
	}
	if j.quantity == 0 {
		return orNone(found, "no outside wall")
	}
	j.tighten(j.target("n50_factor"))
	j.cautions |= caution.Cavity
	if j.f.Protected {
		j.cautions |= caution.Protected
	}
	return ""
}

func attic(j *job) string {
	if j.f.RoofType == "flat" {
		return "flat roof: no attic"
	}
	if _, done := j.insulate(isRoof, state.Outside); !done {
		return alreadyInsulated
	}
	if j.f.RoofType == "cold attic" {
		j.cautions |= caution.Attic
	}
	j.cautions |= caution.Species
	if j.f.Protected {
		j.cautions |= caution.Protected
	}
	j.oldMaterials()
	return ""
}

func flatRoof(j *job) string {
	if j.f.RoofType != "flat" {
		return "no flat roof"
	}
	if _, done := j.insulate(isRoof, state.Outside); !done {
		return alreadyInsulated
	}
	j.cautions |= caution.Fire
	if j.f.Protected {
		j.cautions |= caution.Protected
	}
	j.oldMaterials()
	return ""
}

func floor(j *job) string {
	switch j.f.FloorType {
	case "unheated cellar", "suspended floor":
	case "heated basement":
		return "heated basement: no ceiling to an unheated space"
	default:
		return "floor on the ground: insulation needs a new floor"
	}
	if _, done := j.insulate(func(e *state.Element) bool { return e.Kind == state.Floor }, state.Outside); !done {
		return alreadyInsulated
	}
	j.cautions |= caution.Radon
	if j.f.FloorType == "suspended floor" {
		j.cautions |= caution.Mould
	}
	j.oldMaterials()
	return ""
}

func windows(j *job) string {
	if j.f.Protected {
		return "protected building: windows only with the consent of the heritage authority"
	}
	found := false
	for i := range j.s.Elements {
		e := &j.s.Elements[i]
		if e.Kind != state.Window {
			continue
		}
		found = true
		if e.UWM2K > j.target("skip_below_u") {
			e.Name = "new window"
			e.UWM2K, e.G, e.FrameShare = j.target("u"), j.target("g"), j.target("frame_share")
			j.quantity += e.AreaM2
		}
	}
	if j.quantity == 0 {
		if !found {
			return "no windows"
		}
		return "windows are good enough"
	}
	j.tighten(j.target("n50_factor"))
	j.cautions |= caution.Overheating
	if j.f.FacadeStays {
		j.cautions |= caution.Protected
	}
	j.oldMaterials()
	return ""
}

func orNone(found bool, none string) string {
	if found {
		return alreadyInsulated
	}
	return none
}
