package sheet

import (
	"bytes"
	"context"
	"errors"
	"fmt"
)

// scanner reads the rows of one sheet part in a single forward pass.
type scanner struct {
	*tokens
	x       *xlsx
	name    string
	visit   func(*Row) error
	stopped error // what visit returned
	merging bool
	merges  []Merge

	row   Row
	last  int // number of the last whole row
	count int

	inData, inRow, inCell bool
	skip                  int // depth of an extension that is passed over, 0 outside of one
	cell                  rawCell
	known                 known
}

// rawCell is the cell being read.
type rawCell struct {
	column         int
	kind           kind
	style          int
	value, inline  []byte // of <v> and <is>
	hasValue, isIn bool   // there was a <v>, there was an <is>
	want           *[]byte
	hints          int // open hints for pronunciation
}

func (s *scanner) scan(ctx context.Context, name string, visit func(*Row) error) error {
	s.visit = visit
	p, err := s.x.open(ctx, name, maxPartBytes)
	if err == nil {
		defer p.close()
		s.tokens = p.tokens
		err = s.read()
	}
	var bad *BadFile
	switch {
	case err == nil:
		return nil
	case s.stopped != nil:
		return s.stopped
	case errors.As(err, &bad):
		return bad
	}
	return malformed(s.name, s.last, err)
}

func (s *scanner) read() error {
	for {
		if fast, err := s.fastCell(); err != nil {
			return err
		} else if fast {
			continue
		}
		k, err := s.next()
		if err != nil {
			return err
		}
		switch k {
		case tokenStart:
			err = s.start()
		case tokenEnd:
			err = s.finish()
		case tokenText:
			err = s.take()
		case tokenEOF:
			return nil
		}
		if err != nil {
			return err
		}
	}
}

func (s *scanner) take() error {
	w := s.cell.want
	if w == nil || s.cell.hints > 0 {
		return nil
	}
	if len(*w)+len(s.data) > maxCellBytes {
		return &BadFile{"too-wide", fmt.Sprintf("cell %s%d of sheet %q holds more than %d characters", ColumnLetters(s.cell.column), s.row.Number, s.name, maxCellBytes), "check the cell and save again"}
	}
	*w = append(*w, s.data...)
	return nil
}

func (s *scanner) start() error {
	switch {
	case s.skip > 0:
		return nil
	case s.inCell:
		return s.startInCell()
	case s.inRow:
		switch string(s.local) {
		case "c":
			return s.startCell()
		case "row", "sheetData":
			return s.misplaced()
		}
	case s.inData:
		switch string(s.local) {
		case "row":
			return s.startRow()
		case "c", "sheetData":
			return s.misplaced()
		}
	default:
		return s.startOutside()
	}
	s.skipExtension()
	return nil
}

func (s *scanner) startOutside() error {
	switch string(s.local) {
	case "sheetData":
		if s.depth() != 2 {
			return s.misplaced()
		}
		s.inData = true
	case "row": // a drawing has elements of that name, deeper
		if s.depth() == 2 {
			return s.misplaced()
		}
	case "mergeCell":
		return s.merge()
	default:
		if s.depth() == 1 && string(s.local) != "worksheet" {
			return fmt.Errorf("it is %.40q and no worksheet", s.local)
		}
		s.skipExtension()
	}
	return nil
}

// skipExtension passes over what other programs keep in a sheet.
func (s *scanner) skipExtension() {
	if string(s.local) == "extLst" {
		s.skip = s.depth()
	}
}

func (s *scanner) misplaced() error { return fmt.Errorf("element %.40q is out of place", s.local) }

func (s *scanner) startRow() error {
	s.row.Number = s.last + 1
	seen := false
	for _, a := range s.attrs {
		if a.nameEnd-a.name != 1 || s.tag[a.name] != 'r' {
			continue
		}
		v := s.tag[a.value:a.valueEnd]
		n, ok := digits(v)
		if !ok || n <= s.last || n > maxRows || seen {
			return fmt.Errorf("row number %.40q after row %d", v, s.last)
		}
		s.row.Number, seen = n, true
	}
	if s.row.Number > maxRows {
		return &BadFile{"too-big", fmt.Sprintf("sheet %q has more than %d rows", s.name, maxRows), "split the table"}
	}
	s.row.Cells = s.row.Cells[:0]
	s.cell.column = -1
	s.inRow = true
	return nil
}

func (s *scanner) startCell() error {
	c := &s.cell
	*c = rawCell{column: c.column + 1, value: c.value[:0], inline: c.inline[:0]}
	seen := 0
	for _, a := range s.attrs {
		if a.nameEnd-a.name != 1 {
			continue
		}
		name, v := s.tag[a.name], s.tag[a.value:a.valueEnd]
		switch name {
		case 'r':
			col, row, ok := splitReference(v)
			if !ok || row != s.row.Number || col < c.column || seen&1 != 0 {
				return fmt.Errorf("cell reference %.40q in row %d", v, s.row.Number)
			}
			c.column = col
			seen |= 1
		case 't':
			if seen&2 != 0 {
				return fmt.Errorf("two kinds of one cell in row %d", s.row.Number)
			}
			c.kind = kindOf(v)
			seen |= 2
		case 's':
			c.style, _ = digits(v)
		}
	}
	if c.column >= sheetColumns {
		return s.tooWide(sheetColumns)
	}
	s.inCell = true
	return nil
}

func (s *scanner) tooWide(columns int) error {
	return &BadFile{"too-wide", fmt.Sprintf("sheet %q has more than %d columns", s.name, columns), "remove what does not belong to the table and save again"}
}

func (s *scanner) startInCell() error {
	c := &s.cell
	if c.want != nil {
		return fmt.Errorf("element %.40q within the text of a cell", s.local)
	}
	switch string(s.local) {
	case "v":
		c.value = c.value[:0]
		c.hasValue = true
		c.want = &c.value
	case "is":
		c.isIn = true
	case "t":
		if c.isIn {
			c.want = &c.inline
		}
	case "rPh":
		c.hints++
	case "c", "row", "sheetData":
		return s.misplaced()
	default:
		s.skipExtension()
	}
	return nil
}

func (s *scanner) finish() error {
	if s.skip > 0 {
		if s.depth() < s.skip {
			s.skip = 0
		}
		return nil
	}
	switch string(s.local) {
	case "v", "t":
		s.cell.want = nil
	case "rPh":
		s.cell.hints--
	case "c":
		if s.inCell {
			s.inCell = false
			return s.finishCell()
		}
	case "row":
		if s.inRow {
			return s.finishRow()
		}
	case "sheetData":
		s.inData = false
	}
	return nil
}

// finishCell keeps what was read. A value beside inline text is a leftover of
// the writing program, inline text beside a value of another kind too.
func (s *scanner) finishCell() error {
	c := &s.cell
	if c.isIn && (c.kind == inlined || !c.hasValue) {
		return s.put(inlined, c.style, c.inline)
	}
	return s.put(c.kind, c.style, c.value)
}

// put keeps the cell in the current column; b may be overwritten.
func (s *scanner) put(k kind, style int, b []byte) error {
	if len(b) == 0 {
		return nil
	}
	i := s.cell.column
	if i >= maxColumns {
		return s.putFar(k, style, b)
	}
	for len(s.row.Cells) <= i {
		s.row.Cells = append(s.row.Cells, Cell{})
	}
	c := &s.row.Cells[i]
	if err := s.convert(c, k, style, b); err != nil {
		return err
	}
	if c.Kind == Empty {
		s.row.Cells = s.row.Cells[:i]
	}
	return nil
}

// putFar refuses a cell beyond the columns that are read, unless it is empty.
func (s *scanner) putFar(k kind, style int, b []byte) error {
	var c Cell
	if err := s.convert(&c, k, style, b); err != nil || c.Kind == Empty {
		return err
	}
	return s.tooWide(maxColumns)
}

func (s *scanner) finishRow() error {
	s.inRow = false
	s.last = s.row.Number
	s.count++
	if len(s.row.Cells) == 0 {
		return nil
	}
	s.stopped = s.visit(&s.row)
	return s.stopped
}

func (s *scanner) merge() error {
	if !s.merging {
		return nil
	}
	a, b, _ := bytes.Cut([]byte(s.attr("ref")), []byte(":"))
	c1, r1, ok1 := splitReference(a)
	c2, r2, ok2 := splitReference(b)
	if len(s.merges) >= maxMerges {
		return &BadFile{"too-big", fmt.Sprintf("sheet %q has more than %d merged ranges", s.name, int(maxMerges)), "take the merging off and save again"}
	}
	if ok1 && ok2 {
		s.merges = append(s.merges, Merge{min(r1, r2), max(r1, r2), min(c1, c2), max(c1, c2)})
	}
	return nil
}
