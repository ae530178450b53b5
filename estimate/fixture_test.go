package estimate

import (
	"fmt"
	"testing"

	"kelvinrow/estimate/archetype"
	"kelvinrow/estimate/building"
	"kelvinrow/estimate/climate"
)

func testBasis(t testing.TB) *Basis {
	t.Helper()
	set, err := archetype.Starter()
	if err != nil {
		t.Fatal(err)
	}
	climates, err := climate.Starter()
	if err != nil {
		t.Fatal(err)
	}
	b, err := NewBasis(set, &climates[0])
	if err != nil {
		t.Fatal(err)
	}
	return b
}

// values makes the values of one row: numbers, words, years.
type values map[building.Field]any

func testBuilding(id string, v values) *building.Building {
	r := building.Record{Building: id, Row: 2, Sheet: &building.Sheet{File: "test.csv", FileDate: "2026-01-01"}}
	for f := range building.NumFields {
		x, ok := v[building.Field(f)]
		if !ok {
			continue
		}
		val := building.Value{Field: building.Field(f), Kind: building.Registered}
		switch x := x.(type) {
		case string:
			val.Text = x
		case int:
			val.Number = float64(x)
		case float64:
			val.Number = x
		case bool:
			val.Number = map[bool]float64{true: 1}[x]
		}
		val.Low, val.High = val.Number, val.Number
		r.Values = append(r.Values, val)
	}
	return building.Merge(id, []building.Record{r})
}

// testBuildings covers every use, era, ventilation, floor, roof and wall word,
// with some values measured.
func testBuildings() []*building.Building {
	var out []*building.Building
	years := []int{1880, 1935, 1958, 1973, 1988, 2002, 2015}
	pick := func(f building.Field, i int) string { w := building.Words(f); return w[i%len(w)] }
	for i := range 120 {
		v := values{
			building.UseField:         pick(building.UseField, i),
			building.YearBuilt:        years[i%len(years)],
			building.FloorArea:        90 + float64(i*i)*0.7,
			building.VentilationField: pick(building.VentilationField, i/2),
			building.FloorType:        pick(building.FloorType, i),
			building.RoofType:         pick(building.RoofType, i/3),
			building.WallConstruction: pick(building.WallConstruction, i),
			building.ExposureField:    pick(building.ExposureField, i/5),
			building.HeatingSystem:    pick(building.HeatingSystem, i/4),
		}
		switch i % 6 {
		case 1:
			v[building.WallU], v[building.N50] = 0.9, 4.5
		case 2:
			v[building.FloorU], v[building.RoofU], v[building.Q50] = 0.8, 0.35, 6.0
		case 3:
			v[building.WindowU], v[building.Volume] = 2.1, (90+float64(i*i)*0.7)*2.9
		case 4:
			v[building.YearWindows], v[building.Protected] = 1998, true
		case 5:
			delete(v, building.YearBuilt)
			delete(v, building.WallConstruction)
			v[building.SupplyAirflow], v[building.HeatRecovery] = 300.0, 0.8
		}
		out = append(out, testBuilding(fmt.Sprintf("T-%03d", i), v))
	}
	return out
}
