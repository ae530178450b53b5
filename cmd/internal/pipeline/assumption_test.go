package pipeline

import (
	"errors"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"

	"kelvinrow/estimate/building"
	"kelvinrow/rank"
)

// The workbook of assumptions, edited and given back, moves the run and stays in
// force; single what-ifs do not; a broken one is refused whole.
func TestAssumptionsStayInForce(t *testing.T) {
	s := newBench(t).s
	ctx := t.Context()
	dir := t.TempDir()
	source := filepath.Join(dir, "stock.csv")
	if err := os.WriteFile(source, []byte("id;use;year built;floor area (m2)\nA-1;terraced house;1930;95\nA-2;school;1972;2400\n"), 0o600); err != nil {
		t.Fatal(err)
	}
	if _, err := s.Load(ctx, LoadOptions{Files: []string{source}, Kind: building.Registered}); err != nil {
		t.Fatal(err)
	}
	must := func(err error) {
		t.Helper()
		if err != nil {
			t.Fatal(err)
		}
	}
	run := func(assumptions, climate string, changes ...string) *RankOutcome {
		t.Helper()
		s.Assumptions, s.Climate, s.Changes = assumptions, climate, changes
		out, err := s.Rank(ctx, RankOptions{Out: filepath.Join(dir, "ranked.xlsx"), Yardstick: rank.Default}, nil)
		if err != nil {
			t.Fatal(err)
		}
		return out
	}
	first := run("", "")
	if first.Assumptions != StarterName {
		t.Errorf("the first run rests on %q", first.Assumptions)
	}
	dearer := run("", "", "gas.price=0.5")
	if dearer.Run.Assumptions == first.Run.Assumptions || dearer.Summary.MoneyPerYear <= first.Summary.MoneyPerYear {
		t.Error("a what-if changes nothing")
	}
	if dearer.Summary.NeedKWh != first.Summary.NeedKWh {
		t.Error("a price moves the physics")
	}
	if again := run("", ""); again.Run.Assumptions != first.Run.Assumptions {
		t.Error("a what-if stays in force")
	}

	book := filepath.Join(dir, "assumptions.xlsx")
	s.Changes = nil
	if _, version, err := s.WriteAssumptions(ctx, book); err != nil || version != first.Run.Assumptions {
		t.Fatalf("%s, %v", version, err)
	}
	if back := run(book, ""); back.Run.Assumptions != first.Run.Assumptions {
		t.Error("an unedited workbook is another version")
	}
	f, err := excelize.OpenFile(book)
	must(err)
	must(f.SetCellValue("Uses", "B4", 21))
	must(f.Save())
	warm := run(book, "")
	if warm.Summary.NeedKWh == first.Summary.NeedKWh && warm.Run.Assumptions == first.Run.Assumptions {
		t.Error("an edited workbook changes nothing")
	}
	if kept := run("", ""); kept.Run.Assumptions != warm.Run.Assumptions || kept.Assumptions != "assumptions.xlsx" {
		t.Errorf("the edited workbook does not stay in force: %s, %q", kept.Run.Assumptions, kept.Assumptions)
	}
	if older := run(first.Run.Assumptions[:12], ""); older.Run.Assumptions != first.Run.Assumptions {
		t.Error("a stored version comes back as another")
	}
	if own := run(StarterName, "Gullspindle"); own.Assumptions != StarterName {
		t.Errorf("starter is %q", own.Assumptions)
	}
	e, err := s.Explain(ctx, "A-1")
	if err != nil || e.Run != 8 {
		t.Errorf("explain names run %d, %v", e.Run, err)
	}

	must(f.SetCellValue("Energy carriers", "B4", "cheap"))
	must(f.Save())
	s.Assumptions = book
	var refused *Refused
	if _, err := s.Rank(ctx, RankOptions{Out: filepath.Join(dir, "ranked.xlsx"), Yardstick: rank.Default}, nil); !errors.As(err, &refused) || len(refused.Findings) != 1 {
		t.Errorf("a broken workbook: %v", err)
	}
	s.Assumptions, s.Changes = "", []string{"gas.price=-1"}
	if _, err := s.Rank(ctx, RankOptions{Out: filepath.Join(dir, "ranked.xlsx"), Yardstick: rank.Default}, nil); err == nil || !strings.Contains(err.Error(), "price -1") {
		t.Errorf("a negative price: %v", err)
	}
}

// The workbook of a stored run is written again byte for byte, whatever was loaded
// and assumed since; after an erasure it is refused.
func TestStoredRunIsWrittenAgain(t *testing.T) {
	b := newBench(t)
	source := b.write("stock.csv", "id;use;year built;floor area (m2);district\nA-1;terraced house;1930;95;North\nA-2;school;1972;2400;South\nA-3;office;1985;-5;South\n")
	b.load(LoadOptions{Files: []string{source}, Kind: building.Registered})
	first := filepath.Join(b.dir, "first.xlsx")
	out, err := b.s.Rank(t.Context(), RankOptions{Out: first, Yardstick: rank.NPV, Top: 1, Title: "Two buildings",
		Programme: ProgrammeOptions{Budgets: []float64{2e5, 1e5}, By: rank.NPV}}, nil)
	if err != nil {
		t.Fatal(err)
	}
	if out.Programme == nil || len(out.Programme.Chosen) == 0 {
		t.Fatal("no programme")
	}
	b.load(LoadOptions{Files: []string{b.write("more.csv", "id;use;year built;floor area (m2)\nA-2;school;1972;3400\nA-9;office;1990;800\n")}, Kind: building.Surveyed})
	b.s.Changes = []string{"gas.price=0.3"}
	if _, err := b.s.Rank(t.Context(), RankOptions{Out: filepath.Join(b.dir, "second.xlsx"), Yardstick: rank.Default}, nil); err != nil {
		t.Fatal(err)
	}
	again := filepath.Join(b.dir, "again.xlsx")
	if _, err := b.s.WriteRun(t.Context(), 1, again); err != nil {
		t.Fatal(err)
	}
	was, _ := os.ReadFile(first)
	is, _ := os.ReadFile(again)
	if len(was) == 0 || string(was) != string(is) {
		t.Errorf("%d bytes, then %d: not the same workbook", len(was), len(is))
	}
	if _, err := b.s.WriteRun(t.Context(), 7, again); err == nil {
		t.Error("a run that never was is written")
	}
	if err := b.s.Store.Erase(t.Context(), "p", "A-2"); err != nil {
		t.Fatal(err)
	}
	if _, err := b.s.WriteRun(t.Context(), 1, again); !errors.Is(err, errBare) {
		t.Errorf("after an erasure: %v", err)
	}
}

// A word of one's own, given with the assumptions, is known from then on; the same
// file is read anew with it.
func TestOwnWordsAreKnownOnceGiven(t *testing.T) {
	b := newBench(t)
	source := b.write("stock.csv", "id;use;year built;floor area (m2);wall construction\nA-1;terraced house;1930;95;Bruchstein 60er\n")
	b.load(LoadOptions{Files: []string{source}, Kind: building.Registered})
	wall := func() string {
		t.Helper()
		bl, _, err := b.s.Store.Building(t.Context(), "p", "A-1")
		if err != nil {
			t.Fatal(err)
		}
		return bl.Text(building.WallConstruction)
	}
	if w := wall(); w != "" && w != "stone" {
		t.Fatalf("the word means %q", w)
	}
	book := filepath.Join(b.dir, "assumptions.xlsx")
	if _, _, err := b.s.WriteAssumptions(t.Context(), book); err != nil {
		t.Fatal(err)
	}
	f, err := excelize.OpenFile(book)
	if err != nil {
		t.Fatal(err)
	}
	for cell, v := range map[string]string{"A4": "wall_construction", "B4": "Bruchstein 60er", "C4": "half-timbered"} {
		if err := f.SetCellValue("Words", cell, v); err != nil {
			t.Fatal(err)
		}
	}
	if err := f.Save(); err != nil {
		t.Fatal(err)
	}
	b.s.Assumptions = book
	b.load(LoadOptions{Files: []string{source}, Kind: building.Registered})
	if w := wall(); w != "half-timbered" {
		t.Errorf("with a word of its own the wall is %q", w)
	}
}
