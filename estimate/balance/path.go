package balance

import (
	"kelvinrow/estimate/airflow"
	"kelvinrow/estimate/climate"
	"kelvinrow/estimate/state"
)

// LossByPath splits the year's losses of Year by path, in kWh; the parts add up
// to the sum of the months' LossKWh. transmission gives the W/K of the envelope's
// paths, TransmissionWK in all. An unbalanced fan and infiltration share what they
// move together in proportion to the squares of their flows, as they enter it;
// fans carry what heat recovery leaves of the balanced flow; airing carries
// passive stacks too.
func LossByPath(in *Input, c *climate.Climate, months *[12]Month, transmission [state.NumPaths]float64) (kWh [state.NumPaths]float64) {
	for i := range months {
		f := &months[i].Flow
		k := kelvinKH(in, &c.Months[i])
		for p, h := range transmission {
			kWh[p] += h * k
		}
		infiltration, unbalanced := shares(f)
		kWh[state.Infiltration] += airflow.HeatWK(infiltration) * k
		kWh[state.Fans] += airflow.HeatWK(unbalanced+f.BalancedM3H*(1-in.Air.HeatRecovery)) * k
		kWh[state.Airing] += airflow.HeatWK(in.Air.AiringM3H+f.StackDuctM3H) * k
	}
	return kWh
}

// InfiltrationByDriver splits the infiltration of LossByPath between stack and
// wind, in proportion to their driving terms; kWh.
func InfiltrationByDriver(in *Input, c *climate.Climate, months *[12]Month) (stackKWh, windKWh float64) {
	for i := range months {
		f := &months[i].Flow
		infiltration, _ := shares(f)
		q := airflow.HeatWK(infiltration) * kelvinKH(in, &c.Months[i])
		stackKWh += q * f.StackShare
		windKWh += q * (1 - f.StackShare)
	}
	return stackKWh, windKWh
}

// kelvinKH is the temperature difference times the length of a month, in K kh.
func kelvinKH(in *Input, m *climate.Month) float64 {
	return (in.IndoorC - m.OutdoorC) * m.Hours / 1000
}

// shares splits sqrt(V_u^2 + V_inf^2) in m3/h in proportion to the squares.
func shares(f *airflow.Flow) (infiltration, unbalanced float64) {
	together := airflow.Quadrature(f.UnbalancedM3H, f.InfiltrationM3H)
	if together == 0 {
		return 0, 0
	}
	return f.InfiltrationM3H / together * f.InfiltrationM3H, f.UnbalancedM3H / together * f.UnbalancedM3H
}
