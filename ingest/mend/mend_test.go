package mend

import (
	"context"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/xuri/excelize/v2"

	"kelvinrow/ingest"
)

func inspect(t *testing.T, path string) *ingest.Report {
	t.Helper()
	r, err := ingest.Inspect(context.Background(), path, ingest.Options{Today: "2026-12-01"})
	if err != nil {
		t.Fatal(err)
	}
	return r
}

func mended(t *testing.T, source string) string {
	t.Helper()
	path, err := Write(context.Background(), source, inspect(t, source), filepath.Dir(source))
	if err != nil {
		t.Fatal(err)
	}
	return path
}

func save(t *testing.T, name, text string) string {
	t.Helper()
	p := filepath.Join(t.TempDir(), name)
	if err := os.WriteFile(p, []byte(text), 0o600); err != nil {
		t.Fatal(err)
	}
	return p
}

func TestTextComesBackInItsLayout(t *testing.T) {
	source := save(t, "register.csv", "Register of Nordhafen;;\n\nid;floor area (m2);use\n1;100;school\n2;-5;\"hall; old\"\n;90;school\n4;large;office\n")
	path := mended(t, source)
	if want := filepath.Join(filepath.Dir(source), "register-to-fix.csv"); path != want {
		t.Fatalf("path %s, want %s", path, want)
	}
	b, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	lines := strings.Split(strings.TrimPrefix(strings.TrimSpace(string(b)), "\ufeff"), "\n")
	if len(lines) != 6 || lines[0] != "Register of Nordhafen;;" || lines[2] != "id;floor area (m2);use;what to fix" || !strings.HasPrefix(lines[3], `2;-5;"hall; old";`) {
		t.Fatalf("%q", lines)
	}
	for _, l := range lines[3:] {
		if strings.HasSuffix(l, ";") {
			t.Errorf("row without a reason: %q", l)
		}
	}
	// Sent back as it is, the same rows are at fault; mended, all are taken.
	r := inspect(t, path)
	if r.SetAside != 3 || r.Used != 0 {
		t.Errorf("sent back: %d set aside, %d used", r.SetAside, r.Used)
	}
	good := strings.NewReplacer("2;-5", "2;5000", "\n;90", "\n3;90", "4;large", "4;400").Replace(string(b))
	r = inspect(t, save(t, "register-to-fix.csv", good))
	if r.SetAside != 0 || r.Used != 3 {
		t.Errorf("mended: %d set aside, %d used, %v", r.SetAside, r.Used, r.Findings)
	}
}

func TestFixedFileKeepsItsNameAndOneColumn(t *testing.T) {
	source := save(t, "register.csv", "id,floor area (m2),use\n2,-5,hall\n")
	first := mended(t, source)
	second := mended(t, first)
	if first != second {
		t.Errorf("second file %s", second)
	}
	b, err := os.ReadFile(second)
	if err != nil {
		t.Fatal(err)
	}
	if n := strings.Count(string(b), WhatToFix); n != 1 {
		t.Errorf("%d columns %q:\n%s", n, WhatToFix, b)
	}
}

func TestNothingToFixWritesNothing(t *testing.T) {
	source := save(t, "register.csv", "id,floor area (m2),use\n2,500,hall\n")
	if path := mended(t, source); path != "" {
		t.Errorf("wrote %s", path)
	}
	if entries, _ := os.ReadDir(filepath.Dir(source)); len(entries) != 1 {
		t.Errorf("files left: %v", entries)
	}
}

func TestChangedSourceIsRefused(t *testing.T) {
	source := save(t, "register.csv", "id,floor area (m2),use\n2,-5,hall\n")
	r := inspect(t, source)
	if err := os.WriteFile(source, []byte("id,floor area (m2),use\n1,1,x\n2,-5,hall\n"), 0o600); err != nil {
		t.Fatal(err)
	}
	if _, err := Write(context.Background(), source, r, filepath.Dir(source)); err == nil {
		t.Error("rows of another file were written")
	}
}

func TestWorkbookComesBackMarked(t *testing.T) {
	f := excelize.NewFile()
	for ref, v := range map[string]any{
		"A1": "Municipal buildings", "A3": "id", "B3": "floor area (m2)", "C3": "use", "D3": "remark",
		"A4": 1, "B4": 100, "C4": "school",
		"A5": 2, "B5": -50, "C5": "hall", "D5": "=not a formula",
		"A6": 3, "B6": 300, "C6": "office",
		"A7": 3, "B7": 310, "C7": "office",
	} {
		if err := f.SetCellValue("Sheet1", ref, v); err != nil {
			t.Fatal(err)
		}
	}
	if err := f.MergeCell("Sheet1", "A1", "D1"); err != nil {
		t.Fatal(err)
	}
	source := filepath.Join(t.TempDir(), "town.xlsx")
	if err := f.SaveAs(source); err != nil {
		t.Fatal(err)
	}
	path := mended(t, source)
	out, err := excelize.OpenFile(path)
	if err != nil {
		t.Fatal(err)
	}
	defer out.Close()
	rows, err := out.GetRows("Sheet1")
	if err != nil {
		t.Fatal(err)
	}
	want := [][]string{{"Municipal buildings"}, nil, {"id", "floor area (m2)", "use", "remark"}, {"2", "-50", "hall", "=not a formula"}, {"3", "310", "office"}}
	if d := cmp.Diff(want, rows); d != "" {
		t.Error(d)
	}
	if formula, _ := out.GetCellFormula("Sheet1", "D4"); formula != "" {
		t.Errorf("text became the formula %q", formula)
	}
	comments, err := out.GetComments("Sheet1")
	if err != nil {
		t.Fatal(err)
	}
	var at []string
	for _, c := range comments {
		at = append(at, c.Cell)
		style, err := out.GetCellStyle("Sheet1", c.Cell)
		if err != nil || style == 0 {
			t.Errorf("%s is not coloured (%v)", c.Cell, err)
		}
	}
	if d := cmp.Diff([]string{"B4", "A5"}, at); d != "" {
		t.Error(d)
	}
	// Mended and sent back, it loads.
	for ref, v := range map[string]any{"B4": 50, "A5": 4} {
		if err := out.SetCellValue("Sheet1", ref, v); err != nil {
			t.Fatal(err)
		}
	}
	if err := out.SaveAs(path); err != nil {
		t.Fatal(err)
	}
	if r := inspect(t, path); r.Used != 2 || r.SetAside != 0 {
		t.Errorf("mended: %d used, %d set aside, %v", r.Used, r.SetAside, r.Findings)
	}
}
