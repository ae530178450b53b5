package fabric

import "math"

// RoofSpace is how a naturally ventilated roof space above an insulated ceiling is
// covered.
type RoofSpace uint8

const (
	BareTiles   RoofSpace = iota // tiles without felt, boards or the like
	LinedTiles                   // sheets, or tiles with felt or boards below them
	ShinyLining                  // as LinedTiles, with aluminium or another surface of low emissivity
	BoardedFelt                  // boards and felt
)

// RoofSpaceResistance is R_u of a roof space in m2K/W, the roof itself included and
// R_se left out: it stands in a build-up as a layer that is homogeneous. Source:
// ISO 6946:2017, 6.10.2 (2007: 5.4.2, table 3).
func RoofSpaceResistance(s RoofSpace) float64 {
	return [...]float64{0.06, 0.2, 0.3, 0.3}[min(s, BoardedFelt)]
}

// maxSmallSpace is the most that a small unheated space may count for.
const maxSmallSpace = 0.5

// SmallSpaceResistance is R_u in m2K/W of a garage, store or veranda against an
// element of area A_i: A_i/(sum(A_e U_e) + 0.33 n V), at most 0.5, with the space's
// outer elements A_e U_e in W/K, its air changes n in 1/h (3 where unknown) and its
// volume V in m3. Source: ISO 6946:2017, 6.10.3.
func SmallSpaceResistance(insideM2, outsideWK, airChangesH, volumeM3 float64) float64 {
	if !(airChangesH > 0) {
		airChangesH = 3
	}
	return math.Min(maxSmallSpace, insideM2/(outsideWK+0.33*airChangesH*volumeM3))
}
