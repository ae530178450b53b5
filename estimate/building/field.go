// Package building holds what is known of a building before anything is
// computed: the catalogue of fields, values with their kind and origin, the
// trade words a value may take, and the precedence by which values from
// several sources become one building.
package building

// Field names one property of a building that a source may give.
type Field uint8

// The fields, in catalogue order. The order is part of no file format and no
// database schema: those use Field.Key.
const (
	Name Field = iota
	Street
	Postcode
	Town
	District
	Region

	UseField
	AttachmentField
	YearBuilt
	YearWall
	YearRoof
	YearFloor
	YearWindows

	FloorArea
	Volume
	GrossVolume
	Storeys
	StoreyHeight
	Footprint
	Perimeter
	WallArea
	RoofArea
	GroundFloorArea
	WindowArea
	DoorArea

	WallU
	RoofU
	FloorU
	WindowU
	WallConstruction
	RoofType
	FloorType
	Glazing

	VentilationField
	SupplyAirflow
	ExtractAirflow
	HeatRecovery
	FanPower
	N50
	Q50
	ExposureField

	HeatingSystem
	CarrierField
	Efficiency
	MeteredHeat
	MeteredYear
	MeterIncludesHotWater
	DegreeDays

	Occupants
	Dwellings

	Protected
	FacadeStays
	FlatsLet
	Restrictions
	Surveyor

	NumFields = int(iota)
)

// Type says what a field's value is made of.
type Type uint8

const (
	Text   Type = iota // free text, in Value.Text
	Word               // one of a closed list of trade words, in Value.Text
	Number             // a quantity in Info.Unit, in Value.Number
	Year               // a year or a span of years, in Value.Low, Value.High and their middle in Value.Number
	YesNo              // 1 or 0 in Value.Number
)

// Group sorts the fields by what they tell about.
type Group string

const (
	Identity    Group = "identity"
	Geometry    Group = "geometry"
	Fabric      Group = "fabric"
	Air         Group = "air"
	System      Group = "system"
	Meter       Group = "meter"
	Restriction Group = "restriction"
)

// Info describes a field.
type Info struct {
	Key   string // stable name: SQL column, JSON field, mapping files
	Label string // for people
	Type  Type
	Unit  string // unit of Value.Number; "" where there is none
	Group Group
}

var catalogue = [NumFields]Info{
	Name:     {"name", "Name", Text, "", Identity},
	Street:   {"street", "Street", Text, "", Identity},
	Postcode: {"postcode", "Postcode", Text, "", Identity},
	Town:     {"town", "Town", Text, "", Identity},
	District: {"district", "District", Text, "", Identity},
	Region:   {"region", "Region", Text, "", Identity},

	UseField:        {"use", "Use", Word, "", Geometry},
	AttachmentField: {"attachment", "Attachment", Word, "", Geometry},
	YearBuilt:       {"year_built", "Year built", Year, "", Fabric},
	YearWall:        {"year_wall", "Year walls renewed", Year, "", Fabric},
	YearRoof:        {"year_roof", "Year roof renewed", Year, "", Fabric},
	YearFloor:       {"year_floor", "Year floor renewed", Year, "", Fabric},
	YearWindows:     {"year_windows", "Year windows renewed", Year, "", Fabric},

	FloorArea:       {"floor_area", "Heated floor area", Number, "m2", Geometry},
	Volume:          {"volume", "Heated volume", Number, "m3", Geometry},
	GrossVolume:     {"gross_volume", "Gross external volume", Number, "m3", Geometry},
	Storeys:         {"storeys", "Storeys", Number, "", Geometry},
	StoreyHeight:    {"storey_height", "Storey height", Number, "m", Geometry},
	Footprint:       {"footprint", "Footprint", Number, "m2", Geometry},
	Perimeter:       {"perimeter", "Perimeter", Number, "m", Geometry},
	WallArea:        {"wall_area", "Wall area", Number, "m2", Geometry},
	RoofArea:        {"roof_area", "Roof area", Number, "m2", Geometry},
	GroundFloorArea: {"ground_floor_area", "Ground-floor area", Number, "m2", Geometry},
	WindowArea:      {"window_area", "Window area", Number, "m2", Geometry},
	DoorArea:        {"door_area", "Door area", Number, "m2", Geometry},

	WallU:            {"wall_u", "Wall U-value", Number, "W/(m2K)", Fabric},
	RoofU:            {"roof_u", "Roof U-value", Number, "W/(m2K)", Fabric},
	FloorU:           {"floor_u", "Floor U-value", Number, "W/(m2K)", Fabric},
	WindowU:          {"window_u", "Window U-value", Number, "W/(m2K)", Fabric},
	WallConstruction: {"wall_construction", "Wall construction", Word, "", Fabric},
	RoofType:         {"roof_type", "Roof type", Word, "", Fabric},
	FloorType:        {"floor_type", "Ground-floor type", Word, "", Fabric},
	Glazing:          {"glazing", "Glazing", Word, "", Fabric},

	VentilationField: {"ventilation", "Ventilation type", Word, "", Air},
	SupplyAirflow:    {"supply_airflow", "Supply airflow", Number, "m3/h", Air},
	ExtractAirflow:   {"extract_airflow", "Extract airflow", Number, "m3/h", Air},
	HeatRecovery:     {"heat_recovery", "Heat-recovery efficiency", Number, "share", Air},
	FanPower:         {"fan_power", "Specific fan power", Number, "W/(m3/h)", Air},
	N50:              {"n50", "Airtightness n50", Number, "1/h", Air},
	Q50:              {"q50", "Airtightness q50", Number, "m3/(h m2)", Air},
	ExposureField:    {"exposure", "Wind exposure", Word, "", Air},

	HeatingSystem:         {"heating_system", "Heating system", Word, "", System},
	CarrierField:          {"carrier", "Energy carrier", Word, "", System},
	Efficiency:            {"efficiency", "Generator efficiency", Number, "share", System},
	MeteredHeat:           {"metered_heat", "Metered heat", Number, "kWh", Meter},
	MeteredYear:           {"metered_year", "Metered year", Year, "", Meter},
	MeterIncludesHotWater: {"meter_includes_hot_water", "Meter includes hot water", YesNo, "", Meter},
	DegreeDays:            {"degree_days", "Degree days of the metered year", Number, "K d", Meter},

	Occupants: {"occupants", "Occupants", Number, "", System},
	Dwellings: {"dwellings", "Dwellings", Number, "", Geometry},

	Protected:    {"protected", "Heritage protection", YesNo, "", Restriction},
	FacadeStays:  {"facade_stays", "Facade must stay", YesNo, "", Restriction},
	FlatsLet:     {"flats_let", "Flats let", Number, "", Restriction},
	Restrictions: {"restrictions", "Other restrictions", Text, "", Restriction},
	Surveyor:     {"surveyor", "Surveyor", Text, "", Identity},
}

// Info returns the description of f.
func (f Field) Info() Info { return catalogue[f] }

// Key returns the stable name of f, such as "floor_area".
func (f Field) Key() string { return catalogue[f].Key }

func (f Field) String() string { return catalogue[f].Key }

var byKey = func() map[string]Field {
	m := make(map[string]Field, NumFields)
	for f := range NumFields {
		m[catalogue[f].Key] = Field(f)
	}
	return m
}()

// FieldByKey finds a field by its stable name.
func FieldByKey(key string) (Field, bool) {
	f, ok := byKey[key]
	return f, ok
}
