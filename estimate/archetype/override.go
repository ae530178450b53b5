package archetype

import (
	"fmt"
	"slices"
	"sort"
	"strings"
)

// Override changes one number of a set, named as OWNER.QUANTITY=NUMBER: a carrier's
// price, price_rise or co2; a measure's fixed_cost, unit_cost, life, upkeep or one
// of its parameters; a use's temperature, gains, hot_water, air_per_m2 or
// air_per_person; economics' discount_rate or period. Owners are written as in the
// tables, with hyphens for spaces. The set must be checked afterwards.
func (s *Set) Override(assignment string) error {
	name, value, ok := strings.Cut(assignment, "=")
	x, err := finite(strings.TrimSuffix(strings.TrimSpace(value), "%"))
	if !ok || err != nil {
		return fmt.Errorf("%q is not of the form NAME=NUMBER, such as gas.price=0.14", assignment)
	}
	if strings.HasSuffix(strings.TrimSpace(value), "%") {
		x /= 100
	}
	owner, quantity, ok := strings.Cut(strings.TrimSpace(name), ".")
	if !ok {
		return fmt.Errorf("%q names no quantity: write OWNER.QUANTITY=NUMBER, such as gas.price=0.14", assignment)
	}
	fields := s.fields()
	of, ok := fields[slug(owner)]
	if !ok {
		return fmt.Errorf("%q: nothing is called %q%s", assignment, owner, nearest(slug(owner), sortedNames(fields)))
	}
	set, ok := of[strings.ReplaceAll(strings.TrimSpace(quantity), "-", "_")]
	if !ok {
		return fmt.Errorf("%q: %s has no %q; it has %s", assignment, owner, quantity, strings.Join(sortedNames(of), ", "))
	}
	set(x)
	return nil
}

func slug(name string) string {
	return strings.Join(strings.Fields(strings.ToLower(strings.TrimSpace(name))), "-")
}

type setters map[string]func(float64)

func to(p *float64) func(float64) { return func(x float64) { *p = x } }

// fields are the numbers that Override reaches, by owner and quantity.
func (s *Set) fields() map[string]setters {
	out := map[string]setters{
		"economics": {"discount_rate": to(&s.Economics.DiscountRate), "period": to(&s.Economics.PeriodYears)},
	}
	for i := range s.Uses {
		u := &s.Uses[i]
		out[slug(u.Word)] = setters{
			"temperature": to(&u.IndoorC), "gains": to(&u.InternalGainWM2), "hot_water": to(&u.HotWaterKWhM2),
			"air_per_m2": to(&u.MinAirLSM2), "air_per_person": to(&u.MinAirLSPerson),
		}
	}
	for i := range s.Measures {
		m := &s.Measures[i]
		f := setters{"fixed_cost": to(&m.FixedCost), "unit_cost": to(&m.UnitCost), "life": to(&m.LifeYears), "upkeep": to(&m.UpkeepShare)}
		for name := range m.Target {
			f[name] = func(x float64) {
				low, high := m.TargetSpread(name)
				m.SetTarget(name, x, min(low, x), max(high, x))
			}
		}
		out[slug(m.Key)] = f
	}
	for i := range s.Carriers {
		c := &s.Carriers[i]
		out[slug(c.Word)] = setters{"price": to(&c.PricePerKWh), "price_rise": to(&c.PriceRise), "co2": to(&c.CO2KgKWh)}
	}
	return out
}

func sortedNames[V any](m map[string]V) []string {
	names := make([]string, 0, len(m))
	for n := range m {
		names = append(names, n)
	}
	sort.Strings(names)
	return names
}

// nearest suggests what begins alike.
func nearest(name string, names []string) string {
	for n := len(name); n >= 2; n-- {
		if i := slices.IndexFunc(names, func(o string) bool { return strings.HasPrefix(o, name[:n]) }); i >= 0 {
			return fmt.Sprintf("; did you mean %q?", names[i])
		}
	}
	return ""
}
