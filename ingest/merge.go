package ingest

import (
	"cmp"
	"slices"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/sheet"
)

// span is a merged range that runs over several rows, and what it shows.
type span struct {
	sheet.Merge
	cell sheet.Cell
}

// maxSpans bounds the ranges open at one row; ranges that do not overlap, as
// the format demands, are no more than columns.
const maxSpans = 4096

// spread fills cells that are merged with one above. A number is not spread:
// it may be the sum of what the rows share.
func (r *rowReader) spread(in *sheet.Row) {
	if r.upright == nil && len(r.merges) > 0 {
		r.upright = make([]sheet.Merge, 0, len(r.merges))
		for _, m := range r.merges {
			if m.FirstRow < m.LastRow {
				r.upright = append(r.upright, m)
			}
		}
		slices.SortStableFunc(r.upright, func(a, b sheet.Merge) int { return cmp.Compare(a.FirstRow, b.FirstRow) })
	}
	r.open = slices.DeleteFunc(r.open, func(s span) bool { return s.LastRow < in.Number })
	for _, s := range r.open {
		if s.cell.Blank() || s.FirstCol == r.id.Index || !in.Cell(s.FirstCol).Blank() || r.numeric(s.FirstCol) {
			continue
		}
		for len(in.Cells) <= s.FirstCol {
			in.Cells = append(in.Cells, sheet.Cell{})
		}
		in.Cells[s.FirstCol] = s.cell
	}
	for ; r.begun < len(r.upright) && r.upright[r.begun].FirstRow <= in.Number; r.begun++ {
		if m := r.upright[r.begun]; m.FirstRow == in.Number && len(r.open) < maxSpans {
			r.open = append(r.open, span{m, in.Cell(m.FirstCol)})
		}
	}
}

// numeric reports whether the column holds numbers, or is not read at all.
func (r *rowReader) numeric(column int) bool {
	for _, fr := range r.fields {
		for _, k := range fr.columns {
			if k.Index == column {
				return fr.field.Info().Type == building.Number
			}
		}
	}
	return true
}
