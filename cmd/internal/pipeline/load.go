package pipeline

import (
	"context"
	"crypto/sha256"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"time"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest"
	"kelvinrow/ingest/finding"
	"kelvinrow/ingest/header"
	"kelvinrow/ingest/mend"
	"kelvinrow/sql/store"
)

// LoadOptions says what to load.
type LoadOptions struct {
	Files   []string
	Columns string // mapping file; "" for recognition alone
	Kind    building.Kind
	MendDir string // where *-to-fix files go; "" is beside each source
}

// LoadOutcome is what a load did.
type LoadOutcome struct {
	Reports  []*ingest.Report
	Already  []string // files whose content was in the store before
	Findings []finding.Finding
	ToFix    []string // files written for the owners of rows set aside
	Rows     int
	Used     int
	SetAside int
}

// Faulty reports whether anything was set aside: a row, a sheet or a file.
func (o *LoadOutcome) Faulty() bool {
	for _, f := range o.Findings {
		if f.Severity == finding.Error {
			return true
		}
	}
	return o.SetAside > 0
}

// errAlready stops reading a file whose content is in the store.
var errAlready = errors.New("already loaded")

// Load reads files into the store. Either all of them are in afterwards or,
// when the load cannot go on, none; a file that cannot be read is a finding and
// leaves what the store had of it.
func (s *Session) Load(ctx context.Context, opt LoadOptions) (*LoadOutcome, error) {
	began := time.Now()
	defer func() { s.Timings.Read += time.Since(began) }()
	read, err := s.readOptions(opt)
	if err != nil {
		return nil, err
	}
	files, err := ingest.Expand(opt.Files)
	if err != nil {
		return nil, err
	}
	l, err := s.Store.BeginLoad(ctx, s.Portfolio)
	if err != nil {
		return nil, err
	}
	defer l.Rollback()
	out := &LoadOutcome{}
	type faulty struct {
		path   string
		report *ingest.Report
	}
	var toMend []faulty
	s.Progress.Stage("reading", len(files))
	for _, path := range files {
		sink := &sink{ctx: ctx, load: l, path: path, progress: s.Progress}
		report, err := ingest.ReadFile(ctx, path, read, sink)
		if errors.Is(err, errAlready) {
			out.Already = append(out.Already, path)
			s.Progress.Add(1)
			continue
		}
		if err != nil {
			return nil, fmt.Errorf("load %s: %w", path, err)
		}
		if sink.begun {
			if err := l.Findings(ctx, report.Findings); err != nil {
				return nil, fmt.Errorf("load %s: %w", path, err)
			}
		}
		out.Reports = append(out.Reports, report)
		out.Findings = append(out.Findings, report.Findings...)
		out.Rows += report.Rows
		out.Used += report.Used
		out.SetAside += report.SetAside
		if report.SetAside > 0 {
			toMend = append(toMend, faulty{path, report})
		}
		s.Progress.Add(1)
	}
	if _, err := l.Commit(ctx); err != nil {
		return nil, err
	}
	for _, f := range toMend {
		dir := opt.MendDir
		if dir == "" {
			dir = filepath.Dir(f.path)
		}
		path, err := mend.Write(ctx, f.path, f.report, dir)
		if errors.Is(err, fs.ErrPermission) {
			path, err = mend.Write(ctx, f.path, f.report, ".") // the sources may be on a read-only share
		}
		if err != nil {
			return nil, fmt.Errorf("the data is loaded, but not its rows to fix: %w", err)
		}
		if path != "" {
			out.ToFix = append(out.ToFix, path)
		}
	}
	finding.Sort(out.Findings)
	s.Progress.Done()
	return out, nil
}

func (s *Session) readOptions(opt LoadOptions) (ingest.Options, error) {
	mapping, err := ReadMapping(opt.Columns)
	if err != nil {
		return ingest.Options{}, err
	}
	return ingest.Options{Kind: opt.Kind, Mapping: mapping, Today: time.Now().Format("2006-01-02")}, nil
}

// ReadMapping reads a column mapping file; "" is none.
func ReadMapping(path string) (*header.Mapping, error) {
	if path == "" {
		return nil, nil
	}
	f, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	m, err := header.ParseMapping(f)
	if err != nil {
		return nil, fmt.Errorf("%s: %w", path, err)
	}
	return m, nil
}

// sink passes what is read on to the store. The source is registered only when
// a first sheet was recognised, so that a broken file replaces nothing.
type sink struct {
	ctx      context.Context
	load     *store.Load
	path     string
	progress interface{ Rows(int) }
	begun    bool
	rows     int
}

func (s *sink) Sheet(sh *building.Sheet) error {
	if !s.begun {
		sum, size, err := contentHash(s.path)
		if err != nil {
			return err
		}
		already, err := s.load.Source(s.ctx, filepath.Base(s.path), sum, sh.FileDate, size)
		if err != nil {
			return err
		}
		if already {
			return errAlready
		}
		s.begun = true
	}
	return s.load.Sheet(s.ctx, sh)
}

func (s *sink) Record(r *building.Record) error {
	if s.rows++; s.rows%1000 == 0 {
		s.progress.Rows(1000)
	}
	return s.load.Add(s.ctx, r)
}

func contentHash(path string) (sum [32]byte, size int64, err error) {
	f, err := os.Open(path)
	if err != nil {
		return sum, 0, err
	}
	defer f.Close()
	h := sha256.New()
	size, err = io.Copy(h, f)
	if err != nil {
		return sum, 0, err
	}
	h.Sum(sum[:0])
	return sum, size, nil
}
