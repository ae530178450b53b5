// Command bench screens invented portfolios of growing size and prints, for each
// stage, seconds and peak memory, beside the least that the same bytes cost:
// unzipping the input, COPY of the same rows, deflating the output.
//
//	go run ./cmd/internal/bench -n 1000,10000,100000
package main

import (
	"context"
	"encoding/json"
	"flag"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"runtime/pprof"
	"strconv"
	"strings"
	"time"

	"kelvinrow/cmd/internal/demo"
	"kelvinrow/cmd/internal/pipeline"
	"kelvinrow/rank"
)

func main() {
	sizes := flag.String("n", "1000,10000", "numbers of buildings, separated by commas")
	top := flag.Int("top", 1000, "rows per measure sheet")
	profile := flag.String("cpuprofile", "", "`file` for a CPU profile of the stages (one size only)")
	child := flag.String("child", "", "used by the program itself: the input to screen")
	flag.Parse()
	var err error
	if *child != "" {
		err = measure(*child, *top, *profile)
	} else {
		err = all(*sizes, *top, *profile)
	}
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

var stages = []string{"start", "read and store", "estimate", "rank", "store run", "write", "total"}

func all(sizes string, top int, profile string) error {
	fmt.Printf("%s, %d rows per measure sheet\n\n| buildings | stage | seconds | peak MB | floor | floor s | ratio |\n|---|---|---|---|---|---|---|\n",
		time.Now().Format("2006-01-02"), top)
	for _, size := range strings.Split(sizes, ",") {
		n, err := strconv.Atoi(strings.TrimSpace(size))
		if err != nil || n < 1 {
			return fmt.Errorf("-n %s: give whole numbers from 1", sizes)
		}
		if err := one(n, top, profile); err != nil {
			return err
		}
	}
	return nil
}

// one screens n buildings in a process of its own, so that its peak memory is
// its own too.
func one(n, top int, profile string) error {
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
	cmd := exec.Command(os.Args[0], "-child", input, "-top", strconv.Itoa(top), "-cpuprofile", profile)
	cmd.Stderr = os.Stderr
	out, err := cmd.Output()
	if err != nil {
		return err
	}
	var f figures
	if err := json.Unmarshal(out, &f); err != nil {
		return err
	}
	floors := map[string][]string{"read and store": {"unzip", "COPY"}, "write": {"deflate"}}
	for _, s := range stages {
		row := fmt.Sprintf("| %d | %s | %.2f | %.0f |", n, s, f.Seconds[s], f.PeakMB[s])
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
func measure(input string, top int, profile string) error {
	ctx := context.Background()
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
	peak := watch()
	began := time.Now()
	s, err := pipeline.Open(ctx, pipeline.Config{StoreDir: dir, Portfolio: "bench"})
	if err != nil {
		return err
	}
	defer s.Close(ctx)
	f.PeakMB["start"] = peak()
	if _, err := s.Load(ctx, pipeline.LoadOptions{Files: []string{input}}); err != nil {
		return err
	}
	f.PeakMB["read and store"] = peak()
	if _, err := s.Rank(ctx, pipeline.RankOptions{Out: out, Top: top, Yardstick: rank.Default}, nil); err != nil {
		return err
	}
	f.PeakMB["write"] = peak()
	t := s.Timings
	for name, d := range map[string]time.Duration{
		"start": t.Start, "read and store": t.Read, "estimate": t.Estimate, "rank": t.Rank, "store run": t.Save, "write": t.Write, "total": time.Since(began),
	} {
		f.Seconds[name] = d.Seconds()
	}
	f.PeakMB["estimate"], f.PeakMB["rank"], f.PeakMB["store run"] = f.PeakMB["write"], f.PeakMB["write"], f.PeakMB["write"]
	f.PeakMB["total"] = max(f.PeakMB["read and store"], f.PeakMB["write"])
	if err := floors(ctx, s, input, out, f.Floor); err != nil {
		return err
	}
	return json.NewEncoder(os.Stdout).Encode(f)
}
