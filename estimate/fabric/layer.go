package fabric

// Direction is the direction of heat flow through an element.
type Direction uint8

const (
	Horizontal Direction = iota // within 30 degrees of the horizontal plane: walls
	Up                          // roofs, ceilings below the cold side
	Down                        // floors above the cold side
)

// Layer is one layer of a build-up. Either ResistanceM2KW is given (air layers,
// roof spaces, declared products), or it follows from thickness and
// conductivity. BridgeShare > 0 makes it a layer of two materials side by side.
type Layer struct {
	Name                  string
	ThicknessM            float64
	ConductivityWMK       float64 // 0 where ResistanceM2KW is declared
	ResistanceM2KW        float64 // declared resistance; 0 where it follows from d and lambda
	BridgeShare           float64 // area share of the second material (studs, rafters, mortar)
	BridgeConductivityWMK float64
	BridgeName            string  // of the second material; "" where it has none
	Gaps                  Gaps    // air gaps through insulation
	Fixings               Fixings // metal through insulation
}

// Fixings are ties, anchors or screws that go all through a layer; none where
// PerM2 is 0.
type Fixings struct {
	PerM2           float64 // n_f, 1/m2
	SectionM2       float64 // A_f of one
	ConductivityWMK float64 // lambda_f
}

// correction is dU of a layer's gaps and fixings in W/(m2K), the layer's
// insulation having resistance r within a total. Source: ISO 6946:2017, annex F.
func (l Layer) correction(r, total float64) float64 {
	dU := 0.0
	if l.Gaps != GapsNone {
		dU += AirGapCorrection(l.Gaps, r, total)
	}
	if f := l.Fixings; f.PerM2 > 0 && l.ThicknessM > 0 {
		dU += FastenerCorrection(Fasteners{ConductivityWMK: f.ConductivityWMK, PerM2: f.PerM2, SectionM2: f.SectionM2, ThicknessM: l.ThicknessM}, r, total)
	}
	return dU
}
