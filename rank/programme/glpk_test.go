package programme

import (
	"bufio"
	"bytes"
	"fmt"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"strconv"
	"strings"
	"testing"
)

// The same problems solved by GLPK (A. Makhorin, GNU Linear Programming Kit),
// which knows nothing of hulls: every package in every year is a variable, every
// limit a row. Costs and values are whole, so that its tolerances (1e-7 of the
// objective, 1e-7 of a row) hide nothing.

// lp writes a problem in the CPLEX LP format.
func lp(buildings []Building, opt Options) string {
	var obj, rows, binary strings.Builder
	budget := make([]strings.Builder, len(opt.Budgets))
	capacity := make([]strings.Builder, len(opt.Budgets)*len(opt.Capacities))
	district := map[string]*strings.Builder{"": {}}
	for d := range opt.MinShare {
		district[d] = &strings.Builder{}
	}
	for i, b := range buildings {
		var one strings.Builder
		for j, pk := range b.Packages {
			if b.Never || len(b.MustPackages) > 0 && !contains(b.MustPackages, j) {
				continue
			}
			for y := range opt.Budgets {
				x := fmt.Sprintf("x%d_%d_%d", i, j, y)
				fmt.Fprintf(&obj, " + %g %s\n", pk.Value, x)
				fmt.Fprintf(&one, " + %s\n", x)
				fmt.Fprintf(&binary, " %s\n", x)
				last := y
				if opt.CarryOver {
					last = len(opt.Budgets) - 1
				}
				for k := y; k <= last; k++ {
					fmt.Fprintf(&budget[k], " + %g %s\n", pk.Cost, x)
				}
				d := b.District
				if opt.MinShare[d] == 0 {
					d = ""
				}
				fmt.Fprintf(district[d], " + %g %s\n", pk.Cost, x)
				for k, c := range opt.Capacities {
					if c.Measures&pk.Measures != 0 {
						fmt.Fprintf(&capacity[y*len(opt.Capacities)+k], " + %s\n", x)
					}
				}
			}
		}
		if one.Len() > 0 {
			sign := "<="
			if b.Must || len(b.MustPackages) > 0 {
				sign = "="
			}
			fmt.Fprintf(&rows, " one%d:\n%s %s 1\n", i, one.String(), sign)
		}
	}
	total := 0.0
	for y := range budget {
		limit := opt.Budgets[y]
		if opt.CarryOver {
			limit += total
		}
		total += opt.Budgets[y]
		fmt.Fprintf(&rows, " year%d:\n%s <= %.17g\n", y, budget[y].String(), limit)
	}
	for n := range capacity {
		if capacity[n].Len() > 0 {
			fmt.Fprintf(&rows, " cap%d:\n%s <= %d\n", n, capacity[n].String(), opt.Capacities[n%len(opt.Capacities)].Buildings)
		}
	}
	if len(opt.MinShare) > 0 {
		// Each district has an account of at least its share.
		var accounts, bounds strings.Builder
		for n, d := range append([]string{""}, sortedKeys(opt.MinShare)...) {
			if district[d].Len() > 0 {
				fmt.Fprintf(&rows, " in%d:\n%s - z%d <= 0\n", n, district[d].String(), n)
			}
			fmt.Fprintf(&accounts, " + z%d", n)
			fmt.Fprintf(&bounds, " z%d >= %.17g\n", n, opt.MinShare[d]*total)
		}
		fmt.Fprintf(&rows, " accounts:%s <= %.17g\nBounds\n%s", accounts.String(), total, bounds.String())
	}
	return "Maximize\n obj:\n" + obj.String() + "Subject To\n" + rows.String() + "Binary\n" + binary.String() + "End\n"
}

var progress = regexp.MustCompile(`mip =\s*(\S+) <=\s*(\S+)`)

// glpk returns the best GLPK found and what it knows nothing to be better than.
func glpk(t *testing.T, buildings []Building, opt Options) (value, bound float64) {
	t.Helper()
	dir := t.TempDir()
	model, solution := filepath.Join(dir, "model.lp"), filepath.Join(dir, "solution")
	if err := os.WriteFile(model, []byte(lp(buildings, opt)), 0o600); err != nil {
		t.Fatal(err)
	}
	out, err := exec.Command("glpsol", "--lp", model, "--cuts", "--tmlim", "3", "-w", solution).CombinedOutput()
	if err != nil {
		t.Fatalf("glpsol: %v\n%s", err, out)
	}
	content, err := os.ReadFile(solution)
	if err != nil {
		t.Fatalf("%v\n%s", err, out)
	}
	lines := bufio.NewScanner(bytes.NewReader(content))
	for lines.Scan() {
		f := strings.Fields(lines.Text())
		if len(f) < 6 || f[0] != "s" {
			continue
		}
		value, err := strconv.ParseFloat(f[5], 64)
		if err != nil {
			t.Fatal(err)
		}
		switch f[4] {
		case "o":
			return value, value
		case "f":
			bound := math.Inf(1)
			for _, m := range progress.FindAllSubmatch(out, -1) {
				if b, err := strconv.ParseFloat(string(m[2]), 64); err == nil {
					bound = b * (1 + 1e-9) // printed to ten digits
				}
			}
			return value, bound
		}
	}
	t.Fatalf("glpsol found nothing:\n%s", out)
	return 0, 0
}

func TestAgainstGLPK(t *testing.T) {
	t.Parallel()
	if _, err := exec.LookPath("glpsol"); err != nil {
		t.Skip("glpsol is not here: install Debian's package glpk-utils to compare programmes with GLPK")
	}
	type instance struct {
		name   string
		n      int
		wishes bool
	}
	for _, in := range []instance{
		{"one year", 500, false}, {"one year", 60, true}, {"small", 500, true}, {"three years", 200, false},
		{"three years", 30, true}, {"carry over", 100, true}, {"shares", 300, false}, {"all shared", 500, true},
		{"shares", 60, true}, {"capacities", 100, true}, {"capacities", 500, false}, {"everything", 150, true},
	} {
		t.Run(fmt.Sprintf("%s, %d buildings", in.name, in.n), func(t *testing.T) {
			t.Parallel()
			buildings := portfolio(uint64(in.n), in.n, 8)
			for i := range buildings {
				for j := range buildings[i].Packages {
					pk := &buildings[i].Packages[j]
					pk.Cost, pk.Value = math.Round(pk.Cost/1000), math.Round(pk.Value/100)
				}
			}
			if in.wishes {
				wishes(buildings)
				for i := range buildings {
					if buildings[i].Must {
						buildings[i].Packages[len(buildings[i].Packages)-1].Cost = 1
					}
				}
			}
			opt := limits(cost(buildings), in.n)[in.name]
			for y := range opt.Budgets {
				opt.Budgets[y] = math.Round(opt.Budgets[y]/10) * 10
			}
			plan := solved(t, buildings, opt)
			value, bound := glpk(t, buildings, opt)
			t.Logf("value %g, bound %.6g, gap %.2g, known optimal %v; GLPK %g to %g", plan.Value, plan.Bound, plan.Gap, plan.Optimal, value, bound)
			if plan.Value > bound*(1+1e-9) {
				t.Errorf("value %.12g is better than can be: %.12g", plan.Value, bound)
			}
			if value > plan.Bound*(1+1e-9) {
				t.Errorf("GLPK found %.12g, better than the bound %.12g", value, plan.Bound)
			}
			if plan.Optimal && value > plan.Value*(1+1e-9) {
				t.Errorf("GLPK found %.12g, better than the optimum %.12g", value, plan.Value)
			}
			if short := (value - plan.Value) / value; short > 0.005 {
				t.Errorf("value %g is %.4f short of GLPK's %g", plan.Value, short, value)
			}
		})
	}
}
