package store

import (
	"context"
	"fmt"
	"time"

	"github.com/jackc/pgx/v5"
	"github.com/jackc/pgx/v5/pgtype"

	"kelvinrow/estimate/result"
)

// SaveRun stores a run and gives it its number: the next of its portfolio. It is
// there whole or not at all: publish, if not nil, is called when everything is
// written and the number is known, and its error undoes the run. The assumptions it
// rests on, if given, are kept with it.
func (s *Store) SaveRun(ctx context.Context, run *result.Run, a *Assumptions, buildings []result.Building, publish func() error) error {
	for i := range buildings {
		if n := len(buildings[i].Measures); n != 0 && n != len(run.Measures) {
			return fmt.Errorf("store a run: building %s has %d measures, the run %d", buildings[i].ID, n, len(run.Measures))
		}
	}
	run.Time = run.Time.UTC().Truncate(time.Microsecond) // as finely as Postgres keeps it
	return s.within(ctx, run.Portfolio, false, func(tx pgx.Tx) error {
		if err := s.saveRun(ctx, tx, run, buildings); err != nil {
			return fmt.Errorf("store a run of portfolio %q: %w", run.Portfolio, err)
		}
		if a != nil {
			if err := keepAssumptions(ctx, tx, run.Portfolio, a); err != nil {
				return fmt.Errorf("store the assumptions of portfolio %q: %w", run.Portfolio, err)
			}
		}
		if publish == nil {
			return nil
		}
		return publish()
	})
}

func (s *Store) saveRun(ctx context.Context, tx pgx.Tx, run *result.Run, buildings []result.Building) error {
	if err := s.serialise(ctx, tx, "run", run.Portfolio); err != nil { // or two runs would take one number
		return err
	}
	var number int
	err := tx.QueryRow(ctx, `insert into kelvinrow.run
		(portfolio, run, ran_at, version, climate, assumptions, inputs, yardstick, seed, measures, buildings, failed, files, options)
		select $1, coalesce((select max(run) from kelvinrow.run where portfolio = $1), 0) + 1, $2, $3, $4, $5, $6, $7, $8, $9, $10, $11, $12, $13
		returning run`,
		run.Portfolio, run.Time, run.Version, run.Climate, run.Assumptions, run.Inputs, run.Yardstick, run.Seed,
		list(run.Measures), run.Buildings, run.Failed, list(run.Files), notNull(run.Options)).Scan(&number)
	if err != nil {
		return err
	}
	if _, err := s.copyInto(ctx, tx, "run_building", buildingRows(run.Portfolio, number, buildings)); err != nil {
		return err
	}
	run.Number = number
	return nil
}

// notNull makes an empty value of none: the column is never null.
func notNull(b []byte) []byte {
	if b == nil {
		return []byte{}
	}
	return b
}

func list(s []string) []string {
	if s == nil {
		return []string{}
	}
	return s
}

const runColumns = "portfolio, run, ran_at, version, climate, assumptions, inputs, yardstick, seed, measures, buildings, failed, files"

func scanRun(row pgx.CollectableRow) (r result.Run, err error) {
	err = row.Scan(&r.Portfolio, &r.Number, &r.Time, &r.Version, &r.Climate, &r.Assumptions, &r.Inputs, &r.Yardstick,
		&r.Seed, &r.Measures, &r.Buildings, &r.Failed, &r.Files, &r.Options)
	if len(r.Options) == 0 {
		r.Options = nil
	}
	r.Time = r.Time.UTC()
	return r, err
}

// Runs lists the runs of a portfolio, oldest first, without their options.
func (s *Store) Runs(ctx context.Context, portfolio string) (out []result.Run, err error) {
	err = s.within(ctx, portfolio, true, func(tx pgx.Tx) error {
		rows, err := tx.Query(ctx, "select "+runColumns+", ''::bytea from kelvinrow.run where portfolio = $1 order by run", portfolio)
		if err != nil {
			return err
		}
		out, err = pgx.CollectRows(rows, scanRun)
		return err
	})
	return out, err
}

// Run reads one run back, its buildings in byte order of their ids.
func (s *Store) Run(ctx context.Context, portfolio string, number int) (*result.Run, []result.Building, error) {
	var run result.Run
	var buildings []result.Building
	err := s.within(ctx, portfolio, true, func(tx pgx.Tx) error {
		rows, err := tx.Query(ctx, "select "+runColumns+", options from kelvinrow.run where portfolio = $1 and run = $2", portfolio, number)
		if err != nil {
			return err
		}
		if run, err = pgx.CollectExactlyOneRow(rows, scanRun); err != nil {
			return fmt.Errorf("run %d of portfolio %q: %w", number, portfolio, err)
		}
		buildings, err = readBuildings(ctx, tx, &run)
		return err
	})
	if err != nil {
		return nil, nil, err
	}
	return &run, buildings, nil
}

func readBuildings(ctx context.Context, tx pgx.Tx, run *result.Run) ([]result.Building, error) {
	rows, err := tx.Query(ctx, "select "+columnList(buildingColumns)+" from kelvinrow.run_building where portfolio = $1 and run = $2 order by id",
		binaryResults, run.Portfolio, run.Number)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	buildings := make([]result.Building, 0, run.Buildings)
	interned := map[string]string{}
	for rows.Next() {
		if rows.FieldDescriptions()[0].Format != pgtype.BinaryFormatCode {
			return nil, errNotBinary
		}
		buildings = append(buildings, result.Building{})
		b := &buildings[len(buildings)-1]
		if err := decodeBuilding(b, rows.RawValues(), interned); err != nil {
			return nil, fmt.Errorf("read building %s of run %d: %w", b.ID, run.Number, err)
		}
	}
	return buildings, rows.Err()
}
