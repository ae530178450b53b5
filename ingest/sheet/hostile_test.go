package sheet

import (
	"archive/zip"
	"bytes"
	"errors"
	"fmt"
	"hash/crc32"
	"io"
	"runtime"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// archive packs names and contents, in turn.
func archive(t testing.TB, parts ...string) []byte {
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

// around packs a workbook of one sheet; parts replace or add to its parts.
func around(t testing.TB, parts ...string) []byte {
	t.Helper()
	names := []string{"_rels/.rels", "xl/_rels/workbook.xml.rels", "xl/workbook.xml", "xl/styles.xml", "xl/strings.xml", "xl/sheet.xml"}
	all := map[string]string{
		"_rels/.rels": `<Relationships><Relationship Id="a" Type="x/officeDocument" Target="xl/workbook.xml"/></Relationships>`,
		"xl/_rels/workbook.xml.rels": `<Relationships><Relationship Id="w" Type="x/worksheet" Target="sheet.xml"/><Relationship Id="s" Type="x/styles" Target="styles.xml"/>` +
			`<Relationship Id="t" Type="x/sharedStrings" Target="strings.xml"/><Relationship Id="l" Type="x/hyperlink" Target="http://0.0.0.0/" TargetMode="External"/></Relationships>`,
		"xl/workbook.xml": `<workbook xmlns:r="r"><workbookPr date1904="1"/><sheets><sheet name="a" r:id="w"/></sheets></workbook>`,
		"xl/styles.xml":   `<styleSheet><numFmts><numFmt numFmtId="164" formatCode="yyyy"/></numFmts><cellXfs><xf numFmtId="0"/><xf numFmtId="164"/></cellXfs></styleSheet>`,
		"xl/strings.xml":  `<sst><si><t>Ahorn</t></si><si><r><t>a</t></r><r><t>b</t></r><rPh sb="0" eb="1"><t>c</t></rPh></si></sst>`,
		"xl/sheet.xml":    `<worksheet><sheetData><row r="1"><c r="A1" t="s"><v>1</v></c><c r="B1" s="1"><v>0</v></c></row></sheetData></worksheet>`,
	}
	for i := 0; i < len(parts); i += 2 {
		if _, ok := all[parts[i]]; !ok {
			names = append(names, parts[i])
		}
		all[parts[i]] = parts[i+1]
	}
	var list []string
	for _, n := range names {
		list = append(list, n, all[n])
	}
	return archive(t, list...)
}

// The parts around are read as they should be, the rich text joined without its
// hint, the date counted from 1904.
func TestAround(t *testing.T) {
	got, err := read(t, write(t, "a.xlsx", around(t)))
	if err != nil {
		t.Fatal(err)
	}
	if d := cmp.Diff(map[int][]string{1: {"ab", "1904-01-01"}}, got); d != "" {
		t.Error(d)
	}
}

func cells(row string) string {
	return `<worksheet><sheetData><row>` + row + `</row></sheetData></worksheet>`
}

// What unpacks to more than any sheet of buildings, or claims more than its
// format allows, is refused before it fills the memory, whatever part it hides in.
func TestBombs(t *testing.T) {
	const deep = maxDepth + 1
	nest := strings.Repeat("<a>", 100_000)
	many := func(n int, s string) string { return strings.Repeat(s, n) }
	for _, tc := range []struct {
		name, check string
		data        []byte
	}{
		{"ColumnsEmpty", "too-wide", around(t, "xl/sheet.xml", cells(many(sheetColumns+1, "<c/>")))},
		{"ColumnsFilled", "too-wide", around(t, "xl/sheet.xml", cells(many(maxColumns+1, "<c><v>1</v></c>")))},
		{"ColumnFar", "too-wide", around(t, "xl/sheet.xml", cells(`<c r="ZZZ1"><v>1</v></c>`))},
		{"ColumnMillion", "damaged-sheet", around(t, "xl/sheet.xml", cells(`<c r="BDWGO1"><v>1</v></c>`))},
		{"Cell", "too-wide", around(t, "xl/sheet.xml", cells("<c><v>"+many(maxCellBytes+1, "1")+"</v></c>"))},
		{"CellOfRuns", "too-wide", around(t, "xl/sheet.xml", cells(`<c t="inlineStr"><is>`+many(maxCellBytes/1000+1, "<r><t>"+many(1000, "x")+"</t></r>")+"</is></c>"))},
		{"Merges", "too-big", around(t, "xl/sheet.xml", "<worksheet><mergeCells>"+many(maxMerges+1, `<mergeCell ref="A1:A2"/>`)+"</mergeCells></worksheet>")},
		{"RowNumber", "damaged-sheet", around(t, "xl/sheet.xml", `<worksheet><sheetData><row r="99999999"/></sheetData></worksheet>`)},
		{"Rows", "too-big", around(t, "xl/sheet.xml", "<worksheet><sheetData>"+many(maxRows+1, "<row/>")+"</sheetData></worksheet>")},
		{"SheetRatio", "too-big", around(t, "xl/sheet.xml", "<worksheet>"+many(24<<20, " ")+"</worksheet>")},
		{"StylesRatio", "too-big", around(t, "xl/styles.xml", "<styleSheet><cellXfs>"+many(24<<20, " ")+"</cellXfs></styleSheet>")},
		{"Styles", "too-big", around(t, "xl/styles.xml", "<styleSheet><cellXfs>"+many(maxFormats+1, "<xf/>")+"</cellXfs></styleSheet>")},
		{"TextsRatio", "too-big", around(t, "xl/strings.xml", "<sst>"+many(8<<20, "<si/>")+"</sst>")},
		{"Text", "too-wide", around(t, "xl/strings.xml", "<sst><si><t>"+many(maxCellBytes+1, "x")+"</t></si></sst>")},
		{"Sheets", "too-big", around(t, "xl/workbook.xml", "<workbook><sheets>"+many(maxSheets+1, `<sheet name="a"/>`)+"</sheets></workbook>")},
		{"Relations", "too-big", around(t, "xl/_rels/workbook.xml.rels", "<Relationships>"+many(maxParts+1, `<Relationship Id="a" Type="x/worksheet" Target="b"/>`)+"</Relationships>")},
		{"DeepSheet", "damaged-sheet", around(t, "xl/sheet.xml", "<worksheet>"+nest)},
		{"DeepSheetClosed", "damaged-sheet", around(t, "xl/sheet.xml", "<worksheet>"+many(deep, "<a>")+many(deep, "</a>")+"</worksheet>")},
		{"DeepStyles", "no-workbook", around(t, "xl/styles.xml", nest)},
		{"DeepTexts", "no-workbook", around(t, "xl/strings.xml", "<sst>"+nest)},
		{"DeepBook", "no-workbook", around(t, "xl/workbook.xml", nest)},
		{"LongTag", "damaged-sheet", around(t, "xl/sheet.xml", `<worksheet a="`+many(8<<20, "x")+`"/>`)},
		{"LongName", "damaged-sheet", around(t, "xl/sheet.xml", `<`+many(8<<20, "x")+`/>`)},
		{"Attributes", "damaged-sheet", around(t, "xl/sheet.xml", `<worksheet`+many(200_000, ` a=""`)+`/>`)},
		{"Parts", "too-big", parts(t, maxParts+1, "p")},
		{"PartsUncounted", "too-big", parts(t, 40_000, strings.Repeat("p", 100))},
	} {
		t.Run(tc.name, func(t *testing.T) {
			path := write(t, "a.xlsx", tc.data)
			var before, after runtime.MemStats
			runtime.ReadMemStats(&before)
			_, err := read(t, path)
			runtime.ReadMemStats(&after)
			var bad *BadFile
			if !errors.As(err, &bad) || bad.Check != tc.check {
				t.Fatalf("error %.200v, want check %s", err, tc.check)
			}
			if len(bad.Text) > 400 {
				t.Errorf("says %d characters", len(bad.Text))
			}
			allowed := uint64(48)
			if tc.name == "TextsRatio" {
				allowed = 192 // in all, by a list of where millions of texts lie that grew to 26 MB
			}
			if mb := (after.TotalAlloc - before.TotalAlloc) >> 20; mb > allowed {
				t.Errorf("took %d MB", mb)
			}
		})
	}
}

func parts(t *testing.T, n int, name string) []byte {
	var list []string
	for i := range n {
		list = append(list, fmt.Sprintf("%s%d", name, i), "")
	}
	return archive(t, list...)
}

// More texts than are ever shared are refused whatever they are packed in.
func TestTooManyTexts(t *testing.T) {
	c, err := newCharacters(strings.NewReader("<sst><si/><si/></sst>"))
	if err != nil {
		t.Fatal(err)
	}
	r := textReader{part: "a", tokens: newTokens(t.Context(), &direct{c: c})}
	var bad *BadFile
	if err := r.read(&texts{at: make([]textAt, maxTexts-1, maxTexts)}); !errors.As(err, &bad) || bad.Check != "too-big" {
		t.Errorf("error %v", err)
	}
}

// The directory of an archive says how long its parts are, and may lie.
func TestLyingDirectory(t *testing.T) {
	const sheet = `<worksheet><sheetData><row><c><v>1</v></c></row></sheetData></worksheet>`
	for _, tc := range []struct {
		name     string
		unpacked uint64
		check    string
	}{
		{"True", uint64(len(sheet)), ""},
		{"Less", 10, "damaged-sheet"},
		{"More", 1000, "damaged-sheet"},
		{"MoreThanAllowed", maxPartBytes + 1, "too-big"},
		{"MoreThanThereIs", 1 << 63, "too-big"},
	} {
		t.Run(tc.name, func(t *testing.T) {
			var b bytes.Buffer
			w := zip.NewWriter(&b)
			in, err := zip.NewReader(bytes.NewReader(around(t)), int64(len(around(t))))
			if err != nil {
				t.Fatal(err)
			}
			for _, f := range in.File {
				if f.Name == "xl/sheet.xml" {
					continue
				}
				if err := w.Copy(f); err != nil {
					t.Fatal(err)
				}
			}
			p, err := w.CreateRaw(&zip.FileHeader{Name: "xl/sheet.xml", Method: zip.Store, CRC32: crc32.ChecksumIEEE([]byte(sheet)),
				CompressedSize64: uint64(len(sheet)), UncompressedSize64: tc.unpacked})
			if err != nil {
				t.Fatal(err)
			}
			if _, err := io.WriteString(p, sheet); err != nil {
				t.Fatal(err)
			}
			if err := w.Close(); err != nil {
				t.Fatal(err)
			}
			rows, err := read(t, write(t, "a.xlsx", b.Bytes()))
			var bad *BadFile
			switch {
			case tc.check == "" && (err != nil || len(rows) != 1):
				t.Errorf("%d rows, %v", len(rows), err)
			case tc.check != "" && (!errors.As(err, &bad) || bad.Check != tc.check):
				t.Errorf("error %v, want check %s", err, tc.check)
			}
		})
	}
}

func TestNumberFormats(t *testing.T) {
	for code, want := range map[string]format{
		"General": plain, "0.00": plain, "0%": asPercent, `0.0" %"`: plain, `0.0\%`: plain, "0.00%;[Red]-0.00%": asPercent,
		"yyyy-mm-dd": asDate, "dd.mm.yy": asDate, "[h]:mm": plain, `0 "m²/day"`: plain, "mmm yy": asDate,
	} {
		if got := formatOf(code); got != want {
			t.Errorf("%q: %d, want %d", code, got, want)
		}
	}
}
