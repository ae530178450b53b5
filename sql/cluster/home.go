package cluster

import (
	"crypto/sha256"
	"errors"
	"fmt"
	"io/fs"
	"net/url"
	"os"
	"os/user"
	"path/filepath"
	"strconv"
	"strings"
	"syscall"
)

// home is the folder of a private cluster.
type home struct {
	dir     string // data, locks and log
	sockets string
	account *account // the server's, when this process is root
}

func (h *home) path(name string) string { return filepath.Join(h.dir, name) }

func (h *home) data() string { return h.path("data") }

// version is the major version of the cluster's data, "" when there is none.
func (h *home) version() string {
	b, err := os.ReadFile(filepath.Join(h.data(), "PG_VERSION"))
	if err != nil {
		return ""
	}
	return strings.TrimSpace(string(b))
}

// url says everything that environment variables such as PGPORT might say
// otherwise.
func (h *home) url() string {
	q := url.Values{"host": {h.sockets}, "port": {"5432"}, "user": {Role}, "sslmode": {"disable"}, "target_session_attrs": {"any"}}
	return "postgres:///postgres?" + q.Encode()
}

// account is an unprivileged account that the server runs under when this
// process is root, which Postgres refuses to run as.
type account struct {
	name     string
	uid, gid uint32
}

func (a *account) credential() *syscall.Credential {
	return &syscall.Credential{Uid: a.uid, Gid: a.gid}
}

// serverAccount is nil unless this process is root.
func serverAccount() (*account, error) {
	if os.Geteuid() != 0 {
		return nil, nil
	}
	for _, name := range []string{"postgres", "nobody"} {
		u, err := user.Lookup(name)
		if err != nil {
			continue
		}
		uid, err1 := strconv.ParseUint(u.Uid, 10, 32)
		gid, err2 := strconv.ParseUint(u.Gid, 10, 32)
		if err1 == nil && err2 == nil && uid != 0 {
			return &account{name, uint32(uid), uint32(gid)}, nil
		}
	}
	return nil, errors.New("postgres does not run as root, and there is no account \"postgres\" or \"nobody\" to run it under: run kelvinrow as another user")
}

// defaultDir is the usual place of the private cluster.
func defaultDir() (string, error) {
	if d := os.Getenv("KELVINROW_STORE"); d != "" {
		return filepath.Abs(d)
	}
	d := os.Getenv("XDG_DATA_HOME")
	if !filepath.IsAbs(d) {
		h, err := os.UserHomeDir()
		if err != nil {
			return "", fmt.Errorf("find a folder for the private Postgres: %w; set KELVINROW_STORE=DIR", err)
		}
		d = filepath.Join(h, ".local", "share")
	}
	d = filepath.Join(d, "kelvinrow")
	if os.Geteuid() == 0 {
		// Root's home is closed to the server's account; and under sudo the home
		// may be an ordinary user's, whose own store must not become the server
		// account's. So root has a system folder, one for each home.
		sum := sha256.Sum256([]byte(d))
		d = filepath.Join("/var/lib/kelvinrow", fmt.Sprintf("%x", sum[:4]))
	}
	return d, nil
}

// socketLimit is the longest socket path that every supported system takes
// (macOS: 104 bytes with the final zero), with room for the socket's own name.
const socketLimit = 100 - len("/.s.PGSQL.5432.lock")

const elsewhere = "KELVINROW_STORE=DIR puts it elsewhere"

// open finds the folder, and makes it when asked to. All of it lives in a
// folder "store" of mode 0700 that belongs to the server's account.
func open(dir string, create bool) (*home, error) {
	a, err := serverAccount()
	if err != nil {
		return nil, err
	}
	if dir == "" {
		if dir, err = defaultDir(); err != nil {
			return nil, err
		}
	}
	if dir, err = filepath.Abs(dir); err != nil {
		return nil, err
	}
	if create {
		if err := os.MkdirAll(dir, 0o755); err != nil {
			return nil, fmt.Errorf("make the folder of the private Postgres: %w; %s", err, elsewhere)
		}
	}
	// One folder has one name, or two commands would look for two sockets.
	if d, err := filepath.EvalSymlinks(dir); err == nil {
		dir = d
	} else if create || !errors.Is(err, fs.ErrNotExist) {
		return nil, err
	}
	h := &home{dir: filepath.Join(dir, "store"), account: a}
	h.sockets = h.path("socket")
	if len(h.sockets) > socketLimit {
		// Not $TMPDIR or $XDG_RUNTIME_DIR: commands with another environment
		// must come to the same place.
		sum := sha256.Sum256([]byte(h.dir))
		h.sockets = filepath.Join("/tmp", fmt.Sprintf("kelvinrow-%x", sum[:8]))
	}
	if !create {
		return h, nil
	}
	if a != nil {
		if err := reachable(dir, a); err != nil {
			return nil, err
		}
	}
	return h, h.private(h.dir)
}

// private makes a folder that only the server's account can enter, or checks
// that it is one: a folder in a shared place might be somebody else's.
func (h *home) private(dir string) error {
	err := os.Mkdir(dir, 0o700)
	if err == nil && h.account != nil {
		err = os.Lchown(dir, int(h.account.uid), int(h.account.gid))
	}
	if err != nil && !errors.Is(err, fs.ErrExist) {
		return fmt.Errorf("make the folder of the private Postgres: %w; %s", err, elsewhere)
	}
	info, err := os.Lstat(dir)
	if err != nil {
		return err
	}
	owner := os.Geteuid()
	if h.account != nil {
		owner = int(h.account.uid)
	}
	st, ok := info.Sys().(*syscall.Stat_t)
	if !info.IsDir() || !ok || int(st.Uid) != owner {
		return fmt.Errorf("%s is not a folder of account %d: remove it, or put the store elsewhere with KELVINROW_STORE=DIR", dir, owner)
	}
	if info.Mode().Perm() != 0o700 {
		return os.Chmod(dir, 0o700)
	}
	return nil
}

// reachable checks that the server's account can enter all parents of dir.
func reachable(dir string, a *account) error {
	for p := dir; ; p = filepath.Dir(p) {
		info, err := os.Stat(p)
		if err != nil {
			return err
		}
		st, ok := info.Sys().(*syscall.Stat_t)
		mode := info.Mode().Perm()
		if ok && mode&0o001 == 0 && !(st.Uid == a.uid && mode&0o100 != 0) && !(st.Gid == a.gid && mode&0o010 != 0) {
			return fmt.Errorf("as root, Postgres runs under account %q, which cannot enter %s: put the store elsewhere with KELVINROW_STORE=DIR, or run kelvinrow as an ordinary user", a.name, p)
		}
		if p == filepath.Dir(p) {
			return nil
		}
	}
}
