package archetype

import (
	"math/bits"

	"kelvinrow/estimate/building"
)

// compareSpecificity returns 1 where a is the more specific rule, -1 where b
// is, 0 where neither is. In this order:
//
//  1. The number of filled match columns among use, attachment, years (either
//     end), construction and region: more is more specific.
//  2. Where both fill the same columns, the use: a single use before "house",
//     that before "housing" or "other".
//  3. Then the years: a span that lies within the other's and is shorter.
//
// Two rules that these do not tell apart, that can both match a building and
// that give different values contradict each other: Validate names both. Where
// they give the same value the one with the lower ID answers.
func compareSpecificity(a, b *Rule) int {
	ca, cb := filledColumns(a), filledColumns(b)
	if d := bits.OnesCount8(ca) - bits.OnesCount8(cb); d != 0 {
		return sign(d)
	}
	if ca != cb {
		return 0
	}
	if d := useRank(a.Use) - useRank(b.Use); d != 0 {
		return sign(d)
	}
	af, at := a.years()
	bf, bt := b.years()
	switch {
	case af == bf && at == bt:
		return 0
	case af >= bf && at <= bt:
		return 1
	case bf >= af && bt <= at:
		return -1
	}
	return 0
}

func sign(d int) int {
	switch {
	case d > 0:
		return 1
	case d < 0:
		return -1
	}
	return 0
}

// filledColumns has a bit for every match column that is filled.
func filledColumns(r *Rule) (columns uint8) {
	for i, filled := range [...]bool{
		r.Use != "", r.Attachment != "", r.YearFrom != 0 || r.YearTo != 0, r.Construction != "", r.Region != "",
	} {
		if filled {
			columns |= 1 << i
		}
	}
	return columns
}

// Words for groups of uses.
const (
	groupHouse   = "house"
	groupHousing = "housing"
	groupOther   = "other"
)

func useRank(w string) int {
	switch w {
	case "":
		return 0
	case groupHousing, groupOther:
		return 1
	case groupHouse:
		return 2
	}
	return 3
}

// useMatches reports whether a rule's use column covers a use.
func useMatches(w string, u building.Use) bool {
	switch w {
	case "":
		return true
	case groupHouse:
		return u.IsHouse()
	case groupHousing:
		return u.IsHousing()
	case groupOther:
		return !u.IsHousing()
	}
	return w == u.String()
}

const openYear = 1 << 30

// years returns the span of years with open ends filled in.
func (r *Rule) years() (from, to int) {
	from, to = r.YearFrom, r.YearTo
	if from == 0 {
		from = -openYear
	}
	if to == 0 {
		to = openYear
	}
	return from, to
}

func (r *Rule) matches(k *Key) bool {
	from, to := r.years()
	return int(k.Use) < building.NumUses && int(k.Attachment) < building.NumAttachments &&
		useMatches(r.Use, k.Use) &&
		(r.Attachment == "" || r.Attachment == k.Attachment.String()) &&
		k.Year >= from && k.Year <= to &&
		(r.Construction == "" || r.Construction == k.Construction) &&
		(r.Region == "" || r.Region == k.Region)
}

// better reports whether a answers rather than b: the more specific one, on a
// tie the one with the lower ID, so that the order of rows does not matter.
func better(a, b *Rule) bool {
	if c := compareSpecificity(a, b); c != 0 {
		return c > 0
	}
	return a.ID < b.ID
}
