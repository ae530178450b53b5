package workbook

import (
	"math"
	"strings"

	"kelvinrow/rank"
)

const totalsSheet = "Totals"

// totalRow is one measure added up.
type totalRow struct {
	m     *measureTerms
	t     *rank.MeasureTotals
	first string // name of the measure's first sheet

	saved                   []float64 // by carrier, as in the sheet
	quantity, companion     float64
	priced, pricedCompanion float64 // at the full price per unit
	own, vent, cost, upkeep float64
	money, npv              float64
	pays                    bool
	payback                 float64
}

// total adds up a measure from rounded sums, in the order of the formulas.
func (b *book) total(i int) (x totalRow) {
	m, t := b.terms.measures[i], &b.summary.Measures[i]
	c := b.terms.companion
	x = totalRow{m: m, t: t, first: b.measures[i].sheets[0],
		quantity: fixed(t.Quantity, quantityDecimals), companion: fixed(t.CompanionQuantity, quantityDecimals)}
	for k := range b.in.Buildings {
		if b.places[i][k] == 0 {
			continue
		}
		r := &b.in.Buildings[k].Measures[i]
		x.priced += priced(m.Measure, r.Quantity)
		x.pricedCompanion += priced(c.Measure, r.CompanionQuantity)
	}
	x.priced, x.pricedCompanion = fixed(x.priced, quantityDecimals), fixed(x.pricedCompanion, quantityDecimals)
	x.own = float64(float64(t.Applies)*m.FixedCost) + float64(x.priced*m.UnitCost)
	x.vent = float64(float64(t.CompanionCount)*c.FixedCost) + float64(x.pricedCompanion*c.UnitCost)
	x.cost = x.own + x.vent
	x.upkeep = float64(x.own*m.UpkeepShare) + float64(x.vent*c.UpkeepShare)
	worth := 0.0
	for k, word := range b.summary.Carriers {
		saved := fixed(t.SavedKWh[k], energyDecimals)
		x.saved = append(x.saved, saved)
		price := b.terms.byWord[word].PricePerKWh
		x.money += float64(saved * price)
		worth += float64(saved * price * m.pv[word])
	}
	x.npv = worth - x.cost - float64(x.upkeep*m.level)
	if net := x.money - x.upkeep; net > 0 {
		x.pays, x.payback = true, x.cost/net
	}
	return x
}

// addTotals makes the sheet that the opening page adds up from.
func (b *book) addTotals() error {
	s := b.planFixed(totalsSheet, len(b.terms.measures))
	l := &list[totalRow]{
		about: "each measure added up",
		tab:   accent, title: "Totals by measure",
		notes: []string{
			"Each measure on its own, in every building where it applies and saves energy, whatever it costs. Measures on the same building do not add up.",
			"A measure that changes the energy carrier saves all of the old one and adds the new one, which then stands with a minus.",
		},
		frozen: 1, wide: 2, rows: len(b.terms.measures), table: "totals",
		columns: b.totalColumns(),
	}
	l.load = func(i int, x *totalRow) { *x = b.total(i) }
	l.links = func(k *links, i, row int) { k.add(1, row, quoteSheet(b.measures[i].sheets[0])+"!A1") }
	b.totalMoney(l)
	b.totalCell = func(key string, i int) string {
		return quoteSheet(s.sheets[0]) + "!" + strings.TrimSuffix(l.of(key), "#") + itoa(listFirst+i)
	}
	return addList(b, &s, l)
}

func (b *book) totalColumns() []column[totalRow] {
	var cols []column[totalRow]
	number := func(key, band, head string, width float64, decimals int, get func(*totalRow) float64) {
		cols = append(cols, numberColumn(b, key, band, head, width, whole, decimals, get))
	}
	const what, saves, by, money = "Measure", "What it saves", "Delivered energy saved, by carrier", "Money"
	first := textColumn(b, what, "Measure", 36, func(x *totalRow) string { return x.m.Label })
	first.style = b.st.textLink()
	cols = append(cols, first)
	number("count", what, "Buildings", 10, 0, func(x *totalRow) float64 { return float64(x.t.Applies) })
	number("quantity", what, "Amount", 13, quantityDecimals, func(x *totalRow) float64 { return x.quantity })
	cols = append(cols, textColumn(b, what, "Unit of the amount", 22, func(x *totalRow) string { return quantityHead(x.m.Unit) }))
	number("fitted", what, "Buildings it brings ventilation to", 12, 0, func(x *totalRow) float64 { return float64(x.t.CompanionCount) })
	number("companion", what, "Ventilation it brings (m³/h)", 12, quantityDecimals, func(x *totalRow) float64 { return x.companion })
	number("priced", what, "Amount at the full price", 13, quantityDecimals, func(x *totalRow) float64 { return x.priced })
	number("pricedCompanion", what, "Ventilation at the full price (m³/h)", 13, quantityDecimals, func(x *totalRow) float64 { return x.pricedCompanion })
	number("", saves, "Saving (kWh/a)", 14, energyDecimals, func(x *totalRow) float64 { return x.t.SavingKWh })
	number("", saves, "CO₂ saved (kg/a)", 13, 3, func(x *totalRow) float64 { return x.t.CO2Kg })
	for i, word := range b.summary.Carriers {
		number("saved "+word, by, capital(word)+" (kWh/a)", 14, energyDecimals, func(x *totalRow) float64 { return x.saved[i] })
	}
	cur := b.currency()
	for _, c := range []struct {
		key, head, format string
	}{
		{"own", "Cost of the measure itself (" + cur + ")", whole},
		{"vent", "Cost of the ventilation it brings (" + cur + ")", whole},
		{"cost", "Cost (" + cur + ")", whole},
		{"upkeep", "Upkeep (" + cur + "/a)", whole},
		{"money", "Money saved (" + cur + "/a)", whole},
		{"payback", "Payback (years)", one},
		{"npv", "Net present value (" + cur + ")", whole},
	} {
		cols = append(cols, column[totalRow]{key: c.key, band: money, head: c.head, width: 15, style: b.st.value(c.format), right: true})
	}
	return cols
}

func (b *book) totalMoney(l *list[totalRow]) {
	c := b.terms.companion
	own, vent, cost, upkeep, money := l.of("own"), l.of("vent"), l.of("cost"), l.of("upkeep"), l.of("money")
	formulaOf := map[string]func(x *totalRow) (string, float64){
		"own": func(x *totalRow) (string, float64) {
			return l.of("count") + "*" + x.m.fixed + "+" + l.of("priced") + "*" + x.m.unit, x.own
		},
		"vent": func(x *totalRow) (string, float64) {
			return l.of("fitted") + "*" + c.fixed + "+" + l.of("pricedCompanion") + "*" + c.unit, x.vent
		},
		"cost": func(x *totalRow) (string, float64) { return own + "+" + vent, x.cost },
		"upkeep": func(x *totalRow) (string, float64) {
			return own + "*" + x.m.upkeep + "+" + vent + "*" + c.upkeep, x.upkeep
		},
		"money": func(x *totalRow) (string, float64) {
			var parts []string
			for _, word := range b.summary.Carriers {
				parts = append(parts, l.of("saved "+word)+"*"+b.terms.byWord[word].price)
			}
			return strings.Join(parts, "+"), x.money
		},
		"payback": func(x *totalRow) (string, float64) {
			f := escape("IF(" + money + "<=" + upkeep + `,"never",` + cost + "/(" + money + "-" + upkeep + "))")
			if !x.pays {
				return f, math.Inf(1)
			}
			return f, x.payback
		},
		"npv": func(x *totalRow) (string, float64) {
			var parts []string
			for _, word := range b.summary.Carriers {
				parts = append(parts, l.of("saved "+word)+"*"+b.terms.byWord[word].price+"*"+x.m.pvName[word])
			}
			return strings.Join(parts, "+") + "-" + cost + "-" + upkeep + "*" + x.m.levelName, x.npv
		},
	}
	for i := range l.columns {
		of, ok := formulaOf[l.columns[i].key]
		if !ok {
			continue
		}
		l.columns[i].put = func(r *rows, col, style int, x *totalRow) {
			if f, v := of(x); math.IsInf(v, 1) {
				r.formulaText(col, style, f, "never")
			} else {
				r.formula(col, style, f, v)
			}
		}
	}
}
