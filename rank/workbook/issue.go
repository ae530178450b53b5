package workbook

import (
	"math"
	"slices"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/finding"
)

const issuesSheet = "Data issues"

var severityWords = map[finding.Severity]string{
	finding.Error:   "error: set aside",
	finding.Warning: "warning: value set aside",
	finding.Note:    "note",
}

func (b *book) addIssues() error {
	findings := slices.Clone(b.in.Findings)
	finding.Sort(findings)
	s := b.planFixed(issuesSheet, len(findings))
	by := b.bySeverity()
	l := &list[finding.Finding]{
		about: counted(by[finding.Error], "error") + ", " +
			counted(by[finding.Warning], "warning") + ", " + counted(by[finding.Note], "note"),
		tab: ochre, title: "Data issues",
		notes: []string{
			counted(by[finding.Error], "error") + " (row, sheet or file set aside), " +
				counted(by[finding.Warning], "warning") + " (value set aside, the rest of the row used), " + counted(by[finding.Note], "note") + ".",
			"Rows set aside also stand in a workbook named after their source with -to-fix at the end: mend them there and load that file.",
		},
		frozen: 1, rows: len(findings), table: "issues",
	}
	text := func(band, head string, width float64, get func(*finding.Finding) string) {
		l.columns = append(l.columns, textColumn(b, band, head, width, get))
	}
	const what, where, do = "What kind", "Where", "What to do"
	const wrongWidth, fixWidth = 52, 38
	text(what, "Severity", 23, func(f *finding.Finding) string { return severityWords[f.Severity] })
	text(what, "Check", 18, func(f *finding.Finding) string { return f.Check })
	text(where, "File", 22, func(f *finding.Finding) string { return f.File })
	text(where, "Sheet", 13, func(f *finding.Finding) string { return f.Sheet })
	l.columns = append(l.columns, numberColumn(b, "", where, "Row", 8, plain, 0, func(f *finding.Finding) float64 {
		if f.Row == 0 {
			return math.NaN()
		}
		return float64(f.Row)
	}))
	text(where, "Column", 10, func(f *finding.Finding) string { return f.Column })
	text(where, "Field", 19, func(f *finding.Finding) string { return fieldLabel(f.Field) })
	text(where, "Building", 13, func(f *finding.Finding) string { return f.Building })
	buildingColumn := len(l.columns)
	text(where, "What the cell said", 17, func(f *finding.Finding) string { return f.Raw })
	text(do, "What is wrong", wrongWidth, func(f *finding.Finding) string { return f.Text })
	l.columns[len(l.columns)-1].style = b.st.wrapped()
	text(do, "What to do", fixWidth, func(f *finding.Finding) string { return f.Fix })
	l.columns[len(l.columns)-1].style = b.st.wrapped()

	l.load = func(i int, x *finding.Finding) { *x = findings[i] }
	l.height = func(f *finding.Finding) float64 {
		return rowHeight(wrappedText{f.Text, wrongWidth}, wrappedText{f.Fix, fixWidth})
	}
	l.links = func(k *links, i, row int) {
		if at, ok := b.index[findings[i].Building]; ok && findings[i].Building != "" {
			k.add(buildingColumn, row, b.buildings.target(at))
		}
	}
	return addList(b, &s, l)
}

func fieldLabel(key string) string {
	if f, ok := building.FieldByKey(key); ok {
		return f.Info().Label
	}
	return key
}

func (b *book) bySeverity() (by [3]int) {
	for i := range b.in.Findings {
		if s := b.in.Findings[i].Severity; int(s) < len(by) {
			by[s]++
		}
	}
	return by
}
