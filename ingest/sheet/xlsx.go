package sheet

import (
	"context"
	"errors"
	"fmt"
	"io"
	"path"
	"strings"
)

// xlsx reads an Office Open XML workbook by its parts. Shared texts and number
// formats are held in memory, the rows are streamed.
type xlsx struct {
	*packed
	sheets   []Info
	targets  []string // part of each sheet
	texts    texts
	formats  []format // by cell style
	from1904 bool
	modified string
	rows     []int // rows that Verify counted, by sheet; -1 before
}

func notAWorkbook(why string) error {
	return &BadFile{"no-workbook", "the file is no .xlsx workbook: " + why, "open it in a spreadsheet program and save it as .xlsx"}
}

func openXLSX(name string) (Book, error) {
	p, err := openArchive(name)
	if err != nil {
		return nil, err
	}
	x := &xlsx{packed: p}
	if err := x.readAll(); err != nil {
		p.file.Close()
		var bad *BadFile
		if errors.As(err, &bad) {
			return nil, bad
		}
		return nil, notAWorkbook(err.Error())
	}
	return x, nil
}

// relation is one part's link to another, by its part name.
type relation struct{ id, kind, target string }

func (x *xlsx) readAll() error {
	if err := x.otherKind(); err != nil {
		return err
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
	if x.part(book) == nil {
		return notAWorkbook("it has no workbook part")
	}
	rels, err := x.relations(book)
	if err != nil {
		return fmt.Errorf("its list of sheets is damaged: %w", err)
	}
	byID := map[string]relation{}
	for _, r := range rels {
		byID[r.id] = r
	}
	if err := x.readBook(book, byID); err != nil {
		return err
	}
	return x.readShared(rels)
}

// otherKind tells archives that are no workbooks by what lies in them.
func (x *xlsx) otherKind() error {
	for _, k := range [][2]string{
		{"content.xml", "it is an OpenDocument file"}, {"word/document.xml", "it is a text document"},
		{"ppt/presentation.xml", "it is a presentation"}, {"xl/workbook.bin", "it is a binary workbook, .xlsb"},
	} {
		if x.part(k[0]) != nil {
			return notAWorkbook(k[1])
		}
	}
	if x.part("[content_types].xml") == nil && x.part("_rels/.rels") == nil && x.part("xl/workbook.xml") == nil {
		return &BadFile{"no-workbook", "the file is an archive of other files and no workbook", "unpack it and give the files in it"}
	}
	return nil
}

// readShared reads what the sheets share; of two parts of a kind, which no
// program writes, the first.
func (x *xlsx) readShared(rels []relation) error {
	var texts, styles bool
	for _, r := range rels {
		var err error
		switch {
		case strings.HasSuffix(r.kind, "/sharedStrings") && !texts:
			texts = true
			err = x.readTexts(r.target)
		case strings.HasSuffix(r.kind, "/styles") && !styles:
			styles = true
			err = x.readStyles(r.target)
		}
		if err != nil {
			return fmt.Errorf("its part %s is damaged: %w", r.target, err)
		}
	}
	return nil
}

func (x *xlsx) readBook(book string, byID map[string]relation) error {
	err := x.each(book, func(t *tokens) error {
		switch string(t.local) {
		case "workbookPr":
			v := t.attr("date1904")
			x.from1904 = v == "1" || v == "true"
		case "sheet":
			r := byID[t.attr("id")]
			info := Info{Name: t.attr("name")}
			state := t.attr("state")
			info.Hidden = state == "hidden" || state == "veryHidden"
			if i := strings.LastIndexByte(r.kind, '/'); i >= 0 && r.kind[i+1:] != "worksheet" {
				info.Other = "a " + r.kind[i+1:]
			}
			x.sheets = append(x.sheets, info)
			x.targets = append(x.targets, r.target)
			x.rows = append(x.rows, -1)
			if len(x.sheets) > maxSheets {
				return &BadFile{"too-big", fmt.Sprintf("the workbook has more than %d sheets", maxSheets), "split the workbook, or save the tables as .csv"}
			}
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
		if f := x.part(t); f != nil {
			all += min(f.UncompressedSize64, maxBookBytes+1) // no sum of a thousand of these overflows
		}
	}
	if all > maxBookBytes {
		return &BadFile{"too-big", fmt.Sprintf("the workbook's sheets unpack to more than %d MB", maxBookBytes>>20), "split the workbook, or save the tables as .csv"}
	}
	return nil
}

// part is an open part of a workbook.
type part struct {
	*tokens
	body io.Closer
}

// open opens a part; a long one is unpacked while it is read.
func (x *xlsx) open(ctx context.Context, name string, limit int64) (*part, error) {
	body, err := x.unpack(name, limit)
	if err != nil {
		return nil, err
	}
	c, err := newCharacters(body)
	if err != nil {
		body.Close()
		return nil, err
	}
	var in feed = &direct{c: c}
	if x.part(name).UncompressedSize64 > 4*blockBytes {
		in = newPump(c)
	}
	return &part{newTokens(ctx, in), body}, nil
}

func (p *part) close() {
	p.in.close()
	p.body.Close() // only read
}

// each calls visit for every start tag of a part, which must be well formed.
func (x *xlsx) each(name string, visit func(*tokens) error) error {
	p, err := x.open(context.Background(), name, maxOtherBytes)
	if err != nil {
		return err
	}
	defer p.close()
	return startTags(p.tokens, visit)
}

func startTags(t *tokens, visit func(*tokens) error) error {
	for {
		switch k, err := t.next(); {
		case err != nil:
			return err
		case k == tokenEOF:
			return nil
		case k != tokenStart:
			continue
		}
		if err := visit(t); err != nil {
			return err
		}
	}
}

// relations reads the relations of a part but those that lead out of the file;
// targets come out as part names.
func (x *xlsx) relations(part string) ([]relation, error) {
	dir, base := path.Split(strings.TrimLeft(strings.ReplaceAll(part, `\`, "/"), "/"))
	var rels []relation
	err := x.each(dir+"_rels/"+base+".rels", func(t *tokens) error {
		if string(t.local) != "Relationship" || t.attr("TargetMode") == "External" {
			return nil
		}
		if len(rels) == maxParts {
			return tooManyParts()
		}
		target := strings.ReplaceAll(t.attr("Target"), `\`, "/")
		if strings.HasPrefix(target, "/") {
			target = strings.TrimLeft(target, "/")
		} else {
			target = path.Join(dir, target)
		}
		rels = append(rels, relation{t.attr("Id"), t.attr("Type"), target})
		return nil
	})
	return rels, err
}

func (x *xlsx) readModified(part string) {
	_ = x.each(part, func(t *tokens) error { // a date is a bonus
		if string(t.local) == "modified" {
			if k, err := t.next(); err == nil && k == tokenText && len(t.data) >= 10 {
				x.modified = string(t.data[:10])
			}
		}
		return nil
	})
}

func (x *xlsx) Sheets() []Info   { return x.sheets }
func (x *xlsx) Modified() string { return x.modified }
func (x *xlsx) Delimiter() rune  { return 0 }
func (x *xlsx) Close() error     { return x.file.Close() }

func (x *xlsx) Verify(ctx context.Context, i int, visit func(*Row)) ([]Merge, error) {
	s := &scanner{x: x, name: x.sheets[i].Name, merging: true}
	err := s.scan(ctx, x.targets[i], func(r *Row) error { visit(r); return nil })
	if err != nil {
		return nil, err
	}
	x.rows[i] = s.count
	return s.merges, nil
}

func (x *xlsx) Rows(ctx context.Context, i int, visit func(*Row) error) error {
	s := &scanner{x: x, name: x.sheets[i].Name}
	if err := s.scan(ctx, x.targets[i], visit); err != nil {
		return err
	}
	if want := x.rows[i]; want >= 0 && want != s.count { // the file was written to meanwhile
		return malformed(s.name, s.last, fmt.Errorf("%d rows came where %d were counted", s.count, want))
	}
	return nil
}
