package demo

import (
	"fmt"
	"math/rand/v2"
)

var germanUse = [numUses]string{"Einfamilienhaus", "Doppelhaushälfte", "Reihenhaus", "Mehrfamilienhaus", "Schule", "Kita",
	"Bürgerhaus", "Kirche", "Pflegeheim", "Sporthalle", "Bürogebäude", "Laden", "Werkstatt"}

var germanWall = []string{"Vollziegel", "Bruchstein", "zweischaliges Mauerwerk", "zweischalig mit Kerndämmung", "Plattenbau", "Hochlochziegel", "Holzständerbau"}

var germanVentilation = []string{"Fensterlüftung", "Schachtlüftung", "Abluftanlage", "bedarfsgeführte Abluft", "Zu- und Abluft", "Zu- und Abluft mit WRG", "unbekannt"}

var germanHeating = []string{"Niedertemperaturkessel", "Brennwertkessel", "Fernwärme", "Wärmepumpe", "Nachtspeicher", "Einzelöfen"}

var germanCarrier = []string{"Erdgas", "Heizöl", "Fernwärme", "Strom", "Pellets"}

// fans reports whether the building has fans with a designed airflow.
func (a *asset) fans() bool { return a.ventilation >= extract && a.ventilation <= recovery }

var technicalColumns = []column{
	{"Objekt-Nr.", "", 11, 0, func(a *asset, _ *rand.Rand) any { return a.id }},
	{"Straße", "", 20, 0, func(a *asset, _ *rand.Rand) any { return a.street }},
	{"Hausnr.", "", 9, 0, func(a *asset, _ *rand.Rand) any { return a.house }},
	{"Ort", "", 13, 0, func(a *asset, _ *rand.Rand) any { return a.town.name }},
	{"Gebäudeart", "", 19, 0.02, func(a *asset, _ *rand.Rand) any { return germanUse[a.use] }},
	{"Bauweise", "", 18, 0.15, func(a *asset, _ *rand.Rand) any {
		return []string{"freistehend", "einseitig angebaut", "beidseitig angebaut"}[a.attached]
	}},
	{"Baujahr", "", 12, 0.04, func(a *asset, rng *rand.Rand) any {
		switch x := rng.Float64(); {
		case a.year < 1900 && x < 0.6:
			return "vor 1900"
		case x < 0.05:
			return fmt.Sprintf("ca. %d", (a.year+2)/5*5)
		}
		return a.year
	}},
	{"Vollgeschosse", "", 12, 0.05, func(a *asset, _ *rand.Rand) any { return a.storeys }},
	{"Bruttorauminhalt (m³)", "", 15, 0.12, func(a *asset, rng *rand.Rand) any {
		return comma(measured(rng, a.grossVolumeM3(), 0.03, 1), 1)
	}},
	{"beheizte Wohn-/Nutzfläche (m²)", "", 15, 0.06, func(a *asset, rng *rand.Rand) any {
		return comma(measured(rng, a.floorAreaM2, 0.015, 2), 2)
	}},
	{"Fensterfläche (m²)", "", 12, 0.5, func(a *asset, rng *rand.Rand) any { return comma(measured(rng, a.windowM2, 0.04, 1), 1) }},
	{"Außenwand", "", 26, 0.25, func(a *asset, _ *rand.Rand) any { return germanWall[a.wall] }},
	{"Dachform", "", 20, 0.3, func(a *asset, _ *rand.Rand) any {
		return choose(a.flat, "Flachdach", choose(a.attic, "ausgebautes Dach", "Kaltdach"))
	}},
	{"Keller", "", 18, 0.3, func(a *asset, _ *rand.Rand) any { return choose(a.cellar, "unbeheizter Keller", "nicht unterkellert") }},
	{"Fenster erneuert", "", 10, 0.3, func(a *asset, _ *rand.Rand) any { return year(a.yearWindows) }},
	{"Dach erneuert", "", 10, 0.3, func(a *asset, _ *rand.Rand) any { return year(a.yearRoof) }},
	{"Fassade saniert", "", 10, 0.2, func(a *asset, _ *rand.Rand) any { return year(a.yearWall) }},
	{"Lüftung", "", 24, 0.12, func(a *asset, _ *rand.Rand) any { return germanVentilation[a.ventilation] }},
	{"Abluftvolumenstrom (m³/h)", "", 14, 0.4, func(a *asset, _ *rand.Rand) any { return choose[any](a.fans(), a.airflowM3h(), nil) }},
	{"Wärmerückgewinnungsgrad (%)", "", 15, 0.3, func(a *asset, _ *rand.Rand) any {
		return choose[any](a.ventilation == recovery, round(a.recovery*100, 0), nil)
	}},
	{"Windexposition", "", 12, 0.5, func(a *asset, _ *rand.Rand) any {
		switch a.quarter {
		case "Hill", "Harbour":
			return "exponiert"
		case "Old Town":
			return "geschützt"
		}
		return "normale Lage"
	}},
	{"Wärmeerzeuger", "", 20, 0.05, func(a *asset, _ *rand.Rand) any { return germanHeating[a.heating] }},
	{"Energieträger", "", 12, 0.08, func(a *asset, _ *rand.Rand) any { return germanCarrier[a.carrier] }},
	{"Nutzungsgrad (%)", "", 11, 0.6, func(a *asset, rng *rand.Rand) any {
		return choose[any](a.heating <= condensing, measured(rng, a.efficiency*100, 0.03, 0), nil)
	}},
	{"Wohneinheiten", "", 11, 0.05, func(a *asset, _ *rand.Rand) any { return year(a.dwellings) }},
	{"Denkmalschutz", "", 11, 0.2, func(a *asset, _ *rand.Rand) any { return choose(a.listed, "ja", "nein") }},
	{"Bemerkung", "", 24, 0.9, func(a *asset, _ *rand.Rand) any {
		return choose(a.cellar, "Keller feucht", "Zugang über Hof")
	}},
}

// writeTechnical writes the technical department's list, one sheet per quarter,
// in German and with its numbers as text.
func writeTechnical(path string, stock []asset, rng *rand.Rand) error {
	b, err := newBook()
	if err != nil {
		return err
	}
	for _, q := range quarters {
		assets := choosing(stock, func(a *asset) bool { return a.held.technical && a.quarter == q })
		l := newList(technicalColumns, assets, rng)
		l.spoil(rng, "beheizte Wohn-/Nutzfläche (m²)", 8, func(v any) any { return "ca. " + v.(string) })
		l.spoil(rng, "beheizte Wohn-/Nutzfläche (m²)", 8, func(v any) any { return v.(string) + " m²" })
		l.spoil(rng, "Bruttorauminhalt (m³)", 10, always("k. A."))
		l.spoil(rng, "Bruttorauminhalt (m³)", 6, always("siehe Plan"))
		l.spoil(rng, "Lüftung", 5, always("Anlage 7b"))
		l.spoil(rng, "Vollgeschosse", 5, always("EG+1"))
		l.spoil(rng, "Baujahr", 4, always(3019))
		page := page{name: "Bezirk " + quartersGerman[q], list: l, bold: 1,
			above: [][]any{{"Technische Abteilung - Gebäudeliste Bezirk " + quartersGerman[q]}, {"Stand: 30.09.2023"}, nil, l.heads()}}
		if err := b.add(page); err != nil {
			return err
		}
	}
	err = b.add(page{name: "Hinweise", above: [][]any{{"Hinweise"},
		{"Bruttorauminhalt nach Bauakte, Flächen nach Mietvertrag."}, {"Leere Felder: bitte bei der Hausverwaltung nachfragen."}}})
	if err != nil {
		return err
	}
	return b.save(path, "Technische Abteilung", "2023-09-30")
}
