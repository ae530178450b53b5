package cli

import (
	"fmt"

	"github.com/spf13/cobra"

	"kelvinrow/sql/cluster"
)

func (a *app) storeCommand() *cobra.Command {
	c := &cobra.Command{
		Use:   "store",
		Short: "Look after the private Postgres",
		Long: `Without --db or DATABASE_URL, kelvinrow keeps its data in a private Postgres: a
folder that only you can read, reached by a Unix socket, started when a command
needs it and stopped when the last command is done. KELVINROW_STORE=DIR puts the
folder elsewhere.`,
		Example: "  kelvinrow store status\n  kelvinrow store stop",
		Args:    unknownCommand,
		RunE:    func(c *cobra.Command, _ []string) error { return c.Help() },
	}
	c.AddCommand(
		&cobra.Command{
			Use: "status", Short: "Say where the private Postgres is and whether it runs",
			Example: "  kelvinrow store status",
			Args:    args(cobra.NoArgs),
			RunE: func(c *cobra.Command, _ []string) error {
				st, err := cluster.Status("")
				if err != nil {
					return err
				}
				fmt.Fprintln(a.out, st)
				return nil
			},
		},
		&cobra.Command{
			Use: "stop", Short: "Stop the private Postgres at once, also under a command that uses it or left it behind",
			Example: "  kelvinrow store stop",
			Args:    args(cobra.NoArgs),
			RunE: func(c *cobra.Command, _ []string) error {
				if err := cluster.Stop(c.Context(), ""); err != nil {
					return err
				}
				if !a.quiet {
					fmt.Fprintln(a.out, "the private Postgres is stopped")
				}
				return nil
			},
		},
	)
	return c
}
