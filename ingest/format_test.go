package ingest

import (
	"fmt"
	"math"
	"path/filepath"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/xuri/excelize/v2"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/finding"
)

func TestColumnsThatAreMissedAreSaid(t *testing.T) {
	for _, tc := range []struct{ name, head, want string }{
		{"None", "id,floor area (m2),use,year built,ventilation", ""},
		{"Use", "id,floor area (m2),year built,ventilation", "warning no-use"},
		{"Year", "id,floor area (m2),use,ventilation", "warning no-year"},
		{"RoofYearWillDo", "id,floor area (m2),use,year roof renewed,ventilation", ""},
		{"Ventilation", "id,volume (m3),use,year built", "warning no-ventilation"},
		{"SizeOfAnUpdate", "id,year roof renewed", "note no-size"},
		{"SizeByAnotherName", "id,year roof renewed,Grösse", "warning no-size C"},
	} {
		t.Run(tc.name, func(t *testing.T) {
			t.Parallel()
			cells := strings.NewReplacer("id", "B1", "floor area (m2)", "900", "volume (m3)", "3000", "use", "school", "year built", "1950", "year roof renewed", "1990", "ventilation", "natural", "Grösse", "1200")
			r, k := load(t, csvFile(t, tc.head+"\n"+cells.Replace(tc.head)+"\n"), Options{})
			if len(k.records) != 1 {
				t.Fatalf("the row is not read: %v", r.Findings)
			}
			var got []string
			for _, f := range r.Findings {
				if f.Row == 0 && f.Check != "dated-by-file" {
					got = append(got, strings.TrimSpace(fmt.Sprintf("%s %s %s", f.Severity, f.Check, f.Column)))
				}
			}
			if s := strings.Join(got, ", "); s != tc.want {
				t.Errorf("%q, want %q", s, tc.want)
			}
		})
	}
}

// A building comes once for each year of its meter, in any order; the reading
// of the latest year counts.
func TestMeteredYearsAreVersions(t *testing.T) {
	for name, rows := range map[string]string{
		"Rising":  "1,100,9000,2020\n1,100,9500,2021\n1,100,9900,2022\n",
		"Falling": "1,100,9900,2022\n1,100,9500,2021\n1,100,9000,2020\n",
		"Mixed":   "1,100,9500,2021\n1,100,9900,2022\n1,100,9000,2020\n",
	} {
		t.Run(name, func(t *testing.T) {
			t.Parallel()
			r, k := load(t, csvFile(t, "id,floor area (m2),metered heat (kWh),metered year\n"+rows), Options{})
			if r.Used != 3 || len(k.records) != 3 {
				t.Fatalf("%d of 3 rows used: %v", r.Used, r.Findings)
			}
			b := building.Merge("1", k.records)
			if heat, _ := b.Number(building.MeteredHeat); heat != 9900 {
				t.Errorf("metered heat %v, want that of 2022", heat)
			}
			if year, _ := b.Number(building.MeteredYear); year != 2022 {
				t.Errorf("metered year %v", year)
			}
		})
	}
	r, _ := load(t, csvFile(t, "id,floor area (m2),metered heat (kWh),metered year\n1,100,9000,2020\n1,100,9500,2021\n1,120,9500,2021\n1,100,9900,\n"), Options{})
	if got := checks(r, finding.Error); got != "duplicate-id@4A duplicate-id@5A" {
		t.Errorf("errors %q", got)
	}
	if !strings.Contains(r.Findings[len(r.Findings)-1].Text, "row 2") {
		t.Errorf("the first row is not named: %v", r.Findings)
	}
}

func TestUseTellsAttachment(t *testing.T) {
	_, k := load(t, csvFile(t, "id,use,floor area (m2)\n1,end of terrace,90\n2,Reihenmittelhaus,90\n3,Reihenhaus,90\n4,corner shop,90\n5,Doppelhaushälfte,90\n"), Options{})
	for id, want := range map[string]string{"1": "one side shared", "2": "two sides shared", "3": "", "4": "", "5": "one side shared"} {
		if v, _ := k.get(id, building.AttachmentField); v.Text != want {
			t.Errorf("building %s: %q, want %q", id, v.Text, want)
		}
	}
	if got := k.sheets[0].Columns[building.AttachmentField]; got != "B" {
		t.Errorf("attachment from column %q", got)
	}
}

func TestSharesAndYearsHoweverTheyAreFormatted(t *testing.T) {
	f := excelize.NewFile()
	must := func(err error) {
		t.Helper()
		if err != nil {
			t.Fatal(err)
		}
	}
	percent, err := f.NewStyle(&excelize.Style{NumFmt: 9})
	must(err)
	day, err := f.NewStyle(&excelize.Style{NumFmt: 14})
	must(err)
	for i, row := range [][]any{
		{"id", "floor area (m2)", "boiler efficiency (%)", "year built", "windows renewed"},
		{"1", 100, 0.92, 1965, 37987},  // shown as 92 %, in a cell for dates, 1 January 2004 without its format
		{"2", 100, 92, 1828, 36892},    // 1 January 1905 as the day it is, 1 January 2001
		{"3", 100, "92 %", 1971, 2003}, // a year among the serials
	} {
		must(f.SetSheetRow("Sheet1", fmt.Sprint("A", i+1), &row))
	}
	must(f.SetCellStyle("Sheet1", "C2", "C2", percent))
	must(f.SetCellStyle("Sheet1", "D2", "D3", day))
	p := filepath.Join(t.TempDir(), "a.xlsx")
	must(f.SaveAs(p))
	r, k := load(t, p, Options{})
	for id, want := range map[string][2]float64{"1": {1965, 2004}, "2": {1905, 2001}, "3": {1971, 2003}} {
		if v, _ := k.get(id, building.Efficiency); v.Number != 0.92 {
			t.Errorf("building %s: efficiency %v", id, v.Number)
		}
		built, _ := k.get(id, building.YearBuilt)
		windows, _ := k.get(id, building.YearWindows)
		if built.Number != want[0] || windows.Number != want[1] {
			t.Errorf("building %s: built %v, windows %v, want %v", id, built.Number, windows.Number, want)
		}
	}
	notes := checks(r, finding.Note)
	for _, c := range []string{"year-as-date@2D", "serial-year@2E"} {
		if !strings.Contains(notes, c) {
			t.Errorf("nothing said of %s: %s", c, notes)
		}
	}
	_, k = load(t, csvFile(t, "id,floor area (m2),heat recovery (%)\n1,100,85\n2,100,0.85\n3,100,85 %\n"), Options{})
	for _, id := range []string{"1", "2", "3"} {
		if v, _ := k.get(id, building.HeatRecovery); math.Abs(v.Number-0.85) > 1e-12 {
			t.Errorf("building %s: heat recovery %v", id, v.Number)
		}
	}
}

func TestCellarsByYesAndNo(t *testing.T) {
	_, k := load(t, csvFile(t, "id,Keller,floor area (m2)\n1,ja,90\n2,nein,90\n3,beheizt,90\n4,teilweise,90\n"), Options{})
	for id, want := range map[string]string{"1": "unheated cellar", "2": "slab on ground", "3": "heated basement", "4": ""} {
		if v, _ := k.get(id, building.FloorType); v.Text != want {
			t.Errorf("building %s: %q, want %q", id, v.Text, want)
		}
	}
}

// A use merged over three buildings, with a blank row between, is that of all;
// an area merged over two is not.
func TestMergedCellsRunDown(t *testing.T) {
	f := excelize.NewFile()
	for i, row := range [][]any{
		{"id", "use", "floor area (m2)", "town"}, {"1", "school", 100, "Norrvik"}, {"2", nil, nil, "Sundby"}, {}, {"3", nil, 70, nil}, {"4", nil, 80, "Ek"},
	} {
		if err := f.SetSheetRow("Sheet1", fmt.Sprint("A", i+1), &row); err != nil {
			t.Fatal(err)
		}
	}
	for _, m := range [][2]string{{"B2", "B5"}, {"C2", "C3"}, {"D3", "D5"}} {
		if err := f.MergeCell("Sheet1", m[0], m[1]); err != nil {
			t.Fatal(err)
		}
	}
	p := filepath.Join(t.TempDir(), "a.xlsx")
	if err := f.SaveAs(p); err != nil {
		t.Fatal(err)
	}
	_, k := load(t, p, Options{})
	got := map[string]string{}
	for _, r := range k.records {
		for _, v := range r.Values {
			switch v.Field {
			case building.UseField, building.Town:
				got[r.Building] += v.Text + " "
			case building.FloorArea:
				got[r.Building] += fmt.Sprint(v.Number, " ")
			}
		}
	}
	if d := cmp.Diff(map[string]string{"1": "Norrvik school 100 ", "2": "Sundby school ", "3": "Sundby school 70 ", "4": "Ek 80 "}, got); d != "" {
		t.Error(d)
	}
}
