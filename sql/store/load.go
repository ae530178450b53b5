package store

import (
	"context"
	"errors"
	"fmt"
	"math"
	"slices"
	"time"

	"github.com/jackc/pgx/v5"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/finding"
)

// chunk is how many records go to the server at once.
const chunk = 4096

// Load is a load in progress: one transaction, whole or not at all. It is not
// safe for concurrent use, and the store serves nothing else meanwhile.
type Load struct {
	s         *Store
	tx        pgx.Tx
	portfolio string
	summary   LoadSummary

	source, sheets int64 // numbers given last
	before         int64 // number of the last sheet that was there before
	open           bool  // a source is registered and takes sheets and findings
	findings       map[int64]int
	failed         error // the transaction is lost

	// Records are collected in one batch while the other is on its way to the
	// server, so that reading and storing go on at the same time.
	filling, sending batch
	sent             chan error
}

// batch is a number of records, copied out of the caller's.
type batch struct {
	records []building.Record
	values  []building.Value // of all records
}

// LoadSummary counts what a load brought.
type LoadSummary struct {
	Number           int64 // of the load, in its portfolio
	Sources, Records int
}

// BeginLoad starts a load. Loads of one portfolio wait for each other.
func (s *Store) BeginLoad(ctx context.Context, portfolio string) (*Load, error) {
	tx, err := s.begin(ctx, portfolio, false)
	if err != nil {
		return nil, err
	}
	l := &Load{s: s, tx: tx, portfolio: portfolio, findings: map[int64]int{}}
	err = s.serialise(ctx, tx, "load", portfolio)
	if err == nil {
		err = tx.QueryRow(ctx, `insert into kelvinrow.portfolio (portfolio, loads) values ($1, 1)
			on conflict (portfolio) do update set loads = kelvinrow.portfolio.loads + 1 returning loads`, portfolio).Scan(&l.summary.Number)
	}
	if err == nil {
		err = tx.QueryRow(ctx, `select
			(select coalesce(max(source), 0) from kelvinrow.source where portfolio = $1),
			(select coalesce(max(sheet), 0) from kelvinrow.sheet where portfolio = $1)`, portfolio).Scan(&l.source, &l.sheets)
		l.before = l.sheets
	}
	if err != nil {
		l.Rollback()
		return nil, fmt.Errorf("begin a load of portfolio %q: %w", portfolio, err)
	}
	return l, nil
}

var errNoSource = errors.New("no source is being loaded")

// Sheet registers a sheet of the current source and gives it its numbers.
func (l *Load) Sheet(ctx context.Context, sh *building.Sheet) error {
	if err := l.settle(ctx); err != nil {
		return err
	}
	if !l.open {
		return errNoSource
	}
	l.sheets++
	sh.ID, sh.LoadID = l.sheets, l.summary.Number
	columns := map[string]string{}
	for f, letters := range sh.Columns {
		if letters != "" {
			columns[building.Field(f).Key()] = letters
		}
	}
	_, err := l.tx.Exec(ctx, `insert into kelvinrow.sheet (portfolio, sheet, source, name, file_date, load, columns)
		values ($1, $2, $3, $4, $5, $6, $7)`, l.portfolio, sh.ID, l.source, clean(sh.Name), sh.FileDate, l.summary.Number, columns)
	if err != nil {
		return fmt.Errorf("store sheet %q: %w", sh.Name, err)
	}
	return nil
}

// Add adds a record. The record is copied: the caller may use it again.
func (l *Load) Add(ctx context.Context, r *building.Record) error {
	if r.Sheet == nil || r.Sheet.ID == 0 {
		return errors.New("a record needs a registered sheet")
	}
	if len(l.filling.records) == chunk {
		if err := l.send(ctx); err != nil {
			return err
		}
	}
	b := &l.filling
	from := len(b.values)
	b.values = append(b.values, r.Values...)
	c := *r
	c.Values = b.values[from:len(b.values):len(b.values)]
	b.records = append(b.records, c)
	return nil
}

// send sends the collected records on their way, once those before have arrived.
func (l *Load) send(ctx context.Context) error {
	if err := l.wait(); err != nil || len(l.filling.records) == 0 {
		return err
	}
	l.filling, l.sending = l.sending, l.filling
	l.filling.records, l.filling.values = l.filling.records[:0], l.filling.values[:0]
	l.sent = make(chan error, 1)
	go func(sent chan<- error) {
		_, err := l.s.copyInto(ctx, l.tx, "record", recordRows(l.portfolio, l.sending.records))
		sent <- err
	}(l.sent)
	return nil
}

// wait waits until the records on their way have arrived: the connection does
// one thing at a time.
func (l *Load) wait() error {
	if l.sent == nil {
		return l.failed
	}
	err := <-l.sent
	l.sent = nil
	if err != nil {
		l.failed = fmt.Errorf("store records: %w", err)
		return l.failed
	}
	l.summary.Records += len(l.sending.records)
	return nil
}

// settle brings all records to the server.
func (l *Load) settle(ctx context.Context) error {
	if err := l.send(ctx); err != nil {
		return err
	}
	return l.wait()
}

var headColumns = []string{"portfolio", "building", "sheet", "row_number", "survey_date", "kind", "other_kinds"}

// recordRows are records for COPY, only in the columns that have values.
func recordRows(portfolio string, records []building.Record) *rows {
	var present [building.NumFields]bool
	for i := range records {
		for _, v := range records[i].Values {
			present[v.Field] = true
		}
	}
	columns := slices.Clone(headColumns)
	var fields []building.Field
	for f, yes := range present {
		if yes {
			fields = append(fields, building.Field(f))
			columns = append(columns, fieldColumns(building.Field(f))...)
		}
	}
	return &rows{columns: columns, n: len(records), encode: func(e *encoder, i int) error {
		return encodeRecord(e, portfolio, &records[i], fields)
	}}
}

// fieldColumns are the columns of one field.
func fieldColumns(f building.Field) []string {
	if f.Info().Type == building.Year {
		return []string{f.Key() + "_from", f.Key() + "_to"}
	}
	return []string{f.Key()}
}

func encodeRecord(e *encoder, portfolio string, r *building.Record, fields []building.Field) error {
	e.text(portfolio)
	e.text(r.Building)
	e.bigint(r.Sheet.ID)
	e.integer(int32(r.Row))
	if r.SurveyDate == "" {
		e.null()
	} else {
		e.text(r.SurveyDate)
	}
	kind, others := kinds(r.Values)
	e.text(kind.String())
	if others == nil {
		e.null()
	} else {
		e.texts(others)
	}
	var at [building.NumFields]int // position in Values plus one; a later value of a field counts
	for i, v := range r.Values {
		at[v.Field] = i + 1
	}
	for _, f := range fields {
		if err := encodeValue(e, r, f, at[f]-1); err != nil {
			return err
		}
	}
	return nil
}

func encodeValue(e *encoder, r *building.Record, f building.Field, at int) error {
	t := f.Info().Type
	if at < 0 {
		e.null()
		if t == building.Year {
			e.null()
		}
		return nil
	}
	v := &r.Values[at]
	switch t {
	case building.Text, building.Word:
		e.text(v.Text)
	case building.Number:
		e.float(v.Number)
	case building.YesNo:
		e.boolean(v.Number != 0)
	case building.Year:
		low, high := int16(v.Low), int16(v.High)
		if v.Low < 0 || v.High > math.MaxInt16 || float64(low) != v.Low || float64(high) != v.High {
			return fmt.Errorf("building %s, row %d: %s %g to %g is no span of years", r.Building, r.Row, f, v.Low, v.High)
		}
		e.smallint(low)
		e.smallint(high)
	}
	return nil
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
	if n[common] == len(values) {
		return common, nil
	}
	for _, v := range values {
		if v.Kind != common {
			others = append(others, v.Field.Key()+"="+v.Kind.String())
		}
	}
	return common, others
}

var findingColumns = []string{"portfolio", "source", "number", "severity", "check_name", "file", "sheet", "row_number",
	"column_letters", "field", "building", "raw", "message", "fix"}

// Findings stores findings of a source of this load.
func (l *Load) Findings(ctx context.Context, source int64, fs []finding.Finding) error {
	if err := l.settle(ctx); err != nil {
		return err
	}
	if _, ok := l.findings[source]; !ok {
		return errNoSource
	}
	r := &rows{columns: findingColumns, n: len(fs), encode: func(e *encoder, i int) error {
		f := &fs[i]
		e.text(l.portfolio)
		e.bigint(source)
		e.integer(int32(l.findings[source] + i + 1))
		for _, s := range [...]string{f.Severity.String(), f.Check, f.File, f.Sheet} {
			e.text(s)
		}
		e.integer(int32(f.Row))
		for _, s := range [...]string{f.Column, f.Field, f.Building, f.Raw, f.Text, f.Fix} {
			e.text(s)
		}
		return nil
	}}
	if _, err := l.s.copyInto(ctx, l.tx, "finding", r); err != nil {
		return fmt.Errorf("store findings: %w", err)
	}
	l.findings[source] += len(fs)
	return nil
}

// Commit makes the load permanent.
func (l *Load) Commit(ctx context.Context) (LoadSummary, error) {
	if err := l.settle(ctx); err != nil {
		return LoadSummary{}, err
	}
	l.s.busy = false
	if err := l.tx.Commit(ctx); err != nil {
		return LoadSummary{}, fmt.Errorf("commit the load: %w", err)
	}
	return l.summary, nil
}

// Rollback undoes the load; after Commit it does nothing. It works also when the
// command's context is over.
func (l *Load) Rollback() {
	_ = l.wait() // what went wrong is undone
	ctx, cancel := context.WithTimeout(context.Background(), 10*time.Second)
	defer cancel()
	if err := l.tx.Rollback(ctx); !errors.Is(err, pgx.ErrTxClosed) {
		l.s.busy = false
	}
}
