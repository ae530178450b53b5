package main

import (
	"archive/zip"
	"context"
	"fmt"
	"io"
	"os"
	"strings"
	"time"

	"github.com/klauspost/compress/flate"

	"kelvinrow/cmd/internal/pipeline"
	"kelvinrow/ingest"
)

// peakMB returns the most memory this process had resident since it was last
// asked, by the kernel's own high-water mark; 0 where the system keeps none.
// Postgres runs in processes of its own and is not counted.
func peakMB() float64 {
	status, err := os.ReadFile("/proc/self/status")
	if err != nil {
		return 0
	}
	_, rest, _ := strings.Cut(string(status), "VmHWM:")
	var kB float64
	if _, err := fmt.Sscan(rest, &kB); err != nil {
		return 0
	}
	// 5 sets the mark back to what is resident now. Where that is refused the
	// mark stays that of the whole run.
	_ = os.WriteFile("/proc/self/clear_refs", []byte("5"), 0)
	return kB / 1024
}

// floors measures the least that the same bytes cost, and reading alone, with
// all recognition and checks but no store.
func floors(ctx context.Context, s *pipeline.Session, input, output string, f *figures) error {
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
	f.Floor["unzip"] = time.Since(began).Seconds()

	began = time.Now()
	if _, err := ingest.Inspect(ctx, input, ingest.Options{Today: began.Format("2006-01-02")}); err != nil {
		return err
	}
	f.Seconds["read alone"] = time.Since(began).Seconds()

	seconds, err := s.Store.CopyFloor(ctx, s.Portfolio)
	if err != nil {
		return err
	}
	f.Floor["COPY"] = seconds

	// Deflate what is unzipped first, so that only deflating is timed.
	var total time.Duration
	err = parts(output, func(_ string, r io.Reader) error {
		content, err := io.ReadAll(r)
		if err != nil {
			return err
		}
		began := time.Now()
		w, err := flate.NewWriter(io.Discard, 3) // the workbook's own level
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
	f.Floor["deflate"] = total.Seconds()
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
