package ingest

import (
	"context"
	"errors"
	"fmt"
	"path/filepath"
	"regexp"
	"strings"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/cell"
	"kelvinrow/ingest/finding"
	"kelvinrow/ingest/sheet"
)

// nothing is the sink of Inspect.
type nothing struct{}

func (nothing) Sheet(*building.Sheet) error   { return nil }
func (nothing) Record(*building.Record) error { return nil }

// Inspect reads a file with all recognition and checks, and keeps nothing.
func Inspect(ctx context.Context, path string, opt Options) (*Report, error) {
	return ReadFile(ctx, path, opt, nothing{})
}

// ReadFile reads the spreadsheet at path into sink. The error is for what keeps
// the run from going on: ctx done, or the sink's own error, wrapped.
func ReadFile(ctx context.Context, path string, opt Options, sink Sink) (*Report, error) {
	if opt.Kind == building.Default {
		opt.Kind = building.Registered
	}
	r := &Report{File: opt.Name}
	if r.File == "" {
		r.File = filepath.Base(path)
	}
	fault := func(err error) (*Report, error) {
		if e := ctx.Err(); e != nil {
			return nil, fmt.Errorf("read %s: %w", path, e)
		}
		f := finding.Finding{Severity: finding.Error, Check: "unreadable", File: r.File, Text: err.Error(), Fix: "check that the file is there and may be read"}
		var bad *sheet.BadFile
		if errors.As(err, &bad) {
			f.Check, f.Text, f.Fix = bad.Check, bad.Text, bad.Fix
		}
		r.Findings = append(r.Findings, f)
		return r, nil
	}
	content, err := sheet.ReadContent(ctx, path)
	if err != nil {
		return fault(err)
	}
	r.SHA256, r.Bytes = content.SHA256, content.Bytes
	book, err := sheet.Open(path, content)
	if err != nil {
		return fault(err)
	}
	defer book.Close()
	if own(path, book) {
		r.Own = true
		r.Findings = append(r.Findings, finding.Finding{Severity: finding.Note, Check: finding.OwnWorkbook, File: r.File,
			Text: "the file is a workbook that this program wrote, of results or of assumptions, and is not read: defaults would come back as if they were known", Fix: "give the spreadsheets that it was made from"})
		return r, nil
	}
	form, err := findForm(ctx, book)
	if err != nil {
		return fault(err)
	}
	if form != nil {
		r.Form = true
		opt.Kind, opt.Mapping = building.Surveyed, nil
		if !r.formBelongs(form, opt.Portfolio) {
			return r, nil
		}
	}
	r.Date, r.dateFrom = fileDate(filepath.Base(path), book.Modified(), content.Changed)
	read := false
	for i, info := range book.Sheets() {
		t := &table{ctx: ctx, book: book, index: i, info: info, opt: opt, report: r, sink: sink, found: newCollector(r.File, info.Name), form: form}
		t.out = SheetReport{Name: info.Name, Hidden: info.Hidden}
		err := t.read()
		r.Findings = append(r.Findings, t.found.all()...)
		r.Sheets = append(r.Sheets, t.out)
		if err != nil {
			return nil, fmt.Errorf("read %s: sheet %q: %w", path, info.Name, err)
		}
		r.Rows += t.out.Rows
		r.Used += t.out.Used
		r.SetAside += t.out.SetAside
		read = read || t.out.Skipped == ""
	}
	if !read && !r.Own && !anyError(r.Findings) {
		f := finding.Finding{Severity: finding.Error, Check: "no-table", File: r.File,
			Text: "no table of buildings is recognised in the file", Fix: "give the table a header row with known names, or say which column is what in a column file"}
		if r.Form {
			f.Text, f.Fix = "the survey form has lost its table, or the headers of it", "copy what was filled in into a new form"
		}
		r.Findings = append(r.Findings, f)
	}
	finding.Sort(r.Findings)
	return r, nil
}

func anyError(fs []finding.Finding) bool {
	for _, f := range fs {
		if f.Severity == finding.Error {
			return true
		}
	}
	return false
}

var (
	reNameDate = regexp.MustCompile(`(?:^|\D)((?:19|20)\d\d)[-_.]?([01]\d)[-_.]?([0-3]\d)(?:\D|$)`)
	reTextDate = regexp.MustCompile(`\d{4}-\d{1,2}-\d{1,2}|\d{1,2}\.\s?\d{1,2}\.\s?\d{4}|\d{1,2}/\d{1,2}/\d{4}|\d{1,2}\.? \pL+ \d{4}`)
	asOfWords  = regexp.MustCompile(`\b(stand|as of|as at|as on|date|datum|stichtag|peildatum|status|etat|au|le|fecha|dato|per|pr|a|situation)\b`)
)

// fileDate is the date of a file's data: in its name, in its properties, or of
// the file itself. from says which of the three.
func fileDate(name, modified, changed string) (date, from string) {
	if m := reNameDate.FindStringSubmatch(name); m != nil {
		if d, st := cell.ParseDate(m[1]+"-"+m[2]+"-"+m[3], cell.DayFirst); st == cell.OK {
			return d, "in the file's name"
		}
	}
	// Some programs leave this date in every file they write.
	const unset = "2006-09-16"
	if d, st := cell.ParseDate(modified, cell.DayFirst); st == cell.OK && d != unset {
		return d, "on which the file says it was last saved"
	}
	return changed, "on which the file was last changed"
}

// titleDate finds "Stand: 1.3.2026" and the like in the rows above the header.
func titleDate(rows []headRow, below int) string {
	for _, r := range rows {
		if r.number >= below {
			break
		}
		var all []string
		for _, c := range r.cells {
			all = append(all, c.Text)
		}
		text := strings.Join(all, " ")
		if !asOfWords.MatchString(cell.Fold(text)) {
			continue
		}
		for _, c := range r.cells {
			if c.Kind == sheet.Date {
				return c.Text
			}
		}
		if m := reTextDate.FindString(text); m != "" {
			if d, st := cell.ParseDate(strings.ReplaceAll(m, ". ", "."), cell.DayFirst); st == cell.OK {
				return d
			}
		}
	}
	return ""
}
