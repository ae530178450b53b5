package measure

import (
	"kelvinrow/estimate/archetype"
	"kelvinrow/estimate/result"
	"kelvinrow/estimate/state"
)

// group is what of a building a measure works on. Of one group a package has at most
// one measure; measures are carried out in the order of the groups, so that fans are
// sized on the tight building and the generator on the insulated one.
type group uint8

const (
	walls group = iota
	roofs
	floors
	glazing
	seals
	air
	control
	generator

	numGroups = int(iota)
)

var groupOf = map[string]group{
	"outside-wall-insulation": walls,
	"inside-wall-insulation":  walls,
	"cavity-filling":          walls,
	"attic-insulation":        roofs,
	"flat-roof-insulation":    roofs,
	"floor-insulation":        floors,
	"new-windows":             glazing,
	"draught-sealing":         seals,
	CompanionKey:              air,
	"balanced-recovery":       air,
	"heating-controls":        control,
	"heat-generator":          generator,
}

// sealsItself names measures of which sealing is part: draught sealing beside them
// would be paid twice.
const sealsItself = "balanced-recovery"

// Combination is one package as carried out: the state after it, and what of each
// measure it took.
type Combination struct {
	Set      uint64 // bit i is measure i of the list given to Combine
	State    *state.State
	Cost     float64
	Upkeep   float64 // per year
	Parts    []Part
	Cautions result.Caution
	LessAir  bool
}

// Part is one measure of a combination.
type Part struct {
	Terms    *archetype.Measure
	Quantity float64
	Cost     float64
}

// Combiner goes through the combinations of measures on one building. Its memory is
// used again for the next building.
type Combiner struct {
	states [numGroups + 1]state.State
	parts  [numGroups]Part
	facts  Facts
}

// Combine calls visit for every sensible combination of the measures on a state, the
// empty one first: at most one measure of each group, no sealing beside a measure
// that seals. load gives the design heat load of a state in W: a generator is sized
// on the building as the package leaves it. The combination is valid during the call
// only, and its state may be changed.
func (c *Combiner) Combine(all []Measure, s *state.State, f *Facts, load func(*state.State) float64, visit func(*Combination)) {
	var byGroup [numGroups][]int
	for i := range all {
		if g, ok := groupOf[all[i].Terms.Key]; ok {
			byGroup[g] = append(byGroup[g], i)
		}
	}
	c.facts = *f
	var leaf state.State
	var combination Combination
	var descend func(g int, now *state.State, set uint64, n int, cost, upkeep float64, cautions result.Caution, lessAir, sealed bool)
	descend = func(g int, now *state.State, set uint64, n int, cost, upkeep float64, cautions result.Caution, lessAir, sealed bool) {
		if g == numGroups {
			now.CopyInto(&leaf)
			combination = Combination{
				Set: set, State: &leaf, Cost: cost, Upkeep: upkeep, Parts: c.parts[:n], Cautions: cautions, LessAir: lessAir,
			}
			visit(&combination)
			return
		}
		descend(g+1, now, set, n, cost, upkeep, cautions, lessAir, sealed)
		for _, i := range byGroup[g] {
			m := &all[i]
			if sealed && m.Terms.Key == sealsItself {
				continue
			}
			if group(g) == generator {
				c.facts.DesignLoadW = load(now)
			}
			e, why := m.Apply(now, &c.facts, &c.states[g+1])
			if why != "" {
				continue
			}
			own := m.Cost(e.Quantity)
			c.parts[n] = Part{m.Terms, e.Quantity, own}
			descend(g+1, e.State, set|1<<i, n+1, cost+own, upkeep+m.Terms.UpkeepShare*own,
				cautions|e.Cautions, lessAir || e.LessAir, sealed || group(g) == seals)
		}
	}
	descend(0, s, 0, 0, 0, 0, 0, false, false)
}
