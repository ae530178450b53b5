package climate

import (
	"fmt"
	"math"
	"strings"
	"testing"
	"time"
)

const testLocation = "LOCATION,Testing Ground,-,XXX,made up,000000,52.00,5.00,1.0,12.0"

const testDesign = `DESIGN CONDITIONS,1,made up,,Heating,1,-7.3,-4.9,-11.1`

// madeUp is a weather file of a plain year: temperature by month and hour, sun
// from 9 to 16, constant wind.
type madeUp struct {
	header []string
	rows   [][]string
}

func newMadeUp(leap bool) *madeUp {
	f := &madeUp{header: []string{testLocation, testDesign, "DATA PERIODS,1,1,Data,Sunday, 1/ 1,12/31"}}
	year := 2001
	if leap {
		year = 2004
	}
	for at := time.Date(year, 1, 1, 0, 0, 0, 0, time.UTC); at.Year() == year; at = at.Add(time.Hour) {
		row := make([]string, 35)
		for i := range row {
			row[i] = "0"
		}
		hour := at.Hour() + 1
		row[0], row[1], row[2], row[3], row[4] = fmt.Sprint(year), fmt.Sprint(int(at.Month())), fmt.Sprint(at.Day()), fmt.Sprint(hour), "60"
		row[5] = "?9?9"
		row[6] = fmt.Sprint(madeUpC(int(at.Month()), hour))
		row[21] = "3.5"
		if hour > 8 && hour <= 16 {
			row[13], row[14], row[15] = "100", "40", "80"
		}
		f.rows = append(f.rows, row)
	}
	return f
}

func madeUpC(month, hour int) float64 {
	return 10 - 8*math.Cos(float64(month)/6*math.Pi) + float64(hour-12)/4
}

// row returns the record of a month, day and hour.
func (f *madeUp) row(month, day, hour int) []string {
	for _, r := range f.rows {
		if r[1] == fmt.Sprint(month) && r[2] == fmt.Sprint(day) && r[3] == fmt.Sprint(hour) {
			return r
		}
	}
	panic("the made-up year has no such hour")
}

func (f *madeUp) String() string {
	var b strings.Builder
	for _, h := range f.header {
		b.WriteString(h + "\r\n")
	}
	for _, r := range f.rows {
		b.WriteString(strings.Join(r, ",") + "\r\n")
	}
	return b.String()
}

func TestReadEPWMonths(t *testing.T) {
	t.Parallel()
	for _, leap := range []bool{false, true} {
		c, err := ReadEPW(strings.NewReader(newMadeUp(leap).String()), "")
		if err != nil {
			t.Fatal(err)
		}
		if c.Name != "Testing Ground" || c.LatitudeDeg != 52 || c.AltitudeM != 12 || c.DesignOutdoorC != -7.3 {
			t.Errorf("%+v", c)
		}
		days := [12]float64{31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31}
		if leap {
			days[1] = 29
		}
		for m := range c.Months {
			p := &c.Months[m]
			if p.Hours != 24*days[m] {
				t.Errorf("month %d: %g h", m+1, p.Hours)
			}
			want := 0.0
			for h := 1; h <= 24; h++ {
				want += madeUpC(m+1, h) / 24
			}
			near(t, "outdoor", p.OutdoorC, want, 1e-9)
			near(t, "wind", p.Wind10M, 3.5, 1e-12)
			near(t, "horizontal", p.HorizontalKWhM2, 0.8*days[m], 1e-9)
			if !(p.VerticalKWhM2[South] > 0) {
				t.Errorf("month %d: vertical planes %v", m+1, p.VerticalKWhM2)
			}
		}
		if !strings.Contains(c.Source, "heating dry bulb 99.6 %") || !strings.Contains(c.Source, "Testing Ground, XXX, made up") {
			t.Errorf("source: %s", c.Source)
		}
	}
	named, err := ReadEPW(strings.NewReader(newMadeUp(false).String()), "Ours")
	if err != nil || named.Name != "Ours" {
		t.Errorf("%+v, %v", named, err)
	}
}

// The hours come back in calendar order whatever the file's.
func TestReadEPWHoursOrder(t *testing.T) {
	t.Parallel()
	f := newMadeUp(false)
	f.rows = append(f.rows[4000:], f.rows[:4000]...)
	hours, header, err := ReadEPWHours(strings.NewReader(f.String()))
	if err != nil {
		t.Fatal(err)
	}
	if len(hours) != 8760 || header.LongitudeDeg != 5 || header.TimeZoneH != 1 || header.Station != "000000" {
		t.Errorf("%d hours, %+v", len(hours), header)
	}
	for i := 1; i < len(hours); i++ {
		a, b := &hours[i-1], &hours[i]
		if a.Month*10000+a.Day*100+a.Hour >= b.Month*10000+b.Day*100+b.Hour {
			t.Fatalf("%d-%d %d before %d-%d %d", a.Month, a.Day, a.Hour, b.Month, b.Day, b.Hour)
		}
	}
	noon := hours[11]
	for q, want := range [NumQuantities]float64{DryBulb: madeUpC(1, 12), Wind: 3.5, Global: 100, BeamNormal: 40, Diffuse: 80} {
		if got, ok := noon.Value(Quantity(q)); !ok || got != want {
			t.Errorf("%s: %g, %v, want %g", Quantity(q), got, ok, want)
		}
	}
}

func TestReadEPWDesign(t *testing.T) {
	t.Parallel()
	for _, c := range []struct{ name, line string }{
		{"NoLine", ""}, {"None", "DESIGN CONDITIONS,0"}, {"NoMonth", "DESIGN CONDITIONS,1,made up,,Heating,-7.3,-4.9"},
		{"Cut", "DESIGN CONDITIONS,1,made up,,Heating,1"}, {"Text", "DESIGN CONDITIONS,1,made up,,Heating,1,cold,-4.9"},
		{"CoolingOnly", "DESIGN CONDITIONS,1,made up,,Cooling,7,8,27.8"},
	} {
		t.Run(c.name, func(t *testing.T) {
			t.Parallel()
			f := newMadeUp(false)
			f.header[1] = c.line
			for h := 1; h <= 24; h++ {
				f.row(2, 11, h)[6] = fmt.Sprint(-9 + h%2)
			}
			got, err := ReadEPW(strings.NewReader(f.String()), "")
			if err != nil {
				t.Fatal(err)
			}
			if got.DesignOutdoorC != -8.5 || !strings.Contains(got.Source, "mean of the coldest day, 02-11") {
				t.Errorf("design %g C, source %s", got.DesignOutdoorC, got.Source)
			}
		})
	}
}

// The format's codes for "missing" are never read as values.
func TestReadEPWMissingValues(t *testing.T) {
	t.Parallel()
	whole, err := ReadEPW(strings.NewReader(newMadeUp(false).String()), "")
	if err != nil {
		t.Fatal(err)
	}
	f := newMadeUp(false)
	f.row(3, 1, 12)[6] = "99.9"
	f.row(3, 2, 5)[6] = ""
	f.row(3, 3, 12)[21] = "999.0"
	f.row(3, 4, 12)[13] = "9999"
	f.row(3, 4, 13)[13] = "9999.00"
	f.row(3, 4, 12)[14] = "9999"
	f.row(3, 4, 12)[15] = "99999"
	c, err := ReadEPW(strings.NewReader(f.String()), "")
	if err != nil {
		t.Fatal(err)
	}
	// The made-up days of a month are alike, so filling restores them.
	near(t, "outdoor", c.Months[2].OutdoorC, whole.Months[2].OutdoorC, 1e-9)
	near(t, "wind", c.Months[2].Wind10M, 3.5, 1e-9)
	near(t, "horizontal", c.Months[2].HorizontalKWhM2, whole.Months[2].HorizontalKWhM2, 1e-9)
	for _, want := range []string{
		"without dry bulb temperature, filled from the month's same hour of the day: 2",
		"without wind speed, filled from the month's same hour of the day: 1",
		"without global horizontal radiation, filled from the month's same hour of the day: 2",
	} {
		if !strings.Contains(c.Source, want) {
			t.Errorf("source %q lacks %q", c.Source, want)
		}
	}
	hours, _, err := ReadEPWHours(strings.NewReader(f.String()))
	if err != nil {
		t.Fatal(err)
	}
	at := (31+28+3)*24 + 11
	for q := range NumQuantities {
		_, ok := hours[at].Value(Quantity(q))
		if want := Quantity(q) == DryBulb || Quantity(q) == Wind; ok != want {
			t.Errorf("%s on 4 March at 12: known %v", Quantity(q), ok)
		}
	}
}

func TestReadEPWTooMuchMissing(t *testing.T) {
	t.Parallel()
	for _, c := range []struct {
		name string
		gone func(day, hour int) bool
		want string
	}{
		{"Share", func(day, _ int) bool { return day <= 8 }, "month 4: wind speed is missing in 192 of 720 hours"},
		{"HourOfDay", func(_, hour int) bool { return hour == 7 }, "month 4: wind speed is missing at hour 7 of every day"},
	} {
		t.Run(c.name, func(t *testing.T) {
			t.Parallel()
			f := newMadeUp(false)
			for day := 1; day <= 30; day++ {
				for hour := 1; hour <= 24; hour++ {
					if c.gone(day, hour) {
						f.row(4, day, hour)[21] = "999"
					}
				}
			}
			_, err := ReadEPW(strings.NewReader(f.String()), "")
			if err == nil || err.Error() != c.want {
				t.Errorf("got %v, want %s", err, c.want)
			}
		})
	}
}

func TestReadEPWMalformed(t *testing.T) {
	t.Parallel()
	cut := func(f *madeUp, from, to int) { f.rows = append(f.rows[:from:from], f.rows[to:]...) }
	for _, c := range []struct {
		name string
		do   func(f *madeUp)
		want string
	}{
		{"FewFields", func(f *madeUp) { f.rows[9] = f.rows[9][:20] }, "line 13: 20 fields, where an hourly record has at least 22"},
		{"NoNumber", func(f *madeUp) { f.rows[9][6] = "cold" }, `line 13: dry bulb temperature: "cold" is not a number`},
		{"NotFinite", func(f *madeUp) { f.rows[9][13] = "-Inf" }, `line 13: global horizontal radiation: "-Inf" is not a number`},
		{"NegativeWind", func(f *madeUp) { f.rows[9][21] = "-1" }, "line 13: wind speed: -1 is not between 0 and 120"},
		{"TooHot", func(f *madeUp) { f.rows[9][6] = "85" }, "line 13: dry bulb temperature: 85 is not between -90 and 70"},
		{"Year", func(f *madeUp) { f.rows[9][0] = "x" }, `line 13: year: "x" is not a whole number`},
		{"Month", func(f *madeUp) { f.rows[9][1] = "13" }, `line 13: month: "13" is not a whole number from 1 to 12`},
		{"Day", func(f *madeUp) { f.row(4, 30, 1)[2] = "31" }, "day: month 4 has no day 31"},
		{"HourZero", func(f *madeUp) { f.rows[0][3] = "0" }, `line 4: hour: "0" is not a whole number from 1 to 24`},
		{"Twice", func(f *madeUp) { f.rows[9] = f.rows[8] }, "line 13: 01-01 hour 9 is already on line 12"},
		{"OneMissing", func(f *madeUp) { cut(f, 100, 101) }, "8759 hours of 8760: missing 01-05 hour 5"},
		{"DayMissing", func(f *madeUp) { cut(f, 48, 72) }, "8736 hours of 8760: missing 01-03 hour 1 to 01-03 hour 24"},
		{"PartYear", func(f *madeUp) { cut(f, 744, 8760) }, "744 hours of 8760: missing 02-01 hour 1 to 12-31 hour 24"},
		{"LeapDayCut", func(f *madeUp) { *f = *newMadeUp(true); cut(f, 1420, 1440) }, "8764 hours of 8784: missing 02-29 hour 5 to 02-29 hour 24"},
		{"ManyHoles", func(f *madeUp) {
			for i := 200; i > 0; i -= 20 {
				cut(f, i, i+1)
			}
		}, "01-05 hour 5, 5 more stretches"},
		{"NoHours", func(f *madeUp) { f.rows = nil }, "there are no hourly records"},
		{"NoLocation", func(f *madeUp) { f.header = f.header[1:] }, "line 1: LOCATION is due first"},
		{"ShortLocation", func(f *madeUp) { f.header[0] = "LOCATION,here" }, "line 1: location: 2 fields"},
		{"Latitude", func(f *madeUp) { f.header[0] = "LOCATION,a,b,c,d,e,95,5,1,0" }, "line 1: location: latitude: 95 is not between -90 and 90"},
		{"SubHourly", func(f *madeUp) { f.header[2] = "DATA PERIODS,1,4,Data,Sunday, 1/ 1,12/31" }, "line 3: data periods: 4 records per hour"},
		{"LongLine", func(f *madeUp) { f.header[1] = strings.Repeat("x", 2<<20) }, "line 2: longer than 1048576 bytes"},
		{"NeverData", func(f *madeUp) {
			f.rows = nil
			for range 300 {
				f.header = append(f.header, "talk")
			}
		}, "line 201: no hourly record yet"},
	} {
		t.Run(c.name, func(t *testing.T) {
			t.Parallel()
			f := newMadeUp(false)
			c.do(f)
			got, err := ReadEPW(strings.NewReader(f.String()), "")
			if err == nil || !strings.Contains(err.Error(), c.want) {
				t.Errorf("got %v, %v, want %q", got, err, c.want)
			}
		})
	}
}

// Malformed lines are told together, but not thousands of them.
func TestReadEPWTellsSeveral(t *testing.T) {
	t.Parallel()
	f := newMadeUp(false)
	f.rows[3][6], f.rows[5][21] = "a", "b"
	_, err := ReadEPW(strings.NewReader(f.String()), "")
	if err == nil || !strings.Contains(err.Error(), "line 7: ") || !strings.Contains(err.Error(), "line 9: ") {
		t.Errorf("got %v", err)
	}
	for _, r := range f.rows {
		r[6] = "a"
	}
	_, err = ReadEPW(strings.NewReader(f.String()), "")
	if err == nil || strings.Count(err.Error(), "\n") != maxProblems || !strings.HasSuffix(err.Error(), "reading stopped there") {
		t.Errorf("got %v", err)
	}
	if _, err := ReadEPW(strings.NewReader(""), ""); err == nil || err.Error() != "file is empty" {
		t.Errorf("empty file: %v", err)
	}
}

// Text in quotes, Latin-1 letters, a byte order mark and control characters do
// not spoil the name.
func TestReadEPWHeaderText(t *testing.T) {
	t.Parallel()
	f := newMadeUp(false)
	f.header[0] = "\ufeff" + `LOCATION,"Ground, Testing",-,XXX,made up,000000,52.00,5.00,1.0,12.0`
	f.header = append(f.header, "COMMENTS 1,\"quoted, and \"\" odd", "")
	c, err := ReadEPW(strings.NewReader(f.String()), "")
	if err != nil || c.Name != "Ground, Testing" {
		t.Errorf("%+v, %v", c, err)
	}
	f.header[0] = "LOCATION,T\xe9st\x00ing,-,XXX,made up,000000,52.00,5.00,1.0,12.0"
	c, err = ReadEPW(strings.NewReader(f.String()), "")
	if err != nil || c.Name != "Tésting" {
		t.Errorf("%+v, %v", c, err)
	}
}

// Whatever the bytes: no panic, and what is read is a climate that can be.
func FuzzReadEPWHours(f *testing.F) {
	f.Add([]byte(testLocation + "\n" + testDesign + "\n2001,1,1,1,60,?,1,1,1,1,0,0,0,0,0,0,0,0,0,0,0,3,0\n"))
	f.Add([]byte("LOCATION,,,,,,,,,\n"))
	f.Add([]byte("\xef\xbb\xbfLOCATION,\"a\n"))
	f.Fuzz(func(t *testing.T, data []byte) {
		if hours, _, err := ReadEPWHours(strings.NewReader(string(data))); err == nil && len(hours) != 8760 && len(hours) != 8784 {
			t.Errorf("%d hours", len(hours))
		}
	})
}

// A whole year with header lines and one record of the fuzzer's choice.
func FuzzReadEPW(f *testing.F) {
	year := newMadeUp(false)
	f.Add(testLocation, testDesign, strings.Join(year.rows[0], ","), uint16(0))
	f.Add("LOCATION,a,b,c,d,e,-90,180,14,5000", "DESIGN CONDITIONS,1,,,Heating,7,30", strings.Join(year.rows[4000], ","), uint16(4000))
	f.Add("LOCATION,a,b,c,d,e,0,0,0,0", "DATA PERIODS,1,1", "2001,1,1,1,60,,99.9,,,,,,,9999,9999,9999,,,,,,999", uint16(0))
	f.Fuzz(func(t *testing.T, location, design, record string, at uint16) {
		var b strings.Builder
		b.WriteString(location + "\n" + design + "\n")
		for i, r := range year.rows {
			if i == int(at)%len(year.rows) {
				b.WriteString(record + "\n")
			} else {
				b.WriteString(strings.Join(r, ",") + "\n")
			}
		}
		c, err := ReadEPW(strings.NewReader(b.String()), "")
		if err != nil {
			return
		}
		if err := c.Validate(); err != nil {
			t.Error(err)
		}
	})
}
