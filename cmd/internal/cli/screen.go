package cli

import (
	"errors"
	"fmt"
	"os"
	"path/filepath"

	"github.com/spf13/cobra"

	"kelvinrow/cmd/internal/demo"
	"kelvinrow/cmd/internal/pipeline"
	"kelvinrow/estimate/building"
	"kelvinrow/rank"
)

// rankFlags are the flags of commands that write the ranked workbook.
type rankFlags struct {
	out       string
	yardstick string
	top       int
	programme programmeFlags
}

func (r *rankFlags) add(c *cobra.Command, out string) {
	c.Flags().StringVarP(&r.out, "output", "o", out, "`file` for the ranked workbook")
	c.Flags().StringVar(&r.yardstick, "by", "kwh", "what to rank by: kwh, co2, money, kwh-per-euro, npv, payback or cost-per-kwh")
	c.Flags().IntVar(&r.top, "top", 0, "rows per measure sheet (0 is all)")
	r.programme.add(c)
}

func (r *rankFlags) options() (pipeline.RankOptions, error) {
	y, err := rank.ParseYardstick(r.yardstick)
	if err != nil {
		return pipeline.RankOptions{}, usageError{err}
	}
	if r.top < 0 {
		return pipeline.RankOptions{}, usagef("--top %d: give 0 for all rows, or a count", r.top)
	}
	if err := xlsxName(r.out, "workbook"); err != nil {
		return pipeline.RankOptions{}, err
	}
	// Said now, not after minutes of work.
	if info, err := os.Stat(filepath.Dir(r.out)); err != nil || !info.IsDir() {
		return pipeline.RankOptions{}, usagef("--output %s: there is no folder %s", r.out, filepath.Dir(r.out))
	}
	p, err := r.programme.options(y)
	if err != nil {
		return pipeline.RankOptions{}, err
	}
	return pipeline.RankOptions{Out: r.out, Yardstick: y, Top: r.top, Programme: p}, nil
}

// loadFlags are the flags of commands that read files.
type loadFlags struct {
	columns string
	kind    string
}

func (l *loadFlags) add(c *cobra.Command) {
	c.Flags().StringVar(&l.columns, "columns", "", "`file` that says which column is what (see: kelvinrow inspect --columns-out)")
	c.Flags().StringVar(&l.kind, "kind", "", "how firm the files' values are: registered, certified, metered or surveyed (default registered; rows to fix, as their source)")
}

func (l *loadFlags) options(files []string) (pipeline.LoadOptions, error) {
	if l.kind == "" {
		return pipeline.LoadOptions{Files: files, Columns: l.columns}, nil
	}
	kind, ok := building.KindByWord(l.kind)
	if !ok || kind == building.Default {
		return pipeline.LoadOptions{}, usagef("--kind %s: use registered, certified, metered or surveyed", l.kind)
	}
	return pipeline.LoadOptions{Files: files, Columns: l.columns, Kind: kind}, nil
}

func (a *app) screen() *cobra.Command {
	var r rankFlags
	var l loadFlags
	var show showFlags
	c := &cobra.Command{
		Use:   "screen FILE...",
		Short: "Load spreadsheets, estimate, rank, and write the ranked workbook",
		Long: `screen is the main job in one go: it loads the files into the store, estimates
every building of the portfolio, ranks the buildings for each measure, and writes
the workbook. Loading the same file again changes nothing.`,
		Example: `  kelvinrow screen register.xlsx ventilation.csv -o ranked.xlsx
  kelvinrow screen survey-2026/ --portfolio north --climate town.epw -o north.xlsx`,
		Args: args(cobra.MinimumNArgs(1)),
		RunE: func(c *cobra.Command, files []string) error {
			ranking, err := r.options()
			if err != nil {
				return err
			}
			loading, err := l.options(files)
			if err != nil {
				return err
			}
			return a.runScreen(c, loading, ranking, show)
		},
	}
	r.add(c, "ranked.xlsx")
	l.add(c)
	show.add(c)
	a.estimateFlags(c)
	return c
}

func (a *app) runScreen(c *cobra.Command, loading pipeline.LoadOptions, ranking pipeline.RankOptions, show showFlags) error {
	ctx := c.Context()
	return a.within(ctx, func(s *pipeline.Session) error {
		loaded, err := s.Load(ctx, loading)
		if err != nil {
			return err
		}
		if !show.json {
			a.tellLoad(loaded, show.all)
		}
		if loaded.Nothing() {
			if show.json {
				err = writeJSON(a.out, loadJSON(loaded))
			}
			return errors.Join(err, errNothing)
		}
		ranked, err := s.Rank(ctx, ranking, loaded.Findings)
		if err != nil {
			return err
		}
		if show.json {
			j := loadJSON(loaded)
			j["run"], j["output"], j["buildings"], j["failed"] = ranked.Run.Number, ranked.Out, ranked.Run.Buildings, ranked.Run.Failed
			err = writeJSON(a.out, j)
		} else {
			a.tellRank(ranked)
			a.tellTimes(s.Timings)
		}
		return errors.Join(err, loadStatus(loaded))
	})
}

func (a *app) demo() *cobra.Command {
	var buildings int
	var seed int64
	c := &cobra.Command{
		Use:   "demo [DIR]",
		Short: "The whole job on an invented portfolio; leaves its workbooks in DIR",
		Long: `demo writes the workbooks of an invented landlord, with the holes and the dirt
that real ones have, and screens them. Input and output workbooks stay in DIR
(default ./demo). The portfolio in the store is called "demo".`,
		Example: `  kelvinrow demo
  kelvinrow demo /tmp/kelvinrow-demo --buildings 500`,
		Args: args(cobra.MaximumNArgs(1)),
		RunE: func(c *cobra.Command, given []string) error {
			dir := "demo"
			if len(given) == 1 {
				dir = given[0]
			}
			if buildings < 1 {
				return usagef("--buildings %d: give at least 1", buildings)
			}
			if err := os.MkdirAll(dir, 0o755); err != nil {
				return err
			}
			files, err := demo.Write(dir, demo.Options{Buildings: buildings, Seed: seed})
			if err != nil {
				return fmt.Errorf("write the demo portfolio: %w", err)
			}
			if !c.Flags().Changed("portfolio") {
				a.portfolio = "demo"
			}
			err = a.runScreen(c, pipeline.LoadOptions{Files: files, Kind: building.Registered},
				pipeline.RankOptions{Out: filepath.Join(dir, "ranked.xlsx"), Yardstick: rank.Default, Title: demo.Landlord,
					// As much a year as the invented landlord has.
					Programme: pipeline.ProgrammeOptions{Budgets: []float64{4e6, 4e6, 4e6}, By: rank.Energy}}, showFlags{})
			if errors.Is(err, errSetAside) {
				return nil // the demo's dirt is on purpose
			}
			return err
		},
	}
	c.Flags().IntVar(&buildings, "buildings", 2000, "how many buildings the invented landlord has")
	c.Flags().Int64Var(&seed, "seed", 1, "another seed makes another portfolio")
	a.estimateFlags(c)
	return c
}
