// Package cluster keeps the private Postgres: made once in the user's data
// folder, reached by a Unix socket only, started when a command needs it and
// stopped when the last command using it is done.
//
// Three file locks, which the kernel drops when a process dies however it dies,
// say what is going on:
//
//   - lease.lock is held shared by every command that uses the server; whoever
//     gets it alone is the last and stops the server;
//   - control.lock is held while a command starts or stops the server, or asks
//     for one of the others;
//   - server.lock is held by the server's own processes, which inherit it: while
//     it is held, somebody may write to the data, whatever a pid file says.
package cluster

import (
	"context"
	"errors"
	"fmt"
	"os"
	"time"
)

// Role is the superuser of the private cluster.
const Role = "kelvinrow"

// Cluster is a running private Postgres that this command uses.
type Cluster struct {
	home  *home
	lease *os.File
}

// URL is the connection string of the server.
func (c *Cluster) URL() string { return c.home.url() }

// Start makes the cluster in dir if there is none, starts it if it does not run,
// and keeps it running until Release. An empty dir is $KELVINROW_STORE or the
// usual place.
func Start(ctx context.Context, dir string) (*Cluster, error) {
	h, err := open(dir, false)
	if err != nil {
		return nil, err
	}
	bin, err := binaries(h.version()) // first: without Postgres, make no folder
	if err != nil {
		return nil, err
	}
	if h, err = open(dir, true); err != nil {
		return nil, err
	}
	control, err := lock(ctx, h.path(controlLock))
	if err != nil {
		return nil, err
	}
	defer control.Close()
	if err := h.initialise(ctx, bin); err != nil {
		return nil, fmt.Errorf("make the private Postgres: %w", err)
	}
	lease, err := share(h.path(leaseLock))
	if err != nil {
		return nil, err
	}
	c := &Cluster{home: h, lease: lease}
	if err := h.start(ctx, bin); err != nil {
		// Interrupted, perhaps: it must not stay behind half started.
		return nil, errors.Join(fmt.Errorf("start the private Postgres: %w", err), c.release(ctx))
	}
	return c, nil
}

// Release gives the cluster up; the last command to do so stops the server. It
// also works when ctx is over, as it is after Ctrl-C.
func (c *Cluster) Release(ctx context.Context) error {
	if c.lease == nil {
		return nil
	}
	ctx, cancel := context.WithTimeout(context.WithoutCancel(ctx), time.Minute)
	defer cancel()
	control, err := lock(ctx, c.home.path(controlLock))
	if err != nil {
		return err
	}
	defer control.Close()
	return c.release(ctx)
}

// release is Release for whoever holds the control lock.
func (c *Cluster) release(ctx context.Context) error {
	c.lease.Close()
	c.lease = nil
	alone, err := try(c.home.path(leaseLock), exclusive)
	if err != nil {
		return err
	}
	if alone == nil {
		return nil // another command still uses it and will stop it
	}
	defer alone.Close()
	ctx, cancel := context.WithTimeout(context.WithoutCancel(ctx), time.Minute)
	defer cancel()
	return c.home.stop(ctx)
}

// State is what Status tells.
type State struct {
	Dir     string
	Made    bool
	Running bool
	InUse   bool // by a command, or about to be
	Version string
}

func (s State) String() string {
	switch {
	case !s.Made && s.InUse:
		return "the private Postgres is being made in " + s.Dir
	case !s.Made:
		return "no private Postgres yet; it will be made in " + s.Dir
	case s.Running && s.InUse:
		return fmt.Sprintf("Postgres %s in %s: running, in use by a command", s.Version, s.Dir)
	case s.Running:
		return fmt.Sprintf("Postgres %s in %s: running, left behind by a command; the next one will use and stop it", s.Version, s.Dir)
	case s.InUse:
		return fmt.Sprintf("Postgres %s in %s: being started or stopped", s.Version, s.Dir)
	}
	return fmt.Sprintf("Postgres %s in %s: stopped", s.Version, s.Dir)
}

// Status says where the private cluster is and whether it runs. It waits for
// nobody.
func Status(dir string) (State, error) {
	h, err := open(dir, false)
	if err != nil {
		return State{}, err
	}
	s := State{Dir: h.dir, Version: h.version()}
	s.Made = s.Version != ""
	if _, err := os.Stat(h.path(controlLock)); err != nil {
		return s, nil // never used; asking must not make files
	}
	control, err := try(h.path(controlLock), exclusive)
	if err != nil {
		return s, err
	}
	if control == nil {
		s.InUse = true
		s.Running = h.postmaster() != 0
		return s, nil
	}
	defer control.Close()
	if s.Running, err = h.running(); err != nil {
		return s, err
	}
	alone, err := try(h.path(leaseLock), exclusive)
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

// Stop stops the server even when commands use it: they fail, and what they had
// not finished is undone. A server that does not run is no error.
func Stop(ctx context.Context, dir string) error {
	h, err := open(dir, false)
	if err != nil || h.version() == "" {
		return err
	}
	control, err := lock(ctx, h.path(controlLock))
	if err != nil {
		return err
	}
	defer control.Close()
	return h.stop(ctx)
}
