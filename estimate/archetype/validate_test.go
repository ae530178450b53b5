package archetype

import (
	"math"
	"reflect"
	"slices"
	"strings"
	"testing"
	"testing/fstest"

	"kelvinrow/estimate/climate"
)

// rule returns the starter rule with an ID.
func rule(t *testing.T, s *Set, id string) *Rule {
	t.Helper()
	for i := range s.Rules {
		if s.Rules[i].ID == id {
			return &s.Rules[i]
		}
	}
	t.Fatalf("no rule %q", id)
	return nil
}

func TestValidateFindsMistakes(t *testing.T) {
	for _, c := range []struct {
		name string
		edit func(*testing.T, *Set)
		want []string
	}{
		{"contradiction", func(_ *testing.T, s *Set) {
			s.Rules = append(s.Rules,
				Rule{ID: "mine", Property: N50Rule, Use: "school", YearFrom: 1960, YearTo: 1970, Typical: 3, Low: 2, High: 4, Source: "x"},
				Rule{ID: "thine", Property: N50Rule, Use: "school", YearFrom: 1965, YearTo: 1975, Typical: 5, Low: 2, High: 6, Source: "x"})
		}, []string{`"mine"`, `"thine"`, "equally specific", "n50"}},
		{"contradiction of open years and construction", func(_ *testing.T, s *Set) {
			s.Rules = append(s.Rules, Rule{ID: "mine", Property: GlazingWord, Use: "school", Word: "triple", Source: "x"})
		}, []string{`"mine"`, `"glazing-to-1968"`}},
		{"hole", func(t *testing.T, s *Set) { rule(t, s, "glazing-1969-1994").YearFrom = 1972 },
			[]string{"no rule gives glazing", "1969 to 1971", "44 more"}},
		{"hole for one construction", func(t *testing.T, s *Set) {
			rule(t, s, "wall-buildup-log-from-2009").YearTo = 2050
		}, []string{"no rule gives wall_buildup", "2051 to 2100", "log"}},
		{"hole for the unknown year", func(t *testing.T, s *Set) {
			for i := range s.Rules {
				if s.Rules[i].Property == AssumedYear {
					s.Rules[i].YearFrom = 1000
				}
			}
		}, []string{"no rule gives assumed_year"}},
		{"property without rules", func(_ *testing.T, s *Set) {
			s.Rules = slices.DeleteFunc(s.Rules, func(r Rule) bool { return r.Property == Shading })
		}, []string{"no rule gives shading"}},
		{"order of low, typical, high", func(t *testing.T, s *Set) { rule(t, s, "flow-exponent-any").Low = 0.66 },
			[]string{"flow-exponent-any", "low <= typical <= high"}},
		{"not a number", func(t *testing.T, s *Set) { rule(t, s, "flow-exponent-any").Typical = math.NaN() },
			[]string{"flow-exponent-any", "typical NaN"}},
		{"out of range", func(t *testing.T, s *Set) { rule(t, s, "flow-exponent-any").High = 1.5 },
			[]string{"flow-exponent-any", "high 1.5"}},
		{"unknown property", func(t *testing.T, s *Set) { rule(t, s, "flow-exponent-any").Property = "flow" },
			[]string{`unknown property "flow"`, "no rule gives flow_exponent"}},
		{"unknown use", func(t *testing.T, s *Set) { rule(t, s, "door-ratio-house").Use = "castle" },
			[]string{`unknown use "castle"`}},
		{"unknown attachment", func(t *testing.T, s *Set) { rule(t, s, "door-ratio-house").Attachment = "leaning" },
			[]string{`unknown attachment "leaning"`}},
		{"unknown construction", func(t *testing.T, s *Set) { rule(t, s, "wall-buildup-log-from-2009").Construction = "straw" },
			[]string{`unknown word "straw"`}},
		{"construction where none counts", func(t *testing.T, s *Set) { rule(t, s, "door-ratio-house").Construction = "log" },
			[]string{"door_ratio does not depend on construction"}},
		{"unknown word", func(t *testing.T, s *Set) { rule(t, s, "exposure-any").Word = "windy" },
			[]string{`unknown word "windy"`}},
		{"indefinite ventilation", func(t *testing.T, s *Set) { rule(t, s, "ventilation-house-to-2008").Word = "unknown" },
			[]string{"definite word"}},
		{"unknown build-up", func(t *testing.T, s *Set) { rule(t, s, "wall-buildup-log-from-2009").Word = "ice" },
			[]string{`no wall build-up is called "ice"`}},
		{"build-up of another element", func(t *testing.T, s *Set) { rule(t, s, "wall-buildup-log-from-2009").Word = "flat roof, 50 mm" },
			[]string{"no wall build-up"}},
		{"number for a word", func(t *testing.T, s *Set) { rule(t, s, "exposure-any").Typical = 1 },
			[]string{"exposure takes a word"}},
		{"word for a number", func(t *testing.T, s *Set) { rule(t, s, "flow-exponent-any").Word = "high" },
			[]string{"flow_exponent takes a number"}},
		{"years backwards", func(t *testing.T, s *Set) { rule(t, s, "glazing-1969-1994").YearTo = 1960 },
			[]string{"years run backwards"}},
		{"id twice", func(t *testing.T, s *Set) { rule(t, s, "glazing-1969-1994").ID = "exposure-any" },
			[]string{`rule "exposure-any": id empty or used twice`}},
		{"no source", func(t *testing.T, s *Set) { rule(t, s, "exposure-any").Source = " " },
			[]string{`rule "exposure-any": no source`}},
		{"shared part", func(t *testing.T, s *Set) { rule(t, s, "flow-exponent-any").Shared = 2 },
			[]string{"shared part of the spread 2"}},
		{"unknown material", func(_ *testing.T, s *Set) {
			s.Buildups[0].Layers[0].Name, s.Buildups[0].Layers[0].ConductivityWMK = "ice", 0
		}, []string{"solid brick 0.30 m", "layer 1 (ice)", "neither a known material"}},
		{"no thickness", func(_ *testing.T, s *Set) { s.Buildups[0].Layers[0].ThicknessM = 0 }, []string{"thickness 0"}},
		{"bridge without conductivity", func(_ *testing.T, s *Set) { s.Buildups[0].Layers[0].BridgeShare = 0.1 },
			[]string{"bridge conductivity 0"}},
		{"no layers", func(_ *testing.T, s *Set) { s.Buildups[0].Layers = nil }, []string{"no layers"}},
		{"wrong direction", func(_ *testing.T, s *Set) { s.Buildups[0].Direction++ }, []string{"direction of heat flow"}},
		{"material twice", func(_ *testing.T, s *Set) { s.Materials[1] = s.Materials[0] }, []string{"used twice"}},
		{"conductivity", func(_ *testing.T, s *Set) { s.Materials[0].ConductivityWMK = -1 }, []string{"conductivity -1"}},
		{"use missing", func(_ *testing.T, s *Set) { s.Uses[3] = Use{} }, []string{`use "apartment block": missing`}},
		{"use without people", func(_ *testing.T, s *Set) { s.Uses[3].AreaPerPersonM2 = 0 }, []string{"floor area per person 0"}},
		{"spread of a use", func(_ *testing.T, s *Set) { s.Uses[3].IndoorLowC = 25 }, []string{"indoor temperature is not low"}},
		{"carrier missing", func(_ *testing.T, s *Set) { s.Carriers = s.Carriers[1:] }, []string{`carrier "gas": missing`}},
		{"carrier unknown", func(_ *testing.T, s *Set) { s.Carriers[0].Word = "peat" }, []string{`carrier "peat": unknown word`}},
		{"unit", func(_ *testing.T, s *Set) { s.Measures[0].Unit = "acre" }, []string{`unknown unit "acre"`}},
		{"target missing", func(_ *testing.T, s *Set) { delete(s.Measures[0].Target, "thickness_m") },
			[]string{"outside-wall-insulation", "target thickness_m is missing"}},
		{"target impossible", func(_ *testing.T, s *Set) { s.Measures[0].Target["n50_factor"] = 3 }, []string{"target n50_factor 3"}},
		{"extra target not a number", func(_ *testing.T, s *Set) { s.Measures[0].Target["extra"] = math.Inf(1) }, []string{"target extra is not a number"}},
		{"life", func(_ *testing.T, s *Set) { s.Measures[0].LifeYears = 0 }, []string{"life 0"}},
		{"currency", func(_ *testing.T, s *Set) { s.Economics.Currency = "" }, []string{"no currency"}},
		{"discount rate", func(_ *testing.T, s *Set) { s.Economics.DiscountRate = 3 }, []string{"discount rate 3"}},
	} {
		t.Run(c.name, func(t *testing.T) {
			s := starterSet(t)
			c.edit(t, s)
			err := s.Validate()
			if err == nil {
				t.Fatal("nothing found")
			}
			for _, w := range c.want {
				if !strings.Contains(err.Error(), w) {
					t.Errorf("%q is not in:\n%v", w, err)
				}
			}
		})
	}
}

func TestValidateReportsAllAtOnce(t *testing.T) {
	s := starterSet(t)
	s.Economics.Currency = ""
	s.Materials[0].ConductivityWMK = 0
	rule(t, s, "exposure-any").Word = "windy"
	err := s.Validate()
	if err == nil {
		t.Fatal("nothing found")
	}
	for _, w := range []string{"currency", "conductivity", "windy"} {
		if !strings.Contains(err.Error(), w) {
			t.Errorf("%q is not in:\n%v", w, err)
		}
	}
}

func TestValidateAllowsRegionsAndNarrowerYears(t *testing.T) {
	s := starterSet(t)
	s.Rules = append(s.Rules,
		Rule{ID: "coast", Property: ShelterRule, Construction: "normal", Region: "coast", Typical: 0.9, Low: 0.8, High: 0.95, Source: "x"},
		Rule{ID: "one-year", Property: GlazingWord, YearFrom: 1975, YearTo: 1975, Word: "single", Source: "x"},
		Rule{ID: "same-again", Property: GlazingWord, YearFrom: 1969, YearTo: 1994, Word: "double uncoated", Source: "x"})
	if err := s.Validate(); err != nil {
		t.Error(err)
	}
	s.Index()
	for region, want := range map[string]string{"coast": "coast", "inland": "shelter-normal"} {
		if r, _ := s.Find(ShelterRule, Key{Construction: "normal", Region: region}); r == nil || r.ID != want {
			t.Errorf("%+v answers for %s", r, region)
		}
	}
	if r, _ := s.Find(GlazingWord, Key{Year: 1975}); r == nil || r.ID != "one-year" {
		t.Errorf("%+v answers for 1975", r)
	}
}

func TestEmptySetDoesNotPass(t *testing.T) {
	if (&Set{}).Validate() == nil {
		t.Error("an empty set passes")
	}
}

func TestHashFollowsContent(t *testing.T) {
	s := starterSet(t)
	h := s.Hash()
	if len(h) != 64 || h != starterSet(t).Hash() {
		t.Fatalf("hash %q is not stable", h)
	}
	s.Index()
	slices.Reverse(s.Rules)
	slices.Reverse(s.Carriers)
	slices.Reverse(s.Buildups)
	slices.Reverse(s.Materials)
	if s.Hash() != h {
		t.Error("the order of rows changes the hash")
	}
	slices.Reverse(s.Measures)
	if s.Hash() == h {
		t.Error("the order of measures, which is that of the results, does not count")
	}
}

// Every leaf of the set must count: change each in turn.
func TestHashTakesInEverything(t *testing.T) {
	s := starterSet(t)
	s.Climates = append(s.Climates, climate.Climate{Name: "somewhere"})
	before := s.Hash()
	leaves := 0
	var walk func(path string, v reflect.Value)
	check := func(path string) {
		leaves++
		if s.Hash() == before {
			t.Errorf("%s does not count", path)
		}
	}
	walk = func(path string, v reflect.Value) {
		old := reflect.New(v.Type()).Elem()
		old.Set(v)
		switch v.Kind() {
		case reflect.String:
			v.SetString(v.String() + "x")
		case reflect.Float64:
			v.SetFloat(v.Float() + 1)
		case reflect.Int:
			v.SetInt(v.Int() + 1)
		case reflect.Uint8:
			v.SetUint(v.Uint() + 1)
		case reflect.Bool:
			v.SetBool(!v.Bool())
		case reflect.Slice, reflect.Array:
			if v.Len() > 0 {
				walk(path+"[0]", v.Index(0))
			}
			return
		case reflect.Map:
			m := v.Interface().(map[string]float64)
			m["extra"] = 1
			check(path)
			delete(m, "extra")
			return
		case reflect.Struct:
			for i := range v.NumField() {
				if f := v.Type().Field(i); f.IsExported() {
					walk(path+"."+f.Name, v.Field(i))
				}
			}
			return
		default:
			t.Fatalf("%s is a %s", path, v.Kind())
		}
		check(path)
		v.Set(old)
	}
	walk("set", reflect.ValueOf(s).Elem())
	if s.Hash() != before {
		t.Error("the walk did not put everything back")
	}
	if leaves < 60 {
		t.Errorf("only %d leaves met", leaves)
	}
}

func TestParseReportsFileAndLine(t *testing.T) {
	files := fstest.MapFS{}
	for _, name := range []string{"materials", "buildups", "uses", "rules", "carriers", "measures", "economics", "surveys"} {
		data, err := starterFiles.ReadFile("starter/" + name + ".csv")
		if err != nil {
			t.Fatal(err)
		}
		files[name+".csv"] = &fstest.MapFile{Data: data}
	}
	if _, err := parse(files); err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct{ file, old, with, want string }{
		{"carriers.csv", "gas,0.1,", "gas,cheap,", `"cheap" is not a number`},
		{"carriers.csv", "price_per_kwh", "price", "column price_per_kwh: missing"},
		{"economics.csv", "EUR", "EUR,1", "table economics.csv"},
		{"rules.csv", ",1918,", ",soon,", `"soon" is not a year`},
		{"uses.csv", "\nschool,", "\nscool,", `unknown use "scool"`},
		{"measures.csv", "spf=3 ", "spf ", `target "spf`},
		{"buildups.csv", ",lime plaster,", ",lime,", `unknown material "lime"`},
		{"buildups.csv", ",wall,,", ",wall,perhaps,", `"perhaps" is neither yes nor no`},
	} {
		old := files[c.file]
		text := strings.Replace(string(old.Data), c.old, c.with, 1)
		if text == string(old.Data) {
			t.Errorf("%s holds no %q", c.file, c.old)
		}
		files[c.file] = &fstest.MapFile{Data: []byte(text)}
		if _, err := parse(files); err == nil || !strings.Contains(err.Error(), c.want) || !strings.Contains(err.Error(), c.file) {
			t.Errorf("%s with %q: %v, want %q", c.file, c.with, err, c.want)
		}
		files[c.file] = old
	}
	delete(files, "rules.csv")
	if _, err := parse(files); err == nil || !strings.Contains(err.Error(), "rules.csv") {
		t.Errorf("missing table: %v", err)
	}
}
