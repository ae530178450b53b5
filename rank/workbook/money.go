package workbook

import (
	"math"

	"kelvinrow/estimate/archetype"
	"kelvinrow/estimate/finance"
	"kelvinrow/estimate/measure"
	"kelvinrow/estimate/result"
)

// names of cells on the Assumptions sheet that formulas use.
const discountName = "discount_rate"

// carrierTerms is what a carrier costs, and the names of the cells that say so.
type carrierTerms struct {
	*archetype.Carrier
	price, rise string // names
	slug        string
}

// measureTerms is what a measure costs, and the names of the cells that say so.
type measureTerms struct {
	*archetype.Measure
	slug                      string
	fixed, unit, life, upkeep string // names
	levelName                 string // name of the present value of 1 a year
	level                     float64
	pvName                    map[string]string  // by carrier word: present value of 1 a year, growing
	pv                        map[string]float64 // with the carrier's price rise
	sheet                     string             // of the measure's first page
}

// terms is everything money is computed with.
type terms struct {
	rate      float64
	carriers  []*carrierTerms
	byWord    map[string]*carrierTerms
	measures  []*measureTerms // parallel to Run.Measures
	companion *measureTerms
}

// presentValueFormula is the formula of finance.PresentValueFactor.
func presentValueFormula(rise, life string) string {
	r := discountName
	if rise == "" {
		return "IF(" + r + "=0," + life + ",(1-(1+" + r + ")^-" + life + ")/" + r + ")"
	}
	return "IF(" + r + "=" + rise + "," + life + ",(1+" + rise + ")/(" + r + "-" + rise + ")*(1-((1+" + rise + ")/(1+" + r + "))^" + life + "))"
}

func newTerms(set *archetype.Set, keys []string, names namer) (*terms, error) {
	t := &terms{rate: set.Economics.DiscountRate, byWord: map[string]*carrierTerms{}}
	names.take(discountName)
	for i := range set.Carriers {
		c := &carrierTerms{Carrier: &set.Carriers[i], slug: slug(set.Carriers[i].Word)}
		c.price, c.rise = names.defined("price", c.slug), names.defined("rise", c.slug)
		t.carriers = append(t.carriers, c)
		t.byWord[c.Word] = c
	}
	if t.byWord[electricity] == nil {
		return nil, missing("carriers table", electricity)
	}
	made := map[string]*measureTerms{}
	for i := range set.Measures {
		m := t.newMeasure(&set.Measures[i], names)
		made[m.Key] = m
	}
	for _, key := range keys {
		m := made[key]
		if m == nil {
			return nil, missing("measures table", key)
		}
		t.measures = append(t.measures, m)
	}
	t.companion = made[measure.CompanionKey]
	return t, nil
}

func (t *terms) newMeasure(a *archetype.Measure, names namer) *measureTerms {
	m := &measureTerms{Measure: a, slug: slug(a.Key), pvName: map[string]string{}, pv: map[string]float64{}}
	m.fixed, m.unit = names.defined("cost", m.slug, "fixed"), names.defined("cost", m.slug, "unit")
	m.life, m.upkeep = names.defined("life", m.slug), names.defined("upkeep", m.slug)
	m.levelName = names.defined("pv_level", m.slug)
	m.level = finance.PresentValueFactor(t.rate, 0, a.LifeYears)
	for _, c := range t.carriers {
		m.pvName[c.Word] = names.defined("pv", c.slug, m.slug)
		m.pv[c.Word] = finance.PresentValueFactor(t.rate, c.PriceRise, a.LifeYears)
	}
	return m
}

// amounts is the money of one measure on one building, computed from the numbers
// as the sheet holds them, in the order of the sheet's formulas.
type amounts struct {
	own, vent, cost, upkeep float64
	money                   float64
	pays                    bool
	payback                 float64
	npv                     float64
	perKWh                  float64 // cost of saved energy
}

// work holds the numbers a row's money formulas use, rounded as in the sheet.
type work struct {
	quantity, companion         float64
	priced, pricedCompanion     float64 // amounts that cost the full price per unit: economies of size taken off
	heatBefore, heatAfter       float64
	fansBefore, fansAfter       float64
	saving                      float64
	carrierBefore, carrierAfter *carrierTerms
}

// Decimals of the values that formulas build on.
const (
	energyDecimals   = 3
	quantityDecimals = 6 // unit costs are large
)

// priced is the amount that at the full price per unit costs what a quantity costs.
func priced(a *archetype.Measure, quantity float64) float64 {
	return fixed(quantity*a.SizeFactor(quantity), quantityDecimals)
}

func (t *terms) workOf(a *measureTerms, b *result.Building, m *result.Measure) work {
	e := func(v float64) float64 { return fixed(v, energyDecimals) }
	return work{
		priced: priced(a.Measure, m.Quantity), pricedCompanion: priced(t.companion.Measure, m.CompanionQuantity),
		quantity: fixed(m.Quantity, quantityDecimals), companion: fixed(m.CompanionQuantity, quantityDecimals),
		heatBefore: e(m.HeatBeforeKWh), heatAfter: e(m.HeatAfterKWh),
		fansBefore: e(m.FansBeforeKWh), fansAfter: e(m.FansAfterKWh),
		saving:        e(m.SavingKWh),
		carrierBefore: t.byWord[b.Carrier], carrierAfter: t.byWord[m.CarrierAfter],
	}
}

// amounts computes the money of a row. The conversions keep the compiler from
// fusing a product and a sum, which a spreadsheet does not do.
func (t *terms) amounts(m *measureTerms, w *work) (a amounts) {
	power := t.byWord[electricity]
	a.own = m.FixedCost + float64(m.UnitCost*w.priced)
	if w.companion > 0 {
		a.vent = t.companion.FixedCost + float64(t.companion.UnitCost*w.pricedCompanion)
	}
	a.cost = a.own + a.vent
	a.upkeep = float64(a.own*m.UpkeepShare) + float64(a.vent*t.companion.UpkeepShare)

	fans := w.fansBefore - w.fansAfter
	was, is := w.carrierBefore, w.carrierAfter
	if was == is {
		heat := float64((w.heatBefore - w.heatAfter) * was.PricePerKWh)
		a.money = heat + float64(fans*power.PricePerKWh)
		a.npv = -a.cost + float64(heat*m.pv[was.Word])
	} else {
		a.money = float64(w.heatBefore*was.PricePerKWh) - float64(w.heatAfter*is.PricePerKWh) + float64(fans*power.PricePerKWh)
		a.npv = -a.cost + float64(w.heatBefore*was.PricePerKWh*m.pv[was.Word]) - float64(w.heatAfter*is.PricePerKWh*m.pv[is.Word])
	}
	a.npv += float64(fans * power.PricePerKWh * m.pv[electricity])
	a.npv -= float64(a.upkeep * m.level)

	if net := a.money - a.upkeep; net > 0 {
		a.pays, a.payback = true, a.cost/net
	}
	a.perKWh = math.Inf(1)
	if w.saving > 0 {
		a.perKWh = (a.cost/m.level + a.upkeep) / w.saving
	}
	return a
}

// cells names the cells of a row that its formulas refer to, as "X#" with # for
// the row.
type cells struct {
	priced, pricedCompanion, saving              string
	heatBefore, heatAfter, fansBefore, fansAfter string
	own, vent, cost, upkeep, money               string
}

// formulas are the money formulas of a row, escaped, with # for the row.
type formulas struct {
	own, vent, cost, upkeep, payback, perKWh string
	money, npv                               map[[2]string]string // by carrier before and after
}

func (t *terms) formulas(m *measureTerms, c *cells) *formulas {
	f := &formulas{
		own:     m.fixed + "+" + m.unit + "*" + c.priced,
		vent:    t.companion.fixed + "+" + t.companion.unit + "*" + c.pricedCompanion,
		cost:    c.own + "+" + c.vent,
		upkeep:  c.own + "*" + m.upkeep + "+" + c.vent + "*" + t.companion.upkeep,
		payback: escape("IF(" + c.money + "<=" + c.upkeep + `,"never",` + c.cost + "/(" + c.money + "-" + c.upkeep + "))"),
		perKWh:  "(" + c.cost + "/" + m.levelName + "+" + c.upkeep + ")/" + c.saving,
		money:   map[[2]string]string{},
		npv:     map[[2]string]string{},
	}
	power := t.byWord[electricity]
	fans := "(" + c.fansBefore + "-" + c.fansAfter + ")*" + power.price
	for _, was := range t.carriers {
		for _, is := range t.carriers {
			k := [2]string{was.Word, is.Word}
			if was == is {
				heat := "(" + c.heatBefore + "-" + c.heatAfter + ")*" + was.price
				f.money[k] = heat + "+" + fans
				f.npv[k] = "-" + c.cost + "+" + heat + "*" + m.pvName[was.Word]
			} else {
				f.money[k] = c.heatBefore + "*" + was.price + "-" + c.heatAfter + "*" + is.price + "+" + fans
				f.npv[k] = "-" + c.cost + "+" + c.heatBefore + "*" + was.price + "*" + m.pvName[was.Word] +
					"-" + c.heatAfter + "*" + is.price + "*" + m.pvName[is.Word]
			}
			f.npv[k] += "+" + fans + "*" + m.pvName[electricity] + "-" + c.upkeep + "*" + m.levelName
		}
	}
	return f
}
