package migrate_test

import (
	"context"
	"errors"
	"fmt"
	"os"
	"os/exec"
	"strings"
	"testing"
	"testing/fstest"

	"github.com/jackc/pgx/v5"
	"github.com/jackc/pgx/v5/pgconn"

	"kelvinrow/sql/dbtest"
	"kelvinrow/sql/migrate"
)

// With this variable set, the test binary is a program that migrates a database.
const migrateVariable = "KELVINROW_TEST_MIGRATE"

func TestMain(m *testing.M) {
	if url := os.Getenv(migrateVariable); url != "" {
		conn, err := pgx.Connect(context.Background(), url)
		if err == nil {
			err = migrate.Up(context.Background(), conn)
		}
		if err != nil {
			fmt.Println(err)
			os.Exit(1)
		}
		os.Exit(0)
	}
	dbtest.Main(m)
}

func connect(t *testing.T, url string) *pgx.Conn {
	t.Helper()
	conn, err := pgx.Connect(t.Context(), url)
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { conn.Close(context.WithoutCancel(t.Context())) })
	return conn
}

func execute(t *testing.T, conn *pgx.Conn, sql string) {
	t.Helper()
	if _, err := conn.Exec(t.Context(), sql); err != nil {
		t.Fatal(err)
	}
}

func one[T any](t *testing.T, conn *pgx.Conn, sql string) (v T) {
	t.Helper()
	if err := conn.QueryRow(t.Context(), sql).Scan(&v); err != nil {
		t.Fatal(err)
	}
	return v
}

func TestConcurrentProcessesMigrateOnce(t *testing.T) {
	t.Parallel()
	url := dbtest.Empty(t)
	var programs []*exec.Cmd
	var outputs []*strings.Builder
	for range 4 {
		cmd := exec.Command(os.Args[0])
		cmd.Env = append(os.Environ(), migrateVariable+"="+url)
		out := &strings.Builder{}
		cmd.Stdout, cmd.Stderr = out, out
		if err := cmd.Start(); err != nil {
			t.Fatal(err)
		}
		programs, outputs = append(programs, cmd), append(outputs, out)
	}
	for i, p := range programs {
		if err := p.Wait(); err != nil {
			t.Errorf("program %d: %v: %s", i, err, outputs[i])
		}
	}
	conn := connect(t, url)
	if n := one[int](t, conn, "select count(*) from kelvinrow.migration"); n != migrate.Count() {
		t.Errorf("%d migrations are on record, want %d", n, migrate.Count())
	}
}

func TestNewerDatabaseIsRefused(t *testing.T) {
	t.Parallel()
	conn := connect(t, dbtest.URL(t))
	execute(t, conn, "insert into kelvinrow.migration values (9999, 'later', 'x')")
	if err := migrate.Up(t.Context(), conn); err == nil || !strings.Contains(err.Error(), "at schema 9999, newer than this program's") {
		t.Errorf("got %v", err)
	}
}

func TestChangedMigrationIsRefused(t *testing.T) {
	t.Parallel()
	conn := connect(t, dbtest.URL(t))
	execute(t, conn, "update kelvinrow.migration set checksum = 'x' where version = 1")
	if err := migrate.Up(t.Context(), conn); err == nil || !strings.Contains(err.Error(), "0001_store.sql") {
		t.Errorf("got %v", err)
	}
}

func TestFailedMigrationIsUndoneAndTheLockFree(t *testing.T) {
	t.Parallel()
	conn := connect(t, dbtest.URL(t))
	err := migrate.UpWith(t.Context(), conn, "next.sql", "create table kelvinrow.half (); select 1/0")
	var pg *pgconn.PgError
	if !errors.As(err, &pg) || pg.Code != "22012" || !strings.Contains(err.Error(), "next.sql") {
		t.Errorf("got %v", err)
	}
	if one[bool](t, conn, "select to_regclass('kelvinrow.half') is not null") {
		t.Error("a failed migration left a table")
	}
	if n := one[int](t, conn, "select count(*) from kelvinrow.migration"); n != migrate.Count() {
		t.Errorf("%d migrations on record, want %d", n, migrate.Count())
	}
	if n := one[int](t, conn, "select count(*) from pg_locks where locktype = 'advisory' and database = (select oid from pg_database where datname = current_database())"); n != 0 {
		t.Error("the lock is still held")
	}
	if err := migrate.UpWith(t.Context(), conn, "next.sql", "create table kelvinrow.whole ()"); err != nil {
		t.Fatal(err)
	}
}

func TestFilesAreNumberedWithoutAGap(t *testing.T) {
	t.Parallel()
	if _, err := migrate.Checksums(fstest.MapFS{"0001_a.sql": {}, "0003_c.sql": {}}); err == nil {
		t.Error("a gap is not noticed")
	}
	var sums []string
	for _, text := range []string{"select 1;\nselect 2;\n", "select 1;\r\nselect 2;\r\n", "select 1;\nselect 3;\n"} {
		sum, err := migrate.Checksums(fstest.MapFS{"0001_a.sql": {Data: []byte(text)}})
		if err != nil {
			t.Fatal(err)
		}
		sums = append(sums, sum[0])
	}
	if sums[0] != sums[1] || sums[0] == sums[2] {
		t.Errorf("checksums must see changes of text and no others: %v", sums)
	}
}

// Where the account may not make roles, the tables are its own alone.
func TestAccountThatMayNotMakeRoles(t *testing.T) {
	t.Parallel()
	url := dbtest.Empty(t)
	admin := connect(t, url)
	name := fmt.Sprintf("plain_%d", os.Getpid())
	database := one[string](t, admin, "select current_database()")
	execute(t, admin, fmt.Sprintf("create role %s; grant create on database %s to %s; grant %s to current_user", name, database, name, name))
	t.Cleanup(func() {
		if _, err := admin.Exec(context.Background(), fmt.Sprintf("reset role; drop owned by %s cascade; drop role %s", name, name)); err != nil {
			t.Error(err)
		}
	})
	execute(t, admin, "set role "+name)
	if err := migrate.Up(t.Context(), admin); err != nil {
		t.Fatal(err)
	}
	if !one[bool](t, admin, "select row_security_active('kelvinrow.record')") {
		t.Error("the owner is not held by row-level security")
	}
}

func TestRolesMayDoWhatTheyNeedAndNoMore(t *testing.T) {
	t.Parallel()
	conn := connect(t, dbtest.URL(t))
	for _, c := range []struct {
		role, table, may string
	}{
		{"reader", "record", "select"},
		{"reader", "run_building", "select"},
		{"reader", "migration", "select"},
		{"loader", "portfolio", "select insert update"},
		{"loader", "source", "select insert delete"},
		{"loader", "sheet", "select insert delete"},
		{"loader", "record", "select insert delete"}, // rows are never changed
		{"loader", "finding", "select insert delete"},
		{"loader", "superseded", "select insert delete"},
		{"reader", "superseded", "select"},
		{"loader", "run", "select"},
		{"loader", "run_building", "select"},
		{"screener", "record", "select insert delete"},
		{"screener", "run", "select insert"},
		{"screener", "run_building", "select insert"},
		{"screener", "migration", "select"},
	} {
		var may []string
		for _, right := range []string{"select", "insert", "update", "delete", "truncate", "references", "trigger"} {
			var has bool
			err := conn.QueryRow(t.Context(), "select has_table_privilege($1, $2, $3)", "kelvinrow_"+c.role, "kelvinrow."+c.table, right).Scan(&has)
			if err != nil {
				t.Fatal(err)
			}
			if has {
				may = append(may, right)
			}
		}
		if got := strings.Join(may, " "); got != c.may {
			t.Errorf("%s may %s on %s, want %s", c.role, got, c.table, c.may)
		}
	}
}

// Every table but the list of migrations begins its key with the portfolio and is
// closed to other portfolios.
func TestPortfolioLeadsEveryKey(t *testing.T) {
	t.Parallel()
	conn := connect(t, dbtest.URL(t))
	rows, err := conn.Query(t.Context(), `select c.relname, c.relrowsecurity and c.relforcerowsecurity,
			coalesce((select a.attname::text from pg_index i join pg_attribute a on a.attrelid = c.oid and a.attnum = i.indkey[0]
				where i.indrelid = c.oid and i.indisprimary), ''),
			(select count(*) from pg_policy p where p.polrelid = c.oid)
		from pg_class c where c.relnamespace = 'kelvinrow'::regnamespace and c.relkind = 'r' and c.relname <> 'migration'`)
	if err != nil {
		t.Fatal(err)
	}
	var table, first string
	var secured bool
	var policies, n int
	if _, err := pgx.ForEachRow(rows, []any{&table, &secured, &first, &policies}, func() error {
		n++
		if !secured || first != "portfolio" || policies == 0 {
			t.Errorf("%s: key begins with %q, row-level security forced %v, %d policies", table, first, secured, policies)
		}
		return nil
	}); err != nil {
		t.Fatal(err)
	}
	if n < 7 {
		t.Errorf("only %d tables", n)
	}
}
