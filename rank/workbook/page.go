package workbook

import (
	"bytes"
	"fmt"
	"math"
	"strings"

	"github.com/xuri/excelize/v2"
)

// page is one sheet. excelize keeps everything around the rows: widths, panes,
// print set-up, tables, charts. The rows are the page's own: top is made at
// once, body row by row while the file is written.
type page struct {
	name    string
	about   string // for the contents: short
	part    string
	measure bool // ranks a measure

	top   bytes.Buffer
	body  func(*rows)
	links func(*links)
}

// paperA4 as the file format numbers it.
const paperA4 = 9

// layout is the print set-up of a page.
type layout struct {
	portrait  bool
	wide      int    // pages side by side; 0 is 1
	titleRows string // repeated on each page, such as "1:5"
	titleCols string // such as "A:C"
	area      string // such as "A1:L90"; "" is all
}

func (b *book) addPage(name, about string, tab string) (*page, error) {
	pg := &page{name: name, about: about}
	if len(b.pages) == 0 {
		if err := b.f.SetSheetName("Sheet1", name); err != nil {
			return nil, err
		}
	} else if _, err := b.f.NewSheet(name); err != nil {
		return nil, fmt.Errorf("sheet %q: %w", name, err)
	}
	b.pages = append(b.pages, pg)
	pg.part = fmt.Sprintf("xl/worksheets/sheet%d.xml", len(b.pages))
	no := false
	if err := b.f.SetSheetView(name, 0, &excelize.ViewOptions{ShowGridLines: &no}); err != nil {
		return nil, err
	}
	opaque := "FF" + tab
	return pg, b.f.SetSheetProps(name, &excelize.SheetPropsOptions{TabColorRGB: &opaque})
}

// write gives a row writer for the top of a page.
func (b *book) write(pg *page) *rows { return &rows{ctx: b.ctx, w: &pg.top} }

func (b *book) setPrint(pg *page, l layout) error {
	landscape, paper, zero, order := "landscape", paperA4, 0, "overThenDown"
	if l.portrait {
		landscape = "portrait"
	}
	wide := max(1, l.wide)
	err := b.f.SetPageLayout(pg.name, &excelize.PageLayoutOptions{
		Size: &paper, Orientation: &landscape, FitToWidth: &wide, FitToHeight: &zero, PageOrder: &order,
	})
	if err != nil {
		return err
	}
	yes := true
	if err := b.f.SetSheetProps(pg.name, &excelize.SheetPropsOptions{FitToPage: &yes}); err != nil {
		return err
	}
	side, end, margin := 0.4, 0.55, 0.3
	if err := b.f.SetPageMargins(pg.name, &excelize.PageLayoutMarginsOptions{
		Left: &side, Right: &side, Top: &side, Bottom: &end, Header: &margin, Footer: &margin,
	}); err != nil {
		return err
	}
	if err := b.f.SetHeaderFooter(pg.name, &excelize.HeaderFooterOptions{
		OddFooter: "&L&8" + cut(strings.ReplaceAll(b.title, "&", "&&"), 90) + "&C&8&A&R&8Page &P of &N",
	}); err != nil {
		return err
	}
	if titles := printTitles(pg.name, l); titles != "" {
		if err := b.f.SetDefinedName(&excelize.DefinedName{Name: "_xlnm.Print_Titles", RefersTo: titles, Scope: pg.name}); err != nil {
			return err
		}
	}
	if l.area != "" {
		from, to, _ := strings.Cut(l.area, ":")
		return b.f.SetDefinedName(&excelize.DefinedName{
			Name: "_xlnm.Print_Area", RefersTo: quoteSheet(pg.name) + "!" + absolute(from) + ":" + absolute(to), Scope: pg.name,
		})
	}
	return nil
}

func printTitles(sheet string, l layout) string {
	var out []string
	for _, span := range []string{l.titleCols, l.titleRows} {
		if from, to, ok := strings.Cut(span, ":"); ok {
			out = append(out, quoteSheet(sheet)+"!$"+from+":$"+to)
		}
	}
	return strings.Join(out, ",")
}

// absolute turns "B7" into "$B$7".
func absolute(cell string) string {
	i := strings.IndexAny(cell, "0123456789")
	return "$" + cell[:i] + "$" + cell[i:]
}

// name gives a cell a name that formulas use.
func (b *book) name(name string, pg *page, col, row int) error {
	err := b.f.SetDefinedName(&excelize.DefinedName{
		Name: name, RefersTo: quoteSheet(pg.name) + "!" + absolute(cellName(col, row)),
	})
	if err != nil {
		return fmt.Errorf("name %s: %w", name, err)
	}
	return nil
}

func (b *book) link(pg *page, cell, target string) error {
	return b.f.SetCellHyperLink(pg.name, cell, target, "Location")
}

// table makes a real table of a range. Only one with at least a row below its
// header is one; heads are the header cells from column col on.
func (b *book) table(pg *page, name string, col, row, last int, heads []string) error {
	if last <= row {
		return nil
	}
	for i, h := range heads {
		if err := b.f.SetCellStr(pg.name, cellName(col+i, row), h); err != nil {
			return err
		}
	}
	stripes := true
	err := b.f.AddTable(pg.name, &excelize.Table{
		Range: cellName(col, row) + ":" + cellName(col+len(heads)-1, last),
		Name:  b.names.defined("table", slug(name)), StyleName: "TableStyleLight1", ShowRowStripes: &stripes,
	})
	if err != nil {
		return fmt.Errorf("table on sheet %q: %w", pg.name, err)
	}
	return nil
}

func (b *book) freeze(pg *page, cols, rowsAbove int) error {
	at := cellName(cols+1, rowsAbove+1)
	pane := "bottomRight"
	if cols == 0 {
		pane = "bottomLeft"
	}
	return b.f.SetPanes(pg.name, &excelize.Panes{
		Freeze: true, XSplit: cols, YSplit: rowsAbove, TopLeftCell: at, ActivePane: pane,
		Selection: []excelize.Selection{{SQRef: at, ActiveCell: at, Pane: pane}},
	})
}

func (b *book) widths(pg *page, w ...float64) error {
	for i, x := range w {
		if err := b.f.SetColWidth(pg.name, letters[i+1], letters[i+1], x); err != nil {
			return err
		}
	}
	return nil
}

// lettersPerDigit is how many letters of ordinary text fit into the width of a
// digit, in which columns are measured. In Arial it is about 1.25; the rest is
// reserve for other programs and printers.
const lettersPerDigit = 1.18

func linesIn(size float64, c wrappedText) int {
	return lines(c.text, c.width*lettersPerDigit*fontSize/size)
}

// ordinaryHeight is the height of a row of one line, in points.
const ordinaryHeight = 15

// heightOf is the height of a row that holds wrapped text in cells of given
// widths.
func heightOf(size float64, cells ...wrappedText) float64 {
	n := 1
	for _, c := range cells {
		n = max(n, linesIn(size, c))
	}
	if n == 1 {
		return ordinaryHeight
	}
	return math.Ceil(float64(n)*size*1.28) + 4
}

// rowHeight is heightOf for the rows of a list, which are of size 9 where they
// are wrapped: 0, the ordinary height, for one line.
func rowHeight(cells ...wrappedText) float64 {
	if h := heightOf(9, cells...); h > ordinaryHeight {
		return h
	}
	return 0
}

type wrappedText struct {
	text  string
	width float64
}
