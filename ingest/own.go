package ingest

import (
	"archive/zip"
	"encoding/xml"
	"io"
	"slices"
	"strings"

	"kelvinrow/ingest/sheet"
)

// ownSheets are on every ranked workbook, whatever program saved it last.
var ownSheets = []string{"Overview", "Buildings", "Data issues", "Assumptions", "Method and cautions"}

// own reports whether a book is a ranked workbook of this program: what it holds
// for a building is mostly estimated and must not come back as known.
func own(path string, book sheet.Book) bool {
	if book.Delimiter() != 0 {
		return false
	}
	left := slices.Clone(ownSheets)
	for _, s := range book.Sheets() {
		left = slices.DeleteFunc(left, func(n string) bool { return n == s.Name })
	}
	if len(left) == 0 {
		return true
	}
	creator, description := properties(path)
	return strings.HasPrefix(creator, "kelvinrow") && (strings.HasPrefix(description, "Run ") || strings.HasPrefix(description, "Assumptions"))
}

// properties reads who made a workbook and what for; "" where it does not say.
func properties(path string) (creator, description string) {
	z, err := zip.OpenReader(path)
	if err != nil {
		return "", ""
	}
	defer z.Close()
	f, err := z.Open("docProps/core.xml")
	if err != nil {
		return "", ""
	}
	defer f.Close()
	var core struct {
		Creator     string `xml:"creator"`
		Description string `xml:"description"`
	}
	if err := xml.NewDecoder(io.LimitReader(f, 1<<20)).Decode(&core); err != nil {
		return "", ""
	}
	return core.Creator, core.Description
}

// ownHeaders head columns of results of this program and of no register.
var ownHeaders = []string{"Measure that does most", "Inputs by default", "Surveyed (share)", "Default (share)", "Delivered for heating and hot water (kWh/a)"}

// ownResults reports whether a table was taken out of a ranked workbook, as a
// sheet of another book or as text.
func (t *table) ownResults() bool {
	n := 0
	for i := range t.layout.Columns {
		if slices.Contains(ownHeaders, t.layout.Columns[i].Header) {
			n++
		}
	}
	return n > 1
}
