package sheet

import (
	"context"
	"encoding/xml"
	"errors"
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"
)

// scanner reads the rows of one sheet part in a single forward pass.
type scanner struct {
	x      *xlsx
	name   string
	strict bool // check that elements nest, which costs time, on the first pass
	merges []Merge

	row   Row
	last  int // number of the last whole row
	count int

	// of the cell being read
	column  int
	kind    string
	style   int
	value   []byte
	inValue bool
	skip    int // depth inside a phonetic hint
}

// failure wraps what visit returned, so that it is not taken for damage.
type failure struct{ err error }

func (f failure) Error() string { return f.err.Error() }

func (s *scanner) scan(ctx context.Context, part string, visit func(*Row) error) (int, error) {
	d, c, err := s.x.decoder(part, maxPartBytes)
	if err == nil {
		defer c.Close()
		err = s.tokens(ctx, d, visit)
	}
	var f failure
	var bad *BadFile
	switch {
	case err == nil:
		return s.count, nil
	case errors.As(err, &f):
		return s.count, f.err
	case errors.As(err, &bad):
		return s.count, bad
	}
	return s.count, malformed(s.name, s.last, err)
}

func (s *scanner) tokens(ctx context.Context, d *xml.Decoder, visit func(*Row) error) error {
	next := d.RawToken
	if s.strict {
		next = d.Token
	}
	worksheet, depth := false, 0
	for {
		t, err := next()
		if err == io.EOF {
			if !worksheet || depth != 0 {
				return io.ErrUnexpectedEOF
			}
			return nil
		}
		if err != nil {
			return err
		}
		switch t := t.(type) {
		case xml.StartElement:
			depth++
			if t.Name.Local == "worksheet" && depth == 1 {
				worksheet = true
			}
			if t.Name.Local == "row" && s.count%256 == 0 {
				if err := ctx.Err(); err != nil {
					return err
				}
			}
			if err := s.start(t); err != nil {
				return err
			}
		case xml.EndElement:
			depth--
			if err := s.end(t.Name.Local, visit); err != nil {
				return err
			}
		case xml.CharData:
			if s.inValue && s.skip == 0 {
				if len(s.value)+len(t) > maxCellBytes {
					return &BadFile{"too-wide", fmt.Sprintf("cell %s%d of sheet %q holds more than %d characters", ColumnLetters(s.column), s.row.Number, s.name, maxCellBytes), "check the cell and save again"}
				}
				s.value = append(s.value, t...)
			}
		}
	}
}

func (s *scanner) start(e xml.StartElement) error {
	switch e.Name.Local {
	case "row":
		s.row.Number = s.last + 1
		if r := attr(e, "r"); r != "" {
			n, err := strconv.Atoi(r)
			if err != nil || n <= s.last || n > maxRows {
				return fmt.Errorf("row number %q after row %d", r, s.last)
			}
			s.row.Number = n
		}
		s.row.Cells = s.row.Cells[:0]
		s.column = -1
	case "c":
		s.column++
		s.kind, s.style = "", 0
		s.value = s.value[:0]
		for _, a := range e.Attr {
			switch a.Name.Local {
			case "r":
				col, row, ok := splitReference(a.Value)
				if !ok || row != s.row.Number || col < s.column {
					return fmt.Errorf("cell reference %q in row %d", a.Value, s.row.Number)
				}
				s.column = col
			case "t":
				s.kind = a.Value
			case "s":
				s.style, _ = strconv.Atoi(a.Value)
			}
		}
	case "v":
		// A value beside inline text is a leftover of the writing program.
		if s.inValue = s.kind != "inlineStr"; s.inValue {
			s.value = s.value[:0]
		}
	case "t":
		s.inValue = s.kind == "inlineStr"
	case "rPh":
		s.skip++
	case "mergeCell":
		if s.strict {
			a, b, _ := strings.Cut(attr(e, "ref"), ":")
			c1, r1, ok1 := splitReference(a)
			c2, r2, ok2 := splitReference(b)
			if len(s.merges) >= maxMerges {
				return &BadFile{"too-big", fmt.Sprintf("sheet %q has more than %d merged ranges", s.name, int(maxMerges)), "take the merging off and save again"}
			}
			if ok1 && ok2 {
				s.merges = append(s.merges, Merge{min(r1, r2), max(r1, r2), min(c1, c2), max(c1, c2)})
			}
		}
	}
	return nil
}

func (s *scanner) end(local string, visit func(*Row) error) error {
	switch local {
	case "v", "t":
		s.inValue = false
	case "rPh":
		s.skip--
	case "c":
		cell, err := s.cell()
		if err != nil {
			return err
		}
		if cell.Kind == Empty {
			return nil
		}
		if s.column >= maxColumns {
			return &BadFile{"too-wide", fmt.Sprintf("sheet %q has more than %d columns", s.name, maxColumns), "remove what does not belong to the table and save again"}
		}
		for len(s.row.Cells) <= s.column {
			s.row.Cells = append(s.row.Cells, Cell{})
		}
		s.row.Cells[s.column] = cell
	case "row":
		s.last = s.row.Number
		s.count++
		if len(s.row.Cells) == 0 {
			return nil
		}
		if err := visit(&s.row); err != nil {
			return failure{err}
		}
	}
	return nil
}

func (s *scanner) cell() (Cell, error) {
	if len(s.value) == 0 {
		return Cell{}, nil
	}
	switch s.kind {
	case "s":
		i, err := strconv.Atoi(strings.TrimSpace(string(s.value)))
		if err != nil || i < 0 || i >= len(s.x.strings) {
			return Cell{}, fmt.Errorf("cell %s%d refers to text number %q of %d", ColumnLetters(s.column), s.row.Number, s.value, len(s.x.strings))
		}
		if s.x.strings[i] == "" {
			return Cell{}, nil
		}
		return Cell{Kind: Text, Text: s.x.strings[i]}, nil
	case "str", "inlineStr":
		return Cell{Kind: Text, Text: unescape(string(s.value))}, nil
	case "b":
		if v := string(s.value); v == "1" || v == "true" {
			return Cell{Kind: Bool, Text: "TRUE", Number: 1}, nil
		}
		return Cell{Kind: Bool, Text: "FALSE"}, nil
	case "e":
		return Cell{Kind: Fault, Text: string(s.value)}, nil
	case "d":
		t := string(s.value)
		if len(t) >= 10 {
			return Cell{Kind: Date, Text: t[:10]}, nil
		}
		return Cell{Kind: Text, Text: t}, nil
	}
	raw := strings.TrimSpace(string(s.value))
	if raw == "" {
		return Cell{}, nil
	}
	v, err := strconv.ParseFloat(raw, 64)
	if err != nil || math.IsInf(v, 0) || math.IsNaN(v) {
		return Cell{Kind: Text, Text: raw}, nil
	}
	as := plain
	if s.style >= 0 && s.style < len(s.x.formats) {
		as = s.x.formats[s.style]
	}
	if as == asDate {
		if day, ok := SerialDate(v, s.x.from1904); ok {
			return Cell{Kind: Date, Text: day, Number: v}, nil
		}
	}
	return Cell{Kind: Number, Text: formatNumber(v), Number: v, Percent: as == asPercent}, nil
}

// splitReference reads a cell reference such as "AB12": column 0-based, row 1-based.
func splitReference(ref string) (col, row int, ok bool) {
	i := 0
	for i < len(ref) && (ref[i] >= 'A' && ref[i] <= 'Z' || ref[i] >= 'a' && ref[i] <= 'z') {
		i++
	}
	col, ok = ColumnIndex(ref[:i])
	if !ok {
		return 0, 0, false
	}
	row, err := strconv.Atoi(ref[i:])
	return col, row, err == nil && row > 0 && row <= maxRows
}
