package ingest

import (
	"fmt"
	"regexp"
	"slices"
	"strings"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/cell"
	"kelvinrow/ingest/check"
	"kelvinrow/ingest/finding"
	"kelvinrow/ingest/header"
	"kelvinrow/ingest/sheet"
	"kelvinrow/ingest/word"
)

// rowReader turns the rows of a sheet into records, one at a time.
type rowReader struct {
	*table
	fields    []fieldReader
	id        *header.Column
	dates     []dateColumn
	house     *header.Column
	constants []building.Value
	nextYear  int
	thisYear  int

	seen     []columnSeen
	first    map[string]occurrence // by id and date
	dated    map[string]sighting   // by id
	told     map[int]bool          // first rows of which is said that they come again
	upright  []sheet.Merge         // merges that run over rows, by first row
	begun    int                   // how many of them have begun
	open     []span                // those that the last row was in
	store    [building.NumFields]building.Value
	values   check.Values
	columnOf [building.NumFields]*header.Column
	record   building.Record
}

// dateColumn is a column that dates a row.
type dateColumn struct {
	*header.Column
	order cell.DayOrder
}

// rows hands the rows below the header on.
func (t *table) rows() error {
	r := &rowReader{table: t, nextYear: t.nextYear(), first: map[string]occurrence{}, dated: map[string]sighting{}, told: map[int]bool{}}
	r.thisYear = max(r.nextYear-1, 0)
	r.id = t.plan.Columns(header.IDKey)[0]
	for _, k := range []string{header.SurveyDateKey, header.DataDateKey, header.DataYearKey} {
		for _, c := range t.plan.Columns(k) {
			d := dateColumn{Column: c}
			if c.Index < len(t.evidence) && t.evidence[c.Index].MonthFirst > t.evidence[c.Index].DayFirst {
				d.order = cell.MonthFirst
			}
			r.dates = append(r.dates, d)
		}
	}
	if h := t.plan.Columns(header.HouseKey); len(h) > 0 {
		r.house = h[0]
	}
	for _, pf := range t.plan.Fields {
		if f, ok := building.FieldByKey(pf.Key); ok {
			r.fields = append(r.fields, t.fieldReader(f, pf.Columns))
		}
	}
	r.readConstants()
	take := r.row
	if t.form != nil {
		take = r.formRow
	}
	err := t.book.Rows(t.ctx, t.index, take)
	t.describe(r.seen)
	return err
}

func (r *rowReader) readConstants() {
	for _, e := range r.plan.Constants {
		f, ok := building.FieldByKey(e.Field)
		if !ok {
			continue
		}
		fr := r.fieldReader(f, nil)
		v, st, problem := fr.value(r.thisYear, nil, sheet.Cell{Kind: sheet.Text, Text: e.Constant}, e.Unit)
		if st != cell.OK {
			r.found.add(finding.Finding{Severity: finding.Warning, Check: "mapping", Field: e.Field, Raw: e.Constant,
				Text: fmt.Sprintf("line %d of %s: %s", e.Line, r.opt.Mapping.Called(), problem.Text), Fix: problem.Fix})
			continue
		}
		v.Field, v.Kind = f, r.opt.Kind
		r.constants = append(r.constants, v)
	}
}

// lookAt counts what the columns of a row hold.
func (r *rowReader) lookAt(in *sheet.Row) {
	for len(r.seen) < len(in.Cells) {
		r.seen = append(r.seen, columnSeen{})
	}
	for i, c := range in.Cells {
		if !c.Blank() {
			r.seen[i].look(c)
		}
	}
}

// row takes one row. It fails only when the sink does.
func (r *rowReader) row(in *sheet.Row) error {
	if in.Number < r.layout.DataFrom || in.Blank() {
		return nil
	}
	r.spread(in)
	id := idText(in.Cell(r.id.Index))
	if r.noBuilding(in, id) {
		return nil
	}
	r.out.Rows++
	r.lookAt(in)
	fault := func(check, column, field, raw, text, fix string) {
		r.found.add(finding.Finding{Severity: finding.Error, Check: check, Row: in.Number, Column: column, Field: field, Building: id, Raw: raw, Text: text, Fix: fix})
	}
	if id == "" || in.Cell(r.id.Index).Kind == sheet.Fault || len(id) > 200 {
		raw := in.Cell(r.id.Index).Text
		id = ""
		fault("missing-id", r.id.Letters(), header.IDKey, raw, "the row has no building id", "fill it in")
		r.out.SetAside++
		return nil
	}
	date, surveyed := r.date(in, id)
	keep, date := r.once(in, id, date, fault)
	if !keep {
		return nil
	}
	ok := r.read(in, id, surveyed)
	r.meterYear(in)
	had := r.rowSized()
	problems := check.Row(&r.values, r.nextYear)
	if had && !r.rowSized() {
		sizeless(problems)
	}
	for _, p := range problems {
		f := finding.Finding{Severity: p.Severity, Check: p.Check, Row: in.Number, Field: p.Field.Key(), Building: id, Text: p.Text, Fix: p.Fix}
		if c := r.columnOf[p.Field]; c != nil {
			f.Column, f.Raw = c.Letters(), in.Cell(c.Index).Text
		}
		r.found.add(f)
		ok = ok && p.Severity != finding.Error
	}
	if !ok {
		r.out.SetAside++
		return nil
	}
	r.out.Used++
	if date == "" {
		r.undated++
	}
	r.record = building.Record{Building: id, Sheet: r.building, Row: in.Number, SurveyDate: date, Values: r.record.Values[:0]}
	for f := range building.NumFields {
		if v := r.values[f]; v != nil {
			r.record.Values = append(r.record.Values, *v)
		}
	}
	return r.sink.Record(&r.record)
}

// read fills values from the cells; it reports false when the row is no use.
func (r *rowReader) read(in *sheet.Row, id string, surveyed bool) bool {
	r.values = check.Values{}
	r.columnOf = [building.NumFields]*header.Column{}
	var spoilt *finding.Finding // a size that could not be read
	for i := range r.fields {
		fr := &r.fields[i]
		for _, c := range fr.columns {
			raw := in.Cell(c.Index)
			v, st, problem := fr.value(r.thisYear, c, raw, "")
			if problem.Text != "" {
				f := finding.Finding{Severity: problem.Severity, Check: problem.Check, Row: in.Number, Column: c.Letters(),
					Field: fr.field.Key(), Building: id, Raw: raw.Text, Text: problem.Text, Fix: problem.Fix}
				switch {
				case problem.Group != "":
					r.found.group(problem.Group+"\x00"+c.Letters(), f)
				case st == cell.Bad && size(fr.field):
					spoilt = &f
				default:
					r.found.add(f)
				}
			}
			if st != cell.OK {
				continue
			}
			v.Field, v.Kind = fr.field, r.kind(fr.field, c, surveyed)
			r.set(v, c)
			if fr.field == building.MeteredHeat {
				r.meter(c)
			}
			break
		}
	}
	for _, v := range r.constants {
		r.set(v, nil)
	}
	r.inferAttachment(in)
	r.inferHeating(in)
	if r.house != nil && r.values[building.Street] != nil {
		if h := in.Cell(r.house.Index); !h.Blank() && !cell.IsAbsent(h.Text) {
			r.values[building.Street].Text += " " + idText(h)
		}
	}
	if spoilt != nil {
		none := r.form == nil && !r.rowSized() // a form's rows add to what is known
		if none {
			spoilt.Severity = finding.Error
			spoilt.Text += ", and the row has no other size"
		}
		r.found.add(*spoilt)
		return !none
	}
	return true
}

// inferHeating takes from "gas boiler" the carrier, and from "district heat" the
// heating system, where the row does not give them.
func (r *rowReader) inferHeating(in *sheet.Row) {
	from := func(given, wanted building.Field, tells func(string) (string, bool)) {
		if r.values[wanted] != nil {
			return
		}
		for _, c := range r.plan.Columns(given.Key()) {
			raw := in.Cell(c.Index)
			if raw.Blank() {
				continue
			}
			if w, ok := tells(raw.Text); ok {
				k := r.opt.Kind
				if v := r.values[given]; v != nil {
					k = v.Kind
				}
				r.set(building.Value{Field: wanted, Kind: k, Text: w}, c)
			}
			return
		}
		if v := r.values[given]; v != nil {
			if w, ok := tells(v.Text); ok { // set by a constant or by a meter
				r.set(building.Value{Field: wanted, Kind: v.Kind, Text: w}, r.columnOf[given])
			}
		}
	}
	from(building.HeatingSystem, building.CarrierField, word.Carrier)
	from(building.CarrierField, building.HeatingSystem, word.System)
}

// rowSized reports whether the row gives any size.
func (r *rowReader) rowSized() bool {
	return r.values[building.FloorArea] != nil || r.values[building.Volume] != nil || r.values[building.GrossVolume] != nil
}

// sizeless makes an error of the last of the problems that set a size aside: a
// row that brought a size and keeps none is no use.
func sizeless(problems []check.Problem) {
	for i := len(problems) - 1; i >= 0; i-- {
		p := &problems[i]
		if slices.ContainsFunc(p.Drop, size) {
			p.Severity = finding.Error
			p.Text += ", and the row has no other size"
			return
		}
	}
}

// reMiddle tells a terraced house between two others from one that may be anywhere.
var reMiddle = regexp.MustCompile(`\bmid|mittel|\brmh\b|tussen|mellan|mellem|midt|middle|entre`)

// inferAttachment takes from "end of terrace" what it says beside the use.
func (r *rowReader) inferAttachment(in *sheet.Row) {
	use := r.values[building.UseField]
	c := r.columnOf[building.UseField]
	if use == nil || c == nil || r.plan.Has(building.AttachmentField.Key()) {
		return
	}
	if i, ok := building.WordIndex(building.UseField, use.Text); !ok || !building.Use(i).IsHousing() {
		return
	}
	text := in.Cell(c.Index).Text
	w, ok := word.Find(building.AttachmentField, text)
	if !ok || w == building.TwoSidesShared.String() && !reMiddle.MatchString(cell.Fold(text)) {
		return
	}
	r.set(building.Value{Field: building.AttachmentField, Kind: use.Kind, Text: w}, c)
}

func size(f building.Field) bool {
	return f == building.FloorArea || f == building.Volume || f == building.GrossVolume
}

func (r *rowReader) set(v building.Value, c *header.Column) {
	r.store[v.Field] = v
	r.values[v.Field] = &r.store[v.Field]
	r.columnOf[v.Field] = c
}

// kind is how firm a value is: a meter's is metered, a surveyed row's is
// surveyed, and a header may say that its column was measured or certified.
func (r *rowReader) kind(f building.Field, c *header.Column, surveyed bool) building.Kind {
	if f.Info().Group == building.Meter {
		return building.Metered
	}
	k := r.opt.Kind
	if surveyed {
		k = building.Surveyed
	}
	return max(k, c.Kind)
}

// meter adds what the column of a meter reading tells beside the reading.
func (r *rowReader) meter(c *header.Column) {
	if isCarrier(c.Sense) && !r.plan.Has(building.CarrierField.Key()) {
		r.set(building.Value{Field: building.CarrierField, Kind: r.opt.Kind, Text: c.Sense}, c)
	}
	if c.Year > 0 && !r.plan.Has(building.MeteredYear.Key()) {
		y := float64(c.Year)
		r.set(building.Value{Field: building.MeteredYear, Kind: building.Metered, Number: y, Low: y, High: y}, c)
	}
}

// meterYear gives a reading the year of the row's data where no column names its own.
func (r *rowReader) meterYear(in *sheet.Row) {
	cols := r.plan.Columns(header.DataYearKey)
	if len(cols) == 0 || r.values[building.MeteredHeat] == nil || r.values[building.MeteredYear] != nil {
		return
	}
	if span, st := cell.ParseYear(in.Cell(cols[0].Index).Text, r.thisYear); st == cell.OK {
		r.set(building.Value{Field: building.MeteredYear, Kind: building.Metered, Number: (span.Low + span.High) / 2, Low: span.Low, High: span.High}, cols[0])
	}
}

// date is the date of a row and whether it is that of a survey.
func (r *rowReader) date(in *sheet.Row, id string) (date string, surveyed bool) {
	for _, d := range r.dates {
		c := in.Cell(d.Index)
		if c.Blank() {
			continue
		}
		text, st := cellDate(c, d.order)
		if st == cell.Absent {
			continue
		}
		if st == cell.Bad || r.nextYear > 0 && len(text) >= 4 && text[:4] > fmt.Sprint(r.nextYear) {
			r.found.add(finding.Finding{Severity: finding.Warning, Check: "date", Row: in.Number, Column: d.Letters(), Field: d.Key, Building: id, Raw: c.Text,
				Text: fmt.Sprintf("%q is no date that can be", c.Text), Fix: "write it as 2026-03-01"})
			continue
		}
		return text, d.Key == header.SurveyDateKey
	}
	return "", false
}

func cellDate(c sheet.Cell, order cell.DayOrder) (string, cell.Status) {
	switch c.Kind {
	case sheet.Date:
		return c.Text, cell.OK
	case sheet.Number:
		if c.Number > 2200 && c.Number < 80000 { // a date without its format
			if d, ok := sheet.SerialDate(c.Number, false); ok {
				return d, cell.OK
			}
		}
	case sheet.Fault, sheet.Bool:
		return "", cell.Bad
	}
	return cell.ParseDate(strings.TrimSuffix(c.Text, ".0"), order)
}

// idText is an id as text: trimmed, inner blanks single, no ".0" of a number.
func idText(c sheet.Cell) string {
	s := strings.Join(strings.Fields(c.Text), " ")
	if t, ok := strings.CutSuffix(s, ".0"); ok && t != "" && strings.Trim(t, "0123456789") == "" {
		s = t
	}
	if cell.IsAbsent(s) {
		return ""
	}
	return s
}

var totals = strings.Fields("total totals totale totaal totalt totalsumme sum summe summa somme suma gesamt gesamtsumme insgesamt subtotal zwischensumme average averages durchschnitt mittelwert moyenne gemiddelde medel gjennomsnitt media")

// headerAgain reports whether a row repeats the header, as printed lists do.
func (r *rowReader) headerAgain(in *sheet.Row, filled int) bool {
	same := 0
	for j := range r.layout.Columns {
		k := &r.layout.Columns[j]
		if c := in.Cell(k.Index); !c.Blank() && k.Header == strings.TrimSpace(c.Text) {
			same++
		} else if !c.Blank() {
			return false
		}
	}
	return same > 1 && same == filled
}

// textsBeside reports whether a row has text beside its first cell.
func textsBeside(in *sheet.Row) bool {
	first := true
	for _, c := range in.Cells {
		if c.Blank() {
			continue
		}
		if first {
			first = false
			continue
		}
		if _, st := cell.ParseNumber(c.Text, cell.Undecided); st == cell.Bad {
			return true
		}
	}
	return false
}

// noBuilding reports rows that are none of data: totals, a repeated header,
// remarks below the table.
func (r *rowReader) noBuilding(in *sheet.Row, id string) bool {
	filled, first := 0, ""
	for _, c := range in.Cells {
		if c.Blank() {
			continue
		}
		filled++
		if first == "" {
			first = c.Text
		}
	}
	if r.headerAgain(in, filled) {
		return true
	}
	f := cell.Fold(first)
	word, _, _ := strings.Cut(f, " ")
	if strings.HasPrefix(f, "i alt") {
		word = "total"
	}
	for _, w := range totals {
		// "Total House" with a name beside it is a building.
		if word == w && (id == "" || cell.Fold(id) == f) && (f == w || !textsBeside(in)) {
			r.found.add(finding.Finding{Severity: finding.Note, Check: "total-row", Row: in.Number, Raw: first, Text: fmt.Sprintf("the row %q is a total and no building", first)})
			return true
		}
	}
	if filled == 1 && len(r.layout.Columns) > 2 && (id == "" || strings.Contains(id, " ") && len(id) > 25) {
		r.found.group("remark", finding.Finding{Severity: finding.Note, Check: "remark-row", Row: in.Number, Raw: first, Text: "the row holds a remark and no building"})
		return true
	}
	return false
}
