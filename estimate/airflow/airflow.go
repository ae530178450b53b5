// Package airflow computes flows of outdoor air through a building by stack,
// wind and fans, month by month.
//
// Infiltration follows the algebraic single-zone model of Walker and Wilson
// (1998), HVAC&R Research 4(2), without flue: leakage V = C dp^n; n flow exponent,
// C in m3/(s Pa^n), R share of leakage in floor and ceiling, X ceiling minus
// floor share, H height connected by air, S shelter, v wind at eaves height. Its
// authors found it within 15 % of measurement where wind dominates and within
// 7 % where stack does. Fans and infiltration are put together in quadrature
// (ASHRAE Fundamentals). Equations are quoted from memory.
//
// Left out of the estimate: flues, crawl spaces, wind direction, several zones.
// Beside what the estimate uses, the package holds older and fuller published
// models (flue and crawl space, ISO 13789, the ASHRAE basic and enhanced models)
// as references that the tests hold the estimate against.
package airflow

import "math"

const (
	airHeatJM3K = 1200.0 // rho c of air, J/(m3K), ISO 13789
	gravity     = 9.81   // m/s2
	zeroK       = 273.15
	densityK    = 353.0 // rho T of dry air at 101 325 Pa, kg K/m3
	testPa      = 50.0  // pressure difference of n50 and q50
)

// HeatWK is the heat an air flow in m3/h carries per kelvin, W/K: rho c V.
// Source: ISO 13789.
func HeatWK(flowM3H float64) float64 { return airHeatJM3K / 3600 * flowM3H }

// AirDensity is rho = 353/T in kg/m3, T in K, at sea level.
func AirDensity(k float64) float64 { return densityK / k }

// Input is what decides the flows of one state.
type Input struct {
	VolumeM3     float64
	N50PerH      float64 // air changes at 50 Pa
	FlowExponent float64 // n: 0.5 turbulent to 1 laminar
	StackHeightM float64 // H: height connected by air
	LeakageR     float64 // R: share of leakage in floor and ceiling
	LeakageX     float64 // X: ceiling minus floor share
	Shelter      float64 // S
	WindFactor   float64 // wind at eaves height / wind at 10 m
	IndoorC      float64

	SupplyM3H, ExtractM3H float64
	HeatRecovery          float64 // effective share of the balanced flow's heat
	AiringM3H             float64 // windows opened by occupants
	StackDuctM2           float64 // opening area of passive stacks; 0 without
	StackDuctCd           float64 // their discharge coefficient
	StackDuctM            float64 // their height
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
	StackShare      float64 // share of infiltration put down to stack, the rest to wind
}

// Coefficients holds what does not change over the months.
type Coefficients struct {
	exponent             float64
	leakM3H              float64 // V50
	stack, wind          float64 // of the driving terms; see at
	indoorC              float64
	duct                 float64 // m3/(h K^0.5)
	balanced, unbalanced float64
	airing               float64
	constantM3H          float64 // balanced flow by its loss, and airing
	windFactor           float64
	volumeM3             float64
}

// Prepare works out what does not change over the months. Shares and exponents
// outside what their definitions allow (n 0.5 to 1, R 0 to 1, |X| at most R)
// count as the nearest that is allowed.
func Prepare(in *Input) Coefficients {
	n := between(0.5, in.FlowExponent, 1)
	r := between(0, in.LeakageR, 1)
	x := between(-r, in.LeakageX, r)
	indoorK := in.IndoorC + zeroK
	shelteredFactor := in.Shelter * in.WindFactor
	c := Coefficients{
		exponent: n,
		leakM3H:  in.N50PerH * in.VolumeM3,
		// f^(1/n) times what of P_s and P_w does not change, over 50 Pa.
		stack:      power(StackFactor(n, r, x), 1/n) * densityK * gravity * math.Max(0, in.StackHeightM) / indoorK / testPa,
		wind:       power(WindFactor(n, r, x), 1/n) * densityK / 2 * shelteredFactor * shelteredFactor / testPa,
		indoorC:    in.IndoorC,
		balanced:   math.Min(in.SupplyM3H, in.ExtractM3H),
		unbalanced: math.Abs(in.SupplyM3H - in.ExtractM3H),
		airing:     in.AiringM3H,
		windFactor: in.WindFactor,
		volumeM3:   in.VolumeM3,
	}
	c.constantM3H = c.balanced*(1-in.HeatRecovery) + in.AiringM3H
	if in.StackDuctM2 > 0 {
		c.duct = StackDuctM3H(in.StackDuctCd, in.StackDuctM2, in.StackDuctM, in.IndoorC, in.IndoorC-1)
	}
	return c
}

func between(low, v, high float64) float64 { return math.Min(high, math.Max(low, v)) }

// HeatWK is the heat carried by air in W/K: what the heating need requires, and
// nothing else.
func (c *Coefficients) HeatWK(outdoorC, wind10MS float64) float64 {
	return c.at(outdoorC, wind10MS).heatWK
}

// moment is what at finds on the way to the heat.
type moment struct {
	stack, wind                float64 // driving terms
	infiltration, duct, heatWK float64
}

// at draws the exponent out of the superposition, so that one power is enough:
// with s = f_s^(1/n) P_s/50 and w = f_w^(1/n) P_w/50,
//
//	V_inf = V_50 (s + w + beta sqrt(s w))^n.
//
// The bracket is at least (1 + beta/2)(s + w), so never negative.
func (c *Coefficients) at(outdoorC, wind10MS float64) (m moment) {
	difference := c.indoorC - outdoorC
	perK := 1 / (outdoorC + zeroK)
	m.stack = c.stack * math.Abs(difference) * perK
	m.wind = c.wind * (wind10MS * wind10MS) * perK
	driving := float64(m.stack+m.wind) + float64(beta*math.Sqrt(m.stack*m.wind))
	m.infiltration = c.leakM3H * power(driving, c.exponent)
	leak := m.infiltration
	if c.unbalanced > 0 {
		leak = Quadrature(c.unbalanced, m.infiltration)
	}
	if c.duct > 0 && difference > 0 {
		m.duct = c.duct * math.Sqrt(difference)
	}
	m.heatWK = HeatWK(c.constantM3H + leak + m.duct)
	return m
}

// At fills in one month's flows by driver. Its HeatWK is that of the method of
// this name to the last bit.
func (c *Coefficients) At(outdoorC, wind10MS float64, out *Flow) {
	m := c.at(outdoorC, wind10MS)
	*out = Flow{
		WindMS:          c.windFactor * wind10MS,
		StackM3H:        c.leakM3H * power(m.stack, c.exponent),
		WindM3H:         c.leakM3H * power(m.wind, c.exponent),
		InfiltrationM3H: m.infiltration,
		StackDuctM3H:    m.duct,
		BalancedM3H:     c.balanced,
		UnbalancedM3H:   c.unbalanced,
		OutdoorAirM3H:   c.balanced + Quadrature(c.unbalanced, m.infiltration) + c.airing + m.duct,
		HeatWK:          m.heatWK,
	}
	if c.volumeM3 > 0 {
		out.AirChangesPerH = out.OutdoorAirM3H / c.volumeM3
	}
	if both := m.stack + m.wind; both > 0 {
		out.StackShare = m.stack / both
	}
}

// StackDuctM3H is the flow of passive stacks of height h and opening area A in
// m3/h: C_d A sqrt(2 dp/rho_o), with the stack pressure dp = rho_o g h dT/T_i, so
// C_d A sqrt(2 g h dT/T_i); none where it is warmer outdoors. Source: orifice
// equation; resistance of the air's way into the building is part of C_d.
func StackDuctM3H(discharge, areaM2, heightM, indoorC, outdoorC float64) float64 {
	difference := indoorC - outdoorC
	if !(difference > 0) || !(heightM > 0) {
		return 0
	}
	return 3600 * discharge * areaM2 * math.Sqrt(2*gravity*heightM*difference/(indoorC+zeroK))
}
