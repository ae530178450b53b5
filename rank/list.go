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
	Among   []int // measures whose first n rows hold the building
}

// Leading returns the n buildings where a single measure does most, best first;
// ties go by building id. lists holds the ranking of every measure. Savings of
// different measures on one building do not add up, so they are not added.
func Leading(buildings []result.Building, lists [][]Row, y Yardstick, n int) []Lead {
	type entry struct {
		key            float64
		index, measure int
	}
	by := y.find()
	var entries []entry
	for i := range buildings {
		if m := Best(&buildings[i], y); m >= 0 {
			entries = append(entries, entry{by.rounded(&buildings[i].Measures[m]), i, m})
		}
	}
	slices.SortFunc(entries, func(a, b entry) int {
		return cmp.Or(
			cmp.Compare(b.key, a.key),
			strings.Compare(buildings[a.index].ID, buildings[b.index].ID),
			cmp.Compare(a.index, b.index),
		)
	})
	leads := make([]Lead, min(n, len(entries)))
	for i := range leads {
		leads[i] = Lead{Index: entries[i].index, Measure: entries[i].measure}
		for m, list := range lists {
			for _, row := range list[:min(n, len(list))] {
				if row.Index == leads[i].Index {
					leads[i].Among = append(leads[i].Among, m)
				}
			}
		}
	}
	return leads
}
