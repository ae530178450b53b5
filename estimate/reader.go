package estimate

import (
	"fmt"

	"kelvinrow/estimate/archetype"
	"kelvinrow/estimate/building"
)

// reader answers what a value is: from the building where it is known, else
// from a rule. It keeps the kind of every answer and, when asked for a trail,
// its origin.
type reader struct {
	b     *building.Building
	set   *archetype.Set
	key   archetype.Key // use, attachment and region are filled in as they become known
	trail *[]InputDoc   // nil unless the building is being explained
	err   error         // first rule that was missing
}

// known returns a number that the building itself has.
func (r *reader) known(f building.Field) (float64, bool) {
	k, ok := r.b.Get(f)
	if !ok {
		return 0, false
	}
	r.note(k)
	return k.Number, true
}

// word returns the building's word for f, or the rule's.
func (r *reader) word(f building.Field, p archetype.Property, year int, construction string) string {
	if k, ok := r.b.Get(f); ok {
		if _, valid := building.WordIndex(f, k.Text); valid {
			r.note(k)
			return k.Text
		}
	}
	rule := r.find(p, year, construction)
	if rule == nil {
		return ""
	}
	if r.trail != nil {
		*r.trail = append(*r.trail, InputDoc{
			Field: f.Key(), Value: rule.Word, Kind: building.Default.String(),
			Source: SourceDoc{Rule: rule.ID, Note: rule.Source},
		})
	}
	return rule.Word
}

// number returns the building's number for f, or the rule's.
func (r *reader) number(f building.Field, p archetype.Property, year int, construction string) float64 {
	if v, ok := r.known(f); ok {
		return v
	}
	return r.rule(f.Key(), f.Info().Unit, p, year, construction)
}

// rule returns a rule's typical number, recorded under a name of its own.
func (r *reader) rule(name, unit string, p archetype.Property, year int, construction string) float64 {
	rule := r.find(p, year, construction)
	if rule == nil {
		return 0
	}
	if r.trail != nil {
		low, high := rule.Low, rule.High
		*r.trail = append(*r.trail, InputDoc{
			Field: name, Value: rule.Typical, Unit: unit, Kind: building.Default.String(),
			Source: SourceDoc{Rule: rule.ID, Note: rule.Source, Low: &low, High: &high},
		})
	}
	return rule.Typical
}

// stated records a value that comes from a table of the set rather than a rule.
func (r *reader) stated(name, unit string, value any, source, note string) {
	if r.trail != nil {
		*r.trail = append(*r.trail, InputDoc{
			Field: name, Value: value, Unit: unit, Kind: building.Default.String(),
			Source: SourceDoc{Rule: source, Note: note},
		})
	}
}

func (r *reader) find(p archetype.Property, year int, construction string) *archetype.Rule {
	k := r.key
	k.Year, k.Construction = year, construction
	rule, ok := r.set.Find(p, k)
	if !ok && r.err == nil {
		r.err = fmt.Errorf("no rule gives %s for %s, %s, year %d, construction %q", p, k.Use, k.Attachment, year, construction)
	}
	if !ok {
		return nil
	}
	return rule
}

func (r *reader) note(k *building.Known) {
	if r.trail == nil {
		return
	}
	info := k.Field.Info()
	d := InputDoc{Field: info.Key, Unit: info.Unit, Kind: k.Kind.String()}
	switch info.Type {
	case building.Text, building.Word:
		d.Value = k.Text
	case building.YesNo:
		d.Value = k.Number != 0
	default:
		d.Value = k.Number
	}
	if info.Type == building.Year && k.Low != k.High {
		d.From, d.To = k.Low, k.High
	}
	d.Source = SourceDoc{Row: k.Row, Date: k.Date}
	if k.Sheet != nil {
		d.Source.File, d.Source.Sheet = k.Sheet.File, k.Sheet.Name
		d.Source.Column = k.Sheet.Columns[k.Field]
	}
	*r.trail = append(*r.trail, d)
}
