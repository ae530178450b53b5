package archetype

import (
	"embed"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"math"
	"slices"
	"strconv"
	"strings"
	"sync"

	"kelvinrow/estimate/building"
	"kelvinrow/estimate/fabric"
)

//go:embed starter/*.csv
var starterFiles embed.FS

var starter = sync.OnceValues(func() (*Set, error) {
	dir, err := fs.Sub(starterFiles, "starter")
	if err != nil {
		return nil, fmt.Errorf("open the starter tables: %w", err)
	}
	return parse(dir)
})

// Starter returns the embedded starter set, checked and indexed: defaults for a
// cool temperate climate, to be replaced by national tables. The caller owns the
// copy and may edit it. It holds no climates; package climate has its own.
func Starter() (*Set, error) {
	s, err := starter()
	if err != nil {
		return nil, err
	}
	return s.Clone(), nil
}

// parse reads the tables of a set from CSV files, checks and indexes it.
func parse(dir fs.FS) (*Set, error) {
	s := &Set{}
	var errs []error
	for _, t := range []struct {
		file string
		row  func(*Set, *row)
	}{
		{"materials.csv", readMaterial},
		{"buildups.csv", readLayer},
		{"uses.csv", readUse},
		{"rules.csv", readRule},
		{"carriers.csv", readCarrier},
		{"measures.csv", readMeasure},
		{"economics.csv", readEconomics},
		{"surveys.csv", readSurvey},
	} {
		errs = append(errs, readTable(dir, t.file, func(r *row) { t.row(s, r) }))
	}
	if err := errors.Join(errs...); err != nil {
		return nil, err
	}
	s.Index()
	if err := s.Validate(); err != nil {
		return nil, err
	}
	return s, nil
}

// row is one row of a table; reading a column that is absent or malformed
// leaves a problem.
type row struct {
	file     string
	line     int
	columns  map[string]int
	record   []string
	problems []error
}

func readTable(dir fs.FS, file string, each func(*row)) error {
	f, err := dir.Open(file)
	if err != nil {
		return fmt.Errorf("open table %s: %w", file, err)
	}
	defer f.Close()
	cr := csv.NewReader(f)
	cr.Comment = '#'
	header, err := cr.Read()
	if err != nil {
		return fmt.Errorf("header of table %s: %w", file, err)
	}
	columns := make(map[string]int, len(header))
	for i, h := range header {
		columns[h] = i
	}
	var problems []error
	for {
		record, err := cr.Read()
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil {
			return fmt.Errorf("table %s: %w", file, err)
		}
		line, _ := cr.FieldPos(0)
		r := &row{file: file, line: line, columns: columns, record: record}
		each(r)
		problems = append(problems, r.problems...)
	}
	return errors.Join(problems...)
}

func (r *row) problem(column, format string, args ...any) {
	r.problems = append(r.problems, fmt.Errorf("table %s, line %d, column %s: %s", r.file, r.line, column, fmt.Sprintf(format, args...)))
}

func (r *row) text(column string) string {
	i, ok := r.columns[column]
	if !ok {
		r.problem(column, "missing")
		return ""
	}
	return strings.TrimSpace(r.record[i])
}

// number reads a number; an empty cell is 0, which the tables use for "open" or
// "does not apply".
func (r *row) number(column string) float64 {
	s := r.text(column)
	if s == "" {
		return 0
	}
	x, err := strconv.ParseFloat(s, 64)
	if err != nil || math.IsNaN(x) || math.IsInf(x, 0) {
		r.problem(column, "%q is not a number", s)
		return 0
	}
	return x
}

func (r *row) year(column string) int {
	s := r.text(column)
	if s == "" {
		return 0
	}
	y, err := strconv.Atoi(s)
	if err != nil {
		r.problem(column, "%q is not a year", s)
	}
	return y
}

func (r *row) yes(column string) bool {
	switch s := r.text(column); s {
	case "yes":
		return true
	case "", "no":
	default:
		r.problem(column, "%q is neither yes nor no", s)
	}
	return false
}

func readMaterial(s *Set, r *row) {
	s.Materials = append(s.Materials, Material{
		Name: r.text("material"), ConductivityWMK: r.number("conductivity_w_mk"), Source: r.text("source"),
	})
}

// readLayer reads one layer; layers of a build-up stand in successive rows,
// from inside to outside.
func readLayer(s *Set, r *row) {
	name, element, bothInside, source := r.text("buildup"), r.text("element"), r.yes("both_inside"), r.text("source")
	if n := len(s.Buildups); n == 0 || s.Buildups[n-1].Name != name {
		s.Buildups = append(s.Buildups, Buildup{Name: name, Element: element, BothInside: bothInside, Source: source})
	}
	b := &s.Buildups[len(s.Buildups)-1]
	switch element {
	case "wall":
		b.Direction = fabric.Horizontal
	case "roof":
		b.Direction = fabric.Up
	case "floor":
		b.Direction = fabric.Down
	default:
		r.problem("element", "unknown element %q", element)
	}
	if b.Element != element || b.BothInside != bothInside {
		r.problem("buildup", "layers of %q disagree on element or both_inside", name)
	}
	if source != "" && source != b.Source && !strings.HasSuffix(b.Source, "; "+source) {
		b.Source += "; " + source
	}
	l := fabric.Layer{
		Name: r.text("layer"), ThicknessM: r.number("thickness_m"), ResistanceM2KW: r.number("resistance_m2k_w"),
		BridgeShare: r.number("bridge_share"),
	}
	material := func(column, name string) float64 {
		m, ok := s.Material(name)
		if !ok {
			r.problem(column, "unknown material %q", name)
			return 0
		}
		return m.ConductivityWMK
	}
	if l.ResistanceM2KW == 0 {
		l.ConductivityWMK = material("layer", l.Name)
	}
	if bridge := r.text("bridge_material"); bridge != "" {
		l.BridgeName, l.BridgeConductivityWMK = bridge, material("bridge_material", bridge)
	}
	l.Fixings = fabric.Fixings{PerM2: r.number("fixings_per_m2"), SectionM2: r.number("fixing_mm2") / 1e6, ConductivityWMK: r.number("fixing_w_mk")}
	gaps := r.text("gaps")
	if i := slices.Index(fabric.GapWords[:], gaps); i >= 0 {
		l.Gaps = fabric.Gaps(i)
	} else {
		r.problem("gaps", "%q is neither empty nor one of %v", gaps, fabric.GapWords[1:])
	}
	b.Layers = append(b.Layers, l)
}

func readUse(s *Set, r *row) {
	word := r.text("use")
	i, ok := building.WordIndex(building.UseField, word)
	if !ok {
		r.problem("use", "unknown use %q", word)
		return
	}
	if s.Uses[i].Word != "" {
		r.problem("use", "%q stands twice", word)
	}
	s.Uses[i] = Use{
		Word: word, IndoorC: r.number("indoor_c"), IndoorLowC: r.number("indoor_low_c"), IndoorHighC: r.number("indoor_high_c"),
		InternalGainWM2: r.number("gain_w_m2"), InternalGainLowWM2: r.number("gain_low_w_m2"), InternalGainHighWM2: r.number("gain_high_w_m2"),
		SetpointShare: r.number("setpoint_share"), MinAirLSM2: r.number("min_air_l_s_m2"), MinAirLSPerson: r.number("min_air_l_s_person"),
		AreaPerPersonM2: r.number("area_per_person_m2"), HotWaterKWhM2: r.number("hot_water_kwh_m2"), Source: r.text("source"),
	}
}

func readRule(s *Set, r *row) {
	s.Rules = append(s.Rules, Rule{
		ID: r.text("id"), Property: Property(r.text("property")),
		Use: r.text("use"), Attachment: r.text("attachment"), YearFrom: r.year("year_from"), YearTo: r.year("year_to"),
		Construction: r.text("construction"), Region: r.text("region"),
		Typical: r.number("typical"), Low: r.number("low"), High: r.number("high"), Word: r.text("word"),
		Shared: r.number("shared"), Source: r.text("source"),
	})
}

func readCarrier(s *Set, r *row) {
	s.Carriers = append(s.Carriers, Carrier{
		Word: r.text("carrier"), PricePerKWh: r.number("price_per_kwh"), PriceRise: r.number("price_rise"),
		CO2KgKWh: r.number("co2_kg_kwh"), Source: r.text("source"),
	})
}

func readMeasure(s *Set, r *row) {
	m := Measure{
		Key: r.text("key"), Label: r.text("label"), Unit: r.text("unit"), FixedCost: r.number("fixed_cost"), UnitCost: r.number("unit_cost"),
		LifeYears: r.number("life_years"), UpkeepShare: r.number("upkeep_share"), Source: r.text("source"),
	}
	m.SizeFrom, m.SizeExponent = r.number("size_from"), r.number("size_exponent")
	m.CostLow, m.CostHigh = r.number("cost_low"), r.number("cost_high")
	if err := m.parseTargets(r.text("target")); err != nil {
		r.problem("target", "%v", err)
	}
	s.Measures = append(s.Measures, m)
}

func readSurvey(s *Set, r *row) {
	s.Surveys = append(s.Surveys, SurveyCost{Group: r.text("group"), Cost: r.number("cost"), Source: r.text("source")})
}

func readEconomics(s *Set, r *row) {
	if s.Economics.Currency != "" {
		r.problem("currency", "more than one row")
	}
	s.Economics = Economics{
		Currency: r.text("currency"), DiscountRate: r.number("discount_rate"), PeriodYears: r.number("period_years"), Source: r.text("source"),
	}
}
