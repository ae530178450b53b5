package assumption

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/google/go-cmp/cmp/cmpopts"
	"github.com/xuri/excelize/v2"

	"kelvinrow/estimate/archetype"
	"kelvinrow/estimate/building"
	"kelvinrow/estimate/climate"
	"kelvinrow/ingest/finding"
	"kelvinrow/ingest/sheet"
)

func starter(t *testing.T) *archetype.Set {
	t.Helper()
	s, err := archetype.Starter()
	if err != nil {
		t.Fatal(err)
	}
	if s.Climates, err = climate.Starter(); err != nil {
		t.Fatal(err)
	}
	return s
}

func written(t *testing.T, s *archetype.Set) string {
	t.Helper()
	var b bytes.Buffer
	if err := Write(&b, s); err != nil {
		t.Fatal(err)
	}
	path := filepath.Join(t.TempDir(), "assumptions.xlsx")
	if err := os.WriteFile(path, b.Bytes(), 0o600); err != nil {
		t.Fatal(err)
	}
	return path
}

func taken(t *testing.T, path string) *archetype.Set {
	t.Helper()
	s, findings, err := Read(context.Background(), path)
	if err != nil {
		t.Fatalf("%v: %v", err, findings)
	}
	return s
}

// What is written comes back the same to the last bit, and the version with it.
func TestRoundTripIsIdentical(t *testing.T) {
	t.Parallel()
	s := starter(t)
	s.Rules[3].Notes, s.Carriers[0].Notes, s.Buildups[2].Notes = "=not a formula", "seen 2026", "as built"
	got := taken(t, written(t, s))
	if d := cmp.Diff(s, got, cmpopts.IgnoreUnexported(archetype.Set{})); d != "" {
		t.Errorf("the round trip changed:\n%s", d)
	}
	if got.Hash() != s.Hash() {
		t.Error("same content, another version")
	}
}

// edit changes cells of a workbook.
func edit(t *testing.T, path string, change func(f *excelize.File)) string {
	t.Helper()
	f, err := excelize.OpenFile(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	change(f)
	out := filepath.Join(t.TempDir(), "edited.xlsx")
	if err := f.SaveAs(out); err != nil {
		t.Fatal(err)
	}
	return out
}

// other returns another value of the kind of a column than the one it holds.
func other[T any](c *column[T], old any) any {
	switch v := old.(type) {
	case float64:
		return v*1.01 + 0.001
	case string:
		if c.words == nil {
			return v + "x"
		}
		for _, w := range c.words {
			if w != v {
				return w
			}
		}
	}
	if c.words != nil {
		return c.words[0]
	}
	return "x"
}

// everyColumn changes one cell of every column of a table and expects another
// version, or a refusal that names the cell's sheet.
func everyColumn[T any](t *testing.T, path string, t0 *table[T], rows []T, before string) {
	t.Helper()
	for k := range t0.columns {
		c := &t0.columns[k]
		i := len(rows) / 2
		for r := range rows { // the first row that has something there
			if c.get(&rows[r]) != nil {
				i = r
				break
			}
		}
		old := c.get(&rows[i])
		cell := fmt.Sprintf("%s%d", sheet.ColumnLetters(k), headerRow+1+i)
		v := other(c, old)
		if f, ok := old.(float64); ok && (c.head == "Years from" || c.head == "Years to") {
			v = f - 1
		} else if old == nil && c.words == nil && c.width < 14 && c.head != "Region" {
			v = 1.5
		}
		changed := edit(t, path, func(f *excelize.File) {
			if err := f.SetCellValue(t0.sheet, cell, v); err != nil {
				t.Fatal(err)
			}
		})
		got, findings, err := Read(context.Background(), changed)
		switch {
		case c.head == "What it is": // for reading only
		case errors.Is(err, ErrRefused):
			// A changed name breaks what refers to it: then the old name is said.
			if all := fmt.Sprint(findings); !strings.Contains(all, t0.sheet) && !strings.Contains(all, fmt.Sprint(old)) {
				t.Errorf("%s, %s: refused without a word of the sheet: %v", t0.sheet, c.head, findings)
			}
		case err != nil:
			t.Errorf("%s, %s: %v", t0.sheet, c.head, err)
		case got.Hash() == before:
			t.Errorf("%s, %s: %v instead of %v changes nothing", t0.sheet, c.head, v, old)
		}
	}
}

func TestEveryColumnCounts(t *testing.T) {
	t.Parallel()
	s := starter(t)
	// A small set is not to be had: holes would be refused. One write, many edits.
	s.Words = []archetype.OwnWord{{Field: "wall_construction", Written: "Bruchstein 60er", Word: "stone", Notes: "north office"}}
	path, before := written(t, s), s.Hash()
	t.Run("economics", func(t *testing.T) {
		t.Parallel()
		everyColumn(t, path, &economicsTable, []archetype.Economics{s.Economics}, before)
	})
	t.Run("carriers", func(t *testing.T) { t.Parallel(); everyColumn(t, path, &carriersTable, s.Carriers, before) })
	t.Run("uses", func(t *testing.T) { t.Parallel(); everyColumn(t, path, &usesTable, s.Uses[:], before) })
	t.Run("measures", func(t *testing.T) { t.Parallel(); everyColumn(t, path, &measuresTable, s.Measures, before) })
	t.Run("details", func(t *testing.T) {
		t.Parallel()
		everyColumn(t, path, &detailsTable, detailRows(s.Measures), before)
	})
	t.Run("climates", func(t *testing.T) {
		t.Parallel()
		everyColumn(t, path, &climatesTable, climateRows(s.Climates), before)
	})
	t.Run("materials", func(t *testing.T) { t.Parallel(); everyColumn(t, path, &materialsTable, s.Materials, before) })
	t.Run("buildups", func(t *testing.T) { t.Parallel(); everyColumn(t, path, &buildupsTable, layerRows(s), before) })
	t.Run("rules", func(t *testing.T) { t.Parallel(); everyColumn(t, path, &rulesTable, s.Rules, before) })
	t.Run("words", func(t *testing.T) { t.Parallel(); everyColumn(t, path, &wordsTable, s.Words, before) })
	t.Run("surveys", func(t *testing.T) { t.Parallel(); everyColumn(t, path, &surveysTable, s.Surveys, before) })
}

// An edited material reaches the layers that name it.
func TestMaterialsReachLayers(t *testing.T) {
	t.Parallel()
	s := starter(t)
	i := 0
	for s.Materials[i].Name != "softwood" {
		i++
	}
	got := taken(t, edit(t, written(t, s), func(f *excelize.File) {
		_ = f.SetCellValue(materialsTable.sheet, fmt.Sprintf("B%d", headerRow+1+i), 0.5)
	}))
	layers := 0
	for _, b := range got.Buildups {
		for _, l := range b.Layers {
			if l.Name == "softwood" {
				layers++
				if l.ConductivityWMK != 0.5 {
					t.Errorf("%s: softwood at %g W/(mK)", b.Name, l.ConductivityWMK)
				}
			}
			if l.BridgeName == "softwood" && l.BridgeConductivityWMK != 0.5 {
				t.Errorf("%s: second material softwood at %g W/(mK)", b.Name, l.BridgeConductivityWMK)
			}
		}
	}
	if layers == 0 {
		t.Error("no layer of softwood")
	}
}

// What is wrong is named with its place, all at once, and nothing is taken.
func TestWrongsAreNamedAtOnce(t *testing.T) {
	t.Parallel()
	s := starter(t)
	row := func(n int) int { return headerRow + 1 + n }
	rule := func(is func(*archetype.Rule) bool) int {
		for i := range s.Rules {
			if is(&s.Rules[i]) {
				return row(i)
			}
		}
		t.Fatal("no such rule")
		return 0
	}
	n50 := rule(func(r *archetype.Rule) bool { return r.Property == archetype.N50Rule })
	word := rule(func(r *archetype.Rule) bool { return r.Property == archetype.GlazingWord })
	door := rule(func(r *archetype.Rule) bool { return r.Property == archetype.DoorUValue })
	set := func(f *excelize.File, sheet, cell string, v any) {
		if err := f.SetCellValue(sheet, cell, v); err != nil {
			t.Fatal(err)
		}
	}
	path := edit(t, written(t, s), func(f *excelize.File) {
		set(f, "Energy carriers", "B4", nil)                            // a price missing
		set(f, "Energy carriers", "B5", "cheap")                        // no number
		set(f, "Measures", "J4", -3)                                    // negative life
		set(f, "Measures", "D5", 0)                                     // costs nothing
		set(f, "Measures", "E5", 0)                                     //
		set(f, "Default rules", fmt.Sprintf("I%d", n50), 400)           // out of bounds, low <= typical <= high
		set(f, "Default rules", fmt.Sprintf("L%d", word), "lead glass") // unknown word
		set(f, "Default rules", fmt.Sprintf("I%d", door), nil)          // empty number
		if err := f.RemoveRow("Climates", 6); err != nil {
			t.Fatal(err)
		} // eleven months
		set(f, "Build-ups", "D5", "unobtainium")
		set(f, "Economics", "B4", "3 %")
		set(f, "Measure details", "C4", 77)
	})
	got, findings, err := Read(context.Background(), path)
	if !errors.Is(err, ErrRefused) || got != nil {
		t.Fatalf("%v, %v", got, err)
	}
	for _, want := range []struct {
		sheet, column string
		row           int
		text          string
	}{
		{"Energy carriers", "B", 4, "is empty"},
		{"Energy carriers", "B", 5, `"cheap" is not a number`},
		{"Measures", "J", 4, "life -3"},
		{"Measures", "E", 5, "costs nothing"},
		{"Default rules", "I", n50, "400"},
		{"Default rules", "L", word, "lead glass"},
		{"Default rules", "I", door, "is empty"},
		{"Climates", "A", 4, "11 months"},
		{"Build-ups", "D", 5, "neither a known material"},
		{"Economics", "B", 4, "not a number"},
		{"Measure details", "C", 4, "77"},
	} {
		found := false
		for _, f := range findings {
			found = found || f.Severity == finding.Error && f.Sheet == want.sheet && f.Row == want.row && f.Column == want.column && strings.Contains(f.Text, want.text)
		}
		if !found {
			t.Errorf("nothing says %s %s%d %q", want.sheet, want.column, want.row, want.text)
		}
	}
	if t.Failed() {
		for _, f := range findings {
			t.Log(f)
		}
	}
}

// A rule taken away leaves a hole, two alike that disagree a contradiction: both are
// said with their names.
func TestHolesAndContradictions(t *testing.T) {
	t.Parallel()
	s := starter(t)
	path := edit(t, written(t, s), func(f *excelize.File) {
		for i := len(s.Rules) - 1; i >= 0; i-- {
			if s.Rules[i].Property == archetype.FlowExponent {
				if err := f.RemoveRow("Default rules", headerRow+1+i); err != nil {
					t.Fatal(err)
				}
			}
		}
		for c, v := range []any{"mine", "door_u", "", "", nil, 1978, "", "", 2.0, 1.0, 3.0, "", 0.5, "me"} {
			if err := f.SetCellValue("Default rules", fmt.Sprintf("%s%d", sheet.ColumnLetters(c), headerRow+400), v); err != nil {
				t.Fatal(err)
			}
		}
	})
	_, findings, err := Read(context.Background(), path)
	if !errors.Is(err, ErrRefused) {
		t.Fatal(err)
	}
	all := fmt.Sprint(findings)
	for _, want := range []string{"no rule gives flow_exponent", `"mine"`, "disagree on door_u"} {
		if !strings.Contains(all, want) {
			t.Errorf("nothing says %q: %s", want, all)
		}
	}
}

// Columns may be moved and rows sorted; another file is refused.
func TestForeignFilesAreRefused(t *testing.T) {
	t.Parallel()
	f := excelize.NewFile()
	defer f.Close()
	path := filepath.Join(t.TempDir(), "other.xlsx")
	if err := f.SaveAs(path); err != nil {
		t.Fatal(err)
	}
	_, findings, err := Read(context.Background(), path)
	if !errors.Is(err, ErrRefused) || len(findings) < 5 {
		t.Errorf("%v, %v", findings, err)
	}
	if _, _, err := Read(context.Background(), filepath.Join(t.TempDir(), "none.xlsx")); err == nil || errors.Is(err, ErrRefused) {
		t.Errorf("a file that is not there: %v", err)
	}
	for _, w := range building.UseWords {
		if w == "" {
			t.Error("a use without a word")
		}
	}
}
