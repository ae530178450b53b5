// Package estimate makes a heat balance of every building: it fills what is not
// known from archetype rules, builds the building's state, runs the monthly
// balance for the building as it is and after each retrofit measure, and keeps
// the origin of every number. Buildings are independent of each other, so they
// are computed in parallel and the result does not depend on how many workers
// there are.
package estimate

import (
	"fmt"

	"kelvinrow/estimate/archetype"
	"kelvinrow/estimate/climate"
	"kelvinrow/estimate/finance"
	"kelvinrow/estimate/measure"
)

// Basis is what all estimates of a run rest on. It is read-only once made and
// shared by all workers.
type Basis struct {
	Set      *archetype.Set
	Climate  *climate.Climate
	Measures []measure.Measure

	// Worth, if set, makes every estimate bring its packages, valued by it. It must
	// be set before the first.
	Worth Worth

	companion *archetype.Measure
	carriers  map[string]*archetype.Carrier

	// Present value of 1 a year over the calculation period: rising with the price
	// of a carrier, by its word; and level.
	rising map[string]float64
	level  float64
}

// NewBasis checks that set and climate can carry an estimate.
func NewBasis(set *archetype.Set, c *climate.Climate) (*Basis, error) {
	if err := c.Validate(); err != nil {
		return nil, fmt.Errorf("climate %s: %w", c.Name, err)
	}
	measures, err := measure.All(set)
	if err != nil {
		return nil, err
	}
	b := &Basis{Set: set, Climate: c, Measures: measures, carriers: map[string]*archetype.Carrier{}, rising: map[string]float64{}}
	rate, period := set.Economics.DiscountRate, set.Economics.PeriodYears
	b.level = finance.PresentValueFactor(rate, 0, period)
	for i := range set.Carriers {
		c := &set.Carriers[i]
		b.carriers[c.Word] = c
		b.rising[c.Word] = finance.PresentValueFactor(rate, c.PriceRise, period)
	}
	for i := range measures {
		if measures[i].Terms.Key == measure.CompanionKey {
			b.companion = measures[i].Terms
		}
	}
	if b.companion == nil {
		return nil, fmt.Errorf("measures table: %q is missing; measures that tighten a building bring it along", measure.CompanionKey)
	}
	if b.carriers["electricity"] == nil {
		return nil, fmt.Errorf("carriers table: %q is missing; fans need it", "electricity")
	}
	return b, nil
}

// Keys returns the measures' keys in order.
func (b *Basis) Keys() []string {
	keys := make([]string, len(b.Measures))
	for i := range b.Measures {
		keys[i] = b.Measures[i].Terms.Key
	}
	return keys
}

// Hash identifies the assumptions by content: rules, tables and climate.
func (b *Basis) Hash() string {
	s := *b.Set
	s.Climates = []climate.Climate{*b.Climate}
	return s.Hash()
}
