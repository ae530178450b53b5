package cluster

import (
	"bufio"
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"sync"
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
		c, err := Start(context.Background(), dir)
		if err != nil {
			fmt.Println("failed:", err)
			os.Exit(1)
		}
		fmt.Println("holding", c.home.postmaster())
		time.Sleep(time.Hour)
	}
	status := m.Run()
	if made.dir != "" {
		if err := os.RemoveAll(made.dir); err != nil {
			fmt.Println(err)
			status = 1
		}
	}
	os.Exit(status)
}

var made struct {
	once sync.Once
	dir  string
	err  error
}

// madeDir is a testDir with a cluster that was made before: a copy takes a tenth
// of the time of making one.
func madeDir(t *testing.T) string {
	t.Helper()
	made.once.Do(func() {
		if made.dir, made.err = os.MkdirTemp("", "kelvinrow-test-"); made.err != nil {
			return
		}
		if made.err = os.Chmod(made.dir, 0o711); made.err != nil {
			return
		}
		var c *Cluster
		if c, made.err = Start(context.Background(), made.dir); made.err == nil {
			made.err = c.Release(context.Background())
		}
	})
	if made.err != nil {
		t.Fatal(made.err)
	}
	dir := testDir(t)
	if out, err := exec.Command("cp", "-a", filepath.Join(made.dir, "store"), dir).CombinedOutput(); err != nil {
		t.Fatalf("%v: %s", err, out)
	}
	return dir
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

func mustRelease(t *testing.T, c *Cluster) {
	t.Helper()
	if err := c.Release(t.Context()); err != nil {
		t.Fatal(err)
	}
}

func status(t *testing.T, dir string) State {
	t.Helper()
	s, err := Status(dir)
	if err != nil {
		t.Fatal(err)
	}
	return s
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

// holder is another process that uses the cluster.
type holder struct {
	cmd *exec.Cmd
	out *bufio.Reader
}

func launch(t *testing.T, dir string) *holder {
	t.Helper()
	cmd := exec.Command(os.Args[0])
	cmd.Env = append(os.Environ(), holdVariable+"="+dir)
	cmd.SysProcAttr = &syscall.SysProcAttr{Setpgid: true} // as a shell does with a job
	out, err := cmd.StdoutPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	h := &holder{cmd, bufio.NewReader(out)}
	t.Cleanup(func() {
		_ = syscall.Kill(-cmd.Process.Pid, syscall.SIGKILL) // gone, usually
		_ = cmd.Wait()                                      // killed
	})
	return h
}

func hold(t *testing.T, dir string) *holder {
	t.Helper()
	h := launch(t, dir)
	if line, err := h.out.ReadString('\n'); err != nil || !strings.HasPrefix(line, "holding") {
		t.Fatalf("the other command says %q, %v", line, err)
	}
	return h
}

// kill kills the whole process group at once, as a closing terminal may.
func (h *holder) kill(t *testing.T) {
	t.Helper()
	if err := syscall.Kill(-h.cmd.Process.Pid, syscall.SIGKILL); err != nil {
		t.Fatal(err)
	}
}

func TestStartsOnDemandAndStopsWithTheLastUser(t *testing.T) {
	t.Parallel()
	dir := testDir(t)
	first := mustStart(t, dir)
	second := mustStart(t, dir)
	if got := query(t, second, "show listen_addresses"); got != "" {
		t.Errorf("listens on %q, want no network at all", got)
	}
	for _, name := range []string{"fsync", "synchronous_commit", "autovacuum"} {
		if got := query(t, second, "show "+name); got != "on" {
			t.Errorf("%s is %q, want on", name, got)
		}
	}
	for _, d := range []string{first.home.dir, first.home.data(), first.home.sockets} {
		info, err := os.Stat(d)
		if err != nil {
			t.Fatal(err)
		}
		if info.Mode().Perm() != 0o700 {
			t.Errorf("%s has mode %v, want 0700", d, info.Mode().Perm())
		}
	}
	if s := status(t, dir); !s.Made || !s.Running || !s.InUse || s.Version != query(t, second, "select split_part(current_setting('server_version'), '.', 1)") {
		t.Errorf("status in use: %+v", s)
	}
	mustRelease(t, first)
	mustRelease(t, first) // twice is no harm
	if !status(t, dir).Running {
		t.Fatal("stopped while a second command uses it")
	}
	query(t, second, "select 'answers'")
	ctx, cancel := context.WithCancel(t.Context())
	cancel() // as after Ctrl-C
	if err := second.Release(ctx); err != nil {
		t.Fatal(err)
	}
	if s := status(t, dir); s.Running || s.InUse {
		t.Errorf("after its last user: %+v", s)
	}
}

func TestManyCommandsMayStartAtOnce(t *testing.T) {
	t.Parallel()
	dir := testDir(t)
	var wg sync.WaitGroup
	servers := make([]string, 4)
	for i := range servers {
		h := launch(t, dir)
		wg.Go(func() { servers[i], _ = h.out.ReadString('\n') })
	}
	wg.Wait()
	for _, s := range servers {
		if s != servers[0] || !strings.HasPrefix(s, "holding ") {
			t.Fatalf("not one server for all: %q", servers)
		}
	}
}

func TestDataOutlivesAStop(t *testing.T) {
	t.Parallel()
	dir := madeDir(t)
	c := mustStart(t, dir)
	conn, err := pgx.Connect(t.Context(), c.URL())
	if err != nil {
		t.Fatal(err)
	}
	if _, err := conn.Exec(t.Context(), "create table kept as select 'yes' as answer"); err != nil {
		t.Fatal(err)
	}
	conn.Close(t.Context())
	mustRelease(t, c)
	c = mustStart(t, dir)
	if got := query(t, c, "select answer from kept"); got != "yes" {
		t.Errorf("got %q", got)
	}
	mustRelease(t, c)
}

func TestStopIsObeyedAlsoWhenInUse(t *testing.T) {
	t.Parallel()
	dir := madeDir(t)
	c := mustStart(t, dir)
	if err := Stop(t.Context(), dir); err != nil {
		t.Fatal(err)
	}
	if s := status(t, dir); s.Running || !s.InUse {
		t.Errorf("after Stop: %+v", s)
	}
	next := mustStart(t, dir)
	mustRelease(t, c)
	query(t, next, "select 'answers'")
	mustRelease(t, next)
	if status(t, dir).Running {
		t.Error("still running after its last user")
	}
}

func TestKilledCommandLeavesAServerTheNextCanUseAndStop(t *testing.T) {
	t.Parallel()
	dir := madeDir(t)
	other := hold(t, dir)
	other.kill(t)
	// A reader of the command's output must see its end, server or no server.
	ended := make(chan error, 1)
	go func() { _, err := io.Copy(io.Discard, other.out); ended <- err }()
	select {
	case err := <-ended:
		if err != nil {
			t.Fatal(err)
		}
	case <-time.After(20 * time.Second):
		t.Fatal("the server holds the command's output open")
	}
	if s := status(t, dir); !s.Running || s.InUse {
		t.Fatalf("after kill -9 of the whole process group: %+v; the server must be in a session of its own", s)
	}
	c := mustStart(t, dir)
	query(t, c, "select 'answers'")
	mustRelease(t, c)
	if status(t, dir).Running {
		t.Error("still running after its last user")
	}

	hold(t, dir).kill(t)
	if err := Stop(t.Context(), dir); err != nil {
		t.Fatal(err)
	}
	if status(t, dir).Running {
		t.Error("still running after Stop")
	}
}

func TestKilledWhileTheClusterIsMade(t *testing.T) {
	t.Parallel()
	dir := testDir(t)
	other := launch(t, dir)
	for begun := false; !begun; time.Sleep(5 * time.Millisecond) {
		found, err := filepath.Glob(filepath.Join(dir, "store", "data.new-*", "PG_VERSION"))
		if err != nil {
			t.Fatal(err)
		}
		begun = len(found) > 0
	}
	other.kill(t)
	// The initdb of the dead command may still be at work.
	c := mustStart(t, dir)
	query(t, c, "select 'answers'")
	mustRelease(t, c)
}

func TestInterruptedStartLeavesNothingRunning(t *testing.T) {
	t.Parallel()
	dir := madeDir(t)
	for _, after := range []time.Duration{0, 5 * time.Millisecond, 30 * time.Millisecond} {
		ctx, cancel := context.WithTimeout(t.Context(), after)
		c, err := Start(ctx, dir)
		cancel()
		switch {
		case err == nil: // quick enough
			mustRelease(t, c)
		case !errors.Is(err, context.DeadlineExceeded):
			t.Errorf("after %v: %v", after, err)
		}
		if s := status(t, dir); s.Running || s.InUse {
			t.Errorf("after %v: %+v", after, s)
		}
	}
	ctx, cancel := context.WithCancel(t.Context())
	fresh := testDir(t)
	time.AfterFunc(100*time.Millisecond, cancel) // in the middle of initdb
	if c, err := Start(ctx, fresh); err == nil {
		mustRelease(t, c)
	} else if !errors.Is(err, context.Canceled) {
		t.Error(err)
	}
	if left, _ := filepath.Glob(filepath.Join(fresh, "store", "data.new-*")); len(left) > 0 {
		t.Errorf("left behind: %v", left)
	}
}
