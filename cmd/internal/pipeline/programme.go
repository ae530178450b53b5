package pipeline

import (
	"cmp"
	"context"
	"errors"
	"fmt"
	"maps"
	"slices"
	"strings"

	"kelvinrow/estimate"
	"kelvinrow/estimate/result"
	"kelvinrow/rank"
	"kelvinrow/rank/programme"
	"kelvinrow/rank/workbook"
)

// ProgrammeOptions says what to do with how much money; no budgets, no programme.
type ProgrammeOptions struct {
	Budgets     []float64
	CarryOver   bool
	By          rank.Yardstick // rank.Energy, rank.CO2 or rank.NPV
	Must, Never []string       // building ids
	Shares      map[string]float64
	Capacity    map[string]int // buildings a year by measure key
}

// worth is what packages are valued by.
func worth(by rank.Yardstick) estimate.Worth {
	switch by {
	case rank.CO2:
		return func(k *result.Package) float64 { return k.CO2Kg }
	case rank.NPV:
		return func(k *result.Package) float64 { return k.NPV }
	}
	return func(k *result.Package) float64 { return k.SavingKWh }
}

// decide makes the programme from the packages of the buildings.
func decide(ctx context.Context, o *ProgrammeOptions, keys []string, buildings []result.Building, workers int) (*workbook.Programme, error) {
	value := worth(o.By)
	index := make(map[string]int, len(buildings))
	in := make([]programme.Building, len(buildings))
	for i := range buildings {
		b := &buildings[i]
		index[b.ID] = i
		in[i] = programme.Building{ID: b.ID, District: b.District}
		for k := range b.Packages {
			if p := &b.Packages[k]; p.Set != 0 {
				in[i].Packages = append(in[i].Packages, programme.Package{Cost: p.Cost, Value: value(p), Measures: p.Set})
			}
		}
	}
	opt := programme.Options{Budgets: o.Budgets, CarryOver: o.CarryOver, MinShare: o.Shares, Workers: workers}
	var problems []error
	var wishes []string
	mark := func(ids []string, what, wish string, set func(*programme.Building)) {
		for _, id := range ids {
			i, ok := index[id]
			if !ok {
				problems = append(problems, fmt.Errorf("%s: there is no building %q", what, id))
				continue
			}
			set(&in[i])
		}
		if len(ids) > 0 {
			wishes = append(wishes, fmt.Sprintf("%s: %s.", wish, strings.Join(ids, ", ")))
		}
	}
	mark(o.Must, "must", "Done in any case", func(b *programme.Building) { b.Must = true })
	mark(o.Never, "never", "Left alone", func(b *programme.Building) { b.Never = true })
	for _, key := range slices.Sorted(maps.Keys(o.Capacity)) {
		m := slices.Index(keys, key)
		if m < 0 {
			problems = append(problems, fmt.Errorf("capacity: there is no measure %q; there are %s", key, strings.Join(keys, ", ")))
			continue
		}
		opt.Capacities = append(opt.Capacities, programme.Capacity{Name: key, Measures: 1 << m, Buildings: o.Capacity[key]})
		wishes = append(wishes, fmt.Sprintf("At most %d buildings a year with %s.", o.Capacity[key], strings.ReplaceAll(key, "-", " ")))
	}
	for _, district := range slices.Sorted(maps.Keys(o.Shares)) {
		if !slices.ContainsFunc(buildings, func(b result.Building) bool { return b.District == district }) {
			problems = append(problems, fmt.Errorf("share: no building is in the district %q", district))
		}
		wishes = append(wishes, fmt.Sprintf("At least %.3g %% of the money is kept for %s.", 100*o.Shares[district], district))
	}
	if err := errors.Join(problems...); err != nil {
		return nil, err
	}
	plan, err := programme.Solve(ctx, in, opt)
	if err != nil {
		return nil, err
	}
	out := &workbook.Programme{
		By: o.By, Budgets: o.Budgets, Wishes: wishes, Value: plan.Value, Bound: plan.Bound, Gap: plan.Gap, Margins: plan.MarginalValue,
	}
	for _, c := range plan.Choices {
		b := &buildings[c.Building]
		set := in[c.Building].Packages[c.Package].Measures
		k := slices.IndexFunc(b.Packages, func(p result.Package) bool { return p.Set == set })
		out.Chosen = append(out.Chosen, workbook.Chosen{Year: c.Year + 1, Building: c.Building, Package: b.Packages[k]})
	}
	slices.SortStableFunc(out.Chosen, func(a, b workbook.Chosen) int {
		// What costs nothing brings most for its money.
		return cmp.Or(cmp.Compare(a.Year, b.Year),
			cmp.Compare(value(&b.Package)*a.Package.Cost, value(&a.Package)*b.Package.Cost),
			cmp.Compare(buildings[a.Building].ID, buildings[b.Building].ID))
	})
	curve, err := programme.Curve(ctx, in, curvePoints)
	if err != nil {
		return nil, err
	}
	for _, c := range curve {
		out.Curve = append(out.Curve, workbook.CurvePoint{Budget: c.Budget, Value: c.Value})
	}
	return out, nil
}

// curvePoints is how many points the curve of budgets has.
const curvePoints = 25
