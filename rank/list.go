package rank

import (
	"cmp"
	"slices"
	"strings"

	"kelvinrow/estimate/result"
)

// Row is one place in the ranking of a measure.
type Row struct {
	Rank  int // 1 is best
	Index int // into the buildings
}

// Counts reports whether a measure is ranked for a building: it could be
// estimated, the measure applies, and it saves energy.
func Counts(b *result.Building, measure int) bool {
	return b.Failed == "" && measure >= 0 && measure < len(b.Measures) &&
		b.Measures[measure].Applies && b.Measures[measure].SavingKWh > 0
}

// List ranks the buildings where a measure applies and saves energy, best
// first; ties go by building id in byte order.
func List(buildings []result.Building, measure int, y Yardstick) []Row {
	type entry struct {
		key   float64
		index int
	}
	by := y.find()
	n := 0
	for i := range buildings {
		if Counts(&buildings[i], measure) {
			n++
		}
	}
	entries := make([]entry, 0, n)
	for i := range buildings {
		if Counts(&buildings[i], measure) {
			entries = append(entries, entry{by.rounded(&buildings[i].Measures[measure]), i})
		}
	}
	slices.SortFunc(entries, func(a, b entry) int {
		return cmp.Or(
			cmp.Compare(b.key, a.key),
			strings.Compare(buildings[a.index].ID, buildings[b.index].ID),
			cmp.Compare(a.index, b.index),
		)
	})
	rows := make([]Row, len(entries))
	for i, e := range entries {
		rows[i] = Row{Rank: i + 1, Index: e.index}
	}
	return rows
}

// Best returns the measure that does most for one building, or -1 where none
// saves anything; of equals the first.
func Best(b *result.Building, y Yardstick) int {
	by, best, key := y.find(), -1, 0.0
	for m := range b.Measures {
		if !Counts(b, m) {
			continue
		}
		if k := by.rounded(&b.Measures[m]); best < 0 || k > key {
			best, key = m, k
		}
	}
	return best
}

// Lead is one of the buildings that matter most over all measures.
type Lead struct {
	Index   int   // into the buildings
	Measure int   // the measure that does most there
	Among   []int // measures whose first rows hold the building
}

// Leading returns the n buildings that stand among the first n for most
// measures; of equals first the one where a single measure does most, then by
// building id. lists holds the ranking of every measure. Savings of different
// measures on one building do not add up, so they are not added.
func Leading(buildings []result.Building, lists [][]Row, y Yardstick, n int) []Lead {
	among := map[int][]int{}
	var indexes []int
	for m, list := range lists {
		for _, row := range list[:min(n, len(list))] {
			if among[row.Index] == nil {
				indexes = append(indexes, row.Index)
			}
			among[row.Index] = append(among[row.Index], m)
		}
	}
	by := y.find()
	key := func(l *Lead) float64 { return by.rounded(&buildings[l.Index].Measures[l.Measure]) }
	leads := make([]Lead, len(indexes))
	for i, index := range indexes {
		leads[i] = Lead{Index: index, Measure: Best(&buildings[index], y), Among: among[index]}
	}
	slices.SortFunc(leads, func(a, b Lead) int {
		return cmp.Or(
			cmp.Compare(len(b.Among), len(a.Among)),
			cmp.Compare(key(&b), key(&a)),
			strings.Compare(buildings[a.Index].ID, buildings[b.Index].ID),
			cmp.Compare(a.Index, b.Index),
		)
	})
	return leads[:min(n, len(leads))]
}
