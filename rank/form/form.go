// Package form writes the survey form: a workbook with a row for each building to
// look at, what is known of it with where that comes from, and room for what is
// found. Package ingest reads it back, and takes what was filled in or changed.
package form

import (
	"context"
	"crypto/sha256"
	"encoding/hex"
	"fmt"
	"io"
	"strconv"
	"strings"

	"github.com/xuri/excelize/v2"

	"kelvinrow/estimate/archetype"
	"kelvinrow/estimate/building"
	"kelvinrow/ingest"
)

// MostBuildings is how many a form can hold: the time that notes take grows with
// the square of their number, and nobody carries a longer list.
const MostBuildings = 500

// Input is what a form is written from. It is only read.
type Input struct {
	Portfolio string
	Date      string // "2026-03-01", of the form
	Choice    string // in one sentence, which buildings these are
	Buildings []*building.Building
	Surveys   []archetype.SurveyCost
	Currency  string
}

// Outcome counts the cells of a form.
type Outcome struct {
	Number      string // of the form
	Known, Open int
}

// Sheets beside the two that the reader knows.
const (
	guideSheet = "How to"
	listsSheet = "Lists"
)

// Rows of the form's sheet.
const (
	titleRow  = 1
	choiceRow = 2
	looksRow  = 3
	asideRow  = 4 // date and surveyor for all rows
	bandRow   = 5
	hintRow   = 6
	headRow   = 7
	firstRow  = 8
)

type writer struct {
	f     *excelize.File
	in    *Input
	st    *styles
	out   Outcome
	lists int // columns of listsSheet
}

// Write writes the form. The same input gives the same bytes.
func Write(ctx context.Context, w io.Writer, in *Input) (_ Outcome, err error) {
	if len(in.Buildings) == 0 {
		return Outcome{}, fmt.Errorf("survey form: no buildings to survey")
	}
	if len(in.Buildings) > MostBuildings {
		return Outcome{}, fmt.Errorf("survey form: %d buildings are more than the %d that a form can hold; choose fewer", len(in.Buildings), MostBuildings)
	}
	b := &writer{f: excelize.NewFile(), in: in, out: Outcome{Number: number(in)}}
	defer func() {
		if e := b.f.Close(); err == nil {
			err = e
		}
	}()
	steps := []func() error{
		b.begin,
		func() error { return b.rows(ctx) },
		b.record, b.validate, b.print, b.guide, b.protect, b.properties,
	}
	for _, step := range steps {
		if err := ctx.Err(); err != nil {
			return Outcome{}, err
		}
		if err := step(); err != nil {
			return Outcome{}, fmt.Errorf("survey form: %w", err)
		}
	}
	if _, err := b.f.WriteTo(w); err != nil {
		return Outcome{}, fmt.Errorf("survey form: %w", err)
	}
	return b.out, nil
}

// number tells forms apart: a hash of what is written into them.
func number(in *Input) string {
	h := sha256.New()
	fmt.Fprintf(h, "%s\x00%s\x00%s\x00%s", ingest.FormVersion, in.Portfolio, in.Date, in.Choice)
	for _, b := range in.Buildings {
		b.WriteHash(h)
	}
	return hex.EncodeToString(h.Sum(nil))[:8]
}

// at names a cell by its column, from 0, and row.
func at(col, row int) string { return letters(col) + strconv.Itoa(row) }

func letters(col int) string {
	s, err := excelize.ColumnNumberToName(col + 1)
	if err != nil {
		return "XFD" // no form comes near
	}
	return s
}

func (b *writer) set(sheet string, col, row int, v any, style int) error {
	cell := at(col, row)
	var err error
	switch v := v.(type) {
	case nil:
	case string:
		err = b.f.SetCellStr(sheet, cell, v) // text stays text, whatever it begins with
	default:
		err = b.f.SetCellValue(sheet, cell, v)
	}
	if err != nil || style == 0 {
		return err
	}
	return b.f.SetCellStyle(sheet, cell, cell, style)
}

// begin makes the sheets and everything above the rows.
func (b *writer) begin() (err error) {
	if b.st, err = newStyles(b.f); err != nil {
		return err
	}
	if err := b.f.SetSheetName("Sheet1", ingest.FormSheet); err != nil {
		return err
	}
	for _, name := range []string{guideSheet, listsSheet, ingest.FormRecord} {
		if _, err := b.f.NewSheet(name); err != nil {
			return err
		}
	}
	return b.head()
}

func (b *writer) head() error {
	const s = ingest.FormSheet
	last := len(columns) - 1
	top := []struct {
		row    int
		height float64
		text   string
		style  int
	}{
		{titleRow, 26, ingest.FormTitle(b.out.Number, b.in.Portfolio), b.st.title()},
		{choiceRow, 15, b.in.Choice, b.st.about()},
		{looksRow, 15, "White cells: to fill in as far as they can be found out. Grey cells: known, point at them to see from where; write over them where they are wrong. Grey cells left as they are do not count as surveyed.", b.st.about()},
	}
	for _, t := range top {
		if err := b.set(s, 0, t.row, t.text, t.style); err != nil {
			return err
		}
		if err := b.f.SetRowHeight(s, t.row, t.height); err != nil {
			return err
		}
	}
	// One answer for all rows, where one surveyor does them in one day.
	for _, aside := range []struct {
		label, cell int
		text        string
		style       int
	}{{0, 2, ingest.FormDateLabel, b.st.open(dateFormat, "left")}, {3, 5, ingest.FormSurveyorLabel, b.st.open(textFormat, "left")}} {
		if err := b.set(s, aside.label, asideRow, aside.text, b.st.label()); err != nil {
			return err
		}
		if err := b.f.MergeCell(s, at(aside.label, asideRow), at(aside.cell-1, asideRow)); err != nil {
			return err
		}
		if err := b.set(s, aside.cell, asideRow, nil, aside.style); err != nil {
			return err
		}
	}
	for i := range columns {
		c := &columns[i]
		if err := b.f.SetColWidth(s, letters(i), letters(i), c.width); err != nil {
			return err
		}
		var band any
		if c.band != "" {
			band = c.band
		}
		if err := b.set(s, i, bandRow, band, b.st.band()); err != nil {
			return err
		}
		if err := b.set(s, i, hintRow, c.hint, b.st.hint()); err != nil {
			return err
		}
		if err := b.set(s, i, headRow, c.head, b.st.head()); err != nil {
			return err
		}
	}
	for k, height := range []float64{19, 14, 44, 40} {
		if err := b.f.SetRowHeight(s, asideRow+k, height); err != nil {
			return err
		}
	}
	filter := fmt.Sprintf("A%d:%s", headRow, at(last, firstRow+len(b.in.Buildings)-1))
	if err := b.f.AutoFilter(s, filter, nil); err != nil {
		return err
	}
	no := false
	if err := b.f.SetSheetView(s, 0, &excelize.ViewOptions{ShowGridLines: &no}); err != nil {
		return err
	}
	return b.f.SetPanes(s, &excelize.Panes{Freeze: true, XSplit: fixed, YSplit: headRow, TopLeftCell: at(fixed, firstRow), ActivePane: "bottomRight"})
}

// rows writes the buildings.
func (b *writer) rows(ctx context.Context) error {
	const s = ingest.FormSheet
	for k, bl := range b.in.Buildings {
		if err := ctx.Err(); err != nil {
			return err
		}
		row := firstRow + k
		if err := b.f.SetRowHeight(s, row, 25); err != nil {
			return err
		}
		for i := range columns {
			if err := b.cell(i, row, bl); err != nil {
				return err
			}
		}
	}
	return nil
}

func (b *writer) cell(i, row int, bl *building.Building) error {
	const s = ingest.FormSheet
	c := &columns[i]
	if i < locked {
		text := bl.ID
		if c.isField {
			text = bl.Text(c.field)
		}
		return b.set(s, i, row, text, b.st.locked())
	}
	format, align := c.look()
	known, ok := known(c, bl)
	if !ok {
		if c.isField && c.field != building.Surveyor {
			b.out.Open++
		}
		return b.set(s, i, row, nil, b.st.open(format, align))
	}
	b.out.Known++
	if err := b.set(s, i, row, c.value(&known.Value), b.st.known(format, align)); err != nil {
		return err
	}
	text := c.origin(known)
	return b.f.AddComment(s, excelize.Comment{Cell: at(i, row), Author: "kelvinrow", Text: text, Width: 300, Height: uint(22 + 17*(1+strings.Count(text, "\n")+len(text)/48))})
}

// known is what is known for a cell. Who surveyed before does not answer for what
// is found now.
func known(c *column, b *building.Building) (*building.Known, bool) {
	if !c.isField || c.field == building.Surveyor {
		return nil, false
	}
	return b.Get(c.field)
}

// look is the number format and the side of a column's cells.
func (c *column) look() (format, align string) {
	if !c.isField {
		if c.key == ingest.FormRemarks {
			return textFormat, "left"
		}
		return dateFormat, "left"
	}
	switch c.field.Info().Type {
	case building.Number:
		return numberFormat, "right"
	case building.Year:
		return "", "center"
	}
	return textFormat, "left"
}

// origin says where a known value comes from.
func (c *column) origin(k *building.Known) string {
	var t strings.Builder
	fmt.Fprintf(&t, "Known: %v", c.value(&k.Value))
	if u := unitShown(c.field); u != "" {
		t.WriteString(" " + u)
	}
	fmt.Fprintf(&t, " (%s)", k.Kind)
	if sh := k.Sheet; sh != nil {
		t.WriteString("\nfrom " + sh.File)
		if sh.Name != "" {
			t.WriteString(", sheet " + sh.Name)
		}
		fmt.Fprintf(&t, ", row %d", k.Row)
		if col := sh.Columns[k.Field]; col != "" {
			if strings.HasPrefix(col, "constant") {
				t.WriteString(", " + col)
			} else {
				t.WriteString(", column " + col)
			}
		}
	}
	if k.Date != "" {
		t.WriteString("\ndated " + k.Date)
	}
	return t.String()
}
