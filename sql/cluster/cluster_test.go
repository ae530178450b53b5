package cluster

import (
	"context"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
	"time"

	"github.com/jackc/pgx/v5"
)

// TestMain also serves as the command that tests kill: with this variable set it
// starts the cluster there, says so, and waits.
const holdVariable = "KELVINROW_TEST_HOLD"

func TestMain(m *testing.M) {
	if dir := os.Getenv(holdVariable); dir != "" {
		if _, err := Start(context.Background(), dir); err != nil {
			fmt.Println("failed:", err)
			os.Exit(1)
		}
		fmt.Println("holding")
		time.Sleep(time.Hour)
	}
	os.Exit(m.Run())
}

// testDir is short and reachable by the server's account also as root.
func testDir(t *testing.T) string {
	t.Helper()
	dir, err := os.MkdirTemp("", "kelvinrow-test-")
	if err != nil {
		t.Fatal(err)
	}
	if err := os.Chmod(dir, 0o711); err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		if err := Stop(context.Background(), dir); err != nil {
			t.Error(err)
		}
		if err := os.RemoveAll(dir); err != nil {
			t.Error(err)
		}
	})
	return dir
}

func mustStart(t *testing.T, dir string) *Cluster {
	t.Helper()
	c, err := Start(t.Context(), dir)
	if err != nil {
		t.Fatal(err)
	}
	return c
}

func running(t *testing.T, dir string) bool {
	t.Helper()
	s, err := Status(dir)
	if err != nil {
		t.Fatal(err)
	}
	return s.Running
}

func query(t *testing.T, c *Cluster, sql string) string {
	t.Helper()
	conn, err := pgx.Connect(t.Context(), c.URL())
	if err != nil {
		t.Fatal(err)
	}
	defer conn.Close(t.Context())
	var s string
	if err := conn.QueryRow(t.Context(), sql).Scan(&s); err != nil {
		t.Fatal(err)
	}
	return s
}

func TestStartsOnDemandAndStopsWithTheLastUser(t *testing.T) {
	t.Parallel()
	dir := testDir(t)
	first := mustStart(t, dir)
	second := mustStart(t, dir)
	if got := query(t, second, "show listen_addresses"); got != "" {
		t.Errorf("listens on %q, want no network at all", got)
	}
	info, err := os.Stat(first.home.dir)
	if err != nil {
		t.Fatal(err)
	}
	if info.Mode().Perm() != 0o700 {
		t.Errorf("the folder has mode %v, want 0700", info.Mode().Perm())
	}
	if err := first.Release(t.Context()); err != nil {
		t.Fatal(err)
	}
	if !running(t, dir) {
		t.Fatal("stopped while a second command uses it")
	}
	if err := Stop(t.Context(), dir); err != ErrInUse {
		t.Errorf("Stop while in use: %v, want ErrInUse", err)
	}
	if err := second.Release(t.Context()); err != nil {
		t.Fatal(err)
	}
	if running(t, dir) {
		t.Error("still running after its last user")
	}
}

func TestDataOutlivesAStop(t *testing.T) {
	t.Parallel()
	dir := testDir(t)
	c := mustStart(t, dir)
	query(t, c, "select set_config('x.y', 'z', false)")
	conn, err := pgx.Connect(t.Context(), c.URL())
	if err != nil {
		t.Fatal(err)
	}
	if _, err := conn.Exec(t.Context(), "create table kept as select 'yes' as answer"); err != nil {
		t.Fatal(err)
	}
	conn.Close(t.Context())
	if err := c.Release(t.Context()); err != nil {
		t.Fatal(err)
	}
	c = mustStart(t, dir)
	if got := query(t, c, "select answer from kept"); got != "yes" {
		t.Errorf("got %q", got)
	}
	if err := c.Release(t.Context()); err != nil {
		t.Fatal(err)
	}
}

// hold starts another process that uses the cluster.
func hold(t *testing.T, dir string) *exec.Cmd {
	t.Helper()
	cmd := exec.Command(os.Args[0])
	cmd.Env = append(os.Environ(), holdVariable+"="+dir)
	out, err := cmd.StdoutPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	buf := make([]byte, 200)
	n, _ := out.Read(buf)
	if got := string(buf[:n]); !strings.HasPrefix(got, "holding") {
		t.Fatalf("the other command says %q", got)
	}
	return cmd
}

func TestKilledCommandLeavesAServerTheNextCanUseAndStop(t *testing.T) {
	t.Parallel()
	dir := testDir(t)
	other := hold(t, dir)
	if err := other.Process.Signal(syscall.SIGKILL); err != nil {
		t.Fatal(err)
	}
	_ = other.Wait() // killed
	if !running(t, dir) {
		t.Fatal("the server died with the command: it must be in a session of its own")
	}
	c := mustStart(t, dir)
	query(t, c, "select 'answers'")
	if err := c.Release(t.Context()); err != nil {
		t.Fatal(err)
	}
	if running(t, dir) {
		t.Error("still running after its last user")
	}

	other = hold(t, dir)
	_ = other.Process.Kill()
	_ = other.Wait() // killed
	if err := Stop(t.Context(), dir); err != nil {
		t.Fatal(err)
	}
	if running(t, dir) {
		t.Error("still running after Stop")
	}
}

func TestCrashedServerIsReplaced(t *testing.T) {
	t.Parallel()
	dir := testDir(t)
	c := mustStart(t, dir)
	pid := c.home.postmaster()
	if err := syscall.Kill(pid, syscall.SIGKILL); err != nil {
		t.Fatal(err)
	}
	for alive(pid) {
		time.Sleep(10 * time.Millisecond)
	}
	c.lease.Close()
	// A number that belongs to a living process that is no Postgres: this one.
	pidFile := filepath.Join(c.home.data(), "postmaster.pid")
	if err := os.WriteFile(pidFile, []byte(fmt.Sprintln(os.Getpid())), 0o644); err != nil {
		t.Fatal(err)
	}
	c = mustStart(t, dir)
	query(t, c, "select 'answers'")
	if err := c.Release(t.Context()); err != nil {
		t.Fatal(err)
	}
}

func TestInterruptedInitialisationIsInNobodysWay(t *testing.T) {
	t.Parallel()
	dir := testDir(t)
	h, err := open(dir, true)
	if err != nil {
		t.Fatal(err)
	}
	if err := os.MkdirAll(h.path("data.new/base"), 0o755); err != nil {
		t.Fatal(err)
	}
	c := mustStart(t, dir)
	if err := c.Release(t.Context()); err != nil {
		t.Fatal(err)
	}
}

func TestDeepFolder(t *testing.T) {
	t.Parallel()
	dir := filepath.Join(testDir(t), strings.Repeat("a-long-name/", 12))
	c := mustStart(t, dir)
	query(t, c, "select 'answers'")
	sockets := c.home.sockets
	if err := c.Release(t.Context()); err != nil {
		t.Fatal(err)
	}
	if err := os.RemoveAll(sockets); err != nil {
		t.Error(err)
	}
}

func TestMissingBinaries(t *testing.T) {
	t.Setenv("KELVINROW_POSTGRES_BIN", t.TempDir())
	_, err := Start(t.Context(), testDir(t))
	if err != errMissing {
		t.Fatalf("got %v", err)
	}
	if s := err.Error(); strings.Contains(s, "\n") || !strings.Contains(s, "apt-get install postgresql") {
		t.Errorf("%q is not one line that says what to install", s)
	}
}

func TestSomebodyElsesFolderIsRefused(t *testing.T) {
	if os.Geteuid() != 0 {
		t.Skip("only root can give a folder away")
	}
	t.Parallel()
	dir := testDir(t)
	if err := os.Mkdir(filepath.Join(dir, "store"), 0o755); err != nil {
		t.Fatal(err)
	}
	_, err := Start(t.Context(), dir)
	if err == nil || !strings.Contains(err.Error(), "is not a folder of account") {
		t.Errorf("got %v", err)
	}
}

func TestUnreachableFolderAsRoot(t *testing.T) {
	if os.Geteuid() != 0 {
		t.Skip("only root needs an account for the server")
	}
	t.Parallel()
	dir := testDir(t)
	if err := os.Chmod(dir, 0o700); err != nil {
		t.Fatal(err)
	}
	_, err := Start(t.Context(), filepath.Join(dir, "below"))
	if err == nil || !strings.Contains(err.Error(), dir) || !strings.Contains(err.Error(), "KELVINROW_STORE") {
		t.Errorf("got %v", err)
	}
}
