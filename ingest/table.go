package ingest

import (
	"context"
	"errors"
	"fmt"
	"strconv"
	"strings"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/cell"
	"kelvinrow/ingest/finding"
	"kelvinrow/ingest/header"
	"kelvinrow/ingest/sheet"
)

// headRows is how many filled rows from the top may hold titles and header.
const headRows = 60

// evidenceRows is how many rows are looked at to tell years from other text.
const evidenceRows = 3000

type headRow struct {
	number int
	cells  []sheet.Cell
}

// table reads one sheet.
type table struct {
	ctx    context.Context
	book   sheet.Book
	index  int
	info   sheet.Info
	opt    Options
	report *Report
	sink   Sink
	found  *collector
	out    SheetReport

	head     []headRow
	merges   []sheet.Merge
	evidence []header.Evidence
	layout   header.Table
	plan     *header.Plan
	building *building.Sheet
	undated  int   // rows without a date of their own
	form     *form // nil but in a survey form
}

// read returns an error only for what keeps the run from going on.
func (t *table) read() error {
	if t.info.Other != "" {
		t.skip("it is " + t.info.Other)
		return nil
	}
	if t.form != nil {
		return t.readForm()
	}
	if err := t.survey(); err != nil {
		return t.damaged(err)
	}
	if t.formAlone() {
		return nil
	}
	if len(t.head) == 0 {
		t.skip("it is empty")
		return nil
	}
	if t.info.Hidden {
		t.found.add(finding.Finding{Severity: finding.Note, Check: "hidden-sheet", Text: "the sheet is hidden, and is read like any other"})
	}
	mapped := t.opt.Mapping.For(t.report.File, t.info.Name)
	var ok bool
	t.layout, ok = header.Find(t.lines(), t.merges, t.evidence, mapped)
	if !ok {
		t.skip("no row has the names of two known columns")
		return nil
	}
	if t.ownResults() {
		t.report.Own = true
		t.skip("it is a table of results of this program, whose defaults would come back as if they were known")
		return nil
	}
	t.out.HeaderRow, t.out.DataFrom = t.layout.Row, t.layout.DataFrom
	t.plan = header.Settle(&t.layout, mapped)
	t.out.lines = t.plan.Lines
	if t.plan.Skip != "" {
		t.skip(t.plan.Skip)
		t.describe(nil)
		return nil
	}
	for _, p := range t.plan.Problems {
		sev := finding.Note
		switch p.Severity {
		case header.Unread:
			sev = finding.Warning
		case header.Stop:
			sev = finding.Error
			t.out.Skipped = p.Text
		}
		f := finding.Finding{Severity: sev, Check: p.Check, Row: 0, Field: p.Key, Text: p.Text, Fix: p.Fix}
		for i, c := range p.Columns {
			if i > 0 {
				f.Column += ","
			}
			f.Column += sheet.ColumnLetters(c)
		}
		t.found.add(f)
	}
	if t.plan.Stopped() {
		t.describe(nil)
		return nil
	}
	t.remarks()
	t.building = t.sheet()
	if err := t.sink.Sheet(t.building); err != nil {
		return err
	}
	if err := t.rows(); err != nil {
		return err
	}
	t.afterwards()
	return nil
}

// skip says why a sheet is not read.
func (t *table) skip(why string) {
	t.out.Skipped = why
	t.found.add(finding.Finding{Severity: finding.Note, Check: "sheet-skipped", Text: "the sheet is not read: " + why})
}

func (t *table) damaged(err error) error {
	if e := t.ctx.Err(); e != nil {
		return e
	}
	f := finding.Finding{Severity: finding.Error, Check: "damaged-sheet", Text: err.Error(), Fix: "open the file, check it and save it again"}
	var bad *sheet.BadFile
	if errors.As(err, &bad) {
		f.Check, f.Text, f.Fix = bad.Check, bad.Text, bad.Fix
	}
	t.out.Skipped = f.Text
	t.found.add(f)
	return nil
}

// survey reads the sheet to its end once: it must be whole before any of it
// is believed, and a column's decimal sign shows only in all of its cells.
func (t *table) survey() error {
	n := 0
	var err error
	t.merges, err = t.book.Verify(t.ctx, t.index, func(r *sheet.Row) {
		if r.Blank() {
			return
		}
		n++
		if len(t.head) < headRows {
			t.head = append(t.head, headRow{r.Number, append([]sheet.Cell(nil), r.Cells...)})
		}
		for len(t.evidence) < len(r.Cells) {
			t.evidence = append(t.evidence, header.Evidence{})
		}
		for i, c := range r.Cells {
			if !c.Blank() {
				look(&t.evidence[i], c, n <= evidenceRows)
			}
		}
	})
	return err
}

func look(e *header.Evidence, c sheet.Cell, closely bool) {
	switch c.Kind {
	case sheet.Number:
		if closely {
			e.Filled++
			e.Numbers++
			if c.Number >= 1000 && c.Number <= 2100 && c.Number == float64(int(c.Number)) {
				e.Years++
			}
			if isSerial(c.Number) {
				e.Serials++
			}
		}
		return
	case sheet.Date:
		if closely {
			e.Filled++
			e.Dates++
		}
		return
	}
	first := strings.TrimLeft(c.Text, " ~-–")
	if first != "" && first[0] >= '0' && first[0] <= '9' && len(c.Text) < 40 {
		e.Decimal.Look(c.Text)
		if strings.ContainsAny(c.Text, "/.-") {
			if cell.LooksMonthFirst(c.Text) {
				e.MonthFirst++
			} else if cell.LooksDayFirst(c.Text) {
				e.DayFirst++
			}
		}
	}
	if !closely {
		return
	}
	if cell.IsAbsent(c.Text) {
		return
	}
	e.Filled++
	if v, st := cell.ParseNumber(c.Text, cell.Undecided); st == cell.OK {
		e.Numbers++
		if v.Value >= 1000 && v.Value <= 2100 && v.Value == float64(int(v.Value)) && v.Unit.Name == "" {
			e.Years++
		}
		if isSerial(v.Value) && v.Unit.Name == "" {
			e.Serials++
		}
	} else if len(c.Text) < 40 {
		if s, st := cell.ParseYear(c.Text, 2100); st == cell.OK && s.Low >= 1000 && s.High <= 2101 {
			e.Years++
		}
	}
}

func (t *table) lines() []header.Line {
	lines := make([]header.Line, len(t.head))
	for i, r := range t.head {
		lines[i].Row = r.number
		for _, c := range r.cells {
			lines[i].Cells = append(lines[i].Cells, c.Text)
		}
	}
	return lines
}

// sheet describes the sheet for those who keep its records.
func (t *table) sheet() *building.Sheet {
	s := &building.Sheet{File: t.report.File, Name: t.info.Name, FileDate: t.report.Date}
	if d := titleDate(t.head, t.layout.Row); d != "" {
		s.FileDate = d
	}
	for _, pf := range t.plan.Fields {
		f, ok := building.FieldByKey(pf.Key)
		if !ok {
			continue
		}
		var letters []string
		for _, c := range pf.Columns {
			letters = append(letters, c.Letters())
		}
		s.Columns[f] = strings.Join(letters, ",")
	}
	for _, e := range t.plan.Constants {
		if f, ok := building.FieldByKey(e.Field); ok {
			s.Columns[f] = fmt.Sprintf("constant, line %d of %s", e.Line, t.opt.Mapping.Called())
		}
	}
	if use := t.plan.Columns(building.UseField.Key()); len(use) > 0 && !t.plan.Has(building.AttachmentField.Key()) {
		s.Columns[building.AttachmentField] = use[0].Letters()
	}
	if t.carrierFromMeter() {
		s.Columns[building.CarrierField] = s.Columns[building.MeteredHeat]
	}
	// Each tells the other where it can.
	for _, f := range [][2]building.Field{{building.CarrierField, building.HeatingSystem}, {building.HeatingSystem, building.CarrierField}} {
		if s.Columns[f[0]] == "" {
			s.Columns[f[0]] = s.Columns[f[1]]
		}
	}
	return s
}

// isCarrier reports whether the sense of a meter's column is an energy carrier.
func isCarrier(sense string) bool {
	_, ok := building.WordIndex(building.CarrierField, sense)
	return ok
}

// carrierFromMeter reports whether the meter's column is all that tells the carrier.
func (t *table) carrierFromMeter() bool {
	if t.plan.Has(building.CarrierField.Key()) {
		return false
	}
	for _, c := range t.plan.Columns(building.MeteredHeat.Key()) {
		if isCarrier(c.Sense) {
			return true
		}
	}
	return false
}

func (t *table) hasSize() bool {
	return t.plan.Has(building.FloorArea.Key()) || t.plan.Has(building.Volume.Key()) || t.plan.Has(building.GrossVolume.Key())
}

// describe fills the report's columns.
func (t *table) describe(seen []columnSeen) {
	for i := range t.layout.Columns {
		c := &t.layout.Columns[i]
		col := Column{Letter: c.Letters(), Header: c.Header, Field: c.Key, Unit: c.Unit.Name, How: c.How}
		if c.Index < len(seen) {
			col.Count, col.Samples = seen[c.Index].count, seen[c.Index].samples
		}
		t.out.Columns = append(t.out.Columns, col)
	}
}

type columnSeen struct {
	count   int
	samples []string
}

func (s *columnSeen) look(c sheet.Cell) {
	s.count++
	if len(s.samples) < 3 {
		text := strings.Join(strings.Fields(c.Text), " ")
		for _, o := range s.samples {
			if o == text {
				return
			}
		}
		s.samples = append(s.samples, text)
	}
}

// nextYear is the latest year that a value may name.
func (t *table) nextYear() int {
	today := t.opt.Today
	if today == "" {
		today = t.report.Date
	}
	if len(today) >= 4 {
		if y, err := strconv.Atoi(today[:4]); err == nil {
			return y + 1
		}
	}
	return 0
}
