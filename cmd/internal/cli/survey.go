package cli

import (
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"github.com/spf13/cobra"

	"kelvinrow/cmd/internal/pipeline"
)

func (a *app) survey() *cobra.Command {
	var opt pipeline.SurveyOptions
	var buildings string
	var asJSON bool
	c := &cobra.Command{
		Use:   "survey",
		Short: "Write a survey form for chosen buildings, which load reads back",
		Long: `survey writes a workbook with one row for each building: what is known of it, with
where that comes from, and room for what is found on site. Filled in and given to
load, what was filled in or changed counts as surveyed.

Without a choice, the form is for buildings whose survey may change what is decided:
near the cut of a measure in the last run, where the list's cost reaches --budget or
its best quarter ends, those with most saving that rests on defaults.`,
		Example: `  kelvinrow survey -o survey.xlsx
  kelvinrow survey --budget 2000000 --count 30 -o survey.xlsx
  kelvinrow survey --measure new-windows --top 20 -o windows.xlsx
  kelvinrow survey --buildings A-0412,A-0413 -o two.xlsx
  kelvinrow load survey.xlsx`,
		Args: args(cobra.NoArgs),
		RunE: func(c *cobra.Command, _ []string) error {
			if err := surveyChoice(c, &opt, buildings); err != nil {
				return err
			}
			ctx := c.Context()
			return a.within(ctx, func(s *pipeline.Session) error {
				out, err := s.Survey(ctx, opt)
				if err != nil {
					return err
				}
				if asJSON {
					return writeJSON(a.out, out)
				}
				if !a.quiet {
					fmt.Fprintf(a.out, "Chosen       %s\n", out.Choice)
					fmt.Fprintf(a.out, "Form %s %s: %s buildings, %s cells known, %s to fill in\n", out.Number, out.Out, count(len(out.Buildings)), count(out.Known), count(out.Open))
					fmt.Fprintf(a.out, "             filled in, it goes back with: kelvinrow load %s\n", filepath.Base(out.Out))
				}
				return nil
			})
		},
	}
	f := c.Flags()
	f.StringVarP(&opt.Out, "output", "o", "survey.xlsx", "`file` for the form")
	f.StringVar(&buildings, "buildings", "", "ids, with commas between, or a `file` with one on each line")
	f.StringArrayVar(&opt.Districts, "district", nil, "all buildings of a district, by `name`; may be given several times")
	f.StringVar(&opt.Measure, "measure", "", "the first of a measure in the last run, by its `key` such as new-windows")
	f.IntVar(&opt.Top, "top", 50, "how many of the measure's first")
	f.Float64Var(&opt.Budget, "budget", 0, "what may be spent: the cut is where a measure's list has used it up (default its best quarter)")
	f.IntVar(&opt.Count, "count", 50, "how many buildings where none are named")
	f.BoolVar(&asJSON, "json", false, "print what was written as JSON")
	return c
}

// surveyChoice checks that one way of choosing is given, and reads ids.
func surveyChoice(c *cobra.Command, opt *pipeline.SurveyOptions, buildings string) error {
	if err := xlsxName(opt.Out, "form"); err != nil {
		return err
	}
	if info, err := os.Stat(filepath.Dir(opt.Out)); err != nil || !info.IsDir() {
		return usagef("--output %s: there is no folder %s", opt.Out, filepath.Dir(opt.Out))
	}
	var ways []string
	for _, w := range []string{"buildings", "district", "measure"} {
		if c.Flags().Changed(w) {
			ways = append(ways, "--"+w)
		}
	}
	if len(ways) > 1 {
		return usagef("give only one of %s", strings.Join(ways, " and "))
	}
	for _, pair := range [][2]string{{"top", "--measure"}, {"budget", ""}, {"count", ""}} {
		flag, needs := pair[0], pair[1]
		switch {
		case !c.Flags().Changed(flag):
		case needs == "" && len(ways) > 0:
			return usagef("--%s does not go with %s", flag, ways[0])
		case needs != "" && !slices.Contains(ways, needs):
			return usagef("--%s needs %s", flag, needs)
		}
	}
	switch {
	case opt.Top < 1:
		return usagef("--top %d: give at least 1", opt.Top)
	case opt.Count < 1:
		return usagef("--count %d: give at least 1", opt.Count)
	case !(opt.Budget >= 0):
		return usagef("--budget %g: give a sum of money", opt.Budget)
	}
	if !c.Flags().Changed("buildings") {
		return nil
	}
	ids, err := idsOf(buildings)
	if err != nil {
		return err
	}
	if len(ids) == 0 {
		return usagef("--buildings %s: no ids in it", buildings)
	}
	opt.IDs = ids
	return nil
}

// idsOf reads ids from the file of that name, one on each line, or from the text
// itself; each once.
func idsOf(given string) ([]string, error) {
	parts := strings.Split(given, ",")
	content, err := os.ReadFile(given)
	switch {
	case err == nil:
		parts = strings.Split(strings.TrimPrefix(string(content), "\ufeff"), "\n")
	case !errors.Is(err, fs.ErrNotExist):
		return nil, fmt.Errorf("--buildings: %w", err)
	case strings.EqualFold(filepath.Ext(given), ".txt") || strings.EqualFold(filepath.Ext(given), ".csv"):
		return nil, usagef("--buildings %s: there is no such file", given)
	}
	var ids []string
	for _, p := range parts {
		id := strings.Join(strings.Fields(p), " ")
		if id != "" && !strings.HasPrefix(id, "#") && !slices.Contains(ids, id) {
			ids = append(ids, id)
		}
	}
	return ids, nil
}
