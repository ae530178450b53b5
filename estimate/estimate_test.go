package estimate

import (
	"context"
	"errors"
	"fmt"
	"math"
	"testing"

	"github.com/google/go-cmp/cmp"

	"kelvinrow/estimate/building"
	"kelvinrow/estimate/caution"
	"kelvinrow/estimate/result"
	"kelvinrow/estimate/state"
)

func source(bs []*building.Building) Source {
	return func(yield func(*building.Building) error) error {
		for _, b := range bs {
			if err := yield(b); err != nil {
				return err
			}
		}
		return nil
	}
}

// many repeats the test buildings under new ids, so that several workers have
// something to do.
func many(n int) (out []*building.Building) {
	for i := range n {
		for _, b := range testBuildings() {
			c := *b
			c.ID = fmt.Sprintf("%s-%d", b.ID, i)
			out = append(out, &c)
		}
	}
	return out
}

func TestResultsDoNotDependOnTheNumberOfWorkers(t *testing.T) {
	b := testBasis(t)
	in := many(8)
	want, err := b.Estimate(t.Context(), 1, source(in), nil)
	if err != nil {
		t.Fatal(err)
	}
	for i := range want {
		if want[i].ID != in[i].ID {
			t.Fatalf("result %d is of %s, want %s: results must be in the order of the source", i, want[i].ID, in[i].ID)
		}
	}
	for _, workers := range []int{2, 3, 16} {
		got, err := b.Estimate(t.Context(), workers, source(in), nil)
		if err != nil {
			t.Fatal(err)
		}
		// Exactly: cmp compares floating-point numbers with ==.
		if d := cmp.Diff(want, got); d != "" {
			t.Errorf("%d workers differ from one:\n%s", workers, d)
		}
	}
}

func TestEstimateStops(t *testing.T) {
	b := testBasis(t)
	ctx, cancel := context.WithCancel(t.Context())
	cancel()
	if _, err := b.Estimate(ctx, 2, source(many(3)), nil); !errors.Is(err, context.Canceled) {
		t.Errorf("cancelled: %v", err)
	}
	broken := errors.New("broken")
	_, err := b.Estimate(t.Context(), 2, func(func(*building.Building) error) error { return broken }, nil)
	if !errors.Is(err, broken) {
		t.Errorf("broken source: %v", err)
	}
}

func TestBuildingWithoutSizeSaysWhy(t *testing.T) {
	b := testBasis(t)
	r := b.Evaluate(testBuilding("X", values{building.YearBuilt: 1950}))
	if r.Failed == "" {
		t.Error("a building without any size was estimated")
	}
}

// TestInvariants holds what must be true of any building whatever its data.
func TestInvariants(t *testing.T) {
	b := testBasis(t)
	applied := map[string]int{}
	for _, bl := range testBuildings() {
		r := b.Evaluate(bl)
		if r.Failed != "" {
			t.Errorf("%s: %s", r.ID, r.Failed)
			continue
		}
		shares := 0.0
		for _, s := range r.InputShare {
			shares += s
		}
		if math.Abs(shares-1) > 1e-12 {
			t.Errorf("%s: input shares add up to %v", r.ID, shares)
		}
		lost := 0.0
		for p, q := range r.LossByPathKWh {
			if q < 0 {
				t.Errorf("%s: loses %g kWh by %s", r.ID, q, state.Path(p))
			}
			lost += q
		}
		if r.NeedKWh <= 0 || r.NeedKWh > lost {
			t.Errorf("%s: needs %g kWh of the %g it loses", r.ID, r.NeedKWh, lost)
		}
		if r.DesignLoadW <= 0 {
			t.Errorf("%s: design load %g W", r.ID, r.DesignLoadW)
		}
		for i, m := range r.Measures {
			checkMeasure(t, &r, b.Measures[i].Terms.Key, &m)
			if m.Applies {
				applied[b.Measures[i].Terms.Key]++
			}
		}
	}
	for _, key := range b.Keys() {
		if applied[key] == 0 {
			t.Errorf("%s applies to no building: nothing is tested", key)
		}
	}
}

// paths are what a measure works on: it cannot save more than is lost there.
var paths = map[string][]state.Path{
	"outside-wall-insulation": {state.Wall, state.Bridge, state.Infiltration},
	"inside-wall-insulation":  {state.Wall, state.Infiltration},
	"cavity-filling":          {state.Wall, state.Infiltration},
	"attic-insulation":        {state.Roof, state.Infiltration},
	"flat-roof-insulation":    {state.Roof},
	"floor-insulation":        {state.Floor},
	"draught-sealing":         {state.Infiltration},
}

func checkMeasure(t *testing.T, r *result.Building, key string, m *result.Measure) {
	t.Helper()
	if !m.Applies {
		if m.Reason == "" {
			t.Errorf("%s: %s does not apply and does not say why", r.ID, key)
		}
		return
	}
	for what, v := range map[string]float64{"saving": m.SavingKWh, "cost": m.Cost, "NPV": m.NPV, "money": m.MoneyPerYear, "CO2": m.CO2Kg} {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			t.Errorf("%s: %s: %s is %g", r.ID, key, what, v)
		}
	}
	if m.SavingKWh <= 0 && m.Reason == "" {
		t.Errorf("%s: %s saves %g kWh and does not say why", r.ID, key, m.SavingKWh)
	}
	if m.Cost <= 0 || m.Quantity <= 0 {
		t.Errorf("%s: %s costs %g for a quantity of %g", r.ID, key, m.Cost, m.Quantity)
	}
	if m.UnderVentilated && !m.Cautions.Has(caution.Air) {
		t.Errorf("%s: %s leaves too little air and does not say so", r.ID, key)
	}
	if m.CompanionQuantity > 0 && m.UnderVentilated {
		t.Errorf("%s: %s brings ventilation along and still leaves too little air", r.ID, key)
	}
	if ps, ok := paths[key]; ok {
		lost := 0.0
		for _, p := range ps {
			lost += r.LossByPathKWh[p]
		}
		if m.NeedSavingKWh > lost {
			t.Errorf("%s: %s saves %g kWh of the %g lost by its paths", r.ID, key, m.NeedSavingKWh, lost)
		}
	}
}

// TestExplainAndEvaluateAgree holds explain and the run to the same numbers.
func TestExplainAndEvaluateAgree(t *testing.T) {
	b := testBasis(t)
	for _, bl := range testBuildings() {
		r := b.Evaluate(bl)
		e, err := b.Explain(bl)
		if err != nil {
			t.Fatal(err)
		}
		if e.HeatingNeedKWh != r.NeedKWh || e.DeliveredKWh != r.DeliveredKWh || e.DesignHeatLoadW != r.DesignLoadW {
			t.Errorf("%s: explain and the run differ", r.ID)
		}
		for i, m := range e.Measures {
			if m.Applies != r.Measures[i].Applies || m.Applies && *m.SavingKWh != r.Measures[i].SavingKWh {
				t.Errorf("%s: %s: explain and the run differ", r.ID, m.Measure)
			}
		}
	}
}

func BenchmarkEvaluate(b *testing.B) {
	basis := testBasis(b)
	in := testBuildings()
	for i := range b.N {
		basis.Evaluate(in[i%len(in)])
	}
	b.ReportMetric(float64(b.N)/b.Elapsed().Seconds(), "buildings/s")
}

func BenchmarkEstimate(b *testing.B) {
	basis := testBasis(b)
	in := many(20)
	for _, workers := range []int{1, 2} {
		b.Run(fmt.Sprintf("workers=%d", workers), func(b *testing.B) {
			for range b.N {
				if _, err := basis.Estimate(context.Background(), workers, source(in), nil); err != nil {
					b.Fatal(err)
				}
			}
			b.ReportMetric(float64(b.N*len(in))/b.Elapsed().Seconds(), "buildings/s")
		})
	}
}

// A hundred thousand buildings with all their measures; the source makes them as they
// are asked for, as the store does.
func BenchmarkEstimate100000(b *testing.B) {
	basis := testBasis(b)
	in := many(20)
	const n = 100_000
	stream := func(yield func(*building.Building) error) error {
		for i := range n {
			if err := yield(in[i%len(in)]); err != nil {
				return err
			}
		}
		return nil
	}
	for range b.N {
		if _, err := basis.Estimate(context.Background(), 2, stream, nil); err != nil {
			b.Fatal(err)
		}
	}
	b.ReportMetric(float64(b.N*n)/b.Elapsed().Seconds(), "buildings/s")
}

// A supply fan moves what an extract fan of its size moves, the other way: the
// pressure it makes has the other sign, the flows are the same (quadrature).
func TestSupplyOnlyIsExtractTurnedRound(t *testing.T) {
	b := testBasis(t)
	flows := func(kind string, f building.Field) result.Building {
		return b.Evaluate(testBuilding("x", values{
			building.UseField: "apartment block", building.YearBuilt: 1970, building.FloorArea: 800,
			building.VentilationField: kind, f: 900.0,
		}))
	}
	supply, extract := flows("supply fan", building.SupplyAirflow), flows("extract fan", building.ExtractAirflow)
	if supply.Ventilation != "supply fan" || supply.NeedKWh != extract.NeedKWh || supply.FansKWh != extract.FansKWh || supply.AirChangesPerH != extract.AirChangesPerH {
		t.Errorf("supply %g kWh, %g 1/h; extract %g kWh, %g 1/h", supply.NeedKWh, supply.AirChangesPerH, extract.NeedKWh, extract.AirChangesPerH)
	}
}
