package ingest

import (
	"context"
	"errors"
	"fmt"
	"slices"
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
}

// read returns an error only for what keeps the run from going on.
func (t *table) read() error {
	if t.info.Other != "" {
		t.skip("it is " + t.info.Other)
		return nil
	}
	if err := t.survey(); err != nil {
		return t.damaged(err)
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
	t.out.HeaderRow, t.out.DataFrom = t.layout.Row, t.layout.DataFrom
	t.plan = header.Settle(&t.layout, mapped)
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
	return t.rows()
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
			s.Columns[f] = "constant"
		}
	}
	if use := t.plan.Columns(building.UseField.Key()); len(use) > 0 && !t.plan.Has(building.AttachmentField.Key()) {
		s.Columns[building.AttachmentField] = use[0].Letters()
	}
	if t.carrierFromMeter() {
		s.Columns[building.CarrierField] = s.Columns[building.MeteredHeat]
	}
	return s
}

// carrierFromMeter reports whether the meter's column is all that tells the carrier.
func (t *table) carrierFromMeter() bool {
	if t.plan.Has(building.CarrierField.Key()) {
		return false
	}
	for _, c := range t.plan.Columns(building.MeteredHeat.Key()) {
		if c.Sense != "" && c.Sense != "second" {
			return true
		}
	}
	return false
}

func (t *table) hasSize() bool {
	return t.plan.Has(building.FloorArea.Key()) || t.plan.Has(building.Volume.Key()) || t.plan.Has(building.GrossVolume.Key())
}

// remarks says once per sheet what holds for all its rows.
func (t *table) remarks() {
	remark := func(sev finding.Severity, check string, f building.Field, c *header.Column, text, fix string) {
		x := finding.Finding{Severity: sev, Check: check, Field: f.Key(), Text: text, Fix: fix}
		if c != nil {
			x.Column = c.Letters()
		}
		t.found.add(x)
	}
	for _, pf := range t.plan.Fields {
		f, ok := building.FieldByKey(pf.Key)
		if !ok {
			continue
		}
		for _, c := range pf.Columns {
			switch {
			case c.Sense == "gross":
				remark(finding.Note, "gross-area", f, c, fmt.Sprintf("gross floor area %q is taken as heated floor area", c.Header), "give the heated area if it is known")
			case c.Sense == "renovation":
				remark(finding.Note, "renovation-year", f, c, fmt.Sprintf("year of renovation %q is taken as the year of the windows", c.Header), "say in a column file what was renewed: year_roof = "+c.Letters()+", or year_windows = none")
			case f == building.MeteredHeat && (c.Sense == "gas" || c.Sense == "oil"):
				remark(finding.Note, "fuel-as-heat", f, c, fmt.Sprintf("%q is taken as metered heat, cooking and hot water included", c.Header), "")
			}
			if c.Unit.Note != "" {
				remark(finding.Note, "unit-converted", f, c, c.Unit.Note, "")
			}
			if c.Unit.Name == "" && (f == building.FloorArea || f == building.Volume || f == building.MeteredHeat) {
				remark(finding.Note, "unit-assumed", f, c, fmt.Sprintf("%q names no unit and is taken as %s, but where a cell says otherwise", c.Header, f.Info().Unit), fmt.Sprintf("put the unit into the header, or %s [unit] = %s into a column file", pf.Key, c.Letters()))
			}
		}
	}
	if !t.hasSize() {
		t.noSize()
		return
	}
	if !t.plan.Has(building.UseField.Key()) {
		remark(finding.Warning, "no-use", building.UseField, nil, "no column says what the buildings are used for", "add one, or give use = constant:\"school\" in a column file")
	}
	if dated := slices.ContainsFunc(ages, func(f building.Field) bool { return t.plan.Has(f.Key()) }); !dated {
		remark(finding.Warning, "no-year", building.YearBuilt, nil, "no column says when the buildings were built or renewed", "add one if it is known")
	}
	if !t.plan.Has(building.VentilationField.Key()) {
		remark(finding.Warning, "no-ventilation", building.VentilationField, nil, "no column says how the buildings are ventilated; all count as unknown", "add a column, even where it says \"unknown\" for some")
	}
}

// ages are the fields of which one at least says how old a building is.
var ages = []building.Field{building.YearBuilt, building.YearWall, building.YearRoof, building.YearFloor, building.YearWindows}

// noSize says that rows without a size only add to what other sheets bring,
// and which columns could be one after all.
func (t *table) noSize() {
	f := finding.Finding{Severity: finding.Note, Check: "no-size", Field: building.FloorArea.Key(),
		Text: "no column is recognised as floor area or volume, so the rows only add to buildings whose size another sheet gives"}
	var names []string
	for i := range t.layout.Columns {
		c := &t.layout.Columns[i]
		if c.Key != "" || c.Index >= len(t.evidence) || c.Ignored() || cell.ForeignUnit(c.Header) {
			continue
		}
		if e := t.evidence[c.Index]; e.Filled > 1 && e.Numbers*10 >= (e.Filled-1)*8 {
			names = append(names, fmt.Sprintf("%s %q", c.Letters(), c.Header))
			f.Column += "," + c.Letters()
		}
	}
	if len(names) > 0 {
		f.Severity = finding.Warning
		f.Column = f.Column[1:]
		f.Text += "; it could be one of " + strings.Join(names, ", ")
		f.Fix = fmt.Sprintf("say which in a column file: floor_area = %s", strings.Split(f.Column, ",")[0])
	}
	t.found.add(f)
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
