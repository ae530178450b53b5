// Package store keeps portfolios in Postgres: what was loaded, row by row with
// its origin, and the runs made of it.
package store

import (
	"context"
	"errors"
	"fmt"
	"strings"

	"github.com/jackc/pgx/v5"

	"kelvinrow/sql/migrate"
)

// Store is a connection to a migrated database. It serves one command and is
// not safe for concurrent use.
type Store struct {
	conn *pgx.Conn
	// staged is set where row-level security holds for this account: COPY cannot
	// write into such tables, so rows go through a temporary table.
	staged bool
}

// Open connects to url and brings the schema up to date.
func Open(ctx context.Context, url string) (*Store, error) {
	config, err := pgx.ParseConfig(url)
	if err != nil {
		return nil, fmt.Errorf("database URL: %w", err) // pgx redacts the password
	}
	if config.RuntimeParams["application_name"] == "" {
		config.RuntimeParams["application_name"] = "kelvinrow"
	}
	conn, err := pgx.ConnectConfig(ctx, config)
	if err != nil {
		return nil, fmt.Errorf("connect to the database: %w", err)
	}
	s := &Store{conn: conn}
	if err := s.prepare(ctx); err != nil {
		s.Close()
		return nil, err
	}
	return s, nil
}

func (s *Store) prepare(ctx context.Context) error {
	var version int
	if err := s.conn.QueryRow(ctx, "select current_setting('server_version_num')::int").Scan(&version); err != nil {
		return err
	}
	if version < 140000 {
		return fmt.Errorf("the server is Postgres %d; kelvinrow needs 14 or newer", version/10000)
	}
	if err := migrate.Up(ctx, s.conn); err != nil {
		return err
	}
	return s.conn.QueryRow(ctx, "select row_security_active('kelvinrow.record')").Scan(&s.staged)
}

// Close disconnects. Work that was not committed is undone by the server.
func (s *Store) Close() {
	_ = s.conn.Close(context.Background()) // nothing to do about it
}

// within runs f in a transaction that sees one portfolio.
func (s *Store) within(ctx context.Context, portfolio string, readOnly bool, f func(pgx.Tx) error) error {
	tx, err := s.begin(ctx, portfolio, readOnly)
	if err != nil {
		return err
	}
	defer func() { _ = tx.Rollback(context.WithoutCancel(ctx)) }() // no-op after commit
	if err := f(tx); err != nil {
		return err
	}
	return tx.Commit(ctx)
}

func (s *Store) begin(ctx context.Context, portfolio string, readOnly bool) (pgx.Tx, error) {
	if portfolio == "" || strings.ContainsRune(portfolio, 0) {
		return nil, errors.New("the portfolio needs a name")
	}
	o := pgx.TxOptions{}
	if readOnly {
		o = pgx.TxOptions{IsoLevel: pgx.RepeatableRead, AccessMode: pgx.ReadOnly}
	}
	tx, err := s.conn.BeginTx(ctx, o)
	if err != nil {
		return nil, err
	}
	if _, err := tx.Exec(ctx, "select set_config('kelvinrow.portfolio', $1, true)", portfolio); err != nil {
		_ = tx.Rollback(context.WithoutCancel(ctx)) // the first error tells
		return nil, err
	}
	return tx, nil
}

// copyInto writes rows by COPY, through a temporary table where it must.
func (s *Store) copyInto(ctx context.Context, tx pgx.Tx, table string, columns []string, rows pgx.CopyFromSource) (int64, error) {
	if !s.staged {
		return tx.CopyFrom(ctx, pgx.Identifier{"kelvinrow", table}, columns, rows)
	}
	stage := "stage_" + table
	quoted := make([]string, len(columns))
	for i, c := range columns {
		quoted[i] = pgx.Identifier{c}.Sanitize()
	}
	list := strings.Join(quoted, ", ")
	_, err := tx.Exec(ctx, fmt.Sprintf("create temporary table if not exists %s (like kelvinrow.%s) on commit drop", stage, table))
	if err != nil {
		return 0, err
	}
	n, err := tx.CopyFrom(ctx, pgx.Identifier{stage}, columns, rows)
	if err != nil {
		return 0, err
	}
	if _, err := tx.Exec(ctx, fmt.Sprintf("insert into kelvinrow.%s (%s) select %s from %s", table, list, list, stage)); err != nil {
		return 0, err
	}
	_, err = tx.Exec(ctx, "truncate "+stage)
	return n, err
}

// clean makes text storable: Postgres takes neither NUL nor broken UTF-8.
func clean(s string) string {
	if strings.IndexByte(s, 0) >= 0 {
		s = strings.ReplaceAll(s, "\x00", "")
	}
	return strings.ToValidUTF8(s, "\uFFFD")
}
