package workbook

import (
	"fmt"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
)

// Every list is a real table whose columns are called as its header cells.
func TestTables(t *testing.T) {
	t.Parallel()
	o := open(t, written(t, portfolio(t, 40)))
	tables := 0
	for part, content := range o.parts {
		if ok, _ := filepath.Match("xl/worksheets/_rels/*.rels", part); !ok {
			continue
		}
		m := regexp.MustCompile(`\.\./tables/(table[0-9]+\.xml)`).FindSubmatch(content)
		if m == nil {
			continue
		}
		tables++
		sheet := ""
		for s, p := range o.part {
			if filepath.Base(p)+".rels" == filepath.Base(part) {
				sheet = s
			}
		}
		var table struct {
			Ref     string `xml:"ref,attr"`
			Columns []struct {
				Name string `xml:"name,attr"`
			} `xml:"tableColumns>tableColumn"`
		}
		o.decode(t, "xl/tables/"+string(m[1]), &table)
		seen := map[string]bool{}
		for i, c := range table.Columns {
			if got := o.cells[sheet][cellName(i+1, listHead)]; got.value != c.Name || got.typ != "inlineStr" || seen[strings.ToLower(c.Name)] {
				t.Errorf("%s: table column %q, header cell %+v", sheet, c.Name, got)
			}
			seen[strings.ToLower(c.Name)] = true
		}
		if !strings.HasPrefix(table.Ref, "A"+itoa(listHead)+":") {
			t.Errorf("%s: table at %s", sheet, table.Ref)
		}
		if !strings.Contains(string(o.parts[o.part[sheet]]), `state="frozen"`) {
			t.Errorf("%s: nothing is frozen", sheet)
		}
	}
	if tables < 18 {
		t.Errorf("only %d tables", tables)
	}
}

// Charts stand on more than one cell, name their series by a cell, and draw
// cells that hold what they say.
func TestCharts(t *testing.T) {
	t.Parallel()
	o := open(t, written(t, portfolio(t, 40)))
	type anchor struct {
		Col    int `xml:"col"`
		ColOff int `xml:"colOff"`
		Row    int `xml:"row"`
		RowOff int `xml:"rowOff"`
	}
	var anchors struct {
		A []struct {
			From anchor `xml:"from"`
			To   anchor `xml:"to"`
			Text struct {
				Alt string `xml:"descr,attr"`
			} `xml:"graphicFrame>nvGraphicFramePr>cNvPr"`
		} `xml:"twoCellAnchor"`
	}
	// The programme's page is made first, with the curve.
	o.decode(t, "xl/drawings/drawing2.xml", &anchors)
	if len(anchors.A) != 3 {
		t.Fatalf("%d charts, want 3", len(anchors.A))
	}
	const cell = 96 * 9525 // an inch in the drawing's units: no cell there is larger
	for i, a := range anchors.A {
		if a.To.Col-a.From.Col < 4 || a.To.Row-a.From.Row < 8 || a.To.ColOff > cell || a.To.RowOff > cell {
			t.Errorf("chart %d stands from %+v to %+v", i+1, a.From, a.To)
		}
		if a.Text.Alt == "" {
			t.Errorf("chart %d has no text for those who cannot see it", i+1)
		}
	}
	var curve struct {
		X string `xml:"chart>plotArea>scatterChart>ser>xVal>strRef>f"`
		Y string `xml:"chart>plotArea>scatterChart>ser>yVal>numRef>f"`
	}
	o.decode(t, "xl/charts/chart1.xml", &curve)
	for _, ref := range []string{curve.X, curve.Y} {
		s, span := follow(ref)
		from, to, _ := strings.Cut(span, ":")
		if s != "Programme" || o.cells[s][from].value == "" || o.cells[s][to].value == "" {
			t.Errorf("the curve of budgets draws %q", ref)
		}
	}
	for n := 2; n <= 4; n++ {
		var c struct {
			Name       string `xml:"chart>plotArea>barChart>ser>tx>strRef>f"`
			Categories string `xml:"chart>plotArea>barChart>ser>cat>strRef>f"`
			Values     string `xml:"chart>plotArea>barChart>ser>val>numRef>f"`
		}
		o.decode(t, fmt.Sprintf("xl/charts/chart%d.xml", n), &c)
		if s, at := follow(c.Name); o.cells[s][at].value == "" {
			t.Errorf("chart %d is named by %q, which is empty", n, c.Name)
		}
		for _, ref := range []string{c.Categories, c.Values} {
			s, span := follow(ref)
			from, to, _ := strings.Cut(span, ":")
			first, last := atoi(strings.TrimLeft(from, "ABCDEFGHIJKL")), atoi(strings.TrimLeft(to, "ABCDEFGHIJKL"))
			if last-first < 8 {
				t.Errorf("chart %d draws %s", n, ref)
			}
			for row := first; row <= last; row++ {
				if v := o.cells[s][from[:1]+itoa(row)].value; v == "" {
					t.Errorf("chart %d draws %s, where row %d is empty", n, ref, row)
				}
			}
		}
	}
}
