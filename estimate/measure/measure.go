// Package measure turns one state of a building into the state after a
// retrofit measure: it adds a layer, replaces windows, scales leakage, changes
// ventilation, control or generator, and nothing else. Savings follow by running
// the heat balance again.
package measure

import (
	"fmt"

	"kelvinrow/estimate/archetype"
	"kelvinrow/estimate/building"
	"kelvinrow/estimate/result"
	"kelvinrow/estimate/state"
)

// Facts is what a measure looks at beside the state: what may be done here.
type Facts struct {
	Use              building.Use
	WallConstruction string
	RoofType         string
	FloorType        string
	YearBuilt        int
	Protected        bool
	FacadeStays      bool
	Dwellings        float64
	Exposure         building.Exposure
	DesignLoadW      float64
}

// Effect is a state after a measure, and how much of it was done.
type Effect struct {
	State    *state.State
	Quantity float64 // in the measure's unit
	Cautions result.Caution
	// LessAir is set where the measure lowers the flow of outdoor air: the state
	// must then be checked for the air its use needs.
	LessAir bool
}

// Measure is a retrofit measure ready to be applied.
type Measure struct {
	Terms *archetype.Measure
	apply func(*job) string
}

// ByKey is the code of each measure. To add one, add a function here and a row
// to the measures table.
var byKey = map[string]func(*job) string{
	"outside-wall-insulation": outsideWall,
	"inside-wall-insulation":  insideWall,
	"cavity-filling":          cavity,
	"attic-insulation":        attic,
	"flat-roof-insulation":    flatRoof,
	"floor-insulation":        floor,
	"new-windows":             windows,
	"draught-sealing":         draughts,
	CompanionKey:              demandExtract,
	"balanced-recovery":       balancedRecovery,
	"heating-controls":        controls,
	"heat-generator":          heatPump,
}

// CompanionKey is the measure that a tightening brings along where it leaves
// too little outdoor air.
const CompanionKey = "demand-controlled-extract"

// All makes the measures of a set, in the order of its table.
func All(set *archetype.Set) ([]Measure, error) {
	out := make([]Measure, 0, len(set.Measures))
	for i := range set.Measures {
		t := &set.Measures[i]
		f, ok := byKey[t.Key]
		if !ok {
			return nil, fmt.Errorf("measures table: no measure is called %q", t.Key)
		}
		out = append(out, Measure{Terms: t, apply: f})
	}
	return out, nil
}

// job is one application: the state being changed and what is known around it.
type job struct {
	s        *state.State
	f        *Facts
	t        *archetype.Measure
	quantity float64
	cautions result.Caution
	lessAir  bool
}

func (j *job) target(name string) float64 { return j.t.Target[name] }

// Apply makes into the state after the measure, or says why it does not apply.
// The given state is not changed; the effect's state is into.
func (m *Measure) Apply(s *state.State, f *Facts, into *state.State) (Effect, string) {
	s.CopyInto(into)
	j := job{s: into, f: f, t: m.Terms}
	if why := m.apply(&j); why != "" {
		return Effect{}, why
	}
	switch m.Terms.Unit {
	case "dwelling":
		j.quantity = max(1, f.Dwellings)
	case "building":
		j.quantity = 1
	case "kW":
		j.quantity = f.DesignLoadW / 1000
	case "m2 floor":
		j.quantity = s.FloorAreaM2
	}
	return Effect{State: j.s, Quantity: j.quantity, Cautions: j.cautions, LessAir: j.lessAir}, ""
}

// Cost returns what a quantity of the measure costs.
func (m *Measure) Cost(quantity float64) float64 {
	return m.Terms.Cost(quantity)
}

// Companion gives a state the mechanical outdoor air it lacks: extract fans
// controlled by demand, or more of the supply it has, sized so that fans and airing
// alone meet the least airflow; infiltration comes on top. It returns the flow added,
// m3/h.
func Companion(s *state.State, t *archetype.Measure) float64 {
	a := &s.Air
	missing := a.MinimumM3H - a.AiringM3H - min(a.SupplyM3H, a.ExtractM3H)
	if present := max(a.SupplyM3H, a.ExtractM3H) - min(a.SupplyM3H, a.ExtractM3H); missing > present {
		added := missing - present
		switch a.Ventilation {
		case building.Balanced, building.BalancedRecovery:
			a.SupplyM3H += added
			a.ExtractM3H += added
		case building.SupplyFan:
			a.SupplyM3H += added
		default:
			a.ExtractM3H = a.SupplyM3H + missing
			a.Ventilation = building.DemandControlled
			a.StackDuctM2 = 0
			if a.FanPowerWM3H == 0 {
				a.FanPowerWM3H = t.Target["fan_power"]
			}
		}
		return added
	}
	return 0
}
