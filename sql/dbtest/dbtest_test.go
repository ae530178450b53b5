package dbtest

import (
	"bufio"
	"context"
	"errors"
	"fmt"
	"os"
	"os/exec"
	"strings"
	"syscall"
	"testing"
	"time"

	"github.com/jackc/pgx/v5"
)

func TestMain(m *testing.M) { Main(m) }

func query[T any](t *testing.T, url, sql string) (v T) {
	t.Helper()
	conn, err := pgx.Connect(t.Context(), url)
	if err != nil {
		t.Fatal(err)
	}
	defer conn.Close(context.WithoutCancel(t.Context()))
	if err := conn.QueryRow(t.Context(), sql).Scan(&v); err != nil {
		t.Fatal(err)
	}
	return v
}

func TestEachDatabaseIsItsOwn(t *testing.T) {
	t.Parallel()
	one, two := URL(t), URL(t)
	query[string](t, one, "insert into kelvinrow.portfolio values ('p') returning portfolio")
	if n := query[int](t, two, "select count(*) from kelvinrow.portfolio"); n != 0 {
		t.Errorf("%d portfolios in a fresh database", n)
	}
	if query[bool](t, Empty(t), "select to_regnamespace('kelvinrow') is not null") {
		t.Error("an empty database has our schema")
	}
	var gone string
	t.Run("a test with a database", func(t *testing.T) { gone = URL(t) })
	if conn, err := pgx.Connect(t.Context(), gone); err == nil {
		conn.Close(t.Context())
		t.Error("a database outlives its test")
	}
}

// With this variable set, a test waits to be killed.
const waitVariable = "KELVINROW_TEST_WAIT"

func TestWaitToBeKilled(t *testing.T) {
	if os.Getenv(waitVariable) == "" {
		t.Skip("only for TestKilledTestsLeaveNoServer, in a process of its own")
	}
	URL(t)
	fmt.Printf("\nfolder: %s\n", server.dir)
	time.Sleep(time.Hour)
}

func TestKilledTestsLeaveNoServer(t *testing.T) {
	t.Parallel()
	cmd := exec.Command(os.Args[0], "-test.run", "TestWaitToBeKilled")
	for _, v := range os.Environ() {
		if !strings.HasPrefix(v, "DATABASE_URL=") {
			cmd.Env = append(cmd.Env, v)
		}
	}
	cmd.Env = append(cmd.Env, waitVariable+"=1")
	out, err := cmd.StdoutPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	dir := ""
	for lines := bufio.NewScanner(out); dir == "" && lines.Scan(); {
		dir, _ = strings.CutPrefix(lines.Text(), "folder: ")
		if dir == lines.Text() {
			dir = ""
		}
	}
	if _, err := os.Stat(dir); err != nil {
		t.Fatal(err)
	}
	pid := 0
	content, err := os.ReadFile(dir + "/store/data/postmaster.pid")
	if err != nil {
		t.Fatal(err)
	}
	if _, err := fmt.Sscan(string(content), &pid); err != nil {
		t.Fatal(err)
	}
	if err := cmd.Process.Kill(); err != nil {
		t.Fatal(err)
	}
	_ = cmd.Wait() // killed
	for deadline := time.Now().Add(30 * time.Second); ; time.Sleep(20 * time.Millisecond) {
		_, err := os.Stat(dir)
		if errors.Is(err, os.ErrNotExist) && errors.Is(syscall.Kill(pid, 0), syscall.ESRCH) {
			return
		}
		if time.Now().After(deadline) {
			t.Fatalf("folder %s or server %d is still there", dir, pid)
		}
	}
}
