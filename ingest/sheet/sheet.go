// Package sheet reads the cells of spreadsheets, .xlsx and delimited text, row
// by row, and refuses a sheet that cannot be read to its end rather than
// returning the part that could.
package sheet

import (
	"context"
	"errors"
	"fmt"
	"math"
	"path/filepath"
	"strconv"
	"strings"
	"time"
)

// Kind says what a cell holds.
type Kind uint8

const (
	Empty  Kind = iota
	Text        // Text
	Number      // Number, and Text as written
	Date        // Number is the serial, Text is "2026-03-01"
	Bool        // Number is 1 or 0, Text "TRUE" or "FALSE"
	Fault       // a formula's error, Text such as "#REF!"
)

// Cell is one cell as stored; formulas count by their cached value.
type Cell struct {
	Kind    Kind
	Text    string
	Number  float64
	Percent bool // a Number that is shown times a hundred, with a per cent sign
}

// Blank reports whether the cell shows nothing.
func (c Cell) Blank() bool { return c.Kind == Empty || strings.TrimSpace(c.Text) == "" }

// Row is one row; its cells are reused by the next.
type Row struct {
	Number int // 1-based, as a spreadsheet program shows it
	Cells  []Cell
}

// Cell returns the cell in 0-based column i, empty beyond the row's end.
func (r *Row) Cell(i int) Cell {
	if i < 0 || i >= len(r.Cells) {
		return Cell{}
	}
	return r.Cells[i]
}

// Blank reports whether no cell shows anything.
func (r *Row) Blank() bool {
	for _, c := range r.Cells {
		if !c.Blank() {
			return false
		}
	}
	return true
}

// Merge is a merged range; rows 1-based, columns 0-based, both ends included.
type Merge struct{ FirstRow, LastRow, FirstCol, LastCol int }

// Info describes one sheet of a book.
type Info struct {
	Name   string // "" in delimited text
	Hidden bool
	Other  string // not empty: no sheet of cells, but such as "a chart"
}

// Book is an open spreadsheet file.
type Book interface {
	Sheets() []Info
	// Verify reads sheet i to its end and calls visit for every row that has
	// cells. Only what Verify passed whole should be believed.
	Verify(ctx context.Context, i int, visit func(*Row)) ([]Merge, error)
	// Rows calls visit for every row of sheet i that has cells, until visit fails.
	Rows(ctx context.Context, i int, visit func(*Row) error) error
	// Modified is the date the file says it was last changed, "" if it does not.
	Modified() string
	// Delimiter is the separator of delimited text, 0 elsewhere.
	Delimiter() rune
	Close() error
}

// Limits that no honest sheet of buildings comes near. Parts that are held in
// memory have lower ones than those that are streamed.
const (
	maxPartBytes  = 1 << 30
	maxBookBytes  = 4 << 30   // all sheets together
	maxTextBytes  = 512 << 20 // the texts that cells share
	maxTexts      = 20e6
	maxOtherBytes = 64 << 20 // styles, lists of parts
	maxCellBytes  = 1 << 20
	maxMerges     = 200e3
	maxSheets     = 1000
	maxColumns    = 4096    // that hold something
	sheetColumns  = 1 << 14 // columns of an .xlsx sheet, by its format
	maxRows       = 1 << 20 // rows of an .xlsx sheet, by its format
)

// BadFile says why a file is no spreadsheet that can be read, and what to do.
type BadFile struct{ Check, Text, Fix string }

func (e *BadFile) Error() string { return e.Text + "; " + e.Fix }

// Open opens the spreadsheet at path by its content, whatever its name ends in.
func Open(path string, c *Content) (Book, error) {
	switch {
	case c.Bytes == 0:
		return nil, &BadFile{"empty-file", "the file is empty", "send it again"}
	case c.ole():
		return nil, oleProblem(path)
	case c.zip():
		return openXLSX(path)
	}
	if ext := strings.ToLower(filepath.Ext(path)); ext == ".xlsx" || ext == ".xlsm" {
		return nil, &BadFile{"no-workbook", "the file is no .xlsx workbook although its name says so", "open it in a spreadsheet program and save it as .xlsx"}
	}
	if what := c.other(); what != "" {
		return nil, &BadFile{"no-table", "the file is " + what + " and no table", "open it in a spreadsheet program and save the table as .xlsx or .csv"}
	}
	if c.binary() {
		return nil, &BadFile{"no-text", "the file is neither a workbook nor text", "save the table as .xlsx or .csv"}
	}
	return openText(path, c)
}

// ColumnLetters names 0-based column i, 0 is "A", 26 is "AA".
func ColumnLetters(i int) string {
	var b [8]byte
	n := len(b)
	for i++; i > 0 && n > 0; i = (i - 1) / 26 {
		n--
		b[n] = byte('A' + (i-1)%26)
	}
	return string(b[n:])
}

// ColumnIndex is the inverse of ColumnLetters.
func ColumnIndex(letters string) (int, bool) {
	if letters == "" || len(letters) > 3 {
		return 0, false
	}
	n := 0
	for _, r := range strings.ToUpper(letters) {
		if r < 'A' || r > 'Z' {
			return 0, false
		}
		n = n*26 + int(r-'A') + 1
	}
	return n - 1, true
}

// SerialDate turns a day serial of a workbook into "2026-03-01".
func SerialDate(serial float64, from1904 bool) (string, bool) {
	if from1904 {
		serial += 1462
	}
	if math.IsNaN(serial) || serial < 1 || serial > 2958465 {
		return "", false
	}
	day := int(serial)
	if day < 60 { // the format counts a 29 February 1900 that never was
		day++
	}
	return time.Date(1899, 12, 30, 0, 0, 0, 0, time.UTC).AddDate(0, 0, day).Format("2006-01-02"), true
}

func appendNumber(b []byte, v float64) []byte {
	if math.Abs(v) >= 1e21 {
		return strconv.AppendFloat(b, v, 'g', -1, 64)
	}
	return strconv.AppendFloat(b, v, 'f', -1, 64)
}

func malformed(name string, row int, err error) error {
	if errors.Is(err, context.Canceled) || errors.Is(err, context.DeadlineExceeded) {
		return err
	}
	return &BadFile{"damaged-sheet",
		fmt.Sprintf("sheet %q is damaged after row %d (%v), so none of it is read", name, row, err),
		"open it in a spreadsheet program, let it repair the file, check the rows and save again"}
}
