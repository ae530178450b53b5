package header

import (
	"fmt"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/sheet"
)

func TestRecognise(t *testing.T) {
	years := Evidence{Filled: 20, Numbers: 19, Years: 19}
	numbers := Evidence{Filled: 20, Numbers: 19}
	words := Evidence{Filled: 20}
	for _, tc := range []struct {
		header string
		ev     Evidence
		want   string // key and unit
	}{
		{"Building ID", words, "id"},
		{"Geb.-Nr.", words, "id"},
		{"Floor area (ft²)", numbers, "floor_area ft2"},
		{"sqft_living", numbers, "floor_area ft2"},
		{"sqft_living15", numbers, ""},
		{"sqft_lot", numbers, "ignored"},
		{"BGF [m²]", numbers, "floor_area m2"},
		{"Wohnflaeche in m2", numbers, "floor_area m2"},
		{"Gross Floor Area - Buildings (sq ft)", numbers, "floor_area ft2"},
		{"FloorAreaM2", numbers, "floor_area m2"},
		{"Volume (m³)", numbers, "volume m3"},
		{"BRI (m³)", numbers, "gross_volume m3"},
		{"yr_built", years, "year_built"},
		{"Baujahr (ca.)", years, "year_built"},
		{"Année de construction", years, "year_built"},
		{"Byggår", years, "year_built"},
		{"Opførelsesår", years, "year_built"},
		{"bouwjaar", years, "year_built"},
		{"Año de construcción", years, "year_built"},
		{"construction", years, "year_built"},
		{"Construction", words, "wall_construction"},
		{"Dach", words, "roof_type"},
		{"Dach", years, "year_roof"},
		{"Dach [m²]", numbers, "roof_area m2"},
		{"Wand U [W/m²K]", numbers, "wall_u W/(m2K)"},
		{"U-Wert Wand gemessen", numbers, "wall_u surveyed"},
		{"U-value wall (certified)", numbers, "wall_u certified"},
		{"n50 (1/h) blower door", numbers, "n50 1/h surveyed"},
		{"Lüftung", words, "ventilation"},
		{"Natural Gas Use (kBtu)", numbers, "metered_heat kBtu metered"},
		{"Gas 2022 (m³)", numbers, "metered_heat m3 gas metered"},
		{"Gas", words, ""},
		{"Heizenergieverbrauch (kWh/m²a)", numbers, ""},
		{"Wärmeverbrauch kWh/m²", numbers, ""},
		{"Heat use [kWh/(m² a)]", numbers, ""},
		{"Floor area (€/m²)", numbers, ""},
		{"Average floor area per dwelling (m2)", numbers, ""},
		{"SFP kW/(m3/s)", numbers, "fan_power kW/(m3/s)"},
		{"U-value roof [W/(m²K)]", numbers, "roof_u W/(m2K)"},
		{"Air test result (m3/h.m2 @50Pa)", numbers, "q50 m3/(h m2)"},
		{"Gas kWh 2022/23", numbers, "metered_heat kWh metered"},
		{"Gasverbrauch 2022 (m³)", numbers, "metered_heat m3 gas metered"},
		{"Wärmeverbrauch 2021 MWh/a", numbers, "metered_heat MWh metered"},
		{"Site EUI (kBtu/sq ft)", numbers, "ignored"},
		{"Electricity Use (kBtu)", numbers, "ignored"},
		{"Year roof renewed", years, "year_roof"},
		{"# of Buildings", numbers, ""},
		{"Heat recovery (%)", numbers, "heat_recovery %"},
		{"Supply air (l/s)", numbers, "supply_airflow l/s"},
		{"Fläche Fenster", numbers, "window_area"},
		{"X1", numbers, ""},
		{"", words, ""},
	} {
		got := ""
		if c := Recognise(tc.header, tc.ev); len(c) > 0 {
			got = c[0].Key
			if c[0].Unit.Name != "" {
				got += " " + c[0].Unit.Name
			}
			if c[0].Kind != building.Default {
				got += " " + c[0].Kind.String()
			}
		}
		if got != tc.want {
			t.Errorf("%q: %q, want %q", tc.header, got, tc.want)
		}
	}
}

// Every synonym of the list must lead to its field when the cells fit it.
func TestEverySynonymLeadsToItsField(t *testing.T) {
	for _, l := range strings.Split(strings.TrimSpace(list), "\n")[1:] {
		p := strings.Split(l, ",")
		if len(p) != 4 {
			continue // a synonym with a comma in it
		}
		ev := Evidence{}
		found, written := false, p[2]
		if p[3] == energySense {
			if got := Recognise(written, ev); len(got) > 0 && got[0].Key == p[0] {
				t.Errorf("%q is %v without a unit of energy", written, got)
			}
			written += " (MWh)"
		}
		for _, c := range Recognise(written, ev) {
			found = found || c.Key == p[0]
		}
		if !found {
			t.Errorf("%s: %q is %v", p[0], written, Recognise(written, ev))
		}
	}
}

func TestHeadersOfOneLanguageAreReadInAll(t *testing.T) {
	for header, want := range map[string]string{
		"FTX verkningsgrad": "heat_recovery", "Verkningsgrad FTX (%)": "heat_recovery", "Wirkungsgrad Wärmerückgewinnung": "heat_recovery", "rendement échangeur double flux": "heat_recovery",
		"Fastighet": "id", "Fastighetsbeteckning": "id", "Energianvändning (MWh/år)": "metered_heat", "Energieverbrauch kWh/a": "metered_heat",
		"Energianvändning (kWh/m2 år)": "", "Energianvändning": "", "Airing by occupants": "", "Lüftung durch Bewohner": "", "Number of occupants": "occupants",
	} {
		got := ""
		if c := Recognise(header, Evidence{}); len(c) > 0 {
			got = c[0].Key
		}
		if got != want {
			t.Errorf("%q is %q, want %q", header, got, want)
		}
	}
}

// Labels and keys, with the unit in brackets, are what forms of this program have.
func TestOwnLabelsAreRecognised(t *testing.T) {
	for i := range building.NumFields {
		info := building.Field(i).Info()
		headers := []string{info.Label, info.Key}
		if info.Unit != "" {
			headers = append(headers, info.Label+" ("+info.Unit+")", info.Label+" ["+info.Unit+"]")
		}
		for _, h := range headers {
			c := Recognise(h, Evidence{})
			if len(c) == 0 || c[0].Key != info.Key {
				t.Errorf("%q is %v, want %s", h, c, info.Key)
			} else if h != info.Label && h != info.Key && c[0].Unit.Base != info.Unit {
				t.Errorf("%q has unit %q", h, c[0].Unit.Base)
			}
		}
	}
	if c := Recognise("Building id", Evidence{}); len(c) == 0 || c[0].Key != IDKey {
		t.Errorf("building id is %v", c)
	}
}

func grid(rows ...string) []Line {
	var out []Line
	for i, r := range rows {
		if r != "" {
			out = append(out, Line{i + 1, strings.Split(r, "|")})
		}
	}
	return out
}

func describe(tb *Table) string {
	var s []string
	for _, c := range tb.Columns {
		if c.Key != "" {
			s = append(s, c.Letters()+"="+strings.TrimSpace(c.Key+" "+c.Unit.Name))
		}
	}
	return strings.Join(s, ", ")
}

func TestFind(t *testing.T) {
	for _, tc := range []struct {
		name     string
		lines    []Line
		merges   []sheet.Merge
		row      int
		dataFrom int
		want     string
	}{
		{"FirstRow", grid("id|floor area m2|year built", "1|100|1950"), nil, 1, 2, "A=id, B=floor_area m2, C=year_built"},
		{"TitlesAbove", grid("Register of buildings", "Stand: 1.3.2026", "", "Objekt-Nr|Wohnfläche (m²)|Baujahr", "1|100|1950"), nil, 4, 5, "A=id, B=floor_area m2, C=year_built"},
		{"UnitsBelow", grid("id|floor area|volume|wall u-value", "|ft²|m³|W/m²K", "1|100|300|1,2"), nil, 1, 3, "A=id, B=floor_area ft2, C=volume m3, D=wall_u W/(m2K)"},
		{"GroupsAbove", grid("|Wall||Roof|", "id|area (m2)|U-value|area (m2)|U-value", "1|200|1.2|100|0.8"),
			[]sheet.Merge{{FirstRow: 1, LastRow: 1, FirstCol: 1, LastCol: 2}, {FirstRow: 1, LastRow: 1, FirstCol: 3, LastCol: 4}}, 2, 3,
			"A=id, B=wall_area m2, C=wall_u, D=roof_area m2, E=roof_u"},
		{"GroupsAboveWithoutMerging", grid("Identification||Geometry||U-values [W/(m²K)]||", "No.|Name|Heated floor area (m2)|Storeys|Wall|Roof|Windows", "1|Hall|500|2|1.2|0.4|2.8"), nil, 2, 3,
			"A=id, B=name, C=floor_area m2, D=storeys, E=wall_u W/(m2K), F=roof_u W/(m2K), G=window_u W/(m2K)"},
		{"UpperRowNotMergedDown", grid("Geb.-Nr.|Baujahr|Sanierung|||NGF [m²]", "||Dach|Fenster|Fassade|", "G1|1950|1990|2001|1999|500"), nil, 2, 3,
			"A=id, B=year_built, C=year_roof, D=year_windows, E=year_wall, F=floor_area m2"},
	} {
		t.Run(tc.name, func(t *testing.T) {
			tb, ok := Find(tc.lines, tc.merges, nil, nil)
			if !ok {
				t.Fatal("no header found")
			}
			p := Settle(&tb, nil)
			if len(p.Problems) > 0 || p.Skip != "" {
				t.Errorf("problems %v, skip %q", p.Problems, p.Skip)
			}
			if got := describe(&tb); tb.Row != tc.row || tb.DataFrom != tc.dataFrom || got != tc.want {
				t.Errorf("row %d from %d: %s\nwant row %d from %d: %s", tb.Row, tb.DataFrom, got, tc.row, tc.dataFrom, tc.want)
			}
		})
	}
	m, err := ParseMapping(strings.NewReader("id = A\nfloor_area [m2] = B\nyear_built = C\n"))
	if err != nil {
		t.Fatal(err)
	}
	for _, tc := range []struct {
		name          string
		lines         []Line
		row, dataFrom int
	}{
		{"HeadersThatSayNothing", grid("X1|X2|X3", "a|100|1950"), 1, 2},
		{"NoHeader", grid("G1|100|1950", "G2|200|1960"), 0, 1},
		{"NoHeaderBelowTitle", grid("Register", "", "G1|100|1950", "G2|n/a|1960"), 0, 3},
	} {
		tb, ok := Find(tc.lines, nil, nil, m.For("a.csv", ""))
		if !ok || tb.Row != tc.row || tb.DataFrom != tc.dataFrom {
			t.Errorf("%s: row %d from %d, %v", tc.name, tb.Row, tb.DataFrom, ok)
			continue
		}
		p := Settle(&tb, m.For("a.csv", ""))
		if got := describe(&tb); got != "A=id, B=floor_area m2, C=year_built" || p.Stopped() {
			t.Errorf("%s: %s, problems %v", tc.name, got, p.Problems)
		}
	}
	if _, ok := Find(grid("X1|X2|X3", "0.98|514.5|294"), nil, nil, nil); ok {
		t.Error("headers that say nothing are taken for a table")
	}
}

func TestSettle(t *testing.T) {
	for _, tc := range []struct {
		name, head, mapping string
		want                string // columns, or the checks of problems, or the reason to skip
	}{
		{"ExactWins", "id|floor area|floor area of garage and cellar store", "", "A=id, B=floor_area"},
		{"SIWins", "id|floor area (ft2)|floor area (m2)", "", "A=id, C=floor_area m2"},
		{"HeatedWinsOverGross", "id|GFA|heated floor area", "", "A=id, C=floor_area"},
		{"TwoAreas", "id|Wohnfläche|Nutzfläche|Baujahr", "", "floor_area: ambiguous-column"},
		{"TwoAreasMapped", "id|Wohnfläche|Nutzfläche|Baujahr", "floor_area = Nutzfläche", "A=id, C=floor_area, D=year_built"},
		{"MappedByLetter", "id|x|Baujahr", "floor_area [ft2] = B", "A=id, B=floor_area ft2, C=year_built"},
		{"MappedAway", "id|floor area|year built", "year_built = none", "A=id, B=floor_area"},
		{"MappingNamesNoColumn", "id|floor area|year built", "[a.xlsx]\nvolume = Rauminhalt", "volume: mapping"},
		{"NoID", "address|floor area|year built|use", "", "id: missing-id"},
		{"TwoIDs", "building id|property id|floor area|year built", "", "id: ambiguous-column"},
		{"StrongIDWins", "no|building id|floor area", "", "B=id, C=floor_area"},
		{"NoSizeIsFine", "building id|year windows renewed", "", "A=id, B=year_windows"},
		{"NothingKnown", "name|phone", "", "it has no column of building ids and hardly a known column"},
		{"MeasuredBesideRegistered", "id|U wall|U wall measured", "", "A=id, B=wall_u, C=wall_u"},
		{"GasBeforeSteam", "id|District steam use (kBtu)|Natural gas use (kBtu)", "", "A=id, B=metered_heat kBtu, C=metered_heat kBtu"},
		{"MetersOfYears", "id|gas use 2021 (kWh)|gas use 2022 (kWh)", "", "A=id, B=metered_heat kWh, C=metered_heat kWh"},
	} {
		t.Run(tc.name, func(t *testing.T) {
			m, err := ParseMapping(strings.NewReader(tc.mapping))
			if err != nil {
				t.Fatal(err)
			}
			entries := m.For("a.xlsx", "Sheet1")
			tb, ok := Find(grid(tc.head, "1|100|1950|2"), nil, nil, entries)
			if !ok {
				t.Fatal("no header found")
			}
			p := Settle(&tb, entries)
			got := describe(&tb)
			if len(p.Problems) > 0 {
				got = ""
				for _, x := range p.Problems {
					got += x.Key + ": " + x.Check
					if x.Check != "mapping" && len(x.Columns) == 0 && x.Check != "missing-id" {
						t.Errorf("%s lists no candidates", x.Check)
					}
				}
			}
			if p.Skip != "" {
				got = p.Skip
			}
			if got != tc.want {
				t.Errorf("%s\nwant %s", got, tc.want)
			}
		})
	}
}

func TestPreferenceAmongColumns(t *testing.T) {
	tb, _ := Find(grid("id|District steam use (kBtu)|Natural gas use (kBtu)|U wall|U wall measured|gas use 2021 (kWh)|gas use 2022 (kWh)", "1|2"), nil, nil, nil)
	p := Settle(&tb, nil)
	order := func(key string) string {
		var s string
		for _, c := range p.Columns(key) {
			s += c.Letters()
		}
		return s
	}
	if got := order("wall_u"); got != "ED" {
		t.Errorf("wall_u from %s, want measured first", got)
	}
	if got := order("metered_heat"); got != "GFCB" && got != "GFC" {
		t.Errorf("metered_heat from %s, want gas of the latest year first and steam last", got)
	}
}

func TestParseMapping(t *testing.T) {
	m, err := ParseMapping(strings.NewReader(`# a remark
use = constant:"care home"
[register.xlsx Sheet one]
floor_area [ft2] = "Living = area"
Year built = C
["my file.csv"]
volume = none
`))
	if err != nil {
		t.Fatal(err)
	}
	want := []Section{
		{Entries: []Entry{{Field: "use", Constant: "care home", Fixed: true, Line: 2}}},
		{File: "register.xlsx", Sheet: "Sheet one", Line: 3, Entries: []Entry{
			{Field: "floor_area", Unit: "ft2", Column: "Living = area", Line: 4}, {Field: "year_built", Column: "C", Line: 5}}},
		{File: "my file.csv", Line: 6, Entries: []Entry{{Field: "volume", Unread: true, Line: 7}}},
	}
	if d := cmp.Diff(want, m.Sections); d != "" {
		t.Error(d)
	}
	if got := len(m.For("register-to-fix.xlsx", "Sheet one")); got != 3 {
		t.Errorf("%d entries for the sheet of rows to fix, want 3", got)
	}
	if got := len(m.For("REGISTER.xlsx", "sheet one")); got != 3 {
		t.Errorf("%d entries for the sheet, want 3", got)
	}
	for text, part := range map[string]string{
		"use school":                   "line 1",
		"\nroof_aera = B":              `line 2: there is no field "roof_aera"; did you mean "roof_area"`,
		"[open\n":                      "line 1",
		"use =":                        "line 1",
		"id = constant:\"7\"":          "line 1",
		"use = A\nuse = B":             "line 2",
		"floor_area [kWh] = A":         "line 1",
		"[\"open quote]\nfloor_area=A": "line 1",
	} {
		if _, err := ParseMapping(strings.NewReader(text)); err == nil || !strings.Contains(err.Error(), part) {
			t.Errorf("%q: error %v, want one with %q", text, err, part)
		}
	}
}

// What WriteMapping writes, ParseMapping reads, and it means the same columns.
func TestMappingRoundTrip(t *testing.T) {
	in := []SheetColumns{{File: "my register.xlsx", Sheet: "Sheet \"1\"", Columns: []SheetColumn{
		{"A", "Nr\n(neu)", "id", "", "17"}, {"B", "Fläche", "floor_area", "ft2", "1,200"}, {"C", "Farbe", "", "", "rot"},
	}}}
	var b strings.Builder
	if err := WriteMapping(&b, in); err != nil {
		t.Fatal(err)
	}
	m, err := ParseMapping(strings.NewReader(b.String()))
	if err != nil {
		t.Fatalf("%v in\n%s", err, b.String())
	}
	var got []string
	for _, e := range m.For("my register.xlsx", `Sheet "1"`) {
		got = append(got, fmt.Sprintf("%s[%s]=%s", e.Field, e.Unit, e.Column))
	}
	if d := cmp.Diff([]string{"id[]=A", "floor_area[ft2]=B"}, got); d != "" {
		t.Error(d)
	}
}
