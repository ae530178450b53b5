// Package cli turns command lines into calls of the pipeline and its outcome
// into words and an exit status: 0 done, 1 failed, 2 wrong usage, 3 done with
// some rows set aside.
package cli

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strings"
	"syscall"

	"github.com/spf13/cobra"

	"kelvinrow/cmd/internal/pipeline"
	"kelvinrow/cmd/internal/progress"
	"kelvinrow/estimate"
)

// Exit statuses.
const (
	statusDone     = 0
	statusFailed   = 1
	statusUsage    = 2
	statusSetAside = 3
)

// mostRefusals is how many faults of a workbook of assumptions are shown.
const mostRefusals = 60

// errSetAside ends a command that did its work while some rows were set aside.
var errSetAside = errors.New("some rows were set aside")

// errNothing ends a command of whose files nothing at all could be used.
var errNothing = errors.New("nothing in the files given could be used (see the findings, or: kelvinrow inspect FILE...)")

// usageError is a command line that cannot be understood.
type usageError struct{ err error }

func (e usageError) Error() string { return e.err.Error() }
func (e usageError) Unwrap() error { return e.err }

func usagef(format string, args ...any) error { return usageError{fmt.Errorf(format, args...)} }

// app carries the common flags and the streams.
type app struct {
	out, err  io.Writer
	db        string
	portfolio string
	climate   string
	workers   int
	quiet     bool

	assumptions     string
	prices, changes []string
}

// Run runs one command line and returns its exit status.
func Run(ctx context.Context, args []string, stdout, stderr io.Writer) int {
	a := &app{out: stdout, err: stderr}
	root := a.root()
	root.SetArgs(args)
	root.SetOut(stdout)
	root.SetErr(stderr)
	err := root.ExecuteContext(ctx)
	var usage usageError
	var refused *pipeline.Refused
	switch {
	case err == nil:
		return statusDone
	case errors.Is(err, errSetAside):
		return statusSetAside
	case errors.Is(err, syscall.EPIPE):
		return statusFailed // whoever read the output has gone: nobody to tell
	case errors.As(err, &refused):
		for i, f := range refused.Findings {
			if i == mostRefusals {
				fmt.Fprintf(stderr, "  and %s more\n", count(len(refused.Findings)-i))
				break
			}
			fmt.Fprintf(stderr, "  %s\n", f)
		}
		fmt.Fprintf(stderr, "kelvinrow: %v\n", err)
		return statusFailed
	case errors.As(err, &usage):
		fmt.Fprintf(stderr, "kelvinrow: %v\n", err)
		return statusUsage
	case ctx.Err() != nil:
		fmt.Fprintln(stderr, "kelvinrow: stopped; the store is as it was before the command")
		return statusFailed
	default:
		fmt.Fprintf(stderr, "kelvinrow: %v\n", err)
		return statusFailed
	}
}

func (a *app) root() *cobra.Command {
	root := &cobra.Command{
		Use:   "kelvinrow",
		Short: "Screen many buildings for retrofit: spreadsheets in, a ranked workbook out",
		Long: `kelvinrow reads the spreadsheets you have of your buildings, keeps them in
Postgres, fills what is missing from archetype rules, computes each building's
heat balance, and ranks the buildings by what each retrofit measure saves.`,
		Example: `  kelvinrow demo
  kelvinrow screen register.xlsx meters.csv -o ranked.xlsx
  kelvinrow explain A-0412`,
		Version:       estimate.Version,
		SilenceErrors: true,
		SilenceUsage:  true,
		Args:          unknownCommand,
		RunE:          func(c *cobra.Command, _ []string) error { return c.Help() },
	}
	root.CompletionOptions.HiddenDefaultCmd = true
	root.SetFlagErrorFunc(func(c *cobra.Command, err error) error {
		return usagef("%w; see: %s --help", err, c.CommandPath())
	})
	f := root.PersistentFlags()
	f.StringVar(&a.db, "db", os.Getenv("DATABASE_URL"), "Postgres `URL`; without one a private server is started (default $DATABASE_URL)")
	f.Lookup("db").DefValue = ""
	f.StringVar(&a.portfolio, "portfolio", "default", "`name` of the portfolio: keeps clients apart in one store")
	f.BoolVarP(&a.quiet, "quiet", "q", false, "print nothing but errors and what was asked for")
	root.AddCommand(a.demo(), a.screen(), a.inspect(), a.load(), a.rank(), a.survey(), a.explain(), a.runs(), a.assumptionsCommand(), a.storeCommand())
	return root
}

func unknownCommand(c *cobra.Command, args []string) error {
	if len(args) == 0 {
		return nil
	}
	message := fmt.Sprintf("there is no command %q", args[0])
	if near := c.SuggestionsFor(args[0]); len(near) > 0 {
		message += fmt.Sprintf("; did you mean %q?", near[0])
	}
	return usagef("%s (see: kelvinrow --help)", message)
}

// estimateFlags adds the flags of commands that estimate.
func (a *app) estimateFlags(c *cobra.Command) {
	c.Flags().StringVar(&a.climate, "climate", "", "climate by `name`, or an .epw file (default that of the last run, or the first of the assumptions)")
	a.assumptionsFlag(c)
	c.Flags().StringArrayVar(&a.prices, "price", nil, "what if: `carrier=price` per kWh, such as gas=0.14; may be given several times")
	c.Flags().StringArrayVar(&a.changes, "set", nil, "what if: `owner.quantity=number`, such as new-windows.unit_cost=700; may be given several times")
	c.Flags().IntVar(&a.workers, "workers", 0, "buildings computed at the same time (default one per processor)")
}

func (a *app) assumptionsFlag(c *cobra.Command) {
	c.Flags().StringVar(&a.assumptions, "assumptions", "", "`workbook` of assumptions (see: kelvinrow assumptions), the version of a run, or starter (default what the last run was given)")
}

// xlsxName checks that what a command writes is called a workbook.
func xlsxName(out, what string) error {
	if filepath.Ext(out) != ".xlsx" {
		return usagef("--output %s: the %s's name must end in .xlsx", out, what)
	}
	return nil
}

// whatIf turns prices and changes into changes.
func (a *app) whatIf() ([]string, error) {
	var out []string
	for _, p := range a.prices {
		carrier, price, ok := strings.Cut(p, "=")
		if !ok || strings.Contains(carrier, ".") {
			return nil, usagef("--price %s: write CARRIER=PRICE, such as gas=0.14", p)
		}
		out = append(out, carrier+".price="+price)
	}
	return append(out, a.changes...), nil
}

// args wraps cobra's argument checks so that a wrong count is wrong usage.
func args(check cobra.PositionalArgs) cobra.PositionalArgs {
	return func(c *cobra.Command, given []string) error {
		if err := check(c, given); err != nil {
			return usagef("%w; see: %s --help", err, c.CommandPath())
		}
		return nil
	}
}

// within runs f with the store open, and closes it whatever happens; the first
// error counts.
func (a *app) within(ctx context.Context, f func(*pipeline.Session) error) (err error) {
	changes, err := a.whatIf()
	if err != nil {
		return err
	}
	s, err := pipeline.Open(ctx, pipeline.Config{
		DB: a.db, Portfolio: a.portfolio, Climate: a.climate, Workers: a.workers,
		Assumptions: a.assumptions, Changes: changes,
		Progress: progress.New(a.err, a.quiet),
	})
	if err != nil {
		return err
	}
	defer func() {
		if e := s.Close(ctx); e != nil && err == nil {
			err = e
		}
	}()
	return f(s)
}
