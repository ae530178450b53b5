package archetype

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"

	"kelvinrow/estimate/building"
	"kelvinrow/estimate/fabric"
)

// The years that every property must have an answer for.
const (
	firstYear = 1000
	lastYear  = 2100
)

// Validate reports everything that is wrong with the set: unknown words,
// impossible numbers, rules that contradict each other, and holes. All problems
// come at once, joined. Climates are checked by package climate.
func (s *Set) Validate() error {
	v := &validator{set: s}
	v.uses()
	v.materials()
	v.buildups()
	v.carriers()
	v.measures()
	v.economics()
	v.surveys()
	v.words()
	v.rules()
	v.contradictions()
	v.holes()
	return errors.Join(v.problems...)
}

// Problem is one thing wrong with a set, and where: Table is one of the names of
// tables below; Key names the row, "" for the whole table (of layers: the build-up,
// with Layer counted from 1); What is the quantity, "" for the whole row.
type Problem struct {
	Table, Key string
	Layer      int
	What       string
	Text       string
}

func (p *Problem) Error() string { return p.Text }

// Names of the tables of a set.
const (
	UsesTable      = "uses"
	MaterialsTable = "materials"
	BuildupsTable  = "buildups"
	RulesTable     = "rules"
	CarriersTable  = "carriers"
	MeasuresTable  = "measures"
	EconomicsTable = "economics"
	SurveyTable    = "survey costs"
	WordsTable     = "words"
)

type validator struct {
	set      *Set
	problems []error
}

// place is a row of a table.
type place struct {
	table, key string
	layer      int
	text       string
}

func (p place) String() string { return p.text }

// add reports what is wrong with several rows of a table, or with the whole of it.
func (v *validator) add(table, format string, args ...any) {
	v.problems = append(v.problems, &Problem{Table: table, Text: fmt.Sprintf(format, args...)})
}

// at reports what is wrong with one row.
func (v *validator) at(p place, what, format string, args ...any) {
	v.problems = append(v.problems, &Problem{
		Table: p.table, Key: p.key, Layer: p.layer, What: what, Text: p.text + ": " + fmt.Sprintf(format, args...),
	})
}

// within checks a number of a row against bounds; NaN is within none.
func (v *validator) within(row place, what string, x, low, high float64) {
	if !(x >= low && x <= high) {
		v.at(row, what, "%s %g is not between %g and %g", what, x, low, high)
	}
}

func (v *validator) named(row place, source string) {
	if strings.TrimSpace(source) == "" {
		v.at(row, "source", "no source")
	}
}

func rowOf(table, noun, key string) place {
	return place{table: table, key: key, text: fmt.Sprintf("%s %q", noun, key)}
}

func (v *validator) uses() {
	for i, u := range v.set.Uses {
		row := rowOf(UsesTable, "use", building.UseWords[i])
		if u.Word != building.UseWords[i] {
			v.at(row, "", "missing from the uses table")
			continue
		}
		v.within(row, "indoor temperature", u.IndoorC, 0, 35)
		v.within(row, "internal gain", u.InternalGainWM2, 0, 100)
		v.within(row, "set-point share", u.SetpointShare, 0, 1)
		v.within(row, "least air per m2", u.MinAirLSM2, 0, 10)
		v.within(row, "least air per person", u.MinAirLSPerson, 0, 50)
		v.within(row, "floor area per person", u.AreaPerPersonM2, 0.5, 1000)
		v.within(row, "hot water", u.HotWaterKWhM2, 0, 500)
		if u.IndoorLowC != 0 || u.IndoorHighC != 0 {
			v.ordered(row, "indoor temperature", u.IndoorLowC, u.IndoorC, u.IndoorHighC)
		}
		if u.InternalGainLowWM2 != 0 || u.InternalGainHighWM2 != 0 {
			v.ordered(row, "internal gain", u.InternalGainLowWM2, u.InternalGainWM2, u.InternalGainHighWM2)
		}
		v.named(row, u.Source)
	}
}

func (v *validator) ordered(row place, what string, low, typical, high float64) {
	if !(low <= typical && typical <= high) {
		v.at(row, what, "%s is not low <= typical <= high: %g, %g, %g", what, low, typical, high)
	}
}

func (v *validator) materials() {
	seen := map[string]bool{}
	for _, m := range v.set.Materials {
		row := rowOf(MaterialsTable, "material", m.Name)
		if m.Name == "" || seen[m.Name] {
			v.at(row, "name", "name empty or used twice")
		}
		seen[m.Name] = true
		v.within(row, "conductivity", m.ConductivityWMK, 0.001, 500)
		v.named(row, m.Source)
	}
}

func (v *validator) buildups() {
	directions := map[string]fabric.Direction{"wall": fabric.Horizontal, "roof": fabric.Up, "floor": fabric.Down}
	seen := map[string]bool{}
	for _, b := range v.set.Buildups {
		row := rowOf(BuildupsTable, "build-up", b.Name)
		if b.Name == "" || seen[b.Name] {
			v.at(row, "name", "name empty or used twice")
		}
		seen[b.Name] = true
		if d, ok := directions[b.Element]; !ok {
			v.at(row, "element", "unknown element %q", b.Element)
		} else if d != b.Direction {
			v.at(row, "element", "direction of heat flow does not fit a %s", b.Element)
		}
		if len(b.Layers) == 0 {
			v.at(row, "", "no layers")
		}
		for i, l := range b.Layers {
			row := row
			row.layer, row.text = i+1, fmt.Sprintf("%s, layer %d (%s)", row, i+1, l.Name)
			conductivity := l.ConductivityWMK
			if m, ok := pick(v.set.Materials, func(m *Material) bool { return m.Name == l.Name }); ok && conductivity == 0 {
				conductivity = m.ConductivityWMK
			}
			switch {
			case l.ResistanceM2KW != 0:
				v.within(row, "resistance", l.ResistanceM2KW, 0.001, 20)
				v.within(row, "thickness", l.ThicknessM, 0, 5)
			case conductivity == 0:
				v.at(row, "layer", "neither a known material nor a conductivity nor a resistance")
			default:
				v.within(row, "conductivity", conductivity, 0.001, 500)
				v.within(row, "thickness", l.ThicknessM, 0.0001, 5)
			}
			if l.BridgeShare != 0 {
				v.within(row, "bridge share", l.BridgeShare, 0, 0.9)
				v.within(row, "bridge conductivity", l.BridgeConductivityWMK, 0.001, 500)
				v.within(row, "thickness of a bridged layer", l.ThicknessM, 0.0001, 5)
			}
			if l.Gaps > fabric.GapsOpen {
				v.at(row, "gaps", "unknown air gaps")
			}
			if f := l.Fixings; f != (fabric.Fixings{}) {
				v.within(row, "fixings per m2", f.PerM2, 0.01, 100)
				v.within(row, "section of a fixing in m2", f.SectionM2, 1e-7, 1e-3)
				v.within(row, "conductivity of a fixing", f.ConductivityWMK, 0.01, 500)
				v.within(row, "thickness of a layer with fixings", l.ThicknessM, 0.001, 5)
			}
		}
		v.named(row, b.Source)
	}
}

func (v *validator) carriers() {
	words := building.Words(building.CarrierField)
	seen := map[string]bool{}
	for _, c := range v.set.Carriers {
		row := rowOf(CarriersTable, "carrier", c.Word)
		switch {
		case !slices.Contains(words, c.Word):
			v.at(row, "carrier", "unknown word; known are %s", strings.Join(words, ", "))
		case seen[c.Word]:
			v.at(row, "", "twice")
		}
		seen[c.Word] = true
		v.within(row, "price", c.PricePerKWh, 0, 1000)
		v.within(row, "price rise", c.PriceRise, -0.2, 0.2)
		v.within(row, "CO2", c.CO2KgKWh, -1, 5)
		v.named(row, c.Source)
	}
	for _, w := range words {
		if !seen[w] {
			v.add(CarriersTable, "carrier %q: missing from the carriers table", w)
		}
	}
}

func (v *validator) measures() {
	seen := map[string]bool{}
	for _, m := range v.set.Measures {
		row := rowOf(MeasuresTable, "measure", m.Key)
		if m.Key == "" || seen[m.Key] {
			v.at(row, "key", "key empty or used twice")
		}
		seen[m.Key] = true
		if m.Label == "" {
			v.at(row, "label", "no label")
		}
		if !slices.Contains(measureUnits, m.Unit) {
			v.at(row, "unit", "unknown unit %q; known are %s", m.Unit, strings.Join(measureUnits, ", "))
		}
		v.within(row, "fixed cost", m.FixedCost, 0, 1e9)
		v.within(row, "unit cost", m.UnitCost, 0, 1e9)
		v.within(row, "life", m.LifeYears, 1, 200)
		v.within(row, "upkeep share", m.UpkeepShare, 0, 1)
		if m.SizeExponent != 0 || m.SizeFrom != 0 {
			v.within(row, "size exponent", m.SizeExponent, 0, 0.9)
			v.within(row, "size from", m.SizeFrom, 1e-9, 1e9)
		}
		if m.CostLow != 0 || m.CostHigh != 0 {
			v.within(row, "low cost", m.CostLow, 0.01, 1)
			v.within(row, "high cost", m.CostHigh, 1, 100)
		}
		if m.FixedCost == 0 && m.UnitCost == 0 {
			v.at(row, "unit cost", "costs nothing: give a fixed cost, a unit cost or both")
		}
		for _, name := range sortedKeys(m.Target) {
			if x := m.Target[name]; math.IsNaN(x) || math.IsInf(x, 0) {
				v.at(row, "", "target %s is not a number", name)
			}
		}
		for _, t := range measureTargets[m.Key] {
			if x, ok := m.Target[t.name]; !ok {
				v.at(row, "", "target %s is missing", t.name)
			} else {
				v.within(row, "target "+t.name, x, t.low, t.high)
				low, high := m.TargetSpread(t.name)
				v.within(row, "low of target "+t.name, low, t.low, t.high)
				v.within(row, "high of target "+t.name, high, t.low, t.high)
				v.ordered(row, "target "+t.name, low, x, high)
			}
		}
		v.named(row, m.Source)
	}
}

// SurveyGroups are the groups of fields a survey may be for.
var SurveyGroups = []string{"geometry", "fabric", "air", "system", "meter"}

func (v *validator) surveys() {
	seen := map[string]bool{}
	for _, c := range v.set.Surveys {
		row := rowOf(SurveyTable, "survey of", c.Group)
		switch {
		case !slices.Contains(SurveyGroups, c.Group):
			v.at(row, "group", "unknown group; known are %s", strings.Join(SurveyGroups, ", "))
		case seen[c.Group]:
			v.at(row, "group", "twice")
		}
		seen[c.Group] = true
		v.within(row, "cost", c.Cost, 0, 1e7)
		v.named(row, c.Source)
	}
	for _, g := range SurveyGroups {
		if !seen[g] {
			v.add(SurveyTable, "survey of %q: missing from the survey costs", g)
		}
	}
}

func (v *validator) words() {
	seen := map[string]string{}
	for _, w := range v.set.Words {
		row := rowOf(WordsTable, "word", w.Written)
		f, ok := building.FieldByKey(w.Field)
		words := building.Words(f)
		switch before, twice := seen[w.Field+"\x00"+strings.ToLower(w.Written)]; {
		case !ok || words == nil:
			v.at(row, "field", "%q is no field of words", w.Field)
		case strings.TrimSpace(w.Written) == "":
			v.at(row, "written", "nothing is written")
		case !slices.Contains(words, w.Word):
			v.at(row, "word", "unknown word %q for %s; known are %s", w.Word, w.Field, strings.Join(words, ", "))
		case twice && before != w.Word:
			v.at(row, "word", "means %q above and %q here", before, w.Word)
		}
		seen[w.Field+"\x00"+strings.ToLower(w.Written)] = w.Word
	}
}

func (v *validator) economics() {
	e := v.set.Economics
	row := place{table: EconomicsTable, text: "economics"}
	if e.Currency == "" {
		v.at(row, "currency", "no currency")
	}
	v.within(row, "discount rate", e.DiscountRate, -0.5, 1)
	v.within(row, "period", e.PeriodYears, 1, 200)
	v.named(row, e.Source)
}

func (v *validator) rules() {
	elements := map[string]string{}
	for _, b := range v.set.Buildups {
		elements[b.Name] = b.Element
	}
	seen := map[string]bool{}
	for i := range v.set.Rules {
		r := &v.set.Rules[i]
		row := rowOf(RulesTable, "rule", r.ID)
		if r.ID == "" || seen[r.ID] {
			v.at(row, "id", "id empty or used twice")
		}
		seen[r.ID] = true
		info, ok := r.Property.Info()
		if !ok {
			v.at(row, "property", "unknown property %q", r.Property)
			continue
		}
		v.matchColumns(row, r, &info)
		if info.IsWord {
			switch {
			case r.Typical != 0 || r.Low != 0 || r.High != 0:
				v.at(row, "typical", "%s takes a word, not a number", r.Property)
			case info.Element != "" && elements[r.Word] != info.Element:
				v.at(row, "word", "no %s build-up is called %q", info.Element, r.Word)
			case info.Element == "" && !slices.Contains(building.Words(info.WordField), r.Word):
				v.at(row, "word", "unknown word %q for %s", r.Word, r.Property)
			case r.Property == VentilationWord && r.Word == building.VentilationUnknown.String():
				v.at(row, "word", "an unknown ventilation needs a definite word")
			}
		} else {
			if r.Word != "" {
				v.at(row, "word", "%s takes a number, not the word %q", r.Property, r.Word)
			}
			v.within(row, "low", r.Low, info.Min, info.Max)
			v.within(row, "typical", r.Typical, info.Min, info.Max)
			v.within(row, "high", r.High, info.Min, info.Max)
			v.ordered(row, string(r.Property), r.Low, r.Typical, r.High)
		}
		v.within(row, "shared part of the spread", r.Shared, 0, 1)
		v.named(row, r.Source)
	}
}

func (v *validator) matchColumns(row place, r *Rule, info *PropertyInfo) {
	if r.Use != "" && r.Use != groupHouse && r.Use != groupHousing && r.Use != groupOther {
		if _, ok := building.WordIndex(building.UseField, r.Use); !ok {
			v.at(row, "use", "unknown use %q", r.Use)
		}
	}
	if r.Attachment != "" {
		if _, ok := building.WordIndex(building.AttachmentField, r.Attachment); !ok {
			v.at(row, "attachment", "unknown attachment %q", r.Attachment)
		}
	}
	if from, to := r.years(); from > to {
		v.at(row, "years", "years run backwards: %d to %d", r.YearFrom, r.YearTo)
	}
	if r.Construction == "" {
		return
	}
	if !info.ByConstruction {
		v.at(row, "construction", "%s does not depend on construction, leave %q out", r.Property, r.Construction)
	} else if _, ok := building.WordIndex(info.ConstructionField, r.Construction); !ok {
		v.at(row, "construction", "unknown word %q for %s", r.Construction, info.ConstructionField)
	}
}

// contradictions finds pairs of rules that can match the same building, that
// tie in specificity and that give different values.
func (v *validator) contradictions() {
	rows := map[Property][]int{}
	for i := range v.set.Rules {
		rows[v.set.Rules[i].Property] = append(rows[v.set.Rules[i].Property], i)
	}
	for _, info := range propertyCatalogue {
		same := rows[info.Property]
		for i, ia := range same {
			for _, ib := range same[i+1:] {
				a, b := &v.set.Rules[ia], &v.set.Rules[ib]
				if overlap(a, b) && compareSpecificity(a, b) == 0 && !sameAnswer(a, b) {
					v.add(RulesTable, "rules %q and %q are equally specific, overlap and disagree on %s: %s against %s",
						a.ID, b.ID, info.Property, a.answer(), b.answer())
				}
			}
		}
	}
}

func overlap(a, b *Rule) bool {
	either := func(x, y string) bool { return x == "" || y == "" || x == y }
	af, at := a.years()
	bf, bt := b.years()
	if af > bt || bf > at || !either(a.Attachment, b.Attachment) ||
		!either(a.Construction, b.Construction) || !either(a.Region, b.Region) {
		return false
	}
	for u := range building.Use(building.NumUses) {
		if useMatches(a.Use, u) && useMatches(b.Use, u) {
			return true
		}
	}
	return false
}

func sameAnswer(a, b *Rule) bool {
	return a.Word == b.Word && a.Typical == b.Typical && a.Low == b.Low && a.High == b.High && a.Shared == b.Shared
}

func (r *Rule) answer() string {
	if r.Word != "" {
		return r.Word
	}
	return fmt.Sprintf("%g (%g to %g)", r.Typical, r.Low, r.High)
}

// holes finds combinations of use, attachment, year and construction without an
// answer. Rules for regions are an addition: the answer must exist without.
func (v *validator) holes() {
	rows := map[Property][]int32{}
	for i := range v.set.Rules {
		rows[v.set.Rules[i].Property] = append(rows[v.set.Rules[i].Property], int32(i))
	}
	for _, info := range propertyCatalogue {
		if len(rows[info.Property]) == 0 {
			v.add(RulesTable, "no rule gives %s", info.Property)
			continue
		}
		t := newPropertyTable(v.set.Rules, rows[info.Property])
		constructions := []string{""}
		if info.ByConstruction {
			constructions = building.Words(info.ConstructionField)
		}
		first, more := "", 0
		for _, c := range constructions {
			for cell := range useCells {
				use, attachment := building.Use(cell/building.NumAttachments), building.Attachment(cell%building.NumAttachments)
				from, to, hole := t.at(use, attachment, c, "").hole()
				if !hole {
					continue
				}
				if first != "" {
					more++
					continue
				}
				first = fmt.Sprintf("no rule gives %s for use %s, attachment %s, years %d to %d", info.Property, use, attachment, from, to)
				if c != "" {
					first += fmt.Sprintf(", %s %s", info.ConstructionField, c)
				}
			}
		}
		switch {
		case more > 0:
			v.add(RulesTable, "%s, nor for %d more combinations", first, more)
		case first != "":
			v.add(RulesTable, "%s", first)
		}
	}
}
