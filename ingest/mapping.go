package ingest

import (
	"crypto/sha256"
	"fmt"
	"slices"
	"strings"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/cell"
	"kelvinrow/ingest/check"
	"kelvinrow/ingest/finding"
	"kelvinrow/ingest/header"
	"kelvinrow/ingest/sheet"
)

// CheckMapping returns an error that names the line of the first constant that
// its field cannot have.
func CheckMapping(m *header.Mapping, today string) error {
	if m == nil {
		return nil
	}
	t := &table{opt: Options{Today: today}, report: &Report{}}
	nextYear := t.nextYear()
	for _, s := range m.Sections {
		for _, e := range s.Entries {
			if !e.Fixed {
				continue
			}
			f, ok := building.FieldByKey(e.Field)
			if !ok {
				return fmt.Errorf("line %d: %q cannot be the same for a whole sheet; give its column", e.Line, e.Field)
			}
			fr := t.fieldReader(f, nil)
			v, st, problem := fr.value(max(nextYear-1, 0), nil, sheet.Cell{Kind: sheet.Text, Text: e.Constant}, e.Unit)
			if st != cell.OK {
				text := problem.Text
				if text == "" {
					text = fmt.Sprintf("%q says nothing for %s", e.Constant, f.Info().Label)
				}
				if problem.Fix != "" {
					text += "; " + problem.Fix
				}
				return fmt.Errorf("line %d: %s", e.Line, text)
			}
			v.Field = f
			var alone check.Values
			alone[f] = &v
			for _, p := range check.Row(&alone, nextYear) {
				return fmt.Errorf("line %d: %s; %s", e.Line, p.Text, p.Fix)
			}
		}
	}
	return nil
}

// Reading is what beside its content decides what a file says, in one line:
// content read in the same way says the same.
func Reading(opt Options, name string) string {
	return byColumns(opt, name) + opt.Words.String()
}

// byColumns is the reading but for words.
func byColumns(opt Options, name string) string {
	kind := opt.Kind
	if kind == building.Default {
		kind = building.Registered
	}
	if opt.Mapping == nil {
		return kind.String()
	}
	var b strings.Builder
	for _, s := range opt.Mapping.Sections {
		if !s.About(name) {
			continue
		}
		fmt.Fprintf(&b, "[%q %v]\n", strings.ToLower(s.Sheet), s.File != "" || s.Sheet != "")
		for _, e := range s.Entries {
			fmt.Fprintf(&b, "%s %q %q %q %v %v\n", e.Field, e.Unit, e.Column, e.Constant, e.Fixed, e.Unread)
		}
	}
	if b.Len() == 0 {
		return kind.String()
	}
	return fmt.Sprintf("%s by column file %x", kind, sha256.Sum256([]byte(b.String())))[:len(kind.String())+len(" by column file ")+12]
}

// UnusedMapping finds the sections and lines of a mapping that had no effect on
// any sheet. Files that were not read again, being known, are no reason to
// complain.
func UnusedMapping(m *header.Mapping, reports []*Report, known []string) []finding.Finding {
	if m == nil {
		return nil
	}
	var out []finding.Finding
	say := func(sev finding.Severity, line int, field, text, fix string) {
		out = append(out, finding.Finding{Severity: sev, Check: "mapping", File: m.Called(), Row: line, Field: field, Text: text, Fix: fix})
	}
	for _, s := range m.Sections {
		if slices.ContainsFunc(known, s.About) {
			continue
		}
		var files, sheets []string
		used := map[int]bool{}
		hit, read, anySheet := false, false, false
		for _, r := range reports {
			if !s.About(r.File) {
				continue
			}
			files = append(files, r.File)
			for i := range r.Sheets {
				sh := &r.Sheets[i]
				anySheet = true
				if sh.Name != "" {
					sheets = append(sheets, fmt.Sprintf("%q", sh.Name))
				}
				if s.Sheet != "" && !strings.EqualFold(s.Sheet, sh.Name) {
					continue
				}
				hit = true
				read = read || sh.HeaderRow > 0 || sh.DataFrom > 0
				for _, n := range sh.lines {
					used[n] = true
				}
			}
		}
		switch {
		case len(files) == 0 && s.File != "":
			say(finding.Note, s.Line, "", fmt.Sprintf("the section is about %s, which is not among the files given", s.File), "")
			continue
		case !hit && s.Sheet != "" && anySheet:
			has := "has only " + strings.Join(sheets, ", ")
			if len(sheets) == 0 {
				has = "has no sheets with names"
			}
			say(finding.Warning, s.Line, "", fmt.Sprintf("the section is about sheet %q, and %s %s", s.Sheet, strings.Join(files, ", "), has), "correct the sheet's name")
			continue
		case !hit || !read:
			continue // files that could not be read say so themselves
		}
		for _, e := range s.Entries {
			if !used[e.Line] {
				say(finding.Warning, e.Line, e.Field, fmt.Sprintf("%s is to come from %q, and no sheet read has such a column", e.Field, e.Column), "correct that line")
			}
		}
	}
	return out
}
