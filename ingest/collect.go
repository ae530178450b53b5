package ingest

import (
	"fmt"
	"sort"

	"kelvinrow/ingest/finding"
)

// perCheck is how many rows one check of one column lists one by one; beyond,
// the rows are counted. Rows set aside are all listed: their owners get them.
const perCheck = 100

// collector gathers the findings of a sheet.
type collector struct {
	file, sheet string
	list        []finding.Finding
	listed      map[string]int
	groups      map[string]*group
}

type group struct {
	finding finding.Finding
	rows    int
}

func newCollector(file, sheet string) *collector {
	return &collector{file: file, sheet: sheet, listed: map[string]int{}, groups: map[string]*group{}}
}

// add lists a finding of a row, or counts it when there are many of its kind.
func (c *collector) add(f finding.Finding) {
	f.File, f.Sheet = c.file, c.sheet
	if f.Severity != finding.Error && f.Check != finding.DuplicateFirst && f.Row > 0 {
		k := f.Check + "\x00" + f.Column
		c.listed[k]++
		if c.listed[k] > perCheck {
			more := f
			more.Building, more.Raw = "", ""
			more.Text = "and so on, as in the rows before"
			c.group("more\x00"+k, more)
			return
		}
	}
	c.list = append(c.list, f)
}

// group keeps the first finding of a key and counts the rows of the rest.
func (c *collector) group(key string, f finding.Finding) {
	if g := c.groups[key]; g != nil {
		g.rows++
		return
	}
	f.File, f.Sheet = c.file, c.sheet
	c.groups[key] = &group{f, 1}
}

// all returns the findings in order of place.
func (c *collector) all() []finding.Finding {
	keys := make([]string, 0, len(c.groups))
	for k := range c.groups {
		keys = append(keys, k)
	}
	sort.Strings(keys)
	for _, k := range keys {
		g := c.groups[k]
		if g.rows > 1 {
			g.finding.Text += fmt.Sprintf(" (in %d rows, the first of them here)", g.rows)
			g.finding.Building = ""
		}
		c.list = append(c.list, g.finding)
	}
	finding.Sort(c.list)
	return c.list
}
