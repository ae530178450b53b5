package ingest

import (
	"fmt"
	"math"
	"regexp"
	"strconv"
	"strings"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/cell"
	"kelvinrow/ingest/check"
	"kelvinrow/ingest/finding"
	"kelvinrow/ingest/header"
	"kelvinrow/ingest/sheet"
	"kelvinrow/ingest/word"
)

// fieldReader turns the cells of a field's columns into values.
type fieldReader struct {
	field   building.Field
	info    building.Info
	columns []*header.Column
	decimal []cell.Decimal // by column
	decided []bool         // by its own cells, so that nothing need be said
	small   bool           // "1.234" is more likely a decimal than thousands
	serial  bool           // its years are day serials without their format
	own     word.Own
}

// problem is what a cell's text has against it.
type problem struct {
	Severity finding.Severity
	Check    string
	Group    string // not empty: said once for all rows alike
	Text     string
	Fix      string
}

func (t *table) fieldReader(f building.Field, columns []*header.Column) fieldReader {
	fr := fieldReader{field: f, info: f.Info(), columns: columns, own: t.opt.Words}
	switch f {
	case building.WallU, building.RoofU, building.FloorU, building.WindowU, building.N50, building.Q50, building.HeatRecovery,
		building.Efficiency, building.FanPower, building.StoreyHeight, building.Storeys:
		fr.small = true
	}
	var all cell.Evidence
	for _, e := range t.evidence {
		all.Point += e.Decimal.Point
		all.Comma += e.Decimal.Comma
	}
	for _, c := range columns {
		var e cell.Evidence
		if c.Index < len(t.evidence) {
			e = t.evidence[c.Index].Decimal
			fr.serial = fr.serial || t.evidence[c.Index].Serials > t.evidence[c.Index].Years
		}
		d := e.Decimal()
		fr.decided = append(fr.decided, d != cell.Undecided && (e.Point == 0 || e.Comma == 0))
		// Other columns tell about this one, but not that a wall has a U-value of 1234.
		if d == cell.Undecided && !fr.small {
			d = all.Decimal()
		}
		if d == cell.Undecided && !fr.small && t.book.Delimiter() == ';' {
			d = cell.Comma // a comma in numbers is why the separator is another
		}
		fr.decimal = append(fr.decimal, d)
	}
	return fr
}

// value reads one cell. unit is that of a constant.
func (fr *fieldReader) value(thisYear int, c *header.Column, in sheet.Cell, unit string) (building.Value, cell.Status, problem) {
	if in.Blank() {
		return building.Value{}, cell.Absent, problem{}
	}
	if in.Kind == sheet.Fault {
		return building.Value{}, cell.Bad, problem{Severity: finding.Warning, Check: "formula-error",
			Text: fmt.Sprintf("the formula for %s gives %s", fr.info.Label, in.Text), Fix: "mend the formula or write the value"}
	}
	switch fr.info.Type {
	case building.Number:
		return fr.number(c, in, unit)
	case building.Year:
		return fr.year(thisYear, in)
	case building.Word:
		return fr.word(c, in)
	case building.YesNo:
		return fr.yesNo(in)
	}
	text := strings.Join(strings.Fields(in.Text), " ")
	if cell.IsAbsent(text) {
		return building.Value{}, cell.Absent, problem{}
	}
	if t, ok := strings.CutSuffix(text, ".0"); ok && fr.field == building.Postcode && strings.Trim(t, "0123456789") == "" {
		text = t
	}
	return building.Value{Text: text}, cell.OK, problem{}
}

func (fr *fieldReader) number(c *header.Column, in sheet.Cell, unit string) (building.Value, cell.Status, problem) {
	var n cell.Number
	var say problem
	switch in.Kind {
	case sheet.Number:
		n.Value = in.Number
		if in.Percent && fr.info.Unit == "share" {
			n.Unit, _ = cell.UnitNamed("share") // 0.85 that is shown as 85 %
		}
	case sheet.Text:
		var st cell.Status
		n, st, say = fr.text(c, in.Text)
		if st == cell.Absent {
			return building.Value{}, st, problem{}
		}
		if st == cell.Bad && fr.field == building.Storeys {
			return fr.storeys(in.Text)
		}
		if st == cell.Bad {
			return building.Value{}, st, problem{Severity: finding.Warning, Check: "not-a-number",
				Text: fmt.Sprintf("%q is no number for %s", clip(in.Text), fr.info.Label), Fix: "write a number, or leave the cell empty"}
		}
	default:
		return building.Value{}, cell.Bad, problem{Severity: finding.Warning, Check: "not-a-number",
			Text: fmt.Sprintf("a date or truth value, %s, stands where %s should", in.Text, fr.info.Label), Fix: "write a number, and format the cell as one"}
	}
	v := n.Value
	switch u := fr.unit(c, n.Unit, unit); {
	case n.Unit.Name != "" && u.Name == "":
		return building.Value{}, cell.Bad, problem{Severity: finding.Warning, Check: "wrong-unit",
			Text: fmt.Sprintf("%q has a unit that %s cannot have", clip(in.Text), fr.info.Label), Fix: "give it in " + fr.info.Unit}
	case u.Name == "%" && n.Unit.Name == "" && v > 0 && v <= 1.2:
		// No one has a heat recovery of 0.85 %.
		say = problem{Severity: finding.Note, Check: "share-for-percent", Group: "share-for-percent",
			Text: fmt.Sprintf("%s %s in a column of percent is taken as a share of one", fr.info.Label, clip(in.Text)), Fix: "write it as percent, as the header says"}
	case u.Name != "":
		v *= u.Factor
	case fr.info.Unit == "share" && (fr.field == building.HeatRecovery && v > 1.5 || v > 8):
		v /= 100 // a share of more than one was meant in percent
	}
	if v == 0 && check.ZeroIsUnknown(fr.field) {
		sev, name := finding.Note, "zero-unknown"
		if size(fr.field) {
			sev, name = finding.Warning, "zero-area"
		}
		return building.Value{}, cell.Absent, problem{Severity: sev, Check: name, Group: name,
			Text: fmt.Sprintf("%s 0 is taken as not known", fr.info.Label), Fix: "leave the cell empty, or fill in the value"}
	}
	return building.Value{Number: v}, cell.OK, say
}

// storeys reads a number of storeys that is written as planners do.
func (fr *fieldReader) storeys(text string) (building.Value, cell.Status, problem) {
	n, st := cell.ParseStoreys(text)
	if st != cell.OK {
		return building.Value{}, cell.Bad, problem{Severity: finding.Warning, Check: "not-a-number",
			Text: fmt.Sprintf("%q is no number for %s", clip(text), fr.info.Label), Fix: "write a number, or leave the cell empty"}
	}
	v, count := building.Value{Number: n.Count}, strconv.FormatFloat(n.Count, 'f', -1, 64)
	switch {
	case n.Range:
		return v, st, problem{Severity: finding.Note, Check: "storeys-range", Group: "storeys-range", Text: fmt.Sprintf("%q is taken as %s storeys", clip(text), count)}
	case n.Attic:
		return v, st, problem{Severity: finding.Note, Check: "storeys-attic", Group: "storeys-attic", Text: fmt.Sprintf("%q is taken as %s storeys: the attic is not counted", clip(text), count),
			Fix: "count it where it is heated, and give the roof type as heated attic"}
	}
	return v, st, problem{}
}

// unit is the unit of a value: the cell's own, else the column's; none when
// the cell's does not fit.
func (fr *fieldReader) unit(c *header.Column, own cell.Unit, constant string) cell.Unit {
	if own.Name != "" {
		if fr.field == building.MeteredHeat && own.Name == "m3" {
			own, _ = cell.UnitNamed("m3 gas")
		}
		if own.Fits(fr.info.Unit) {
			return own
		}
		return cell.Unit{}
	}
	if c != nil {
		return c.Unit
	}
	if u, ok := cell.ParseUnit(constant); ok && u.Fits(fr.info.Unit) {
		return u
	}
	return cell.Unit{}
}

// text reads a written number with the decimal sign of its column.
func (fr *fieldReader) text(c *header.Column, s string) (cell.Number, cell.Status, problem) {
	d, decided := cell.Undecided, false // a constant is of no column
	for i := range fr.columns {
		if fr.columns[i] == c {
			d, decided = fr.decimal[i], fr.decided[i]
		}
	}
	n, st := cell.ParseNumber(s, d)
	if st != cell.OK || !n.Ambiguous || decided {
		return n, st, problem{}
	}
	if d == cell.Undecided && !fr.small {
		d = cell.Point
		if strings.Contains(s, ".") {
			d = cell.Comma
		}
		n, st = cell.ParseNumber(s, d)
	}
	return n, st, problem{Severity: finding.Note, Check: "ambiguous-number", Group: "ambiguous-number",
		Text: fmt.Sprintf("%q could be read in two ways and is taken as %s", clip(s), strconv.FormatFloat(n.Value, 'f', -1, 64)), Fix: "write it without a thousands sign"}
}

func (fr *fieldReader) year(thisYear int, in sheet.Cell) (building.Value, cell.Status, problem) {
	if in.Kind == sheet.Date {
		y, _ := strconv.ParseFloat(in.Text[:4], 64)
		say := problem{}
		// 1965 typed into a cell for dates is kept as the 1965th day, in May 1905.
		if n := in.Number; n >= 1400 && n <= float64(max(thisYear, 2000))+1 && n == math.Trunc(n) && !strings.HasSuffix(in.Text, "-01-01") {
			y = n
			say = problem{Severity: finding.Note, Check: "year-as-date", Group: "year-as-date",
				Text: fmt.Sprintf("the date %s is taken for the year %.0f, typed into a cell formatted for dates", in.Text, n), Fix: "format the column as numbers"}
		}
		return building.Value{Number: y, Low: y, High: y}, cell.OK, say
	}
	if n, err := strconv.ParseFloat(strings.TrimSpace(in.Text), 64); err == nil && fr.serial && isSerial(n) {
		if d, ok := sheet.SerialDate(n, false); ok {
			y, _ := strconv.ParseFloat(d[:4], 64)
			return building.Value{Number: y, Low: y, High: y}, cell.OK, problem{Severity: finding.Note, Check: "serial-year", Group: "serial-year",
				Text: fmt.Sprintf("%s is taken for the date %s without its format", in.Text, d), Fix: "format the column as dates, or write years"}
		}
	}
	span, st := cell.ParseYear(in.Text, thisYear)
	if st == cell.Absent && strings.Trim(in.Text, "0. ") == "" {
		return building.Value{}, st, problem{Severity: finding.Note, Check: "zero-year", Group: "zero-year",
			Text: fmt.Sprintf("%s 0 is taken as not known", fr.info.Label)}
	}
	if st == cell.Bad {
		return building.Value{}, st, problem{Severity: finding.Warning, Check: "not-a-year",
			Text: fmt.Sprintf("%q is no year for %s", clip(in.Text), fr.info.Label), Fix: "write 1965, 1960-69, before 1919 or the like"}
	}
	return building.Value{Number: (span.Low + span.High) / 2, Low: span.Low, High: span.High}, st, problem{}
}

var reCellar = regexp.MustCompile(`^(cellar|basement|keller|unterkeller\w*|unterkellerung|cave|sous sol|kelder|kallare|kalder|kjeller|sotano)\b`)

// isSerial reports whether n can be a day from 1927 to 2064; lower numbers are
// too near to years.
func isSerial(n float64) bool { return n >= 10000 && n <= 60000 && n == math.Trunc(n) }

func (fr *fieldReader) word(c *header.Column, in sheet.Cell) (building.Value, cell.Status, problem) {
	text := in.Text
	if fr.field == building.AttachmentField && c != nil && strings.Contains(cell.Fold(c.Header), "fre") {
		// "free sides: 3" counts the other way round.
		if n, err := strconv.Atoi(strings.TrimSpace(text)); err == nil && n >= 2 && n <= 4 {
			text = strconv.Itoa(4 - n)
		}
	}
	if fr.field == building.FloorType && c != nil && reCellar.MatchString(cell.Fold(c.Header)) {
		// "Cellar: yes" names the floor as well as "cellar" does.
		if yes, st := cell.ParseYesNo(text); st == cell.OK && yes {
			text = "cellar"
		} else if st == cell.OK {
			text = "no cellar"
		}
	}
	w, ok := fr.own.Find(fr.field, text)
	switch {
	case ok:
	case fr.field == building.CarrierField:
		w, ok = word.Carrier(text)
	case fr.field == building.HeatingSystem:
		if carrier, known := word.Carrier(text); known {
			return building.Value{}, cell.Absent, problem{Severity: finding.Note, Check: "heating-carrier", Group: "heating-carrier\x00" + cell.Fold(text),
				Text: fmt.Sprintf("%q names no heating system and is taken for the energy carrier, %s", clip(text), carrier)}
		}
	}
	if ok && w != building.VentilationWords[building.VentilationUnknown] {
		return building.Value{Text: w}, cell.OK, problem{}
	}
	if ok || cell.IsAbsent(text) {
		return building.Value{}, cell.Absent, problem{}
	}
	p := problem{Severity: finding.Warning, Check: "unknown-word", Group: "unknown-word\x00" + cell.Fold(text),
		Text: fmt.Sprintf("%q is not known as a word for %s", clip(text), strings.ToLower(fr.info.Label)),
		Fix:  "use one of: " + strings.Join(building.Words(fr.field), ", ")}
	if near := word.Nearest(fr.field, text); near != "" {
		p.Text += fmt.Sprintf("; the nearest is %q", near)
	}
	return building.Value{}, cell.Bad, p
}

func (fr *fieldReader) yesNo(in sheet.Cell) (building.Value, cell.Status, problem) {
	if in.Kind == sheet.Bool || in.Kind == sheet.Number && (in.Number == 0 || in.Number == 1) {
		return building.Value{Number: in.Number}, cell.OK, problem{}
	}
	y, st := cell.ParseYesNo(in.Text)
	if st == cell.Bad {
		return building.Value{}, st, problem{Severity: finding.Warning, Check: "not-yes-no",
			Text: fmt.Sprintf("%q is neither yes nor no for %s", clip(in.Text), fr.info.Label), Fix: "write yes or no"}
	}
	v := building.Value{}
	if y {
		v.Number = 1
	}
	return v, st, problem{}
}

func clip(s string) string {
	s = strings.Join(strings.Fields(s), " ")
	if r := []rune(s); len(r) > 60 {
		return string(r[:59]) + "…"
	}
	return s
}
