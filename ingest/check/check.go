// Package check holds the physical checks of what a row says of a building:
// ranges that a value must lie in, and values that must fit each other. Each is
// a row of a table; none changes a value.
package check

import (
	"fmt"
	"math"
	"strconv"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/finding"
)

// Values are the values of one row by field; nil where the row has none.
type Values [building.NumFields]*building.Value

// Problem is what a check found.
type Problem struct {
	Check    string
	Severity finding.Severity
	Field    building.Field   // the field to mark
	Drop     []building.Field // the values to set aside, for a warning
	Text     string
	Fix      string
}

// Bound is the range that a value of a field must lie in.
type Bound struct {
	Field    building.Field
	Low      float64
	High     float64
	Check    string
	Severity finding.Severity
}

// Bounds lists the ranges. They are wide: outside lies a slip of unit, sign or
// decimal point, not an unusual building.
var Bounds = []Bound{
	{building.FloorArea, 5, 2e6, "floor-area", finding.Warning},
	{building.Volume, 10, 2e7, "volume", finding.Warning},
	{building.GrossVolume, 10, 2e7, "volume", finding.Warning},
	{building.Storeys, 0.5, 80, "storeys", finding.Warning},
	{building.StoreyHeight, 1.8, 20, "storey-height", finding.Warning},
	{building.Footprint, 5, 5e5, "footprint", finding.Warning},
	{building.Perimeter, 8, 1e4, "perimeter", finding.Warning},
	{building.WallArea, 1, 1e6, "wall-area", finding.Warning},
	{building.RoofArea, 1, 5e5, "roof-area", finding.Warning},
	{building.GroundFloorArea, 1, 5e5, "ground-floor-area", finding.Warning},
	{building.WindowArea, 0.2, 5e5, "window-area", finding.Warning},
	{building.DoorArea, 0.2, 1e4, "door-area", finding.Warning},
	{building.WallU, 0.05, 7, "u-value", finding.Warning},
	{building.RoofU, 0.05, 7, "u-value", finding.Warning},
	{building.FloorU, 0.05, 7, "u-value", finding.Warning},
	{building.WindowU, 0.05, 7, "u-value", finding.Warning},
	{building.SupplyAirflow, 1, 1e6, "airflow", finding.Warning},
	{building.ExtractAirflow, 1, 1e6, "airflow", finding.Warning},
	{building.HeatRecovery, 0.05, 0.98, "heat-recovery", finding.Warning},
	{building.FanPower, 0.02, 5, "fan-power", finding.Warning},
	{building.N50, 0.1, 40, "n50", finding.Warning},
	{building.Q50, 0.1, 60, "q50", finding.Warning},
	{building.Efficiency, 0.2, 7, "efficiency", finding.Warning},
	{building.DegreeDays, 200, 12000, "degree-days", finding.Warning},
	{building.Occupants, 0.1, 1e5, "occupants", finding.Warning},
	{building.Dwellings, 1, 1e4, "dwellings", finding.Warning},
}

// zeroMeansNone lists the fields where 0 says "there is none", not a slip.
var zeroMeansNone = map[building.Field]bool{
	building.DoorArea: true, building.Occupants: true, building.Dwellings: true, building.FlatsLet: true,
	building.SupplyAirflow: true, building.ExtractAirflow: true, building.HeatRecovery: true, building.FanPower: true,
}

// ZeroIsUnknown reports whether registers write 0 into f for "not known".
func ZeroIsUnknown(f building.Field) bool {
	return f.Info().Type == building.Number && !zeroMeansNone[f]
}

// Rule is a check of several values against each other.
type Rule struct {
	Name  string
	Needs []building.Field
	// Test returns text when the values, in the order of Needs, do not fit.
	Test     func(v []float64) string
	Severity finding.Severity
	Drop     []building.Field
	Fix      string
}

// Rules lists the checks of values against each other, in the order in which
// they are made; a value that one sets aside is absent for the next.
var Rules = []Rule{
	{"volume-ratio", fields(building.Volume, building.FloorArea), ratio(1, 30, "volume", "floor area", "m", "far outside 2 to 12 m"),
		finding.Error, nil, "one of them is in another unit or has a wrong decimal point: correct it"},
	{"volume-ratio", fields(building.Volume, building.FloorArea), ratio(2, 12, "volume", "floor area", "m", "outside 2 to 12 m"),
		finding.Warning, fields(building.Volume), "check volume and floor area"},
	{"volume-ratio", fields(building.GrossVolume, building.FloorArea), ratio(2, 16, "gross volume", "floor area", "m", "outside 2 to 16 m"),
		finding.Warning, fields(building.GrossVolume), "check volume and floor area"},
	{"volume-gross", fields(building.Volume, building.GrossVolume), ratio(0, 1.02, "heated volume", "gross volume", "", "above 1"),
		finding.Warning, fields(building.GrossVolume), "check both volumes"},
	{"window-wall", fields(building.WindowArea, building.WallArea), func(v []float64) string {
		if v[0] < v[1] {
			return ""
		}
		return fmt.Sprintf("window area %s m2 is not below wall area %s m2", num(v[0]), num(v[1]))
	}, finding.Warning, fields(building.WindowArea), "check both areas"},
	{"area-storeys", fields(building.FloorArea, building.Footprint, building.Storeys), func(v []float64) string {
		per := v[0] / (v[1] * math.Max(1, v[2]))
		if per >= 0.25 && per <= 1.3 {
			return ""
		}
		return fmt.Sprintf("floor area %s m2 does not fit %s storeys of %s m2", num(v[0]), num(v[2]), num(v[1]))
	}, finding.Warning, fields(building.Footprint), "check floor area, footprint and storeys"},
	{"volume-storeys", fields(building.Volume, building.FloorArea, building.StoreyHeight), func(v []float64) string {
		h := v[0] / v[1]
		if h <= v[2]*1.5 && h >= v[2]*0.5 {
			return ""
		}
		return fmt.Sprintf("volume / floor area is %s m where the storey height is %s m", num(h), num(v[2]))
	}, finding.Warning, fields(building.StoreyHeight), "check volume, floor area and storey height"},
	{"perimeter-footprint", fields(building.Perimeter, building.Footprint), func(v []float64) string {
		// No shape encloses more than a circle does.
		if v[0] >= 0.98*2*math.Sqrt(math.Pi*v[1]) {
			return ""
		}
		return fmt.Sprintf("a perimeter of %s m cannot enclose a footprint of %s m2", num(v[0]), num(v[1]))
	}, finding.Warning, fields(building.Perimeter), "check perimeter and footprint"},
	{"roof-footprint", fields(building.RoofArea, building.Footprint), ratio(0.5, 3, "roof area", "footprint", "", "outside 0.5 to 3"),
		finding.Warning, fields(building.RoofArea), "check roof area and footprint"},
	{"ground-footprint", fields(building.GroundFloorArea, building.Footprint), ratio(0, 1.2, "ground-floor area", "footprint", "", "above 1.2"),
		finding.Warning, fields(building.GroundFloorArea), "check ground-floor area and footprint"},
	{"meter-per-area", fields(building.MeteredHeat, building.FloorArea), ratio(2, 1000, "metered heat", "floor area", "kWh/m2", "outside 2 to 1000 kWh/m2"),
		finding.Warning, fields(building.MeteredHeat), "check the reading, its unit and the floor area"},
	{"airflow-per-area", fields(building.SupplyAirflow, building.FloorArea), ratio(0, 60, "supply airflow", "floor area", "m3/(h m2)", "above 60 m3/(h m2)"),
		finding.Warning, fields(building.SupplyAirflow), "check the airflow and its unit"},
	{"airflow-per-area", fields(building.ExtractAirflow, building.FloorArea), ratio(0, 60, "extract airflow", "floor area", "m3/(h m2)", "above 60 m3/(h m2)"),
		finding.Warning, fields(building.ExtractAirflow), "check the airflow and its unit"},
	{"flats-let", fields(building.FlatsLet, building.Dwellings), ratio(0, 1, "flats let", "dwellings", "", "above 1"),
		finding.Warning, fields(building.FlatsLet), "check both numbers"},
}

func fields(f ...building.Field) []building.Field { return f }

func num(v float64) string {
	if math.Abs(v) >= 1000 {
		return strconv.FormatFloat(v, 'f', 0, 64)
	}
	return strconv.FormatFloat(v, 'g', 4, 64)
}

// shown writes a value as people do, a share in percent.
func shown(v float64, unit string) string {
	if unit == "share" {
		return num(v*100) + " %"
	}
	return num(v) + spaced(unit)
}

func (b Bound) span() string {
	if b.Field.Info().Unit == "share" {
		return num(b.Low*100) + " to " + num(b.High*100) + " %"
	}
	return num(b.Low) + " to " + num(b.High)
}

func ratio(low, high float64, a, b, unit, outside string) func([]float64) string {
	return func(v []float64) string {
		r := v[0] / v[1]
		if r >= low && r <= high {
			return ""
		}
		return fmt.Sprintf("%s / %s is %s%s, %s", a, b, num(r), spaced(unit), outside)
	}
}

// Year bounds: nothing heated by its owner's register is older.
const firstYear = 1000

// Row makes all checks of one row. nextYear is the latest year a value may be
// in, 0 for no limit. A warning removes the values it sets aside from v.
func Row(v *Values, nextYear int) []Problem {
	var out []Problem
	report := func(p Problem) {
		out = append(out, p)
		for _, f := range p.Drop {
			v[f] = nil
		}
	}
	for i := range building.NumFields {
		f := building.Field(i)
		if v[f] == nil {
			continue
		}
		switch f.Info().Type {
		case building.Number:
			if p, bad := sign(f, v[f].Number); bad {
				report(p)
			}
		case building.Year:
			if p, bad := year(f, v[f], nextYear); bad {
				report(p)
			}
		}
	}
	for _, b := range Bounds {
		if v[b.Field] == nil {
			continue
		}
		n := v[b.Field].Number
		if n >= b.Low && n <= b.High || n == 0 && !ZeroIsUnknown(b.Field) || n < 0 {
			continue
		}
		info := b.Field.Info()
		report(Problem{b.Check, b.Severity, b.Field, fields(b.Field),
			fmt.Sprintf("%s %s is outside %s", lower(info.Label), shown(n, info.Unit), b.span()),
			"check the value and its unit"})
	}
	built := v[building.YearBuilt]
	for _, f := range []building.Field{building.YearWall, building.YearRoof, building.YearFloor, building.YearWindows} {
		if v[f] != nil && built != nil && v[f].High < built.Low {
			report(Problem{"renewed-before-built", finding.Warning, f, fields(f),
				fmt.Sprintf("%s %s is before the year built, %s", lower(f.Info().Label), num(v[f].High), num(built.Low)), "check both years"})
		}
	}
	refused := ""
rules:
	for i := range Rules {
		r := &Rules[i]
		args := make([]float64, len(r.Needs))
		for j, f := range r.Needs {
			if v[f] == nil || v[f].Number <= 0 && f != building.FlatsLet {
				continue rules
			}
			args[j] = v[f].Number
		}
		if refused == r.Name {
			continue // the row is set aside for the same already
		}
		if text := r.Test(args); text != "" {
			if r.Severity == finding.Error {
				refused = r.Name
			}
			report(Problem{r.Name, r.Severity, r.Needs[0], r.Drop, text, r.Fix})
		}
	}
	return out
}

// sign treats negative values, which nothing here can have. Without its size a
// row is no use, so a negative size sets the row aside.
func sign(f building.Field, n float64) (Problem, bool) {
	if n >= 0 {
		return Problem{}, false
	}
	info := f.Info()
	p := Problem{"negative-value", finding.Warning, f, fields(f),
		fmt.Sprintf("%s is negative: %s%s", lower(info.Label), num(n), spaced(info.Unit)), "correct the sign or the value"}
	switch f {
	case building.FloorArea:
		p.Check, p.Severity, p.Drop = "negative-area", finding.Error, nil
	case building.Volume, building.GrossVolume:
		p.Check, p.Severity, p.Drop = "negative-volume", finding.Error, nil
	}
	return p, true
}

func year(f building.Field, v *building.Value, nextYear int) (Problem, bool) {
	if v.Low >= firstYear && (nextYear == 0 || v.High <= float64(nextYear)) && v.Low <= v.High {
		return Problem{}, false
	}
	limit := "or later"
	if nextYear > 0 {
		limit = fmt.Sprintf("to %d", nextYear)
	}
	return Problem{"year", finding.Warning, f, fields(f),
		fmt.Sprintf("%s %s is not in %d %s", lower(f.Info().Label), num(v.Number), firstYear, limit), "correct the year"}, true
}

func spaced(u string) string {
	if u == "" {
		return ""
	}
	return " " + u
}

func lower(label string) string {
	if len(label) > 1 && label[0] >= 'A' && label[0] <= 'Z' && label[1] >= 'a' && label[1] <= 'z' {
		return string(label[0]+'a'-'A') + label[1:]
	}
	return label
}
