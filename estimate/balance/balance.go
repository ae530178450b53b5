// Package balance is the monthly heat balance of ISO 13790:2008 (monthly
// method; the same structure in ISO 52016-1): losses, gains, their utilisation,
// and the heating need.
//
// Symbols: Q_ht loss, Q_gn gains, gamma = Q_gn/Q_ht, tau time constant in h, eta
// utilisation factor, Q_nd need, all Q in kWh per month; H heat transfer in W/K.
// Quoted from memory; no published worked example of the utilisation factor was
// found, and the reduction for intermittent heating is not corroborated.
//
// Left out: cooling, several zones, opaque solar gains, the rule of ISO 52016-1
// that there is no need where gamma exceeds 2 (the formula leaves little there,
// without a step).
package balance

import (
	"math"

	"kelvinrow/estimate/airflow"
	"kelvinrow/estimate/climate"
)

// Input is a state lumped for the balance.
type Input struct {
	FloorAreaM2, IndoorC, InternalGainWM2 float64
	CapacityJK                            float64
	TransmissionWK                        float64
	SetpointShare                         float64                          // f_hr: share of hours at the set-point; 1 = always
	ApertureM2                            [climate.NumOrientations]float64 // sum of A g 0.9 (1 - frame) shading
	ApertureHorizontalM2                  float64
	Air                                   airflow.Input
}

// Month is one month of the balance with every intermediate value.
type Month struct {
	LossKWh       float64 // Q_ht; negative where it is warmer outside
	InternalKWh   float64
	SolarKWh      float64
	GainLossRatio float64 // gamma; 0 where there is no loss to relate gains to
	TimeConstantH float64 // tau; 0 where nothing carries heat out
	Utilisation   float64 // eta; 0 where gamma is
	NeedKWh       float64
	Flow          airflow.Flow
}

// Need is the heating need of the year in kWh. It allocates nothing.
func Need(in *Input, c *climate.Climate) float64 {
	air := airflow.Prepare(&in.Air)
	var m Month
	sum := 0.0
	for i := range c.Months {
		cm := &c.Months[i]
		in.month(cm, air.HeatWK(cm.OutdoorC, cm.Wind10M), &m)
		sum += m.NeedKWh
	}
	return sum
}

// Year is Need, bit for bit, with every month's intermediate values.
func Year(in *Input, c *climate.Climate, out *[12]Month) float64 {
	air := airflow.Prepare(&in.Air)
	sum := 0.0
	for i := range c.Months {
		cm := &c.Months[i]
		air.At(cm.OutdoorC, cm.Wind10M, &out[i].Flow)
		in.month(cm, out[i].Flow.HeatWK, &out[i])
		sum += out[i].NeedKWh
	}
	return sum
}

// month makes the balance of one month from the heat carried by air:
//
//	Q_ht = (H_tr + H_ve)(theta_i - theta_e) t
//	Q_gn = q_int A_f t + sum(I A_sol)
//	Q_nd = a_red (Q_ht - eta Q_gn), none where theta_i <= theta_e
//
// It is the one place where the balance is made; Need and Year both go through
// it. Source: ISO 13790:2008, 7.2.1.1.
func (in *Input) month(m *climate.Month, airWK float64, out *Month) {
	kh := m.Hours / 1000
	difference := in.IndoorC - m.OutdoorC
	h := in.TransmissionWK + airWK
	out.LossKWh = h * difference * kh
	out.InternalKWh = in.InternalGainWM2 * in.FloorAreaM2 * kh
	out.SolarKWh = in.ApertureHorizontalM2 * m.HorizontalKWhM2
	for o := range in.ApertureM2 {
		out.SolarKWh += float64(in.ApertureM2[o] * m.VerticalKWhM2[o])
	}
	out.TimeConstantH, out.GainLossRatio, out.Utilisation, out.NeedKWh = 0, 0, 0, 0
	if h > 0 {
		out.TimeConstantH = finite(TimeConstant(in.CapacityJK, h))
	}
	gains := out.InternalKWh + out.SolarKWh
	if out.LossKWh != 0 {
		out.GainLossRatio = finite(gains / out.LossKWh)
	}
	gamma := out.GainLossRatio
	if !(out.LossKWh > 0 && difference > 0) {
		if gamma < 0 {
			out.Utilisation = finite(1 / gamma)
		}
		return
	}
	if gamma < 0 {
		// More is lost to the sky than comes in; it adds to the loss in full
		// (ISO 52016-1).
		out.Utilisation, out.NeedKWh = 1, out.LossKWh-gains
		return
	}
	eta, unmet := utilise(gamma, exponent(out.TimeConstantH))
	out.Utilisation = eta
	out.NeedKWh = out.LossKWh * unmet
	if in.SetpointShare < 1 {
		out.NeedKWh *= IntermittencyFactor(out.TimeConstantH, gamma, in.SetpointShare)
	}
}

// finite keeps a quotient by a vanishing loss from becoming infinite.
func finite(v float64) float64 {
	if math.Abs(v) > math.MaxFloat64 {
		return math.Copysign(math.MaxFloat64, v)
	}
	return v
}

// DesignHeatLoadW is (H_tr + H_ve)(theta_i - theta_design) in W; none where the
// design temperature is not below the room's. Source: EN 12831, simplified,
// without reheating.
func DesignHeatLoadW(transmissionWK, airWK, indoorC, designC float64) float64 {
	return math.Max(0, (transmissionWK+airWK)*(indoorC-designC))
}
