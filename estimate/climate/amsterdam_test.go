package climate

import (
	"fmt"
	"testing"

	"kelvinrow/estimate/refcase"
	"kelvinrow/estimate/solar"
)

// The monthly values are those of the file's columns, recomputed here.
func TestAmsterdamMonths(t *testing.T) {
	t.Parallel()
	c, err := Load(refcase.Shared(t, refcase.AmsterdamFile))
	if err != nil {
		t.Fatal(err)
	}
	if c.Name != "AMSTERDAM" || c.LatitudeDeg != 52.3 || c.AltitudeM != -2 || c.DesignOutdoorC != -7.3 {
		t.Errorf("%+v", c)
	}
	var hours, outdoor, wind, global [12]float64
	rows := refcase.Amsterdam(t)
	for _, r := range rows {
		hours[r.Month]++
		outdoor[r.Month] += r.OutdoorC
		wind[r.Month] += r.Wind10MS
		global[r.Month] += r.GlobalWhM2
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
			mean += r.OutdoorC / 24
		}
		daily += DegreeDay(15.5, mean)
	}
	t.Logf("degree days to 15.5 C: %.0f from daily means, %.0f from monthly means", daily, c.DegreeDays(15.5))
	near(t, "degree days", c.DegreeDays(15.5)/daily, 1, 0.05)
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
	c, err := Load(refcase.Shared(t, refcase.AmsterdamFile))
	if err != nil {
		t.Fatal(err)
	}
	var diffuse [12]float64
	var hourly [12][NumOrientations]float64
	side := [NumOrientations]int{North: refcase.North, East: refcase.East, South: refcase.South, West: refcase.West}
	for _, r := range refcase.Amsterdam(t) {
		diffuse[r.Month] += r.DiffuseWhM2 / 1000
		for o := range NumOrientations {
			hourly[r.Month][o] += r.FacadeWhM2[side[o]] / 1000
		}
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
	parts, global := 0.0, 0.0
	for _, r := range refcase.Amsterdam(t) {
		parts += r.DiffuseWhM2
		global += r.GlobalWhM2
		up, height := 0.0, 0.0
		for _, d := range r.Sun() {
			if d.Up > 0 {
				up++
				height += d.Up
			}
		}
		if up > 0 {
			parts += r.BeamWhM2 * height / up
		}
	}
	near(t, "beam and diffuse over global", parts/global, 1, 0.005)
}
