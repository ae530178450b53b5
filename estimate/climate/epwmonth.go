package climate

import (
	"fmt"
	"io"
	"strings"
)

// leastKnown is the share of a month's hours a quantity must have. With fewer,
// what is there no longer stands for the month.
const leastKnown = 0.75

// ReadEPW reads a weather file in EPW format into a monthly climate: mean dry
// bulb temperature and wind speed, sum of the global horizontal radiation, and
// vertical planes from it. name is the climate's name; empty takes the city.
//
// The design outdoor temperature is the header's heating dry bulb of 99.6 %;
// where there is none, the mean of the 24 hours of the coldest day. Source says
// which. A missing value is filled with its month's mean at the same hour of
// the day, so that nights and noons keep their weight; a month that knows less
// than three quarters of its hours is an error. The terrain is the suburb of a
// zero Climate: the format does not say what stands around the buildings.
func ReadEPW(r io.Reader, name string) (*Climate, error) {
	hours, header, err := ReadEPWHours(r)
	if err != nil {
		return nil, err
	}
	filled, err := fillHours(hours)
	if err != nil {
		return nil, err
	}
	c := &Climate{
		Name:           strings.TrimSpace(name),
		LatitudeDeg:    header.LatitudeDeg,
		AltitudeM:      header.ElevationM,
		DesignOutdoorC: header.HeatingDesignC,
	}
	if c.Name == "" {
		c.Name = header.City
	}
	if c.Name == "" {
		c.Name = "weather file"
	}
	for i := range hours {
		h := &hours[i]
		m := &c.Months[h.Month-1]
		m.Hours++
		m.OutdoorC += h.values[DryBulb]
		m.Wind10M += h.values[Wind]
		m.HorizontalKWhM2 += h.values[Global]
	}
	for i := range c.Months {
		m := &c.Months[i]
		m.OutdoorC /= m.Hours
		m.Wind10M /= m.Hours
		m.HorizontalKWhM2 /= 1000
	}
	design := "design temperature: heating dry bulb 99.6 % of the header"
	if !header.HasHeatingDesign {
		means := dailyMeansC(hours)
		coldest := 0
		for i, t := range means {
			if t < means[coldest] {
				coldest = i
			}
		}
		c.DesignOutdoorC = means[coldest]
		at := &hours[coldest*24]
		design = fmt.Sprintf("design temperature: mean of the coldest day, %02d-%02d, as the header has none", at.Month, at.Day)
	}
	c.Source = sourceText(&header, design, filled)
	c.FillVertical()
	if err := c.Validate(); err != nil {
		return nil, err
	}
	return c, nil
}

func sourceText(h *EPWHeader, design string, filled [NumQuantities]int) string {
	var place []string
	for _, s := range []string{h.City, h.Region, h.Country, h.Source} {
		if s != "" && s != "-" {
			place = append(place, s)
		}
	}
	if h.Station != "" {
		place = append(place, "station "+h.Station)
	}
	text := "weather file in EPW format: " + strings.Join(place, ", ") + "; " + design
	for q, n := range filled {
		if n > 0 {
			text += fmt.Sprintf("; hours without %s, filled from the month's same hour of the day: %d", Quantity(q), n)
		}
	}
	return text
}

// fillHours fills the quantities a monthly climate needs in place and returns
// how many hours of each it filled. The other quantities stay as they are.
func fillHours(hours []Hour) (filled [NumQuantities]int, err error) {
	type sum struct {
		n     int
		total float64
	}
	for _, q := range []Quantity{DryBulb, Wind, Global} {
		var at [12][24]sum
		var known, all [12]int
		for i := range hours {
			h := &hours[i]
			all[h.Month-1]++
			if h.known[q] {
				known[h.Month-1]++
				s := &at[h.Month-1][h.Hour-1]
				s.n++
				s.total += h.values[q]
			}
		}
		for m := range 12 {
			if float64(known[m]) < leastKnown*float64(all[m]) {
				return filled, fmt.Errorf("month %d: %s is missing in %d of %d hours", m+1, q, all[m]-known[m], all[m])
			}
		}
		for i := range hours {
			h := &hours[i]
			if h.known[q] {
				continue
			}
			s := at[h.Month-1][h.Hour-1]
			if s.n == 0 {
				return filled, fmt.Errorf("month %d: %s is missing at hour %d of every day", h.Month, q, h.Hour)
			}
			h.values[q] = s.total / float64(s.n)
			filled[q]++
		}
	}
	return filled, nil
}

// dailyMeansC returns the mean dry bulb temperature of each day of hours in
// calendar order that are all known or filled.
func dailyMeansC(hours []Hour) []float64 {
	means := make([]float64, 0, len(hours)/24)
	for i := 0; i+24 <= len(hours); i += 24 {
		total := 0.0
		for j := range hours[i : i+24] {
			total += hours[i+j].values[DryBulb]
		}
		means = append(means, total/24)
	}
	return means
}
