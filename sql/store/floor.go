package store

import (
	"bytes"
	"context"
	"io"
	"time"

	"github.com/jackc/pgx/v5"

	"kelvinrow/estimate/building"
)

// CopyFloor measures the least that storing a portfolio's records can cost: it
// copies the same rows, encoded beforehand, into a bare table without keys, and
// undoes it. It returns the seconds that took. For benchmarks.
func (s *Store) CopyFloor(ctx context.Context, portfolio string) (seconds float64, err error) {
	var all []building.Record
	err = s.within(ctx, portfolio, true, func(tx pgx.Tx) error {
		return records(ctx, tx, portfolio, "", nil, func(r building.Record) error {
			all = append(all, r)
			return nil
		})
	})
	if err != nil {
		return 0, err
	}
	err = s.within(ctx, portfolio, false, func(tx pgx.Tx) error {
		seconds, err = floor(ctx, tx, "record", recordRows(portfolio, all))
		return err
	})
	return seconds, err
}

// floor times COPY of rows into a table like the given one, but for its keys.
func floor(ctx context.Context, tx pgx.Tx, table string, r *rows) (seconds float64, err error) {
	if _, err := tx.Exec(ctx, "create temporary table copy_floor on commit drop as select * from kelvinrow."+table+" with no data"); err != nil {
		return 0, err
	}
	encoded, err := io.ReadAll(r)
	if err != nil {
		return 0, err
	}
	began := time.Now()
	_, err = tx.Conn().PgConn().CopyFrom(ctx, bytes.NewReader(encoded), "copy pg_temp.copy_floor ("+columnList(r.columns)+") from stdin (format binary)")
	return time.Since(began).Seconds(), err
}
