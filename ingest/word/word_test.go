package word

import (
	"encoding/csv"
	"strings"
	"testing"

	"kelvinrow/estimate/building"
)

func TestFind(t *testing.T) {
	for _, tc := range []struct {
		field building.Field
		text  string
		want  string // "" when it is not known
	}{
		{building.UseField, "school", "school"},
		{building.UseField, "K-12 School", "school"},
		{building.UseField, "Multifamily Housing", "apartment block"},
		{building.UseField, "Mehrfamilienhaus (6 WE)", "apartment block"},
		{building.UseField, "Kindertagesstätte", "nursery"},
		{building.UseField, "SEMI DETACHED", "semi-detached house"},
		{building.UseField, "rijtjeshuis", "terraced house"},
		{building.UseField, "äldreboende", "care home"},
		{building.UseField, "Prison/Incarceration", ""},
		{building.UseField, "", ""},
		{building.VentilationField, "mechanical ventilation with heat recovery", "balanced with heat recovery"},
		{building.VentilationField, "mechanical extract", "extract fan"},
		{building.VentilationField, "FTX", "balanced with heat recovery"},
		{building.VentilationField, "F", "extract fan"},
		{building.VentilationField, "Fensterlüftung", "natural"},
		{building.VentilationField, "VMC hygroréglable", "demand-controlled extract"},
		{building.VentilationField, "självdrag", "passive stack"},
		{building.WallConstruction, "Vollziegel 36,5 cm", "solid brick"},
		{building.WallConstruction, "spouwmuur geïsoleerd", "insulated cavity brick"},
		{building.WallConstruction, "brick and stone", ""},
		{building.RoofType, "Flachdach", "flat"},
		{building.FloorType, "unbeheizter Keller", "unheated cellar"},
		{building.Glazing, "3-fach", "triple"},
		{building.Glazing, "HR++ glas", "double coated"},
		{building.HeatingSystem, "Gas-Brennwert", "condensing boiler"},
		{building.CarrierField, "Erdgas", "gas"},
		{building.ExposureField, "frei", "exposed"},
		{building.AttachmentField, "Reihenmittelhaus", "two sides shared"},
		{building.UseField, "house", "detached house"},
		{building.UseField, "Opera house", "hall"},
		{building.UseField, "Gate house", ""},
		{building.VentilationField, "mech. supply and extract with HR", "balanced with heat recovery"},
		{building.VentilationField, "AHU with thermal wheel", "balanced with heat recovery"},
		{building.VentilationField, "AHU without heat recovery", "balanced"},
		{building.VentilationField, "RLT ohne WRG", "balanced"},
		{building.VentilationField, "VMC DF", "balanced with heat recovery"},
		{building.VentilationField, "ohne", "natural"},
		{building.WallConstruction, "zweischaliges Mauerwerk mit Kerndämmung", "insulated cavity brick"},
		{building.WallConstruction, "cavity wall, not insulated", "cavity brick"},
		{building.WallConstruction, "uninsulated cavity", "cavity brick"},
		{building.FloorArea, "natural", ""},
	} {
		got, ok := Find(tc.field, tc.text)
		if got != tc.want || ok != (tc.want != "") {
			t.Errorf("%s %q: %q, want %q", tc.field, tc.text, got, tc.want)
		}
	}
}

func TestListUsesOnlyCanonicalWords(t *testing.T) {
	rows, err := csv.NewReader(strings.NewReader(list)).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	languages := map[string]map[string]bool{}
	for i, r := range rows[1:] {
		f, ok := building.FieldByKey(r[0])
		if !ok {
			t.Fatalf("line %d: no field %q", i+2, r[0])
		}
		if _, ok := building.WordIndex(f, r[2]); !ok {
			t.Errorf("line %d: %q is no word of %s", i+2, r[2], f)
		}
		if languages[r[0]] == nil {
			languages[r[0]] = map[string]bool{}
		}
		languages[r[0]][r[1]] = true
	}
	for f, l := range languages {
		if len(l) != 8 {
			t.Errorf("%s is in %d languages, want 8", f, len(l))
		}
	}
	for i := range building.NumFields {
		for _, w := range building.Words(building.Field(i)) {
			if got, _ := Find(building.Field(i), w); got != w {
				t.Errorf("%s: the word %q itself is %q", building.Field(i), w, got)
			}
		}
	}
}

// Two writings that fold to the same must not mean different words.
func TestSynonymsDoNotContradict(t *testing.T) {
	rows, err := csv.NewReader(strings.NewReader(list)).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	for _, r := range rows[1:] {
		f, _ := building.FieldByKey(r[0])
		if got, _ := Find(f, r[3]); got != r[2] && strings.TrimFunc(r[3], func(r rune) bool { return r == '?' }) != "" {
			t.Errorf("%s %s: %q should be %q and is %q", r[0], r[1], r[3], r[2], got)
		}
	}
}

func TestNearest(t *testing.T) {
	for text, want := range map[string]string{"scool": "school", "Mehrfamilenhaus": "apartment block", "zzzzzz": ""} {
		if got := Nearest(building.UseField, text); got != want {
			t.Errorf("%q: %q, want %q", text, got, want)
		}
	}
}
