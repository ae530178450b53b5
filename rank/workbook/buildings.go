package workbook

import (
	"fmt"
	"math"
	"strings"

	"kelvinrow/estimate/building"
	"kelvinrow/estimate/caution"
	"kelvinrow/estimate/result"
	"kelvinrow/estimate/state"
	"kelvinrow/rank"
)

// buildingRow is one row of the sheet Buildings.
type buildingRow struct {
	*result.Building
	best     int // measure, -1 without one
	cautions string
	cost     float64 // of energy per year
}

func (x *buildingRow) ok() bool { return x.Failed == "" }

// pathLabels name the paths by which heat leaves.
var pathLabels = [state.NumPaths]string{
	"Walls", "Roofs", "Ground floors", "Windows", "Outside doors", "Thermal bridges",
	"Infiltration", "Mechanical ventilation", "Airing by occupants",
}

var kindLabels = [building.NumKinds]string{"Default", "Registered", "Certified", "Metered", "Surveyed"}

const cautionWidth = 58

func (b *book) addBuildings() error {
	b.buildings = b.plan([]string{"Buildings"}, len(b.in.Buildings))
	// The measures' sheets are planned here, because the rows point at them.
	for i, m := range b.terms.measures {
		s := b.plan([]string{m.Label, capital(strings.ReplaceAll(m.Key, "-", " "))}, b.shown[i])
		b.measures = append(b.measures, s)
		m.sheet = s.sheets[0]
	}
	l := &list[buildingRow]{
		about: "every building, its losses and its use",
		tab:   muted, title: "Buildings",
		notes: []string{
			fmt.Sprintf("%s, %s could not be estimated. Energy is calculated for the building as it is, in climate %s. U-values are area-weighted.",
				buildings(b.summary.Buildings), count(b.summary.Failed), b.in.Climate.Name),
			"Energy cost follows by formula from the prices on the sheet Assumptions. Links lead to the row a building had when this workbook was written.",
		},
		frozen: 2, wide: 4, rows: len(b.in.Buildings), table: "buildings",
		columns: b.buildingColumns(),
	}
	cost := b.buildingCost(l)
	l.load = func(i int, x *buildingRow) {
		bl := &b.in.Buildings[i]
		*x = buildingRow{Building: bl, best: -1, cautions: strings.Join(caution.Shorts(bl.Cautions), "; ")}
		if x.ok() {
			x.best = rank.Best(bl, b.in.Yardstick)
			x.cost = cost(bl)
		}
	}
	l.height = func(x *buildingRow) float64 { return rowHeight(wrappedText{x.cautions + x.Failed, cautionWidth}) }
	bestColumn := 0
	for i := range l.columns {
		if l.columns[i].key == "best" {
			bestColumn = i + 1
		}
	}
	l.links = func(k *links, i, row int) {
		if m := rank.Best(&b.in.Buildings[i], b.in.Yardstick); m >= 0 {
			if p := int(b.places[m][i]); p <= b.shown[m] {
				k.add(bestColumn, row, b.measures[m].target(p-1))
			} else {
				k.add(bestColumn, row, quoteSheet(b.measures[m].sheets[0])+"!A1")
			}
		}
	}
	return addList(b, &b.buildings, l)
}

func (b *book) buildingColumns() []column[buildingRow] {
	var cols []column[buildingRow]
	text := func(band, head string, width float64, get func(*buildingRow) string) {
		cols = append(cols, textColumn(b, band, head, width, get))
	}
	number := func(key, band, head string, width float64, format string, decimals int, get func(*buildingRow) float64) {
		cols = append(cols, numberColumn(b, key, band, head, width, format, decimals, func(x *buildingRow) float64 {
			if !x.ok() {
				return math.NaN()
			}
			return get(x)
		}))
	}
	known := func(v float64) float64 {
		if v == 0 {
			return math.NaN()
		}
		return v
	}
	const who, shape, fabric, air, system, flows, loss, use, firm, next = "Building", "Size", "Fabric, U-value", "Air", "Heat supply",
		"Heat transfer", "Heat loss by path (kWh/a)", "Energy as calculated", "What the inputs rest on", "Next"
	text(who, "Building", 13, func(x *buildingRow) string { return x.ID })
	text(who, "Name", 24, func(x *buildingRow) string { return x.Name })
	text(who, "Street", 24, func(x *buildingRow) string { return x.Street })
	text(who, "Postcode", 10, func(x *buildingRow) string { return x.Postcode })
	text(who, "Town", 15, func(x *buildingRow) string { return x.Town })
	text(who, "District", 15, func(x *buildingRow) string { return x.District })
	text(who, "Use", 19, func(x *buildingRow) string { return x.Use })
	text(who, "Attachment", 16, func(x *buildingRow) string { return x.Attachment })
	number("", who, "Year built", 8, plain, 0, func(x *buildingRow) float64 { return known(float64(x.YearBuilt)) })

	number("", shape, "Heated floor area (m²)", 11, whole, 2, func(x *buildingRow) float64 { return x.FloorAreaM2 })
	number("", shape, "Heated volume (m³)", 11, whole, 2, func(x *buildingRow) float64 { return x.VolumeM3 })
	for _, u := range []struct {
		head string
		get  func(*buildingRow) float64
	}{
		{"Walls (W/m²K)", func(x *buildingRow) float64 { return x.UWall }},
		{"Roof (W/m²K)", func(x *buildingRow) float64 { return x.URoof }},
		{"Floor (W/m²K)", func(x *buildingRow) float64 { return x.UFloor }},
		{"Windows (W/m²K)", func(x *buildingRow) float64 { return x.UWindow }},
	} {
		number("", fabric, u.head, 10, two, 3, func(x *buildingRow) float64 { return known(u.get(x)) })
	}
	text(air, "Ventilation", 22, func(x *buildingRow) string { return x.Ventilation })
	number("", air, "Airtightness n50 (1/h)", 12, one, 3, func(x *buildingRow) float64 { return x.N50PerH })
	number("", air, "Outdoor air, yearly mean (1/h)", 12, two, 4, func(x *buildingRow) float64 { return x.AirChangesPerH })
	cols = append(cols, airColumn(b, air, "Outdoor air", func(x *buildingRow) (known, tooLittle bool) { return x.ok(), x.UnderVentilated }))
	text(system, "Heating", 17, func(x *buildingRow) string { return x.Heating })
	text(system, "Energy carrier", 13, func(x *buildingRow) string { return x.Carrier })
	number("", flows, "Transmission (W/K)", 13, whole, 2, func(x *buildingRow) float64 { return x.TransmissionWK })
	number("", flows, "Ventilation, yearly mean (W/K)", 13, whole, 2, func(x *buildingRow) float64 { return x.VentilationWK })
	number("", flows, "Design heat load (kW)", 10, one, 3, func(x *buildingRow) float64 { return x.DesignLoadW / 1000 })
	for p, label := range pathLabels {
		number("", loss, label, 12, whole, energyDecimals, func(x *buildingRow) float64 { return x.LossByPathKWh[p] })
	}
	number("", loss, "Covered by sun, people, appliances", 13, whole, energyDecimals, func(x *buildingRow) float64 { return x.GainsUsedKWh })
	number("", use, "Heating need (kWh/a)", 12, whole, energyDecimals, func(x *buildingRow) float64 { return x.NeedKWh })
	number("", use, "Heating need (kWh/(m² a))", 12, whole, 2, func(x *buildingRow) float64 { return x.NeedKWh / x.FloorAreaM2 })
	number("delivered", use, "Delivered for heating and hot water (kWh/a)", 13, whole, energyDecimals, func(x *buildingRow) float64 { return x.DeliveredKWh })
	number("fans", use, "Fans, electricity (kWh/a)", 12, whole, energyDecimals, func(x *buildingRow) float64 { return x.FansKWh })
	number("", use, "CO₂ (kg/a)", 11, whole, 2, func(x *buildingRow) float64 { return x.CO2Kg })
	cols = append(cols, column[buildingRow]{key: "cost", band: use, head: "Energy cost (" + b.currency() + "/a)", width: 12,
		style: b.st.value(whole), right: true})
	number("", use, "Metered heat (kWh/a)", 12, whole, 1, func(x *buildingRow) float64 { return known(x.MeteredKWh) })
	for k := building.NumKinds - 1; k >= 0; k-- {
		number("", firm, kindLabels[k]+" (share)", 12, percent, 6, func(x *buildingRow) float64 { return x.InputShare[k] })
	}
	cols = append(cols,
		column[buildingRow]{key: "best", band: next, head: "Measure that does most", width: 28, style: b.st.textLink(),
			put: func(r *rows, col, style int, x *buildingRow) {
				if x.best < 0 {
					r.text(col, b.st.text(), "")
					return
				}
				r.text(col, style, b.terms.measures[x.best].Label)
			}},
	)
	number("", next, "Saving there (kWh/a)", 12, whole, energyDecimals, func(x *buildingRow) float64 {
		if x.best < 0 {
			return math.NaN()
		}
		return x.Measures[x.best].SavingKWh
	})
	cols = append(cols, column[buildingRow]{band: next, head: "Cautions, or why there is no estimate", width: cautionWidth, style: b.st.wrapped(),
		put: func(r *rows, col, style int, x *buildingRow) {
			if !x.ok() {
				r.text(col, style, "not estimated: "+x.Failed)
				return
			}
			r.text(col, style, x.cautions)
		}})
	return cols
}

// buildingCost gives the column of the energy cost its formula and returns what
// the formula leads to.
func (b *book) buildingCost(l *list[buildingRow]) func(*result.Building) float64 {
	delivered, fans := l.of("delivered"), l.of("fans")
	power := b.terms.byWord[electricity]
	made := map[string]string{}
	for _, c := range b.terms.carriers {
		made[c.Word] = delivered + "*" + c.price + "+" + fans + "*" + power.price
	}
	for i := range l.columns {
		if l.columns[i].key == "cost" {
			l.columns[i].put = func(r *rows, col, style int, x *buildingRow) {
				if !x.ok() {
					r.blank(col, style)
					return
				}
				r.formula(col, style, made[x.Carrier], x.cost)
			}
		}
	}
	return func(bl *result.Building) float64 {
		return float64(fixed(bl.DeliveredKWh, energyDecimals)*b.terms.byWord[bl.Carrier].PricePerKWh) +
			float64(fixed(bl.FansKWh, energyDecimals)*power.PricePerKWh)
	}
}

// airColumn says whether outdoor air is enough.
func airColumn[T any](b *book, band, head string, get func(*T) (known, tooLittle bool)) column[T] {
	alarm := b.st.alarm()
	return column[T]{band: band, head: head, width: 11, style: b.st.text(), put: func(r *rows, col, style int, x *T) {
		switch known, tooLittle := get(x); {
		case !known:
			r.blank(col, style)
		case tooLittle:
			r.text(col, alarm, "too little")
		default:
			r.text(col, style, "enough")
		}
	}}
}

// buildings renders a count of buildings.
func buildings(n int) string { return counted(n, "building") }

// counted renders a count of things.
func counted(n int, thing string) string {
	if n == 1 {
		return "1 " + thing
	}
	return count(n) + " " + thing + "s"
}

// count renders a count with thin spaces between thousands.
func count(n int) string {
	s := itoa(n)
	for i := len(s) - 3; i > 0; i -= 3 {
		s = s[:i] + "\u202f" + s[i:]
	}
	return s
}
