package migrate_test

import (
	"context"
	"strings"
	"sync"
	"testing"

	"github.com/jackc/pgx/v5"

	"kelvinrow/sql/dbtest"
	"kelvinrow/sql/migrate"
)

func TestMain(m *testing.M) { dbtest.Main(m) }

func connect(t *testing.T, url string) *pgx.Conn {
	t.Helper()
	conn, err := pgx.Connect(t.Context(), url)
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { conn.Close(context.WithoutCancel(t.Context())) })
	return conn
}

func TestConcurrentProgramsMigrateOnce(t *testing.T) {
	t.Parallel()
	url := dbtest.URL(t)
	conn := connect(t, url)
	if _, err := conn.Exec(t.Context(), "drop schema kelvinrow cascade"); err != nil {
		t.Fatal(err)
	}
	var wg sync.WaitGroup
	for range 5 {
		c := connect(t, url)
		wg.Go(func() {
			if err := migrate.Up(context.Background(), c); err != nil {
				t.Error(err)
			}
		})
	}
	wg.Wait()
	var n, versions int
	if err := conn.QueryRow(t.Context(), "select count(*), max(version) from kelvinrow.migration").Scan(&n, &versions); err != nil {
		t.Fatal(err)
	}
	if n == 0 || n != versions {
		t.Errorf("%d rows for %d versions", n, versions)
	}
}

func TestNewerDatabaseIsRefused(t *testing.T) {
	t.Parallel()
	conn := connect(t, dbtest.URL(t))
	if _, err := conn.Exec(t.Context(), "insert into kelvinrow.migration values (9999, 'later', 'x')"); err != nil {
		t.Fatal(err)
	}
	if err := migrate.Up(t.Context(), conn); err == nil || !strings.Contains(err.Error(), "newer") {
		t.Errorf("got %v", err)
	}
}

func TestChangedMigrationIsRefused(t *testing.T) {
	t.Parallel()
	conn := connect(t, dbtest.URL(t))
	if _, err := conn.Exec(t.Context(), "update kelvinrow.migration set checksum = 'x' where version = 1"); err != nil {
		t.Fatal(err)
	}
	if err := migrate.Up(t.Context(), conn); err == nil || !strings.Contains(err.Error(), "0001_store.sql") {
		t.Errorf("got %v", err)
	}
}
