package demo

import (
	"math"
	"math/rand/v2"
)

type (
	construction uint8
	glazing      uint8
	ventilation  uint8
	heating      uint8
	carrier      uint8
)

const (
	solidBrick construction = iota
	stone
	cavityBrick
	filledCavity
	panel
	hollowBlock
	timberFrame
)

const (
	single glazing = iota
	coupled
	double
	coated
	triple
)

const (
	natural ventilation = iota
	stack
	extract
	demand
	balanced
	recovery
	unknown // what the holder does not know
)

const (
	boiler heating = iota
	condensing
	districtHeating
	heatPump
	electric
	stoves
)

const (
	gas carrier = iota
	oil
	districtHeat
	electricity
	wood
)

// The eras of building and their shares of the stock, in percent.
var (
	eraYears   = [...][2]int{{1862, 1899}, {1900, 1918}, {1919, 1945}, {1946, 1959}, {1960, 1978}, {1979, 1994}, {1995, 2008}, {2009, 2023}}
	eraWeights = [...]float64{9, 9, 14, 16, 26, 14, 8, 4}
)

// U-values as built and airtightness by era, W/(m2K) and 1/h: of the order met
// in a cool temperate climate, and made up.
var (
	wallUs  = [...]float64{1.6, 1.6, 1.5, 1.35, 1.1, 0.6, 0.36, 0.2}
	roofUs  = [...]float64{1.3, 1.3, 1.1, 1.0, 0.7, 0.36, 0.24, 0.15}
	floorUs = [...]float64{1.1, 1.1, 1.0, 1.0, 0.9, 0.6, 0.4, 0.24}
	n50s    = [...]float64{9, 9, 8, 7, 6, 4.5, 3, 1.5}
)

func era(year int) int {
	for i, e := range eraYears {
		if year <= e[1] {
			return i
		}
	}
	return len(eraYears) - 1
}

func drawWall(rng *rand.Rand, year int, u use) construction {
	switch {
	case year < 1919:
		if u == church || rng.Float64() < 0.15 {
			return stone
		}
		return solidBrick
	case year < 1946:
		return pick(rng, []construction{solidBrick, solidBrick, cavityBrick})
	case year < 1960:
		return pick(rng, []construction{cavityBrick, cavityBrick, hollowBlock, solidBrick})
	case year < 1979:
		if !u.house() && rng.Float64() < 0.5 {
			return panel
		}
		return pick(rng, []construction{cavityBrick, hollowBlock})
	}
	return pick(rng, []construction{filledCavity, filledCavity, hollowBlock, timberFrame})
}

// renew draws what was renewed since the building stands.
func (a *asset) renew(rng *rand.Rand) {
	const last = 2022
	year := func(share float64, from int) int {
		from = max(from, a.year+22)
		if rng.Float64() > share || from > last {
			return 0
		}
		return from + rng.IntN(last-from+1)
	}
	a.yearWindows = year(0.62, 1984)
	a.yearRoof = year(0.35, 1980)
	a.yearWall = year(0.14, 1988)
}

func (a *asset) fabric(rng *rand.Rand) {
	draw := func(u float64) float64 { return math.Round(around(rng, u, 0.14)*100) / 100 }
	e := era(a.year)
	a.wallU, a.roofU, a.floorU = draw(wallUs[e]), draw(roofUs[e]), draw(floorUs[e])
	// What was renewed is as good as what was usual in the year of its renewal.
	if a.yearWall > 0 {
		a.wallU = draw(wallUs[era(a.yearWall)])
	}
	if a.yearRoof > 0 {
		a.roofU = draw(roofUs[era(a.yearRoof)])
	}
	year := max(a.year, a.yearWindows)
	switch {
	case year < 1965:
		a.glazing = pick(rng, []glazing{single, coupled, coupled})
	case year < 1994:
		a.glazing = double
	case year < 2010:
		a.glazing = coated
	default:
		a.glazing = pick(rng, []glazing{coated, triple, triple})
	}
	a.windowU = draw([...]float64{4.9, 2.7, 2.8, 1.6, 0.95}[a.glazing])
	a.n50 = around(rng, n50s[e], 0.25)
	if a.yearWindows > 0 {
		a.n50 *= 0.8
	}
	if a.use == block {
		a.n50 *= 0.7
	}
	a.n50 = max(0.6, a.n50)
}

func (a *asset) air(rng *rand.Rand) {
	x := rng.Float64()
	a.ventilation = natural
	switch {
	case a.year >= 2009:
		a.ventilation = []ventilation{recovery, recovery, demand, extract}[int(x*4)]
	case a.year >= 1979 && a.use.housing():
		a.ventilation = []ventilation{extract, extract, natural, demand, recovery}[int(x*5)]
	case a.use == block && a.year >= 1950:
		a.ventilation = []ventilation{stack, stack, natural, extract}[int(x*4)]
	case a.use == school || a.use == office || a.use == careHome:
		a.ventilation = []ventilation{natural, natural, natural, extract, balanced, recovery}[int(x*6)]
	case a.use == hall || a.use == sportsHall:
		a.ventilation = []ventilation{natural, balanced, balanced, recovery}[int(x*4)]
	case x < 0.12:
		a.ventilation = extract
	}
	if a.ventilation == recovery {
		a.recovery = math.Round(between(rng, 0.55, 0.88)*100) / 100
	}
}

// airflowM3h is the designed airflow of the fans.
func (a *asset) airflowM3h() float64 {
	perM2 := 1.2 // 0.33 l/s per m2
	if !a.use.housing() {
		perM2 = 3
	}
	return math.Round(a.floorAreaM2*perM2/10) * 10
}

func (a *asset) system(rng *rand.Rand) {
	x := rng.Float64()
	switch {
	case rng.Float64() < a.town.district && !a.use.house():
		a.heating, a.carrier, a.efficiency = districtHeating, districtHeat, 0.97
	case a.year >= 2009 && x < 0.6:
		a.heating, a.carrier, a.efficiency = heatPump, electricity, 3.1
	case x < 0.48:
		a.heating, a.carrier, a.efficiency = condensing, gas, 0.93
	case x < 0.76:
		a.heating, a.carrier, a.efficiency = boiler, gas, 0.84
	case x < 0.89:
		a.heating, a.carrier, a.efficiency = boiler, oil, 0.81
	case x < 0.94:
		a.heating, a.carrier, a.efficiency = electric, electricity, 1
	case x < 0.97 && a.use.house():
		a.heating, a.carrier, a.efficiency = stoves, wood, 0.7
	default:
		a.heating, a.carrier, a.efficiency = boiler, wood, 0.82
	}
}

// Degree days of the invented region in K d, by year, to 20 C in rooms on days
// below 12 C outdoors, and in the mean.
const meanDegreeDays = 3850

var degreeDays = []struct {
	year int
	kd   float64
}{{2022, 3710}, {2023, 3640}, {2024, 3560}}

// heat works out what the meter would show in a mean year: the steady heat loss
// over the degree days, less gains, with the rooms of leaky old buildings kept
// cooler than planned, and no two households alike.
func (a *asset) heat(rng *rand.Rand) {
	const bridges = 0.1 // W/(m2K)
	opaque := max(0, a.wallM2-a.windowM2)
	envelope := opaque + a.windowM2 + a.roofM2 + a.footprintM2
	h := opaque*a.wallU + a.windowM2*a.windowU + a.roofM2*a.roofU + 0.5*a.footprintM2*a.floorU + bridges*envelope
	n := a.n50/18 + 0.25 // leakage at the pressures of weather, and airing
	if a.ventilation == recovery || a.ventilation == balanced {
		n = a.n50/18 + 0.4*(1-a.recovery)
	}
	h += 0.333 * n * a.volumeM3()
	loss := h * meanDegreeDays * 24 / 1000
	need := loss - min(0.6*loss, 32*a.floorAreaM2)
	perM2 := need / a.floorAreaM2
	need *= 1 - 0.3*perM2/(perM2+150)
	switch a.use {
	case church:
		need *= 0.45 // heated for services only
	case hall, workshop, sportsHall:
		need *= 0.75
	}
	need *= math.Exp(0.15 * rng.NormFloat64())
	a.includesHotWater = a.use.housing() && rng.Float64() < 0.6 || a.use == careHome
	if a.includesHotWater {
		need += 22 * a.floorAreaM2
	}
	a.heatKWh = need / a.efficiency
}
