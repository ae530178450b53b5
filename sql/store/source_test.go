package store

import (
	"context"
	"errors"
	"strings"
	"testing"

	"kelvinrow/estimate/building"
)

// put loads records of a file and returns what it took the place of, and how
// much of each is withdrawn.
func put(t *testing.T, s *Store, f File, records ...building.Record) (replaced []Source, gone []Withdrawal) {
	t.Helper()
	ctx := context.Background()
	l, err := s.BeginLoad(ctx, "p")
	must(t, err)
	defer l.Rollback()
	already, replaced, err := l.Source(ctx, f)
	must(t, err)
	if already {
		t.Fatalf("%s is already there", f.Name)
	}
	sh := &building.Sheet{File: f.Name, Name: "S"}
	must(t, l.Sheet(ctx, sh))
	for _, r := range records {
		r.Sheet = sh
		must(t, l.Add(ctx, &r))
	}
	for _, o := range replaced {
		w, err := l.Withdrawn(ctx, o.Number)
		must(t, err)
		gone = append(gone, w)
	}
	_, err = l.Commit(ctx)
	must(t, err)
	return replaced, gone
}

func file(name string, content byte) File { return File{Name: name, SHA256: [32]byte{content}} }

func TestCorrectedFileSaysWhatItWithdraws(t *testing.T) {
	t.Parallel()
	s, _ := setup(t)
	a := area("A", 2, 100)
	a.Values = append(a.Values, building.Value{Field: building.Name, Kind: building.Registered, Text: "House"},
		building.Value{Field: building.Protected, Kind: building.Registered, Number: 1})
	put(t, s, file("a.csv", 1), a, area("B", 3, 200), area("C", 4, 300))
	replaced, gone := put(t, s, file("a.csv", 2), area("A", 2, 100), area("B", 3, 250))
	if len(replaced) != 1 || replaced[0].File != "a.csv" {
		t.Fatalf("replaced %+v", replaced)
	}
	if w := (Withdrawal{Buildings: 3, Values: 5, BuildingsGone: 1, ValuesGone: 3, ValuesChanged: 1}); gone[0] != w {
		t.Errorf("%+v, want %+v", gone[0], w)
	}
}

func TestFileThatAddsTakesNoPlace(t *testing.T) {
	t.Parallel()
	s, _ := setup(t)
	put(t, s, file("a.csv", 1), area("A", 2, 100))
	f := file("a-to-fix.csv", 2)
	f.Adds, f.Path = true, "/x/a-to-fix.csv"
	put(t, s, f, area("B", 2, 200))
	f.SHA256 = [32]byte{3}
	if replaced, _ := put(t, s, f, area("C", 2, 300), area("B", 3, 210)); len(replaced) != 0 {
		t.Errorf("replaced %+v", replaced)
	}
	want(t, all(t, s, "p"), map[string]float64{"A": 100, "B": 210, "C": 300})
	// Taken back one after the other, the later one first.
	u, err := s.Undo(t.Context(), "p", "a-to-fix.csv", "", nil)
	must(t, err)
	if u.Buildings != 2 || u.Values != 2 || u.Gone != 1 || len(u.Left) != 1 {
		t.Errorf("%+v", u)
	}
	want(t, all(t, s, "p"), map[string]float64{"A": 100, "B": 200})
}

func TestAnotherReadingTakesTheEarlierOnesPlace(t *testing.T) {
	t.Parallel()
	s, _ := setup(t)
	f := file("a.csv", 1)
	f.Reading = "registered"
	put(t, s, f, area("A", 2, 100))
	l, err := s.BeginLoad(t.Context(), "p")
	must(t, err)
	if already, err := l.Already(t.Context(), f.SHA256, f.Reading); err != nil || !already {
		t.Errorf("the same reading: %v, %v", already, err)
	}
	l.Rollback()
	f.Reading, f.Name = "surveyed", "renamed.csv"
	if replaced, _ := put(t, s, f, area("A", 2, 101)); len(replaced) != 1 {
		t.Errorf("replaced %+v", replaced)
	}
	want(t, all(t, s, "p"), map[string]float64{"A": 101})
	f.Adds, f.Reading = true, "certified" // holds for files that add, too
	if replaced, _ := put(t, s, f, area("A", 2, 102)); len(replaced) != 1 {
		t.Errorf("replaced %+v", replaced)
	}
}

func TestFilesOfOneNameInOneLoadStayApart(t *testing.T) {
	t.Parallel()
	s, _ := setup(t)
	ctx := t.Context()
	l, err := s.BeginLoad(ctx, "p")
	must(t, err)
	for i, f := range []File{{Name: "a.csv", Path: "/x/a.csv", SHA256: [32]byte{1}}, {Name: "a.csv", Path: "/y/a.csv", SHA256: [32]byte{2}}} {
		_, replaced, err := l.Source(ctx, f)
		must(t, err)
		if len(replaced) > 0 {
			t.Errorf("replaced %+v", replaced)
		}
		sh := &building.Sheet{}
		must(t, l.Sheet(ctx, sh))
		r := area(string(rune('A'+i)), 2, 1)
		r.Sheet = sh
		must(t, l.Add(ctx, &r))
	}
	_, err = l.Commit(ctx)
	must(t, err)
	want(t, all(t, s, "p"), map[string]float64{"A": 1, "B": 1})
	replaced, _ := put(t, s, File{Name: "a.csv", Path: "/y/a.csv", SHA256: [32]byte{3}}, area("B", 2, 2)) // the path tells which
	if len(replaced) != 1 || replaced[0].Path != "/y/a.csv" {
		t.Errorf("replaced %+v", replaced)
	}
	want(t, all(t, s, "p"), map[string]float64{"A": 1, "B": 2})
}

func TestUndoBringsTheEarlierVersionBack(t *testing.T) {
	t.Parallel()
	s, _ := setup(t)
	put(t, s, file("a.csv", 1), area("A", 2, 100), area("B", 3, 200))
	put(t, s, file("other.csv", 9), area("A", 2, 999))
	put(t, s, file("a.csv", 2), area("A", 2, 110))
	put(t, s, file("a.csv", 3), area("A", 2, 120))
	var unknown *UnknownSourceError
	one := [32]byte{1}
	if _, err := s.Undo(t.Context(), "p", "x.csv", "", one[:]); !errors.As(err, &unknown) || !strings.Contains(err.Error(), "took its place") {
		t.Errorf("an earlier version: %v", err)
	}
	for _, c := range []struct {
		restored int
		left     map[string]float64
	}{
		{1, map[string]float64{"A": 999}},
		{1, map[string]float64{"A": 999, "B": 200}},
		{0, map[string]float64{"A": 999}},
	} {
		u, err := s.Undo(t.Context(), "p", "a.csv", "", nil)
		must(t, err)
		if len(u.Restored) != c.restored || u.Source.File != "a.csv" {
			t.Errorf("%+v", u)
		}
		if n, err := s.Count(t.Context(), "p"); err != nil || n != len(c.left) {
			t.Errorf("%d buildings, %v, want %v", n, err, c.left)
		}
	}
	if _, err := s.Undo(t.Context(), "p", "a.csv", "", nil); !errors.As(err, &unknown) || unknown.By != "" {
		t.Errorf("nothing is left to take back: %v", err)
	}
	if _, err := s.Undo(t.Context(), "p", "a.csv", "", []byte{9}); err == nil {
		t.Error("content that was never loaded is taken back")
	}
	nine := [32]byte{9}
	if u, err := s.Undo(t.Context(), "p", "moved.csv", "", nine[:]); err != nil || u.Source.File != "other.csv" || u.Gone != 1 {
		t.Errorf("by content: %+v, %v", u, err)
	}
}

func TestUndoAsksWhichOfSeveralIsMeant(t *testing.T) {
	t.Parallel()
	s, _ := setup(t)
	put(t, s, File{Name: "north/a.csv", Path: "/n/north/a.csv", SHA256: [32]byte{1}}, area("A", 2, 1))
	put(t, s, File{Name: "south/a.csv", Path: "/n/south/a.csv", SHA256: [32]byte{2}}, area("B", 2, 1))
	if _, err := s.Undo(t.Context(), "p", "a.csv", "", nil); err == nil || !strings.Contains(err.Error(), "north/a.csv, south/a.csv") {
		t.Errorf("got %v", err)
	}
	u, err := s.Undo(t.Context(), "p", "a.csv", "/n/south/a.csv", nil)
	must(t, err)
	if u.Source.File != "south/a.csv" {
		t.Errorf("took back %s", u.Source.File)
	}
}

func TestPrunedVersionsCannotComeBack(t *testing.T) {
	t.Parallel()
	s, _ := setup(t)
	put(t, s, file("a.csv", 1), area("A", 2, 100))
	put(t, s, file("a.csv", 2), area("A", 2, 110))
	if n, err := s.PruneSources(t.Context(), "p"); err != nil || n != 1 {
		t.Errorf("pruned %d, %v", n, err)
	}
	var n int
	must(t, s.conn.QueryRow(t.Context(), "select count(*) from kelvinrow.record").Scan(&n))
	if n != 1 {
		t.Errorf("%d records, want 1", n)
	}
	u, err := s.Undo(t.Context(), "p", "a.csv", "", nil)
	must(t, err)
	if len(u.Restored) != 0 {
		t.Errorf("restored %+v", u.Restored)
	}
}

func TestWhatALoadMustWatch(t *testing.T) {
	t.Parallel()
	s, _ := setup(t)
	sizeless := building.Record{Building: "S", Row: 9, Values: []building.Value{{Field: building.WallU, Kind: building.Surveyed, Number: 1}}}
	put(t, s, file("a.csv", 1), area("A2", 2, 100), area("B", 3, 100), area("C", 4, 100), sizeless)
	l, err := s.BeginLoad(t.Context(), "p")
	must(t, err)
	defer l.Rollback()
	_, _, err = l.Source(t.Context(), file("b.csv", 2))
	must(t, err)
	sh := &building.Sheet{File: "b.csv"}
	must(t, l.Sheet(t.Context(), sh))
	windowless := building.Record{Building: "N", Row: 5, Values: sizeless.Values}
	for _, r := range []building.Record{area("a 2", 2, 100), area("B", 3, 120), area("D", 4, 100), windowless} {
		r.Sheet = sh
		must(t, l.Add(t.Context(), &r))
	}
	var got []string
	must(t, l.ToWatch(t.Context(), func(b *building.Building, rs []building.Record) error {
		if len(rs) == 0 || rs[0].Building != b.ID {
			t.Errorf("%s comes with %d records", b.ID, len(rs))
		}
		got = append(got, b.ID)
		return nil
	}))
	if strings.Join(got, ",") != "A2,B,N,a 2" {
		t.Errorf("to watch: %q", got)
	}
	lacking, all, err := l.Lacking(t.Context(), sh.ID, building.WallU, building.RoofU)
	must(t, err)
	if lacking != 2 || all != 4 { // "a 2" and D; N has one, B is known already
		t.Errorf("%d of %d lack a U-value, want 2 of 4", lacking, all)
	}
}

func TestErasedBuildingIsGoneFromEarlierVersionsToo(t *testing.T) {
	t.Parallel()
	s, _ := setup(t)
	put(t, s, file("a.csv", 1), area("A", 2, 100), area("B", 3, 100))
	put(t, s, file("a.csv", 2), area("A", 2, 110))
	must(t, s.Erase(t.Context(), "p", "B"))
	_, err := s.Undo(t.Context(), "p", "a.csv", "", nil)
	must(t, err)
	want(t, all(t, s, "p"), map[string]float64{"A": 100})
}

func TestLoaderMayTakeBackWhatItLoaded(t *testing.T) {
	t.Parallel()
	s, url := setup(t)
	put(t, s, file("a.csv", 1), area("A", 2, 100))
	loader := account(t, s, url, "kelvinrow_loader")
	put(t, loader, file("a.csv", 2), area("A", 2, 110))
	_, err := loader.Undo(t.Context(), "p", "a.csv", "", nil)
	must(t, err)
	want(t, all(t, s, "p"), map[string]float64{"A": 100})
}
