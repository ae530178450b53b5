package pipeline

import (
	"cmp"
	"context"
	"fmt"
	"slices"
	"strings"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/check"
	"kelvinrow/ingest/finding"
	"kelvinrow/sql/store"
)

// watch finds what shows only when a building is put together from all that
// counts: files that contradict each other, ids that are almost the same,
// buildings of which nothing gives a size.
type watch struct {
	list   []finding.Finding
	listed map[string]int // by what they are alike in
	more   map[string]int // place in list of the one that counts the rest
	ids    map[string]sighting
}

type sighting struct {
	id, place string
}

func newWatch() *watch {
	return &watch{listed: map[string]int{}, more: map[string]int{}, ids: map[string]sighting{}}
}

// perKind is how many findings that are alike are listed one by one.
const perKind = 100

// look takes one building; they must come in order of id.
func (w *watch) look(b *building.Building, records []building.Record) {
	if len(records) == 0 {
		return
	}
	if len(records) > 1 {
		for _, f := range check.Conflicts(b, records) {
			w.add(f, f.Check+"\x00"+f.Field+"\x00"+f.File+"\x00"+f.Severity.String())
		}
	}
	first := slices.MinFunc(records, func(a, b building.Record) int {
		return cmp.Or(cmp.Compare(a.Sheet.ID, b.Sheet.ID), cmp.Compare(a.Row, b.Row))
	})
	at := finding.Finding{File: first.Sheet.File, Sheet: first.Sheet.Name, Row: first.Row, Building: b.ID}
	sized := false
	for _, f := range []building.Field{building.FloorArea, building.Volume, building.GrossVolume} {
		_, ok := b.Get(f)
		sized = sized || ok
	}
	if !sized {
		f := at
		f.Severity, f.Check, f.Field = finding.Warning, "no-size-known", building.FloorArea.Key()
		f.Text, f.Fix = "no file gives a floor area or volume of building "+b.ID+", so it cannot be estimated", "load a file that does"
		w.add(f, f.Check+"\x00"+f.File)
	}
	bare := strings.ToLower(strings.Join(strings.Fields(b.ID), ""))
	if other, ok := w.ids[bare]; ok {
		f := at
		f.Severity, f.Check, f.Raw = finding.Note, "similar-id", b.ID
		f.Text = fmt.Sprintf("the id %q differs only in case or spaces from %q in %s; they count as two buildings", b.ID, other.id, other.place)
		f.Fix = "write them alike if they are one"
		w.add(f, f.Check+"\x00"+f.File)
		return
	}
	w.ids[bare] = sighting{b.ID, at.Place()}
}

func (w *watch) add(f finding.Finding, alike string) {
	w.listed[alike]++
	n := w.listed[alike]
	if n == perKind+1 {
		w.more[alike] = len(w.list)
		f.Building, f.Raw, f.Fix = "", "", ""
	}
	if n <= perKind+1 {
		w.list = append(w.list, f)
	}
	if n > perKind {
		w.list[w.more[alike]].Text = fmt.Sprintf("and so in %d buildings more, of which this is the first", n-perKind)
	}
}

// watched are the findings about the buildings that a load told of.
func watched(ctx context.Context, l *store.Load) ([]finding.Finding, error) {
	w := newWatch()
	err := l.ToWatch(ctx, func(b *building.Building, records []building.Record) error {
		w.look(b, records)
		return nil
	})
	return w.list, err
}

// needed are the columns that a sheet is missed for, unless the buildings have
// the value from elsewhere.
var needed = map[string][]building.Field{
	"no-use":         {building.UseField},
	"no-year":        {building.YearBuilt, building.YearWall, building.YearRoof, building.YearFloor, building.YearWindows},
	"no-ventilation": {building.VentilationField},
}

// unmissed takes out of a report's findings the missing columns of sheets whose
// buildings have the values from other sheets.
func unmissed(ctx context.Context, l *store.Load, sheets map[string]int64, fs []finding.Finding) ([]finding.Finding, error) {
	var out []finding.Finding
	for _, f := range fs {
		fields := needed[f.Check]
		id, ok := sheets[f.Sheet]
		if fields == nil || !ok {
			out = append(out, f)
			continue
		}
		lacking, all, err := l.Lacking(ctx, id, fields...)
		if err != nil {
			return nil, err
		}
		if lacking == 0 {
			continue
		}
		if lacking < all {
			f.Text += fmt.Sprintf(" (%d of its %d buildings have it from elsewhere)", all-lacking, all)
		}
		out = append(out, f)
	}
	return out, nil
}
