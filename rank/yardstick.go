// Package rank orders buildings, for each retrofit measure, by what the measure
// brings there, and adds up a run. Ranks are decided on rounded keys with the
// building id as tie-break, so that the last bit of a float cannot reorder them.
package rank

import (
	"fmt"
	"math"
	"strings"

	"kelvinrow/estimate/result"
)

// Yardstick is what buildings are ranked by.
type Yardstick string

// The yardsticks.
const (
	Energy         Yardstick = "kwh"          // delivered energy saved per year
	CO2            Yardstick = "co2"          // emissions saved per year
	Money          Yardstick = "money"        // money saved per year, upkeep not deducted
	EnergyPerMoney Yardstick = "kwh-per-euro" // energy saved per year for each unit of money invested
	NPV            Yardstick = "npv"          // net present value over the measure's life
	Payback        Yardstick = "payback"      // simple payback, shortest first
	CostOfSaving   Yardstick = "cost-per-kwh" // cost of saved energy, cheapest first

	Default = Energy
)

// yardstick describes a Yardstick. key is greater for better buildings;
// decimals is how many of its decimals decide.
type yardstick struct {
	name     Yardstick
	words    string
	decimals int
	key      func(*result.Measure) float64
}

// Keys are compared to a thousandth of a kWh, kg or unit of money; rates, which
// are small numbers, to more decimals. Both are far below what the numbers can
// tell apart and far above rounding noise.
var yardsticks = []yardstick{
	{Energy, "energy saved per year", 3, func(m *result.Measure) float64 { return m.SavingKWh }},
	{CO2, "CO2 saved per year", 3, func(m *result.Measure) float64 { return m.CO2Kg }},
	{Money, "money saved per year", 3, func(m *result.Measure) float64 { return m.MoneyPerYear }},
	{EnergyPerMoney, "energy saved per year for the money invested", 7, energyPerMoney},
	{NPV, "net present value", 3, func(m *result.Measure) float64 { return m.NPV }},
	{Payback, "payback time, shortest first", 6, func(m *result.Measure) float64 { return -m.PaybackYears }},
	{CostOfSaving, "cost of saved energy, cheapest first", 9, func(m *result.Measure) float64 { return -m.CostOfSavedKWh }},
}

func energyPerMoney(m *result.Measure) float64 {
	if m.Cost <= 0 {
		return math.Inf(1)
	}
	return m.SavingKWh / m.Cost
}

// Yardsticks lists all yardsticks.
func Yardsticks() []Yardstick {
	out := make([]Yardstick, len(yardsticks))
	for i := range yardsticks {
		out[i] = yardsticks[i].name
	}
	return out
}

// ParseYardstick finds a yardstick by its name; "" is the default.
func ParseYardstick(s string) (Yardstick, error) {
	if s == "" {
		return Default, nil
	}
	for i := range yardsticks {
		if y := yardsticks[i].name; strings.EqualFold(string(y), strings.TrimSpace(s)) {
			return y, nil
		}
	}
	names := make([]string, len(yardsticks))
	for i := range yardsticks {
		names[i] = string(yardsticks[i].name)
	}
	return "", fmt.Errorf("yardstick %q is not known: use one of %s", s, strings.Join(names, ", "))
}

// Words says in words what the yardstick compares.
func (y Yardstick) Words() string { return y.find().words }

func (y Yardstick) find() *yardstick {
	for i := range yardsticks {
		if yardsticks[i].name == y {
			return &yardsticks[i]
		}
	}
	return &yardsticks[0]
}

// Key returns the rounded number buildings are compared by; greater is better.
// It is never NaN: what cannot be told comes last.
func (y Yardstick) Key(m *result.Measure) float64 { return y.find().rounded(m) }

func (y *yardstick) rounded(m *result.Measure) float64 {
	k := y.key(m)
	if math.IsNaN(k) {
		return math.Inf(-1)
	}
	if math.IsInf(k, 0) {
		return k
	}
	scale := math.Pow10(y.decimals)
	return math.Round(k*scale) / scale
}
