package form

import (
	"errors"
	"fmt"
	"strconv"
	"strings"
	"unicode/utf16"

	"github.com/xuri/excelize/v2"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest"
	"kelvinrow/ingest/header"
)

// record writes, on a sheet that is not shown, what stands in the cells to fill:
// what comes back the same was not surveyed.
func (b *writer) record() error {
	const s = ingest.FormRecord
	for i, v := range []string{ingest.FormMark, ingest.FormVersion, b.in.Portfolio, b.in.Date, b.out.Number} {
		if err := b.set(s, i, 1, v, 0); err != nil {
			return err
		}
	}
	n := 0
	for i := range columns {
		c := &columns[i]
		if c.key == "" {
			continue
		}
		for k, v := range []string{c.key, c.head, c.unitNamed()} {
			if err := b.set(s, n, 2+k, v, 0); err != nil {
				return err
			}
		}
		for k, bl := range b.in.Buildings {
			var v any
			if known, ok := known(c, bl); ok {
				v = c.value(&known.Value)
			} else if c.key == header.IDKey {
				v = bl.ID
			}
			if err := b.set(s, n, ingest.FormFirst+k, v, 0); err != nil {
				return err
			}
		}
		n++
	}
	return errors.Join(b.f.SetSheetVisible(s, false, true), b.f.SetSheetVisible(listsSheet, false, true))
}

// validate tells what the cells of each column may hold.
func (b *writer) validate() error {
	const s = ingest.FormSheet
	for i := locked; i < len(columns); i++ {
		c := &columns[i]
		v := excelize.NewDataValidation(true)
		v.SetSqref(fmt.Sprintf("%s:%s", at(i, firstRow), at(i, firstRow+len(b.in.Buildings)-1)))
		use, err := b.rule(c, v)
		if err != nil {
			return err
		}
		if use {
			if err := b.f.AddDataValidation(s, v); err != nil {
				return err
			}
		}
		if c.key == header.SurveyDateKey {
			v := excelize.NewDataValidation(true)
			v.SetSqref(at(2, asideRow))
			if err := dateRule(v); err != nil {
				return err
			}
			if err := b.f.AddDataValidation(s, v); err != nil {
				return err
			}
		}
	}
	return nil
}

func dateRule(v *excelize.DataValidation) error {
	v.SetError(excelize.DataValidationErrorStyleStop, "Survey date", "Write a date from 2000 on, such as 2026-03-01.")
	const firstOf2000 = "36526" // as a day serial
	return v.SetRange(firstOf2000, "", excelize.DataValidationTypeDate, excelize.DataValidationOperatorGreaterThanOrEqual)
}

// rule sets what a column may hold; false where anything goes.
func (b *writer) rule(c *column, v *excelize.DataValidation) (bool, error) {
	if !c.isField {
		if c.key == header.SurveyDateKey {
			return true, dateRule(v)
		}
		return false, nil
	}
	title := c.field.Info().Label
	switch c.field.Info().Type {
	case building.Word:
		return true, b.listRule(v, title, offered(c.field))
	case building.YesNo:
		return true, b.listRule(v, title, []string{"yes", "no"})
	case building.Year:
		// Only a warning: "1960-69" and "before 1919" are answers too.
		v.SetError(excelize.DataValidationErrorStyleWarning, title, "This is not a year. Keep it only if it is a span such as 1960-69 or before 1919.")
		return true, v.SetRange(1000, thisYear(b.in.Date)+1, excelize.DataValidationTypeWhole, excelize.DataValidationOperatorBetween)
	case building.Number:
		unit := unitShown(c.field)
		if unit != "" {
			unit = " " + unit
		}
		low, high, ok := c.bounds()
		if !ok {
			v.SetError(excelize.DataValidationErrorStyleStop, title, "Write a number"+unit+", not negative.")
			return true, v.SetRange("0", "", excelize.DataValidationTypeDecimal, excelize.DataValidationOperatorGreaterThanOrEqual)
		}
		v.SetError(excelize.DataValidationErrorStyleStop, title, fmt.Sprintf("Write a number from %s to %s%s.", plain(low), plain(high), unit))
		return true, v.SetRange(plain(low), plain(high), excelize.DataValidationTypeDecimal, excelize.DataValidationOperatorBetween)
	}
	return false, nil
}

// plain is a number without an exponent.
func plain(v float64) string { return strconv.FormatFloat(v, 'f', -1, 64) }

func thisYear(date string) int {
	y := 0
	if _, err := fmt.Sscanf(date, "%4d", &y); err != nil || y < 1000 {
		return 9998
	}
	return y
}

// offered are the words to choose from; what is not known is left empty.
func offered(f building.Field) []string {
	var out []string
	for _, w := range building.Words(f) {
		if f != building.VentilationField || w != building.VentilationUnknown.String() {
			out = append(out, w)
		}
	}
	return out
}

// listRule puts the words on the sheet of lists and lets the cells choose.
func (b *writer) listRule(v *excelize.DataValidation, title string, words []string) error {
	col := b.lists
	b.lists++
	for i, w := range words {
		if err := b.set(listsSheet, col, i+1, w, 0); err != nil {
			return err
		}
	}
	v.SetSqrefDropList(fmt.Sprintf("%s!$%s$1:$%s$%d", listsSheet, letters(col), letters(col), len(words)))
	v.SetError(excelize.DataValidationErrorStyleStop, title, "Choose one of the list: "+strings.Join(words, ", ")+".")
	return nil
}

// Print set-up: A4 lying, the columns of one subject to a page.
const (
	paperA4    = 9
	printScale = 72 // per cent: some 196 digits of width to a page; the widest takes 181
)

func (b *writer) print() error {
	const s = ingest.FormSheet
	for i := range columns {
		if columns[i].turn {
			if err := b.f.InsertPageBreak(s, at(i, 1)); err != nil {
				return err
			}
		}
	}
	landscape, paper, order, scale := "landscape", paperA4, "downThenOver", uint(printScale)
	side, above, end, margin := 0.4, 0.75, 0.6, 0.3
	return errors.Join(
		b.f.SetPageLayout(s, &excelize.PageLayoutOptions{Size: &paper, Orientation: &landscape, PageOrder: &order, AdjustTo: &scale}),
		b.f.SetPageMargins(s, &excelize.PageLayoutMarginsOptions{Left: &side, Right: &side, Top: &above, Bottom: &end, Header: &margin, Footer: &margin}),
		b.f.SetHeaderFooter(s, &excelize.HeaderFooterOptions{
			OddHeader: "&L&\"Arial,Bold\"&11" + coded(ingest.FormTitle(b.out.Number, b.in.Portfolio), 60) + "&\"Arial,Regular\"&8\n" + coded(b.in.Choice, 150),
			OddFooter: "&L&8Grey: known. White: to fill in. A row counts with its date and surveyor.&R&8Page &P of &N",
		}),
		b.f.SetDefinedName(&excelize.DefinedName{Name: "_xlnm.Print_Area", Scope: s, RefersTo: fmt.Sprintf("%s!$A$%d:$%s$%d", s, bandRow, letters(len(columns)-1), firstRow+len(b.in.Buildings)-1)}),
		b.f.SetDefinedName(&excelize.DefinedName{Name: "_xlnm.Print_Titles", Scope: s,
			RefersTo: fmt.Sprintf("%s!$A:$%s,%s!$%d:$%d", s, letters(fixed-1), s, bandRow, headRow)}),
	)
}

// coded is text as a page's header takes it: an ampersand begins a code there, and
// all of it together may have 255 UTF-16 characters.
func coded(s string, most int) string {
	wide := func(r []rune) int { return len(utf16.Encode(r)) + strings.Count(string(r), "&") }
	r := []rune(s)
	if wide(r) > most {
		for wide(r) > most-1 {
			r = r[:len(r)-1]
		}
		r = append(r, '…')
	}
	return strings.ReplaceAll(string(r), "&", "&&")
}

// protect keeps hands off the structure; there is no password, for whoever knows
// what they do.
func (b *writer) protect() error {
	for _, s := range []string{ingest.FormSheet, guideSheet, listsSheet, ingest.FormRecord} {
		err := b.f.ProtectSheet(s, &excelize.SheetProtectionOptions{
			SelectLockedCells: true, SelectUnlockedCells: true, FormatColumns: true, FormatRows: true, AutoFilter: true, Sort: true,
			EditObjects: s == ingest.FormSheet, // notes of one's own
		})
		if err != nil {
			return err
		}
	}
	b.f.SetActiveSheet(0)
	return b.f.ProtectWorkbook(&excelize.WorkbookProtectionOptions{LockStructure: true})
}

func (b *writer) properties() error {
	at := b.in.Date + "T00:00:00Z"
	err := b.f.SetDocProps(&excelize.DocProperties{
		Title: ingest.FormTitle(b.out.Number, b.in.Portfolio), Creator: "kelvinrow", LastModifiedBy: "kelvinrow",
		Description: "Survey form " + b.out.Number, Created: at, Modified: at,
	})
	return errors.Join(err, b.f.SetAppProps(&excelize.AppProperties{Application: "kelvinrow"}), b.st.err)
}
