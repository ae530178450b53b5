// Package airflow computes flows of outdoor air through a building by stack,
// wind and fans, month by month.
//
// Infiltration follows the algebraic single-zone model of Walker and Wilson
// (1998), HVAC&R Research 4(2), without flue: leakage V = C dp^n; n flow
// exponent (here called n_f where n is the air-change rate), C in m3/(s Pa^n), R
// share of leakage in floor and ceiling, X ceiling minus floor share, H height
// connected by air, S shelter, v wind at eaves height. Fans and infiltration are
// put together in quadrature (ASHRAE Fundamentals). Equations are quoted from
// memory. Left out: flues, crawl spaces, wind direction, several zones.
package airflow

import (
	"math"

	"kelvinrow/estimate/climate"
)

const (
	airHeatJM3K = 1200.0 // rho c of air, J/(m3K), ISO 13789
	gravity     = 9.81   // m/s2
	zeroK       = 273.15
	beta        = -0.33 // interaction of wind and stack, Walker and Wilson (1998)
)

// HeatWK is the heat an air flow in m3/h carries per kelvin, W/K (ISO 13789).
func HeatWK(flowM3H float64) float64 { return airHeatJM3K / 3600 * flowM3H }

// AirDensity is rho = 353/T in kg/m3, T in K, at sea level.
func AirDensity(k float64) float64 { return 353 / k }

// FlowCoefficient is C = n50 V / 50^n in m3/(s Pa^n).
func FlowCoefficient(n50PerH, volumeM3, exponent float64) float64 {
	return n50PerH * volumeM3 / 3600 / math.Pow(50, exponent)
}

// N50FromQ50 turns leakage per envelope area at 50 Pa in m3/(h m2) into air
// changes at 50 Pa, 1/h.
func N50FromQ50(q50, envelopeM2, volumeM3 float64) float64 { return q50 * envelopeM2 / volumeM3 }

// StackFactor is f_s = (1 + n R)/(n + 1) [1/2 - 1/2 M^(5/4)]^(n+1), M = X^2/(2 - R),
// at most 1. Source: Walker and Wilson (1998), without flue.
func StackFactor(exponent, r, x float64) float64 {
	m := math.Min(1, x*x/(2-r))
	return (1 + exponent*r) / (exponent + 1) * math.Pow(0.5-0.5*math.Pow(m, 1.25), exponent+1)
}

// WindFactor is f_w = 0.19 (2 - n) [1 - ((X + R)/2)^(3/2)]. Source: Walker and
// Wilson (1998), slab or basement, without flue.
func WindFactor(exponent, r, x float64) float64 {
	return 0.19 * (2 - exponent) * (1 - math.Pow((x+r)/2, 1.5))
}

// StackPressure is P_s = rho_o g H |dT|/T_i in Pa.
func StackPressure(heightM, indoorC, outdoorC float64) float64 {
	return AirDensity(outdoorC+zeroK) * gravity * heightM * math.Abs(indoorC-outdoorC) / (indoorC + zeroK)
}

// WindPressure is P_w = rho_o (S v)^2/2 in Pa.
func WindPressure(outdoorC, sheltered float64) float64 {
	return AirDensity(outdoorC+zeroK) * sheltered * sheltered / 2
}

// Superpose puts stack and wind flow together:
// [V_s^(1/n) + V_w^(1/n) + beta (V_s V_w)^(1/(2n))]^n. Source: Walker and Wilson
// (1998).
func Superpose(stack, wind, exponent float64) float64 {
	return math.Pow(math.Pow(stack, 1/exponent)+math.Pow(wind, 1/exponent)+
		beta*math.Pow(stack*wind, 1/(2*exponent)), exponent)
}

// profile is the power law of wind over terrain: exponent and height of the
// boundary layer in m.
var profile = [climate.NumTerrains]struct{ exponent, layerM float64 }{
	climate.Suburb: {0.22, 370},
	climate.Open:   {0.14, 270},
	climate.City:   {0.33, 460},
}

// EavesWindFactor is wind at eaves height h over wind at 10 m in open country:
// (270/10)^0.14 (h/delta)^alpha. Source: ASHRAE Fundamentals, wind profile, as
// used by Walker and Wilson (1998).
func EavesWindFactor(t climate.Terrain, eavesM float64) float64 {
	open, here := profile[climate.Open], profile[t]
	return math.Pow(open.layerM/10, open.exponent) * math.Pow(eavesM/here.layerM, here.exponent)
}

// Input is what decides the flows of one state.
type Input struct {
	VolumeM3     float64
	N50PerH      float64
	FlowExponent float64
	StackHeightM float64
	LeakageR     float64
	LeakageX     float64
	Shelter      float64
	WindFactor   float64 // wind at eaves height / wind at 10 m
	IndoorC      float64

	SupplyM3H, ExtractM3H float64
	HeatRecovery          float64 // effective share
	AiringM3H             float64
	StackDuctM2           float64
	StackDuctCd           float64
	StackDuctM            float64
}

// Flow is one month of air.
type Flow struct {
	WindMS          float64 // at eaves height, before shelter
	StackM3H        float64 // by stack alone
	WindM3H         float64 // by wind alone
	InfiltrationM3H float64 // by both
	StackDuctM3H    float64
	BalancedM3H     float64
	UnbalancedM3H   float64
	OutdoorAirM3H   float64 // all outdoor air coming in
	HeatWK          float64
	AirChangesPerH  float64
}

// Coefficients holds what does not change over the months.
type Coefficients struct {
	in                   Input
	coefficientM3H       float64 // C in m3/(h Pa^n)
	stack, wind          float64 // f_s^(1/n), f_w^(1/n): the factors drawn under the exponent
	balanced, unbalanced float64
	constantM3H          float64 // balanced flow by its loss, and airing
}

// Prepare works out what does not change over the months.
func Prepare(in *Input) Coefficients {
	n := in.FlowExponent
	c := Coefficients{
		in:             *in,
		coefficientM3H: 3600 * FlowCoefficient(in.N50PerH, in.VolumeM3, n),
		stack:          math.Pow(StackFactor(n, in.LeakageR, in.LeakageX), 1/n),
		wind:           math.Pow(WindFactor(n, in.LeakageR, in.LeakageX), 1/n),
		balanced:       math.Min(in.SupplyM3H, in.ExtractM3H),
		unbalanced:     math.Abs(in.SupplyM3H - in.ExtractM3H),
	}
	c.constantM3H = c.balanced*(1-in.HeatRecovery) + in.AiringM3H
	return c
}

// HeatWK is the heat carried by air in W/K, with one power: the exponent is
// drawn out of the superposition, V = C [f_s^(1/n) P_s + f_w^(1/n) P_w + beta
// sqrt(f_s^(1/n) P_s f_w^(1/n) P_w)]^n. The bracket is never negative, as
// |beta| < 2.
func (c *Coefficients) HeatWK(outdoorC, wind10MS float64) float64 {
	heat, _, _ := c.at(outdoorC, wind10MS)
	return heat
}

func (c *Coefficients) at(outdoorC, wind10MS float64) (heatWK, infiltration, duct float64) {
	in := &c.in
	ps := c.stack * StackPressure(in.StackHeightM, in.IndoorC, outdoorC)
	pw := c.wind * WindPressure(outdoorC, in.Shelter*in.WindFactor*wind10MS)
	infiltration = c.coefficientM3H * math.Pow(ps+pw+beta*math.Sqrt(ps*pw), in.FlowExponent)
	if in.StackDuctM2 > 0 {
		duct = c.duct(outdoorC)
	}
	leak := infiltration
	if c.unbalanced > 0 {
		leak = math.Sqrt(c.unbalanced*c.unbalanced + infiltration*infiltration)
	}
	return HeatWK(c.constantM3H + leak + duct), infiltration, duct
}

// duct is the flow of passive stacks in m3/h: C_d A sqrt(2 dp/rho_o) with the
// stack pressure over their height; none when it is warmer outdoors.
func (c *Coefficients) duct(outdoorC float64) float64 {
	in := &c.in
	if outdoorC >= in.IndoorC {
		return 0
	}
	dp := StackPressure(in.StackDuctM, in.IndoorC, outdoorC)
	return 3600 * in.StackDuctCd * in.StackDuctM2 * math.Sqrt(2*dp/AirDensity(outdoorC+zeroK))
}

// At fills in one month's flows by driver. Its HeatWK is that of the method of
// this name to the last bit.
func (c *Coefficients) At(outdoorC, wind10MS float64, out *Flow) {
	in := &c.in
	n := in.FlowExponent
	*out = Flow{WindMS: in.WindFactor * wind10MS, BalancedM3H: c.balanced, UnbalancedM3H: c.unbalanced}
	out.HeatWK, out.InfiltrationM3H, out.StackDuctM3H = c.at(outdoorC, wind10MS)
	out.StackM3H = c.coefficientM3H * math.Pow(c.stack*StackPressure(in.StackHeightM, in.IndoorC, outdoorC), n)
	out.WindM3H = c.coefficientM3H * math.Pow(c.wind*WindPressure(outdoorC, in.Shelter*out.WindMS), n)
	out.OutdoorAirM3H = c.balanced + Quadrature(c.unbalanced, out.InfiltrationM3H) + in.AiringM3H + out.StackDuctM3H
	out.AirChangesPerH = out.OutdoorAirM3H / in.VolumeM3
}

// Quadrature puts an unbalanced fan flow and infiltration together:
// sqrt(V_u^2 + V_inf^2). Source: ASHRAE Fundamentals.
func Quadrature(unbalanced, infiltration float64) float64 {
	return math.Sqrt(unbalanced*unbalanced + infiltration*infiltration)
}
