package form

import (
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest"
	"kelvinrow/ingest/finding"
)

// filled fills in the form as a surveyor would.
func filled(t *testing.T) *book {
	b := open(t, written(t, stock()))
	b.put("A-1", "survey_date", "2026-10-05")
	b.put("A-1", "surveyor", "R. Brand")
	b.put("A-1", "floor_area", 840) // corrected
	b.put("A-1", "n50", 4.2)
	b.put("A-1", "wall_construction", "cavity brick") // corrected
	b.put("A-1", "metered_heat", 98000)
	b.put("A-1", "metered_year", 2025)
	b.put("A-1", "efficiency", 92)
	b.put("A-1", "year_windows", "1988-90")
	b.put("A-1", "facade_stays", "yes")
	b.put("A-1", "remarks", "mould in the north stair")
	return b
}

func checkFilled(t *testing.T, s *taken) {
	t.Helper()
	got := s.got("A-1")
	var keys []string
	for k := range got {
		keys = append(keys, k)
	}
	slices.Sort(keys)
	want := []string{"efficiency", "facade_stays", "floor_area", "metered_heat", "metered_year", "n50", "surveyor", "wall_construction", "year_windows"}
	if !slices.Equal(keys, want) {
		t.Errorf("came back:\n%v\nwant\n%v\n%v", keys, want, s.Findings)
	}
	for key, number := range map[string]float64{"floor_area": 840, "n50": 4.2, "metered_heat": 98000, "efficiency": 0.92, "facade_stays": 1} {
		kind := building.Surveyed
		if key == "metered_heat" {
			kind = building.Metered
		}
		if v := got[key]; v.Kind != kind || v.Number < number*(1-1e-12) || v.Number > number*(1+1e-12) {
			t.Errorf("%s: %+v, want %g %s", key, v, number, kind)
		}
	}
	if v := got["wall_construction"]; v.Text != "cavity brick" || v.Kind != building.Surveyed {
		t.Errorf("wall construction %+v", v)
	}
	if v := got["year_windows"]; v.Low != 1988 || v.High != 1990 {
		t.Errorf("year of the windows %+v", v)
	}
	if len(s.records) != 1 || s.records[0].SurveyDate != "2026-10-05" {
		t.Errorf("%d records, %+v", len(s.records), s.records)
	}
	if r := s.said("survey-remark"); len(r) != 1 || !strings.Contains(r[0].Text, "mould in the north stair") || r[0].Building != "A-1" {
		t.Errorf("remarks: %v", r)
	}
	if s.SetAside != 0 || s.Used != 1 {
		t.Errorf("%d used, %d set aside: %v", s.Used, s.SetAside, s.Findings)
	}
}

func TestWhatWasFilledInComesBack(t *testing.T) {
	t.Parallel()
	checkFilled(t, read(t, filled(t).saved("survey.xlsx")))
}

// The same through another program's hands, in its own format and back.
func TestOfficeBringsItBack(t *testing.T) {
	t.Parallel()
	if _, err := exec.LookPath("soffice"); err != nil {
		if os.Getenv("KELVINROW_WITHOUT_OFFICE") == "1" {
			t.Skip("LibreOffice is not installed and KELVINROW_WITHOUT_OFFICE=1 is set")
		}
		t.Fatal("LibreOffice (soffice) is not installed; install it, or set KELVINROW_WITHOUT_OFFICE=1 to leave this test out")
	}
	dir := t.TempDir()
	convert := func(from, to string) string {
		cmd := exec.CommandContext(t.Context(), "soffice", "-env:UserInstallation=file://"+filepath.Join(dir, "profile"), "--headless", "--norestore", "--convert-to", to, "--outdir", filepath.Join(dir, to), from)
		cmd.Env = append(os.Environ(), "HOME="+dir)
		if out, err := cmd.CombinedOutput(); err != nil {
			t.Fatalf("soffice: %v\n%s", err, out)
		}
		return filepath.Join(dir, to, strings.TrimSuffix(filepath.Base(from), filepath.Ext(from))+"."+to)
	}
	back := convert(convert(filled(t).saved("survey.xlsx"), "ods"), "xlsx")
	if !ingest.IsForm(back) {
		t.Error("no form by its list of sheets")
	}
	checkFilled(t, read(t, back))
}

// Sorted and thinned out, without the notes.
func TestSortedAndDeletedRows(t *testing.T) {
	t.Parallel()
	b := filled(t)
	if err := b.DuplicateRowTo(ingest.FormSheet, firstRow, firstRow+3); err != nil {
		t.Fatal(err)
	}
	for range 2 { // the first building stands last, the second is gone
		if err := b.RemoveRow(ingest.FormSheet, firstRow); err != nil {
			t.Fatal(err)
		}
	}
	comments, err := b.GetComments(ingest.FormSheet)
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range comments {
		if err := b.DeleteComment(ingest.FormSheet, c.Cell); err != nil {
			t.Fatal(err)
		}
	}
	checkFilled(t, read(t, b.saved("survey.xlsx")))
}

func TestDateAndSurveyorAboveTheTable(t *testing.T) {
	t.Parallel()
	b := open(t, written(t, stock()))
	b.put("A-1", "n50", 3)
	b.put("00017", "n50", 4)
	b.put("00017", "survey_date", "2026-11-02")
	if s := read(t, b.saved("survey.xlsx")); s.SetAside != 2 || len(s.records) != 0 || len(s.said("no-survey-date")) != 1 || len(s.said("no-surveyor")) != 1 {
		t.Errorf("rows without date or surveyor: %d set aside, %v", s.SetAside, s.Findings)
	}
	for cell, v := range map[string]any{"C4": 46300, "F4": "M. Ostrand"} { // 2026-10-05 as a day serial
		if err := b.SetCellValue(ingest.FormSheet, cell, v); err != nil {
			t.Fatal(err)
		}
	}
	s := read(t, b.saved("survey.xlsx"))
	if s.SetAside != 0 || len(s.records) != 2 || s.records[0].SurveyDate != "2026-10-05" || s.records[1].SurveyDate != "2026-11-02" {
		t.Errorf("%d set aside, %+v, %v", s.SetAside, s.records, s.Findings)
	}
	if v := s.got("A-1")["surveyor"]; v.Text != "M. Ostrand" {
		t.Errorf("surveyor %+v", v)
	}
}

func TestBadCellsAreToldAndGoodOnesLoad(t *testing.T) {
	t.Parallel()
	b := open(t, written(t, stock()))
	for _, id := range []string{"A-1", "00017", "=1+1"} {
		b.put(id, "survey_date", "2026-10-05")
		b.put(id, "surveyor", "R. Brand")
	}
	b.put("A-1", "n50", 400) // out of bounds
	b.put("A-1", "floor_area", "large")
	b.put("A-1", "roof_u", 0.3)
	b.put("00017", "wall_u", "thick")    // nothing else
	b.put("=1+1", "glazing", "bullseye") // no such word
	b.put("=1+1", "window_u", 2.8)
	s := read(t, b.saved("survey.xlsx"))
	if s.Used != 2 || s.SetAside != 1 {
		t.Errorf("%d used, %d set aside", s.Used, s.SetAside)
	}
	for id, want := range map[string]string{"A-1": "roof_u", "=1+1": "window_u"} {
		if got := s.got(id); len(got) != 2 || got[want].Kind != building.Surveyed {
			t.Errorf("%s: %v", id, got)
		}
	}
	for check, cell := range map[string]string{"n50": b.at("A-1", "n50"), "unknown-word": b.at("=1+1", "glazing")} {
		f := s.said(check)
		if len(f) != 1 || f[0].Sheet != ingest.FormSheet || cell != f[0].Column+itoa(f[0].Row) || f[0].Raw == "" {
			t.Errorf("%s: %v, want it at %s", check, f, cell)
		}
	}
	if f := s.said("not-a-number"); len(f) != 2 || f[0].Severity != finding.Warning {
		t.Errorf("a size that is no number: %v", f)
	}
	if f := s.said("nothing-usable"); len(f) != 1 || f[0].Building != "00017" {
		t.Errorf("a row of nothing usable: %v", f)
	}
}

func itoa(n int) string { return strings.TrimPrefix(at(0, n), "A") }

func TestEmptiedAndForeignRows(t *testing.T) {
	t.Parallel()
	b := filled(t)
	if err := b.SetCellValue(ingest.FormSheet, b.at("A-1", "storeys"), nil); err != nil {
		t.Fatal(err)
	}
	for col, v := range map[string]any{"A": "Z-9", "E": "2026-10-05", "F": "R. Brand", "G": 300} {
		if err := b.SetCellValue(ingest.FormSheet, col+itoa(firstRow+3), v); err != nil {
			t.Fatal(err)
		}
	}
	s := read(t, b.saved("survey.xlsx"))
	if f := s.said("form-cleared"); len(f) != 1 || f[0].Severity != finding.Note || f[0].Field != "storeys" {
		t.Errorf("emptied: %v", f)
	}
	if f := s.said("not-on-form"); len(f) != 1 || f[0].Building != "Z-9" {
		t.Errorf("a building the form is not for: %v", f)
	}
	if s.Used != 1 || s.SetAside != 1 || len(s.got("Z-9")) != 0 {
		t.Errorf("%d used, %d set aside", s.Used, s.SetAside)
	}
}

func TestFormsThatAreNotTaken(t *testing.T) {
	t.Parallel()
	path := filled(t).saved("survey.xlsx")
	r, err := ingest.Inspect(t.Context(), path, ingest.Options{Portfolio: "south"})
	if err != nil {
		t.Fatal(err)
	}
	if len(r.Findings) != 1 || r.Findings[0].Check != "form-portfolio" || r.Used != 0 {
		t.Errorf("into another portfolio: %v", r.Findings)
	}
	// Without the record of what was written, everything would count as surveyed.
	b := filled(t)
	if err := b.SetSheetVisible(ingest.FormRecord, true); err != nil {
		t.Fatal(err)
	}
	if err := b.DeleteSheet(ingest.FormRecord); err != nil {
		t.Fatal(err)
	}
	if s := read(t, b.saved("survey.xlsx")); s.Used != 0 || len(s.said("form-alone")) != 1 {
		t.Errorf("without its record: %d rows used, %v", s.Used, s.Findings)
	}
	b = filled(t)
	if err := b.SetCellValue(ingest.FormRecord, "B1", "9"); err != nil {
		t.Fatal(err)
	}
	if s := read(t, b.saved("survey.xlsx")); s.Used != 0 || len(s.said("form-version")) != 1 {
		t.Errorf("of another version: %d rows used, %v", s.Used, s.Findings)
	}
}
