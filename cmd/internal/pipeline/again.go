package pipeline

import (
	"context"
	"errors"
	"fmt"
	"io"
	"path/filepath"

	"kelvinrow/estimate/result"
	"kelvinrow/ingest/finding"
	"kelvinrow/rank"
	"kelvinrow/rank/workbook"
)

// kept is what a run's workbook was written from beside its estimates and its
// assumptions.
type kept struct {
	Title     string
	Origin    string
	Top       int
	Findings  []finding.Finding
	Programme *workbook.Programme         `json:",omitempty"`
	Chosen    []string                    `json:",omitempty"` // ids, parallel to Programme.Chosen
	Packages  map[string][]result.Package `json:",omitempty"` // of the buildings chosen
}

// keep packs what a workbook is written from.
func keep(in *workbook.Input) ([]byte, error) {
	k := kept{Title: in.Title, Origin: in.Origin, Top: in.Top, Findings: in.Findings, Programme: in.Programme}
	if p := in.Programme; p != nil {
		k.Packages = map[string][]result.Package{}
		for _, c := range p.Chosen {
			b := &in.Buildings[c.Building]
			k.Chosen = append(k.Chosen, b.ID)
			k.Packages[b.ID] = b.Packages
		}
	}
	content, err := pack(&k)
	if err != nil {
		return nil, fmt.Errorf("pack the run: %w", err)
	}
	return content, nil
}

// errBare is said of a run that was stored before everything was kept, or of which
// something was erased.
var errBare = errors.New("what its workbook was written from is not stored, or a building was erased since")

// WriteRun writes the workbook of a stored run again, the same in every byte.
func (s *Session) WriteRun(ctx context.Context, number int, out string) (*result.Run, error) {
	run, buildings, err := s.Store.Run(ctx, s.Portfolio, number)
	if err != nil {
		return nil, err
	}
	if len(run.Options) == 0 {
		return nil, fmt.Errorf("run %d: %w", number, errBare)
	}
	var k kept
	if err := unpack(run.Options, &k); err != nil {
		return nil, fmt.Errorf("run %d: %w", number, err)
	}
	a, err := s.Store.Assumptions(ctx, s.Portfolio, run.Assumptions)
	if err != nil {
		return nil, fmt.Errorf("run %d: %w", number, err)
	}
	set, err := storedSet(a.Content)
	if err != nil {
		return nil, fmt.Errorf("run %d: %w", number, err)
	}
	in := &workbook.Input{
		Run: run, Buildings: buildings, Findings: k.Findings, Set: set, Climate: &set.Climates[0],
		Top: k.Top, Yardstick: rank.Yardstick(run.Yardstick), Title: k.Title, Programme: k.Programme, Origin: k.Origin,
	}
	if k.Programme != nil {
		index := make(map[string]int, len(buildings))
		for i := range buildings {
			index[buildings[i].ID] = i
		}
		for i, id := range k.Chosen {
			at, ok := index[id]
			if !ok {
				return nil, fmt.Errorf("run %d: building %s: %w", number, id, errBare)
			}
			k.Programme.Chosen[i].Building = at
			buildings[at].Packages = k.Packages[id]
		}
	}
	s.Progress.Stage("writing "+filepath.Base(out), 0)
	file, err := stage(out, func(w io.Writer) error { return workbook.Write(ctx, w, in) })
	defer func() { file.discard() }()
	if err != nil {
		return nil, fmt.Errorf("write %s: %w", out, err)
	}
	s.Progress.Done()
	return run, file.publish()
}
