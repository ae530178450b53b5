package fabric

import "math"

// Window is a window of one kind of glass and frame.
type Window struct {
	GlassM2, GlassUWM2K float64
	FrameM2, FrameUWM2K float64
	EdgeM, EdgePsiWMK   float64 // visible edge of the glass
}

// WindowTransmittance is U_w = (A_g U_g + A_f U_f + l_g psi_g)/(A_g + A_f) in
// W/(m2K). Source: ISO 10077-1.
func WindowTransmittance(w Window) float64 {
	return (w.GlassM2*w.GlassUWM2K + w.FrameM2*w.FrameUWM2K + w.EdgeM*w.EdgePsiWMK) / (w.GlassM2 + w.FrameM2)
}

// CoupledWindows is U_w of two windows one behind the other, in W/(m2K), with
// the resistance of the air between them in m2K/W:
// 1/(1/U_1 - R_si + R_s - R_se + 1/U_2). Source: ISO 10077-1.
func CoupledWindows(u1, u2, gapM2KW float64) float64 {
	return 1 / (1/u1 - InsideResistance(Horizontal) + gapM2KW - OutsideResistance(4) + 1/u2)
}

// Shuttered is U of a window behind a closed shutter that adds a resistance in
// m2K/W. Source: ISO 10077-1.
func Shuttered(uw, shutterM2KW float64) float64 { return 1 / (1/uw + shutterM2KW) }

// UncoatedGlass is the emissivity of bare glass, EN 673.
const UncoatedGlass = 0.837

// glassConductivityWMK is that of soda-lime glass, EN 673.
const glassConductivityWMK = 1.0

// Gap is a gas-filled gap of a glazing unit.
type Gap struct {
	WidthM                   float64
	Emissivity1, Emissivity2 float64
	ArgonShare               float64 // the rest is air
}

// gas properties at 10 C: density kg/m3, viscosity kg/(m s), conductivity
// W/(mK), heat capacity J/(kg K). Source: EN 673, from memory.
type gas struct{ density, viscosity, conductivity, capacity float64 }

var (
	air   = gas{1.232, 1.761e-5, 0.02496, 1008}
	argon = gas{1.699, 2.164e-5, 0.01684, 519}
)

func (a gas) mix(b gas, share float64) gas {
	m := func(x, y float64) float64 { return x*(1-share) + y*share }
	return gas{m(a.density, b.density), m(a.viscosity, b.viscosity), m(a.conductivity, b.conductivity), m(a.capacity, b.capacity)}
}

// Conditions of EN 673 for vertical glazing.
const (
	gapMeanK       = 283.0
	gapDifferenceK = 15.0 // over all gaps
)

// GlazingTransmittance is U_g in W/(m2K) of panes of one thickness with gaps
// between them, surface coefficients h_e and h_i in W/(m2K) (25 and 7.7):
//
//	1/U = 1/h_e + sum d/lambda + sum 1/(h_g + h_r) + 1/h_i
//	h_g = Nu lambda/s, Nu = max(1, 0.035 (Gr Pr)^0.38), vertical
//	h_r = 4 sigma T_m^3/(1/eps1 + 1/eps2 - 1)
//
// Source: EN 673, from memory.
func GlazingTransmittance(gaps []Gap, paneM, he, hi float64) float64 {
	total := 1/he + 1/hi + float64(len(gaps)+1)*paneM/glassConductivityWMK
	for _, g := range gaps {
		fill := air.mix(argon, g.ArgonShare)
		dt := gapDifferenceK / float64(len(gaps))
		grashof := 9.81 * math.Pow(g.WidthM, 3) * dt * fill.density * fill.density / (gapMeanK * fill.viscosity * fill.viscosity)
		prandtl := fill.viscosity * fill.capacity / fill.conductivity
		nusselt := math.Max(1, 0.035*math.Pow(grashof*prandtl, 0.38))
		hr := RadiativeCoefficient(1, gapMeanK) / (1/g.Emissivity1 + 1/g.Emissivity2 - 1)
		total += 1 / (nusselt*fill.conductivity/g.WidthM + hr)
	}
	return 1 / total
}
