package workbook

import (
	"archive/zip"
	"bytes"
	"encoding/xml"
	"io"
	"path"
	"strings"
	"testing"
)

// The tests read workbooks with the standard library alone, so that what is
// checked is the file and not the opinion of the library that helped write it.

// cellValue is one cell as the file has it.
type cellValue struct {
	formula string
	value   string // resolved to text where it is text
	typ     string // as the file says: "", "str", "inlineStr", "s", "b", "e"
	style   string
}

// opened is a workbook taken apart.
type opened struct {
	parts  map[string][]byte
	sheets []string                        // in order
	cells  map[string]map[string]cellValue // by sheet and cell
	part   map[string]string               // part of each sheet
	names  map[string]string               // defined names
	links  map[string]map[string]string    // by sheet and cell: target within the workbook
}

func open(t testing.TB, file []byte) *opened {
	t.Helper()
	z, err := zip.NewReader(bytes.NewReader(file), int64(len(file)))
	if err != nil {
		t.Fatal(err)
	}
	o := &opened{
		parts: map[string][]byte{}, cells: map[string]map[string]cellValue{}, part: map[string]string{},
		names: map[string]string{}, links: map[string]map[string]string{},
	}
	for _, f := range z.File {
		r, err := f.Open()
		if err != nil {
			t.Fatal(err)
		}
		if o.parts[f.Name], err = io.ReadAll(r); err != nil {
			t.Fatalf("%s: %v", f.Name, err)
		}
	}
	var wb struct {
		Sheets []struct {
			Name string `xml:"name,attr"`
			ID   string `xml:"http://schemas.openxmlformats.org/officeDocument/2006/relationships id,attr"`
		} `xml:"sheets>sheet"`
		Names []struct {
			Name  string `xml:"name,attr"`
			Local string `xml:"localSheetId,attr"`
			To    string `xml:",chardata"`
		} `xml:"definedNames>definedName"`
	}
	o.decode(t, "xl/workbook.xml", &wb)
	var rels struct {
		Relationship []struct {
			ID     string `xml:"Id,attr"`
			Target string `xml:"Target,attr"`
		}
	}
	o.decode(t, "xl/_rels/workbook.xml.rels", &rels)
	targets := map[string]string{}
	for _, r := range rels.Relationship {
		targets[r.ID] = r.Target
	}
	for _, n := range wb.Names {
		if n.Local == "" {
			o.names[n.Name] = n.To
		} else {
			o.names[n.Name+" of "+wb.Sheets[atoi(n.Local)].Name] = n.To
		}
	}
	shared := o.shared(t)
	for _, s := range wb.Sheets {
		o.sheets = append(o.sheets, s.Name)
		p := path.Join("xl", targets[s.ID])
		if strings.HasPrefix(targets[s.ID], "/") {
			p = targets[s.ID][1:]
		}
		o.part[s.Name] = p
		o.read(t, s.Name, p, shared)
	}
	return o
}

func atoi(s string) int {
	n := 0
	for _, c := range s {
		n = 10*n + int(c-'0')
	}
	return n
}

func (o *opened) decode(t testing.TB, part string, v any) {
	t.Helper()
	if err := xml.Unmarshal(o.parts[part], v); err != nil {
		t.Fatalf("%s: %v", part, err)
	}
}

type richText struct {
	T    string   `xml:"t"`
	Runs []string `xml:"r>t"`
}

func (r richText) String() string { return unescape(r.T + strings.Join(r.Runs, "")) }

// unescape undoes what the format does to text such as _x0041_.
func unescape(s string) string { return strings.ReplaceAll(s, "_x005F_", "_") }

func (o *opened) shared(t testing.TB) (out []string) {
	if o.parts["xl/sharedStrings.xml"] == nil {
		return nil
	}
	var sst struct {
		SI []richText `xml:"si"`
	}
	o.decode(t, "xl/sharedStrings.xml", &sst)
	for _, si := range sst.SI {
		out = append(out, si.String())
	}
	return out
}

func (o *opened) read(t testing.TB, sheet, part string, shared []string) {
	t.Helper()
	var ws struct {
		Rows []struct {
			R int `xml:"r,attr"`
			C []struct {
				R  string   `xml:"r,attr"`
				T  string   `xml:"t,attr"`
				S  string   `xml:"s,attr"`
				F  string   `xml:"f"`
				V  string   `xml:"v"`
				IS richText `xml:"is"`
			} `xml:"c"`
		} `xml:"sheetData>row"`
		Links []struct {
			Ref      string `xml:"ref,attr"`
			Location string `xml:"location,attr"`
		} `xml:"hyperlinks>hyperlink"`
	}
	o.decode(t, part, &ws)
	cells, last := map[string]cellValue{}, 0
	for _, r := range ws.Rows {
		if r.R <= last {
			t.Fatalf("%s: row %d after row %d", sheet, r.R, last)
		}
		last = r.R
		for _, c := range r.C {
			v := cellValue{formula: c.F, value: c.V, typ: c.T, style: c.S}
			switch c.T {
			case "s":
				v.value = shared[atoi(c.V)]
			case "inlineStr":
				v.value = c.IS.String()
			case "str":
				v.value = unescape(c.V)
			}
			if _, twice := cells[c.R]; twice {
				t.Fatalf("%s: cell %s twice", sheet, c.R)
			}
			cells[c.R] = v
		}
	}
	o.cells[sheet] = cells
	o.links[sheet] = map[string]string{}
	for _, l := range ws.Links {
		if _, twice := o.links[sheet][l.Ref]; twice {
			t.Fatalf("%s: link at %s twice", sheet, l.Ref)
		}
		o.links[sheet][l.Ref] = l.Location
	}
}

// column finds the column of a list whose header is head.
func (o *opened) column(t testing.TB, sheet, head string) string {
	t.Helper()
	for c := 1; c < 120; c++ {
		if o.cells[sheet][cellName(c, listHead)].value == head {
			return letters[c]
		}
	}
	t.Fatalf("sheet %s has no column %q", sheet, head)
	return ""
}

// follow returns sheet and cell of a link or of what a name refers to.
func follow(target string) (sheet, cell string) {
	i := strings.LastIndexByte(target, '!')
	if i < 0 {
		return "", ""
	}
	sheet = strings.ReplaceAll(strings.Trim(target[:i], "'"), "''", "'")
	return sheet, strings.ReplaceAll(target[i+1:], "$", "")
}
