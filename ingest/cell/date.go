package cell

import (
	"regexp"
	"strconv"
	"strings"
	"time"
)

var yes = fold2("yes|y|true|x|1|ja|j|wahr|oui|o|vrai|si|s|sant|sann|verdadero|vorhanden|waar|✓|✔|listed|protected|denkmal|denkmalschutz|classe|inscrit|monument|rijksmonument|gemeentelijk monument|fredet|verneverdig|k markt|byggnadsminne|protegido|bic|grade i|grade ii|grade ii listed|all|einzeldenkmal|ensembleschutz")
var no = fold2("no|n|false|0|nein|falsch|non|faux|nee|onwaar|nej|nei|falsk|falskt|falso|nicht|keine|kein|none|not listed|no protection|geen|ingen|ninguna|ninguno|aucune|aucun|kein denkmal")

func fold2(s string) map[string]bool {
	m := map[string]bool{}
	for _, w := range strings.Split(s, "|") {
		if f := Fold(w); f != "" {
			m[f] = true
		} else {
			m[w] = true
		}
	}
	return m
}

// ParseYesNo reads yes or no in the eight languages, marks such as "x", and
// the words by which a register says that a building is protected.
func ParseYesNo(s string) (bool, Status) {
	s = strings.TrimSpace(s)
	f := Fold(s)
	switch {
	case no[f]: // before absent: "none" and "keine" answer the question here
		return false, OK
	case yes[f] || yes[s]:
		return true, OK
	case IsAbsent(s):
		return false, Absent
	}
	return false, Bad
}

// DayOrder says which of day and month comes first in a column of dates.
type DayOrder uint8

const (
	DayFirst DayOrder = iota
	MonthFirst
)

var (
	reISO     = regexp.MustCompile(`^(\d{4})[-/.](\d{1,2})[-/.](\d{1,2})(?:[T ].*)?$`)
	reDMY     = regexp.MustCompile(`^(\d{1,2})[-/. ]+(\d{1,2})[-/. ]+(\d{4}|\d{2})(?: .*)?$`)
	reMonth   = regexp.MustCompile(`^(\d{4})[-/.](\d{1,2})$`)
	reCompact = regexp.MustCompile(`^(19|20)(\d{2})(\d{2})(\d{2})$`)
	reWordy   = regexp.MustCompile(`^(\d{1,2}) (?:de )?([a-z]+) (?:de )?(\d{4})$`)
	reWordy2  = regexp.MustCompile(`^([a-z]+) (\d{1,2}) (\d{4})$`)
	reWordy3  = regexp.MustCompile(`^([a-z]+) (?:de )?(\d{4})$`)
)

var months = func() map[string]time.Month {
	m := map[string]time.Month{}
	for _, l := range []string{
		"january february march april may june july august september october november december",
		"januar februar marz april mai juni juli august september oktober november dezember",
		"janner feber maerz apr mai jun jul aug sept okt nov dez",
		"janvier fevrier mars avril mai juin juillet aout septembre octobre novembre decembre",
		"januari februari maart april mei juni juli augustus september oktober november december",
		"januari februari mars april maj juni juli augusti september oktober november december",
		"januar februar marts april maj juni juli august september oktober november december",
		"januar februar mars april mai juni juli august september oktober november desember",
		"enero febrero marzo abril mayo junio julio agosto septiembre octubre noviembre diciembre",
		"jan feb mar apr may jun jul aug sep oct nov dec",
	} {
		for i, w := range strings.Fields(l) {
			m[Fold(w)] = time.Month(i + 1)
		}
	}
	return m
}()

// LooksMonthFirst and LooksDayFirst are evidence for a column's DayOrder.
func LooksMonthFirst(s string) bool { return secondOver12(s, 2) }

// LooksDayFirst reports whether the first number can be no month.
func LooksDayFirst(s string) bool { return secondOver12(s, 1) }

func secondOver12(s string, group int) bool {
	m := reDMY.FindStringSubmatch(strings.TrimSpace(s))
	if m == nil {
		return false
	}
	n, _ := strconv.Atoi(m[group])
	return n > 12
}

// ParseDate reads a date and returns it as "2026-03-01". A month stands for its
// last day and a year for 31 December, since data of a year is whole then.
func ParseDate(s string, order DayOrder) (string, Status) {
	s = strings.TrimSpace(s)
	if IsAbsent(s) || s == "0" {
		return "", Absent
	}
	num := func(t string) int { n, _ := strconv.Atoi(t); return n }
	if m := reISO.FindStringSubmatch(s); m != nil {
		return day(num(m[1]), num(m[2]), num(m[3]))
	}
	if m := reCompact.FindStringSubmatch(s); m != nil {
		return day(num(m[1]+m[2]), num(m[3]), num(m[4]))
	}
	if m := reDMY.FindStringSubmatch(s); m != nil {
		d, mo, y := num(m[1]), num(m[2]), num(m[3])
		if order == MonthFirst && d <= 12 || mo > 12 {
			d, mo = mo, d
		}
		if len(m[3]) == 2 {
			if y += 2000; y > 2069 {
				y -= 100
			}
		}
		return day(y, mo, d)
	}
	if m := reMonth.FindStringSubmatch(s); m != nil {
		return monthEnd(num(m[1]), num(m[2]))
	}
	if reYear.MatchString(s) {
		return day(num(s), 12, 31)
	}
	f := Fold(s)
	if m := reWordy.FindStringSubmatch(f); m != nil {
		return day(num(m[3]), int(months[m[2]]), num(m[1]))
	}
	if m := reWordy2.FindStringSubmatch(f); m != nil {
		return day(num(m[3]), int(months[m[1]]), num(m[2]))
	}
	if m := reWordy3.FindStringSubmatch(f); m != nil {
		return monthEnd(num(m[2]), int(months[m[1]]))
	}
	return "", Bad
}

func monthEnd(y, m int) (string, Status) {
	if m < 1 || m > 12 {
		return "", Bad
	}
	t := time.Date(y, time.Month(m)+1, 0, 0, 0, 0, 0, time.UTC)
	return day(y, m, t.Day())
}

func day(y, m, d int) (string, Status) {
	t := time.Date(y, time.Month(m), d, 0, 0, 0, 0, time.UTC)
	if y < 1000 || y > 9999 || m < 1 || t.Day() != d || int(t.Month()) != m {
		return "", Bad
	}
	return t.Format(time.DateOnly), OK
}
