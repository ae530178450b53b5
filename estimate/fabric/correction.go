package fabric

import "math"

// Gaps is how air gaps run through insulation.
type Gaps uint8

const (
	GapsNone     Gaps = iota // none, or none that matters
	GapsBridging             // bridging the insulation, no circulation of air
	GapsOpen                 // bridging it, with circulation on the warm side
)

// GapWords are the words of Gaps, in their order.
var GapWords = [...]string{"", "bridging", "open"}

func (g Gaps) String() string { return GapWords[min(g, GapsOpen)] }

// AirGapCorrection is dU_g = dU” (R_1/R_tot)^2 in W/(m2K), dU” 0, 0.01 or 0.04,
// R_1 the layer with the gaps. Source: ISO 6946:2017, annex F.2.
func AirGapCorrection(g Gaps, layerM2KW, totalM2KW float64) float64 {
	level := [...]float64{0, 0.01, 0.04}[min(g, GapsOpen)]
	return level * math.Pow(layerM2KW/totalM2KW, 2)
}

// Fasteners go through an insulation layer.
type Fasteners struct {
	ConductivityWMK float64 // lambda_f
	PerM2           float64 // n_f
	SectionM2       float64 // A_f of one
	ThicknessM      float64 // d_0 of the insulation
	DepthM          float64 // d_1 where they do not go all through; 0 where they do
}

// FastenerCorrection is dU_f = alpha lambda_f n_f A_f/d_0 (R_1/R_tot)^2 in
// W/(m2K), alpha 0.8, or 0.8 d_1/d_0 for recessed ones; none below 1 W/(mK).
// Source: ISO 6946:2017, annex F.3.
func FastenerCorrection(f Fasteners, layerM2KW, totalM2KW float64) float64 {
	if f.ConductivityWMK < 1 {
		return 0
	}
	alpha, depth := 0.8, f.ThicknessM
	if f.DepthM > 0 {
		alpha, depth = 0.8*f.DepthM/f.ThicknessM, f.DepthM
	}
	return alpha * f.ConductivityWMK * f.PerM2 * f.SectionM2 / depth * math.Pow(layerM2KW/totalM2KW, 2)
}

// InvertedRoofCorrection is dU_r = p f x (R_1/R_tot)^2 in W/(m2K), p the mean
// rain in mm/day in the heating season, f x drainage (0.04 for one layer with
// butt joints and open cover). Source: ISO 6946:2017, annex F.4.
func InvertedRoofCorrection(rainMMDay, drainage, layerM2KW, totalM2KW float64) float64 {
	return rainMMDay * drainage * math.Pow(layerM2KW/totalM2KW, 2)
}

// Negligible reports whether corrections may be left out: below 3 % of U. Source:
// ISO 6946:2017, 6.9.
func Negligible(correction, uWM2K float64) bool { return math.Abs(correction) < 0.03*uWM2K }

// SlightlyVentilated is the total resistance of an element whose air layer has
// openings of 500 to 1500 mm2 per m length: linear between those with an
// unventilated and with a well ventilated layer. Source: ISO 6946:2017, 6.9.3.
func SlightlyVentilated(openingsMM2M, unventilatedM2KW, ventilatedM2KW float64) float64 {
	a := math.Min(1500, math.Max(500, openingsMM2M))
	return (1500-a)/1000*unventilatedM2KW + (a-500)/1000*ventilatedM2KW
}
