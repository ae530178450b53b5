package cluster

import (
	"context"
	"errors"
	"fmt"
	"os"
	"syscall"
	"time"
)

// The lock files of a cluster; the package comment says who holds which.
const (
	controlLock = "control.lock"
	leaseLock   = "lease.lock"
	serverLock  = "server.lock"
)

const (
	exclusive = syscall.LOCK_EX
	shared    = syscall.LOCK_SH
)

// lock waits for an exclusive lock on a file. Closing the file drops it.
func lock(ctx context.Context, path string) (*os.File, error) {
	for {
		f, err := try(path, exclusive)
		if f != nil || err != nil {
			return f, err
		}
		select {
		case <-ctx.Done():
			return nil, fmt.Errorf("wait for another command to start or stop the private Postgres: %w", ctx.Err())
		case <-time.After(20 * time.Millisecond):
		}
	}
}

// share takes a shared lock on a file. Exclusive ones are only tried for under
// the control lock, which the caller holds, so it need not wait.
func share(path string) (*os.File, error) {
	f, err := try(path, shared)
	if f == nil && err == nil {
		err = fmt.Errorf("lock %s: held by a program that is not kelvinrow", path)
	}
	return f, err
}

// try takes a lock if it is to be had at once; else it returns nil.
func try(path string, how int) (*os.File, error) {
	// Not through a link: as root, the folder belongs to a lesser account.
	f, err := os.OpenFile(path, os.O_RDWR|os.O_CREATE|syscall.O_NOFOLLOW, 0o600)
	if err != nil {
		return nil, err
	}
	for {
		err = syscall.Flock(int(f.Fd()), how|syscall.LOCK_NB)
		if !errors.Is(err, syscall.EINTR) {
			break
		}
	}
	if err == nil {
		return f, nil
	}
	f.Close()
	if errors.Is(err, syscall.EWOULDBLOCK) {
		return nil, nil
	}
	return nil, fmt.Errorf("lock %s: %w", path, err)
}
