package store

import (
	"context"
	"time"

	"github.com/jackc/pgx/v5"

	"kelvinrow/estimate/building"
)

// CopyFloor measures the least that storing a portfolio's records can cost: it
// copies the same rows again into a bare table without keys, and undoes it. It
// returns the seconds that took. For benchmarks.
func (s *Store) CopyFloor(ctx context.Context, portfolio string) (seconds float64, err error) {
	var all []building.Record
	err = s.within(ctx, portfolio, true, func(tx pgx.Tx) error {
		return records(ctx, tx, portfolio, "", func(r building.Record) error {
			all = append(all, r)
			return nil
		})
	})
	if err != nil {
		return 0, err
	}
	var present [building.NumFields]bool
	for i := range all {
		for _, v := range all[i].Values {
			present[v.Field] = true
		}
	}
	err = s.within(ctx, portfolio, false, func(tx pgx.Tx) error {
		if _, err := tx.Exec(ctx, "create temporary table copy_floor on commit drop as select * from kelvinrow.record with no data"); err != nil {
			return err
		}
		began := time.Now()
		rows := newRecordRows(portfolio, all, &present)
		if _, err := tx.CopyFrom(ctx, pgx.Identifier{"copy_floor"}, rows.columns, rows); err != nil {
			return err
		}
		seconds = time.Since(began).Seconds()
		return nil
	})
	return seconds, err
}
