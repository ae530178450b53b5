package balance

import (
	"math"
	"testing"

	"kelvinrow/estimate/airflow"
	"kelvinrow/estimate/climate"
	"kelvinrow/estimate/refcase"
)

// amsterdam is the hourly typical year, and its monthly means.
func amsterdam(t *testing.T) (hours []refcase.Hour, c *climate.Climate) {
	t.Helper()
	hours = refcase.Amsterdam(t)
	c = &climate.Climate{}
	for _, h := range hours {
		m := &c.Months[h.Month]
		m.Hours++
		m.OutdoorC += h.OutdoorC
		m.Wind10M += h.Wind10MS
		m.HorizontalKWhM2 += h.GlobalWhM2 / 1000
	}
	for i := range c.Months {
		m := &c.Months[i]
		m.OutdoorC /= m.Hours
		m.Wind10M /= m.Hours
	}
	return hours, c
}

// hourlyNeed heats one thermal node through the hours of a year: the node's
// temperature follows Newton's law within the hour, heating holds it at the
// set-point at the hour's end, and nothing cools it. Gains are level within the
// hour; air is that of the hour's weather. The year is run twice to forget how it
// began. kWh.
func hourlyNeed(in *Input, hours []refcase.Hour) float64 {
	air := airflow.Prepare(&in.Air)
	indoor, need := in.IndoorC, 0.0
	for range 2 {
		need = 0
		for _, h := range hours {
			wk := in.TransmissionWK + air.HeatWK(h.OutdoorC, h.Wind10MS)
			gainW := in.InternalGainWM2*in.FloorAreaM2 + in.ApertureHorizontalM2*h.GlobalWhM2
			kept := math.Exp(-3600 * wk / in.CapacityJK)
			free := h.OutdoorC + gainW/wk
			end := free + (indoor-free)*kept
			if end < in.IndoorC {
				// The level power that ends the hour at the set-point.
				held := (in.IndoorC - indoor*kept) / (1 - kept)
				need += (held - free) * wk / 1000
				end = in.IndoorC
			}
			indoor = end
		}
	}
	return need
}

// The monthly balance against the hours: the utilisation factor stands for what
// sun and cold do within a month, so first principles at hourly steps are the
// check on it that published tables do not give. From leaky and light to tight and
// heavy, from shaded to sunny, the year's need agrees within 5 % and 2.5 kWh/m2.
//
// What is left: in light, well insulated, sunny houses the month uses too little of
// the sun (up to 3 kWh/m2 high, a quarter of a need that is small); with
// infiltration the month's mean wind and temperature make 1 to 4 % too little heat,
// because cold hours and windy ones count more than in proportion.
func TestMonthsAgainstHours(t *testing.T) {
	t.Parallel()
	hours, c := amsterdam(t)
	const area = 100
	low, high := 0.0, 0.0
	for _, capacity := range []float64{80e3, 110e3, 165e3, 260e3, 370e3} {
		for _, wkM2 := range []float64{0.7, 1.5, 3} {
			for _, aperture := range []float64{0, 0.02, 0.05, 0.1} {
				for _, n50 := range []float64{0, 8} {
					in := Input{
						FloorAreaM2: area, IndoorC: 20, InternalGainWM2: 4, CapacityJK: capacity * area,
						TransmissionWK: wkM2 * area, SetpointShare: 1, ApertureHorizontalM2: aperture * area,
						Air: airflow.Input{VolumeM3: 2.6 * area, N50PerH: n50, FlowExponent: 0.65, StackHeightM: 5,
							LeakageR: 0.3, Shelter: 0.7, WindFactor: 0.6, IndoorC: 20},
					}
					month, hour := Need(&in, c)/area, hourlyNeed(&in, hours)/area
					if math.Abs(month-hour) > 0.05*hour+2.5 {
						t.Errorf("capacity %g kJ/m2K, H %g W/m2K, aperture %g, n50 %g: %.1f kWh/m2 by months, %.1f by hours",
							capacity/1000, wkM2, aperture, n50, month, hour)
					}
					if hour > 50 {
						low, high = math.Min(low, month/hour-1), math.Max(high, month/hour-1)
					}
				}
			}
		}
	}
	t.Logf("needs above 50 kWh/m2: by months %+.1f to %+.1f %% of that by hours", 100*low, 100*high)
}
