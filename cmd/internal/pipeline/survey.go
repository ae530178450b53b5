package pipeline

import (
	"cmp"
	"context"
	"fmt"
	"io"
	"math"
	"slices"
	"strings"

	"kelvinrow/estimate/building"
	"kelvinrow/estimate/result"
	"kelvinrow/rank"
	"kelvinrow/rank/form"
)

// SurveyOptions says which buildings to survey and where the form goes. Of IDs,
// Districts and Measure at most one is given; without any, the last run tells.
type SurveyOptions struct {
	Out       string
	IDs       []string // in the order of the form
	Districts []string
	Measure   string // key
	Top       int    // of Measure
	Budget    float64
	Count     int
}

// SurveyOutcome is a form that was written.
type SurveyOutcome struct {
	Number    string   `json:"form"`
	Out       string   `json:"output"`
	Choice    string   `json:"choice"`
	Buildings []string `json:"buildings"`
	Known     int      `json:"known_cells"`
	Open      int      `json:"open_cells"`
}

// Survey writes a survey form for chosen buildings. The store stays as it is.
func (s *Session) Survey(ctx context.Context, opt SurveyOptions) (*SurveyOutcome, error) {
	ids, choice, err := s.toSurvey(ctx, &opt)
	if err != nil {
		return nil, err
	}
	if len(ids) > form.MostBuildings {
		return nil, fmt.Errorf("%d buildings are chosen, and a form holds %d: choose fewer, such as by --buildings", len(ids), form.MostBuildings)
	}
	s.Progress.Stage("writing the survey form", len(ids))
	in := &form.Input{Portfolio: s.Portfolio, Date: today(), Choice: choice}
	for _, id := range ids {
		b, _, err := s.Store.Building(ctx, s.Portfolio, id)
		if err != nil {
			return nil, err
		}
		in.Buildings = append(in.Buildings, b)
		s.Progress.Add(1)
	}
	set, _, err := s.assumptions(ctx)
	if err != nil {
		return nil, err
	}
	in.Surveys, in.Currency = set.Surveys, set.Economics.Currency
	var wrote form.Outcome
	file, err := stage(opt.Out, func(w io.Writer) (err error) {
		wrote, err = form.Write(ctx, w, in)
		return err
	})
	defer func() { file.discard() }()
	if err != nil {
		return nil, fmt.Errorf("write %s: %w", opt.Out, err)
	}
	s.Progress.Done()
	out := &SurveyOutcome{Number: wrote.Number, Out: opt.Out, Choice: choice, Known: wrote.Known, Open: wrote.Open}
	for _, b := range in.Buildings {
		out.Buildings = append(out.Buildings, b.ID)
	}
	return out, file.publish()
}

// toSurvey chooses the buildings and says in one sentence by which rule.
func (s *Session) toSurvey(ctx context.Context, opt *SurveyOptions) (ids []string, choice string, err error) {
	switch {
	case len(opt.IDs) > 0:
		return opt.IDs, fmt.Sprintf("%s named one by one.", counted(len(opt.IDs))), nil
	case len(opt.Districts) > 0:
		return s.inDistricts(ctx, opt.Districts)
	}
	run, buildings, err := s.lastRun(ctx)
	if err != nil {
		return nil, "", err
	}
	y, err := rank.ParseYardstick(run.Yardstick)
	if err != nil {
		return nil, "", fmt.Errorf("run %d: %w", run.Number, err)
	}
	if opt.Measure != "" {
		m := slices.Index(run.Measures, opt.Measure)
		if m < 0 {
			return nil, "", fmt.Errorf("run %d has no measure %q: use one of %s", run.Number, opt.Measure, strings.Join(run.Measures, ", "))
		}
		list := rank.List(buildings, m, y)
		list = list[:min(opt.Top, len(list))]
		if len(list) == 0 {
			return nil, "", fmt.Errorf("in run %d, %s saves nothing in any building", run.Number, opt.Measure)
		}
		for _, row := range list {
			ids = append(ids, buildings[row.Index].ID)
		}
		return ids, fmt.Sprintf("%s ranked first for %s in run %d, by %s.", counted(len(ids)), opt.Measure, run.Number, y.Words()), nil
	}
	if ids = nearTheCut(run, buildings, y, opt.Budget, opt.Count); len(ids) == 0 {
		return nil, "", fmt.Errorf("in run %d no building near a cut has inputs by default: name buildings (--buildings), a district or a measure", run.Number)
	}
	cut := "the best quarter"
	if opt.Budget > 0 {
		cut = fmt.Sprintf("%.0f spent", opt.Budget)
	}
	return ids, fmt.Sprintf("%s near the cut (%s) of a measure in run %d where most saving rests on defaults (their share of the inputs × saving).", counted(len(ids)), cut, run.Number), nil
}

func counted(n int) string {
	if n == 1 {
		return "The 1 building"
	}
	return fmt.Sprintf("The %d buildings", n)
}

// inDistricts finds the buildings of districts, however these are spelt in case.
func (s *Session) inDistricts(ctx context.Context, districts []string) (ids []string, choice string, err error) {
	met := make([]bool, len(districts))
	all := map[string]bool{}
	err = s.Store.Buildings(ctx, s.Portfolio, func(b *building.Building) error {
		d := b.Text(building.District)
		if d == "" {
			return nil
		}
		all[d] = true
		for i := range districts {
			if strings.EqualFold(d, strings.TrimSpace(districts[i])) {
				met[i] = true
				ids = append(ids, b.ID)
				break
			}
		}
		return nil
	})
	if err != nil {
		return nil, "", err
	}
	if i := slices.Index(met, false); i >= 0 {
		known := make([]string, 0, len(all))
		for d := range all {
			known = append(known, d)
		}
		slices.Sort(known)
		if len(known) > 20 {
			known = append(known[:20], "…")
		}
		if len(known) == 0 {
			return nil, "", fmt.Errorf("no building of portfolio %q has a district", s.Portfolio)
		}
		return nil, "", fmt.Errorf("portfolio %q has no district %q: it has %s", s.Portfolio, districts[i], strings.Join(known, ", "))
	}
	return ids, fmt.Sprintf("%s of district %s.", counted(len(ids)), strings.Join(districts, ", ")), nil
}

// lastRun reads the newest run.
func (s *Session) lastRun(ctx context.Context) (*result.Run, []result.Building, error) {
	runs, err := s.Store.Runs(ctx, s.Portfolio)
	if err != nil {
		return nil, nil, err
	}
	if len(runs) == 0 {
		return nil, nil, fmt.Errorf("portfolio %q has no run to choose from: rank it first (kelvinrow rank), or name buildings (--buildings) or a district", s.Portfolio)
	}
	return s.Store.Run(ctx, s.Portfolio, runs[len(runs)-1].Number)
}

// nearTheCut chooses buildings whose survey may change what is decided: those that
// rank near the cut of a measure, up to half of its rank above or below, and among
// them those with most saving that rests on defaults. The cut is where the
// cumulative cost of a measure's list reaches the budget, or the end of its best
// quarter. A building's score is that of the measure where it is greatest.
func nearTheCut(run *result.Run, buildings []result.Building, y rank.Yardstick, budget float64, count int) []string {
	scores := make([]float64, len(buildings))
	var near []int
	for m := range run.Measures {
		list := rank.List(buildings, m, y)
		cut := cutOf(list, buildings, m, budget)
		reach := max(cut/2, count)
		for _, row := range list[max(0, cut-reach):min(len(list), cut+reach)] {
			b := &buildings[row.Index]
			// To a thousandth of a kWh, so that rounding noise decides nothing.
			score := math.Round(b.InputShare[building.Default]*b.Measures[m].SavingKWh*1000) / 1000
			if score > 0 && scores[row.Index] == 0 {
				near = append(near, row.Index)
			}
			scores[row.Index] = max(scores[row.Index], score)
		}
	}
	slices.SortFunc(near, func(i, j int) int {
		return cmp.Or(cmp.Compare(scores[j], scores[i]), strings.Compare(buildings[i].ID, buildings[j].ID))
	})
	var ids []string
	for _, i := range near[:min(count, len(near))] {
		ids = append(ids, buildings[i].ID)
	}
	return ids
}

// cutOf is how many of a list are paid for by the budget, or its best quarter.
func cutOf(list []rank.Row, buildings []result.Building, m int, budget float64) int {
	if budget <= 0 {
		return (len(list) + 3) / 4
	}
	spent := 0.0
	for i, row := range list {
		if spent += buildings[row.Index].Measures[m].Cost; spent > budget {
			return i
		}
	}
	return len(list)
}
