package store

import (
	"context"
	"errors"
	"fmt"
	"path/filepath"
	"slices"
	"strings"
	"time"

	"github.com/jackc/pgx/v5"

	"kelvinrow/estimate/building"
)

// File describes a file to be loaded.
type File struct {
	Name    string // by which it is known, usually its base name
	Path    string // where it lies
	SHA256  [32]byte
	Date    string
	Bytes   int64
	Reading string // how it is read, in one line: what beside the content decides what it says
	Adds    bool   // it adds to what files of its name said, and takes no one's place
}

// Source is one loaded file.
type Source struct {
	Number   int64
	File     string
	Path     string
	FileDate string
	Bytes    int64
	Load     int64
	Loaded   time.Time
	Reading  string

	sha256 []byte
	by     int64 // that took its place; 0 while it counts
}

// SameContent reports whether the source has this content.
func (s *Source) SameContent(sha256 [32]byte) bool { return string(s.sha256) == string(sha256[:]) }

// Already reports whether the same content, read in the same way, counts in the
// store already, under whatever name.
func (l *Load) Already(ctx context.Context, sha256 [32]byte, reading string) (already bool, err error) {
	if err := l.settle(ctx); err != nil {
		return false, err
	}
	err = l.tx.QueryRow(ctx, `select exists (select from kelvinrow.source s where portfolio = $1 and sha256 = $2 and reading = $3`+countingSource+`)`,
		l.portfolio, sha256[:], clean(reading)).Scan(&already)
	return already, err
}

// Source registers a file. It returns already, and the file must not be loaded,
// where Already holds. Sources of the same content, path or name stop counting
// and are returned: the same content was read in another way then, the same path
// or name held an earlier version. Sources of this load keep counting.
func (l *Load) Source(ctx context.Context, f File) (already bool, replaced []Source, err error) {
	f.Name, f.Path, f.Reading = clean(f.Name), clean(f.Path), clean(f.Reading)
	l.open = false
	if already, err = l.Already(ctx, f.SHA256, f.Reading); err != nil || already {
		return already, nil, err
	}
	if replaced, err = l.register(ctx, f); err != nil {
		return false, nil, fmt.Errorf("store source %s: %w", f.Name, err)
	}
	l.open = true
	l.findings[l.source] = 0
	return false, replaced, nil
}

// Last is the number of the source registered last.
func (l *Load) Last() int64 { return l.source }

func (l *Load) register(ctx context.Context, f File) ([]Source, error) {
	all, err := sources(ctx, l.tx, l.portfolio)
	if err != nil {
		return nil, err
	}
	match := func(is func(*Source) bool) (found []Source) {
		for _, s := range all {
			if s.by == 0 && s.Load != l.summary.Number && is(&s) {
				found = append(found, s)
			}
		}
		return found
	}
	replaced := match(func(s *Source) bool { return string(s.sha256) == string(f.SHA256[:]) })
	if len(replaced) == 0 && !f.Adds {
		if replaced = match(func(s *Source) bool { return f.Path != "" && s.Path == f.Path }); len(replaced) == 0 {
			replaced = match(func(s *Source) bool { return s.File == f.Name })
		}
	}
	l.source++
	l.summary.Sources++
	_, err = l.tx.Exec(ctx, `insert into kelvinrow.source (portfolio, source, file, path, sha256, file_date, bytes, reading, load)
		values ($1, $2, $3, $4, $5, $6, $7, $8, $9)`, l.portfolio, l.source, f.Name, f.Path, f.SHA256[:], f.Date, f.Bytes, f.Reading, l.summary.Number)
	for _, s := range replaced {
		if err == nil {
			_, err = l.tx.Exec(ctx, "insert into kelvinrow.superseded (portfolio, source, by_source) values ($1, $2, $3)", l.portfolio, s.Number, l.source)
		}
	}
	return replaced, err
}

// Sources lists the files that count at this point of the load, by name.
func (l *Load) Sources(ctx context.Context) ([]Source, error) {
	if err := l.settle(ctx); err != nil {
		return nil, err
	}
	all, err := sources(ctx, l.tx, l.portfolio)
	return slices.DeleteFunc(all, func(s Source) bool { return s.by != 0 }), err
}

// Keep lets a source count on whose place the one registered last has taken.
func (l *Load) Keep(ctx context.Context, old int64) error {
	if err := l.settle(ctx); err != nil {
		return err
	}
	_, err := l.tx.Exec(ctx, "delete from kelvinrow.superseded where portfolio = $1 and source = $2 and by_source = $3", l.portfolio, old, l.source)
	return err
}

// sources lists all sources of a portfolio, by name and number.
func sources(ctx context.Context, tx pgx.Tx, portfolio string) ([]Source, error) {
	rows, err := tx.Query(ctx, `select s.source, s.file, s.path, s.file_date, s.bytes, s.load, s.loaded_at, s.reading, s.sha256, coalesce(x.by_source, 0)
		from kelvinrow.source s left join kelvinrow.superseded x using (portfolio, source)
		where portfolio = $1 order by s.file collate "C", s.source`, portfolio)
	if err != nil {
		return nil, err
	}
	return pgx.CollectRows(rows, func(row pgx.CollectableRow) (s Source, err error) {
		err = row.Scan(&s.Number, &s.File, &s.Path, &s.FileDate, &s.Bytes, &s.Load, &s.Loaded, &s.Reading, &s.sha256, &s.by)
		return s, err
	})
}

// Sources lists the files of a portfolio that count, by name.
func (s *Store) Sources(ctx context.Context, portfolio string) (out []Source, err error) {
	err = s.within(ctx, portfolio, true, func(tx pgx.Tx) (err error) {
		out, err = sources(ctx, tx, portfolio)
		return err
	})
	return slices.DeleteFunc(out, func(s Source) bool { return s.by != 0 }), err
}

// Withdrawal counts what a source said, and what of it another one in its place
// does not say, or says otherwise.
type Withdrawal struct {
	Buildings, Values         int
	BuildingsGone, ValuesGone int
	ValuesChanged             int
}

// Withdrawn compares a source with the one registered last.
func (l *Load) Withdrawn(ctx context.Context, old int64) (w Withdrawal, err error) {
	if err := l.settle(ctx); err != nil {
		return w, err
	}
	// Both are grouped at once: a join of the two would be planned without
	// knowing how many rows have just come in.
	var merged, had, gone, changed []string
	for f := range building.NumFields {
		column := pgx.Identifier{fieldColumns(building.Field(f))[0]}.Sanitize()
		most := "max"
		if building.Field(f).Info().Type == building.YesNo {
			most = "bool_or"
		}
		before, after := fmt.Sprintf("b%d", f), fmt.Sprintf("a%d", f)
		merged = append(merged, fmt.Sprintf("%s(%s) filter (where sheet = any($2)) as %s, %[1]s(%[2]s) filter (where sheet = any($3)) as %[4]s", most, column, before, after))
		had = append(had, before)
		gone = append(gone, fmt.Sprintf("(%s is not null and %s is null)::int", before, after))
		changed = append(changed, fmt.Sprintf("coalesce(%s <> %s, false)::int", before, after))
	}
	var sheets [2][]int64
	for i, source := range []int64{old, l.source} {
		rows, err := l.tx.Query(ctx, "select sheet from kelvinrow.sheet where portfolio = $1 and source = $2", l.portfolio, source)
		if err != nil {
			return w, err
		}
		if sheets[i], err = pgx.CollectRows(rows, pgx.RowTo[int64]); err != nil {
			return w, err
		}
	}
	err = l.tx.QueryRow(ctx, `select count(*), coalesce(sum(num_nonnulls(`+strings.Join(had, ", ")+`)), 0), count(*) filter (where not still),
		coalesce(sum(`+strings.Join(gone, " + ")+`), 0), coalesce(sum(`+strings.Join(changed, " + ")+`), 0)
		from (select bool_or(sheet = any($2)) as was, bool_or(sheet = any($3)) as still, `+strings.Join(merged, ", ")+`
			from kelvinrow.record where portfolio = $1 and (sheet = any($2) or sheet = any($3)) group by building) both_of_them
		where was`, l.portfolio, sheets[0], sheets[1]).
		Scan(&w.Buildings, &w.Values, &w.BuildingsGone, &w.ValuesGone, &w.ValuesChanged)
	if err != nil {
		return w, fmt.Errorf("compare with the earlier version: %w", err)
	}
	return w, nil
}

// Undone says what taking a source back did.
type Undone struct {
	Source    Source
	Buildings int      // of which it told
	Values    int      // that it gave
	Gone      int      // buildings of which no other source tells
	Restored  []Source // whose place it had taken, and which count again
	Left      []Source // of the same name, which count still
}

// UnknownSourceError says that nothing of the name or content counts.
type UnknownSourceError struct{ Portfolio, Name, By string }

func (e *UnknownSourceError) Error() string {
	if e.By != "" {
		return fmt.Sprintf("%s counts no more in portfolio %q: %s took its place; take that back first", e.Name, e.Portfolio, e.By)
	}
	return fmt.Sprintf("no file %s was loaded into portfolio %q", e.Name, e.Portfolio)
}

// Undo takes back the source with the content, or else the path, or else the
// name; of several the one loaded last. What it took the place of counts again.
// sha256 is nil where there is no such file any more.
func (s *Store) Undo(ctx context.Context, portfolio, name, path string, sha256 []byte) (u Undone, err error) {
	name, path = clean(name), clean(path)
	err = s.within(ctx, portfolio, false, func(tx pgx.Tx) error {
		if err := s.serialise(ctx, tx, "load", portfolio); err != nil {
			return err
		}
		all, err := sources(ctx, tx, portfolio)
		if err != nil {
			return err
		}
		if u.Source, err = choose(all, portfolio, name, path, sha256); err != nil {
			return err
		}
		columns := make([]string, building.NumFields)
		for f := range columns {
			columns[f] = pgx.Identifier{fieldColumns(building.Field(f))[0]}.Sanitize()
		}
		ours := `portfolio = $1 and sheet in (select sheet from kelvinrow.sheet where portfolio = $1 and source = $2)`
		err = tx.QueryRow(ctx, `select count(distinct building), coalesce(sum(num_nonnulls(`+strings.Join(columns, ", ")+`)), 0)
			from kelvinrow.record where `+ours, portfolio, u.Source.Number).Scan(&u.Buildings, &u.Values)
		if err != nil {
			return err
		}
		var before, after int
		count := func(n *int) error {
			return tx.QueryRow(ctx, "select count(distinct building) from kelvinrow.record where portfolio = $1"+counting, portfolio).Scan(n)
		}
		if err := count(&before); err != nil {
			return err
		}
		if err := remove(ctx, tx, portfolio, u.Source.Number); err != nil {
			return err
		}
		if err := count(&after); err != nil {
			return err
		}
		u.Gone = max(0, before-after)
		for _, o := range all {
			switch {
			case o.Number == u.Source.Number:
			case o.by == u.Source.Number:
				u.Restored = append(u.Restored, o)
			case o.by == 0 && o.File == u.Source.File:
				u.Left = append(u.Left, o)
			}
		}
		return nil
	})
	var unknown *UnknownSourceError
	if err != nil && !errors.As(err, &unknown) {
		err = fmt.Errorf("take back %s: %w", name, err)
	}
	return u, err
}

// choose finds the source that is meant.
func choose(all []Source, portfolio, name, path string, sha256 []byte) (Source, error) {
	for _, is := range []func(*Source) bool{
		func(s *Source) bool { return sha256 != nil && string(s.sha256) == string(sha256) },
		func(s *Source) bool { return path != "" && s.Path == path },
		func(s *Source) bool { return s.File == name },
		func(s *Source) bool {
			return s.File == filepath.Base(name) || strings.HasSuffix(s.File, "/"+filepath.ToSlash(name))
		},
	} {
		var found *Source
		names := map[string]bool{}
		for i := range all {
			if s := &all[i]; s.by == 0 && is(s) {
				names[s.File] = true
				if found == nil || s.Number > found.Number {
					found = s
				}
			}
		}
		if len(names) > 1 {
			var list []string
			for _, s := range all { // in order of name
				if names[s.File] && !slices.Contains(list, s.File) {
					list = append(list, s.File)
				}
			}
			return Source{}, fmt.Errorf("the name could be any of %s: say which", strings.Join(list, ", "))
		}
		if found != nil {
			return *found, nil
		}
	}
	e := &UnknownSourceError{Portfolio: portfolio, Name: name}
	for _, s := range all {
		if s.by != 0 && (string(s.sha256) == string(sha256) || s.File == name) {
			for _, o := range all {
				if o.Number == s.by {
					e.By = o.File + " of load " + fmt.Sprint(o.Load)
				}
			}
		}
	}
	return Source{}, e
}

// remove deletes a source with all that came of it. Records have no foreign key
// of their own, which would be checked for each of a million rows.
func remove(ctx context.Context, tx pgx.Tx, portfolio string, source int64) error {
	_, err := tx.Exec(ctx, `delete from kelvinrow.record where portfolio = $1
		and sheet in (select sheet from kelvinrow.sheet where portfolio = $1 and source = $2)`, portfolio, source)
	if err == nil {
		_, err = tx.Exec(ctx, "delete from kelvinrow.source where portfolio = $1 and source = $2", portfolio, source)
	}
	return err
}

// PruneSources removes the sources that count no more, for good, and returns
// how many there were.
func (s *Store) PruneSources(ctx context.Context, portfolio string) (removed int, err error) {
	err = s.within(ctx, portfolio, false, func(tx pgx.Tx) error {
		if err := s.serialise(ctx, tx, "load", portfolio); err != nil {
			return err
		}
		all, err := sources(ctx, tx, portfolio)
		if err != nil {
			return err
		}
		for _, o := range all {
			if o.by == 0 {
				continue
			}
			if err := remove(ctx, tx, portfolio, o.Number); err != nil {
				return err
			}
			removed++
		}
		return nil
	})
	if err != nil {
		return 0, fmt.Errorf("prune replaced files of portfolio %q: %w", portfolio, err)
	}
	return removed, nil
}

// ToWatch yields the buildings that this load told of and of which something may
// have to be said: several sheets tell of them, none gives their size, or another
// id differs from theirs by case and spaces only.
func (l *Load) ToWatch(ctx context.Context, yield func(*building.Building, []building.Record) error) error {
	if err := l.settle(ctx); err != nil {
		return err
	}
	return groups(ctx, l.tx, l.portfolio, `building in (
		with b as (
			select building, min(sheet) as first, max(sheet) as last,
				bool_or(floor_area is not null or volume is not null or gross_volume is not null) as sized,
				lower(translate(building, E' \t\n\r\u00a0', '')) as bare
			from kelvinrow.record where portfolio = $1`+counting+` group by building)
		select building from b where last > $2 and (first <> last or not sized)
			or bare in (select bare from b group by bare having count(*) > 1 and max(last) > $2))`, []any{l.before}, yield)
}

// Lacking counts the buildings of a sheet of this load of which nothing that
// counts gives any of the fields, and all buildings of the sheet. A building
// whose size an earlier sheet gives is known already and lacks nothing new.
func (l *Load) Lacking(ctx context.Context, sheet int64, fields ...building.Field) (lacking, all int, err error) {
	if err := l.settle(ctx); err != nil {
		return 0, 0, err
	}
	var given []string
	for _, f := range fields {
		given = append(given, pgx.Identifier{fieldColumns(f)[0]}.Sanitize()+" is not null")
	}
	err = l.tx.QueryRow(ctx, `select count(*) filter (where not given and not known), count(*) from (
		select building, bool_or(`+strings.Join(given, " or ")+`) as given,
			bool_or(sheet < $2 and (floor_area is not null or volume is not null or gross_volume is not null)) as known from kelvinrow.record where portfolio = $1`+counting+`
		and building in (select building from kelvinrow.record where portfolio = $1 and sheet = $2) group by building) b`, l.portfolio, sheet).Scan(&lacking, &all)
	return lacking, all, err
}
