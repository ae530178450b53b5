package workbook

import (
	"fmt"
	"math"
	"strings"

	"github.com/xuri/excelize/v2"

	"kelvinrow/estimate/caution"
	"kelvinrow/estimate/result"
	"kelvinrow/rank"
)

const (
	programmeSheet = "Programme"
	chosenSheet    = "Programme buildings"
	stairsSheet    = "Packages"
)

// Programme is what is done with the money.
type Programme struct {
	By      rank.Yardstick // what the packages were chosen by
	Budgets []float64      // of each year
	Wishes  []string       // what else was asked for, in words
	Chosen  []Chosen       // by year, then the most for the money first
	Value   float64
	Bound   float64   // what no programme within the same limits can exceed
	Gap     float64   // the part of Bound that Value falls short of
	Margins []float64 // what one more unit of money of each year would bring
	Curve   []CurvePoint
}

// Chosen is one building of a programme.
type Chosen struct {
	Year     int // the first is 1
	Building int // index among the buildings of the run
	Package  result.Package
}

// CurvePoint is what a budget would bring if it were spent in one go.
type CurvePoint struct{ Budget, Value float64 }

// valueWords says what a programme maximises, with its unit and the scale that
// makes it readable.
func (b *book) valueWords(y rank.Yardstick) (words, unit string, scale float64) {
	switch y {
	case rank.CO2:
		return "CO₂ saved", "t/a", 1000
	case rank.NPV:
		return "net present value", "thousand " + b.currency(), 1000
	}
	return "energy saved", "MWh/a", 1000
}

// measureNames lists the measures of a package.
func (b *book) measureNames(set uint64) string {
	var names []string
	for i, m := range b.terms.measures {
		if set&(1<<i) != 0 {
			names = append(names, m.Label)
		}
	}
	return strings.Join(names, " + ")
}

// addProgramme makes the page of the programme and the lists behind it; nothing
// without one.
func (b *book) addProgramme() error {
	p := b.in.Programme
	if p == nil {
		return nil
	}
	chosen := b.planFixed(chosenSheet, len(p.Chosen))
	if err := b.programmePage(p, &chosen); err != nil {
		return err
	}
	if err := b.addChosen(p, &chosen); err != nil {
		return err
	}
	return b.addStairs(p)
}

func (b *book) programmePage(p *Programme, chosen *spread) error {
	pg, err := b.addPage(programmeSheet, "what to do with the money, year by year", ochre)
	if err != nil {
		return err
	}
	if err := b.widths(pg, 12, 12, 14, 14, 14, 14, 14, 14, 14, 14); err != nil {
		return err
	}
	s := &sheetBuilder{b: b, pg: pg, r: b.write(pg)}
	const last = 8
	sentence := func(text string) {
		s.next(heightOf(fontSize, wrappedText{text, 12*2 + 14*6}) + 1)
		s.r.text(1, b.st.prose(), text)
		for c := 2; c <= last; c++ {
			s.r.blank(c, b.st.prose())
		}
		if s.err == nil {
			s.err = b.f.MergeCell(pg.name, cellName(1, s.row), cellName(last, s.row))
		}
	}
	words, unit, scale := b.valueWords(p.By)
	s.next(30)
	s.r.text(1, b.st.id(look{size: 16, bold: true, color: accent}), "Programme")
	s.next(ordinaryHeight)
	s.r.text(1, b.st.backLink(), backText)
	if err := b.link(pg, cellName(1, s.row), overviewTarget); err != nil {
		return err
	}
	sentence(fmt.Sprintf("One package of measures, or none, for each building, chosen so that the %s is as much as the budgets allow. Every package was calculated as a whole. The buildings stand on the sheet %s, what else could be done there on the sheet %s.", words, chosenSheet, stairsSheet))
	for _, w := range p.Wishes {
		sentence(w)
	}
	sentence(fmt.Sprintf("Chosen: %s %s. No programme within the same limits can bring more than %s %s: at most %.2g %% is left.",
		group(p.Value/scale), unit, group(p.Bound/scale), unit, 100*p.Gap))
	sentence("A screening: local codes, surveys and licensed practice decide what is built. Cautions stand beside each building. Costs and prices are those of the run: a change on the sheet Assumptions does not choose anew.")

	b.programmeYears(s, p, words, unit, scale)
	if err := b.budgetCurve(s, p, words, unit, scale); err != nil {
		return err
	}
	if err := s.r.close(); err != nil {
		return err
	}
	if s.err != nil {
		return s.err
	}
	return b.setPrint(pg, layout{portrait: true, titleRows: "1:1"})
}

// bought tells on the opening page what the programme buys.
func (b *book) bought(o *opening) error {
	p := b.in.Programme
	if p == nil {
		return nil
	}
	budget, cost, kwh, co2, money := 0.0, 0.0, 0.0, 0.0, 0.0
	for _, v := range p.Budgets {
		budget += v
	}
	for i := range p.Chosen {
		k := &p.Chosen[i].Package
		cost += k.Cost
		kwh += k.SavingKWh
		co2 += k.CO2Kg
		money += k.MoneyPerYear
	}
	years := "one year"
	if n := len(p.Budgets); n > 1 {
		years = itoa(n) + " years"
	}
	words, _, _ := b.valueWords(p.By)
	o.title("What the programme buys")
	o.next(ordinaryHeight)
	o.across(1, gridColumns, b.st.textLink(), "Year by year on the sheet "+programmeSheet)
	o.linkTo(1, quoteSheet(programmeSheet)+"!A1")
	delivered := b.summary.DeliveredKWh + b.summary.FansKWh
	o.sentence(fmt.Sprintf("With %s thousand %s over %s, packages in %s cost %s thousand %s and save %s MWh/a (%.1f %% of what is delivered), %s t CO₂/a and %s thousand %s a year at the prices of the run. They were chosen for the most %s; no other choice within the same limits could bring more than %.2g %% more.",
		group(budget/1000), b.currency(), years, buildings(len(p.Chosen)), group(cost/1000), b.currency(), group(kwh/1000), 100*ratio(kwh, delivered),
		group(co2/1000), group(money/1000), b.currency(), words, 100*p.Gap))
	return nil
}

func (b *book) programmeYears(s *sheetBuilder, p *Programme, words, unit string, scale float64) {
	s.heading("Year by year", 8)
	heads := []string{"Year", "Buildings", "Budget (" + b.currency() + ")", "Cost (" + b.currency() + ")", "Energy saved (MWh/a)",
		"CO₂ saved (t/a)", "Money saved (" + b.currency() + "/a)", "One more " + b.currency() + " would bring (" + marginUnit(p.By, b.currency()) + ")"}
	cells := make([]wrappedText, len(heads))
	for i, h := range heads {
		cells[i] = wrappedText{h, 10}
	}
	s.next(heightOf(9, cells...) + 4)
	for i, h := range heads {
		style := b.st.headRight()
		if i == 0 {
			style = b.st.head()
		}
		s.r.text(i+1, style, h)
	}
	row := func(label string, n int, budget, cost, kwh, co2, money, margin float64) {
		s.next(ordinaryHeight)
		s.r.text(1, b.st.words(), label)
		s.r.int(2, b.st.value(whole), n)
		s.r.number(3, b.st.value(whole), budget, 2)
		s.r.number(4, b.st.value(whole), cost, 2)
		s.r.number(5, b.st.value(one), kwh/1000, 4)
		s.r.number(6, b.st.value(one), co2/1000, 4)
		s.r.number(7, b.st.value(whole), money, 2)
		s.r.number(8, b.st.value(three), margin, 6)
	}
	var all struct{ budget, cost, kwh, co2, money float64 }
	for y, budget := range p.Budgets {
		n, cost, kwh, co2, money := 0, 0.0, 0.0, 0.0, 0.0
		for i := range p.Chosen {
			if c := &p.Chosen[i]; c.Year == y+1 {
				n++
				cost += c.Package.Cost
				kwh += c.Package.SavingKWh
				co2 += c.Package.CO2Kg
				money += c.Package.MoneyPerYear
			}
		}
		margin := math.NaN()
		if y < len(p.Margins) {
			margin = p.Margins[y]
		}
		row(itoa(y+1), n, budget, cost, kwh, co2, money, margin)
		all.budget += budget
		all.cost += cost
		all.kwh += kwh
		all.co2 += co2
		all.money += money
	}
	if len(p.Budgets) > 1 {
		row("Together", len(p.Chosen), all.budget, all.cost, all.kwh, all.co2, all.money, math.NaN())
	}
}

func marginUnit(y rank.Yardstick, currency string) string {
	switch y {
	case rank.CO2:
		return "kg/a"
	case rank.NPV:
		return currency
	}
	return "kWh/a"
}

// budgetCurve writes the curve as a small table and a native chart beside it.
func (b *book) budgetCurve(s *sheetBuilder, p *Programme, words, unit string, scale float64) error {
	if len(p.Curve) < 2 {
		return nil
	}
	s.heading("What other budgets would bring", 8)
	s.next(ordinaryHeight)
	s.r.text(1, b.st.subtitle(), "If the whole budget were spent at once on the packages that bring most for the money, must-do and other wishes aside.")
	s.next(32)
	s.r.text(1, b.st.headRight(), "Budget (thousand "+b.currency()+")")
	s.r.text(2, b.st.headRight(), capital(words)+" ("+unit+")")
	head := s.row
	for _, c := range p.Curve {
		s.next(ordinaryHeight)
		s.r.number(1, b.st.value(whole), c.Budget/1000, 6)
		s.r.number(2, b.st.value(one), c.Value/scale, 6)
	}
	sheet := quoteSheet(s.pg.name)
	span := func(col int) string {
		return sheet + "!" + absolute(cellName(col, head+1)) + ":" + absolute(cellName(col, s.row))
	}
	axis := func(text string) excelize.ChartAxis {
		return excelize.ChartAxis{
			Font:  excelize.Font{Family: font, Size: 9, Color: ink},
			Title: excelize.ChartTitle{Paragraph: []excelize.RichTextRun{{Text: text, Font: &excelize.Font{Family: font, Size: 9, Color: ink}}}}, MajorGridLines: true,
			NumFmt: excelize.ChartNumFmt{CustomNumFmt: whole},
		}
	}
	return b.f.AddChart(s.pg.name, cellName(4, head), &excelize.Chart{
		Type: excelize.Scatter,
		Series: []excelize.ChartSeries{{
			Name: sheet + "!" + absolute(cellName(2, head)), Categories: span(1), Values: span(2),
			Line:   excelize.LineOptions{Type: excelize.LineSolid, Width: 2.25, Fill: excelize.Fill{Type: "pattern", Pattern: 1, Color: []string{accent}}},
			Marker: excelize.ChartMarker{Symbol: "circle", Size: 5, Fill: excelize.Fill{Type: "pattern", Pattern: 1, Color: []string{accent}}},
		}},
		Title: excelize.ChartTitle{Paragraph: []excelize.RichTextRun{{
			Text: capital(words) + " by budget", Font: &excelize.Font{Family: font, Size: 11, Bold: true, Color: ink},
		}}},
		Legend: excelize.ChartLegend{Position: "none"},
		XAxis:  axis("Budget (thousand " + b.currency() + ")"), YAxis: axis(capital(words) + " (" + unit + ")"),
		Border: excelize.LineOptions{Type: excelize.LineNone}, Dimension: excelize.ChartDimension{Width: 560, Height: 330},
		Format: excelize.GraphicOptions{AltText: "Curve of what a budget brings; the numbers stand in the table beside it"},
	})
}

// chosenRow is one row of the sheet of chosen buildings.
type chosenRow struct {
	c        *Chosen
	b        *result.Building
	measures string
	cautions string
}

func (b *book) addChosen(p *Programme, s *spread) error {
	l := &list[chosenRow]{
		about: "the " + buildings(len(p.Chosen)) + " of the programme", tab: ochre, title: chosenSheet,
		notes: []string{
			"What is done, where and when; within a year the most for the money first. Savings are of the whole package, calculated together.",
			"Net present value over the calculation period, with replacements and residual values in the manner of EN 15459-1. All numbers are values of the run.",
		},
		frozen: 3, wide: 2, rows: len(p.Chosen), table: "programme",
	}
	text := func(band, head string, width float64, get func(*chosenRow) string) {
		l.columns = append(l.columns, textColumn(b, band, head, width, get))
	}
	number := func(band, head string, width float64, format string, decimals int, get func(*chosenRow) float64) {
		l.columns = append(l.columns, numberColumn(b, "", band, head, width, format, decimals, get))
	}
	const who, what, brings, air = "Building", "What is done", "What it brings", "Outdoor air and cautions"
	cur := b.currency()
	number(who, "Year", 7, plain, 0, func(x *chosenRow) float64 { return float64(x.c.Year) })
	text(who, "Building", 12, func(x *chosenRow) string { return x.b.ID })
	l.columns[len(l.columns)-1].style = b.st.textLink()
	text(who, "Name", 22, func(x *chosenRow) string { return x.b.Name })
	text(who, "Address", 32, func(x *chosenRow) string { return address(x.b.Street, x.b.Postcode, x.b.Town) })
	text(who, "District", 13, func(x *chosenRow) string { return x.b.District })
	text(who, "Use", 17, func(x *chosenRow) string { return x.b.Use })
	text(what, "Measures", 60, func(x *chosenRow) string { return x.measures })
	l.columns[len(l.columns)-1].style = b.st.wrapped()
	number(what, "Cost ("+cur+")", 12, whole, 2, func(x *chosenRow) float64 { return x.c.Package.Cost })
	number(brings, "Saving (kWh/a)", 11, whole, 3, func(x *chosenRow) float64 { return x.c.Package.SavingKWh })
	l.columns[len(l.columns)-1].bar = true
	number(brings, "Saving (share of delivered)", 11, percent, 6, func(x *chosenRow) float64 {
		return ratio(x.c.Package.SavingKWh, x.b.DeliveredKWh+x.b.FansKWh)
	})
	number(brings, "Heating need after (kWh/(m² a))", 12, one, 4, func(x *chosenRow) float64 { return x.c.Package.NeedKWh / x.b.FloorAreaM2 })
	number(brings, "CO₂ saved (kg/a)", 10, whole, 3, func(x *chosenRow) float64 { return x.c.Package.CO2Kg })
	number(brings, "Money saved ("+cur+"/a)", 12, whole, 2, func(x *chosenRow) float64 { return x.c.Package.MoneyPerYear })
	number(brings, "Net present value ("+cur+")", 13, whole, 2, func(x *chosenRow) float64 { return x.c.Package.NPV })
	number(air, "Ventilation it brings (m³/h)", 12, whole, 6, func(x *chosenRow) float64 {
		if x.c.Package.CompanionQuantity == 0 {
			return math.NaN()
		}
		return x.c.Package.CompanionQuantity
	})
	l.columns = append(l.columns, airColumn(b, air, "Outdoor air after", func(x *chosenRow) (known, tooLittle bool) { return true, x.c.Package.UnderVentilated }))
	text(air, "Cautions", cautionWidth, func(x *chosenRow) string { return x.cautions })
	l.columns[len(l.columns)-1].style = b.st.wrapped()
	l.load = func(i int, x *chosenRow) {
		c := &p.Chosen[i]
		*x = chosenRow{c: c, b: &b.in.Buildings[c.Building], measures: b.measureNames(c.Package.Set), cautions: strings.Join(caution.Shorts(c.Package.Cautions), "; ")}
	}
	l.height = func(x *chosenRow) float64 {
		return rowHeight(wrappedText{x.cautions, cautionWidth}, wrappedText{x.measures, 60})
	}
	l.links = func(k *links, i, row int) { k.add(2, row, b.buildings.target(p.Chosen[i].Building)) }
	return addList(b, s, l)
}

// step is one package of the staircase of a building.
type step struct {
	b        *result.Building
	k        *result.Package
	chosen   bool
	measures string
}

// addStairs lists what else could be done in the chosen buildings, from nothing to
// everything worth it.
func (b *book) addStairs(p *Programme) error {
	var steps []step
	for i := range p.Chosen {
		c := &p.Chosen[i]
		bl := &b.in.Buildings[c.Building]
		for k := range bl.Packages {
			if bl.Packages[k].Set != 0 {
				steps = append(steps, step{bl, &bl.Packages[k], bl.Packages[k].Set == c.Package.Set, ""})
			}
		}
	}
	s := b.planFixed(stairsSheet, len(steps))
	l := &list[step]{
		about: "what else could be done in the buildings chosen", tab: ochre, title: stairsSheet,
		notes: []string{
			"For each building of the programme, the packages that no other beats: none is both cheaper and better. From the cheapest to all that is worth it.",
			"Savings are of the whole package, calculated together.",
		},
		frozen: 2, wide: 1, rows: len(steps), table: "packages",
	}
	text := func(head string, width float64, get func(*step) string) {
		l.columns = append(l.columns, textColumn(b, "", head, width, get))
	}
	number := func(head string, width float64, format string, get func(*step) float64) {
		l.columns = append(l.columns, numberColumn(b, "", "", head, width, format, 3, get))
	}
	cur := b.currency()
	text("Building", 12, func(x *step) string { return x.b.ID })
	text("Name", 22, func(x *step) string { return x.b.Name })
	text("Chosen", 8, func(x *step) string {
		if x.chosen {
			return "chosen"
		}
		return ""
	})
	text("Measures", 60, func(x *step) string { return x.measures })
	l.columns[len(l.columns)-1].style = b.st.wrapped()
	number("Cost ("+cur+")", 12, whole, func(x *step) float64 { return x.k.Cost })
	number("Saving (kWh/a)", 11, whole, func(x *step) float64 { return x.k.SavingKWh })
	number("CO₂ saved (kg/a)", 10, whole, func(x *step) float64 { return x.k.CO2Kg })
	number("Money saved ("+cur+"/a)", 12, whole, func(x *step) float64 { return x.k.MoneyPerYear })
	number("Net present value ("+cur+")", 13, whole, func(x *step) float64 { return x.k.NPV })
	number("Heating need after (kWh/a)", 12, whole, func(x *step) float64 { return x.k.NeedKWh })
	l.load = func(i int, x *step) {
		*x = steps[i]
		x.measures = b.measureNames(x.k.Set)
	}
	l.height = func(x *step) float64 { return rowHeight(wrappedText{x.measures, 60}) }
	return addList(b, &s, l)
}

// group renders a number with thin groups and as many decimals as it needs.
func group(v float64) string {
	if math.Abs(v) < 100 {
		return fmt.Sprintf("%.3g", v)
	}
	return count(int(math.Round(v)))
}
