package cluster

import (
	"context"
	"errors"
	"fmt"
	"os"
	"syscall"
	"time"
)

// lock waits for an exclusive lock on a file. Closing the file drops it.
func lock(ctx context.Context, path string) (*os.File, error) {
	return wait(ctx, path, syscall.LOCK_EX)
}

// share waits for a shared lock on a file.
func share(ctx context.Context, path string) (*os.File, error) {
	return wait(ctx, path, syscall.LOCK_SH)
}

func wait(ctx context.Context, path string, how int) (*os.File, error) {
	for {
		f, err := try(path, how)
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

// tryLock takes an exclusive lock if nobody holds any; else it returns nil.
func tryLock(path string) (*os.File, error) { return try(path, syscall.LOCK_EX) }

func try(path string, how int) (*os.File, error) {
	f, err := os.OpenFile(path, os.O_RDWR|os.O_CREATE, 0o600)
	if err != nil {
		return nil, err
	}
	err = syscall.Flock(int(f.Fd()), how|syscall.LOCK_NB)
	if err == nil {
		return f, nil
	}
	f.Close()
	if errors.Is(err, syscall.EWOULDBLOCK) || errors.Is(err, syscall.EINTR) {
		return nil, nil
	}
	return nil, fmt.Errorf("lock %s: %w", path, err)
}
