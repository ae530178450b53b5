package form

import (
	"math"
	"strconv"
	"strings"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest"
	"kelvinrow/ingest/check"
	"kelvinrow/ingest/header"
)

// column is one column of the form.
type column struct {
	key      string // as the reader knows it; "" for what is only shown
	head     string
	hint     string // how to find it out
	band     string // of the columns from here on; "" goes on
	width    float64
	field    building.Field // where isField
	isField  bool
	decimals int
	turn     bool // a printed page begins here
}

// shown is a locked column that says which building a row is about.
func shown(f building.Field, width float64) column {
	return column{head: f.Info().Label, field: f, isField: true, width: width}
}

// fill is a column to fill in.
func fill(f building.Field, width float64, decimals int, hint string) column {
	c := column{key: f.Key(), head: f.Info().Label, hint: hint, width: width, field: f, isField: true, decimals: decimals}
	if u := unitShown(f); u != "" {
		c.head += " (" + u + ")"
	}
	return c
}

func (c column) from(band string) column { c.band = band; return c }
func (c column) page() column            { c.turn = true; return c }

var unitLetters = strings.NewReplacer("m2", "m²", "m3", "m³")

// unitShown is the unit as the form gives it; shares are given in percent.
func unitShown(f building.Field) string {
	if f.Info().Unit == "share" {
		return "%"
	}
	return unitLetters.Replace(f.Info().Unit)
}

// unitNamed is the same by the name that the reader knows.
func (c *column) unitNamed() string {
	switch {
	case !c.isField || c.key == "":
		return ""
	case c.field.Info().Unit == "share":
		return "%"
	}
	return c.field.Info().Unit
}

// factor is what a value is multiplied by to be shown.
func (c *column) factor() float64 {
	if c.field.Info().Unit == "share" {
		return 100
	}
	return 1
}

// columns are those of the form: what decides a heat balance, in the order in
// which a surveyor comes to it. Each printed page takes up some 180 digits.
var columns = []column{
	{key: header.IDKey, head: "Building id", band: "Building", width: 13},
	shown(building.Name, 25),
	shown(building.Street, 25),
	shown(building.Town, 14),
	{key: header.SurveyDateKey, head: "Survey date", hint: "needed, such as 2026-03-01", band: "Survey", width: 11.5},
	fill(building.Surveyor, 16, 0, "needed: who answers for the row"),

	fill(building.FloorArea, 10, 1, "inside, heated storeys only").from("Size"),
	fill(building.Volume, 10, 1, "inside, heated part"),
	fill(building.Storeys, 9, 1, "above ground, heated"),
	fill(building.StoreyHeight, 9, 2, "clear: floor to ceiling"),
	fill(building.Footprint, 10, 1, "outside, of the ground floor"),
	fill(building.Perimeter, 10, 1, "outside, shared walls too"),
	fill(building.YearBuilt, 9.5, 0, "plans, stone above the door").from("Age"),

	fill(building.YearWall, 9, 0, "of the last insulation").from("Walls").page(),
	fill(building.WallConstruction, 16, 0, "bond, thickness at a window"),
	fill(building.WallU, 9, 3, "measured or by its layers"),
	fill(building.YearRoof, 9, 0, "last insulated").from("Roof"),
	fill(building.RoofType, 12, 0, "is the attic heated?"),
	fill(building.RoofU, 9, 3, "insulation: how thick"),
	fill(building.YearFloor, 9, 0, "last insulated").from("Ground floor"),
	fill(building.FloorType, 15, 0, "what lies below"),
	fill(building.FloorU, 9, 3, "measured or by its layers"),
	fill(building.YearWindows, 9, 0, "stamp between the panes").from("Windows"),
	fill(building.Glazing, 17, 0, "count the reflections of a flame or light"),
	fill(building.WindowArea, 9.5, 1, "openings in the wall, frames too"),
	fill(building.WindowU, 9, 3, "whole window; data sheet"),

	fill(building.VentilationField, 20, 0, "what moves the air on purpose").from("Air").page(),
	fill(building.SupplyAirflow, 9.5, 0, "in use; all terminals added"),
	fill(building.ExtractAirflow, 9.5, 0, "in use; all terminals added"),
	fill(building.HeatRecovery, 11, 0, "of the temperature; data sheet"),
	fill(building.N50, 12, 2, "blower door at 50 Pa only, never a guess"),
	fill(building.ExposureField, 11, 0, "open field, hilltop, shore: exposed"),
	fill(building.HeatingSystem, 16, 0, "plate on the generator").from("Heating"),
	fill(building.CarrierField, 12, 0, "what is paid for"),
	fill(building.Efficiency, 11, 0, "heat out / energy in; heat pumps above 100"),
	fill(building.MeteredHeat, 11, 0, "a whole year, before any correction").from("Meter"),
	fill(building.MeteredYear, 9.5, 0, "in which the reading ended"),
	fill(building.MeterIncludesHotWater, 10, 0, "yes or no"),

	fill(building.Occupants, 11, 0, "on a usual day").from("Use and limits").page(),
	fill(building.Dwellings, 11, 0, "homes with a kitchen"),
	fill(building.Protected, 11, 0, "yes or no"),
	fill(building.FacadeStays, 11, 0, "yes or no"),
	fill(building.Restrictions, 34, 0, "what must not be touched, and why"),
	{key: ingest.FormRemarks, head: "Remarks", hint: "damp, mould, soot, noise; what could not be seen and why; kept as a note, not computed with", width: 62},
}

// locked is how many columns from the left cannot be changed.
const locked = 4

// fixed is how many of them stay in view, and on every printed page.
const fixed = 2

// value is what a known value is on the form: a number or text.
func (c *column) value(v *building.Value) any {
	switch c.field.Info().Type {
	case building.Number:
		return rounded(v.Number*c.factor(), c.decimals)
	case building.Year:
		if v.Low == v.High {
			return v.Low
		}
		return strconv.FormatFloat(v.Low, 'f', -1, 64) + "-" + strconv.FormatFloat(v.High, 'f', -1, 64)
	case building.YesNo:
		if v.Number != 0 {
			return "yes"
		}
		return "no"
	}
	return v.Text
}

// rounded keeps as many decimals as a surveyor can see, and what is smaller.
func rounded(v float64, decimals int) float64 {
	scale := math.Pow10(decimals)
	if r := math.Round(v*scale) / scale; r != 0 {
		return r
	}
	return v
}

// bounds are what a number must lie between to be taken; ok is false where
// anything not negative is.
func (c *column) bounds() (low, high float64, ok bool) {
	for _, b := range check.Bounds {
		if b.Field != c.field {
			continue
		}
		low, high = rounded(b.Low*c.factor(), 6), rounded(b.High*c.factor(), 6)
		if !check.ZeroIsUnknown(c.field) {
			low = 0
		}
		return low, high, true
	}
	return 0, 0, false
}
