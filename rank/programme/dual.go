package programme

import (
	"context"
	"math"
	"slices"
)

// The dual is solved to within this part of the bound, or as far as so many rounds
// go. Prices that are not the best give a bound that is too high, but still one.
const (
	dualTolerance = 1e-6
	dualRounds    = 300
)

// kind is the years that have the same budget: in the relaxation they are alike.
type kind struct {
	year   int // the first of them
	number float64
	money  float64 // of all of them
}

// lagrangian has the limits taken into the objective, at prices: those of money
// by kind of year, of capacities by kind of year, and of the money of each group.
//
// Source: M. Fisher, The Lagrangian relaxation method for solving integer
// programming problems, Management Science 27 (1981) 1-18. As each building by
// itself has no gap between its best package and its best mix of packages, the
// least bound is that of the linear relaxation (A. Geoffrion, 1974).
type lagrangian struct {
	p     *problem
	kinds []kind
	of    []int // kind of each year
	limit []float64
}

func (l *lagrangian) moneyRow(k int) int   { return k }
func (l *lagrangian) slotRow(k, c int) int { return len(l.kinds)*(1+c) + k }
func (l *lagrangian) groupRow(g int) int   { return len(l.kinds)*(1+len(l.p.capacity)) + g }

func (p *problem) lagrangian() *lagrangian {
	l := &lagrangian{p: p, of: make([]int, p.years())}
	for y, b := range p.limit {
		k := -1
		if !p.carry {
			k = slices.IndexFunc(l.kinds, func(k kind) bool { return p.limit[k.year] == b })
		}
		if k < 0 {
			k = len(l.kinds)
			l.kinds = append(l.kinds, kind{year: y})
		}
		l.of[y] = k
		l.kinds[k].number++
		l.kinds[k].money += b
	}
	rows := len(l.kinds) * (1 + len(p.capacity))
	if len(p.groups) > 1 {
		rows += len(p.groups)
	}
	l.limit = make([]float64, rows)
	for k, kd := range l.kinds {
		l.limit[l.moneyRow(k)] = kd.money + p.slack
		for c := range p.capacity {
			l.limit[l.slotRow(k, c)] = float64(p.capacity[c].Buildings) * kd.number
		}
	}
	return l
}

// prices spreads row prices out: the price of money by kind and group, and of
// capacities by kind and mask.
func (l *lagrangian) prices(u []float64) (money, slots [][]float64) {
	p := l.p
	money, slots = make([][]float64, len(l.kinds)), make([][]float64, len(l.kinds))
	for k := range l.kinds {
		base := u[l.moneyRow(k)]
		if p.carry { // what is spent now counts in all later years too
			for later := k + 1; later < len(l.kinds); later++ {
				base += u[l.moneyRow(later)]
			}
		}
		money[k] = make([]float64, len(p.groups))
		for g := range money[k] {
			money[k][g] = base
			if len(p.groups) > 1 {
				money[k][g] += u[l.groupRow(g)]
			}
		}
		slots[k] = make([]float64, len(p.masks))
		for m, mask := range p.masks {
			for c := range p.capacity {
				if mask>>c&1 == 1 {
					slots[k][m] += u[l.slotRow(k, c)]
				}
			}
		}
	}
	return money, slots
}

// point is the Lagrangian at some prices: the bound they give, and the plan that
// attains it with what it brings and takes.
type point struct {
	u      []float64
	bound  float64
	ground float64
	value  float64
	use    []float64
}

func (l *lagrangian) at(ctx context.Context, u []float64) (*point, error) {
	p := l.p
	money, slots := l.prices(u)
	type part struct {
		best, value float64
		use         []float64
	}
	parts := make([]part, p.chunks())
	err := p.each(ctx, func(c, from, to int) {
		t := part{use: make([]float64, len(l.limit))}
		for i := from; i < to; i++ {
			g := p.group[i]
			best, kBest, oBest := math.Inf(-1), 0, (*option)(nil)
			for k := range l.kinds {
				price, slot := money[k][g], slots[k]
				opts := p.options(i)
				for j := range opts {
					if w := opts[j].value - float64(price*opts[j].cost) - slot[opts[j].mask]; w > best {
						best, kBest, oBest = w, k, &opts[j]
					}
				}
			}
			t.best += best
			t.value += oBest.value
			l.take(t.use, kBest, g, oBest)
		}
		parts[c] = t
	})
	if err != nil {
		return nil, err
	}
	at := &point{u: u, use: make([]float64, len(l.limit))}
	for _, t := range parts {
		at.bound += t.best
		at.value += t.value
		for r := range at.use {
			at.use[r] += t.use[r]
		}
	}
	for r, x := range l.limit {
		at.ground += float64(u[r] * x)
	}
	if len(p.groups) > 1 {
		// The money is given to the groups: what is reserved, and the pool to the one that
		// pays most.
		price := u[l.groupRow(0):]
		at.ground += p.worthOfMoney(price)
		for g := range p.groups {
			at.use[l.groupRow(g)] -= p.groups[g].reserved
		}
		at.use[l.groupRow(slices.Index(price, slices.Max(price)))] -= p.pool + p.slack
	}
	at.bound += at.ground
	return at, nil
}

func (l *lagrangian) take(use []float64, k int, g int32, o *option) {
	if o.pack < 0 {
		return
	}
	use[l.moneyRow(k)] += o.cost
	if l.p.carry {
		for later := k + 1; later < len(l.kinds); later++ {
			use[l.moneyRow(later)] += o.cost
		}
	}
	if mask := l.p.masks[o.mask]; mask != 0 {
		for c := range l.p.capacity {
			use[l.slotRow(k, c)] += float64(mask >> c & 1)
		}
	}
	if len(l.p.groups) > 1 {
		use[l.groupRow(int(g))] += o.cost
	}
}

// dual lowers the bound by column generation. The next prices are taken between the
// best so far and those of the master problem, which calms them (P. Wentges,
// International Transactions in Operational Research 4 (1997) 151-162).
func (p *problem) dual(ctx context.Context, r *relaxation) error {
	l := p.lagrangian()
	rows := len(l.limit)
	// Start from the prices without capacities.
	u := make([]float64, rows)
	common := slices.Max(r.money[0])
	for k := range l.kinds {
		u[l.moneyRow(k)] = common
	}
	if p.carry {
		for k := range l.kinds[:len(l.kinds)-1] {
			u[l.moneyRow(k)] = 0
		}
	}
	best, err := l.at(ctx, u)
	if err != nil {
		return err
	}
	scale, penalty := l.scales(r)
	scaled := func(use []float64) []float64 {
		out := make([]float64, rows)
		for i := range out {
			out[i] = use[i] / scale[i]
		}
		return out
	}
	m := newMaster(scaled(l.limit), penalty, best.value, scaled(best.use))
	for range dualRounds {
		value, price, ok := m.solve()
		if !ok || best.bound-value <= dualTolerance*abs(best.bound) {
			break
		}
		const weight = 0.7 // of the best so far
		next := make([]float64, rows)
		for i := range next {
			next[i] = float64(weight*best.u[i]) + float64((1-weight)*price[i]/scale[i])
		}
		pt, err := l.at(ctx, next)
		if err != nil {
			return err
		}
		m.add(pt.value, scaled(pt.use))
		if pt.bound < best.bound {
			best = pt
		}
	}
	if best.bound < r.bound {
		l.adopt(r, best)
	}
	return nil
}

// scales gives each limit a scale of about its size, and the price, per scale,
// above which nothing should be worth exceeding it. If something is, the bound is
// only less sharp.
func (l *lagrangian) scales(r *relaxation) (scale, penalty []float64) {
	p := l.p
	scale, penalty = make([]float64, len(l.limit)), make([]float64, len(l.limit))
	high, all := 0.0, 0.0
	for i := range p.order {
		h := 0.0
		for _, o := range p.options(i) {
			h = max(h, abs(o.value))
		}
		high = max(high, h)
		all += h
	}
	efficient := 0.0
	if len(r.steps) > 0 {
		efficient = r.steps[0].efficiency
	}
	for row, x := range l.limit {
		scale[row] = x
		slot := row >= l.slotRow(0, 0) && row < l.groupRow(0)
		if x <= 0 {
			scale[row] = 1
			if !slot {
				scale[row] = max(p.grid, p.total)
			}
		}
		penalty[row] = 2 * efficient * scale[row]
		if slot {
			penalty[row] = 2 * high * scale[row]
		}
		penalty[row] = max(math.SmallestNonzeroFloat64, min(penalty[row], 10*all))
	}
	return scale, penalty
}

// adopt takes over prices and bound.
func (l *lagrangian) adopt(r *relaxation, best *point) {
	p := l.p
	r.bound, r.ground = best.bound, best.ground
	money, slots := l.prices(best.u)
	pool, reserved := 0.0, 0.0
	if len(p.groups) > 1 {
		price := best.u[l.groupRow(0):]
		pool = slices.Max(price) * p.pool / max(p.total, math.SmallestNonzeroFloat64)
		for g := 1; g < len(p.groups); g++ {
			reserved += float64(price[g] * p.groups[g].share)
		}
	}
	for y, k := range l.of {
		r.money[y], r.slots[y] = money[k], slots[k]
		base := best.u[l.moneyRow(k)]
		if p.carry {
			for later := k + 1; later < len(l.kinds); later++ {
				base += best.u[l.moneyRow(later)]
			}
		}
		r.marginal[y] = base + pool + reserved
	}
}
