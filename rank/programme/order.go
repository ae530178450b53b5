package programme

import (
	"cmp"
	"slices"
)

// compact moves buildings to earlier years where they fit, and lets those that
// bring more for their money change places with earlier ones. Pairs of about the
// same cost are tried; where there are not too many, all.
func (s *schedule) compact() {
	if s.p.years() == 1 {
		return
	}
	var done []int
	for i := range s.choice {
		if !s.idle(i) {
			done = append(done, i)
		}
	}
	slices.SortStableFunc(done, func(a, b int) int { return cmp.Compare(efficiency(s.at(b)), efficiency(s.at(a))) })
	for _, i := range done {
		if y := s.first(i, s.choice[i]); y >= 0 && y < s.year[i] {
			s.set(i, s.choice[i], y)
		}
	}
	const window = 500
	slices.SortStableFunc(done, func(a, b int) int { return cmp.Compare(s.at(b).cost, s.at(a).cost) })
	for changed, rounds := true, 0; changed && rounds < 10; rounds++ {
		changed = false
		for k, a := range done {
			for _, b := range done[k+1 : min(k+1+window, len(done))] {
				if s.year[a] != s.year[b] && s.swap(a, b) {
					changed = true
				}
			}
		}
	}
}

// swap lets two buildings change years if the one that is later brings more for
// its money.
func (s *schedule) swap(a, b int) bool {
	if s.year[a] < s.year[b] {
		a, b = b, a
	}
	if s.p.must[b] || efficiency(s.at(a)) <= efficiency(s.at(b)) {
		return false
	}
	late, early := s.year[a], s.year[b]
	s.set(a, s.choice[a], early)
	s.set(b, s.choice[b], late)
	if s.feasible() {
		return true
	}
	s.set(a, s.choice[a], late)
	s.set(b, s.choice[b], early)
	return false
}

// arrange deals the buildings of each two years anew, so that as much value as
// possible falls into the earlier one: a knapsack of what there is of both, in which
// no less may be spent than does not fit in the later one.
func (s *schedule) arrange() {
	p := s.p
	for early := range int32(p.years()) {
		for late := early + 1; int(late) < p.years(); late++ {
			s.arrangeTwo(early, late)
		}
	}
}

func (s *schedule) arrangeTwo(early, late int32) {
	p := s.p
	var buildings []int
	now, spent, all := 0.0, 0.0, 0.0
	for i := range s.choice {
		if y := s.year[i]; s.idle(i) || p.must[i] || y != early && y != late {
			continue
		}
		o := s.at(i)
		buildings = append(buildings, i)
		all += o.cost
		if s.year[i] == early {
			now += o.value
			spent += o.cost
		}
	}
	money := spent + p.limit[early] - s.spent[early]
	least := spent - (p.limit[late] - s.spent[late])
	if p.carry {
		least = 0 // what is not spent early is there late
		for y := early; y < late; y++ {
			money = min(money, spent+p.limit[y]-s.spent[y])
		}
	}
	classes := make([]class, len(buildings))
	for k := range classes {
		classes[k].opts = []int32{0, 1}
	}
	at := func(k int, pos int32) *option {
		if pos == 0 {
			return &nothing
		}
		return s.at(buildings[k])
	}
	got, _ := core(classes, at, least, money, knapsackPrice(classes, at, money), now)
	if got == nil {
		return
	}
	was := make([]int32, len(buildings))
	for k, i := range buildings {
		was[k] = s.year[i]
		y := late
		if got[k] == 1 {
			y = early
		}
		s.set(i, s.choice[i], y)
	}
	if s.feasible() {
		return
	}
	for k, i := range buildings { // a capacity is in the way
		s.set(i, s.choice[i], was[k])
	}
}
