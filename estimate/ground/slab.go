package ground

// Slab describes a floor on the ground.
type Slab struct {
	AreaM2                float64
	PerimeterM            float64 // exposed perimeter P
	WallThicknessM        float64 // w
	FloorResistanceM2KW   float64 // R_f: insulation above, in or below the slab
	GroundConductivityWMK float64 // lambda_g
}
