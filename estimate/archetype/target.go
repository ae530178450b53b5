package archetype

import (
	"maps"
	"slices"
)

// measureUnits are the units a measure may be counted in. "m2" is the treated
// area of the measure, "m2 floor" the heated floor area.
var measureUnits = []string{"m2", "m2 floor", "m3/h", "dwelling", "building", "kW"}

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
