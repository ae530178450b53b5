package pipeline

import (
	"context"
	"crypto/sha256"
	"encoding/hex"
	"fmt"
	"io"
	"path/filepath"
	"time"

	"kelvinrow/estimate"
	"kelvinrow/estimate/building"
	"kelvinrow/estimate/result"
	"kelvinrow/ingest/finding"
	"kelvinrow/rank"
	"kelvinrow/rank/workbook"
)

// RankOptions says how to rank and where the workbook goes.
type RankOptions struct {
	Out       string
	Yardstick rank.Yardstick
	Top       int // rows per measure sheet; 0 is all
	Title     string
	Programme ProgrammeOptions
}

// RankOutcome is a finished run.
type RankOutcome struct {
	Run       *result.Run
	Buildings []result.Building
	Summary   rank.Summary
	Basis     *estimate.Basis
	Out       string

	Assumptions string // where they came from
	Programme   *workbook.Programme
}

// Rank estimates all buildings of the portfolio, ranks them, stores the run and
// writes the workbook. The run is stored only when the workbook is whole, and
// the workbook takes its place only when the run is stored: stopped at any time,
// a command leaves neither. Findings are those
// of the command itself; what earlier loads found comes from the store.
func (s *Session) Rank(ctx context.Context, opt RankOptions, findings []finding.Finding) (*RankOutcome, error) {
	rests, err := s.inForce(ctx)
	if err != nil {
		return nil, err
	}
	basis := rests.basis
	kept, err := rests.store()
	if err != nil {
		return nil, err
	}
	run := &result.Run{
		Portfolio:   s.Portfolio,
		Time:        time.Now().UTC().Truncate(time.Second),
		Version:     estimate.Version,
		Climate:     basis.Climate.Name,
		Assumptions: basis.Hash(),
		Yardstick:   string(opt.Yardstick),
		Measures:    basis.Keys(),
	}
	if run.Files, err = s.fileNames(ctx); err != nil {
		return nil, err
	}
	if len(opt.Programme.Budgets) > 0 {
		basis.Worth = worth(opt.Programme.By)
	}
	about := newWatch()
	buildings, inputs, err := s.estimate(ctx, basis, about)
	if err != nil {
		return nil, err
	}
	run.Inputs = inputs
	if len(buildings) == 0 {
		return nil, fmt.Errorf("portfolio %q has no buildings: load some first (kelvinrow load FILE...)", s.Portfolio)
	}
	run.Buildings = len(buildings)
	for i := range buildings {
		if buildings[i].Failed != "" {
			run.Failed++
		}
	}

	began := time.Now()
	summary := rank.Summarise(run, buildings)
	s.Timings.Rank = time.Since(began)

	var plan *workbook.Programme
	if len(opt.Programme.Budgets) > 0 {
		s.Progress.Stage("choosing the programme", 0)
		began = time.Now()
		if plan, err = decide(ctx, &opt.Programme, run.Measures, buildings, s.Workers); err != nil {
			return nil, fmt.Errorf("programme: %w", err)
		}
		s.Timings.Rank += time.Since(began)
	}

	stored, err := s.Store.Findings(ctx, s.Portfolio)
	if err != nil {
		return nil, err
	}

	in := &workbook.Input{
		Run: run, Buildings: buildings, Findings: union(append(stored, about.list...), findings), Set: basis.Set,
		Climate: basis.Climate, Top: opt.Top, Yardstick: opt.Yardstick, Title: opt.Title,
		Programme: plan, Origin: rests.name,
	}
	if run.Options, err = keep(in); err != nil {
		return nil, err
	}
	var file *staged
	defer func() { file.discard() }()
	began = time.Now()
	s.Progress.Stage("storing the run", 0)
	err = s.Store.SaveRun(ctx, run, kept, buildings, func() (err error) {
		s.Timings.Save = time.Since(began)
		s.Progress.Stage("writing "+filepath.Base(opt.Out), 0)
		began = time.Now()
		file, err = stage(opt.Out, func(w io.Writer) error { return workbook.Write(ctx, w, in) })
		s.Timings.Write = time.Since(began)
		return err
	})
	if err != nil {
		return nil, fmt.Errorf("store the run and write %s: %w", opt.Out, err)
	}
	if err := file.publish(); err != nil {
		return nil, fmt.Errorf("run %d is stored, but its workbook cannot take its place: %w", run.Number, err)
	}
	s.Progress.Done()
	return &RankOutcome{Run: run, Buildings: buildings, Summary: summary, Basis: basis, Assumptions: rests.name, Programme: plan, Out: opt.Out}, nil
}

// estimate evaluates all buildings, hashes what they are made from, and looks
// out for what should be said about them.
func (s *Session) estimate(ctx context.Context, basis *estimate.Basis, about *watch) (buildings []result.Building, inputs string, err error) {
	began := time.Now()
	n, err := s.Store.Count(ctx, s.Portfolio)
	if err != nil {
		return nil, "", err
	}
	s.Progress.Stage("estimating", n)
	h := sha256.New()
	source := func(yield func(*building.Building) error) error {
		return s.Store.Groups(ctx, s.Portfolio, func(b *building.Building, records []building.Record) error {
			about.look(b, records)
			b.WriteHash(h)
			return yield(b)
		})
	}
	buildings, err = basis.Estimate(ctx, s.Workers, source, s.Progress.Add)
	if err != nil {
		return nil, "", fmt.Errorf("estimate: %w", err)
	}
	s.Timings.Estimate = time.Since(began)
	return buildings, hex.EncodeToString(h.Sum(nil)), nil
}

func (s *Session) fileNames(ctx context.Context) ([]string, error) {
	sources, err := s.Store.Sources(ctx, s.Portfolio)
	if err != nil {
		return nil, err
	}
	names := make([]string, len(sources))
	for i := range sources {
		names[i] = sources[i].File
	}
	return names, nil
}

// union adds the findings of this command that the store does not have: those
// of files that could not be read at all.
func union(stored, own []finding.Finding) []finding.Finding {
	have := make(map[finding.Finding]bool, len(stored))
	for _, f := range stored {
		have[f] = true
	}
	for _, f := range own {
		if !have[f] {
			stored = append(stored, f)
		}
	}
	finding.Sort(stored)
	return stored
}

// Explain says everything about one building, on the assumptions and in the climate
// of the portfolio's last run unless others are named. It names the last run that
// rests on the same.
func (s *Session) Explain(ctx context.Context, id string) (*estimate.Explanation, error) {
	b, _, err := s.Store.Building(ctx, s.Portfolio, id)
	if err != nil {
		return nil, err
	}
	rests, err := s.inForce(ctx)
	if err != nil {
		return nil, err
	}
	e, err := rests.basis.Explain(b)
	if err != nil {
		return nil, fmt.Errorf("explain %s: %w", id, err)
	}
	e.Portfolio = s.Portfolio
	runs, err := s.Store.Runs(ctx, s.Portfolio)
	if err != nil {
		return nil, err
	}
	for i := range runs {
		if runs[i].Assumptions == e.Assumptions && runs[i].Version == e.Version {
			e.Run = runs[i].Number
		}
	}
	return e, nil
}
