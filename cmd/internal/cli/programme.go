package cli

import (
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"strconv"
	"strings"

	"github.com/spf13/cobra"

	"kelvinrow/cmd/internal/pipeline"
	"kelvinrow/rank"
)

// programmeFlags are the flags of a programme under budgets.
type programmeFlags struct {
	budget      string
	carryOver   bool
	by          string
	must, never []string
	shares      []string
	capacities  []string
}

func (p *programmeFlags) add(c *cobra.Command) {
	f := c.Flags()
	f.StringVar(&p.budget, "budget", "", "`money` of each year for a programme: 500000, or 500000,400000 for two years, or 500000x5 for five")
	f.StringVar(&p.by, "programme-by", "", "what the programme gets most of: kwh, co2 or npv (default as --by, or kwh)")
	f.BoolVar(&p.carryOver, "carry-over", false, "money a year does not spend may be spent later")
	f.StringSliceVar(&p.must, "must", nil, "`ids` of buildings done in any case, or a file with one a line")
	f.StringSliceVar(&p.never, "never", nil, "`ids` of buildings left alone, or a file with one a line")
	f.StringArrayVar(&p.shares, "share", nil, "`district=share` of the money kept for a district, such as North=0.2; may be given several times")
	f.StringArrayVar(&p.capacities, "capacity", nil, "`measure=buildings` a year at most, such as new-windows=40; may be given several times")
}

// options reads the flags; everything that cannot be read is told at once.
func (p *programmeFlags) options(by rank.Yardstick) (o pipeline.ProgrammeOptions, err error) {
	var problems []error
	bad := func(format string, args ...any) { problems = append(problems, fmt.Errorf(format, args...)) }
	if p.budget == "" {
		if p.by != "" || p.carryOver || len(p.must)+len(p.never)+len(p.shares)+len(p.capacities) > 0 {
			return o, usagef("a programme needs --budget")
		}
		return o, nil
	}
	if o.Budgets, err = parseBudgets(p.budget); err != nil {
		bad("--budget: %w", err)
	}
	o.CarryOver = p.carryOver
	switch y := rank.Yardstick(strings.ToLower(p.by)); y {
	case rank.Energy, rank.CO2, rank.NPV:
		o.By = y
	case "":
		o.By = rank.Energy
		if by == rank.CO2 || by == rank.NPV {
			o.By = by
		}
	default:
		bad("--programme-by %s: use kwh, co2 or npv", p.by)
	}
	for _, l := range []struct {
		flag  string
		given []string
		to    *[]string
	}{{"--must", p.must, &o.Must}, {"--never", p.never, &o.Never}} {
		if *l.to, err = idList(l.given); err != nil {
			bad("%s: %w", l.flag, err)
		}
	}
	o.Shares, o.Capacity = map[string]float64{}, map[string]int{}
	for _, s := range p.shares {
		district, share, _ := strings.Cut(s, "=")
		v, err := strconv.ParseFloat(strings.TrimSuffix(strings.TrimSpace(share), "%"), 64)
		if strings.HasSuffix(strings.TrimSpace(share), "%") {
			v /= 100
		}
		if err != nil || !(v >= 0 && v <= 1) || district == "" {
			bad("--share %s: write DISTRICT=SHARE, such as North=0.2", s)
			continue
		}
		o.Shares[district] = v
	}
	for _, s := range p.capacities {
		key, n, _ := strings.Cut(s, "=")
		v, err := strconv.Atoi(strings.TrimSpace(n))
		if err != nil || v < 0 || key == "" {
			bad("--capacity %s: write MEASURE=BUILDINGS, such as new-windows=40", s)
			continue
		}
		o.Capacity[strings.ReplaceAll(strings.ToLower(strings.TrimSpace(key)), " ", "-")] = v
	}
	if err := errors.Join(problems...); err != nil {
		return o, usageError{err}
	}
	return o, nil
}

// mostYears is how many years a programme may have.
const mostYears = 50

// parseBudgets reads budgets by year: "500000", "5e5,4e5", "500000x5".
func parseBudgets(text string) ([]float64, error) {
	var out []float64
	for part := range strings.SplitSeq(text, ",") {
		money, times, repeated := strings.Cut(strings.TrimSpace(part), "x")
		v, err := strconv.ParseFloat(strings.ReplaceAll(strings.TrimSpace(money), " ", ""), 64)
		n := 1
		if repeated && err == nil {
			n, err = strconv.Atoi(strings.TrimSpace(times))
		}
		if err != nil || !(v >= 0 && v < 1e15) || n < 1 {
			return nil, fmt.Errorf("%q is not money, nor money x years", part)
		}
		for range min(n, mostYears+1) {
			out = append(out, v)
		}
		if len(out) > mostYears {
			return nil, fmt.Errorf("more than %d years", mostYears)
		}
	}
	return out, nil
}

// idList reads ids, and files of ids, one a line.
func idList(given []string) ([]string, error) {
	var out []string
	for _, g := range given {
		if ext := filepath.Ext(g); ext != ".txt" && ext != ".csv" {
			if g = strings.TrimSpace(g); g != "" {
				out = append(out, g)
			}
			continue
		}
		content, err := os.ReadFile(g)
		if err != nil {
			return nil, err
		}
		for line := range strings.Lines(string(content)) {
			if id := strings.TrimSpace(line); id != "" {
				out = append(out, id)
			}
		}
	}
	return out, nil
}
