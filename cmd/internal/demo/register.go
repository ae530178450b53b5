package demo

import (
	"fmt"
	"math/rand/v2"
	"strings"
)

var englishUse = [numUses]string{"detached house", "semi-detached house", "terraced house", "block of flats", "school", "nursery",
	"community hall", "church", "care home", "sports hall", "office", "shop", "workshop"}

var englishWall = []string{"solid brick", "stone", "cavity wall", "filled cavity", "concrete panel", "hollow block", "timber frame"}

var englishVentilation = []string{"natural", "passive stack", "extract fan", "demand-controlled extract", "balanced", "balanced with heat recovery", "unknown"}

var englishHeating = []string{"boiler", "condensing boiler", "district heating", "heat pump", "electric heating", "stoves"}

var englishCarrier = []string{"gas", "oil", "district heat", "electricity", "wood"}

func attachment(a *asset) string {
	switch {
	case a.use == terraced && a.attached == 1:
		return "end terrace"
	case a.use == terraced:
		return "mid terrace"
	}
	return []string{"detached", "one side attached", "attached both sides"}[a.attached]
}

func yesNo(b bool) string { return choose(b, "yes", "no") }

// builtEnglish writes a year of building as registers do: old ones roughly.
func builtEnglish(a *asset, rng *rand.Rand) any {
	switch x := rng.Float64(); {
	case a.year < 1900 && x < 0.5:
		return "before 1900"
	case a.year < 1919 && x < 0.4:
		return fmt.Sprintf("c. %d", (a.year+2)/5*5)
	case x < 0.06:
		return decade(a.year)
	}
	return a.year
}

var registerColumns = []column{
	{"Asset ID", "", 11, 0, func(a *asset, _ *rand.Rand) any { return a.id }},
	{"Name", "", 26, 0, func(a *asset, _ *rand.Rand) any { return choose[any](a.name == "", nil, a.name) }},
	{"Street", "", 24, 0.01, func(a *asset, _ *rand.Rand) any { return fmt.Sprintf("%s %d", a.street, a.house) }},
	{"Postcode", "", 10, 0.02, func(a *asset, _ *rand.Rand) any { return postcode(a) }},
	{"Town", "", 13, 0, func(a *asset, _ *rand.Rand) any { return a.town.name }},
	{"District", "", 10, 0.05, func(a *asset, _ *rand.Rand) any { return a.quarter }},
	{"Use", "", 20, 0.01, func(a *asset, _ *rand.Rand) any { return englishUse[a.use] }},
	{"Attachment", "", 16, 0.1, func(a *asset, _ *rand.Rand) any { return attachment(a) }},
	{"Year built", "", 12, 0.03, builtEnglish},
	{"Windows renewed", "year", 10, 0.25, func(a *asset, _ *rand.Rand) any { return year(a.yearWindows) }},
	{"Roof renewed", "year", 10, 0.3, func(a *asset, _ *rand.Rand) any { return year(a.yearRoof) }},
	{"Heated floor area", "m2", 11, 0.02, func(a *asset, _ *rand.Rand) any { return a.floorAreaM2 }},
	{"Volume", "m3", 11, 0.45, func(a *asset, rng *rand.Rand) any {
		if rng.Float64() < 0.15 { // floor area times storey height
			return formula{"L{r}*N{r}", round(a.floorAreaM2*round(a.storeyHeightM, 2), 1)}
		}
		return round(a.volumeM3(), 0)
	}},
	{"Storey height", "m", 9, 0.4, func(a *asset, _ *rand.Rand) any { return round(a.storeyHeightM, 2) }},
	{"Storeys", "", 9, 0.06, func(a *asset, _ *rand.Rand) any { return a.storeys }},
	{"Window area", "m2", 9, 0.7, func(a *asset, rng *rand.Rand) any { return measured(rng, a.windowM2, 0.04, 1) }},
	{"Wall construction", "", 17, 0.3, func(a *asset, _ *rand.Rand) any { return englishWall[a.wall] }},
	{"Roof type", "", 14, 0.25, func(a *asset, _ *rand.Rand) any {
		return choose(a.flat, "flat roof", choose(a.attic, "room in roof", "cold loft"))
	}},
	{"Basement", "", 18, 0.35, func(a *asset, _ *rand.Rand) any {
		return choose(a.cellar, "unheated basement", "slab on ground")
	}},
	{"Ventilation type", "", 26, 0.3, func(a *asset, rng *rand.Rand) any {
		if rng.Float64() < 0.15 {
			return englishVentilation[unknown]
		}
		return englishVentilation[a.ventilation]
	}},
	{"Heating system", "", 18, 0.1, func(a *asset, _ *rand.Rand) any { return englishHeating[a.heating] }},
	{"Fuel", "", 13, 0.12, func(a *asset, _ *rand.Rand) any { return englishCarrier[a.carrier] }},
	{"Dwellings", "", 10, 0.03, func(a *asset, _ *rand.Rand) any { return year(a.dwellings) }},
	{"Flats let", "", 9, 0.2, func(a *asset, _ *rand.Rand) any { return choose[any](a.use == block, a.let, nil) }},
	{"Occupants", "", 10, 0.5, func(a *asset, _ *rand.Rand) any { return year(a.occupants) }},
	{"Listed", "", 8, 0.15, func(a *asset, _ *rand.Rand) any { return yesNo(a.listed) }},
	{"Facade must stay", "", 9, 0.5, func(a *asset, _ *rand.Rand) any { return yesNo(a.facadeStays) }},
	{"Cost centre", "", 11, 0, func(a *asset, _ *rand.Rand) any { return fmt.Sprintf("CC-%02d", 10+int(a.use)) }},
}

func postcode(a *asset) string {
	return fmt.Sprintf("%s %d", a.town.postcode, 100+len(a.street)*7+len(a.quarter))
}

// writeRegister writes the estates department's register: the housing on one
// sheet, what is let to firms on another, in square feet.
func writeRegister(path string, stock []asset, rng *rand.Rand) error {
	housing := choosing(stock, func(a *asset) bool { return a.held.register && !a.use.commercial() })
	l := newList(registerColumns, housing, rng)
	// A formula is only as good as the cells that it multiplies.
	area, height, volume := l.index("Heated floor area"), l.index("Storey height"), l.index("Volume")
	l.spoil(rng, "Heated floor area", 3, always("see plan"))
	l.spoil(rng, "Heated floor area", 9, wordy("approx. %s"))
	l.spoil(rng, "Heated floor area", 12, wordy("%s m²"))
	l.spoil(rng, "Heated floor area", 6, always("n/a"))
	l.spoil(rng, "Heated floor area", 3, negative)
	l.spoil(rng, "Volume", 6, always("?"))
	l.spoil(rng, "Volume", 3, times(100))
	l.spoil(rng, "Volume", 5, wordy("%s cbm"))
	for _, row := range l.rows {
		if _, ok := row[volume].(formula); ok {
			_, a := number(row[area])
			_, h := number(row[height])
			if !a || !h || row[area].(float64) < 0 {
				row[volume] = nil
			}
		}
	}
	l.spoil(rng, "Year built", 1.5, always(19667))
	l.spoil(rng, "Year built", 1.5, always(2107))
	l.spoil(rng, "Year built", 5, always(0))
	l.spoil(rng, "Storeys", 6, always("tbc"))
	l.spoil(rng, "Window area", 3, times(20))
	l.spoil(rng, "Ventilation type", 2, always("see M&E file"))
	l.spoil(rng, "Ventilation type", 15, func(v any) any { return strings.ToUpper(v.(string)) })
	l.spoil(rng, "Asset ID", 2, always(nil))
	l.double(rng, 2, nil)
	l.double(rng, 2, func(row []any) { row[area] = times(1.1)(row[area]) })
	l.blank(400)
	total := []any{"Total", nil, nil, nil, nil, nil, nil, nil, nil, nil, nil, formula{fmt.Sprintf("SUM(L6:L%d)", 5+len(l.rows)), round(sum(l.rows, area), 0)}}

	b, err := newBook()
	if err != nil {
		return err
	}
	err = b.add(page{name: "Register", list: l, bold: 2,
		above: [][]any{{Landlord + " - estates register"}, {"As at 15 January 2025"}, nil, l.heads(), l.units()}, below: [][]any{nil, total}})
	if err != nil {
		return err
	}
	if err := b.add(commercial(stock, rng)); err != nil {
		return err
	}
	for _, p := range []page{
		{name: "Notes", above: [][]any{{"How to read this register"}, {"Areas come from the rent roll where no survey was made."}, {"Volumes with a formula are floor area times storey height."}, {"Questions: estates desk, room 214."}}},
		{name: "Lists", hidden: true, above: [][]any{{"Cost centres"}, {"CC-10"}, {"CC-11"}, {"CC-12"}, {"CC-13"}}},
	} {
		if err := b.add(p); err != nil {
			return err
		}
	}
	return b.save(path, "Estates department", "2025-01-15")
}

const (
	footM = 0.3048 // exact
	ft2M2 = footM * footM
)

// commercial is the sheet of what is let to firms.
func commercial(stock []asset, rng *rand.Rand) page {
	of := func(head string) column { return registerColumns[(&list{columns: registerColumns}).index(head)] }
	area := of("Heated floor area")
	area.unit, area.hole = "sq ft", 0
	area.value = func(a *asset, _ *rand.Rand) any { return round(a.floorAreaM2/ft2M2, 0) }
	height := of("Storey height")
	height.unit = "ft"
	height.value = func(a *asset, _ *rand.Rand) any { return round(a.storeyHeightM/footM, 1) }
	l := newList([]column{of("Asset ID"), of("Name"), of("Street"), of("Town"), of("Use"), of("Year built"),
		of("Windows renewed"), area, height, of("Storeys"), of("Wall construction"), of("Ventilation type"), of("Heating system"), of("Fuel"),
		of("Listed")},
		choosing(stock, func(a *asset) bool { return a.held.register && a.use.commercial() }), rng)
	l.spoil(rng, "Heated floor area", 8, wordy("%s sq ft"))
	return page{name: "Commercial", list: l, bold: 2, above: [][]any{{Landlord + " - let to firms"}, {"As at 15 January 2025, areas from the leases"}, l.heads(), l.units()}}
}

func choosing(stock []asset, want func(*asset) bool) []*asset {
	var out []*asset
	for i := range stock {
		if want(&stock[i]) {
			out = append(out, &stock[i])
		}
	}
	return out
}

func sum(rows [][]any, column int) float64 {
	s := 0.0
	for _, row := range rows {
		if column < len(row) {
			if v, ok := number(row[column]); ok {
				s += v
			}
		}
	}
	return s
}
