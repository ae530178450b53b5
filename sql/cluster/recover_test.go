package cluster

import (
	"errors"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"syscall"
	"testing"
	"time"

	"github.com/jackc/pgx/v5"
)

func TestCrashedServerIsReplaced(t *testing.T) {
	t.Parallel()
	dir := madeDir(t)
	c := mustStart(t, dir)
	conn, err := pgx.Connect(t.Context(), c.URL()) // whose backend outlives the postmaster for a moment
	if err != nil {
		t.Fatal(err)
	}
	if _, err := conn.Exec(t.Context(), "create table kept as select 'yes' as answer"); err != nil {
		t.Fatal(err)
	}
	if err := syscall.Kill(c.home.postmaster(), syscall.SIGKILL); err != nil {
		t.Fatal(err)
	}
	next := mustStart(t, dir)
	if got := query(t, next, "select answer from kept"); got != "yes" {
		t.Errorf("committed before the crash, now %q", got)
	}
	mustRelease(t, c)
	mustRelease(t, next)
	_ = conn.Close(t.Context()) // its server is gone
}

func TestStalePidFileAndSocket(t *testing.T) {
	t.Parallel()
	dir := madeDir(t)
	c := mustStart(t, dir)
	mustRelease(t, c)
	// As after a power cut: the numbers are those of living processes that are
	// no servers of ours.
	for _, pid := range []int{1, os.Getpid()} {
		if err := os.WriteFile(filepath.Join(c.home.data(), "postmaster.pid"), []byte(strconv.Itoa(pid)+"\n"+c.home.data()+"\n"), 0o600); err != nil {
			t.Fatal(err)
		}
		for _, name := range []string{".s.PGSQL.5432", ".s.PGSQL.5432.lock"} {
			if err := os.WriteFile(filepath.Join(c.home.sockets, name), []byte(strconv.Itoa(pid)+"\n"), 0o600); err != nil {
				t.Fatal(err)
			}
		}
		if status(t, dir).Running {
			t.Fatalf("process %d is taken for the server", pid)
		}
		if err := Stop(t.Context(), dir); err != nil {
			t.Fatal(err)
		}
		c = mustStart(t, dir)
		query(t, c, "select 'answers'")
		mustRelease(t, c)
	}
}

// Two servers on the same data would ruin it.
func TestNeverASecondServerOnTheSameData(t *testing.T) {
	t.Parallel()
	dir := madeDir(t)
	link := filepath.Join(testDir(t), "link")
	if err := os.Symlink(dir, link); err != nil {
		t.Fatal(err)
	}
	c := mustStart(t, dir)
	pid := c.home.postmaster()
	other := mustStart(t, link)
	if got := other.home.postmaster(); got != pid {
		t.Errorf("by a link to the folder: server %d, want the running one, %d", got, pid)
	}
	// Without pid file and socket the lock alone tells that a server lives.
	pidFile := filepath.Join(c.home.data(), "postmaster.pid")
	content, err := os.ReadFile(pidFile)
	if err != nil {
		t.Fatal(err)
	}
	if err := os.Remove(pidFile); err != nil {
		t.Fatal(err)
	}
	if !status(t, dir).Running {
		t.Error("without its pid file the server is taken for stopped")
	}
	free, err := try(c.home.path(serverLock), exclusive)
	if err != nil || free != nil {
		t.Errorf("the server does not hold its lock: %v", err)
	}
	if err := os.WriteFile(pidFile, content, 0o600); err != nil {
		t.Fatal(err)
	}
	mustRelease(t, other)
	mustRelease(t, c)
}

func TestDeepFolder(t *testing.T) {
	t.Parallel()
	dir := filepath.Join(testDir(t), strings.Repeat("a-long-name/", 12))
	c := mustStart(t, dir)
	query(t, c, "select 'answers'")
	sockets := c.home.sockets
	if info, err := os.Stat(sockets); err != nil || info.Mode().Perm() != 0o700 {
		t.Errorf("%s: %v, %v", sockets, info, err)
	}
	mustRelease(t, c)
	if _, err := os.Stat(sockets); !errors.Is(err, os.ErrNotExist) {
		t.Errorf("%s stays behind: %v", sockets, err)
	}

	// Somebody else was there first.
	if err := os.WriteFile(sockets, nil, 0o600); err != nil {
		t.Fatal(err)
	}
	defer os.Remove(sockets)
	if c, err := Start(t.Context(), dir); err == nil || !strings.Contains(err.Error(), sockets) {
		t.Errorf("a socket folder that is not ours: %v", err)
		if err == nil {
			mustRelease(t, c)
		}
	}
}

func TestEnvironmentOfPostgresClientsIsNotFollowed(t *testing.T) {
	for name, value := range map[string]string{
		"PGPORT": "6543", "PGHOST": "localhost", "PGUSER": "nobody", "PGDATABASE": "other", "PGSSLMODE": "verify-full",
		"PGTARGETSESSIONATTRS": "standby", "PGDATA": "/nowhere",
	} {
		t.Setenv(name, value)
	}
	c := mustStart(t, madeDir(t))
	if got := query(t, c, "select current_user || ' ' || current_database()"); got != "kelvinrow postgres" {
		t.Errorf("connected as %s", got)
	}
	mustRelease(t, c)
}

func TestMissingBinaries(t *testing.T) {
	t.Setenv(binVariable, t.TempDir())
	dir := testDir(t)
	_, err := Start(t.Context(), dir)
	if !errors.Is(err, errMissing) {
		t.Fatalf("got %v", err)
	}
	if s := err.Error(); strings.Contains(s, "\n") || !strings.Contains(s, installCommand()) || !strings.Contains(s, "--db URL") {
		t.Errorf("%q is not one line that says what to do", s)
	}
	if _, err := os.Stat(filepath.Join(dir, "store")); !errors.Is(err, os.ErrNotExist) {
		t.Errorf("a folder was made for nothing: %v", err)
	}
}

// fakePostgres makes a folder with a server of some version that cannot run.
func fakePostgres(t *testing.T, version string) string {
	t.Helper()
	dir := t.TempDir()
	for _, name := range []string{"postgres", "initdb"} {
		script := fmt.Sprintf("#!/bin/sh\necho '%s (PostgreSQL) %s'\n", name, version)
		if err := os.WriteFile(filepath.Join(dir, name), []byte(script), 0o755); err != nil {
			t.Fatal(err)
		}
	}
	return dir
}

func TestVersionsOfPostgres(t *testing.T) {
	for text, want := range map[string]int{
		"postgres (PostgreSQL) 15.18 (Debian 15.18-0+deb12u1)\n": 15,
		"postgres (PostgreSQL) 18beta1\n":                        18,
		"postgres (PostgreSQL) 9.6.24\n":                         9,
		"something else\n":                                       0,
	} {
		if got := parseMajor(text); got != want {
			t.Errorf("%q: %d, want %d", text, got, want)
		}
	}
	t.Setenv(binVariable, fakePostgres(t, "13.9"))
	if _, err := binaries(""); !errors.Is(err, errMissing) {
		t.Errorf("Postgres 13 alone: %v", err)
	}
	t.Setenv(binVariable, fakePostgres(t, "17.2"))
	dir := testDir(t)
	data := filepath.Join(dir, "store", "data")
	if err := os.MkdirAll(data, 0o700); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(filepath.Join(data, "PG_VERSION"), []byte("15\n"), 0o600); err != nil {
		t.Fatal(err)
	}
	_, err := Start(t.Context(), dir)
	if err == nil || !strings.Contains(err.Error(), "made by Postgres 15, but only Postgres 17 is installed") {
		t.Errorf("a store of another version: %v", err)
	}
}

func TestUsualPlace(t *testing.T) {
	t.Setenv("KELVINROW_STORE", "")
	t.Setenv("XDG_DATA_HOME", "")
	t.Setenv("HOME", "/home-of-one")
	one, err := defaultDir()
	if err != nil {
		t.Fatal(err)
	}
	t.Setenv("XDG_DATA_HOME", "/data-of-two")
	two, err := defaultDir()
	if err != nil {
		t.Fatal(err)
	}
	if os.Geteuid() == 0 {
		if one == two || filepath.Dir(one) != "/var/lib/kelvinrow" || filepath.Dir(two) != "/var/lib/kelvinrow" {
			t.Errorf("as root: %s and %s, want one system folder for each home", one, two)
		}
	} else if one != "/home-of-one/.local/share/kelvinrow" || two != "/data-of-two/kelvinrow" {
		t.Errorf("got %s and %s", one, two)
	}
	t.Setenv("KELVINROW_STORE", "/chosen")
	if d, err := defaultDir(); err != nil || d != "/chosen" {
		t.Errorf("got %s, %v", d, err)
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
	if err == nil || !strings.Contains(err.Error(), dir) || !strings.Contains(err.Error(), "KELVINROW_STORE") || strings.Contains(err.Error(), "\n") {
		t.Errorf("got %v", err)
	}
}

// As root, the same once more as an ordinary user, whose server is their own.
func TestAsOrdinaryUser(t *testing.T) {
	if os.Geteuid() != 0 {
		t.Skip("all the tests run as an ordinary user already")
	}
	t.Parallel()
	a := &account{"nobody", 65534, 65534}
	dir := testDir(t)
	home := filepath.Join(dir, "home")
	if err := os.Mkdir(home, 0o700); err != nil {
		t.Fatal(err)
	}
	if err := os.Chown(home, int(a.uid), int(a.gid)); err != nil {
		t.Fatal(err)
	}
	program, err := os.ReadFile(os.Args[0])
	if err != nil {
		t.Fatal(err)
	}
	copied := filepath.Join(dir, "cluster.test") // go's own build folder is closed to others
	if err := os.WriteFile(copied, program, 0o755); err != nil {
		t.Fatal(err)
	}
	names := "TestStartsOnDemand|TestKilledCommand|TestCrashedServer|TestDeepFolder|TestNeverASecondServer"
	cmd := exec.Command(copied, "-test.v", "-test.run", names, "-test.timeout", "3m")
	cmd.Dir = home
	cmd.Env = []string{"HOME=" + home, "TMPDIR=" + home, "PATH=" + os.Getenv("PATH")}
	cmd.SysProcAttr = &syscall.SysProcAttr{Credential: a.credential()}
	cmd.WaitDelay = 10 * time.Second
	out, err := cmd.CombinedOutput()
	if err != nil {
		t.Fatalf("%v\n%s", err, out)
	}
	for _, name := range strings.Split(names, "|") {
		if !strings.Contains(string(out), "--- PASS: "+name) {
			t.Errorf("%s did not run:\n%s", name, out)
		}
	}
}
