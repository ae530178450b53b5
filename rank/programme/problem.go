package programme

import (
	"context"
	"errors"
	"fmt"
	"math"
	"math/bits"
	"runtime"
	"slices"
	"strings"

	"golang.org/x/sync/errgroup"
)

// chunk is how many buildings are worked on at a time. Sums are made by chunk and
// then over the chunks in order, so that they do not depend on the workers.
const chunk = 2048

// problem is what is to be decided, checked and made ready: buildings by id, their
// options sorted by cost, limits on a grid where sums are exact.
type problem struct {
	buildings []Building
	order     []int32 // the buildings by id
	opts      []option
	first     []int32 // building i has opts[first[i]:first[i+1]]
	must      []bool
	group     []int32
	groups    []group // groups[0] is all districts without a share
	pool      float64 // money not kept for any district

	budgets  []float64 // each year's own
	limit    []float64 // money that may be spent in year y, or up to year y with carry
	total    float64   // over all years
	slack    float64   // by how much what is left of total may be too little, through rounding
	carry    bool
	grid     float64
	masks    []uint64 // sets of capacities that options need; masks[0] is none
	capacity []Capacity
	workers  int
}

type group struct {
	name     string
	share    float64
	reserved float64
}

func (p *problem) years() int             { return len(p.budgets) }
func (p *problem) size() int              { return len(p.order) }
func (p *problem) id(i int) string        { return p.buildings[p.order[i]].ID }
func (p *problem) options(i int) []option { return p.opts[p.first[i]:p.first[i+1]] }
func (p *problem) option(i int, j int32) *option {
	return &p.opts[p.first[i]+j]
}

// each calls f for chunks of the buildings, several at a time.
func (p *problem) each(ctx context.Context, f func(c, from, to int)) error {
	g, ctx := errgroup.WithContext(ctx)
	g.SetLimit(p.workers)
	for c := 0; c*chunk < p.size(); c++ {
		g.Go(func() error {
			if err := ctx.Err(); err != nil {
				return err
			}
			f(c, c*chunk, min((c+1)*chunk, p.size()))
			return nil
		})
	}
	return g.Wait()
}

func (p *problem) chunks() int { return (p.size() + chunk - 1) / chunk }

// faults collects what is wrong; beyond a few of a kind it only counts.
type faults struct {
	errs  []error
	count map[string]int
}

func (f *faults) add(kind, format string, args ...any) {
	const most = 20
	if f.count == nil {
		f.count = map[string]int{}
	}
	f.count[kind]++
	if n := f.count[kind]; n <= most {
		f.errs = append(f.errs, fmt.Errorf(format, args...))
	} else if n == most+1 {
		f.errs = append(f.errs, fmt.Errorf("and more of these: %s", kind))
	}
}

func (f *faults) err() error { return errors.Join(f.errs...) }

func finite(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }

func newProblem(ctx context.Context, buildings []Building, opt Options, strict bool) (*problem, error) {
	p := &problem{
		buildings: buildings, carry: opt.CarryOver, capacity: opt.Capacities, workers: opt.Workers,
		budgets: slices.Clone(opt.Budgets),
	}
	if p.workers <= 0 {
		p.workers = runtime.GOMAXPROCS(0)
	}
	var f faults
	if len(buildings) > math.MaxInt32 {
		f.add("size", "%d buildings are too many", len(buildings))
		return nil, f.err()
	}
	p.sort(&f)
	p.checkOptions(&f, opt)
	p.checkBuildings(&f)
	if err := f.err(); err != nil {
		return nil, err // the rest would be misled
	}
	p.layGrid(strict)
	p.reserve(opt)
	if err := p.gather(ctx); err != nil {
		return nil, fmt.Errorf("programme of %d buildings: %w", len(buildings), err)
	}
	p.checkMusts(&f)
	return p, f.err()
}

func (p *problem) sort(f *faults) {
	p.order = make([]int32, len(p.buildings))
	for i := range p.order {
		p.order[i] = int32(i)
	}
	slices.SortFunc(p.order, func(a, b int32) int { return strings.Compare(p.buildings[a].ID, p.buildings[b].ID) })
	for i := 1; i < len(p.order); i++ {
		if p.id(i) == p.id(i-1) && (i < 2 || p.id(i) != p.id(i-2)) {
			f.add("buildings twice", "building %q is there more than once", p.id(i))
		}
	}
}

func (p *problem) checkOptions(f *faults, opt Options) {
	if len(opt.Budgets) == 0 {
		f.add("budget", "no year has a budget")
	}
	sum := 0.0
	for y, b := range opt.Budgets {
		sum += b
		if !finite(b) || b < 0 || !finite(sum) {
			f.add("budget", "budget of year %d is %g: it must be a number from 0", y+1, b)
		}
	}
	if len(opt.Capacities) > 64 {
		f.add("capacity", "%d capacities are too many: at most 64", len(opt.Capacities))
	}
	for c, k := range opt.Capacities {
		if k.Buildings < 0 {
			f.add("capacity", "capacity %s is %d: it must be 0 or more", p.capacityName(c), k.Buildings)
		}
	}
	known := map[string]bool{}
	for i := range p.buildings {
		known[p.buildings[i].District] = true
	}
	sum = 0
	for _, name := range sortedKeys(opt.MinShare) {
		share := opt.MinShare[name]
		if !finite(share) || share < 0 || share > 1 {
			f.add("share", "share of district %q is %g: it must be from 0 to 1", name, share)
			continue
		}
		sum += share
		if share > 0 && !known[name] {
			f.add("share", "district %q has a share of the money, but no building", name)
		}
	}
	// Shares are given in decimals: ten times 0.1 is 1.
	if sum > 1+1e-9 {
		f.add("share", "shares of the districts sum to %.4g: they must not exceed 1", sum)
	}
}

func sortedKeys(m map[string]float64) []string {
	out := make([]string, 0, len(m))
	for k := range m {
		out = append(out, k)
	}
	slices.Sort(out)
	return out
}

func (p *problem) capacityName(c int) string {
	if n := p.capacity[c].Name; n != "" {
		return fmt.Sprintf("%q", n)
	}
	return fmt.Sprint(c + 1)
}

func (p *problem) checkBuildings(f *faults) {
	p.must = make([]bool, p.size())
	for i := range p.order {
		b := &p.buildings[p.order[i]]
		p.must[i] = b.Must || len(b.MustPackages) > 0
		switch {
		case p.must[i] && b.Never:
			f.add("buildings on both lists", "building %q must be done and must never be done", b.ID)
		case p.must[i] && len(b.Packages) == 0:
			f.add("must-do buildings without package", "building %q must be done, but has no package", b.ID)
		}
		for _, j := range b.MustPackages {
			if j < 0 || j >= len(b.Packages) {
				f.add("packages that are not there", "building %q must get package %d, but has packages 0 to %d", b.ID, j, len(b.Packages)-1)
			}
		}
		for j, pk := range b.Packages {
			if !finite(pk.Cost) || pk.Cost < 0 {
				f.add("costs", "package %d of building %q costs %g: it must be a number from 0", j, b.ID, pk.Cost)
			}
			if !finite(pk.Value) {
				f.add("values", "package %d of building %q is worth %g: it must be a number", j, b.ID, pk.Value)
			}
		}
	}
}

// layGrid finds the grid of costs: a power of two so fine that the sum of all
// budgets is at most 2^50 of it, so that sums and differences of money on the grid
// are exact in any order. Costs are rounded to it.
//
// Where that changes any, sums on the grid and floating-point sums of the costs
// differ by at most n (2^-53 sum + grid/2) for n costs (N. Higham, Accuracy and
// Stability of Numerical Algorithms, 2nd ed. 2002, 4.2). Limits are raised by more
// than three times that, so that nothing that fits is lost; or, if strict, lowered,
// so that nothing is exceeded. It is far below what matters: 4e-10 of the money for
// 100,000 buildings.
func (p *problem) layGrid(strict bool) {
	sum := sumOf(p.budgets)
	p.grid = math.SmallestNonzeroFloat64
	if sum > 0 {
		_, exp := math.Frexp(sum)
		p.grid = math.Ldexp(1, max(exp-50, -1074))
	}
	exact := true
	for i := range p.buildings {
		for _, pk := range p.buildings[i].Packages {
			exact = exact && (pk.Cost > sum || p.near(pk.Cost) == pk.Cost)
		}
	}
	for _, b := range p.budgets {
		exact = exact && p.down(b) == b
	}
	guard := 0.0
	if !exact {
		guard = 2 * float64(p.size()+1) * p.grid
		p.slack = 2 * guard * float64(p.years())
	}
	p.limit = make([]float64, p.years())
	for y, b := range p.budgets {
		p.limit[y] = p.down(b) + guard
		if strict {
			p.limit[y] = max(0, p.down(b)-guard)
		}
		p.total += p.limit[y]
	}
	if p.carry {
		for y := 1; y < len(p.limit); y++ {
			p.limit[y] += p.limit[y-1]
		}
	}
}

func sumOf(xs []float64) float64 {
	sum := 0.0
	for _, x := range xs {
		sum += x
	}
	return sum
}

func (p *problem) near(x float64) float64 { return math.RoundToEven(x/p.grid) * p.grid }
func (p *problem) down(x float64) float64 { return math.Floor(x/p.grid) * p.grid }

// reserve keeps money for districts.
func (p *problem) reserve(opt Options) {
	p.groups = []group{{}}
	place := map[string]int32{}
	p.pool = p.total
	sum := sumOf(p.budgets)
	for _, name := range sortedKeys(opt.MinShare) {
		share := opt.MinShare[name]
		if share == 0 {
			continue
		}
		r := float64(sum * share)
		// 0.1 of 30 is 3, though not in binary.
		if n := math.Round(r); math.Abs(r-n) < 1e-9*max(1, n) {
			r = n
		}
		r = min(p.down(r), p.pool)
		p.pool -= r
		place[name] = int32(len(p.groups))
		p.groups = append(p.groups, group{name, share, r})
	}
	p.group = make([]int32, p.size())
	for i := range p.group {
		p.group[i] = place[p.buildings[p.order[i]].District]
	}
}

// room is the most one building may cost.
func (p *problem) room() float64 {
	m := 0.0
	for _, l := range p.limit {
		m = max(m, l)
	}
	return m
}

// gather makes the options of all buildings.
func (p *problem) gather(ctx context.Context) error {
	room := p.room()
	masks := p.findMasks()
	type part struct {
		opts  []option
		first []int32
	}
	parts := make([]part, p.chunks())
	err := p.each(ctx, func(c, from, to int) {
		var t part
		var some []option
		for i := from; i < to; i++ {
			b := &p.buildings[p.order[i]]
			some = some[:0]
			if !p.must[i] {
				some = append(some, nothing)
			}
			for j, pk := range b.Packages {
				if b.Never || pk.Cost > room || len(b.MustPackages) > 0 && !slices.Contains(b.MustPackages, j) {
					continue
				}
				if cost := p.near(pk.Cost); cost <= room {
					some = append(some, option{cost, pk.Value, int32(j), masks[p.needs(pk.Measures)]})
				}
			}
			t.first = append(t.first, int32(len(t.opts)))
			t.opts = append(t.opts, undominated(some, p.masks)...)
		}
		parts[c] = t
	})
	if err != nil {
		return err
	}
	n := 0
	for _, t := range parts {
		n += len(t.opts)
	}
	p.opts = make([]option, 0, n)
	p.first = make([]int32, 0, p.size()+1)
	for _, t := range parts {
		for _, k := range t.first {
			p.first = append(p.first, int32(len(p.opts))+k)
		}
		p.opts = append(p.opts, t.opts...)
	}
	p.first = append(p.first, int32(len(p.opts)))
	return nil
}

// needs returns the set of capacities that measures take.
func (p *problem) needs(measures uint64) uint64 {
	var m uint64
	for c := range p.capacity {
		if p.capacity[c].Measures&measures != 0 {
			m |= 1 << c
		}
	}
	return m
}

// findMasks numbers the sets of capacities that packages need, smallest first.
func (p *problem) findMasks() map[uint64]int32 {
	number := map[uint64]int32{0: 0}
	p.masks = []uint64{0}
	if len(p.capacity) == 0 {
		return number
	}
	seen := map[uint64]bool{}
	for i := range p.buildings {
		for _, pk := range p.buildings[i].Packages {
			if !seen[pk.Measures] {
				seen[pk.Measures] = true
				if m := p.needs(pk.Measures); number[m] == 0 && m != 0 {
					number[m] = -1
					p.masks = append(p.masks, m)
				}
			}
		}
	}
	slices.SortFunc(p.masks, func(a, b uint64) int {
		if d := bits.OnesCount64(a) - bits.OnesCount64(b); d != 0 {
			return d
		}
		if a < b {
			return -1
		}
		return 1
	})
	for k, m := range p.masks {
		number[m] = int32(k)
	}
	return number
}

// checkMusts names every limit that the must-do buildings break even at their
// cheapest.
func (p *problem) checkMusts(f *faults) {
	sum := 0.0
	group := make([]float64, len(p.groups))
	always := make([]int, len(p.capacity)) // buildings that need it whatever they get
	for i := range p.order {
		if !p.must[i] {
			continue
		}
		opts := p.options(i)
		if len(opts) == 0 {
			f.add("must-do buildings that cost too much", "building %q must be done, but costs more than any year's money", p.id(i))
			continue
		}
		sum += opts[0].cost
		group[p.group[i]] += opts[0].cost
		all := ^uint64(0)
		for _, o := range opts {
			all &= p.masks[o.mask]
		}
		for c := range always {
			always[c] += int(all >> c & 1)
		}
	}
	if sum > p.total {
		f.add("budget", "must-do buildings cost %.10g at least, the budgets sum to %.10g", sum, sumOf(p.budgets))
	} else if over := p.pooled(group); over > p.pool {
		f.add("share", "must-do buildings need %.10g beside the money kept for districts, of which there is %.10g", over, p.pool)
	}
	for c, n := range always {
		if most := p.capacity[c].Buildings * p.years(); n > most {
			f.add("capacity", "must-do buildings take capacity %s %d times at least, in all years there is %d", p.capacityName(c), n, most)
		}
	}
}

// pooled is how much is spent of the money not kept for any district.
func (p *problem) pooled(spent []float64) float64 {
	sum := 0.0
	for g, x := range spent {
		sum += max(0, x-p.groups[g].reserved)
	}
	return sum
}
