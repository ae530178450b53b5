// Package finding holds what is wrong, doubtful or worth saying about input
// data. A finding is data, not an error: it is collected, sorted and shown on
// the terminal, in the workbook and as JSON, while the good rows go on.
package finding

import (
	"cmp"
	"fmt"
	"slices"
	"strings"
)

// Severity says what a finding did to the data.
type Severity uint8

const (
	Note    Severity = iota // worth knowing; the value is used
	Warning                 // the value is set aside, the rest of the row is used
	Error                   // the row, sheet or file is set aside
)

var severityWords = [...]string{"note", "warning", "error"}

func (s Severity) String() string { return severityWords[s] }

// MarshalText writes the severity as its word.
func (s Severity) MarshalText() ([]byte, error) { return []byte(severityWords[s]), nil }

// UnmarshalText reads a severity from its word.
func (s *Severity) UnmarshalText(word []byte) error {
	v, ok := SeverityByWord(string(word))
	if !ok {
		return fmt.Errorf("%q is no severity", word)
	}
	*s = v
	return nil
}

// SeverityByWord finds a severity by its word.
func SeverityByWord(w string) (Severity, bool) {
	i := slices.Index(severityWords[:], w)
	return Severity(max(i, 0)), i >= 0
}

// DuplicateFirst is the check that marks the row which counts where an id comes
// again: whoever mends the others must see it.
const DuplicateFirst = "duplicate-first"

// Checks whose notes are always worth a line.
const (
	FileSkipped = "file-skipped" // a file of a folder that was not read
	OwnWorkbook = "own-workbook" // a workbook of results given as a source
	Replaced    = "replaced"     // a file took the place of an earlier one
	// UnreadQuantity is a column of energy, U-values or flows that is not read.
	UnreadQuantity = "unread-quantity"
)

// Finding is one thing to say about one place in the input.
type Finding struct {
	Severity Severity `json:"severity"`
	Check    string   `json:"check"` // short stable name of the check, such as "negative-area"
	File     string   `json:"file,omitempty"`
	Sheet    string   `json:"sheet,omitempty"`
	Row      int      `json:"row,omitempty"`    // 1-based; 0 when about the whole sheet or file
	Column   string   `json:"column,omitempty"` // letters, such as "H"
	Field    string   `json:"field,omitempty"`  // building.Field key
	Building string   `json:"building,omitempty"`
	Raw      string   `json:"raw,omitempty"` // what the cell said
	Text     string   `json:"text"`          // what is wrong, in words
	Fix      string   `json:"fix,omitempty"` // what to do
}

// Place renders where the finding is: file, sheet, row and column as far as known.
func (f Finding) Place() string {
	var b strings.Builder
	b.WriteString(f.File)
	if f.Sheet != "" {
		fmt.Fprintf(&b, ", sheet %q", f.Sheet)
	}
	if f.Row > 0 {
		fmt.Fprintf(&b, ", row %d", f.Row)
	}
	if f.Column != "" {
		fmt.Fprintf(&b, ", column %s", f.Column)
	}
	return strings.TrimPrefix(b.String(), ", ")
}

// String renders the finding in one line for a terminal.
func (f Finding) String() string {
	s := f.Severity.String() + ": "
	if p := f.Place(); p != "" {
		s += p + ": "
	}
	s += f.Text
	if f.Fix != "" {
		s += "; " + f.Fix
	}
	return s
}

// Sort orders findings by place, then severity (gravest first), then check.
func Sort(fs []Finding) {
	slices.SortStableFunc(fs, func(a, b Finding) int {
		return cmp.Or(
			strings.Compare(a.File, b.File),
			strings.Compare(a.Sheet, b.Sheet),
			cmp.Compare(a.Row, b.Row),
			cmp.Compare(len(a.Column), len(b.Column)),
			strings.Compare(a.Column, b.Column),
			cmp.Compare(b.Severity, a.Severity),
			strings.Compare(a.Check, b.Check),
		)
	})
}
