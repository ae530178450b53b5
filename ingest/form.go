package ingest

import (
	"archive/zip"
	"context"
	"fmt"
	"io"
	"regexp"
	"strings"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/cell"
	"kelvinrow/ingest/finding"
	"kelvinrow/ingest/header"
	"kelvinrow/ingest/sheet"
)

// What a survey form and its reader agree on. The form's own sheet shows the
// buildings; the hidden sheet FormRecord keeps what was written into it, by
// building, so that only what a surveyor changed or added comes back.
//
// FormRecord holds: in row 1 the mark, the version, the portfolio, the date and
// the number of the form; in rows 2 to 4 the key, the header and the unit of each
// column; from FormFirst on the buildings.
const (
	FormSheet   = "Survey"
	FormRecord  = "Form record"
	FormMark    = "kelvinrow survey form"
	FormVersion = "1"
	FormFirst   = 5

	// FormDateLabel and FormSurveyorLabel stand above the table, each with a
	// cell beside it that counts for rows without their own.
	FormDateLabel     = "Survey date where a row has none:"
	FormSurveyorLabel = "Surveyor where a row has none:"

	// FormRemarks is the key of the column for remarks, which are passed on.
	FormRemarks = "remarks"
)

// FormTitle is the first line of a form; a sheet that begins so without the rest
// of its workbook is known by it.
func FormTitle(number, portfolio string) string {
	return fmt.Sprintf("Survey form %s of portfolio %s", number, portfolio)
}

var reFormTitle = regexp.MustCompile(`^Survey form [0-9a-f]{8} of portfolio `)

// form is a survey form as it was written.
type form struct {
	portfolio, date, number string

	columns []formColumn
	rows    map[string][]sheet.Cell // by id, parallel to columns

	// read from the form's own sheet
	surveyed, surveyor string // for rows without their own
	remarks            int    // column, -1 without one
}

type formColumn struct{ key, header, unit string }

// IsForm reports whether the file is a survey form of this program, by a look at
// its list of sheets.
func IsForm(path string) bool {
	z, err := zip.OpenReader(path)
	if err != nil {
		return false
	}
	defer z.Close()
	f, err := z.Open("xl/workbook.xml")
	if err != nil {
		return false
	}
	defer f.Close()
	list, err := io.ReadAll(io.LimitReader(f, 1<<20))
	return err == nil && strings.Contains(string(list), `name="`+FormRecord+`"`)
}

// findForm reads what a form was when it was written; nil where the book is none.
func findForm(ctx context.Context, book sheet.Book) (*form, error) {
	for i, info := range book.Sheets() {
		if info.Name != FormRecord || info.Other != "" {
			continue
		}
		f := &form{rows: map[string][]sheet.Cell{}, remarks: -1}
		ours, version, id := false, "", -1
		_, err := book.Verify(ctx, i, func(r *sheet.Row) {
			switch r.Number {
			case 1:
				ours = r.Cell(0).Text == FormMark
				version, f.portfolio, f.date, f.number = strings.TrimSuffix(r.Cell(1).Text, ".0"), r.Cell(2).Text, r.Cell(3).Text, r.Cell(4).Text
			case 2:
				for i, c := range r.Cells {
					f.columns = append(f.columns, formColumn{key: c.Text})
					if c.Text == header.IDKey {
						id = i
					}
				}
			case 3, 4:
				for i := range f.columns {
					if r.Number == 3 {
						f.columns[i].header = plainHeader(r.Cell(i).Text)
					} else {
						f.columns[i].unit = r.Cell(i).Text
					}
				}
			default:
				if key := idText(r.Cell(id)); key != "" && r.Number >= FormFirst {
					f.rows[key] = append([]sheet.Cell(nil), r.Cells...)
				}
			}
		})
		switch {
		case err != nil:
			return nil, err
		case !ours:
			continue
		case version != FormVersion:
			return nil, &sheet.BadFile{Check: "form-version", Text: fmt.Sprintf("the survey form is of version %q, and this program reads version %s", version, FormVersion), Fix: "load it with the program that wrote it"}
		case id < 0 || len(f.rows) == 0:
			return nil, &sheet.BadFile{Check: "form-damaged", Text: "the survey form has lost the record of what was written into it", Fix: "copy what was filled in into a new form"}
		}
		return f, nil
	}
	return nil, nil
}

// formBelongs refuses a form of another portfolio: clients must not be mixed.
func (r *Report) formBelongs(f *form, portfolio string) bool {
	if portfolio == "" || portfolio == f.portfolio {
		return true
	}
	r.Findings = append(r.Findings, finding.Finding{Severity: finding.Error, Check: "form-portfolio", File: r.File,
		Text: fmt.Sprintf("the survey form was written for portfolio %q and is not taken into %q", f.portfolio, portfolio), Fix: fmt.Sprintf("load it with --portfolio %q", f.portfolio)})
	return false
}

// formAlone reports whether the sheet is a survey form without the record of
// what was written into it: known values could not be told from found ones.
func (t *table) formAlone() bool {
	for _, r := range t.head {
		for _, c := range r.cells {
			if reFormTitle.MatchString(strings.TrimSpace(c.Text)) {
				t.out.Skipped = "it is a survey form without the rest of its workbook"
				t.found.add(finding.Finding{Severity: finding.Error, Check: "form-alone", Row: r.number,
					Text: "the sheet is a survey form without the rest of its workbook, so that what was known before cannot be told from what was found", Fix: "give the whole workbook, as it was sent out and filled in"})
				return true
			}
		}
	}
	return false
}

// readForm reads one sheet of a survey form.
func (t *table) readForm() error {
	if t.info.Hidden {
		t.out.Skipped = "it belongs to the survey form"
		return nil
	}
	if err := t.survey(); err != nil {
		return t.damaged(err)
	}
	if !t.formLayout() {
		t.out.Skipped = "it holds no rows of the survey form"
		return nil
	}
	t.out.HeaderRow, t.out.DataFrom = t.layout.Row, t.layout.DataFrom
	t.formDefaults()
	t.building = t.sheet()
	t.building.FileDate = t.report.Date
	if err := t.sink.Sheet(t.building); err != nil {
		return err
	}
	if err := t.rows(); err != nil {
		return err
	}
	if t.out.Rows == 0 {
		t.found.add(finding.Finding{Severity: finding.Warning, Check: "form-empty", Text: "no cell of the survey form is filled in or changed", Fix: "check whether this is the filled copy"})
	}
	return nil
}

// plainHeader is a header without what saving may do to its blanks.
func plainHeader(s string) string { return strings.Join(strings.Fields(s), " ") }

// formLayout finds the form's header row and its columns by their headers.
func (t *table) formLayout() bool {
	for _, head := range t.head {
		at := map[string]int{}
		for i, c := range head.cells {
			if _, twice := at[plainHeader(c.Text)]; !twice {
				at[plainHeader(c.Text)] = i
			}
		}
		var columns []header.Column
		id := false
		var missing []string
		for _, k := range t.form.columns {
			i, ok := at[k.header]
			if !ok {
				missing = append(missing, fmt.Sprintf("%q", k.header))
				continue
			}
			if k.key == FormRemarks {
				t.form.remarks = i
				continue
			}
			c := header.Column{Index: i, Header: k.header, Key: k.key, How: "a column of the survey form"}
			c.Unit, _ = cell.UnitNamed(k.unit)
			columns = append(columns, c)
			id = id || k.key == header.IDKey
		}
		if !id || len(columns) < 2 {
			continue
		}
		t.layout = header.Table{Row: head.number, DataFrom: head.number + 1, Columns: columns, Known: len(columns)}
		t.plan = &header.Plan{}
		for i := range t.layout.Columns {
			c := &t.layout.Columns[i]
			t.plan.Fields = append(t.plan.Fields, header.PlanField{Key: c.Key, Columns: []*header.Column{c}})
		}
		if len(missing) > 0 {
			t.found.add(finding.Finding{Severity: finding.Warning, Check: "form-column", Row: head.number,
				Text: "the survey form has lost the columns " + strings.Join(missing, ", "), Fix: "if something was filled in there, copy it into a new form"})
		}
		return true
	}
	return false
}

// formDefaults reads the date and the surveyor above the table.
func (t *table) formDefaults() {
	for _, r := range t.head {
		if r.number >= t.layout.Row {
			return
		}
		for i, c := range r.cells {
			label := plainHeader(c.Text)
			if label != FormDateLabel && label != FormSurveyorLabel {
				continue
			}
			beside, at := beside(r.cells[i+1:])
			switch {
			case beside.Blank():
			case label == FormSurveyorLabel:
				t.form.surveyor = plainHeader(beside.Text)
			default:
				date, st := cellDate(beside, cell.DayFirst)
				if st == cell.OK {
					t.form.surveyed = date
				} else if st == cell.Bad {
					t.found.add(finding.Finding{Severity: finding.Warning, Check: "date", Row: r.number, Column: sheet.ColumnLetters(i + 1 + at), Field: header.SurveyDateKey, Raw: beside.Text,
						Text: fmt.Sprintf("%q is no date that can be", clip(beside.Text)), Fix: "write it as 2026-03-01"})
				}
			}
		}
	}
}

// beside is the first filled cell beside a label, none where another label comes first.
func beside(cells []sheet.Cell) (sheet.Cell, int) {
	for i, c := range cells {
		if label := plainHeader(c.Text); label == FormDateLabel || label == FormSurveyorLabel {
			break
		}
		if !c.Blank() {
			return c, i
		}
	}
	return sheet.Cell{}, 0
}

// formField reports whether a column's cells make a row count.
func formField(f building.Field) bool { return f != building.Surveyor }
