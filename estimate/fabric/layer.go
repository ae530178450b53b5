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
}
