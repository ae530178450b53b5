package assumption

import (
	"errors"
	"fmt"
	"io"
	"slices"

	"github.com/xuri/excelize/v2"

	"kelvinrow/estimate/archetype"
	"kelvinrow/estimate/climate"
	"kelvinrow/ingest/sheet"
)

// Creator and Description mark the workbook in its properties.
const (
	Creator     = "kelvinrow"
	Description = "Assumptions"
)

const (
	font      = "Arial"
	readMe    = "Read me"
	lists     = "Lists"
	headerRow = 3
	// roomRows is how many rows below the last keep the lists of words.
	roomRows = 500
)

// Write writes everything in force as a workbook that Read takes back.
func Write(w io.Writer, set *archetype.Set) error {
	f := excelize.NewFile()
	defer f.Close()
	b := &book{f: f, lists: map[string]string{}}
	if err := b.styles(); err != nil {
		return err
	}
	if err := f.SetSheetName("Sheet1", readMe); err != nil {
		return err
	}
	steps := []func() error{
		func() error { return write(b, &economicsTable, []archetype.Economics{set.Economics}) },
		func() error { return write(b, &carriersTable, set.Carriers) },
		func() error { return write(b, &climatesTable, climateRows(set.Climates)) },
		func() error { return write(b, &usesTable, set.Uses[:]) },
		func() error { return write(b, &measuresTable, set.Measures) },
		func() error { return write(b, &detailsTable, detailRows(set.Measures)) },
		func() error { return write(b, &rulesTable, set.Rules) },
		func() error { return write(b, &buildupsTable, layerRows(set)) },
		func() error { return write(b, &materialsTable, set.Materials) },
		func() error { return write(b, &surveysTable, set.Surveys) },
		func() error { return write(b, &wordsTable, set.Words) },
		b.writeLists,
		func() error { return b.explain(set) },
	}
	for _, step := range steps {
		if err := step(); err != nil {
			return fmt.Errorf("assumptions workbook: %w", err)
		}
	}
	if err := f.SetDocProps(&excelize.DocProperties{
		Title: "kelvinrow assumptions", Creator: Creator, LastModifiedBy: Creator, Description: Description + ", version " + set.Hash()[:12],
		Created: "2000-01-01T00:00:00Z", Modified: "2000-01-01T00:00:00Z",
	}); err != nil {
		return err
	}
	_, err := f.WriteTo(w)
	return err
}

type book struct {
	f                               *excelize.File
	head, about, wrap, plain, title int
	lists                           map[string]string // reference by the words, joined
	columns                         [][]string        // of the sheet Lists
	abouts                          [][2]string       // sheet, what it holds
}

func (b *book) styles() (err error) {
	make := func(s *excelize.Style) int {
		id, e := b.f.NewStyle(s)
		if e != nil && err == nil {
			err = e
		}
		return id
	}
	wrap := &excelize.Alignment{WrapText: true, Vertical: "top"}
	b.head = make(&excelize.Style{
		Font: &excelize.Font{Family: font, Size: 9, Bold: true, Color: "FFFFFF"}, Fill: excelize.Fill{Type: "pattern", Pattern: 1, Color: []string{"2F4B5C"}},
		Alignment: &excelize.Alignment{WrapText: true, Vertical: "center"},
	})
	b.about = make(&excelize.Style{Font: &excelize.Font{Family: font, Size: 10, Color: "444444"}, Alignment: &excelize.Alignment{Vertical: "center"}})
	b.wrap = make(&excelize.Style{Font: &excelize.Font{Family: font, Size: 9}, Alignment: wrap})
	b.plain = make(&excelize.Style{Font: &excelize.Font{Family: font, Size: 9}, Alignment: &excelize.Alignment{Vertical: "top"}})
	b.title = make(&excelize.Style{Font: &excelize.Font{Family: font, Bold: true, Size: 16, Color: "2F4B5C"}})
	return err
}

// write writes one table as a sheet.
func write[T any](b *book, t *table[T], rows []T) error {
	if _, err := b.f.NewSheet(t.sheet); err != nil {
		return err
	}
	b.abouts = append(b.abouts, [2]string{t.sheet, t.about})
	end := sheet.ColumnLetters(len(t.columns) - 1)
	last := headerRow + len(rows)
	set := func(col, row int, v any) error {
		return b.f.SetCellValue(t.sheet, fmt.Sprintf("%s%d", sheet.ColumnLetters(col), row), v)
	}
	if err := set(0, 1, t.about); err != nil {
		return err
	}
	for k, c := range t.columns {
		letters := sheet.ColumnLetters(k)
		style := b.plain
		if c.width >= 36 {
			style = b.wrap
		}
		if err := errors.Join(
			set(k, headerRow, c.head),
			b.f.SetColWidth(t.sheet, letters, letters, c.width),
			b.f.SetCellStyle(t.sheet, fmt.Sprintf("%s%d", letters, headerRow+1), fmt.Sprintf("%s%d", letters, last+roomRows), style),
		); err != nil {
			return err
		}
		for i := range rows {
			if v := c.get(&rows[i]); v != nil {
				if err := set(k, headerRow+1+i, v); err != nil {
					return err
				}
			}
		}
	}
	if err := errors.Join(
		b.f.SetCellStyle(t.sheet, "A1", "A1", b.about),
		b.f.SetRowHeight(t.sheet, 1, 20),
		b.f.SetCellStyle(t.sheet, fmt.Sprintf("A%d", headerRow), fmt.Sprintf("%s%d", end, headerRow), b.head),
		b.f.SetRowHeight(t.sheet, headerRow, 46),
		b.f.SetPanes(t.sheet, &excelize.Panes{
			Freeze: true, XSplit: 1, YSplit: headerRow, TopLeftCell: fmt.Sprintf("B%d", headerRow+1), ActivePane: "bottomRight",
		}),
	); err != nil {
		return err
	}
	if err := b.f.AutoFilter(t.sheet, fmt.Sprintf("A%d:%s%d", headerRow, end, last), nil); err != nil {
		return err
	}
	for k, c := range t.columns {
		if c.words == nil {
			continue
		}
		letters := sheet.ColumnLetters(k)
		v := excelize.NewDataValidation(true)
		v.SetSqref(fmt.Sprintf("%s%d:%s%d", letters, headerRow+1, letters, last+roomRows))
		v.SetSqrefDropList(b.list(c.words))
		v.SetError(excelize.DataValidationErrorStyleStop, c.head, "Choose a word from the list (sheet Lists).")
		if err := b.f.AddDataValidation(t.sheet, v); err != nil {
			return err
		}
	}
	if err := b.print(t.sheet); err != nil {
		return err
	}
	return b.f.SetDefinedName(&excelize.DefinedName{
		Name: "_xlnm.Print_Titles", RefersTo: fmt.Sprintf("'%s'!$%d:$%d", t.sheet, headerRow, headerRow), Scope: t.sheet,
	})
}

// print makes a sheet one page wide, on its side.
func (b *book) print(name string) error {
	landscape, width, height, fit, a4 := "landscape", 1, 0, true, 9
	return errors.Join(
		b.f.SetSheetProps(name, &excelize.SheetPropsOptions{FitToPage: &fit}),
		b.f.SetPageLayout(name, &excelize.PageLayoutOptions{Orientation: &landscape, FitToWidth: &width, FitToHeight: &height, Size: &a4}),
		b.f.SetHeaderFooter(name, &excelize.HeaderFooterOptions{OddFooter: "&L&8&A&R&8Page &P of &N"}),
	)
}

// list puts words on the sheet Lists, once, and returns where they stand.
func (b *book) list(words []string) string {
	key := fmt.Sprint(words)
	if ref, ok := b.lists[key]; ok {
		return ref
	}
	b.columns = append(b.columns, words)
	letters := sheet.ColumnLetters(len(b.columns) - 1)
	b.lists[key] = fmt.Sprintf("'%s'!$%s$2:$%s$%d", lists, letters, letters, len(words)+1)
	return b.lists[key]
}

func (b *book) writeLists() error {
	if _, err := b.f.NewSheet(lists); err != nil {
		return err
	}
	if err := b.f.SetCellValue(lists, "A1", "Words that cells of the other sheets may hold. Nothing here is read."); err != nil {
		return err
	}
	for i, words := range b.columns {
		for k, w := range words {
			if err := b.f.SetCellValue(lists, fmt.Sprintf("%s%d", sheet.ColumnLetters(i), k+2), w); err != nil {
				return err
			}
		}
	}
	return b.f.SetColWidth(lists, "A", sheet.ColumnLetters(max(0, len(b.columns)-1)), 22)
}

// explain writes the first sheet.
func (b *book) explain(set *archetype.Set) error {
	row := 0
	line := func(height float64, style int, texts ...string) error {
		row++
		for i, t := range texts {
			cell := fmt.Sprintf("%s%d", sheet.ColumnLetters(i), row)
			if err := b.f.SetCellStr(readMe, cell, t); err != nil {
				return err
			}
			if err := b.f.SetCellStyle(readMe, cell, cell, style); err != nil {
				return err
			}
		}
		return b.f.SetRowHeight(readMe, row, height)
	}
	if err := b.f.SetColWidth(readMe, "A", "A", 24); err != nil {
		return err
	}
	if err := b.f.SetColWidth(readMe, "B", "B", 110); err != nil {
		return err
	}
	rest := [][2]string{
		{"What this is", "Everything a screening rests on beside the data of the buildings: prices, costs, climates, conditions of use, default rules. It came with the program, or from whoever edited it last."},
		{"To change something", "Edit the cells, save, and give the file back: kelvinrow rank --assumptions FILE. The program checks all of it first, tells everything that is wrong at once, with sheet, row and column, and takes all or nothing."},
		{"Rows and columns", "Rows may be added, removed and sorted (layers of a build-up and months of a climate keep their order). Columns are found by their header; leave the headers as they are. Empty cells of words and years mean any."},
		{"Versions", "What a run rests on is stored with it, under a version made from the content. Changing a note makes a new version too."},
		{"Whose numbers", "The starter values are for a cool temperate climate, many by judgement; each row names its source. Put national tables, your tenders and your contracts in their place before money is spent on them. The climates that come with the program are of invented places."},
		{"Safety", "The rules of ventilation, fire, moisture and heritage are not in this workbook: local codes and licensed practice decide."},
	}
	if err := line(28, b.title, "Assumptions"); err != nil {
		return err
	}
	if err := line(18, b.about, "Version "+set.Hash()[:12]); err != nil {
		return err
	}
	for _, r := range rest {
		if err := line(34, b.wrap, r[0], r[1]); err != nil {
			return err
		}
	}
	row++
	if err := line(20, b.head, "Sheet", "What it holds"); err != nil {
		return err
	}
	for _, a := range b.abouts {
		if err := line(34, b.wrap, a[0], a[1]); err != nil {
			return err
		}
		if err := b.f.SetCellHyperLink(readMe, fmt.Sprintf("A%d", row), "'"+a[0]+"'!A1", "Location"); err != nil {
			return err
		}
	}
	b.f.SetActiveSheet(0)
	return b.print(readMe)
}

func climateRows(climates []climate.Climate) []climateMonth {
	var out []climateMonth
	for i := range climates {
		place := climates[i]
		place.Months = [12]climate.Month{}
		for m, data := range climates[i].Months {
			out = append(out, climateMonth{place: place, terrain: place.Terrain.String(), month: float64(m + 1), data: data})
		}
	}
	return out
}

func detailRows(measures []archetype.Measure) []detail {
	var out []detail
	for i := range measures {
		m := &measures[i]
		for _, name := range m.TargetNames() {
			low, high := m.TargetSpread(name)
			out = append(out, detail{m.Key, name, m.Target[name], low, high, archetype.TargetMeaning(name)})
		}
	}
	return out
}

func layerRows(set *archetype.Set) []layerRow {
	var out []layerRow
	conductivity := func(material string, c float64) float64 {
		if m, ok := set.Material(material); ok && m.ConductivityWMK == c {
			return 0 // the material's: an edit of that reaches the layer
		}
		return c
	}
	for i := range set.Buildups {
		b := &set.Buildups[i]
		for k, l := range b.Layers {
			r := layerRow{name: b.Name, element: b.Element, bothInside: b.BothInside, layer: l, gaps: l.Gaps.String()}
			r.conductivity = conductivity(l.Name, l.ConductivityWMK)
			r.second = conductivity(l.BridgeName, l.BridgeConductivityWMK)
			if k == 0 {
				r.source, r.notes = b.Source, b.Notes
			}
			out = append(out, r)
		}
	}
	return slices.Clip(out)
}
