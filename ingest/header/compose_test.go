package header

import (
	"strings"
	"testing"
)

func TestHeadersMadeOfKnownParts(t *testing.T) {
	years := Evidence{Filled: 20, Numbers: 19, Years: 19}
	numbers := Evidence{Filled: 20, Numbers: 19}
	words := Evidence{Filled: 20}
	for _, tc := range []struct {
		header string
		ev     Evidence
		want   string
	}{
		{"Fassade gedämmt (Jahr)", years, "year_wall"},
		{"Kellerdeckendämmung", years, "year_floor"},
		{"Year of roof insulation", years, "year_roof"},
		{"Cavity fill year", years, "year_wall"},
		{"Windows (year)", years, "year_windows"},
		{"Isolation des murs (année)", years, "year_wall"},
		{"Réfection de la toiture", years, "year_roof"},
		{"Dakisolatie jaar", years, "year_roof"},
		{"Renoveringsår fönster", years, "year_windows"},
		{"Renoveringsår tak", years, "year_roof"},
		{"Efterisolering af ydervægge", years, "year_wall"},
		{"Etterisolert vegg", years, "year_wall"},
		{"Sustitución de ventanas", years, "year_windows"},
		{"Dach gedämmt", words, ""}, // yes and no are no years
		{"Floor insulated in year", years, "year_floor"},
		{"U-Werte Fenster", numbers, "window_u"},
		{"Mean U-value of the external walls", numbers, "wall_u"},
		{"Tilläggsisolering vägg", years, "year_wall"},
		{"Fläche der Außenwände", numbers, "wall_area"},
		{"Areal yttervegger", numbers, "wall_area"},
		{"Floor areas", numbers, ""}, // of storeys, not of the lowest floor
		{"Art der Fenster", words, "glazing"},
		{"Fastighetsnr", words, "id"},
		{"N° de bâtiment", words, "id"},
		{"Site code", words, "id"},
		{"Number of buildings", numbers, ""},
		{"Anzahl Gebäude", numbers, ""},
		{"District heating (GJ)", numbers, "metered_heat"},
		{"Fjärrvärme", words, ""}, // a carrier, perhaps
		{"Energibruk oppvarming (kWh)", numbers, "metered_heat"},
		{"Gas pressure (kWh)", numbers, ""},
		{"Roof repairs cost", numbers, ""},
		{"Distance to gas main (m)", numbers, ""},
		{"Wall and roof area (m2)", numbers, ""},
	} {
		got := ""
		if c := Recognise(tc.header, tc.ev); len(c) > 0 {
			got = c[0].Key
		}
		if got != tc.want {
			t.Errorf("%q: %q, want %q", tc.header, got, tc.want)
		}
	}
}

func TestPartsAreTriedWithinBounds(t *testing.T) {
	// Each "window" divides in two ways; together they are too many to try.
	h := parsed{}
	if _, ok := h.compose(strings.Repeat("fensterfenstern", 40), Evidence{}); ok {
		t.Error("windows alone are a field")
	}
}
