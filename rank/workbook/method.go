package workbook

import (
	"fmt"
	"strings"

	"kelvinrow/estimate/caution"
)

const methodSheet = "Method and cautions"

// paragraph is one line of the method: what it is about, and what is said.
type paragraph struct{ about, text string }

type section struct {
	heading    string
	paragraphs []paragraph
}

var method = []section{
	{"What this is", []paragraph{
		{"A screening", "It says which buildings to look at first for each retrofit measure. It is not a design, not a certificate and not an audit of a building. Local codes and licensed practice decide what is built."},
		{"Values and formulas", "Energy, CO₂ and ranks are values of one run. Cost, money saved, payback, net present value and cost of saved energy are formulas on the cells of the sheet Assumptions that may be changed."},
	}},
	{"How a building is calculated", []paragraph{
		{"Inputs", "A value comes from the files given or, where they have none, from a default rule for buildings of that use, attachment, age and construction. Surveyed and metered values beat certified, these beat registered, these beat defaults; newer beats older. \"What the inputs rest on\" is the share of the inputs that move a heat balance most, by kind."},
		{"Shape", "Areas that are not given follow from floor area, storeys, storey height and a rectangular plan, longer where it would be too deep for daylight. Windows larger than the floor area are set aside. Party walls to heated neighbours lose nothing."},
		{"Walls, roofs, floors", "U-values from layers by ISO 6946:2017, air gaps and metal fixings included where a build-up names them; floors on the ground, over vented voids and basements by ISO 13370:2017; towards unheated rooms with the factor b of ISO 13789. Thermal bridges are lumped over the envelope. Windows have the U-value, g-value and frame share of their glazing (ISO 10077-1)."},
		{"Air", "Infiltration by stack and wind month by month with the algebraic model of Walker and Wilson (1998) from the airtightness n50; balanced and unbalanced fan flows put together with it in quadrature (ASHRAE Fundamentals); heat recovery on the balanced part; airing by occupants. The heat air carries follows ISO 13789."},
		{"Least outdoor air", "Each use has a least outdoor airflow. A building that falls short of it, before or after a measure, is marked \"too little\"."},
		{"Sun", "From monthly sums on the horizontal: representative days (Klein 1977), diffuse share (Erbs and others 1982), split over the day (Collares-Pereira and Rabl 1979), isotropic sky (Liu and Jordan 1963)."},
		{"Balance", "Monthly method of ISO 13790:2008: losses, internal and solar gains, their utilisation by the building's time constant, and a reduction where heating is intermittent."},
		{"Delivered energy", "Heating need over the efficiencies of generation and distribution, hot water, and the fans' electricity. Cost and CO₂ by energy carrier."},
		{"Design heat load", "Transmission and ventilation at the design outdoor temperature (EN 12831, simplified)."},
	}},
	{"How a measure is calculated", []paragraph{
		{"Saving", "The measure changes the building (adds a layer, replaces windows, tightens, changes ventilation, control or heat generator) and the balance is made again. Savings of several measures on one building therefore do not add up."},
		{"Ventilation it brings", "A measure that would leave too little outdoor air is given extract ventilation controlled by demand. Its airflow stands beside the measure, and its cost, upkeep, fan power and heat are in the numbers."},
		{"Ranked buildings", "A sheet ranks the buildings where the measure applies and saves delivered energy. Equal ones stand in the order of their building id."},
		{"Money", "Cost = fixed cost + cost per unit × amount (beyond a size, units get cheaper: \"amount at the full price\" is the amount less that), and the same for the ventilation it brings. Money saved = delivered energy before × price − delivered energy after × price, heat and fans each with its own carrier. Payback = cost / (money saved − upkeep), \"never\" where that is not positive. Net present value = − cost + the present value of money saved, each carrier with its own real price rise, − that of upkeep, over the life of the measure. Cost of saved energy = (cost as an annuity + upkeep) / saving. In the manner of EN 15459-1; without tax, subsidies and residual values."},
	}},
	{"Limits", []paragraph{
		{"Standards", "The texts of the standards were not at hand when this program was written. Their equations were written from memory. Corroborated by outside or first-principles values: ISO 13370 floors, the air layers of ISO 6946, glazing (EN 673), the stack factor of Walker and Wilson, radiation on tilted planes. Not corroborated: the reduction for intermittent heating of ISO 13790, the factors of EN 12831, the class limits of ISO 13788. No published numeric example was found for the utilisation factor, EN 15459-1 and EN 12831."},
		{"Monthly steps", "Fourteen dwellings of the default rules, from 1895 to 2016, need by months 1 to 8 % less than by the hourly method of ISO 13790:2008, annex C, in one typical coastal year: the mean of a month hides cold and windy hours. The literature puts the monthly method within 10 to 15 %."},
		{"Ground", "Heat to the ground uses the annual coefficient of ISO 13370 with each month's mean outdoor temperature, instead of the delayed and damped temperature of the ground."},
		{"Sun on facades", "Facade irradiation from monthly sums, held against an hourly transposition of one typical year on a coast (52 degrees north), is 4 % low to the north and 7 to 13 % high to the other sides over the year, and 14 to 38 % high to the south from October to February: winter solar gains are somewhat flattered."},
		{"Defaults", "The default rules, costs, prices and climates that come with the program are a starting point for a cool temperate climate, many of them by judgement. The climates that come with it are of invented places. Replace them by national tables, your tenders and contracts and a weather file before money is spent on them."},
		{"Calculated, not metered", "Old buildings use less than calculated: about 30 % less in Sunikka-Blank and Galvin (2012). Savings of poor buildings are therefore likely high."},
		{"Firmness of ranks", "Ranks rest on typical values. This version does not yet say how far a rank may move with what is not known; the shares of defaults beside each rank are a first sign."},
		{"Left out", "One zone per building, monthly steps, no cooling and no summer temperatures."},
	}},
}

func (b *book) addMethod() error {
	pg, err := b.addPage(methodSheet, "how it is made, limits, cautions in full", muted)
	if err != nil {
		return err
	}
	const label, text = 26, 112
	s := &sheetBuilder{b: b, pg: pg, r: b.write(pg)}
	s.next(30)
	s.r.text(1, b.st.backLink(), backText)
	s.r.text(2, b.st.id(look{size: 16, bold: true, color: accent, fill: pale}), "Method and cautions")
	if err := b.link(pg, "A1", overviewTarget); err != nil {
		return err
	}
	about := b.st.id(look{bold: true, wrap: true, valign: "top", edge: line})
	prose := b.st.id(look{wrap: true, valign: "top", edge: line})
	block := func(sec section) {
		s.heading(sec.heading, 2)
		for _, p := range sec.paragraphs {
			s.next(heightOf(fontSize, wrappedText{p.about, label}, wrappedText{p.text, text}))
			s.r.text(1, about, p.about)
			s.r.text(2, prose, p.text)
		}
	}
	cautions := section{heading: "Cautions"}
	for _, c := range caution.All() {
		cautions.paragraphs = append(cautions.paragraphs, paragraph{capital(c.Short), c.Text})
	}
	// Cautions come before the long read.
	block(method[0])
	block(cautions)
	for _, sec := range method[1:] {
		block(sec)
	}
	block(b.record())
	if err := s.r.close(); err != nil {
		return err
	}
	if err := b.widths(pg, label, text); err != nil {
		return err
	}
	if err := b.freeze(pg, 0, 1); err != nil {
		return err
	}
	return b.setPrint(pg, layout{portrait: true})
}

// record is what is needed to make the run again.
func (b *book) record() section {
	run := b.in.Run
	files := strings.Join(run.Files, ", ")
	if files == "" {
		files = "none named"
	}
	return section{"This run", []paragraph{
		{"Portfolio and run", fmt.Sprintf("%s, run %d, %s", clean(run.Portfolio), run.Number, run.Time.UTC().Format("2 January 2006 15:04 MST"))},
		{"Program", "kelvinrow " + run.Version},
		{"Climate", b.in.Climate.Name},
		{"Ranked by", b.in.Yardstick.Words()},
		{"Files", files},
		{"Inputs, hash", run.Inputs},
		{"Assumptions, hash", run.Assumptions},
	}}
}
