package measure

import (
	"kelvinrow/estimate/building"
	"kelvinrow/estimate/caution"
)

func draughts(j *job) string {
	if j.s.Air.N50PerH <= j.target("skip_below_n50") {
		return "already tight enough"
	}
	j.s.Air.N50PerH = max(j.s.Air.N50PerH*j.target("n50_factor"), j.target("n50_floor"))
	j.quantity = j.s.EnvelopeM2()
	j.lessAir = true
	j.cautions |= caution.Combustion | caution.Radon
	return ""
}

func demandExtract(j *job) string {
	a := &j.s.Air
	switch a.Ventilation {
	case building.DemandControlled:
		return "extract is already controlled by demand"
	case building.Balanced, building.BalancedRecovery:
		return "has balanced ventilation"
	}
	// Never less than the air the use needs together with what still is aired.
	a.Ventilation = building.DemandControlled
	a.AiringM3H = 0
	a.StackDuctM2 = 0
	a.SupplyM3H = 0
	a.HeatRecovery = 0
	a.ExtractM3H = max(j.target("rate_m3h_m2")*j.s.FloorAreaM2*j.target("demand_factor"), a.MinimumM3H)
	a.FanPowerWM3H = j.target("fan_power")
	j.quantity = a.ExtractM3H
	j.lessAir = true
	j.cautions |= caution.Combustion
	return ""
}

func balancedRecovery(j *job) string {
	a := &j.s.Air
	if a.Ventilation == building.BalancedRecovery {
		return "has heat recovery"
	}
	a.Ventilation = building.BalancedRecovery
	a.AiringM3H = 0
	a.StackDuctM2 = 0
	flow := max(j.target("rate_m3h_m2")*j.s.FloorAreaM2, a.MinimumM3H)
	a.SupplyM3H, a.ExtractM3H = flow, flow
	a.HeatRecovery = j.target("efficiency") * j.target("recovery_cut")
	a.FanPowerWM3H = j.target("fan_power")
	j.quantity = flow
	j.tighten(j.target("n50_factor"))
	if j.f.Protected {
		j.cautions |= caution.Protected
	}
	return ""
}
