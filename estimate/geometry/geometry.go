// Package geometry derives areas, lengths and volumes of a building from the
// few that are known, as a rectangular box of equal storeys, longer where the plan
// would be too deep for daylight, as wings would make it: A_f floor area, V
// heated volume, h clear storey height, h_ff floor to floor, n_s storeys, A_g
// footprint, P perimeter, r aspect ratio. Every given value replaces its
// estimate and nothing else. Left out: setbacks, courtyards, dormers, gable
// walls of pitched roofs and parts of different height.
package geometry

import (
	"errors"
	"fmt"
	"math"

	"kelvinrow/estimate/building"
)

// Given is a value that may be known.
type Given struct {
	Value float64
	Known bool
}

// Known makes a Given of a known value.
func Known(v float64) Given { return Given{Value: v, Known: true} }

// Input is what is known of a building's shape, and the rules' answers for what
// is not.
type Input struct {
	Use        building.Use // houses share their long side with neighbours, all others the short side
	Attachment building.Attachment
	RoofType   string // canonical word; only "heated attic" makes the roof larger than the footprint

	// What the building itself has. WallM2 is the opaque wall, without windows
	// and doors. PerimeterM is the whole perimeter, party walls included.
	FloorAreaM2   Given
	VolumeM3      Given // heated internal
	GrossVolumeM3 Given // gross external
	Storeys       Given
	StoreyHeightM Given // clear
	FootprintM2   Given
	PerimeterM    Given
	WallM2        Given
	RoofM2        Given
	GroundFloorM2 Given
	WindowM2      Given
	DoorM2        Given

	// What the rules say.
	RuleStoreyHeightM float64 // clear
	RuleStoreys       float64
	FloorThicknessM   float64
	AspectRatio       float64 // long side / short side
	MaxDepthM         float64 // short side at most this, where daylight limits the depth; 0: no limit
	WindowRatio       float64 // m2 of window per m2 of floor area
	DoorRatio         float64 // m2 of outside door per m2 of floor area
	RoofPitchDeg      float64
}

// Output is the shape of a building.
type Output struct {
	FloorAreaM2       float64
	VolumeM3          float64
	Storeys           float64
	StoreyHeightM     float64 // clear
	FloorToFloorM     float64
	FootprintM2       float64
	LongSideM         float64 // of the rectangle of footprint and aspect ratio
	ShortSideM        float64
	PerimeterM        float64
	ExposedPerimeterM float64 // without party walls
	EavesHeightM      float64
	GrossWallM2       float64 // exposed: opaque wall, windows and doors
	WallM2            float64 // opaque
	WindowM2          float64
	DoorM2            float64
	RoofM2            float64
	GroundFloorM2     float64

	Notes []string // findings in words: what was set aside or capped, and why
}

var errNoSize = errors.New("neither floor area nor volume is known")

// Plausibility of given values. They are wide on purpose: what is merely odd
// stays as given, what cannot be is set aside with a note.
const (
	minStoreyM, maxStoreyM = 1.8, 20.0 // clear height of one storey; halls and churches reach high
	minHeightM, maxHeightM = 2.0, 12.0 // volume / floor area
	areaFactor             = 2.0       // footprint times storeys against floor area, either way
	perimeterFactor        = 4.0       // perimeter against that of the rectangle
	maxWindowShare         = 0.6       // of the gross wall
	maxWindowRatio         = 1.0       // given windows against floor area: no glass box has more
	maxPitchDeg            = 75.0
)

// Derive computes the shape.
//
// Order: storeys, volume from the gross volume (V = 0.76 V_e up to three
// storeys, 0.80 V_e above: common practice, German energy-saving ordinance,
// annex 1), storey height, floor area or volume (V = A_f h), footprint
// (A_g = A_f/n_s), rectangle (short side sqrt(A_g/r), long side r times that, or
// the greatest depth and what length it takes), exposed perimeter, walls (P_e n_s h_ff), windows, doors, roof, ground floor.
func Derive(in Input) (Output, error) {
	d := deriver{in: in}
	d.dropImpossible()
	if err := d.size(); err != nil {
		return Output{}, err
	}
	d.plan()
	d.envelope()
	return d.out, nil
}

type deriver struct {
	in  Input
	out Output
}

func (d *deriver) note(format string, args ...any) {
	d.out.Notes = append(d.out.Notes, fmt.Sprintf(format, args...))
}

// dropImpossible sets aside given values that are not positive finite numbers,
// and makes the rules' numbers usable.
func (d *deriver) dropImpossible() {
	in := &d.in
	for _, g := range [...]struct {
		v    *Given
		name string
		zero bool // zero is a value: no windows, no door
	}{
		{&in.FloorAreaM2, "floor area", false},
		{&in.VolumeM3, "volume", false},
		{&in.GrossVolumeM3, "gross volume", false},
		{&in.Storeys, "storeys", false},
		{&in.StoreyHeightM, "storey height", false},
		{&in.FootprintM2, "footprint", false},
		{&in.PerimeterM, "perimeter", false},
		{&in.WallM2, "wall area", true},
		{&in.RoofM2, "roof area", true},
		{&in.GroundFloorM2, "ground-floor area", true},
		{&in.WindowM2, "window area", true},
		{&in.DoorM2, "door area", true},
	} {
		if v := g.v.Value; g.v.Known && (!(v >= 0) || v > 1e9 || v == 0 && !g.zero) {
			d.note("%s %g set aside: not a possible value", g.name, v)
			*g.v = Given{}
		}
	}
	if h := in.StoreyHeightM; h.Known && (h.Value < minStoreyM || h.Value > maxStoreyM) {
		d.note("storey height %.3g m set aside: outside %g to %g m", h.Value, minStoreyM, maxStoreyM)
		in.StoreyHeightM = Given{}
	}
	if n := in.Storeys; n.Known && n.Value < 1 {
		d.note("%.3g storeys taken as one", n.Value)
		in.Storeys.Value = 1
	}
	in.RuleStoreyHeightM = usable(in.RuleStoreyHeightM, minStoreyM, maxStoreyM, 2.5)
	in.RuleStoreys = usable(in.RuleStoreys, 1, 200, 1)
	in.FloorThicknessM = usable(in.FloorThicknessM, 0, 2, 0.3)
	in.AspectRatio = usable(in.AspectRatio, 1e-3, 1e3, 1)
	if in.AspectRatio < 1 {
		in.AspectRatio = 1 / in.AspectRatio
	}
	in.MaxDepthM = usable(in.MaxDepthM, 0, 1e3, 0)
	in.WindowRatio = usable(in.WindowRatio, 0, 10, 0)
	in.DoorRatio = usable(in.DoorRatio, 0, 10, 0)
	in.RoofPitchDeg = usable(in.RoofPitchDeg, 0, maxPitchDeg, 0)
}

// usable clamps v to a range; a value that is no number becomes the fallback.
func usable(v, low, high, fallback float64) float64 {
	if math.IsNaN(v) {
		return fallback
	}
	return min(max(v, low), high)
}

// size settles storeys, height, floor area and volume.
func (d *deriver) size() error {
	in, out := &d.in, &d.out
	area, volume := in.FloorAreaM2, in.VolumeM3

	// A footprint tells the storeys better than a rule does.
	out.Storeys = in.RuleStoreys
	switch {
	case in.Storeys.Known:
		out.Storeys = in.Storeys.Value
	case in.FootprintM2.Known && area.Known:
		out.Storeys = storeysOf(area.Value, in.FootprintM2.Value)
	}
	if !volume.Known && in.GrossVolumeM3.Known {
		share := 0.76
		if out.Storeys > 3 {
			share = 0.80
		}
		volume = Known(share * in.GrossVolumeM3.Value)
	}

	out.StoreyHeightM = in.RuleStoreyHeightM
	if area.Known && volume.Known {
		switch h := volume.Value / area.Value; {
		case h < minHeightM || h > maxHeightM:
			d.note("volume and floor area do not fit: %.3g m of height; the storey height is taken from elsewhere", h)
		default:
			out.StoreyHeightM = h
		}
	}
	if h := in.StoreyHeightM; h.Known {
		if area.Known && volume.Known && math.Abs(h.Value*area.Value/volume.Value-1) > 0.25 {
			d.note("storey height %.3g m differs from volume / floor area %.3g m by more than a quarter", h.Value, volume.Value/area.Value)
		}
		out.StoreyHeightM = h.Value
	}
	out.FloorToFloorM = out.StoreyHeightM + in.FloorThicknessM

	switch {
	case area.Known && volume.Known:
	case area.Known:
		volume = Known(area.Value * out.StoreyHeightM)
	case volume.Known:
		area = Known(volume.Value / out.StoreyHeightM)
		if !in.Storeys.Known && in.FootprintM2.Known {
			out.Storeys = storeysOf(area.Value, in.FootprintM2.Value)
		}
	default:
		return errNoSize
	}
	out.FloorAreaM2, out.VolumeM3 = area.Value, volume.Value
	return nil
}

// storeysOf returns the storeys that a floor area makes on a footprint; half
// storeys are real (floor area under a sloped roof counts in part).
func storeysOf(floorArea, footprint float64) float64 {
	return min(max(1, floorArea/footprint), 200)
}

// plan settles footprint, sides and perimeters.
func (d *deriver) plan() {
	in, out := &d.in, &d.out
	byStoreys := out.FloorAreaM2 / out.Storeys
	out.FootprintM2 = byStoreys
	if g := in.FootprintM2; g.Known {
		if q := g.Value / byStoreys; q > areaFactor || q < 1/areaFactor {
			d.note("footprint %.4g m2 set aside: it does not fit %.4g m2 of floor area on %.3g storeys", g.Value, out.FloorAreaM2, out.Storeys)
		} else {
			out.FootprintM2 = g.Value
		}
	}
	out.ShortSideM = math.Sqrt(out.FootprintM2 / in.AspectRatio)
	if in.MaxDepthM > 0 && !in.PerimeterM.Known {
		out.ShortSideM = min(out.ShortSideM, in.MaxDepthM)
	}
	out.LongSideM = out.FootprintM2 / out.ShortSideM
	rectangle := 2 * (out.LongSideM + out.ShortSideM)
	out.PerimeterM = rectangle
	if p := in.PerimeterM; p.Known {
		// No shape has less perimeter than the circle; 2 % for rounded numbers.
		circle := 2 * math.Sqrt(math.Pi*out.FootprintM2)
		switch {
		case p.Value < 0.98*circle:
			d.note("perimeter %.4g m set aside: less than that of a circle of %.4g m2", p.Value, out.FootprintM2)
		case p.Value > perimeterFactor*rectangle:
			d.note("perimeter %.4g m set aside: more than %g times that of a rectangle of %.4g m2", p.Value, perimeterFactor, out.FootprintM2)
		default:
			out.PerimeterM = p.Value
		}
	}

	side := out.ShortSideM
	if in.Use.IsHouse() {
		side = out.LongSideM
	}
	shared := 0.0
	switch in.Attachment {
	case building.OneSideShared:
		shared = side
	case building.TwoSidesShared:
		shared = 2 * side
	}
	// A given perimeter shorter than the rectangle's means a more compact plan,
	// whose party walls are shorter too: so some perimeter always stays exposed.
	if out.PerimeterM < rectangle {
		shared *= out.PerimeterM / rectangle
	}
	out.ExposedPerimeterM = out.PerimeterM - shared
	out.EavesHeightM = out.Storeys * out.FloorToFloorM
}

// envelope settles walls, windows, doors, roof and ground floor.
func (d *deriver) envelope() {
	in, out := &d.in, &d.out
	if w := in.WindowM2; w.Known && w.Value > maxWindowRatio*out.FloorAreaM2 {
		d.note("window area %.4g m2 set aside: more than the floor area of %.4g m2", w.Value, out.FloorAreaM2)
		in.WindowM2 = Given{}
	}
	out.WindowM2 = in.WindowRatio * out.FloorAreaM2
	out.DoorM2 = in.DoorRatio * out.FloorAreaM2
	if in.WindowM2.Known {
		out.WindowM2 = in.WindowM2.Value
	}
	if in.DoorM2.Known {
		out.DoorM2 = in.DoorM2.Value
	}
	gross := out.ExposedPerimeterM * out.Storeys * out.FloorToFloorM
	if in.WallM2.Known {
		gross = in.WallM2.Value + out.DoorM2
		if in.WindowM2.Known {
			gross += out.WindowM2
		} else {
			// windows = ratio * floor area, or the cap of the gross wall that
			// they are themselves part of: w = c (wall + door + w)
			out.WindowM2 = d.capped(out.WindowM2, gross*maxWindowShare/(1-maxWindowShare))
			gross += out.WindowM2
		}
		out.GrossWallM2, out.WallM2 = gross, in.WallM2.Value
	} else {
		if !in.DoorM2.Known {
			// Doors by floor area outgrow the wall of very deep plans.
			out.DoorM2 = min(out.DoorM2, 0.1*gross)
		}
		if !in.WindowM2.Known {
			out.WindowM2 = d.capped(out.WindowM2, gross*maxWindowShare)
		}
		out.WallM2 = gross - out.WindowM2 - out.DoorM2
		if out.WallM2 < 0 {
			d.note("windows and doors of %.4g m2 exceed the estimated wall of %.4g m2: no opaque wall left", out.WindowM2+out.DoorM2, gross)
			out.WallM2 = 0
		}
		out.GrossWallM2 = out.WallM2 + out.WindowM2 + out.DoorM2
	}

	out.RoofM2 = out.FootprintM2
	if in.RoofType == "heated attic" {
		out.RoofM2 /= math.Cos(in.RoofPitchDeg * math.Pi / 180)
	}
	if in.RoofM2.Known {
		out.RoofM2 = in.RoofM2.Value
	}
	out.GroundFloorM2 = out.FootprintM2
	if in.GroundFloorM2.Known {
		out.GroundFloorM2 = in.GroundFloorM2.Value
	}
}

// capped returns the window area, at most the limit.
func (d *deriver) capped(window, limit float64) float64 {
	if window <= limit {
		return window
	}
	d.note("windows of %.4g m2 by floor area capped at %g of the gross wall: %.4g m2", window, maxWindowShare, limit)
	return limit
}
