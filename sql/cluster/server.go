package cluster

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"syscall"
	"time"
)

// oldest is the oldest major version of Postgres that will do.
const oldest = 14

// errMissing is the one line for a machine without Postgres.
var errMissing = errors.New("no Postgres 14 or newer was found: install it (apt-get install postgresql), or name a server with --db URL")

// binaries finds the folder with initdb and postgres: of the given major
// version where the cluster exists, else the newest.
func binaries(major string) (string, error) {
	var dirs []string
	for _, pattern := range []string{"/usr/lib/postgresql/*/bin", "/usr/pgsql-*/bin", "/opt/homebrew/opt/postgresql*/bin", "/usr/local/opt/postgresql*/bin"} {
		found, _ := filepath.Glob(pattern) // the patterns are well formed
		dirs = append(dirs, found...)
	}
	dirs = append(dirs, "/usr/local/pgsql/bin")
	if p, err := exec.LookPath("postgres"); err == nil {
		dirs = append(dirs, filepath.Dir(p))
	}
	if over := os.Getenv("KELVINROW_POSTGRES_BIN"); over != "" {
		dirs = []string{over}
	}
	best, bestMajor := "", 0
	for _, d := range dirs {
		if _, err := os.Stat(filepath.Join(d, "initdb")); err != nil {
			continue
		}
		v := majorOf(filepath.Join(d, "postgres"))
		if major != "" && strconv.Itoa(v) == major {
			return d, nil
		}
		if v >= oldest && v > bestMajor {
			best, bestMajor = d, v
		}
	}
	switch {
	case best == "":
		return "", errMissing
	case major != "":
		return "", fmt.Errorf("the private store was made by Postgres %s, but only Postgres %d is installed: install postgresql-%s, or put a new store elsewhere with KELVINROW_STORE=DIR", major, bestMajor, major)
	}
	return best, nil
}

// majorOf asks a postgres binary for its major version; 0 when it does not say.
func majorOf(postgres string) int {
	out, err := exec.Command(postgres, "--version").Output()
	if err != nil {
		return 0
	}
	fields := strings.Fields(string(out)) // postgres (PostgreSQL) 15.18 (Debian ...)
	if len(fields) < 3 {
		return 0
	}
	number, _, _ := strings.Cut(fields[2], ".")
	if i := strings.IndexFunc(number, func(r rune) bool { return r < '0' || r > '9' }); i >= 0 {
		number = number[:i] // 18beta1
	}
	v, err := strconv.Atoi(number)
	if err != nil {
		return 0
	}
	return v
}

// command prepares a command of the server's account in a session of its own:
// Ctrl-C on the terminal must reach kelvinrow, not the server.
func (h *home) command(ctx context.Context, name string, args ...string) *exec.Cmd {
	cmd := exec.CommandContext(ctx, name, args...)
	cmd.Dir = h.dir
	cmd.SysProcAttr = &syscall.SysProcAttr{Setsid: true}
	cmd.Env = append(slices.DeleteFunc(os.Environ(), func(v string) bool {
		return strings.HasPrefix(v, "PG") || strings.HasPrefix(v, "LC_") || strings.HasPrefix(v, "LANG") || strings.HasPrefix(v, "HOME=")
	}), "LC_ALL=C", "HOME="+h.dir)
	if h.account != nil {
		cmd.SysProcAttr.Credential = h.account.credential()
	}
	return cmd
}

// initialise makes the cluster's data. It is made beside its place and moved
// there when whole, so that a crash leaves nothing that would be in the way.
func (h *home) initialise(ctx context.Context, bin string) error {
	if h.version() != "" {
		return nil
	}
	leftovers, _ := filepath.Glob(h.path("data.new*"))
	for _, d := range leftovers {
		if err := os.RemoveAll(d); err != nil {
			return err
		}
	}
	fresh := h.path("data.new")
	// Trust, because nobody but the server's account, and root, can enter the
	// folder that the socket is in; there is no network port to protect.
	for _, args := range [][]string{
		{"-D", fresh, "-U", Role, "--auth-local=trust", "--auth-host=reject", "-E", "UTF8", "--locale=C", "--no-sync", "--no-instructions"},
		{"-D", fresh, "--sync-only"},
	} {
		if out, err := h.command(ctx, filepath.Join(bin, "initdb"), args...).CombinedOutput(); err != nil {
			return fmt.Errorf("make the private Postgres: %w: %s", err, lastLines(out, 3))
		}
	}
	return os.Rename(fresh, h.data())
}

// settings suit a batch program on somebody's laptop: durable, modest in
// memory, and out of everybody's sight.
func (h *home) settings() []string {
	s := []string{
		"listen_addresses=", "unix_socket_directories=" + h.sockets, "unix_socket_permissions=0700", "port=5432",
		"max_connections=40", "shared_buffers=128MB", "work_mem=32MB", "maintenance_work_mem=128MB",
		"max_wal_size=2GB", "checkpoint_timeout=15min", "jit=off", "max_parallel_workers_per_gather=0",
		"logging_collector=off", "log_min_messages=warning", "timezone=UTC", "dynamic_shared_memory_type=posix",
	}
	args := make([]string, 0, 2*len(s))
	for _, v := range s {
		args = append(args, "-c", v)
	}
	return args
}

// start starts the server if it does not answer.
func (h *home) start(ctx context.Context, bin string) error {
	pid := h.postmaster()
	if pid == 0 {
		if err := h.clear(); err != nil {
			return err
		}
		log, err := os.OpenFile(h.path("log"), os.O_WRONLY|os.O_CREATE|os.O_TRUNC, 0o600)
		if err != nil {
			return err
		}
		defer log.Close()
		// Not CommandContext's kill: the server outlives this command if another
		// uses it.
		cmd := h.command(context.WithoutCancel(ctx), filepath.Join(bin, "postgres"), append([]string{"-D", h.data()}, h.settings()...)...)
		cmd.Stdout, cmd.Stderr = log, log
		if err := cmd.Start(); err != nil {
			return fmt.Errorf("start the private Postgres: %w", err)
		}
		pid = cmd.Process.Pid
		go func() { _ = cmd.Wait() }() // reaps the child; its end is seen by its absence
	}
	deadline := time.Now().Add(60 * time.Second)
	for !h.answers(ctx) {
		switch {
		case ctx.Err() != nil:
			return ctx.Err()
		case !alive(pid):
			out, _ := os.ReadFile(h.path("log"))
			return fmt.Errorf("the private Postgres did not start: %s (log: %s)", lastLines(out, 3), h.path("log"))
		case time.Now().After(deadline):
			return fmt.Errorf("the private Postgres does not answer after a minute (log: %s)", h.path("log"))
		}
		time.Sleep(15 * time.Millisecond)
	}
	return nil
}

// clear removes what a server that crashed, or a machine that lost its power,
// left behind: a pid file whose number may be another process's today, and
// sockets nobody listens on. Only called with the control lock held and no
// server of this cluster alive.
func (h *home) clear() error {
	sockets, _ := filepath.Glob(filepath.Join(h.sockets, ".s.PGSQL.*"))
	for _, f := range append(sockets, filepath.Join(h.data(), "postmaster.pid")) {
		if err := os.Remove(f); err != nil && !errors.Is(err, os.ErrNotExist) {
			return fmt.Errorf("remove what a crashed server left: %w", err)
		}
	}
	return nil
}

// postmaster returns the server's process id, 0 when it does not run.
func (h *home) postmaster() int {
	b, err := os.ReadFile(filepath.Join(h.data(), "postmaster.pid"))
	if err != nil {
		return 0
	}
	lines := strings.Split(string(b), "\n")
	pid, err := strconv.Atoi(strings.TrimSpace(lines[0]))
	if err != nil || !alive(pid) {
		return 0
	}
	// The number may have been given to another process since.
	if args, err := os.ReadFile(fmt.Sprintf("/proc/%d/cmdline", pid)); err == nil && !bytes.Contains(args, []byte(h.data())) {
		return 0
	}
	return pid
}

// alive reports whether a process exists and is not only waiting to be reaped.
func alive(pid int) bool {
	err := syscall.Kill(pid, 0)
	if err != nil && !errors.Is(err, syscall.EPERM) {
		return false
	}
	stat, err := os.ReadFile(fmt.Sprintf("/proc/%d/stat", pid))
	if err != nil {
		return true // no /proc here: the signal has answered
	}
	_, rest, _ := strings.Cut(string(stat), ") ")
	return !strings.HasPrefix(rest, "Z")
}

// stop asks the server to end at once but cleanly, and waits until it has.
func (h *home) stop(ctx context.Context) error {
	pid := h.postmaster()
	if pid == 0 {
		return nil
	}
	if err := syscall.Kill(pid, syscall.SIGINT); err != nil {
		return fmt.Errorf("stop the private Postgres: %w", err)
	}
	for alive(pid) {
		select {
		case <-ctx.Done():
			return fmt.Errorf("the private Postgres (process %d) has not stopped yet: %w", pid, ctx.Err())
		case <-time.After(10 * time.Millisecond):
		}
	}
	return nil
}

func lastLines(out []byte, n int) string {
	lines := strings.Split(strings.TrimSpace(string(out)), "\n")
	return strings.Join(lines[max(0, len(lines)-n):], "; ")
}
