// Package pipeline wires the stages together: load, estimate, rank and write,
// each whole or not at all.
package pipeline

import (
	"context"
	"errors"
	"fmt"
	"runtime"
	"time"

	"kelvinrow/cmd/internal/progress"
	"kelvinrow/sql/cluster"
	"kelvinrow/sql/store"
)

// Config is what all commands share.
type Config struct {
	DB        string // Postgres URL; "" starts the private server
	StoreDir  string // of the private server; "" is the usual place
	Portfolio string
	Climate   string // a climate's name or an EPW file; "" is that of the assumptions

	Assumptions string   // workbook, stored version or "starter"; "" is what the last run was given
	Changes     []string // single numbers changed, as archetype.Set.Override takes them
	Workers     int      // 0 is one per processor
	Progress    *progress.Progress
}

// Timings says how long each stage took.
type Timings struct {
	Start, Read, Estimate, Rank, Save, Write time.Duration
}

// Session is one command's use of the store.
type Session struct {
	Config
	Store   *store.Store
	Timings Timings

	cluster *cluster.Cluster
}

// Open starts the private server if no database is named, and connects.
func Open(ctx context.Context, c Config) (*Session, error) {
	if c.Workers <= 0 {
		c.Workers = runtime.GOMAXPROCS(0)
	}
	began := time.Now()
	s := &Session{Config: c}
	url := c.DB
	if url == "" {
		c.Progress.Stage("starting the private Postgres", 0)
		cl, err := cluster.Start(ctx, c.StoreDir)
		if err != nil {
			return nil, err
		}
		s.cluster = cl
		url = cl.URL()
	}
	st, err := store.Open(ctx, url)
	if err != nil {
		return nil, errors.Join(err, s.Close(ctx))
	}
	s.Store = st
	s.Timings.Start = time.Since(began)
	c.Progress.Done()
	return s, nil
}

// Close disconnects and stops the private server if this command was its last
// user. It also works when ctx is already cancelled.
func (s *Session) Close(ctx context.Context) error {
	if s.Store != nil {
		s.Store.Close()
	}
	s.Progress.Done()
	if s.cluster == nil {
		return nil
	}
	ctx, cancel := context.WithTimeout(context.WithoutCancel(ctx), time.Minute)
	defer cancel()
	if err := s.cluster.Release(ctx); err != nil {
		return fmt.Errorf("stop the private Postgres: %w", err)
	}
	return nil
}
