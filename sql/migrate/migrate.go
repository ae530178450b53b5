// Package migrate brings a database to the schema this program knows: numbered
// SQL files, each applied once, in order, in a transaction of its own, by one
// program at a time.
package migrate

import (
	"bytes"
	"context"
	"crypto/sha256"
	"embed"
	"encoding/hex"
	"errors"
	"fmt"
	"io/fs"
	"strconv"
	"strings"

	"github.com/jackc/pgx/v5"
)

//go:embed *.sql
var files embed.FS

// lockKey is the advisory lock that all kelvinrow programs migrate under; any
// number will do that nobody else uses.
const lockKey = 0x6b656c76696e // "kelvin"

// step is one numbered file.
type step struct {
	version  int
	name     string
	text     string
	checksum string
}

// Up applies what has not been applied yet.
func Up(ctx context.Context, conn *pgx.Conn) error {
	steps, err := read(files)
	if err != nil {
		return err
	}
	return up(ctx, conn, steps)
}

func up(ctx context.Context, conn *pgx.Conn, steps []step) (err error) {
	if _, err := conn.Exec(ctx, "select pg_advisory_lock($1)", int64(lockKey)); err != nil {
		return fmt.Errorf("wait for other programs to migrate: %w", err)
	}
	defer func() {
		if conn.IsClosed() {
			return // the server dropped the lock with the connection
		}
		_, e := conn.Exec(context.WithoutCancel(ctx), "select pg_advisory_unlock($1)", int64(lockKey))
		err = errors.Join(err, e)
	}()
	applied, err := done(ctx, conn)
	if err != nil {
		return fmt.Errorf("read applied migrations: %w", err)
	}
	if newest := len(steps); len(applied) > 0 && applied[len(applied)-1].version > newest {
		return fmt.Errorf("the database is at schema %d, newer than this program's %d: use a newer kelvinrow", applied[len(applied)-1].version, newest)
	}
	for i, s := range steps {
		if i < len(applied) {
			if applied[i].version != s.version || applied[i].checksum != s.checksum {
				return fmt.Errorf("migration %s differs from the one applied to this database", s.name)
			}
			continue
		}
		if err := apply(ctx, conn, s); err != nil {
			return fmt.Errorf("migration %s: %w", s.name, err)
		}
	}
	return nil
}

// done returns what was applied, in order.
func done(ctx context.Context, conn *pgx.Conn) ([]step, error) {
	var exists bool
	if err := conn.QueryRow(ctx, "select to_regclass('kelvinrow.migration') is not null").Scan(&exists); err != nil || !exists {
		return nil, err
	}
	rows, err := conn.Query(ctx, "select version, name, checksum from kelvinrow.migration order by version")
	if err != nil {
		return nil, err
	}
	return pgx.CollectRows(rows, func(row pgx.CollectableRow) (s step, err error) {
		err = row.Scan(&s.version, &s.name, &s.checksum)
		return s, err
	})
}

func apply(ctx context.Context, conn *pgx.Conn, s step) error {
	return pgx.BeginFunc(ctx, conn, func(tx pgx.Tx) error {
		if _, err := tx.Exec(ctx, s.text); err != nil {
			return err
		}
		_, err := tx.Exec(ctx, "insert into kelvinrow.migration (version, name, checksum) values ($1, $2, $3)", s.version, s.name, s.checksum)
		return err
	})
}

func read(fsys fs.FS) ([]step, error) {
	names, err := fs.Glob(fsys, "*.sql")
	if err != nil {
		return nil, err
	}
	steps := make([]step, len(names))
	for i, name := range names { // Glob sorts
		number, _, _ := strings.Cut(name, "_")
		v, err := strconv.Atoi(number)
		if err != nil || v != i+1 {
			return nil, fmt.Errorf("migration %s: files must be numbered from 1 without a gap", name)
		}
		text, err := fs.ReadFile(fsys, name)
		if err != nil {
			return nil, err
		}
		text = bytes.ReplaceAll(text, []byte("\r\n"), []byte("\n")) // a checkout may have changed them
		sum := sha256.Sum256(text)
		steps[i] = step{v, name, string(text), hex.EncodeToString(sum[:])}
	}
	return steps, nil
}
