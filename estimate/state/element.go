package state

import (
	"errors"
	"fmt"
	"slices"

	"kelvinrow/estimate/fabric"
	"kelvinrow/estimate/ground"
)

// Side is where a layer is added.
type Side uint8

const (
	Outside Side = iota // the cold side
	Inside
)

// ErrNoLayers is returned where an element's layers are not known.
var ErrNoLayers = errors.New("no layers are known")

// Recompute sets the U-value from layers, surfaces and ground.
func (e *Element) Recompute() error {
	layers := 0.0
	if e.OnGround {
		// The ground models take the resistance of the layers as one number.
		t, err := fabric.Evaluate(0.17, e.Layers, 0.17)
		if err != nil && !errors.Is(err, fabric.ErrUneven) {
			return fmt.Errorf("%s: %w", e.Name, err)
		}
		layers = 1/t.UWM2K - 2*0.17
	}
	var err error
	switch {
	case !e.OnGround:
		var t fabric.Transmittance
		t, err = fabric.Evaluate(e.RsiM2KW, e.Layers, e.RseM2KW)
		if errors.Is(err, fabric.ErrUneven) {
			err = nil // the mean still is the best estimate; explain shows how far apart the limits are
		}
		e.UWM2K = t.UWM2K
	case e.Kind == Wall:
		t, evalErr := fabric.Evaluate(e.RsiM2KW, e.Layers, e.RseM2KW)
		if evalErr != nil && !errors.Is(evalErr, fabric.ErrUneven) {
			return fmt.Errorf("%s: %w", e.Name, evalErr)
		}
		e.UWM2K, err = ground.HeatedBasement{
			Slab: e.Ground, DepthM: e.BasementDepthM,
			WallResistanceM2KW: 1/t.UWM2K - e.RsiM2KW - e.RseM2KW,
		}.WallTransmittance()
	case e.VoidHeightM > 0:
		e.Ground.FloorResistanceM2KW = 0 // the base of the void is bare
		e.UWM2K, err = ground.Suspended{
			Slab: e.Ground, FloorUWM2K: 1 / (0.17 + layers + 0.17), HeightM: e.VoidHeightM,
			WallUWM2K: e.VoidWallUWM2K, VentAreaM2M: e.VentAreaM2M, WindMS: e.VoidWindMS, WindShelter: e.VoidShelter,
		}.Transmittance()
	case e.BasementDepthM > 0:
		e.Ground.FloorResistanceM2KW = layers
		e.UWM2K, err = ground.HeatedBasement{Slab: e.Ground, DepthM: e.BasementDepthM}.FloorTransmittance()
	default:
		e.Ground.FloorResistanceM2KW = layers
		e.UWM2K, err = e.Ground.Transmittance()
	}
	if err != nil {
		return fmt.Errorf("%s: %w", e.Name, err)
	}
	return nil
}

// AddLayer adds a layer on one side and recomputes. An element whose U-value is
// too high to leave any resistance for layers takes the layer as its only one.
func (e *Element) AddLayer(l fabric.Layer, side Side) error {
	at := len(e.Layers)
	if side == Inside {
		at = 0
	}
	e.Layers = slices.Insert(slices.Clone(e.Layers), at, l)
	return e.Recompute()
}

// FillAirLayer replaces the air layer of an element by a filling and
// recomputes. Where the layers are one resistance as found, the filling takes
// the place of an unventilated air layer of its thickness within it.
func (e *Element) FillAirLayer(fill fabric.Layer) error {
	r, err := fill.Resistance()
	if err != nil {
		return err
	}
	for i, l := range e.Layers {
		if l.ThicknessM > 0 && l.ConductivityWMK == 0 && l.ResistanceM2KW > 0 {
			e.Layers = slices.Clone(e.Layers)
			fill.ThicknessM = l.ThicknessM
			e.Layers[i] = fill
			return e.Recompute()
		}
	}
	if len(e.Layers) != 1 || e.Layers[0].ConductivityWMK != 0 {
		return ErrNoLayers
	}
	air := fabric.AirLayer(fill.ThicknessM, fabric.Horizontal, fabric.OrdinaryEmissivity, fabric.OrdinaryEmissivity)
	fill.ResistanceM2KW = max(0, r-air)
	if fill.ResistanceM2KW == 0 {
		return ErrNoLayers
	}
	fill.ConductivityWMK = 0
	return e.AddLayer(fill, Outside)
}
