package workbook

import (
	"math"
	"math/rand/v2"
	"strconv"
	"strings"
	"testing"
)

// What is written must be read back as exactly the number that formulas were
// computed with, and be within half a unit of the last decimal.
func TestFixedIsWhatIsWritten(t *testing.T) {
	t.Parallel()
	rnd := rand.New(rand.NewPCG(5, 6))
	check := func(v float64, decimals int) {
		t.Helper()
		text := string(appendFixed(nil, v, decimals))
		back, err := strconv.ParseFloat(text, 64)
		if err != nil || back != fixed(v, decimals) {
			t.Fatalf("%v with %d decimals: written %s, fixed %v", v, decimals, text, fixed(v, decimals))
		}
		if math.Abs(back-v) > 0.5000001*math.Pow10(-decimals)+math.Abs(v)*1e-15 {
			t.Fatalf("%v with %d decimals: written %s", v, decimals, text)
		}
		if strings.HasPrefix(text, "-0") && back == 0 {
			t.Fatalf("%v is written as %s", v, text)
		}
	}
	for range 20000 {
		v := math.Pow(10, 20*rnd.Float64()-6) * (rnd.Float64() - 0.5)
		check(v, rnd.IntN(len(pow10)))
	}
	for _, v := range []float64{0, math.Copysign(0, -1), 1, -1, 0.5, 0.0005, -0.0004, 999.9995, 1e15, 1e300, -1e20, math.MaxFloat64} {
		check(v, 3)
	}
}

func TestAppendFixedDropsZeros(t *testing.T) {
	t.Parallel()
	for _, c := range []struct {
		v        float64
		decimals int
		want     string
	}{
		{1.5, 3, "1.5"}, {2, 3, "2"}, {-0.25, 2, "-0.25"}, {1.0004, 3, "1"}, {0.05, 2, "0.05"}, {100, 0, "100"}, {1.005, 3, "1.005"},
	} {
		if got := string(appendFixed(nil, c.v, c.decimals)); got != c.want {
			t.Errorf("%v with %d decimals: %s, want %s", c.v, c.decimals, got, c.want)
		}
	}
}

func TestClean(t *testing.T) {
	t.Parallel()
	for in, want := range map[string]string{
		"plain":                    "plain",
		"two\nlines\r\nand\ttab":   "two lines  and tab",
		"bell\x07 nul\x00 del\x7f": "bell nul del",
		"broken \xff utf":          "broken  utf",
		"\ufffe\uffff ok \u0085":   " ok ",
		"Ærø 😀":                    "Ærø 😀",
	} {
		if got := clean(in); got != want {
			t.Errorf("%q becomes %q, want %q", in, got, want)
		}
	}
	if n := utf16Len(clean(strings.Repeat("😀", 30000))); n > maxCellText {
		t.Errorf("%d units stay in a cell", n)
	}
}

func TestEscape(t *testing.T) {
	t.Parallel()
	for in, want := range map[string]string{
		`a<b & "c">d`: "a&lt;b &amp; &quot;c&quot;&gt;d",
		"_x0041_":     "_x005F_x0041_",
		"x_x00zz_":    "x_x00zz_",
		"_x004":       "_x004",
		"a_b_c":       "a_b_c",
	} {
		if got := escape(in); got != want {
			t.Errorf("%q becomes %q, want %q", in, got, want)
		}
	}
}

func TestSheetNames(t *testing.T) {
	t.Parallel()
	n := namer{}
	for _, c := range []struct {
		candidates []string
		want       string
	}{
		{[]string{"Overview"}, "Overview"},
		{[]string{"OVERVIEW", "Over view"}, "Over view"},
		{[]string{"Balanced ventilation with heat recovery", "Balanced recovery"}, "Balanced recovery"},
		{[]string{"Balanced ventilation with heat recovery"}, "Balanced ventilation with heat"},
		{[]string{"Balanced ventilation with heat recovery"}, "Balanced ventilation with (2)"},
		{[]string{"a/b\\c:d*e?f[g]"}, "a b c d e f g"},
		{[]string{"'quoted'"}, "quoted"},
		{[]string{"history"}, "history sheet"}, // Excel keeps the name for itself
		{[]string{"", "\x01"}, "Sheet"},
	} {
		if got := n.sheet(c.candidates...); got != c.want {
			t.Errorf("%q becomes %q, want %q", c.candidates, got, c.want)
		}
	}
}

func TestCellNames(t *testing.T) {
	t.Parallel()
	for col, want := range map[int]string{1: "A", 26: "Z", 27: "AA", 52: "AZ", 53: "BA", 702: "ZZ"} {
		if got := cellName(col, 7); got != want+"7" {
			t.Errorf("column %d is %s", col, got)
		}
	}
	if got := absolute("AB12"); got != "$AB$12" {
		t.Errorf("got %s", got)
	}
}

func TestSlug(t *testing.T) {
	t.Parallel()
	for in, want := range map[string]string{
		"district heat": "district_heat", "outside-wall-insulation": "outside_wall_insulation", " Wärme (neu) ": "w_rme_neu",
	} {
		if got := slug(in); got != want {
			t.Errorf("%q becomes %q, want %q", in, got, want)
		}
	}
}

func TestLines(t *testing.T) {
	t.Parallel()
	for _, c := range []struct {
		text  string
		width float64
		want  int
	}{
		{"", 10, 1}, {"one two", 10, 1}, {"one two three", 8, 2}, {"incomprehensibilities", 7, 3}, {"a b c d", 1, 4},
	} {
		if got := lines(c.text, c.width); got != c.want {
			t.Errorf("%q at %v: %d lines, want %d", c.text, c.width, got, c.want)
		}
	}
}

func TestCount(t *testing.T) {
	t.Parallel()
	for n, want := range map[int]string{0: "0", 999: "999", 1000: "1\u202f000", 1234567: "1\u202f234\u202f567"} {
		if got := count(n); got != want {
			t.Errorf("%d is %q, want %q", n, got, want)
		}
	}
}

func TestDescribeTargets(t *testing.T) {
	t.Parallel()
	got := describeTargets(map[string]float64{"n50_factor": 1, "thickness_m": 0.16, "bridge_delta": -0.03, "reed_share": 0.5, "skip_below_u": 0.4})
	want := "0.16 m thick; thermal bridges changed by -0.03 W/(m²K); left alone at U of 0.4 W/(m²K) or less; reed share 0.5"
	if got != want {
		t.Errorf("got %q, want %q", got, want)
	}
	if got := describeTargets(nil); got != "" {
		t.Errorf("nothing is described as %q", got)
	}
}
