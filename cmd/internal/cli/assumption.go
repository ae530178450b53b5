package cli

import (
	"fmt"

	"github.com/spf13/cobra"

	"kelvinrow/cmd/internal/pipeline"
)

func (a *app) assumptionsCommand() *cobra.Command {
	var out string
	c := &cobra.Command{
		Use:   "assumptions",
		Short: "Write the assumptions in force as a workbook to edit and give back",
		Long: `assumptions writes everything estimates rest on beside the buildings: prices,
costs, climates, conditions of use, default rules, build-ups, measures. Edit the
workbook and give it back with --assumptions FILE; the portfolio then keeps to it
until another is given.`,
		Example: `  kelvinrow assumptions -o assumptions.xlsx
  kelvinrow rank --assumptions assumptions.xlsx -o ranked.xlsx`,
		Args: args(cobra.NoArgs),
		RunE: func(c *cobra.Command, _ []string) error {
			if err := xlsxName(out, "workbook"); err != nil {
				return err
			}
			ctx := c.Context()
			return a.within(ctx, func(s *pipeline.Session) error {
				name, version, err := s.WriteAssumptions(ctx, out)
				if err == nil && !a.quiet {
					fmt.Fprintf(a.out, "Assumptions  %s (%s, version %.12s)\n", out, name, version)
				}
				return err
			})
		},
	}
	c.Flags().StringVarP(&out, "output", "o", "assumptions.xlsx", "`file` for the workbook")
	a.estimateFlags(c)
	return c
}
