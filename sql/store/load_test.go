package store

import (
	"context"
	"errors"
	"fmt"
	"slices"
	"strings"
	"testing"
	"time"

	"github.com/google/go-cmp/cmp"

	"kelvinrow/estimate/building"
)

// begin starts a load with one source and one sheet.
func begin(t testing.TB, s *Store, portfolio, file string, content byte) (*Load, *building.Sheet) {
	t.Helper()
	l, err := s.BeginLoad(context.Background(), portfolio)
	must(t, err)
	_, _, err = l.Source(context.Background(), File{Name: file, SHA256: [32]byte{content}, Date: "2026-01-01", Bytes: 1})
	must(t, err)
	sh := &building.Sheet{File: file, Name: "S", FileDate: "2026-01-01"}
	must(t, l.Sheet(context.Background(), sh))
	return l, sh
}

func TestCallerMayReuseItsRecord(t *testing.T) {
	t.Parallel()
	s, _ := setup(t)
	l, sh := begin(t, s, "p", "a.csv", 1)
	defer l.Rollback()
	const n = 2*chunk + 17 // several batches, the last one not full
	r := building.Record{Sheet: sh, Values: make([]building.Value, 0, 2)}
	for i := range n {
		r.Building, r.Row = fmt.Sprintf("B%06d", i), i+2
		r.Values = append(r.Values[:0], building.Value{Field: building.FloorArea, Kind: building.Registered, Number: float64(i)})
		if i%3 == 0 {
			r.Values = append(r.Values, building.Value{Field: building.UseField, Kind: building.Certified, Text: "school"})
		}
		must(t, l.Add(t.Context(), &r))
	}
	sum, err := l.Commit(t.Context())
	must(t, err)
	if sum != (LoadSummary{Number: 1, Sources: 1, Records: n}) {
		t.Errorf("summary %+v", sum)
	}
	i := 0
	must(t, s.Buildings(t.Context(), "p", func(b *building.Building) error {
		area, _ := b.Number(building.FloorArea)
		k, ok := b.Get(building.UseField)
		if b.ID != fmt.Sprintf("B%06d", i) || area != float64(i) || ok != (i%3 == 0) || ok && (k.Text != "school" || k.Kind != building.Certified) {
			t.Fatalf("building %d comes back as %s with %g m2 and %+v", i, b.ID, area, k)
		}
		i++
		return nil
	}))
	if i != n {
		t.Errorf("%d buildings, want %d", i, n)
	}
}

func TestLoadsOfOnePortfolioWaitForEachOther(t *testing.T) {
	t.Parallel()
	s, url := setup(t)
	first, _ := begin(t, s, "p", "a.csv", 1)
	defer first.Rollback()
	other, err := Open(t.Context(), url)
	must(t, err)
	defer other.Close()
	l, err := other.BeginLoad(t.Context(), "q") // another portfolio's need not
	must(t, err)
	l.Rollback()
	began := make(chan error, 1)
	second := func() error {
		l, err := other.BeginLoad(context.Background(), "p")
		if err != nil {
			return err
		}
		defer l.Rollback()
		already, _, err := l.Source(context.Background(), File{Name: "b.csv", SHA256: [32]byte{1}, Date: "", Bytes: 1})
		if err == nil && !already {
			err = errors.New("does not see what the first load brought")
		}
		return err
	}
	go func() { began <- second() }()
	select {
	case err := <-began:
		t.Fatalf("a second load began in the middle of the first: %v", err)
	case <-time.After(200 * time.Millisecond):
	}
	_, err = first.Commit(t.Context())
	must(t, err)
	must(t, <-began)
}

func TestFailureOnTheWayFailsTheLoad(t *testing.T) {
	t.Parallel()
	s, _ := setup(t)
	l, sh := begin(t, s, "p", "a.csv", 1)
	bad := building.Record{Building: "B", Sheet: sh, Row: 5, Values: []building.Value{{Field: building.YearBuilt, Low: 1e9, High: 1e9}}}
	must(t, l.Add(t.Context(), &bad))
	for range 2 { // it stays failed
		if _, err := l.Commit(t.Context()); err == nil || !strings.Contains(err.Error(), "building B, row 5: year_built") {
			t.Errorf("got %v", err)
		}
	}
	l.Rollback()
	load(t, s, "p", "a.csv", 1, area("A", 2, 100)) // nothing of it is left
	want(t, all(t, s, "p"), map[string]float64{"A": 100})
}

func TestInputsHashIsOfTheBuildingsNotOfTheWayTheyCame(t *testing.T) {
	t.Parallel()
	s, _ := setup(t)
	hash := func(portfolio string) string {
		h, err := s.InputsHash(t.Context(), portfolio)
		must(t, err)
		return h
	}
	load(t, s, "p", "a.csv", 1, area("A", 2, 100))
	load(t, s, "p", "b.csv", 2, area("B", 2, 200))
	load(t, s, "q", "b.csv", 2, area("B", 9, 200))
	load(t, s, "q", "a.csv", 1, area("A", 9, 100))
	if hash("p") != hash("q") {
		t.Error("the order of loads changes the hash")
	}
	before := hash("p")
	load(t, s, "p", "a.csv", 3, area("A", 2, 101))
	if hash("p") == before {
		t.Error("another floor area does not change the hash")
	}
	if hash("nothing") == before {
		t.Error("an empty portfolio has the hash of a full one")
	}
}

func TestMistypedIDsFindTheirNeighbours(t *testing.T) {
	t.Parallel()
	s, _ := setup(t)
	load(t, s, "p", "a.csv", 1, area("B-0012", 2, 1), area("B-0013", 3, 1), area("B-1200", 4, 1), area("School North", 5, 1), area("%_", 6, 1))
	for _, c := range []struct {
		id   string
		near []string
	}{
		{"b12", []string{"B-0012", "B-0013"}}, // the nearest first
		{"B/0013", []string{"B-0013", "B-0012"}},
		{"school-nroth", []string{"School North"}},
		{"quite another", nil},
		{"%", nil},
		{"", nil},
	} {
		_, _, err := s.Building(t.Context(), "p", c.id)
		var e *NotFoundError
		if !errors.As(err, &e) {
			t.Errorf("%q: %v", c.id, err)
			continue
		}
		if !slices.Equal(e.Near, c.near) {
			t.Errorf("%q: near %q, want %q", c.id, e.Near, c.near)
		}
	}
}

func TestDistance(t *testing.T) {
	t.Parallel()
	for _, c := range []struct {
		a, b string
		want int
	}{{"", "", 0}, {"abc", "", 3}, {"kitten", "sitting", 3}, {"flaw", "lawn", 2}, {"same", "same", 0}} {
		if got := distance([]rune(c.a), []rune(c.b)); got != c.want {
			t.Errorf("%s, %s: %d, want %d", c.a, c.b, got, c.want)
		}
		if got := distance([]rune(c.b), []rune(c.a)); got != c.want {
			t.Errorf("%s, %s: %d, want %d", c.b, c.a, got, c.want)
		}
	}
}

func TestSeveralKindsInARow(t *testing.T) {
	t.Parallel()
	s, _ := setup(t)
	r := building.Record{Building: "B", Row: 2}
	for i := range building.NumKinds {
		for range i + 1 {
			r.Values = append(r.Values, building.Value{Field: building.FloorArea + building.Field(len(r.Values)), Kind: building.Kind(i)})
		}
	}
	for i := range r.Values {
		if r.Values[i].Field.Info().Type == building.Word {
			r.Values[i].Text = building.Words(r.Values[i].Field)[0]
		} else {
			r.Values[i].Number = float64(i)
		}
	}
	load(t, s, "p", "a.csv", 1, r)
	_, records, err := s.Building(t.Context(), "p", "B")
	must(t, err)
	if d := cmp.Diff(r.Values, records[0].Values); d != "" {
		t.Errorf("values differ (-stored +read):\n%s", d)
	}
}
