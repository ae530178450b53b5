package store

import (
	"context"
	"errors"
	"fmt"
	"time"

	"github.com/jackc/pgx/v5"
)

// Assumptions are one version of what runs rest on.
type Assumptions struct {
	Version string // hash of the content
	Name    string // where it came from
	Stored  time.Time
	Content []byte // as the caller keeps it
}

// ErrNoAssumptions is returned where no such version is stored.
var ErrNoAssumptions = errors.New("no such version of the assumptions is stored")

// keepAssumptions stores a version unless it is there already.
func keepAssumptions(ctx context.Context, tx pgx.Tx, portfolio string, a *Assumptions) error {
	_, err := tx.Exec(ctx, `insert into kelvinrow.assumptions (portfolio, version, name, content)
		values ($1, $2, $3, $4) on conflict do nothing`, portfolio, a.Version, a.Name, a.Content)
	return err
}

// Assumptions reads the version that begins with prefix, which must be the only
// one.
func (s *Store) Assumptions(ctx context.Context, portfolio, prefix string) (*Assumptions, error) {
	var found []Assumptions
	err := s.within(ctx, portfolio, true, func(tx pgx.Tx) error {
		rows, err := tx.Query(ctx, `select version, name, stored_at, content from kelvinrow.assumptions
			where portfolio = $1 and starts_with(version, $2) order by version limit 2`, portfolio, prefix)
		if err != nil {
			return err
		}
		found, err = pgx.CollectRows(rows, func(row pgx.CollectableRow) (a Assumptions, err error) {
			return a, row.Scan(&a.Version, &a.Name, &a.Stored, &a.Content)
		})
		return err
	})
	switch {
	case err != nil:
		return nil, fmt.Errorf("read assumptions of portfolio %q: %w", portfolio, err)
	case len(found) == 0:
		return nil, fmt.Errorf("version %q of portfolio %q: %w", prefix, portfolio, ErrNoAssumptions)
	case len(found) > 1:
		return nil, fmt.Errorf("version %q of portfolio %q is the beginning of several: give more of it", prefix, portfolio)
	}
	return &found[0], nil
}
