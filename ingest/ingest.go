// Package ingest takes spreadsheets as departments send them: it recognises
// what each column is, converts what the cells say, checks it, and hands the
// rows on as records. What is wrong or doubtful comes out as findings; a bad
// file is a finding too. It stores nothing.
package ingest

import (
	"encoding/hex"
	"encoding/json"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/finding"
	"kelvinrow/ingest/header"
	"kelvinrow/ingest/word"
)

// Options says how to take a file.
type Options struct {
	Kind    building.Kind   // how firm its values are; zero means Registered
	Mapping *header.Mapping // settles what recognition cannot; may be nil
	Words   word.Own        // beside the words known here; may be nil
	Today   string          // "2026-12-01"; the latest year allowed is the next one
	Name    string          // by which the file is known; "" is its base name

	Portfolio string // that the file is for; a survey form of another is refused; "" for any
}

// Sink takes what is read. The first call of Sheet comes before any record of
// it; the memory of a record is reused after the call.
type Sink interface {
	Sheet(*building.Sheet) error
	Record(*building.Record) error
}

// Report says how a file was read.
type Report struct {
	File     string // by which the file is known, usually its base name
	SHA256   [32]byte
	Bytes    int64
	Date     string // of the data: from its name, from within, or the file's own
	Own      bool   // a ranked workbook of this program, which is not read back
	Form     bool   // a survey form of this program: only what was filled in is read
	Sheets   []SheetReport
	Findings []finding.Finding
	Rows     int // rows of data
	Used     int // rows taken, if only in part
	SetAside int // rows not taken

	dateFrom    string // what Date is, in words
	datedByFile bool   // that rows are dated by it is said
}

// MarshalJSON writes the hash as hexadecimal digits.
func (r *Report) MarshalJSON() ([]byte, error) {
	return json.Marshal(struct {
		File     string            `json:"file"`
		SHA256   string            `json:"sha256"`
		Bytes    int64             `json:"bytes"`
		Form     bool              `json:"survey_form,omitempty"`
		Date     string            `json:"date"`
		Sheets   []SheetReport     `json:"sheets"`
		Findings []finding.Finding `json:"findings"`
		Rows     int               `json:"rows"`
		Used     int               `json:"used"`
		SetAside int               `json:"set_aside"`
	}{r.File, hex.EncodeToString(r.SHA256[:]), r.Bytes, r.Form, r.Date, r.Sheets, r.Findings, r.Rows, r.Used, r.SetAside})
}

// SheetReport says how a sheet was read.
type SheetReport struct {
	Name      string   `json:"name"`
	Hidden    bool     `json:"hidden,omitempty"`
	HeaderRow int      `json:"header_row,omitempty"`
	DataFrom  int      `json:"data_from,omitempty"` // first row below header and units
	Skipped   string   `json:"skipped,omitempty"`   // why it was not read
	Columns   []Column `json:"columns,omitempty"`
	Rows      int      `json:"rows"`
	Used      int      `json:"used"`
	SetAside  int      `json:"set_aside"`

	lines []int // of the column file that had an effect
}

// Column says what a column is taken for.
type Column struct {
	Letter  string   `json:"letter"`
	Header  string   `json:"header"`
	Field   string   `json:"field,omitempty"` // key, "" when it is not read
	Unit    string   `json:"unit,omitempty"`
	Count   int      `json:"count"` // filled cells
	Samples []string `json:"samples,omitempty"`
	How     string   `json:"how,omitempty"`
}

// MappingSheets gives the columns of the sheets of reports, as
// header.WriteMapping takes them.
func MappingSheets(reports []*Report) []header.SheetColumns {
	var out []header.SheetColumns
	for _, r := range reports {
		for _, s := range r.Sheets {
			if len(s.Columns) == 0 {
				continue
			}
			sc := header.SheetColumns{File: r.File, Sheet: s.Name}
			for _, c := range s.Columns {
				k := header.SheetColumn{Letter: c.Letter, Header: c.Header, Field: c.Field, Unit: c.Unit}
				if len(c.Samples) > 0 {
					k.Sample = c.Samples[0]
				}
				sc.Columns = append(sc.Columns, k)
			}
			out = append(out, sc)
		}
	}
	return out
}
