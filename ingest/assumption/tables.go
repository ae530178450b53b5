package assumption

import (
	"slices"

	"kelvinrow/estimate/archetype"
	"kelvinrow/estimate/building"
	"kelvinrow/estimate/climate"
	"kelvinrow/estimate/fabric"
)

var useWords = building.UseWords[:]

// The tables below are the only definition of the workbook: it is written and read
// by them.

var economicsTable = table[archetype.Economics]{
	sheet: "Economics",
	about: "What money is counted with: real rates, without inflation. One row.",
	columns: []column[archetype.Economics]{
		text("Currency", 12, func(e *archetype.Economics) *string { return &e.Currency }).named("currency").needed(),
		number("Real interest rate (per year)", 1, false, func(e *archetype.Economics) *float64 { return &e.DiscountRate }).named("discount rate"),
		number("Calculation period (years)", 1, false, func(e *archetype.Economics) *float64 { return &e.PeriodYears }).named("period"),
		text("Source", 70, func(e *archetype.Economics) *string { return &e.Source }).named("source").needed(),
		text("Notes", 40, func(e *archetype.Economics) *string { return &e.Notes }),
	},
}

var carriersTable = table[archetype.Carrier]{
	sheet: "Energy carriers",
	about: "Price per kWh as metered, real price rise per year, emissions. Every carrier must have a row.",
	columns: []column[archetype.Carrier]{
		choice("Carrier", 20, building.Words(building.CarrierField), func(c *archetype.Carrier) *string { return &c.Word }).named("carrier").needed(),
		number("Price (per kWh)", 1, false, func(c *archetype.Carrier) *float64 { return &c.PricePerKWh }).named("price"),
		number("Real price rise (per year)", 1, false, func(c *archetype.Carrier) *float64 { return &c.PriceRise }).named("price rise"),
		number("CO2 (kg/kWh)", 1, false, func(c *archetype.Carrier) *float64 { return &c.CO2KgKWh }).named("CO2"),
		text("Source", 70, func(c *archetype.Carrier) *string { return &c.Source }).named("source").needed(),
		text("Notes", 40, func(c *archetype.Carrier) *string { return &c.Notes }),
	},
}

var usesTable = table[archetype.Use]{
	sheet: "Uses",
	about: "Conditions of use. Room temperature is the mean over rooms and time while heated; least air is a mean over all hours. Every use must have a row.",
	columns: []column[archetype.Use]{
		choice("Use", 22, building.UseWords[:], func(u *archetype.Use) *string { return &u.Word }).named("use").needed(),
		number("Room temperature (C)", 1, false, func(u *archetype.Use) *float64 { return &u.IndoorC }).named("indoor temperature"),
		number("Room temperature, low (C)", 1, true, func(u *archetype.Use) *float64 { return &u.IndoorLowC }),
		number("Room temperature, high (C)", 1, true, func(u *archetype.Use) *float64 { return &u.IndoorHighC }),
		number("Internal gains (W/m2)", 1, false, func(u *archetype.Use) *float64 { return &u.InternalGainWM2 }).named("internal gain"),
		number("Internal gains, low (W/m2)", 1, true, func(u *archetype.Use) *float64 { return &u.InternalGainLowWM2 }),
		number("Internal gains, high (W/m2)", 1, true, func(u *archetype.Use) *float64 { return &u.InternalGainHighWM2 }),
		number("Share of hours at set-point", 1, false, func(u *archetype.Use) *float64 { return &u.SetpointShare }).named("set-point share"),
		number("Least outdoor air (l/s per m2)", 1, false, func(u *archetype.Use) *float64 { return &u.MinAirLSM2 }).named("least air per m2"),
		number("Least outdoor air (l/s per person)", 1, false, func(u *archetype.Use) *float64 { return &u.MinAirLSPerson }).named("least air per person"),
		number("Floor area per person (m2)", 1, false, func(u *archetype.Use) *float64 { return &u.AreaPerPersonM2 }).named("floor area per person"),
		number("Hot water (kWh/(m2 a))", 1, false, func(u *archetype.Use) *float64 { return &u.HotWaterKWhM2 }).named("hot water"),
		text("Source", 70, func(u *archetype.Use) *string { return &u.Source }).named("source").needed(),
		text("Notes", 40, func(u *archetype.Use) *string { return &u.Notes }),
	},
}

var measuresTable = table[archetype.Measure]{
	sheet: "Measures",
	about: "Cost = fixed cost per building + cost per unit x units; units beyond a size get cheaper by (units / that size) to the minus. Low and high cost: 5th and 95th percentile over typical. The key is the program's name of the measure.",
	columns: []column[archetype.Measure]{
		text("Key", 28, func(m *archetype.Measure) *string { return &m.Key }).named("key").needed(),
		text("Name", 38, func(m *archetype.Measure) *string { return &m.Label }).named("label").needed(),
		choice("Unit", 12, archetype.MeasureUnits(), func(m *archetype.Measure) *string { return &m.Unit }).named("unit").needed(),
		number("Fixed cost (per building)", 1, false, func(m *archetype.Measure) *float64 { return &m.FixedCost }).named("fixed cost"),
		number("Cost (per unit)", 1, false, func(m *archetype.Measure) *float64 { return &m.UnitCost }).named("unit cost"),
		number("Cheaper beyond (units)", 1, true, func(m *archetype.Measure) *float64 { return &m.SizeFrom }).named("size from"),
		number("by (units / that) to the minus", 1, true, func(m *archetype.Measure) *float64 { return &m.SizeExponent }).named("size exponent"),
		number("Low cost (x typical)", 1, true, func(m *archetype.Measure) *float64 { return &m.CostLow }).named("low cost"),
		number("High cost (x typical)", 1, true, func(m *archetype.Measure) *float64 { return &m.CostHigh }).named("high cost"),
		number("Life (years)", 1, false, func(m *archetype.Measure) *float64 { return &m.LifeYears }).named("life"),
		number("Upkeep (share of cost per year)", 1, false, func(m *archetype.Measure) *float64 { return &m.UpkeepShare }).named("upkeep share"),
		text("Source", 70, func(m *archetype.Measure) *string { return &m.Source }).named("source").needed(),
		text("Notes", 40, func(m *archetype.Measure) *string { return &m.Notes }),
	},
}

// detail is one parameter of a measure: how far it goes.
type detail struct {
	measure, name      string
	typical, low, high float64
	meaning            string
}

var detailsTable = table[detail]{
	sheet: "Measure details",
	about: "How far each measure goes. Low and high: 5th and 95th percentile, empty where there is no spread.",
	columns: []column[detail]{
		text("Measure (key)", 28, func(d *detail) *string { return &d.measure }).needed(),
		text("Parameter", 22, func(d *detail) *string { return &d.name }).needed(),
		number("Typical", 1, false, func(d *detail) *float64 { return &d.typical }),
		column[detail]{head: "Low", width: 12, get: spreadOf(func(d *detail) float64 { return d.low }), set: number("", 1, true, func(d *detail) *float64 { return &d.low }).set},
		column[detail]{head: "High", width: 12, get: spreadOf(func(d *detail) float64 { return d.high }), set: number("", 1, true, func(d *detail) *float64 { return &d.high }).set},
		text("What it is", 60, func(d *detail) *string { return &d.meaning }),
	},
}

// spreadOf shows a bound only where there is a spread: 0 may be a bound.
func spreadOf(bound func(*detail) float64) func(*detail) any {
	return func(d *detail) any {
		if d.low == d.typical && d.high == d.typical {
			return nil
		}
		return bound(d)
	}
}

// climateMonth is one month of a climate; what is of the place stands in each row.
type climateMonth struct {
	place   climate.Climate // without months
	terrain string
	month   float64
	data    climate.Month
}

var climatesTable = table[climateMonth]{
	sheet: "Climates",
	about: "Twelve rows for each place, January to December. The first place is used unless another is named. What belongs to the place stands in all its rows.",
	columns: []column[climateMonth]{
		text("Place", 22, func(m *climateMonth) *string { return &m.place.Name }).needed(),
		number("Month", 1, false, func(m *climateMonth) *float64 { return &m.month }),
		number("Hours", 1, false, func(m *climateMonth) *float64 { return &m.data.Hours }),
		number("Outdoor temperature (C)", 1, false, func(m *climateMonth) *float64 { return &m.data.OutdoorC }),
		number("Wind at 10 m (m/s)", 1, false, func(m *climateMonth) *float64 { return &m.data.Wind10M }),
		number("Sun on the horizontal (kWh/m2)", 1, false, func(m *climateMonth) *float64 { return &m.data.HorizontalKWhM2 }),
		number("Latitude (degrees, north positive)", 1, false, func(m *climateMonth) *float64 { return &m.place.LatitudeDeg }),
		number("Altitude (m)", 1, false, func(m *climateMonth) *float64 { return &m.place.AltitudeM }),
		number("Design outdoor temperature (C)", 1, false, func(m *climateMonth) *float64 { return &m.place.DesignOutdoorC }),
		choice("Terrain", 14, climate.TerrainWords(), func(m *climateMonth) *string { return &m.terrain }).needed(),
		text("Source", 60, func(m *climateMonth) *string { return &m.place.Source }),
	},
}

var materialsTable = table[archetype.Material]{
	sheet: "Materials",
	about: "Design thermal conductivities. Layers of build-ups name these.",
	columns: []column[archetype.Material]{
		text("Material", 36, func(m *archetype.Material) *string { return &m.Name }).named("name").needed(),
		number("Conductivity (W/(mK))", 1, false, func(m *archetype.Material) *float64 { return &m.ConductivityWMK }).named("conductivity"),
		text("Source", 70, func(m *archetype.Material) *string { return &m.Source }).named("source").needed(),
		text("Notes", 40, func(m *archetype.Material) *string { return &m.Notes }),
	},
}

// layerRow is one layer of a build-up; rows of one build-up stand together.
type layerRow struct {
	name, element string
	bothInside    bool
	layer         fabric.Layer
	gaps          string
	conductivity  float64 // only where it is not the material's
	second        float64 // the same of the second material
	source, notes string
}

var buildupsTable = table[layerRow]{
	sheet: "Build-ups",
	about: "One layer a row, from inside to outside; the rows of a build-up stand together. A layer names a material and its thickness, or has a resistance (air layers, roof spaces). Conductivities are those of the sheet Materials unless given here.",
	columns: []column[layerRow]{
		text("Build-up", 40, func(r *layerRow) *string { return &r.name }).named("name").needed(),
		choice("Element", 10, []string{"wall", "roof", "floor"}, func(r *layerRow) *string { return &r.element }).named("element").needed(),
		yes("Next to an unheated space", func(r *layerRow) *bool { return &r.bothInside }),
		text("Layer", 32, func(r *layerRow) *string { return &r.layer.Name }).named("layer").needed(),
		number("Thickness (m)", 1, true, func(r *layerRow) *float64 { return &r.layer.ThicknessM }).named("thickness", "thickness of a bridged layer", "thickness of a layer with fixings"),
		number("Conductivity (W/(mK))", 1, true, func(r *layerRow) *float64 { return &r.conductivity }).named("conductivity"),
		number("Resistance (m2K/W)", 1, true, func(r *layerRow) *float64 { return &r.layer.ResistanceM2KW }).named("resistance"),
		text("Second material", 20, func(r *layerRow) *string { return &r.layer.BridgeName }),
		number("Its share of the area", 1, true, func(r *layerRow) *float64 { return &r.layer.BridgeShare }).named("bridge share"),
		number("Its conductivity (W/(mK))", 1, true, func(r *layerRow) *float64 { return &r.second }).named("bridge conductivity"),
		choice("Air gaps", 10, fabric.GapWords[1:], func(r *layerRow) *string { return &r.gaps }).named("gaps"),
		number("Fixings (per m2)", 1, true, func(r *layerRow) *float64 { return &r.layer.Fixings.PerM2 }).named("fixings per m2"),
		number("Section of a fixing (mm2)", 1e6, true, func(r *layerRow) *float64 { return &r.layer.Fixings.SectionM2 }).named("section of a fixing in m2"),
		number("Conductivity of a fixing (W/(mK))", 1, true, func(r *layerRow) *float64 { return &r.layer.Fixings.ConductivityWMK }).named("conductivity of a fixing"),
		text("Source", 70, func(r *layerRow) *string { return &r.source }).named("source"),
		text("Notes", 40, func(r *layerRow) *string { return &r.notes }),
	},
}

var rulesTable = table[archetype.Rule]{
	sheet: "Default rules",
	about: "For buildings of this use, attachment, span of years, construction and region (empty: any), the property has this value or word. The most specific rule wins. Low and high: 5th and 95th percentile.",
	columns: []column[archetype.Rule]{
		text("Rule", 40, func(r *archetype.Rule) *string { return &r.ID }).named("id").needed(),
		choice("Property", 24, propertyWords(), func(r *archetype.Rule) *string { return (*string)(&r.Property) }).named("property").needed(),
		choice("Use", 18, append([]string{"house", "housing", "other"}, building.UseWords[:]...), func(r *archetype.Rule) *string { return &r.Use }).named("use"),
		choice("Attachment", 16, building.AttachmentWords[:], func(r *archetype.Rule) *string { return &r.Attachment }).named("attachment"),
		year("Years from", func(r *archetype.Rule) *int { return &r.YearFrom }).named("years"),
		year("Years to", func(r *archetype.Rule) *int { return &r.YearTo }),
		text("Construction", 24, func(r *archetype.Rule) *string { return &r.Construction }).named("construction"),
		text("Region", 12, func(r *archetype.Rule) *string { return &r.Region }),
		ruleNumber("Typical", func(r *archetype.Rule) *float64 { return &r.Typical }).named(append([]string{"typical"}, propertyWords()...)...),
		ruleNumber("Low", func(r *archetype.Rule) *float64 { return &r.Low }).named("low"),
		ruleNumber("High", func(r *archetype.Rule) *float64 { return &r.High }).named("high"),
		text("Word", 36, func(r *archetype.Rule) *string { return &r.Word }).named("word"),
		number("Spread shared by all (share)", 1, true, func(r *archetype.Rule) *float64 { return &r.Shared }).named("shared part of the spread"),
		text("Source", 70, func(r *archetype.Rule) *string { return &r.Source }).named("source").needed(),
		text("Notes", 40, func(r *archetype.Rule) *string { return &r.Notes }),
	},
}

// ruleNumber is a number of rules that give one; 0 is a number, so only rules that
// give a word have an empty cell.
func ruleNumber(head string, at func(*archetype.Rule) *float64) column[archetype.Rule] {
	c := number(head, 1, true, at)
	c.get = func(r *archetype.Rule) any {
		if info, ok := r.Property.Info(); ok && info.IsWord {
			return nil
		}
		return *at(r)
	}
	return c
}

func propertyWords() []string {
	var out []string
	for _, p := range archetype.Properties() {
		out = append(out, string(p.Property))
	}
	slices.Sort(out)
	return out
}

var wordsTable = table[archetype.OwnWord]{
	sheet: "Words",
	about: "Words that your spreadsheets use, beside those the program knows in eight languages: kelvinrow inspect lists the ones it does not know. They hold for files loaded from then on.",
	columns: []column[archetype.OwnWord]{
		choice("Field", 22, wordFields(), func(w *archetype.OwnWord) *string { return &w.Field }).named("field").needed(),
		text("Written", 36, func(w *archetype.OwnWord) *string { return &w.Written }).named("written").needed(),
		choice("Means", 36, everyWord(), func(w *archetype.OwnWord) *string { return &w.Word }).named("word").needed(),
		text("Notes", 40, func(w *archetype.OwnWord) *string { return &w.Notes }),
	},
}

// wordFields are the fields that hold words, by key.
func wordFields() []string {
	var out []string
	for f := range building.NumFields {
		if building.Words(building.Field(f)) != nil {
			out = append(out, building.Field(f).Key())
		}
	}
	return out
}

// everyWord lists the words of all fields.
func everyWord() []string {
	var out []string
	for f := range building.NumFields {
		for _, w := range building.Words(building.Field(f)) {
			if !slices.Contains(out, w) {
				out = append(out, w)
			}
		}
	}
	slices.Sort(out)
	return out
}

var surveysTable = table[archetype.SurveyCost]{
	sheet: "Survey costs",
	about: "What it costs to survey one building for a group of fields.",
	columns: []column[archetype.SurveyCost]{
		choice("Group", 14, archetype.SurveyGroups, func(c *archetype.SurveyCost) *string { return &c.Group }).named("group").needed(),
		number("Cost (per building)", 1, false, func(c *archetype.SurveyCost) *float64 { return &c.Cost }).named("cost"),
		text("Source", 70, func(c *archetype.SurveyCost) *string { return &c.Source }).named("source").needed(),
		text("Notes", 40, func(c *archetype.SurveyCost) *string { return &c.Notes }),
	},
}
