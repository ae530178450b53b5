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
	"slices"
	"strings"
	"time"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest"
	"kelvinrow/ingest/check"
	"kelvinrow/ingest/finding"
	"kelvinrow/ingest/header"
	"kelvinrow/ingest/mend"
	"kelvinrow/sql/store"
)

// LoadOptions says what to load.
type LoadOptions struct {
	Files   []string
	Columns string        // mapping file; "" for recognition alone
	Kind    building.Kind // Default is what rows to fix had in their source, else Registered
	MendDir string        // where *-to-fix files go; "" is beside each source
}

// errAlready says that the content of a file is in the store, read in this way.
var errAlready = errors.New("already loaded")

// LoadOutcome is what a load did.
type LoadOutcome struct {
	Reports  []*ingest.Report
	Already  []string // files whose content was in the store before, read in the same way
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

// Nothing reports whether nothing at all in the files could be used, now or before.
func (o *LoadOutcome) Nothing() bool { return o.Used == 0 && len(o.Already) == 0 }

// loaded is a file as it was read.
type loaded struct {
	path   string
	report *ingest.Report
	source int64            // 0 where it brought nothing
	sheets map[string]int64 // numbers in the store by name
}

// Load reads files into the store. Either all of them are in afterwards or,
// when the load cannot go on, none; a file of which nothing can be used is a
// finding and leaves what the store had of it.
func (s *Session) Load(ctx context.Context, opt LoadOptions) (*LoadOutcome, error) {
	began := time.Now()
	defer func() { s.Timings.Read += time.Since(began) }()
	read, err := s.readOptions(ctx, opt)
	if err != nil {
		return nil, err
	}
	files, skipped, err := ingest.Expand(opt.Files)
	if err != nil {
		return nil, err
	}
	l, err := s.Store.BeginLoad(ctx, s.Portfolio)
	if err != nil {
		return nil, err
	}
	defer l.Rollback()
	out := &LoadOutcome{Findings: skipped}
	var all []loaded
	var known []string
	s.Progress.Stage("reading", len(files))
	names, err := s.names(ctx, l, files)
	if err != nil {
		return nil, err
	}
	for i, name := range names {
		read.Name = name
		f, err := s.readOne(ctx, l, files[i], read)
		if errors.Is(err, errAlready) {
			out.Already = append(out.Already, files[i])
			known = append(known, name)
		} else if err != nil {
			return nil, fmt.Errorf("load %s: %w", files[i], err)
		} else {
			all = append(all, f)
			out.Reports = append(out.Reports, f.report)
		}
		s.Progress.Add(1)
	}
	out.Findings = append(out.Findings, ingest.UnusedMapping(read.Mapping, out.Reports, known)...)
	if err := s.finish(ctx, l, all, out); err != nil {
		return nil, err
	}
	for _, f := range all {
		if f.report.SetAside == 0 || f.report.Form { // a form is mended itself
			continue
		}
		path, err := s.toFix(ctx, f, opt.MendDir)
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

// names are the names by which the files are known: those they were loaded by
// from the same place before, or what tells them apart now.
func (s *Session) names(ctx context.Context, l *store.Load, files []string) ([]string, error) {
	names := ingest.Names(files)
	known, err := l.Sources(ctx)
	if err != nil {
		return nil, err
	}
	for i, f := range files {
		path, err := filepath.Abs(f)
		if err != nil {
			return nil, err
		}
		for _, k := range known {
			if k.Path == path && !slices.Contains(names, k.File) {
				names[i] = k.File
			}
		}
	}
	return names, nil
}

// readOne reads one file into the load; errAlready where there is nothing new.
func (s *Session) readOne(ctx context.Context, l *store.Load, path string, read ingest.Options) (loaded, error) {
	f := loaded{path: path, sheets: map[string]int64{}}
	if read.Kind == building.Default && ingest.Mended(path) {
		var err error
		if read.Kind, err = sourceKind(ctx, l, read.Name); err != nil {
			return f, err
		}
	}
	if ingest.IsForm(path) {
		read.Kind, read.Mapping = building.Surveyed, nil // whatever the other files are
	}
	sum, size, err := contentHash(path)
	hashed := err == nil // where not, reading will say why
	reading := ingest.Reading(read, read.Name)
	if hashed {
		already, err := l.Already(ctx, sum, reading)
		if err != nil {
			return f, err
		}
		if already {
			return f, errAlready
		}
	}
	source := store.File{Name: read.Name, SHA256: sum, Bytes: size, Reading: reading, Adds: ingest.Mended(path)}
	if source.Path, err = filepath.Abs(path); err != nil {
		return f, err
	}
	sink := &sink{ctx: ctx, load: l, file: source, progress: s.Progress, loaded: &f}
	if f.report, err = ingest.ReadFile(ctx, path, read, sink); err != nil {
		return f, err
	}
	if f.source == 0 {
		return f, nil
	}
	if f.report.SHA256 != sum {
		return f, errors.New("the file changed while it was read; load it again")
	}
	for _, old := range sink.replaced {
		w, err := l.Withdrawn(ctx, old.Number)
		if err != nil {
			return f, err
		}
		if elsewhere(old, source) && w.BuildingsGone == w.Buildings {
			// Not a version of it, but another district's export of the same name.
			if err := l.Keep(ctx, old.Number); err != nil {
				return f, err
			}
			f.report.Findings = append(f.report.Findings, finding.Finding{Severity: finding.Note, Check: finding.Replaced, File: source.Name,
				Text: fmt.Sprintf("a file of this name from %s tells of other buildings and counts on", filepath.Dir(old.Path)), Fix: "if this is a version of it, take that one back (load --undo)"})
			continue
		}
		f.report.Findings = append(f.report.Findings, replaced(old, source, w))
	}
	return f, nil
}

// sourceKind is how firm the values of the source of rows to fix are, Default
// where it is not known: what was surveyed stays surveyed when it is mended.
func sourceKind(ctx context.Context, l *store.Load, mended string) (building.Kind, error) {
	all, err := l.Sources(ctx)
	if err != nil {
		return building.Default, err
	}
	for _, s := range all {
		word, _, _ := strings.Cut(s.Reading, " ")
		if k, ok := building.KindByWord(word); ok && check.Mends(mended, s.File) {
			return k, nil
		}
	}
	return building.Default, nil
}

// replaced says what taking an earlier version's place changed.
func replaced(old store.Source, now store.File, w store.Withdrawal) finding.Finding {
	f := finding.Finding{Severity: finding.Note, Check: finding.Replaced, File: now.Name}
	of := fmt.Sprintf("%s, dated %s and loaded on %s", old.File, old.FileDate, old.Loaded.Format("2006-01-02"))
	switch {
	case old.Reading != now.Reading && old.SameContent(now.SHA256):
		f.Text = fmt.Sprintf("the same content was loaded before, read as %s; now read as %s, it takes the place of that", orUnknown(old.Reading), now.Reading)
	case elsewhere(old, now):
		f.Severity = finding.Warning
		f.Text = fmt.Sprintf("takes the place of %s from %s", of, filepath.Dir(old.Path))
		f.Fix = "if they are different files and not versions of one, take this one back (load --undo) and load both in one command"
	default:
		f.Text = "takes the place of " + of
	}
	if w.BuildingsGone > 0 || w.ValuesGone > 0 {
		f.Severity = finding.Warning
	}
	f.Text += fmt.Sprintf(": of its %d buildings %d are withdrawn, of its %d values %d are withdrawn and %d change", w.Buildings, w.BuildingsGone, w.Values, w.ValuesGone, w.ValuesChanged)
	return f
}

// elsewhere reports whether a file of the same name lay in another place.
func elsewhere(old store.Source, now store.File) bool {
	return old.Path != "" && old.Path != now.Path && !old.SameContent(now.SHA256)
}

func orUnknown(reading string) string {
	if reading == "" {
		return "it was then"
	}
	return reading
}

// finish adds what shows only when all files are in, stores the findings and
// commits, or leaves the store alone where nothing came in.
func (s *Session) finish(ctx context.Context, l *store.Load, all []loaded, out *LoadOutcome) (err error) {
	brought := false
	for _, f := range all {
		r := f.report
		if f.source != 0 {
			brought = true
			if r.Findings, err = unmissed(ctx, l, f.sheets, r.Findings); err != nil {
				return err
			}
			if err := l.Findings(ctx, f.source, r.Findings); err != nil {
				return fmt.Errorf("load %s: %w", f.path, err)
			}
		}
		out.Findings = append(out.Findings, r.Findings...)
		out.Rows += r.Rows
		out.Used += r.Used
		out.SetAside += r.SetAside
	}
	if !brought {
		l.Rollback()
		return nil
	}
	about, err := watched(ctx, l)
	if err != nil {
		return fmt.Errorf("compare with what the store has: %w", err)
	}
	out.Findings = append(out.Findings, about...)
	_, err = l.Commit(ctx)
	return err
}

// toFix writes the rows set aside beside their source, or where the command runs.
func (s *Session) toFix(ctx context.Context, f loaded, dir string) (string, error) {
	if dir == "" {
		dir = filepath.Dir(f.path)
	}
	path, err := mend.Write(ctx, f.path, f.report, dir)
	if errors.Is(err, fs.ErrPermission) {
		path, err = mend.Write(ctx, f.path, f.report, ".") // the sources may be on a read-only share
	}
	return path, err
}

func (s *Session) readOptions(ctx context.Context, opt LoadOptions) (ingest.Options, error) {
	mapping, err := ReadMapping(opt.Columns)
	if err != nil {
		return ingest.Options{}, err
	}
	set, _, err := s.assumptions(ctx)
	if err != nil {
		return ingest.Options{}, err
	}
	return ingest.Options{Kind: opt.Kind, Mapping: mapping, Today: today(), Words: ownWords(set), Portfolio: s.Portfolio}, nil
}

func today() string { return time.Now().Format("2006-01-02") }

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
	if err == nil {
		m.Name = filepath.Base(path)
		err = ingest.CheckMapping(m, today())
	}
	if err != nil {
		return nil, fmt.Errorf("%s: %w", path, err)
	}
	return m, nil
}

// sink passes what is read on to the store. The source is registered only when
// there is a row to store, so that a broken or empty file replaces nothing.
type sink struct {
	ctx      context.Context
	load     *store.Load
	file     store.File
	progress interface{ Rows(int) }
	loaded   *loaded
	replaced []store.Source
	rows     int
}

func (s *sink) Sheet(*building.Sheet) error { return nil }

func (s *sink) Record(r *building.Record) error {
	if r.Sheet.ID == 0 {
		if err := s.register(r.Sheet); err != nil {
			return err
		}
	}
	if s.rows++; s.rows%1000 == 0 {
		s.progress.Rows(1000)
	}
	return s.load.Add(s.ctx, r)
}

// register registers a sheet, and the file before its first.
func (s *sink) register(sh *building.Sheet) error {
	if s.loaded.source == 0 {
		s.file.Date = sh.FileDate
		already, replaced, err := s.load.Source(s.ctx, s.file)
		if err != nil {
			return err
		}
		if already {
			return errAlready
		}
		s.replaced, s.loaded.source = replaced, s.load.Last()
	}
	if err := s.load.Sheet(s.ctx, sh); err != nil {
		return err
	}
	s.loaded.sheets[sh.Name] = sh.ID
	return nil
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
