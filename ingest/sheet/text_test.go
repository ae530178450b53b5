package sheet

import (
	"archive/zip"
	"bytes"
	"context"
	"encoding/binary"
	"errors"
	"io"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"unicode/utf16"

	"github.com/google/go-cmp/cmp"
	"github.com/xuri/excelize/v2"
)

func write(t *testing.T, name string, b []byte) string {
	t.Helper()
	p := filepath.Join(t.TempDir(), name)
	if err := os.WriteFile(p, b, 0o600); err != nil {
		t.Fatal(err)
	}
	return p
}

func read(t *testing.T, path string) (map[int][]string, error) {
	t.Helper()
	b, err := open(t, path)
	if err != nil {
		return nil, err
	}
	defer b.Close()
	rows := map[int][]string{}
	_, err = b.Verify(context.Background(), 0, func(r *Row) {
		for _, c := range r.Cells {
			rows[r.Number] = append(rows[r.Number], c.Text)
		}
	})
	return rows, err
}

func utf16Bytes(order binary.ByteOrder, s string, mark bool) []byte {
	var b bytes.Buffer
	if mark {
		s = "\ufeff" + s
	}
	for _, u := range utf16.Encode([]rune(s)) {
		_ = binary.Write(&b, order, u) // a buffer does not fail
	}
	return b.Bytes()
}

func TestText(t *testing.T) {
	want := map[int][]string{1: {"Straße", "Fläche"}, 2: {"Öl, \"x\"", "1,5"}, 4: {"a\nb", "2"}}
	const semicolons = "Straße;Fläche\r\n\"Öl, \"\"x\"\"\";1,5\r\n\r\n\"a\nb\";2"
	tests := []struct {
		name string
		data []byte
	}{
		{"UTF8", []byte(semicolons)},
		{"UTF8Mark", []byte("\ufeff" + semicolons)},
		{"UTF16LittleMark", utf16Bytes(binary.LittleEndian, semicolons, true)},
		{"UTF16BigMark", utf16Bytes(binary.BigEndian, semicolons, true)},
		{"UTF16LittleBare", utf16Bytes(binary.LittleEndian, semicolons, false)},
		{"Windows1252", []byte("Stra\xdfe;Fl\xe4che\r\n\"\xd6l, \"\"x\"\"\";1,5\r\n\r\n\"a\nb\";2")},
		{"Tabs", []byte(strings.ReplaceAll(semicolons, ";", "\t"))},
		{"Commas", []byte("Straße,Fläche\n\"Öl, \"\"x\"\"\",\"1,5\"\n\n\"a\nb\",2\n")},
	}
	for _, tc := range tests {
		t.Run(tc.name, func(t *testing.T) {
			t.Parallel()
			got, err := read(t, write(t, "a.csv", tc.data))
			if err != nil {
				t.Fatal(err)
			}
			if d := cmp.Diff(want, got); d != "" {
				t.Error(d)
			}
		})
	}
}

func TestSniffDelimiter(t *testing.T) {
	for head, want := range map[string]rune{
		"a;b\n1,5;2,5\n3,1;4,2\n":    ';',
		"a,b\n1,2\n3,4\n":            ',',
		"a\tb\n1,5\t2,5\n":           '\t',
		"sep=|\na|b\n":               '|',
		"only one column\n1\n2\n":    ',',
		"title\n\nid;area\n1;2\n3;4": ';',
	} {
		if got := SniffDelimiter(head); got != want {
			t.Errorf("%q: %q, want %q", head, got, want)
		}
	}
}

// workbook builds a small workbook and lets edit change the text of its sheet.
func workbook(t *testing.T, edit func(string) string) []byte {
	t.Helper()
	f := excelize.NewFile()
	for r := 1; r <= 10; r++ {
		for c, v := range []any{"B" + ColumnLetters(r), r * 100, float64(r) / 4} {
			ref, _ := excelize.CoordinatesToCellName(c+1, r)
			if err := f.SetCellValue("Sheet1", ref, v); err != nil {
				t.Fatal(err)
			}
		}
	}
	buf, err := f.WriteToBuffer()
	if err != nil {
		t.Fatal(err)
	}
	in, err := zip.NewReader(bytes.NewReader(buf.Bytes()), int64(buf.Len()))
	if err != nil {
		t.Fatal(err)
	}
	var out bytes.Buffer
	w := zip.NewWriter(&out)
	for _, part := range in.File {
		r, err := part.Open()
		if err != nil {
			t.Fatal(err)
		}
		b, err := io.ReadAll(r)
		if err != nil {
			t.Fatal(err)
		}
		if part.Name == "xl/worksheets/sheet1.xml" {
			b = []byte(edit(string(b)))
		}
		p, err := w.Create(part.Name)
		if err != nil {
			t.Fatal(err)
		}
		if _, err := p.Write(b); err != nil {
			t.Fatal(err)
		}
	}
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	return out.Bytes()
}

// A sheet that cannot be read to its end must not pass for a shorter one.
func TestDamageIsNoShortSheet(t *testing.T) {
	tests := []struct {
		name string
		edit func(string) string
		ok   bool
	}{
		{"Whole", func(s string) string { return s }, true},
		{"CutOff", func(s string) string { return s[:len(s)*2/3] }, false},
		{"InvalidReference", func(s string) string { return strings.Replace(s, `r="B6"`, `r="6B"`, 1) }, false},
		{"ReferenceOfAnotherRow", func(s string) string { return strings.Replace(s, `r="B6"`, `r="B7"`, 1) }, false},
		{"UnclosedCell", func(s string) string { return strings.Replace(s, `</c>`, ``, 1) }, false},
		{"TextNumberTooHigh", func(s string) string { return strings.Replace(s, `<v>3</v>`, `<v>9999</v>`, 1) }, false},
		{"RowsOutOfOrder", func(s string) string { return strings.Replace(s, `<row r="6"`, `<row r="2"`, 1) }, false},
		{"WrongDimension", func(s string) string { return strings.Replace(s, `<dimension ref="A1:C10"`, `<dimension ref="A1"`, 1) }, true},
	}
	for _, tc := range tests {
		t.Run(tc.name, func(t *testing.T) {
			t.Parallel()
			rows, err := read(t, write(t, "a.xlsx", workbook(t, tc.edit)))
			var bad *BadFile
			switch {
			case tc.ok && (err != nil || len(rows) != 10):
				t.Errorf("%d rows, %v", len(rows), err)
			case !tc.ok && !errors.As(err, &bad):
				t.Errorf("read %d rows with error %v", len(rows), err)
			}
		})
	}
}

func TestRowsStopsWithItsVisitor(t *testing.T) {
	b, err := open(t, write(t, "a.xlsx", workbook(t, func(s string) string { return s })))
	if err != nil {
		t.Fatal(err)
	}
	defer b.Close()
	stop := errors.New("enough")
	if err := b.Rows(context.Background(), 0, func(*Row) error { return stop }); !errors.Is(err, stop) {
		t.Errorf("error %v", err)
	}
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	if _, err := b.Verify(ctx, 0, func(*Row) {}); !errors.Is(err, context.Canceled) {
		t.Errorf("cancelled: error %v", err)
	}
}

// Dates of the 1900 system: ECMA-376 Part 1, 18.17.4.1 gives serial 1 as
// 1 January 1900 and 2958465 as 31 December 9999; in the 1904 system serial 0
// is 1 January 1904.
func TestSerialDate(t *testing.T) {
	for _, tc := range []struct {
		serial   float64
		from1904 bool
		want     string
	}{
		{1, false, "1900-01-01"}, {59, false, "1900-02-28"}, {61, false, "1900-03-01"}, {2958465, false, "9999-12-31"},
		{0, true, "1904-01-01"}, {36526.75, false, "2000-01-01"},
	} {
		if got, ok := SerialDate(tc.serial, tc.from1904); !ok || got != tc.want {
			t.Errorf("%v: %s, want %s", tc.serial, got, tc.want)
		}
	}
	if got, ok := SerialDate(-1, false); ok {
		t.Errorf("-1: %s", got)
	}
}

func TestColumnLetters(t *testing.T) {
	for i, want := range map[int]string{0: "A", 25: "Z", 26: "AA", 701: "ZZ", 702: "AAA", 16383: "XFD"} {
		if got := ColumnLetters(i); got != want {
			t.Errorf("%d: %s, want %s", i, got, want)
		}
	}
	for i := range 18278 {
		if j, ok := ColumnIndex(ColumnLetters(i)); !ok || j != i {
			t.Fatalf("%d: back as %d", i, j)
		}
	}
}

func TestBadFiles(t *testing.T) {
	ole := append([]byte{0xD0, 0xCF, 0x11, 0xE0, 0xA1, 0xB1, 0x1A, 0xE1}, make([]byte, 600)...)
	for _, tc := range []struct {
		name, file, check string
		data              []byte
	}{
		{"Empty", "a.csv", "empty-file", nil},
		{"Blank", "a.csv", "empty-file", []byte("\n \n")},
		{"OldWorkbook", "a.xls", "old-xls", ole},
		{"Protected", "a.xlsx", "password", append(ole, utf16Bytes(binary.LittleEndian, "EncryptedPackage", false)...)},
		{"ZipOfSomethingElse", "a.xlsx", "no-workbook", []byte("PK\x05\x06" + strings.Repeat("\x00", 18))},
		{"TextNamedWorkbook", "a.xlsx", "no-workbook", []byte("id,area\n1,2\n")},
		{"Binary", "a.csv", "no-text", []byte{1, 0, 2, 0, 0, 0, 7, 8, 0, 1}},
		{"WebPageNamedWorkbook", "a.xls", "no-table", []byte("\xef\xbb\xbf\n<HTML><table><tr><td>id")},
		{"XML", "a.xml", "no-table", []byte("<?xml version=\"1.0\"?><Workbook/>")},
		{"JSON", "a.csv", "no-table", []byte(`[{"id": 1, "area": 2}]`)},
		{"BinaryWorkbook", "a.xlsb", "no-workbook", archive(t, "[Content_Types].xml", "<Types/>", "xl/workbook.bin", "\x83\x01")},
		{"TextDocument", "a.docx", "no-workbook", archive(t, "[Content_Types].xml", "<Types/>", "word/document.xml", "<w/>")},
		{"OtherOffice", "a.ods", "no-workbook", archive(t, "mimetype", "x", "content.xml", "<office/>")},
		{"Archive", "a.zip", "no-workbook", archive(t, "a.csv", "id,area\n1,2\n")},
		{"OpenQuote", "a.csv", "open-quote", []byte("id,area\n\"1,2\n3,4\n")},
	} {
		t.Run(tc.name, func(t *testing.T) {
			t.Parallel()
			_, err := read(t, write(t, tc.file, tc.data))
			var bad *BadFile
			if !errors.As(err, &bad) || bad.Check != tc.check {
				t.Fatalf("error %v, want check %s", err, tc.check)
			}
			if bad.Text == "" || bad.Fix == "" {
				t.Errorf("says too little: %+v", bad)
			}
		})
	}
}

func FuzzText(f *testing.F) {
	f.Add([]byte("id;area\n1;2,5\n\"a\"\"b\";\"c\nd\"\n"))
	f.Add([]byte("\xff\xfea\x00;\x00"))
	f.Add([]byte("\"open\n"))
	f.Fuzz(func(t *testing.T, data []byte) {
		if b := openFuzzed(t, "a.csv", data); b != nil {
			defer b.Close()
			for i := range b.Sheets() {
				readFuzzed(t, b, i)
			}
		}
	})
}
