package word

import (
	"regexp"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/cell"
)

// Energy carriers in words that also name a boiler, a stove or a supply, in
// eight languages, folded: "Ölkessel", "gaspanna", "chaudière fioul".
var reCarriers = []struct {
	word string
	re   *regexp.Regexp
}{
	{"oil", regexp.MustCompile(`\b((heiz)?ol((zentral)?heizung|kessel|brenner|feuerung|ofen|brennwert\w*)?|heizol\w*|\w*olie(fyr|kedel|brander|ketel|gestookt)?|fyrings?ol\w*|olje?(fyr|kjele?|panna|pannor|eldning|kamin)?|olja|eldningsolja|oil|kerosene|fioul|fuel( oil)?|mazout|gasoleo|gasoil|huisbrandolie|hbo|parafin)\b`)},
	{"gas", regexp.MustCompile(`\b(gas(ol)?|(erd|flussig|natur|stads|aard|bio|flaske|by|mains ?)?gas(zentral|etagen)?(heizung|kessel|therme|brennwert\w*|brenner|ofen|kombitherme|ketel|kachel|haard|gestookt|fyr|kedel|kjele?|panna|pannor|eldning|uppvarmning|oppvarming|fired)?|gass|naturgass|gasskjele?|gaz|gpl|glp|lpg|propane?|propano|butano?|hr(107)?( combi| combiketel| ketel)?|hr ?ketel|vr ketel|cr ketel)\b`)},
	{"wood", regexp.MustCompile(`\b(\w*pellets?\w*|holz\w*|hackschnitzel\w*|hackgut\w*|scheitholz\w*|stuckholz\w*|bois|granules?|plaquettes?|buches?|hout\w*|traflis\w*|trapill\w*|trafyr|pille(fyr|ovn)|braende\w*|brande(ovn|fyr)?|ved(ovn|ovner|spis|panna|eldning|kamin|fyring)?|flis(fyr\w*|eldning|panna)?|biobransle|biobrensel|biomass?e?a?|biomasse\w*|lena|astillas?|madera|wood\w*|logs?)\b`)},
	{"coal", regexp.MustCompile(`\b(\w*kohlen?(heizung|ofen|kessel)?|koks|briketts?|coal|anthracite|smokeless fuel|charbon|steenkool|kolen|kull|carbon)\b`)},
	{"district heat", regexp.MustCompile(`\b((fern|nah)(warme|heizung|warmenetz)\w*|chauffage urbain|chaleur urbaine|reseau( urbain| de chaleur( urbain)?)?|stads(verwarming|warmte)|warmtenet|blokverwarming|(fj[ae]rn|fjar|nar)varme\w*|district (heat(ing)?|steam)|heat network|steam network|communal heating|red de calor|calefaccion (urbana|de distrito))\b`)},
	{"electricity", regexp.MustCompile(`\b(elektr\w*|\w*strom|strom\w*|nachtspeicher\w*|electri\w*|elec|stroom|el(panna|pannor|radiator\w*|varme|kedel|kjele?|paneler?|patron|direkt\w*|element\w*)?|direktel|direkte el|direktverkande el|panelovner?|night storage|storage heaters?|acumulador\w*|convecteurs?|effet joule)\b`)},
}

var reHybrid = regexp.MustCompile(`hybrid|bivalent`)

// Carrier finds the energy carrier that a word for a heating system or a carrier
// tells, where it tells one and no other: "Gas-Brennwert" burns gas, a heat pump
// runs on electricity, a hybrid one on who knows what.
func Carrier(text string) (string, bool) {
	t := cell.Fold(text)
	if w := fields[building.CarrierField].exact[t]; w != "" {
		return w, true
	}
	if reHybrid.MatchString(t) {
		return "", false
	}
	found := ""
	for _, c := range reCarriers {
		if !c.re.MatchString(t) {
			continue
		}
		if found != "" {
			return "", false
		}
		found = c.word
	}
	if found == "" {
		found, _ = Find(building.CarrierField, text)
	}
	implied := ""
	if system, ok := Find(building.HeatingSystem, text); ok {
		switch system {
		case "heat pump", "electric heating":
			implied = "electricity"
		case "district heating":
			implied = "district heat"
		}
	}
	switch {
	case found == "":
		return implied, implied != ""
	case implied != "" && implied != found:
		return "", false
	}
	return found, true
}

// System finds the heating system that a word for an energy carrier tells beside
// the carrier: district heat comes by district heating, while electricity may
// run a heat pump or a heater, and gas a boiler or a stove.
func System(text string) (string, bool) {
	if c, ok := Carrier(text); ok && c == "district heat" {
		return "district heating", true
	}
	if fields[building.CarrierField].exact[cell.Fold(text)] != "" {
		return "", false // a carrier and no more
	}
	return Find(building.HeatingSystem, text)
}
