package demo

import (
	"fmt"
	"math"
	"math/rand/v2"
	"time"
)

// writeEnergy writes energy controlling's readings, one sheet per year.
func writeEnergy(path string, stock []asset, rng *rand.Rand) error {
	b, err := newBook()
	if err != nil {
		return err
	}
	assets := choosing(stock, func(a *asset) bool { return a.held.energy })
	for _, d := range degreeDays {
		l := newList([]column{
			{"Building", "", 13, 0, func(a *asset, _ *rand.Rand) any { return a.id }},
			{"Address", "", 30, 0.1, func(a *asset, _ *rand.Rand) any { return fmt.Sprintf("%s %d, %s", a.street, a.house, a.town.name) }},
			{"Metered year", "", 10, 0, func(a *asset, _ *rand.Rand) any { return d.year }},
			{"Heat consumption (MWh)", "", 14, 0.08, func(a *asset, rng *rand.Rand) any {
				return round(a.heatKWh/1000*d.kd/meanDegreeDays*math.Exp(0.05*rng.NormFloat64()), 1)
			}},
			{"Hot water included", "", 10, 0.1, func(a *asset, _ *rand.Rand) any { return choose(a.includesHotWater, "Y", "N") }},
			{"Degree days", "K d", 10, 0, func(*asset, *rand.Rand) any { return d.kd }},
		}, assets, rng)
		l.spoil(rng, "Building", 60, func(v any) any { return v.(string) + "  " })
		l.spoil(rng, "Heat consumption (MWh)", 4, times(1000)) // kWh, typed into the wrong list
		l.spoil(rng, "Heat consumption (MWh)", 8, always("meter broken"))
		l.spoil(rng, "Heat consumption (MWh)", 8, negative)
		l.spoil(rng, "Heat consumption (MWh)", 10, wordy("%s MWh"))
		const from = 5
		heat := l.index("Heat consumption (MWh)")
		total := []any{"Total", nil, nil, formula{fmt.Sprintf("SUM(D%d:D%d)", from, from-1+len(l.rows)), round(sum(l.rows, heat), 1)}}
		err := b.add(page{name: fmt.Sprintf("Heat %d", d.year), list: l, bold: 1, below: [][]any{total},
			above: [][]any{{fmt.Sprintf("Energy controlling - heat %d, not corrected for weather", d.year)}, {"Readings of the year's last day"}, nil, l.heads()}})
		if err != nil {
			return err
		}
	}
	return b.save(path, "Energy controlling", "2025-03-10")
}

var englishGlazing = []string{"single glazing", "secondary glazing", "double glazing", "low-e double", "triple glazing"}

// writeSurvey writes what surveyors found and measured on site in 2025.
func writeSurvey(path string, stock []asset, rng *rand.Rand) error {
	l := newList([]column{
		{"Building ref", "", 12, 0, func(a *asset, _ *rand.Rand) any { return a.id }},
		{"Survey date", "", 12, 0, func(_ *asset, rng *rand.Rand) any {
			return time.Date(2025, 3, 3, 0, 0, 0, 0, time.UTC).AddDate(0, 0, rng.IntN(115))
		}},
		{"Surveyor", "", 12, 0, func(_ *asset, rng *rand.Rand) any {
			return pick(rng, []string{"T. Quillor", "A. Ferrask", "S. Osmundel"})
		}},
		{"Heated floor area (m2)", "", 12, 0.2, func(a *asset, rng *rand.Rand) any { return measured(rng, a.floorAreaM2, 0.005, 1) }},
		{"Storeys", "", 9, 0, func(a *asset, _ *rand.Rand) any { return a.storeys }},
		{"Storey height (m)", "", 9, 0.1, func(a *asset, _ *rand.Rand) any { return round(a.storeyHeightM, 2) }},
		{"Window area (m2)", "", 10, 0.2, func(a *asset, rng *rand.Rand) any { return measured(rng, a.windowM2, 0.01, 1) }},
		{"Glazing", "", 18, 0.1, func(a *asset, _ *rand.Rand) any { return englishGlazing[a.glazing] }},
		{"Wall construction", "", 18, 0.1, func(a *asset, _ *rand.Rand) any { return englishWall[a.wall] }},
		{"Wall U-value, measured (W/m2K)", "", 14, 0.35, func(a *asset, rng *rand.Rand) any { return measured(rng, a.wallU, 0.06, 2) }},
		{"Roof U-value (W/m2K)", "", 12, 0.5, func(a *asset, rng *rand.Rand) any { return measured(rng, a.roofU, 0.06, 2) }},
		{"Floor U-value (W/m2K)", "", 12, 0.7, func(a *asset, rng *rand.Rand) any { return measured(rng, a.floorU, 0.06, 2) }},
		{"Window U-value (W/m2K)", "", 12, 0.3, func(a *asset, rng *rand.Rand) any { return measured(rng, a.windowU, 0.05, 2) }},
		{"Blower door n50 (1/h)", "", 12, 0.25, func(a *asset, rng *rand.Rand) any { return measured(rng, a.n50, 0.04, 2) }},
		{"Ventilation seen", "", 26, 0.05, func(a *asset, _ *rand.Rand) any { return englishVentilation[a.ventilation] }},
		{"Exposure", "", 11, 0.2, func(a *asset, _ *rand.Rand) any {
			return choose(a.quarter == "Hill" || a.quarter == "Harbour", "exposed", choose(a.quarter == "Old Town", "sheltered", "normal"))
		}},
		{"Boiler efficiency (%)", "", 10, 0.5, func(a *asset, rng *rand.Rand) any {
			return choose[any](a.heating <= condensing, measured(rng, a.efficiency*100, 0.01, 1), nil)
		}},
		{"Other restrictions", "", 24, 0, func(_ *asset, rng *rand.Rand) any {
			return choose[any](rng.Float64() < 0.1, pick(rng, []string{"bats in the roof", "swifts nest at the eaves", "asbestos boards in the attic"}), nil)
		}},
	}, choosing(stock, func(a *asset) bool { return a.held.survey }), rng)
	l.spoil(rng, "Blower door n50 (1/h)", 10, always("test failed"))
	l.spoil(rng, "Wall U-value, measured (W/m2K)", 10, times(100))
	b, err := newBook()
	if err != nil {
		return err
	}
	err = b.add(page{name: "Survey 2025", list: l, bold: 1, above: [][]any{{"Site surveys, spring 2025"}, l.heads()}})
	if err != nil {
		return err
	}
	return b.save(path, "Survey team", "2025-06-30")
}
