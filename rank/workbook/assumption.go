package workbook

import (
	"fmt"
	"maps"
	"slices"
	"strconv"
	"strings"

	"kelvinrow/estimate/climate"
)

const assumptionsSheet = "Assumptions"

// The columns of the sheet Assumptions: one for names, some for numbers, one for
// sources.
const (
	assumptionNumbers = 9
	assumptionWidth   = 12.5
	sourceColumn      = assumptionNumbers + 2
	sourceWidth       = 50
)

// sheetBuilder writes a small sheet from top to bottom.
type sheetBuilder struct {
	b   *book
	pg  *page
	r   *rows
	row int
	err error
}

func (s *sheetBuilder) next(height float64) int {
	s.row++
	s.r.begin(s.row, height)
	return s.row
}

func (s *sheetBuilder) skip() { s.row++ }

func (s *sheetBuilder) heading(text string, columns int) {
	s.next(9)
	s.next(24)
	s.r.text(1, s.b.st.heading(), text)
	for c := 2; c <= columns; c++ {
		s.r.blank(c, s.b.st.headingRest())
	}
}

// heads writes the header of a block. The first head is text; those before free
// stand above numbers; those from free on are text again, and the last of all
// goes on to the last column.
func (s *sheetBuilder) heads(free int, heads ...string) {
	cells := make([]wrappedText, len(heads))
	for i, h := range heads {
		if i+1 < free {
			cells[i] = wrappedText{h, assumptionWidth - 3.5}
		}
	}
	s.next(heightOf(9, cells...) + 4)
	for c := 1; c <= sourceColumn; c++ {
		style := s.b.st.head()
		if c > 1 && c < free {
			style = s.b.st.headRight()
		}
		if c <= len(heads) {
			s.r.text(c, style, heads[c-1])
		} else {
			s.r.blank(c, style)
		}
	}
}

// note writes text from a column on, over all columns to the last.
func (s *sheetBuilder) note(from int, text string) {
	s.merged(from, sourceColumn, text)
}

func (s *sheetBuilder) merged(from, to int, text string) {
	s.r.text(from, s.b.st.wrapped(), text)
	for c := from + 1; c <= to; c++ {
		s.r.blank(c, s.b.st.wrapped())
	}
	if s.err == nil && to > from {
		s.err = s.b.f.MergeCell(s.pg.name, cellName(from, s.row), cellName(to, s.row))
	}
}

// noteWidth is the width of a note from a column on.
func noteWidth(from int) float64 {
	return sourceWidth + assumptionWidth*float64(sourceColumn-from)
}

// input writes a cell that formulas use and gives it its name.
func (s *sheetBuilder) input(col int, format string, v float64, name string) {
	s.r.number(col, s.b.st.input(format), v, 6)
	if s.err == nil {
		s.err = s.b.name(name, s.pg, col, s.row)
	}
}

func (b *book) addAssumptions() error {
	pg, err := b.addPage(assumptionsSheet, "prices, costs, interest, uses, climate", ochre)
	if err != nil {
		return err
	}
	s := &sheetBuilder{b: b, pg: pg, r: b.write(pg)}
	s.next(30)
	s.r.text(1, b.st.id(look{size: 16, bold: true, color: accent}), "Assumptions")
	s.next(18)
	s.r.text(1, b.st.input(""), "cells that look like this")
	s.r.text(2, b.st.subtitle(), "may be changed here: cost, money saved, payback and net present value follow on all sheets. Ranks do not: they are values of this run.")
	s.next(ordinaryHeight)
	s.r.text(1, b.st.backLink(), backText)
	if err := b.link(pg, cellName(1, s.row), overviewTarget); err != nil {
		return err
	}
	s.r.text(2, b.st.subtitle(), fmt.Sprintf("Everything else on this sheet is a record of what the energy was computed with: version %.12s%s (kelvinrow assumptions writes it to edit).",
		b.in.Run.Assumptions, from(clean(b.in.Origin))))

	b.economics(s)
	b.carriers(s)
	b.measureTable(s)
	b.presentValues(s)
	b.uses(s)
	b.climate(s)
	if err := s.r.close(); err != nil {
		return err
	}
	if s.err != nil {
		return s.err
	}
	widths := []float64{36}
	for range assumptionNumbers {
		widths = append(widths, assumptionWidth)
	}
	if err := b.widths(pg, append(widths, sourceWidth)...); err != nil {
		return err
	}
	if err := b.freeze(pg, 1, 3); err != nil {
		return err
	}
	return b.setPrint(pg, layout{titleRows: "1:3"})
}

func from(origin string) string {
	if origin == "" {
		return ""
	}
	return " from " + origin
}

func (b *book) economics(s *sheetBuilder) {
	e := &b.in.Set.Economics
	s.heading("What money is counted with", sourceColumn)
	s.heads(3, "Quantity", "Value", "Source")
	s.next(ordinaryHeight)
	s.r.text(1, b.st.words(), "Real interest rate (per year)")
	s.input(2, "0.00 %", e.DiscountRate, discountName)
	s.note(3, e.Source)
	s.next(ordinaryHeight)
	s.r.text(1, b.st.words(), "Currency")
	s.r.text(2, b.st.value(""), e.Currency)
	s.note(3, "")
	s.next(ordinaryHeight)
	s.r.text(1, b.st.words(), "Calculation period (years)")
	s.r.number(2, b.st.value(plain), e.PeriodYears, 2)
	s.note(3, "for the record: net present value counts each measure over its own life")
}

func (b *book) carriers(s *sheetBuilder) {
	s.heading("Energy carriers", sourceColumn)
	s.heads(5, "Energy carrier", "Price ("+b.currency()+"/kWh)", "Real price rise (per year)", "CO₂ (kg/kWh)", "Source")
	for _, c := range b.terms.carriers {
		s.next(heightOf(9, wrappedText{c.Source, noteWidth(5)}))
		s.r.text(1, b.st.words(), capital(c.Word))
		s.input(2, four, c.PricePerKWh, c.price)
		s.input(3, "0.00 %", c.PriceRise, c.rise)
		s.r.number(4, b.st.value(three), c.CO2KgKWh, 6)
		s.note(5, c.Source)
	}
}

// allMeasures are the measures of the run and, where it is not among them, the
// one that brings ventilation.
func (b *book) allMeasures() []*measureTerms {
	if slices.Contains(b.terms.measures, b.terms.companion) {
		return b.terms.measures
	}
	return append(slices.Clone(b.terms.measures), b.terms.companion)
}

func (b *book) measureTable(s *sheetBuilder) {
	const from, to = 9, sourceColumn - 1 // of how far it goes
	s.heading("Retrofit measures: what they cost and how far they go", sourceColumn)
	s.heads(from, "Measure", "Counted in", "Fixed cost per building ("+b.currency()+")", "Cost per unit ("+b.currency()+")",
		"Life (years)", "Upkeep (share of cost per year)", "Units beyond which they get cheaper", "by (units / that) to the minus", "How far it goes", "", "Source")
	for _, m := range b.allMeasures() {
		far := describeTargets(m.Target)
		s.next(heightOf(9, wrappedText{m.Source, noteWidth(to + 1)}, wrappedText{far, assumptionWidth * (to - from + 1)}))
		s.r.text(1, b.st.words(), m.Label)
		s.r.text(2, b.st.value(""), unitWords(m.Unit))
		s.input(3, whole, m.FixedCost, m.fixed)
		s.input(4, two, m.UnitCost, m.unit)
		s.input(5, plain, m.LifeYears, m.life)
		s.input(6, "0.0 %", m.UpkeepShare, m.upkeep)
		if m.SizeExponent != 0 {
			s.r.number(7, b.st.value(plain), m.SizeFrom, 6)
			s.r.number(8, b.st.value(two), m.SizeExponent, 6)
		}
		s.merged(from, to, far)
		s.note(to+1, m.Source)
	}
}

func unitWords(unit string) string {
	switch unit {
	case "m2":
		return "m² treated"
	case "m2 floor":
		return "m² floor area"
	case "m3/h":
		return "m³/h"
	}
	return unit
}

// targetWords put a measure's parameters into words, in the order they are said;
// %s is the number. A parameter at its neutral number changes nothing and is left
// out.
var targetWords = []struct {
	name, words string
	neutral     float64
}{
	{"thickness_m", "%s m thick", 0},
	{"conductivity_w_mk", "conductivity %s W/(mK)", 0},
	{"u", "U %s W/(m²K)", 0},
	{"g", "g %s", -1},
	{"frame_share", "frame share %s", -1},
	{"rate_m3h_m2", "%s m³/h per m² of floor area", 0},
	{"demand_factor", "times %s by demand", 1},
	{"efficiency", "heat recovery %s", 0},
	{"recovery_cut", "times %s for frost and leakage", 1},
	{"fan_power", "fan power %s W/(m³/h)", -1},
	{"temperature_drop_k", "rooms %s K cooler on average", 0},
	{"distribution", "efficiency of distribution and control %s", 0},
	{"spf", "seasonal performance factor %s", 0},
	{"bridge_delta", "thermal bridges changed by %s W/(m²K)", 0},
	{"n50_factor", "leakage times %s", 1},
	{"n50_floor", "but not below n50 of %s 1/h", 0},
	{"skip_below_u", "left alone at U of %s W/(m²K) or less", 0},
	{"skip_below_n50", "left alone at n50 of %s 1/h or less", 0},
}

func describeTargets(target map[string]float64) string {
	var out []string
	number := func(v float64) string { return strconv.FormatFloat(v, 'g', -1, 64) }
	rest := maps.Clone(target)
	for _, w := range targetWords {
		if v, ok := target[w.name]; ok && v != w.neutral {
			out = append(out, fmt.Sprintf(w.words, number(v)))
		}
		delete(rest, w.name)
	}
	for _, name := range slices.Sorted(maps.Keys(rest)) {
		out = append(out, strings.ReplaceAll(name, "_", " ")+" "+number(rest[name]))
	}
	return strings.Join(out, "; ")
}

// presentValues makes the factors that keep the formulas of net present value
// short.
func (b *book) presentValues(s *sheetBuilder) {
	s.heading("Present value of 1 a year over the life of a measure", sourceColumn)
	s.next(ordinaryHeight)
	s.r.text(1, b.st.subtitle(), "By formula: the sum over the years t of its life of ((1 + price rise)/(1 + interest rate))^t. The formulas of net present value use these.")
	heads := []string{"Measure", "Constant, for upkeep"}
	for _, c := range b.terms.carriers {
		heads = append(heads, capital(c.Word))
	}
	s.heads(len(heads)+1, heads...)
	for _, m := range b.allMeasures() {
		s.next(ordinaryHeight)
		s.r.text(1, b.st.words(), m.Label)
		s.factor(2, m.levelName, presentValueFormula("", m.life), m.level)
		for k, c := range b.terms.carriers {
			s.factor(3+k, m.pvName[c.Word], presentValueFormula(c.rise, m.life), m.pv[c.Word])
		}
	}
}

func (s *sheetBuilder) factor(col int, name, formula string, v float64) {
	s.r.formula(col, s.b.st.value(three), escape(formula), v)
	if s.err == nil {
		s.err = s.b.name(name, s.pg, col, s.row)
	}
}

func (b *book) uses(s *sheetBuilder) {
	s.heading("Conditions of use", sourceColumn)
	s.heads(9, "Use", "Indoor temperature (°C)", "Internal gains (W/m²)", "Hours at set-point (share)",
		"Least outdoor air (l/s per m²)", "and per person (l/s)", "Floor area per person (m²)", "Hot water (kWh/(m² a))", "Source")
	for i := range b.in.Set.Uses {
		u := &b.in.Set.Uses[i]
		s.next(heightOf(9, wrappedText{u.Source, noteWidth(9)}))
		s.r.text(1, b.st.words(), capital(u.Word))
		for c, v := range []struct {
			x      float64
			format string
		}{
			{u.IndoorC, one}, {u.InternalGainWM2, one}, {u.SetpointShare, percent}, {u.MinAirLSM2, two},
			{u.MinAirLSPerson, one}, {u.AreaPerPersonM2, one}, {u.HotWaterKWhM2, one},
		} {
			s.r.number(2+c, b.st.value(v.format), v.x, 4)
		}
		s.note(9, u.Source)
	}
}

var monthNames = [12]string{"January", "February", "March", "April", "May", "June", "July",
	"August", "September", "October", "November", "December"}

func (b *book) climate(s *sheetBuilder) {
	c := b.in.Climate
	s.heading("Climate: "+c.Name, sourceColumn)
	s.heads(3, "Quantity", "Value", "Source")
	for i, x := range []struct {
		label, format string
		v             float64
	}{
		{"Latitude (°, north positive)", two, c.LatitudeDeg},
		{"Altitude (m)", whole, c.AltitudeM},
		{"Design outdoor temperature (°C)", one, c.DesignOutdoorC},
	} {
		s.next(ordinaryHeight)
		s.r.text(1, b.st.words(), x.label)
		s.r.number(2, b.st.value(x.format), x.v, 4)
		source := ""
		if i == 0 {
			source = c.Source
		}
		s.note(3, source)
	}
	s.next(ordinaryHeight)
	s.r.text(1, b.st.words(), "Terrain around the buildings")
	s.r.text(2, b.st.value(""), c.Terrain.String())
	s.note(3, "")
	s.skip()
	heads := []string{"Month", "Hours", "Outdoor temperature (°C)", "Wind at 10 m (m/s)", "Sun on the horizontal (kWh/m²)"}
	for o := range climate.NumOrientations {
		heads = append(heads, "Sun on "+climate.Orientation(o).String()+" facades (kWh/m²)")
	}
	s.heads(len(heads)+1, heads...)
	for i := range c.Months {
		m := &c.Months[i]
		s.next(ordinaryHeight)
		s.r.text(1, b.st.words(), monthNames[i])
		s.r.number(2, b.st.value(whole), m.Hours, 2)
		s.r.number(3, b.st.value(one), m.OutdoorC, 4)
		s.r.number(4, b.st.value(one), m.Wind10M, 4)
		s.r.number(5, b.st.value(one), m.HorizontalKWhM2, 4)
		for o, v := range m.VerticalKWhM2 {
			s.r.number(6+o, b.st.value(one), v, 4)
		}
	}
}
