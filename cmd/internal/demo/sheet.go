package demo

import (
	"fmt"
	"math"
	"math/rand/v2"
	"strconv"
	"strings"
)

// column is one column of a department's list.
type column struct {
	head  string
	unit  string // for a unit row below the header
	width float64
	hole  float64 // share of cells left empty
	value func(a *asset, rng *rand.Rand) any
}

// formula is a cell with a formula and the value that was last computed for it.
// "{r}" stands for the row's own number.
type formula struct {
	text  string
	value any
}

// list is a department's list before it is written.
type list struct {
	columns []column
	rows    [][]any
}

func newList(columns []column, assets []*asset, rng *rand.Rand) *list {
	l := &list{columns: columns}
	for _, a := range assets {
		row := make([]any, len(columns))
		for i, c := range columns {
			v := c.value(a, rng)
			if rng.Float64() >= c.hole {
				row[i] = v
			}
		}
		l.rows = append(l.rows, row)
	}
	return l
}

func (l *list) index(head string) int {
	for i, c := range l.columns {
		if c.head == head {
			return i
		}
	}
	panic("demo: no column " + head) // a slip of ours, seen by every test
}

// spoil changes the filled cells of a column in a share of the rows, given per
// thousand.
func (l *list) spoil(rng *rand.Rand, head string, perThousand float64, change func(old any) any) {
	c := l.index(head)
	var filled []int
	for i, row := range l.rows {
		if row[c] != nil {
			filled = append(filled, i)
		}
	}
	n := min(len(filled), int(math.Round(perThousand*float64(len(l.rows))/1000)))
	rng.Shuffle(len(filled), func(i, j int) { filled[i], filled[j] = filled[j], filled[i] })
	for _, i := range filled[:n] {
		l.rows[i][c] = change(l.rows[i][c])
	}
}

// double repeats a share of the rows further down, changed where change is set.
func (l *list) double(rng *rand.Rand, perThousand float64, change func(row []any)) {
	for range int(math.Round(perThousand * float64(len(l.rows)) / 1000)) {
		row := append([]any(nil), l.rows[rng.IntN(len(l.rows))]...)
		if change != nil {
			change(row)
		}
		at := rng.IntN(len(l.rows) + 1)
		l.rows = append(l.rows[:at], append([][]any{row}, l.rows[at:]...)...)
	}
}

// blank puts an empty row after every so many.
func (l *list) blank(every int) {
	var rows [][]any
	for i, row := range l.rows {
		rows = append(rows, row)
		if i%every == every-1 {
			rows = append(rows, nil)
		}
	}
	l.rows = rows
}

func (l *list) heads() []any {
	out := make([]any, len(l.columns))
	for i, c := range l.columns {
		out[i] = c.head
	}
	return out
}

func (l *list) units() []any {
	out := make([]any, len(l.columns))
	for i, c := range l.columns {
		if c.unit != "" {
			out[i] = c.unit
		}
	}
	return out
}

// always, drop, negative and the like are changes for spoil.
func always(v any) func(any) any { return func(any) any { return v } }

func negative(v any) any {
	if f, ok := number(v); ok {
		return -f
	}
	return v
}

func times(k float64) func(any) any {
	return func(v any) any {
		if f, ok := number(v); ok {
			return f * k
		}
		return v
	}
}

// wordy writes a number into a sentence such as "approx. %s".
func wordy(format string) func(any) any {
	return func(v any) any {
		f, ok := number(v)
		if !ok {
			return v
		}
		return fmt.Sprintf(format, strconv.FormatFloat(f, 'f', -1, 64))
	}
}

func number(v any) (float64, bool) {
	switch x := v.(type) {
	case float64:
		return x, true
	case int:
		return float64(x), true
	}
	return 0, false
}

// decade turns a year into its span, "1960-69".
func decade(v any) any {
	y, ok := v.(int)
	if !ok {
		return v
	}
	return fmt.Sprintf("%d-%02d", y/10*10, y/10*10%100+9)
}

// comma writes a number with a decimal comma and points between thousands.
func comma(v float64, decimals int) string {
	s := strconv.FormatFloat(v, 'f', decimals, 64)
	whole, part, _ := strings.Cut(s, ".")
	for i := len(whole) - 3; i > 0; i -= 3 {
		whole = whole[:i] + "." + whole[i:]
	}
	if part != "" {
		whole += "," + part
	}
	return whole
}

// plainComma is comma without the points.
func plainComma(v float64, decimals int) string {
	return strings.Replace(strconv.FormatFloat(v, 'f', decimals, 64), ".", ",", 1)
}

func round(v float64, decimals int) float64 {
	k := math.Pow10(decimals)
	return math.Round(v*k) / k
}

// measured is a value as somebody measured or took it from a drawing: off by a
// few percent.
func measured(rng *rand.Rand, v, sigma float64, decimals int) float64 {
	return round(v*(1+sigma*max(-2, min(2, rng.NormFloat64()))), decimals)
}

// year is a year of renewal, nil for none.
func year(y int) any {
	if y == 0 {
		return nil
	}
	return y
}

func choose[T any](cond bool, yes, no T) T {
	if cond {
		return yes
	}
	return no
}
