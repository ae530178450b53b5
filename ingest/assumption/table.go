package assumption

import (
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"

	"kelvinrow/ingest/sheet"
)

// column is one column of a table of rows T: how it is headed, written and read.
type column[T any] struct {
	head  string // with its unit: what the column is found by
	width float64
	words []string // allowed words; nil where anything goes
	// what the checks of the set call the quantity; the head where empty
	what []string
	must bool // an empty cell is wrong

	get func(*T) any // string, float64, or nil for an empty cell
	set func(*T, sheet.Cell) string
}

// table is one sheet.
type table[T any] struct {
	sheet   string
	about   string // a line above the header
	columns []column[T]
}

func text[T any](head string, width float64, at func(*T) *string) column[T] {
	return column[T]{
		head: head, width: width,
		get: func(r *T) any { return nothing(*at(r)) },
		set: func(r *T, c sheet.Cell) string {
			*at(r) = strings.TrimSpace(c.Text)
			return ""
		},
	}
}

func nothing(s string) any {
	if s == "" {
		return nil
	}
	return s
}

// choice is a column of words out of a list.
func choice[T any](head string, width float64, words []string, at func(*T) *string) column[T] {
	c := text(head, width, at)
	c.words = words
	c.set = func(r *T, cell sheet.Cell) string {
		w := strings.TrimSpace(cell.Text)
		if w != "" && !slices.Contains(words, w) {
			return fmt.Sprintf("%q is not one of %s", w, listed(words))
		}
		*at(r) = w
		return ""
	}
	return c
}

// listed shortens long lists of words.
func listed(words []string) string {
	const most = 12
	if len(words) <= most {
		return strings.Join(words, ", ")
	}
	return strings.Join(words[:most], ", ") + fmt.Sprintf(" and %d more (the list of the cell)", len(words)-most)
}

// number is a column of numbers; the cell shows scale times the number. An empty
// cell is 0, and 0 is written as an empty cell where blank says so.
func number[T any](head string, scale float64, blank bool, at func(*T) *float64) column[T] {
	return column[T]{
		head: head, width: 12, must: !blank,
		get: func(r *T) any {
			v := *at(r)
			if v == 0 && blank {
				return nil
			}
			if scale != 1 {
				// Twelve digits: what the scale does to the last one is not shown.
				v, _ = strconv.ParseFloat(strconv.FormatFloat(v*scale, 'g', 12, 64), 64)
			}
			return v
		},
		set: func(r *T, c sheet.Cell) string {
			v, problem := numberOf(c)
			if problem == "" {
				*at(r) = v / scale
			}
			return problem
		},
	}
}

func numberOf(c sheet.Cell) (float64, string) {
	switch {
	case c.Blank():
		return 0, ""
	case c.Kind == sheet.Number && !math.IsNaN(c.Number) && !math.IsInf(c.Number, 0):
		return c.Number, ""
	case c.Kind == sheet.Text:
		s := strings.ReplaceAll(strings.TrimSpace(c.Text), " ", "")
		v, err := strconv.ParseFloat(strings.Replace(s, ",", ".", 1), 64)
		if err == nil && !math.IsNaN(v) && !math.IsInf(v, 0) {
			return v, ""
		}
	}
	return 0, fmt.Sprintf("%q is not a number", c.Text)
}

// year is a column of years; an empty cell leaves it open.
func year[T any](head string, at func(*T) *int) column[T] {
	return column[T]{
		head: head, width: 9,
		get: func(r *T) any {
			if *at(r) == 0 {
				return nil
			}
			return float64(*at(r))
		},
		set: func(r *T, c sheet.Cell) string {
			v, problem := numberOf(c)
			if problem == "" && (v != math.Trunc(v) || v < 0 || v > 9999) {
				problem = fmt.Sprintf("%q is not a year", c.Text)
			}
			if problem == "" {
				*at(r) = int(v)
			}
			return problem
		},
	}
}

var yesNo = []string{"yes", "no"}

// yes is a column of yes and, where empty or said, no.
func yes[T any](head string, at func(*T) *bool) column[T] {
	return column[T]{
		head: head, width: 10, words: yesNo,
		get: func(r *T) any {
			if *at(r) {
				return "yes"
			}
			return nil
		},
		set: func(r *T, c sheet.Cell) string {
			switch w := strings.ToLower(strings.TrimSpace(c.Text)); w {
			case "yes", "no", "":
				*at(r) = w == "yes"
				return ""
			default:
				return fmt.Sprintf("%q is neither yes nor no", c.Text)
			}
		},
	}
}

func (c column[T]) named(what ...string) column[T] {
	c.what = what
	return c
}

func (c column[T]) needed() column[T] {
	c.must = true
	return c
}

// columnOf finds the column that holds what a check complains of, -1 if none does.
func (t *table[T]) columnOf(what string) int {
	if what == "" {
		return -1
	}
	return slices.IndexFunc(t.columns, func(c column[T]) bool {
		return c.head == what || slices.Contains(c.what, what)
	})
}
