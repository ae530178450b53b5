package check

import (
	"testing"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/finding"
)

func values(v map[building.Field]float64) *Values {
	var out Values
	for f, n := range v {
		out[f] = &building.Value{Field: f, Number: n, Low: n, High: n}
	}
	return &out
}

func TestRow(t *testing.T) {
	type m = map[building.Field]float64
	for _, tc := range []struct {
		name  string
		in    m
		check string // "" for none
		sev   finding.Severity
		drop  building.Field
	}{
		{"Sound", m{building.FloorArea: 120, building.Volume: 300, building.YearBuilt: 1960, building.WallU: 1.4, building.N50: 6, building.WindowArea: 20, building.WallArea: 150}, "", 0, 0},
		{"NegativeArea", m{building.FloorArea: -120}, "negative-area", finding.Error, 0},
		{"NegativeVolume", m{building.Volume: -1, building.FloorArea: 100}, "negative-volume", finding.Error, 0},
		{"NegativeWall", m{building.WallArea: -5}, "negative-value", finding.Warning, building.WallArea},
		{"RatioAt2", m{building.FloorArea: 100, building.Volume: 200}, "", 0, 0},
		{"RatioAt12", m{building.FloorArea: 100, building.Volume: 1200}, "", 0, 0},
		{"RatioBelow2", m{building.FloorArea: 100, building.Volume: 199}, "volume-ratio", finding.Warning, building.Volume},
		{"RatioAbove12", m{building.FloorArea: 100, building.Volume: 1201}, "volume-ratio", finding.Warning, building.Volume},
		{"RatioOfFeet", m{building.FloorArea: 100, building.Volume: 10000}, "volume-ratio", finding.Error, 0},
		{"WindowsEqualWalls", m{building.WindowArea: 50, building.WallArea: 50}, "window-wall", finding.Warning, building.WindowArea},
		{"UTooLow", m{building.WallU: 0.04}, "u-value", finding.Warning, building.WallU},
		{"UAtLimits", m{building.WallU: 0.05, building.WindowU: 7}, "", 0, 0},
		{"UTooHigh", m{building.RoofU: 7.1}, "u-value", finding.Warning, building.RoofU},
		{"N50AtLimits", m{building.N50: 0.1}, "", 0, 0},
		{"N50TooHigh", m{building.N50: 40.5}, "n50", finding.Warning, building.N50},
		{"N50TooLow", m{building.N50: 0.05}, "n50", finding.Warning, building.N50},
		{"YearNext", m{building.YearBuilt: 2027}, "", 0, 0},
		{"YearAfterNext", m{building.YearBuilt: 2028}, "year", finding.Warning, building.YearBuilt},
		{"YearOfTwoDigits", m{building.YearRoof: 65}, "year", finding.Warning, building.YearRoof},
		{"RenewedBeforeBuilt", m{building.YearBuilt: 1990, building.YearRoof: 1980}, "renewed-before-built", finding.Warning, building.YearRoof},
		{"StoreysDoNotFit", m{building.FloorArea: 1000, building.Footprint: 100, building.Storeys: 2}, "area-storeys", finding.Warning, building.Footprint},
		{"HalfStoreysFit", m{building.FloorArea: 150, building.Footprint: 100, building.Storeys: 1.5}, "", 0, 0},
		{"PerimeterTooShort", m{building.Perimeter: 30, building.Footprint: 100}, "perimeter-footprint", finding.Warning, building.Perimeter},
		{"PerimeterOfSquare", m{building.Perimeter: 40, building.Footprint: 100}, "", 0, 0},
		{"MeterTooHigh", m{building.MeteredHeat: 200000, building.FloorArea: 100}, "meter-per-area", finding.Warning, building.MeteredHeat},
		{"MeterTooLow", m{building.MeteredHeat: 100, building.FloorArea: 100}, "meter-per-area", finding.Warning, building.MeteredHeat},
		{"MeterAlone", m{building.MeteredHeat: 100}, "", 0, 0},
		{"MoreFlatsLetThanThereAre", m{building.FlatsLet: 9, building.Dwellings: 8}, "flats-let", finding.Warning, building.FlatsLet},
		{"NoDoors", m{building.DoorArea: 0}, "", 0, 0},
	} {
		t.Run(tc.name, func(t *testing.T) {
			v := values(tc.in)
			got := Row(v, 2027)
			if tc.check == "" {
				if len(got) != 0 {
					t.Fatalf("found %+v", got)
				}
				return
			}
			if len(got) != 1 || got[0].Check != tc.check || got[0].Severity != tc.sev {
				t.Fatalf("found %+v, want %s %s", got, tc.sev, tc.check)
			}
			if got[0].Text == "" || got[0].Fix == "" {
				t.Errorf("says too little: %+v", got[0])
			}
			if tc.sev == finding.Warning {
				if v[tc.drop] != nil {
					t.Errorf("%s is not set aside", tc.drop)
				}
				for f := range tc.in {
					if f != tc.drop && v[f] == nil {
						t.Errorf("%s is set aside", f)
					}
				}
			}
		})
	}
}

func TestTextsNameTheValues(t *testing.T) {
	p := Row(values(map[building.Field]float64{building.FloorArea: 100, building.Volume: 150}), 2027)
	if want := "volume / floor area is 1.5 m, outside 2 to 12 m"; len(p) != 1 || p[0].Text != want {
		t.Errorf("%+v, want %q", p, want)
	}
	p = Row(values(map[building.Field]float64{building.WallU: 12}), 2027)
	if want := "wall U-value 12 W/(m2K) is outside 0.05 to 7"; len(p) != 1 || p[0].Text != want {
		t.Errorf("%+v, want %q", p, want)
	}
	p = Row(values(map[building.Field]float64{building.Efficiency: 0.02}), 2027)
	if want := "generator efficiency 2 % is outside 20 to 700 %"; len(p) != 1 || p[0].Text != want {
		t.Errorf("%+v, want %q", p, want)
	}
}
