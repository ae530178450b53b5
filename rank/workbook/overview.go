package workbook

import (
	"cmp"
	"fmt"
	"math"
	"slices"
	"strings"

	"kelvinrow/estimate/building"
	"kelvinrow/estimate/caution"
	"kelvinrow/estimate/result"
	"kelvinrow/estimate/state"
	"kelvinrow/rank"
)

// The opening page stands on a grid of equal columns.
const (
	gridColumns = 12
	gridWidth   = 11.5
	gridPixels  = 86 // of a column of that width
	leadCount   = 10
)

// pixels are what points come to at the 96 dpi charts are measured in.
func pixels(points float64) int { return int(points * 96 / 72) }

// opening writes the opening page.
type opening struct {
	sheetBuilder
	merges   []string
	breaks   []int
	contents int // its row
}

// across writes text over the columns from..to of the row.
func (o *opening) across(from, to, style int, text string) {
	o.r.text(from, style, text)
	o.span(from, to, style)
}

// span makes one cell of the columns from..to of the row, whose first is written.
func (o *opening) span(from, to, style int) {
	for c := from + 1; c <= to; c++ {
		o.r.blank(c, style)
	}
	if to > from {
		o.merges = append(o.merges, cellName(from, o.row)+":"+cellName(to, o.row))
	}
}

// pageBreak makes the next title the first line of a printed page.
func (o *opening) pageBreak() { o.breaks = append(o.breaks, o.row+2) }

func (o *opening) title(text string) { o.heading(text, gridColumns) }

func (o *opening) sentence(text string) {
	o.next(heightOf(fontSize, wrappedText{text, gridColumns * gridWidth}) + 1)
	o.across(1, gridColumns, o.b.st.prose(), text)
}

func (b *book) fillOverview(pg *page) error {
	o := &opening{sheetBuilder: sheetBuilder{b: b, pg: pg, r: b.write(pg)}}
	widths := make([]float64, gridColumns)
	for i := range widths {
		widths[i] = gridWidth
	}
	if err := b.widths(pg, widths...); err != nil {
		return err
	}
	b.masthead(o)
	b.highlights(o)
	steps := []func(*opening) error{b.losses, b.savings, b.bought, b.leads, b.supply, b.firmness, b.cautions, b.contents}
	for _, step := range steps {
		if err := step(o); err != nil {
			return err
		}
	}
	if err := o.r.close(); err != nil {
		return err
	}
	if o.err != nil {
		return o.err
	}
	if err := b.link(pg, cellName(gridColumns, 2), quoteSheet(pg.name)+"!"+cellName(1, o.contents)); err != nil {
		return err
	}
	for _, m := range o.merges {
		from, to, _ := cutRange(m)
		if err := b.f.MergeCell(pg.name, from, to); err != nil {
			return err
		}
	}
	for _, row := range o.breaks {
		if err := b.f.InsertPageBreak(pg.name, cellName(1, row)); err != nil {
			return err
		}
	}
	return b.setPrint(pg, layout{area: "A1:" + cellName(gridColumns, o.row)})
}

func (b *book) masthead(o *opening) {
	run, t := b.in.Run, &b.summary.Totals
	o.next(32)
	o.r.text(1, b.st.title(), b.title)
	o.next(16)
	o.r.text(1, b.st.subtitle(), fmt.Sprintf("Portfolio %s, run %d of %s. Climate %s. Ranked by %s. kelvinrow %s.",
		clean(run.Portfolio), run.Number, run.Time.UTC().Format("2 January 2006"), b.in.Climate.Name, b.in.Yardstick.Words(), run.Version))
	o.r.text(gridColumns, b.st.id(look{link: true, align: "right"}), "Contents ›")
	o.next(8)

	energyCost := 0.0
	formula := ""
	for i, word := range b.summary.Carriers {
		energyCost += float64(fixed(t.CarrierKWh[i]/1000, 3) * b.terms.byWord[word].PricePerKWh)
		if i > 0 {
			formula += "+"
		}
		formula += fixedText(t.CarrierKWh[i]/1000, 3) + "*" + b.terms.byWord[word].price
	}
	screened := "buildings screened"
	if t.Failed > 0 {
		screened += "; " + count(t.Failed) + " more could not be estimated"
	}
	tiles := []struct {
		value   float64
		formula string
		caption string
	}{
		{float64(t.Buildings - t.Failed), "", screened},
		{t.FloorAreaM2, "", "m² heated floor area"},
		{perArea(t.NeedKWh, t.FloorAreaM2), "", "kWh/(m² a) heating need"},
		{(t.DeliveredKWh + t.FansKWh) / 1000, "", "MWh/a delivered for heat, hot water and fans"},
		{t.CO2Kg / 1000, "", "t CO₂ a year"},
		{energyCost, formula, "thousand " + b.currency() + " a year for it"},
	}
	number := b.st.id(look{format: whole, size: 20, bold: true, color: accent, fill: pale, align: "center"})
	caption := b.st.id(look{color: ink, fill: pale, align: "center", valign: "top", wrap: true, size: 9})
	o.next(34)
	for i, tile := range tiles {
		if tile.formula != "" {
			o.r.formula(1+2*i, number, tile.formula, tile.value)
		} else {
			o.r.number(1+2*i, number, tile.value, 0)
		}
		o.span(1+2*i, 2+2*i, number)
	}
	o.next(26)
	for i, tile := range tiles {
		o.across(1+2*i, 2+2*i, caption, tile.caption)
	}
}

// highlights are the sentences a board should take away.
func (b *book) highlights(o *opening) {
	o.title("What stands out")
	for _, s := range b.outstanding() {
		o.sentence("•  " + s)
	}
	o.sentence("•  This is a screening. Read the cautions below before acting on a number.")
}

func (b *book) outstanding() (out []string) {
	t := &b.summary.Totals
	if paths := b.pathsByLoss(); t.FloorAreaM2 > 0 {
		total := sum(t.LossByPathKWh[:])
		out = append(out, fmt.Sprintf("Most heat leaves through %s (%s), then %s (%s) and %s (%s).",
			lower(pathLabels[paths[0]]), share(t.LossByPathKWh[paths[0]], total),
			lower(pathLabels[paths[1]]), share(t.LossByPathKWh[paths[1]], total),
			lower(pathLabels[paths[2]]), share(t.LossByPathKWh[paths[2]], total)))
	}
	top := -1
	for i := range b.summary.Measures {
		if b.summary.Measures[i].Applies > 0 && (top < 0 || b.summary.Measures[i].SavingKWh > b.summary.Measures[top].SavingKWh) {
			top = i
		}
	}
	if top >= 0 {
		m := &b.summary.Measures[top]
		text := fmt.Sprintf("The measure that would save most energy on its own is %s: %s MWh a year in %s.",
			quoted(b.terms.measures[top].Label), count(int(math.Round(m.SavingKWh/1000))), buildings(m.Applies))
		if n := m.Applies / 10; n > 0 {
			text += fmt.Sprintf(" The tenth of these buildings that saves most brings %s of that.", share(b.topSaving(top, n), m.SavingKWh))
		}
		out = append(out, text)
	}
	if t.UnderVentilated > 0 {
		out = append(out, fmt.Sprintf("Too little outdoor air today, by calculation, for what their use needs: %s. Tightening them without providing ventilation would harm people; where a measure does, it is shown with the ventilation it brings.", buildings(t.UnderVentilated)))
	}
	if t.FloorAreaM2 > 0 {
		out = append(out, fmt.Sprintf("%s of the inputs behind these numbers are defaults by age and use, %s were surveyed or metered (weighted by floor area).",
			percentOf(t.InputShare[building.Default]), percentOf(t.InputShare[building.Surveyed]+t.InputShare[building.Metered])))
	}
	return out
}

// topSaving is what the n buildings that save most energy bring.
func (b *book) topSaving(measure, n int) float64 {
	savings := make([]float64, 0, len(b.lists[measure]))
	for _, row := range b.lists[measure] {
		savings = append(savings, b.in.Buildings[row.Index].Measures[measure].SavingKWh)
	}
	slices.SortFunc(savings, func(x, y float64) int { return cmp.Compare(y, x) })
	return sum(savings[:n])
}

func (b *book) pathsByLoss() []state.Path {
	paths := make([]state.Path, state.NumPaths)
	for i := range paths {
		paths[i] = state.Path(i)
	}
	slices.SortStableFunc(paths, func(x, y state.Path) int {
		return cmp.Compare(b.summary.LossByPathKWh[y], b.summary.LossByPathKWh[x])
	})
	return paths
}

// losses shows where the heat goes, beside a chart.
func (b *book) losses(o *opening) error {
	t := &b.summary.Totals
	o.title("Where the heat goes")
	top := o.next(18)
	o.across(1, 3, b.st.head(), "Path")
	o.r.text(4, b.st.headRight(), "MWh/a")
	o.r.text(5, b.st.headRight(), "Share")
	total := sum(t.LossByPathKWh[:])
	first := o.row + 1
	for _, p := range b.pathsByLoss() {
		o.next(ordinaryHeight)
		o.across(1, 3, b.st.words(), pathLabels[p])
		o.r.number(4, b.st.value(whole), t.LossByPathKWh[p]/1000, 3)
		o.r.number(5, b.st.value(percent), ratio(t.LossByPathKWh[p], total), 6)
	}
	last := o.row
	strong := b.st.id(look{bold: true, edge: line})
	for _, x := range []struct {
		label string
		v     float64
	}{
		{"All heat lost", total},
		{"Covered by sun, people and appliances", t.GainsUsedKWh},
		{"Left to heat (heating need)", t.NeedKWh},
	} {
		o.next(ordinaryHeight)
		o.across(1, 3, strong, x.label)
		o.r.number(4, b.st.id(look{bold: true, edge: line, format: padded(whole), align: "right"}), x.v/1000, 3)
		o.r.number(5, b.st.value(percent), ratio(x.v, total), 6)
	}
	sheet := quoteSheet(o.pg.name)
	height := pixels(ordinaryHeight*float64(o.row-top+1)) - 12
	return b.bars(o.pg, cellName(6, top), bars{
		title:      "Heat lost by path (MWh a year)",
		alt:        "Bar chart of the heat lost by path, largest first; the numbers stand in the table to its left",
		name:       sheet + "!" + absolute(cellName(4, top)),
		categories: sheet + "!" + absolute(cellName(1, first)) + ":" + absolute(cellName(1, last)),
		values:     sheet + "!" + absolute(cellName(4, first)) + ":" + absolute(cellName(4, last)),
		color:      accent, format: whole, width: 7*gridPixels - 12, height: height,
	})
}

// savings shows each measure added up.
func (b *book) savings(o *opening) error {
	o.pageBreak()
	o.title("What each measure would save")
	o.sentence("Each measure on its own, in every building where it applies and saves energy. Measures on the same building do not add up, and not every building is worth it: the sheets of the measures rank them. Money follows from the prices and costs on the sheet Assumptions.")
	o.next(32)
	o.across(1, 3, b.st.head(), "Measure")
	for i, h := range []string{"Buildings", "Saving (MWh/a)", "Share of delivered", "CO₂ saved (t/a)",
		"Cost (thousand " + b.currency() + ")", "Saved (thousand " + b.currency() + "/a)", "Payback (years)"} {
		o.r.text(4+i, b.st.headRight(), h)
	}
	o.across(11, 12, b.st.head(), "Ranked first")
	first := o.row + 1
	delivered := b.summary.DeliveredKWh + b.summary.FansKWh
	for i, m := range b.terms.measures {
		t, x := &b.summary.Measures[i], b.total(i)
		o.next(ordinaryHeight)
		o.across(1, 3, b.st.textLink(), m.Label)
		o.linkTo(1, quoteSheet(m.sheet)+"!A1")
		o.r.int(4, b.st.value(whole), t.Applies)
		o.r.number(5, b.st.value(whole), t.SavingKWh/1000, 3)
		o.r.number(6, b.st.value(percent1), ratio(t.SavingKWh, delivered), 6)
		o.r.number(7, b.st.value(whole), t.CO2Kg/1000, 3)
		o.r.formula(8, b.st.value(whole), b.totalCell("cost", i)+"/1000", x.cost/1000)
		o.r.formula(9, b.st.value(whole), b.totalCell("money", i)+"/1000", x.money/1000)
		if x.pays {
			o.r.formula(10, b.st.value(one), b.totalCell("payback", i), x.payback)
		} else {
			o.r.formulaText(10, b.st.value(one), b.totalCell("payback", i), "never")
		}
		if t.Best < 0 {
			o.across(11, 12, b.st.text(), "")
			continue
		}
		best := &b.in.Buildings[t.Best]
		o.across(11, 12, b.st.textLink(), label(best))
		o.linkTo(11, b.buildings.target(t.Best))
	}
	last := o.row
	if len(b.terms.measures) == 0 {
		return nil
	}
	at := o.row + 1
	height := 40 + 19*len(b.terms.measures)
	sheet := quoteSheet(o.pg.name)
	span := func(col int) string {
		return sheet + "!" + absolute(cellName(col, first)) + ":" + absolute(cellName(col, last))
	}
	head := func(col int) string { return sheet + "!" + absolute(cellName(col, first-1)) }
	if err := b.bars(o.pg, cellName(1, at), bars{
		title: "Saving (MWh a year)", alt: "Bar chart of the saving of each measure; the numbers stand in the table above",
		name: head(5), categories: span(1), values: span(5), color: accent, format: whole, width: 6*gridPixels - 8, height: height,
	}); err != nil {
		return err
	}
	if err := b.bars(o.pg, cellName(7, at), bars{
		title: "Cost (thousand " + b.currency() + ")", alt: "Bar chart of the cost of each measure; the numbers stand in the table above",
		name: head(8), categories: span(1), values: span(8), color: ochre, format: whole, width: 6*gridPixels - 8, height: height,
	}); err != nil {
		return err
	}
	// The rows below the charts are given their height, so that the charts cover
	// the same ones in every program.
	for range int(math.Ceil(float64(height+8) / float64(pixels(ordinaryHeight)))) {
		o.next(ordinaryHeight)
	}
	return nil
}

func (o *opening) linkTo(col int, target string) {
	if o.err == nil {
		o.err = o.b.link(o.pg, cellName(col, o.row), target)
	}
}

// leads shows the buildings that matter most over all measures.
func (b *book) leads(o *opening) error {
	o.pageBreak()
	leads := rank.Leading(b.in.Buildings, b.lists, b.in.Yardstick, leadCount)
	o.title("The buildings that matter most")
	o.sentence(fmt.Sprintf("Those among the first %d for most measures, by %s; of equals first the one where a single measure does most.", leadCount, b.in.Yardstick.Words()))
	o.next(28)
	head := b.st.head()
	o.across(1, 3, head, "Building")
	o.across(4, 5, head, "Use, year built")
	o.r.text(6, b.st.headRight(), "Floor area (m²)")
	o.r.text(7, b.st.headRight(), "Measures, first "+itoa(leadCount))
	o.across(8, 10, head, "Measure that does most")
	o.r.text(11, b.st.headRight(), "Saving (MWh/a)")
	o.r.text(12, b.st.headRight(), "Inputs by default")
	number := func(format string) int { return b.st.id(look{format: padded(format), align: "right"}) }
	text, link := b.st.id(look{format: asText}), b.st.id(look{format: asText, link: true, bold: true})
	measureLink := b.st.id(look{format: asText, link: true})
	why := b.st.id(look{color: muted, wrap: true, valign: "top", size: 9, edge: line})
	for i := range leads {
		lead := &leads[i]
		bl := &b.in.Buildings[lead.Index]
		o.next(ordinaryHeight)
		o.across(1, 3, link, label(bl))
		o.linkTo(1, b.buildings.target(lead.Index))
		o.across(4, 5, text, useAndYear(bl))
		o.r.number(6, number(whole), bl.FloorAreaM2, 1)
		o.r.int(7, number(plain), len(lead.Among))
		o.across(8, 10, measureLink, b.terms.measures[lead.Measure].Label)
		o.linkTo(8, b.measureTarget(lead.Measure, lead.Index))
		o.r.number(11, number(whole), bl.Measures[lead.Measure].SavingKWh/1000, 3)
		o.r.number(12, number(percent), bl.InputShare[building.Default], 6)
		because := b.because(bl, lead)
		o.next(heightOf(9, wrappedText{because, gridColumns * gridWidth}))
		o.across(1, gridColumns, why, because)
	}
	return nil
}

// measureTarget is a building's row on a measure's sheet, or the sheet where the
// row is left out.
func (b *book) measureTarget(measure, index int) string {
	if p := int(b.places[measure][index]); p > 0 && p <= b.shown[measure] {
		return b.measures[measure].target(p - 1)
	}
	return quoteSheet(b.measures[measure].sheets[0]) + "!A1"
}

func label(bl *result.Building) string {
	if bl.Name == "" {
		return bl.ID
	}
	return bl.ID + "  " + bl.Name
}

func useAndYear(bl *result.Building) string {
	if bl.YearBuilt == 0 {
		return capital(bl.Use)
	}
	return fmt.Sprintf("%s, %d", capital(bl.Use), bl.YearBuilt)
}

// because says why a building matters.
func (b *book) because(bl *result.Building, lead *rank.Lead) string {
	loss, top := 0.0, 0
	for p, q := range bl.LossByPathKWh {
		if loss += q; q > bl.LossByPathKWh[top] {
			top = p
		}
	}
	s := fmt.Sprintf("Loses most through %s (%s). Heating need %.0f kWh/(m² a), the portfolio's mean is %.0f. Ranks: ",
		lower(pathLabels[top]), share(bl.LossByPathKWh[top], loss),
		perArea(bl.NeedKWh, bl.FloorAreaM2), perArea(b.summary.NeedKWh, b.summary.FloorAreaM2))
	const shown = 4
	among := slices.Clone(lead.Among)
	slices.SortStableFunc(among, func(x, y int) int { return cmp.Compare(b.places[x][lead.Index], b.places[y][lead.Index]) })
	for i, m := range among[:min(shown, len(among))] {
		if i > 0 {
			s += ", "
		}
		s += fmt.Sprintf("%s %d", lower(b.terms.measures[m].Label), b.places[m][lead.Index])
	}
	if n := len(among) - shown; n > 0 {
		s += fmt.Sprintf(" and %d more", n)
	}
	s += "."
	if shorts := caution.Shorts((bl.Cautions | bl.Measures[lead.Measure].Cautions) &^ caution.Defaults); len(shorts) > 0 {
		s += " Cautions: " + strings.Join(shorts, "; ") + "."
	}
	return s
}
