package cell

import (
	"math"
	"strings"
	"testing"
)

// FuzzText reads any text as everything that a cell may be: nothing may fail,
// and what is read must make sense and say the same again.
func FuzzText(f *testing.F) {
	for _, s := range []string{"1.234,5", "approx. 120 m²", "1960-69", "before 1919", "31.12.2024", "12/2024", "ja", "R+5", "3-4", "2 + DG", "0,24 W/(m²K)", "-", "\u00a0", "1e308", "½", "٣", "9999-12-31", "≤ 1918", "XX"} {
		f.Add(s, uint8(0))
		f.Add(s, uint8(2))
	}
	f.Fuzz(func(t *testing.T, s string, d uint8) {
		decimal := Decimal(d % 3)
		n, st := ParseNumber(s, decimal)
		if math.IsNaN(n.Value) || math.IsInf(n.Value, 0) || st != OK && n.Value != 0 {
			t.Errorf("number %+v, status %d", n, st)
		}
		if IsAbsent(s) != (st == Absent) {
			t.Errorf("absent %v as text, status %d as a number", IsAbsent(s), st)
		}
		y, st := ParseYear(s, 2026)
		if st == OK && (y.Low > y.High || math.IsNaN(y.Low+y.High)) {
			t.Errorf("years %+v", y)
		}
		for _, order := range []DayOrder{DayFirst, MonthFirst} {
			if date, st := ParseDate(s, order); st == OK {
				if again, st := ParseDate(date, order); st != OK || again != date {
					t.Errorf("the date %q is read again as %q", date, again)
				}
			}
		}
		if k, st := ParseStoreys(s); st == OK && (k.Count <= 0 || k.Count > maxStoreys) {
			t.Errorf("storeys %+v", k)
		}
		if u, ok := ParseUnit(s); ok && (u.Name == "" || !(u.Factor > 0)) {
			t.Errorf("unit %+v", u)
		}
		_, _ = ParseYesNo(s)
		ForeignUnit(s)
		var e Evidence
		e.Look(s)
		if isASCII(s) && Fold(strings.ToUpper(s)) != Fold(s) {
			t.Errorf("%q folds to %q, and in capitals to %q", s, Fold(s), Fold(strings.ToUpper(s)))
		}
	})
}

func isASCII(s string) bool {
	for i := range len(s) {
		if s[i] >= 0x80 {
			return false
		}
	}
	return true
}

// Plain text is folded by its own way, to the same.
func FuzzFold(f *testing.F) {
	for _, s := range []string{"", "Haus-Nr. 3", "aee ueue Aoe'e", "a e", "Öl", "ÅRSVÄRME", "co-oe`e", "x\x00y", "kWh/m^2", "m^3 & m^2"} {
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, s string) {
		if plain, ok := foldASCII(s); ok && plain != foldAny(s) {
			t.Errorf("%q is %q in plain text, %q else", s, plain, foldAny(s))
		}
	})
}
