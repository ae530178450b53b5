package cell

import (
	"fmt"
	"regexp"
	"strconv"
	"strings"
)

// Storeys is what a cell says of the number of storeys.
type Storeys struct {
	Count float64
	Range bool // "3-4": the middle counts
	Attic bool // one is named and not counted
	Below bool // a cellar is named and not counted
}

func set(s string) map[string]bool {
	m := map[string]bool{}
	for _, w := range strings.Split(s, "|") {
		m[Fold(w)] = true
	}
	return m
}

var (
	groundWords = set("r|rdc|rc|rez de chaussée|rez|eg|e|erdgeschoss|parterre|g|gf|ground|ground floor|pb|planta baja|baja|bg|begane grond|bv|bottenvåning|st|stue|stueetage|stuen|1 etg")
	belowWords  = set("k|kg|ug|tg|ke|keller|kellergeschoss|untergeschoss|tiefgarage|cellar|basement|lower ground|ss|sous-sol|cave|kælder|kelder|källare|kjeller|sótano|souterrain|suterräng|tk|u")
	atticWords  = set("d|dg|da|dachgeschoss|ausgebautes dachgeschoss|ausgebautes dg|dg ausgebaut|dachausbau|attic|attica|attika|roof|loft|c|combles|combles aménagés|mansarde|a|zolder|kap|kapverdieping|vind|inredd vind|vindsvåning|tagetage|udnyttet tagetage|loftsetage|loftetasje|ático|buhardilla|bajo cubierta|m|staffelgeschoss|sg")
	upperWords  = set("og|obergeschoss|upper|étage|1er étage|verdieping|sal")

	reStoreyWord = regexp.MustCompile(`(?i)\b(storeys?|stories|floors?|levels?|geschossig\w*|geschosse?|vollgeschosse?|stockwerke?|etagen?|étages?|niveaux?|niv|bouwlagen|verdiepingen|verdieping|våningar|vån|plan|etager|etasjer|etg|plantas?|pisos?|alturas?|obergeschosse?|og|vg|upper)\b\.?`)
	reCounted    = regexp.MustCompile(`^(\d+(?:[.,]\d+)?)$`)
	reOrdinal    = regexp.MustCompile(`^\d{1,2}\. ?(og|obergeschoss|etage|stock)$`)
	reStoreySpan = regexp.MustCompile(`^(\d{1,2}(?:[.,]5)?|[ivx]+) ?(?:-|–|—|/|to|bis|à|a|tot|till|til|hasta|or|oder|ou|of|eller) ?(\d{1,2}(?:[.,]5)?|[ivx]+)$`)
	reAnd        = regexp.MustCompile(`(\S) og (\pL{3,})`) // "and" in the north, upper floors in German
	reJoin       = regexp.MustCompile(`\+|,(?:\s|$)|;|&|\b(?:and|und|et|en|och|y|plus|mit|with|avec|met|med|con|zzgl)\b`)
)

// maxStoreys is more than any roman numeral or sum in a register says.
const maxStoreys = 80

var romanStoreys = map[string]float64{"i": 1, "ii": 2, "iii": 3, "iv": 4, "v": 5, "vi": 6, "vii": 7, "viii": 8, "ix": 9, "x": 10, "xi": 11, "xii": 12}

// ParseStoreys reads numbers of storeys as planners write them: R+5 and EG+2 OG
// count the ground floor, II is two, cellars and attics are named beside and not
// counted, 3-4 is in between.
func ParseStoreys(s string) (Storeys, Status) {
	var out Storeys
	if IsAbsent(s) {
		return out, Absent
	}
	t := strings.ToLower(strings.Join(strings.Fields(s), " "))
	t = strings.NewReplacer(" ½", ".5", "½", ".5", " 1/2", ".5").Replace(t)
	if m := reStoreySpan.FindStringSubmatch(strings.TrimSpace(reStoreyWord.ReplaceAllString(t, ""))); m != nil {
		low, ok1 := storeyNumber(m[1])
		high, ok2 := storeyNumber(m[2])
		if !ok1 || !ok2 || low > high || high <= 0 || high > maxStoreys || strings.Contains(t, "/") && high-low > 3 {
			return out, Bad
		}
		out.Count, out.Range = (low+high)/2, low < high
		return out, OK
	}
	t = reAnd.ReplaceAllString(t, "$1 + $2")
	for _, part := range reJoin.Split(t, -1) {
		part = strings.Trim(part, " .()")
		if part == "" {
			continue
		}
		if err := out.add(part); err != nil {
			return Storeys{}, Bad
		}
	}
	if out.Count <= 0 || out.Count > maxStoreys {
		return Storeys{}, Bad
	}
	return out, OK
}

// add counts one part of a sum.
func (o *Storeys) add(part string) error {
	f := Fold(part)
	switch {
	case groundWords[f], upperWords[f], reOrdinal.MatchString(part):
		o.Count++
		return nil
	case atticWords[f]:
		o.Attic = true
		return nil
	case belowWords[f]:
		o.Below = true
		return nil
	}
	bare := strings.Trim(reStoreyWord.ReplaceAllString(splitLetters(part), ""), " .-")
	if n, ok := storeyNumber(bare); ok {
		o.Count += n
		return nil
	}
	// "2 kg", "1 DG": how many there are below or above does not matter.
	if _, what, ok := strings.Cut(splitLetters(part), " "); ok {
		switch w := Fold(what); {
		case belowWords[w]:
			o.Below = true
			return nil
		case atticWords[w]:
			o.Attic = true
			return nil
		}
	}
	return fmt.Errorf("%q is no storey", part)
}

// splitLetters parts "2og" into "2 og".
func splitLetters(s string) string {
	i := strings.IndexFunc(s, func(r rune) bool { return (r < '0' || r > '9') && r != '.' && r != ',' })
	if i <= 0 || s[i] == ' ' {
		return s
	}
	return s[:i] + " " + s[i:]
}

func storeyNumber(s string) (float64, bool) {
	if n, ok := romanStoreys[s]; ok {
		return n, true
	}
	if !reCounted.MatchString(s) {
		return 0, false
	}
	n, err := strconv.ParseFloat(strings.Replace(s, ",", ".", 1), 64)
	return n, err == nil && n <= maxStoreys
}
