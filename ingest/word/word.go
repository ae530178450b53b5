// Package word turns the trade words that people write, in eight languages,
// into the one word by which the rest knows them.
package word

import (
	"crypto/sha256"
	_ "embed"
	"encoding/csv"
	"fmt"
	"regexp"
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

// alone lists folded words that say what a building is only when nothing stands
// beside them: an opera house is no house.
var alone = map[string]bool{
	"house": true, "home": true, "maison": true, "casa": true, "huis": true, "hus": true, "haus": true,
	"detached": true, "semi": true, "terrace": true, "terraced": true, "block": true,
	"ohne": true, "keine": true, "none": true, "sans": true, "aucune": true, "geen": true, "ingen": true, "ninguna": true, "ninguno": true,
}

const recovery = `(hr|heat recovery|recovery|wrg|warmeruckgewinnung|wtw|warmteterugwinning|recuperation|recuperador|recuperacion|varmegenvinding|varmeatervinning|atervinning|varmegjenvinning|gjenvinning|vgv|thermal wheel|rotary|rotor\w*|plate heat exchanger)\b`

// A word may be made more exact by one beside it, unless that is denied.
var (
	reNoRecovery = regexp.MustCompile(`\b(without|no|ohne|sans|zonder|uden|utan|uten|sin) ` + recovery)
	reSystem     = regexp.MustCompile(` ?(system|systeme|systeem|anlage|anlaeg|anlegg|ventilation|ventilasjon|luftung|aggregat)$`)
	reRecovery   = regexp.MustCompile(`\b` + recovery)
	reInsulated  = regexp.MustCompile(`\b(insulated|insulation|filled|fill|gedammt|kerngedammt|dammung|kerndammung|isolee?s?|isolation|geisolerde?|geisoleerde?|gevulde?|isoleret|isolert|isolerad|aislad[oa])\b`)
	reDenied     = regexp.MustCompile(`\b(no|not|non|without|un|unfilled|ohne|nicht|sans|zonder|niet|uden|ikke|uten|utan|ej|sin)\b`)
)

// exacter takes a word found in a folded text to the more exact one.
func exacter(f building.Field, word, folded string) string {
	switch {
	case reDenied.MatchString(folded):
	case f == building.VentilationField && word == building.Balanced.String() && reRecovery.MatchString(folded):
		return building.BalancedRecovery.String()
	case f == building.WallConstruction && word == "cavity brick" && reInsulated.MatchString(folded):
		return "insulated cavity brick"
	}
	return word
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
		if utf8.RuneCountInString(k) >= 3 && !(alone[k] && (f == building.UseField || f == building.VentilationField)) {
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

// Own are words that somebody's spreadsheets use, by field and folded text; they come
// before those known here, and only where they are all of the text.
type Own map[building.Field]map[string]string

// Add adds one.
func (o Own) Add(f building.Field, written, word string) {
	if o[f] == nil {
		o[f] = map[string]string{}
	}
	o[f][cell.Fold(written)] = word
}

// String names the words by their content, "" without any.
func (o Own) String() string {
	var all []string
	for f, words := range o {
		for written, w := range words {
			all = append(all, f.Key()+"\x00"+written+"\x00"+w)
		}
	}
	if len(all) == 0 {
		return ""
	}
	sort.Strings(all)
	return fmt.Sprintf(" with own words %x", sha256.Sum256([]byte(strings.Join(all, "\n"))))[:len(" with own words ")+12]
}

// Find is Find with own words first.
func (o Own) Find(f building.Field, text string) (string, bool) {
	if len(o[f]) > 0 {
		if w, ok := o[f][cell.Fold(text)]; ok {
			return w, true
		}
	}
	return Find(f, text)
}

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
	if f == building.VentilationField {
		// "F-system" and "FTX-ventilation" are said like F and FTX.
		if kind := reSystem.ReplaceAllString(t, ""); kind != t && kind != "" {
			if w, ok := words.exact[kind]; ok {
				return w, true
			}
		}
		t = reNoRecovery.ReplaceAllString(t, "")
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
	return exacter(f, found, t), found != ""
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
