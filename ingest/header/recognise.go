// Package header finds the header row of a table and says what each column
// is: by synonyms in eight languages, by the unit, and by what the cells hold.
// A mapping file settles what recognition cannot.
package header

import (
	_ "embed"
	"encoding/csv"
	"regexp"
	"sort"
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/cell"
)

//go:embed synonyms.csv
var list string

// Evidence counts what the cells of a column hold, header and titles included.
type Evidence struct {
	Filled  int
	Numbers int // plain or written numbers
	Years   int // whole numbers from 1000 to 2100, or spans of years
	Serials int // whole numbers that could be dates without their format
	Decimal cell.Evidence
	// Dates that can only be read with the month or the day first.
	MonthFirst, DayFirst int
	Dates                int
}

// Candidate is one thing a column may be.
type Candidate struct {
	Key    string
	Sense  string // from the synonym list: "gross", "gas", "renovation"
	Rank   int    // the smaller, the closer
	Unit   cell.Unit
	Kind   building.Kind // Surveyed or Certified where the header says so, else Default
	Year   int           // year in the header, 0 if none
	ByUnit bool          // settled by the unit or the cells, not by the words alone
}

// energySense marks headers of all energy used: heat, if it is measured in a
// unit of energy and nothing else tells the heat.
const energySense = "energy"

const (
	ignoredKey = "ignored"
	looseRank  = 10
	maxRank    = 100
)

type entry struct {
	key, sense string
	folded     string
}

var (
	exact = map[string][]entry{} // by folded synonym without spaces
	loose []entry                // longest first
)

// generic words say too little to be looked for inside a longer header.
var generic = map[string]bool{}

func init() {
	rows, err := csv.NewReader(strings.NewReader(list)).ReadAll()
	if err != nil {
		panic("the embedded list of synonyms: " + err.Error()) // a slip of ours, seen by every test
	}
	for _, g := range strings.Fields("building property reference numero referencia gebaude batiment edificio byggnad bygning construction description descripcion structure fassade " +
		"gesamtflache omschrijving exposition function funktion functie category category categorie destination location locality saniert renovated value condition verbrauch consommation " +
		"combustible fundament surveyed residents apartments dwellings verwarming grundstuck wohnungen heating chauffage electricity kommentar") {
		generic[cell.Fold(g)] = true
	}
	// What this program itself writes above a column must come back: labels and keys.
	for i := range building.NumFields {
		info := building.Field(i).Info()
		rows = append(rows, []string{info.Key, "", info.Label, ""}, []string{info.Key, "", info.Key, ""})
	}
	for f := range byUnit {
		elements[f.Key()] = true
	}
	for _, k := range moreKeys {
		rows = append(rows, []string{k, "", k, ""})
	}
	for _, r := range rows[1:] {
		e := entry{r[0], r[3], cell.Fold(r[2])}
		if e.folded == "" {
			continue
		}
		if e.key != ignoredKey && !KnownKey(e.key) {
			panic("the embedded list of synonyms names no field: " + e.key)
		}
		k := strings.ReplaceAll(e.folded, " ", "")
		exact[k] = append(exact[k], e)
		if e.sense != "exact" && e.sense != energySense && (strings.Contains(e.folded, " ") && len(e.folded) >= 6 || utf8.RuneCountInString(e.folded) >= 7) && !generic[e.folded] {
			loose = append(loose, e)
		}
	}
	sort.SliceStable(loose, func(i, j int) bool { return len(loose[i].folded) > len(loose[j].folded) })
}

var (
	reBracket = regexp.MustCompile(`[(\[{]([^)\]}]*)[)\]}]`)
	reYear    = regexp.MustCompile(`\b(19[5-9]\d|20\d\d)(?:[/-]\d{2,4})?\b`)
	measured  = regexp.MustCompile(`\b(measured|gemessen|mesuree?s?|gemeten|uppmatte?|malt|medid[oa]|blower ?door|in situ|tested)\b`)
	certified = regexp.MustCompile(`\b(certified|certificate|zertifiziert|energieausweis|ausweis|epc|certifiee?|dpe|gecertificeerd|energielabel|certificad[oa]|energideklaration|energimarke)\b`)
)

// share matches what makes of a whole a part of it or a mean: no area of a building.
var share = regexp.MustCompile(`\b(per|pro|je|average|mean|avg|durchschnittliche?r?|mittlere?r?|moyenne?|par|gemiddelde?|genomsnittlig|snitt|gennemsnitlig|gjennomsnittlig|medi[ao]|promedio)\b`)

// Recognise lists what a column with this header may be, the closest first.
func Recognise(header string, ev Evidence) []Candidate {
	h := parse(header)
	if len(h.variants) == 0 {
		return nil
	}
	var found []Candidate
	for i, v := range h.variants {
		for _, e := range exact[strings.ReplaceAll(v, " ", "")] {
			if c, ok := h.candidate(e, senseRank(e.sense)+i/2, ev); ok {
				found = append(found, c)
			}
		}
		if len(found) > 0 {
			break
		}
	}
	if len(found) == 0 || h.remark && elements[found[0].Key] {
		// "Windows (year)" is more than "Windows".
		for _, v := range append([]string{h.whole}, h.variants...) {
			if c, ok := h.compose(v, ev); ok {
				found = []Candidate{c}
				break
			}
		}
	}
	if len(found) == 0 {
		found = h.loose(ev)
	}
	sort.SliceStable(found, func(i, j int) bool { return found[i].Rank < found[j].Rank })
	// The same field in several languages is one candidate.
	var out []Candidate
	for _, c := range found {
		same := false
		for _, o := range out {
			same = same || o.Key == c.Key
		}
		if !same {
			out = append(out, c)
		}
	}
	return out
}

func senseRank(sense string) int {
	switch sense {
	case "second", "renovation", "gas":
		return 2
	case "gross", "district heat":
		return 3
	case "oil":
		return 4
	case energySense:
		return 5
	}
	return 1
}

type parsed struct {
	variants []string // folded, the fullest first
	unit     cell.Unit
	foreign  bool // names a unit that is not known, such as kWh/m2
	kind     building.Kind
	year     int
	fold     string
	whole    string // folded, without unit, year and who says so, brackets opened
	remark   bool   // has brackets with words in them
}

func parse(header string) parsed {
	var p parsed
	raw := strings.Join(strings.FieldsFunc(header, func(r rune) bool { return unicode.IsSpace(r) || r == '_' }), " ")
	if raw == "" || utf8.RuneCountInString(raw) > 120 {
		return p
	}
	p.fold = cell.Fold(raw)
	if m := measured.FindString(p.fold); m != "" {
		p.kind = building.Surveyed
	} else if certified.MatchString(p.fold) {
		p.kind = building.Certified
	}
	if m := reYear.FindStringSubmatch(raw); m != nil {
		p.year, _ = strconv.Atoi(m[1])
	}
	// A unit may hold brackets of its own: "SFP kW/(m3/s)", "U [W/(m2K)]".
	if last := raw[strings.LastIndexByte(raw, ' ')+1:]; strings.LastIndexAny(last, "([") > 0 {
		raw = p.cutUnit(raw)
	}
	open := raw
	bare := reBracket.ReplaceAllStringFunc(raw, func(b string) string {
		if u, ok := cell.ParseUnit(b[1 : len(b)-1]); ok && p.unit.Name == "" {
			p.unit = u
			open = strings.Replace(open, b, " ", 1)
		} else if cell.Fold(b) != "" {
			p.remark = true
		}
		return " "
	})
	p.foreign = p.unit.Name == "" && cell.ForeignUnit(raw)
	add := func(s string) {
		f := cell.Fold(s)
		for _, v := range p.variants {
			if v == f {
				return
			}
		}
		if f != "" {
			p.variants = append(p.variants, f)
		}
	}
	stripped := p.cutUnit(bare)
	if p.unit.Name == "" { // "Gas kWh 2022/23"
		stripped = p.cutUnit(strings.Join(strings.Fields(reYear.ReplaceAllString(bare, " ")), " "))
	}
	add(bare)
	add(stripped)
	if p.unit.Name == "" {
		add(raw) // "Year (built)"
	}
	for _, v := range append([]string(nil), p.variants...) {
		t := certified.ReplaceAllString(measured.ReplaceAllString(v, " "), " ")
		add(t)
		add(reYear.ReplaceAllString(t, " "))
		add(trimStops(reYear.ReplaceAllString(t, " ")))
	}
	p.whole = cell.Fold(reYear.ReplaceAllString(certified.ReplaceAllString(measured.ReplaceAllString(cell.Fold(p.cutUnit(open)), " "), " "), " "))
	return p
}

// cutUnit takes a unit off the end or the front of a header without brackets.
func (p *parsed) cutUnit(s string) string {
	words := strings.Fields(s)
	if u, ok := cell.ParseUnit(s); ok && plausible(words) {
		p.setUnit(u)
		return s
	}
	for n := min(3, len(words)-1); n > 0; n-- {
		if u, ok := cell.ParseUnit(strings.Join(words[len(words)-n:], " ")); ok && plausible(words[len(words)-n:]) {
			p.setUnit(u)
			rest := words[:len(words)-n]
			if last := strings.ToLower(rest[len(rest)-1]); len(rest) > 1 && (last == "in" || last == "en") {
				rest = rest[:len(rest)-1]
			}
			return strings.Join(rest, " ")
		}
	}
	if len(words) > 1 {
		if u, ok := cell.ParseUnit(words[0]); ok && plausible(words[:1]) {
			p.setUnit(u)
			return strings.Join(words[1:], " ")
		}
	}
	if len(words) == 1 {
		if u, ok := cell.ParseUnit(words[0]); ok && plausible(words) {
			p.setUnit(u)
		}
		low := strings.ToLower(words[0]) // "FloorAreaM2"
		for _, u := range []string{"m2", "sqm", "qm", "m²", "m3", "m³", "kwh", "mwh", "sqft", "ft2"} {
			if rest, ok := strings.CutSuffix(low, u); ok && len(rest) > 3 {
				unit, _ := cell.ParseUnit(u)
				p.setUnit(unit)
				return rest
			}
		}
	}
	return s
}

func (p *parsed) setUnit(u cell.Unit) {
	if p.unit.Name == "" {
		p.unit = u
	}
}

// plausible keeps single letters that are words or names from being units.
func plausible(words []string) bool {
	s := strings.ToLower(strings.Trim(strings.Join(words, ""), ",;:.- "))
	return (len(s) > 1 || s == "%") && s != "meter" // a meter counts heat
}

var stops = map[string]bool{"total": true, "gesamt": true, "the": true, "of": true, "der": true, "des": true, "gebaudes": true, "building": true, "gebaude": true, "totale": true, "annual": true, "in": true, "ca": true, "approx": true, "total de": true}

func trimStops(s string) string {
	w := strings.Fields(s)
	for len(w) > 1 && stops[w[len(w)-1]] {
		w = w[:len(w)-1]
	}
	for len(w) > 1 && stops[w[0]] {
		w = w[1:]
	}
	return strings.Join(w, " ")
}

// agents are the words before those who do something: "airing by occupants".
var agents = strings.Fields("by durch von par door av af por")

// asAgent reports whether a header names what the synonym says only as the one
// who does something.
func asAgent(padded, folded string) bool {
	for _, a := range agents {
		if strings.Contains(padded, " "+a+" "+folded+" ") {
			return true
		}
	}
	return false
}

func (h *parsed) loose(ev Evidence) []Candidate {
	var found []Candidate
	padded := " " + h.variants[min(1, len(h.variants)-1)] + " "
	full := " " + h.fold + " "
	if h.mixed() {
		return nil
	}
	size := 0
	for _, e := range loose {
		if size > 0 && len(e.folded) < size {
			break
		}
		if !strings.Contains(padded, " "+e.folded+" ") && !strings.Contains(full, " "+e.folded+" ") {
			continue
		}
		if e.key != ignoredKey && asAgent(full, e.folded) {
			continue
		}
		if e.key != ignoredKey && len(e.folded)*100 < (len(padded)-2)*40 {
			continue
		}
		if c, ok := h.candidate(e, looseRank+senseRank(e.sense), ev); ok {
			found = append(found, c)
			size = len(e.folded)
		}
	}
	return found
}

// elements are the fields whose headers name a part of the envelope.
var elements = map[string]bool{}

// An element named without more is its area, its U-value or its year of
// renewal where the unit or the cells say so.
var byUnit = map[building.Field][3]building.Field{
	building.WallConstruction: {building.WallArea, building.WallU, building.YearWall},
	building.RoofType:         {building.RoofArea, building.RoofU, building.YearRoof},
	building.FloorType:        {building.GroundFloorArea, building.FloorU, building.YearFloor},
	building.Glazing:          {building.WindowArea, building.WindowU, building.YearWindows},
}

// candidate weighs one synonym against the unit and the cells of the column.
func (h *parsed) candidate(e entry, rank int, ev Evidence) (Candidate, bool) {
	c := Candidate{Key: e.key, Sense: e.sense, Rank: rank, Unit: h.unit, Year: h.year}
	f, ok := building.FieldByKey(e.key)
	if !ok {
		if e.key == ignoredKey {
			c.Unit = cell.Unit{}
		}
		if e.key != ignoredKey && e.key != DataYearKey && h.unit.Name != "" {
			return c, false
		}
		if e.key == DataYearKey && ev.Filled > 1 && ev.Years*2 < ev.Filled-1 {
			return c, false
		}
		return c, true
	}
	if parts, ok := byUnit[f]; ok {
		switch {
		case h.unit.Base == "m2":
			f, c.ByUnit = parts[0], true
		case h.unit.Base == "W/(m2K)":
			f, c.ByUnit = parts[1], true
		case ev.Filled > 1 && ev.Years*10 >= (ev.Filled-1)*8:
			f, c.ByUnit = parts[2], true
		}
		c.Key = f.Key()
	}
	info := f.Info()
	if e.sense == energySense && h.unit.Base != info.Unit {
		return c, false
	}
	switch info.Type {
	case building.Number:
		if h.foreign || rank >= looseRank && info.Group != building.Fabric && share.MatchString(h.fold) {
			return c, false
		}
		if h.unit.Name != "" {
			u, ok := unitFor(f, h.unit)
			if !ok {
				return c, false
			}
			c.Unit = u
		}
		if ev.Filled > 3 && ev.Numbers*10 < ev.Filled-1 && f != building.Storeys { // "R+5", "II" are storeys
			return c, false
		}
	case building.Year:
		if h.unit.Name != "" && h.unit.Base != "share" {
			return c, false
		}
		c.Unit = cell.Unit{}
		if ev.Filled > 3 && (ev.Years+ev.Dates)*10 < ev.Filled-1 && ev.Numbers*2 > ev.Filled && ev.Serials*10 < ev.Filled*8 {
			// Zeros and serial numbers may outnumber the years of renewal.
			if f == building.YearBuilt {
				return c, false
			}
		}
		if ev.Filled > 3 && (ev.Years+ev.Dates)*10 < ev.Filled-1 {
			c.Rank += 4 // "Construction" above words names the walls
		}
	case building.Word, building.YesNo:
		if h.unit.Name != "" {
			return c, false
		}
		if info.Type == building.Word && f != building.AttachmentField && ev.Filled > 3 && ev.Numbers*10 > ev.Filled*9 {
			return c, false
		}
	case building.Text:
		if h.unit.Name != "" {
			return c, false
		}
	}
	if info.Group == building.Fabric && info.Type == building.Number || info.Group == building.Air && info.Type == building.Number {
		c.Kind = h.kind
	}
	if f == building.MeteredHeat {
		c.Kind = building.Metered
	} else if f != building.MeteredYear {
		c.Year = 0
	}
	return c, true
}

// unitFor settles what a unit means for a field: cubic metres of a fuel are energy.
func unitFor(f building.Field, u cell.Unit) (cell.Unit, bool) {
	if f == building.MeteredHeat && u.Name == "m3" {
		u, _ = cell.UnitNamed("m3 gas")
	}
	if f == building.DegreeDays && u.Name == "1/h" {
		return u, false
	}
	return u, u.Fits(f.Info().Unit)
}
