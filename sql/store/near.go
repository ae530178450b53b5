package store

import (
	"cmp"
	"context"
	"slices"
	"strings"
	"unicode"

	"github.com/jackc/pgx/v5"
)

// manyNear is how many near matches are of use to somebody who mistyped an id.
const manyNear = 5

// nearIDs returns the ids most like the given one, most like first.
func nearIDs(ctx context.Context, tx pgx.Tx, portfolio, id string) ([]string, error) {
	want := bare(id)
	if len(want) == 0 {
		return nil, nil
	}
	rows, err := tx.Query(ctx, "select distinct building from kelvinrow.record where portfolio = $1"+counting+" order by building", portfolio)
	if err != nil {
		return nil, err
	}
	type match struct {
		id       string
		distance int
	}
	tolerated := max(1, len(want)/3) // a third of the letters wrong is another id
	var best []match
	var other string
	_, err = pgx.ForEachRow(rows, []any{&other}, func() error {
		d := distance(want, bare(other))
		if d > tolerated || len(best) == manyNear && d >= best[manyNear-1].distance {
			return nil
		}
		best = append(best, match{other, d})
		slices.SortStableFunc(best, func(a, b match) int { return cmp.Compare(a.distance, b.distance) })
		best = best[:min(len(best), manyNear)]
		return nil
	})
	near := make([]string, len(best))
	for i := range best {
		near[i] = best[i].id
	}
	return near, err
}

// bare is an id without what people leave out or write differently: case,
// separators, leading zeros of numbers.
func bare(id string) []rune {
	var out []rune
	inNumber := false
	for _, r := range strings.ToLower(id) {
		switch {
		case r == '0' && !inNumber:
			continue
		case unicode.IsDigit(r):
			inNumber = true
		case unicode.IsLetter(r):
			inNumber = false
		default:
			inNumber = false
			continue
		}
		out = append(out, r)
	}
	return out
}

// distance is the Levenshtein distance: how many letters to change, leave out or
// put in.
func distance(a, b []rune) int {
	row := make([]int, len(b)+1)
	for j := range row {
		row[j] = j
	}
	for i, ra := range a {
		diagonal := row[0]
		row[0] = i + 1
		for j, rb := range b {
			change := diagonal
			if ra != rb {
				change++
			}
			diagonal = row[j+1]
			row[j+1] = min(change, row[j]+1, row[j+1]+1)
		}
	}
	return row[len(b)]
}
