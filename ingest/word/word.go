// Package word turns the trade words that people write, in eight languages,
// into the one word by which the rest knows them.
package word

import (
	_ "embed"
	"encoding/csv"
	"sort"
	"strings"
	"unicode/utf8"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/cell"
)

//go:embed words.csv
var list string

// synonym is one way to write a word, folded.
type synonym struct {
	folded string
	word   string
}

type field struct {
	raw   map[string]string // lower case, not folded: "rådhus" is no "radhus"
	exact map[string]string
	long  []synonym // those that may be looked for inside a text, longest first
}

var fields = func() map[building.Field]*field {
	m := map[building.Field]*field{}
	rows, err := csv.NewReader(strings.NewReader(list)).ReadAll()
	if err != nil {
		panic("the embedded list of words: " + err.Error()) // a slip of ours, seen by every test
	}
	add := func(f building.Field, written, word string) {
		if m[f] == nil {
			m[f] = &field{raw: map[string]string{}, exact: map[string]string{}}
		}
		if low := strings.ToLower(written); m[f].raw[low] == "" {
			m[f].raw[low] = word
		}
		k := cell.Fold(written)
		if k == "" {
			return
		}
		if _, ok := m[f].exact[k]; ok {
			return
		}
		m[f].exact[k] = word
		if utf8.RuneCountInString(k) >= 3 {
			m[f].long = append(m[f].long, synonym{k, word})
		}
	}
	for i := range building.NumFields {
		for _, w := range building.Words(building.Field(i)) {
			add(building.Field(i), w, w)
		}
	}
	for _, r := range rows[1:] {
		f, ok := building.FieldByKey(r[0])
		if !ok {
			panic("the embedded list of words names no field: " + r[0])
		}
		add(f, r[3], r[2])
	}
	for _, f := range m {
		sort.SliceStable(f.long, func(i, j int) bool { return len(f.long[i].folded) > len(f.long[j].folded) })
	}
	return m
}()

// Find returns the canonical word of f that text means. A text that holds a
// known word among others means the longest one it holds; two equally long
// that differ mean nothing.
func Find(f building.Field, text string) (string, bool) {
	words := fields[f]
	if words == nil {
		return "", false
	}
	if w, ok := words.raw[strings.ToLower(strings.TrimSpace(text))]; ok {
		return w, true
	}
	t := cell.Fold(text)
	if w, ok := words.exact[t]; ok {
		return w, true
	}
	if w, ok := words.exact[strings.ReplaceAll(t, " ", "")]; ok {
		return w, true
	}
	padded := " " + t + " "
	found, size := "", 0
	for _, s := range words.long {
		if size > 0 && len(s.folded) < size {
			break
		}
		if strings.Contains(padded, " "+s.folded+" ") {
			if found != "" && found != s.word {
				return "", false
			}
			found, size = s.word, len(s.folded)
		}
	}
	return found, found != ""
}

// Nearest returns the canonical word whose writing is most like text, "" if none is.
func Nearest(f building.Field, text string) string {
	words := fields[f]
	if words == nil {
		return ""
	}
	written := make([]string, 0, len(words.exact))
	for w := range words.exact {
		written = append(written, w)
	}
	sort.Strings(written)
	return words.exact[cell.Nearest(text, written)]
}
