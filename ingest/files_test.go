package ingest

import (
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/xuri/excelize/v2"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/finding"
	"kelvinrow/ingest/header"
)

func TestFolderSaysWhatIsLeftOut(t *testing.T) {
	dir := t.TempDir()
	for _, n := range []string{"b.xlsx", "a-to-fix.csv", ".hidden.csv", "~$b.xlsx", "plan.pdf", "old.xls"} {
		if err := os.WriteFile(filepath.Join(dir, n), nil, 0o600); err != nil {
			t.Fatal(err)
		}
	}
	if err := os.Mkdir(filepath.Join(dir, "east"), 0o700); err != nil {
		t.Fatal(err)
	}
	files, skipped, err := Expand([]string{dir})
	if err != nil || len(files) != 2 { // old.xls is tried, and fails with a reason
		t.Fatalf("%v, %v", files, err)
	}
	var got []string
	for _, f := range skipped {
		if f.Check != finding.FileSkipped || f.Severity != finding.Note {
			t.Errorf("%+v", f)
		}
		got = append(got, f.File+": "+f.Text)
	}
	want := []string{
		"a-to-fix.csv: the file is not read: it holds rows to fix",
		"east: the file is not read: it is a folder within the folder",
		"plan.pdf: the file is not read: it is no spreadsheet by its name",
		"~$b.xlsx: the file is not read: it only says that b.xlsx is open in a spreadsheet program",
	}
	if d := cmp.Diff(want, got); d != "" {
		t.Error(d)
	}
	// What is named beside its folder is not left out.
	_, skipped, err = Expand([]string{dir, filepath.Join(dir, "a-to-fix.csv")})
	if err != nil || len(skipped) != 3 {
		t.Errorf("%v, %v", skipped, err)
	}
	if _, _, err := Expand([]string{filepath.Join(dir, "*.pdf")}); err == nil || !strings.Contains(err.Error(), "plan.pdf") {
		t.Errorf("%v", err)
	}
}

func TestNamesTellFilesApart(t *testing.T) {
	for _, c := range []struct{ paths, want []string }{
		{[]string{"/x/a.csv", "/x/b.csv"}, []string{"a.csv", "b.csv"}},
		{[]string{"/x/north/a.csv", "/x/south/a.csv", "/x/b.csv"}, []string{"north/a.csv", "south/a.csv", "b.csv"}},
		{[]string{"/1/n/a.csv", "/2/n/A.csv"}, []string{"1/n/a.csv", "2/n/A.csv"}},
		{[]string{"/a.csv", "/x/a.csv"}, []string{"/a.csv", "x/a.csv"}},
	} {
		if d := cmp.Diff(c.want, Names(c.paths)); d != "" {
			t.Errorf("%v: %s", c.paths, d)
		}
	}
}

// ranked writes a workbook such as this program does, with sheets and properties
// as given.
func ranked(t *testing.T, properties *excelize.DocProperties, sheets ...string) string {
	t.Helper()
	f := excelize.NewFile()
	defer f.Close()
	for i, s := range sheets {
		if i == 0 {
			if err := f.SetSheetName("Sheet1", s); err != nil {
				t.Fatal(err)
			}
		} else if _, err := f.NewSheet(s); err != nil {
			t.Fatal(err)
		}
		for j, row := range [][]any{{"Building", "Use", "Floor area (m2)", "Year built"}, {"B1", "school", 900, 1950}} {
			if err := f.SetSheetRow(s, "A"+string(rune('1'+j)), &row); err != nil {
				t.Fatal(err)
			}
		}
	}
	if err := f.SetDocProps(properties); err != nil {
		t.Fatal(err)
	}
	p := filepath.Join(t.TempDir(), "results.xlsx")
	if err := f.SaveAs(p); err != nil {
		t.Fatal(err)
	}
	return p
}

func TestOwnWorkbookIsNotRead(t *testing.T) {
	for _, c := range []struct {
		name       string
		properties excelize.DocProperties
		sheets     []string
		own        bool
	}{
		{"as written", excelize.DocProperties{Creator: "kelvinrow 0.1", Description: "Run 3 of portfolio north"}, []string{"Buildings"}, true},
		{"saved by another program", excelize.DocProperties{Creator: "Somebody"}, ownSheets, true},
		{"a form to fill in", excelize.DocProperties{Creator: "kelvinrow 0.1", Description: "Survey form"}, []string{"Survey"}, false},
		{"a register", excelize.DocProperties{Creator: "Somebody", Description: "Run 3 of the list"}, []string{"Overview", "Buildings"}, false},
	} {
		r, k := load(t, ranked(t, &c.properties, c.sheets...), Options{})
		if r.Own != c.own || (len(k.records) > 0) == c.own {
			t.Errorf("%s: own %v, %d records, %v", c.name, r.Own, len(k.records), r.Findings)
		}
		if c.own && checks(r, finding.Note) != "own-workbook@0" {
			t.Errorf("%s: %v", c.name, r.Findings)
		}
	}
}

func mapping(t *testing.T, text string) *header.Mapping {
	t.Helper()
	m, err := header.ParseMapping(strings.NewReader(text))
	if err != nil {
		t.Fatal(err)
	}
	m.Name = "columns.txt"
	return m
}

func TestLinesOfAColumnFileThatPointAtNothing(t *testing.T) {
	p := csvFile(t, "id,use,floor area (m2),year built,\nS1,school,1000,1950,7\n")
	for _, c := range []struct{ text, want string }{
		{"id = A\nuse = use\nstoreys = E\n", ""}, // E has no header and will do
		{"storeys = ZZ\n", `warning columns.txt 1 storeys is to come from "ZZ", and no sheet read has such a column`},
		{"# remark\nname = Bezeichnung\n", `warning columns.txt 2 name is to come from "Bezeichnung", and no sheet read has such a column`},
		{"[register.csv \"Shet1\"]\nuse = B\n", `warning columns.txt 1 the section is about sheet "Shet1", and register.csv has no sheets with names`},
		{"[other.csv]\nuse = B\n", "note columns.txt 1 the section is about other.csv, which is not among the files given"},
		{"use = C\n[register.csv]\nuse = B\n", ""}, // the later line counts
		{"heating_system = none\nexposure = constant:exposed\n", ""},
	} {
		m := mapping(t, c.text)
		r, _ := load(t, p, Options{Mapping: m})
		var got []string
		for _, f := range UnusedMapping(m, []*Report{r}, nil) {
			got = append(got, strings.TrimSpace(f.Severity.String()+" "+f.File+" "+string(rune('0'+f.Row))+" "+f.Text))
		}
		if s := strings.Join(got, "\n"); s != c.want {
			t.Errorf("%q: %s, want %s", c.text, s, c.want)
		}
		if len(UnusedMapping(m, nil, []string{"register.csv", "other.csv"})) > 0 {
			t.Errorf("%q: a file that is known is complained about", c.text)
		}
	}
	m := mapping(t, "storeys = E\n")
	if _, k := load(t, p, Options{Mapping: m}); len(k.records) != 1 {
		t.Error("a column without a header cannot be named by its letter")
	} else if v, _ := k.get("S1", building.Storeys); v.Number != 7 {
		t.Errorf("storeys %v", v)
	}
}

func TestConstantsOfAColumnFileAreChecked(t *testing.T) {
	for text, want := range map[string]string{
		"use = constant:school\n":                         "",
		"floor_area [ft2] = constant:\"1,200\"\n":         "",
		"\nuse = constant:\"schol\"\n":                    `line 2: "schol" is not known as a word for use`,
		"floor_area = constant:large\n":                   `line 1: "large" is no number`,
		"wall_u = constant:12\n":                          "line 1: wall U-value 12 W/(m2K) is outside 0.05 to 7",
		"floor_area = constant:-5\n":                      "line 1: heated floor area is negative",
		"year_built = constant:3000\n":                    "line 1: year built 3000 is not in 1000 to 2027",
		"use = constant:unknown\n":                        "line 1: ",
		"use = constant:school\nid = A\nn50 = constant:?": "line 3: ",
		"survey_date = constant:2026-03-01\n":             "line 1: ",
	} {
		err := CheckMapping(mapping(t, text), "2026-12-01")
		if (err == nil) != (want == "") || err != nil && !strings.HasPrefix(err.Error(), want) {
			t.Errorf("%q: %v, want %s", text, err, want)
		}
	}
}

func TestReadingTellsOptionsApart(t *testing.T) {
	seen := map[string]string{}
	for _, c := range []struct {
		what string
		opt  Options
	}{
		{"plain", Options{}},
		{"surveyed", Options{Kind: building.Surveyed}},
		{"use", Options{Mapping: mapping(t, "use = B\n")}},
		{"use of the file", Options{Mapping: mapping(t, "[a.csv]\nuse = B\n")}},
		{"constant", Options{Mapping: mapping(t, "use = constant:B\n")}},
		{"none", Options{Mapping: mapping(t, "use = none\n")}},
	} {
		r := Reading(c.opt, "a.csv")
		if seen[r] != "" {
			t.Errorf("%s reads as %s does: %q", c.what, seen[r], r)
		}
		seen[r] = c.what
	}
	for _, same := range []string{"# more\n\nuse   = B\n", "[b.csv]\nid = A\n[]\nuse = B\n"} {
		if seen[Reading(Options{Mapping: mapping(t, same)}, "a.csv")] != "use" {
			t.Errorf("%q reads otherwise although nothing about the file has changed", same)
		}
	}
	if Reading(Options{Kind: building.Registered, Mapping: mapping(t, "[b.csv]\nuse = B\n")}, "a.csv") != Reading(Options{}, "a.csv") {
		t.Error("a column file about another file changes the reading")
	}
}

func TestRowWhoseSizesAreAllSetAsideIsSetAside(t *testing.T) {
	r, k := load(t, csvFile(t, "id,use,floor area (m2),volume (m3),year built\nA,school,1,,1950\nB,school,900,15000,1950\nC,school,3,4,1950\n"), Options{})
	if r.SetAside != 2 || len(k.records) != 1 || k.records[0].Building != "B" {
		t.Errorf("%d set aside, %v", r.SetAside, r.Findings)
	}
	if s := checks(r, finding.Error); s != "floor-area@2C volume@4D" {
		t.Errorf("errors %s", s)
	}
}

func TestEmptyTableIsSaid(t *testing.T) {
	r, k := load(t, csvFile(t, "id,use,floor area (m2),year built,ventilation\n"), Options{})
	if checks(r, finding.Warning) != "empty-table@0" || len(k.records) > 0 {
		t.Errorf("%v", r.Findings)
	}
}

func TestColumnsOfQuantitiesThatAreNotRead(t *testing.T) {
	r, _ := load(t, csvFile(t, "id,use,floor area (m2),year built,ventilation,Benchmark kWh/m2,Resistance m²K/W,Loop flow (l/s),Rent EUR/m2,Colour\n"+
		"A,school,900,1950,natural,120,2.5,30,7,red\nB,school,900,1950,natural,110,2.0,30,7,red\n"), Options{})
	var got []string
	for _, f := range r.Findings {
		if f.Check == "unread-quantity" {
			got = append(got, f.Column)
		}
	}
	if s := strings.Join(got, " "); s != "F G H" {
		t.Errorf("columns %s: %v", s, r.Findings)
	}
}

func TestDateOfTheFileIsSaidToCount(t *testing.T) {
	const rows = "\nA,school,900,1950,natural\n"
	for text, want := range map[string]bool{
		"id,use,floor area (m2),year built,ventilation" + rows:                                            true,
		"id,use,floor area (m2),year built,ventilation,survey date\nA,school,9,1950,natural,2024-01-02\n": false,
		"Stand: 1.3.2024\nid,use,floor area (m2),year built,ventilation" + rows:                           false,
	} {
		r, _ := load(t, csvFile(t, text), Options{})
		if said := strings.Contains(checks(r, finding.Note), "dated-by-file"); said != want {
			t.Errorf("%q: said %v", text, said)
		}
	}
}

func TestResultsTakenOutOfAWorkbookAreNotRead(t *testing.T) {
	r, k := load(t, csvFile(t, "Building,Use,Floor area (m²),Year built,Ventilation,Default (share),Measure that does most\nB1,school,900,1950,natural,0.6,Heat pump\n"), Options{})
	if len(k.records) > 0 || !r.Own || !strings.Contains(r.Findings[0].Text, "results of this program") {
		t.Errorf("%d records, %v", len(k.records), r.Findings)
	}
}

func TestHeatingAndCarrierTellEachOther(t *testing.T) {
	const head = "id,use,floor area (m2),year built,ventilation,heating system"
	rows := func(words ...string) string {
		s := ""
		for i, w := range words {
			s += "\nB" + string(rune('0'+i)) + ",school,900,1950,natural," + w
		}
		return s
	}
	r, k := load(t, csvFile(t, head+rows("Gas", "Ölheizung", "pompe à chaleur", "Fernwärme", "Zentralheizung", "Holzpellets", "gibberish")), Options{})
	for i, want := range [][2]string{{"", "gas"}, {"boiler", "oil"}, {"heat pump", "electricity"}, {"district heating", "district heat"}, {"boiler", ""}, {"", "wood"}, {"", ""}} {
		id := "B" + string(rune('0'+i))
		system, _ := k.get(id, building.HeatingSystem)
		carrier, _ := k.get(id, building.CarrierField)
		if system.Text != want[0] || carrier.Text != want[1] {
			t.Errorf("%s: %q by %q, want %q", id, system.Text, carrier.Text, want)
		}
	}
	if got := checks(r, finding.Warning); got != "unknown-word@8F" {
		t.Errorf("warnings %s: %v", got, r.Findings)
	}
	if got := k.sheets[0].Columns[building.CarrierField]; got != "F" {
		t.Errorf("the carrier comes from column %q", got)
	}
	// The column of the carrier counts before what the heating system tells.
	_, k = load(t, csvFile(t, head+",energy carrier"+rows("boiler,Gas-Brennwertkessel", "gas boiler,oil", "gas boiler,", ",Fernwärme", ",Strom")), Options{})
	for i, want := range [][2]string{{"boiler", "gas"}, {"boiler", "oil"}, {"boiler", "gas"}, {"district heating", "district heat"}, {"", "electricity"}} {
		id := "B" + string(rune('0'+i))
		system, _ := k.get(id, building.HeatingSystem)
		carrier, _ := k.get(id, building.CarrierField)
		if system.Text != want[0] || carrier.Text != want[1] {
			t.Errorf("%s: %q by %q, want %q", id, system.Text, carrier.Text, want)
		}
	}
}

func TestStoreysAsPlannersWriteThem(t *testing.T) {
	r, k := load(t, csvFile(t, "id,use,floor area (m2),year built,ventilation,storeys\nA,school,900,1950,natural,R+5\nB,school,900,1950,natural,3-4\nC,school,900,1950,natural,2 + DG\nD,school,900,1950,natural,II\nE,school,900,1950,natural,some\n"), Options{})
	for id, want := range map[string]float64{"A": 6, "B": 3.5, "C": 2, "D": 2} {
		if v, _ := k.get(id, building.Storeys); v.Number != want {
			t.Errorf("%s has %v storeys, want %v", id, v.Number, want)
		}
	}
	notes := checks(r, finding.Note)
	if !strings.Contains(notes, "storeys-range@3F") || !strings.Contains(notes, "storeys-attic@4F") || checks(r, finding.Warning) != "not-a-number@6F" {
		t.Errorf("%v", r.Findings)
	}
}
