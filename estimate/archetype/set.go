// Package archetype fills what is not known of a building from declared rules:
// for buildings of this use, attachment, span of years, construction and
// region, this property has this typical value, this low and this high. It also
// holds the other tables an estimate rests on: uses, materials, build-ups,
// ventilation types, carriers, measures and economics. The starter set is
// embedded as CSV files, one per table, each row with its source.
package archetype

import (
	"math"

	"kelvinrow/estimate/building"
	"kelvinrow/estimate/climate"
	"kelvinrow/estimate/fabric"
)

// Property is what a rule gives a value for.
type Property string

// Properties with a number. The comment gives the unit, and what the rule's
// construction column is compared with where that is used.
const (
	StoreyHeightM    Property = "storey_height_m"   // m, clear
	FloorThicknessM  Property = "floor_thickness_m" // m, floor slab between storeys
	StoreyCount      Property = "storeys"           // -
	AspectRatio      Property = "aspect_ratio"      // -, long side / short side of the plan
	MaxDepthM        Property = "max_depth"         // m, greatest depth of the plan
	WindowRatio      Property = "window_ratio"      // m2 of window per m2 of floor area
	DoorRatio        Property = "door_ratio"        // m2 of outside door per m2 of floor area
	RoofPitchDeg     Property = "roof_pitch_deg"    // degrees; roof type
	AreaPerDwelling  Property = "area_per_dwelling" // m2 of floor area per dwelling; houses: one dwelling whatever the area
	ConnectedStoreys Property = "connected_storeys" // share of the storeys above the first that are connected by air, 0..1

	WallUSpread   Property = "wall_u_spread"    // factor on the U-value of the build-up: typical 1; wall construction
	RoofUSpread   Property = "roof_u_spread"    // same; roof type
	FloorUSpread  Property = "floor_u_spread"   // same; floor type
	WindowUValue  Property = "window_u"         // W/(m2K), whole window U_w; glazing
	WindowG       Property = "window_g"         // -, at normal incidence; glazing
	FrameShare    Property = "frame_share"      // -; glazing
	DoorUValue    Property = "door_u"           // W/(m2K)
	Shading       Property = "shading"          // factor on solar gains
	FrontBack     Property = "front_back"       // share of the windows on the two long sides (rest on the short ones); 0.5 = equal quarters
	BridgeU       Property = "bridge_u"         // W/(m2K) over the envelope; wall construction
	AdjustRoof    Property = "adjust_roof"      // b of the roof element; roof type
	AdjustFloor   Property = "adjust_floor"     // b of the floor element; floor type
	WallThickness Property = "wall_thickness_m" // m, for the ground floor; wall construction
	CapacityKJM2K Property = "capacity_kj_m2k"  // kJ/(m2K) per floor area: 110, 165, 260; wall construction

	N50Rule      Property = "n50"           // 1/h; wall construction
	FlowExponent Property = "flow_exponent" // -
	ShelterRule  Property = "shelter"       // S; construction column = exposure word
	SupplyRate   Property = "supply_rate"   // m3/h per m2 of floor area; construction column = ventilation word
	ExtractRate  Property = "extract_rate"  // same
	AiringRate   Property = "airing_rate"   // m3/h per m2 of floor area opened by occupants; ventilation word
	RecoveryRule Property = "heat_recovery" // share of the unit as rated; ventilation word
	RecoveryCut  Property = "recovery_cut"  // factor for frost protection and unit leakage; ventilation word
	DemandFactor Property = "demand_factor" // factor on the flows under demand control; ventilation word
	FanPowerRule Property = "fan_power"     // W/(m3/h); ventilation word
	DuctM2PerM2  Property = "duct_m2_m2"    // m2 of passive-stack duct opening per m2 of floor area; ventilation word

	GeneratorRule    Property = "generator_efficiency"    // share or seasonal performance factor; heating-system word
	DistributionRule Property = "distribution_efficiency" // share; heating-system word

	AssumedYear      Property = "assumed_year"       // year a building is taken to be built in where none is known; looked up with year 0
	WindowsNotBefore Property = "windows_not_before" // year: windows of unknown age are taken to be at least as new as this, and never older than the building
)

// Properties with a word: a canonical word of the field of the same name, or
// the name of a build-up.
const (
	AttachmentWord  Property = "attachment" // by use
	ExposureWord    Property = "exposure"
	WallWord        Property = "wall_construction"
	RoofWord        Property = "roof_type"
	FloorWord       Property = "floor_type"
	GlazingWord     Property = "glazing"     // by the year of the windows
	VentilationWord Property = "ventilation" // where none is stated
	HeatingWord     Property = "heating_system"
	CarrierWord     Property = "carrier"       // heating-system word
	WallBuildup     Property = "wall_buildup"  // name of a build-up; wall construction, year of the wall
	RoofBuildup     Property = "roof_buildup"  // roof type, year of the roof
	FloorBuildup    Property = "floor_buildup" // floor type, year of the floor
)

// Key is what a rule is looked up by. Year is the year that matters for the
// property: of the wall for wall properties, of the windows for glazing, and so
// on. Construction is compared with the rule's construction column; see the
// comment of each property for which word that is.
type Key struct {
	Use          building.Use
	Attachment   building.Attachment
	Year         int
	Construction string
	Region       string
}

// Rule is one row of the rules table.
type Rule struct {
	ID           string // stable name, unique in the table: origins and samples refer to it
	Property     Property
	Use          string // canonical word, or "" for any; also "house", "housing", "other" for groups of uses
	Attachment   string // "" for any
	YearFrom     int    // 0 for open
	YearTo       int    // 0 for open; inclusive
	Construction string
	Region       string

	Typical, Low, High float64 // Low and High are the 5th and 95th percentile
	Word               string  // for properties with a word
	Shared             float64 // share of the spread that all buildings under the rule have in common
	Source, Notes      string
}

// Use holds the conditions of use.
type Use struct {
	Word            string
	IndoorC         float64
	InternalGainWM2 float64

	// 5th and 95th percentile over buildings of the use; both 0 where none is given.
	IndoorLowC, IndoorHighC                 float64
	InternalGainLowWM2, InternalGainHighWM2 float64

	SetpointShare   float64 // share of hours at the set-point
	MinAirLSM2      float64 // least outdoor airflow, l/s per m2
	MinAirLSPerson  float64 // and per person
	AreaPerPersonM2 float64
	HotWaterKWhM2   float64 // kWh/(m2 a) at the generator's outlet
	Source, Notes   string
}

// Material is a building material with its design conductivity.
type Material struct {
	Name            string
	ConductivityWMK float64
	Source, Notes   string
}

// Buildup is a named sequence of layers from inside to outside.
type Buildup struct {
	Name       string
	Element    string // "wall", "roof" or "floor"
	Direction  fabric.Direction
	BothInside bool // next to an unheated space: R_si on both sides
	Layers     []fabric.Layer
	Source     string
	Notes      string
}

// Carrier is an energy carrier.
type Carrier struct {
	Word        string
	PricePerKWh float64
	PriceRise   float64 // real, per year
	CO2KgKWh    float64
	Source      string
	Notes       string
}

// Measure holds the terms of a retrofit measure: what it costs and how far it
// goes. What it does to a state is code, in package measure, under the same key.
type Measure struct {
	Key         string
	Label       string
	Unit        string  // what Quantity counts: "m2" (treated area), "m2 floor" (heated floor area), "m3/h", "dwelling", "building", "kW"
	FixedCost   float64 // per building
	UnitCost    float64 // per unit, up to SizeFrom units
	LifeYears   float64
	UpkeepShare float64 // of the investment, per year

	// Economies of size: beyond SizeFrom units, a unit costs (quantity/SizeFrom)
	// to the power of -SizeExponent of UnitCost; none where SizeExponent is 0.
	SizeFrom, SizeExponent float64

	// 5th and 95th percentile of what it costs over typical; both 0 where not given.
	CostLow, CostHigh float64

	Target                map[string]float64 // named parameters: "thickness_m", "conductivity_w_mk", "u", "g", "n50_factor", ...
	TargetLow, TargetHigh map[string]float64 // of those that have a spread

	Source, Notes string
}

// Cost is what a quantity of the measure costs: FixedCost + UnitCost quantity,
// units beyond SizeFrom cheaper.
func (m *Measure) Cost(quantity float64) float64 {
	return m.FixedCost + float64(m.UnitCost*quantity*m.SizeFactor(quantity))
}

// SizeFactor is the share of UnitCost that a unit costs at a quantity.
func (m *Measure) SizeFactor(quantity float64) float64 {
	if m.SizeExponent == 0 || !(quantity > m.SizeFrom) {
		return 1
	}
	return math.Pow(quantity/m.SizeFrom, -m.SizeExponent)
}

// SurveyCost is what it costs to survey one building for a group of fields.
type SurveyCost struct {
	Group         string // geometry, fabric, air, system or meter
	Cost          float64
	Source, Notes string
}

// OwnWord is a word that somebody's spreadsheets use, beside those the program knows.
type OwnWord struct {
	Field   string // key of a field of words, such as "wall_construction"
	Written string // as it stands in cells
	Word    string // canonical
	Notes   string
}

// Economics holds what money is counted with.
type Economics struct {
	Currency     string
	DiscountRate float64 // real, per year
	PeriodYears  float64
	Source       string
	Notes        string
}

// Set is everything an estimate rests on beside the building itself.
type Set struct {
	Uses      [building.NumUses]Use
	Materials []Material
	Buildups  []Buildup
	Rules     []Rule
	Carriers  []Carrier
	Measures  []Measure
	Economics Economics
	Surveys   []SurveyCost
	Words     []OwnWord
	Climates  []climate.Climate

	index ruleIndex
}
