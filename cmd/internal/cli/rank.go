package cli

import (
	"fmt"
	"strconv"
	"text/tabwriter"

	"github.com/spf13/cobra"

	"kelvinrow/cmd/internal/pipeline"
)

func (a *app) rank() *cobra.Command {
	var r rankFlags
	c := &cobra.Command{
		Use:   "rank",
		Short: "Estimate and rank what is in the store, and write the ranked workbook",
		Example: `  kelvinrow rank -o ranked.xlsx
  kelvinrow rank --by npv --top 200 -o ranked-by-npv.xlsx`,
		Args: args(cobra.NoArgs),
		RunE: func(c *cobra.Command, _ []string) error {
			opt, err := r.options()
			if err != nil {
				return err
			}
			ctx := c.Context()
			return a.within(ctx, func(s *pipeline.Session) error {
				out, err := s.Rank(ctx, opt, nil)
				if err != nil {
					return err
				}
				a.tellRank(out)
				a.tellTimes(s.Timings)
				return nil
			})
		},
	}
	r.add(c, "ranked.xlsx")
	a.estimateFlags(c)
	return c
}

func (a *app) runs() *cobra.Command {
	var asJSON bool
	c := &cobra.Command{
		Use:     "runs",
		Short:   "List the runs stored, with their inputs and assumptions",
		Example: "  kelvinrow runs --portfolio demo",
		Args:    args(cobra.NoArgs),
		RunE: func(c *cobra.Command, _ []string) error {
			ctx := c.Context()
			return a.within(ctx, func(s *pipeline.Session) error {
				runs, err := s.Store.Runs(ctx, a.portfolio)
				if err != nil {
					return err
				}
				if asJSON {
					return writeJSON(a.out, list(runs))
				}
				if len(runs) == 0 {
					fmt.Fprintf(a.err, "portfolio %q has no runs\n", a.portfolio)
					return nil
				}
				w := tabwriter.NewWriter(a.out, 0, 4, 2, ' ', 0)
				fmt.Fprintln(w, "run\ttime (UTC)\tbuildings\tfailed\tclimate\tby\tversion\tassumptions\tinputs")
				for _, r := range runs {
					fmt.Fprintf(w, "%d\t%s\t%d\t%d\t%s\t%s\t%s\t%.12s\t%.12s\n", r.Number, r.Time.UTC().Format("2006-01-02 15:04:05"),
						r.Buildings, r.Failed, r.Climate, r.Yardstick, r.Version, r.Assumptions, r.Inputs)
				}
				return w.Flush()
			})
		},
	}
	c.Flags().BoolVar(&asJSON, "json", false, "print as JSON")
	c.AddCommand(a.runsWrite(), a.runsPrune())
	return c
}

func (a *app) runsWrite() *cobra.Command {
	var out string
	c := &cobra.Command{
		Use:     "write RUN",
		Short:   "Write the workbook of a stored run again, the same as it was",
		Example: "  kelvinrow runs write 3 -o ranked-of-run-3.xlsx",
		Args:    args(cobra.ExactArgs(1)),
		RunE: func(c *cobra.Command, given []string) error {
			n, err := strconv.Atoi(given[0])
			if err != nil || n < 1 {
				return usagef("%q is not the number of a run (see: kelvinrow runs)", given[0])
			}
			if err := xlsxName(out, "workbook"); err != nil {
				return err
			}
			ctx := c.Context()
			return a.within(ctx, func(s *pipeline.Session) error {
				run, err := s.WriteRun(ctx, n, out)
				if err == nil && !a.quiet {
					fmt.Fprintf(a.out, "Run %-8d %s\n", run.Number, out)
				}
				return err
			})
		},
	}
	c.Flags().StringVarP(&out, "output", "o", "ranked.xlsx", "`file` for the workbook")
	return c
}

func (a *app) runsPrune() *cobra.Command {
	var keep int
	c := &cobra.Command{
		Use:     "prune",
		Short:   "Drop all but the newest runs",
		Example: "  kelvinrow runs prune --keep 5",
		Args:    args(cobra.NoArgs),
		RunE: func(c *cobra.Command, _ []string) error {
			if keep < 1 {
				return usagef("--keep %d: at least the newest run stays", keep)
			}
			ctx := c.Context()
			return a.within(ctx, func(s *pipeline.Session) error {
				n, err := s.Store.Prune(ctx, a.portfolio, keep)
				if err == nil && !a.quiet {
					fmt.Fprintf(a.out, "Dropped      %d runs of portfolio %q\n", n, a.portfolio)
				}
				return err
			})
		},
	}
	c.Flags().IntVar(&keep, "keep", 10, "how many of the newest runs stay")
	return c
}

func (a *app) explain() *cobra.Command {
	var asJSON bool
	c := &cobra.Command{
		Use:   "explain BUILDING",
		Short: "Every number of one building, and where it came from",
		Example: `  kelvinrow explain A-0412
  kelvinrow explain A-0412 --json > A-0412.json`,
		Args: args(cobra.ExactArgs(1)),
		RunE: func(c *cobra.Command, given []string) error {
			ctx := c.Context()
			return a.within(ctx, func(s *pipeline.Session) error {
				e, err := s.Explain(ctx, given[0])
				if err != nil {
					return err
				}
				if asJSON {
					return writeJSON(a.out, e)
				}
				return e.WriteText(a.out)
			})
		},
	}
	c.Flags().BoolVar(&asJSON, "json", false, "print as JSON, in full precision")
	a.estimateFlags(c)
	return c
}
