// Package dbtest gives each test a database of its own: a copy of a migrated
// template, on a private Postgres that is started once per test binary. No
// server is a failure, never a skip.
package dbtest

import (
	"context"
	"fmt"
	"net/url"
	"os"
	"sync"
	"sync/atomic"
	"testing"

	"github.com/jackc/pgx/v5"

	"kelvinrow/sql/cluster"
	"kelvinrow/sql/migrate"
)

// Main runs the tests of a package and stops the server they started:
//
//	func TestMain(m *testing.M) { dbtest.Main(m) }
func Main(m *testing.M) {
	status := m.Run()
	if err := shutdown(); err != nil {
		fmt.Fprintln(os.Stderr, "dbtest:", err)
		status = 1
	}
	os.Exit(status)
}

var server struct {
	once    sync.Once
	err     error
	dir     string
	url     string
	cluster *cluster.Cluster
	number  atomic.Int64
}

// Dir makes a folder for a private cluster that the server's account can reach,
// also when the test runs as root. It is short, as socket paths must be, and
// removed with the test.
func Dir(t testing.TB) string {
	t.Helper()
	dir, err := tempDir()
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		if err := os.RemoveAll(dir); err != nil {
			t.Error(err)
		}
	})
	return dir
}

func tempDir() (string, error) {
	dir, err := os.MkdirTemp("", "kelvinrow-test-")
	if err != nil {
		return "", err
	}
	return dir, os.Chmod(dir, 0o711)
}

// URL returns the connection string of a fresh, migrated database. It is dropped
// with the server.
func URL(t testing.TB) string {
	t.Helper()
	server.once.Do(start)
	if server.err != nil {
		t.Fatalf("no Postgres to test with: %v", server.err)
	}
	ctx := context.Background()
	conn, err := pgx.Connect(ctx, server.url)
	if err != nil {
		t.Fatal(err)
	}
	defer conn.Close(ctx)
	name := fmt.Sprintf("kelvinrow_test_%d_%d", os.Getpid(), server.number.Add(1))
	if _, err := conn.Exec(ctx, fmt.Sprintf("create database %s template %s", name, template())); err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		conn, err := pgx.Connect(ctx, server.url)
		if err != nil {
			t.Error(err)
			return
		}
		defer conn.Close(ctx)
		if _, err := conn.Exec(ctx, fmt.Sprintf("drop database %s with (force)", name)); err != nil {
			t.Error(err)
		}
	})
	u, err := withDatabase(server.url, name)
	if err != nil {
		t.Fatal(err)
	}
	return u
}

func template() string { return fmt.Sprintf("kelvinrow_template_%d", os.Getpid()) }

func withDatabase(server, name string) (string, error) {
	u, err := url.Parse(server)
	if err != nil {
		return "", err
	}
	u.Path = "/" + name
	return u.String(), nil
}

func start() {
	ctx := context.Background()
	server.url = os.Getenv("DATABASE_URL")
	if server.url == "" {
		if server.dir, server.err = tempDir(); server.err != nil {
			return
		}
		if server.cluster, server.err = cluster.Start(ctx, server.dir); server.err != nil {
			return
		}
		server.url = server.cluster.URL()
	}
	server.err = makeTemplate(ctx)
}

func makeTemplate(ctx context.Context) error {
	conn, err := pgx.Connect(ctx, server.url)
	if err != nil {
		return err
	}
	defer conn.Close(ctx)
	if _, err := conn.Exec(ctx, "create database "+template()); err != nil {
		return err
	}
	u, err := withDatabase(server.url, template())
	if err != nil {
		return err
	}
	db, err := pgx.Connect(ctx, u)
	if err != nil {
		return err
	}
	defer db.Close(ctx)
	return migrate.Up(ctx, db)
}

func shutdown() error {
	ctx := context.Background()
	if server.url != "" && server.err == nil {
		if conn, err := pgx.Connect(ctx, server.url); err == nil {
			_, _ = conn.Exec(ctx, "drop database if exists "+template()) // a private server goes as a whole
			conn.Close(ctx)
		}
	}
	if server.cluster == nil {
		return nil
	}
	if err := server.cluster.Release(ctx); err != nil {
		return err
	}
	return os.RemoveAll(server.dir)
}
