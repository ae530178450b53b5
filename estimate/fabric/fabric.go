// Package fabric computes the thermal transmittance of opaque elements and
// windows: surface resistances from convection and radiation, air layers,
// layers of one and of two materials, corrections (ISO 6946:2017), windows
// (ISO 10077-1) and glazing (EN 673).
//
// Symbols: R resistance in m2K/W, U transmittance in W/(m2K), d thickness in m,
// lambda conductivity in W/(mK), h surface coefficient in W/(m2K). Layers run
// from inside to outside. Equations are quoted from memory of the standards and
// checked against published examples. Left out: numerical calculation of
// two-dimensional heat flow, and elements whose insulation is bridged by metal.
package fabric

import (
	"errors"
	"fmt"
	"math"
)

// StefanBoltzmann is the Stefan-Boltzmann constant, W/(m2K4), exact to the
// digits given (CODATA 2018).
const StefanBoltzmann = 5.670374419e-8

// Ordinary surfaces and the mean temperatures at which ISO 6946:2017, annex C,
// takes radiation.
const (
	OrdinaryEmissivity = 0.9
	InsideMeanK        = 293.15
	OutsideMeanK       = 273.15
)

// InsideConvection is h_ci in W/(m2K): 5.0 for heat flowing up, 2.5
// horizontally, 0.7 down. Source: ISO 6946:2017, C.2.
func InsideConvection(d Direction) float64 {
	switch d {
	case Up:
		return 5.0
	case Down:
		return 0.7
	}
	return 2.5
}

// OutsideConvection is h_ce = 4 + 4 v in W/(m2K), v the wind speed next to the
// surface in m/s. Source: ISO 6946:2017, C.3.
func OutsideConvection(windMS float64) float64 { return 4 + 4*windMS }

// RadiativeCoefficient is h_r = eps 4 sigma T_m^3 in W/(m2K). Source: ISO
// 6946:2017, C.2.
func RadiativeCoefficient(emissivity, meanK float64) float64 {
	return emissivity * 4 * StefanBoltzmann * meanK * meanK * meanK
}

// SurfaceResistance is R_s = 1/(h_c + h_r) in m2K/W. Source: ISO 6946:2017, C.1.
func SurfaceResistance(hc, hr float64) float64 { return 1 / (hc + hr) }

// InsideResistance is R_si in m2K/W: 0.10 for heat flowing up, 0.13
// horizontally (within 30 degrees of the horizontal plane), 0.17 down: the
// values of ISO 6946:2017, table 7, to which SurfaceResistance leads.
func InsideResistance(d Direction) float64 {
	switch d {
	case Up:
		return 0.10
	case Down:
		return 0.17
	}
	return 0.13
}

// OutsideResistance is R_se in m2K/W for the wind speed next to the surface,
// rounded to two decimals as in the wind table of ISO 6946:2017, annex C: 0.04
// at the usual 4 m/s.
func OutsideResistance(windMS float64) float64 {
	r := SurfaceResistance(OutsideConvection(windMS), RadiativeCoefficient(OrdinaryEmissivity, OutsideMeanK))
	return math.Round(100*r) / 100
}

// airLayerRadiation is h_r0 in W/(m2K) at 10 C as ISO 6946:2017, annex D,
// rounds it.
const airLayerRadiation = 5.1

// AirLayer is the resistance in m2K/W of an unventilated air layer of thickness
// d in m (up to 0.3 m) between faces of the given emissivities:
// R_g = 1/(h_a + E h_r0), E = 1/(1/eps1 + 1/eps2 - 1). Source: ISO 6946:2017,
// annex D; it reproduces the standard's table for ordinary faces (0.9).
func AirLayer(thicknessM float64, d Direction, emissivity1, emissivity2 float64) float64 {
	if thicknessM <= 0 {
		return 0
	}
	ha := 0.025 / thicknessM
	switch d {
	case Up:
		ha = math.Max(1.95, ha)
	case Down:
		ha = math.Max(0.12*math.Pow(thicknessM, -0.44), ha)
	default:
		ha = math.Max(1.25, ha)
	}
	e := 1 / (1/emissivity1 + 1/emissivity2 - 1)
	return 1 / (ha + e*airLayerRadiation)
}

// Resistance of one layer in m2K/W: the declared one, else d/lambda. For a layer
// of two materials it is that of the first. A layer with neither is an error.
func (l Layer) Resistance() (float64, error) {
	switch {
	case l.ResistanceM2KW > 0:
		return l.ResistanceM2KW, nil
	case l.ResistanceM2KW < 0 || math.IsNaN(l.ResistanceM2KW):
		return 0, fmt.Errorf("layer %s: resistance %g is not positive", l.Name, l.ResistanceM2KW)
	case !(l.ThicknessM > 0) || !(l.ConductivityWMK > 0):
		return 0, fmt.Errorf("layer %s: needs a resistance, or a thickness and a conductivity above 0 (has %g m, %g W/(mK))", l.Name, l.ThicknessM, l.ConductivityWMK)
	}
	return l.ThicknessM / l.ConductivityWMK, nil
}

func (l Layer) bridged() bool { return l.BridgeShare > 0 }

// bridge is the resistance of the second material over the layer's thickness.
func (l Layer) bridge() (float64, error) {
	if l.BridgeShare >= 1 || !(l.BridgeConductivityWMK > 0) || !(l.ThicknessM > 0) {
		return 0, fmt.Errorf("layer %s: a second material needs a share below 1, a thickness and a conductivity (has %g, %g m, %g W/(mK))", l.Name, l.BridgeShare, l.ThicknessM, l.BridgeConductivityWMK)
	}
	return l.ThicknessM / l.BridgeConductivityWMK, nil
}

// Transmittance is the result of Evaluate.
type Transmittance struct {
	UWM2K          float64 // 1/R_tot + dU
	ResistanceM2KW float64 // R_tot = (R' + R'')/2, before corrections
	CorrectionWM2K float64 // dU for air gaps and fixings
	UpperM2KW      float64 // R', parallel sections from surface to surface
	LowerM2KW      float64 // R'', layer by layer
	RelativeError  float64 // (R' - R'')/(2 R_tot), largest possible
}

// ErrUneven is returned where the two limits of the combined method lie too far
// apart for it.
var ErrUneven = errors.New("upper and lower limit of the resistance differ by more than a factor 1.5: the combined method does not hold")

// Evaluate returns the transmittance of layers between surface resistances
// rsi and rse in m2K/W: U = 1/R_tot + dU, dU for the air gaps and fixings that the
// layers name (the standard lets it be left out below 3 % of U; it is kept, so that
// there is no step). With layers of two materials R_tot is the
// mean of the upper limit R' = 1/sum(f_m/R_m) over all straight sections m and
// the lower limit R” = rsi + sum(1/sum(f_q/R_q)) + rse. Area shares of different
// layers are taken as independent of each other.
//
// Source: ISO 6946:2017, 6.7.1.1 and 6.7.2. Layers without a positive resistance
// are an error; R'/R” > 1.5 is ErrUneven.
func Evaluate(rsi float64, layers []Layer, rse float64) (Transmittance, error) {
	plain := rsi + rse
	lower := rsi + rse
	sections := []section{{share: 1}}
	single := true
	for _, l := range layers {
		r, err := l.Resistance()
		if err != nil {
			return Transmittance{}, err
		}
		if !l.bridged() {
			plain += r
			lower += r
			for i := range sections {
				sections[i].resistance += r
			}
			continue
		}
		rb, err := l.bridge()
		if err != nil {
			return Transmittance{}, err
		}
		single = false
		f := l.BridgeShare
		lower += 1 / ((1-f)/r + f/rb)
		n := len(sections)
		for i := range n {
			s := sections[i]
			sections[i] = section{s.share * (1 - f), s.resistance + r}
			sections = append(sections, section{s.share * f, s.resistance + rb})
		}
	}
	if single {
		if !(plain > 0) {
			return Transmittance{}, errors.New("an element without any resistance")
		}
		t := Transmittance{ResistanceM2KW: plain, UpperM2KW: plain, LowerM2KW: plain}
		t.correct(layers)
		return t, nil
	}
	u := 0.0
	for _, s := range sections {
		u += s.share / (rsi + s.resistance + rse)
	}
	upper := 1 / u
	total := (upper + lower) / 2
	t := Transmittance{
		ResistanceM2KW: total, UpperM2KW: upper, LowerM2KW: lower,
		RelativeError: (upper - lower) / (2 * total),
	}
	t.correct(layers)
	if upper/lower > 1.5 {
		return t, ErrUneven
	}
	return t, nil
}

// correct adds the corrections of the layers, which are known to be sound.
func (t *Transmittance) correct(layers []Layer) {
	for _, l := range layers {
		r, _ := l.Resistance()
		t.CorrectionWM2K += l.correction(r, t.ResistanceM2KW)
	}
	t.UWM2K = 1/t.ResistanceM2KW + t.CorrectionWM2K
}

// section is one straight path through the element.
type section struct{ share, resistance float64 }

// EffectiveResistances returns one resistance per layer in m2K/W such that rsi,
// they and rse add up to 1/U of Evaluate. A layer of one material has its own;
// layers of two materials share what remains in proportion to their resistances in
// the lower limit; layers with gaps or fixings have what those leave of them.
func EffectiveResistances(rsi float64, layers []Layer, rse float64) ([]float64, error) {
	t, err := Evaluate(rsi, layers, rse)
	if err != nil && !errors.Is(err, ErrUneven) {
		return nil, err
	}
	out := make([]float64, len(layers))
	rest, bridged := t.ResistanceM2KW-rsi-rse, 0.0
	for i, l := range layers {
		out[i], _ = l.Resistance() // checked by Evaluate
		if l.bridged() {
			rb, _ := l.bridge()
			out[i] = 1 / ((1-l.BridgeShare)/out[i] + l.BridgeShare/rb)
			bridged += out[i]
			continue
		}
		rest -= out[i]
	}
	for i, l := range layers {
		if l.bridged() {
			out[i] *= rest / bridged
		}
	}
	if t.CorrectionWM2K > 0 {
		lost := t.ResistanceM2KW - 1/t.UWM2K
		for i, l := range layers {
			r, _ := l.Resistance()
			out[i] -= lost * l.correction(r, t.ResistanceM2KW) / t.CorrectionWM2K
		}
	}
	return out, nil
}

// Retrofitted is U after adding a resistance in m2K/W to an element of known U:
// U = 1/(1/U_old + R). Source: ISO 6946:2017, 6.7.1.1, resistances in series.
func Retrofitted(uOldWM2K, addedM2KW float64) float64 {
	return 1 / (1/uOldWM2K + addedM2KW)
}
