package refcase

// Network is the simple hourly method of ISO 13790:2008, annex C (from memory):
// five resistances and one capacity. Heat flows between outdoor air, the air of
// the rooms, their inner surfaces (s) and the mass (m); windows and doors join the
// surfaces to outdoors without mass.
type Network struct {
	FloorAreaM2 float64
	CapacityJK  float64 // C_m
	MassAreaM2  float64 // A_m, the surface of the mass
	LightWK     float64 // H_tr,w: windows and doors
	OpaqueWK    float64 // H_tr,op: everything else
	IndoorC     float64 // held by heating, as operative temperature
	Convective  float64 // share of the heating that goes to the air; the annex has 1, a radiator about 0.5

	GainW      float64           // people, light, appliances
	ApertureM2 [NumSides]float64 // of glass, frames and shading taken off
	AirWK      func(outdoorC, wind10MS float64) float64
}

// Parameters of the annex.
const (
	surfacesPerFloor = 4.5  // Lambda_at: area of all surfaces over floor area
	airSurfaceWM2K   = 3.45 // h_is
	massSurfaceWM2K  = 9.1  // h_ms
	operativeAir     = 0.3  // share of the air in the operative temperature (C.3)
)

// NeedKWh is the heating need of the year by month. Heating holds the operative
// temperature, which is what ISO 13790:2008, 3.2, calls internal temperature, at
// the set-point with whatever power it takes; nothing cools. The year is run twice
// to forget how it began.
func (n *Network) NeedKWh(hours []Hour) (need [12]float64) {
	mass := n.IndoorC
	for range 2 {
		need = [12]float64{}
		for i := range hours {
			h := &hours[i]
			free, unheated := n.hour(h, mass, 0)
			if free >= n.IndoorC {
				mass = unheated
				continue
			}
			// The network is linear: two powers tell the one that is needed.
			power := 10 * n.FloorAreaM2
			warmer, _ := n.hour(h, mass, power)
			power *= (n.IndoorC - free) / (warmer - free)
			_, mass = n.hour(h, mass, power)
			need[h.Month] += power / 1000
		}
	}
	return need
}

// hour returns the operative temperature of an hour and the mass's at its end.
func (n *Network) hour(h *Hour, mass, heatW float64) (operative, massEnd float64) {
	surfaces := surfacesPerFloor * n.FloorAreaM2
	his, hms := airSurfaceWM2K*surfaces, massSurfaceWM2K*n.MassAreaM2
	hem := 1 / (1/n.OpaqueWK - 1/hms)
	hve, hw, c := n.AirWK(h.OutdoorC, h.Wind10MS), n.LightWK, n.CapacityJK/3600

	sun := 0.0
	for o, a := range n.ApertureM2 {
		sun += a * h.FacadeWhM2[o]
	}
	air := n.GainW/2 + heatW*n.Convective
	radiant := n.GainW/2 + sun + heatW*(1-n.Convective)
	toMass := n.MassAreaM2 / surfaces * radiant
	toSurface := (1 - n.MassAreaM2/surfaces - hw/(massSurfaceWM2K*surfaces)) * radiant
	te := h.OutdoorC

	h1 := 1 / (1/hve + 1/his)
	h2 := h1 + hw
	h3 := 1 / (1/h2 + 1/hms)
	total := toMass + hem*te + h3*(toSurface+hw*te+h1*(air/hve+te))/h2
	massEnd = (mass*(c-0.5*(h3+hem)) + total) / (c + 0.5*(h3+hem))
	m := (mass + massEnd) / 2
	s := (hms*m + toSurface + hw*te + h1*(te+air/hve)) / (hms + hw + h1)
	a := (his*s + hve*te + air) / (his + hve)
	return operativeAir*a + (1-operativeAir)*s, massEnd
}
