package sheet

import (
	"bytes"
	"context"
	"encoding/xml"
	"errors"
	"io"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// openFuzzed opens what a fuzz target made up; nil says that it was refused as
// files are.
func openFuzzed(t *testing.T, name string, data []byte) Book {
	p := filepath.Join(t.TempDir(), name)
	if err := os.WriteFile(p, data, 0o600); err != nil {
		t.Fatal(err)
	}
	c, err := ReadContent(context.Background(), p)
	if err != nil {
		t.Fatal(err)
	}
	b, err := Open(p, c)
	if err != nil {
		var bad *BadFile
		if !errors.As(err, &bad) {
			t.Fatalf("error is no BadFile: %v", err)
		}
		return nil
	}
	return b
}

// readFuzzed reads a sheet twice: whatever it holds, it is read whole or
// refused, and both passes agree.
func readFuzzed(t *testing.T, b Book, i int) {
	var bad *BadFile
	last := 0
	var first []Row
	if _, err := b.Verify(context.Background(), i, func(r *Row) {
		if r.Number <= last {
			t.Fatalf("row %d after %d", r.Number, last)
		}
		last = r.Number
		first = append(first, Row{r.Number, append([]Cell(nil), r.Cells...)})
	}); err != nil {
		if !errors.As(err, &bad) {
			t.Fatalf("error is no BadFile: %v", err)
		}
		return
	}
	var second []Row
	if err := b.Rows(context.Background(), i, func(r *Row) error {
		second = append(second, Row{r.Number, append([]Cell(nil), r.Cells...)})
		return nil
	}); err != nil {
		t.Fatal(err)
	}
	if d := cmp.Diff(first, second); d != "" {
		t.Fatal(d)
	}
}

func FuzzWorkbook(f *testing.F) {
	f.Add(around(f))
	f.Add(archive(f, "xl/workbook.xml", `<workbook><sheets><sheet name="a"/></sheets></workbook>`, "xl/_rels/workbook.xml.rels", `<Relationships/>`))
	f.Add([]byte("PK\x05\x06" + strings.Repeat("\x00", 18)))
	f.Fuzz(func(t *testing.T, data []byte) {
		b := openFuzzed(t, "a.xlsx", data)
		if b == nil {
			return
		}
		defer b.Close()
		for i := range b.Sheets() {
			readFuzzed(t, b, i)
		}
	})
}

// FuzzParts makes up what lies in a workbook rather than the bytes around it,
// which checksums guard.
func FuzzParts(f *testing.F) {
	f.Add(`<workbook xmlns:r="r"><workbookPr date1904="1"/><sheets><sheet name="a" r:id="w"/></sheets></workbook>`,
		`<Relationships><Relationship Id="w" Type="x/worksheet" Target="sheet.xml"/><Relationship Id="t" Type="x/sharedStrings" Target="/xl/strings.xml"/></Relationships>`,
		`<worksheet><sheetData><row r="1"><c r="A1" t="s"><v>1</v></c></row></sheetData></worksheet>`)
	f.Add(`<x:workbook><x:sheets><x:sheet state="hidden" name="&lt;" id="w"/><sheet/></x:sheets></x:workbook>`, `<Relationships><Relationship TargetMode="External" Target="..\.."/></Relationships>`, `<chartsheet/>`)
	f.Fuzz(func(t *testing.T, book, relations, sheet string) {
		b := openFuzzed(t, "a.xlsx", around(t, "xl/workbook.xml", book, "xl/_rels/workbook.xml.rels", relations, "xl/sheet.xml", sheet))
		if b == nil {
			return
		}
		defer b.Close()
		for i := range b.Sheets() {
			readFuzzed(t, b, i)
		}
	})
}

// Shared texts are read as the standard library reads them, or refused.
func FuzzSharedTexts(f *testing.F) {
	f.Add([]byte(`<sst><si><t>Ahorn</t></si><si><r><t xml:space="preserve">a </t></r><r><t>b</t></r><rPh sb="0" eb="1"><t>c</t></rPh><phoneticPr/></si><si/></sst>`))
	f.Add([]byte(`<?xml version="1.0"?><x:sst xmlns:x="u"><x:si><x:t>_x000D_&#10;&amp;<![CDATA[<]]></x:t></x:si></x:sst>`))
	f.Fuzz(func(t *testing.T, part []byte) {
		read := func(size int) (*texts, error) {
			c, err := newCharacters(bytes.NewReader(part))
			if err != nil {
				return nil, err
			}
			out := &texts{}
			r := textReader{part: "a", tokens: newTokens(context.Background(), &direct{c: c, buf: make([]byte, size)})}
			err = r.read(out)
			out.seal()
			return out, err
		}
		got, err := read(oneBlock)
		if _, again := read(9); (err == nil) != (again == nil) {
			t.Fatalf("in one block %v, in small ones %v", err, again)
		}
		if err != nil {
			return
		}
		want, malformed := standardTexts(part)
		if malformed != nil {
			if lenient(part, malformed) {
				return
			}
			t.Fatalf("%d texts believed: %v", len(got.at), malformed)
		}
		if len(want) != len(got.at) {
			t.Fatalf("%d texts, standard library %d", len(got.at), len(want))
		}
		for i, w := range want {
			if w := string(unescape([]byte(w))); got.get(i) != w {
				t.Fatalf("text %d: %q, standard library %q", i, got.get(i), w)
			}
		}
	})
}

func standardTexts(part []byte) (texts []string, malformed error) {
	d := xml.NewDecoder(bytes.NewReader(part))
	var b strings.Builder
	item, text, hints := false, false, 0
	for {
		t, err := d.Token()
		if err == io.EOF {
			return texts, nil
		}
		if err != nil {
			return texts, err
		}
		switch t := t.(type) {
		case xml.StartElement:
			switch t.Name.Local {
			case "si":
				b.Reset()
				item = true
			case "t":
				text = item
			case "rPh":
				hints++
			}
		case xml.EndElement:
			switch t.Name.Local {
			case "si":
				texts = append(texts, b.String())
				item = false
			case "t":
				text = false
			case "rPh":
				hints--
			}
		case xml.CharData:
			if text && hints == 0 {
				b.Write(t)
			}
		}
	}
}

// Styles are well formed, and as many as the standard library counts, or refused.
func FuzzStyles(f *testing.F) {
	f.Add([]byte(`<styleSheet><numFmts count="1"><numFmt numFmtId="164" formatCode="yyyy&quot;-&quot;mm"/></numFmts><cellStyleXfs><xf/></cellStyleXfs><cellXfs><xf numFmtId="164"/><xf numFmtId="9"><alignment/></xf></cellXfs><dxfs/></styleSheet>`))
	f.Add([]byte("\xff\xfe<\x00a\x00/\x00>\x00"))
	f.Fuzz(func(t *testing.T, part []byte) {
		c, err := newCharacters(bytes.NewReader(part))
		if err != nil {
			return
		}
		r := styleReader{custom: map[int]format{}}
		if err := startTags(newTokens(context.Background(), &direct{c: c}), r.start); err != nil {
			return
		}
		d := xml.NewDecoder(bytes.NewReader(part))
		n, in := 0, false
		for {
			k, err := d.Token()
			if err == io.EOF {
				break
			}
			if err != nil {
				if lenient(part, err) {
					return
				}
				t.Fatalf("%d styles believed: %v", len(r.formats), err)
			}
			if e, ok := k.(xml.StartElement); ok {
				switch e.Name.Local {
				case "cellXfs":
					in = true
				case "cellStyles", "dxfs", "cellStyleXfs":
					in = false
				case "xf":
					if in {
						n++
					}
				}
			}
		}
		if n != len(r.formats) {
			t.Fatalf("%d styles, standard library %d", len(r.formats), n)
		}
	})
}
