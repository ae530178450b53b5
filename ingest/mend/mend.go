// Package mend writes the rows that were set aside to a file in the layout of
// their source, with what is wrong marked, so that their owner can correct
// them and send the file in again.
package mend

import (
	"bufio"
	"context"
	"encoding/csv"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"strings"

	"kelvinrow/ingest"
	"kelvinrow/ingest/finding"
	"kelvinrow/ingest/sheet"
)

// WhatToFix heads the column that .csv files get for the reasons.
const WhatToFix = "what to fix"

// faults are the findings of one sheet by row.
type faults map[int][]finding.Finding

// Write writes the rows of sourcePath that report set aside, and the first row
// of an id that comes again, to NAME-to-fix.xlsx
// or NAME-to-fix.csv in dir and returns its path, "" when there are none. The
// file is there whole or not at all.
func Write(ctx context.Context, sourcePath string, report *ingest.Report, dir string) (string, error) {
	bySheet := map[string]faults{}
	for _, f := range report.Findings {
		if f.Row == 0 {
			continue
		}
		if bySheet[f.Sheet] == nil {
			bySheet[f.Sheet] = faults{}
		}
		bySheet[f.Sheet][f.Row] = append(bySheet[f.Sheet][f.Row], f)
	}
	any := false
	for _, rows := range bySheet {
		for n, fs := range rows {
			if !setAside(fs) && !repeated(fs) {
				delete(rows, n)
			}
		}
		any = any || len(rows) > 0
	}
	if !any {
		return "", nil
	}
	content, err := sheet.ReadContent(ctx, sourcePath)
	if err != nil {
		return "", fmt.Errorf("rows to fix of %s: %w", sourcePath, err)
	}
	if content.SHA256 != report.SHA256 {
		return "", fmt.Errorf("rows to fix of %s: the file has changed since it was read", sourcePath)
	}
	book, err := sheet.Open(sourcePath, content)
	if err != nil {
		return "", fmt.Errorf("rows to fix of %s: %w", sourcePath, err)
	}
	defer book.Close()
	base := filepath.Base(sourcePath)
	if filepath.Clean(dir) != filepath.Dir(sourcePath) {
		base = strings.ReplaceAll(report.File, "/", "-") // sources of one name may come together there
	}
	stem := strings.TrimSuffix(base, filepath.Ext(base))
	write, ext := writeWorkbook, ".xlsx"
	if book.Delimiter() != 0 {
		write, ext = writeText, ".csv"
	}
	path := filepath.Join(dir, strings.TrimSuffix(stem, "-to-fix")+"-to-fix"+ext)
	if err := whole(path, func(f *os.File) error { return write(ctx, f, book, report, bySheet) }); err != nil {
		return "", fmt.Errorf("rows to fix of %s: %w", sourcePath, err)
	}
	return path, nil
}

func setAside(fs []finding.Finding) bool {
	for _, f := range fs {
		if f.Severity == finding.Error {
			return true
		}
	}
	return false
}

// repeated reports whether a row is the first of several with one id. It goes
// along, so that its owner can compare, and what comes back as it was is found
// wrong again.
func repeated(fs []finding.Finding) bool {
	for _, f := range fs {
		if f.Check == finding.DuplicateFirst {
			return true
		}
	}
	return false
}

// tell reports whether a finding is written beside its row.
func tell(f finding.Finding) bool {
	return f.Severity != finding.Note || f.Check == finding.DuplicateFirst
}

// whole writes a file beside path and renames it when it is complete.
func whole(path string, write func(*os.File) error) error {
	f, err := os.CreateTemp(filepath.Dir(path), ".to-fix-*")
	if err != nil {
		return err
	}
	err = write(f)
	err = errors.Join(err, f.Chmod(0o644), f.Close())
	if err == nil {
		err = os.Rename(f.Name(), path)
	}
	if err != nil {
		os.Remove(f.Name())
	}
	return err
}

// reason is what is wrong with a row, in one line.
func reason(fs []finding.Finding) string {
	var parts []string
	for _, f := range fs {
		if !tell(f) {
			continue
		}
		s := f.Text
		if f.Fix != "" {
			s += "; " + f.Fix
		}
		parts = append(parts, s)
	}
	return strings.Join(parts, " | ")
}

// keep reports whether a row belongs into the file: titles, header, or faulty.
func keep(s *ingest.SheetReport, rows faults, n int) bool {
	return n < s.DataFrom || rows[n] != nil
}

// writeText keeps titles, header and faulty rows, and adds a last column.
// Spreadsheet programs take text for UTF-8 only with the mark in front.
func writeText(ctx context.Context, f *os.File, book sheet.Book, report *ingest.Report, by map[string]faults) error {
	b := bufio.NewWriter(f)
	b.WriteString("\ufeff")
	w := csv.NewWriter(b)
	w.Comma = book.Delimiter()
	s := &report.Sheets[0]
	rows := by[s.Name]
	width := 0
	for _, c := range s.Columns {
		if i, ok := sheet.ColumnIndex(c.Letter); ok {
			width = max(width, i+1)
		}
	}
	next := 1
	err := book.Rows(ctx, 0, func(r *sheet.Row) error {
		if !keep(s, rows, r.Number) {
			return nil
		}
		record := make([]string, len(r.Cells))
		for i, c := range r.Cells {
			record[i] = c.Text
		}
		for ; next < r.Number && r.Number < s.DataFrom; next++ {
			if err := w.Write([]string{""}); err != nil { // a blank row between titles
				return err
			}
		}
		next = r.Number + 1
		if r.Number == s.HeaderRow || r.Number >= s.DataFrom {
			for len(record) < width {
				record = append(record, "")
			}
			text := WhatToFix
			if r.Number >= s.DataFrom {
				text = reason(rows[r.Number])
				record = record[:max(width, 1)]
			}
			if last := len(record) - 1; r.Number == s.HeaderRow && strings.TrimSpace(record[last]) == WhatToFix {
				record = record[:last] // sent back once already
				width = last
			}
			record = append(record, text)
		}
		return w.Write(record)
	})
	w.Flush()
	return errors.Join(err, w.Error(), b.Flush())
}
