// Package cluster keeps the private Postgres: made once in the user's data
// folder, reached by a Unix socket only, started when a command needs it and
// stopped when the last command using it is done.
//
// Commands find out about each other by file locks, which the kernel drops when
// a process dies however it dies: each command holds a shared lock on the lease
// file, and whoever can lock it alone is the last. Starting and stopping is
// serialised by a second lock.
package cluster

import (
	"context"
	"errors"
	"fmt"
	"net/url"
	"os"
	"path/filepath"
	"strings"
	"time"

	"github.com/jackc/pgx/v5/pgconn"
)

// Role is the superuser of the private cluster.
const Role = "kelvinrow"

// Cluster is a running private Postgres that this command uses.
type Cluster struct {
	home  *home
	lease *os.File
}

// URL is the connection string of the server.
func (c *Cluster) URL() string { return c.home.url("postgres") }

// Start makes the cluster in dir if there is none, starts it if it does not run,
// and keeps it running until Release. An empty dir is $KELVINROW_STORE or the
// usual place.
func Start(ctx context.Context, dir string) (*Cluster, error) {
	h, err := open(dir, true)
	if err != nil {
		return nil, err
	}
	bin, err := binaries(h.version())
	if err != nil {
		return nil, err
	}
	control, err := lock(ctx, h.path("control.lock"))
	if err != nil {
		return nil, err
	}
	defer control.Close()
	lease, err := share(ctx, h.path("lease.lock"))
	if err != nil {
		return nil, err
	}
	c := &Cluster{home: h, lease: lease}
	if err := h.initialise(ctx, bin); err != nil {
		lease.Close()
		return nil, err
	}
	if err := h.start(ctx, bin); err != nil {
		lease.Close()
		return nil, err
	}
	return c, nil
}

// Release gives the cluster up; the last command to do so stops the server.
func (c *Cluster) Release(ctx context.Context) error {
	control, err := lock(ctx, c.home.path("control.lock"))
	if err != nil {
		return err
	}
	defer control.Close()
	c.lease.Close()
	alone, err := tryLock(c.home.path("lease.lock"))
	if err != nil {
		return err
	}
	if alone == nil {
		return nil // another command still uses it and will stop it
	}
	defer alone.Close()
	return c.home.stop(ctx)
}

// State is what Status tells.
type State struct {
	Dir     string
	Made    bool
	Running bool
	InUse   bool
	Version string
}

func (s State) String() string {
	switch {
	case !s.Made:
		return "no private Postgres yet; it will be made in " + s.Dir
	case s.Running && s.InUse:
		return fmt.Sprintf("Postgres %s in %s: running, in use by a command", s.Version, s.Dir)
	case s.Running:
		return fmt.Sprintf("Postgres %s in %s: running, left behind by a command; the next one will use and stop it", s.Version, s.Dir)
	}
	return fmt.Sprintf("Postgres %s in %s: stopped", s.Version, s.Dir)
}

// Status says where the private cluster is and whether it runs.
func Status(dir string) (State, error) {
	h, err := open(dir, false)
	if err != nil {
		return State{}, err
	}
	s := State{Dir: h.dir, Version: h.version(), Made: h.version() != ""}
	if !s.Made {
		return s, nil
	}
	s.Running = h.postmaster() != 0
	alone, err := tryLock(h.path("lease.lock"))
	if err != nil {
		return s, err
	}
	if alone == nil {
		s.InUse = true
	} else {
		alone.Close()
	}
	return s, nil
}

// ErrInUse is returned by Stop while a command uses the server.
var ErrInUse = errors.New("the private Postgres is in use by another command: let it finish or stop it first")

// Stop stops a server that no command uses. A server that does not run is no
// error.
func Stop(ctx context.Context, dir string) error {
	h, err := open(dir, false)
	if err != nil || h.version() == "" {
		return err
	}
	control, err := lock(ctx, h.path("control.lock"))
	if err != nil {
		return err
	}
	defer control.Close()
	alone, err := tryLock(h.path("lease.lock"))
	if err != nil {
		return err
	}
	if alone == nil {
		return ErrInUse
	}
	defer alone.Close()
	return h.stop(ctx)
}

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

func (h *home) url(database string) string {
	q := url.Values{"host": {h.sockets}, "user": {Role}, "sslmode": {"disable"}}
	return "postgres:///" + database + "?" + q.Encode()
}

// answers reports whether the server takes connections.
func (h *home) answers(ctx context.Context) bool {
	ctx, cancel := context.WithTimeout(ctx, 2*time.Second)
	defer cancel()
	conn, err := pgconn.Connect(ctx, h.url("postgres"))
	if err != nil {
		return false
	}
	conn.Close(ctx)
	return true
}
