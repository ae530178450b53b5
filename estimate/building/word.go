package building

// Use is what a building is used for.
type Use uint8

const (
	DetachedHouse Use = iota
	SemiDetachedHouse
	TerracedHouse
	ApartmentBlock
	School
	Nursery
	Office
	Hall
	Church
	CareHome
	Shop
	Workshop
	SportsHall
	Hotel
	Hospital

	NumUses = int(iota)
)

// UseWords are the canonical words of the uses, indexed by Use.
var UseWords = [NumUses]string{
	"detached house", "semi-detached house", "terraced house", "apartment block",
	"school", "nursery", "office", "hall", "church", "care home", "shop", "workshop",
	"sports hall", "hotel", "hospital",
}

func (u Use) String() string { return UseWords[u] }

// IsHouse reports whether the use is a single-family house, whose storeys are
// connected by air and whose neighbours, if any, share its long side.
func (u Use) IsHouse() bool { return u <= TerracedHouse }

// IsHousing reports whether people live in the building in dwellings.
func (u Use) IsHousing() bool { return u <= ApartmentBlock }

// Attachment says how many sides are shared with heated neighbours.
type Attachment uint8

const (
	Detached Attachment = iota
	OneSideShared
	TwoSidesShared

	NumAttachments = int(iota)
)

// AttachmentWords are the canonical words, indexed by Attachment.
var AttachmentWords = [NumAttachments]string{"detached", "one side shared", "two sides shared"}

func (a Attachment) String() string { return AttachmentWords[a] }

// Ventilation is how outdoor air is brought in on purpose.
type Ventilation uint8

const (
	VentilationUnknown Ventilation = iota
	Natural
	PassiveStack
	ExtractFan
	Balanced
	BalancedRecovery
	DemandControlled
	SupplyFan

	NumVentilations = int(iota)
)

// VentilationWords are the canonical words, indexed by Ventilation.
var VentilationWords = [NumVentilations]string{
	"unknown", "natural", "passive stack", "extract fan", "balanced",
	"balanced with heat recovery", "demand-controlled extract", "supply fan",
}

func (v Ventilation) String() string { return VentilationWords[v] }

// Exposure is how open the site lies to wind.
type Exposure uint8

const (
	NormalExposure Exposure = iota
	Sheltered
	Exposed

	NumExposures = int(iota)
)

// ExposureWords are the canonical words, indexed by Exposure.
var ExposureWords = [NumExposures]string{"normal", "sheltered", "exposed"}

func (e Exposure) String() string { return ExposureWords[e] }

// Words lists the canonical words a Word field may take; nil for other fields.
// Rules and synonym lists must use these words and no others.
func Words(f Field) []string { return words[f] }

var words = map[Field][]string{
	UseField:         UseWords[:],
	AttachmentField:  AttachmentWords[:],
	VentilationField: VentilationWords[:],
	ExposureField:    ExposureWords[:],
	WallConstruction: {
		"solid brick", "cavity brick", "insulated cavity brick", "stone", "timber frame",
		"half-timbered", "concrete panel", "in-situ concrete", "aerated concrete",
		"hollow block", "log",
	},
	RoofType:  {"flat", "cold attic", "heated attic"},
	FloorType: {"slab on ground", "suspended floor", "unheated cellar", "heated basement"},
	Glazing: {
		"single", "coupled or box window", "double uncoated", "double coated", "triple",
	},
	HeatingSystem: {
		"boiler", "condensing boiler", "district heating", "heat pump", "electric heating", "stoves",
	},
	CarrierField: {
		"gas", "oil", "district heat", "electricity", "wood", "coal",
	},
}

// WordIndex returns the position of a canonical word among Words(f).
func WordIndex(f Field, word string) (int, bool) {
	for i, w := range words[f] {
		if w == word {
			return i, true
		}
	}
	return 0, false
}
