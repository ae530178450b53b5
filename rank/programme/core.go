package programme

import (
	"cmp"
	"math"
	"slices"
)

// The limits of the dynamic programme: states of one building, and states kept to
// trace back the best.
const (
	mostStates = 10_000
	mostTraced = 500_000
)

// class is a building in a knapsack of its own: its options that may be chosen.
type class struct {
	opts   []int32
	best   int32   // position in opts of the best at the price
	regret float64 // what the second best falls short of it
}

// state is a choice for the classes so far; all others have their best.
type state struct {
	cost, value float64
	from        int32 // traced; -1 is none
	opt         int32 // position in opts of the latest class
}

// core solves a knapsack of buildings exactly where it can: at the price of the
// linear relaxation each has a best option; buildings are let deviate from it in
// the order of what the second best option costs them, until none is left that
// could deviate and still beat what there is. Of two states the one that costs no
// more and is worth no less stays.
//
// at gives the option of class k by position. It returns a choice worth more than
// floor that costs from least to money, or nil, and whether no other can be better
// than that; the latter only holds with a least of 0.
//
// Source: Kellerer, Pferschy and Pisinger, Knapsack Problems (2004), 11.4.2, after
// D. Pisinger, A minimal algorithm for the multiple-choice knapsack problem,
// European Journal of Operational Research 83 (1995) 394-410.
func core(classes []class, at func(k int, pos int32) *option, least, money, price, floor float64) ([]int32, bool) {
	worth := func(o *option) float64 { return o.value - float64(price*o.cost) }
	bound := price * money
	start := state{from: -1}
	for k := range classes {
		c := &classes[k]
		c.best, c.regret = 0, math.Inf(1)
		for pos := 1; pos < len(c.opts); pos++ {
			w, b := worth(at(k, int32(pos))), worth(at(k, c.best))
			if w > b {
				c.best, c.regret = int32(pos), w-b
			} else {
				c.regret = min(c.regret, b-w)
			}
		}
		o := at(k, c.best)
		bound += worth(o)
		start.cost += o.cost
		start.value += o.value
	}
	order := make([]int, 0, len(classes))
	// Rounding must not call equals better.
	floor += 1e-12 * math.Abs(bound)
	for k := range classes {
		if bound-classes[k].regret > floor {
			order = append(order, k)
		}
	}
	slices.SortFunc(order, func(a, b int) int {
		return cmp.Or(cmp.Compare(classes[a].regret, classes[b].regret), cmp.Compare(a, b))
	})

	traced := []state{}
	states := []state{start}
	found, foundLayer := state{from: -1, opt: -1}, -1
	consider := func(s state, layer int) {
		if s.cost <= money && s.cost >= least && s.value > floor {
			floor, found, foundLayer = s.value, s, layer
		}
	}
	consider(start, 0)
	complete := true
	done := 0
	for _, k := range order {
		if bound-classes[k].regret <= floor {
			break // as do all that follow: the floor has risen
		}
		if len(states) > mostStates || len(traced) > mostTraced {
			complete = false
			break
		}
		c := &classes[k]
		best := at(k, c.best)
		base := int32(len(traced))
		traced = append(traced, states...)
		next := make([]state, 0, 2*len(states))
		for t, s := range states {
			for pos := range c.opts {
				o := at(k, int32(pos))
				n := state{s.cost - best.cost + o.cost, s.value - best.value + o.value, base + int32(t), int32(pos)}
				// What it can be worth yet. The others can give back no more than the start costs.
				if n.value+float64(price*(money-n.cost)) > floor && n.cost <= money+start.cost {
					next = append(next, n)
					consider(n, done+1)
				}
			}
		}
		done++
		states = pareto(next)
	}
	if foundLayer < 0 {
		return nil, complete
	}
	out := make([]int32, len(classes))
	for k := range classes {
		out[k] = classes[k].best
	}
	for s, layer := found, foundLayer; layer > 0; layer-- {
		out[order[layer-1]] = s.opt
		s = traced[s.from]
	}
	return out, complete
}

// pareto drops states that cost no less and are worth no more than another.
func pareto(states []state) []state {
	slices.SortFunc(states, func(a, b state) int {
		switch {
		case a.cost != b.cost:
			return cmp.Compare(a.cost, b.cost)
		case a.value != b.value:
			return cmp.Compare(b.value, a.value)
		case a.from != b.from:
			return cmp.Compare(a.from, b.from)
		}
		return cmp.Compare(a.opt, b.opt)
	})
	kept := states[:0]
	for _, s := range states {
		if len(kept) == 0 || s.value > kept[len(kept)-1].value {
			kept = append(kept, s)
		}
	}
	return kept
}

// resolve solves one year of one group anew: the buildings that are done then, and
// those of which nothing is done, share the money the year has for them. A building
// may take a package that needs no other capacity than its present one. It reports
// whether that is better than before, and whether nothing could be better.
func (s *schedule) resolve(y int32, g int32) (better, complete bool) {
	p := s.p
	var buildings []int
	var classes []class
	now, spent := 0.0, 0.0
	for i := range s.choice {
		o := s.at(i)
		if p.group[i] != g || s.year[i] != y && !s.idle(i) {
			continue
		}
		now += o.value
		spent += o.cost
		c := class{}
		for j, q := range p.options(i) {
			if p.masks[q.mask]&^p.masks[o.mask] == 0 {
				c.opts = append(c.opts, int32(j))
			}
		}
		buildings = append(buildings, i)
		classes = append(classes, c)
	}
	room := math.Inf(1)
	for k := int(y); k < len(s.spent); k++ {
		room = min(room, p.limit[k]-s.spent[k])
		if !p.carry {
			break
		}
	}
	kept := p.groups[g].reserved
	if s.group[g] >= kept {
		room = min(room, p.pool-s.pooled)
	} else {
		room = min(room, p.pool-s.pooled+kept-s.group[g])
	}
	money := spent + room
	at := func(k int, pos int32) *option { return p.option(buildings[k], classes[k].opts[pos]) }
	got, complete := core(classes, at, 0, money, knapsackPrice(classes, at, money), now)
	if got == nil {
		return false, complete
	}
	for k, i := range buildings {
		j := classes[k].opts[got[k]]
		if j == s.choice[i] || p.option(i, j).pack < 0 && s.idle(i) {
			continue
		}
		s.set(i, j, y)
	}
	return true, complete
}

// knapsackPrice is the price of money in the linear relaxation of a knapsack.
func knapsackPrice(classes []class, at func(k int, pos int32) *option, money float64) float64 {
	var steps []step
	var corners []int32
	var opts []option
	for k := range classes {
		opts = opts[:0]
		for pos := range classes[k].opts {
			opts = append(opts, *at(k, int32(pos)))
			opts[pos].mask = 0
		}
		var from int32
		steps, from, corners = hull(steps, int32(k), opts, []float64{0}, corners)
		money -= opts[from].cost
	}
	byEfficiency(steps)
	for _, t := range steps {
		if t.cost > money {
			return t.efficiency
		}
		money -= t.cost
	}
	return 0
}
