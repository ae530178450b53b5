package climate

import (
	"bufio"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"
)

// Quantity is a quantity of an hourly record.
type Quantity uint8

const (
	DryBulb    Quantity = iota // degrees C
	Wind                       // m/s at 10 m
	Global                     // on the horizontal, Wh/m2 in the hour
	BeamNormal                 // on a plane that faces the sun, Wh/m2 in the hour
	Diffuse                    // on the horizontal, Wh/m2 in the hour

	NumQuantities = int(iota)
)

var quantityWords = [NumQuantities]string{
	"dry bulb temperature", "wind speed", "global horizontal radiation", "direct normal radiation", "diffuse horizontal radiation",
}

func (q Quantity) String() string { return quantityWords[q] }

// epwFields says where a quantity stands in an hourly record, counted from 0,
// from which value on the format means "missing", and what is possible.
var epwFields = [NumQuantities]struct {
	field              int
	missing, low, high float64
}{
	DryBulb:    {field: 6, missing: 99.9, low: -90, high: 70},
	Wind:       {field: 21, missing: 999, low: 0, high: 120},
	Global:     {field: 13, missing: 9999, low: 0, high: 2000},
	BeamNormal: {field: 14, missing: 9999, low: 0, high: 2000},
	Diffuse:    {field: 15, missing: 9999, low: 0, high: 2000},
}

const (
	// epwLeastFields reaches to the wind speed; older files end early.
	epwLeastFields = 22
	// maxLineBytes and maxHeaderLines bound what a file that is no weather file
	// can make the reader swallow.
	maxLineBytes   = 1 << 20
	maxHeaderLines = 200
	// maxProblems is where a list of malformed lines stops.
	maxProblems = 10
)

// Hour is one hourly record. Hour is 1 to 24 and ends the hour it names, in
// local standard time.
type Hour struct {
	Month, Day, Hour int

	values [NumQuantities]float64
	known  [NumQuantities]bool
}

// Value returns a quantity of the hour; false where the file has none.
func (h *Hour) Value(q Quantity) (float64, bool) { return h.values[q], h.known[q] }

// EPWHeader is what the first lines of a file say.
type EPWHeader struct {
	City, Region, Country, Source, Station string

	LatitudeDeg  float64
	LongitudeDeg float64 // east positive
	TimeZoneH    float64 // hours ahead of Greenwich
	ElevationM   float64

	// HeatingDesignC is the dry bulb temperature exceeded in 99.6 % of the
	// hours of a year; HasHeatingDesign is false where the file has none.
	HeatingDesignC   float64
	HasHeatingDesign bool
}

// ReadEPWHours reads the hourly records of a weather file in EPW format: one
// year of hours, in calendar order whatever the file's. The year may be made up
// of months of several years, and may have a 29 February. Malformed lines,
// hours given twice and hours that are missing are errors that name them.
func ReadEPWHours(r io.Reader) ([]Hour, EPWHeader, error) {
	var (
		header   EPWHeader
		located  bool
		problems []error
		year     calendar
	)
	lines := bufio.NewScanner(r)
	lines.Buffer(make([]byte, 0, 64<<10), maxLineBytes)
	n, headerLines := 0, 0
	for lines.Scan() && len(problems) < maxProblems {
		n++
		line := strings.TrimSpace(lines.Text())
		if n == 1 {
			line = strings.TrimPrefix(line, "\ufeff")
		}
		var err error
		switch {
		case line == "":
		case located && (year.some || line[0] >= '0' && line[0] <= '9'):
			err = year.add(line, n)
		default:
			if headerLines++; headerLines > maxHeaderLines {
				return nil, header, fmt.Errorf("line %d: no hourly record yet; this is not a weather file in EPW format", n)
			}
			err = header.read(line, &located)
			if err == nil && !located {
				return nil, header, fmt.Errorf("line %d: LOCATION is due first; this is not a weather file in EPW format", n)
			}
		}
		if err != nil {
			problems = append(problems, fmt.Errorf("line %d: %w", n, err))
		}
	}
	if err := lines.Err(); errors.Is(err, bufio.ErrTooLong) {
		problems = append(problems, fmt.Errorf("line %d: longer than %d bytes", n+1, maxLineBytes))
	} else if err != nil {
		problems = append(problems, fmt.Errorf("line %d: %w", n+1, err))
	}
	if len(problems) >= maxProblems {
		problems = append(problems, errors.New("reading stopped there"))
	}
	if len(problems) > 0 {
		return nil, header, errors.Join(problems...)
	}
	if !located {
		return nil, header, errors.New("file is empty")
	}
	hours, err := year.hours()
	return hours, header, err
}

// read takes what is wanted from a header line.
func (h *EPWHeader) read(line string, located *bool) error {
	fields := headerFields(line)
	switch strings.ToUpper(fields[0]) {
	case "LOCATION":
		*located = true
		return h.readLocation(fields)
	case "DESIGN CONDITIONS":
		h.readDesign(fields)
	case "DATA PERIODS":
		if len(fields) > 2 {
			if n, err := strconv.Atoi(fields[2]); err == nil && n != 1 {
				return fmt.Errorf("data periods: %d records per hour, where only hourly files are read", n)
			}
		}
	}
	return nil
}

// headerFields splits a header line, in which a text may stand in quotes.
func headerFields(line string) []string {
	if !utf8.ValidString(line) { // older files are in Latin-1
		runes := make([]rune, len(line))
		for i := range len(line) {
			runes[i] = rune(line[i])
		}
		line = string(runes)
	}
	r := csv.NewReader(strings.NewReader(line))
	r.LazyQuotes = true
	fields, err := r.Read()
	if err != nil || len(fields) == 0 {
		fields = strings.Split(line, ",")
	}
	for i, f := range fields {
		fields[i] = strings.TrimSpace(strings.Map(func(c rune) rune {
			if unicode.IsControl(c) {
				return -1
			}
			return c
		}, f))
	}
	return fields
}

func (h *EPWHeader) readLocation(f []string) error {
	if len(f) < 10 {
		return fmt.Errorf("location: %d fields, where there should be 10", len(f))
	}
	h.City, h.Region, h.Country, h.Source, h.Station = f[1], f[2], f[3], f[4], f[5]
	var problems []error
	for _, x := range []struct {
		what      string
		text      string
		low, high float64
		to        *float64
	}{
		{"latitude", f[6], -90, 90, &h.LatitudeDeg},
		{"longitude", f[7], -180, 180, &h.LongitudeDeg},
		{"time zone", f[8], -12, 14, &h.TimeZoneH},
		{"elevation", f[9], lowestAltitudeM, highestAltitudeM, &h.ElevationM},
	} {
		v, err := parseNumber(x.text)
		if err == nil && (v < x.low || v > x.high) {
			err = fmt.Errorf("%g is not between %g and %g", v, x.low, x.high)
		}
		if err != nil {
			problems = append(problems, fmt.Errorf("location: %s: %w", x.what, err))
		}
		*x.to = v
	}
	return errors.Join(problems...)
}

// readDesign takes the heating dry bulb that 99.6 % of the hours exceed: it
// follows the word Heating and the coldest month. A line in another order has
// no month there and counts as absent.
func (h *EPWHeader) readDesign(f []string) {
	for i := 2; i+2 < len(f); i++ {
		if !strings.EqualFold(f[i], "heating") {
			continue
		}
		month, err := strconv.Atoi(f[i+1])
		if err != nil || month < 1 || month > 12 {
			return
		}
		t, err := parseNumber(f[i+2])
		if err == nil && t >= lowestDesignC && t <= highestDesignC {
			h.HeatingDesignC, h.HasHeatingDesign = t, true
		}
		return
	}
}

// parseHour reads an hourly record.
func parseHour(line string) (Hour, error) {
	var h Hour
	fields := strings.Split(line, ",")
	if len(fields) < epwLeastFields {
		return h, fmt.Errorf("%d fields, where an hourly record has at least %d", len(fields), epwLeastFields)
	}
	year := 0 // checked and dropped: a typical year takes months from several
	for i, x := range []struct {
		what        string
		least, most int
		to          *int
	}{{"year", 0, 9999, &year}, {"month", 1, 12, &h.Month}, {"day", 1, 31, &h.Day}, {"hour", 1, 24, &h.Hour}} {
		v, err := strconv.Atoi(strings.TrimSpace(fields[i]))
		if err != nil || v < x.least || v > x.most {
			return h, fmt.Errorf("%s: %q is not a whole number from %d to %d", x.what, fields[i], x.least, x.most)
		}
		*x.to = v
	}
	if h.Day > leapMonthDays[h.Month-1] {
		return h, fmt.Errorf("day: month %d has no day %d", h.Month, h.Day)
	}
	for q := range epwFields {
		e := &epwFields[q]
		text := fields[e.field]
		if strings.TrimSpace(text) == "" {
			continue // an empty field is a missing value
		}
		v, err := parseNumber(text)
		if err == nil && v < e.missing && (v < e.low || v > e.high) {
			err = fmt.Errorf("%g is not between %g and %g", v, e.low, e.high)
		}
		if err != nil {
			return h, fmt.Errorf("%s: %w", Quantity(q), err)
		}
		if v < e.missing {
			h.values[q], h.known[q] = v, true
		}
	}
	return h, nil
}
