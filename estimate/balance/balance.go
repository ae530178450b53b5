// Package balance is the monthly heat balance of ISO 13790:2008 (monthly
// method; the same structure in ISO 52016-1): losses, gains, their utilisation,
// and the heating need.
//
// Symbols: Q_ht loss, Q_gn gains, gamma = Q_gn/Q_ht, tau time constant in h, eta
// utilisation factor, Q_nd need, all Q in kWh per month. Quoted from memory; no
// published worked example of the utilisation factor was found, and the
// reduction for intermittent heating is not corroborated. Left out: cooling,
// several zones, opaque solar gains and sky radiation.
package balance

import (
	"math"

	"kelvinrow/estimate/airflow"
	"kelvinrow/estimate/climate"
	"kelvinrow/estimate/state"
)

// Parameters of the monthly method, ISO 13790:2008, 12.2.1.1.
const (
	a0          = 1.0
	tau0        = 15.0 // h
	setbackBRed = 3.0  // b_H,red, ISO 13790:2008, 13.2.2.1
)

// Input is a state lumped for the balance.
type Input struct {
	FloorAreaM2, IndoorC, InternalGainWM2 float64
	CapacityJK                            float64
	TransmissionWK                        float64
	SetpointShare                         float64                          // f_hr: share of hours at the set-point
	ApertureM2                            [climate.NumOrientations]float64 // sum of A g 0.9 (1 - frame) shading
	ApertureHorizontalM2                  float64
	Air                                   airflow.Input
}

// Month is one month of the balance with every intermediate value.
type Month struct {
	LossKWh       float64 // Q_ht; negative where it is warmer outside
	InternalKWh   float64
	SolarKWh      float64
	GainLossRatio float64 // gamma
	TimeConstantH float64 // tau
	Utilisation   float64 // eta
	NeedKWh       float64
	Flow          airflow.Flow
}

// TimeConstant is tau = C_m/(H_tr + H_ve) in h, C_m in J/K, H in W/K.
func TimeConstant(capacityJK, heatWK float64) float64 { return capacityJK / 3600 / heatWK }

// Utilisation is eta of gains at ratio gamma with exponent a = 1 + tau/15:
// (1 - gamma^a)/(1 - gamma^(a+1)); a/(a+1) at gamma = 1; 1/gamma below 0.
// Source: ISO 13790:2008, 12.2.1.1.
//
// Near gamma = 1 both numerator and denominator vanish. There the quotient is
// formed with expm1 of a ln(gamma), which keeps its digits on both sides, so
// that eta has no step.
func Utilisation(gamma, a float64) float64 {
	switch {
	case gamma < 0:
		return 1 / gamma
	case gamma == 0:
		return 1
	case gamma == 1:
		return a / (a + 1)
	}
	if gamma > 0.99 && gamma < 1.01 {
		l := math.Log(gamma)
		return math.Expm1(a*l) / math.Expm1((a+1)*l)
	}
	p := math.Pow(gamma, a)
	if math.IsInf(p, 1) {
		return 1 / gamma
	}
	return (1 - p) / (1 - p*gamma)
}

// IntermittencyFactor is a_red = 1 - 3 (15/tau) gamma (1 - f_hr), between f_hr
// and 1: the share of the need left by heating only a share f_hr of the hours.
// Source: ISO 13790:2008, 13.2.2.1 (not corroborated).
func IntermittencyFactor(tauH, gamma, setpointShare float64) float64 {
	if setpointShare >= 1 {
		return 1
	}
	red := 1 - setbackBRed*(tau0/tauH)*gamma*(1-setpointShare)
	return math.Min(1, math.Max(setpointShare, red))
}

// month computes one month from the heat carried by air. It is the one place
// where the balance is made; Need and Year both go through it.
func (in *Input) month(m *climate.Month, airWK float64, out *Month) {
	kh := m.Hours / 1000
	difference := in.IndoorC - m.OutdoorC
	h := in.TransmissionWK + airWK
	out.LossKWh = h * difference * kh
	out.InternalKWh = in.InternalGainWM2 * in.FloorAreaM2 * kh
	out.SolarKWh = in.ApertureHorizontalM2 * m.HorizontalKWhM2
	for o := range in.ApertureM2 {
		out.SolarKWh += in.ApertureM2[o] * m.VerticalKWhM2[o]
	}
	out.TimeConstantH, out.GainLossRatio, out.Utilisation, out.NeedKWh = 0, 0, 0, 0
	if h > 0 {
		out.TimeConstantH = TimeConstant(in.CapacityJK, h)
	}
	gains := out.InternalKWh + out.SolarKWh
	if out.LossKWh != 0 {
		out.GainLossRatio = gains / out.LossKWh
	}
	if out.LossKWh <= 0 || difference <= 0 {
		if out.GainLossRatio < 0 {
			out.Utilisation = 1 / out.GainLossRatio
		}
		return
	}
	out.Utilisation = Utilisation(out.GainLossRatio, a0+out.TimeConstantH/tau0)
	need := math.Max(0, out.LossKWh-out.Utilisation*gains)
	out.NeedKWh = need * IntermittencyFactor(out.TimeConstantH, out.GainLossRatio, in.SetpointShare)
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

// LossByPath splits the year's losses of Year by path, in kWh; the parts add up
// to the sum of the months' LossKWh. transmission gives the W/K of the envelope's
// paths. An unbalanced fan and infiltration share what they move together in
// proportion to the squares of their flows, as they enter it; fans carry what
// heat recovery leaves of the balanced flow; airing carries passive stacks too.
func LossByPath(in *Input, c *climate.Climate, months *[12]Month, transmission [state.NumPaths]float64) (kWh [state.NumPaths]float64) {
	for i := range months {
		m, f := &c.Months[i], &months[i].Flow
		k := (in.IndoorC - m.OutdoorC) * m.Hours / 1000
		for p, h := range transmission {
			kWh[p] += h * k
		}
		together := airflow.Quadrature(f.UnbalancedM3H, f.InfiltrationM3H)
		share := 1.0
		if u := f.UnbalancedM3H; u > 0 {
			share = f.InfiltrationM3H * f.InfiltrationM3H / (u*u + f.InfiltrationM3H*f.InfiltrationM3H)
		}
		kWh[state.Infiltration] += airflow.HeatWK(together*share) * k
		kWh[state.Fans] += airflow.HeatWK(together*(1-share)+f.BalancedM3H*(1-in.Air.HeatRecovery)) * k
		kWh[state.Airing] += airflow.HeatWK(in.Air.AiringM3H+f.StackDuctM3H) * k
	}
	return kWh
}

// DesignHeatLoadW is (H_tr + H_ve)(theta_i - theta_design) in W (EN 12831,
// simplified, without reheat).
func DesignHeatLoadW(transmissionWK, airWK, indoorC, designC float64) float64 {
	return (transmissionWK + airWK) * (indoorC - designC)
}
