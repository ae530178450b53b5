package cli

import (
	"context"
	"errors"
	"fmt"
	"io"
	"text/tabwriter"

	"github.com/spf13/cobra"

	"kelvinrow/cmd/internal/pipeline"
	"kelvinrow/ingest"
	"kelvinrow/ingest/finding"
	"kelvinrow/ingest/header"
	"kelvinrow/sql/store"
)

func (a *app) load() *cobra.Command {
	var l loadFlags
	var show showFlags
	var undo, prune, files bool
	c := &cobra.Command{
		Use:   "load FILE...",
		Short: "Load spreadsheets into the store, or take them back",
		Long: `load reads spreadsheets into the store, and nothing more. A file of the same
name and place, or of the same name, takes the place of the version loaded before;
a file of rows to fix (NAME-to-fix) adds to it. Files of one name in one command
are told apart by their folders.

With --undo, load takes files back, named as they were loaded or by a copy of
them; the version of which one took the place counts again.`,
		Example: `  kelvinrow load register.xlsx
  kelvinrow load survey.xlsx --kind surveyed
  kelvinrow load --list
  kelvinrow load --undo survey.xlsx`,
		Args: func(c *cobra.Command, given []string) error {
			switch {
			case undo && (prune || files) || prune && files:
				return usagef("give only one of --undo, --list and --prune")
			case prune || files:
				return args(cobra.NoArgs)(c, given)
			}
			return args(cobra.MinimumNArgs(1))(c, given)
		},
		RunE: func(c *cobra.Command, given []string) error {
			opt, err := l.options(given)
			if err != nil {
				return err
			}
			ctx := c.Context()
			return a.within(ctx, func(s *pipeline.Session) error {
				switch {
				case undo:
					return a.undo(ctx, s, given, show.json)
				case prune:
					n, err := s.Store.PruneSources(ctx, a.portfolio)
					if err == nil && !a.quiet {
						fmt.Fprintf(a.out, "%d earlier versions of files removed; they cannot be brought back by --undo\n", n)
					}
					return err
				case files:
					return a.listFiles(ctx, s, show.json)
				}
				out, err := s.Load(ctx, opt)
				if err != nil {
					return err
				}
				if show.json {
					err = writeJSON(a.out, loadJSON(out))
				} else {
					a.tellLoad(out, show.all)
				}
				return errors.Join(err, loadStatus(out))
			})
		},
	}
	l.add(c)
	show.add(c)
	a.assumptionsFlag(c)
	c.Flags().BoolVar(&undo, "undo", false, "take the files back")
	c.Flags().BoolVar(&files, "list", false, "list the files loaded")
	c.Flags().BoolVar(&prune, "prune", false, "remove earlier versions of files, which --undo could bring back")
	return c
}

// loadStatus is how a command ends that loaded files.
func loadStatus(out *pipeline.LoadOutcome) error {
	switch {
	case out.Nothing():
		return errNothing
	case out.Faulty():
		return errSetAside
	}
	return nil
}

func loadJSON(out *pipeline.LoadOutcome) map[string]any {
	return map[string]any{
		"rows": out.Rows, "used": out.Used, "set_aside": out.SetAside,
		"already_loaded": list(out.Already), "to_fix": list(out.ToFix), "findings": list(out.Findings),
	}
}

// undo takes files back, each whole or not at all.
func (a *app) undo(ctx context.Context, s *pipeline.Session, files []string, asJSON bool) error {
	var all []store.Undone
	for _, f := range files {
		u, err := s.Undo(ctx, f)
		if err != nil {
			return err
		}
		all = append(all, u)
		if asJSON || a.quiet {
			continue
		}
		fmt.Fprintf(a.out, "Taken back   %s of %s: %s values of %s buildings, of which %s are in no other file\n",
			u.Source.File, u.Source.Loaded.Format("2006-01-02 15:04"), count(u.Values), count(u.Buildings), count(u.Gone))
		for _, r := range u.Restored {
			fmt.Fprintf(a.out, "Counts again %s of %s\n", r.File, r.Loaded.Format("2006-01-02 15:04"))
		}
		for _, r := range u.Left {
			fmt.Fprintf(a.out, "Still counts %s of %s; give --undo again to take it back too\n", r.File, r.Loaded.Format("2006-01-02 15:04"))
		}
	}
	if asJSON {
		return writeJSON(a.out, all)
	}
	return nil
}

func (a *app) listFiles(ctx context.Context, s *pipeline.Session, asJSON bool) error {
	sources, err := s.Store.Sources(ctx, a.portfolio)
	if err != nil {
		return err
	}
	if asJSON {
		return writeJSON(a.out, list(sources))
	}
	w := tabwriter.NewWriter(a.out, 0, 4, 2, ' ', 0)
	fmt.Fprintln(w, "file\tdated\tloaded (UTC)\tread as\tfrom")
	for _, f := range sources {
		fmt.Fprintf(w, "%s\t%s\t%s\t%s\t%s\n", f.File, f.FileDate, f.Loaded.UTC().Format("2006-01-02 15:04"), f.Reading, f.Path)
	}
	return w.Flush()
}

func (a *app) inspect() *cobra.Command {
	var columns, columnsOut string
	var show showFlags
	c := &cobra.Command{
		Use:   "inspect FILE...",
		Short: "Say how each sheet would be read; store nothing",
		Example: `  kelvinrow inspect register.xlsx
  kelvinrow inspect register.xlsx --columns-out columns.txt`,
		Args: args(cobra.MinimumNArgs(1)),
		RunE: func(c *cobra.Command, given []string) error {
			ctx := c.Context()
			mapping, err := pipeline.ReadMapping(columns)
			if err != nil {
				return err
			}
			files, others, err := ingest.Expand(given)
			if err != nil {
				return err
			}
			var reports []*ingest.Report
			faulty, used := false, 0
			for i, name := range ingest.Names(files) {
				r, err := ingest.Inspect(ctx, files[i], ingest.Options{Mapping: mapping, Today: today(), Name: name})
				if err != nil {
					return err
				}
				reports = append(reports, r)
				used += r.Used
				for _, x := range r.Findings {
					faulty = faulty || x.Severity == finding.Error
				}
			}
			others = append(others, ingest.UnusedMapping(mapping, reports, nil)...)
			if show.json {
				if err := writeJSON(a.out, inspection(reports, others)); err != nil {
					return err
				}
			} else {
				for _, r := range reports {
					a.tellReport(r, show.all)
				}
				tellFindings(a.out, others, 20, show.all)
			}
			if columnsOut != "" {
				err := pipeline.WriteWhole(columnsOut, func(w io.Writer) error {
					return header.WriteMapping(w, ingest.MappingSheets(reports))
				})
				if err != nil {
					return err
				}
				fmt.Fprintf(a.err, "wrote %s: edit it and give it back with --columns %s\n", columnsOut, columnsOut)
			}
			switch {
			case used == 0:
				return errNothing
			case faulty:
				return errSetAside
			}
			return nil
		},
	}
	c.Flags().StringVar(&columns, "columns", "", "`file` that says which column is what")
	c.Flags().StringVar(&columnsOut, "columns-out", "", "write the columns as recognised to `file`, ready to edit")
	show.add(c)
	return c
}

// inspection is what inspect prints as JSON: a report of each file, and one
// without a file for what is about none of them.
func inspection(reports []*ingest.Report, others []finding.Finding) []*ingest.Report {
	if len(others) > 0 {
		reports = append(reports[:len(reports):len(reports)], &ingest.Report{Findings: others})
	}
	return list(reports)
}

func (a *app) tellReport(r *ingest.Report, all bool) {
	w := tabwriter.NewWriter(a.out, 0, 4, 2, ' ', 0)
	defer w.Flush()
	fmt.Fprintf(w, "%s\n", r.File)
	for _, s := range r.Sheets {
		name := s.Name
		if s.Hidden {
			name += " (hidden)"
		}
		if s.Skipped != "" {
			fmt.Fprintf(w, "  sheet %q is not read: %s\n", name, s.Skipped)
			continue
		}
		fmt.Fprintf(w, "  sheet %q: header in row %d, %d rows, %d used, %d set aside\n", name, s.HeaderRow, s.Rows, s.Used, s.SetAside)
		for _, col := range s.Columns {
			field := col.Field
			if field == "" {
				field = "(ignored)"
			}
			if col.Unit != "" {
				field += " in " + col.Unit
			}
			fmt.Fprintf(w, "    %s\t%s\t-> %s\t%d values\t%s\n", col.Letter, clip(col.Header, 40), field, col.Count, clip(join(col.Samples), 50))
		}
	}
	tellFindings(w, r.Findings, 20, all)
}
