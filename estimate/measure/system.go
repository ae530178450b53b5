package measure

import "kelvinrow/estimate/caution"

func controls(j *job) string {
	if j.s.System.Distribution >= j.target("distribution") {
		return "controls are good enough"
	}
	j.s.IndoorC -= j.target("temperature_drop_k")
	j.s.System.Distribution = j.target("distribution")
	j.quantity = j.s.FloorAreaM2
	return ""
}

func heatPump(j *job) string {
	switch j.s.System.Heating {
	case "heat pump":
		return "has a heat pump"
	case "district heating":
		return "district heating: the generator is not the building's own"
	}
	j.s.System.Heating = "heat pump"
	j.s.System.Carrier = "electricity"
	j.s.System.Generation = j.target("spf")
	j.cautions |= caution.HeatPump
	if j.f.Protected {
		j.cautions |= caution.Protected
	}
	return ""
}
