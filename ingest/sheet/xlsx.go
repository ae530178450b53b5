package sheet

import (
	"archive/zip"
	"context"
	"encoding/xml"
	"errors"
	"fmt"
	"io"
	"path"
	"strconv"
	"strings"

	"golang.org/x/text/encoding/htmlindex"
)

// xlsx reads an Office Open XML workbook by its parts. Shared strings and
// number formats are held in memory, the rows are streamed.
type xlsx struct {
	zip      *zip.ReadCloser
	parts    map[string]*zip.File // by lower-case name without leading slash
	sheets   []Info
	targets  []string // part of each sheet
	strings  []string
	formats  []format // by cell style
	from1904 bool
	modified string
	rows     []int // rows that Verify counted, by sheet; -1 before
}

// format is what a number format makes of a number.
type format uint8

const (
	plain format = iota
	asDate
	asPercent
)

func notAWorkbook(why string) error {
	return &BadFile{"no-workbook", "the file is no .xlsx workbook: " + why, "open it in a spreadsheet program and save it as .xlsx"}
}

func openXLSX(name string) (Book, error) {
	z, err := zip.OpenReader(name)
	if err != nil {
		if errors.Is(err, zip.ErrFormat) {
			return nil, notAWorkbook("its archive is cut or damaged")
		}
		return nil, err
	}
	x := &xlsx{zip: z, parts: map[string]*zip.File{}}
	for _, f := range z.File {
		x.parts[partKey(f.Name)] = f
	}
	if err := x.open(); err != nil {
		z.Close()
		var bad *BadFile
		if errors.As(err, &bad) {
			return nil, err
		}
		return nil, notAWorkbook(err.Error())
	}
	return x, nil
}

func partKey(name string) string {
	return strings.ToLower(strings.TrimLeft(strings.ReplaceAll(name, `\`, "/"), "/"))
}

type relation struct{ id, kind, target string }

func (x *xlsx) open() error {
	for _, k := range [][2]string{
		{"content.xml", "it is an OpenDocument file"}, {"word/document.xml", "it is a text document"},
		{"ppt/presentation.xml", "it is a presentation"}, {"xl/workbook.bin", "it is a binary workbook, .xlsb"},
	} {
		if x.parts[k[0]] != nil {
			return notAWorkbook(k[1])
		}
	}
	if x.parts["[content_types].xml"] == nil && x.parts["_rels/.rels"] == nil && x.parts["xl/workbook.xml"] == nil {
		return &BadFile{"no-workbook", "the file is an archive of other files and no workbook", "unpack it and give the files in it"}
	}
	book := "xl/workbook.xml"
	if rels, err := x.relations(""); err == nil {
		for _, r := range rels {
			if strings.HasSuffix(r.kind, "/officeDocument") {
				book = r.target
			}
			if strings.HasSuffix(r.kind, "/core-properties") {
				x.readModified(r.target)
			}
		}
	}
	if x.parts[partKey(book)] == nil {
		return notAWorkbook("it has no workbook part")
	}
	rels, err := x.relations(book)
	if err != nil {
		return fmt.Errorf("its list of sheets is damaged: %w", err)
	}
	byID := map[string]relation{}
	for _, r := range rels {
		byID[r.id] = r
		var err error
		switch {
		case strings.HasSuffix(r.kind, "/sharedStrings"):
			err = x.readStrings(r.target)
		case strings.HasSuffix(r.kind, "/styles"):
			err = x.readStyles(r.target)
		}
		if err != nil {
			return fmt.Errorf("its part %s is damaged: %w", r.target, err)
		}
	}
	return x.readBook(book, byID)
}

func (x *xlsx) readBook(book string, byID map[string]relation) error {
	err := x.each(book, func(d *xml.Decoder, e xml.StartElement) error {
		switch e.Name.Local {
		case "workbookPr":
			v := attr(e, "date1904")
			x.from1904 = v == "1" || v == "true"
		case "sheet":
			r := byID[attr(e, "id")]
			info := Info{Name: attr(e, "name")}
			state := attr(e, "state")
			info.Hidden = state == "hidden" || state == "veryHidden"
			if _, kind, ok := cutLast(r.kind, "/"); ok && kind != "worksheet" {
				info.Other = "a " + kind
			}
			x.sheets = append(x.sheets, info)
			x.targets = append(x.targets, r.target)
			x.rows = append(x.rows, -1)
		}
		return nil
	})
	if err != nil {
		return fmt.Errorf("its list of sheets is damaged: %w", err)
	}
	if len(x.sheets) == 0 {
		return notAWorkbook("it lists no sheets")
	}
	var all uint64
	for _, t := range x.targets {
		if f := x.parts[partKey(t)]; f != nil {
			all += f.UncompressedSize64
		}
	}
	if all > maxBookBytes || len(x.sheets) > maxSheets {
		return &BadFile{"too-big", fmt.Sprintf("the workbook has %d sheets of %d MB in all, more than %d sheets or %d MB", len(x.sheets), all>>20, maxSheets, maxBookBytes>>20),
			"split the workbook, or save the tables as .csv"}
	}
	return nil
}

func cutLast(s, sep string) (before, after string, ok bool) {
	i := strings.LastIndex(s, sep)
	if i < 0 {
		return s, "", false
	}
	return s[:i], s[i+len(sep):], true
}

// attr returns an attribute by local name. A sheet has both sheetId and r:id,
// so the match is of the whole name.
func attr(e xml.StartElement, local string) string {
	for _, a := range e.Attr {
		if a.Name.Local == local {
			return a.Value
		}
	}
	return ""
}

// decoder opens a part; what it unpacks to is bounded whatever the directory says.
func (x *xlsx) decoder(name string, limit int64) (*xml.Decoder, io.Closer, error) {
	f := x.parts[partKey(name)]
	if f == nil {
		return nil, nil, fmt.Errorf("part %q is missing", name)
	}
	if f.UncompressedSize64 > uint64(limit) {
		return nil, nil, tooBig(name, limit)
	}
	r, err := f.Open()
	if err != nil {
		return nil, nil, err
	}
	d := xml.NewDecoder(&bounded{r: r, left: limit, limit: limit, name: name})
	d.CharsetReader = func(charset string, in io.Reader) (io.Reader, error) {
		enc, err := htmlindex.Get(charset)
		if err != nil {
			return nil, err
		}
		return enc.NewDecoder().Reader(in), nil
	}
	return d, r, nil
}

func tooBig(name string, limit int64) error {
	return &BadFile{"too-big", fmt.Sprintf("part %q unpacks to more than %d MB", name, limit>>20), "split the workbook, or save the table as .csv"}
}

type bounded struct {
	r           io.Reader
	left, limit int64
	name        string
}

func (b *bounded) Read(p []byte) (int, error) {
	if b.left <= 0 {
		return 0, tooBig(b.name, b.limit)
	}
	n, err := b.r.Read(p[:min(int64(len(p)), b.left)])
	b.left -= int64(n)
	return n, err
}

// each calls visit for every start element of a part, which must be well formed.
func (x *xlsx) each(name string, visit func(*xml.Decoder, xml.StartElement) error) error {
	d, c, err := x.decoder(name, maxOtherBytes)
	if err != nil {
		return err
	}
	defer c.Close()
	for {
		t, err := d.Token()
		if err == io.EOF {
			return nil
		}
		if err != nil {
			return err
		}
		if e, ok := t.(xml.StartElement); ok {
			if err := visit(d, e); err != nil {
				return err
			}
		}
	}
}

// relations reads the relations of a part; targets come out as part names.
func (x *xlsx) relations(part string) ([]relation, error) {
	dir, base := path.Split(strings.TrimLeft(strings.ReplaceAll(part, `\`, "/"), "/"))
	var rels []relation
	err := x.each(dir+"_rels/"+base+".rels", func(_ *xml.Decoder, e xml.StartElement) error {
		if e.Name.Local != "Relationship" || attr(e, "TargetMode") == "External" {
			return nil
		}
		t := strings.ReplaceAll(attr(e, "Target"), `\`, "/")
		if strings.HasPrefix(t, "/") {
			t = strings.TrimLeft(t, "/")
		} else {
			t = path.Join(dir, t)
		}
		rels = append(rels, relation{attr(e, "Id"), attr(e, "Type"), t})
		return nil
	})
	return rels, err
}

func (x *xlsx) readModified(part string) {
	_ = x.each(part, func(d *xml.Decoder, e xml.StartElement) error { // a date is a bonus
		if e.Name.Local == "modified" {
			if t, err := d.Token(); err == nil {
				if c, ok := t.(xml.CharData); ok && len(c) >= 10 {
					x.modified = string(c[:10])
				}
			}
		}
		return nil
	})
}

func (x *xlsx) readStrings(part string) error {
	if x.parts[partKey(part)] == nil {
		return nil // cells that refer to a missing part fail by themselves
	}
	d, c, err := x.decoder(part, maxTextBytes)
	if err != nil {
		return err
	}
	defer c.Close()
	var b strings.Builder
	inText, phonetic := false, 0
	for {
		t, err := d.Token()
		if err == io.EOF {
			return nil
		}
		if err != nil {
			return err
		}
		switch t := t.(type) {
		case xml.StartElement:
			switch t.Name.Local {
			case "si":
				b.Reset()
			case "t":
				inText = true
			case "rPh":
				phonetic++
			}
		case xml.EndElement:
			switch t.Name.Local {
			case "si":
				if len(x.strings) >= maxTexts {
					return tooBig(part, maxTextBytes)
				}
				x.strings = append(x.strings, unescape(b.String()))
			case "t":
				inText = false
			case "rPh":
				phonetic--
			}
		case xml.CharData:
			if inText && phonetic == 0 {
				b.Write(t)
			}
		}
	}
}

// unescape undoes the format's own escapes of characters XML cannot hold: _x000D_.
func unescape(s string) string {
	if !strings.Contains(s, "_x") {
		return s
	}
	var b strings.Builder
	for i := 0; i < len(s); {
		if strings.HasPrefix(s[i:], "_x") && len(s) >= i+7 && s[i+6] == '_' {
			if n, err := strconv.ParseUint(s[i+2:i+6], 16, 16); err == nil {
				b.WriteRune(rune(n))
				i += 7
				continue
			}
		}
		b.WriteByte(s[i])
		i++
	}
	return b.String()
}

func (x *xlsx) readStyles(part string) error {
	if x.parts[partKey(part)] == nil {
		return nil
	}
	custom := map[int]string{}
	cells := 0
	return x.each(part, func(_ *xml.Decoder, e xml.StartElement) error {
		switch e.Name.Local {
		case "numFmt":
			id, _ := strconv.Atoi(attr(e, "numFmtId"))
			custom[id] = attr(e, "formatCode")
		case "cellXfs":
			cells = 1
		case "cellStyles", "dxfs":
			cells = 0
		case "xf":
			if cells == 1 {
				id, _ := strconv.Atoi(attr(e, "numFmtId"))
				code, ok := custom[id]
				f := plain
				switch {
				case ok && dateFormat(code) || !ok && builtInDate(id):
					f = asDate
				case ok && percentFormat(code) || !ok && (id == 9 || id == 10):
					f = asPercent
				}
				x.formats = append(x.formats, f)
			}
		}
		return nil
	})
}

// builtInDate knows the date formats that workbooks name by number only; hours
// and minutes without a day are no dates.
func builtInDate(id int) bool {
	return id >= 14 && id <= 17 || id == 22 || id >= 27 && id <= 31 || id == 36 || id >= 50 && id <= 54 || id == 57 || id == 58
}

// dateFormat reports whether a number format shows a day or a year.
func dateFormat(code string) bool {
	quoted := false
	for i := 0; i < len(code); i++ {
		switch c := code[i]; {
		case c == '"':
			quoted = !quoted
		case quoted:
		case c == '\\' || c == '_' || c == '*':
			i++
		case c == '[':
			for i < len(code) && code[i] != ']' {
				i++
			}
		case c == ';':
			return false
		case c == 'y' || c == 'Y' || c == 'd' || c == 'D':
			return true
		case c == 'G' || c == 'g': // General
			return false
		}
	}
	return false
}

// percentFormat reports whether a number format shows a number times a hundred.
func percentFormat(code string) bool {
	quoted := false
	for i := 0; i < len(code); i++ {
		switch c := code[i]; {
		case c == '"':
			quoted = !quoted
		case quoted:
		case c == '\\' || c == '_' || c == '*':
			i++
		case c == '%':
			return true
		}
	}
	return false
}

func (x *xlsx) Sheets() []Info   { return x.sheets }
func (x *xlsx) Modified() string { return x.modified }
func (x *xlsx) Delimiter() rune  { return 0 }
func (x *xlsx) Close() error     { return x.zip.Close() }

func (x *xlsx) Verify(ctx context.Context, i int, visit func(*Row)) ([]Merge, error) {
	s := &scanner{x: x, name: x.sheets[i].Name, strict: true}
	n, err := s.scan(ctx, x.targets[i], func(r *Row) error { visit(r); return nil })
	if err != nil {
		return nil, err
	}
	x.rows[i] = n
	return s.merges, nil
}

func (x *xlsx) Rows(ctx context.Context, i int, visit func(*Row) error) error {
	s := &scanner{x: x, name: x.sheets[i].Name}
	n, err := s.scan(ctx, x.targets[i], visit)
	if err != nil {
		return err
	}
	if want := x.rows[i]; want >= 0 && want != n {
		return malformed(s.name, s.last, fmt.Errorf("%d rows came where %d were counted", n, want))
	}
	return nil
}
