package sheet

import (
	"context"
	"errors"
	"fmt"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"
)

const workbooks = "../../../shared/data/workbooks"

func open(t *testing.T, path string) (Book, error) {
	t.Helper()
	c, err := ReadContent(context.Background(), path)
	if err != nil {
		t.Fatal(err)
	}
	return Open(path, c)
}

// Workbooks written by many programs, some broken on purpose, read by an
// independent library: every cell must be the same, but for the differences
// that the table explains.
func TestAgreesWithExcelize(t *testing.T) {
	paths, _ := filepath.Glob(workbooks + "/*/*.xlsx")
	if len(paths) == 0 {
		t.Skipf("no workbooks in %s", workbooks)
	}
	found := map[string][]string{}
	cells, sheets := 0, 0
	for _, path := range paths {
		key := filepath.Base(filepath.Dir(path)) + "/" + filepath.Base(path)
		c, s := compareBook(t, path, func(format string, args ...any) {
			found[key] = append(found[key], fmt.Sprintf(format, args...))
		})
		cells, sheets = cells+c, sheets+s
	}
	t.Logf("%d cells of %d sheets in %d workbooks", cells, sheets, len(paths))
	if cells < 60_000 {
		t.Errorf("only %d cells compared", cells)
	}
	for _, d := range differences {
		got := found[d.file]
		delete(found, d.file)
		if len(got) != d.cells || !slices.Contains(got, d.such) {
			t.Errorf("%s: the table says %d differences such as\n\t%s\nthere are %d:\n\t%s", d.file, d.cells, d.such, len(got), strings.Join(got[:min(len(got), 10)], "\n\t"))
		}
	}
	for file, got := range found {
		t.Errorf("%s: %d differences that the table does not explain:\n\t%s", file, len(got), strings.Join(got[:min(len(got), 10)], "\n\t"))
	}
}

// compareBook reports each cell that is not the same, and each sheet that only
// one of the two reads.
func compareBook(t *testing.T, path string, report func(string, ...any)) (cells, sheets int) {
	b, err := open(t, path)
	var bad *BadFile
	if err != nil && !errors.As(err, &bad) {
		t.Errorf("%s: error is no BadFile: %v", path, err)
	}
	f, other := openLibrary(path)
	if f != nil {
		defer f.Close()
	}
	if b != nil {
		defer b.Close()
	}
	switch {
	case err != nil && other != nil:
		return 0, 0
	case err != nil:
		for _, name := range f.GetSheetList() {
			if _, other := libraryTexts(f, name); other == nil {
				report("not opened: %v", err)
				break
			}
		}
		return 0, 0
	case other != nil:
		report("other not opened: %v", other)
		return 0, 0
	}
	for i, s := range b.Sheets() {
		if s.Other != "" {
			continue
		}
		got, err := ownCells(b, i)
		if err != nil && !errors.As(err, &bad) {
			t.Errorf("%s %s: error is no BadFile: %v", path, s.Name, err)
		}
		want, other := libraryTexts(f, s.Name)
		switch {
		case err != nil && other != nil:
			continue
		case err != nil:
			report("%s: not read: %v", s.Name, err)
			continue
		case other != nil:
			report("%s: other not read: %v", s.Name, other)
			continue
		}
		sheets++
		cells += compareCells(s.Name, got, want, report)
	}
	return cells, sheets
}

// openLibrary turns the panics of the library into errors.
func openLibrary(path string) (f *excelize.File, err error) {
	defer func() {
		if r := recover(); r != nil {
			f, err = nil, fmt.Errorf("panic: %v", r)
		}
	}()
	return excelize.OpenFile(path)
}

type place struct{ row, col int }

func ownCells(b Book, i int) (map[place]Cell, error) {
	got := map[place]Cell{}
	_, err := b.Verify(context.Background(), i, func(r *Row) {
		for c, cell := range r.Cells {
			if cell.Kind != Empty {
				got[place{r.Number, c}] = cell
			}
		}
	})
	return got, err
}

// libraryTexts reads a sheet row by row; GetRows would hide an error.
func libraryTexts(f *excelize.File, name string) (cells map[place]string, err error) {
	defer func() {
		if r := recover(); r != nil {
			err = fmt.Errorf("panic: %v", r)
		}
	}()
	cells = map[place]string{}
	rows, err := f.Rows(name)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	for r := 1; rows.Next(); r++ {
		texts, err := rows.Columns(excelize.Options{RawCellValue: true})
		if err != nil {
			return nil, err
		}
		for c, s := range texts {
			if s != "" {
				cells[place{r, c}] = s
			}
		}
	}
	return cells, rows.Error()
}

func compareCells(name string, got map[place]Cell, want map[place]string, report func(string, ...any)) int {
	all := make([]place, 0, len(got))
	for p := range got {
		all = append(all, p)
	}
	for p := range want {
		if _, ok := got[p]; !ok {
			all = append(all, p)
		}
	}
	slices.SortFunc(all, func(a, b place) int {
		if a.row != b.row {
			return a.row - b.row
		}
		return a.col - b.col
	})
	for _, p := range all {
		have, other := got[p], want[p]
		if !sameCell(have, other) {
			report("%s %s%d: %q, other %q", name, ColumnLetters(p.col), p.row, have.Text, other)
		}
	}
	return len(all)
}

// sameCell compares with the text that the part holds: numbers, dates and truth
// values are there as numbers.
func sameCell(c Cell, other string) bool {
	switch c.Kind {
	case Number, Bool:
		v, err := strconv.ParseFloat(strings.TrimSpace(other), 64)
		return err == nil && v == c.Number
	case Date:
		v, err := strconv.ParseFloat(strings.TrimSpace(other), 64)
		return err == nil && v == c.Number || c.Number == 0 && c.Text == other
	}
	return c.Text == other
}
