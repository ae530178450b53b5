package sheet

import (
	"fmt"
)

// format is what a number format makes of a number.
type format uint8

const (
	plain format = iota
	asDate
	asPercent
)

// A workbook may have 64,000 formats of cells.
const maxFormats = 1 << 20

func (x *xlsx) readStyles(part string) error {
	if x.part(part) == nil {
		return nil
	}
	r := styleReader{custom: map[int]format{}}
	err := x.each(part, r.start)
	x.formats = r.formats
	return err
}

// styleReader finds out what the format of each cell style makes of a number.
type styleReader struct {
	custom  map[int]format // by the workbook's own number
	inCells bool
	formats []format
}

func (r *styleReader) start(t *tokens) error {
	switch string(t.local) {
	case "numFmt":
		if id, ok := digits([]byte(t.attr("numFmtId"))); ok && len(r.custom) < maxFormats {
			r.custom[id] = formatOf(t.attr("formatCode"))
		}
	case "cellXfs":
		r.inCells = true
	case "cellStyles", "dxfs", "cellStyleXfs":
		r.inCells = false
	case "xf":
		if !r.inCells {
			return nil
		}
		if len(r.formats) == maxFormats {
			return &BadFile{"too-big", fmt.Sprintf("the workbook has more than %d cell styles", maxFormats), "copy the tables into a new workbook"}
		}
		f := plain
		if id, ok := digits([]byte(t.attr("numFmtId"))); ok {
			if f, ok = r.custom[id]; !ok {
				f = builtIn(id)
			}
		}
		r.formats = append(r.formats, f)
	}
	return nil
}

// builtIn knows the formats that workbooks name by number only; hours and
// minutes without a day are no dates.
func builtIn(id int) format {
	switch {
	case id == 9 || id == 10:
		return asPercent
	case id >= 14 && id <= 17 || id == 22 || id >= 27 && id <= 31 || id == 36 || id >= 50 && id <= 54 || id == 57 || id == 58:
		return asDate
	}
	return plain
}

func formatOf(code string) format {
	switch {
	case dateFormat(code):
		return asDate
	case percentFormat(code):
		return asPercent
	}
	return plain
}

// dateFormat reports whether a number format shows a day or a year.
func dateFormat(code string) bool {
	quoted := false
	for i := 0; i < len(code); i++ {
		switch c := code[i]; {
		case c == '"':
			quoted = !quoted
		case quoted:
		case c == '\\' || c == '_' || c == '*':
			i++
		case c == '[':
			for i < len(code) && code[i] != ']' {
				i++
			}
		case c == ';':
			return false
		case c == 'y' || c == 'Y' || c == 'd' || c == 'D':
			return true
		case c == 'G' || c == 'g': // General
			return false
		}
	}
	return false
}

// percentFormat reports whether a number format shows a number times a hundred.
func percentFormat(code string) bool {
	quoted := false
	for i := 0; i < len(code); i++ {
		switch c := code[i]; {
		case c == '"':
			quoted = !quoted
		case quoted:
		case c == '\\' || c == '_' || c == '*':
			i++
		case c == '%':
			return true
		}
	}
	return false
}
