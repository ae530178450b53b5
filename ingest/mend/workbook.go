package mend

import (
	"context"
	"errors"
	"os"
	"strings"

	"github.com/xuri/excelize/v2"

	"kelvinrow/ingest"
	"kelvinrow/ingest/finding"
	"kelvinrow/ingest/sheet"
)

// writer builds the workbook of rows to fix.
type writer struct {
	f                    *excelize.File
	head, faulty, doubt  int // styles, each made once
	faultyDate, dateOnly int
	percent, faultyShare int

	// of the sheet being written
	comments int
	last     int // column for reasons, where there are too many for comments
}

func (w *writer) styles() error {
	var errs []error
	style := func(s *excelize.Style) int {
		id, err := w.f.NewStyle(s)
		errs = append(errs, err)
		return id
	}
	day := "yyyy-mm-dd"
	fill := func(c string) excelize.Fill { return excelize.Fill{Type: "pattern", Pattern: 1, Color: []string{c}} }
	w.head = style(&excelize.Style{Font: &excelize.Font{Bold: true}, Alignment: &excelize.Alignment{WrapText: true, Vertical: "top"}})
	w.faulty = style(&excelize.Style{Fill: fill("F4B6A6")})
	w.doubt = style(&excelize.Style{Fill: fill("FBE7A8")})
	w.dateOnly = style(&excelize.Style{CustomNumFmt: &day})
	w.faultyDate = style(&excelize.Style{CustomNumFmt: &day, Fill: fill("F4B6A6")})
	w.percent = style(&excelize.Style{NumFmt: 10})
	w.faultyShare = style(&excelize.Style{NumFmt: 10, Fill: fill("F4B6A6")})
	return errors.Join(errs...)
}

func writeWorkbook(ctx context.Context, out *os.File, book sheet.Book, report *ingest.Report, by map[string]faults) error {
	w := &writer{f: excelize.NewFile()}
	defer w.f.Close()
	if err := w.styles(); err != nil {
		return err
	}
	first := true
	for i, info := range book.Sheets() {
		if i >= len(report.Sheets) || len(by[info.Name]) == 0 {
			continue
		}
		var err error
		if first {
			err = w.f.SetSheetName(w.f.GetSheetName(0), info.Name)
		} else {
			_, err = w.f.NewSheet(info.Name)
		}
		if err != nil {
			return err
		}
		first = false
		if err := w.sheet(ctx, book, i, &report.Sheets[i], by[info.Name]); err != nil {
			return err
		}
	}
	w.f.SetActiveSheet(0)
	_, err := w.f.WriteTo(out)
	return err
}

// sheet writes titles and header where they were and the faulty rows below.
func (w *writer) sheet(ctx context.Context, book sheet.Book, i int, s *ingest.SheetReport, rows faults) error {
	w.comments, w.last = 0, -1
	width := 0
	merges, err := book.Verify(ctx, i, func(r *sheet.Row) { width = max(width, len(r.Cells)) })
	if err != nil {
		return err
	}
	for _, c := range s.Columns {
		if k, ok := sheet.ColumnIndex(c.Letter); ok && c.Header == WhatToFix {
			w.last = k // sent back once already
		}
	}
	if w.last < 0 {
		w.last = width
	}
	to := s.DataFrom
	err = book.Rows(ctx, i, func(r *sheet.Row) error {
		if !keep(s, rows, r.Number) {
			return nil
		}
		n := r.Number
		if n >= s.DataFrom {
			n = to
			to++
		}
		for c, cell := range r.Cells {
			if c == w.last && n != s.HeaderRow {
				continue // the reasons of last time
			}
			if err := w.cell(s.Name, c, n, cell, n == s.HeaderRow); err != nil {
				return err
			}
		}
		return w.mark(s, n, rows[r.Number])
	})
	if err != nil {
		return err
	}
	for _, m := range merges {
		if m.LastRow < s.DataFrom {
			if err := w.f.MergeCell(s.Name, ref(m.FirstCol, m.FirstRow), ref(m.LastCol, m.LastRow)); err != nil {
				return err
			}
		}
	}
	for _, c := range s.Columns {
		width := 12.0
		for _, sample := range append([]string{c.Header}, c.Samples...) {
			width = max(width, min(40, float64(len([]rune(sample)))+2))
		}
		if err := w.f.SetColWidth(s.Name, c.Letter, c.Letter, width); err != nil {
			return err
		}
	}
	return w.f.SetPanes(s.Name, &excelize.Panes{Freeze: true, YSplit: s.DataFrom - 1, TopLeftCell: ref(0, s.DataFrom), ActivePane: "bottomLeft"})
}

func ref(col, row int) string {
	s, err := excelize.CoordinatesToCellName(col+1, row)
	if err != nil {
		return "A1" // out of the format's range, which the reader has refused before
	}
	return s
}

func (w *writer) cell(name string, col, row int, c sheet.Cell, head bool) error {
	at := ref(col, row)
	var err error
	switch c.Kind {
	case sheet.Empty:
	case sheet.Number:
		if err = w.f.SetCellFloat(name, at, c.Number, -1, 64); err == nil && c.Percent {
			err = w.f.SetCellStyle(name, at, at, w.percent)
		}
	case sheet.Bool:
		err = w.f.SetCellBool(name, at, c.Number != 0)
	case sheet.Date:
		if c.Number == 0 {
			err = w.f.SetCellStr(name, at, c.Text)
			break
		}
		if err = w.f.SetCellFloat(name, at, c.Number, -1, 64); err == nil {
			err = w.f.SetCellStyle(name, at, at, w.dateOnly)
		}
	default:
		err = w.f.SetCellStr(name, at, c.Text)
	}
	if err == nil && head {
		err = w.f.SetCellStyle(name, at, at, w.head)
	}
	return err
}

// maxComments bounds the comments of a sheet: the time for each grows with the
// number there are, 0.5 s for 4,000 and 4 s for 16,000. Beyond, the reason
// stands in a column after the last.
const maxComments = 4000

func (w *writer) instead(s *ingest.SheetReport, row int, text string) error {
	if s.HeaderRow > 0 {
		at := ref(w.last, s.HeaderRow)
		if err := errors.Join(w.f.SetCellStr(s.Name, at, WhatToFix), w.f.SetCellStyle(s.Name, at, at, w.head)); err != nil {
			return err
		}
	}
	return w.f.SetCellStr(s.Name, ref(w.last, row), text)
}

// mark colours the cells at fault and says at each what is wrong. A fault of
// the whole row is told at its first cell.
func (w *writer) mark(s *ingest.SheetReport, row int, fs []finding.Finding) error {
	texts := map[string][]string{}
	worst := map[string]finding.Severity{}
	var order []string
	for _, f := range fs {
		if !tell(f) {
			continue
		}
		col, _, _ := strings.Cut(f.Column, ",")
		if col == "" {
			col = "A"
		}
		if texts[col] == nil {
			order = append(order, col)
		}
		text := f.Text
		if f.Fix != "" {
			text += "; " + f.Fix
		}
		texts[col] = append(texts[col], text)
		worst[col] = max(worst[col], f.Severity)
	}
	for _, col := range order {
		i, ok := sheet.ColumnIndex(col)
		if !ok {
			continue
		}
		at := ref(i, row)
		style := w.doubt
		if worst[col] == finding.Error {
			style = w.faulty
		}
		if have, err := w.f.GetCellStyle(s.Name, at); err == nil && have == w.dateOnly {
			style = w.faultyDate
		} else if err == nil && have == w.percent {
			style = w.faultyShare
		}
		if err := w.f.SetCellStyle(s.Name, at, at, style); err != nil {
			return err
		}
		if w.comments++; w.comments > maxComments {
			if err := w.instead(s, row, reason(fs)); err != nil {
				return err
			}
			continue
		}
		err := w.f.AddComment(s.Name, excelize.Comment{Cell: at, Author: "kelvinrow", Text: strings.Join(texts[col], "\n"), Width: 260, Height: 90})
		if err != nil {
			return err
		}
	}
	return nil
}
