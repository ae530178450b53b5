package demo

import (
	"fmt"
	"strings"

	"github.com/xuri/excelize/v2"

	"kelvinrow/estimate/building"
)

var english = map[building.Ventilation]string{
	building.Natural: "natural", building.PassiveStack: "passive stack", building.ExtractFan: "extract fan",
	building.Balanced: "balanced", building.BalancedRecovery: "balanced with heat recovery", building.DemandControlled: "demand-controlled",
}

var german = map[building.Ventilation]string{
	building.Natural: "Fensterlüftung", building.PassiveStack: "Schachtlüftung", building.ExtractFan: "Abluftanlage",
	building.Balanced: "Zu- und Abluft", building.BalancedRecovery: "Zu- und Abluft mit WRG", building.DemandControlled: "Bedarfsgeführte Abluft",
}

var frenchVentilation = map[building.Ventilation]string{
	building.Natural: "naturelle", building.PassiveStack: "naturelle par conduit", building.ExtractFan: "simple flux",
	building.Balanced: "double flux", building.BalancedRecovery: "double flux avec récupération", building.DemandControlled: "hygroréglable",
}

var french = map[string]string{"church": "église", "school": "école", "nursery": "crèche"}

// technical is the German-speaking technical department's workbook, one sheet
// for each town, numbers as text with a decimal comma.
func (w *writer) technical() error {
	f := excelize.NewFile()
	for _, town := range towns {
		rows := [][]any{{"Objekt-Nr.", "Baujahr", "Bruttorauminhalt [m³]", "Geschosse", "Fensterfläche [m²]", "Dach erneuert", "Lüftung", "Windlage", "Wohneinheiten"}}
		for i := range w.all {
			t := &w.all[i]
			if t.town != town.name || t.use.IsHouse() || church(t) || w.often(0.35) {
				continue
			}
			gross := t.volumeM3 / 0.8
			if t.storeys <= 3 {
				gross = t.volumeM3 / 0.76
			}
			var roof any
			if t.roofYear > 0 {
				roof = t.roofYear
			}
			var dwellings any
			if t.dwellings > 0 {
				dwellings = t.dwellings
			}
			rows = append(rows, []any{t.id, t.year, w.unless(0.25, thousands(gross)), t.storeys, w.unless(0.4, comma(t.windowM2)), roof,
				w.unless(0.3, german[t.ventilation]), w.unless(0.3, germanExposure[t.exposure]), dwellings})
		}
		if err := table(f, town.name, "Technische Anlagen "+town.name, rows); err != nil {
			return err
		}
	}
	if err := table(f, "Altbestand", "", [][]any{{"Objekt-Nr.", "Bemerkung"}, {"B-0000", "abgerissen"}}); err != nil {
		return err
	}
	if err := f.SetSheetVisible("Altbestand", false); err != nil {
		return err
	}
	if err := f.DeleteSheet("Sheet1"); err != nil {
		return err
	}
	return w.save(f, "technik.xlsx")
}

var germanExposure = [building.NumExposures]string{"normal", "geschützt", "exponiert"}

// thousands writes 12345.6 as 12.345,6.
func thousands(v float64) string {
	s := comma(v)
	if i := strings.IndexByte(s, ','); i > 3 {
		s = s[:i-3] + "." + s[i-3:]
	}
	return s
}

// meters is energy controlling's list, in MWh, with totals by formula.
func (w *writer) meters() error {
	f := excelize.NewFile()
	sheet := "Heat 2024"
	if err := f.SetSheetName("Sheet1", sheet); err != nil {
		return err
	}
	put := func(cell string, v any) error { return f.SetCellValue(sheet, cell, v) }
	for cell, v := range map[string]any{
		"A1": "Metered heat 2024, corrected for nothing", "A3": "Building id", "B3": "Metered year", "C3": "Metered heat [MWh]",
		"D3": "Includes hot water", "E3": "Degree days",
	} {
		if err := put(cell, v); err != nil {
			return err
		}
	}
	row := 4
	for i := range w.all {
		t := &w.all[i]
		if w.often(0.55) {
			continue
		}
		id := t.id
		if w.often(0.1) {
			id += "  "
		}
		heat := t.heatKWh / 1000
		if w.often(0.004) {
			heat *= 1000 // typed in the wrong unit
		}
		for j, v := range []any{id, 2024, heat, yesNo(w.often(0.4)), 3050} {
			cell, err := excelize.CoordinatesToCellName(j+1, row)
			if err != nil {
				return err
			}
			if err := put(cell, v); err != nil {
				return err
			}
		}
		row++
	}
	if err := put(fmt.Sprintf("A%d", row), "Total"); err != nil {
		return err
	}
	if err := f.SetCellFormula(sheet, fmt.Sprintf("C%d", row), fmt.Sprintf("SUM(C4:C%d)", row-1)); err != nil {
		return err
	}
	return w.save(f, "energy-meters.xlsx")
}

// survey is what surveyors measured: few buildings, firm values, newer dates.
func (w *writer) survey() error {
	f := excelize.NewFile()
	rows := [][]any{{"Building id", "Survey date", "Surveyor", "Heated floor area (m²)", "Storeys", "Wall construction", "Glazing",
		"n50 measured (1/h)", "Wall U-value measured (W/m²K)", "Window U-value (W/m²K)", "Window area (m²)", "Occupants"}}
	for i := range w.all {
		t := &w.all[i]
		if !w.often(0.06) {
			continue
		}
		rows = append(rows, []any{t.id, fmt.Sprintf("2025-%02d-%02d", 3+w.r.IntN(7), 1+w.r.IntN(28)), choose(w.r, []string{"T. Quillon", "A. Ferribee", "S. Osmund"}),
			t.areaM2, t.storeys, t.wall, t.glazing, w.unless(0.3, t.n50), w.unless(0.4, t.wallU), w.unless(0.3, t.windowU), w.unless(0.3, t.windowM2), t.occupants})
	}
	if err := table(f, "Survey 2025", "Surveys of spring and summer 2025", rows); err != nil {
		return err
	}
	if err := f.DeleteSheet("Sheet1"); err != nil {
		return err
	}
	return w.save(f, "survey-2025.xlsx")
}

// Big writes n buildings as one wide sheet of 25 columns, for measuring speed.
func Big(path string, n int, seed int64) error {
	f := excelize.NewFile()
	s, err := f.NewStreamWriter("Sheet1")
	if err != nil {
		return err
	}
	head := []any{"Building id", "Name", "Street", "Postcode", "Town", "District", "Use", "Attachment", "Year built", "Windows renewed",
		"Heated floor area (m2)", "Volume (m3)", "Storeys", "Window area (m2)", "Wall construction", "Roof type", "Ground floor", "Glazing",
		"Ventilation", "Exposure", "Heating system", "Energy carrier", "Occupants", "Metered heat (kWh)", "Listed building"}
	if err := s.SetRow("A1", head); err != nil {
		return err
	}
	for i, t := range stock(n, seed) {
		err := s.SetRow(fmt.Sprintf("A%d", i+2), []any{t.id, t.name, t.street, t.postcode, t.town, t.district, t.use.String(), t.attachment.String(),
			t.year, t.windowYear, t.areaM2, t.volumeM3, t.storeys, t.windowM2, t.wall, t.roof, t.floor, t.glazing, english[t.ventilation],
			t.exposure.String(), t.heating, t.carrier, t.occupants, t.heatKWh, yesNo(t.listed)})
		if err != nil {
			return err
		}
	}
	if err := s.Flush(); err != nil {
		return err
	}
	if err := f.SaveAs(path); err != nil {
		return err
	}
	return f.Close()
}
