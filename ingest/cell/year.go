package cell

import (
	"regexp"
	"strconv"
	"strings"
)

// Span is a year or a span of years, both ends included.
type Span struct{ Low, High float64 }

// How far back an open "before 1919" reaches, and how exact "c. 1900" is. Both
// are conventions: a span must have two ends to be looked up by its middle.
const (
	openYears  = 70
	aboutYears = 5
)

var (
	before = words("before|pre|until|till|up to|prior to|older than|vor|bis|alter als|avant|jusque|jusqu en|anterieur a|voor|tot|fore|innan|for|frem til|indtil|inden|antes de|hasta|anterior a")
	after  = words("after|post|since|from|newer than|nach|ab|seit|apres|depuis|a partir de|na|vanaf|sinds|efter|etter|sedan|fran|siden|fra|despues de|desde|posterior a")
	about  = words("approx|approximately|about|circa|ca|c|around|um|etwa|ungefahr|env|environ|vers|ongeveer|rond|omkring|cirka|omtrent|omkr|aprox|hacia|alrededor de|est|estimated|built|baujahr|year|jahr|annee|jaar|ar|ano|anno|dating from|early|late")

	reSpan    = regexp.MustCompile(`^(\d{4}) ?(?:-|–|—|to|bis|a|à|tot|till|til|hasta|y|and|und|et|/|\.\.) ?(\d{4}|\d{2})$`)
	reDecade  = regexp.MustCompile(`^(?:les )?(?:annees |anos |jaren |die |the )?(\d{3}0|\d0)(?: ?s| ?er| ?erne| ?ern| ?er jahre| ?tal| ?talet| ?tallet| ?ties)?$`)
	reCentury = regexp.MustCompile(`^(?:the |siecle |siglo |s )?(1[0-9]|2[01]|xi|xii|xiii|xiv|xv|xvi|xvii|xviii|xix|xx|xxi) ?(?:st|nd|rd|th|e|eme|de)? ?(?:c|cent|century|jh|jhd|jhdt|jahrhundert|siecle|s|eeuw|arhundrede|arhundre|arhundradet|siglo)?$`)
	reTwo     = regexp.MustCompile(`^\d{4} ?/ ?\d{4}$`) // "built / changed"
	reRemark  = regexp.MustCompile(`^(\S.*?)\s*\(([^)]*)\)$`)
	reYear    = regexp.MustCompile(`^\d{4}$`)
	reInDate  = regexp.MustCompile(`^(?:\d{1,2}[./-]\d{1,2}[./-](\d{4})|\d{1,2}[./-](\d{4})|(\d{4})[./-]\d{1,2}(?:[./-]\d{1,2})?(?:[T ]\d.*)?)$`)
)

// eras are spans that people name without a year. Their ends are conventions of
// building history; what matters here is the middle.
var eras = func() map[string]Span {
	m := map[string]Span{}
	for _, e := range []struct {
		low, high float64
		names     string
	}{
		{1714, 1836, "georgian"},
		{1837, 1901, "victorian"},
		{1902, 1913, "edwardian"},
		{1871, 1913, "gründerzeit|gründerzeitlich"},
		{1895, 1913, "jugendstil|art nouveau|modernisme|modernismo"},
		{1895, 1905, "jahrhundertwende|turn of the century|um die jahrhundertwende|rond de eeuwwisseling|sekelskiftet|århundreskiftet|århundredskiftet"},
		{1869, 1938, "pre war|prewar|vorkrieg|vorkriegszeit|avant guerre|vooroorlogs|förkrigstid|førkrigstid|preguerra"},
		{1919, 1938, "interwar|inter war|between the wars|zwischenkriegszeit|entre deux guerres|interbellum|mellankrigstid|mellankrigstiden|mellemkrigstid|mellemkrigstiden|mellomkrigstid|mellomkrigstiden|entreguerras|periodo de entreguerras"},
		{1946, 1964, "post war|postwar|nachkrieg|nachkriegszeit|nachkriegsbau|après guerre|naoorlogs|wederopbouw|efterkrigstid|efterkrigstiden|etterkrigstid|etterkrigstiden|posguerra|postguerra"},
	} {
		for _, n := range strings.Split(e.names, "|") {
			m[Fold(n)] = Span{e.low, e.high}
		}
	}
	return m
}()

func words(s string) []string {
	ws := strings.Split(s, "|")
	for i := range ws {
		ws[i] = Fold(ws[i])
	}
	return ws
}

func cutWord(s string, ws []string) (string, bool) {
	for _, w := range ws {
		if rest, ok := strings.CutPrefix(s, w+" "); ok {
			return strings.TrimSpace(rest), true
		}
	}
	return s, false
}

var romans = map[string]int{"xi": 11, "xii": 12, "xiii": 13, "xiv": 14, "xv": 15, "xvi": 16, "xvii": 17, "xviii": 18, "xix": 19, "xx": 20, "xxi": 21}

// ParseYear reads a year or a span: "1965", "1960-69", "before 1919",
// "c. 1900", "19th century", "1970s", "12.5.1978", in the eight languages. An
// open span ends in thisYear or reaches openYears back.
func ParseYear(s string, thisYear int) (Span, Status) {
	raw := strings.TrimSpace(s)
	if IsAbsent(raw) {
		return Span{}, Absent
	}
	low := strings.ToLower(raw)
	if n, err := strconv.ParseFloat(low, 64); err == nil {
		switch {
		case n == 0:
			return Span{}, Absent
		case n == float64(int(n)) && n >= 0 && n < 1e6:
			return Span{n, n}, OK
		case n > -1000 || n != float64(int(n)): // "-1918" is a span without its beginning
			return Span{}, Bad
		}
	}
	if m := reInDate.FindStringSubmatch(low); m != nil {
		y, _ := strconv.ParseFloat(m[1]+m[2]+m[3], 64)
		// "1960-69" also looks like a year and a month.
		if _, span := spanOf(low); !span || y == 0 {
			return Span{y, y}, OK
		}
	}
	if sp, ok := spanOf(low); ok {
		return sp, OK
	}
	if reTwo.MatchString(low) {
		return Span{}, Bad
	}
	switch {
	case strings.HasPrefix(low, "≤"), strings.HasPrefix(low, "<="), strings.HasPrefix(low, "-1"), strings.HasPrefix(low, "–1"):
		low = "until " + strings.TrimLeft(low, "<≤=-– ")
	case strings.HasPrefix(low, "<"):
		low = "before " + strings.TrimLeft(low, "< ")
	case strings.HasPrefix(low, "≥"), strings.HasPrefix(low, ">="):
		low = "since " + strings.TrimLeft(low, ">≥= ")
	case strings.HasPrefix(low, ">"):
		low = "after " + strings.TrimLeft(low, "> ")
	case strings.HasSuffix(low, "-") || strings.HasSuffix(low, "–") || strings.HasSuffix(low, "+"):
		low = "since " + strings.TrimRight(low, "-–+ ")
	case strings.HasPrefix(low, "~"):
		low = "about " + strings.TrimLeft(low, "~ ")
	case strings.HasSuffix(low, "?"), strings.HasSuffix(low, "(?)"):
		low = "about " + strings.TrimRight(low, "?() ")
	}
	sp, st := parseFolded(Fold(low), thisYear)
	if m := reRemark.FindStringSubmatch(low); st == Bad && m != nil {
		// "1965 (extension 1990)" was built in 1965; "1965 (est.)" about then.
		if aboutWords[Fold(m[2])] || strings.Trim(m[2], "? ") == "" {
			return parseFolded(Fold("about "+m[1]), thisYear)
		}
		return parseFolded(Fold(m[1]), thisYear)
	}
	return sp, st
}

func spanOf(low string) (Span, bool) {
	m := reSpan.FindStringSubmatch(low)
	if m == nil {
		return Span{}, false
	}
	a, _ := strconv.Atoi(m[1])
	b, _ := strconv.Atoi(m[2])
	if len(m[2]) == 2 {
		if strings.ContainsAny(low, "/.") && b <= 12 && b <= a%100 {
			return Span{}, false
		}
		b += a / 100 * 100
		if b < a {
			b += 100 // "1998-03"
		}
		if b-a > 60 {
			return Span{}, false
		}
	}
	// A stroke between years far apart means "built / changed", not a span.
	if b < a || strings.Contains(low, "/") && b-a > 10 {
		return Span{}, false
	}
	return Span{float64(a), float64(b)}, true
}

func parseFolded(f string, thisYear int) (Span, Status) {
	if e, ok := eras[f]; ok {
		return e, OK
	}
	if year, word, ok := strings.Cut(f, " "); ok && aboutWords[word] && reYear.MatchString(year) {
		f = word + " " + year // "1965 ca."
	}
	if rest, ok := cutWord(f, before); ok {
		sp, st := parseFolded(rest, thisYear)
		if st != OK {
			return Span{}, Bad
		}
		end := sp.Low - 1
		for _, w := range words("until|up to|bis|jusqu en|jusque|tot|frem til|indtil|hasta|till") {
			if strings.HasPrefix(f, w+" ") {
				end = sp.High
			}
		}
		return Span{end - openYears, end}, OK
	}
	if rest, ok := cutWord(f, after); ok {
		sp, st := parseFolded(rest, thisYear)
		if st != OK {
			return Span{}, Bad
		}
		start := sp.High + 1
		for _, w := range words("since|from|ab|seit|depuis|a partir de|vanaf|sinds|sedan|fran|siden|fra|desde") {
			if strings.HasPrefix(f, w+" ") {
				start = sp.Low
			}
		}
		return Span{start, max(start, float64(thisYear))}, OK
	}
	if rest, ok := cutWord(f, about); ok {
		sp, st := parseFolded(rest, thisYear)
		if st != OK {
			return Span{}, Bad
		}
		if sp.Low == sp.High && !strings.HasPrefix(f, "built") && !strings.HasPrefix(f, "baujahr") && !strings.HasPrefix(f, "year") && !strings.HasPrefix(f, "jahr") {
			sp.Low, sp.High = sp.Low-aboutYears, sp.High+aboutYears
		}
		return sp, OK
	}
	if reYear.MatchString(f) {
		y, _ := strconv.ParseFloat(f, 64)
		return Span{y, y}, OK
	}
	if sp, ok := spanOf(strings.Replace(f, " ", "-", 1)); ok && strings.Count(f, " ") == 1 {
		return sp, OK
	}
	// "1800-talet" and "1800s" name a century, "1970-talet" a decade.
	if m := reDecade.FindStringSubmatch(f); m != nil && f != m[1] {
		y, _ := strconv.Atoi(m[1])
		if y < 100 {
			y += 1900
		}
		if y%100 == 0 && y < 1900 {
			return Span{float64(y), float64(y + 99)}, OK
		}
		return Span{float64(y), float64(y + 9)}, OK
	}
	if m := reCentury.FindStringSubmatch(f); m != nil && f != m[1] {
		n, ok := romans[m[1]]
		if !ok {
			n, _ = strconv.Atoi(m[1])
		}
		return Span{float64(n-1) * 100, float64(n)*100 - 1}, OK
	}
	return Span{}, Bad
}
