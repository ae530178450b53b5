// Package ground computes heat transfer through floors on the ground, floors
// over a vented void and basements by ISO 13370:2017 (in substance the 2007
// edition), as annual coefficients.
//
// Symbols: A floor area, P exposed perimeter (party walls to heated buildings
// left out), B' = A/(0.5 P) characteristic dimension, d_t equivalent thickness
// in m, w wall thickness, lambda_g ground conductivity in W/(mK), z depth below
// ground. The equations are quoted from memory of the standard. Left out:
// seasonal phase shift, ground water, cold stores.
package ground

import (
	"fmt"
	"math"
)

// Surface resistances of floors, m2K/W: heat flowing down, and outside.
const (
	rsiDown = 0.17
	rseOut  = 0.04
	rsiWall = 0.13
)

// airHeat is the volumetric heat capacity of air as ISO 13370 rounds it,
// Wh/(m3K).
const airHeat = 0.33

// CharacteristicM is B' = A/(0.5 P) in m; +Inf without an exposed perimeter,
// where no heat reaches the outside through the ground.
func (s Slab) CharacteristicM() float64 {
	if s.PerimeterM <= 0 {
		return math.Inf(1)
	}
	return s.AreaM2 / (0.5 * s.PerimeterM)
}

// EquivalentM is d_t = w + lambda_g (R_si + R_f + R_se) in m.
func (s Slab) EquivalentM() float64 {
	return s.WallThicknessM + s.GroundConductivityWMK*(rsiDown+s.FloorResistanceM2KW+rseOut)
}

func (s Slab) check() error {
	if !(s.AreaM2 > 0) || !(s.PerimeterM >= 0) || !(s.WallThicknessM >= 0) || !(s.FloorResistanceM2KW >= 0) || !(s.GroundConductivityWMK > 0) {
		return fmt.Errorf("floor on the ground: needs an area and a ground conductivity above 0 and no negative perimeter, wall or resistance (has %+v)", s)
	}
	return nil
}

// Transmittance is U of a slab on the ground in W/(m2K):
//
//	d_t < B': U = 2 lambda_g/(pi B' + d_t) ln(pi B'/d_t + 1)
//	else:     U = lambda_g/(0.457 B' + d_t)
//
// 0 where there is no exposed perimeter. Source: ISO 13370:2017, 8.1.
func (s Slab) Transmittance() (float64, error) {
	if err := s.check(); err != nil {
		return 0, err
	}
	return floorU(s.CharacteristicM(), s.EquivalentM(), s.GroundConductivityWMK), nil
}

func floorU(b, dt, lambda float64) float64 {
	switch {
	case math.IsInf(b, 1):
		return 0
	case dt < b:
		return 2 * lambda / (math.Pi*b + dt) * math.Log(math.Pi*b/dt+1)
	}
	return lambda / (0.457*b + dt)
}

// Edge is insulation along the edge of a slab.
type Edge struct {
	WidthM         float64 // D: width of a horizontal strip, or depth of a vertical one
	ThicknessM     float64 // d_n
	ResistanceM2KW float64 // R_n
	Vertical       bool
}

// EdgePsi is the linear transmittance of edge insulation in W/(mK), negative:
//
//	psi = -(lambda_g/pi) [ln(D/d_t + 1) - ln(D/(d_t + d') + 1)], d' = R_n lambda_g - d_n
//
// with 2D for D where it is vertical. The floor then has U + 2 psi/B'. Source:
// ISO 13370:2017, annex D.
func (s Slab) EdgePsi(e Edge) float64 {
	lambda, dt := s.GroundConductivityWMK, s.EquivalentM()
	d := e.WidthM
	if e.Vertical {
		d *= 2
	}
	extra := e.ResistanceM2KW*lambda - e.ThicknessM
	return -lambda / math.Pi * (math.Log(d/dt+1) - math.Log(d/(dt+extra)+1))
}

// Suspended is a floor over a void that is vented to the outside.
type Suspended struct {
	Slab                // FloorResistanceM2KW is insulation on the base of the void
	FloorUWM2K  float64 // U_f, with 0.17 m2K/W on both faces
	HeightM     float64 // h: floor above outside ground
	WallUWM2K   float64 // of the walls of the void
	VentAreaM2M float64 // eps: openings per metre of perimeter
	WindMS      float64 // at 10 m
	WindShelter float64 // f_w: 0.02 sheltered, 0.05 average, 0.10 exposed
}

// Transmittance is U in W/(m2K): 1/U = 1/U_f + 1/(U_g + U_x), with
//
//	d_g = w + lambda_g (0.17 + R_g + 0.17), U_g = 2 lambda_g/(pi B' + d_g) ln(pi B'/d_g + 1)
//	U_x = 2 h U_w/B' + 1450 eps v f_w/B'
//
// Source: ISO 13370:2017, 8.2.
func (s Suspended) Transmittance() (float64, error) {
	if err := s.check(); err != nil {
		return 0, err
	}
	if s.FloorUWM2K <= 0 {
		return 0, nil
	}
	b := s.CharacteristicM()
	if math.IsInf(b, 1) {
		return 0, nil
	}
	return 1 / (1/s.FloorUWM2K + 1/(s.GroundU()+s.VoidU())), nil
}

// GroundU is U_g, between the void and the ground below, W/(m2K).
func (s Suspended) GroundU() float64 {
	b, lambda := s.CharacteristicM(), s.GroundConductivityWMK
	dg := s.WallThicknessM + lambda*(rsiDown+s.FloorResistanceM2KW+rsiDown)
	return 2 * lambda / (math.Pi*b + dg) * math.Log(math.Pi*b/dg+1)
}

// VoidU is U_x, between the void and the outside through walls and openings,
// W/(m2K).
func (s Suspended) VoidU() float64 {
	b := s.CharacteristicM()
	return 2*s.HeightM*s.WallUWM2K/b + 1450*s.VentAreaM2M*s.WindMS*s.WindShelter/b
}

// HeatedBasement is a heated space below ground.
type HeatedBasement struct {
	Slab
	DepthM             float64 // z
	WallResistanceM2KW float64 // R_w: layers of the wall
}

// FloorTransmittance is U_bf in W/(m2K): the slab's with d_t + z/2 for d_t.
// Source: ISO 13370:2017, 8.3.
func (b HeatedBasement) FloorTransmittance() (float64, error) {
	if err := b.check(); err != nil {
		return 0, err
	}
	return floorU(b.CharacteristicM(), b.EquivalentM()+b.DepthM/2, b.GroundConductivityWMK), nil
}

// WallTransmittance is U_bw in W/(m2K) over the depth z:
//
//	d_w = lambda_g (0.13 + R_w + 0.04)
//	U_bw = 2 lambda_g/(pi z) (1 + 0.5 d_t/(d_t + z)) ln(z/d_w + 1)
//
// with d_w for d_t where it is the smaller. Source: ISO 13370:2017, 8.3.
func (b HeatedBasement) WallTransmittance() (float64, error) {
	if err := b.check(); err != nil {
		return 0, err
	}
	if !(b.DepthM > 0) || !(b.WallResistanceM2KW >= 0) {
		return 0, fmt.Errorf("basement wall: needs a depth above 0 and no negative resistance (has %g m, %g m2K/W)", b.DepthM, b.WallResistanceM2KW)
	}
	lambda, z := b.GroundConductivityWMK, b.DepthM
	dw := lambda * (rsiWall + b.WallResistanceM2KW + rseOut)
	dt := math.Min(b.EquivalentM(), dw)
	return 2 * lambda / (math.Pi * z) * (1 + 0.5*dt/(dt+z)) * math.Log(z/dw+1), nil
}

// Coefficient is H_g = A U_bf + z P U_bw in W/K.
func (b HeatedBasement) Coefficient() (float64, error) {
	f, err := b.FloorTransmittance()
	if err != nil {
		return 0, err
	}
	w, err := b.WallTransmittance()
	if err != nil {
		return 0, err
	}
	return b.AreaM2*f + b.DepthM*b.PerimeterM*w, nil
}

// UnheatedBasement is an unheated space below ground under a heated floor.
type UnheatedBasement struct {
	HeatedBasement
	FloorUWM2K  float64 // U_f of the floor above it
	HeightM     float64 // h: floor above outside ground
	WallUWM2K   float64 // of its walls above ground
	AirChangesH float64 // n, 1/h; 0.3 where unknown
	VolumeM3    float64
}

// Transmittance is U of the floor above the basement in W/(m2K):
// 1/U = 1/U_f + A/(A U_bf + z P U_bw + h P U_w + 0.33 n V). Source: ISO
// 13370:2017, 8.4.
func (u UnheatedBasement) Transmittance() (float64, error) {
	h, err := u.Coefficient()
	if err != nil {
		return 0, err
	}
	if u.FloorUWM2K <= 0 {
		return 0, nil
	}
	h += u.HeightM*u.PerimeterM*u.WallUWM2K + airHeat*u.AirChangesH*u.VolumeM3
	return 1 / (1/u.FloorUWM2K + u.AreaM2/h), nil
}
