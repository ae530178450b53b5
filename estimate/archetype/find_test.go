package archetype

import (
	"slices"
	"strings"
	"sync"
	"testing"

	"kelvinrow/estimate/building"
)

func indexed(rules ...Rule) *Set {
	s := &Set{Rules: rules}
	s.Index()
	return s
}

func TestMostSpecificRuleWins(t *testing.T) {
	key := Key{Use: building.TerracedHouse, Attachment: building.TwoSidesShared, Year: 1930, Construction: "stone", Region: "north"}
	// From least to most specific: each must win over all before it.
	order := []Rule{
		{ID: "any"},
		{ID: "housing", Use: "housing"},
		{ID: "house", Use: "house"},
		{ID: "terrace", Use: "terraced house"},
		{ID: "years", Use: "housing", YearFrom: 1900, YearTo: 1960},
		{ID: "years-open", Use: "house", YearTo: 1960},
		{ID: "narrow", Use: "house", YearFrom: 1919, YearTo: 1948},
		{ID: "stone", Use: "housing", YearFrom: 1900, YearTo: 1960, Construction: "stone"},
		{ID: "four", Use: "housing", YearFrom: 1900, YearTo: 1960, Construction: "stone", Region: "north"},
		{ID: "all", Use: "housing", Attachment: "two sides shared", YearFrom: 1900, YearTo: 1960, Construction: "stone", Region: "north"},
	}
	for i := range order {
		order[i].Property = N50Rule
		order[i].Typical = float64(i)
	}
	for n := 1; n <= len(order); n++ {
		rules := slices.Clone(order[:n])
		slices.Reverse(rules) // the order of rows must not matter
		if r, ok := indexed(rules...).Find(N50Rule, key); !ok || r.ID != order[n-1].ID {
			t.Errorf("of %d rules %+v answers, want %q", n, r, order[n-1].ID)
		}
	}
}

func TestRulesOnlyMatchTheirOwn(t *testing.T) {
	base := Key{Use: building.School, Attachment: building.Detached, Year: 1950, Construction: "stone", Region: "north"}
	for _, c := range []struct {
		name string
		rule Rule
		want bool
	}{
		{"other use", Rule{Use: "office"}, false},
		{"group without the use", Rule{Use: "housing"}, false},
		{"group with the use", Rule{Use: "other"}, true},
		{"other attachment", Rule{Attachment: "one side shared"}, false},
		{"first year", Rule{YearFrom: 1950}, true},
		{"after", Rule{YearFrom: 1951}, false},
		{"last year", Rule{YearTo: 1950}, true},
		{"before", Rule{YearTo: 1949}, false},
		{"other construction", Rule{Construction: "log"}, false},
		{"other region", Rule{Region: "south"}, false},
		{"same region", Rule{Region: "north"}, true},
	} {
		c.rule.Property, c.rule.ID = N50Rule, c.name
		s := indexed(c.rule)
		if _, ok := s.Find(N50Rule, base); ok != c.want {
			t.Errorf("%s: found %t, want %t", c.name, ok, c.want)
		}
		bare := &Set{Rules: s.Rules}
		if _, ok := bare.Find(N50Rule, base); ok != c.want {
			t.Errorf("%s, without index: found %t, want %t", c.name, ok, c.want)
		}
	}
	s := starterSet(t)
	for _, k := range []Key{{Use: 200}, {Attachment: 200}} {
		if _, ok := s.Find(StoreyHeightM, k); ok {
			t.Errorf("impossible key %+v has an answer", k)
		}
	}
	if _, ok := s.Find("no such property", base); ok {
		t.Error("an unknown property has an answer")
	}
	if r, ok := s.Find(StoreyHeightM, Key{Region: "a region no rule names"}); !ok || r.Region != "" {
		t.Error("an unknown region must get the rules for all regions")
	}
}

func TestLookupFromManyGoroutines(t *testing.T) {
	s := starterSet(t)
	var wg sync.WaitGroup
	for g := range 4 {
		wg.Go(func() {
			for y := 1800 + g; y < 2020; y++ {
				if _, ok := s.Find(WallBuildup, Key{Year: y, Construction: "log"}); !ok {
					t.Errorf("no build-up for %d", y)
				}
			}
		})
	}
	wg.Wait()
}

func TestLookupByName(t *testing.T) {
	s := starterSet(t)
	bare := s.Clone()
	bare.index = ruleIndex{}
	for _, set := range []*Set{s, bare} {
		if b, ok := set.Buildup("cavity brick"); !ok || b.Element != "wall" {
			t.Errorf("build-up: %+v", b)
		}
		if m, ok := set.Material("softwood"); !ok || m.ConductivityWMK != 0.13 {
			t.Errorf("material: %+v", m)
		}
		if c, ok := set.Carrier("district heat"); !ok || c.CO2KgKWh <= 0 {
			t.Errorf("carrier: %+v", c)
		}
		if m, ok := set.Measure("new-windows"); !ok || m.Target["u"] <= 0 {
			t.Errorf("measure: %+v", m)
		}
		if _, ok := set.Buildup("nothing"); ok {
			t.Error("an unknown build-up was found")
		}
		if _, ok := set.Material("nothing"); ok {
			t.Error("an unknown material was found")
		}
		if _, ok := set.Carrier("nothing"); ok {
			t.Error("an unknown carrier was found")
		}
		if _, ok := set.Measure("nothing"); ok {
			t.Error("an unknown measure was found")
		}
	}
}

// A layer that only names a material gets its conductivity from the table, and
// layers that others may hold are not changed in place.
func TestIndexResolvesLayers(t *testing.T) {
	s := starterSet(t)
	b := &s.Buildups[0]
	i := slices.IndexFunc(s.Materials, func(m Material) bool { return m.Name == b.Layers[0].Name })
	s.Materials[i].ConductivityWMK = 0.9
	b.Layers[0].ConductivityWMK = 0
	shared := b.Layers
	s.Index()
	if got := s.Buildups[0].Layers[0].ConductivityWMK; got != 0.9 {
		t.Errorf("conductivity %g, want the material's 0.9", got)
	}
	if shared[0].ConductivityWMK != 0 {
		t.Error("layers were changed in place")
	}
	if err := s.Validate(); err != nil {
		t.Error(err)
	}
}

func TestParseTarget(t *testing.T) {
	for _, text := range []string{"thickness", "=1", "a=b", "a=NaN", "a=1; a=2", "a=1,b=2", "a=1 (2)", "a=1 (0 to x)"} {
		var m Measure
		if err := m.parseTargets(text); err == nil {
			t.Errorf("%q is read as %v", text, m.Target)
		} else if !strings.Contains(err.Error(), "target") {
			t.Errorf("%q: %v", text, err)
		}
	}
	var m Measure
	err := m.parseTargets(" u = 0.9 (0.8 to 1.1);; g=0.5 ")
	if err != nil || len(m.Target) != 2 || m.Target["u"] != 0.9 || m.Target["g"] != 0.5 {
		t.Errorf("%v, %v", m.Target, err)
	}
	if low, high := m.TargetSpread("u"); low != 0.8 || high != 1.1 {
		t.Errorf("spread of u: %g to %g", low, high)
	}
	if low, high := m.TargetSpread("g"); low != 0.5 || high != 0.5 {
		t.Errorf("spread of g: %g to %g", low, high)
	}
}

// One building asks about forty questions; a hundred thousand buildings must
// not spend a second on them.
func BenchmarkFindFortyProperties(b *testing.B) {
	s := starterSet(b)
	infos := Properties()[:40]
	keys := make([]Key, len(infos))
	for i, info := range infos {
		keys[i] = Key{Use: building.ApartmentBlock, Attachment: building.OneSideShared, Year: 1965}
		if info.ByConstruction {
			w := building.Words(info.ConstructionField)
			keys[i].Construction = w[len(w)-1]
		}
	}
	for b.Loop() {
		for i := range infos {
			if _, ok := s.Find(infos[i].Property, keys[i]); !ok {
				b.Fatal(infos[i].Property)
			}
		}
	}
}

func BenchmarkStarter(b *testing.B) {
	for b.Loop() {
		if _, err := Starter(); err != nil {
			b.Fatal(err)
		}
	}
}

func BenchmarkIndex(b *testing.B) {
	s := starterSet(b)
	for b.Loop() {
		s.Index()
	}
}
