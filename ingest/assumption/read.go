// Package assumption writes everything a screening rests on (prices, costs,
// climates, uses, rules, build-ups) as a workbook that people edit, and takes it
// back. One definition per sheet serves both, so that they cannot drift. Nothing is
// taken unless all of it is sound; what is not is said all at once, with its place.
package assumption

import (
	"context"
	"errors"
	"fmt"
	"path/filepath"
	"slices"
	"strings"

	"kelvinrow/estimate/archetype"
	"kelvinrow/estimate/climate"
	"kelvinrow/estimate/fabric"
	"kelvinrow/ingest/finding"
	"kelvinrow/ingest/sheet"
)

// ErrRefused is returned with findings where a workbook is not taken.
var ErrRefused = errors.New("the assumptions are not taken: mend what is wrong and give the workbook again")

// Read takes a workbook of assumptions. With ErrRefused the findings say what is
// wrong; with any other error the file could not be read at all.
func Read(ctx context.Context, path string) (*archetype.Set, []finding.Finding, error) {
	content, err := sheet.ReadContent(ctx, path)
	if err != nil {
		return nil, nil, fmt.Errorf("assumptions: %w", err)
	}
	book, err := sheet.Open(path, content)
	if err != nil {
		return nil, nil, fmt.Errorf("assumptions %s: %w", path, err)
	}
	defer book.Close()
	r := &reader{ctx: ctx, book: book, file: filepath.Base(path), places: map[string]map[string]placed{}}
	set := r.set()
	if err := ctx.Err(); err != nil {
		return nil, nil, err
	}
	if r.broken {
		// Without sheets and columns the cells tell nothing.
		r.findings = slices.DeleteFunc(r.findings, func(f finding.Finding) bool { return f.Check != layoutCheck })
	}
	if len(r.findings) > 0 {
		finding.Sort(r.findings)
		return nil, r.findings, ErrRefused
	}
	return set, nil, nil
}

// layoutCheck marks what is said of sheets and headers.
const layoutCheck = "assumption-layout"

// missing says that the workbook lacks a sheet or a header.
func (r *reader) missing(sheetName string, row int, text, fix string) {
	r.say(sheetName, row, "", "", text, fix)
	r.findings[len(r.findings)-1].Check = layoutCheck
	r.broken = true
}

type reader struct {
	ctx      context.Context
	book     sheet.Book
	file     string
	findings []finding.Finding
	cells    int  // findings about cells, before the checks of the set
	broken   bool // a sheet or a column is missing
	// places of the rows of the set's tables, by table and key
	places map[string]map[string]placed
}

// placed is where a row of the set came from.
type placed struct {
	sheet   string
	rows    []int // of a build-up: one per layer
	column  func(what string) int
	letters []string // of the columns in the file
}

func (r *reader) say(sheetName string, row int, column, raw, text, fix string) {
	r.findings = append(r.findings, finding.Finding{
		Severity: finding.Error, Check: "assumption", File: r.file, Sheet: sheetName, Row: row, Column: column, Raw: raw, Text: text, Fix: fix,
	})
}

// read is a table as it came: its rows with where they stand.
type read[T any] struct {
	rows    []T
	numbers []int
	blank   [][]bool // by row and column of the table
	letters []string // by column of the table; "" where the file has none
}

// readTable reads one sheet by its table.
func readTable[T any](r *reader, t *table[T]) (out read[T]) {
	i := slices.IndexFunc(r.book.Sheets(), func(s sheet.Info) bool { return strings.EqualFold(strings.TrimSpace(s.Name), t.sheet) })
	if i < 0 {
		r.missing(t.sheet, 0, "the sheet is missing", "leave every sheet in the workbook")
		return out
	}
	if _, err := r.book.Verify(r.ctx, i, func(*sheet.Row) {}); err != nil {
		r.say(t.sheet, 0, "", "", err.Error(), "open the workbook, save it again and give it back")
		return out
	}
	where := make([]int, len(t.columns)) // column of the file by column of the table
	headed := false
	err := r.book.Rows(r.ctx, i, func(row *sheet.Row) error {
		switch {
		case !headed:
			if headed = strings.EqualFold(strings.TrimSpace(row.Cell(0).Text), t.columns[0].head) || r.heads(row, t.columns[0].head); headed {
				out.letters = matchHeads(r, t, row, where)
			}
		case !row.Blank():
			readRow(r, t, row, where, &out)
		}
		return nil
	})
	if err != nil {
		r.say(t.sheet, 0, "", "", err.Error(), "")
	}
	if !headed {
		r.missing(t.sheet, 0, fmt.Sprintf("no row is headed %q", t.columns[0].head), "leave the headers as they were written")
	}
	return out
}

// heads reports whether a row holds a head: columns may have been moved.
func (r *reader) heads(row *sheet.Row, head string) bool {
	return slices.ContainsFunc(row.Cells, func(c sheet.Cell) bool { return strings.EqualFold(strings.TrimSpace(c.Text), head) })
}

func matchHeads[T any](r *reader, t *table[T], row *sheet.Row, where []int) []string {
	letters := make([]string, len(t.columns))
	for k, c := range t.columns {
		where[k] = slices.IndexFunc(row.Cells, func(cell sheet.Cell) bool { return strings.EqualFold(strings.TrimSpace(cell.Text), c.head) })
		if where[k] >= 0 {
			letters[k] = sheet.ColumnLetters(where[k])
			continue
		}
		if c.head != "Notes" {
			r.missing(t.sheet, row.Number, fmt.Sprintf("no column is headed %q", c.head), "leave the headers as they were written")
		}
	}
	return letters
}

func readRow[T any](r *reader, t *table[T], row *sheet.Row, where []int, out *read[T]) {
	var v T
	blank := make([]bool, len(t.columns))
	for k, c := range t.columns {
		if where[k] < 0 {
			blank[k] = true
			continue
		}
		cell := row.Cell(where[k])
		blank[k] = cell.Blank()
		switch problem := ""; {
		case cell.Kind == sheet.Fault:
			r.say(t.sheet, row.Number, out.letters[k], cell.Text, fmt.Sprintf("%s: the cell shows the error %s", c.head, cell.Text), "mend the formula")
		case blank[k] && c.must:
			r.say(t.sheet, row.Number, out.letters[k], "", fmt.Sprintf("%s is empty", c.head), "fill it in, or remove the row")
		default:
			if problem = c.set(&v, cell); problem != "" {
				r.say(t.sheet, row.Number, out.letters[k], cell.Text, fmt.Sprintf("%s: %s", c.head, problem), "")
			}
		}
	}
	out.rows = append(out.rows, v)
	out.numbers = append(out.numbers, row.Number)
	out.blank = append(out.blank, blank)
}

// place remembers where the rows of a table of the set came from.
func place[T any](r *reader, name string, t *table[T], in *read[T], key func(*T) string) {
	m := map[string]placed{}
	for i := range in.rows {
		k := key(&in.rows[i])
		p, ok := m[k]
		if !ok {
			p = placed{sheet: t.sheet, column: t.columnOf, letters: in.letters}
		}
		p.rows = append(p.rows, in.numbers[i])
		m[k] = p
	}
	r.places[name] = m
}

// set reads all sheets. What it returns is sound only without findings.
func (r *reader) set() *archetype.Set {
	s := &archetype.Set{}
	economics := readTable(r, &economicsTable)
	place(r, archetype.EconomicsTable, &economicsTable, &economics, func(*archetype.Economics) string { return "" })
	switch len(economics.rows) {
	case 1:
		s.Economics = economics.rows[0]
	case 0:
		r.say(economicsTable.sheet, 0, "", "", "no row", "give one row")
	default:
		r.say(economicsTable.sheet, economics.numbers[1], "", "", "more than one row", "leave one row")
	}
	carriers := readTable(r, &carriersTable)
	place(r, archetype.CarriersTable, &carriersTable, &carriers, func(c *archetype.Carrier) string { return c.Word })
	s.Carriers = carriers.rows
	r.uses(s)
	r.measures(s)
	rules := readTable(r, &rulesTable)
	place(r, archetype.RulesTable, &rulesTable, &rules, func(x *archetype.Rule) string { return x.ID })
	s.Rules = rules.rows
	r.emptyRules(&rules)
	materials := readTable(r, &materialsTable)
	place(r, archetype.MaterialsTable, &materialsTable, &materials, func(m *archetype.Material) string { return m.Name })
	s.Materials = materials.rows
	r.buildups(s)
	surveys := readTable(r, &surveysTable)
	place(r, archetype.SurveyTable, &surveysTable, &surveys, func(c *archetype.SurveyCost) string { return c.Group })
	s.Surveys = surveys.rows
	words := readTable(r, &wordsTable)
	place(r, archetype.WordsTable, &wordsTable, &words, func(w *archetype.OwnWord) string { return w.Written })
	s.Words = words.rows
	r.climates(s)
	if r.ctx.Err() != nil || r.broken {
		return s // what is missing would be complained of a thousand times
	}
	s.Index()
	r.cells = len(r.findings)
	r.problems(s.Validate())
	return s
}

func (r *reader) uses(s *archetype.Set) {
	in := readTable(r, &usesTable)
	place(r, archetype.UsesTable, &usesTable, &in, func(u *archetype.Use) string { return u.Word })
	for i, u := range in.rows {
		k := slices.Index(useWords, u.Word)
		switch {
		case k < 0: // said already
		case s.Uses[k].Word != "":
			r.say(usesTable.sheet, in.numbers[i], "A", u.Word, fmt.Sprintf("%q stands twice", u.Word), "leave one row")
		default:
			s.Uses[k] = u
		}
	}
}

// emptyRules says which rules give a number and have none: an empty cell must not
// count as 0.
func (r *reader) emptyRules(in *read[archetype.Rule]) {
	for _, head := range []string{"Typical", "Low", "High"} {
		k := rulesTable.columnOf(head)
		for i := range in.rows {
			info, ok := in.rows[i].Property.Info()
			if ok && !info.IsWord && in.blank[i][k] {
				r.say(rulesTable.sheet, in.numbers[i], in.letters[k], "", fmt.Sprintf("%s is empty, and %s is a number", head, in.rows[i].Property), "fill it in, or remove the row")
			}
		}
	}
}

func (r *reader) measures(s *archetype.Set) {
	in := readTable(r, &measuresTable)
	place(r, archetype.MeasuresTable, &measuresTable, &in, func(m *archetype.Measure) string { return m.Key })
	s.Measures = in.rows
	byKey := map[string]*archetype.Measure{}
	for i := range s.Measures {
		byKey[s.Measures[i].Key] = &s.Measures[i]
	}
	details := readTable(r, &detailsTable)
	place(r, detailsTable.sheet, &detailsTable, &details, func(d *detail) string { return d.measure + "\x00" + d.name })
	low, high := detailsTable.columnOf("Low"), detailsTable.columnOf("High")
	for i, d := range details.rows {
		row := details.numbers[i]
		m := byKey[d.measure]
		switch {
		case m == nil:
			r.say(detailsTable.sheet, row, details.letters[0], d.measure, fmt.Sprintf("no measure has the key %q", d.measure), "use a key of the sheet Measures")
			continue
		case archetype.TargetMeaning(d.name) == "":
			r.say(detailsTable.sheet, row, details.letters[1], d.name, fmt.Sprintf("no measure has a parameter %q", d.name), "remove the row")
			continue
		}
		if _, twice := m.Target[d.name]; twice {
			r.say(detailsTable.sheet, row, details.letters[1], d.name, fmt.Sprintf("%s of %s stands twice", d.name, d.measure), "leave one row")
			continue
		}
		switch {
		case details.blank[i][low] && details.blank[i][high]:
			d.low, d.high = d.typical, d.typical
		case details.blank[i][low] != details.blank[i][high]:
			r.say(detailsTable.sheet, row, details.letters[low], "", "low and high go together", "give both or neither")
		}
		m.SetTarget(d.name, d.typical, d.low, d.high)
	}
}

func (r *reader) buildups(s *archetype.Set) {
	in := readTable(r, &buildupsTable)
	place(r, archetype.BuildupsTable, &buildupsTable, &in, func(l *layerRow) string { return l.name })
	done := map[string]bool{}
	for i := range in.rows {
		l := &in.rows[i]
		n := len(s.Buildups)
		if n == 0 || s.Buildups[n-1].Name != l.name {
			if done[l.name] {
				r.say(buildupsTable.sheet, in.numbers[i], in.letters[0], l.name, fmt.Sprintf("rows of %q do not stand together", l.name), "bring them together, from inside to outside")
			}
			done[l.name] = true
			b := archetype.Buildup{Name: l.name, Element: l.element, BothInside: l.bothInside}
			switch l.element {
			case "roof":
				b.Direction = fabric.Up
			case "floor":
				b.Direction = fabric.Down
			}
			s.Buildups = append(s.Buildups, b)
			n++
		}
		b := &s.Buildups[n-1]
		if b.Element != l.element || b.BothInside != l.bothInside {
			r.say(buildupsTable.sheet, in.numbers[i], in.letters[1], l.element, fmt.Sprintf("layers of %q disagree on the element or on the unheated space", l.name), "say the same in every row")
		}
		for _, note := range []struct{ to, from *string }{{&b.Source, &l.source}, {&b.Notes, &l.notes}} {
			if *note.from != "" && !strings.Contains(*note.to, *note.from) {
				if *note.to != "" {
					*note.to += "; "
				}
				*note.to += *note.from
			}
		}
		l.layer.ConductivityWMK, l.layer.BridgeConductivityWMK = l.conductivity, l.second
		l.layer.Gaps = fabric.Gaps(max(0, slices.Index(fabric.GapWords[:], l.gaps)))
		b.Layers = append(b.Layers, l.layer)
	}
}

func (r *reader) climates(s *archetype.Set) {
	in := readTable(r, &climatesTable)
	for i := 0; i < len(in.rows); {
		place := in.rows[i].place
		c := place
		c.Terrain, _ = climate.ParseTerrain(in.rows[i].terrain)
		first, n := in.numbers[i], 0
		for ; i < len(in.rows) && in.rows[i].place.Name == c.Name && n < 12; i, n = i+1, n+1 {
			m := &in.rows[i]
			if m.month != float64(n+1) {
				r.say(climatesTable.sheet, in.numbers[i], in.letters[1], "", fmt.Sprintf("%s: month %g stands where month %d is due", c.Name, m.month, n+1), "give twelve rows, January to December")
			}
			if m.place != place || m.terrain != c.Terrain.String() {
				r.say(climatesTable.sheet, in.numbers[i], in.letters[0], "", fmt.Sprintf("%s: what belongs to the place differs between its months", c.Name), "say the same in every row")
			}
			c.Months[n] = m.data
		}
		if n < 12 {
			r.say(climatesTable.sheet, first, in.letters[0], "", fmt.Sprintf("%s has %d months", c.Name, n), "give twelve rows, January to December")
			continue
		}
		if slices.ContainsFunc(s.Climates, func(o climate.Climate) bool { return strings.EqualFold(o.Name, c.Name) }) {
			r.say(climatesTable.sheet, first, in.letters[0], c.Name, fmt.Sprintf("place %q stands twice", c.Name), "leave twelve rows for each place")
		}
		c.FillVertical()
		if err := c.Validate(); err != nil {
			for _, e := range unjoin(err) {
				r.say(climatesTable.sheet, first, "", "", c.Name+": "+e.Error(), "")
			}
		}
		s.Climates = append(s.Climates, c)
	}
	if len(in.rows) == 0 {
		r.say(climatesTable.sheet, 0, "", "", "no climate", "give at least one place of twelve months")
	}
}

// problems places what the checks of the set found.
func (r *reader) problems(err error) {
	for _, e := range unjoin(err) {
		var p *archetype.Problem
		if !errors.As(e, &p) {
			r.say("", 0, "", "", e.Error(), "")
			continue
		}
		name, key := p.Table, p.Key
		if target, ok := strings.CutPrefix(strings.TrimPrefix(strings.TrimPrefix(p.What, "low of "), "high of "), "target "); ok {
			name, key = detailsTable.sheet, p.Key+"\x00"+target
		}
		at, ok := r.places[name][key]
		if !ok || key == "" && name != archetype.EconomicsTable {
			r.say(sheetOf(p.Table), 0, "", "", p.Text, "")
			continue
		}
		row, column := at.rows[0], ""
		if p.Layer > 0 && p.Layer <= len(at.rows) {
			row = at.rows[p.Layer-1]
		}
		if name == detailsTable.sheet {
			column = "C"
		} else if k := at.column(p.What); k >= 0 {
			column = at.letters[k]
		}
		if !r.said(at.sheet, row) { // a cell that cannot be read is enough of a row
			r.say(at.sheet, row, column, "", p.Text, "")
		}
	}
}

// said reports whether a row's cells have been complained of.
func (r *reader) said(sheetName string, row int) bool {
	return slices.ContainsFunc(r.findings[:r.cells], func(f finding.Finding) bool { return f.Sheet == sheetName && f.Row == row })
}

func sheetOf(table string) string {
	return map[string]string{
		archetype.EconomicsTable: economicsTable.sheet, archetype.CarriersTable: carriersTable.sheet, archetype.UsesTable: usesTable.sheet,
		archetype.MeasuresTable: measuresTable.sheet, archetype.RulesTable: rulesTable.sheet, archetype.BuildupsTable: buildupsTable.sheet,
		archetype.MaterialsTable: materialsTable.sheet, archetype.SurveyTable: surveysTable.sheet, archetype.WordsTable: wordsTable.sheet,
	}[table]
}

func unjoin(err error) []error {
	if err == nil {
		return nil
	}
	if many, ok := err.(interface{ Unwrap() []error }); ok {
		var out []error
		for _, e := range many.Unwrap() {
			out = append(out, unjoin(e)...)
		}
		return out
	}
	return []error{err}
}
