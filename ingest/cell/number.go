package cell

import (
	"math"
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"
)

// Decimal says which sign is the decimal one in a column of text numbers.
type Decimal uint8

const (
	Undecided Decimal = iota
	Point
	Comma
)

// Status says whether a cell gave a value.
type Status uint8

const (
	Absent Status = iota // nothing, or a way to write nothing
	OK
	Bad // something that is no such value
)

// Number is what a text number says.
type Number struct {
	Value     float64
	Unit      Unit // zero when the cell has none
	About     bool // "approx. 120"
	Ambiguous bool // "1.234": the sign could be either
}

// absent lists what people write for "nothing", folded.
var absent = func() map[string]bool {
	m := map[string]bool{"": true}
	for _, w := range strings.Split("n a|na|nan|none|nil|null|unknown|not known|not available|not applicable|not applic|missing|no data|tbc|tbd|to be confirmed|"+
		"unbekannt|keine angabe|k a|ka|nicht bekannt|entfallt|o a|ohne angabe|fehlt|nicht vorhanden|"+
		"inconnu|inconnue|nc|n c|non connu|non renseigne|nr|sans objet|nd|n d|"+
		"onbekend|nvt|n v t|niet bekend|geen|geen gegevens|okand|okant|ukendt|ukjent|uppgift saknas|saknas|ej kand|ikke oplyst|ikke kjent|mangler|"+
		"desconocido|desconocida|sin datos|no consta|s d|no disponible|no aplica|x x|xx|xxx|value|ref|div 0|name", "|") {
		m[Fold(w)] = true
	}
	return m
}()

// IsAbsent reports whether the text is a way to write nothing: "", "-", "?", "n/a".
func IsAbsent(s string) bool { return !hasDigit(s) && absent[Fold(s)] }

func hasDigit(s string) bool {
	return strings.IndexFunc(s, unicode.IsDigit) >= 0
}

var aboutWords = map[string]bool{}

func init() {
	for _, w := range strings.Fields("approx approximately about circa ca c est estimated roughly around etwa rund ungefahr geschatzt zirka env environ vers ongeveer ong plusminus omkring cirka ungefar omtrent ca aprox aproximadamente unos sobre um") {
		aboutWords[Fold(w)] = true
	}
}

// cutAbout takes "approx.", "ca.", "~" and the like off the front.
func cutAbout(s string) (rest string, about bool) {
	for {
		t := strings.TrimSpace(s)
		t = strings.TrimLeft(t, "~≈±")
		if len(t) < len(strings.TrimSpace(s)) {
			about = true
		}
		i := strings.IndexFunc(t, func(r rune) bool { return !unicode.IsLetter(r) })
		if i <= 0 || !aboutWords[Fold(t[:i])] {
			return strings.TrimSpace(t), about
		}
		about = true
		s = strings.TrimLeft(t[i:], ". :")
		if s == t {
			return t, about
		}
	}
}

// ParseNumber reads a number as people write it, with an optional unit after
// it. Thousands may be set off by spaces, apostrophes, or the sign that is not
// the decimal one. An ambiguous "1.234" is read as d says; undecided, as a
// decimal, and marked.
func ParseNumber(s string, d Decimal) (Number, Status) {
	if IsAbsent(s) {
		return Number{}, Absent
	}
	var n Number
	s, n.About = cutAbout(s)
	neg := false
	if t := strings.TrimLeft(s, "-–−"); len(t) < len(s) {
		neg, s = true, strings.TrimSpace(t)
	} else {
		s = strings.TrimSpace(strings.TrimPrefix(s, "+"))
	}
	end := numberEnd(s)
	digits, tail := strings.TrimRight(s[:end], " \u00a0\u202f'’"), strings.TrimSpace(s[end:])
	if digits == "" || !isDigit(digits[0]) && !strings.HasPrefix(digits, ".") && !strings.HasPrefix(digits, ",") {
		return Number{}, Bad
	}
	exponent := ""
	if len(tail) > 1 && (tail[0] == 'e' || tail[0] == 'E') {
		if e, err := strconv.Atoi(tail[1:]); err == nil && e > -30 && e < 30 {
			exponent, tail = tail[:1]+strconv.Itoa(e), ""
		}
	}
	plain, ambiguous, ok := plainNumber(digits, d)
	if !ok {
		return Number{}, Bad
	}
	v, err := strconv.ParseFloat(plain+exponent, 64)
	if err != nil || math.IsInf(v, 0) {
		return Number{}, Bad
	}
	if neg {
		v = -v
	}
	n.Value, n.Ambiguous = v, ambiguous && exponent == ""
	tail = strings.TrimRight(strings.Trim(tail, " \t\u00a0\u202f"), "*")
	if c := Fold(tail); tail != "" {
		switch {
		case aboutWords[c] || c == "" && strings.Trim(tail, "()[]?~.*±") == "":
			n.About = true
		case tail == ",-" || tail == ".-" || tail == "-":
		default:
			u, ok := ParseUnit(tail)
			if !ok {
				return Number{}, Bad
			}
			n.Unit = u
		}
	}
	return n, OK
}

func isDigit(c byte) bool { return c >= '0' && c <= '9' }

// numberEnd finds where the digits and the signs between them end.
func numberEnd(s string) int {
	end := 0
	for i := 0; i < len(s); {
		r, size := utf8.DecodeRuneInString(s[i:])
		switch {
		case r >= '0' && r <= '9':
			end = i + size
		case r == '.' || r == ',':
			if i+1 >= len(s) || !isDigit(s[i+1]) {
				if end == i { // "1." counts, "120, about" does not
					return end
				}
				return end
			}
		case r == ' ' || r == '\u00a0' || r == '\u202f' || r == '\u2009' || r == '\'' || r == '’':
			// A separator only before exactly three digits.
			k := i + size
			if k+3 > len(s) || !isDigit(s[k]) || !isDigit(s[k+1]) || !isDigit(s[k+2]) || k+3 < len(s) && isDigit(s[k+3]) {
				return end
			}
		default:
			return end
		}
		i += size
	}
	return end
}

// plainNumber brings digits and signs to the form that strconv reads.
func plainNumber(s string, d Decimal) (plain string, ambiguous, ok bool) {
	s = strings.Map(func(r rune) rune {
		switch r {
		case ' ', '\u00a0', '\u202f', '\u2009', '\'', '’':
			return -1
		}
		return r
	}, s)
	points, commas := strings.Count(s, "."), strings.Count(s, ",")
	switch {
	case points == 0 && commas == 0:
		return s, false, true
	case points > 0 && commas > 0:
		dec, sep := ".", ","
		if strings.LastIndex(s, ",") > strings.LastIndex(s, ".") {
			dec, sep = ",", "."
		}
		whole, part, _ := strings.Cut(s, dec)
		if strings.Contains(part, dec) || strings.Contains(part, sep) || !grouped(whole, sep) {
			return "", false, false
		}
		return strings.ReplaceAll(whole, sep, "") + "." + part, false, true
	}
	sep := "."
	if commas > 0 {
		sep = ","
	}
	if points+commas > 1 {
		return strings.ReplaceAll(s, sep, ""), false, grouped(s, sep)
	}
	whole, part, _ := strings.Cut(s, sep)
	decimal := whole + "." + part
	if whole == "" {
		decimal = "0" + decimal
	}
	if !grouped(s, sep) {
		return decimal, false, true
	}
	if d == Point && sep == "," || d == Comma && sep == "." {
		return whole + part, true, true
	}
	return decimal, true, true
}

// grouped reports whether sep sets off groups of three digits, as thousands do.
func grouped(s, sep string) bool {
	parts := strings.Split(s, sep)
	if len(parts[0]) < 1 || len(parts[0]) > 3 || parts[0][0] == '0' && len(parts) > 1 {
		return false
	}
	for _, p := range parts[1:] {
		if len(p) != 3 {
			return false
		}
	}
	return true
}

// Evidence counts what the text numbers of a column tell about its decimal sign.
type Evidence struct{ Point, Comma, Ambiguous int }

// Look adds one cell.
func (e *Evidence) Look(s string) {
	if !strings.ContainsAny(s, ".,") || len(s) > 60 {
		return
	}
	s, _ = cutAbout(s)
	s = strings.TrimLeft(s, "-–− ")
	s = s[:numberEnd(s)]
	points, commas := strings.Count(s, "."), strings.Count(s, ",")
	switch {
	case s == "" || points+commas == 0:
	case points > 0 && commas > 0:
		if strings.LastIndex(s, ",") > strings.LastIndex(s, ".") {
			e.Comma++
		} else {
			e.Point++
		}
	case points > 1:
		e.Comma++
	case commas > 1:
		e.Point++
	case grouped(s, ".") && points == 1 || grouped(s, ",") && commas == 1:
		e.Ambiguous++
	case points == 1:
		e.Point++
	default:
		e.Comma++
	}
}

// Decimal is the sign for which there is more evidence.
func (e Evidence) Decimal() Decimal {
	switch {
	case e.Point > e.Comma:
		return Point
	case e.Comma > e.Point:
		return Comma
	}
	return Undecided
}
