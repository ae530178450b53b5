package form

import (
	"errors"
	"fmt"
	"strings"

	"github.com/xuri/excelize/v2"
)

// part is a heading and what stands below it.
type part struct {
	head  string
	lines []string
}

func (b *writer) parts() []part {
	safety := part{"Safety comes before any cell", []string{
		"An empty cell costs nothing. Leave it empty, and say why under Remarks, wherever finding it out is not safe.",
		"Heights: no roofs, no ladders, no scaffolds without the training, the equipment and a second person. What cannot be seen from the ground, a window or a proper stair is not surveyed.",
		"Asbestos, lead and old mineral wool: do not open, drill, scrape or break linings, ducts, pipe lagging, floor coverings or boards in buildings that may hold them. Sampling and opening-up is work for licensed specialists; ask for the register of hazardous materials first.",
		"Confined spaces, shafts, tanks, crawl spaces and unlit cellars: not without a permit and a second person. Electrical panels stay shut.",
		"Boilers, stoves and flues: look at plates and papers only; measuring, opening and adjusting is licensed practice. Never block or remove an air inlet or a flue. A blower-door test can draw combustion gas into rooms: appliances that burn must be off and made safe first by whoever is licensed for them.",
		"Soot marks, smell of gas, an alarm, loose masonry, sagging floors, bare wires: leave, and report at once to whoever runs the building.",
		"Homes: come announced, with the occupants' consent; photograph no people or papers. Local rules on safety, privacy, heritage and trades go before everything on this form.",
	}}
	fill := part{"How to fill it in", []string{
		"One row is one building. White cells are open questions, grey cells are known: point at one to see its file, sheet, row, date and kind. Both may be written into. Everything else is locked, without a password.",
		"A row counts when it has a survey date and a surveyor, in the row or, for all rows, above the table, and at least one cell filled in or changed. Cells left empty or as they were say nothing.",
		"A grey value that proves right stays as it is; it keeps its origin. A wrong one is written over.",
		"Numbers go in the unit of the header, without the unit. Years may be spans: 1960-69, before 1919. Words are chosen from the list in the cell.",
		"Measure inside, between finished surfaces, for floor area, height and volume; outside for footprint and perimeter. Heated means kept warm in winter on purpose.",
		"A U-value goes in only when it was measured (heat-flow meter over several winter days) or follows from layers that were seen; otherwise give the construction and the years and leave it empty. n50 comes from a test at 50 Pa and from nothing else.",
		"Airflows are those in use, measured at the terminals or read from the unit's panel, not those of the data sheet.",
		"Rows may be filtered and, with the protection taken off, sorted or deleted; headers must stay as they are. On paper each subject has a page; the first two columns and the headers repeat.",
	}}
	back := part{"How to send it back", []string{
		"Save it as .xlsx (an .ods must be saved as .xlsx before it is loaded) and return the whole workbook: two hidden sheets belong to it.",
		"It is loaded with: kelvinrow load FILE.xlsx --portfolio " + quoted(b.in.Portfolio),
		"What was filled in or changed comes in as surveyed (meter readings as metered), dated by its survey date. What cannot be is listed with row and column and stays out; the rest goes in. Loading the same file again changes nothing; a later version under the same name takes its place. Copies filled in by several people are given different names and all count.",
	}}
	parts := []part{safety, fill, back}
	if costs := b.costs(); costs != "" {
		parts = append(parts, part{"What a survey costs", []string{costs}})
	}
	return parts
}

// quoted is a name as a command line takes it.
func quoted(s string) string {
	for _, r := range s {
		if (r < 'a' || r > 'z') && (r < 'A' || r > 'Z') && (r < '0' || r > '9') && r != '-' && r != '_' && r != '.' {
			return fmt.Sprintf("%q", s)
		}
	}
	return s
}

// costs says what the assumptions give for surveying one building.
func (b *writer) costs() string {
	if len(b.in.Surveys) == 0 {
		return ""
	}
	var each []string
	total := 0.0
	for _, s := range b.in.Surveys {
		each = append(each, fmt.Sprintf("%s %.0f", s.Group, s.Cost))
		total += s.Cost
	}
	return fmt.Sprintf("By the assumptions in force, for one building in %s: %s; %.0f for all of it, and %.0f for the %d buildings on this form.",
		b.in.Currency, strings.Join(each, ", "), total, total*float64(len(b.in.Buildings)), len(b.in.Buildings))
}

// guideWidth is the width of the guide's column, in digits.
const guideWidth = 88

func (b *writer) guide() error {
	row := 0
	line := func(text string, style int, size float64) error {
		row++
		if err := b.set(guideSheet, 0, row, text, style); err != nil {
			return err
		}
		lines := len([]rune(text))/(guideWidth+10) + 1 // letters are narrower than digits
		return b.f.SetRowHeight(guideSheet, row, float64(max(lines, 1))*size+3)
	}
	if err := b.f.SetColWidth(guideSheet, "A", "A", guideWidth); err != nil {
		return err
	}
	if err := line("How to use the survey form", b.st.title(), 23); err != nil {
		return err
	}
	for _, p := range b.parts() {
		if err := line(p.head, b.st.heading(), 24); err != nil {
			return err
		}
		for _, l := range p.lines {
			if err := line(l, b.st.prose(), 13); err != nil {
				return err
			}
		}
	}
	portrait, paper, one, zero, fit, no := "portrait", paperA4, 1, 0, true, false
	margin := 0.55
	return errors.Join(
		b.f.SetPageMargins(guideSheet, &excelize.PageLayoutMarginsOptions{Top: &margin, Bottom: &margin}),
		b.f.SetPageLayout(guideSheet, &excelize.PageLayoutOptions{Size: &paper, Orientation: &portrait, FitToWidth: &one, FitToHeight: &zero}),
		b.f.SetSheetProps(guideSheet, &excelize.SheetPropsOptions{FitToPage: &fit}),
		b.f.SetSheetView(guideSheet, 0, &excelize.ViewOptions{ShowGridLines: &no}),
		b.f.SetHeaderFooter(guideSheet, &excelize.HeaderFooterOptions{OddFooter: "&L&8Survey form " + b.out.Number + "&R&8Page &P of &N"}),
	)
}
