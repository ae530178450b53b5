package programme

import (
	"cmp"
	"slices"
)

// option is a package that may be chosen, or doing nothing.
type option struct {
	cost  float64
	value float64
	pack  int32 // into Building.Packages; -1 is nothing
	mask  int32 // into problem.masks: the capacities it needs
}

// Dominated returns, by index, the packages that cost no less and bring no more
// than another one, or than doing nothing; of equals the first stays.
//
// Source: Kellerer, Pferschy and Pisinger, Knapsack Problems (2004), 11.2.
func Dominated(packages []Package) []int {
	opts := make([]option, len(packages), len(packages)+1)
	for j, p := range packages {
		opts[j] = option{cost: p.Cost, value: p.Value, pack: int32(j)}
	}
	kept := undominated(append(opts, nothing), []uint64{0})
	stays := make([]bool, len(packages))
	for _, o := range kept {
		if o.pack >= 0 {
			stays[o.pack] = true
		}
	}
	var out []int
	for j, s := range stays {
		if !s {
			out = append(out, j)
		}
	}
	return out
}

var nothing = option{pack: -1}

// undominated sorts options by cost and drops, in place, those that another one
// dominates: costs no more, brings no less and needs no capacity the other does
// not.
func undominated(opts []option, masks []uint64) []option {
	slices.SortFunc(opts, func(a, b option) int {
		switch {
		case a.cost != b.cost:
			return cmp.Compare(a.cost, b.cost)
		case a.value != b.value:
			return cmp.Compare(b.value, a.value)
		default:
			return cmp.Compare(a.pack, b.pack)
		}
	})
	kept := opts[:0]
	for _, o := range opts {
		dominated := false
		for k := len(kept) - 1; k >= 0 && !dominated; k-- {
			dominated = kept[k].value >= o.value && masks[kept[k].mask]&^masks[o.mask] == 0
		}
		// Equal cost: a later one that needs less capacity drops none kept, which only
		// costs time.
		if !dominated {
			kept = append(kept, o)
		}
	}
	return kept
}

// step is a move from one option of a building to the next on its hull.
type step struct {
	efficiency float64 // value for money
	cost       float64 // of the step
	value      float64
	building   int32
	from, to   int32 // options of the building
}

// hull appends the steps along the upper left convex hull of options sorted by
// cost, and returns the option it starts from: the best of the cheapest. Along it
// the value rises, and each step brings less for its money than the one before.
// What an option needs of capacities is taken off its value, by prices by mask; at
// is room for the corners.
//
// Source: Sinha and Zoltners 1979, section 2: an option s between r and t is
// dominated in the linear sense if (vs-vr)/(cs-cr) <= (vt-vs)/(ct-cs).
func hull(steps []step, building int32, opts []option, prices []float64, at []int32) ([]step, int32, []int32) {
	value := func(o *option) float64 { return o.value - prices[o.mask] }
	at = at[:0]
	for j := range opts {
		v := value(&opts[j])
		if n := len(at); n > 0 {
			if v <= value(&opts[at[n-1]]) {
				continue
			}
			if opts[j].cost == opts[at[n-1]].cost {
				at = at[:n-1]
			}
		}
		for n := len(at); n >= 2; n = len(at) {
			r, s := &opts[at[n-2]], &opts[at[n-1]]
			if (value(s)-value(r))*(opts[j].cost-s.cost) > (v-value(s))*(s.cost-r.cost) {
				break
			}
			at = at[:n-1]
		}
		at = append(at, int32(j))
	}
	for k := 1; k < len(at); k++ {
		a, b := &opts[at[k-1]], &opts[at[k]]
		dc, dv := b.cost-a.cost, value(b)-value(a)
		steps = append(steps, step{dv / dc, dc, dv, building, at[k-1], at[k]})
	}
	return steps, at[0], at
}

// byEfficiency sorts steps: most value for money first, then by building id, then
// cheaper first.
func byEfficiency(steps []step) {
	slices.SortFunc(steps, func(a, b step) int {
		if a.efficiency != b.efficiency {
			return cmp.Compare(b.efficiency, a.efficiency)
		}
		return cmp.Or(cmp.Compare(a.building, b.building), cmp.Compare(a.from, b.from))
	})
}
