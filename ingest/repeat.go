package ingest

import (
	"fmt"
	"hash/fnv"
	"strings"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/cell"
	"kelvinrow/ingest/finding"
	"kelvinrow/ingest/header"
	"kelvinrow/ingest/sheet"
)

// occurrence is the row in which an id and date stood first.
type occurrence struct {
	row  int
	hash uint64
}

// sighting is what is known of an id that came before.
type sighting struct {
	row  int
	date string // of its first row
	year int    // latest metered year of its rows without a date
}

// once lets an id through once, or once for each date or metered year. It
// reports false for a row that is not to be read, and the date of one that is.
func (r *rowReader) once(in *sheet.Row, id, date string, fault func(check, column, field, raw, text, fix string)) (bool, string) {
	h := fnv.New64a()
	for _, c := range in.Cells {
		h.Write([]byte(strings.TrimSpace(c.Text)))
		h.Write([]byte{0})
	}
	year := 0
	if date == "" {
		year = r.yearOfMeter(in)
	}
	duplicate := func(row int) (bool, string) {
		if !r.told[row] {
			r.told[row] = true
			r.found.add(finding.Finding{Severity: finding.Note, Check: finding.DuplicateFirst, Row: row, Column: r.id.Letters(), Field: header.IDKey, Building: id, Raw: id,
				Text: fmt.Sprintf("the row counts; building %s comes again in row %d with other values", id, in.Number)})
		}
		fault("duplicate-id", r.id.Letters(), header.IDKey, id, fmt.Sprintf("building %s is in row %d already, with other values", id, row), "leave one of the rows, or date them")
		r.out.SetAside++
		return false, ""
	}
	key := fmt.Sprint(id, "\x00", date, "\x00", year)
	if o, ok := r.first[key]; ok {
		if o.hash == h.Sum64() {
			r.found.add(finding.Finding{Severity: finding.Note, Check: "duplicate-row", Row: in.Number, Column: r.id.Letters(), Field: header.IDKey, Building: id, Raw: id,
				Text: fmt.Sprintf("the row says the same as row %d and counts once", o.row)})
			r.out.Used++
			return false, ""
		}
		return duplicate(o.row)
	}
	before, again := r.dated[id]
	if again && date == "" && before.date == "" && (year == 0 || before.year == 0) {
		return duplicate(before.row)
	}
	r.first[key] = occurrence{in.Number, h.Sum64()}
	if !again {
		r.dated[id] = sighting{in.Number, date, year}
		return true, date
	}
	r.found.group("versions", finding.Finding{Severity: finding.Note, Check: "versions", Row: in.Number, Column: r.id.Letters(), Field: header.IDKey, Building: id,
		Text: "the building comes again with another date or metered year; all are kept, the newest counts"})
	switch {
	case year == 0:
	case year > before.year:
		before.year = year // of rows of one date, the last counts
		r.dated[id] = before
	default:
		date = fmt.Sprintf("%d-12-31", year) // so that it yields to the later reading above
	}
	return true, date
}

// yearOfMeter is the year of the row's meter reading, 0 if it names none.
func (r *rowReader) yearOfMeter(in *sheet.Row) int {
	for _, c := range r.plan.Columns(building.MeteredYear.Key()) {
		if span, st := cell.ParseYear(in.Cell(c.Index).Text, r.thisYear); st == cell.OK {
			return int(span.High)
		}
	}
	return 0
}
