package building

import "slices"

// Kind is how firmly a value is known. Greater is firmer.
type Kind uint8

const (
	Default    Kind = iota // from an archetype rule
	Registered             // from a register or an asset list
	Certified              // from a certificate or an as-built document
	Metered                // from a meter
	Surveyed               // measured or seen on site

	NumKinds = int(iota)
)

var kindWords = [NumKinds]string{"default", "registered", "certified", "metered", "surveyed"}

func (k Kind) String() string { return kindWords[k] }

// KindByWord finds a kind by its word.
func KindByWord(w string) (Kind, bool) {
	i := slices.Index(kindWords[:], w)
	return Kind(max(i, 0)), i >= 0
}

// rank is the precedence between sources: what was measured, by survey or by
// meter, beats what was certified, which beats what was registered.
func (k Kind) rank() int {
	if k == Metered {
		return int(Surveyed)
	}
	return int(k)
}

// Sheet is one sheet of one source file, shared by all values read from it.
type Sheet struct {
	ID       int64             // in the store; 0 when not stored
	LoadID   int64             // in the store: the load that brought it, larger is later
	File     string            // base name of the file
	Name     string            // sheet name; "" for CSV
	FileDate string            // "2026-03-01": date of the data where the sheet tells, else the file's date
	Columns  [NumFields]string // column letters by field, "" where absent; "constant, ..." where a mapping set the value
}

// Value is one field of one building, from one cell.
type Value struct {
	Field     Field
	Kind      Kind
	Number    float64 // Number, YesNo; the middle of a Year span
	Low, High float64 // Year: first and last year of the span; elsewhere unused
	Text      string  // Text and Word
}

// Record is one row of one sheet: what one source says of one building.
type Record struct {
	Building   string
	Sheet      *Sheet
	Row        int    // 1-based row in the sheet
	SurveyDate string // "2026-03-01"; "" when the row carries none
	Values     []Value
}

// Known is a value together with where it came from.
type Known struct {
	Value
	Sheet *Sheet
	Row   int
	Date  string // survey date of the row, else the sheet's date
}

// Building is everything known of one building, at most one value per field.
type Building struct {
	ID    string
	index [NumFields]uint8 // position in known plus one
	known []Known
}

// Get returns the value of f.
func (b *Building) Get(f Field) (*Known, bool) {
	i := b.index[f]
	if i == 0 {
		return nil, false
	}
	return &b.known[i-1], true
}

// Number returns the number of f, which must be a Number, Year or YesNo field.
func (b *Building) Number(f Field) (float64, bool) {
	if k, ok := b.Get(f); ok {
		return k.Number, true
	}
	return 0, false
}

// Text returns the text of f, "" when unknown.
func (b *Building) Text(f Field) string {
	if k, ok := b.Get(f); ok {
		return k.Text
	}
	return ""
}

// Yes reports whether a YesNo field is known and yes.
func (b *Building) Yes(f Field) bool {
	n, ok := b.Number(f)
	return ok && n != 0
}

// Known returns all values in field order.
func (b *Building) Known() []Known { return b.known }

// Merge makes one building of the records about it. Per field the firmest kind
// wins; within a kind the newest date; then the latest load; then the later
// sheet and row, so that the result depends on nothing but the records.
func Merge(id string, records []Record) *Building {
	b := &Building{ID: id}
	var best [NumFields]*Known
	n := 0
	for i := range records {
		r := &records[i]
		date := r.SurveyDate
		if date == "" && r.Sheet != nil {
			date = r.Sheet.FileDate
		}
		for _, v := range r.Values {
			k := Known{Value: v, Sheet: r.Sheet, Row: r.Row, Date: date}
			if best[v.Field] == nil {
				n++
				best[v.Field] = &k
			} else if best[v.Field].yieldsTo(&k) {
				best[v.Field] = &k
			}
		}
	}
	b.known = make([]Known, 0, n)
	for f, k := range best {
		if k != nil {
			b.known = append(b.known, *k)
			b.index[f] = uint8(len(b.known))
		}
	}
	return b
}

func (k *Known) yieldsTo(o *Known) bool {
	if a, b := k.Kind.rank(), o.Kind.rank(); a != b {
		return a < b
	}
	if k.Date != o.Date {
		return k.Date < o.Date
	}
	if k.Sheet != nil && o.Sheet != nil && k.Sheet != o.Sheet {
		if k.Sheet.LoadID != o.Sheet.LoadID {
			return k.Sheet.LoadID < o.Sheet.LoadID
		}
		if k.Sheet.File != o.Sheet.File {
			return k.Sheet.File < o.Sheet.File
		}
		if k.Sheet.Name != o.Sheet.Name {
			return k.Sheet.Name < o.Sheet.Name
		}
	}
	return k.Row <= o.Row
}
