package programme

import (
	"cmp"
	"context"
	"math"
	"slices"
)

// Limits on how far improving goes, in steps rather than time, so that the plan
// does not depend on the machine.
const (
	mostRounds    = 8
	mostExchanges = 20_000_000
	mostNodes     = 1_000_000
)

// gap is what a value falls short of the bound.
func (r *relaxation) gap(value float64) float64 {
	if r.bound <= value {
		return 0
	}
	return (r.bound - value) / max(abs(r.bound), abs(value))
}

// improve betters a plan that is too far from the bound, and reports whether the
// result is known to be the best.
func (s *schedule) improve(ctx context.Context, r *relaxation) (optimal bool, err error) {
	p := s.p
	value := s.value()
	exchanges, nodes := mostExchanges, mostNodes
	searched := false
	for round := 0; round < mostRounds && r.gap(value) > enough; round++ {
		before := value
		for y := range int32(p.years()) {
			for g := range int32(len(p.groups)) {
				if err := ctx.Err(); err != nil {
					return false, err
				}
				_, complete := s.resolve(y, g)
				// One year, one group and no capacity: that was the whole.
				if complete && p.years() == 1 && len(p.groups) == 1 && len(p.masks) == 1 {
					return true, nil
				}
			}
		}
		if value = s.value(); r.gap(value) <= enough {
			break
		}
		exchanges = s.exchange(r, exchanges)
		if value = s.value(); r.gap(value) <= enough {
			break
		}
		if !searched {
			searched = true
			if s.search(r, nodes) {
				return true, nil
			}
		}
		s.compact()
		s.fill()
		if value = s.value(); value <= before {
			break
		}
	}
	return r.bound <= s.value(), nil
}

// move is an option of a building in a year, and what it loses at the prices
// against the building's best.
type move struct {
	opt, year int32
	loss      float64
}

// moves lists, for each building, what it may do in any plan that is better than
// the present one: what loses less than the bound is above that. Least loss first.
func (s *schedule) moves(r *relaxation, value float64) (moves [][]move, bound float64) {
	p := s.p
	bound = r.ground
	best := make([]float64, p.size())
	for i := range best {
		best[i] = math.Inf(-1)
		opts := p.options(i)
		for j := range opts {
			for y := range p.years() {
				best[i] = max(best[i], r.worth(&opts[j], y, p.group[i]))
			}
		}
		bound += best[i]
	}
	// Beyond rounding, that is.
	most := bound - value + 1e-9*abs(bound)
	moves = make([][]move, p.size())
	for i := range moves {
		opts := p.options(i)
		for j := range opts {
			for y := range p.years() {
				loss := best[i] - r.worth(&opts[j], y, p.group[i])
				if loss <= most {
					moves[i] = append(moves[i], move{int32(j), int32(y), loss})
				}
				if opts[j].pack < 0 {
					break // nothing is the same in any year
				}
			}
		}
		slices.SortFunc(moves[i], func(a, b move) int {
			return cmp.Or(cmp.Compare(a.loss, b.loss), cmp.Compare(a.opt, b.opt), cmp.Compare(a.year, b.year))
		})
	}
	return moves, bound
}

// exchange betters one building at the expense of another, which gives up some of
// its value or only its year. It returns how many of the tries are left.
func (s *schedule) exchange(r *relaxation, tries int) int {
	p := s.p
	value := s.value()
	moves, bound := s.moves(r, value)
	most := bound - value
	var movable []int
	for i := range moves {
		if len(moves[i]) > 1 || len(moves[i]) == 1 && !s.same(i, moves[i][0]) {
			movable = append(movable, i)
		}
	}
	for _, i := range movable {
		type pair struct {
			up, down move
			other    int
			gain     float64
		}
		var best pair
		wasOpt, wasYear := s.choice[i], s.year[i]
		from := s.at(i).value
		for _, up := range moves[i] {
			gain := p.option(i, up.opt).value - from
			if gain <= best.gain || s.same(i, up) {
				continue
			}
			if s.fits(i, up.opt, up.year) {
				best = pair{up, move{}, -1, gain}
				continue
			}
			s.set(i, up.opt, up.year)
			for _, l := range movable {
				if tries -= len(moves[l]); tries <= 0 {
					break
				}
				if l == i {
					continue
				}
				lOpt, lYear := s.choice[l], s.year[l]
				lValue := s.at(l).value
				for _, down := range moves[l] {
					g := gain + p.option(l, down.opt).value - lValue
					if g <= best.gain || up.loss+down.loss > most || s.same(l, down) {
						continue
					}
					s.set(l, down.opt, down.year)
					if s.feasible() {
						best = pair{up, down, l, g}
					}
					s.set(l, lOpt, lYear)
				}
			}
			s.set(i, wasOpt, wasYear)
		}
		if best.gain <= 1e-12*abs(bound) {
			continue
		}
		s.set(i, best.up.opt, best.up.year)
		if best.other >= 0 {
			s.set(best.other, best.down.opt, best.down.year)
		}
		most -= best.gain
	}
	return tries
}

func (s *schedule) same(i int, m move) bool {
	return s.choice[i] == m.opt && (s.year[i] == m.year || s.idle(i))
}

// search goes through all plans that could be better, as far as a number of nodes
// goes, and reports whether it came to the end. Where years are alike so far, only
// the first is tried.
func (s *schedule) search(r *relaxation, nodes int) bool {
	p := s.p
	floor := s.value()
	moves, bound := s.moves(r, floor)
	floor += 1e-12 * abs(bound)
	t := newSchedule(p)
	var order []int
	for i := range moves {
		switch {
		case len(moves[i]) == 0:
			return true // no plan can be better
		case len(moves[i]) == 1:
			t.set(i, moves[i][0].opt, moves[i][0].year)
			bound -= moves[i][0].loss
		default:
			order = append(order, i)
		}
	}
	if !t.feasible() {
		return true
	}
	if len(order) > 200 {
		return false
	}
	dearest := func(i int) float64 {
		c := 0.0
		for _, m := range moves[i] {
			c = max(c, p.option(i, m.opt).cost)
		}
		return c
	}
	slices.SortStableFunc(order, func(a, b int) int { return cmp.Compare(dearest(b), dearest(a)) })
	var deeper func(k int, bound, value float64)
	deeper = func(k int, bound, value float64) {
		if k == len(order) {
			if value > floor {
				floor = value
				copyPlan(s, t)
			}
			return
		}
		i := order[k]
		wasOpt, wasYear := t.choice[i], t.year[i]
		rest := value - t.at(i).value
		for n, m := range moves[i] {
			if bound-m.loss <= floor {
				break
			}
			if nodes--; nodes < 0 {
				return
			}
			if !t.fits(i, m.opt, m.year) || t.alike(moves[i][:n], m) {
				continue
			}
			t.set(i, m.opt, m.year)
			deeper(k+1, bound-m.loss, rest+p.option(i, m.opt).value)
			if wasYear < 0 {
				t.remove(i)
				t.choice[i] = wasOpt
			} else {
				t.set(i, wasOpt, wasYear)
			}
		}
	}
	deeper(0, bound, t.value())
	return nodes >= 0
}

// alike reports whether an earlier one of the moves is the same in a year that is
// so far the same: budget, money spent and capacities used.
func (s *schedule) alike(earlier []move, m move) bool {
	if s.p.carry {
		return false
	}
	for _, e := range earlier {
		if e.opt == m.opt && s.p.limit[e.year] == s.p.limit[m.year] &&
			s.spent[e.year] == s.spent[m.year] && slices.Equal(s.used[e.year], s.used[m.year]) {
			return true
		}
	}
	return false
}

func copyPlan(to, from *schedule) {
	for i := range from.choice {
		to.set(i, from.choice[i], from.year[i])
	}
}
