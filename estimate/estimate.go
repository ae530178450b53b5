package estimate

import (
	"context"

	"golang.org/x/sync/errgroup"

	"kelvinrow/estimate/building"
	"kelvinrow/estimate/result"
)

// Version of the calculation, part of every run: the same inputs, assumptions
// and version give the same numbers to the last bit.
const Version = "0.1.0"

// batchSize is how many buildings a worker takes at once: enough that handing
// them over costs nothing beside computing them.
const batchSize = 128

// Source gives the buildings one by one, in the order the results will have.
type Source func(yield func(*building.Building) error) error

// Estimate evaluates all buildings of a source with the given number of
// workers. Results are in the order of the source and do not depend on the
// number of workers. progress, if not nil, is told of buildings done; it must be
// safe for concurrent use.
func (b *Basis) Estimate(ctx context.Context, workers int, source Source, progress func(int)) ([]result.Building, error) {
	g, ctx := errgroup.WithContext(ctx)
	g.SetLimit(max(1, workers))
	var batches [][]result.Building
	batch := make([]*building.Building, 0, batchSize)
	flush := func() {
		in := batch
		out := make([]result.Building, len(in))
		batches = append(batches, out)
		batch = make([]*building.Building, 0, batchSize)
		g.Go(func() error {
			for i, bl := range in {
				if err := ctx.Err(); err != nil {
					return err
				}
				out[i] = b.Evaluate(bl)
			}
			if progress != nil {
				progress(len(in))
			}
			return nil
		})
	}
	err := source(func(bl *building.Building) error {
		if err := ctx.Err(); err != nil {
			return err
		}
		if batch = append(batch, bl); len(batch) == batchSize {
			flush()
		}
		return nil
	})
	if err == nil && len(batch) > 0 {
		flush()
	}
	if e := g.Wait(); e != nil {
		return nil, e
	}
	if err != nil {
		return nil, err
	}
	n := 0
	for _, r := range batches {
		n += len(r)
	}
	all := make([]result.Building, 0, n)
	for _, r := range batches {
		all = append(all, r...)
	}
	return all, nil
}
