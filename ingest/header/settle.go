package header

import (
	"fmt"
	"sort"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/cell"
	"kelvinrow/ingest/sheet"
)

// Plan says which columns give which field of a sheet.
type Plan struct {
	// Fields in the order of Keys; several columns of one field stand in order
	// of preference, and the first that is filled gives the value.
	Fields    []PlanField
	Constants []Entry
	Problems  []Problem
	Skip      string // not empty: no sheet of buildings, and why
	Lines     []int  // lines of the column file that had an effect, or a later one instead
}

// PlanField is one field and the columns that give it.
type PlanField struct {
	Key     string
	Columns []*Column
}

// Columns returns the columns of key.
func (p *Plan) Columns(key string) []*Column {
	for _, f := range p.Fields {
		if f.Key == key {
			return f.Columns
		}
	}
	return nil
}

// Constant returns the constant of key.
func (p *Plan) Constant(key string) (string, bool) {
	for _, e := range p.Constants {
		if e.Field == key {
			return e.Constant, true
		}
	}
	return "", false
}

// Has reports whether a column or constant gives key.
func (p *Plan) Has(key string) bool {
	_, ok := p.Constant(key)
	return ok || len(p.Columns(key)) > 0
}

// Stopped reports whether a problem keeps the sheet from being read.
func (p *Plan) Stopped() bool {
	for _, x := range p.Problems {
		if x.Severity == Stop {
			return true
		}
	}
	return false
}

type settler struct {
	t      *Table
	by     map[string][]*Column
	closed map[string]bool // settled by a mapping, or ambiguous
	p      *Plan
}

// Settle decides among the candidates of a table's columns. An exact synonym
// wins over a looser one; a tie is a problem that names the candidates.
func Settle(t *Table, mapped []Entry) *Plan {
	s := &settler{t: t, by: map[string][]*Column{}, closed: map[string]bool{}, p: &Plan{}}
	s.mapping(mapped)
	for rank := 1; rank <= maxRank; rank++ {
		s.rank(rank)
	}
	for i := range t.Columns {
		c := &t.Columns[i]
		if c.Ignored() {
			c.How = "known, and not needed"
		} else if c.Key == "" && c.How == "" && cell.ForeignUnit(c.Header) {
			c.How = "its unit is none that a field has"
		}
	}
	for _, k := range Keys() {
		if cols := s.by[k]; len(cols) > 0 {
			s.p.Fields = append(s.p.Fields, PlanField{k, cols})
			t.Known++
		}
	}
	s.required()
	return s.p
}

func (s *settler) mapping(mapped []Entry) {
	last := map[string]int{}
	for i, e := range mapped {
		last[e.Field] = i
	}
	for i, e := range mapped {
		if last[e.Field] != i {
			s.p.Lines = append(s.p.Lines, e.Line)
			continue
		}
		if e.Unread || e.Fixed {
			s.p.Lines = append(s.p.Lines, e.Line)
		}
		switch {
		case e.Unread:
			s.closed[e.Field] = true
			continue
		case e.Fixed:
			s.closed[e.Field] = true
			s.p.Constants = append(s.p.Constants, e)
			continue
		}
		c := s.named(e.Column)
		if c == nil {
			if e.Named {
				s.problem(Stop, e.Field, "mapping", nil, fmt.Sprintf("line %d of the column file takes %s from %q, and there is no such column among %s", e.Line, e.Field, e.Column, s.headers()), "correct that line")
			}
			continue
		}
		s.closed[e.Field] = true
		s.p.Lines = append(s.p.Lines, e.Line)
		unit := cell.Unit{}
		for _, k := range c.candidates {
			if k.Key == e.Field {
				c.Sense, c.Kind, c.Year = k.Sense, k.Kind, k.Year
			}
		}
		if f, ok := building.FieldByKey(e.Field); ok && f.Info().Type == building.Number {
			u, given := cell.ParseUnit(e.Unit)
			if !given {
				u = parse(c.Header).unit
			}
			if u, ok := unitFor(f, u); ok {
				unit = u
			}
			if f == building.MeteredHeat {
				c.Kind = building.Metered
			}
		}
		c.Key, c.Unit, c.How = e.Field, unit, fmt.Sprintf("line %d of the column file", e.Line)
		s.by[e.Field] = append(s.by[e.Field], c)
	}
}

func (s *settler) named(column string) *Column {
	for i := range s.t.Columns {
		if sameHeader(column, s.t.Columns[i].Header) {
			return &s.t.Columns[i]
		}
	}
	if n, ok := sheet.ColumnIndex(column); ok {
		for i := range s.t.Columns {
			if s.t.Columns[i].Index == n {
				return &s.t.Columns[i]
			}
		}
	}
	return nil
}

func (s *settler) headers() string {
	var all []*Column
	for i := range s.t.Columns {
		all = append(all, &s.t.Columns[i])
	}
	if len(all) > 30 {
		return name(all[:30]) + ", …"
	}
	return name(all)
}

func (s *settler) problem(sev Severity, key, check string, cols []*Column, text, fix string) {
	p := Problem{Key: key, Check: check, Text: text, Fix: fix, Severity: sev}
	for _, c := range cols {
		p.Columns = append(p.Columns, c.Index)
	}
	s.p.Problems = append(s.p.Problems, p)
}

// several reports whether a field may take more than one column.
func several(key string) bool { return key == building.MeteredHeat.Key() }

// rank settles the candidates of one rank, field by field.
func (s *settler) rank(rank int) {
	for _, key := range Keys() {
		if s.closed[key] {
			continue
		}
		var cols []*Column
		var cands []Candidate
		for i := range s.t.Columns {
			c := &s.t.Columns[i]
			if c.Key != "" {
				continue
			}
			for _, k := range c.candidates {
				if k.Key == key && k.Rank == rank {
					cols, cands = append(cols, c), append(cands, k)
				}
			}
		}
		if len(cols) == 0 {
			continue
		}
		if have := s.by[key]; len(have) > 0 && (!several(key) || cands[0].Sense == energySense) && !firmer(have, cands) {
			for i, c := range cols {
				if rank < looseRank || len(c.candidates) == 1 {
					c.How = fmt.Sprintf("%s is taken from column %s, which fits better", key, have[0].Letters())
					cands[i] = Candidate{}
				}
			}
			continue
		}
		s.take(key, cols, cands)
	}
}

// firmer reports whether the candidates differ in kind from the columns had.
func firmer(have []*Column, cands []Candidate) bool {
	for _, h := range have {
		for _, k := range cands {
			if h.Kind == k.Kind {
				return false
			}
		}
	}
	return true
}

func (s *settler) take(key string, cols []*Column, cands []Candidate) {
	cols, cands = s.narrow(key, cols, cands)
	if len(cols) == 0 {
		return
	}
	for i, c := range cols {
		k := cands[i]
		c.Key, c.Sense, c.Unit, c.Kind, c.Year = key, k.Sense, k.Unit, k.Kind, k.Year
		switch {
		case k.ByUnit:
			c.How = "by header and unit or content"
		case k.Rank < looseRank:
			c.How = "by header"
		default:
			c.How = "by part of the header"
		}
		s.by[key] = append(s.by[key], c)
	}
	sort.SliceStable(s.by[key], func(i, j int) bool {
		a, b := s.by[key][i], s.by[key][j]
		if key == building.MeteredHeat.Key() {
			if x, y := senseRank(a.Sense), senseRank(b.Sense); x != y {
				return x < y
			}
			return a.Year > b.Year
		}
		return a.Kind > b.Kind
	})
}

// narrow leaves of several columns of equal rank those that can be read
// together, or reports that it cannot tell.
func (s *settler) narrow(key string, cols []*Column, cands []Candidate) ([]*Column, []Candidate) {
	if len(cols) == 1 {
		return cols, cands
	}
	f, isField := building.FieldByKey(key)
	// The same quantity in two units: take the one that needs no conversion.
	if isField && f.Info().Type == building.Number {
		var si []int
		units := map[string]bool{}
		for i, k := range cands {
			units[k.Unit.Name] = true
			if k.Unit.Factor == 1 {
				si = append(si, i)
			}
		}
		if len(units) == len(cands) && len(si) == 1 {
			for i, c := range cols {
				if i != si[0] {
					c.How = fmt.Sprintf("the same in another unit as column %s", cols[si[0]].Letters())
				}
			}
			return []*Column{cols[si[0]]}, []Candidate{cands[si[0]]}
		}
	}
	distinct := map[string]bool{}
	for _, k := range cands {
		distinct[fmt.Sprint(k.Kind, k.Sense, k.Year)] = true
	}
	if len(distinct) == len(cols) && (several(key) || kindsDiffer(cands)) {
		return cols, cands
	}
	if isField && f.Info().Type == building.Text || key == DataDateKey || key == DataYearKey || key == HouseKey {
		for _, c := range cols[1:] {
			c.How = fmt.Sprintf("%s is taken from column %s, the first", key, cols[0].Letters())
		}
		return cols[:1], cands[:1]
	}
	sev := Unread
	what := "it is not read"
	if key == IDKey || key == building.FloorArea.Key() || key == building.Volume.Key() {
		sev, what = Stop, "so the sheet is not read"
	}
	s.closed[key] = true
	for _, c := range cols {
		c.How = "could be " + key + ", as could another column"
	}
	s.problem(sev, key, "ambiguous-column", cols, fmt.Sprintf("%s could be any of the columns %s: %s", label(key), name(cols), what),
		fmt.Sprintf("say which in a column file: %s = %s", key, cols[0].Letters()))
	return nil, nil
}

func kindsDiffer(cands []Candidate) bool {
	seen := map[building.Kind]bool{}
	for _, k := range cands {
		if seen[k.Kind] {
			return false
		}
		seen[k.Kind] = true
	}
	return true
}

func label(key string) string {
	if f, ok := building.FieldByKey(key); ok {
		return "\"" + f.Info().Label + "\""
	}
	return map[string]string{IDKey: "the building id", SurveyDateKey: "the survey date", DataDateKey: "the date", DataYearKey: "the year of the data", HouseKey: "the house number"}[key]
}

// mayBeID reports whether a column could hold ids: it has a header that names no
// unit and nothing that is known for something else.
func mayBeID(c *Column) bool {
	return c.Header != "" && !c.Ignored() && parse(c.Header).unit.Name == "" && !cell.ForeignUnit(c.Header) && c.How == ""
}

// required checks that the sheet is one of buildings.
func (s *settler) required() {
	known := 0
	for _, f := range s.p.Fields {
		if f.Key != IDKey && f.Key != DataDateKey && f.Key != DataYearKey && f.Key != HouseKey {
			known++
		}
	}
	if s.p.Stopped() {
		// Two columns that could be an id, and nothing else, are no table of buildings.
		if known == 0 && s.p.Problems[0].Key == IDKey && s.p.Problems[0].Check == "ambiguous-column" && len(s.p.Problems) == 1 {
			s.p.Problems, s.p.Skip = nil, "beside columns that could be building ids it has no known column"
		}
		return
	}
	size := s.p.Has(building.FloorArea.Key()) || s.p.Has(building.Volume.Key()) || s.p.Has(building.GrossVolume.Key())
	if len(s.p.Columns(IDKey)) == 0 {
		if known < 3 && !(size && known > 1) {
			s.p.Skip = "it has no column of building ids and hardly a known column"
			return
		}
		var free, texts []*Column
		for i := range s.t.Columns {
			c := &s.t.Columns[i]
			f, ok := building.FieldByKey(c.Key)
			switch {
			case ok && f == building.Name, c.Key == "" && mayBeID(c):
				free = append(free, c)
			case ok && f.Info().Type == building.Text:
				texts = append(texts, c)
			}
		}
		if len(free) == 0 {
			free = texts
		}
		if len(free) > 8 {
			free = free[:8]
		}
		text := "no column is recognised as the building id"
		if len(free) > 0 {
			text += "; it could be one of " + name(free)
		}
		s.problem(Stop, IDKey, "missing-id", free, text+"; the sheet is not read", "say which in a column file: id = column")
		return
	}
	if known == 0 && len(s.p.Constants) == 0 {
		s.p.Skip = "beside building ids it has no known column"
	}
	if known == 1 && len(s.p.Constants) == 0 && len(s.p.Columns(building.Name.Key())) > 0 && !s.closed[building.Name.Key()] {
		s.p.Skip = "beside ids and names, as any list has them, it has no known column"
	}
}
