// Package cell makes values of what people write into cells: numbers with
// units and either decimal sign, years and spans of years, dates, yes and no.
package cell

import (
	"strings"
	"unicode"
	"unicode/utf8"

	"golang.org/x/text/unicode/norm"
)

var letters = strings.NewReplacer("ß", "ss", "ø", "o", "æ", "a", "œ", "o", "đ", "d", "ł", "l", "þ", "th",
	"²", "2", "³", "3", "m^2", "m2", "m^3", "m3", "&", " ")

// Fold brings text to the form in which words are compared: lower case, no
// diacritics, no punctuation, single spaces, and "ä" the same as "ae".
func Fold(s string) string {
	if folded, ok := foldASCII(s); ok {
		return folded
	}
	return foldAny(s)
}

func foldAny(s string) string {
	s = letters.Replace(strings.ToLower(s))
	var b strings.Builder
	space := false
	for _, r := range norm.NFD.String(s) {
		switch {
		case unicode.Is(unicode.Mn, r):
		case unicode.IsLetter(r) || unicode.IsDigit(r):
			if space && b.Len() > 0 {
				b.WriteByte(' ')
			}
			space = false
			b.WriteRune(r)
		case r == '\'' || r == '’' || r == '`':
		default:
			space = true
		}
	}
	return umlauts.Replace(b.String())
}

// foldASCII is Fold of plain text, which most is; false for anything else.
func foldASCII(s string) (string, bool) {
	for i := 0; i < len(s); i++ {
		if s[i] >= utf8.RuneSelf || s[i] == '^' { // "m^2" is "m2"
			return "", false
		}
	}
	var buf [64]byte
	b := buf[:0]
	space := false
	umlaut := false // the last letter written may be the first of "ae", "oe", "ue"
	for i := 0; i < len(s); i++ {
		c := s[i]
		switch {
		case c >= 'A' && c <= 'Z':
			c += 'a' - 'A'
		case c >= 'a' && c <= 'z', c >= '0' && c <= '9':
		case c == '\'' || c == '`':
			continue
		default:
			space = true
			continue
		}
		if space && len(b) > 0 {
			b = append(b, ' ')
			umlaut = false
		}
		space = false
		if c == 'e' && umlaut {
			umlaut = false
			continue
		}
		b = append(b, c)
		umlaut = c == 'a' || c == 'o' || c == 'u'
	}
	return string(b), true
}

var umlauts = strings.NewReplacer("ae", "a", "oe", "o", "ue", "u")

// Nearest returns the word most like s, "" if none is at all like it.
func Nearest(s string, words []string) string {
	best, bestD := "", 1<<30
	f := Fold(s)
	for _, w := range words {
		g := Fold(w)
		d := distance(f, g)
		if len(g) > 4 && strings.Contains(f, g) || len(f) > 4 && strings.Contains(g, f) {
			d = min(d, 2)
		}
		if d < bestD && d*3 <= max(len(f), len(g)) {
			best, bestD = w, d
		}
	}
	return best
}

// distance counts the insertions, deletions and replacements between a and b.
func distance(a, b string) int {
	ra, rb := []rune(a), []rune(b)
	if len(ra) > 100 || len(rb) > 100 {
		return 1 << 20
	}
	row := make([]int, len(rb)+1)
	for j := range row {
		row[j] = j
	}
	for i, x := range ra {
		diag := row[0]
		row[0] = i + 1
		for j, y := range rb {
			cost := 1
			if x == y {
				cost = 0
			}
			diag, row[j+1] = row[j+1], min(row[j+1]+1, row[j]+1, diag+cost)
		}
	}
	return row[len(rb)]
}
