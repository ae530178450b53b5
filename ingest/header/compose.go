package header

import (
	_ "embed"
	"encoding/csv"
	"math/bits"
	"sort"
	"strings"
	"unicode/utf8"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/cell"
)

//go:embed parts.csv
var partList string

// composedRank is that of a header put together from known parts: behind every
// synonym as a whole, before one found inside a longer header.
const composedRank = 8

// part is one word of which headers are made, folded.
type part struct {
	folded string
	bit    partSet
}

// partSet holds which parts a header is made of.
type partSet uint32

// parts by their first byte, longest first.
var parts = map[byte][]part{}

var partBits = map[string]partSet{}

var envelope partSet // wall, roof, lowest floor, window

// composed lists what several parts say together. The first that fits counts.
var composed []composition

type composition struct {
	all    partSet // these must be there
	only   partSet // and none beside these
	entry  entry
	energy bool // needs a unit of energy
	after  int  // added to the rank
}

func init() {
	for i, k := range strings.Fields("wall roof ground floor window door year renewed uvalue area type thing place number heat gas oil district use recovery efficiency neutral") {
		partBits[k] = 1 << i
	}
	envelope = partBits["wall"] | partBits["roof"] | partBits["ground"] | partBits["window"]
	rows, err := csv.NewReader(strings.NewReader(partList)).ReadAll()
	if err != nil {
		panic("the embedded list of parts: " + err.Error()) // a slip of ours, seen by every test
	}
	for _, r := range rows[1:] {
		bit, ok := partBits[r[0]]
		if f := cell.Fold(r[2]); ok && f != "" {
			parts[f[0]] = append(parts[f[0]], part{f, bit})
		} else {
			panic("the embedded list of parts: " + strings.Join(r, ","))
		}
	}
	for _, p := range parts {
		sort.SliceStable(p, func(i, j int) bool { return len(p[i].folded) > len(p[j].folded) })
	}
	set := func(names string) (s partSet) {
		for _, n := range strings.Fields(names) {
			s |= partBits[n]
		}
		return s
	}
	add := func(f building.Field, sense, all, may string) *composition {
		composed = append(composed, composition{all: set(all), only: set(all + " " + may + " neutral"), entry: entry{key: f.Key(), sense: sense}})
		return &composed[len(composed)-1]
	}
	for _, e := range []struct {
		parts                string
		u, area, year, words building.Field
	}{
		{"wall", building.WallU, building.WallArea, building.YearWall, building.WallConstruction},
		{"roof", building.RoofU, building.RoofArea, building.YearRoof, building.RoofType},
		{"ground", building.FloorU, building.GroundFloorArea, building.YearFloor, building.FloorType},
		{"window", building.WindowU, building.WindowArea, building.YearWindows, building.Glazing},
	} {
		add(e.u, "", e.parts+" uvalue", "")
		add(e.area, "", e.parts+" area", "")
		add(e.year, "", e.parts+" year", "renewed")
		add(e.year, "", e.parts+" renewed", "")
		add(e.words, "", e.parts+" type", "")
	}
	// "Floor" alone may be a storey: it is the lowest one only beside what a
	// storey does not have.
	add(building.FloorU, "", "floor uvalue", "")
	add(building.YearFloor, "", "floor renewed", "year")
	add(building.DoorArea, "", "door area", "")
	add(building.MeteredHeat, "district heat", "district use", "heat")
	add(building.MeteredHeat, "gas", "gas use", "heat")
	add(building.MeteredHeat, "oil", "oil use", "heat")
	add(building.MeteredHeat, "", "heat use", "")
	for _, e := range [][2]string{{"district heat", "district"}, {"gas", "gas"}, {"oil", "oil"}} {
		add(building.MeteredHeat, e[0], e[1], "heat").energy = true
	}
	add(building.HeatRecovery, "", "recovery efficiency", "heat")
	for i, p := range []string{"thing", "place"} {
		composed = append(composed, composition{all: set(p + " number"), only: set(p + " number neutral"), entry: entry{key: IDKey, sense: "second"}, after: i})
	}
}

// compose reads a folded header as known parts and nothing else.
func (h *parsed) compose(folded string, ev Evidence) (Candidate, bool) {
	steps := 0
	var found Candidate
	ok := h.segment(folded, 0, ev, &steps, &found)
	return found, ok
}

// maxSteps bounds the ways in which a header is tried to be divided.
const maxSteps = 2000

func (h *parsed) segment(rest string, have partSet, ev Evidence, steps *int, found *Candidate) bool {
	if *steps++; *steps > maxSteps {
		return false
	}
	rest = strings.TrimLeft(rest, " ")
	if rest == "" {
		return h.composition(have, ev, found)
	}
	for _, p := range parts[rest[0]] {
		after, ok := strings.CutPrefix(rest, p.folded)
		if !ok {
			continue
		}
		if utf8.RuneCountInString(p.folded) < 3 && after != "" && after[0] != ' ' {
			continue // two letters are found in too many words
		}
		if h.segment(after, have|p.bit, ev, steps, found) {
			return true
		}
		// Compounds join with a letter or two: "Fassade-n-dämmung".
		for _, link := range []string{"s", "n", "en", "es", "e", "er"} {
			if joined, ok := strings.CutPrefix(after, link); ok && joined != "" && joined[0] != ' ' && h.segment(joined, have|p.bit, ev, steps, found) {
				return true
			}
		}
	}
	return false
}

func (h *parsed) composition(have partSet, ev Evidence, found *Candidate) bool {
	for i := range composed {
		c := &composed[i]
		if have&c.all != c.all || have&^c.only != 0 || c.energy && h.unit.Base != building.MeteredHeat.Info().Unit && h.unit.Name != "m3" {
			continue
		}
		f, ok := building.FieldByKey(c.entry.key)
		// "Roof insulated" may as well head yes and no.
		if ok && f.Info().Type == building.Year && have&partBits["year"] == 0 && ev.Filled > 1 && (ev.Years+ev.Dates)*10 < (ev.Filled-1)*3 {
			continue
		}
		if k, ok := h.candidate(c.entry, composedRank+c.after, ev); ok {
			*found = k
			return true
		}
	}
	return false
}

// mixed reports whether the header names two parts of the envelope: their sum
// is neither.
func (h *parsed) mixed() bool {
	var have partSet
	for _, w := range strings.Fields(h.fold) {
		for _, p := range parts[w[0]] {
			if p.folded == w {
				have |= p.bit & envelope
			}
		}
	}
	return bits.OnesCount32(uint32(have)) > 1
}
