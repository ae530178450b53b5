package pipeline

import (
	"fmt"
	"io"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"kelvinrow/cmd/internal/progress"
	"kelvinrow/estimate/building"
	"kelvinrow/ingest/finding"
	"kelvinrow/sql/dbtest"
)

func TestMain(m *testing.M) { dbtest.Main(m) }

// bench is a session on a database of its own, and a folder for files.
type bench struct {
	t   *testing.T
	s   *Session
	dir string
}

func newBench(t *testing.T) *bench {
	t.Helper()
	s, err := Open(t.Context(), Config{DB: dbtest.URL(t), Portfolio: "p", Progress: progress.New(io.Discard, true)})
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		if err := s.Close(t.Context()); err != nil {
			t.Error(err)
		}
	})
	return &bench{t, s, t.TempDir()}
}

func (b *bench) write(name, text string) string {
	b.t.Helper()
	p := filepath.Join(b.dir, name)
	if err := os.MkdirAll(filepath.Dir(p), 0o700); err != nil {
		b.t.Fatal(err)
	}
	if err := os.WriteFile(p, []byte(text), 0o600); err != nil {
		b.t.Fatal(err)
	}
	return p
}

func (b *bench) load(opt LoadOptions) *LoadOutcome {
	b.t.Helper()
	out, err := b.s.Load(b.t.Context(), opt)
	if err != nil {
		b.t.Fatal(err)
	}
	return out
}

func (b *bench) files(paths ...string) *LoadOutcome {
	b.t.Helper()
	return b.load(LoadOptions{Files: paths})
}

func (b *bench) get(id string, f building.Field) building.Value {
	b.t.Helper()
	one, _, err := b.s.Store.Building(b.t.Context(), "p", id)
	if err != nil {
		b.t.Fatal(err)
	}
	k, ok := one.Get(f)
	if !ok {
		return building.Value{}
	}
	return k.Value
}

func (b *bench) ids() string {
	b.t.Helper()
	var ids []string
	err := b.s.Store.Buildings(b.t.Context(), "p", func(x *building.Building) error {
		ids = append(ids, x.ID)
		return nil
	})
	if err != nil {
		b.t.Fatal(err)
	}
	return strings.Join(ids, " ")
}

// said are the findings of a check, as text.
func said(o *LoadOutcome, check string) []string {
	var out []string
	for _, f := range o.Findings {
		if f.Check == check {
			out = append(out, f.Severity.String()+": "+f.Text)
		}
	}
	return out
}

const head = "id;use;year built;floor area (m2);ventilation\n"

func TestRowsMendedInTwoGoesAreAllKept(t *testing.T) {
	t.Parallel()
	b := newBench(t)
	first := b.files(b.write("r.csv", head+"A;school;1970;900;natural\nB;school;1970;-900;natural\nC;school;1970;-700;natural\n"))
	if len(first.ToFix) != 1 || first.SetAside != 2 {
		t.Fatalf("%+v", first)
	}
	b.files(b.write("r-to-fix.csv", head+"B;school;1970;900;natural\nC;school;1970;-700;natural\n"))
	out := b.files(b.write("r-to-fix.csv", head+"C;school;1970;700;natural\n"))
	if got := b.ids(); got != "A B C" {
		t.Errorf("buildings %s after mending in two goes", got)
	}
	if len(said(out, finding.Replaced)) > 0 {
		t.Errorf("said to take a place: %v", out.Findings)
	}
	// Mended rows stay when their source comes again.
	b.files(b.write("r.csv", head+"A;school;1970;950;natural\n"))
	if got := b.ids(); got != "A B C" {
		t.Errorf("buildings %s after the source came again", got)
	}
}

func TestMendedRowsAreAsFirmAsTheirSource(t *testing.T) {
	t.Parallel()
	b := newBench(t)
	b.load(LoadOptions{Files: []string{b.write("r.csv", head+"A;school;1970;900;natural\nB;school;1970;-900;natural\n")}, Kind: building.Surveyed})
	b.files(b.write("r-to-fix.csv", head+"B;school;1970;900;natural\n"))
	if got := b.get("B", building.FloorArea).Kind; got != building.Surveyed {
		t.Errorf("a mended row of a survey is %s", got)
	}
	b.files(b.write("s.csv", head+"C;school;1970;900;natural\n"), b.write("t-to-fix.csv", head+"D;school;1970;900;natural\n"))
	for _, id := range []string{"C", "D"} {
		if got := b.get(id, building.FloorArea).Kind; got != building.Registered {
			t.Errorf("%s is %s", id, got)
		}
	}
}

func TestCorrectedFileSaysWhatItWithdraws(t *testing.T) {
	t.Parallel()
	b := newBench(t)
	b.files(b.write("r.csv", head+"A;school;1970;900;natural\nB;school;1970;800;natural\n"))
	out := b.files(b.write("r.csv", head+"A;school;1970;950;natural\n"))
	if s := said(out, finding.Replaced); len(s) != 1 || !strings.HasPrefix(s[0], "warning: takes the place of r.csv, dated ") ||
		!strings.HasSuffix(s[0], "of its 2 buildings 1 are withdrawn, of its 8 values 4 are withdrawn and 1 change") {
		t.Errorf("said %q", s)
	}
	// The same from another folder may be another file altogether.
	out = b.files(b.write("elsewhere/r.csv", head+"A;school;1970;950;balanced\n"))
	if s := said(out, finding.Replaced); len(s) != 1 || !strings.Contains(s[0], "from "+b.dir) || !strings.HasPrefix(s[0], "warning") {
		t.Errorf("said %q", s)
	}
	// Where it tells of other buildings altogether, it is.
	out = b.files(b.write("third/r.csv", head+"Z;school;1970;950;natural\n"))
	if s := said(out, finding.Replaced); len(s) != 1 || !strings.Contains(s[0], "tells of other buildings and counts on") || b.ids() != "A Z" {
		t.Errorf("said %q, buildings %s", s, b.ids())
	}
	fs, err := b.s.Store.Findings(t.Context(), "p")
	if err != nil || !slices.ContainsFunc(fs, func(f finding.Finding) bool { return f.Check == finding.Replaced }) {
		t.Errorf("not kept with the findings: %v, %v", fs, err)
	}
}

func TestFilesOfOneNameInOneCommand(t *testing.T) {
	t.Parallel()
	b := newBench(t)
	north, south := b.write("north/r.csv", head+"N;school;1970;900;natural\n"), b.write("south/r.csv", head+"S;school;1970;900;natural\n")
	b.files(north, south)
	if got := b.ids(); got != "N S" {
		t.Errorf("buildings %s", got)
	}
	sources, err := b.s.Store.Sources(t.Context(), "p")
	if err != nil || len(sources) != 2 || sources[0].File != "north/r.csv" || sources[1].File != "south/r.csv" {
		t.Errorf("%+v, %v", sources, err)
	}
	if out := b.files(north, south); len(out.Already) != 2 || out.Nothing() {
		t.Errorf("loading again: %+v", out)
	}
	// A correction of one of them, alone, is known by its place.
	out := b.files(b.write("south/r.csv", head+"S;school;1970;950;natural\n"))
	if got := b.get("S", building.FloorArea).Number; b.ids() != "N S" || got != 950 || len(said(out, finding.Replaced)) != 1 {
		t.Errorf("buildings %s, area %v, %v", b.ids(), got, out.Findings)
	}
	if out.Reports[0].File != "south/r.csv" {
		t.Errorf("known as %s now", out.Reports[0].File)
	}
}

func TestOptionsOfReadingAreNotIgnored(t *testing.T) {
	t.Parallel()
	b := newBench(t)
	f := b.write("r.csv", head+"A;school;1970;900;natural\n")
	b.files(f)
	out := b.load(LoadOptions{Files: []string{f}, Kind: building.Surveyed})
	if got := b.get("A", building.FloorArea).Kind; got != building.Surveyed || len(out.Already) > 0 {
		t.Errorf("read as surveyed, the area is %s", got)
	}
	if s := said(out, finding.Replaced); len(s) != 1 || !strings.Contains(s[0], "read as registered; now read as surveyed") {
		t.Errorf("said %q", s)
	}
	columns := b.write("columns.txt", "use = constant:\"office\"\n")
	for range 2 {
		out = b.load(LoadOptions{Files: []string{f}, Kind: building.Surveyed, Columns: columns})
		if got := b.get("A", building.UseField).Text; got != "office" {
			t.Errorf("use %q", got)
		}
	}
	if len(out.Already) != 1 {
		t.Error("the same columns once more are no reason to read again")
	}
	b.write("columns.txt", "use = ZZ\n")
	out = b.load(LoadOptions{Files: []string{f}, Columns: columns})
	if s := said(out, "mapping"); len(s) != 1 || !strings.Contains(s[0], `from "ZZ"`) {
		t.Errorf("said %q", s)
	}
	b.write("columns.txt", "\nuse = constant:\"ofice\"\n")
	if _, err := b.s.Load(t.Context(), LoadOptions{Files: []string{f}, Columns: columns}); err == nil || !strings.Contains(err.Error(), "columns.txt: line 2:") {
		t.Errorf("a constant that is no word: %v", err)
	}
}

func TestUndoBringsEarlierValuesBack(t *testing.T) {
	t.Parallel()
	b := newBench(t)
	f := b.write("r.csv", head+"A;school;1970;900;natural\n")
	b.files(f)
	b.files(b.write("r.csv", head+"A;school;1970;950;natural\nB;school;1970;950;natural\n"))
	u, err := b.s.Undo(t.Context(), f)
	if err != nil || u.Values != 8 || u.Buildings != 2 || u.Gone != 1 || len(u.Restored) != 1 {
		t.Errorf("%+v, %v", u, err)
	}
	if got := b.get("A", building.FloorArea).Number; got != 900 || b.ids() != "A" {
		t.Errorf("area %v of %s", got, b.ids())
	}
	if _, err := b.s.Undo(t.Context(), b.write("never.csv", head)); err == nil || !strings.Contains(err.Error(), "no file") || !strings.Contains(err.Error(), "was loaded") {
		t.Errorf("a file never loaded: %v", err)
	}
	if b.ids() != "A" {
		t.Error("a failed undo changed something")
	}
	if err := os.Remove(f); err != nil { // by its name alone, from anywhere
		t.Fatal(err)
	}
	if _, err := b.s.Undo(t.Context(), "r.csv"); err != nil || b.ids() != "" {
		t.Errorf("%v, left %q", err, b.ids())
	}
}

func TestContradictionsAreSaidAtLoadAndInTheWorkbook(t *testing.T) {
	t.Parallel()
	b := newBench(t)
	f := b.write("a.csv", head+"A2;school;1970;1240;natural\n")
	old := time.Date(2024, 1, 2, 12, 0, 0, 0, time.UTC)
	if err := os.Chtimes(f, old, old); err != nil {
		t.Fatal(err)
	}
	b.files(f)
	out := b.files(b.write("b.csv", "id;floor area (m2);n50\nA2;1520;\na2;300;3\nQ;;4\n"))
	if s := said(out, "conflict"); len(s) != 1 || !strings.Contains(s[0], "heated floor area 1520 m2 in b.csv, row 2; 1240 m2 in a.csv, row 2; b.csv is used: the file is newer") {
		t.Errorf("conflict %q", s)
	}
	if s := said(out, "similar-id"); len(s) != 1 || !strings.Contains(s[0], `the id "a2" differs only in case or spaces from "A2" in a.csv, row 2`) {
		t.Errorf("similar id %q", s)
	}
	if s := said(out, "no-size-known"); len(s) != 1 || !strings.Contains(s[0], "cannot be estimated") {
		t.Errorf("no size %q", s)
	}
	about := newWatch()
	if err := b.s.Store.Groups(t.Context(), "p", func(x *building.Building, rs []building.Record) error {
		about.look(x, rs)
		return nil
	}); err != nil {
		t.Fatal(err)
	}
	for _, f := range about.list {
		if !slices.Contains(out.Findings, f) {
			t.Errorf("ranking finds what loading did not: %v", f)
		}
	}
	if len(about.list) != 3 {
		t.Errorf("ranking finds %v", about.list)
	}
	rests, err := b.s.inForce(t.Context())
	if err != nil {
		t.Fatal(err)
	}
	w := newWatch()
	if _, _, err := b.s.estimate(t.Context(), rests.basis, w); err != nil || len(w.list) != 3 {
		t.Errorf("estimating watches %v, %v", w.list, err)
	}
}

func TestManyAlikeAreCountedNotListed(t *testing.T) {
	w := newWatch()
	sh := &building.Sheet{ID: 1, File: "a.csv"}
	for i := range 3 * perKind {
		r := building.Record{Building: fmt.Sprintf("B%03d", i), Sheet: sh, Row: i + 2}
		w.look(building.Merge(r.Building, []building.Record{r}), []building.Record{r})
	}
	last := w.list[len(w.list)-1]
	if len(w.list) != perKind+1 || last.Row != perKind+2 || !strings.HasPrefix(last.Text, fmt.Sprintf("and so in %d buildings more", 2*perKind)) {
		t.Errorf("%d findings, the last %v", len(w.list), last)
	}
}

func TestColumnsAreNotMissedForKnownBuildings(t *testing.T) {
	t.Parallel()
	b := newBench(t)
	if out := b.files(b.write("a.csv", "id;floor area (m2)\nA;900\nB;800\n")); len(said(out, "no-ventilation")) != 1 || len(said(out, "no-use")) != 1 {
		t.Errorf("a first register: %v", out.Findings)
	}
	if out := b.files(b.write("b.csv", "id;floor area (m2)\nA;905\n")); len(said(out, "no-ventilation"))+len(said(out, "no-use"))+len(said(out, "no-year")) != 0 {
		t.Errorf("an update: %v", out.Findings)
	}
	out := b.files(b.write("c.csv", "id;floor area (m2)\nA;910\nNEW;100\n"))
	if s := said(out, "no-ventilation"); len(s) != 1 || !strings.Contains(s[0], "(1 of its 2 buildings") {
		t.Errorf("an update with a new building: %q", s)
	}
}

func TestNothingUsableLeavesWhatTheStoreHas(t *testing.T) {
	t.Parallel()
	b := newBench(t)
	f := b.write("r.csv", head+"A;school;1970;900;natural\n")
	b.files(f)
	for name, text := range map[string]string{"header only": head, "empty": "", "all set aside": head + "A;school;1970;-3;natural\n", "no table": "1;2\n3;4\n"} {
		if out := b.files(b.write("r.csv", text)); !out.Nothing() || len(out.Findings) == 0 {
			t.Errorf("%s: %+v", name, out)
		}
		if b.ids() != "A" {
			t.Errorf("%s: the store has %q", name, b.ids())
		}
	}
}
