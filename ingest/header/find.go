package header

import (
	"fmt"
	"slices"
	"sort"
	"strings"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/cell"
	"kelvinrow/ingest/sheet"
)

// Line is one of the first rows of a sheet, as text.
type Line struct {
	Row   int
	Cells []string
}

// Column is one column of a table and what it is taken for.
type Column struct {
	Index  int
	Header string
	Key    string // "" when it is not read
	Sense  string
	Unit   cell.Unit
	Kind   building.Kind // Default unless the header says how firm the values are
	Year   int
	How    string // how it was recognised, in words

	candidates []Candidate
}

// Letters names the column.
func (c *Column) Letters() string { return sheet.ColumnLetters(c.Index) }

// Ignored reports whether the column is known for something that is not read.
func (c *Column) Ignored() bool {
	return c.Key == "" && len(c.candidates) > 0 && c.candidates[0].Key == ignoredKey
}

// Table is the layout of one sheet.
type Table struct {
	Row      int // of the header, the lower one of two; 0 without one
	DataFrom int // first row below header and units
	Columns  []Column
	Known    int // columns recognised
}

// Find looks for the header among the first rows: the row most of whose cells
// are recognised. It reports ok false when no row has two such cells and no
// mapping names one. Where a mapping gives letters, a table needs no header:
// then Row is 0.
func Find(lines []Line, merges []sheet.Merge, evidence []Evidence, mapped []Entry) (Table, bool) {
	best, bestScore := Table{}, 0
	for i := range lines {
		if len(lines[i].Cells) == 0 {
			continue
		}
		t, score := read(lines, i, merges, evidence, mapped)
		if score > bestScore {
			best, bestScore = t, score
		}
	}
	if bestScore >= 4 {
		best.lettered(evidence, mapped)
		return best, true
	}
	return bare(lines, mapped)
}

// lettered adds the filled columns without a header that a mapping names.
func (t *Table) lettered(evidence []Evidence, mapped []Entry) {
	for _, e := range mapped {
		c, ok := sheet.ColumnIndex(e.Column)
		if !ok || e.Fixed || e.Unread || c >= len(evidence) || evidence[c].Filled == 0 {
			continue
		}
		if !slices.ContainsFunc(t.Columns, func(k Column) bool { return k.Index == c }) {
			t.Columns = append(t.Columns, Column{Index: c})
		}
	}
	slices.SortStableFunc(t.Columns, func(a, b Column) int { return a.Index - b.Index })
}

// bare finds a table without a header by the letters of a mapping: from the
// first row with an id and with numbers where numbers belong.
func bare(lines []Line, mapped []Entry) (Table, bool) {
	at := map[int]Entry{}
	var columns []int
	id := false
	for _, e := range mapped {
		if c, ok := sheet.ColumnIndex(e.Column); ok && !e.Fixed && !e.Unread {
			at[c] = e
			columns = append(columns, c)
			id = id || e.Field == IDKey
		}
	}
	if !id || len(columns) < 2 {
		return Table{}, false
	}
	sort.Ints(columns)
	for _, l := range lines {
		fits, filled := true, 0
		for _, c := range columns {
			text := ""
			if c < len(l.Cells) {
				text = strings.TrimSpace(l.Cells[c])
			}
			if text != "" {
				filled++
			}
			f, isField := building.FieldByKey(at[c].Field)
			if at[c].Field == IDKey {
				fits = fits && text != ""
			} else if isField && f.Info().Type == building.Number {
				_, st := cell.ParseNumber(text, cell.Undecided)
				fits = fits && st != cell.Bad
			}
		}
		if !fits || filled < 2 {
			continue
		}
		t := Table{DataFrom: l.Row}
		for c := range l.Cells {
			t.Columns = append(t.Columns, Column{Index: c})
		}
		return t, true
	}
	return Table{}, false
}

// read takes line i for the header and says how well that fits.
func read(lines []Line, i int, merges []sheet.Merge, evidence []Evidence, mapped []Entry) (Table, int) {
	l := lines[i]
	t := Table{Row: l.Row, DataFrom: l.Row + 1}
	var above []string
	var written []string // the same without what merges spread
	if i > 0 && lines[i-1].Row == l.Row-1 {
		if above = filled(lines[i-1], merges, len(l.Cells)); above != nil {
			written = lines[i-1].Cells
		}
	}
	units := map[int]cell.Unit{}
	if i+1 < len(lines) && lines[i+1].Row == l.Row+1 {
		if u, ok := unitRow(lines[i+1]); ok {
			units = u
			t.DataFrom = lines[i+1].Row + 1
		}
	}
	width := len(l.Cells)
	if len(above) > width {
		width = len(above)
	}
	score, texts := 0, 0
	for c := range width {
		own, group := "", ""
		if c < len(l.Cells) {
			own = strings.TrimSpace(l.Cells[c])
		}
		if c < len(above) {
			group = strings.TrimSpace(above[c])
		}
		var ev Evidence
		if c < len(evidence) {
			ev = evidence[c]
		}
		col := Column{Index: c, Header: own}
		if own == "" && group == "" {
			continue
		}
		if own == "" && !mergedDown(merges, c, l.Row) {
			// The upper of two header rows, not merged with the cell below.
			if c >= len(written) || strings.TrimSpace(written[c]) == "" {
				continue
			}
			if k := Recognise(group, ev); len(k) == 0 || k[0].Rank >= looseRank {
				continue
			}
		}
		if hasNumber(own) {
			score -= 2
		}
		with := func(h string) []Candidate {
			if u, ok := units[c]; ok {
				h += " [" + u.Name + "]"
			}
			return Recognise(h, ev)
		}
		col.candidates = with(own)
		if group != "" && group != own {
			// "U-value" below "Wall": both together say more, when they say it exactly.
			both := with(group + " " + own)
			if own == "" {
				both = with(group)
			}
			if len(both) > 0 && (len(col.candidates) == 0 || both[0].Rank < looseRank) {
				col.candidates = both
				col.Header = strings.TrimSpace(group + " " + own)
			}
		}
		if own != "" {
			texts++
		}
		if len(col.candidates) > 0 {
			k := col.candidates[0]
			switch {
			case k.Key == ignoredKey:
				score++
			case k.Rank < looseRank:
				score += 3
			default:
				score += 2
			}
		}
		for _, e := range mapped {
			if !e.Fixed && !e.Unread && own != "" && sameHeader(e.Column, own) {
				score += 3
			} else if n, ok := sheet.ColumnIndex(e.Column); ok && n == c && !e.Fixed && !e.Unread && isWord(own) {
				score += 2
			}
		}
		t.Columns = append(t.Columns, col)
	}
	if texts < 2 && len(mapped) == 0 {
		return t, 0
	}
	return t, score
}

func hasNumber(s string) bool {
	n, st := cell.ParseNumber(s, cell.Undecided)
	return st == cell.OK && n.Unit.Name == "" && (n.Value < 1950 || n.Value > 2100)
}

func isWord(s string) bool {
	_, st := cell.ParseNumber(s, cell.Undecided)
	return st == cell.Bad
}

func sameHeader(a, b string) bool {
	return strings.EqualFold(strings.TrimSpace(a), strings.TrimSpace(b)) || cell.Fold(a) == cell.Fold(b) && cell.Fold(a) != ""
}

// filled spreads the text of a merged range over its cells. A range over the
// whole width is a title, not a group.
func filled(l Line, merges []sheet.Merge, width int) []string {
	out := make([]string, max(width, len(l.Cells)))
	copy(out, l.Cells)
	for _, m := range merges {
		if m.FirstRow <= l.Row && l.Row <= m.LastRow && m.FirstCol < len(l.Cells) {
			if m.LastCol-m.FirstCol+1 >= width && width > 3 {
				out[m.FirstCol] = ""
				continue
			}
			for c := m.FirstCol; c <= m.LastCol && c < len(out); c++ {
				out[c] = l.Cells[m.FirstCol]
			}
		}
	}
	// Text formats know no merging: a group then stands over blank cells.
	merged := false
	for _, m := range merges {
		merged = merged || m.FirstRow <= l.Row && l.Row <= m.LastRow
	}
	n := 0
	for _, s := range out {
		if strings.TrimSpace(s) != "" {
			n++
		}
	}
	if n < 2 { // a title stands alone
		return nil
	}
	for c := 1; !merged && c < len(out); c++ {
		if strings.TrimSpace(out[c]) == "" {
			out[c] = out[c-1]
		}
	}
	return out
}

func mergedDown(merges []sheet.Merge, col, row int) bool {
	for _, m := range merges {
		if m.FirstCol <= col && col <= m.LastCol && m.FirstRow < row && row <= m.LastRow {
			return true
		}
	}
	return false
}

// unitRow reports the units of a second header row: every filled cell is a unit
// or at least no number, and one is a unit.
func unitRow(l Line) (map[int]cell.Unit, bool) {
	units := map[int]cell.Unit{}
	other := 0
	for c, s := range l.Cells {
		s = strings.TrimSpace(s)
		if s == "" || s == "-" || s == "–" || s == "[-]" || s == "(-)" {
			continue
		}
		if u, ok := cell.ParseUnit(s); ok {
			units[c] = u
			continue
		}
		if hasNumber(s) {
			return nil, false
		}
		other++
	}
	return units, len(units) > 0 && len(units) >= other
}

// Problem is what Settle could not settle.
type Problem struct {
	Key      string
	Check    string
	Text     string
	Fix      string
	Severity Severity
	Columns  []int
}

// Severity says what a problem does.
type Severity uint8

const (
	Note   Severity = iota
	Unread          // the field is not read
	Stop            // the sheet is not read
)

func name(cols []*Column) string {
	var s []string
	for _, c := range cols {
		s = append(s, fmt.Sprintf("%s %q", c.Letters(), c.Header))
	}
	return strings.Join(s, ", ")
}
