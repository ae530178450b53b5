package cluster

import (
	"crypto/sha256"
	"fmt"
	"os"
	"os/user"
	"path/filepath"
	"strconv"
	"syscall"
)

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
	return nil, fmt.Errorf("postgres does not run as root, and there is no account \"postgres\" or \"nobody\" to run it under: run kelvinrow as another user")
}

// defaultDir is the usual place of the private cluster. Root's home cannot be
// entered by the server's account, so root has a system folder.
func defaultDir() (string, error) {
	if d := os.Getenv("KELVINROW_STORE"); d != "" {
		return filepath.Abs(d)
	}
	if os.Geteuid() == 0 {
		return "/var/lib/kelvinrow", nil
	}
	if d := os.Getenv("XDG_DATA_HOME"); filepath.IsAbs(d) {
		return filepath.Join(d, "kelvinrow"), nil
	}
	d, err := os.UserHomeDir()
	if err != nil {
		return "", fmt.Errorf("find a folder for the private Postgres: %w; set KELVINROW_STORE=DIR", err)
	}
	return filepath.Join(d, ".local", "share", "kelvinrow"), nil
}

// socketLimit is the longest socket path that every supported system takes,
// with room for the socket's own name.
const socketLimit = 100 - len("/.s.PGSQL.5432.lock")

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
	h := &home{dir: filepath.Join(dir, "store"), account: a}
	h.sockets = h.path("socket")
	if len(h.sockets) > socketLimit {
		sum := sha256.Sum256([]byte(h.dir))
		h.sockets = filepath.Join("/tmp", fmt.Sprintf("kelvinrow-%x", sum[:8]))
	}
	if !create {
		return h, nil
	}
	if err := os.MkdirAll(dir, 0o755); err != nil {
		return nil, fmt.Errorf("make the folder of the private Postgres: %w; KELVINROW_STORE=DIR puts it elsewhere", err)
	}
	if a != nil {
		if err := reachable(dir, a); err != nil {
			return nil, err
		}
	}
	for _, d := range []string{h.dir, h.sockets} {
		if err := h.private(d); err != nil {
			return nil, err
		}
	}
	return h, nil
}

// private makes a folder that only the server's account can enter, or checks
// that it is one: a folder in a shared place might be somebody else's.
func (h *home) private(dir string) error {
	err := os.Mkdir(dir, 0o700)
	if err == nil && h.account != nil {
		err = os.Chown(dir, int(h.account.uid), int(h.account.gid))
	}
	if err != nil && !os.IsExist(err) {
		return fmt.Errorf("make the folder of the private Postgres: %w; KELVINROW_STORE=DIR puts it elsewhere", err)
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
