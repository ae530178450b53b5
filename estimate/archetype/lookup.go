package archetype

import (
	"maps"
	"slices"

	"kelvinrow/estimate/fabric"
)

// Buildup finds a build-up by its name.
func (s *Set) Buildup(name string) (*Buildup, bool) {
	if s.index.buildups != nil {
		if i, ok := s.index.buildups[name]; ok {
			return &s.Buildups[i], true
		}
		return nil, false
	}
	return pick(s.Buildups, func(b *Buildup) bool { return b.Name == name })
}

// Material finds a material by its name.
func (s *Set) Material(name string) (*Material, bool) {
	if s.index.materials != nil {
		if i, ok := s.index.materials[name]; ok {
			return &s.Materials[i], true
		}
		return nil, false
	}
	return pick(s.Materials, func(m *Material) bool { return m.Name == name })
}

// Carrier finds an energy carrier by its canonical word.
func (s *Set) Carrier(word string) (*Carrier, bool) {
	return pick(s.Carriers, func(c *Carrier) bool { return c.Word == word })
}

// Measure finds the terms of a measure by its key.
func (s *Set) Measure(key string) (*Measure, bool) {
	return pick(s.Measures, func(m *Measure) bool { return m.Key == key })
}

func pick[T any](rows []T, is func(*T) bool) (*T, bool) {
	for i := range rows {
		if is(&rows[i]) {
			return &rows[i], true
		}
	}
	return nil, false
}

// Clone returns a copy that can be edited without changing s.
func (s *Set) Clone() *Set {
	c := *s
	c.Materials = slices.Clone(s.Materials)
	c.Buildups = slices.Clone(s.Buildups)
	for i := range c.Buildups {
		c.Buildups[i].Layers = slices.Clone(c.Buildups[i].Layers)
	}
	c.Rules = slices.Clone(s.Rules)
	c.Carriers = slices.Clone(s.Carriers)
	c.Measures = slices.Clone(s.Measures)
	for i := range c.Measures {
		m := &c.Measures[i]
		m.Target, m.TargetLow, m.TargetHigh = maps.Clone(m.Target), maps.Clone(m.TargetLow), maps.Clone(m.TargetHigh)
	}
	c.Climates = slices.Clone(s.Climates)
	c.Surveys = slices.Clone(s.Surveys)
	c.Words = slices.Clone(s.Words)
	return &c
}

// resolveLayers gives layers that only name a material its conductivity, and their
// second material likewise.
func (s *Set) resolveLayers() {
	byName := make(map[string]float64, len(s.Materials))
	for i := range s.Materials {
		byName[s.Materials[i].Name] = s.Materials[i].ConductivityWMK
	}
	open := func(l fabric.Layer) bool { return l.ConductivityWMK == 0 && l.ResistanceM2KW == 0 }
	openBridge := func(l fabric.Layer) bool { return l.BridgeShare > 0 && l.BridgeConductivityWMK == 0 }
	for i := range s.Buildups {
		b := &s.Buildups[i]
		if !slices.ContainsFunc(b.Layers, open) && !slices.ContainsFunc(b.Layers, openBridge) {
			continue
		}
		b.Layers = slices.Clone(b.Layers) // states may share the old ones
		for j := range b.Layers {
			l := &b.Layers[j]
			if open(*l) {
				l.ConductivityWMK = byName[l.Name]
			}
			if openBridge(*l) {
				l.BridgeConductivityWMK = byName[l.BridgeName]
			}
		}
	}
}
