// Package refcase holds references that tests measure the estimate against: an
// hourly typical year that nobody here wrote, read by column number alone, and a
// small hourly simulation of a building. Nothing but tests imports it, and it
// imports nothing of the program.
package refcase

import (
	"bufio"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
)

// Sides of a building in the order of arrays.
const (
	North = iota
	East
	South
	West
	NumSides
)

// Hour is one hour of weather.
type Hour struct {
	Record      int     // 0 to 8759
	Month       int     // 0 to 11
	Clock       float64 // 1 to 24: the hour that ends then
	OutdoorC    float64
	Wind10MS    float64
	GlobalWhM2  float64 // on the horizontal
	BeamWhM2    float64 // square to the sun
	DiffuseWhM2 float64 // on the horizontal
	FacadeWhM2  [NumSides]float64
}

// Shared returns the path of a file of the open data beside the project; the test
// is skipped where it is absent.
func Shared(tb testing.TB, name string) string {
	tb.Helper()
	dir, err := os.Getwd()
	if err != nil {
		tb.Fatal(err)
	}
	for {
		if _, err := os.Stat(filepath.Join(dir, "go.mod")); err == nil {
			break
		}
		up := filepath.Dir(dir)
		if up == dir {
			tb.Fatal("no go.mod above the working directory")
		}
		dir = up
	}
	path := filepath.Join(dir, "..", "shared", "data", filepath.FromSlash(name))
	if _, err := os.Stat(path); err != nil {
		tb.Skipf("the open data is not beside the project: %v", err)
	}
	return path
}

// AmsterdamFile is the name of the typical year below the open data: hours chosen
// from measured years of Amsterdam.
const AmsterdamFile = "weather/amsterdam-iwec.epw"

// Amsterdam reads the typical year. Column numbers are those of the published
// EPW record: 1 month, 3 hour, 6 dry bulb, 13 global, 14 direct normal, 15 diffuse,
// 21 wind speed, counted from 0.
func Amsterdam(tb testing.TB) []Hour {
	tb.Helper()
	f, err := os.Open(Shared(tb, AmsterdamFile))
	if err != nil {
		tb.Fatal(err)
	}
	defer f.Close()
	var hours []Hour
	lines := bufio.NewScanner(f)
	for n := 1; lines.Scan(); n++ {
		if n <= 8 { // header
			continue
		}
		fields := strings.Split(lines.Text(), ",")
		number := func(i int) float64 {
			x, err := strconv.ParseFloat(fields[i], 64)
			if err != nil {
				tb.Fatalf("line %d: %v", n, err)
			}
			return x
		}
		h := Hour{
			Record: len(hours), Month: int(number(1)) - 1, Clock: number(3),
			OutdoorC: number(6), Wind10MS: number(21),
			GlobalWhM2: number(13), BeamWhM2: number(14), DiffuseWhM2: number(15),
		}
		h.FacadeWhM2 = facades(&h)
		hours = append(hours, h)
	}
	if err := lines.Err(); err != nil {
		tb.Fatal(err)
	}
	return hours
}

// Direction is the unit vector to the sun.
type Direction struct{ East, South, Up float64 }

// Sun is where the sun of Amsterdam is in twelve parts of the hour. Declination
// and equation of time are by Spencer's series (1971), not the program's.
func (h *Hour) Sun() (d [12]Direction) {
	const (
		rad                          = math.Pi / 180
		latitude, longitude, zoneDeg = 52.3, 4.77, 15.0
	)
	g := 2 * math.Pi * float64(h.Record/24) / 365
	delta := 0.006918 - 0.399912*math.Cos(g) + 0.070257*math.Sin(g) - 0.006758*math.Cos(2*g) +
		0.000907*math.Sin(2*g) - 0.002697*math.Cos(3*g) + 0.00148*math.Sin(3*g)
	minutes := 229.18 * (0.000075 + 0.001868*math.Cos(g) - 0.032077*math.Sin(g) - 0.014615*math.Cos(2*g) - 0.04089*math.Sin(2*g))
	for k := range d {
		clock := h.Clock - 1 + (float64(k)+0.5)/float64(len(d))
		w := (15*(clock-12) + minutes/4 + longitude - zoneDeg) * rad
		d[k] = Direction{
			East:  -math.Cos(delta) * math.Sin(w),
			South: math.Cos(delta)*math.Cos(w)*math.Sin(latitude*rad) - math.Sin(delta)*math.Cos(latitude*rad),
			Up:    math.Sin(latitude*rad)*math.Sin(delta) + math.Cos(latitude*rad)*math.Cos(delta)*math.Cos(w),
		}
	}
	return d
}

// facades transposes an hour's beam and diffuse to vertical planes with an
// isotropic sky and ground reflectance 0.2.
func facades(h *Hour) (on [NumSides]float64) {
	up := 0.0
	for _, d := range h.Sun() {
		if d.Up <= 0 {
			continue
		}
		up++
		on[North] += math.Max(0, -d.South)
		on[East] += math.Max(0, d.East)
		on[South] += math.Max(0, d.South)
		on[West] += math.Max(0, -d.East)
	}
	for o := range on {
		if up > 0 {
			on[o] *= h.BeamWhM2 / up
		}
		on[o] += h.DiffuseWhM2/2 + 0.2*h.GlobalWhM2/2
	}
	return on
}
