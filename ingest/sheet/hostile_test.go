package sheet

import (
	"archive/zip"
	"bytes"
	"context"
	"errors"
	"io"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// archive packs names and contents, in turn.
func archive(t *testing.T, parts ...string) []byte {
	t.Helper()
	var b bytes.Buffer
	w := zip.NewWriter(&b)
	for i := 0; i < len(parts); i += 2 {
		p, err := w.Create(parts[i])
		if err != nil {
			t.Fatal(err)
		}
		if _, err := io.WriteString(p, parts[i+1]); err != nil {
			t.Fatal(err)
		}
	}
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

// What unpacks to more than any sheet of buildings is refused before it fills
// the memory, whatever part it hides in.
func TestBombs(t *testing.T) {
	for _, tc := range []struct {
		name, check string
		edit        func(string) string
	}{
		{"Columns", "too-wide", func(s string) string { return strings.Replace(s, `r="C1"`, `r="ZZZ1"`, 1) }},
		{"Cell", "too-wide", func(s string) string {
			return strings.Replace(s, "<v>100</v>", "<v>"+strings.Repeat("1", maxCellBytes+1)+"</v>", 1)
		}},
		{"Merges", "too-big", func(s string) string {
			return strings.Replace(s, "</sheetData>", "</sheetData><mergeCells>"+strings.Repeat(`<mergeCell ref="A1:A2"/>`, maxMerges+1)+"</mergeCells>", 1)
		}},
		{"RowNumber", "damaged-sheet", func(s string) string { return strings.Replace(s, `<row r="10"`, `<row r="99999999"`, 1) }},
	} {
		t.Run(tc.name, func(t *testing.T) {
			t.Parallel()
			_, err := read(t, write(t, "a.xlsx", workbook(t, tc.edit)))
			var bad *BadFile
			if !errors.As(err, &bad) || bad.Check != tc.check {
				t.Fatalf("error %v, want check %s", err, tc.check)
			}
		})
	}
	t.Run("Styles", func(t *testing.T) {
		t.Parallel()
		b := archive(t,
			"_rels/.rels", `<Relationships><Relationship Id="a" Type="x/officeDocument" Target="xl/workbook.xml"/></Relationships>`,
			"xl/_rels/workbook.xml.rels", `<Relationships><Relationship Id="s" Type="x/styles" Target="styles.xml"/></Relationships>`,
			"xl/workbook.xml", `<workbook><sheets><sheet name="a"/></sheets></workbook>`,
			"xl/styles.xml", "<styleSheet><cellXfs>"+strings.Repeat(" ", maxOtherBytes)+"</cellXfs></styleSheet>")
		_, err := read(t, write(t, "a.xlsx", b))
		var bad *BadFile
		if !errors.As(err, &bad) || bad.Check != "too-big" {
			t.Fatalf("error %v, want check too-big", err)
		}
	})
}

func TestNumberFormats(t *testing.T) {
	for code, want := range map[string]format{
		"General": plain, "0.00": plain, "0%": asPercent, `0.0" %"`: plain, `0.0\%`: plain, "0.00%;[Red]-0.00%": asPercent,
		"yyyy-mm-dd": asDate, "dd.mm.yy": asDate, "[h]:mm": plain, `0 "m²/day"`: plain, "mmm yy": asDate,
	} {
		got := plain
		switch {
		case dateFormat(code):
			got = asDate
		case percentFormat(code):
			got = asPercent
		}
		if got != want {
			t.Errorf("%q: %d, want %d", code, got, want)
		}
	}
}

// Whatever a sheet part holds, it is read whole or refused, and both passes agree.
func FuzzSheet(f *testing.F) {
	const head, foot = `<worksheet xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main"><sheetData>`, `</sheetData></worksheet>`
	f.Add(`<row r="1"><c r="A1"><v>1</v></c><c r="C1" t="inlineStr"><is><t>x</t></is></c></row>`)
	f.Add(`<row><c><v>1e400</v></c></row><row r="1"/>`)
	f.Add(`<row r="2"><c r="B2" t="s"><v>9</v></c></row></sheetData><mergeCells><mergeCell ref="A1:B9"/></mergeCells>`)
	f.Add(`<row r="1"><c r="A1" t="d"><v>2026-03-01T00:00:00</v></c><c t="b"><v>true</v></c><c t="e"><v>#REF!</v></c>`)
	f.Fuzz(func(t *testing.T, body string) {
		b := archive(t,
			"_rels/.rels", `<Relationships><Relationship Id="a" Type="x/officeDocument" Target="xl/workbook.xml"/></Relationships>`,
			"xl/_rels/workbook.xml.rels", `<Relationships><Relationship Id="w" Type="x/worksheet" Target="sheet.xml"/></Relationships>`,
			"xl/workbook.xml", `<workbook xmlns:r="r"><sheets><sheet name="a" r:id="w"/></sheets></workbook>`,
			"xl/sheet.xml", head+body+foot)
		p := filepath.Join(t.TempDir(), "a.xlsx")
		if err := os.WriteFile(p, b, 0o600); err != nil {
			t.Fatal(err)
		}
		c, err := ReadContent(context.Background(), p)
		if err != nil {
			t.Fatal(err)
		}
		book, err := Open(p, c)
		if err != nil {
			t.Fatal(err)
		}
		defer book.Close()
		var bad *BadFile
		seen, last := 0, 0
		if _, err := book.Verify(context.Background(), 0, func(r *Row) {
			if r.Number <= last {
				t.Fatalf("row %d after %d", r.Number, last)
			}
			last = r.Number
			seen++
		}); err != nil {
			if !errors.As(err, &bad) {
				t.Fatal(err)
			}
			return
		}
		again := 0
		if err := book.Rows(context.Background(), 0, func(*Row) error { again++; return nil }); err != nil || again != seen {
			t.Fatalf("%d rows, then %d: %v", seen, again, err)
		}
	})
}
