package store

import (
	"context"
	"errors"
	"fmt"
	"slices"

	"github.com/jackc/pgx/v5"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/finding"
)

// chunk is how many records go to the server at once.
const chunk = 4096

// Load is a load in progress: one transaction, whole or not at all.
type Load struct {
	s         *Store
	tx        pgx.Tx
	portfolio string
	number    int64

	source, sheets int64 // numbers given last
	findings       int
	sheet          *building.Sheet
	pending        []building.Record
	arena          []building.Value
	summary        LoadSummary
}

// LoadSummary counts what a load brought.
type LoadSummary struct{ Sources, Records int }

// Source is one loaded file.
type Source struct {
	File     string
	FileDate string
	Bytes    int64
	Load     int64
}

// BeginLoad starts a load. Loads of one portfolio wait for each other.
func (s *Store) BeginLoad(ctx context.Context, portfolio string) (*Load, error) {
	tx, err := s.begin(ctx, portfolio, false)
	if err != nil {
		return nil, err
	}
	l := &Load{s: s, tx: tx, portfolio: portfolio}
	err = tx.QueryRow(ctx, `insert into kelvinrow.portfolio (portfolio, loads) values ($1, 1)
		on conflict (portfolio) do update set loads = kelvinrow.portfolio.loads + 1 returning loads`, portfolio).Scan(&l.number)
	if err == nil {
		err = tx.QueryRow(ctx, `select
			(select coalesce(max(source), 0) from kelvinrow.source where portfolio = $1),
			(select coalesce(max(sheet), 0) from kelvinrow.sheet where portfolio = $1)`, portfolio).Scan(&l.source, &l.sheets)
	}
	if err != nil {
		l.Rollback()
		return nil, fmt.Errorf("begin a load of portfolio %q: %w", portfolio, err)
	}
	return l, nil
}

// Source registers a file. It returns true, and the file must not be loaded,
// where the same content is in the store already, under whatever name. Content
// loaded earlier under the same name is replaced.
func (l *Load) Source(ctx context.Context, file string, sha256 [32]byte, date string, bytes int64) (already bool, err error) {
	if err := l.flush(ctx); err != nil {
		return false, err
	}
	err = l.tx.QueryRow(ctx, "select exists (select from kelvinrow.source where portfolio = $1 and sha256 = $2)", l.portfolio, sha256[:]).Scan(&already)
	if err != nil || already {
		return already, err
	}
	file = clean(file)
	// Sheets and findings go with their source; records have no foreign key of
	// their own, which would be checked for each of a million rows.
	_, err = l.tx.Exec(ctx, `delete from kelvinrow.record r using kelvinrow.sheet h, kelvinrow.source s
		where s.portfolio = $1 and s.file = $2 and h.portfolio = $1 and h.source = s.source
		and r.portfolio = $1 and r.sheet = h.sheet`, l.portfolio, file)
	if err != nil {
		return false, err
	}
	if _, err := l.tx.Exec(ctx, "delete from kelvinrow.source where portfolio = $1 and file = $2", l.portfolio, file); err != nil {
		return false, err
	}
	l.source++
	l.findings = 0
	l.summary.Sources++
	_, err = l.tx.Exec(ctx, `insert into kelvinrow.source (portfolio, source, file, sha256, file_date, bytes, load)
		values ($1, $2, $3, $4, $5, $6, $7)`, l.portfolio, l.source, file, sha256[:], date, bytes, l.number)
	return false, err
}

// Sheet registers a sheet of the current source and gives it its numbers.
func (l *Load) Sheet(ctx context.Context, sh *building.Sheet) error {
	if err := l.flush(ctx); err != nil {
		return err
	}
	l.sheets++
	sh.ID, sh.LoadID = l.sheets, l.number
	columns := map[string]string{}
	for f, letters := range sh.Columns {
		if letters != "" {
			columns[building.Field(f).Key()] = letters
		}
	}
	l.sheet = sh
	_, err := l.tx.Exec(ctx, `insert into kelvinrow.sheet (portfolio, sheet, source, name, file_date, load, columns)
		values ($1, $2, $3, $4, $5, $6, $7)`, l.portfolio, sh.ID, l.source, clean(sh.Name), sh.FileDate, l.number, columns)
	return err
}

// Add adds a record. The record is copied: the caller may use it again.
func (l *Load) Add(ctx context.Context, r *building.Record) error {
	if r.Sheet == nil || r.Sheet.ID == 0 {
		return errors.New("a record needs a registered sheet")
	}
	if len(l.pending) == chunk || (len(l.pending) > 0 && l.pending[0].Sheet != r.Sheet) {
		if err := l.flush(ctx); err != nil {
			return err
		}
	}
	from := len(l.arena)
	l.arena = append(l.arena, r.Values...)
	c := *r
	c.Values = l.arena[from:len(l.arena):len(l.arena)]
	l.pending = append(l.pending, c)
	return nil
}

func (l *Load) flush(ctx context.Context) error {
	if len(l.pending) == 0 {
		return nil
	}
	var present [building.NumFields]bool
	for i := range l.pending {
		for _, v := range l.pending[i].Values {
			present[v.Field] = true
		}
	}
	rows := newRecordRows(l.portfolio, l.pending, &present)
	n, err := l.s.copyInto(ctx, l.tx, "record", rows.columns, rows)
	if err != nil {
		return fmt.Errorf("store records: %w", err)
	}
	l.summary.Records += int(n)
	l.pending = l.pending[:0]
	l.arena = l.arena[:0]
	return nil
}

// recordRows gives records to COPY, only in the columns that have values.
type recordRows struct {
	columns   []string
	portfolio string
	records   []building.Record
	at        [building.NumFields]int // position of each field's first column
	next      int
	row       []any
}

var headColumns = []string{"portfolio", "building", "sheet", "row_number", "survey_date", "kind", "other_kinds"}

func newRecordRows(portfolio string, records []building.Record, present *[building.NumFields]bool) *recordRows {
	r := &recordRows{columns: slices.Clone(headColumns), portfolio: portfolio, records: records}
	for f, yes := range present {
		if yes {
			r.at[f] = len(r.columns)
			r.columns = append(r.columns, fieldColumns(building.Field(f))...)
		}
	}
	r.row = make([]any, len(r.columns))
	return r
}

// fieldColumns are the columns of one field.
func fieldColumns(f building.Field) []string {
	if f.Info().Type == building.Year {
		return []string{f.Key() + "_from", f.Key() + "_to"}
	}
	return []string{f.Key()}
}

func (r *recordRows) Next() bool { r.next++; return r.next <= len(r.records) }

func (r *recordRows) Err() error { return nil }

func (r *recordRows) Values() ([]any, error) {
	rec := &r.records[r.next-1]
	clear(r.row)
	r.row[0], r.row[1], r.row[2], r.row[3] = r.portfolio, clean(rec.Building), rec.Sheet.ID, int32(rec.Row)
	if rec.SurveyDate != "" {
		r.row[4] = rec.SurveyDate
	}
	kind, others := kinds(rec.Values)
	r.row[5] = kind.String()
	if others != nil {
		r.row[6] = others
	}
	for _, v := range rec.Values {
		i := r.at[v.Field]
		switch v.Field.Info().Type {
		case building.Text, building.Word:
			r.row[i] = clean(v.Text)
		case building.Number:
			r.row[i] = v.Number
		case building.YesNo:
			r.row[i] = v.Number != 0
		case building.Year:
			r.row[i], r.row[i+1] = int16(v.Low), int16(v.High)
		}
	}
	return r.row, nil
}

// kinds returns the commonest kind of the values, and the others by field.
func kinds(values []building.Value) (building.Kind, []string) {
	var n [building.NumKinds]int
	for _, v := range values {
		n[v.Kind]++
	}
	common := building.Registered
	for k := range n {
		if k != int(building.Default) && n[k] > n[common] {
			common = building.Kind(k)
		}
	}
	var others []string
	for _, v := range values {
		if v.Kind != common {
			others = append(others, v.Field.Key()+"="+v.Kind.String())
		}
	}
	return common, others
}

// Findings stores findings of the current source.
func (l *Load) Findings(ctx context.Context, fs []finding.Finding) error {
	if err := l.flush(ctx); err != nil {
		return err
	}
	columns := []string{"portfolio", "source", "number", "severity", "check_name", "file", "sheet", "row_number",
		"column_letters", "field", "building", "raw", "message", "fix"}
	rows := pgx.CopyFromSlice(len(fs), func(i int) ([]any, error) {
		f := &fs[i]
		return []any{l.portfolio, l.source, int32(l.findings + i + 1), f.Severity.String(), clean(f.Check), clean(f.File), clean(f.Sheet),
			int32(f.Row), clean(f.Column), clean(f.Field), clean(f.Building), clean(f.Raw), clean(f.Text), clean(f.Fix)}, nil
	})
	if _, err := l.s.copyInto(ctx, l.tx, "finding", columns, rows); err != nil {
		return fmt.Errorf("store findings: %w", err)
	}
	l.findings += len(fs)
	return nil
}

// Commit makes the load permanent.
func (l *Load) Commit(ctx context.Context) (LoadSummary, error) {
	if err := l.flush(ctx); err != nil {
		return LoadSummary{}, err
	}
	if err := l.tx.Commit(ctx); err != nil {
		return LoadSummary{}, fmt.Errorf("commit the load: %w", err)
	}
	return l.summary, nil
}

// Rollback undoes the load; after Commit it does nothing.
func (l *Load) Rollback() {
	_ = l.tx.Rollback(context.Background()) // the command's context may be over
}
