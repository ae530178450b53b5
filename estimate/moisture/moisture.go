// Package moisture judges inside surfaces by ISO 13788: saturation pressure,
// temperature factor, and the factor that keeps mould away.
//
// Symbols: theta temperature in degrees C, p vapour pressure in Pa, f_Rsi =
// (theta_si - theta_e)/(theta_i - theta_e). Quoted from memory of the standard;
// the class limits are not corroborated. Left out: interstitial condensation
// and two-dimensional junctions.
package moisture

import "math"

// MouldRsi is the inside surface resistance in m2K/W with which opaque elements
// are judged for mould (ISO 13788, 4.4.1): furniture and corners keep warm air
// away.
const MouldRsi = 0.25

// SaturationPressure in Pa over water from 0 C, over ice below. Source: ISO
// 13788, annex E.
func SaturationPressure(c float64) float64 {
	if c >= 0 {
		return 610.5 * math.Exp(17.269*c/(237.3+c))
	}
	return 610.5 * math.Exp(21.875*c/(265.5+c))
}

// SaturationTemperature in degrees C is the inverse of SaturationPressure.
// Source: ISO 13788, annex E.
func SaturationTemperature(pa float64) float64 {
	l := math.Log(pa / 610.5)
	if l >= 0 {
		return 237.3 * l / (17.269 - l)
	}
	return 265.5 * l / (21.875 - l)
}

// TemperatureFactor is f_Rsi of a plane element, from U in W/(m2K) calculated
// with rsi in m2K/W, judged with MouldRsi: (1/U' - 0.25)/(1/U') with U' based on
// 0.25. Source: ISO 13788, 4.3.
func TemperatureFactor(uWM2K, rsiM2KW float64) float64 {
	total := 1/uWM2K - rsiM2KW + MouldRsi
	return (total - MouldRsi) / total
}

// Class is a humidity class of ISO 13788, annex A: 1 storage, 2 offices and
// dwellings with normal occupancy and ventilation, 3 unknown occupancy, 4 sports
// halls and kitchens.
type Class uint8

// excess is the upper limit of inside vapour pressure above outside at 0 C and
// below, Pa.
var excess = [5]float64{0, 270, 540, 810, 1080}

// Excess is the inside vapour pressure above outside in Pa: the class limit up
// to 0 C, falling linearly to nothing at 20 C.
func (c Class) Excess(outdoorC float64) float64 {
	return excess[min(c, 4)] * math.Min(1, math.Max(0, (20-outdoorC)/20))
}

// RequiredFactor is the least f_Rsi in a month: the surface must not be more
// humid than 80 %. Outdoor humidity is a share. Source: ISO 13788, 5.3.
func RequiredFactor(c Class, indoorC, outdoorC, outdoorHumidity float64) float64 {
	pi := outdoorHumidity*SaturationPressure(outdoorC) + c.Excess(outdoorC)
	return (SaturationTemperature(pi/0.8) - outdoorC) / (indoorC - outdoorC)
}

// gasConstantVapour is that of water vapour, J/(kg K).
const gasConstantVapour = 461.5

// MoistureExcess returns the rise of inside above outside humidity in kg/m3 and
// of vapour pressure in Pa, from moisture released in kg/h, air changes in 1/h
// and volume in m3: dv = G/(n V), dp = dv R_v T.
func MoistureExcess(kgH, airChangesPerH, volumeM3, indoorK float64) (kgM3, pa float64) {
	kgM3 = kgH / (airChangesPerH * volumeM3)
	return kgM3, kgM3 * gasConstantVapour * indoorK
}
