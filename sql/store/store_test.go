package store

import (
	"context"
	"fmt"
	"os"
	"os/exec"
	"testing"
	"time"

	"github.com/google/go-cmp/cmp"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/finding"
	"kelvinrow/sql/dbtest"
)

const killVariable = "KELVINROW_TEST_LOAD_AND_WAIT"

func TestMain(m *testing.M) {
	if url := os.Getenv(killVariable); url != "" {
		loadAndWait(url)
	}
	dbtest.Main(m)
}

func setup(t *testing.T) (*Store, string) {
	t.Helper()
	url := dbtest.URL(t)
	s, err := Open(t.Context(), url)
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(s.Close)
	return s, url
}

func must(t testing.TB, err error) {
	t.Helper()
	if err != nil {
		t.Fatal(err)
	}
}

// load stores records of one file with one sheet.
func load(t testing.TB, s *Store, portfolio, file string, content byte, records ...building.Record) bool {
	t.Helper()
	ctx := context.Background()
	l, err := s.BeginLoad(ctx, portfolio)
	must(t, err)
	defer l.Rollback()
	already, _, err := l.Source(ctx, File{Name: file, SHA256: [32]byte{content}, Date: "2026-01-01", Bytes: 100})
	must(t, err)
	if already {
		return true
	}
	sh := &building.Sheet{File: file, Name: "Sheet 1", FileDate: "2026-01-01"}
	sh.Columns[building.FloorArea] = "C"
	must(t, l.Sheet(ctx, sh))
	for _, r := range records {
		r.Sheet = sh
		must(t, l.Add(ctx, &r))
	}
	must(t, l.Findings(ctx, l.Last(), []finding.Finding{{Severity: finding.Warning, Check: "x", File: file, Sheet: "Sheet 1", Row: 3, Text: "odd"}}))
	_, err = l.Commit(ctx)
	must(t, err)
	return false
}

func area(id string, row int, m2 float64) building.Record {
	return building.Record{Building: id, Row: row, Values: []building.Value{
		{Field: building.FloorArea, Kind: building.Registered, Number: m2},
	}}
}

func all(t testing.TB, s *Store, portfolio string) map[string]float64 {
	t.Helper()
	out := map[string]float64{}
	last := ""
	must(t, s.Buildings(context.Background(), portfolio, func(b *building.Building) error {
		if b.ID <= last {
			t.Errorf("%q comes after %q", b.ID, last)
		}
		last = b.ID
		out[b.ID], _ = b.Number(building.FloorArea)
		return nil
	}))
	return out
}

func want(t testing.TB, got, want map[string]float64) {
	t.Helper()
	if d := cmp.Diff(want, got); d != "" {
		t.Errorf("buildings differ (-want +got):\n%s", d)
	}
}

func TestEveryFieldComesBack(t *testing.T) {
	t.Parallel()
	s, _ := setup(t)
	r := building.Record{Building: "=B \u00e4/1", Row: 7, SurveyDate: "2026-03-01"}
	for f := range building.NumFields {
		v := building.Value{Field: building.Field(f), Kind: building.Surveyed}
		switch building.Field(f).Info().Type {
		case building.Text:
			v.Text = fmt.Sprintf("text %d with \x00 and \xff", f)
		case building.Word:
			v.Text = building.Words(building.Field(f))[0]
		case building.Number:
			v.Number = 1.1 + float64(f)
		case building.YesNo:
			v.Number = float64(f % 2)
		case building.Year:
			v.Low, v.High = 1960, 1969
			v.Number = 1964.5
		}
		if f == int(building.MeteredHeat) {
			v.Kind = building.Metered
		}
		r.Values = append(r.Values, v)
	}
	load(t, s, "p", "a.csv", 1, r)
	b, records, err := s.Building(t.Context(), "p", r.Building)
	must(t, err)
	got := records[0]
	if got.Row != 7 || got.SurveyDate != "2026-03-01" || got.Sheet.File != "a.csv" || got.Sheet.Name != "Sheet 1" || got.Sheet.Columns[building.FloorArea] != "C" {
		t.Errorf("origin is lost: %+v of %+v", got, got.Sheet)
	}
	for i := range r.Values {
		r.Values[i].Text = clean(r.Values[i].Text)
	}
	if d := cmp.Diff(r.Values, got.Values); d != "" {
		t.Errorf("values differ (-stored +read):\n%s", d)
	}
	if k, ok := b.Get(building.MeteredHeat); !ok || k.Kind != building.Metered {
		t.Errorf("metered heat: %+v", k)
	}
}

func TestLoadingAgainAndCorrecting(t *testing.T) {
	t.Parallel()
	s, _ := setup(t)
	load(t, s, "p", "a.csv", 1, area("A", 2, 100), area("B", 3, 200))
	if !load(t, s, "p", "renamed.csv", 1, area("A", 2, 999)) {
		t.Error("the same content under another name was loaded again")
	}
	load(t, s, "p", "b.csv", 2, area("C", 2, 300))
	want(t, all(t, s, "p"), map[string]float64{"A": 100, "B": 200, "C": 300})
	load(t, s, "p", "a.csv", 3, area("A", 2, 111))
	want(t, all(t, s, "p"), map[string]float64{"A": 111, "C": 300})
	fs, err := s.Findings(t.Context(), "p")
	must(t, err)
	if len(fs) != 2 {
		t.Errorf("%d findings, want one of each file that counts", len(fs))
	}
	sources, err := s.Sources(t.Context(), "p")
	must(t, err)
	if len(sources) != 2 || sources[0].File != "a.csv" || sources[1].File != "b.csv" {
		t.Errorf("sources: %+v", sources)
	}
	if n, err := s.Count(t.Context(), "p"); err != nil || n != 2 {
		t.Errorf("count %d, %v", n, err)
	}
}

func TestRolledBackLoadLeavesNothing(t *testing.T) {
	t.Parallel()
	s, _ := setup(t)
	load(t, s, "p", "a.csv", 1, area("A", 2, 100))
	ctx, cancel := context.WithCancel(t.Context())
	l, err := s.BeginLoad(ctx, "p")
	must(t, err)
	_, _, err = l.Source(ctx, File{Name: "a.csv", SHA256: [32]byte{9}, Date: "", Bytes: 1})
	must(t, err)
	sh := &building.Sheet{}
	must(t, l.Sheet(ctx, sh))
	r := area("Z", 2, 1)
	r.Sheet = sh
	must(t, l.Add(ctx, &r))
	cancel()
	if _, err := l.Commit(ctx); err == nil {
		t.Error("committed with a cancelled context")
	}
	l.Rollback()
	s2, err := Open(t.Context(), s.conn.Config().ConnString())
	must(t, err)
	defer s2.Close()
	want(t, all(t, s2, "p"), map[string]float64{"A": 100})
}

func loadAndWait(url string) {
	ctx := context.Background()
	s, err := Open(ctx, url)
	if err != nil {
		fmt.Println(err)
		os.Exit(1)
	}
	l, err := s.BeginLoad(ctx, "p")
	if err == nil {
		_, _, err = l.Source(ctx, File{Name: "a.csv", SHA256: [32]byte{7}, Date: "", Bytes: 1})
	}
	sh := &building.Sheet{}
	if err == nil {
		err = l.Sheet(ctx, sh)
	}
	for i := 0; i < 3*chunk && err == nil; i++ {
		r := area(fmt.Sprint(i), i, 1)
		r.Sheet = sh
		err = l.Add(ctx, &r)
	}
	if err != nil {
		fmt.Println(err)
		os.Exit(1)
	}
	fmt.Println("loading")
	time.Sleep(time.Hour)
}

func TestKilledLoadLeavesTheStoreAsBefore(t *testing.T) {
	t.Parallel()
	s, url := setup(t)
	load(t, s, "p", "a.csv", 1, area("A", 2, 100))
	cmd := exec.Command(os.Args[0])
	cmd.Env = append(os.Environ(), killVariable+"="+url)
	out, err := cmd.StdoutPipe()
	must(t, err)
	must(t, cmd.Start())
	buf := make([]byte, 300)
	n, _ := out.Read(buf)
	if got := string(buf[:n]); got != "loading\n" {
		t.Fatalf("the load says %q", got)
	}
	must(t, cmd.Process.Kill())
	_ = cmd.Wait() // killed
	want(t, all(t, s, "p"), map[string]float64{"A": 100})
	load(t, s, "p", "b.csv", 2, area("B", 2, 200)) // not blocked by the dead one
	want(t, all(t, s, "p"), map[string]float64{"A": 100, "B": 200})
}
