package store

import (
	"context"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"slices"
	"strings"

	"github.com/jackc/pgx/v5"
	"github.com/jackc/pgx/v5/pgtype"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/finding"
)

// counting keeps records of superseded sources out of a query of portfolio $1.
const counting = ` and sheet not in (select h.sheet from kelvinrow.superseded x join kelvinrow.sheet h using (portfolio, source) where x.portfolio = $1)`

// countingSource does the same for a query of sources or findings s.
const countingSource = ` and not exists (select from kelvinrow.superseded x where x.portfolio = s.portfolio and x.source = s.source)`

// Count returns how many buildings a portfolio has.
func (s *Store) Count(ctx context.Context, portfolio string) (n int, err error) {
	err = s.within(ctx, portfolio, true, func(tx pgx.Tx) error {
		return tx.QueryRow(ctx, "select count(distinct building) from kelvinrow.record where portfolio = $1"+counting, portfolio).Scan(&n)
	})
	return n, err
}

// Buildings yields the buildings of a portfolio in byte order of their ids, each
// merged from all records about it. They come from one snapshot, held until the
// last is taken.
func (s *Store) Buildings(ctx context.Context, portfolio string, yield func(*building.Building) error) error {
	return s.Groups(ctx, portfolio, func(b *building.Building, _ []building.Record) error { return yield(b) })
}

// Groups yields what Buildings does, and with each building the records it is
// merged from, which are used again after the call.
func (s *Store) Groups(ctx context.Context, portfolio string, yield func(*building.Building, []building.Record) error) error {
	return s.within(ctx, portfolio, true, func(tx pgx.Tx) error { return groups(ctx, tx, portfolio, "", nil, yield) })
}

// groups yields the buildings among those that a condition leaves, whose
// arguments count from $2.
func groups(ctx context.Context, tx pgx.Tx, portfolio, condition string, args []any, yield func(*building.Building, []building.Record) error) error {
	var group []building.Record
	flush := func() error {
		if len(group) == 0 {
			return nil
		}
		err := yield(building.Merge(group[0].Building, group), group)
		group = group[:0]
		return err
	}
	err := records(ctx, tx, portfolio, condition, args, func(r building.Record) error {
		if len(group) > 0 && group[0].Building != r.Building {
			if err := flush(); err != nil {
				return err
			}
		}
		group = append(group, r)
		return nil
	})
	if err != nil {
		return err
	}
	return flush()
}

// InputsHash is a hash, in hex, of all that an estimate can see of a portfolio.
// Loads that come to the same buildings come to the same hash.
func (s *Store) InputsHash(ctx context.Context, portfolio string) (string, error) {
	h := sha256.New()
	err := s.Buildings(ctx, portfolio, func(b *building.Building) error {
		b.WriteHash(h)
		return nil
	})
	if err != nil {
		return "", err
	}
	return hex.EncodeToString(h.Sum(nil)), nil
}

// Building returns one building and the records it is merged from; a
// *NotFoundError where there is none.
func (s *Store) Building(ctx context.Context, portfolio, id string) (*building.Building, []building.Record, error) {
	id = clean(id)
	var found []building.Record
	var near []string
	err := s.within(ctx, portfolio, true, func(tx pgx.Tx) error {
		err := records(ctx, tx, portfolio, "building = $2", []any{id}, func(r building.Record) error {
			found = append(found, r)
			return nil
		})
		if err != nil || len(found) > 0 {
			return err
		}
		near, err = nearIDs(ctx, tx, portfolio, id)
		return err
	})
	if err != nil {
		return nil, nil, err
	}
	if len(found) == 0 {
		return nil, nil, &NotFoundError{portfolio, id, near}
	}
	return building.Merge(id, found), found, nil
}

// recordColumns are the columns a record is read from.
var recordColumns = func() []string {
	columns := slices.Clone(headColumns[1:])
	for f := range building.NumFields {
		columns = append(columns, fieldColumns(building.Field(f))...)
	}
	return columns
}()

// binaryResults asks for the values as the decoders expect them.
var binaryResults = pgx.QueryResultFormats{pgx.BinaryFormatCode}

var errNotBinary = errors.New("the connection gives text where binary values are needed: leave default_query_exec_mode out of the database URL")

// records reads the records of a portfolio that count and meet a condition, ""
// for all, in order of building, sheet and row.
func records(ctx context.Context, tx pgx.Tx, portfolio, condition string, args []any, yield func(building.Record) error) error {
	sheets, err := readSheets(ctx, tx, portfolio)
	if err != nil {
		return err
	}
	query := "select " + columnList(recordColumns) + " from kelvinrow.record where portfolio = $1" + counting
	if condition != "" {
		query += " and " + condition
	}
	args = append([]any{binaryResults, portfolio}, args...)
	rows, err := tx.Query(ctx, query+" order by building, sheet, row_number", args...)
	if err != nil {
		return err
	}
	defer rows.Close()
	d := decoder{types: tx.Conn().TypeMap(), sheets: sheets, interned: map[string]string{}}
	for rows.Next() {
		if rows.FieldDescriptions()[0].Format != pgtype.BinaryFormatCode {
			return errNotBinary
		}
		r, err := d.record(rows.RawValues())
		if err != nil {
			return fmt.Errorf("read a record: %w", err)
		}
		if err := yield(r); err != nil {
			return err
		}
	}
	return rows.Err()
}

func readSheets(ctx context.Context, tx pgx.Tx, portfolio string) (map[int64]*building.Sheet, error) {
	rows, err := tx.Query(ctx, `select h.sheet, h.load, s.file, h.name, h.file_date, h.columns
		from kelvinrow.sheet h join kelvinrow.source s using (portfolio, source) where portfolio = $1`, portfolio)
	if err != nil {
		return nil, err
	}
	sheets := map[int64]*building.Sheet{}
	sh, columns := &building.Sheet{}, map[string]string{}
	_, err = pgx.ForEachRow(rows, []any{&sh.ID, &sh.LoadID, &sh.File, &sh.Name, &sh.FileDate, &columns}, func() error {
		c := *sh
		for key, letters := range columns {
			if f, ok := building.FieldByKey(key); ok {
				c.Columns[f] = letters
			}
		}
		clear(columns)
		sheets[c.ID] = &c
		return nil
	})
	return sheets, err
}

// Findings returns what the loads of a portfolio found, in order of place.
func (s *Store) Findings(ctx context.Context, portfolio string) (out []finding.Finding, err error) {
	err = s.within(ctx, portfolio, true, func(tx pgx.Tx) error {
		rows, err := tx.Query(ctx, `select severity, check_name, file, sheet, row_number, column_letters, field, building, raw, message, fix
			from kelvinrow.finding s where portfolio = $1`+countingSource+` order by source, number`, portfolio)
		if err != nil {
			return err
		}
		var f finding.Finding
		var severity string
		_, err = pgx.ForEachRow(rows, []any{&severity, &f.Check, &f.File, &f.Sheet, &f.Row, &f.Column, &f.Field, &f.Building, &f.Raw, &f.Text, &f.Fix}, func() error {
			f.Severity, _ = finding.SeverityByWord(severity) // the table checks it
			out = append(out, f)
			return nil
		})
		return err
	})
	finding.Sort(out)
	return out, err
}

// NotFoundError says that a portfolio has no such building, and which ids are
// like it.
type NotFoundError struct {
	Portfolio, ID string
	Near          []string
}

func (e *NotFoundError) Error() string {
	s := fmt.Sprintf("portfolio %q has no building %q", e.Portfolio, e.ID)
	if len(e.Near) > 0 {
		s += "; did you mean " + strings.Join(e.Near, ", ") + "?"
	}
	return s
}
