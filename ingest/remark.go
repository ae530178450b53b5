package ingest

import (
	"fmt"
	"regexp"
	"slices"
	"strings"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/cell"
	"kelvinrow/ingest/finding"
	"kelvinrow/ingest/header"
)

// remarks says once per sheet what holds for all its rows.
func (t *table) remarks() {
	remark := func(sev finding.Severity, check string, f building.Field, c *header.Column, text, fix string) {
		x := finding.Finding{Severity: sev, Check: check, Field: f.Key(), Text: text, Fix: fix}
		if c != nil {
			x.Column = c.Letters()
		}
		t.found.add(x)
	}
	for _, pf := range t.plan.Fields {
		f, ok := building.FieldByKey(pf.Key)
		if !ok {
			continue
		}
		for _, c := range pf.Columns {
			switch {
			case c.Sense == "gross":
				remark(finding.Note, "gross-area", f, c, fmt.Sprintf("gross floor area %q is taken as heated floor area", c.Header), "give the heated area if it is known")
			case c.Sense == "renovation":
				remark(finding.Note, "renovation-year", f, c, fmt.Sprintf("year of renovation %q is taken as the year of the windows", c.Header), "say in a column file what was renewed: year_roof = "+c.Letters()+", or year_windows = none")
			case f == building.MeteredHeat && (c.Sense == "gas" || c.Sense == "oil"):
				remark(finding.Note, "fuel-as-heat", f, c, fmt.Sprintf("%q is taken as metered heat, cooking and hot water included", c.Header), "")
			}
			if f == building.MeteredHeat && c.Sense == "energy" {
				remark(finding.Note, "energy-as-heat", f, c, fmt.Sprintf("%q is taken as metered heat, electricity perhaps included", c.Header), "give the heat alone if it is metered, or say metered_heat = none in a column file")
			}
			if c.Unit.Note != "" {
				remark(finding.Note, "unit-converted", f, c, c.Unit.Note, "")
			}
			if c.Unit.Name == "" && (f == building.FloorArea || f == building.Volume || f == building.MeteredHeat) {
				remark(finding.Note, "unit-assumed", f, c, fmt.Sprintf("%q names no unit and is taken as %s, but where a cell says otherwise", c.Header, f.Info().Unit), fmt.Sprintf("put the unit into the header, or %s [unit] = %s into a column file", pf.Key, c.Letters()))
			}
		}
	}
	t.unread()
	if !t.hasSize() {
		t.noSize()
		return
	}
	if !t.plan.Has(building.UseField.Key()) {
		remark(finding.Warning, "no-use", building.UseField, nil, "no column says what the buildings are used for", "add one, or give use = constant:\"school\" in a column file")
	}
	if dated := slices.ContainsFunc(ages, func(f building.Field) bool { return t.plan.Has(f.Key()) }); !dated {
		remark(finding.Warning, "no-year", building.YearBuilt, nil, "no column says when the buildings were built or renewed", "add one if it is known")
	}
	if !t.plan.Has(building.VentilationField.Key()) {
		remark(finding.Warning, "no-ventilation", building.VentilationField, nil, "no column says how the buildings are ventilated; all count as unknown", "add a column, even where it says \"unknown\" for some")
	}
}

// ages are the fields of which one at least says how old a building is.
var ages = []building.Field{building.YearBuilt, building.YearWall, building.YearRoof, building.YearFloor, building.YearWindows}

// noSize says that rows without a size only add to what other sheets bring,
// and which columns could be one after all.
func (t *table) noSize() {
	f := finding.Finding{Severity: finding.Note, Check: "no-size", Field: building.FloorArea.Key(),
		Text: "no column is recognised as floor area or volume, so the rows only add to buildings whose size another sheet gives"}
	var names []string
	for i := range t.layout.Columns {
		c := &t.layout.Columns[i]
		if c.Key != "" || c.Index >= len(t.evidence) || c.Ignored() || cell.ForeignUnit(c.Header) {
			continue
		}
		if e := t.evidence[c.Index]; e.Filled > 1 && e.Numbers*10 >= (e.Filled-1)*8 {
			names = append(names, fmt.Sprintf("%s %q", c.Letters(), c.Header))
			f.Column += "," + c.Letters()
		}
	}
	if len(names) > 0 {
		f.Severity = finding.Warning
		f.Column = f.Column[1:]
		f.Text += "; it could be one of " + strings.Join(names, ", ")
		f.Fix = fmt.Sprintf("say which in a column file: floor_area = %s", strings.Split(f.Column, ",")[0])
	}
	t.found.add(f)
}

// afterwards says what shows only when all rows are read.
func (t *table) afterwards() {
	if t.out.Rows == 0 {
		t.found.add(finding.Finding{Severity: finding.Warning, Check: "empty-table", Text: "the table has a header and no row of a building below it", Fix: "check whether the rows were lost on the way"})
		return
	}
	if t.undated > 0 && t.building.FileDate == t.report.Date && strings.HasPrefix(t.report.dateFrom, "on ") && !t.report.datedByFile {
		t.report.datedByFile = true
		t.found.add(finding.Finding{Severity: finding.Note, Check: "dated-by-file",
			Text: fmt.Sprintf("rows without a date of their own count as of %s, %s: newer files beat them, older ones do not", t.report.Date, t.report.dateFrom),
			Fix:  "if their data is older, put its date into the file's name, a title such as \"as of 2024-03-01\", or a column"})
	}
}

// reQuantity finds units of energy, transmittance, resistance and flow.
var reQuantity = regexp.MustCompile(`(?i)(?:^|[^\pL])(?:[kmg]wh|[kmg]?j|k?btu|therms?|kw|ach|cfm)(?:$|[^\pL])|w\s*/\s*\(?\s*m|k\s*/\s*w|m[3³]\s*/\s*\(?[hs]|l\s*/\s*s|1/h`)

// unread notes the columns that hold a quantity of the trade and are not read.
func (t *table) unread() {
	for i := range t.layout.Columns {
		c := &t.layout.Columns[i]
		if c.Key != "" || !reQuantity.MatchString(c.Header) || c.Index >= len(t.evidence) || t.evidence[c.Index].Filled < 2 {
			continue
		}
		why := c.How
		switch {
		case strings.HasPrefix(why, "could be"):
			continue // said already
		case why == "":
			why = "its header is not recognised"
		}
		t.found.add(finding.Finding{Severity: finding.Note, Check: finding.UnreadQuantity, Column: c.Letters(), Text: fmt.Sprintf("the column %q is not read: %s", clip(c.Header), why),
			Fix: "if it is one of the fields, say so in a column file"})
	}
}
