package mend

import (
	"context"
	"fmt"
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
	want := [][]string{{"Municipal buildings"}, nil, {"id", "floor area (m2)", "use", "remark"}, {"2", "-50", "hall", "=not a formula"}, {"3", "300", "office"}, {"3", "310", "office"}}
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
	if d := cmp.Diff([]string{"B4", "A5", "A6"}, at); d != "" {
		t.Error(d)
	}
	// Sent back as it is, the same rows are at fault.
	if r := inspect(t, path); r.Used != 1 || r.SetAside != 2 {
		t.Errorf("sent back: %d used, %d set aside, %v", r.Used, r.SetAside, r.Findings)
	}
	// Mended and sent back, it loads.
	for ref, v := range map[string]any{"B4": 50, "A6": 4} {
		if err := out.SetCellValue("Sheet1", ref, v); err != nil {
			t.Fatal(err)
		}
	}
	if err := out.SaveAs(path); err != nil {
		t.Fatal(err)
	}
	if r := inspect(t, path); r.Used != 3 || r.SetAside != 0 {
		t.Errorf("mended: %d used, %d set aside, %v", r.Used, r.SetAside, r.Findings)
	}
}

func TestManyFaultsAreToldInAColumn(t *testing.T) {
	f := excelize.NewFile()
	w, err := f.NewStreamWriter("Sheet1")
	if err != nil {
		t.Fatal(err)
	}
	for i := 1; i <= maxComments+3; i++ {
		row := []any{i, -5, "school"}
		if i == 1 {
			row = []any{"id", "floor area (m2)", "use"}
		}
		if err := w.SetRow(fmt.Sprint("A", i), row); err != nil {
			t.Fatal(err)
		}
	}
	if err := w.Flush(); err != nil {
		t.Fatal(err)
	}
	source := filepath.Join(t.TempDir(), "town.xlsx")
	if err := f.SaveAs(source); err != nil {
		t.Fatal(err)
	}
	path := mended(t, source)
	path = mended(t, path) // and once more from what came back
	out, err := excelize.OpenFile(path)
	if err != nil {
		t.Fatal(err)
	}
	defer out.Close()
	rows, err := out.GetRows("Sheet1")
	if err != nil {
		t.Fatal(err)
	}
	if d := cmp.Diff([]string{"id", "floor area (m2)", "use", WhatToFix}, rows[0]); d != "" {
		t.Error(d)
	}
	if last := rows[len(rows)-1]; len(rows) != maxComments+3 || len(last) != 4 || !strings.Contains(last[3], "negative") || len(rows[1]) != 3 {
		t.Errorf("%d rows, the last %q, the first %q", len(rows), last, rows[1])
	}
}

// A register of several years without the column that tells the year: the rows
// that come again are set aside, and again when they are sent back as they are.
func TestRegisterWithoutItsYearsIsFoundWrongAgain(t *testing.T) {
	b, err := os.ReadFile("../../../shared/data/registers/city-a-energy-benchmarking.csv")
	if err != nil {
		t.Skip("no folder ../shared/data")
	}
	lines := strings.SplitAfter(strings.TrimPrefix(string(b), "\ufeff"), "\n")[:3000]
	for i, l := range lines {
		_, lines[i], _ = strings.Cut(l, ",")
	}
	source := save(t, "register.csv", strings.Join(lines, ""))
	r := inspect(t, source)
	if r.SetAside < 100 {
		t.Fatalf("%d rows set aside: the years do not repeat in these lines", r.SetAside)
	}
	if again := inspect(t, mended(t, source)); again.SetAside != r.SetAside {
		t.Errorf("%d rows set aside, %d when sent back", r.SetAside, again.SetAside)
	}
}
