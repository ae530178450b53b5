// Package programme decides what to do within a budget: for each building one
// package of measures, or none, and the year it is done, so that as much as
// possible is saved.
//
// It is a multiple-choice knapsack: P. Sinha and A. Zoltners, The multiple-choice
// knapsack problem, Operations Research 27 (1979) 503-515; H. Kellerer,
// U. Pferschy and D. Pisinger, Knapsack Problems (2004), chapter 11. A package is
// judged as a whole, so that savings that do not add up need not.
//
// Left out: prices that change with the year, what a saving is worth earlier or
// later, and packages done in parts over several years.
package programme

import (
	"context"
	"fmt"
	"slices"
)

// Package is a set of measures done together on one building. Cost and Value are
// in any units, the same for all: money, and whatever is to be had most of.
type Package struct {
	Cost  float64
	Value float64
	// Measures is the set of measures in it: bit i for measure i. Only capacities
	// look at it.
	Measures uint64
}

// Building is one building and what may be done there. A package that costs more
// and brings no more than another of the same building, or than doing nothing, is
// never chosen, unless it needs less of a limited capacity.
type Building struct {
	ID       string // unique
	District string
	Packages []Package
	// Must asks for one of the packages in any case.
	Must bool
	// MustPackages names the packages one of which must be done; it implies Must.
	MustPackages []int
	// Never asks for nothing to be done.
	Never bool
}

// Capacity says how many buildings a year may get any of some measures, as there
// are only so many who can do them.
type Capacity struct {
	Name      string // for messages
	Measures  uint64 // bit i for measure i
	Buildings int    // at most, in each year
}

// Options is what holds for the programme as a whole.
type Options struct {
	// Budgets is the money of each year. It is never exceeded: the floating-point
	// sum of the costs of a year's choices, in the order of Plan.Choices, is at most
	// its budget.
	Budgets []float64
	// CarryOver lets money not spent in a year be spent in a later one. Then what is
	// spent up to any year is at most what the budgets up to it sum to.
	CarryOver bool
	// MinShare keeps a share of the money of all years for the buildings of a
	// district: others never spend it. What the district cannot use of it, as
	// nothing costs as little or nothing is left to do, is not spent.
	MinShare   map[string]float64
	Capacities []Capacity
	// Workers is how many work at the same time; 0 means one for each processor. The
	// plan does not depend on it.
	Workers int
}

// Choice is a package of a building and the year it is done; all are indices, the
// first year is 0.
type Choice struct {
	Building, Package, Year int
}

// District is what a district with a share of the money gets.
type District struct {
	Name     string
	Reserved float64 // money kept for it
	Cost     float64 // money spent there
}

// Plan is a programme.
type Plan struct {
	Choices   []Choice   // by building id
	Cost      []float64  // by year, added up in the order of Choices
	Districts []District // those with a share, by name
	Value     float64
	// Bound is what no programme within the same limits can exceed: the value if
	// packages could be done in parts (the linear relaxation, or its Lagrangian dual
	// where there are capacities).
	Bound float64
	// Gap is the part of Bound that Value falls short of it.
	Gap float64
	// Optimal tells that a search through all cases that could be better has found
	// none. Where it is false the plan may still be the best.
	Optimal bool
	// MarginalValue is, for each year, what one more unit of money in that year's
	// budget would add to Bound. It is 0 where money is left.
	MarginalValue []float64
}

// enough is the gap below which no more time is spent on improving a plan.
const enough = 1e-3

// Solve decides a programme. Wishes that cannot all be granted are an error that
// names all it found. Ties go to the building whose id comes first and then to the
// cheaper package; the order of the buildings does not matter.
//
// Buildings climb the upper left convex hull of their packages, the step that
// brings most for its money first (Sinha and Zoltners 1979). Must-do buildings are
// placed in years first, then the others, most value for money earliest. Where
// more than a thousandth is missing to the bound, single years are solved anew by
// dynamic programming over the core (Kellerer, Pferschy and Pisinger 2004, 11.4.2),
// pairs of buildings change places, and small cases are searched through.
func Solve(ctx context.Context, buildings []Building, opt Options) (*Plan, error) {
	var plan *Plan
	for _, strict := range []bool{false, true} {
		var err error
		if plan, err = solve(ctx, buildings, opt, strict); err != nil {
			return nil, err
		}
		if plan.within(opt) {
			break // nearly always: otherwise a budget is exceeded by its last bits
		}
	}
	return plan, nil
}

// within reports whether the budgets are held to the last bit.
func (p *Plan) within(opt Options) bool {
	cost, budget := 0.0, 0.0
	for y, b := range opt.Budgets {
		if !opt.CarryOver {
			cost, budget = 0, 0
		}
		cost += p.Cost[y]
		budget += b
		if cost > budget {
			return false
		}
	}
	return true
}

func solve(ctx context.Context, buildings []Building, opt Options, strict bool) (*Plan, error) {
	p, err := newProblem(ctx, buildings, opt, strict)
	if err != nil {
		return nil, err
	}
	r, err := p.relax(ctx)
	if err != nil {
		return nil, fmt.Errorf("programme of %d buildings: %w", len(buildings), err)
	}
	s := newSchedule(p)
	if err := s.placeMusts(); err != nil {
		return nil, err
	}
	pick := p.pick(r)
	even := s.clone()
	s.place(pick, false)
	s.fill()
	if p.years() > 1 && r.gap(s.value()) > enough {
		even.place(pick, true)
		even.fill()
		if even.value() > s.value() {
			s = even
		}
	}
	optimal, err := s.improve(ctx, r)
	if err != nil {
		return nil, fmt.Errorf("programme of %d buildings: %w", len(buildings), err)
	}
	s.compact()
	s.arrange()
	return s.plan(r, optimal), nil
}

// plan says what was decided.
func (s *schedule) plan(r *relaxation, optimal bool) *Plan {
	p := s.p
	out := &Plan{
		Cost: make([]float64, p.years()), MarginalValue: slices.Clone(r.marginal),
		Bound: r.bound, Optimal: optimal,
	}
	group := make([]float64, len(p.groups))
	for i := range p.order {
		o := p.option(i, s.choice[i])
		if o.pack < 0 {
			continue
		}
		b := int(p.order[i])
		pack := p.buildings[b].Packages[o.pack]
		out.Choices = append(out.Choices, Choice{b, int(o.pack), int(s.year[i])})
		out.Cost[s.year[i]] += pack.Cost
		out.Value += pack.Value
		group[p.group[i]] += pack.Cost
	}
	for g := 1; g < len(p.groups); g++ {
		out.Districts = append(out.Districts, District{p.groups[g].name, p.groups[g].reserved, group[g]})
	}
	// The two are sums of different numbers: where they are equal, rounding may say
	// otherwise.
	out.Bound = max(out.Bound, out.Value)
	if out.Bound != out.Value {
		out.Gap = (out.Bound - out.Value) / max(abs(out.Bound), abs(out.Value))
	}
	return out
}

func abs(x float64) float64 {
	if x < 0 {
		return -x
	}
	return x
}
