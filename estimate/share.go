package estimate

import "kelvinrow/estimate/building"

// decisive are the inputs that move a heat balance most, each answered by the
// first of its fields that is known. The share of them by kind tells how firmly
// a number stands. A U-value answers for its part; a construction or a year of
// renewal alone does not, because the U-value is then still a default.
var decisive = [...][]building.Field{
	{building.FloorArea, building.Volume, building.GrossVolume},
	{building.Storeys, building.WallArea},
	{building.AttachmentField, building.Perimeter, building.WallArea},
	{building.YearBuilt},
	{building.WallU},
	{building.RoofU},
	{building.FloorU},
	{building.WindowArea},
	{building.WindowU, building.Glazing},
	{building.N50, building.Q50},
	{building.VentilationField, building.SupplyAirflow, building.ExtractAirflow},
	{building.HeatingSystem, building.Efficiency},
}

// inputShares returns the share of the decisive inputs by kind.
func inputShares(b *building.Building) (shares [building.NumKinds]float64) {
	var count [building.NumKinds]int
	for _, fields := range decisive {
		kind := building.Default
		for _, f := range fields {
			if k, ok := b.Get(f); ok && !(f == building.VentilationField && k.Text == building.VentilationUnknown.String()) {
				kind = k.Kind
				break
			}
		}
		count[kind]++
	}
	for kind, n := range count {
		shares[kind] = float64(n) / float64(len(decisive))
	}
	return shares
}
