package demo

import (
	"bytes"
	"encoding/csv"
	"fmt"
	"io"
	"math/rand/v2"
	"os"

	"golang.org/x/text/encoding"
	"golang.org/x/text/encoding/charmap"
	"golang.org/x/text/encoding/unicode"
)

var frenchUse = [numUses]string{school: "école", nursery: "crèche", hall: "salle polyvalente", church: "église", careHome: "maison de retraite", sportsHall: "gymnase"}

var frenchWall = []string{"brique pleine", "pierre", "mur double", "mur double isolé", "béton préfabriqué", "parpaing", "ossature bois"}

var frenchVentilation = []string{"naturelle", "tirage naturel", "simple flux", "hygroréglable", "double flux sans récupération", "double flux", "inconnue"}

var frenchHeating = []string{"chaudière", "chaudière à condensation", "réseau de chaleur", "pompe à chaleur", "convecteurs électriques", "poêle"}

var frenchCarrier = []string{"gaz naturel", "fioul", "réseau de chaleur", "électricité", "bois"}

var bureauColumns = []column{
	{"Code bâtiment", "", 0, 0, func(a *asset, _ *rand.Rand) any { return a.id }},
	{"Désignation", "", 0, 0, func(a *asset, _ *rand.Rand) any { return a.name }},
	{"Adresse", "", 0, 0.02, func(a *asset, _ *rand.Rand) any { return fmt.Sprintf("%d, %s", a.house, a.street) }},
	{"Code postal", "", 0, 0, func(a *asset, _ *rand.Rand) any { return postcode(a) }},
	{"Commune", "", 0, 0, func(a *asset, _ *rand.Rand) any { return a.town.name }},
	{"Usage", "", 0, 0, func(a *asset, _ *rand.Rand) any { return frenchUse[a.use] }},
	{"Année de construction", "", 0, 0.04, func(a *asset, rng *rand.Rand) any {
		switch x := rng.Float64(); {
		case a.year < 1900 && x < 0.5:
			return "XIXe siècle"
		case x < 0.06:
			return fmt.Sprintf("vers %d", (a.year+2)/5*5)
		}
		return a.year
	}},
	{"Surface chauffée (m²)", "", 0, 0.03, func(a *asset, rng *rand.Rand) any { return plainComma(measured(rng, a.floorAreaM2, 0.015, 1), 1) }},
	{"Volume chauffé (m³)", "", 0, 0.25, func(a *asset, rng *rand.Rand) any { return plainComma(measured(rng, a.volumeM3(), 0.02, 1), 1) }},
	{"Niveaux", "", 0, 0.1, func(a *asset, _ *rand.Rand) any { return a.storeys }},
	{"Hauteur sous plafond (m)", "", 0, 0.5, func(a *asset, _ *rand.Rand) any { return plainComma(a.storeyHeightM, 2) }},
	{"Surface vitrée (m²)", "", 0, 0.6, func(a *asset, rng *rand.Rand) any { return plainComma(measured(rng, a.windowM2, 0.04, 1), 1) }},
	{"Murs", "", 0, 0.3, func(a *asset, _ *rand.Rand) any { return frenchWall[a.wall] }},
	{"Ventilation", "", 0, 0.25, func(a *asset, _ *rand.Rand) any { return frenchVentilation[a.ventilation] }},
	{"Chauffage", "", 0, 0.1, func(a *asset, _ *rand.Rand) any { return frenchHeating[a.heating] }},
	{"Énergie", "", 0, 0.1, func(a *asset, _ *rand.Rand) any { return frenchCarrier[a.carrier] }},
	{"Réfection toiture", "", 0, 0.1, func(a *asset, _ *rand.Rand) any { return year(a.yearRoof) }},
	{"Fenêtres remplacées", "", 0, 0.2, func(a *asset, _ *rand.Rand) any { return year(a.yearWindows) }},
	{"Monument historique", "", 0, 0.1, func(a *asset, _ *rand.Rand) any { return choose(a.listed, "oui", "non") }},
}

// writeBureau writes what the bureau for schools and parishes exports from its
// old database: French, semicolons, Windows-1252.
func writeBureau(path string, stock []asset, rng *rand.Rand) error {
	l := newList(bureauColumns, choosing(stock, func(a *asset) bool { return a.held.bureau }), rng)
	l.spoil(rng, "Surface chauffée (m²)", 10, func(v any) any { return "env. " + v.(string) })
	l.spoil(rng, "Surface chauffée (m²)", 10, func(v any) any { return "-" + v.(string) })
	l.spoil(rng, "Volume chauffé (m³)", 10, always("voir plan"))
	l.spoil(rng, "Volume chauffé (m³)", 15, always("n.c."))
	l.spoil(rng, "Ventilation", 10, always("à vérifier"))
	l.spoil(rng, "Code bâtiment", 10, always(nil))
	l.double(rng, 10, nil)
	return writeText(path, l, ';', charmap.Windows1252.NewEncoder())
}

var swedishGlazing = []string{"enkelglas", "kopplade fönster", "2-glas", "energiglas", "3-glas"}

// writeWindows writes the contractor's list of windows renewed: Swedish,
// tabs, UTF-16 as spreadsheet programs save "Unicode text".
func writeWindows(path string, stock []asset, rng *rand.Rand) error {
	l := newList([]column{
		{"Byggnads-ID", "", 0, 0, func(a *asset, _ *rand.Rand) any { return a.id }},
		{"Gatuadress", "", 0, 0, func(a *asset, _ *rand.Rand) any { return fmt.Sprintf("%s %d", a.street, a.house) }},
		{"Fönsterbyte (år)", "", 0, 0, func(a *asset, _ *rand.Rand) any { return a.yearWindows }},
		{"Fönstertyp", "", 0, 0.05, func(a *asset, _ *rand.Rand) any { return swedishGlazing[a.glazing] }},
		{"U-värde fönster (W/m²K)", "", 0, 0.3, func(a *asset, rng *rand.Rand) any { return plainComma(measured(rng, a.windowU, 0.05, 2), 2) }},
	}, choosing(stock, func(a *asset) bool { return a.held.windows }), rng)
	l.spoil(rng, "U-värde fönster (W/m²K)", 8, times(10))
	l.spoil(rng, "Byggnads-ID", 30, func(v any) any { return " " + v.(string) })
	return writeText(path, l, '\t', unicode.UTF16(unicode.LittleEndian, unicode.UseBOM).NewEncoder())
}

func writeText(path string, l *list, separator rune, enc *encoding.Encoder) error {
	var b bytes.Buffer
	encoded := enc.Writer(&b)
	w := csv.NewWriter(encoded)
	w.Comma, w.UseCRLF = separator, true
	record := make([]string, len(l.columns))
	for _, row := range append([][]any{l.heads()}, l.rows...) {
		for i := range record {
			record[i] = ""
			if i < len(row) && row[i] != nil {
				record[i] = fmt.Sprint(row[i])
			}
		}
		if err := w.Write(record); err != nil {
			return err
		}
	}
	w.Flush()
	if err := w.Error(); err != nil {
		return err
	}
	if c, ok := encoded.(io.Closer); ok {
		if err := c.Close(); err != nil {
			return err
		}
	}
	return os.WriteFile(path, b.Bytes(), 0o644)
}
