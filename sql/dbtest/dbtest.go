// Package dbtest gives each test a database of its own: a copy of a migrated
// template, on a private Postgres that is started once per test binary. No
// server is a failure, never a skip.
package dbtest

import (
	"context"
	"errors"
	"fmt"
	"io"
	"net/url"
	"os"
	"os/exec"
	"sync"
	"sync/atomic"
	"syscall"
	"testing"

	"github.com/jackc/pgx/v5"

	"kelvinrow/sql/cluster"
	"kelvinrow/sql/migrate"
)

// guardVariable makes the test binary the guard of another one's server.
const guardVariable = "KELVINROW_TEST_GUARD"

// Main runs the tests of a package and stops the server they started:
//
//	func TestMain(m *testing.M) { dbtest.Main(m) }
func Main(m *testing.M) {
	if dir := os.Getenv(guardVariable); dir != "" {
		guard(dir)
	}
	server.main = true
	status := m.Run()
	if err := shutdown(); err != nil {
		fmt.Fprintln(os.Stderr, "dbtest:", err)
		status = 1
	}
	os.Exit(status)
}

var server struct {
	main     bool // Main runs: what is started will be stopped
	once     sync.Once
	err      error
	url      string
	number   atomic.Int64
	dir      string
	cluster  *cluster.Cluster
	lifeline io.Closer // the guard acts when this closes
	guard    *exec.Cmd
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

// URL returns the connection string of a fresh, migrated database, which is
// dropped with the test.
func URL(t testing.TB) string {
	t.Helper()
	started(t)
	return create(t, template())
}

// Empty returns the connection string of a fresh database with nothing in it,
// which is dropped with the test.
func Empty(t testing.TB) string {
	t.Helper()
	started(t)
	return create(t, "template0")
}

func started(t testing.TB) {
	t.Helper()
	if !server.main {
		t.Fatal("the package's TestMain must call dbtest.Main")
	}
	_, measured := t.(*testing.B)
	server.once.Do(func() { server.err = start(measured) })
	if server.err != nil {
		t.Fatalf("no Postgres to test with: %v", server.err)
	}
}

func create(t testing.TB, template string) string {
	t.Helper()
	name := fmt.Sprintf("kelvinrow_test_%d_%d", os.Getpid(), server.number.Add(1))
	if err := administer(fmt.Sprintf("create database %s template %s", name, template)); err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		if err := administer(fmt.Sprintf("drop database %s with (force)", name)); err != nil {
			t.Error(err)
		}
	})
	u, err := withDatabase(server.url, name)
	if err != nil {
		t.Fatal(err)
	}
	return u
}

// administer runs one statement on the server.
func administer(sql string) error {
	ctx := context.Background() // a test's own is over when it cleans up
	conn, err := pgx.Connect(ctx, server.url)
	if err != nil {
		return err
	}
	defer conn.Close(ctx)
	_, err = conn.Exec(ctx, sql)
	return err
}

func template() string { return fmt.Sprintf("kelvinrow_template_%d", os.Getpid()) }

func withDatabase(server, name string) (string, error) {
	u, err := url.Parse(server)
	if err != nil {
		return "", errors.New("DATABASE_URL must begin with postgres://") // without its password
	}
	u.Path = "/" + name
	return u.String(), nil
}

// start starts the server, or finds it. A private one for tests need not outlive
// a power cut; one that is measured works as users' do.
func start(measured bool) (err error) {
	ctx := context.Background()
	server.url = os.Getenv("DATABASE_URL")
	if server.url == "" {
		if server.dir, err = tempDir(); err != nil {
			return err
		}
		if err := startGuard(); err != nil {
			return err
		}
		if server.cluster, err = cluster.Start(ctx, server.dir); err != nil {
			return err
		}
		server.url = server.cluster.URL()
		if !measured {
			for _, sql := range []string{"alter system set fsync = off", "alter system set full_page_writes = off", "select pg_reload_conf()"} {
				if err := administer(sql); err != nil {
					return err
				}
			}
		}
	}
	if err := administer("create database " + template() + " template template0"); err != nil {
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

// startGuard starts a process that stops the server if this one dies without
// doing so: a test that runs out of time takes the whole program down.
func startGuard() error {
	cmd := exec.Command(os.Args[0])
	cmd.Env = append(os.Environ(), guardVariable+"="+server.dir)
	cmd.SysProcAttr = &syscall.SysProcAttr{Setsid: true} // Ctrl-C is not for the guard
	lifeline, err := cmd.StdinPipe()
	if err != nil {
		return err
	}
	if err := cmd.Start(); err != nil {
		return err
	}
	server.lifeline, server.guard = lifeline, cmd
	return nil
}

// guard waits until the process that started it is gone or done.
func guard(dir string) {
	_, _ = io.Copy(io.Discard, os.Stdin) // ends with the other process
	err := errors.Join(cluster.Stop(context.Background(), dir), os.RemoveAll(dir))
	if err != nil {
		os.Exit(1)
	}
	os.Exit(0)
}

func shutdown() error {
	var errs []error
	if server.url != "" && os.Getenv("DATABASE_URL") != "" {
		errs = append(errs, administer("drop database if exists "+template())) // a private server goes as a whole
	}
	if server.cluster != nil {
		errs = append(errs, server.cluster.Release(context.Background()))
	}
	if server.guard != nil {
		server.lifeline.Close()
		if err := server.guard.Wait(); err != nil {
			errs = append(errs, fmt.Errorf("stop the server or remove %s: %w", server.dir, err))
		}
	}
	return errors.Join(errs...)
}
