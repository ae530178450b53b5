package archetype

import "kelvinrow/estimate/building"

// Spread is the kind of distribution that a rule's low, typical and high stand
// for.
type Spread uint8

// The kinds of distribution.
const (
	LogNormal Spread = iota // positive quantities
	Normal                  // years and other quantities that may lie on both sides of zero
	Beta                    // shares between 0 and 1
)

// PropertyInfo describes a property.
type PropertyInfo struct {
	Property Property
	Label    string
	Unit     string // of the number; "" where there is none
	Spread   Spread
	Min, Max float64 // bounds of a plausible number; Validate holds rules to them

	// IsWord is set for properties whose value is Rule.Word: a word of WordField
	// or, where Element is given, the name of a build-up of that element.
	IsWord    bool
	WordField building.Field
	Element   string

	// ByConstruction is set where the construction column of a rule is used; it
	// then holds a word of ConstructionField.
	ByConstruction    bool
	ConstructionField building.Field
}

// Properties returns every property in catalogue order.
func Properties() []PropertyInfo { return propertyCatalogue }

// Info returns the description of p.
func (p Property) Info() (PropertyInfo, bool) {
	i, ok := propertyIndex[p]
	if !ok {
		return PropertyInfo{}, false
	}
	return propertyCatalogue[i], true
}

var propertyIndex = func() map[Property]int {
	m := make(map[Property]int, len(propertyCatalogue))
	for i := range propertyCatalogue {
		m[propertyCatalogue[i].Property] = i
	}
	return m
}()

func number(p Property, label, unit string, s Spread, low, high float64) PropertyInfo {
	return PropertyInfo{Property: p, Label: label, Unit: unit, Spread: s, Min: low, Max: high}
}

func word(p Property, label string, f building.Field) PropertyInfo {
	return PropertyInfo{Property: p, Label: label, IsWord: true, WordField: f}
}

func (i PropertyInfo) by(f building.Field) PropertyInfo {
	i.ByConstruction, i.ConstructionField = true, f
	return i
}

func buildup(p Property, label, element string, f building.Field) PropertyInfo {
	return PropertyInfo{Property: p, Label: label, IsWord: true, Element: element}.by(f)
}

var propertyCatalogue = []PropertyInfo{
	number(AssumedYear, "Year built, where unknown", "", Normal, 1000, 2100),
	number(WindowsNotBefore, "Windows of unknown age not before", "", Normal, 0, 2100),
	word(AttachmentWord, "Attachment", building.AttachmentField),
	word(ExposureWord, "Wind exposure", building.ExposureField),

	number(StoreyHeightM, "Clear storey height", "m", LogNormal, 1.8, 20),
	number(FloorThicknessM, "Floor thickness between storeys", "m", LogNormal, 0.05, 1),
	number(StoreyCount, "Storeys", "", LogNormal, 1, 60),
	number(AspectRatio, "Long side / short side of the plan", "", LogNormal, 1, 20),
	number(MaxDepthM, "Greatest depth of the plan", "m", LogNormal, 5, 500),
	number(WindowRatio, "Window area per floor area", "m2/m2", LogNormal, 0, 1),
	number(DoorRatio, "Outside door area per floor area", "m2/m2", LogNormal, 0, 0.2),
	number(RoofPitchDeg, "Roof pitch", "degrees", LogNormal, 0, 75).by(building.RoofType),
	number(AreaPerDwelling, "Floor area per dwelling", "m2", LogNormal, 10, 2000),
	number(ConnectedStoreys, "Share of upper storeys connected by air", "share", Beta, 0, 1),

	word(WallWord, "Wall construction", building.WallConstruction),
	word(RoofWord, "Roof type", building.RoofType),
	word(FloorWord, "Ground-floor type", building.FloorType),
	buildup(WallBuildup, "Wall build-up", "wall", building.WallConstruction),
	buildup(RoofBuildup, "Roof build-up", "roof", building.RoofType),
	buildup(FloorBuildup, "Floor build-up", "floor", building.FloorType),
	number(WallUSpread, "Spread of the wall U-value", "factor", LogNormal, 0.1, 5).by(building.WallConstruction),
	number(RoofUSpread, "Spread of the roof U-value", "factor", LogNormal, 0.1, 5).by(building.RoofType),
	number(FloorUSpread, "Spread of the floor U-value", "factor", LogNormal, 0.1, 5).by(building.FloorType),
	number(AdjustRoof, "Adjustment factor b of the roof", "factor", Beta, 0, 1).by(building.RoofType),
	number(AdjustFloor, "Adjustment factor b of the floor", "factor", Beta, 0, 1).by(building.FloorType),
	number(WallThickness, "Wall thickness", "m", LogNormal, 0.05, 2).by(building.WallConstruction),
	number(BridgeU, "Thermal bridges over the envelope", "W/(m2K)", LogNormal, 0, 0.5).by(building.WallConstruction),
	number(CapacityKJM2K, "Heat capacity per floor area", "kJ/(m2K)", LogNormal, 50, 500).by(building.WallConstruction),

	word(GlazingWord, "Glazing", building.Glazing),
	number(WindowUValue, "Window U-value", "W/(m2K)", LogNormal, 0.3, 7).by(building.Glazing),
	number(WindowG, "Window g-value", "share", Beta, 0, 1).by(building.Glazing),
	number(FrameShare, "Frame share of the window", "share", Beta, 0, 1).by(building.Glazing),
	number(DoorUValue, "Door U-value", "W/(m2K)", LogNormal, 0.3, 7),
	number(Shading, "Shading factor on solar gains", "factor", Beta, 0, 1),
	number(FrontBack, "Share of windows on the two long sides", "share", Beta, 0, 1),

	word(VentilationWord, "Ventilation type", building.VentilationField),
	number(N50Rule, "Airtightness n50", "1/h", LogNormal, 0.1, 40).by(building.WallConstruction),
	number(FlowExponent, "Flow exponent of leakage", "", Beta, 0.5, 1),
	number(ShelterRule, "Shelter factor on wind", "factor", Beta, 0, 1).by(building.ExposureField),
	number(SupplyRate, "Supply airflow per floor area", "m3/(h m2)", LogNormal, 0, 50).by(building.VentilationField),
	number(ExtractRate, "Extract airflow per floor area", "m3/(h m2)", LogNormal, 0, 50).by(building.VentilationField),
	number(AiringRate, "Airing by occupants per floor area", "m3/(h m2)", LogNormal, 0, 50).by(building.VentilationField),
	number(RecoveryRule, "Heat-recovery efficiency, rated", "share", Beta, 0, 1).by(building.VentilationField),
	number(RecoveryCut, "Heat-recovery cut for frost and unit leakage", "factor", Beta, 0, 1).by(building.VentilationField),
	number(DemandFactor, "Factor on flows under demand control", "factor", Beta, 0, 1).by(building.VentilationField),
	number(FanPowerRule, "Fan power per stream", "W/(m3/h)", LogNormal, 0, 5).by(building.VentilationField),
	number(DuctM2PerM2, "Passive-stack duct opening per floor area", "m2/m2", LogNormal, 0, 0.01).by(building.VentilationField),

	word(HeatingWord, "Heating system", building.HeatingSystem),
	word(CarrierWord, "Energy carrier", building.CarrierField).by(building.HeatingSystem),
	number(GeneratorRule, "Generator efficiency or seasonal performance", "", LogNormal, 0.1, 8).by(building.HeatingSystem),
	number(DistributionRule, "Efficiency of distribution and control", "share", Beta, 0.1, 1).by(building.HeatingSystem),
}
