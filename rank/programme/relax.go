package programme

import (
	"context"
	"math"
	"slices"
)

// relaxation is what the problem is worth if packages may be done in parts, and
// the prices that go with it. At these prices each building by itself takes what
// the optimum in parts has it take.
type relaxation struct {
	bound    float64
	marginal []float64 // by year

	money [][]float64 // price of money by year and group
	slots [][]float64 // price by year of the capacities of a mask
	// ground is what the money and capacities themselves are worth at these prices:
	// bound = ground + the best of each building, but for rounding.
	ground float64

	steps []step // along the hulls at these prices, by efficiency
	base  []int32
}

// worth is what option o brings in year y beyond what it takes, at the prices.
func (r *relaxation) worth(o *option, y int, g int32) float64 {
	return o.value - float64(r.money[y][g]*o.cost) - r.slots[y][o.mask]
}

// relax finds the bound. Where capacities do not matter it is the linear
// relaxation, solved exactly; otherwise its dual, solved nearly.
func (p *problem) relax(ctx context.Context) (*relaxation, error) {
	r := &relaxation{marginal: make([]float64, p.years())}
	slots := make([]float64, len(p.masks))
	if err := p.climb(ctx, r, slots); err != nil {
		return nil, err
	}
	price := p.greedyInParts(r)
	r.money = make([][]float64, p.years())
	r.slots = make([][]float64, p.years())
	for y := range r.money {
		r.money[y], r.slots[y] = price, slots
		r.marginal[y] = slices.Max(price) * p.pool / max(p.total, math.SmallestNonzeroFloat64)
		for g := 1; g < len(p.groups); g++ {
			r.marginal[y] += float64(price[g] * p.groups[g].share)
		}
	}
	r.ground = p.worthOfMoney(price)
	if len(p.masks) == 1 {
		return r, nil
	}
	if err := p.dual(ctx, r); err != nil {
		return nil, err
	}
	// Hulls at what capacities cost on average, to choose by.
	for k := range slots {
		slots[k] = 0
		for y := range r.slots {
			slots[k] += r.slots[y][k] / float64(p.years())
		}
	}
	return r, p.climb(ctx, r, slots)
}

// worthOfMoney is what all money is worth at a price for each group: what is
// reserved at the group's, the rest at the highest.
func (p *problem) worthOfMoney(price []float64) float64 {
	sum, most := 0.0, 0.0
	for g, x := range price {
		sum += float64(x * p.groups[g].reserved)
		most = max(most, x)
	}
	return sum + float64(most*(p.pool+p.slack))
}

// climb makes the hulls.
func (p *problem) climb(ctx context.Context, r *relaxation, slots []float64) error {
	r.base = make([]int32, p.size())
	parts := make([][]step, p.chunks())
	err := p.each(ctx, func(c, from, to int) {
		var at []int32
		var steps []step
		for i := from; i < to; i++ {
			steps, r.base[i], at = hull(steps, int32(i), p.options(i), slots, at)
		}
		byEfficiency(steps)
		parts[c] = steps
	})
	if err != nil {
		return err
	}
	r.steps = merge(parts)
	return nil
}

// greedyInParts takes steps in the order of efficiency while money lasts, the last
// in part, sets the bound and returns the price of money in each group: the
// efficiency of the step where its money ends, 0 where some is left.
//
// A group spends what is reserved for it before it draws on the pool. That is
// optimal, as its steps bring less and less: moving money between steps of a group,
// or from the pool to another group, would bring no more. Each group has at most
// one step in part (Sinha and Zoltners 1979, proposition 2, for one group).
func (p *problem) greedyInParts(r *relaxation) []float64 {
	left := make([]float64, len(p.groups)) // of what is reserved
	open := make([]bool, len(p.groups))
	price := make([]float64, len(p.groups))
	last := make([]float64, len(p.groups)) // efficiency of the last whole step
	n := len(p.groups)
	pool := p.pool + p.slack
	for g := range left {
		left[g], open[g], last[g] = p.groups[g].reserved, true, math.Inf(1)
	}
	take := func(g int32, cost float64) float64 {
		own := min(left[g], cost)
		left[g] -= own
		more := min(pool, cost-own)
		pool -= more
		return own + more
	}
	bound := 0.0
	for i := range p.order {
		o := p.option(i, r.base[i])
		bound += o.value
		take(p.group[i], o.cost)
	}
	for _, s := range r.steps {
		g := p.group[s.building]
		if !open[g] {
			continue
		}
		if got := take(g, s.cost); got < s.cost {
			bound += float64(s.efficiency * got)
			price[g] = s.efficiency
			open[g] = false
			if n--; n == 0 {
				break
			}
			continue
		}
		bound += s.value
		last[g] = s.efficiency
	}
	r.bound = bound
	// A group that had all its steps still pays for what it drew from the pool.
	for g := range price {
		if open[g] && left[g] == 0 && n < len(p.groups) {
			price[g] = min(slices.Max(price), last[g])
		}
	}
	return price
}

// merge joins sorted parts into one order.
func merge(parts [][]step) []step {
	for len(parts) > 1 {
		var next [][]step
		for k := 0; k+1 < len(parts); k += 2 {
			next = append(next, mergeTwo(parts[k], parts[k+1]))
		}
		if len(parts)%2 == 1 {
			next = append(next, parts[len(parts)-1])
		}
		parts = next
	}
	if len(parts) == 0 {
		return nil
	}
	return parts[0]
}

// mergeTwo joins sorted steps; of equals those of a come first, whose buildings do.
func mergeTwo(a, b []step) []step {
	out := make([]step, 0, len(a)+len(b))
	for len(a) > 0 && len(b) > 0 {
		if a[0].efficiency >= b[0].efficiency {
			out, a = append(out, a[0]), a[1:]
		} else {
			out, b = append(out, b[0]), b[1:]
		}
	}
	return append(append(out, a...), b...)
}
