package workbook

import (
	"bytes"
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
	"time"

	"kelvinrow/estimate"
	"kelvinrow/estimate/archetype"
	"kelvinrow/estimate/building"
	"kelvinrow/estimate/climate"
	"kelvinrow/estimate/result"
	"kelvinrow/ingest/finding"
	"kelvinrow/rank"
)

// portfolio makes an input of n invented buildings, estimated with the starter
// set. Some ids and names are made to cause trouble in spreadsheets.
func portfolio(t testing.TB, n int) *Input {
	t.Helper()
	set, err := archetype.Starter()
	if err != nil {
		t.Fatal(err)
	}
	climates, err := climate.Starter()
	if err != nil {
		t.Fatal(err)
	}
	basis, err := estimate.NewBasis(set, &climates[0])
	if err != nil {
		t.Fatal(err)
	}
	basis.Worth = func(k *result.Package) float64 { return k.SavingKWh }
	rnd := rand.New(rand.NewPCG(20, 26))
	in := &Input{
		Run: &result.Run{
			Portfolio: "north & harbour", Number: 3, Time: time.Date(2026, 3, 1, 9, 30, 0, 0, time.UTC),
			Version: estimate.Version, Climate: climates[0].Name, Yardstick: string(rank.Energy),
			Assumptions: set.Hash(), Inputs: "5b1c", Measures: basis.Keys(), Buildings: n,
			Files: []string{"register.xlsx", "ventilation.csv"},
		},
		Set: set, Climate: &climates[0], Yardstick: rank.Energy, Title: "Fjordby Homes: heat screening",
	}
	in.Buildings = make([]result.Building, n)
	for i := range in.Buildings {
		bl := invented(rnd, i)
		in.Buildings[i] = basis.Evaluate(bl)
		if in.Buildings[i].Failed != "" {
			in.Run.Failed++
		}
	}
	in.Programme = invest(in.Buildings)
	in.Findings = []finding.Finding{
		{Severity: finding.Error, Check: "negative-area", File: "register.xlsx", Sheet: "Homes", Row: 17, Column: "H", Field: "floor_area", Building: in.Buildings[min(3, n-1)].ID, Raw: "-80", Text: "a floor area cannot be negative", Fix: "give the heated floor area in m2"},
		{Severity: finding.Warning, Check: "text-in-number", File: "register.xlsx", Sheet: "Homes", Row: 21, Column: "K", Field: "wall_u", Building: "nobody", Raw: "=1+1", Text: "\"=1+1\" is not a number; the value is set aside and a default takes its place until the cell holds one", Fix: "give a U-value in W/(m2K)"},
		{Severity: finding.Note, Check: "unknown-column", File: "ventilation.csv", Text: "column \"Remarks\" is not used"},
	}
	return in
}

// invest makes a programme of two years out of every third building: the cheapest
// package but one where there are so many.
func invest(buildings []result.Building) *Programme {
	p := &Programme{By: rank.Energy, Budgets: []float64{3e6, 2e6}, Wishes: []string{"Left alone: =1+1."}, Margins: []float64{2.5, 1.5}}
	for year := 1; year <= 2; year++ {
		for i := year - 1; i < len(buildings); i += 3 {
			if ks := buildings[i].Packages; len(ks) > 1 {
				c := Chosen{Year: year, Building: i, Package: ks[min(2, len(ks)-1)]}
				p.Chosen = append(p.Chosen, c)
				p.Value += c.Package.SavingKWh
			}
		}
	}
	p.Bound = 1.001 * p.Value
	p.Gap = 1 - p.Value/p.Bound
	for i := range 5 {
		p.Curve = append(p.Curve, CurvePoint{float64(i) * 1e6, 3e6 * math.Sqrt(float64(i))})
	}
	return p
}

var (
	streets = []string{"Alder Row", "Kiln Lane", "Saltmarsh Street", "Windmill Hill", "Old Quay", "Orchard Close", "Foundry Road"}
	towns   = []string{"Fjordby", "Nethermoor", "Hvalvik", "Eastmere"}
	parts   = []string{"Quayside", "Upper town", "Meadows", "Station"}
	walls   = []string{"solid brick", "cavity brick", "concrete panel", "timber frame", "stone"}
	roofs   = []string{"flat", "cold attic", "heated attic"}
	floors  = []string{"slab on ground", "suspended floor", "unheated cellar"}
	airs    = []string{"natural", "extract fan", "unknown", "passive stack", "balanced"}
	heats   = []string{"boiler", "condensing boiler", "district heating", "electric heating", "stoves"}
)

func pick(rnd *rand.Rand, words []string) string { return words[rnd.IntN(len(words))] }

func invented(rnd *rand.Rand, i int) *building.Building {
	id := fmt.Sprintf("N-%04d", i+1)
	name := fmt.Sprintf("%s House", []string{"Heron", "Lantern", "Juniper", "Beacon", "Harrow", "Copper", "Willow"}[rnd.IntN(7)])
	switch i {
	case 1:
		id, name = "=1+1", "@SUM(1) \"Tern & Gull\" <east>"
	case 2:
		id, name = "+47-5", "-2\x07 bell\tand tab _x0041_"
	case 5:
		id, name = "0012", "Blåklokkeveien ≥ 3 😀"
	}
	sheet := &building.Sheet{File: "register.xlsx", Name: "Homes", FileDate: "2026-01-15"}
	r := building.Record{Building: id, Sheet: sheet, Row: i + 2}
	text := func(f building.Field, s string) {
		r.Values = append(r.Values, building.Value{Field: f, Kind: building.Registered, Text: s})
	}
	number := func(f building.Field, kind building.Kind, v float64) {
		r.Values = append(r.Values, building.Value{Field: f, Kind: kind, Number: v, Low: v, High: v})
	}
	text(building.Name, name)
	text(building.Street, fmt.Sprintf("%s %d", pick(rnd, streets), 1+rnd.IntN(120)))
	text(building.Postcode, fmt.Sprintf("%04d", rnd.IntN(10000)))
	text(building.Town, pick(rnd, towns))
	text(building.District, pick(rnd, parts))
	use := pick(rnd, []string{"apartment block", "apartment block", "terraced house", "detached house", "school", "office", "care home"})
	text(building.UseField, use)
	number(building.YearBuilt, building.Registered, float64(1890+rnd.IntN(120)))
	if i == 7 {
		return building.Merge(id, []building.Record{r}) // no size: cannot be estimated
	}
	area, storeys := 110+rnd.Float64()*120, 2.0
	if use != "terraced house" && use != "detached house" {
		area, storeys = 400+rnd.Float64()*5000, float64(2+rnd.IntN(5))
	}
	number(building.FloorArea, building.Registered, area)
	number(building.Storeys, building.Registered, storeys)
	text(building.WallConstruction, pick(rnd, walls))
	text(building.RoofType, pick(rnd, roofs))
	text(building.FloorType, pick(rnd, floors))
	text(building.VentilationField, pick(rnd, airs))
	text(building.HeatingSystem, pick(rnd, heats))
	if rnd.IntN(4) == 0 {
		number(building.N50, building.Surveyed, 2+8*rnd.Float64())
		number(building.WallU, building.Surveyed, 0.3+1.4*rnd.Float64())
	}
	if rnd.IntN(3) == 0 {
		number(building.MeteredHeat, building.Metered, area*(90+80*rnd.Float64()))
	}
	if rnd.IntN(15) == 0 {
		number(building.Protected, building.Registered, 1)
	}
	return building.Merge(id, []building.Record{r})
}

func written(t testing.TB, in *Input) []byte {
	t.Helper()
	var buf bytes.Buffer
	if err := Write(t.Context(), &buf, in); err != nil {
		t.Fatal(err)
	}
	return buf.Bytes()
}
