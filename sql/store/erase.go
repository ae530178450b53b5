package store

import (
	"context"
	"fmt"
	"strings"

	"github.com/jackc/pgx/v5"
)

// Erase removes a building with all its history: its rows, what was found in
// them, and its estimates in all runs, whose other buildings stay. Its file must
// be corrected too, or the next load of a changed version brings it back. A
// *NotFoundError where there is nothing of it.
func (s *Store) Erase(ctx context.Context, portfolio, id string) error {
	id = clean(id)
	return s.within(ctx, portfolio, false, func(tx pgx.Tx) error {
		removed := int64(0)
		for _, sql := range []string{
			// Findings quote cells; some are about the row and name no building.
			`delete from kelvinrow.finding f using kelvinrow.record r, kelvinrow.sheet h
				where r.portfolio = $1 and r.building = $2 and h.portfolio = $1 and h.sheet = r.sheet
				and f.portfolio = $1 and f.source = h.source and f.sheet = h.name and f.row_number = r.row_number`,
			"delete from kelvinrow.finding where portfolio = $1 and building = $2",
			"delete from kelvinrow.record where portfolio = $1 and building = $2",
			"delete from kelvinrow.run_building where portfolio = $1 and id = $2",
			// What runs keep beside quotes findings: their workbooks cannot be written
			// again with those.
			"update kelvinrow.run set options = '' where portfolio = $1 and $2 <> '' and options <> ''",
		} {
			tag, err := tx.Exec(ctx, sql, portfolio, id)
			if err != nil {
				return fmt.Errorf("erase building %s: %w", id, err)
			}
			if !strings.HasPrefix(sql, "update") {
				removed += tag.RowsAffected()
			}
		}
		if removed > 0 {
			return nil
		}
		near, err := nearIDs(ctx, tx, portfolio, id)
		if err != nil {
			return err
		}
		return &NotFoundError{portfolio, id, near}
	})
}

// Prune removes all but the newest runs of a portfolio, of which it keeps at
// least one, and returns how many it removed.
func (s *Store) Prune(ctx context.Context, portfolio string, keep int) (removed int, err error) {
	err = s.within(ctx, portfolio, false, func(tx pgx.Tx) error {
		// Numbers are given under the same lock. The newest run stays, or its
		// number would be given again.
		if err := s.serialise(ctx, tx, "run", portfolio); err != nil {
			return err
		}
		var upTo int
		err := tx.QueryRow(ctx, `select coalesce(max(run), 0) from
			(select run from kelvinrow.run where portfolio = $1 order by run desc offset $2) r`, portfolio, max(keep, 1)).Scan(&upTo)
		if err != nil {
			return err
		}
		if _, err := tx.Exec(ctx, "delete from kelvinrow.run_building where portfolio = $1 and run <= $2", portfolio, upTo); err != nil {
			return err
		}
		tag, err := tx.Exec(ctx, "delete from kelvinrow.run where portfolio = $1 and run <= $2", portfolio, upTo)
		if err != nil {
			return err
		}
		removed = int(tag.RowsAffected())
		_, err = tx.Exec(ctx, `delete from kelvinrow.assumptions a where a.portfolio = $1
			and not exists (select from kelvinrow.run r where r.portfolio = $1 and r.assumptions = a.version)`, portfolio)
		return err
	})
	if err != nil {
		return 0, fmt.Errorf("prune runs of portfolio %q: %w", portfolio, err)
	}
	return removed, nil
}
