package ingest

import (
	"fmt"
	"math"
	"strings"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/cell"
	"kelvinrow/ingest/check"
	"kelvinrow/ingest/finding"
	"kelvinrow/ingest/header"
	"kelvinrow/ingest/sheet"
)

// formRow takes one row of a survey form: what its surveyor filled in or
// changed. A row without any of that is none.
func (r *rowReader) formRow(in *sheet.Row) error {
	if in.Number < r.layout.DataFrom || in.Blank() {
		return nil
	}
	id := idText(in.Cell(r.id.Index))
	filled := r.keepChanged(in, id)
	r.remark(in, id)
	if !filled {
		return nil
	}
	r.out.Rows++
	r.lookAt(in)
	fault := func(check, column, field, raw, text, fix string) {
		r.found.add(finding.Finding{Severity: finding.Error, Check: check, Row: in.Number, Column: column, Field: field, Building: id, Raw: raw, Text: text, Fix: fix})
	}
	if id == "" {
		fault("missing-id", r.id.Letters(), header.IDKey, in.Cell(r.id.Index).Text, "the row has no building id", "put it back")
		r.out.SetAside++
		return nil
	}
	if r.form.rows[id] == nil {
		fault("not-on-form", r.id.Letters(), header.IDKey, id, "the survey form was not written for building "+id, "write a form for it, or give what is known of it in a list of its own")
		r.out.SetAside++
		return nil
	}
	date, surveyor, ok := r.surveyed(in, id, fault)
	if !ok {
		r.out.SetAside++
		return nil
	}
	keep, date := r.once(in, id, date, fault)
	if !keep {
		return nil
	}
	if !r.readChanged(in, id, fault) {
		r.out.SetAside++
		return nil
	}
	r.out.Used++
	if r.values[building.Surveyor] == nil {
		r.set(building.Value{Field: building.Surveyor, Kind: building.Surveyed, Text: surveyor}, nil)
	}
	r.record = building.Record{Building: id, Sheet: r.building, Row: in.Number, SurveyDate: date, Values: r.record.Values[:0]}
	for f := range building.NumFields {
		if v := r.values[f]; v != nil {
			r.record.Values = append(r.record.Values, *v)
		}
	}
	return r.sink.Record(&r.record)
}

// keepChanged empties the cells that are as the form was written and reports
// whether any other is filled.
func (r *rowReader) keepChanged(in *sheet.Row, id string) bool {
	filled := false
	for i := range r.fields {
		fr := &r.fields[i]
		if !formField(fr.field) {
			continue
		}
		c := fr.columns[0]
		now, was := in.Cell(c.Index), r.form.written(id, c.Key)
		switch {
		case now.Blank():
			if !was.Blank() {
				r.found.group("form-cleared\x00"+c.Letters(), finding.Finding{Severity: finding.Note, Check: "form-cleared", Row: in.Number, Column: c.Letters(), Field: c.Key, Building: id,
					Text: fmt.Sprintf("%s was emptied; the value known before stays", fr.info.Label), Fix: "correct it in the file that it comes from, or give the right one"})
			}
		case r.same(fr, c, now, was):
			in.Cells[c.Index] = sheet.Cell{}
		default:
			filled = true
		}
	}
	return filled
}

// written is the cell of a building's column when the form was written.
func (f *form) written(id, key string) sheet.Cell {
	row := f.rows[id]
	for i := range f.columns {
		if f.columns[i].key == key && i < len(row) {
			return row[i]
		}
	}
	return sheet.Cell{}
}

// same reports whether two cells say the same, however they were saved.
func (r *rowReader) same(fr *fieldReader, c *header.Column, a, b sheet.Cell) bool {
	if b.Blank() {
		return false
	}
	if strings.TrimSpace(a.Text) == strings.TrimSpace(b.Text) {
		return true
	}
	v, st, _ := fr.value(r.thisYear, c, a, "")
	w, was, _ := fr.value(r.thisYear, c, b, "")
	// Programs keep fifteen digits at least.
	near := func(x, y float64) bool { return math.Abs(x-y) <= 1e-9*math.Max(math.Abs(x), math.Abs(y)) }
	return st == cell.OK && was == cell.OK && v.Text == w.Text && near(v.Number, w.Number) && near(v.Low, w.Low) && near(v.High, w.High)
}

// remark passes on what a surveyor wrote beside the values.
func (r *rowReader) remark(in *sheet.Row, id string) {
	if r.form.remarks < 0 || in.Cell(r.form.remarks).Blank() {
		return
	}
	text := strings.Join(strings.Fields(in.Cell(r.form.remarks).Text), " ")
	r.found.add(finding.Finding{Severity: finding.Note, Check: "survey-remark", Row: in.Number, Column: sheet.ColumnLetters(r.form.remarks), Building: id, Raw: text,
		Text: "the surveyor remarks: " + text})
}

// surveyed is when and by whom a row was surveyed; without both it does not count.
func (r *rowReader) surveyed(in *sheet.Row, id string, fault func(check, column, field, raw, text, fix string)) (date, surveyor string, ok bool) {
	missing := func(key, what string) {
		column := ""
		raw := ""
		if c := r.plan.Columns(key); len(c) > 0 {
			column, raw = c[0].Letters(), in.Cell(c[0].Index).Text
		}
		fault("no-"+what, column, key, raw, "the row has no "+strings.ReplaceAll(what, "-", " ")+", so that it does not count", "fill it in, here or for all rows above the table")
	}
	if date, _ = r.date(in, id); date == "" {
		date = r.form.surveyed
	}
	if c := r.plan.Columns(building.Surveyor.Key()); len(c) > 0 {
		surveyor = plainHeader(in.Cell(c[0].Index).Text)
	}
	if cell.IsAbsent(surveyor) {
		surveyor = r.form.surveyor
	}
	switch {
	case date == "":
		missing(header.SurveyDateKey, "survey-date")
	case surveyor == "":
		missing(building.Surveyor.Key(), "surveyor")
	default:
		return date, surveyor, true
	}
	return "", "", false
}

// readChanged reads and checks what is left in the row; it reports false when
// nothing of it can be used.
func (r *rowReader) readChanged(in *sheet.Row, id string, fault func(check, column, field, raw, text, fix string)) bool {
	r.read(in, id, true)
	ok := true
	for _, p := range check.Row(&r.values, r.nextYear) {
		f := finding.Finding{Severity: p.Severity, Check: p.Check, Row: in.Number, Field: p.Field.Key(), Building: id, Text: p.Text, Fix: p.Fix}
		if c := r.columnOf[p.Field]; c != nil {
			f.Column, f.Raw = c.Letters(), in.Cell(c.Index).Text
		}
		r.found.add(f)
		ok = ok && p.Severity != finding.Error
	}
	if !ok {
		return false
	}
	for f := range building.NumFields {
		if r.values[f] != nil && formField(building.Field(f)) {
			return true
		}
	}
	fault("nothing-usable", "", "", "", "nothing that was filled in can be used", "correct it in the form and load that again")
	return false
}
