package cli

import (
	"fmt"
	"io"
	"text/tabwriter"

	"github.com/spf13/cobra"

	"kelvinrow/cmd/internal/pipeline"
	"kelvinrow/ingest"
	"kelvinrow/ingest/finding"
	"kelvinrow/ingest/header"
)

func (a *app) load() *cobra.Command {
	var l loadFlags
	var asJSON bool
	c := &cobra.Command{
		Use:   "load FILE...",
		Short: "Load spreadsheets into the store, and nothing more",
		Example: `  kelvinrow load register.xlsx
  kelvinrow load survey.xlsx --kind surveyed`,
		Args: args(cobra.MinimumNArgs(1)),
		RunE: func(c *cobra.Command, files []string) error {
			opt, err := l.options(files)
			if err != nil {
				return err
			}
			ctx := c.Context()
			return a.within(ctx, func(s *pipeline.Session) error {
				out, err := s.Load(ctx, opt)
				if err != nil {
					return err
				}
				if asJSON {
					err = writeJSON(a.out, map[string]any{
						"rows": out.Rows, "used": out.Used, "set_aside": out.SetAside,
						"already_loaded": list(out.Already), "to_fix": list(out.ToFix), "findings": list(out.Findings),
					})
					if err != nil {
						return err
					}
				} else {
					a.tellLoad(out)
				}
				if out.Faulty() {
					return errSetAside
				}
				return nil
			})
		},
	}
	l.add(c)
	c.Flags().BoolVar(&asJSON, "json", false, "print what was found as JSON")
	return c
}

func (a *app) inspect() *cobra.Command {
	var columns, columnsOut string
	var asJSON bool
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
			files, err := ingest.Expand(given)
			if err != nil {
				return err
			}
			var reports []*ingest.Report
			faulty := false
			for _, f := range files {
				r, err := ingest.Inspect(ctx, f, ingest.Options{Mapping: mapping, Today: today()})
				if err != nil {
					return err
				}
				reports = append(reports, r)
				for _, x := range r.Findings {
					faulty = faulty || x.Severity == finding.Error
				}
			}
			switch {
			case asJSON:
				if err := writeJSON(a.out, reports); err != nil {
					return err
				}
			default:
				for _, r := range reports {
					a.tellReport(r)
				}
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
			if faulty {
				return errSetAside
			}
			return nil
		},
	}
	c.Flags().StringVar(&columns, "columns", "", "`file` that says which column is what")
	c.Flags().StringVar(&columnsOut, "columns-out", "", "write the columns as recognised to `file`, ready to edit")
	c.Flags().BoolVar(&asJSON, "json", false, "print as JSON")
	return c
}

func (a *app) tellReport(r *ingest.Report) {
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
	tellFindings(w, r.Findings, 20)
}
