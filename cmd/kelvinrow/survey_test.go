package main

import (
	"encoding/json"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"
)

// surveyed is the part of an explanation that says where inputs come from.
type surveyed struct {
	Inputs []struct {
		Field  string  `json:"field"`
		Value  any     `json:"value"`
		Kind   string  `json:"kind"`
		Source *origin `json:"source"`
	} `json:"inputs"`
}

type origin struct {
	File string `json:"file"`
	Date string `json:"date"`
}

func (u *user) inputs(id string) map[string]string {
	u.t.Helper()
	out, err := u.command("explain", id, "--json").Output()
	if err != nil {
		u.t.Fatal(err)
	}
	var e surveyed
	if err := json.Unmarshal(out, &e); err != nil {
		u.t.Fatal(err)
	}
	kinds := map[string]string{}
	for _, in := range e.Inputs {
		kinds[in.Field] = in.Kind
		if in.Source != nil && in.Kind == "surveyed" {
			kinds[in.Field] += " " + in.Source.File + " " + in.Source.Date
		}
	}
	return kinds
}

// A form is written, filled in, opened and saved by another program, and loaded.
func TestSurveyThereAndBack(t *testing.T) {
	t.Parallel()
	u := newUser(t)
	u.write("register.csv", good)
	u.must(0, "screen", "register.csv", "-o", "ranked.xlsx")
	if out := u.must(0, "survey", "--buildings", "A-1", "-o", "survey.xlsx"); !strings.Contains(out, "The 1 building named one by one.") {
		t.Errorf("survey: %s", out)
	}
	before := u.inputs("A-1")
	if strings.HasPrefix(before["floor_area"], "surveyed") {
		t.Fatalf("the floor area is %s before any survey", before["floor_area"])
	}
	path := filepath.Join(u.dir, "survey.xlsx")
	f, err := excelize.OpenFile(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rows, err := f.GetRows("Survey")
	if err != nil {
		t.Fatal(err)
	}
	fill := map[string]any{"Survey date": "2026-05-06", "Surveyor": "R. Brand", "Airtightness n50 (1/h)": 7.5, "Glazing": "triple"}
	for head, v := range fill {
		row := slices.IndexFunc(rows, func(r []string) bool { return len(r) > 0 && r[0] == "Building id" })
		col := slices.Index(rows[row], head)
		if col < 0 {
			t.Fatalf("no column %q", head)
		}
		at, err := excelize.CoordinatesToCellName(col+1, row+2)
		if err == nil {
			err = f.SetCellValue("Survey", at, v)
		}
		if err != nil {
			t.Fatal(err)
		}
	}
	if err := f.Save(); err != nil {
		t.Fatal(err)
	}
	back := filepath.Join(office(t, path, "xlsx"), "survey.xlsx")
	content, err := os.ReadFile(back)
	if err != nil {
		t.Fatal(err)
	}
	u.write("survey.xlsx", string(content))
	if out := u.must(0, "inspect", "survey.xlsx"); !strings.Contains(out, "1 used") {
		t.Errorf("inspect: %s", out)
	}
	u.must(0, "load", "survey.xlsx")
	after := u.inputs("A-1")
	for field, want := range map[string]string{"n50": "surveyed survey.xlsx 2026-05-06", "glazing": "surveyed survey.xlsx 2026-05-06", "floor_area": before["floor_area"], "year_built": before["year_built"]} {
		if after[field] != want {
			t.Errorf("%s is %q, want %q", field, after[field], want)
		}
	}
	if out := u.must(0, "load", "survey.xlsx"); !strings.Contains(out, "changed nothing") {
		t.Errorf("loaded again: %s", out)
	}
	if out := u.must(0, "load", "--list"); !strings.Contains(out, "surveyed") {
		t.Errorf("--list: %s", out)
	}
	u.stopped()
}

func TestSurveyUsage(t *testing.T) {
	t.Parallel()
	u := newUser(t)
	for _, wrong := range [][]string{
		{"-o", "survey.csv"}, {"-o", "nowhere/survey.xlsx"}, {"--buildings", "A", "--district", "B"}, {"--top", "3"}, {"--measure", "m", "--budget", "5"},
		{"--count", "0"}, {"--budget", "-1"}, {"--buildings", " , "}, {"--buildings", "missing.txt"}, {"extra"},
	} {
		u.must(2, append([]string{"survey"}, wrong...)...)
	}
	u.write("register.csv", good)
	u.must(0, "load", "register.csv")
	u.must(1, "survey") // nothing was ranked
	u.write("ids.txt", "# to see\nA-1\n\nA-1\n")
	if out := u.must(0, "survey", "--buildings", "ids.txt", "--json"); !strings.Contains(out, `"buildings": [
    "A-1"
  ]`) {
		t.Errorf("--json: %s", out)
	}
	u.must(1, "survey", "--buildings", "A-1,Z-9")
	u.stopped()
}
