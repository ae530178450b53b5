// Package caution holds the warnings that must stand beside a number, because
// acting on the number alone can harm people or buildings. The wording defers
// to local codes and licensed practice.
package caution

import "kelvinrow/estimate/result"

// The cautions. New ones go to the end: stored results carry the bits.
const (
	Air         result.Caution = 1 << iota // too little outdoor air before or after
	Combustion                             // open-flued appliances and extract fans
	InsideWall                             // moisture in inside-insulated walls
	Cavity                                 // cavity filling and driving rain
	Mould                                  // cold inside surfaces
	Fire                                   // combustible insulation on tall or occupied buildings
	Asbestos                               // asbestos, lead paint and other old materials
	Radon                                  // radon under sealed floors and in tighter buildings
	Overheating                            // summer overheating
	Protected                              // protected fabric
	Species                                // nesting birds and bats
	Attic                                  // moisture in cold attics
	HeatPump                               // supply temperature, noise, electrical connection
	Defaults                               // the number rests mostly on defaults
)

// Info is the wording of one caution.
type Info struct {
	Bit   result.Caution
	Short string // a few words, for a table cell
	Text  string // whole sentences, for the cautions page
}

var all = []Info{
	{Air, "too little outdoor air",
		"The outdoor air calculated for this building is below the least airflow its use needs. Tightening a building without providing ventilation harms the people in it. Provide the ventilation named beside the measure, designed and commissioned to the local code, before or together with the tightening."},
	{Combustion, "check combustion air",
		"Extract fans and a tighter envelope can draw flue gas, with carbon monoxide, into rooms with open-flued boilers, stoves or gas heaters. Have every such appliance and its combustion air checked by a licensed heating or chimney engineer before the work and after it."},
	{InsideWall, "moisture behind inside insulation",
		"Inside insulation makes the old wall colder and wetter and can rot beam ends. A moisture design by a qualified person for this wall and its exposure to driving rain comes first; local codes decide."},
	{Cavity, "driving rain, state of the cavity",
		"Filling a cavity can lead rain to the inner leaf where the outer leaf is porous, cracked or exposed to driving rain. Have the cavity and wall ties inspected first; follow the local code for exposed sites."},
	{Mould, "cold surfaces, risk of mould",
		"The inside surface temperature factor of the wall is below 0.70 when calculated with an inside surface resistance of 0.25 m²K/W: mould is possible at ordinary indoor humidity, first in corners and behind furniture. Check thermal bridges, moisture and ventilation together (ISO 13788)."},
	{Fire, "fire safety of the facade",
		"Insulation and cladding can carry fire up a facade. The choice of material, fire barriers and fixing on tall or occupied buildings is a matter for the local fire code and a licensed fire engineer, whatever the saving."},
	{Asbestos, "asbestos and lead survey first",
		"Buildings of this age may hold asbestos, lead paint or other hazardous materials in facades, roofs, windows, floors and ducts. A survey by a licensed person comes before any work that disturbs them."},
	{Radon, "radon",
		"Sealing floors or tightening a building can raise radon indoors. Measure before and after where the ground or the local radon map gives reason, and follow local codes."},
	{Overheating, "summer overheating",
		"Insulation, tighter envelopes and larger solar gains can make rooms too hot in summer, which is dangerous to old and ill people. Check shading and night ventilation together with the measure; this program does not calculate summer temperatures."},
	{Protected, "protected building: consent needed",
		"The building is protected or its facade must stay as it is. Nothing may be changed without the consent of the heritage authority; gentle measures chosen with a conservation specialist come first."},
	{Species, "nesting birds and bats",
		"Roofs and facades may house protected birds or bats. Look before the work; local nature protection law decides."},
	{Attic, "moisture in the cold attic",
		"An insulated ceiling makes the attic above colder. Seal the ceiling against indoor air and keep the attic ventilated, or its timber may become mouldy."},
	{HeatPump, "supply temperature, power, noise",
		"The seasonal performance assumed for a heat pump needs low supply temperatures. Check radiators, the electrical connection, noise to neighbours and refrigerant rules with a licensed engineer."},
	{Defaults, "rests mostly on defaults",
		"More than half of the inputs behind this number are defaults by age and use, not data of this building. Survey before spending."},
}

// All returns every caution in a fixed order.
func All() []Info { return all }

// Shorts returns the short wordings of the cautions in c, in a fixed order.
func Shorts(c result.Caution) []string {
	return pick(c, func(i Info) string { return i.Short })
}

// Texts returns the full wordings of the cautions in c, in a fixed order.
func Texts(c result.Caution) []string {
	return pick(c, func(i Info) string { return i.Text })
}

func pick(c result.Caution, wording func(Info) string) []string {
	var out []string
	for _, i := range all {
		if c.Has(i.Bit) {
			out = append(out, wording(i))
		}
	}
	return out
}
