package header

import (
	"bufio"
	"fmt"
	"io"
	"path/filepath"
	"strconv"
	"strings"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/cell"
)

// Mapping says which column is what, where recognition cannot or should not.
type Mapping struct {
	Name     string // of the file it was read from, for messages and origins
	Sections []Section
}

// Section holds the entries for one sheet, or for all where File and Sheet are
// empty.
type Section struct {
	File, Sheet string
	Line        int
	Entries     []Entry
}

// Entry is one line: a field and the column, or the constant, that gives it.
type Entry struct {
	Field    string // key of a field, "id", "survey_date" and so on
	Unit     string // "" for the one in the header
	Column   string // header or letters
	Constant string
	Fixed    bool // Constant counts, not Column
	Unread   bool // the field is not to be read at all
	Named    bool // from a section that names its file or sheet
	Line     int
}

// Called names the mapping in messages.
func (m *Mapping) Called() string {
	if m == nil || m.Name == "" {
		return "the column file"
	}
	return m.Name
}

// For returns the entries that hold for a sheet: the general ones, then those
// of its section, which win.
func (m *Mapping) For(file, sheet string) []Entry {
	if m == nil {
		return nil
	}
	var all []Entry
	for _, s := range m.Sections {
		if s.About(file) && (s.Sheet == "" || strings.EqualFold(s.Sheet, sheet)) {
			for _, e := range s.Entries {
				e.Named = s.File != "" || s.Sheet != ""
				all = append(all, e)
			}
		}
	}
	return all
}

// About reports whether a section is about a file of this name, or about any.
// The rows to fix of a file are in its layout, so what is said of a file holds
// for them too; a name without folders is that of the file in any of them.
func (s Section) About(file string) bool {
	stem := func(s string) string { return strings.TrimSuffix(s, filepath.Ext(s)) }
	same := func(named, file string) bool {
		source, mended := strings.CutSuffix(stem(file), "-to-fix")
		return strings.EqualFold(named, file) || mended && strings.EqualFold(stem(named), source)
	}
	named := filepath.ToSlash(s.File)
	return named == "" || same(named, file) || same(named, filepath.Base(file))
}

// ParseMapping reads a mapping file. Errors name the line.
func ParseMapping(r io.Reader) (*Mapping, error) {
	m := &Mapping{}
	section := Section{}
	flush := func() {
		if len(section.Entries) > 0 {
			m.Sections = append(m.Sections, section)
		}
	}
	sc := bufio.NewScanner(r)
	for n := 1; sc.Scan(); n++ {
		line := strings.TrimSpace(strings.TrimPrefix(sc.Text(), "\ufeff"))
		switch {
		case line == "" || strings.HasPrefix(line, "#"):
			continue
		case strings.HasPrefix(line, "["):
			if !strings.HasSuffix(line, "]") {
				return nil, fmt.Errorf("line %d: the section %q has no closing bracket", n, line)
			}
			flush()
			file, sheet, err := sectionName(line[1 : len(line)-1])
			if err != nil {
				return nil, fmt.Errorf("line %d: %w", n, err)
			}
			section = Section{File: file, Sheet: sheet, Line: n}
			continue
		}
		e, err := parseEntry(line)
		if err != nil {
			return nil, fmt.Errorf("line %d: %w", n, err)
		}
		e.Line = n
		for _, o := range section.Entries {
			if o.Field == e.Field {
				return nil, fmt.Errorf("line %d: %q is given before, in line %d", n, e.Field, o.Line)
			}
		}
		section.Entries = append(section.Entries, e)
	}
	if err := sc.Err(); err != nil {
		return nil, err
	}
	flush()
	return m, nil
}

// sectionName splits [register.xlsx Sheet one] and ["my file.xlsx" "Sheet one"].
func sectionName(s string) (file, sheet string, err error) {
	s = strings.TrimSpace(s)
	if s == "" {
		return "", "", nil
	}
	if strings.HasPrefix(s, `"`) {
		q, err := strconv.QuotedPrefix(s)
		if err != nil {
			return "", "", fmt.Errorf("the section %s has an open quotation mark", s)
		}
		file, _ = strconv.Unquote(q)
		return file, unquote(strings.TrimSpace(s[len(q):])), nil
	}
	lower := strings.ToLower(s)
	for _, ext := range []string{".xlsx", ".xlsm", ".csv", ".tsv", ".txt"} {
		if i := strings.Index(lower, ext); i >= 0 && (len(s) == i+len(ext) || s[i+len(ext)] == ' ') {
			i += len(ext)
			return s[:i], unquote(strings.TrimSpace(s[i:])), nil
		}
	}
	return "", s, nil // a sheet's name alone
}

func unquote(s string) string {
	if u, err := strconv.Unquote(s); err == nil {
		return u
	}
	return s
}

func parseEntry(line string) (Entry, error) {
	left, right, ok := strings.Cut(line, "=")
	if !ok {
		return Entry{}, fmt.Errorf("%q is neither a section nor \"field = column\"", line)
	}
	left, right = strings.TrimSpace(left), strings.TrimSpace(right)
	e := Entry{Field: left}
	if i := strings.IndexByte(left, '['); i >= 0 && strings.HasSuffix(left, "]") {
		e.Field, e.Unit = strings.TrimSpace(left[:i]), strings.TrimSpace(left[i+1:len(left)-1])
	}
	e.Field = strings.ToLower(strings.ReplaceAll(e.Field, " ", "_"))
	if !KnownKey(e.Field) {
		if near := nearestKey(e.Field); near != "" {
			return Entry{}, fmt.Errorf("there is no field %q; did you mean %q?", e.Field, near)
		}
		return Entry{}, fmt.Errorf("there is no field %q; the fields are listed in what inspect --columns-out writes", e.Field)
	}
	if e.Unit != "" {
		u, ok := cell.ParseUnit(e.Unit)
		if !ok || !fits(e.Field, u) {
			return Entry{}, fmt.Errorf("%q is no unit for %q", e.Unit, e.Field)
		}
	}
	switch lower := strings.ToLower(right); {
	case right == "":
		return Entry{}, fmt.Errorf("%q has no column", e.Field)
	case lower == "none" || lower == "-":
		e.Unread = true
	case strings.HasPrefix(lower, "constant:"):
		e.Fixed = true
		e.Constant = unquote(strings.TrimSpace(right[len("constant:"):]))
		if e.Field == IDKey {
			return Entry{}, fmt.Errorf("the building id cannot be the same for a whole sheet")
		}
		if e.Constant == "" {
			return Entry{}, fmt.Errorf("%q has an empty constant", e.Field)
		}
	default:
		e.Column = unquote(right)
	}
	return e, nil
}

// SheetColumns are the columns of one sheet as recognised, for WriteMapping.
type SheetColumns struct {
	File, Sheet string
	Columns     []SheetColumn
}

// SheetColumn is one column as recognised.
type SheetColumn struct{ Letter, Header, Field, Unit, Sample string }

// WriteMapping writes columns as a mapping file ready to edit: what was
// recognised as lines that hold, the rest as comments.
func WriteMapping(w io.Writer, sheets []SheetColumns) error {
	b := bufio.NewWriter(w)
	fmt.Fprint(b, `# Which column is what. Edit, and give the file back with --columns.
#   field = column header, or its letter
#   field [unit] = column           where the header does not say the unit
#   use = constant:"school"         one value for the whole sheet
#   field = none                    do not read this field
# The fields:
`)
	line := "#  "
	for _, k := range Keys() {
		if len(line)+len(k) > 78 {
			fmt.Fprintln(b, line)
			line = "#  "
		}
		line += " " + k
	}
	fmt.Fprintln(b, line)
	for _, s := range sheets {
		name := strconv.Quote(s.File)
		if s.Sheet != "" {
			name += " " + strconv.Quote(s.Sheet)
		}
		fmt.Fprintf(b, "\n[%s]\n", name)
		given := map[string]bool{}
		for _, c := range s.Columns {
			note := ""
			if c.Sample != "" {
				note = ", such as " + oneLine(c.Sample)
			}
			if c.Field == "" || given[c.Field] {
				fmt.Fprintf(b, "# not read: column %s %s%s\n", c.Letter, oneLine(c.Header), note)
				continue
			}
			given[c.Field] = true
			unit := ""
			if c.Unit != "" {
				unit = " [" + c.Unit + "]"
			}
			fmt.Fprintf(b, "# column %s %s%s\n%s%s = %s\n", c.Letter, oneLine(c.Header), note, c.Field, unit, c.Letter)
		}
	}
	return b.Flush()
}

func oneLine(s string) string {
	s = strings.Join(strings.Fields(s), " ")
	if r := []rune(s); len(r) > 60 {
		s = string(r[:59]) + "…"
	}
	return strconv.Quote(s)
}

// Keys beside those of building.Field that a column may have.
const (
	IDKey         = "id"
	SurveyDateKey = "survey_date"  // makes the row's values surveyed
	DataDateKey   = "data_date"    // dates the row, so that an id may come again
	DataYearKey   = "data_year"    // likewise, a year
	HouseKey      = "house_number" // joined to the street
)

var moreKeys = []string{IDKey, SurveyDateKey, DataDateKey, DataYearKey, HouseKey}

// Keys lists what a column may be, in the order of the catalogue.
func Keys() []string {
	keys := append([]string(nil), moreKeys...)
	for f := range building.NumFields {
		keys = append(keys, building.Field(f).Key())
	}
	return keys
}

// KnownKey reports whether a column may be key.
func KnownKey(key string) bool {
	for _, k := range moreKeys {
		if k == key {
			return true
		}
	}
	_, ok := building.FieldByKey(key)
	return ok
}

func nearestKey(key string) string { return cell.Nearest(key, Keys()) }

// fits reports whether a column in unit u can give key.
func fits(key string, u cell.Unit) bool {
	f, ok := building.FieldByKey(key)
	if !ok {
		return false
	}
	return u.Fits(f.Info().Unit)
}
