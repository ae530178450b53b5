package workbook

import (
	"strings"

	"github.com/xuri/excelize/v2"
)

// column is one column of a list: all that is said about it stands in one place,
// so that a column can be added by adding an element.
type column[T any] struct {
	key   string // for formulas; "" where none needs it
	band  string // group of columns, named above the first of them
	head  string // with unit
	width float64
	style int
	right bool // the header stands to the right, above numbers
	aside bool // beside the print area
	bar   bool // with a bar in the cell
	put   func(r *rows, col, style int, x *T)
}

// list is a sheet, or several of them, with one real table.
type list[T any] struct {
	about   string
	measure bool   // ranks a measure
	tab     string // colour
	title   string
	notes   []string // two lines below the title
	columns []column[T]
	frozen  int // columns that stay
	wide    int // pages side by side in print
	rows    int
	table   string
	// load makes ready the i-th row.
	load func(i int, x *T)
	// height of the row, 0 for the ordinary one.
	height func(x *T) float64
	// links of the i-th row, which stands in the given row of the sheet.
	links func(l *links, i, row int)
}

const (
	listBand  = 4 // row of the bands
	listHead  = 5 // row of the header
	listFirst = 6 // first row of data
)

// of returns the letter of the column with the given key, as "X#".
func (l *list[T]) of(key string) string {
	for i := range l.columns {
		if l.columns[i].key == key {
			return letters[i+1] + "#"
		}
	}
	return ""
}

// plan names the sheets of a list, so that others can point at its rows.
func (b *book) plan(candidates []string, n int) spread {
	s := spread{per: b.maxRows - listHead, first: listFirst}
	for i := 0; i == 0 || i*s.per < n; i++ {
		names := candidates
		if i > 0 {
			names = []string{s.sheets[0] + " " + itoa(i+1), "Part " + itoa(i+1) + " of " + s.sheets[0]}
		}
		s.sheets = append(s.sheets, b.tabs.sheet(names...))
	}
	return s
}

// planFixed is plan for a name that was reserved before the measures took theirs.
func (b *book) planFixed(name string, n int) spread {
	delete(b.tabs, strings.ToLower(name))
	return b.plan([]string{name}, n)
}

// addList makes the sheets of a list.
func addList[T any](b *book, s *spread, l *list[T]) error {
	for i, sheet := range s.sheets {
		from := i * s.per
		if err := addListPage(b, sheet, l, from, min(l.rows, from+s.per)); err != nil {
			return err
		}
	}
	return nil
}

func addListPage[T any](b *book, sheet string, l *list[T], from, to int) error {
	pg, err := b.addPage(sheet, l.about, l.tab)
	if err != nil {
		return err
	}
	pg.measure = l.measure
	last := listHead + max(1, to-from)
	r := b.write(pg)
	writeListTop(b, r, l)
	if err := r.close(); err != nil {
		return err
	}
	pg.body = func(r *rows) {
		var x T
		for i := from; i < to; i++ {
			l.load(i, &x)
			h := 0.0
			if l.height != nil {
				h = l.height(&x)
			}
			r.begin(listFirst+i-from, h)
			for c := range l.columns {
				l.columns[c].put(r, c+1, l.columns[c].style, &x)
			}
		}
	}
	if l.links != nil {
		pg.links = func(k *links) {
			for i := from; i < to; i++ {
				l.links(k, i, listFirst+i-from)
			}
		}
	}
	heads, widths, printed := make([]string, len(l.columns)), make([]float64, len(l.columns)), 0
	for i := range l.columns {
		heads[i], widths[i] = l.columns[i].head, l.columns[i].width
		if !l.columns[i].aside {
			printed = i + 1
		}
	}
	if err := b.widths(pg, widths...); err != nil {
		return err
	}
	if err := b.freeze(pg, l.frozen, listHead); err != nil {
		return err
	}
	// The links of the rows are put beside this one.
	if err := b.link(pg, cellName(1, listBand), overviewTarget); err != nil {
		return err
	}
	if err := b.table(pg, l.table, 1, listHead, last, heads); err != nil {
		return err
	}
	if err := cellBars(b, pg, l.columns, last); err != nil {
		return err
	}
	everything := "A1:" + cellName(len(heads), last)
	if err := b.f.SetSheetDimension(sheet, everything); err != nil {
		return err
	}
	for _, e := range []excelize.IgnoredErrorsType{excelize.IgnoredErrorsNumberStoredAsText, excelize.IgnoredErrorsFormula} {
		if err := b.f.AddIgnoredErrors(sheet, everything, e); err != nil {
			return err
		}
	}
	return b.setPrint(pg, layout{
		wide: l.wide, titleRows: "1:" + itoa(listHead), titleCols: "A:" + letters[max(1, l.frozen)],
		area: "A1:" + cellName(printed, last),
	})
}

// cellBars puts a bar behind each number of the columns that want one.
func cellBars[T any](b *book, pg *page, columns []column[T], last int) error {
	for i := range columns {
		if !columns[i].bar {
			continue
		}
		cells := cellName(i+1, listFirst) + ":" + cellName(i+1, last)
		err := b.f.SetConditionalFormat(pg.name, cells, []excelize.ConditionalFormatOptions{{
			Type: "data_bar", Criteria: "=", MinType: "num", MinValue: "0", MaxType: "max", BarColor: "#" + barFill, BarSolid: true,
		}})
		if err != nil {
			return err
		}
	}
	return nil
}

// backText is the link at the top of each sheet.
const backText = "‹ Overview"

const overviewTarget = "'Overview'!A1"

func writeListTop[T any](b *book, r *rows, l *list[T]) {
	r.begin(1, 30)
	r.text(1, b.st.id(look{size: 16, bold: true, color: accent}), l.title)
	for i, n := range l.notes {
		r.begin(2+i, 15)
		r.text(1, b.st.subtitle(), n)
	}
	r.begin(listBand, 16)
	r.text(1, b.st.backLink(), backText)
	band := l.columns[0].band
	for i := 1; i < len(l.columns); i++ {
		c := &l.columns[i]
		if c.band != band {
			band = c.band
			r.text(i+1, b.st.band(), band)
		} else {
			r.blank(i+1, b.st.band())
		}
	}
	heads := make([]wrappedText, len(l.columns))
	for i := range l.columns {
		// Part of the width is taken by the filter's button.
		heads[i] = wrappedText{l.columns[i].head, l.columns[i].width - 3}
	}
	r.begin(listHead, heightOf(9, heads...)+4)
	for i := range l.columns {
		style := b.st.head()
		if l.columns[i].right {
			style = b.st.headRight()
		}
		r.text(i+1, style, l.columns[i].head)
	}
}

// Columns of the usual kinds.

func textColumn[T any](b *book, band, head string, width float64, get func(*T) string) column[T] {
	return column[T]{band: band, head: head, width: width, style: b.st.text(),
		put: func(r *rows, col, style int, x *T) { r.text(col, style, get(x)) }}
}

func numberColumn[T any](b *book, key, band, head string, width float64, format string, decimals int, get func(*T) float64) column[T] {
	return column[T]{key: key, band: band, head: head, width: width, style: b.st.value(format), right: true,
		put: func(r *rows, col, style int, x *T) { r.number(col, style, get(x), decimals) }}
}

// address is street, postcode and town in one line.
func address(street, postcode, town string) string {
	place := strings.TrimSpace(postcode + " " + town)
	if street == "" || place == "" {
		return street + place
	}
	return street + ", " + place
}
