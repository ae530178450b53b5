package climate

import (
	"math"
	"strings"
	"testing"

	"kelvinrow/estimate/solar"
)

func near(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if math.IsNaN(got) || math.Abs(got-want) > tol {
		t.Errorf("%s: got %.6g, want %.6g within %g", what, got, want, tol)
	}
}

func harrowmark(t *testing.T) Climate {
	t.Helper()
	c, err := Find("Harrowmark", nil)
	if err != nil {
		t.Fatal(err)
	}
	return *c
}

func TestStarter(t *testing.T) {
	t.Parallel()
	climates, err := Starter()
	if err != nil {
		t.Fatal(err)
	}
	if len(climates) < 6 || climates[0].Name != "Harrowmark" {
		t.Fatalf("%d climates, the first is %s", len(climates), climates[0].Name)
	}
	names := map[string]bool{}
	warmest, coldest := -math.MaxFloat64, math.MaxFloat64
	for i := range climates {
		c := &climates[i]
		if names[strings.ToLower(c.Name)] {
			t.Errorf("%s is there twice", c.Name)
		}
		names[strings.ToLower(c.Name)] = true
		if !strings.HasPrefix(c.Source, "invented; of the order of a ") {
			t.Errorf("%s: source %q does not say that it is invented", c.Name, c.Source)
		}
		if err := c.Validate(); err != nil {
			t.Errorf("%s: %v", c.Name, err)
		}
		if c.LatitudeDeg < 46 || c.LatitudeDeg > 60 {
			t.Errorf("%s: latitude %g", c.Name, c.LatitudeDeg)
		}
		year := 0.0
		for m := range c.Months {
			p := &c.Months[m]
			year += p.Hours
			clearness := p.HorizontalKWhM2 / (p.Hours / 24 * solar.ExtraterrestrialKWhM2(c.LatitudeDeg, m+1))
			if clearness < 0.25 || clearness > 0.55 {
				t.Errorf("%s, month %d: clearness %.3f is not between 0.25 and 0.55", c.Name, m+1, clearness)
			}
			v := p.VerticalKWhM2
			// The high sun of summer leaves the south behind east and west.
			winter := m < 3 || m > 8
			if !(v[East] == v[West] && v[East] > v[North] && v[North] > 0) || winter && v[South] <= v[East] {
				t.Errorf("%s, month %d: vertical planes %v", c.Name, m+1, v)
			}
			if p.Wind10M < 1.5 || p.Wind10M > 10 {
				t.Errorf("%s, month %d: wind %g", c.Name, m+1, p.Wind10M)
			}
		}
		if year != 8760 {
			t.Errorf("%s: %g h", c.Name, year)
		}
		warmest = math.Max(warmest, c.DesignOutdoorC)
		coldest = math.Min(coldest, c.DesignOutdoorC)
	}
	if warmest < -5 || coldest > -20 {
		t.Errorf("design temperatures from %g to %g: no mild coast or no cold inland", coldest, warmest)
	}
	terrains := map[Terrain]bool{}
	for i := range climates {
		terrains[climates[i].Terrain] = true
	}
	if len(terrains) != NumTerrains {
		t.Errorf("%d terrains of %d", len(terrains), NumTerrains)
	}
}

// What Starter returns is the caller's to change.
func TestStarterIsFresh(t *testing.T) {
	t.Parallel()
	a, err := Starter()
	if err != nil {
		t.Fatal(err)
	}
	a[0].Months[0].OutdoorC = 99
	b, err := Starter()
	if err != nil {
		t.Fatal(err)
	}
	if b[0].Months[0].OutdoorC == 99 {
		t.Error("climates are shared")
	}
}

func TestReadTableNamesTheLine(t *testing.T) {
	t.Parallel()
	good := string(starterTable)
	for _, c := range []struct{ name, old, new, want string }{
		{"Column", "outdoor_c", "outdoor_f", "columns are"},
		{"Number", "Harrowmark,2,672,0.6", "Harrowmark,2,672,mild", `line 6: outdoor_c: "mild" is not a number`},
		{"NotFinite", "Harrowmark,2,672,0.6", "Harrowmark,2,672,NaN", `line 6: outdoor_c: "NaN" is not a number`},
		{"Month", "Harrowmark,2,", "Harrowmark,3,", "line 6: Harrowmark month 3, where Harrowmark month 2 is due"},
		{"Terrain", "suburb", "moor", `line 5: terrain: "moor" is not one of suburb, open country, city`},
		{"Implausible", "Harrowmark,2,672,0.6", "Harrowmark,2,672,66", "Harrowmark: month 2: outdoor temperature: 66 C"},
	} {
		t.Run(c.name, func(t *testing.T) {
			t.Parallel()
			if !strings.Contains(good, c.old) {
				t.Fatalf("%q is not in the table", c.old)
			}
			_, err := readTable(strings.NewReader(strings.Replace(good, c.old, c.new, 1)))
			if err == nil || !strings.Contains(err.Error(), c.want) {
				t.Errorf("got %v, want %q", err, c.want)
			}
		})
	}
	lines := strings.SplitAfter(good, "\n")
	if _, err := readTable(strings.NewReader(strings.Join(lines[:10], ""))); err == nil || !strings.Contains(err.Error(), "ends with month 6") {
		t.Errorf("cut table: %v", err)
	}
}

func TestFillVertical(t *testing.T) {
	t.Parallel()
	c := harrowmark(t)
	for m := range c.Months {
		p := &c.Months[m]
		n, e, s, w := solar.Vertical(c.LatitudeDeg, m+1, p.Hours, p.HorizontalKWhM2, 0.2)
		if p.VerticalKWhM2 != [NumOrientations]float64{North: n, East: e, South: s, West: w} {
			t.Errorf("month %d: %v", m+1, p.VerticalKWhM2)
		}
	}
	// A change of the horizontal carries over when filled again.
	before := c.Months[0].VerticalKWhM2[South]
	c.Months[0].HorizontalKWhM2 = 0
	c.FillVertical()
	if got := c.Months[0].VerticalKWhM2[South]; got != 0 || before == 0 {
		t.Errorf("south: %g before, %g without sun", before, got)
	}
}

func TestValidateTellsAll(t *testing.T) {
	t.Parallel()
	c := harrowmark(t)
	if err := c.Validate(); err != nil {
		t.Fatal(err)
	}
	c.Name = " "
	c.LatitudeDeg = 95
	c.AltitudeM = math.Inf(1)
	c.DesignOutdoorC = 12
	c.Terrain = Terrain(NumTerrains)
	c.Months[1].OutdoorC = math.NaN()
	c.Months[2].Wind10M = -1
	c.Months[3].HorizontalKWhM2 = -2
	c.Months[4].Hours = 0
	c.Months[5].VerticalKWhM2[East] = math.NaN()
	err := c.Validate()
	if err == nil {
		t.Fatal("nothing found")
	}
	for _, want := range []string{
		"name is missing", "latitude: 95", "altitude: +Inf", "12 C is warmer than the coldest", "terrain: 3",
		"month 2: outdoor temperature: NaN", "month 3: wind: -1", "month 4: horizontal irradiation: -2",
		"month 5: length: 0 h", "month 6: irradiation on east: NaN", "months add up to 8016 h",
	} {
		if !strings.Contains(err.Error(), want) {
			t.Errorf("%q is missing in:\n%v", want, err)
		}
	}
	if n := strings.Count(err.Error(), "\n") + 1; n != 11 {
		t.Errorf("%d problems, where 11 were made:\n%v", n, err)
	}
}

// Months in MJ/m2 are caught where kWh/m2 are due.
func TestValidateWrongUnit(t *testing.T) {
	t.Parallel()
	c := harrowmark(t)
	for m := range c.Months {
		c.Months[m].HorizontalKWhM2 *= 3.6
	}
	if err := c.Validate(); err == nil || !strings.Contains(err.Error(), "outside the atmosphere") {
		t.Errorf("got %v", err)
	}
	leap := harrowmark(t)
	leap.Months[1].Hours = 696
	if err := leap.Validate(); err != nil {
		t.Errorf("leap year: %v", err)
	}
}

func TestFind(t *testing.T) {
	t.Parallel()
	own := Climate{Name: "harrowMARK", Source: "own"}
	for _, c := range []struct {
		name  string
		extra []Climate
		want  string
	}{
		{"frostquarry", nil, "Frostquarry"},
		{" HARROWMARK ", nil, "Harrowmark"},
		{"", nil, "Harrowmark"},
		{"Harrowmark", []Climate{own}, "harrowMARK"},
		{"", []Climate{own}, "harrowMARK"},
		{"Ebbwhistle", []Climate{own}, "Ebbwhistle"},
	} {
		got, err := Find(c.name, c.extra)
		if err != nil || got.Name != c.want {
			t.Errorf("%q: %+v, %v", c.name, got, err)
		}
	}
	_, err := Find("Nowhere", []Climate{own, {Name: "Ours"}})
	if err == nil {
		t.Fatal("found")
	}
	want := `climate "Nowhere" is unknown; there are harrowMARK, Ours, Ebbwhistle, `
	if !strings.HasPrefix(err.Error(), want) {
		t.Errorf("got %v, want %s...", err, want)
	}
}

func TestParseTerrain(t *testing.T) {
	t.Parallel()
	for i := range NumTerrains {
		got, ok := ParseTerrain(" " + strings.ToUpper(Terrain(i).String()))
		if !ok || got != Terrain(i) {
			t.Errorf("%s: %v, %v", Terrain(i), got, ok)
		}
	}
	if _, ok := ParseTerrain("moor"); ok {
		t.Error("moor")
	}
}
