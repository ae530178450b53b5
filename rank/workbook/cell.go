package workbook

import (
	"context"
	"io"
	"math"
	"strconv"
	"strings"
)

// maxRows is the number of rows a sheet can hold.
const maxRows = 1048576

func itoa(n int) string { return strconv.Itoa(n) }

// column letters, computed once: sheets here have fewer than 27*26 columns.
var letters = func() (l [703]string) {
	for c := 1; c < len(l); c++ {
		for n := c; n > 0; n = (n - 1) / 26 {
			l[c] = string(rune('A'+(n-1)%26)) + l[c]
		}
	}
	return l
}()

// cellName returns the name of a cell, such as "B7".
func cellName(col, row int) string { return letters[col] + itoa(row) }

// rows appends the rows of a sheet as XML. Cells of a row come in the order of
// their columns. Text is always written as text, whatever it begins with.
// Formulas carry the value they lead to, so that a viewer that does not
// calculate shows numbers.
type rows struct {
	ctx  context.Context
	w    io.Writer
	buf  []byte
	row  int
	open bool
	err  error
}

const flushAt = 1 << 16

// begin starts a row; height 0 leaves it to the reader's program.
func (r *rows) begin(row int, height float64) {
	r.finish()
	if len(r.buf) >= flushAt {
		r.flush()
		if err := r.ctx.Err(); err != nil && r.err == nil {
			r.err = err
		}
	}
	r.row, r.open = row, true
	r.buf = append(r.buf, `<row r="`...)
	r.buf = strconv.AppendInt(r.buf, int64(row), 10)
	if height > 0 {
		r.buf = append(r.buf, `" ht="`...)
		r.buf = strconv.AppendFloat(r.buf, height, 'f', -1, 64)
		r.buf = append(r.buf, `" customHeight="1`...)
	}
	r.buf = append(r.buf, `">`...)
}

func (r *rows) finish() {
	if r.open {
		r.buf = append(r.buf, `</row>`...)
		r.open = false
	}
}

func (r *rows) flush() {
	if r.err == nil {
		_, r.err = r.w.Write(r.buf)
	}
	r.buf = r.buf[:0]
}

// close ends the last row and hands everything on.
func (r *rows) close() error {
	r.finish()
	r.flush()
	return r.err
}

// cell writes a cell up to its style, with the quote still open.
func (r *rows) cell(col, style int) {
	r.buf = append(r.buf, `<c r="`...)
	r.buf = append(r.buf, letters[col]...)
	r.buf = strconv.AppendInt(r.buf, int64(r.row), 10)
	r.buf = append(r.buf, `" s="`...)
	r.buf = strconv.AppendInt(r.buf, int64(style), 10)
}

func (r *rows) blank(col, style int) {
	r.cell(col, style)
	r.buf = append(r.buf, `"/>`...)
}

func (r *rows) text(col, style int, s string) {
	if s == "" {
		r.blank(col, style)
		return
	}
	r.cell(col, style)
	r.buf = append(r.buf, `" t="inlineStr"><is><t xml:space="preserve">`...)
	r.buf = appendEscaped(r.buf, clean(s))
	r.buf = append(r.buf, `</t></is></c>`...)
}

// number writes a number rounded to a count of decimals; what is not a number
// leaves the cell empty.
func (r *rows) number(col, style int, v float64, decimals int) {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		r.blank(col, style)
		return
	}
	r.cell(col, style)
	r.buf = append(r.buf, `"><v>`...)
	r.buf = appendFixed(r.buf, v, decimals)
	r.buf = append(r.buf, `</v></c>`...)
}

func (r *rows) int(col, style, v int) { r.number(col, style, float64(v), 0) }

// cachedDecimals is to how many decimals the value of a formula is written: a
// millionth of a unit of money. More digits would be a third of the file.
const cachedDecimals = 6

// formula writes a formula, already escaped and without "=", in which # stands
// for the row, and the number it leads to.
func (r *rows) formula(col, style int, f string, v float64) {
	r.cell(col, style)
	r.buf = append(r.buf, `"><f>`...)
	r.appendFormula(f)
	r.buf = append(r.buf, `</f><v>`...)
	r.buf = appendFixed(r.buf, v, cachedDecimals)
	r.buf = append(r.buf, `</v></c>`...)
}

// formulaText is formula for one that leads to text.
func (r *rows) formulaText(col, style int, f, v string) {
	r.cell(col, style)
	r.buf = append(r.buf, `" t="str"><f>`...)
	r.appendFormula(f)
	r.buf = append(r.buf, `</f><v>`...)
	r.buf = appendEscaped(r.buf, v)
	r.buf = append(r.buf, `</v></c>`...)
}

func (r *rows) appendFormula(f string) {
	for {
		i := strings.IndexByte(f, '#')
		if i < 0 {
			r.buf = append(r.buf, f...)
			return
		}
		r.buf = append(r.buf, f[:i]...)
		r.buf = strconv.AppendInt(r.buf, int64(r.row), 10)
		f = f[i+1:]
	}
}

// escape makes a formula fit for XML.
func escape(f string) string { return string(appendEscaped(nil, f)) }

// appendEscaped escapes for XML, and for the spreadsheet format itself, which
// reads _x0041_ as the character A.
func appendEscaped(b []byte, s string) []byte {
	from := 0
	for i := 0; i < len(s); i++ {
		var e string
		switch s[i] {
		case '&':
			e = "&amp;"
		case '<':
			e = "&lt;"
		case '>':
			e = "&gt;"
		case '"':
			e = "&quot;"
		case '_':
			if !isCharacterCode(s[i:]) {
				continue
			}
			e = "_x005F_"
		default:
			continue
		}
		b = append(b, s[from:i]...)
		b = append(b, e...)
		from = i + 1
	}
	return append(b, s[from:]...)
}

func isCharacterCode(s string) bool {
	if len(s) < 7 || s[1] != 'x' || s[6] != '_' {
		return false
	}
	for _, c := range []byte(s[2:6]) {
		if (c < '0' || c > '9') && (c < 'a' || c > 'f') && (c < 'A' || c > 'F') {
			return false
		}
	}
	return true
}

var pow10 = [...]float64{1, 10, 100, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9}

// wholeLimit is where a float64 still holds every whole number and a printed one
// is still read back the same.
const wholeLimit = 1e15

// fixed rounds to a count of decimals: exactly the number that appendFixed
// writes and a spreadsheet reads, so that formulas can be computed here with the
// numbers the sheet holds.
func fixed(v float64, decimals int) float64 {
	n := math.Round(v * pow10[decimals])
	if !(math.Abs(n) < wholeLimit) {
		return v
	}
	return n / pow10[decimals]
}

// appendFixed writes v with at most a count of decimals. Digits beyond a
// thousandth of a kWh only make the file big and slow.
func appendFixed(b []byte, v float64, decimals int) []byte {
	n := math.Round(v * pow10[decimals])
	if !(math.Abs(n) < wholeLimit) {
		return strconv.AppendFloat(b, v, 'g', -1, 64)
	}
	i := int64(n)
	if i < 0 {
		b, i = append(b, '-'), -i
	}
	p := int64(pow10[decimals])
	b = strconv.AppendInt(b, i/p, 10)
	rest := i % p
	if rest == 0 {
		return b
	}
	b = append(b, '.')
	for p /= 10; rest > 0; p /= 10 {
		b = append(b, byte('0'+rest/p))
		rest %= p
	}
	return b
}
