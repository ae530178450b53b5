package sheet

import (
	"context"
	"errors"
	"os"
	"path/filepath"
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

// differs lists where the other reader is known to read less or otherwise.
var differs = map[string]string{
	"wtf_path.xlsx":                "the other reader does not find the shared strings beside an unusual workbook path",
	"crlf.xlsx":                    "the other reader keeps the format's escape _x000D_",
	"formula_stress_test.xlsx":     "the other reader keeps the escape _x0007_ in a formula's text",
	"xlsx-stream-d-date-cell.xlsx": "the other reader keeps the time of an ISO date cell",
}

// Workbooks written by many programs, read by an independent library: where
// both read a sheet, every cell must be the same.
func TestAgreesWithExcelize(t *testing.T) {
	paths, _ := filepath.Glob(workbooks + "/*/*.xlsx")
	if len(paths) == 0 {
		t.Skip("no folder " + workbooks)
	}
	cells, sheets := 0, 0
	for _, path := range paths {
		name := filepath.Base(path)
		if st, err := os.Stat(path); err != nil || st.Size() > 3<<20 {
			continue
		}
		b, err := open(t, path)
		var bad *BadFile
		report := t.Errorf
		if why := differs[name]; why != "" {
			report = func(string, ...any) {}
		}
		if err != nil {
			if !errors.As(err, &bad) {
				t.Errorf("%s: error is no BadFile: %v", name, err)
			}
			t.Logf("%s: %v", name, err)
			continue
		}
		f, err := excelize.OpenFile(path)
		if err != nil {
			t.Logf("%s: other reader: %v", name, err)
			b.Close()
			continue
		}
		for i, s := range b.Sheets() {
			if s.Other != "" {
				continue
			}
			got := map[string]string{}
			_, err := b.Verify(context.Background(), i, func(r *Row) {
				for c, cell := range r.Cells {
					if cell.Text != "" {
						// The other reader gives dates and truth values as stored.
						v := cell.Text
						if cell.Kind == Date && cell.Number != 0 || cell.Kind == Bool {
							v = formatNumber(cell.Number)
						}
						got[ColumnLetters(c)+strconv.Itoa(r.Number)] = v
					}
				}
			})
			if err != nil {
				if !errors.As(err, &bad) {
					t.Errorf("%s %s: error is no BadFile: %v", name, s.Name, err)
				}
				t.Logf("%s %s: %v", name, s.Name, err)
				continue
			}
			rows, err := f.GetRows(s.Name, excelize.Options{RawCellValue: true})
			if err != nil {
				t.Logf("%s %s: other reader: %v", name, s.Name, err)
				continue
			}
			sheets++
			n := 0
			for r, row := range rows {
				for c, want := range row {
					ref := ColumnLetters(c) + strconv.Itoa(r+1)
					have := got[ref]
					if want == "" && have == "" {
						continue
					}
					n++
					if have != want && !sameNumber(have, want) && strings.TrimSpace(have) != strings.TrimSpace(want) {
						report("%s %s %s: %q, other reader %q", name, s.Name, ref, have, want)
					}
				}
			}
			if n < len(got) {
				report("%s %s: %d cells, other reader %d", name, s.Name, len(got), n)
			}
			cells += n
		}
		f.Close()
		b.Close()
	}
	t.Logf("%d cells of %d sheets", cells, sheets)
	if cells < 1000 {
		t.Errorf("only %d cells compared", cells)
	}
}

func sameNumber(a, b string) bool {
	x, err1 := strconv.ParseFloat(a, 64)
	y, err2 := strconv.ParseFloat(b, 64)
	return err1 == nil && err2 == nil && x == y
}
