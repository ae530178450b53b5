package main

import (
	"archive/zip"
	"compress/flate"
	"context"
	"fmt"
	"io"
	"os"
	"strings"
	"sync/atomic"
	"time"

	"kelvinrow/cmd/internal/pipeline"
)

// watch samples this process's resident memory and returns a function that
// gives the peak in MB since it was last asked.
func watch() func() float64 {
	var peak atomic.Int64
	sample := func() {
		b, err := os.ReadFile("/proc/self/statm")
		if err != nil {
			return // no /proc: memory is not reported
		}
		var size, resident int64
		if _, err := fmt.Sscan(string(b), &size, &resident); err == nil && resident > peak.Load() {
			peak.Store(resident)
		}
	}
	go func() {
		for range time.Tick(20 * time.Millisecond) {
			sample()
		}
	}()
	return func() float64 {
		sample()
		return float64(peak.Swap(0)) * float64(os.Getpagesize()) / 1e6
	}
}

// floors measures the least that the same bytes cost.
func floors(ctx context.Context, s *pipeline.Session, input, output string, floor map[string]float64) error {
	began := time.Now()
	if err := parts(input, func(name string, r io.Reader) error {
		if !strings.HasPrefix(name, "xl/worksheets/") && name != "xl/sharedStrings.xml" {
			return nil
		}
		_, err := io.Copy(io.Discard, r)
		return err
	}); err != nil {
		return err
	}
	floor["unzip"] = time.Since(began).Seconds()

	seconds, err := s.Store.CopyFloor(ctx, s.Portfolio)
	if err != nil {
		return err
	}
	floor["COPY"] = seconds

	// Deflate what is unzipped first, so that only deflating is timed.
	var total time.Duration
	err = parts(output, func(_ string, r io.Reader) error {
		content, err := io.ReadAll(r)
		if err != nil {
			return err
		}
		began := time.Now()
		w, err := flate.NewWriter(io.Discard, flate.DefaultCompression)
		if err != nil {
			return err
		}
		if _, err := w.Write(content); err != nil {
			return err
		}
		if err := w.Close(); err != nil {
			return err
		}
		total += time.Since(began)
		return nil
	})
	floor["deflate"] = total.Seconds()
	return err
}

func parts(path string, f func(name string, r io.Reader) error) error {
	z, err := zip.OpenReader(path)
	if err != nil {
		return err
	}
	defer z.Close()
	for _, p := range z.File {
		r, err := p.Open()
		if err != nil {
			return err
		}
		err = f(p.Name, r)
		r.Close()
		if err != nil {
			return err
		}
	}
	return nil
}
