package estimate

import (
	"cmp"
	"math"
	"slices"

	"kelvinrow/estimate/finance"
	"kelvinrow/estimate/measure"
	"kelvinrow/estimate/result"
	"kelvinrow/estimate/state"
)

// Worth is what a package is valued by.
type Worth func(*result.Package) float64

// MostPackages is how many packages of a building are kept.
const MostPackages = 24

// packer makes packages; its memory is used again for the next building.
type packer struct {
	combiner measure.Combiner
	all      []result.Package
	after    outcome
}

// packages makes every sensible combination of measures on a building, each with the
// balance made again, and keeps those worth a choice under any budget: what costs
// more than another and is worth less is dropped. The first is to do nothing.
func (b *Basis) packages(p *packer, m *Model, before *outcome, worth Worth) []result.Package {
	p.all = p.all[:0]
	load := func(s *state.State) float64 {
		in := balanceInput(s)
		return b.designLoad(s, &in)
	}
	p.combiner.Combine(b.Measures, m.State, &m.Facts, load, func(c *measure.Combination) {
		p.all = append(p.all, b.pack(p, c, m, before))
	})
	return pareto(p.all, worth)
}

// pack evaluates one combination.
func (b *Basis) pack(p *packer, c *measure.Combination, m *Model, before *outcome) result.Package {
	o := &p.after
	b.run(c.State, o)
	k := result.Package{Set: c.Set, Cost: c.Cost, UpkeepPerYear: c.Upkeep}
	replaced := b.replacementCost(c.Parts)
	if c.LessAir && o.underVentilated {
		if k.CompanionQuantity = measure.Companion(c.State, b.companion); k.CompanionQuantity > 0 {
			cost := b.companion.Cost(k.CompanionQuantity)
			k.Cost += cost
			k.UpkeepPerYear += b.companion.UpkeepShare * cost
			replaced += b.replacementCost([]measure.Part{{Terms: b.companion, Cost: cost}})
			b.run(c.State, o)
		}
	}
	k.NeedKWh = o.needKWh
	k.CarrierAfter = c.State.System.Carrier
	k.HeatAfterKWh, k.FansAfterKWh = o.heatKWh, o.fansKWh
	k.SavingKWh = (before.heatKWh - o.heatKWh) + (before.fansKWh - o.fansKWh)
	k.CO2Kg = before.co2Kg - o.co2Kg
	k.MoneyPerYear = before.money - o.money
	k.UnderVentilated = o.underVentilated
	k.NPV = b.packageWorth(&k, replaced, m, before)
	k.Cautions = c.Cautions | b.cautions(c.State, o, m) | buildingCautions(m)
	return k
}

// replacementCost is what parts that do not last the calculation period cost again,
// less what they are worth at its end (EN 15459-1).
func (b *Basis) replacementCost(parts []measure.Part) float64 {
	e := &b.Set.Economics
	sum := 0.0
	for _, p := range parts {
		g := finance.GlobalCostOver(p.Cost, 0, []finance.Component{{Cost: p.Cost, LifeYears: p.Terms.LifeYears}}, e.DiscountRate, 0, e.PeriodYears)
		sum += g.Replacement - g.Residual
	}
	return sum
}

// packageWorth is the net present value over the calculation period: measures of
// different lives are replaced within it and worth something at its end, in the
// manner of EN 15459-1.
func (b *Basis) packageWorth(k *result.Package, replaced float64, m *Model, before *outcome) float64 {
	was, is, power := b.carriers[m.State.System.Carrier], b.carriers[k.CarrierAfter], b.carriers["electricity"]
	return -k.Cost - replaced +
		before.heatKWh*was.PricePerKWh*b.rising[was.Word] -
		k.HeatAfterKWh*is.PricePerKWh*b.rising[is.Word] +
		(before.fansKWh-k.FansAfterKWh)*power.PricePerKWh*b.rising[power.Word] -
		k.UpkeepPerYear*b.level
}

// pareto keeps packages of which none is both cheaper and worth more, by cost; of
// many, those that bound the rest and others evenly between. The first costs and is
// worth nothing.
func pareto(all []result.Package, worth Worth) []result.Package {
	value := func(k *result.Package) float64 {
		if v := worth(k); !math.IsNaN(v) {
			return v
		}
		return math.Inf(-1)
	}
	order := make([]int, len(all))
	for i := range order {
		order[i] = i
	}
	slices.SortFunc(order, func(x, y int) int {
		a, c := &all[x], &all[y]
		return cmp.Or(cmp.Compare(a.Cost, c.Cost), -cmp.Compare(value(a), value(c)), cmp.Compare(a.Set, c.Set))
	})
	kept := []result.Package{{}}
	if len(all) > 0 {
		kept[0] = all[0] // the empty combination comes first
	}
	best := 0.0
	for _, i := range order {
		if all[i].Set == 0 {
			continue
		}
		if v := value(&all[i]); v > best && all[i].Cost >= 0 {
			best = v
			kept = append(kept, all[i])
		}
	}
	if len(kept) > MostPackages {
		kept = thin(kept, value)
	}
	return slices.Clone(kept)
}

// thin keeps the packages on the upper hull of cost and worth, and of the others
// those furthest from what is kept, until there are MostPackages.
func thin(kept []result.Package, value func(*result.Package) float64) []result.Package {
	keep := make([]bool, len(kept))
	hull := []int{}
	for i := range kept {
		for len(hull) >= 2 {
			a, m := &kept[hull[len(hull)-2]], &kept[hull[len(hull)-1]]
			if (value(m)-value(a))*(kept[i].Cost-a.Cost) > (value(&kept[i])-value(a))*(m.Cost-a.Cost) {
				break
			}
			hull = hull[:len(hull)-1]
		}
		hull = append(hull, i)
	}
	n := 0
	for _, i := range hull[:min(len(hull), MostPackages)] {
		keep[i] = true
		n++
	}
	for ; n < MostPackages; n++ {
		widest, at := -1, -1
		last := 0
		for i := range kept {
			if !keep[i] {
				continue
			}
			if gap := i - last; gap > widest && gap > 1 {
				widest, at = gap, last+gap/2
			}
			last = i
		}
		if at < 0 {
			break
		}
		keep[at] = true
	}
	out := make([]result.Package, 0, MostPackages)
	for i := range kept {
		if keep[i] {
			out = append(out, kept[i])
		}
	}
	return out
}
