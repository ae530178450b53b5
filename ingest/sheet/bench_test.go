package sheet

import (
	"archive/zip"
	"bufio"
	"context"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"testing"
	"time"

	"github.com/xuri/excelize/v2"
	"golang.org/x/text/encoding/charmap"
	"golang.org/x/text/encoding/unicode"
)

const benchRows, benchColumns = 100_000, 25

// register writes a workbook as a department would send it: texts of which many
// repeat, whole numbers, areas, values with all digits that a formula left,
// dates. inline is how programs that stream write texts.
func register(tb testing.TB, path string, rows int, inline bool) {
	tb.Helper()
	f, err := os.Create(path)
	if err != nil {
		tb.Fatal(err)
	}
	defer f.Close()
	z := zip.NewWriter(f)
	part := func(name string, write func(w *bufio.Writer)) {
		p, err := z.Create(name)
		if err != nil {
			tb.Fatal(err)
		}
		w := bufio.NewWriter(p)
		write(w)
		if err := w.Flush(); err != nil {
			tb.Fatal(err)
		}
	}
	const head = `<?xml version="1.0" encoding="UTF-8" standalone="yes"?>` + "\n"
	const main = `xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main" xmlns:r="http://schemas.openxmlformats.org/officeDocument/2006/relationships"`
	const rels = `http://schemas.openxmlformats.org/officeDocument/2006/relationships/`
	text := func(s string) func(*bufio.Writer) { return func(w *bufio.Writer) { fmt.Fprint(w, head, s) } }
	part("[Content_Types].xml", text(`<Types xmlns="http://schemas.openxmlformats.org/package/2006/content-types"><Default Extension="rels" ContentType="application/vnd.openxmlformats-package.relationships+xml"/><Default Extension="xml" ContentType="application/vnd.openxmlformats-officedocument.spreadsheetml.worksheet+xml"/></Types>`))
	part("_rels/.rels", text(`<Relationships xmlns="http://schemas.openxmlformats.org/package/2006/relationships"><Relationship Id="a" Type="`+rels+`officeDocument" Target="xl/workbook.xml"/></Relationships>`))
	part("xl/_rels/workbook.xml.rels", text(`<Relationships xmlns="http://schemas.openxmlformats.org/package/2006/relationships"><Relationship Id="w" Type="`+rels+`worksheet" Target="worksheets/sheet1.xml"/><Relationship Id="s" Type="`+rels+`styles" Target="styles.xml"/><Relationship Id="t" Type="`+rels+`sharedStrings" Target="sharedStrings.xml"/></Relationships>`))
	part("xl/workbook.xml", text(`<workbook `+main+`><sheets><sheet name="Register" sheetId="1" r:id="w"/></sheets></workbook>`))
	part("xl/styles.xml", text(`<styleSheet `+main+`><cellXfs count="2"><xf numFmtId="0"/><xf numFmtId="14"/></cellXfs></styleSheet>`))
	var shared []string
	index := map[string]int{}
	part("xl/worksheets/sheet1.xml", func(w *bufio.Writer) {
		fmt.Fprint(w, head, `<worksheet `, main, `><sheetData>`)
		for r := 1; r <= rows; r++ {
			fmt.Fprintf(w, `<row r="%d" spans="1:25">`, r)
			for c := range benchColumns {
				style, v := benchCell(r, c)
				ref := fmt.Sprintf("%s%d", ColumnLetters(c), r)
				switch v := v.(type) {
				case string:
					if inline {
						fmt.Fprintf(w, `<c r="%s" t="inlineStr"><is><t>%s</t></is></c>`, ref, v)
						continue
					}
					i, ok := index[v]
					if !ok {
						i = len(shared)
						index[v] = i
						shared = append(shared, v)
					}
					fmt.Fprintf(w, `<c r="%s" t="s"><v>%d</v></c>`, ref, i)
				default:
					fmt.Fprintf(w, `<c r="%s"%s><v>%v</v></c>`, ref, style, v)
				}
			}
			fmt.Fprint(w, `</row>`)
		}
		fmt.Fprint(w, `</sheetData></worksheet>`)
	})
	part("xl/sharedStrings.xml", func(w *bufio.Writer) {
		fmt.Fprint(w, head, `<sst `, main, `>`)
		for _, s := range shared {
			fmt.Fprintf(w, `<si><t>%s</t></si>`, s)
		}
		fmt.Fprint(w, `</sst>`)
	})
	if err := z.Close(); err != nil {
		tb.Fatal(err)
	}
}

func benchCell(r, c int) (style string, v any) {
	switch {
	case c == 0:
		return "", fmt.Sprintf("B-%07d", r)
	case c == 1:
		return "", fmt.Sprintf("Ahornweg %d &amp; %d", r%9000, r%7)
	case c < 8:
		return "", fmt.Sprintf("category %d of column %d", r*c%40, c)
	case c < 12:
		return "", 1850 + r*c%170
	case c == 12:
		return ` s="1"`, 36526 + r%9000
	case c < 20:
		return "", float64(r*c%100_000) / 10
	}
	return "", float64(r*c%1_000_000) / 7
}

// BenchmarkRead compares one pass over a sheet, and the two that ingesting
// takes, with the rows of the library for workbooks in general.
func BenchmarkRead(b *testing.B) {
	for _, kind := range []string{"SharedTexts", "InlineTexts"} {
		b.Run(kind, func(b *testing.B) {
			path := filepath.Join(b.TempDir(), "register.xlsx")
			register(b, path, benchRows, kind == "InlineTexts")
			start := time.Now()
			if n := libraryCells(b, path); n != benchRows*benchColumns {
				b.Fatalf("the library read %d cells", n)
			}
			library := time.Since(start)
			var verify, rows time.Duration
			var heap uint64
			for b.Loop() {
				v, r, h := readTwice(b, path)
				verify, rows, heap = verify+v, rows+r, max(heap, h)
			}
			n := time.Duration(b.N)
			b.ReportMetric(float64(library*n)/float64(verify), "x-library-once")
			b.ReportMetric(float64(library*n)/float64(verify+rows), "x-library-twice")
			b.ReportMetric(float64(heap)/1e6, "peak-heap-MB")
		})
	}
}

func libraryCells(b *testing.B, path string) int {
	f, err := excelize.OpenFile(path)
	if err != nil {
		b.Fatal(err)
	}
	defer f.Close()
	rows, err := f.Rows(f.GetSheetName(0))
	if err != nil {
		b.Fatal(err)
	}
	n := 0
	for rows.Next() {
		cells, err := rows.Columns(excelize.Options{RawCellValue: true})
		if err != nil {
			b.Fatal(err)
		}
		n += len(cells)
	}
	return n
}

// readTwice opens the workbook and passes over its sheet twice; opening counts
// to the first pass.
func readTwice(b *testing.B, path string) (verify, rows time.Duration, heap uint64) {
	cells := 0
	var m runtime.MemStats
	visit := func(r *Row) {
		cells += len(r.Cells)
		if r.Number%5000 == 0 {
			runtime.ReadMemStats(&m)
			heap = max(heap, m.HeapAlloc)
		}
	}
	runtime.GC() // of what the library left
	start := time.Now()
	c, err := ReadContent(context.Background(), path)
	if err != nil {
		b.Fatal(err)
	}
	book, err := Open(path, c)
	if err != nil {
		b.Fatal(err)
	}
	defer book.Close()
	if _, err := book.Verify(context.Background(), 0, visit); err != nil {
		b.Fatal(err)
	}
	verify = time.Since(start)
	if err := book.Rows(context.Background(), 0, func(r *Row) error { visit(r); return nil }); err != nil {
		b.Fatal(err)
	}
	if cells != 2*benchRows*benchColumns {
		b.Fatalf("%d cells", cells)
	}
	return verify, time.Since(start) - verify, heap
}

// BenchmarkText passes over delimited text of a million rows, which are more
// than memory is wanted for.
func BenchmarkText(b *testing.B) {
	const rows = 1_000_000
	for _, kind := range []string{"UTF8", "Windows1252", "UTF16"} {
		b.Run(kind, func(b *testing.B) {
			path := filepath.Join(b.TempDir(), "register.csv")
			b.SetBytes(textRegister(b, path, rows, kind))
			var heap uint64
			for b.Loop() {
				heap = max(heap, passText(b, path, rows))
			}
			b.ReportMetric(float64(heap)/1e6, "peak-heap-MB")
		})
	}
}

// textRegister writes delimited text and returns how many bytes.
func textRegister(tb testing.TB, path string, rows int, kind string) int64 {
	f, err := os.Create(path)
	if err != nil {
		tb.Fatal(err)
	}
	defer f.Close()
	var out io.Writer = f
	switch kind {
	case "Windows1252":
		out = charmap.Windows1252.NewEncoder().Writer(f)
	case "UTF16":
		out = unicode.UTF16(unicode.LittleEndian, unicode.UseBOM).NewEncoder().Writer(f)
	}
	w := bufio.NewWriterSize(out, 1<<20)
	for r := range rows {
		fmt.Fprintf(w, "B-%07d;\"Ahornstraße %d; \"\"Hof\"\"\"", r, r%90)
		for c := 2; c < benchColumns; c++ {
			fmt.Fprintf(w, ";%d,%d", r*c%1000, c)
		}
		fmt.Fprint(w, "\r\n")
	}
	if err := w.Flush(); err != nil {
		tb.Fatal(err)
	}
	st, err := f.Stat()
	if err != nil {
		tb.Fatal(err)
	}
	return st.Size()
}

// passText returns how much memory was in use at most.
func passText(tb testing.TB, path string, rows int) (heap uint64) {
	runtime.GC()
	c, err := ReadContent(context.Background(), path)
	if err != nil {
		tb.Fatal(err)
	}
	book, err := Open(path, c)
	if err != nil {
		tb.Fatal(err)
	}
	defer book.Close()
	n := 0
	var m runtime.MemStats
	if _, err := book.Verify(context.Background(), 0, func(r *Row) {
		n++
		if len(r.Cells) != benchColumns || !strings.HasPrefix(r.Cells[1].Text, "Ahornstraße ") {
			tb.Fatalf("row %d: %v", r.Number, r.Cells)
		}
		if n%2000 == 0 {
			runtime.ReadMemStats(&m)
			heap = max(heap, m.HeapAlloc)
		}
	}); err != nil {
		tb.Fatal(err)
	}
	if n != rows {
		tb.Fatalf("%d rows", n)
	}
	return heap
}

// Whatever the encoding, text is decoded while it is read: many times more of
// it than memory is used.
func TestTextStreams(t *testing.T) {
	for _, kind := range []string{"Windows1252", "UTF16"} {
		path := filepath.Join(t.TempDir(), "register.csv")
		size := textRegister(t, path, 100_000, kind)
		runtime.GC()
		var m runtime.MemStats
		runtime.ReadMemStats(&m)
		if more := int64(passText(t, path, 100_000)) - int64(m.HeapAlloc); more > size/2 || size < 15e6 {
			t.Errorf("%s: %d MB of text in %d MB of memory", kind, size>>20, more>>20)
		}
	}
}

// BenchmarkTokens takes only the marks of the sheet apart, unpacked beforehand.
func BenchmarkTokens(b *testing.B) {
	path := filepath.Join(b.TempDir(), "register.xlsx")
	register(b, path, 20_000, false)
	p, err := openArchive(path)
	if err != nil {
		b.Fatal(err)
	}
	defer p.file.Close()
	r, err := p.unpack("xl/worksheets/sheet1.xml", maxPartBytes)
	if err != nil {
		b.Fatal(err)
	}
	all, err := io.ReadAll(r)
	if err != nil {
		b.Fatal(err)
	}
	b.SetBytes(int64(len(all)))
	for b.Loop() {
		t := newTokens(context.Background(), &once{b: all})
		for {
			k, err := t.next()
			if err != nil {
				b.Fatal(err)
			}
			if k == tokenEOF {
				break
			}
		}
	}
}

// once is a feed of one block.
type once struct{ b []byte }

func (o *once) next(context.Context) ([]byte, error) {
	b := o.b
	o.b = nil
	if b == nil {
		return nil, io.EOF
	}
	return b, nil
}

func (o *once) close() {}
