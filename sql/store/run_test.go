package store

import (
	"context"
	"errors"
	"fmt"
	"math"
	"reflect"
	"strings"
	"testing"
	"time"

	"github.com/google/go-cmp/cmp"

	"kelvinrow/estimate/building"
	"kelvinrow/estimate/result"
)

// fill sets every field of a struct to a value of its own, so that a field that
// is added but not stored fails the test.
func fill(v reflect.Value, seed *int) {
	*seed++
	switch v.Kind() {
	case reflect.Struct:
		if v.Type() == reflect.TypeFor[time.Time]() {
			v.Set(reflect.ValueOf(time.Date(2026, 5, 4, 3, 2, *seed, 123456000, time.UTC)))
			return
		}
		for i := range v.NumField() {
			fill(v.Field(i), seed)
		}
	case reflect.Array, reflect.Slice:
		for i := range v.Len() {
			fill(v.Index(i), seed)
		}
	case reflect.String:
		v.SetString(fmt.Sprint("s", *seed))
	case reflect.Int, reflect.Int64:
		v.SetInt(int64(*seed))
	case reflect.Uint64:
		v.SetUint(uint64(*seed) | 1<<63)
	case reflect.Bool:
		v.SetBool(true)
	case reflect.Float64:
		v.SetFloat(1 / float64(*seed))
	default:
		panic("fill does not know " + v.Kind().String())
	}
}

func filledRun(portfolio string, measures int) *result.Run {
	seed := 0
	run := &result.Run{Measures: make([]string, measures), Files: make([]string, 2)}
	fill(reflect.ValueOf(run).Elem(), &seed)
	run.Portfolio = portfolio
	return run
}

func filledBuilding(id string, measures int) result.Building {
	b := result.Building{Measures: make([]result.Measure, measures)}
	seed := 0
	fill(reflect.ValueOf(&b).Elem(), &seed)
	b.ID = id
	return b
}

func TestRunComesBackExactly(t *testing.T) {
	t.Parallel()
	s, _ := setup(t)
	load(t, s, "p", "a.csv", 1, area("A", 2, 100))
	run := filledRun("p", 3)
	full := filledBuilding("B", 3)
	odd := filledBuilding("C", 3)
	odd.FansKWh, odd.NeedKWh = math.Copysign(0, -1), math.MaxFloat64
	odd.Measures[0] = result.Measure{Reason: "nothing to treat"}
	odd.Measures[1].PaybackYears, odd.Measures[1].NPV = math.Inf(1), math.Inf(-1)
	odd.Measures[2].Applies = false // and yet with figures
	odd.Measures[2].SavingKWh = math.Copysign(0, -1)
	nothing := result.Building{ID: "D", Measures: []result.Measure{{}, {Applies: true}, {}}}
	stored := []result.Building{{ID: "A", Failed: "no size"}, full, odd, nothing}
	must(t, s.SaveRun(t.Context(), run, nil, stored, nil))
	if run.Number != 1 {
		t.Errorf("run %d, want 1", run.Number)
	}
	got, buildings, err := s.Run(t.Context(), "p", 1)
	must(t, err)
	if d := cmp.Diff(run, got); d != "" {
		t.Errorf("run differs (-stored +read):\n%s", d)
	}
	if d := cmp.Diff(stored, buildings); d != "" {
		t.Errorf("buildings differ (-stored +read):\n%s", d)
	}
	if !math.Signbit(buildings[2].FansKWh) || !math.Signbit(buildings[2].Measures[2].SavingKWh) {
		t.Error("the sign of zero is lost")
	}
	runs, err := s.Runs(t.Context(), "p")
	must(t, err)
	if d := cmp.Diff([]result.Run{*run}, runs); d != "" {
		t.Errorf("runs (-stored +listed):\n%s", d)
	}
}

func TestRunIsThereWholeOrNotAtAll(t *testing.T) {
	t.Parallel()
	s, _ := setup(t)
	load(t, s, "p", "a.csv", 1, area("A", 2, 100))
	buildings := []result.Building{filledBuilding("A", 2)}
	unpublished := errors.New("no workbook")
	run := filledRun("p", 2)
	if err := s.SaveRun(t.Context(), run, nil, buildings, func() error { return unpublished }); !errors.Is(err, unpublished) {
		t.Errorf("a run that could not be published: %v", err)
	}
	if err := s.SaveRun(t.Context(), filledRun("p", 3), nil, buildings, nil); err == nil || !strings.Contains(err.Error(), "building A has 2 measures, the run 3") {
		t.Errorf("measures that are not the run's: %v", err)
	}
	if err := s.SaveRun(t.Context(), filledRun("p", 2), nil, append(buildings, buildings...), nil); err == nil {
		t.Error("one building twice in a run")
	}
	runs, err := s.Runs(t.Context(), "p")
	must(t, err)
	if len(runs) != 0 {
		t.Errorf("runs after three failures: %+v", runs)
	}
	for want := 1; want <= 2; want++ {
		must(t, s.SaveRun(t.Context(), run, nil, buildings, nil))
		if run.Number != want {
			t.Errorf("run %d, want %d", run.Number, want)
		}
	}
	if _, _, err := s.Run(t.Context(), "p", 3); err == nil {
		t.Error("a run that is not there was read")
	}
}

func TestRunIsStoredWhileALoadGoesOn(t *testing.T) {
	t.Parallel()
	s, url := setup(t)
	load(t, s, "p", "a.csv", 1, area("A", 2, 100))
	other, err := Open(t.Context(), url)
	must(t, err)
	defer other.Close()
	l, err := other.BeginLoad(t.Context(), "p")
	must(t, err)
	defer l.Rollback()
	ctx, cancel := context.WithTimeout(t.Context(), 20*time.Second)
	defer cancel()
	must(t, s.SaveRun(ctx, filledRun("p", 1), nil, []result.Building{{ID: "A"}}, nil))
}

func TestPrune(t *testing.T) {
	t.Parallel()
	s, _ := setup(t)
	for _, p := range []string{"p", "q"} {
		load(t, s, p, "a.csv", 1, area("A", 2, 100))
		for range 3 {
			must(t, s.SaveRun(t.Context(), filledRun(p, 1), nil, []result.Building{filledBuilding("A", 1)}, nil))
		}
	}
	numbers := func(portfolio string) (out []int) {
		runs, err := s.Runs(t.Context(), portfolio)
		must(t, err)
		for _, r := range runs {
			out = append(out, r.Number)
		}
		return out
	}
	for _, c := range []struct {
		keep, removed int
		left          []int
	}{{5, 0, []int{1, 2, 3}}, {2, 1, []int{2, 3}}, {0, 1, []int{3}}} {
		n, err := s.Prune(t.Context(), "p", c.keep)
		must(t, err)
		if got := numbers("p"); n != c.removed || !reflect.DeepEqual(got, c.left) {
			t.Errorf("keeping %d: removed %d, left %v; want %d, %v", c.keep, n, got, c.removed, c.left)
		}
	}
	if got := numbers("q"); len(got) != 3 {
		t.Errorf("runs of another portfolio: %v", got)
	}
	var n int
	must(t, s.conn.QueryRow(t.Context(), "select count(*) from kelvinrow.run_building where portfolio = 'p'").Scan(&n))
	if n != 1 {
		t.Errorf("%d estimates left, want those of one run", n)
	}
}

func TestEraseLeavesNothingOfABuilding(t *testing.T) {
	t.Parallel()
	s, _ := setup(t)
	secret := building.Record{Building: "Secret-1", Row: 3, Values: []building.Value{{Field: building.Street, Kind: building.Registered, Text: "Hidden Lane 7"}}}
	load(t, s, "p", "a.csv", 1, area("A", 2, 100), secret) // with a finding about row 3 of the sheet that names no building
	must(t, s.SaveRun(t.Context(), filledRun("p", 1), nil, []result.Building{filledBuilding("A", 1), filledBuilding("Secret-1", 1)}, nil))
	must(t, s.Erase(t.Context(), "p", "Secret-1"))
	must2 := func(n int, err error) int { must(t, err); return n }
	if n := must2(s.Count(t.Context(), "p")); n != 1 {
		t.Errorf("%d buildings left, want 1", n)
	}
	fs, err := s.Findings(t.Context(), "p")
	must(t, err)
	if len(fs) != 0 {
		t.Errorf("findings about the erased row: %v", fs)
	}
	_, buildings, err := s.Run(t.Context(), "p", 1)
	must(t, err)
	if len(buildings) != 1 || buildings[0].ID != "A" {
		t.Errorf("the run still has %d buildings", len(buildings))
	}
	var notFound *NotFoundError
	if err := s.Erase(t.Context(), "p", "Secret-1"); !errors.As(err, &notFound) {
		t.Errorf("erasing again: %v", err)
	}
}
