package demo

import (
	"archive/zip"
	"bytes"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"regexp"
	"slices"
	"strings"
	"time"

	"github.com/klauspost/compress/flate"
	"github.com/xuri/excelize/v2"
)

// book is a workbook being written.
type book struct {
	file   *excelize.File
	styles map[string]int
	first  bool
}

// page is one sheet of it.
type page struct {
	name   string
	hidden bool
	above  [][]any // titles and header; text of a single cell is a title
	bold   int     // rows of above that are header, from its end
	list   *list
	below  [][]any
}

func newBook() (*book, error) {
	b := &book{file: excelize.NewFile(), styles: map[string]int{}, first: true}
	white, solid := "FFFFFF", excelize.Fill{Type: "pattern", Pattern: 1, Color: []string{"4A5568"}}
	date := "yyyy-mm-dd"
	for _, s := range []struct {
		name  string
		style excelize.Style
	}{
		{"title", excelize.Style{Font: &excelize.Font{Bold: true, Size: 14}}},
		{"head", excelize.Style{Font: &excelize.Font{Bold: true, Color: white}, Fill: solid, Alignment: &excelize.Alignment{WrapText: true, Vertical: "top"}}},
		{"date", excelize.Style{CustomNumFmt: &date}},
	} {
		id, err := b.file.NewStyle(&s.style)
		if err != nil {
			return nil, err
		}
		b.styles[s.name] = id
	}
	return b, nil
}

// add writes a sheet.
func (b *book) add(p page) error {
	if err := b.write(p); err != nil {
		return fmt.Errorf("sheet %q: %w", p.name, err)
	}
	return nil
}

func (b *book) write(p page) error {
	if b.first {
		b.first = false
		if err := b.file.SetSheetName("Sheet1", p.name); err != nil {
			return err
		}
	} else if _, err := b.file.NewSheet(p.name); err != nil {
		return err
	}
	w, err := b.file.NewStreamWriter(p.name)
	if err != nil {
		return err
	}
	width := 1
	if p.list != nil {
		width = len(p.list.columns)
		for i, c := range p.list.columns {
			if err := w.SetColWidth(i+1, i+1, max(c.width, 9)); err != nil {
				return err
			}
		}
		if err := w.SetPanes(&excelize.Panes{Freeze: true, YSplit: len(p.above), TopLeftCell: fmt.Sprintf("A%d", len(p.above)+1), ActivePane: "bottomLeft"}); err != nil {
			return err
		}
	}
	n := 0
	put := func(row []any, style int) error {
		n++
		if len(row) == 0 {
			return nil
		}
		cells := make([]any, len(row))
		for i, v := range row {
			cells[i] = b.cell(v, n, style)
		}
		return w.SetRow(fmt.Sprintf("A%d", n), cells)
	}
	for i, row := range p.above {
		style := 0
		switch {
		case i >= len(p.above)-p.bold:
			style = b.styles["head"]
		case i == 0:
			style = b.styles["title"]
		}
		if err := put(row, style); err != nil {
			return err
		}
		if i == 0 && len(row) == 1 && width > 4 {
			last, err := excelize.CoordinatesToCellName(width, 1)
			if err != nil {
				return err
			}
			if err := w.MergeCell("A1", last); err != nil {
				return err
			}
		}
	}
	if p.list != nil {
		for _, row := range p.list.rows {
			if err := put(row, 0); err != nil {
				return err
			}
		}
	}
	for _, row := range p.below {
		if err := put(row, 0); err != nil {
			return err
		}
	}
	if err := w.Flush(); err != nil {
		return err
	}
	if p.hidden {
		return b.file.SetSheetVisible(p.name, false)
	}
	return nil
}

func (b *book) cell(v any, row, style int) any {
	switch x := v.(type) {
	case formula:
		return excelize.Cell{StyleID: style, Formula: strings.ReplaceAll(x.text, "{r}", fmt.Sprint(row)), Value: x.value}
	case time.Time:
		return excelize.Cell{StyleID: b.styles["date"], Value: x}
	case nil:
		if style == 0 {
			return nil
		}
	}
	return excelize.Cell{StyleID: style, Value: v}
}

// save writes the workbook as one that was last saved on day, so that its bytes
// and the date of its data do not depend on when the demo runs.
func (b *book) save(path, creator, day string) (err error) {
	f := b.file
	defer func() { err = errors.Join(err, f.Close()) }()
	stamp := day + "T09:00:00Z"
	if err := f.SetDocProps(&excelize.DocProperties{Creator: creator, LastModifiedBy: creator, Created: stamp, Modified: stamp}); err != nil {
		return err
	}
	f.SetZipWriter(func(w io.Writer) excelize.ZipWriter { return &parts{w: w} })
	out, err := os.Create(path)
	if err != nil {
		return err
	}
	if err := f.Write(out); err != nil {
		return errors.Join(err, out.Close())
	}
	return out.Close()
}

// parts puts the parts of a workbook into a fixed order: excelize takes them,
// and the list of their types, from maps.
type parts struct {
	w    io.Writer
	list []*part
}

type part struct {
	name    string
	content bytes.Buffer
}

func (p *parts) Create(name string) (io.Writer, error) {
	n := &part{name: name}
	p.list = append(p.list, n)
	return &n.content, nil
}

func (p *parts) AddFS(fs.FS) error { return errors.ErrUnsupported }

const contentTypes = "[Content_Types].xml"

var defaultType = regexp.MustCompile(`<Default [^>]*>(?:\s*</Default>)?`)

func (p *parts) Close() error {
	slices.SortFunc(p.list, func(a, b *part) int { return strings.Compare(a.name, b.name) })
	z := zip.NewWriter(p.w)
	z.RegisterCompressor(zip.Deflate, func(w io.Writer) (io.WriteCloser, error) { return flate.NewWriter(w, 2) })
	for _, n := range p.list {
		content := n.content.Bytes()
		if n.name == contentTypes {
			types := defaultType.FindAll(content, -1)
			slices.SortFunc(types, bytes.Compare)
			i := -1
			content = defaultType.ReplaceAllFunc(content, func([]byte) []byte { i++; return types[i] })
		}
		w, err := z.Create(n.name)
		if err != nil {
			return err
		}
		if _, err := w.Write(content); err != nil {
			return err
		}
	}
	return z.Close()
}
