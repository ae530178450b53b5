package main

import (
	"context"
	"fmt"
	"path/filepath"
	"testing"

	"kelvinrow/cmd/internal/demo"
	"kelvinrow/cmd/internal/pipeline"
	"kelvinrow/rank"
	"kelvinrow/sql/dbtest"
)

// BenchmarkScreen keeps the whole-run benchmark from rotting.
func BenchmarkScreen(b *testing.B) {
	ctx := context.Background()
	dir := dbtest.Dir(b)
	input := filepath.Join(dir, "input.xlsx")
	if err := demo.Big(input, 1000, 1); err != nil {
		b.Fatal(err)
	}
	s, err := pipeline.Open(ctx, pipeline.Config{StoreDir: dir, Portfolio: "bench"})
	if err != nil {
		b.Fatal(err)
	}
	defer func() {
		if err := s.Close(ctx); err != nil {
			b.Error(err)
		}
	}()
	for i := 0; b.Loop(); i++ {
		// A file loaded before would change nothing and cost nothing.
		s.Portfolio = fmt.Sprintf("bench-%d", i)
		if _, err := s.Load(ctx, pipeline.LoadOptions{Files: []string{input}}); err != nil {
			b.Fatal(err)
		}
		if _, err := s.Rank(ctx, pipeline.RankOptions{Out: filepath.Join(dir, "ranked.xlsx"), Yardstick: rank.Default}, nil); err != nil {
			b.Fatal(err)
		}
	}
}
