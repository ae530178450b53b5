package archetype

import (
	"slices"

	"kelvinrow/estimate/building"
)

// ruleIndex answers lookups without searching. It is never changed once made,
// so copies of a set may share it and any number of goroutines may read it.
type ruleIndex struct {
	byProperty map[Property]*propertyTable
	buildups   map[string]int
	materials  map[string]int
}

const useCells = building.NumUses * building.NumAttachments

// propertyTable holds the winning rule for every cell of region, construction,
// use and attachment by spans of years.
type propertyTable struct {
	regions       []string // beside "any"
	constructions []string // beside "any"
	cells         []cell   // [region][construction][use][attachment], "any" first
	spans         spans
}

// cell is a run of spans, by rising first year.
type cell struct{ first, end int32 }

// span says which rule answers from a year on; -1 is a hole.
type span struct{ from, rule int32 }

type spans []span

// hole returns the first years within the required ones that no rule answers.
// Year 0 stands for an unknown year and must be answered too.
func (s spans) hole() (from, to int, ok bool) {
	for i := range s {
		if s[i].rule >= 0 {
			continue
		}
		from, to = int(s[i].from), lastYear
		if i+1 < len(s) {
			to = int(s[i+1].from) - 1
		}
		if from <= 0 && to >= 0 {
			return max(from, 0), min(to, lastYear), true
		}
		if from, to = max(from, firstYear), min(to, lastYear); from <= to {
			return from, to, true
		}
	}
	return 0, 0, false
}

// Index makes lookups fast; it must be called after the tables were edited. It
// also fills in the conductivity of layers that name a material and state
// neither conductivity nor resistance.
func (s *Set) Index() {
	s.resolveLayers()
	idx := ruleIndex{
		byProperty: map[Property]*propertyTable{},
		buildups:   make(map[string]int, len(s.Buildups)),
		materials:  make(map[string]int, len(s.Materials)),
	}
	rows := map[Property][]int32{}
	for i := range s.Rules {
		p := s.Rules[i].Property
		rows[p] = append(rows[p], int32(i))
	}
	for p, r := range rows {
		idx.byProperty[p] = newPropertyTable(s.Rules, r)
	}
	for i := range s.Buildups {
		idx.buildups[s.Buildups[i].Name] = i
	}
	for i := range s.Materials {
		idx.materials[s.Materials[i].Name] = i
	}
	s.index = idx
}

func newPropertyTable(rules []Rule, rows []int32) *propertyTable {
	t := &propertyTable{}
	for _, i := range rows {
		if c := rules[i].Construction; c != "" && !slices.Contains(t.constructions, c) {
			t.constructions = append(t.constructions, c)
		}
		if r := rules[i].Region; r != "" && !slices.Contains(t.regions, r) {
			t.regions = append(t.regions, r)
		}
	}
	t.cells = make([]cell, 0, (len(t.regions)+1)*(len(t.constructions)+1)*useCells)
	var near, here []int32
	for ri := range len(t.regions) + 1 {
		for ci := range len(t.constructions) + 1 {
			near = near[:0]
			for _, i := range rows {
				if columnMatches(rules[i].Region, t.regions, ri) && columnMatches(rules[i].Construction, t.constructions, ci) {
					near = append(near, i)
				}
			}
			for c := range useCells {
				use, attachment := building.Use(c/building.NumAttachments), building.Attachment(c%building.NumAttachments)
				here = here[:0]
				for _, i := range near {
					if r := &rules[i]; useMatches(r.Use, use) && (r.Attachment == "" || r.Attachment == attachment.String()) {
						here = append(here, i)
					}
				}
				t.addCell(rules, here)
			}
		}
	}
	return t
}

// columnMatches reports whether a rule's word covers entry i of a column, 0
// being "none of the words".
func columnMatches(word string, words []string, i int) bool {
	return word == "" || i > 0 && word == words[i-1]
}

// addCell lays the rules that can answer in one cell along the years.
func (t *propertyTable) addCell(rules []Rule, rows []int32) {
	c := cell{first: int32(len(t.spans))}
	starts := make([]int, 1, 2*len(rows)+1)
	starts[0] = -openYear
	for _, i := range rows {
		from, to := rules[i].years()
		starts = append(starts, from)
		if to < openYear {
			starts = append(starts, to+1)
		}
	}
	slices.Sort(starts)
	for _, start := range slices.Compact(starts) {
		best := int32(-1)
		for _, i := range rows {
			from, to := rules[i].years()
			if start >= from && start <= to && (best < 0 || better(&rules[i], &rules[best])) {
				best = i
			}
		}
		if n := len(t.spans); n > int(c.first) && t.spans[n-1].rule == best {
			continue
		}
		t.spans = append(t.spans, span{from: int32(start), rule: best})
	}
	c.end = int32(len(t.spans))
	t.cells = append(t.cells, c)
}

// at returns the spans of years of one cell.
func (t *propertyTable) at(use building.Use, attachment building.Attachment, construction, region string) spans {
	ri, ci := 0, 0
	for i, r := range t.regions {
		if r == region {
			ri = i + 1
			break
		}
	}
	for i, c := range t.constructions {
		if c == construction {
			ci = i + 1
			break
		}
	}
	c := t.cells[(ri*(len(t.constructions)+1)+ci)*useCells+int(use)*building.NumAttachments+int(attachment)]
	return t.spans[c.first:c.end]
}

// Find returns the rule that answers for p: the most specific one that matches
// the key. Specificity is explained at compareSpecificity. An unknown
// construction or region, also "", matches only rules that leave it open. The
// rule is part of the set and must not be changed. Find may be called from any
// number of goroutines.
//
// A set without index is searched row by row.
func (s *Set) Find(p Property, k Key) (*Rule, bool) {
	if int(k.Use) >= building.NumUses || int(k.Attachment) >= building.NumAttachments {
		return nil, false
	}
	if s.index.byProperty == nil {
		return s.search(p, &k)
	}
	t := s.index.byProperty[p]
	if t == nil {
		return nil, false
	}
	spans := t.at(k.Use, k.Attachment, k.Construction, k.Region)
	for i := len(spans) - 1; i >= 0; i-- {
		if k.Year >= int(spans[i].from) {
			if r := spans[i].rule; r >= 0 {
				return &s.Rules[r], true
			}
			return nil, false
		}
	}
	return nil, false
}

// search is Find without index.
func (s *Set) search(p Property, k *Key) (*Rule, bool) {
	var best *Rule
	for i := range s.Rules {
		if r := &s.Rules[i]; r.Property == p && r.matches(k) && (best == nil || better(r, best)) {
			best = r
		}
	}
	return best, best != nil
}
