package workbook

import (
	"fmt"
	"math"
	"strings"

	"kelvinrow/estimate/building"
	"kelvinrow/estimate/caution"
	"kelvinrow/estimate/result"
)

// measureRow is one row of a measure's sheet.
type measureRow struct {
	rank     int
	b        *result.Building
	m        *result.Measure
	work     work
	money    amounts
	cautions string
}

func (b *book) addMeasures() error {
	for i := range b.terms.measures {
		if err := b.addMeasure(i); err != nil {
			return err
		}
	}
	return nil
}

func (b *book) addMeasure(i int) error {
	m, total := b.terms.measures[i], &b.summary.Measures[i]
	shown := buildings(total.Applies)
	if b.shown[i] < total.Applies {
		shown = fmt.Sprintf("The best %s of %s", count(b.shown[i]), buildings(total.Applies))
	}
	l := &list[measureRow]{
		about: "ranks " + buildings(total.Applies), measure: true,
		tab: accent, title: m.Label,
		notes: []string{
			fmt.Sprintf("%s, ranked by %s. It does not apply to %s others and would save nothing in %s.",
				shown, b.in.Yardstick.Words(), count(total.Excluded), count(total.NoSaving)),
			"Money follows by formula from the costs and prices on the sheet Assumptions; energy, CO₂ and ranks are values of the run. Savings of several measures on one building do not add up.",
		},
		frozen: 3, wide: 2, rows: b.shown[i], table: m.Key,
		columns: b.measureColumns(m),
	}
	b.measureMoney(m, l)
	rowsOf := b.lists[i]
	l.load = func(k int, x *measureRow) {
		row := rowsOf[k]
		bl := &b.in.Buildings[row.Index]
		*x = measureRow{rank: row.Rank, b: bl, m: &bl.Measures[i]}
		x.work = b.terms.workOf(m, bl, x.m)
		x.money = b.terms.amounts(m, &x.work)
		x.cautions = strings.Join(caution.Shorts(x.m.Cautions), "; ")
	}
	l.height = func(x *measureRow) float64 { return rowHeight(wrappedText{x.cautions, cautionWidth}) }
	l.links = func(k *links, at, row int) { k.add(2, row, b.buildings.target(rowsOf[at].Index)) }
	return addList(b, &b.measures[i], l)
}

// quantityHead is the header of the treated amount by its unit.
func quantityHead(unit string) string {
	switch unit {
	case "m2":
		return "Treated area (m²)"
	case "m2 floor":
		return "Floor area served (m²)"
	case "m3/h":
		return "Airflow (m³/h)"
	case "dwelling":
		return "Dwellings"
	case "building":
		return "Buildings"
	case "kW":
		return "Heat load (kW)"
	}
	return "Amount (" + unit + ")"
}

func (b *book) measureColumns(m *measureTerms) []column[measureRow] {
	var cols []column[measureRow]
	text := func(band, head string, width float64, get func(*measureRow) string) {
		cols = append(cols, textColumn(b, band, head, width, get))
	}
	number := func(key, band, head string, width float64, format string, decimals int, get func(*measureRow) float64) {
		cols = append(cols, numberColumn(b, key, band, head, width, format, decimals, get))
	}
	formula := func(key, band, head string, width float64, format string) {
		cols = append(cols, column[measureRow]{key: key, band: band, head: head, width: width, style: b.st.value(format), right: true})
	}
	aside := func(from int) {
		for i := from; i < len(cols); i++ {
			cols[i].aside = true
		}
	}
	const who, saves, money, firm, air, workings = "Building", "What it saves", "Money", "What the inputs rest on", "Outdoor air and cautions", "What the money formulas use"
	cur := b.currency()

	number("", who, "Rank", 10, plain, 0, func(x *measureRow) float64 { return float64(x.rank) })
	text(who, "Building", 12, func(x *measureRow) string { return x.b.ID })
	cols[len(cols)-1].style = b.st.textLink()
	text(who, "Name", 22, func(x *measureRow) string { return x.b.Name })
	text(who, "Address", 32, func(x *measureRow) string { return address(x.b.Street, x.b.Postcode, x.b.Town) })
	text(who, "District", 13, func(x *measureRow) string { return x.b.District })
	text(who, "Use", 17, func(x *measureRow) string { return x.b.Use })
	number("", who, "Year built", 8, plain, 0, func(x *measureRow) float64 {
		if x.b.YearBuilt == 0 {
			return math.NaN()
		}
		return float64(x.b.YearBuilt)
	})
	number("", who, "Floor area (m²)", 10, whole, 2, func(x *measureRow) float64 { return x.b.FloorAreaM2 })
	number("quantity", who, quantityHead(m.Unit), 11, whole, quantityDecimals, func(x *measureRow) float64 { return x.work.quantity })

	number("saving", saves, "Saving (kWh/a)", 11, whole, energyDecimals, func(x *measureRow) float64 { return x.work.saving })
	cols[len(cols)-1].bar = true
	number("", saves, "Saving (share of delivered)", 11, percent, 6, func(x *measureRow) float64 {
		return x.m.SavingKWh / (x.m.HeatBeforeKWh + x.m.FansBeforeKWh)
	})
	number("", saves, "Saving (kWh/(m² a))", 13, one, 4, func(x *measureRow) float64 { return x.m.SavingKWh / x.b.FloorAreaM2 })
	number("", saves, "CO₂ saved (kg/a)", 10, whole, 3, func(x *measureRow) float64 { return x.m.CO2Kg })

	formula("cost", money, "Cost ("+cur+")", 12, whole)
	formula("money", money, "Money saved ("+cur+"/a)", 12, whole)
	formula("payback", money, "Payback (years)", 10, one)
	formula("npv", money, "Net present value ("+cur+")", 13, whole)
	formula("perKWh", money, "Cost of saved energy ("+cur+"/kWh)", 12, three)

	for k := building.NumKinds - 1; k >= 0; k-- {
		number("", firm, kindLabels[k]+" (share)", 12, percent, 6, func(x *measureRow) float64 { return x.b.InputShare[k] })
	}

	number("companion", air, "Ventilation it brings (m³/h)", 12, whole, quantityDecimals, func(x *measureRow) float64 {
		if x.work.companion == 0 {
			return math.NaN()
		}
		return x.work.companion
	})
	cols = append(cols,
		airColumn(b, air, "Outdoor air today", func(x *measureRow) (known, tooLittle bool) { return true, x.b.UnderVentilated }),
		airColumn(b, air, "Outdoor air after", func(x *measureRow) (known, tooLittle bool) { return true, x.m.UnderVentilated }))
	text(air, "Cautions", cautionWidth, func(x *measureRow) string { return x.cautions })
	cols[len(cols)-1].style = b.st.wrapped()

	at := len(cols)
	text(workings, "Carrier today", 13, func(x *measureRow) string { return x.b.Carrier })
	text(workings, "Carrier after", 13, func(x *measureRow) string { return x.m.CarrierAfter })
	number("heatBefore", workings, "Heat delivered today (kWh/a)", 12, whole, energyDecimals, func(x *measureRow) float64 { return x.work.heatBefore })
	number("heatAfter", workings, "Heat delivered after (kWh/a)", 12, whole, energyDecimals, func(x *measureRow) float64 { return x.work.heatAfter })
	number("fansBefore", workings, "Fans today (kWh/a)", 11, whole, energyDecimals, func(x *measureRow) float64 { return x.work.fansBefore })
	number("fansAfter", workings, "Fans after (kWh/a)", 11, whole, energyDecimals, func(x *measureRow) float64 { return x.work.fansAfter })
	number("priced", workings, "Amount at the full price", 12, whole, quantityDecimals, func(x *measureRow) float64 { return x.work.priced })
	number("pricedCompanion", workings, "Ventilation at the full price (m³/h)", 12, whole, quantityDecimals, func(x *measureRow) float64 { return x.work.pricedCompanion })
	formula("own", workings, "Cost of the measure itself ("+cur+")", 13, whole)
	formula("vent", workings, "Cost of the ventilation it brings ("+cur+")", 14, whole)
	formula("upkeep", workings, "Upkeep ("+cur+"/a)", 10, whole)
	aside(at)
	return cols
}

// measureMoney gives the columns of money their formulas.
func (b *book) measureMoney(m *measureTerms, l *list[measureRow]) {
	f := b.terms.formulas(m, &cells{
		priced: l.of("priced"), pricedCompanion: l.of("pricedCompanion"), saving: l.of("saving"),
		heatBefore: l.of("heatBefore"), heatAfter: l.of("heatAfter"), fansBefore: l.of("fansBefore"), fansAfter: l.of("fansAfter"),
		own: l.of("own"), vent: l.of("vent"), cost: l.of("cost"), upkeep: l.of("upkeep"), money: l.of("money"),
	})
	put := map[string]func(r *rows, col, style int, x *measureRow){
		"own": func(r *rows, col, style int, x *measureRow) { r.formula(col, style, f.own, x.money.own) },
		"vent": func(r *rows, col, style int, x *measureRow) {
			if x.work.companion == 0 {
				r.int(col, style, 0)
				return
			}
			r.formula(col, style, f.vent, x.money.vent)
		},
		"cost":   func(r *rows, col, style int, x *measureRow) { r.formula(col, style, f.cost, x.money.cost) },
		"upkeep": func(r *rows, col, style int, x *measureRow) { r.formula(col, style, f.upkeep, x.money.upkeep) },
		"money": func(r *rows, col, style int, x *measureRow) {
			r.formula(col, style, f.money[[2]string{x.b.Carrier, x.m.CarrierAfter}], x.money.money)
		},
		"npv": func(r *rows, col, style int, x *measureRow) {
			r.formula(col, style, f.npv[[2]string{x.b.Carrier, x.m.CarrierAfter}], x.money.npv)
		},
		"payback": func(r *rows, col, style int, x *measureRow) {
			if !x.money.pays {
				r.formulaText(col, style, f.payback, "never")
				return
			}
			r.formula(col, style, f.payback, x.money.payback)
		},
		"perKWh": func(r *rows, col, style int, x *measureRow) { r.formula(col, style, f.perKWh, x.money.perKWh) },
	}
	for i := range l.columns {
		if p, ok := put[l.columns[i].key]; ok {
			l.columns[i].put = p
		}
	}
}
