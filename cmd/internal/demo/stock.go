package demo

import (
	"fmt"
	"math"
	"math/rand/v2"
)

type use uint8

const (
	detached use = iota
	semi
	terraced
	block
	school
	nursery
	hall
	church
	careHome
	sportsHall
	office
	shop
	workshop
	numUses
)

func (u use) house() bool   { return u <= terraced }
func (u use) housing() bool { return u <= block }

// public buildings belong to the bureau for schools and parishes.
func (u use) public() bool { return u >= school && u <= sportsHall }

// commercial buildings stand on a sheet of their own in the register.
func (u use) commercial() bool { return u >= office }

// useWeights is the make-up of the stock, in percent of the sites drawn.
var useWeights = [numUses]float64{9, 6, 6, 30, 4, 2.5, 2.5, 2.5, 2, 1.5, 5, 3, 2}

// asset is the truth about one building, which no department fully knows.
type asset struct {
	held held

	id, name         string
	street           string
	house            int
	town             *town
	quarter          string
	use              use
	attached         int // sides shared
	year             int
	yearWindows      int // 0: as built
	yearRoof         int
	yearWall         int
	floorAreaM2      float64
	storeyHeightM    float64
	storeys          int
	footprintM2      float64
	perimeterM       float64
	wallM2           float64
	windowM2         float64
	roofM2           float64
	attic            bool // heated, under a pitched roof
	flat             bool
	cellar           bool
	wall             construction
	wallU            float64
	roofU            float64
	floorU           float64
	windowU          float64
	glazing          glazing
	ventilation      ventilation
	recovery         float64
	n50              float64
	heating          heating
	carrier          carrier
	efficiency       float64
	dwellings        int
	occupants        int
	let              int
	listed           bool
	facadeStays      bool
	heatKWh          float64 // delivered in a mean year
	includesHotWater bool
}

func (a *asset) volumeM3() float64 { return a.floorAreaM2 * a.storeyHeightM }

func (a *asset) grossVolumeM3() float64 {
	if a.storeys <= 3 {
		return a.volumeM3() / 0.76
	}
	return a.volumeM3() / 0.80
}

// newStock draws the stock site by site: a row of like houses, an estate of like
// blocks, or a single building.
func newStock(opt Options) []asset {
	rng := rand.New(rand.NewPCG(uint64(opt.Seed), 0))
	stock := make([]asset, 0, opt.Buildings)
	next := make([]int, len(towns))
	weights := make([]float64, len(towns))
	for i := range towns {
		weights[i] = towns[i].weight
	}
	for len(stock) < opt.Buildings {
		t := weighted(rng, weights)
		u := use(weighted(rng, useWeights[:]))
		n := 1
		switch u {
		case detached:
			n = 1 + rng.IntN(8)
		case semi:
			n = 2 * (1 + rng.IntN(6))
		case terraced:
			n = 4 + rng.IntN(13)
		case block:
			n = 1 + rng.IntN(6)
		}
		site := newSite(rng, &towns[t], u)
		n = min(n, opt.Buildings-len(stock))
		first := 1 + rng.IntN(60)
		for i := range n {
			next[t]++
			a := site.building(rng, i, n)
			a.id = fmt.Sprintf("%s-%04d", towns[t].letter, next[t])
			a.house = first + i
			a.assign(rng)
			stock = append(stock, a)
		}
	}
	return stock
}

// site is what the buildings of one site have in common.
type site struct {
	asset
	areaM2 float64
	aspect float64
}

func newSite(rng *rand.Rand, t *town, u use) *site {
	s := &site{aspect: between(rng, 1.1, 2.4)}
	s.town, s.use, s.quarter, s.street = t, u, pick(rng, quarters), street(rng)
	e := weighted(rng, eraWeights[:])
	s.year = eraYears[e][0] + rng.IntN(eraYears[e][1]-eraYears[e][0]+1)
	old := s.year < 1946
	s.storeyHeightM = between(rng, 2.4, 2.6)
	if old {
		s.storeyHeightM = between(rng, 2.6, 3.2)
	}
	s.storeys = 2
	s.wall = drawWall(rng, s.year, u)
	switch u {
	case detached:
		s.areaM2, s.storeys = around(rng, 140, 0.25), 1+rng.IntN(2)
	case semi:
		s.areaM2 = around(rng, 108, 0.15)
	case terraced:
		s.areaM2 = around(rng, 90, 0.15)
	case block:
		s.storeys = 3 + rng.IntN(3)
		if s.year > 1960 && s.year < 1979 && rng.Float64() < 0.25 {
			s.storeys = 8 + rng.IntN(5)
		}
		s.areaM2 = float64(s.storeys) * float64(2+rng.IntN(6)) * between(rng, 62, 88)
		s.aspect = between(rng, 1.4, 4)
	case school:
		s.areaM2, s.storeys, s.storeyHeightM = around(rng, 3200, 0.5), 1+rng.IntN(3), between(rng, 3.0, 3.6)
		s.aspect = between(rng, 2, 4)
	case nursery:
		s.areaM2, s.storeys, s.storeyHeightM = around(rng, 620, 0.35), 1, between(rng, 2.7, 3.2)
	case hall:
		s.areaM2, s.storeys, s.storeyHeightM = around(rng, 750, 0.5), 1, between(rng, 4, 5.5)
	case church:
		s.areaM2, s.storeys, s.storeyHeightM = around(rng, 520, 0.4), 1, between(rng, 6.5, 10.5)
	case careHome:
		s.areaM2, s.storeys, s.storeyHeightM = around(rng, 2800, 0.4), 2+rng.IntN(3), between(rng, 2.6, 2.9)
	case sportsHall:
		s.areaM2, s.storeys, s.storeyHeightM = around(rng, 1100, 0.35), 1, between(rng, 6, 7.5)
	case office:
		s.areaM2, s.storeys, s.storeyHeightM = around(rng, 1800, 0.7), 2+rng.IntN(4), between(rng, 2.8, 3.3)
	case shop:
		s.areaM2, s.storeys, s.storeyHeightM = around(rng, 350, 0.6), 1+rng.IntN(2), between(rng, 3, 3.6)
	case workshop:
		s.areaM2, s.storeys, s.storeyHeightM = around(rng, 900, 0.6), 1, between(rng, 4, 5.5)
	}
	s.flat = s.use == block && s.year > 1957 && rng.Float64() < 0.6 ||
		s.use >= school && s.use != church && s.year > 1955 && rng.Float64() < 0.7
	s.attic = !s.flat && u.house() && rng.Float64() < 0.25
	s.cellar = rng.Float64() < 0.55 && u != sportsHall && u != workshop
	s.renew(rng)
	s.fabric(rng)
	s.air(rng)
	s.system(rng)
	s.listed = s.year < 1920 && rng.Float64() < 0.12 || u == church && s.year < 1946 && rng.Float64() < 0.6
	s.facadeStays = s.listed || s.year < 1920 && rng.Float64() < 0.25
	return s
}

// building is number i of n on the site.
func (s *site) building(rng *rand.Rand, i, n int) asset {
	a := s.asset
	switch s.use {
	case semi:
		a.attached = 1
	case terraced:
		a.attached = 2
		if i == 0 || i == n-1 {
			a.attached = 1
		}
	case block:
		if n > 2 && s.storeys < 7 {
			a.attached = min(1, i) + min(1, n-1-i)
		}
	}
	a.floorAreaM2 = math.Round(s.areaM2 * between(rng, 0.95, 1.05))
	a.size(s.aspect)
	a.windowM2 = math.Round(a.floorAreaM2*windowShare(s.use)*between(rng, 0.85, 1.15)*10) / 10
	a.windowM2 = min(a.windowM2, math.Round(a.wallM2*5)/10)
	a.n50 = math.Round(a.n50*math.Exp(0.12*rng.NormFloat64())*10) / 10
	switch {
	case s.use == block:
		a.dwellings = max(2, int(math.Round(a.floorAreaM2/72)))
	case s.use.house():
		a.dwellings = 1
	}
	if s.use.housing() {
		a.occupants = max(1, int(math.Round(float64(a.dwellings)*between(rng, 1.6, 2.6))))
		a.let = a.dwellings - int(float64(a.dwellings)*rng.Float64()*rng.Float64()*0.5)
	}
	a.name = a.title(rng)
	a.heat(rng)
	return a
}

// size works out areas from floor area, storeys and aspect ratio; houses share
// their long side, blocks their short one.
func (a *asset) size(aspect float64) {
	const walls = 1.15 // outside over inside plan area
	a.footprintM2 = math.Round(a.floorAreaM2 / float64(a.storeys) * walls)
	short := math.Sqrt(a.footprintM2 / aspect)
	long := aspect * short
	a.perimeterM = math.Round(2*(short+long)*10) / 10
	shared := long
	if !a.use.house() {
		shared = short
	}
	exposed := 2*(short+long) - float64(a.attached)*shared
	a.wallM2 = math.Round(exposed * float64(a.storeys) * (a.storeyHeightM + 0.3))
	a.roofM2 = a.footprintM2
	if a.attic {
		a.roofM2 = math.Round(a.footprintM2 / math.Cos(40*math.Pi/180))
	}
}

func windowShare(u use) float64 {
	switch u {
	case school, office, nursery:
		return 0.2
	case church:
		return 0.12
	case hall, sportsHall, workshop:
		return 0.13
	case shop:
		return 0.18
	}
	return 0.155
}

func (a *asset) title(rng *rand.Rand) string {
	name := a.street[:len(a.street)-len(kindOf(a.street))-1]
	switch a.use {
	case school:
		return name + pick(rng, []string{" Primary School", " Secondary School", " School"})
	case nursery:
		return name + " Nursery"
	case hall:
		return name + " Hall"
	case church:
		return "St " + pick(rng, saints) + ", " + a.town.name
	case careHome:
		return name + " House Care Home"
	case sportsHall:
		return name + " Sports Hall"
	case office:
		return name + " House Offices"
	case shop:
		return "Shop, " + a.street
	case workshop:
		return name + " Depot"
	case block:
		return name + " Court"
	}
	return ""
}

func kindOf(street string) string {
	for i := len(street) - 1; i > 0; i-- {
		if street[i] == ' ' {
			return street[i+1:]
		}
	}
	return ""
}

func between(rng *rand.Rand, low, high float64) float64 { return low + (high-low)*rng.Float64() }

// around draws a log-normal value, cut at two and a half deviations.
func around(rng *rand.Rand, median, sigma float64) float64 {
	return median * math.Exp(sigma*max(-2.5, min(2.5, rng.NormFloat64())))
}
