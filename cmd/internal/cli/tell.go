package cli

import (
	"encoding/json"
	"fmt"
	"io"
	"path/filepath"
	"slices"
	"strings"
	"text/tabwriter"
	"time"

	"github.com/spf13/cobra"

	"kelvinrow/cmd/internal/pipeline"
	"kelvinrow/estimate/state"
	"kelvinrow/ingest/finding"
	"kelvinrow/rank/workbook"
)

func today() string { return time.Now().Format("2006-01-02") }

func writeJSON(w io.Writer, v any) error {
	enc := json.NewEncoder(w)
	enc.SetIndent("", "  ")
	enc.SetEscapeHTML(false)
	return enc.Encode(v)
}

// list makes an empty list of a nil one, so that JSON shows [] and not null.
func list[T any](s []T) []T {
	if s == nil {
		return []T{}
	}
	return s
}

func join(s []string) string { return strings.Join(s, " | ") }

// clip shortens text for a column of a terminal.
func clip(s string, n int) string {
	r := []rune(strings.Join(strings.Fields(s), " "))
	if len(r) <= n {
		return string(r)
	}
	return string(r[:n-1]) + "…"
}

// count renders a count with thin groups: 12 345.
func count(n int) string {
	s := fmt.Sprint(n)
	for i := len(s) - 3; i > 0; i -= 3 {
		s = s[:i] + " " + s[i:]
	}
	return s
}

// amount renders a quantity to three figures with the prefix that fits, from a
// number in kilo-units: 12 300 kWh is 12.3 MWh.
func amount(kilo float64, unit string) string {
	switch {
	case kilo >= 1e6 || kilo <= -1e6:
		return fmt.Sprintf("%.1f G%s", kilo/1e6, unit)
	case kilo >= 1e3 || kilo <= -1e3:
		return fmt.Sprintf("%.1f M%s", kilo/1e3, unit)
	}
	return fmt.Sprintf("%.0f k%s", kilo, unit)
}

func (a *app) tellLoad(o *pipeline.LoadOutcome, all bool) {
	if a.quiet {
		return
	}
	sheets := 0
	for _, r := range o.Reports {
		for _, s := range r.Sheets {
			if s.Skipped == "" {
				sheets++
			}
		}
	}
	fmt.Fprintf(a.out, "Read         %d files, %d sheets, %s rows: %s used, %s set aside\n",
		len(o.Reports), sheets, count(o.Rows), count(o.Used), count(o.SetAside))
	if len(o.Already) > 0 {
		fmt.Fprintf(a.out, "             %d files were loaded before and changed nothing\n", len(o.Already))
	}
	tellFindings(a.out, o.Findings, 6, all)
	for _, f := range o.ToFix {
		fmt.Fprintf(a.out, "To fix       %s\n", f)
	}
}

// showFlags are the flags that say how findings are shown.
type showFlags struct{ all, json bool }

func (s *showFlags) add(c *cobra.Command) {
	c.Flags().BoolVar(&s.all, "all", false, "show every finding, also notes")
	c.Flags().BoolVar(&s.json, "json", false, "print what was found as JSON, every finding included")
}

// aboutFiles are the notes that are shown without being asked for: they are
// about whole files, and few; of others one of each file.
var aboutFiles = []string{finding.FileSkipped, finding.OwnWorkbook, finding.Replaced, finding.UnreadQuantity}

// tellFindings counts the findings and shows the gravest few, or all.
func tellFindings(w io.Writer, fs []finding.Finding, show int, all bool) {
	var by [3]int
	for _, f := range fs {
		by[f.Severity]++
	}
	if len(fs) == 0 {
		return
	}
	fmt.Fprintf(w, "Findings     %s errors, %s warnings, %s notes\n",
		count(by[finding.Error]), count(by[finding.Warning]), count(by[finding.Note]))
	if all {
		for _, f := range fs {
			fmt.Fprintf(w, "  %s\n", f)
		}
		return
	}
	shown := 0
	for _, severity := range []finding.Severity{finding.Error, finding.Warning, finding.Note} {
		kinds := map[string]bool{}
		n := 0
		for _, f := range fs {
			if severity == finding.Note && !slices.Contains(aboutFiles, f.Check) {
				continue
			}
			// One example of each kind tells more than twenty of the same.
			if f.Severity != severity || kinds[f.Check+f.File] || n == show {
				continue
			}
			kinds[f.Check+f.File] = true
			fmt.Fprintf(w, "  %s\n", f)
			n++
		}
		shown += n
	}
	if rest := len(fs) - shown; rest > 0 {
		fmt.Fprintf(w, "  and %s more: --all shows them, --json gives them to programs\n", count(rest))
	}
}

func (a *app) tellRank(o *pipeline.RankOutcome) {
	if a.quiet {
		return
	}
	s := &o.Summary
	fmt.Fprintf(a.out, "Buildings    %s estimated in climate %s, assumptions %s", count(s.Buildings-s.Failed), o.Run.Climate, o.Assumptions)
	if s.Failed > 0 {
		fmt.Fprintf(a.out, ", %s could not be (the sheet Buildings says why)", count(s.Failed))
	}
	fmt.Fprintln(a.out)
	if s.FloorAreaM2 == 0 {
		fmt.Fprintf(a.out, "\nNo building could be estimated: the files bring no floor area or volume.\nRun %d        %s\n", o.Run.Number, o.Out)
		return
	}
	fmt.Fprintf(a.out, "Heat         need %sh/a (%.0f kWh/m2), delivered %sh/a, %s CO2/a\n",
		amount(s.NeedKWh, "W"), s.NeedKWh/s.FloorAreaM2, amount(s.DeliveredKWh, "W"), tonnes(s.CO2Kg))
	var total float64
	for _, q := range s.LossByPathKWh {
		total += q
	}
	var parts []string
	for p, q := range s.LossByPathKWh {
		parts = append(parts, fmt.Sprintf("%s %.0f %%", state.Path(p), 100*q/total))
	}
	fmt.Fprintf(a.out, "Loss by path %s\n\n", strings.Join(parts, ", "))

	w := tabwriter.NewWriter(a.out, 0, 4, 2, ' ', 0)
	fmt.Fprintln(w, "Measure\tbuildings\tsaves\tcosts\tbest building\tsaves there")
	for i, m := range s.Measures {
		best := "-\t"
		if m.Best >= 0 {
			b := &o.Buildings[m.Best]
			best = fmt.Sprintf("%s %s\t%s/a", b.ID, clip(b.Name, 24), amount(b.Measures[i].SavingKWh, "Wh"))
		}
		fmt.Fprintf(w, "%s\t%s\t%s/a\t%s\t%s\n", o.Basis.Measures[i].Terms.Label, count(m.Applies),
			amount(m.SavingKWh, "Wh"), money(m.Cost, o.Basis.Set.Economics.Currency), best)
	}
	w.Flush()
	if p := o.Programme; p != nil {
		a.tellProgramme(p, o.Basis.Set.Economics.Currency)
	}
	path := o.Out
	if abs, err := filepath.Abs(path); err == nil {
		path = abs
	}
	fmt.Fprintf(a.out, "\nSavings of different measures on one building do not add up. The numbers are a\nscreening: cautions stand beside them in the workbook; local codes and licensed\npractice decide.\n")
	fmt.Fprintf(a.out, "Run %d        %s\n", o.Run.Number, path)
}

func (a *app) tellProgramme(p *workbook.Programme, currency string) {
	fmt.Fprintf(a.out, "\nProgramme    for the most %s; at most %.2g %% more is possible within the same limits\n", p.By.Words(), 100*p.Gap)
	for y, budget := range p.Budgets {
		n, cost, kwh, co2 := 0, 0.0, 0.0, 0.0
		for i := range p.Chosen {
			if c := &p.Chosen[i]; c.Year == y+1 {
				n++
				cost += c.Package.Cost
				kwh += c.Package.SavingKWh
				co2 += c.Package.CO2Kg
			}
		}
		fmt.Fprintf(a.out, "  year %-6d %s buildings for %s of %s, saves %s/a and %s CO2/a\n", y+1, count(n), money(cost, currency), money(budget, currency),
			amount(kwh, "Wh"), tonnes(co2))
	}
}

func tonnes(kg float64) string { return fmt.Sprintf("%s t", count(int(kg/1000+0.5))) }

func money(v float64, currency string) string {
	if v < 1e6 {
		return fmt.Sprintf("%.0f k %s", v/1e3, currency)
	}
	return fmt.Sprintf("%.1f M %s", v/1e6, currency)
}

func (a *app) tellTimes(t pipeline.Timings) {
	if a.quiet {
		return
	}
	sec := func(d time.Duration) string { return fmt.Sprintf("%.1f", d.Seconds()) }
	fmt.Fprintf(a.out, "Seconds      start %s, read and store %s, estimate %s, rank %s, store run %s, write %s\n",
		sec(t.Start), sec(t.Read), sec(t.Estimate), sec(t.Rank), sec(t.Save), sec(t.Write))
}
