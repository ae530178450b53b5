// Package ingest takes spreadsheets as departments send them: it recognises
// what each column is, converts what the cells say, checks it, and hands the
// rows on as records. What is wrong or doubtful comes out as findings; a bad
// file is a finding too. It stores nothing.
package ingest

import (
	"encoding/hex"
	"encoding/json"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/finding"
	"kelvinrow/ingest/header"
)

// Options says how to take a file.
type Options struct {
	Kind    building.Kind   // how firm its values are; zero means Registered
	Mapping *header.Mapping // settles what recognition cannot; may be nil
	Today   string          // "2026-12-01"; the latest year allowed is the next one
}

// Sink takes what is read. The first call of Sheet comes before any record of
// it; the memory of a record is reused after the call.
type Sink interface {
	Sheet(*building.Sheet) error
	Record(*building.Record) error
}

// Report says how a file was read.
type Report struct {
	File     string // base name
	SHA256   [32]byte
	Bytes    int64
	Date     string // of the data: from its name, from within, or the file's own
	Sheets   []SheetReport
	Findings []finding.Finding
	Rows     int // rows of data
	Used     int // rows taken, if only in part
	SetAside int // rows not taken
}

// MarshalJSON writes the hash as hexadecimal digits.
func (r *Report) MarshalJSON() ([]byte, error) {
	return json.Marshal(struct {
		File     string            `json:"file"`
		SHA256   string            `json:"sha256"`
		Bytes    int64             `json:"bytes"`
		Date     string            `json:"date"`
		Sheets   []SheetReport     `json:"sheets"`
		Findings []finding.Finding `json:"findings"`
		Rows     int               `json:"rows"`
		Used     int               `json:"used"`
		SetAside int               `json:"set_aside"`
	}{r.File, hex.EncodeToString(r.SHA256[:]), r.Bytes, r.Date, r.Sheets, r.Findings, r.Rows, r.Used, r.SetAside})
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

// extensions are those of tables, and of spreadsheets that cannot be read: that
// one lies in a folder must be said.
var extensions = []string{".xlsx", ".xlsm", ".csv", ".tsv", ".txt", ".xls", ".xlsb", ".ods"}

// Expand lists the files meant by paths: folders stand for the spreadsheets in
// them, patterns for what they match. Files to fix, hidden files and the lock
// files of spreadsheet programs are left out of folders and patterns.
func Expand(paths []string) ([]string, error) {
	var out []string
	add := func(p string) {
		if !slices.Contains(out, p) {
			out = append(out, p)
		}
	}
	for _, p := range paths {
		st, err := os.Stat(p)
		switch {
		case err == nil && st.IsDir():
			entries, err := os.ReadDir(p) // sorted by name
			if err != nil {
				return nil, err
			}
			n := 0
			for _, e := range entries {
				if !e.IsDir() && wanted(e.Name()) {
					add(filepath.Join(p, e.Name()))
					n++
				}
			}
			if n == 0 {
				return nil, fmt.Errorf("no spreadsheet in folder %s", p)
			}
		case err == nil:
			add(p)
		case strings.ContainsAny(p, "*?["):
			found, gerr := filepath.Glob(p)
			if gerr != nil {
				return nil, fmt.Errorf("pattern %s: %w", p, gerr)
			}
			n := 0
			for _, f := range found {
				if st, err := os.Stat(f); err == nil && !st.IsDir() && wanted(filepath.Base(f)) {
					add(f)
					n++
				}
			}
			if n == 0 {
				return nil, fmt.Errorf("no spreadsheet matches %s", p)
			}
		default:
			return nil, err
		}
	}
	return out, nil
}

func wanted(name string) bool {
	ext := strings.ToLower(filepath.Ext(name))
	stem := strings.TrimSuffix(name, filepath.Ext(name))
	return slices.Contains(extensions, ext) && !strings.HasPrefix(name, ".") && !strings.HasPrefix(name, "~$") && !strings.HasSuffix(stem, "-to-fix")
}
