package workbook

import (
	"strings"
	"unicode"
	"unicode/utf8"
)

const (
	maxCellText  = 32767 // characters in a cell
	maxSheetName = 31
)

// clean makes text fit for a cell: one line, valid, no control characters (XML
// 1.0 cannot hold them), no longer than a cell. Most text needs nothing.
func clean(s string) string {
	plain := len(s) <= maxCellText
	for i := 0; plain && i < len(s); i++ {
		plain = s[i] >= 0x20 && s[i] < 0x7f
	}
	if plain {
		return s
	}
	var b strings.Builder
	units := 0
	for _, r := range s {
		switch {
		case r == '\n' || r == '\r' || r == '\t' || r == '\u2028' || r == '\u2029':
			r = ' '
		case r == utf8.RuneError || r == '\ufffe' || r == '\uffff' || unicode.IsControl(r):
			continue
		}
		// A cell is counted in UTF-16 units.
		if units++; r > 0xffff {
			units++
		}
		if units > maxCellText {
			break
		}
		b.WriteRune(r)
	}
	return b.String()
}

// slug makes a key or word fit for a defined name: "district heat" becomes
// "district_heat".
func slug(s string) string {
	var b strings.Builder
	for _, r := range strings.ToLower(s) {
		if r >= 'a' && r <= 'z' || r >= '0' && r <= '9' {
			b.WriteRune(r)
		} else if n := b.Len(); n > 0 && b.String()[n-1] != '_' {
			b.WriteByte('_')
		}
	}
	return strings.TrimRight(b.String(), "_")
}

// namer hands out names that are unique without regard to case.
type namer map[string]bool

func (n namer) take(name string) bool {
	key := strings.ToLower(name)
	if name == "" || n[key] {
		return false
	}
	n[key] = true
	return true
}

// sheet returns a free sheet name: the first candidate that fits a tab, else the
// last cut to fit. Sheet names hold no []:*?/\ and neither begin nor end with an
// apostrophe.
func (n namer) sheet(candidates ...string) string {
	last := "Sheet"
	for _, c := range candidates {
		c = strings.Map(func(r rune) rune {
			if strings.ContainsRune(`[]:*?/\`, r) {
				return ' '
			}
			return r
		}, clean(c))
		c = strings.Trim(strings.Join(strings.Fields(c), " "), "'")
		if c == "" {
			continue
		}
		if strings.EqualFold(c, "History") {
			c += " sheet" // Excel keeps the name for itself
		}
		last = c
		if utf16Len(c) <= maxSheetName && n.take(c) {
			return c
		}
	}
	for i := 1; ; i++ {
		suffix := ""
		if i > 1 {
			suffix = " (" + itoa(i) + ")"
		}
		if c := cut(last, maxSheetName-len(suffix)) + suffix; n.take(c) {
			return c
		}
	}
}

// defined returns a free defined name made of parts.
func (n namer) defined(parts ...string) string {
	base := strings.Join(parts, "_")
	name := base
	for i := 2; !n.take(name); i++ {
		name = base + "_" + itoa(i)
	}
	return name
}

func utf16Len(s string) int {
	n := 0
	for _, r := range s {
		if n++; r > 0xffff {
			n++
		}
	}
	return n
}

// cut shortens text to at most n UTF-16 units, at a word where there is one.
func cut(s string, n int) string {
	if utf16Len(s) <= n {
		return s
	}
	units, end := 0, 0
	for i, r := range s {
		if units++; r > 0xffff {
			units++
		}
		if units > n {
			end = i
			break
		}
	}
	s = s[:end]
	if sp := strings.LastIndexByte(s, ' '); sp > len(s)/2 {
		s = s[:sp]
	}
	return strings.TrimRight(s, " '")
}

// quoteSheet makes a sheet name fit for a formula or a link.
func quoteSheet(name string) string { return "'" + strings.ReplaceAll(name, "'", "''") + "'" }

// capital makes the first letter a capital one.
func capital(s string) string {
	r, n := utf8.DecodeRuneInString(s)
	if n == 0 {
		return s
	}
	return string(unicode.ToUpper(r)) + s[n:]
}

// lines estimates how many lines text takes when wrapped at a width given in
// characters, breaking at spaces as spreadsheets do.
func lines(s string, width float64) int {
	n, used := 1, 0.0
	for word := range strings.FieldsSeq(s) {
		w := float64(utf8.RuneCountInString(word))
		if used > 0 && used+1+w > width {
			n, used = n+1, 0
		}
		if used > 0 {
			used++
		}
		used += w
		for used > width {
			n, used = n+1, used-width
		}
	}
	return n
}
