package cell

import (
	"math"
	"testing"
)

func TestParseNumber(t *testing.T) {
	for _, tc := range []struct {
		in   string
		d    Decimal
		want float64
		st   Status
		unit string
	}{
		{"120", Undecided, 120, OK, ""},
		{" 120 ", Undecided, 120, OK, ""},
		{"1,5", Undecided, 1.5, OK, ""},
		{"1.5", Undecided, 1.5, OK, ""},
		{"1.234,5", Undecided, 1234.5, OK, ""},
		{"1,234.5", Undecided, 1234.5, OK, ""},
		{"1.234.567", Undecided, 1234567, OK, ""},
		{"9,245,333", Undecided, 9245333, OK, ""},
		{"1.234", Comma, 1234, OK, ""},
		{"1.234", Point, 1.234, OK, ""},
		{"1,234", Point, 1234, OK, ""},
		{"0,234", Point, 0.234, OK, ""},
		{"1 234,5", Undecided, 1234.5, OK, ""},
		{"1\u00a0234", Undecided, 1234, OK, ""},
		{"1\u202f234", Undecided, 1234, OK, ""},
		{"12'500", Undecided, 12500, OK, ""},
		{"12’500.50", Undecided, 12500.5, OK, ""},
		{"approx. 120", Undecided, 120, OK, ""},
		{"ca. 120 m²", Undecided, 120, OK, "m2"},
		{"ca 120", Undecided, 120, OK, ""},
		{"~120", Undecided, 120, OK, ""},
		{"environ 85 m2", Undecided, 85, OK, "m2"},
		{"120 m²", Undecided, 120, OK, "m2"},
		{"120m2", Undecided, 120, OK, "m2"},
		{"1,300 sq ft", Point, 1300, OK, "ft2"},
		{"45 MWh/a", Undecided, 45, OK, "MWh"},
		{"75 %", Undecided, 75, OK, "%"},
		{"75%", Undecided, 75, OK, "%"},
		{"0,24 W/(m²K)", Undecided, 0.24, OK, "W/(m2K)"},
		{"-5", Undecided, -5, OK, ""},
		{"−5,5", Undecided, -5.5, OK, ""},
		{"1.2E+03", Undecided, 1200, OK, ""},
		{".5", Undecided, 0.5, OK, ""},
		{"120 (est.)", Undecided, 120, OK, ""},
		{"n/a", Undecided, 0, Absent, ""},
		{"N.A.", Undecided, 0, Absent, ""},
		{"-", Undecided, 0, Absent, ""},
		{"?", Undecided, 0, Absent, ""},
		{"unknown", Undecided, 0, Absent, ""},
		{"k.A.", Undecided, 0, Absent, ""},
		{"", Undecided, 0, Absent, ""},
		{"onbekend", Undecided, 0, Absent, ""},
		{"two", Undecided, 0, Bad, ""},
		{"12 Wohnungen", Undecided, 0, Bad, ""},
		{"100-200", Undecided, 0, Bad, ""},
		{"1,23,4", Undecided, 0, Bad, ""},
		{"see note 4", Undecided, 0, Bad, ""},
	} {
		n, st := ParseNumber(tc.in, tc.d)
		if st != tc.st || math.Abs(n.Value-tc.want) > 1e-12*math.Abs(tc.want) || n.Unit.Name != tc.unit {
			t.Errorf("%q: %v %q status %d, want %v %q status %d", tc.in, n.Value, n.Unit.Name, st, tc.want, tc.unit, tc.st)
		}
	}
}

func TestAmbiguousNumbersAreMarked(t *testing.T) {
	for in, want := range map[string]bool{"1.234": true, "12,345": true, "0.234": false, "1234.5": false, "1.2345": false, "1.234,5": false, "1234": false} {
		if n, _ := ParseNumber(in, Undecided); n.Ambiguous != want {
			t.Errorf("%q: ambiguous %v", in, n.Ambiguous)
		}
	}
}

func TestColumnDecidesItsDecimalSign(t *testing.T) {
	for _, tc := range []struct {
		cells []string
		want  Decimal
	}{
		{[]string{"1.234", "2.345", "987,5"}, Comma},
		{[]string{"1,234", "2,345", "9,876,543"}, Point},
		{[]string{"1.234", "2.345"}, Undecided},
		{[]string{"0.234", "1.234"}, Point},
		{[]string{"ca. 1,5 m", "1.234"}, Comma},
		{[]string{"12", "x"}, Undecided},
	} {
		var e Evidence
		for _, c := range tc.cells {
			e.Look(c)
		}
		if got := e.Decimal(); got != tc.want {
			t.Errorf("%q: %d, want %d", tc.cells, got, tc.want)
		}
	}
}

func TestParseYear(t *testing.T) {
	for _, tc := range []struct {
		in        string
		low, high float64
		st        Status
	}{
		{"1965", 1965, 1965, OK},
		{"1991.0", 1991, 1991, OK},
		{"1960-69", 1960, 1969, OK},
		{"1960–1969", 1960, 1969, OK},
		{"1960 bis 1969", 1960, 1969, OK},
		{"1998-03", 1998, 2003, OK},
		{"1965/66", 1965, 1966, OK},
		{"before 1919", 1848, 1918, OK},
		{"vor 1900", 1829, 1899, OK},
		{"avant 1949", 1878, 1948, OK},
		{"før 1930", 1859, 1929, OK},
		{"antes de 1950", 1879, 1949, OK},
		{"bis 1918", 1848, 1918, OK},
		{"<1919", 1848, 1918, OK},
		{"after 2000", 2001, 2026, OK},
		{"seit 1995", 1995, 2026, OK},
		{"1995-", 1995, 2026, OK},
		{"2012+", 2012, 2026, OK},
		{">= 2012", 2012, 2026, OK},
		{"> 2012", 2013, 2026, OK},
		{"-1918", 1848, 1918, OK},
		{"<= 1918", 1848, 1918, OK},
		{"1965 (Anbau 1990)", 1965, 1965, OK},
		{"1960-69 (part)", 1960, 1969, OK},
		{"1965 (est.)", 1960, 1970, OK},
		{"1965 (?)", 1960, 1970, OK},
		{"1965 ca.", 1960, 1970, OK},
		{"Victorian", 1837, 1901, OK},
		{"Nachkriegszeit", 1946, 1964, OK},
		{"entre-deux-guerres", 1919, 1938, OK},
		{"(1965)", 1965, 1965, OK},
		{"1978-05-12 00:00:00", 1978, 1978, OK},
		{"-5", 0, 0, Bad},
		{"mellomkrigstid", 1919, 1938, OK},
		{"c. 1900", 1895, 1905, OK},
		{"um 1900", 1895, 1905, OK},
		{"~1930", 1925, 1935, OK},
		{"1900?", 1895, 1905, OK},
		{"19th century", 1800, 1899, OK},
		{"19. Jahrhundert", 1800, 1899, OK},
		{"19. Jh.", 1800, 1899, OK},
		{"XIXe siècle", 1800, 1899, OK},
		{"siglo XIX", 1800, 1899, OK},
		{"19e eeuw", 1800, 1899, OK},
		{"1970s", 1970, 1979, OK},
		{"1970er", 1970, 1979, OK},
		{"1970-talet", 1970, 1979, OK},
		{"1800-talet", 1800, 1899, OK},
		{"années 1970", 1970, 1979, OK},
		{"jaren 70", 1970, 1979, OK},
		{"70er Jahre", 1970, 1979, OK},
		{"12.05.1978", 1978, 1978, OK},
		{"1978-05-12", 1978, 1978, OK},
		{"05/1978", 1978, 1978, OK},
		{"Bj. 1965", 0, 0, Bad},
		{"0", 0, 0, Absent},
		{"0.0", 0, 0, Absent},
		{"unknown", 0, 0, Absent},
		{"65", 65, 65, OK}, // for the checks to refuse
		{"1890/1995", 0, 0, Bad},
		{"old", 0, 0, Bad},
		{"1969-1960", 0, 0, Bad},
	} {
		got, st := ParseYear(tc.in, 2026)
		if st != tc.st || st == OK && got != (Span{tc.low, tc.high}) {
			t.Errorf("%q: %v status %d, want %v to %v status %d", tc.in, got, st, tc.low, tc.high, tc.st)
		}
	}
}

func TestParseDate(t *testing.T) {
	for _, tc := range []struct {
		in    string
		order DayOrder
		want  string
	}{
		{"2026-03-01", DayFirst, "2026-03-01"}, {"1.3.2026", DayFirst, "2026-03-01"}, {"01/03/2026", DayFirst, "2026-03-01"},
		{"03/01/2026", MonthFirst, "2026-03-01"}, {"10/13/2014", MonthFirst, "2014-10-13"}, {"10/13/2014", DayFirst, "2014-10-13"},
		{"20260301", DayFirst, "2026-03-01"}, {"1 March 2026", DayFirst, "2026-03-01"}, {"1. März 2026", DayFirst, "2026-03-01"},
		{"1er mars 2026", DayFirst, ""}, {"March 1, 2026", DayFirst, "2026-03-01"}, {"1 de marzo de 2026", DayFirst, "2026-03-01"},
		{"2014", DayFirst, "2014-12-31"}, {"2024-02", DayFirst, "2024-02-29"}, {"31.2.2026", DayFirst, ""}, {"13/13/2026", DayFirst, ""},
		{"1.3.26", DayFirst, "2026-03-01"}, {"soon", DayFirst, ""},
	} {
		if got, _ := ParseDate(tc.in, tc.order); got != tc.want {
			t.Errorf("%q: %q, want %q", tc.in, got, tc.want)
		}
	}
}

func TestParseYesNo(t *testing.T) {
	for in, want := range map[string]bool{"yes": true, "Ja": true, "OUI": true, "sí": true, "x": true, "1": true, "Denkmalschutz": true, "Grade II listed": true,
		"no": false, "Nein": false, "nej": false, "keine": false, "0": false, "none": false} {
		if got, st := ParseYesNo(in); st != OK || got != want {
			t.Errorf("%q: %v status %d", in, got, st)
		}
	}
	for in, want := range map[string]Status{"": Absent, "?": Absent, "n/a": Absent, "perhaps": Bad} {
		if _, st := ParseYesNo(in); st != want {
			t.Errorf("%q: status %d, want %d", in, st, want)
		}
	}
}

// Factors against their definitions: the foot is 0.3048 m and the pound
// 0.45359237 kg exactly (international agreement of 1959), the International
// Table Btu 1055.05585262 J exactly; compared to the ten digits kept.
func TestUnits(t *testing.T) {
	const ft, btu = 0.3048, 1055.05585262
	for written, want := range map[string]float64{
		"ft²": ft * ft, "cu ft": ft * ft * ft, "kBtu": btu / 3600, "MMBtu": btu / 3.6, "GJ": 1e6 / 3600, "MWh/a": 1000,
		"l/s": 3.6, "cfm": ft * ft * ft * 60, "btu/h.ft2.f": btu / 3600 / (ft * ft) * 1.8, "kWh/yr": 1, "W/m²K": 1, "%": 0.01, "m³/h": 1,
	} {
		u, ok := ParseUnit(written)
		if !ok || math.Abs(u.Factor/want-1) > 1e-9 {
			t.Errorf("%q: %+v, want factor %.10g", written, u, want)
		}
	}
	for _, no := range []string{"", "x", "m2/a", "kWh/m2", "kBtu/sq ft", "EUR"} {
		if u, ok := ParseUnit(no); ok {
			t.Errorf("%q: is %+v", no, u)
		}
	}
}

func TestFold(t *testing.T) {
	for in, want := range map[string]string{"Wohnfläche": "wohnflache", "Wohnflaeche": "wohnflache", "Année": "annee", "byggeår": "byggear",
		"Opførelsesår": "opforelsesar", "U-Wert  (Wand)": "u wert wand", "Straße": "strasse", "m²": "m2", "d'étages": "detages"} {
		if got := Fold(in); got != want {
			t.Errorf("%q: %q, want %q", in, got, want)
		}
	}
}

func FuzzCell(f *testing.F) {
	for _, s := range []string{"1.234,5", "approx. 120 m²", "1960-69", "before 1919", "~", "-", "1e5", "١٢", "1.", "\xff", "12/31/2020"} {
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, s string) {
		for _, d := range []Decimal{Undecided, Point, Comma} {
			if n, st := ParseNumber(s, d); st == OK && (math.IsNaN(n.Value) || math.IsInf(n.Value, 0)) {
				t.Errorf("%q: %v", s, n.Value)
			}
		}
		if y, st := ParseYear(s, 2026); st == OK && (math.IsNaN(y.Low) || y.Low > y.High) {
			t.Errorf("%q: %v", s, y)
		}
		if d, st := ParseDate(s, MonthFirst); st == OK && len(d) != 10 {
			t.Errorf("%q: %q", s, d)
		}
		ParseYesNo(s)
		var e Evidence
		e.Look(s)
		Nearest(s, []string{"natural", "balanced"})
	})
}
