package programme

import (
	"cmp"
	"math"
	"slices"
)

// schedule is a programme in the making: for each building an option and a year.
// Sums of money are exact, see layGrid, so they may be changed to and fro.
type schedule struct {
	p      *problem
	choice []int32 // option
	year   []int32 // -1 while the building has not even nothing, as a must-do one before it is placed

	spent  []float64 // by year, or up to that year with carry
	used   [][]int32 // by year and capacity
	group  []float64 // spent by group
	pooled float64
}

func newSchedule(p *problem) *schedule {
	s := &schedule{
		p: p, choice: make([]int32, p.size()), year: make([]int32, p.size()),
		spent: make([]float64, p.years()), used: make([][]int32, p.years()), group: make([]float64, len(p.groups)),
	}
	for y := range s.used {
		s.used[y] = make([]int32, len(p.capacity))
	}
	for i := range s.year {
		s.year[i] = -1
		if !p.must[i] {
			s.year[i] = 0
			for j, o := range p.options(i) {
				if o.pack < 0 {
					s.choice[i] = int32(j)
				}
			}
		}
	}
	return s
}

func (s *schedule) clone() *schedule {
	c := *s
	c.choice, c.year = slices.Clone(s.choice), slices.Clone(s.year)
	c.spent, c.group = slices.Clone(s.spent), slices.Clone(s.group)
	c.used = make([][]int32, len(s.used))
	for y := range c.used {
		c.used[y] = slices.Clone(s.used[y])
	}
	return &c
}

// at returns the option of a building, nothing where it has none yet.
func (s *schedule) at(i int) *option {
	if s.year[i] < 0 {
		return &nothing
	}
	return s.p.option(i, s.choice[i])
}

// idle reports whether nothing is done on a building.
func (s *schedule) idle(i int) bool { return s.at(i).pack < 0 }

// book adds or takes away what an option takes in a year.
func (s *schedule) book(i int, o *option, y int32, sign float64) {
	cost := sign * o.cost
	s.spent[y] += cost
	if s.p.carry {
		for k := int(y) + 1; k < len(s.spent); k++ {
			s.spent[k] += cost
		}
	}
	g := s.p.group[i]
	kept := s.p.groups[g].reserved
	s.pooled -= max(0, s.group[g]-kept)
	s.group[g] += cost
	s.pooled += max(0, s.group[g]-kept)
	if m := s.p.masks[o.mask]; m != 0 {
		for c := range s.used[y] {
			s.used[y][c] += int32(sign) * int32(m>>c&1)
		}
	}
}

// set changes a building, whatever the limits say.
func (s *schedule) set(i int, j, y int32) {
	if s.year[i] >= 0 {
		s.book(i, s.at(i), s.year[i], -1)
	}
	s.choice[i], s.year[i] = j, y
	s.book(i, s.at(i), y, 1)
}

// fits reports whether a building may change to option j in year y.
func (s *schedule) fits(i int, j, y int32) bool {
	o, was, wasYear := s.p.option(i, j), s.at(i), s.year[i]
	if was.pack < 0 {
		wasYear = -1
	}
	last := int(y)
	if s.p.carry {
		last = len(s.spent) - 1
	}
	for k := int(y); k <= last; k++ {
		x := s.spent[k] + o.cost
		if wasYear == int32(k) || s.p.carry && wasYear >= 0 && wasYear < int32(k) {
			x -= was.cost
		}
		if x > s.p.limit[k] {
			return false
		}
	}
	g := s.p.group[i]
	kept := s.p.groups[g].reserved
	if more := max(0, s.group[g]-was.cost+o.cost-kept) - max(0, s.group[g]-kept); s.pooled+more > s.p.pool {
		return false
	}
	if m := s.p.masks[o.mask]; m != 0 {
		for c := range s.used[y] {
			u := s.used[y][c] + int32(m>>c&1)
			if wasYear == y {
				u -= int32(s.p.masks[was.mask] >> c & 1)
			}
			if m>>c&1 == 1 && int(u) > s.p.capacity[c].Buildings {
				return false
			}
		}
	}
	return true
}

// feasible reports whether all limits are held.
func (s *schedule) feasible() bool {
	if s.pooled > s.p.pool {
		return false
	}
	for y := range s.spent {
		if s.spent[y] > s.p.limit[y] {
			return false
		}
		for c, u := range s.used[y] {
			if int(u) > s.p.capacity[c].Buildings {
				return false
			}
		}
	}
	return true
}

func (s *schedule) value() float64 {
	sum := 0.0
	for i := range s.choice {
		sum += s.at(i).value
	}
	return sum
}

// first finds the earliest year an option fits in, or -1.
func (s *schedule) first(i int, j int32) int32 {
	for y := range s.spent {
		if s.fits(i, j, int32(y)) {
			return int32(y)
		}
	}
	return -1
}

// placeMusts gives the must-do buildings their cheapest option that fits, in the
// earliest year, the dearest first; where that fails in the tightest year.
func (s *schedule) placeMusts() error {
	p := s.p
	var musts []int
	for i, m := range p.must {
		if m {
			musts = append(musts, i)
		}
	}
	if len(musts) == 0 {
		return nil
	}
	slices.SortFunc(musts, func(a, b int) int {
		return cmp.Or(cmp.Compare(p.options(b)[0].cost, p.options(a)[0].cost), cmp.Compare(a, b))
	})
	var left []int
	for _, fullest := range []bool{false, true} {
		s.removeAll(musts)
		left = left[:0]
		for _, i := range musts {
			if !s.placeMust(i, fullest) {
				left = append(left, i)
			}
		}
		if len(left) == 0 {
			return nil
		}
	}
	if s.searchMusts(musts) {
		return nil
	}
	var f faults
	for _, i := range left {
		f.add("must-do buildings without a year", "no year was found for must-do building %q beside the other must-do buildings", p.id(i))
	}
	return f.err()
}

func (s *schedule) remove(i int) {
	s.book(i, s.at(i), s.year[i], -1)
	s.year[i] = -1
}

func (s *schedule) removeAll(buildings []int) {
	for _, i := range buildings {
		if s.year[i] >= 0 {
			s.remove(i)
		}
	}
}

func (s *schedule) placeMust(i int, fullest bool) bool {
	for j := range s.p.options(i) {
		best, least := int32(-1), math.Inf(1)
		for y := range s.spent {
			if room := s.p.limit[y] - s.spent[y]; s.fits(i, int32(j), int32(y)) && (best < 0 || fullest && room < least) {
				best, least = int32(y), room
			}
		}
		if best >= 0 {
			s.set(i, int32(j), best)
			return true
		}
	}
	return false
}

// searchMusts tries all ways to place must-do buildings, as far as a hundred
// thousand tries go.
func (s *schedule) searchMusts(musts []int) bool {
	s.removeAll(musts)
	tries := 0
	var deeper func(k int) bool
	deeper = func(k int) bool {
		if k == len(musts) {
			return true
		}
		i := musts[k]
		for j := range s.p.options(i) {
			for y := range s.spent {
				if tries++; tries > 100_000 {
					return false
				}
				if s.fits(i, int32(j), int32(y)) {
					s.set(i, int32(j), int32(y))
					if deeper(k + 1) {
						return true
					}
					s.remove(i)
				}
			}
		}
		return false
	}
	return deeper(0)
}

// place gives buildings the options picked: the best value for money first, each
// in the earliest year it fits in. Where that leaves too much over, as the cheap
// ones take the capacities of the early years, it is spread evenly instead: the
// dearest first, each in the emptiest year. What fits in none gets the dearest option
// below that does.
func (s *schedule) place(pick []int32, evenly bool) {
	p := s.p
	type item struct {
		key      float64
		building int32
	}
	var items []item
	for i, j := range pick {
		if o := p.option(i, j); o.pack >= 0 {
			it := item{efficiency(o), int32(i)}
			if evenly {
				it.key = o.cost
			}
			items = append(items, it)
		}
	}
	slices.SortFunc(items, func(a, b item) int {
		if a.key != b.key {
			return cmp.Compare(b.key, a.key)
		}
		return cmp.Compare(a.building, b.building)
	})
	for _, it := range items {
		i := int(it.building)
		for j := pick[i]; j >= 0; j-- {
			if p.option(i, j).value <= s.at(i).value {
				continue
			}
			y := s.first(i, j)
			if y >= 0 && evenly {
				y = s.emptiest(i, j)
			}
			if y >= 0 {
				s.set(i, j, y)
				break
			}
		}
	}
}

// emptiest finds the year with most money left that an option fits in, or -1. Where
// it needs a capacity, most money for each building there still is capacity for: so
// the cheap ones are left for years that have little.
func (s *schedule) emptiest(i int, j int32) int32 {
	best, most := int32(-1), math.Inf(-1)
	mask := s.p.masks[s.p.option(i, j).mask]
	for y := range s.spent {
		if !s.fits(i, j, int32(y)) {
			continue
		}
		left := s.p.limit[y] - s.spent[y]
		free := math.MaxInt
		for c, u := range s.used[y] {
			if mask>>c&1 == 1 {
				free = min(free, s.p.capacity[c].Buildings-int(u))
			}
		}
		if mask != 0 {
			left /= float64(max(1, free))
		}
		if left > most {
			best, most = int32(y), left
		}
	}
	return best
}

func efficiency(o *option) float64 {
	if o.cost == 0 {
		return math.Inf(1)
	}
	return o.value / o.cost
}

// fill uses what is left for whatever brings more: other options, whether on the
// hull or not, in any year; the best value for money first.
func (s *schedule) fill() {
	p := s.p
	type change struct {
		efficiency, value float64
		building, opt     int32
	}
	for range 20 { // rounds: the first few do nearly all
		room := 0.0
		for y := range s.spent {
			room = max(room, p.limit[y]-s.spent[y])
		}
		var changes []change
		for i := range s.choice {
			now := s.at(i)
			opts := p.options(i)
			for j := range opts {
				o := &opts[j]
				more := o.cost - now.cost
				if o.value <= now.value || more > room {
					continue
				}
				if s.fits(i, int32(j), max(0, s.year[i])) || s.first(i, int32(j)) >= 0 {
					gain := o.value - now.value
					e := math.Inf(1)
					if more > 0 {
						e = gain / more
					}
					changes = append(changes, change{e, gain, int32(i), int32(j)})
				}
			}
		}
		if len(changes) == 0 {
			return
		}
		slices.SortFunc(changes, func(a, b change) int {
			switch {
			case a.efficiency != b.efficiency:
				return cmp.Compare(b.efficiency, a.efficiency)
			case a.value != b.value:
				return cmp.Compare(b.value, a.value)
			case a.building != b.building:
				return cmp.Compare(a.building, b.building)
			}
			return cmp.Compare(a.opt, b.opt)
		})
		for _, c := range changes {
			i := int(c.building)
			if p.option(i, c.opt).value <= s.at(i).value {
				continue
			}
			if y := s.year[i]; !s.idle(i) && s.fits(i, c.opt, y) {
				s.set(i, c.opt, y)
			} else if y := s.first(i, c.opt); y >= 0 {
				s.set(i, c.opt, y)
			}
		}
	}
}
