package check

import (
	"fmt"
	"math"
	"path/filepath"
	"strings"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/cell"
	"kelvinrow/ingest/finding"
)

// Tolerance is how far two sources may differ about a field without
// contradicting each other: by a share of the greater value or by an amount,
// whichever is more.
type Tolerance struct{ Share, Amount float64 }

// Tolerances by field. Areas and volumes differ by how they are measured, years
// by whether start or end of works counts, U-values by rounding and method.
// Fields of words and of yes and no contradict when they differ; fields that are
// not here and not of those types cannot.
var Tolerances = map[building.Field]Tolerance{
	building.YearBuilt:       {0, 2},
	building.YearWall:        {0, 2},
	building.YearRoof:        {0, 2},
	building.YearFloor:       {0, 2},
	building.YearWindows:     {0, 2},
	building.FloorArea:       {0.03, 1},
	building.Volume:          {0.05, 3},
	building.GrossVolume:     {0.05, 3},
	building.Storeys:         {0, 0.5},
	building.StoreyHeight:    {0.05, 0.1},
	building.Footprint:       {0.03, 1},
	building.Perimeter:       {0.05, 1},
	building.WallArea:        {0.03, 1},
	building.RoofArea:        {0.03, 1},
	building.GroundFloorArea: {0.03, 1},
	building.WindowArea:      {0.03, 1},
	building.DoorArea:        {0.1, 0.5},
	building.WallU:           {0.1, 0.02},
	building.RoofU:           {0.1, 0.02},
	building.FloorU:          {0.1, 0.02},
	building.WindowU:         {0.1, 0.05},
	building.SupplyAirflow:   {0.1, 5},
	building.ExtractAirflow:  {0.1, 5},
	building.HeatRecovery:    {0, 0.05},
	building.FanPower:        {0.1, 0.02},
	building.N50:             {0.1, 0.1},
	building.Q50:             {0.1, 0.1},
	building.Efficiency:      {0, 0.05},
	building.MeteredHeat:     {0.02, 10},
	building.Dwellings:       {0, 0.5},
}

// compared reports whether two values of a field can contradict each other.
func compared(f building.Field) bool {
	if _, ok := Tolerances[f]; ok {
		return true
	}
	t := f.Info().Type
	return t == building.Word || t == building.YesNo || f == building.Postcode
}

// differ reports whether a and b contradict each other.
func differ(a, b *building.Value) bool {
	switch a.Field.Info().Type {
	case building.Text:
		return cell.Fold(a.Text) != cell.Fold(b.Text)
	case building.Word:
		return a.Text != b.Text
	case building.YesNo:
		return a.Number != b.Number
	}
	t := Tolerances[a.Field]
	apart := math.Abs(a.Number - b.Number)
	if a.Field.Info().Type == building.Year {
		apart = math.Max(a.Low-b.High, b.Low-a.High) // spans that overlap agree
	}
	return apart > math.Max(t.Amount, t.Share*math.Max(math.Abs(a.Number), math.Abs(b.Number)))
}

// Conflicts finds the fields of a building about which another file than the one
// that counts says something else. Each is placed at the value not used; it is a
// warning where both are equally firm, and a note where the firmer one counts.
func Conflicts(b *building.Building, records []building.Record) []finding.Finding {
	var out []finding.Finding
	known := b.Known()
	for i := range known {
		if k := &known[i]; compared(k.Field) {
			if f, ok := conflict(b.ID, k, records); ok {
				out = append(out, f)
			}
		}
	}
	return out
}

func conflict(id string, k *building.Known, records []building.Record) (finding.Finding, bool) {
	winner := rowOf(records, k)
	if winner == nil {
		return finding.Finding{}, false
	}
	var others []building.Record // that differ, with this field alone
	for i := range records {
		r := &records[i]
		if r.Sheet == nil || r.Sheet.File == k.Sheet.File || Mends(k.Sheet.File, r.Sheet.File) {
			continue
		}
		v := valueOf(r, k.Field)
		if v == nil || !differ(&k.Value, v) || k.Field.Info().Group == building.Meter && !sameYear(winner, r) {
			continue
		}
		only := *r
		only.Values = []building.Value{*v}
		others = append(others, only)
	}
	if len(others) == 0 {
		return finding.Finding{}, false
	}
	next, _ := building.Merge(id, others).Get(k.Field) // it would count if the first did not
	loser, lost, more := rowOf(others, next), &next.Value, len(others)-1
	f := finding.Finding{Severity: finding.Warning, Check: "conflict", File: loser.Sheet.File, Sheet: loser.Sheet.Name, Row: loser.Row,
		Field: k.Field.Key(), Building: id, Raw: said(lost)}
	if letters := loser.Sheet.Columns[k.Field]; !strings.Contains(letters, "constant") {
		f.Column, _, _ = strings.Cut(letters, ",")
	}
	if firm(k.Kind) != firm(lost.Kind) {
		f.Severity = finding.Note
	}
	f.Text = fmt.Sprintf("building %s: %s %s in %s; %s in %s", id, lower(k.Field.Info().Label), said(&k.Value), place(winner), said(lost), place(loser))
	if more > 0 {
		f.Text += fmt.Sprintf(", and %d more that differ", more)
	}
	f.Text += fmt.Sprintf("; %s is used: %s", k.Sheet.File, reason(k, winner, lost, loser))
	f.Fix = "correct the one that is wrong"
	return f, true
}

// rowOf is the record that a value is from.
func rowOf(records []building.Record, k *building.Known) *building.Record {
	for i := range records {
		if r := &records[i]; r.Sheet != nil && r.Sheet == k.Sheet && r.Row == k.Row {
			return r
		}
	}
	return nil
}

func valueOf(r *building.Record, f building.Field) (found *building.Value) {
	for i := range r.Values {
		if r.Values[i].Field == f {
			found = &r.Values[i] // a later one counts
		}
	}
	return found
}

// Mends reports whether a file holds mended rows of another.
func Mends(file, source string) bool {
	stem := func(s string) string { return strings.TrimSuffix(s, filepath.Ext(s)) }
	of, mended := strings.CutSuffix(stem(file), "-to-fix")
	return mended && strings.EqualFold(filepath.Base(of), filepath.Base(stem(source)))
}

func sameYear(a, b *building.Record) bool {
	x, y := valueOf(a, building.MeteredYear), valueOf(b, building.MeteredYear)
	return x != nil && y != nil && x.Low == y.Low && x.High == y.High
}

// firm is how firm a kind is: what was measured on site and what a meter says
// are equally so.
func firm(k building.Kind) building.Kind {
	if k == building.Metered {
		return building.Surveyed
	}
	return k
}

func place(r *building.Record) string {
	s := r.Sheet.File
	if r.Sheet.Name != "" {
		s += fmt.Sprintf(", sheet %q", r.Sheet.Name)
	}
	return fmt.Sprintf("%s, row %d", s, r.Row)
}

func said(v *building.Value) string {
	info := v.Field.Info()
	switch info.Type {
	case building.Text, building.Word:
		return fmt.Sprintf("%q", v.Text)
	case building.YesNo:
		if v.Number != 0 {
			return "yes"
		}
		return "no"
	case building.Year:
		if v.Low != v.High {
			return fmt.Sprintf("%.0f to %.0f", v.Low, v.High)
		}
		return fmt.Sprintf("%.0f", v.Number)
	}
	return shown(v.Number, info.Unit)
}

// reason says why one value counts and not the other, by the precedence of
// sources.
func reason(k *building.Known, winner *building.Record, lost *building.Value, loser *building.Record) string {
	date := func(r *building.Record) string {
		if r.SurveyDate != "" {
			return r.SurveyDate
		}
		return r.Sheet.FileDate
	}
	switch a, b := date(winner), date(loser); {
	case firm(k.Kind) != firm(lost.Kind):
		return fmt.Sprintf("%s beats %s", k.Kind, lost.Kind)
	case a != b && winner.SurveyDate != "" && loser.SurveyDate != "":
		return fmt.Sprintf("its row is newer, of %s against %s", a, b)
	case a != b && winner.SurveyDate != "":
		return fmt.Sprintf("its row is of %s, the other file of %s", a, b)
	case a != b && loser.SurveyDate != "":
		return fmt.Sprintf("the file is of %s, the other row of %s", a, b)
	case a != b:
		return fmt.Sprintf("the file is newer, of %s against %s", a, b)
	case winner.Sheet.LoadID != loser.Sheet.LoadID:
		return "it was loaded later"
	}
	return "both are of one date and load, and its name comes later"
}
