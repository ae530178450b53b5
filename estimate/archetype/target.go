package archetype

import (
	"fmt"
	"maps"
	"math"
	"slices"
	"strconv"
	"strings"
)

// measureUnits are the units a measure may be counted in. "m2" is the treated
// area of the measure, "m2 floor" the heated floor area.
var measureUnits = []string{"m2", "m2 floor", "m3/h", "dwelling", "building", "kW"}

// MeasureUnits lists the units a measure may be counted in.
func MeasureUnits() []string { return slices.Clone(measureUnits) }

type target struct {
	name      string
	low, high float64
}

var insulationTargets = []target{
	{"thickness_m", 0.001, 1}, {"conductivity_w_mk", 0.002, 1}, {"skip_below_u", 0, 7},
	{"bridge_delta", -0.5, 0.5}, {"n50_factor", 0.1, 1},
}

// measureTargets are the parameters each measure cannot do without.
var measureTargets = map[string][]target{
	"outside-wall-insulation": insulationTargets,
	"inside-wall-insulation":  insulationTargets,
	"attic-insulation":        insulationTargets,
	"flat-roof-insulation":    insulationTargets,
	"floor-insulation":        insulationTargets,
	"cavity-filling": {
		{"thickness_m", 0.001, 1}, {"conductivity_w_mk", 0.002, 1}, {"skip_below_u", 0, 7}, {"n50_factor", 0.1, 1},
	},
	"new-windows": {
		{"u", 0.3, 7}, {"g", 0, 1}, {"frame_share", 0, 1}, {"skip_below_u", 0, 7}, {"n50_factor", 0.1, 1},
	},
	"draught-sealing": {
		{"n50_factor", 0.1, 1}, {"n50_floor", 0.1, 40}, {"skip_below_n50", 0.1, 40},
	},
	"demand-controlled-extract": {
		{"rate_m3h_m2", 0, 50}, {"demand_factor", 0.1, 1}, {"fan_power", 0, 5},
	},
	"balanced-recovery": {
		{"rate_m3h_m2", 0, 50}, {"efficiency", 0, 1}, {"recovery_cut", 0, 1}, {"fan_power", 0, 5}, {"n50_factor", 0.1, 1},
	},
	"heating-controls": {{"temperature_drop_k", 0, 5}, {"distribution", 0.1, 1}},
	"heat-generator":   {{"spf", 0.5, 8}},
}

func sortedKeys(m map[string]float64) []string { return slices.Sorted(maps.Keys(m)) }

// parseTargets reads target parameters as written in the measures table, a spread
// in brackets where there is one: "thickness_m=0.16; n50_factor=0.7 (0.55 to 0.85)".
func (m *Measure) parseTargets(text string) error {
	m.Target = map[string]float64{}
	for part := range strings.SplitSeq(text, ";") {
		if part = strings.TrimSpace(part); part == "" {
			continue
		}
		name, value, _ := strings.Cut(part, "=")
		name = strings.TrimSpace(name)
		if _, twice := m.Target[name]; twice {
			return fmt.Errorf("target %s stands twice", name)
		}
		value, spread, spreads := strings.Cut(value, "(")
		typical, err := finite(value)
		if err != nil || name == "" {
			return fmt.Errorf("target %q is not of the form name=number", part)
		}
		m.SetTarget(name, typical, typical, typical)
		if !spreads {
			continue
		}
		lowText, highText, _ := strings.Cut(strings.TrimSuffix(strings.TrimSpace(spread), ")"), " to ")
		low, errLow := finite(lowText)
		high, errHigh := finite(highText)
		if errLow != nil || errHigh != nil {
			return fmt.Errorf("target %q: its spread is not of the form (low to high)", part)
		}
		m.SetTarget(name, typical, low, high)
	}
	return nil
}

func finite(text string) (float64, error) {
	x, err := strconv.ParseFloat(strings.TrimSpace(text), 64)
	if err == nil && (math.IsNaN(x) || math.IsInf(x, 0)) {
		err = strconv.ErrRange
	}
	return x, err
}

// SetTarget sets a parameter with its 5th and 95th percentile; without a spread all
// three are the same.
func (m *Measure) SetTarget(name string, typical, low, high float64) {
	set := func(to *map[string]float64, v float64) {
		if *to == nil {
			*to = map[string]float64{}
		}
		(*to)[name] = v
	}
	set(&m.Target, typical)
	if low != typical || high != typical {
		set(&m.TargetLow, low)
		set(&m.TargetHigh, high)
	}
}

// TargetNames are the parameters of a measure by name.
func (m *Measure) TargetNames() []string { return sortedKeys(m.Target) }

// TargetSpread returns the 5th and 95th percentile of a parameter; typical twice
// where it has no spread.
func (m *Measure) TargetSpread(name string) (low, high float64) {
	low, okLow := m.TargetLow[name]
	high, okHigh := m.TargetHigh[name]
	if !okLow || !okHigh {
		return m.Target[name], m.Target[name]
	}
	return low, high
}

// targetMeanings says what the parameters are.
var targetMeanings = map[string]string{
	"thickness_m":        "thickness of the insulation, m",
	"conductivity_w_mk":  "its conductivity as built, W/(mK)",
	"skip_below_u":       "left alone where U is not above this, W/(m2K)",
	"bridge_delta":       "change of the thermal bridges over the envelope, W/(m2K)",
	"n50_factor":         "factor on the airtightness n50",
	"n50_floor":          "n50 is not brought below this, 1/h",
	"skip_below_n50":     "left alone where n50 is not above this, 1/h",
	"u":                  "U of the new window, W/(m2K)",
	"g":                  "its g-value",
	"frame_share":        "its frame share",
	"rate_m3h_m2":        "airflow, m3/h per m2 of floor area",
	"demand_factor":      "factor on the airflow under demand control",
	"fan_power":          "fan power per stream, W/(m3/h)",
	"efficiency":         "heat-recovery efficiency, rated",
	"recovery_cut":       "factor on it for frost and leakage of the unit",
	"temperature_drop_k": "fall of the mean room temperature, K",
	"distribution":       "efficiency of distribution and control after it",
	"spf":                "seasonal performance factor",
}

// TargetMeaning says in words what a parameter of measures is, "" if unknown.
func TargetMeaning(name string) string { return targetMeanings[name] }
