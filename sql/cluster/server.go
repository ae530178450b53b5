package cluster

import (
	"context"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"syscall"
	"time"

	"github.com/jackc/pgx/v5/pgconn"
)

// command prepares a command of the server's account in a session of its own:
// Ctrl-C on the terminal must reach kelvinrow, not the server.
func (h *home) command(ctx context.Context, name string, args ...string) *exec.Cmd {
	cmd := exec.CommandContext(ctx, name, args...)
	cmd.Dir = h.dir
	cmd.SysProcAttr = &syscall.SysProcAttr{Setsid: true}
	cmd.WaitDelay = 5 * time.Second // a killed initdb leaves children that hold its output open
	cmd.Env = append(slices.DeleteFunc(os.Environ(), func(v string) bool {
		return strings.HasPrefix(v, "PG") || strings.HasPrefix(v, "LC_") || strings.HasPrefix(v, "LANG") || strings.HasPrefix(v, "HOME=")
	}), "LC_ALL=C", "HOME="+h.dir)
	if h.account != nil {
		cmd.SysProcAttr.Credential = h.account.credential()
	}
	return cmd
}

// initialise makes the cluster's data. It is made beside its place and moved
// there when whole and on disk, so that a crash leaves nothing that would be in
// the way. The folder has a new name each time: after kill -9 an initdb without
// a parent may still be writing into the last one.
func (h *home) initialise(ctx context.Context, bin string) error {
	if h.version() != "" {
		return nil
	}
	leftovers, _ := filepath.Glob(h.path("data.new-*")) // the pattern is well formed
	for _, d := range leftovers {
		_ = os.RemoveAll(d) // what resists goes the next time
	}
	fresh, err := os.MkdirTemp(h.dir, "data.new-")
	if err != nil {
		return err
	}
	defer os.RemoveAll(fresh) // not there any more when all went well
	if h.account != nil {
		if err := os.Lchown(fresh, int(h.account.uid), int(h.account.gid)); err != nil {
			return err
		}
	}
	// Trust, because nobody but the server's account, and root, can enter the
	// folder that the socket is in; and there is no network port to protect.
	// Peer authentication would refuse root, whose server is another account's.
	for _, args := range [][]string{
		{"-D", fresh, "-U", Role, "--auth-local=trust", "--auth-host=reject", "-E", "UTF8", "--locale=C", "--no-sync", "--no-instructions"},
		{"-D", fresh, "--sync-only"}, // once at the end is faster than on the way
	} {
		out, err := h.command(ctx, filepath.Join(bin, "initdb"), args...).CombinedOutput()
		if ctx.Err() != nil {
			return ctx.Err()
		}
		if err != nil {
			return fmt.Errorf("%w: %s", err, lastLines(out, 3))
		}
	}
	if err := os.Rename(fresh, h.data()); err != nil {
		return err
	}
	return syncFolder(h.dir)
}

// syncFolder brings a rename to disk.
func syncFolder(dir string) error {
	f, err := os.Open(dir)
	if err != nil {
		return err
	}
	defer f.Close()
	return f.Sync()
}

// settings suit a batch program on somebody's laptop: durable (fsync,
// synchronous_commit and autovacuum stay on, as they are by default), modest in
// memory, and out of everybody's sight.
func (h *home) settings() []string {
	s := []string{
		"listen_addresses=", "unix_socket_directories=" + h.sockets, "unix_socket_permissions=0700", "port=5432",
		"max_connections=40", "shared_buffers=128MB", "work_mem=32MB", "maintenance_work_mem=128MB",
		// A load of a million rows writes about a gigabyte of log: without room
		// for it, checkpoints would write every page several times.
		"max_wal_size=2GB", "checkpoint_timeout=15min",
		"jit=off",                           // compiles for longer than our queries run
		"max_parallel_workers_per_gather=0", // the estimate needs the processors
		"logging_collector=off", "log_min_messages=warning", "timezone=UTC",
	}
	args := make([]string, 0, 2*len(s))
	for _, v := range s {
		args = append(args, "-c", v)
	}
	return args
}

// start waits until the server answers, and starts it if it does not run.
func (h *home) start(ctx context.Context, bin string) error {
	config, err := pgconn.ParseConfig(h.url())
	if err != nil {
		return err // a PGSERVICE that is not there, say
	}
	deadline := time.Now().Add(time.Minute)
	spawned := false
	for {
		silent := answers(ctx, config)
		if silent == nil {
			return nil
		}
		if ctx.Err() != nil {
			return ctx.Err()
		}
		free, err := try(h.path(serverLock), exclusive)
		if err != nil {
			return err
		}
		if free != nil {
			switch {
			case spawned:
				free.Close()
				out, _ := os.ReadFile(h.path("log"))
				return fmt.Errorf("it ended at once: %s (log: %s)", lastLines(out, 3), h.path("log"))
			case h.postmaster() == 0: // else started by other means, perhaps by hand
				err = h.spawn(bin, free)
				spawned = true
			}
			free.Close()
			if err != nil {
				return err
			}
		}
		if time.Now().After(deadline) {
			return fmt.Errorf("no answer for a minute: %w (log: %s)", silent, h.path("log"))
		}
		select {
		case <-ctx.Done():
		case <-time.After(10 * time.Millisecond):
		}
	}
}

// spawn starts the server, which inherits its lock. The caller holds the lock:
// nobody uses the data.
func (h *home) spawn(bin string, lock *os.File) error {
	if err := h.private(h.sockets); err != nil {
		return err
	}
	// What a server that crashed, or a machine that lost its power, left behind:
	// a pid file whose number may be another process's today would keep the
	// server from starting.
	sockets, _ := filepath.Glob(filepath.Join(h.sockets, ".s.PGSQL.*")) // the pattern is well formed
	for _, f := range append(sockets, filepath.Join(h.data(), "postmaster.pid")) {
		if err := os.Remove(f); err != nil && !errors.Is(err, fs.ErrNotExist) {
			return fmt.Errorf("remove what a crashed server left: %w", err)
		}
	}
	log, err := os.OpenFile(h.path("log"), os.O_WRONLY|os.O_CREATE|os.O_TRUNC|syscall.O_NOFOLLOW, 0o600)
	if err != nil {
		return err
	}
	defer log.Close()
	// Without the context's kill: the server outlives this command if another
	// uses it. Its output goes to a file, lest it hold open a pipe that somebody
	// waits for the end of.
	cmd := h.command(context.Background(), filepath.Join(bin, "postgres"), append([]string{"-D", h.data()}, h.settings()...)...)
	cmd.Stdout, cmd.Stderr = log, log
	cmd.ExtraFiles = []*os.File{lock}
	if err := cmd.Start(); err != nil {
		return err
	}
	go func() { _ = cmd.Wait() }() // reaps it; its end is told by the lock
	return nil
}

// answers is nil when the server takes connections.
func answers(ctx context.Context, config *pgconn.Config) error {
	ctx, cancel := context.WithTimeout(ctx, 2*time.Second)
	defer cancel()
	conn, err := pgconn.ConnectConfig(ctx, config)
	if err != nil {
		return err
	}
	return conn.Close(ctx)
}

// running reports whether any process of a server may still write to the data.
func (h *home) running() (bool, error) {
	if h.version() == "" {
		return false, nil
	}
	free, err := try(h.path(serverLock), exclusive)
	if err != nil {
		return false, err
	}
	if free == nil {
		return true, nil
	}
	free.Close()
	return h.postmaster() != 0, nil
}

// postmaster returns the server's process id, 0 when it is not known to run.
func (h *home) postmaster() int {
	b, err := os.ReadFile(filepath.Join(h.data(), "postmaster.pid"))
	if err != nil {
		return 0
	}
	line, _, _ := strings.Cut(string(b), "\n")
	pid, err := strconv.Atoi(strings.TrimSpace(line))
	if err != nil || pid <= 1 {
		return 0
	}
	if err := syscall.Kill(pid, 0); err != nil && !errors.Is(err, syscall.EPERM) {
		return 0
	}
	// The number may have been given to another process since. A server works in
	// its data folder.
	data, err := os.Stat(h.data())
	if err != nil {
		return 0
	}
	if _, err := os.Stat("/proc/self/cwd"); err == nil {
		in, err := os.Stat(fmt.Sprintf("/proc/%d/cwd", pid))
		if err != nil || !os.SameFile(in, data) {
			return 0
		}
		return pid
	}
	out, err := exec.Command("ps", "-o", "command=", "-p", strconv.Itoa(pid)).Output()
	if err != nil || !strings.Contains(string(out), h.data()) {
		return 0
	}
	return pid
}

// stop asks the server to end at once but cleanly (open transactions are undone)
// and waits until all of it has. The caller holds the control lock.
func (h *home) stop(ctx context.Context) error {
	asked := 0
	for {
		running, err := h.running()
		if err != nil {
			return err
		}
		if !running {
			break
		}
		// A server that has only just been started may have no pid file yet.
		if pid := h.postmaster(); pid != 0 && pid != asked {
			if err := syscall.Kill(pid, syscall.SIGINT); err != nil && !errors.Is(err, syscall.ESRCH) {
				return fmt.Errorf("stop the private Postgres: %w", err)
			}
			asked = pid
		}
		select {
		case <-ctx.Done():
			return fmt.Errorf("the private Postgres in %s has not stopped yet: %w", h.dir, ctx.Err())
		case <-time.After(10 * time.Millisecond):
		}
	}
	if h.sockets != h.path("socket") {
		_ = os.Remove(h.sockets) // a folder outside our own: nothing stays there
	}
	return nil
}

func lastLines(out []byte, n int) string {
	lines := strings.Split(strings.TrimSpace(string(out)), "\n")
	return strings.Join(lines[max(0, len(lines)-n):], "; ")
}
