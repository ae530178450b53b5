package sheet

import (
	"bytes"
	"fmt"
	"hash/maphash"
	"math"
	"strconv"
	"time"
)

// kind is the type that a workbook gives a cell.
type kind uint8

const (
	numeric kind = iota
	shared
	written // text of a formula
	inlined
	boolean
	failed
	dated // ISO 8601
)

func kindOf(t []byte) kind {
	switch string(t) {
	case "s":
		return shared
	case "str":
		return written
	case "inlineStr":
		return inlined
	case "b":
		return boolean
	case "e":
		return failed
	case "d":
		return dated
	}
	return numeric
}

// convert fills an empty cell by text as it stands in the sheet, not empty.
func (s *scanner) convert(c *Cell, k kind, style int, b []byte) error {
	switch k {
	case shared:
		return s.sharedText(c, b)
	case written, inlined:
		c.Kind, c.Text = Text, s.known.text(unescape(b))
		return nil
	case failed:
		c.Kind, c.Text = Fault, s.known.text(b)
		return nil
	}
	raw := trim(b)
	switch {
	case len(raw) == 0:
	case k == boolean:
		s.truth(c, raw)
	case k == dated:
		s.isoDate(c, raw)
	default:
		s.number(c, raw, style)
	}
	return nil
}

func (s *scanner) sharedText(c *Cell, b []byte) error {
	i, ok := digits(trim(b))
	if !ok || i >= len(s.x.texts.at) {
		return fmt.Errorf("cell %s%d refers to text number %.40q of %d", ColumnLetters(s.cell.column), s.row.Number, b, len(s.x.texts.at))
	}
	if c.Text = s.x.texts.get(i); c.Text != "" {
		c.Kind = Text
	}
	return nil
}

func (s *scanner) truth(c *Cell, raw []byte) {
	switch string(raw) {
	case "1", "true", "TRUE":
		*c = Cell{Kind: Bool, Text: "TRUE", Number: 1}
	case "0", "false", "FALSE":
		*c = Cell{Kind: Bool, Text: "FALSE"}
	default:
		*c = Cell{Kind: Text, Text: s.known.text(raw)}
	}
}

func (s *scanner) isoDate(c *Cell, raw []byte) {
	if len(raw) >= len(time.DateOnly) {
		day := raw[:len(time.DateOnly)]
		if _, err := time.Parse(time.DateOnly, string(day)); err == nil {
			*c = Cell{Kind: Date, Text: s.known.text(day)}
			return
		}
	}
	*c = Cell{Kind: Text, Text: s.known.text(raw)}
}

func (s *scanner) number(c *Cell, raw []byte, style int) {
	v, same, ok := decimal(raw)
	if !ok {
		if v, ok = parse(raw); !ok {
			c.Kind, c.Text = Text, s.known.text(raw)
			return
		}
	}
	c.Number = v
	as := plain
	if style < len(s.x.formats) {
		as = s.x.formats[style]
	}
	if as == asDate {
		if c.Text, ok = s.known.day(v, s.x.from1904); ok {
			c.Kind = Date
			return
		}
	}
	c.Kind, c.Percent = Number, as == asPercent
	if !same {
		s.known.buf = appendNumber(s.known.buf[:0], v)
		raw = s.known.buf
	}
	c.Text = s.known.text(raw)
}

// parse takes any decimal number, and no other notation that Go knows.
func parse(raw []byte) (float64, bool) {
	for _, c := range raw {
		if (c < '0' || c > '9') && c != '.' && c != '-' && c != '+' && c != 'e' && c != 'E' {
			return 0, false
		}
	}
	v, err := strconv.ParseFloat(string(raw), 64)
	return v, err == nil && !math.IsInf(v, 0)
}

var tens = [...]float64{1, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11, 1e12, 1e13, 1e14, 1e15}

// decimal takes a number of up to fifteen digits without an exponent: as both
// its digits and the power of ten are exact in a float64, so is the rounding of
// their quotient. same says that appendNumber would write it as it stands,
// which it does with so few digits if none is idle.
func decimal(b []byte) (v float64, same, ok bool) {
	i := 0
	negative := len(b) > 1 && b[0] == '-'
	if negative {
		i = 1
	}
	whole := i
	var n int64
	for ; i < len(b) && b[i]-'0' <= 9; i++ {
		n = n*10 + int64(b[i]-'0')
		if i-whole >= 15 {
			return 0, false, false
		}
	}
	if i == whole {
		return 0, false, false
	}
	same = i == whole+1 || b[whole] != '0'
	if i < len(b) {
		if b[i] != '.' {
			return 0, false, false
		}
		point := i
		for i++; i < len(b) && b[i]-'0' <= 9; i++ {
			n = n*10 + int64(b[i]-'0')
			if i-whole > 15 {
				return 0, false, false
			}
		}
		if i < len(b) {
			return 0, false, false
		}
		same = same && i > point+1 && b[i-1] != '0'
		v = float64(n) / tens[i-point-1]
	} else {
		v = float64(n)
	}
	if negative {
		v = -v
	}
	return v, same, true
}

// digits reads a whole number as references and indices have it.
func digits(b []byte) (int, bool) {
	if len(b) == 0 || len(b) > 9 {
		return 0, false
	}
	n := 0
	for _, c := range b {
		if c < '0' || c > '9' {
			return 0, false
		}
		n = n*10 + int(c-'0')
	}
	return n, true
}

// splitReference reads a cell reference such as "AB12": column 0-based, row 1-based.
func splitReference(ref []byte) (col, row int, ok bool) {
	i := 0
	for ; i < len(ref) && i < 4; i++ {
		c := ref[i] | 0x20
		if c < 'a' || c > 'z' {
			break
		}
		col = col*26 + int(c-'a') + 1
	}
	if i == 0 || i > 3 {
		return 0, 0, false
	}
	row, ok = digits(ref[i:])
	return col - 1, row, ok && row > 0 && row <= maxRows
}

func trim(b []byte) []byte {
	if b[0] > ' ' && b[0] < 0x80 && b[len(b)-1] > ' ' && b[len(b)-1] < 0x80 {
		return b
	}
	return bytes.TrimSpace(b)
}

// known keeps short texts that came before, since columns repeat theirs.
type known struct {
	seed  maphash.Seed
	texts []string
	days  []knownDay
	buf   []byte
}

type knownDay struct {
	serial float64
	day    string
}

const knownTexts, knownBytes, knownDays = 4096, 16, 1024

func (k *known) text(b []byte) string {
	if len(b) > knownBytes {
		return string(b)
	}
	if k.texts == nil {
		k.seed = maphash.MakeSeed()
		k.texts = make([]string, knownTexts)
	}
	slot := &k.texts[maphash.Bytes(k.seed, b)%knownTexts]
	if *slot != string(b) {
		*slot = string(b)
	}
	return *slot
}

// day is SerialDate.
func (k *known) day(serial float64, from1904 bool) (string, bool) {
	if !(serial >= 0 && serial < 1e6) {
		return SerialDate(serial, from1904)
	}
	if k.days == nil {
		k.days = make([]knownDay, knownDays)
	}
	slot := &k.days[int(serial)%knownDays]
	if slot.day == "" || slot.serial != serial {
		day, ok := SerialDate(serial, from1904)
		if !ok {
			return "", false
		}
		*slot = knownDay{serial, day}
	}
	return slot.day, true
}
