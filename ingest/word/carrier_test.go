package word

import (
	"testing"

	"kelvinrow/estimate/building"
)

func TestCarrierOfHeatingWords(t *testing.T) {
	for text, want := range map[string]string{
		"Gas": "gas", "gas boiler": "gas", "gas-fired boiler": "gas", "oil boiler": "oil", "heat pump": "electricity", "district heating": "district heat",
		"electric heating": "electricity", "storage heaters": "electricity", "pellet boiler": "wood", "wood stove": "wood", "coal stove": "coal",
		"Gasheizung": "gas", "Gas-Brennwertkessel": "gas", "Gasbrennwerttherme": "gas", "Gasetagenheizung": "gas", "Erdgas": "gas", "Öl": "oil", "Ölheizung": "oil", "Öl-Zentralheizung": "oil",
		"Heizölkessel": "oil", "Holzpellets": "wood", "Pelletheizung": "wood", "Hackschnitzelheizung": "wood", "Fernwärme": "district heat", "Nahwärme": "district heat",
		"Wärmepumpe": "electricity", "Nachtspeicherheizung": "electricity", "Stromdirektheizung": "electricity", "Kohleofen": "coal",
		"chaudière gaz": "gas", "chaudière gaz à condensation": "gas", "chaudière fioul": "oil", "pompe à chaleur": "electricity", "PAC air/eau": "electricity",
		"réseau de chaleur": "district heat", "chauffage urbain": "district heat", "convecteurs électriques": "electricity", "poêle à bois": "wood", "granulés": "wood",
		"HR-ketel": "gas", "cv-ketel op gas": "gas", "stadsverwarming": "district heat", "warmtepomp": "electricity", "houtkachel": "wood", "oliegestookt": "oil", "pelletkachel": "wood",
		"gaspanna": "gas", "oljepanna": "oil", "olja": "oil", "fjärrvärme": "district heat", "bergvärme": "electricity", "pelletspanna": "wood", "direktverkande el": "electricity", "elpanna": "electricity", "vedpanna": "wood",
		"naturgasfyr": "gas", "gasfyr": "gas", "oliefyr": "oil", "fjernvarme": "district heat", "varmepumpe": "electricity", "pillefyr": "wood", "elvarme": "electricity", "brændeovn": "wood",
		"oljefyr": "oil", "vedovn": "wood", "panelovner": "electricity", "gasskjel": "gas", "luft-vann varmepumpe": "electricity",
		"caldera de gas": "gas", "caldera de gas natural": "gas", "caldera de gasóleo": "oil", "bomba de calor": "electricity", "aerotermia": "electricity", "caldera de biomasa": "wood", "radiadores eléctricos": "electricity", "red de calor": "district heat",
		// These tell none, or more than one.
		"boiler": "", "Zentralheizung": "", "chauffage central": "", "Brennwert": "", "stoves": "", "Kachelofen": "", "Gas/Öl": "", "gas en hout": "", "hybride warmtepomp": "", "Gaswärmepumpe": "",
		"pompe à chaleur gaz": "", "caldera": "", "panna": "", "kedel": "", "": "", "?": "", "old": "", "Holländer": "",
	} {
		got, ok := Carrier(text)
		if got != want || ok != (want != "") {
			t.Errorf("%q: %q %v, want %q", text, got, ok, want)
		}
		if _, known := building.WordIndex(building.CarrierField, got); ok && !known {
			t.Errorf("%q gives %q, which is no carrier", text, got)
		}
	}
}

func TestSystemOfCarrierWords(t *testing.T) {
	for text, want := range map[string]string{
		"Fernwärme": "district heating", "fjärrvärme": "district heating", "réseau de chaleur": "district heating", "stadsverwarming": "district heating",
		"Gas-Brennwertkessel": "condensing boiler", "Wärmepumpe": "heat pump", "pompe à chaleur": "heat pump", "Ölheizung": "boiler", "gas boiler": "boiler",
		"Gas": "", "Öl": "", "el": "", "Strom": "", "pellets": "", "olie": "", "bois": "",
	} {
		if got, ok := System(text); got != want || ok != (want != "") {
			t.Errorf("%q: %q, want %q", text, got, want)
		}
	}
}

func TestVentilationSystemsByLetter(t *testing.T) {
	for text, want := range map[string]string{
		"F": "extract fan", "F-system": "extract fan", "S-system": "passive stack", "FT-system": "balanced", "FTX-system": "balanced with heat recovery", "FTX-aggregat": "balanced with heat recovery", "F-ventilation": "extract fan",
		"Abluftanlage": "extract fan",
	} {
		if got, _ := Find(building.VentilationField, text); got != want {
			t.Errorf("%q: %q, want %q", text, got, want)
		}
	}
}
