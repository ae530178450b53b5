// Package workbook writes the ranked workbook: an opening page, all buildings,
// one ranked sheet per measure, what was wrong in the data, everything the
// numbers rest on, and the method with its cautions.
//
// Energy and ranks are values. Money follows by formulas from named cells on the
// sheet Assumptions; each formula carries the value it leads to. excelize makes
// the workbook and everything around the rows of a sheet; the rows themselves
// are appended as bytes while the file is compressed (see archive), which keeps
// memory bounded and is several times as fast as writing them cell by cell.
package workbook

import (
	"context"
	"fmt"
	"io"
	"time"

	"github.com/xuri/excelize/v2"

	"kelvinrow/estimate/archetype"
	"kelvinrow/estimate/climate"
	"kelvinrow/estimate/result"
	"kelvinrow/ingest/finding"
	"kelvinrow/rank"
)

const electricity = "electricity"

// Input is what a workbook is written from. It is only read.
type Input struct {
	Run       *result.Run
	Buildings []result.Building
	Findings  []finding.Finding
	Set       *archetype.Set
	Climate   *climate.Climate
	Origin    string // where Set came from
	Top       int    // rows per measure sheet; 0 is all
	Yardstick rank.Yardstick
	Title     string     // "" makes one of the portfolio's name
	Programme *Programme // nil without one
}

// book is a workbook being made.
type book struct {
	ctx   context.Context
	in    *Input
	f     *excelize.File
	st    *styles
	names namer // defined names and tables
	tabs  namer // sheet names
	title string
	terms *terms

	maxRows int // of a sheet
	pages   []*page

	summary rank.Summary
	lists   [][]rank.Row // per measure, all rows
	shown   []int        // per measure: rows on its sheets
	places  [][]int32    // per measure and building: rank, 0 where it has none
	index   map[string]int

	buildings spread   // where the buildings stand
	measures  []spread // where the rows of each measure stand
	// totalCell names the cell of the sheet Totals in the column with a key and
	// the row of a measure.
	totalCell func(key string, measure int) string
}

// spread is a list of rows on one or more sheets.
type spread struct {
	sheets []string
	per    int // rows on each sheet
	first  int // first row of a sheet
}

// at returns where the i-th row stands.
func (s *spread) at(i int) (sheet string, row int) {
	return s.sheets[i/s.per], s.first + i%s.per
}

// target is the i-th row as the target of a link.
func (s *spread) target(i int) string {
	sheet, row := s.at(i)
	return quoteSheet(sheet) + "!A" + itoa(row)
}

// Write writes the workbook. The same input gives the same bytes.
func Write(ctx context.Context, w io.Writer, in *Input) error { return write(ctx, w, in, maxRows) }

func write(ctx context.Context, w io.Writer, in *Input, maxRows int) (err error) {
	b := &book{ctx: ctx, in: in, f: excelize.NewFile(), names: namer{}, tabs: namer{}, maxRows: maxRows}
	defer func() {
		if e := b.f.Close(); err == nil {
			err = e
		}
	}()
	b.title = clean(in.Title)
	if b.title == "" {
		b.title = clean("Retrofit screening of portfolio " + in.Run.Portfolio)
	}
	if err := b.prepare(); err != nil {
		return fmt.Errorf("workbook: %w", err)
	}
	if err := b.make(); err != nil {
		return fmt.Errorf("workbook: %w", err)
	}
	a := &archive{ctx: ctx, w: w, time: in.Run.Time.UTC().Truncate(2 * time.Second), pages: map[string]*page{}}
	for _, pg := range b.pages {
		a.pages[pg.part] = pg
	}
	b.f.SetZipWriter(func(io.Writer) excelize.ZipWriter { return a })
	if _, err := b.f.WriteToBuffer(); err != nil {
		return fmt.Errorf("workbook: %w", err)
	}
	return nil
}

// prepare checks the input and makes the rankings.
func (b *book) prepare() (err error) {
	in := b.in
	if b.terms, err = newTerms(in.Set, in.Run.Measures, b.names); err != nil {
		return err
	}
	b.index = make(map[string]int, len(in.Buildings))
	for i := range in.Buildings {
		bl := &in.Buildings[i]
		b.index[bl.ID] = i
		if bl.Failed != "" {
			continue
		}
		if len(bl.Measures) != len(in.Run.Measures) {
			return fmt.Errorf("building %q has %d measures, the run has %d", bl.ID, len(bl.Measures), len(in.Run.Measures))
		}
		if b.terms.byWord[bl.Carrier] == nil {
			return missing("building "+bl.ID+": carriers table", bl.Carrier)
		}
		for m := range bl.Measures {
			if after := bl.Measures[m].CarrierAfter; bl.Measures[m].Applies && b.terms.byWord[after] == nil {
				return missing("building "+bl.ID+": carriers table", after)
			}
		}
	}
	b.summary = rank.Summarise(in.Run, in.Buildings)
	for m := range in.Run.Measures {
		if err := b.ctx.Err(); err != nil {
			return err
		}
		list := rank.List(in.Buildings, m, in.Yardstick)
		place := make([]int32, len(in.Buildings))
		for _, row := range list {
			place[row.Index] = int32(row.Rank)
		}
		shown := len(list)
		if in.Top > 0 {
			shown = min(shown, in.Top)
		}
		b.lists, b.shown, b.places = append(b.lists, list), append(b.shown, shown), append(b.places, place)
	}
	return nil
}

// make lays out all sheets. The names of sheets come first, because links and
// formulas point forward.
func (b *book) make() (err error) {
	if b.st, err = newStyles(b.f); err != nil {
		return err
	}
	overview, err := b.addPage(b.tabs.sheet("Overview"), "This page", accent)
	if err != nil {
		return err
	}
	for _, fixed := range []string{programmeSheet, chosenSheet, stairsSheet, totalsSheet, issuesSheet, assumptionsSheet, rulesSheet, buildupsSheet, materialsSheet, methodSheet} {
		b.tabs.take(fixed)
	}
	steps := []func() error{
		b.addBuildings, b.addProgramme, b.addMeasures, b.addTotals, b.addIssues,
		b.addAssumptions, b.addRules, b.addBuildups, b.addMaterials, b.addMethod,
		func() error { return b.fillOverview(overview) },
		b.properties,
	}
	for _, step := range steps {
		if err := b.ctx.Err(); err != nil {
			return err
		}
		if err := step(); err != nil {
			return err
		}
	}
	b.f.SetActiveSheet(0)
	return b.st.err
}

func (b *book) properties() error {
	at := b.in.Run.Time.UTC().Format(time.RFC3339)
	if err := b.f.SetDocProps(&excelize.DocProperties{
		Title: b.title, Creator: "kelvinrow " + b.in.Run.Version, LastModifiedBy: "kelvinrow",
		Description: fmt.Sprintf("Run %d of portfolio %s", b.in.Run.Number, clean(b.in.Run.Portfolio)),
		Created:     at, Modified: at,
	}); err != nil {
		return err
	}
	return b.f.SetAppProps(&excelize.AppProperties{Application: "kelvinrow"})
}

func missing(where, what string) error { return fmt.Errorf("%s: %q is missing", where, what) }

// currency is what money is counted in.
func (b *book) currency() string { return b.in.Set.Economics.Currency }
