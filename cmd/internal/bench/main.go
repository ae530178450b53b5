// Command bench screens invented portfolios of growing size and prints, for each
// stage, seconds and peak memory, beside the least that the same bytes cost:
// unzipping the input, COPY of the same rows, deflating the output.
//
//	go run ./cmd/internal/bench -n 1000,10000,100000
package main

import (
	"context"
	"encoding/json"
	"errors"
	"flag"
	"fmt"
	"os"
	"os/exec"
	"os/signal"
	"path/filepath"
	"runtime/pprof"
	"strconv"
	"strings"
	"syscall"
	"time"

	"kelvinrow/cmd/internal/demo"
	"kelvinrow/cmd/internal/pipeline"
	"kelvinrow/cmd/internal/progress"
	"kelvinrow/rank"
)

func main() {
	sizes := flag.String("n", "1000,10000", "numbers of buildings, separated by commas")
	top := flag.Int("top", 1000, "rows per measure sheet")
	profile := flag.String("cpuprofile", "", "`file` for a CPU profile of the stages (one size only)")
	child := flag.String("child", "", "used by the program itself: the input to screen")
	flag.Parse()
	// An interrupted run must not leave its Postgres behind.
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	var err error
	if *child != "" {
		err = measure(ctx, *child, *top, *profile)
	} else {
		err = all(ctx, *sizes, *top, *profile)
	}
	stop()
	if err != nil {
		fmt.Fprintln(os.Stderr, "bench:", err)
		os.Exit(1)
	}
}

// figures are what one screening took.
type figures struct {
	Seconds map[string]float64 `json:"seconds"`
	PeakMB  map[string]float64 `json:"peak_mb"`
	Floor   map[string]float64 `json:"floor"`
}

var stages = []string{"start", "read and store", "read alone", "estimate", "rank", "store run", "write", "total"}

// stageOf names the stage that a line of progress belongs to.
func stageOf(line string) string {
	for prefix, stage := range map[string]string{"starting": "start", "reading": "read and store", "estimating": "estimate", "storing": "store run", "writing": "write"} {
		if strings.HasPrefix(line, prefix) {
			return stage
		}
	}
	return line
}

func all(ctx context.Context, sizes string, top int, profile string) error {
	fmt.Printf("%s, %d rows per measure sheet\n\n| buildings | stage | seconds | peak MB | floor | floor s | ratio |\n|---|---|---|---|---|---|---|\n",
		time.Now().Format("2006-01-02"), top)
	for _, size := range strings.Split(sizes, ",") {
		n, err := strconv.Atoi(strings.TrimSpace(size))
		if err != nil || n < 1 {
			return fmt.Errorf("-n %s: give whole numbers from 1", sizes)
		}
		if err := one(ctx, n, top, profile); err != nil {
			return err
		}
	}
	return nil
}

// one screens n buildings in a process of its own, so that its peak memory is
// its own too.
func one(ctx context.Context, n, top int, profile string) error {
	dir, err := os.MkdirTemp("", "kelvinrow-bench-")
	if err != nil {
		return err
	}
	defer os.RemoveAll(dir)
	// As root the database runs under another account, which must get in.
	if err := os.Chmod(dir, 0o711); err != nil {
		return err
	}
	input := filepath.Join(dir, "input.xlsx")
	if err := demo.Big(input, n, 1); err != nil {
		return err
	}
	cmd := exec.CommandContext(ctx, os.Args[0], "-child", input, "-top", strconv.Itoa(top), "-cpuprofile", profile)
	cmd.Stderr = os.Stderr
	cmd.Cancel = func() error { return cmd.Process.Signal(os.Interrupt) }
	out, err := cmd.Output()
	if err != nil {
		return err
	}
	var f figures
	if err := json.Unmarshal(out, &f); err != nil {
		return err
	}
	floors := map[string][]string{"read and store": {"unzip", "COPY"}, "read alone": {"unzip"}, "write": {"deflate"}}
	for _, s := range stages {
		row := fmt.Sprintf("| %d | %s | %.2f |", n, s, f.Seconds[s])
		if mb := f.PeakMB[s]; mb > 0 {
			row += fmt.Sprintf(" %.0f |", mb)
		} else {
			row += " |"
		}
		floor := 0.0
		for _, name := range floors[s] {
			floor += f.Floor[name]
		}
		if floor > 0 {
			row += fmt.Sprintf(" %s | %.2f | %.1f |", strings.Join(floors[s], " + "), floor, f.Seconds[s]/floor)
		} else {
			row += " | | |"
		}
		fmt.Println(row)
	}
	return nil
}

// measure screens one input and prints its figures as JSON.
func measure(ctx context.Context, input string, top int, profile string) (err error) {
	if profile != "" {
		f, err := os.Create(profile)
		if err != nil {
			return err
		}
		defer f.Close()
		if err := pprof.StartCPUProfile(f); err != nil {
			return err
		}
		defer pprof.StopCPUProfile()
	}
	f := figures{Seconds: map[string]float64{}, PeakMB: map[string]float64{}, Floor: map[string]float64{}}
	dir := filepath.Dir(input)
	out := filepath.Join(dir, "ranked.xlsx")
	stage := "start"
	reached := func(next string) {
		f.PeakMB[stage] = max(f.PeakMB[stage], peakMB())
		stage = next
	}
	began := time.Now()
	s, err := pipeline.Open(ctx, pipeline.Config{
		StoreDir: dir, Portfolio: "bench", Progress: progress.Watch(func(line string) { reached(stageOf(line)) }),
	})
	if err != nil {
		return err
	}
	defer func() { err = errors.Join(err, s.Close(ctx)) }()
	if _, err := s.Load(ctx, pipeline.LoadOptions{Files: []string{input}}); err != nil {
		return err
	}
	if _, err := s.Rank(ctx, pipeline.RankOptions{Out: out, Top: top, Yardstick: rank.Default}, nil); err != nil {
		return err
	}
	reached("")
	t := s.Timings
	for name, d := range map[string]time.Duration{
		"start": t.Start, "read and store": t.Read, "estimate": t.Estimate, "rank": t.Rank, "store run": t.Save, "write": t.Write, "total": time.Since(began),
	} {
		f.Seconds[name] = d.Seconds()
	}
	// Ranking shows no progress of its own: its peak is within that of estimating.
	for _, mb := range f.PeakMB {
		f.PeakMB["total"] = max(f.PeakMB["total"], mb)
	}
	if err := floors(ctx, s, input, out, &f); err != nil {
		return err
	}
	return json.NewEncoder(os.Stdout).Encode(f)
}
