package check

import (
	"strings"
	"testing"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/finding"
)

func number(f building.Field, k building.Kind, n float64) building.Value {
	return building.Value{Field: f, Kind: k, Number: n, Low: n, High: n}
}

func word(f building.Field, w string) building.Value {
	return building.Value{Field: f, Kind: building.Registered, Text: w}
}

func TestConflicts(t *testing.T) {
	const reg, sur = building.Registered, building.Surveyed
	a := &building.Sheet{ID: 1, LoadID: 1, File: "a.xlsx", Name: "S", FileDate: "2024-01-01"}
	a.Columns[building.FloorArea] = "C"
	b := &building.Sheet{ID: 2, LoadID: 2, File: "b.csv", FileDate: "2025-01-01"}
	fix := &building.Sheet{ID: 3, LoadID: 3, File: "a-to-fix.xlsx", Name: "S", FileDate: "2026-01-01"}
	later := &building.Sheet{ID: 4, LoadID: 4, File: "c.csv", FileDate: "2025-01-01"}
	record := func(s *building.Sheet, row int, date string, vs ...building.Value) building.Record {
		return building.Record{Building: "X", Sheet: s, Row: row, SurveyDate: date, Values: vs}
	}
	for _, c := range []struct {
		name     string
		records  []building.Record
		severity finding.Severity
		want     string // "" for none
	}{
		{"within tolerance", []building.Record{record(a, 12, "", number(building.FloorArea, reg, 1240)), record(b, 40, "", number(building.FloorArea, reg, 1270))}, 0, ""},
		{"newer file", []building.Record{record(a, 12, "", number(building.FloorArea, reg, 1240)), record(b, 40, "", number(building.FloorArea, reg, 1520))}, finding.Warning,
			`heated floor area 1520 m2 in b.csv, row 40; 1240 m2 in a.xlsx, sheet "S", row 12; b.csv is used: the file is newer, of 2025-01-01 against 2024-01-01`},
		{"newer survey", []building.Record{record(a, 12, "2026-03-01", number(building.FloorArea, sur, 1240)), record(b, 40, "2025-06-01", number(building.FloorArea, sur, 1520))}, finding.Warning,
			`a.xlsx is used: its row is newer, of 2026-03-01 against 2025-06-01`},
		{"firmer", []building.Record{record(a, 12, "", number(building.WallU, sur, 1.2)), record(b, 40, "", number(building.WallU, reg, 0.8))}, finding.Note,
			`wall U-value 1.2 W/(m2K) in a.xlsx, sheet "S", row 12; 0.8 W/(m2K) in b.csv, row 40; a.xlsx is used: surveyed beats registered`},
		{"later load", []building.Record{record(b, 2, "", word(building.UseField, "school")), record(later, 3, "", word(building.UseField, "office"))}, finding.Warning,
			`use "office" in c.csv, row 3; "school" in b.csv, row 2; c.csv is used: it was loaded later`},
		{"years that nearly meet", []building.Record{record(a, 2, "", number(building.YearBuilt, reg, 1960)), record(b, 2, "", building.Value{Field: building.YearBuilt, Kind: reg, Low: 1962, High: 1969, Number: 1965.5})}, 0, ""},
		{"years apart", []building.Record{record(a, 2, "", number(building.YearBuilt, reg, 1960)), record(b, 2, "", building.Value{Field: building.YearBuilt, Kind: reg, Low: 1963, High: 1969, Number: 1966})}, finding.Warning,
			`year built 1963 to 1969 in b.csv, row 2; 1960 in a.xlsx`},
		{"mended row", []building.Record{record(a, 2, "", number(building.FloorArea, reg, 100)), record(fix, 2, "", number(building.FloorArea, reg, 1000))}, 0, ""},
		{"one file", []building.Record{record(a, 2, "", number(building.FloorArea, reg, 100)), record(a, 3, "", number(building.FloorArea, reg, 1000))}, 0, ""},
		{"names may be spelled in many ways", []building.Record{record(a, 2, "", word(building.Name, "House")), record(b, 3, "", word(building.Name, "The House"))}, 0, ""},
		{"postcode", []building.Record{record(a, 2, "", word(building.Postcode, "1000 AB")), record(b, 3, "", word(building.Postcode, "2000 AB"))}, finding.Warning, "postcode"},
		{"protection", []building.Record{record(a, 2, "", number(building.Protected, reg, 1)), record(b, 3, "", number(building.Protected, reg, 0))}, finding.Warning, "heritage protection no in b.csv, row 3; yes in a.xlsx"},
		{"meters of two years", []building.Record{record(a, 2, "", number(building.MeteredHeat, building.Metered, 1e5), number(building.MeteredYear, building.Metered, 2023)),
			record(b, 3, "", number(building.MeteredHeat, building.Metered, 2e5), number(building.MeteredYear, building.Metered, 2024))}, 0, ""},
		{"meters of one year", []building.Record{record(a, 2, "", number(building.MeteredHeat, building.Metered, 1e5), number(building.MeteredYear, building.Metered, 2024)),
			record(b, 3, "", number(building.MeteredHeat, building.Metered, 2e5), number(building.MeteredYear, building.Metered, 2024))}, finding.Warning, "metered heat 200000 kWh in b.csv"},
		{"three files", []building.Record{record(a, 2, "", number(building.FloorArea, reg, 100)), record(b, 3, "", number(building.FloorArea, reg, 200)), record(later, 4, "", number(building.FloorArea, reg, 300))},
			finding.Warning, "heated floor area 300 m2 in c.csv, row 4; 200 m2 in b.csv, row 3, and 1 more that differ; c.csv is used"},
	} {
		fs := Conflicts(building.Merge("X", c.records), c.records)
		if c.want == "" {
			if len(fs) > 0 {
				t.Errorf("%s: %v", c.name, fs)
			}
			continue
		}
		if len(fs) != 1 || fs[0].Severity != c.severity || !strings.Contains(fs[0].Text, c.want) || fs[0].Check != "conflict" || fs[0].Building != "X" {
			t.Errorf("%s: %v", c.name, fs)
		}
	}
	rs := []building.Record{record(a, 12, "", number(building.FloorArea, reg, 1240)), record(b, 40, "", number(building.FloorArea, reg, 1520))}
	if f := Conflicts(building.Merge("X", rs), rs)[0]; f.File != "a.xlsx" || f.Row != 12 || f.Column != "C" || f.Raw != "1240 m2" {
		t.Errorf("placed at %+v, not at the value that is not used", f)
	}
}

// What can be a number or a word is compared, or left out on purpose.
func TestEveryFieldIsComparedOrNot(t *testing.T) {
	not := map[building.Field]bool{building.MeteredYear: true, building.DegreeDays: true, building.Occupants: true, building.FlatsLet: true}
	for i := range building.NumFields {
		f := building.Field(i)
		if f.Info().Type == building.Text {
			continue
		}
		if compared(f) == not[f] {
			t.Errorf("%s: compared %v", f, compared(f))
		}
	}
}
