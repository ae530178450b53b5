package sheet

import (
	"bytes"
	"context"
	"encoding/binary"
	"encoding/xml"
	"errors"
	"fmt"
	"io"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// sheetRow is what a reader says of a row: its number, and by column what a
// cell holds as it stands in the part.
type sheetRow struct {
	number int
	cells  map[int]rawText
}

type rawText struct {
	kind, style string
	text        string
}

// standardRows reads a sheet part by the standard library, as plainly as can
// be. malformed is its word on the XML; the rows before come out as well.
func standardRows(part []byte) (rows []sheetRow, malformed error) {
	d := xml.NewDecoder(bytes.NewReader(part))
	var path []string
	var row *sheetRow
	var c rawText
	var value, inline string
	var hasValue, isIn, text bool
	column, hints, last := -1, 0, 0
	for {
		t, err := d.Token()
		if err == io.EOF {
			if len(path) > 0 {
				return rows, io.ErrUnexpectedEOF
			}
			return rows, nil
		}
		if err != nil {
			return rows, err
		}
		switch t := t.(type) {
		case xml.StartElement:
			path = append(path, t.Name.Local)
			if i := strings.Join(path, "/"); strings.Contains(i+"/", "/extLst/") || !strings.Contains(i, "/sheetData") {
				continue
			}
			switch t.Name.Local {
			case "row":
				row = &sheetRow{number: last + 1, cells: map[int]rawText{}}
				if r := plainAttr(t, "r"); r != "" {
					row.number, _ = digits([]byte(r))
				}
				column = -1
			case "c":
				c = rawText{kind: plainAttr(t, "t"), style: plainAttr(t, "s")}
				value, inline, hasValue, isIn, hints = "", "", false, false, 0
				column++
				if r := plainAttr(t, "r"); r != "" {
					column, _, _ = splitReference([]byte(r))
				}
			case "v":
				value, hasValue, text = "", true, true
			case "is":
				isIn = true
			case "t":
				text = isIn
			case "rPh":
				hints++
			}
		case xml.EndElement:
			i := strings.Join(path, "/")
			path = path[:len(path)-1]
			if strings.Contains(i+"/", "/extLst/") || !strings.Contains(i, "/sheetData") {
				continue
			}
			switch t.Name.Local {
			case "v", "t":
				text = false
			case "rPh":
				hints--
			case "c":
				if c.text = value; isIn && (c.kind == "inlineStr" || !hasValue) {
					c.text, c.kind = inline, "inlineStr"
				}
				if c.text != "" && row != nil {
					row.cells[column] = c
				}
			case "row":
				if row != nil {
					last = row.number
					rows = append(rows, *row)
					row = nil
				}
			}
		case xml.CharData:
			if text && hints == 0 {
				if path[len(path)-1] == "v" {
					value += string(t)
				} else {
					inline += string(t)
				}
			}
		}
	}
}

func plainAttr(e xml.StartElement, name string) string {
	for _, a := range e.Attr {
		if a.Name.Space == "" && a.Name.Local == name {
			return a.Value
		}
	}
	return ""
}

// oneBlock holds most parts of these tests whole.
const oneBlock = 4 << 10

// ownRows reads a sheet part by the tokens, in blocks of so many bytes.
func ownRows(part []byte, book *xlsx, blockBytes int) ([]Row, int, error) {
	c, err := newCharacters(bytes.NewReader(part))
	if err != nil {
		return nil, 0, err
	}
	var rows []Row
	s := &scanner{x: book, name: "a", merging: true, visit: func(r *Row) error {
		rows = append(rows, Row{r.Number, append([]Cell(nil), r.Cells...)})
		return nil
	}}
	s.tokens = newTokens(context.Background(), &direct{c: c, buf: make([]byte, blockBytes)})
	err = s.read()
	return rows, s.count, err
}

func someTexts() *xlsx {
	x := &xlsx{formats: []format{plain, asDate, asPercent}}
	for _, s := range []string{"Ahorn", "", "ä\nö", "x"} {
		x.texts.add([]byte(s))
	}
	x.texts.seal()
	return x
}

// checkSheet fails where the own reader, in blocks of any size, believes a part
// that the standard library finds malformed and reads less of it, or where both
// read it and not the same.
func checkSheet(t *testing.T, part []byte) {
	t.Helper()
	book := someTexts()
	got, n, err := ownRows(part, book, oneBlock)
	for _, size := range []int{8, 61} {
		again, m, err2 := ownRows(part, book, size)
		if (err == nil) != (err2 == nil) {
			t.Fatalf("in one block %v, in blocks of %d %v", err, size, err2)
		}
		if err == nil && m != n {
			t.Fatalf("%d rows in one block, %d in blocks of %d", n, m, size)
		}
		if d := cmp.Diff(got, again); err == nil && d != "" {
			t.Fatalf("in blocks of %d:\n%s", size, d)
		}
	}
	if err != nil {
		return
	}
	rows, malformed := standardRows(part)
	if malformed != nil {
		if lenient(part, malformed) {
			return
		}
		t.Fatalf("%d rows believed, where there are %d before: %v", n, len(rows), malformed)
	}
	if n != len(rows) {
		t.Fatalf("%d rows, standard library %d", n, len(rows))
	}
	var want []Row
	for _, r := range rows {
		w, err := standardRow(book, r)
		if err != nil {
			t.Fatalf("believed: %v", err)
		}
		if len(w.Cells) > 0 {
			want = append(want, w)
		}
	}
	if d := cmp.Diff(want, got); d != "" {
		t.Fatalf("not as the standard library (-) reads it:\n%s", d)
	}
}

// lenient says which XML may be read although the standard library does not:
// encodings that it is not given a reader for, names of letters beyond ASCII
// that XML does not allow, and instructions, which are passed over unseen.
func lenient(part []byte, err error) bool {
	if bytes.HasPrefix(part, []byte("\xff\xfe")) || bytes.HasPrefix(part, []byte("\xfe\xff")) || bytes.IndexByte(part, 0) >= 0 {
		return true
	}
	if bytes.Contains(part, []byte("<?")) {
		return true
	}
	var s *xml.SyntaxError
	return errors.As(err, &s) && strings.Contains(s.Msg, "invalid XML name")
}

func standardRow(x *xlsx, r sheetRow) (Row, error) {
	s := &scanner{x: x, name: "a", row: Row{Number: r.number}}
	last := -1
	for c := range r.cells {
		last = max(last, c)
	}
	for c := 0; c <= last; c++ {
		cell, ok := r.cells[c]
		if !ok {
			continue
		}
		s.cell.column = c
		style, _ := digits([]byte(cell.style))
		if err := s.put(kindOf([]byte(cell.kind)), style, []byte(cell.text)); err != nil {
			return Row{}, fmt.Errorf("row %d: %w", r.number, err)
		}
	}
	return s.row, nil
}

// Parts of sheets as programs write them, and as none should: each must be
// believed or not, and if so be read as the standard library reads it.
func TestSheetXML(t *testing.T) {
	const row = `<row r="1"><c r="A1"><v>1</v></c></row>`
	sheet := func(data string) string { return `<worksheet><sheetData>` + data + `</sheetData></worksheet>` }
	cell := func(c string) string { return sheet(`<row r="1">` + c + `</row>`) }
	one := func(c Cell) []Row { return []Row{{1, []Cell{c}}} }
	text := func(s string) []Row { return one(Cell{Kind: Text, Text: s}) }
	number := func(v float64, s string) []Row { return one(Cell{Kind: Number, Number: v, Text: s}) }
	for _, tc := range []struct {
		name, part string
		want       []Row // nil: an error
	}{
		{"Plain", sheet(row), number(1, "1")},
		{"Declared", `<?xml version="1.0" encoding="UTF-8"?>` + "\r\n" + sheet(row) + "\n<!-- end -->\n", number(1, "1")},
		{"Mark", "\ufeff" + sheet(row), number(1, "1")},
		{"UTF16Little", string(utf16Bytes(binary.LittleEndian, `<?xml version="1.0" encoding="UTF-16"?>`+cell(`<c t="str"><v>ä😀</v></c>`), true)), text("ä😀")},
		{"UTF16Big", string(utf16Bytes(binary.BigEndian, cell(`<c t="str"><v>ä😀</v></c>`), true)), text("ä😀")},
		{"UTF16Bare", string(utf16Bytes(binary.LittleEndian, cell(`<c t="str"><v>ä</v></c>`), false)), text("ä")},
		{"UTF16HalfCharacter", string(utf16Bytes(binary.LittleEndian, sheet(row), true)) + "\x00\xd8 \x00", nil},
		{"UTF16Odd", string(utf16Bytes(binary.LittleEndian, sheet(row), true)) + " ", nil},
		{"Latin1", `<?xml version="1.0" encoding="iso-8859-1"?>` + cell("<c t=\"str\"><v>\xe4</v></c>"), text("ä")},
		{"UnknownEncoding", `<?xml version="1.0" encoding="runes"?>` + sheet(row), nil},
		{"DeclaredWide", `<?xml version="1.0" encoding="utf-16"?>` + sheet(row), number(1, "1")},
		{"Prefixes", `<x:worksheet xmlns:x="u"><x:sheetData><x:row r="1"><x:c r="A1"><x:v>1</x:v></x:c></x:row></x:sheetData></x:worksheet>`, number(1, "1")},
		{"PrefixesCrossed", `<x:worksheet xmlns:x="u" xmlns:y="u"><x:sheetData></y:sheetData></x:worksheet>`, nil},
		{"ForeignAttributes", sheet(`<row r="1" x:r="9" spans="1:1"><c x:r="Z9" r="A1" x:t="s"><v>1</v></c></row>`), number(1, "1")},
		{"SingleQuotes", sheet(`<row r='1'><c r='A1' ><v >1</v ></c
			></row >`), number(1, "1")},
		{"NoReferences", sheet(`<row><c><v>1</v></c></row>`), number(1, "1")},
		{"Sparse", sheet(`<row r="3"><c r="B3"><v>1</v></c></row><row><c><v>2</v></c></row>`),
			[]Row{{3, []Cell{{}, {Kind: Number, Number: 1, Text: "1"}}}, {4, []Cell{{Kind: Number, Number: 2, Text: "2"}}}}},
		{"Empty", sheet(`<row r="1"><c r="A1" s="1"/><c r="B1"></c><c r="C1"><v/></c><c t="s"><v></v></c></row>`), []Row{}},
		{"NoRows", `<worksheet><sheetData/></worksheet>`, []Row{}},
		{"SharedText", cell(`<c t="s"><v> 2 </v></c>`), text("ä\nö")},
		{"SharedTextEmpty", cell(`<c t="s"><v>1</v></c>`), []Row{}},
		{"SharedTextBeyond", cell(`<c t="s"><v>4</v></c>`), nil},
		{"SharedTextNegative", cell(`<c t="s"><v>-1</v></c>`), nil},
		{"SharedTextNoNumber", cell(`<c t="s"><v>x</v></c>`), nil},
		{"Inline", cell(`<c t="inlineStr"><is><t>a b</t></is></c>`), text("a b")},
		{"InlineKept", cell(`<c t="inlineStr"><is><t xml:space="preserve"> a </t></is></c>`), text(" a ")},
		{"InlineRuns", cell(`<c t="inlineStr"><is><r><rPr><b/></rPr><t>a</t></r><r><t xml:space="preserve"> b</t></r><rPh sb="0" eb="1"><t>no</t></rPh></is></c>`), text("a b")},
		{"InlineBesideValue", cell(`<c t="inlineStr"><is><t>a</t></is><v>7</v></c>`), text("a")},
		{"InlineAsValue", cell(`<c t="inlineStr"><v>a</v></c>`), text("a")},
		{"InlineOfNoKind", cell(`<c><is><t>a</t></is></c>`), text("a")},
		{"Formula", cell(`<c t="str"><f>A1&amp;"x"</f><v>yx</v></c>`), text("yx")},
		{"FormulaPlain", cell(`<c><f>A2+1</f><v>2</v></c>`), number(2, "2")},
		{"FormulaShared", cell(`<c><f t="shared" ref="A1:A2" si="0">A2+1</f><v>2</v></c>`), number(2, "2")},
		{"FormulaWithoutValue", cell(`<c><f>A2</f></c>`), []Row{}},
		{"True", cell(`<c t="b"><v>1</v></c>`), one(Cell{Kind: Bool, Number: 1, Text: "TRUE"})},
		{"False", cell(`<c t="b"><v>0</v></c>`), one(Cell{Kind: Bool, Text: "FALSE"})},
		{"NeitherTrueNorFalse", cell(`<c t="b"><v>2</v></c>`), text("2")},
		{"Fault", cell(`<c t="e"><v>#REF!</v></c>`), one(Cell{Kind: Fault, Text: "#REF!"})},
		{"Date", cell(`<c s="1"><v>61</v></c>`), one(Cell{Kind: Date, Number: 61, Text: "1900-03-01"})},
		{"DateISO", cell(`<c t="d"><v>2026-03-01T12:00:00</v></c>`), one(Cell{Kind: Date, Text: "2026-03-01"})},
		{"DateISONone", cell(`<c t="d"><v>2026-13-01</v></c>`), text("2026-13-01")},
		{"Percent", cell(`<c s="2"><v>0.25</v></c>`), one(Cell{Kind: Number, Number: 0.25, Text: "0.25", Percent: true})},
		{"Exponent", cell(`<c><v>1.5E-2</v></c>`), number(0.015, "0.015")},
		{"AllDigits", cell(`<c><v>0.10000000000000001</v></c>`), number(0.1, "0.1")},
		{"IdleZeros", cell(`<c><v>007.50</v></c>`), number(7.5, "7.5")},
		{"TooLarge", cell(`<c><v>1e999</v></c>`), text("1e999")},
		{"Hexadecimal", cell(`<c><v>0x1p4</v></c>`), text("0x1p4")},
		{"Infinite", cell(`<c><v>inf</v></c>`), text("inf")},
		{"Entities", cell(`<c t="str"><v>&lt;&gt;&amp;&quot;&apos;&#228;&#xe4;&#13;</v></c>`), text("<>&\"'ää\r")},
		{"EntityInTag", sheet(`<row r="&#49;"><c><v>1</v></c></row>`), nil},
		{"LineEnds", cell("<c t=\"str\"><v>a\r\nb\rc</v></c>"), text("a\nb\nc")},
		{"Section", cell(`<c t="str"><v>a<![CDATA[<b>&amp;]]]]>c</v></c>`), text("a<b>&amp;]]c")},
		{"Comments", cell(`<c t="str"><v>a<!-- <v> - --><?x y?>b</v></c>`), text("ab")},
		{"EscapedCharacter", cell(`<c t="str"><v>a_x000A_b_x_</v></c>`), text("a\nb_x_")},
		{"EscapedNothing", cell(`<c t="str"><v>a_x0000_</v></c>`), text("a\ufffd")},
		{"Drawing", `<worksheet><sheetData>` + row + `</sheetData><controls><control><anchor><from><x:row>9</x:row><x:c>1</x:c></from></anchor></control></controls></worksheet>`, number(1, "1")},
		{"Extension", sheet(`<row r="1"><c><v>1</v><extLst><ext><v>2</v></ext></extLst></c><extLst><ext><c><v>3</v></c></ext></extLst></row>`), number(1, "1")},

		{"Nothing", ``, nil},
		{"Blank", "\n", nil},
		{"NoXML", `PK`, nil},
		{"OtherRoot", `<chartsheet><sheetData/></chartsheet>`, nil},
		{"TwoRoots", sheet(row) + sheet(row), nil},
		{"TextBehind", sheet(row) + "x", nil},
		{"TextBefore", "x" + sheet(row), nil},
		{"RootNotClosed", `<worksheet><sheetData>` + row + `</sheetData>`, nil},
		{"RootCut", `<worksheet><sheetData>` + row + `</sheetData></worksheet`, nil},
		{"CutInCell", `<worksheet><sheetData>` + row + `<row r="2"><c r="A2"><v>1`, nil},
		{"CutInComment", sheet(row) + `<!-- `, nil},
		{"CutInInstruction", sheet(row) + `<?x `, nil},
		{"CutInSection", `<worksheet><![CDATA[ `, nil},
		{"CutCharacter", sheet(row) + "\xc3", nil},
		{"EndedTooMuch", sheet(row) + `</worksheet>`, nil},
		{"Crossed", `<worksheet><sheetData><row></sheetData></row></worksheet>`, nil},
		{"RowOutside", `<worksheet><sheetData/>` + row + `</worksheet>`, nil},
		{"CellOutside", sheet(`<c><v>1</v></c>`), nil},
		{"RowInRow", sheet(`<row><row/></row>`), nil},
		{"CellInCell", cell(`<c><c/></c>`), nil},
		{"MarkInValue", cell(`<c><v>1<b/>2</v></c>`), nil},
		{"RowTwice", sheet(row + row), nil},
		{"RowZero", sheet(`<row r="0"/>`), nil},
		{"RowBeyond", sheet(`<row r="1048577"/>`), nil},
		{"RowNoNumber", sheet(`<row r="1a"/>`), nil},
		{"CellTwice", cell(`<c r="A1"><v>1</v></c><c r="A1"><v>2</v></c>`), nil},
		{"CellBackwards", cell(`<c r="B1"><v>1</v></c><c r="A1"><v>2</v></c>`), nil},
		{"CellOfOtherRow", cell(`<c r="A2"><v>1</v></c>`), nil},
		{"CellNoReference", cell(`<c r="11"><v>1</v></c>`), nil},
		{"CellLongReference", cell(`<c r="AAAA1"><v>1</v></c>`), nil},
		{"ReferenceTwice", cell(`<c r="A1" r="B1"><v>1</v></c>`), nil},
		{"KindTwice", cell(`<c t="s" t="str"><v>1</v></c>`), nil},
		{"UnknownEntity", cell(`<c t="str"><v>&nbsp;</v></c>`), nil},
		{"OpenEntity", cell(`<c t="str"><v>a & b</v></c>`), nil},
		{"EntityZero", cell(`<c t="str"><v>&#0;</v></c>`), nil},
		{"EntityHalf", cell(`<c t="str"><v>&#xD800;</v></c>`), nil},
		{"EntityBeyond", cell(`<c t="str"><v>&#x110000;</v></c>`), nil},
		{"UnknownEntityInTag", sheet(`<row spans="&x;"/>`), nil},
		{"SectionEnd", cell(`<c t="str"><v>]]></v></c>`), nil},
		{"SectionOutside", `<![CDATA[ ]]>` + sheet(row), nil},
		{"Hyphens", `<!-- -- -->` + sheet(row), nil},
		{"ControlCharacter", cell("<c t=\"str\"><v>\x01</v></c>"), nil},
		{"NoCharacter", cell("<c t=\"str\"><v>\uffff</v></c>"), nil},
		{"NoUTF8", cell("<c t=\"str\"><v>\xe4</v></c>"), nil},
		{"DocumentType", `<!DOCTYPE x [<!ENTITY a SYSTEM "file:///etc/passwd">]>` + cell(`<c t="str"><v>&a;</v></c>`), nil},
		{"Declaration", `<worksheet><!ELEMENT x></worksheet>`, nil},
		{"NoQuotes", sheet(`<row r=1/>`), nil},
		{"NoValue", sheet(`<row hidden/>`), nil},
		{"NoSpace", sheet(`<row r="1"s="1"/>`), nil},
		{"TagInTag", sheet(`<row r="<"/>`), nil},
		{"NoName", sheet(`<1/>`), nil},
		{"TwoColons", sheet(`<a:b:c/>`), nil},
		{"Deep", `<worksheet>` + strings.Repeat("<a>", maxDepth) + strings.Repeat("</a>", maxDepth) + `</worksheet>`, nil},
		{"ManyAttributes", `<worksheet ` + strings.Repeat(`a="" `, maxAttributes+1) + `/>`, nil},
	} {
		t.Run(tc.name, func(t *testing.T) {
			t.Parallel()
			got, _, err := ownRows([]byte(tc.part), someTexts(), oneBlock)
			switch {
			case tc.want == nil && err == nil:
				t.Fatalf("believed: %v", got)
			case tc.want != nil && err != nil:
				t.Fatal(err)
			case tc.want != nil && len(got)+len(tc.want) > 0:
				if d := cmp.Diff(tc.want, got); d != "" {
					t.Error(d)
				}
			}
			checkSheet(t, []byte(tc.part))
		})
	}
}

// Cut anywhere, a sheet is refused.
func TestCutAnywhere(t *testing.T) {
	const whole = `<?xml version="1.0"?><!-- a --><worksheet xmlns="u"><sheetData><row r="1"><c r="A1" t="s"><v>0</v></c><c r="B1" t="inlineStr"><is><t>a&amp;b<![CDATA[c]]></t></is></c></row>` +
		`<row r="2"><c r="A2"><f>1</f><v>1.5</v></c></row></sheetData></worksheet>`
	if _, n, err := ownRows([]byte(whole), someTexts(), oneBlock); err != nil || n != 2 {
		t.Fatalf("%d rows, %v", n, err)
	}
	for i := range whole {
		for _, size := range []int{8, 64 << 10} {
			if _, n, err := ownRows([]byte(whole[:i]), someTexts(), size); err == nil {
				t.Fatalf("cut to %d bytes, %d rows are believed", i, n)
			}
		}
	}
}

func FuzzSheetXML(f *testing.F) {
	for _, s := range []string{
		`<worksheet><sheetData><row r="1"><c r="A1"><v>1</v></c><c r="C1" t="inlineStr"><is><t xml:space="preserve">x </t></is></c></row></sheetData></worksheet>`,
		`<?xml version="1.0" encoding="UTF-8"?><x:worksheet xmlns:x="u"><x:sheetData><x:row><x:c t="s"><x:v>2</x:v></x:c></x:row></x:sheetData><mergeCells><mergeCell ref="A1:B9"/></mergeCells></x:worksheet>`,
		`<worksheet><sheetData><row><c t="str"><f>A1&amp;"]]"</f><v>a&#xe4;<![CDATA[<]]]>]]<!-- - -->b</v></c><c s="1"><v>1e3</v></c></row></sheetData><extLst><a><row/></a></extLst></worksheet>`,
		`<worksheet><sheetData><row r="2"><c r="A2" t="d"><v>2026-03-01</v></c><c t="b"><v>true</v></c><c t="e"><v>#REF!</v></c><c/></row></sheetData></worksheet>`,
		`<worksheet><sheetData><row r="1"><c r="A1" t="inlineStr"><is><r><t>a</t></r><rPh><t>b</t></rPh></is><v>3</v></c></row></sheetData></worksheet> `,
	} {
		f.Add([]byte(s))
	}
	f.Fuzz(checkSheet)
}
