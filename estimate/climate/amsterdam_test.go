package climate

import (
	"bufio"
	"errors"
	"fmt"
	"io/fs"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"kelvinrow/estimate/solar"
)

// amsterdamFile is an hourly typical year that nobody here wrote.
var amsterdamFile = filepath.FromSlash("../../../shared/data/weather/amsterdam-iwec.epw")

func openAmsterdam(t *testing.T) *os.File {
	t.Helper()
	f, err := os.Open(amsterdamFile)
	if errors.Is(err, fs.ErrNotExist) {
		t.Skipf("the hourly typical year of Amsterdam is not at %s", amsterdamFile)
	}
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { f.Close() })
	return f
}

// amsterdamFields reads the records by column number alone, with nothing of the
// package's reader.
func amsterdamFields(t *testing.T) [][]float64 {
	t.Helper()
	var rows [][]float64
	lines := bufio.NewScanner(openAmsterdam(t))
	for n := 1; lines.Scan(); n++ {
		if n <= 8 {
			continue
		}
		fields := strings.Split(lines.Text(), ",")
		row := make([]float64, len(fields))
		for i, f := range fields {
			if i == 5 {
				continue
			}
			x, err := strconv.ParseFloat(f, 64)
			if err != nil {
				t.Fatal(err)
			}
			row[i] = x
		}
		rows = append(rows, row)
	}
	if err := lines.Err(); err != nil {
		t.Fatal(err)
	}
	return rows
}

// The monthly values are those of the file's columns, recomputed here.
func TestAmsterdamMonths(t *testing.T) {
	t.Parallel()
	c, err := Load(amsterdamFile)
	if errors.Is(err, fs.ErrNotExist) {
		t.Skipf("the hourly typical year of Amsterdam is not at %s", amsterdamFile)
	}
	if err != nil {
		t.Fatal(err)
	}
	if c.Name != "AMSTERDAM" || c.LatitudeDeg != 52.3 || c.AltitudeM != -2 || c.DesignOutdoorC != -7.3 {
		t.Errorf("%+v", c)
	}
	var hours, outdoor, wind, global [12]float64
	rows := amsterdamFields(t)
	for _, r := range rows {
		m := int(r[1]) - 1
		hours[m]++
		outdoor[m] += r[6]
		wind[m] += r[21]
		global[m] += r[13]
	}
	for m := range 12 {
		p := &c.Months[m]
		near(t, "hours", p.Hours, hours[m], 0)
		near(t, "outdoor", p.OutdoorC, outdoor[m]/hours[m], 1e-9)
		near(t, "wind", p.Wind10M, wind[m]/hours[m], 1e-9)
		near(t, "horizontal", p.HorizontalKWhM2, global[m]/1000, 1e-9)
	}
	// Hitchin's formula from monthly means against the file's daily means. Its
	// k is that of the neighbouring climate across the sea; 5 % is what the
	// spread of daily temperatures, which differs by place and month, moves it.
	daily := 0.0
	for i := 0; i < len(rows); i += 24 {
		mean := 0.0
		for _, r := range rows[i : i+24] {
			mean += r[6] / 24
		}
		daily += DegreeDay(15.5, mean)
	}
	t.Logf("degree days to 15.5 C: %.0f from daily means, %.0f from monthly means", daily, c.DegreeDays(15.5))
	near(t, "degree days", c.DegreeDays(15.5)/daily, 1, 0.05)
}

// direction is the unit vector to the sun.
type direction struct{ east, south, up float64 }

// sunInHour is where the sun of Amsterdam is in twelve parts of an hour, hour 1
// to 24 of the i-th record. Declination and equation of time are by Spencer's
// series (1971), not the package's.
func sunInHour(i int, hour float64) (d [12]direction) {
	const (
		rad                          = math.Pi / 180
		latitude, longitude, zoneDeg = 52.3, 4.77, 15.0
	)
	g := 2 * math.Pi * float64(i/24) / 365
	delta := 0.006918 - 0.399912*math.Cos(g) + 0.070257*math.Sin(g) - 0.006758*math.Cos(2*g) +
		0.000907*math.Sin(2*g) - 0.002697*math.Cos(3*g) + 0.00148*math.Sin(3*g)
	minutes := 229.18 * (0.000075 + 0.001868*math.Cos(g) - 0.032077*math.Sin(g) - 0.014615*math.Cos(2*g) - 0.04089*math.Sin(2*g))
	for k := range d {
		clock := hour - 1 + (float64(k)+0.5)/float64(len(d))
		w := (15*(clock-12) + minutes/4 + longitude - zoneDeg) * rad
		d[k] = direction{
			east:  -math.Cos(delta) * math.Sin(w),
			south: math.Cos(delta)*math.Cos(w)*math.Sin(latitude*rad) - math.Sin(delta)*math.Cos(latitude*rad),
			up:    math.Sin(latitude*rad)*math.Sin(delta) + math.Cos(latitude*rad)*math.Cos(delta)*math.Cos(w),
		}
	}
	return d
}

// hourlyFacades transposes the file's beam and diffuse hours to vertical planes
// with an isotropic sky and ground reflectance 0.2, in kWh/m2 by month and
// orientation.
func hourlyFacades(rows [][]float64) (facade [12][NumOrientations]float64) {
	for i, r := range rows {
		up := 0.0
		var on [NumOrientations]float64
		for _, d := range sunInHour(i, r[3]) {
			if d.up <= 0 {
				continue
			}
			up++
			on[North] += math.Max(0, -d.south)
			on[East] += math.Max(0, d.east)
			on[South] += math.Max(0, d.south)
			on[West] += math.Max(0, -d.east)
		}
		for o := range on {
			beam := 0.0
			if up > 0 {
				beam = r[14] * on[o] / up
			}
			facade[int(r[1])-1][o] += (beam + r[15]/2 + 0.2*r[13]/2) / 1000
		}
	}
	return facade
}

// Facades from the monthly horizontal against the file's own beam and diffuse
// hours, in two steps, year by orientation.
//
// With the file's diffuse share instead of the correlation's, what is left is
// the representative day: one day for all the clear and dull ones, alike before
// and after noon. South and north then agree to 5 %, east and west to 10 %:
// they hang on low sun, and this file's mornings are duller than its afternoons.
//
// With the correlation of Erbs et al., as it is used: the file's monthly share
// is 0.04 to 0.17 above that of the correlation, which was made from stations of
// the United States; that moves a tenth of the irradiation from the sky to the
// sun. 15 % holds both together over the year; single winter months are further
// off (south in November by more than a third), as the log shows. East taken
// for south, the nearest mistake of facades, is off by a fifth and more.
func TestAmsterdamFacades(t *testing.T) {
	t.Parallel()
	c, err := ReadEPW(openAmsterdam(t), "")
	if err != nil {
		t.Fatal(err)
	}
	rows := amsterdamFields(t)
	hourly := hourlyFacades(rows)
	var diffuse [12]float64
	for _, r := range rows {
		diffuse[int(r[1])-1] += r[15] / 1000
	}
	azimuth := [NumOrientations]float64{North: 180, East: -90, South: 0, West: 90}
	words := [NumOrientations]string{"north", "east", "south", "west"}
	var used, own, want [NumOrientations]float64
	t.Log("kWh/m2 from the monthly horizontal / from hours")
	for m := range 12 {
		p := &c.Months[m]
		delta := solar.Declination(solar.AverageDay(m + 1))
		share := diffuse[m] / p.HorizontalKWhM2
		clearness := p.HorizontalKWhM2 / (p.Hours / 24 * solar.ExtraterrestrialKWhM2(c.LatitudeDeg, m+1))
		erbs := solar.DiffuseShare(clearness, solar.SunsetHourAngle(c.LatitudeDeg, delta))
		line := fmt.Sprintf("month %2d, diffuse %.2f, Erbs %.2f:", m+1, share, erbs)
		for o := range NumOrientations {
			used[o] += p.VerticalKWhM2[o]
			want[o] += hourly[m][o]
			own[o] += p.HorizontalKWhM2 *
				(solar.BeamShare(c.LatitudeDeg, delta, 90, azimuth[o], share, true) + share/2 + 0.1)
			line += fmt.Sprintf("  %s %.1f/%.1f (%+.0f %%)", words[o], p.VerticalKWhM2[o], hourly[m][o],
				100*(p.VerticalKWhM2[o]/hourly[m][o]-1))
		}
		t.Log(line)
	}
	ownTol := [NumOrientations]float64{North: 0.05, East: 0.10, South: 0.05, West: 0.10}
	for o := range NumOrientations {
		t.Logf("year, %s: %.0f/%.0f (%+.1f %%; with the file's diffuse share %+.1f %%)", words[o], used[o], want[o],
			100*(used[o]/want[o]-1), 100*(own[o]/want[o]-1))
		near(t, words[o]+" with the file's diffuse share", own[o]/want[o], 1, ownTol[o])
		near(t, words[o], used[o]/want[o], 1, 0.15)
	}
}

// The file's own beam and diffuse hours add up to its global, so that the hours
// above are a sound reference. 0.5 %: place of the sun within the hour.
func TestAmsterdamHoursClose(t *testing.T) {
	t.Parallel()
	rows := amsterdamFields(t)
	parts, global := 0.0, 0.0
	for i, r := range rows {
		parts += r[15]
		global += r[13]
		up, height := 0.0, 0.0
		for _, d := range sunInHour(i, r[3]) {
			if d.up > 0 {
				up++
				height += d.up
			}
		}
		if up > 0 {
			parts += r[14] * height / up
		}
	}
	near(t, "beam and diffuse over global", parts/global, 1, 0.005)
}
