package workbook

import (
	"fmt"
	"math"
	"strings"

	"kelvinrow/estimate/building"
	"kelvinrow/estimate/caution"
)

var kindMeanings = [building.NumKinds]string{
	building.Default:    "a rule for buildings of that age, use and construction",
	building.Registered: "a register or an asset list",
	building.Certified:  "a certificate or an as-built document",
	building.Metered:    "a meter",
	building.Surveyed:   "measured or seen on site",
}

// supply shows what the buildings run on.
func (b *book) supply(o *opening) error {
	o.pageBreak()
	t := &b.summary.Totals
	o.title("What the buildings run on")
	o.next(30)
	o.across(1, 2, b.st.head(), "Delivered today")
	for i, h := range []string{"MWh/a", "Share", "Thousand " + b.currency() + "/a"} {
		o.r.text(3+i, b.st.headRight(), h)
	}
	delivered := t.DeliveredKWh + t.FansKWh
	for i, word := range b.summary.Carriers {
		c := b.terms.byWord[word]
		o.next(ordinaryHeight)
		o.across(1, 2, b.st.words(), capital(word))
		o.r.number(3, b.st.value(whole), t.CarrierKWh[i]/1000, 3)
		o.r.number(4, b.st.value(percent), ratio(t.CarrierKWh[i], delivered), 6)
		o.r.formula(5, b.st.value(whole), "C#*"+c.price, float64(fixed(t.CarrierKWh[i]/1000, 3)*c.PricePerKWh))
	}
	return nil
}

// firmness shows what the numbers rest on and what was wrong in the data.
func (b *book) firmness(o *opening) error {
	o.title("How firm the numbers are")
	o.next(20)
	o.across(1, 2, b.st.head(), "Inputs")
	o.r.text(3, b.st.headRight(), "Share")
	o.across(4, 8, b.st.head(), "What that is")
	o.across(9, 11, b.st.head(), "Findings in the data")
	o.r.text(12, b.st.headRight(), "Number")
	by := b.bySeverity()
	right := []struct {
		label string
		n     int
	}{
		{"Rows, sheets or files set aside", by[2]},
		{"Values set aside", by[1]},
		{"Notes", by[0]},
		{"Buildings with a meter reading", b.summary.Metered},
		{"Buildings not estimated", b.summary.Failed},
	}
	for i := range building.NumKinds {
		k := building.NumKinds - 1 - i
		o.next(ordinaryHeight)
		o.across(1, 2, b.st.words(), kindLabels[k])
		o.r.number(3, b.st.value(percent), b.summary.InputShare[k], 6)
		o.across(4, 8, b.st.words(), kindMeanings[k])
		if i < len(right) {
			o.across(9, 11, b.st.words(), right[i].label)
			o.r.int(12, b.st.value(whole), right[i].n)
		}
	}
	o.sentence("Shares of the inputs that move a heat balance most, weighted by floor area. Ranks rest on typical values: where most inputs are defaults, survey before spending.")
	return nil
}

// cautions says in plain words what must not be forgotten.
func (b *book) cautions(o *opening) error {
	o.title("Cautions")
	o.sentence("This is a screening: it says which buildings to look at first, not what to build. Acting on it can hurt people and buildings where these are forgotten. Local codes and licensed practice decide.")
	o.next(20)
	o.across(1, 3, b.st.head(), "Caution")
	o.r.text(4, b.st.headRight(), "Buildings")
	o.across(5, gridColumns, b.st.head(), "In plain words")
	bold := b.st.id(look{bold: true, wrap: true, valign: "top", edge: line, size: 9})
	number := b.st.id(look{format: padded(whole), align: "right", valign: "top", edge: line, size: 9})
	prose := b.st.id(look{wrap: true, valign: "top", edge: line, size: 9})
	concerned := b.concerned()
	for i, c := range caution.All() {
		if concerned[i] == 0 {
			continue
		}
		o.next(heightOf(9, wrappedText{c.Text, (gridColumns - 4) * gridWidth}, wrappedText{c.Short, 3 * gridWidth}))
		o.across(1, 3, bold, capital(c.Short))
		o.r.int(4, number, concerned[i])
		o.across(5, gridColumns, prose, c.Text)
	}
	return nil
}

// concerned counts, for each caution, the buildings it stands at: as they are or
// with a measure that is ranked there.
func (b *book) concerned() []int {
	all := caution.All()
	n := make([]int, len(all))
	for i := range b.in.Buildings {
		bl := &b.in.Buildings[i]
		if bl.Failed != "" {
			continue
		}
		set := bl.Cautions
		for m := range bl.Measures {
			if b.places[m][i] > 0 {
				set |= bl.Measures[m].Cautions
			}
		}
		for k := range all {
			if set.Has(all[k].Bit) {
				n[k]++
			}
		}
	}
	return n
}

// contents lists the sheets with links: the measures to the left, the rest to
// the right.
func (b *book) contents(o *opening) error {
	o.title("Contents")
	o.contents = o.row
	var sides [2][]*page
	for _, pg := range b.pages[1:] {
		side := 1
		if pg.measure {
			side = 0
		}
		sides[side] = append(sides[side], pg)
	}
	const half = gridColumns / 2
	for i := range max(len(sides[0]), len(sides[1])) {
		o.next(ordinaryHeight)
		for side, pages := range sides {
			if i >= len(pages) {
				continue
			}
			col := 1 + side*half
			o.across(col, col+2, b.st.textLink(), pages[i].name)
			o.linkTo(col, quoteSheet(pages[i].name)+"!A1")
			o.across(col+3, col+half-1, b.st.words(), pages[i].about)
		}
	}
	return nil
}

// Numbers in sentences.

func sum(xs []float64) float64 {
	t := 0.0
	for _, x := range xs {
		t += x
	}
	return t
}

// ratio is part over whole; without a whole it is nothing, which leaves the cell
// empty.
func ratio(part, whole float64) float64 {
	if whole == 0 {
		return math.NaN()
	}
	return part / whole
}

func perArea(kWh, m2 float64) float64 {
	if m2 == 0 {
		return 0
	}
	return kWh / m2
}

func share(part, whole float64) string {
	if whole == 0 {
		return "0 %"
	}
	return percentOf(part / whole)
}

func percentOf(x float64) string {
	p := math.Round(100 * x)
	if p == 0 && x > 0 {
		return "under 1 %"
	}
	return fmt.Sprintf("%.0f %%", p)
}

func lower(s string) string { return strings.ToLower(s) }

func quoted(s string) string { return "“" + s + "”" }

func cutRange(r string) (from, to string, ok bool) { return strings.Cut(r, ":") }

func fixedText(v float64, decimals int) string { return string(appendFixed(nil, v, decimals)) }
