package pipeline

import (
	"context"
	"errors"
	"fmt"
	"io"
	"path/filepath"
	"regexp"
	"strings"

	"kelvinrow/estimate"
	"kelvinrow/estimate/archetype"
	"kelvinrow/estimate/building"
	"kelvinrow/estimate/climate"
	"kelvinrow/ingest/assumption"
	"kelvinrow/ingest/finding"
	"kelvinrow/ingest/word"
	"kelvinrow/sql/store"
)

// Refused is a workbook of assumptions that is not taken; the findings say why.
type Refused struct {
	File     string
	Findings []finding.Finding
}

func (r *Refused) Error() string {
	return fmt.Sprintf("%s: %d things are wrong; %v", r.File, len(r.Findings), assumption.ErrRefused)
}

func (r *Refused) Unwrap() error { return assumption.ErrRefused }

// StarterName is the name of the assumptions that come with the program.
const StarterName = "starter"

// whatIf marks assumptions with single numbers changed: they are not taken for the
// next run by themselves.
const whatIf = " with "

// inForce is what a command's estimates rest on.
type inForce struct {
	basis *estimate.Basis
	name  string
}

var versionPattern = regexp.MustCompile(`^[0-9a-f]{6,64}$`)

// inForce finds the assumptions: those named; else those of the portfolio's last
// run that were given to it; else the program's own.
func (s *Session) inForce(ctx context.Context) (*inForce, error) {
	set, name, err := s.assumptions(ctx)
	if err != nil {
		return nil, err
	}
	var problems []error
	for _, change := range s.Changes {
		problems = append(problems, set.Override(change))
	}
	if err := errors.Join(problems...); err != nil {
		return nil, err
	}
	if len(s.Changes) > 0 {
		set.Index()
		if err := set.Validate(); err != nil {
			return nil, fmt.Errorf("with %s: %w", strings.Join(s.Changes, ", "), err)
		}
		name += whatIf + strings.Join(s.Changes, ", ")
	}
	c, err := s.climate(set)
	if err != nil {
		return nil, err
	}
	b, err := estimate.NewBasis(set, c)
	if err != nil {
		return nil, err
	}
	return &inForce{basis: b, name: name}, nil
}

// assumptions returns a set of its own, with its climates.
func (s *Session) assumptions(ctx context.Context) (*archetype.Set, string, error) {
	switch named := s.Config.Assumptions; {
	case named == StarterName:
		return starterSet()
	case strings.EqualFold(filepath.Ext(named), ".xlsx"), strings.EqualFold(filepath.Ext(named), ".xlsm"):
		set, findings, err := assumption.Read(ctx, named)
		if errors.Is(err, assumption.ErrRefused) {
			return nil, "", &Refused{File: filepath.Base(named), Findings: findings}
		}
		return set, filepath.Base(named), err
	case versionPattern.MatchString(named):
		stored, err := s.Store.Assumptions(ctx, s.Portfolio, named)
		if err != nil {
			return nil, "", err
		}
		set, err := storedSet(stored.Content)
		return set, stored.Name, err
	case named != "":
		return nil, "", fmt.Errorf("assumptions %q: give a workbook that ends in .xlsx, the version of a run, or %q", named, StarterName)
	}
	last, err := s.lastGiven(ctx)
	if err != nil {
		return nil, "", err
	}
	if last == nil || last.Name == StarterName {
		set, name, err := starterSet()
		if err == nil && last != nil && s.Climate == "" {
			// The rules are those of this version of the program, the climate the one
			// that was chosen, which may be of a file.
			var kept *archetype.Set
			if kept, err = storedSet(last.Content); err == nil {
				set.Climates = append(kept.Climates[:1:1], set.Climates...)
			}
		}
		return set, name, err
	}
	set, err := storedSet(last.Content)
	return set, last.Name, err
}

// ownWords are the words of a set for those who read files.
func ownWords(set *archetype.Set) word.Own {
	own := word.Own{}
	for _, w := range set.Words {
		if f, ok := building.FieldByKey(w.Field); ok {
			own.Add(f, w.Written, w.Word)
		}
	}
	return own
}

// lastGiven returns the assumptions of the last run that was no what-if, nil
// without one.
func (s *Session) lastGiven(ctx context.Context) (*store.Assumptions, error) {
	runs, err := s.Store.Runs(ctx, s.Portfolio)
	if err != nil {
		return nil, err
	}
	for i := len(runs) - 1; i >= 0; i-- {
		a, err := s.Store.Assumptions(ctx, s.Portfolio, runs[i].Assumptions)
		switch {
		case errors.Is(err, store.ErrNoAssumptions): // stored before they were kept
			continue
		case err != nil:
			return nil, err
		case !strings.Contains(a.Name, whatIf):
			return a, nil
		}
	}
	return nil, nil
}

func starterSet() (*archetype.Set, string, error) {
	set, err := archetype.Starter()
	if err != nil {
		return nil, "", fmt.Errorf("starter rules: %w", err)
	}
	if set.Climates, err = climate.Starter(); err != nil {
		return nil, "", err
	}
	return set, StarterName, nil
}

// climate is the one named, or the first of the set.
func (s *Session) climate(set *archetype.Set) (*climate.Climate, error) {
	if climate.IsFile(s.Climate) {
		return climate.Load(s.Climate)
	}
	return climate.Find(s.Climate, set.Climates)
}

// everything is the set in force with all its climates, the one used first.
func (f *inForce) everything() *archetype.Set {
	set := *f.basis.Set
	set.Climates = []climate.Climate{*f.basis.Climate}
	for _, c := range f.basis.Set.Climates {
		if c.Name != f.basis.Climate.Name {
			set.Climates = append(set.Climates, c)
		}
	}
	return &set
}

// store makes what is stored of the assumptions. Of the program's own only the
// climate used is kept.
func (f *inForce) store() (*store.Assumptions, error) {
	set := f.everything()
	if f.name == StarterName {
		set.Climates = set.Climates[:1]
	}
	content, err := pack(set)
	if err != nil {
		return nil, fmt.Errorf("pack the assumptions: %w", err)
	}
	return &store.Assumptions{Version: f.basis.Hash(), Name: f.name, Content: content}, nil
}

// storedSet is the set of stored assumptions.
func storedSet(content []byte) (*archetype.Set, error) {
	set := &archetype.Set{}
	if err := unpack(content, set); err != nil {
		return nil, fmt.Errorf("stored assumptions: %w", err)
	}
	set.Index()
	return set, nil
}

// WriteAssumptions writes the assumptions in force as a workbook, and returns their
// name and version.
func (s *Session) WriteAssumptions(ctx context.Context, out string) (name, version string, err error) {
	f, err := s.inForce(ctx)
	if err != nil {
		return "", "", err
	}
	file, err := stage(out, func(w io.Writer) error { return assumption.Write(w, f.everything()) })
	defer func() { file.discard() }()
	if err != nil {
		return "", "", fmt.Errorf("write %s: %w", out, err)
	}
	return f.name, f.basis.Hash(), file.publish()
}
