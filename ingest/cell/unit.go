package cell

import (
	"regexp"
	"strings"
)

// Unit is a unit of measure: Factor times a value in it is the value in Base.
type Unit struct {
	Name   string
	Base   string // as building.Info.Unit has it
	Factor float64
	Note   string // what the conversion takes for granted
}

// Fits reports whether u measures what base measures.
func (u Unit) Fits(base string) bool { return u.Base == base && base != "" }

// Fuels by their lower heating value, rounded as supply contracts state it for
// a first look: high-calorific natural gas 10 kWh/m3, heating oil 10 kWh/l.
const (
	gasKWhPerM3 = 10
	oilKWhPerL  = 10
)

// The factors are exact by definition (international foot, thermochemical unit
// of the International Table for Btu) and rounded to ten digits.
var units = []struct {
	Unit
	written string // folded: lower case, no spaces, "/" kept
}{
	{Unit{"m2", "m2", 1, ""}, "m2 qm sqm sq.m sq.m. sqmetres squaremetres squaremeters squaremetre quadratmeter kvm mq m.kw mtrs2 metres2"},
	{Unit{"ft2", "m2", 0.09290304, ""}, "ft2 sqft sq.ft sq.ft. sf squarefeet squarefoot sqfeet feet2 sq.feet"},
	{Unit{"m3", "m3", 1, ""}, "m3 cbm cum cu.m cubicmetres cubicmeters kubikmeter mc kbm"},
	{Unit{"ft3", "m3", 0.028316846592, ""}, "ft3 cuft cu.ft cu.ft. cf cubicfeet"},
	{Unit{"m", "m", 1, ""}, "m metre metres meter meters mtr"},
	{Unit{"cm", "m", 0.01, ""}, "cm"},
	{Unit{"mm", "m", 0.001, ""}, "mm"},
	{Unit{"ft", "m", 0.3048, ""}, "ft feet foot"},
	{Unit{"kWh", "kWh", 1, ""}, "kwh"},
	{Unit{"MWh", "kWh", 1e3, ""}, "mwh"},
	{Unit{"GWh", "kWh", 1e6, ""}, "gwh"},
	{Unit{"MJ", "kWh", 1 / 3.6, ""}, "mj"},
	{Unit{"GJ", "kWh", 1e3 / 3.6, ""}, "gj"},
	{Unit{"kBtu", "kWh", 0.2930710702, ""}, "kbtu"},
	{Unit{"MMBtu", "kWh", 293.0710702, ""}, "mmbtu mbtu"},
	{Unit{"therm", "kWh", 29.30710702, ""}, "therm therms thm"},
	{Unit{"m3 gas", "kWh", gasKWhPerM3, "cubic metres of gas are taken as 10 kWh each"}, "m3gas m3gaz m3erdgas nm3 sm3"},
	{Unit{"l oil", "kWh", oilKWhPerL, "litres of oil are taken as 10 kWh each"}, "l litres liter litre liters loil literöl literol litresoil literolja"},
	{Unit{"m3/h", "m3/h", 1, ""}, "m3/h m3/hr m3/hour m3h cmh m3/std m3/t m3/u m3/uur m3/time"},
	{Unit{"m3/s", "m3/h", 3600, ""}, "m3/s"},
	{Unit{"l/s", "m3/h", 3.6, ""}, "l/s litres/s l/sec ls"},
	{Unit{"cfm", "m3/h", 1.699010796, ""}, "cfm ft3/min"},
	{Unit{"W/(m2K)", "W/(m2K)", 1, ""}, "w/m2k w/m2*k w/m2.k w/k.m2 w/km2 wm-2k-1 w/m2/k w/m2c"},
	{Unit{"Btu/(h ft2 F)", "W/(m2K)", 5.678263341, ""}, "btu/hft2f btu/h.ft2.f btu/h·ft2·f btu/hrft2f"},
	{Unit{"%", "share", 0.01, ""}, "% percent prozent pct procent pourcent porcentaje"},
	{Unit{"share", "share", 1, ""}, "share fraction 0-1 0..1"},
	{Unit{"W/(m3/h)", "W/(m3/h)", 1, ""}, "w/m3/h wh/m3 w/m3h"},
	{Unit{"W/(l/s)", "W/(m3/h)", 1 / 3.6, ""}, "w/l/s w/ls"},
	{Unit{"kW/(m3/s)", "W/(m3/h)", 1 / 3.6, ""}, "kw/m3/s kw/m3s"},
	{Unit{"1/h", "1/h", 1, ""}, "1/h h-1 /h ach h^-1 1/hr ach50 volh-1 vol/h"},
	{Unit{"m3/(h m2)", "m3/(h m2)", 1, ""}, "m3/hm2 m3/h.m2 m3/h/m2 m3/m2h m3/m2.h m3/m2/h m3/h*m2"},
	{Unit{"K d", "K d", 1, ""}, "kd k.d hdd gtz degreedays °cd cd dju"},
}

var unitByWriting = func() map[string]Unit {
	m := map[string]Unit{}
	for _, u := range units {
		for _, w := range strings.Fields(u.written) {
			m[w] = u.Unit
		}
	}
	return m
}()

var unitLetters = strings.NewReplacer("²", "2", "³", "3", "^2", "2", "^3", "3", "⁻¹", "-1", "⋅", ".", "·", ".", "∙", ".",
	" per ", "/", " pro ", "/", " par ", "/", " ", "", "\u00a0", "", "(", "", ")", "", "[", "", "]", "")

// ParseUnit reads a unit as people write it. A trailing "per year" is dropped:
// what is counted by the year here is energy, which has no other measure.
func ParseUnit(s string) (Unit, bool) {
	s = unitLetters.Replace(strings.ToLower(strings.TrimSpace(s)))
	s = strings.Trim(s, ",;: ")
	for _, at := range []string{"@50pa", "at50pa", "bei50pa", "à50pa", "bij50pa", "vid50pa", "ved50pa", "a50pa"} {
		s = strings.TrimSuffix(s, at)
	}
	if u, ok := unitByWriting[s]; ok {
		return u, true
	}
	for _, year := range []string{"/a", "/yr", "/year", "/jahr", "/an", "/jaar", "/år", "/ar", "/ano", "/año", "p.a.", "p.a", "pa", "/y"} {
		if rest, ok := strings.CutSuffix(s, year); ok {
			u, ok := unitByWriting[rest]
			return u, ok && u.Base == "kWh"
		}
	}
	return Unit{}, false
}

// reRatio matches what is counted by something else, such as kWh/m2 or €/m².
var reRatio = regexp.MustCompile(`([\p{L}€$£%][\p{L}\d²³.]*)\s*(?:/| per | pro | par )\s*\(?\s*([\p{L}][\p{L}\d²³]*)`)

// ForeignUnit reports whether s names a quantity by a unit of measure that
// ParseUnit does not know: "kWh/m2" is no energy, nor is "€/m²" an area.
func ForeignUnit(s string) bool {
	for _, m := range reRatio.FindAllStringSubmatch(strings.ToLower(s), -1) {
		_, over := ParseUnit(m[1])
		_, under := ParseUnit(m[2])
		if area, ok := strings.CutSuffix(unitLetters.Replace(m[2]), "a"); !under && ok {
			_, under = ParseUnit(area) // kWh/m²a
		}
		if under && m[2] != "m" || over && !perYear[m[2]] && len(m[1]) > 1 {
			return true
		}
	}
	return false
}

var perYear = map[string]bool{"a": true, "yr": true, "year": true, "jahr": true, "an": true, "jaar": true, "år": true, "ar": true, "ano": true, "año": true, "y": true}

// UnitNamed returns the unit that Unit.Name names.
func UnitNamed(name string) (Unit, bool) {
	for _, u := range units {
		if u.Name == name {
			return u.Unit, true
		}
	}
	return Unit{}, false
}
