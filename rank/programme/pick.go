package programme

import (
	"cmp"
	"slices"
)

// tally is what options picked take, years aside.
type tally struct {
	p      *problem
	at     []int32
	spent  []float64 // by group
	pooled float64
	used   []int
}

func (p *problem) tally(base []int32) *tally {
	t := &tally{p: p, at: slices.Clone(base), spent: make([]float64, len(p.groups)), used: make([]int, len(p.capacity))}
	for i, j := range t.at {
		t.spent[p.group[i]] += p.option(i, j).cost
		t.need(i, j, 1)
	}
	t.pooled = p.pooled(t.spent)
	return t
}

func (t *tally) need(i int, j int32, sign int) {
	if m := t.p.masks[t.p.option(i, j).mask]; m != 0 {
		for c := range t.used {
			t.used[c] += sign * int(m>>c&1)
		}
	}
}

// try changes a building to option j if all limits over all years allow.
func (t *tally) try(i int, j int32) {
	p := t.p
	g := p.group[i]
	more := p.option(i, j).cost - p.option(i, t.at[i]).cost
	pooled := t.pooled + max(0, t.spent[g]+more-p.groups[g].reserved) - max(0, t.spent[g]-p.groups[g].reserved)
	if more > 0 && pooled > p.pool {
		return
	}
	t.need(i, t.at[i], -1)
	t.need(i, j, 1)
	for c, u := range t.used {
		if p.masks[p.option(i, j).mask]>>c&1 == 1 && u > p.capacity[c].Buildings*p.years() {
			t.need(i, j, -1)
			t.need(i, t.at[i], 1)
			return
		}
	}
	t.at[i] = j
	t.spent[g] += more
	t.pooled = pooled
}

// pick chooses options, years aside. It follows the steps along the hulls in whole:
// those that do not fit any more are passed over, and so are the later ones of the
// same building.
//
// Where capacities are short, what brings most for its money may not be what to
// spend them on. Buildings then get first what is best for them at the prices, in
// the order of what that is worth to them beyond the start of their hull.
func (p *problem) pick(r *relaxation) []int32 {
	t := p.tally(r.base)
	if len(p.masks) > 1 {
		type item struct {
			gain     float64
			building int
			opt      int32
		}
		var items []item
		for i := range p.order {
			it := item{building: i}
			for y := range p.years() {
				base := r.worth(p.option(i, r.base[i]), y, p.group[i])
				for j := range p.options(i) {
					if gain := r.worth(p.option(i, int32(j)), y, p.group[i]) - base; gain > it.gain {
						it.gain, it.opt = gain, int32(j)
					}
				}
			}
			if it.gain > 0 {
				items = append(items, it)
			}
		}
		slices.SortFunc(items, func(a, b item) int {
			return cmp.Or(cmp.Compare(b.gain, a.gain), cmp.Compare(a.building, b.building))
		})
		for _, it := range items {
			t.try(it.building, it.opt)
		}
	}
	for _, s := range r.steps {
		if i := int(s.building); t.at[i] == s.from {
			t.try(i, s.to)
		}
	}
	return t.at
}
