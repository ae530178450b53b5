package demo

import (
	"fmt"
	"math"
	"math/rand/v2"

	"kelvinrow/estimate/building"
)

// truth is one invented building as it really is. The workbooks tell parts of
// it, in the words of their departments.
type truth struct {
	id, name, street, postcode, town, district string
	use                                        building.Use
	attachment                                 building.Attachment
	year, windowYear, roofYear                 int
	areaM2, volumeM3, windowM2                 float64
	storeys                                    float64
	wall, roof, floor, glazing                 string
	ventilation                                building.Ventilation
	exposure                                   building.Exposure
	heating, carrier                           string
	listed, facadeStays                        bool
	occupants, dwellings                       int
	n50, wallU, windowU                        float64
	heatKWh                                    float64
}

// towns of the invented landlord, each with its districts.
var towns = []struct {
	name, postcode string
	districts      []string
}{
	{"Vexholm", "VX1", []string{"Harbourside", "Upper Vexholm", "Tanner's Reach"}},
	{"Quarrowby", "QB4", []string{"Old Quarrowby", "Millstream"}},
	{"Zellerstead", "ZS2", []string{"Lantern Hill", "Zeller Green"}},
	{"Ombermouth", "OM7", []string{"Quayfront", "Nether Omber"}},
}

var (
	streetFirst  = []string{"Gimbal", "Tinder", "Larkspool", "Wickerby", "Copperbeam", "Fennick", "Harrowsedge", "Quillon", "Marlpit", "Osmund", "Pindle", "Russetfold", "Sallowby", "Thrumble", "Umberline", "Withy"}
	streetSecond = []string{"Row", "Walk", "Lane", "Street", "Rise", "Court", "Terrace", "Wharf"}
	nameFirst    = []string{"Alderfold", "Brightmoor", "Candlewick", "Dovescroft", "Elmspindle", "Foxglade", "Greyshaw", "Hollinsby", "Ivorstead", "Juniper", "Kestrelby", "Lindrick"}
)

var useNames = map[building.Use]string{
	building.ApartmentBlock: "House", building.School: "School", building.Nursery: "Nursery", building.Office: "Office",
	building.Hall: "Hall", building.Church: "Church", building.CareHome: "Care Home", building.Workshop: "Workshop",
	building.SportsHall: "Sports Hall", building.Shop: "Shop",
}

// eras of building, with their share of the stock.
var eras = []struct {
	from, to int
	share    float64
}{
	{1860, 1918, 0.18}, {1919, 1948, 0.12}, {1949, 1968, 0.28}, {1969, 1978, 0.20}, {1979, 1994, 0.13}, {1995, 2008, 0.06}, {2009, 2024, 0.03},
}

// stock invents n buildings. The same seed gives the same stock.
func stock(n int, seed int64) []truth {
	r := rand.New(rand.NewPCG(uint64(seed), 0x6b72))
	out := make([]truth, n)
	for i := range out {
		out[i] = one(r, i)
	}
	return out
}

func between(r *rand.Rand, low, high float64) float64 { return low + (high-low)*r.Float64() }

func choose[T any](r *rand.Rand, from []T) T { return from[r.IntN(len(from))] }

// spread is a factor around 1, log-normal with the given sigma.
func spread(r *rand.Rand, sigma float64) float64 { return math.Exp(sigma * r.NormFloat64()) }

func one(r *rand.Rand, i int) truth {
	t := truth{}
	town := towns[min(len(towns)-1, int(r.Float64()*r.Float64()*float64(len(towns))*1.3))]
	t.town, t.district = town.name, choose(r, town.districts)
	t.postcode = fmt.Sprintf("%s %d%c%c", town.postcode, 1+r.IntN(9), 'A'+rune(r.IntN(26)), 'A'+rune(r.IntN(26)))
	t.street = fmt.Sprintf("%s %s %d", choose(r, streetFirst), choose(r, streetSecond), 1+r.IntN(140))
	t.use = pickUse(r)
	t.id = fmt.Sprintf("%s-%04d", map[bool]string{true: "H", false: "B"}[t.use.IsHouse()], i+1)
	if word, ok := useNames[t.use]; ok {
		t.name = choose(r, nameFirst) + " " + word
	}
	x := r.Float64()
	for _, e := range eras {
		if x -= e.share; x <= 0 || e.to == 2024 {
			t.year = e.from + r.IntN(e.to-e.from+1)
			break
		}
	}
	shape(r, &t)
	fabricOf(r, &t)
	systems(r, &t)
	return t
}

func pickUse(r *rand.Rand) building.Use {
	x := r.Float64()
	for _, u := range []struct {
		use   building.Use
		share float64
	}{
		{building.ApartmentBlock, 0.44}, {building.TerracedHouse, 0.2}, {building.SemiDetachedHouse, 0.13}, {building.DetachedHouse, 0.07},
		{building.School, 0.04}, {building.Church, 0.03}, {building.Hall, 0.025}, {building.Office, 0.02}, {building.CareHome, 0.015},
		{building.Nursery, 0.015}, {building.Workshop, 0.008}, {building.SportsHall, 0.005},
	} {
		if x -= u.share; x <= 0 {
			return u.use
		}
	}
	return building.Shop
}

func shape(r *rand.Rand, t *truth) {
	height := 2.5
	if t.year < 1919 {
		height = 2.9
	}
	switch t.use {
	case building.DetachedHouse, building.SemiDetachedHouse, building.TerracedHouse:
		t.areaM2, t.storeys = between(r, 70, 165), choose(r, []float64{1, 1.5, 2, 2, 2, 2.5})
		t.attachment = map[building.Use]building.Attachment{building.SemiDetachedHouse: building.OneSideShared, building.TerracedHouse: building.TwoSidesShared}[t.use]
		if t.use == building.TerracedHouse && r.Float64() < 0.25 {
			t.attachment = building.OneSideShared
		}
		t.dwellings = 1
	case building.ApartmentBlock:
		t.storeys = choose(r, []float64{2, 3, 3, 4, 4, 4, 5, 6, 8})
		t.areaM2 = t.storeys * between(r, 140, 520)
		t.attachment = choose(r, []building.Attachment{building.Detached, building.Detached, building.OneSideShared, building.TwoSidesShared})
		t.dwellings = max(2, int(t.areaM2/between(r, 60, 85)))
	case building.Church:
		t.areaM2, t.storeys, height = between(r, 180, 900), 1, between(r, 6, 10.5)
		t.year = min(t.year, 1978)
	case building.Hall, building.SportsHall:
		t.areaM2, t.storeys, height = between(r, 200, 1400), 1, between(r, 4, 7.5)
	default:
		t.storeys, height = choose(r, []float64{1, 2, 2, 3, 4}), 3.0
		t.areaM2 = t.storeys * between(r, 250, 1500)
	}
	t.areaM2 = math.Round(t.areaM2*10) / 10
	t.volumeM3 = math.Round(t.areaM2*height*spread(r, 0.04)*10) / 10
	t.windowM2 = math.Round(t.areaM2*between(r, 0.12, 0.21)*10) / 10
	t.occupants = max(1, int(t.areaM2/between(r, 30, 50)))
	if t.use.IsHouse() {
		t.occupants = 1 + r.IntN(5)
	}
}

func fabricOf(r *rand.Rand, t *truth) {
	old := t.year < 1949
	switch {
	case t.use == building.Church && old:
		t.wall = choose(r, []string{"stone", "stone", "solid brick"})
	case old:
		t.wall = choose(r, []string{"solid brick", "solid brick", "solid brick", "half-timbered", "cavity brick"})
	case t.year < 1979:
		t.wall = choose(r, []string{"cavity brick", "cavity brick", "solid brick", "concrete panel", "hollow block"})
	default:
		t.wall = choose(r, []string{"insulated cavity brick", "insulated cavity brick", "timber frame", "aerated concrete"})
	}
	t.roof = "cold attic"
	if !t.use.IsHouse() && t.year >= 1960 && r.Float64() < 0.6 {
		t.roof = "flat"
	} else if r.Float64() < 0.2 {
		t.roof = "heated attic"
	}
	t.floor = choose(r, []string{"unheated cellar", "unheated cellar", "slab on ground", "suspended floor"})
	base := map[string]float64{
		"solid brick": 1.5, "stone": 1.5, "half-timbered": 1.7, "cavity brick": 1.4, "concrete panel": 1.0, "hollow block": 1.1,
		"insulated cavity brick": 0.45, "timber frame": 0.35, "aerated concrete": 0.5,
	}[t.wall]
	t.wallU = math.Round(100*base*spread(r, 0.18)) / 100
	t.windowYear = t.year
	for t.windowYear < 2024 && 2026-t.windowYear > 35+r.IntN(20) {
		t.windowYear += 30 + r.IntN(15)
	}
	t.windowYear = min(t.windowYear, 2024)
	switch {
	case t.windowYear < 1970:
		t.glazing, t.windowU = "single", 4.8
	case t.windowYear < 1995:
		t.glazing, t.windowU = "double uncoated", 2.8
	case t.windowYear < 2010:
		t.glazing, t.windowU = "double coated", 1.5
	default:
		t.glazing, t.windowU = "triple", 0.95
	}
	t.windowU = math.Round(100*t.windowU*spread(r, 0.06)) / 100
	if r.Float64() < 0.25 {
		t.roofYear = min(2024, t.year+30+r.IntN(40))
	}
	leak := map[bool]float64{true: 8, false: 5}[t.use.IsHouse()] * math.Pow(0.988, float64(max(0, t.year-1950)))
	t.n50 = math.Round(10*leak*spread(r, 0.3)) / 10
	t.exposure = choose(r, []building.Exposure{building.NormalExposure, building.NormalExposure, building.NormalExposure, building.Sheltered, building.Exposed})
	if t.town == "Ombermouth" && r.Float64() < 0.5 {
		t.exposure = building.Exposed
	}
	t.listed = old && r.Float64() < 0.12 || t.use == building.Church && r.Float64() < 0.7
	t.facadeStays = !t.listed && old && r.Float64() < 0.1
}

func systems(r *rand.Rand, t *truth) {
	switch {
	case t.year >= 2009:
		t.ventilation = choose(r, []building.Ventilation{building.ExtractFan, building.BalancedRecovery, building.DemandControlled})
	case t.use == building.ApartmentBlock && t.year >= 1955:
		t.ventilation = choose(r, []building.Ventilation{building.PassiveStack, building.ExtractFan, building.Natural})
	case !t.use.IsHousing() && t.year >= 1970:
		t.ventilation = choose(r, []building.Ventilation{building.Balanced, building.ExtractFan, building.Natural})
	default:
		t.ventilation = building.Natural
	}
	s := choose(r, []struct{ heating, carrier string }{
		{"boiler", "gas"}, {"condensing boiler", "gas"}, {"condensing boiler", "gas"}, {"district heating", "district heat"},
		{"boiler", "oil"}, {"heat pump", "electricity"}, {"electric heating", "electricity"},
	})
	t.heating, t.carrier = s.heating, s.carrier
	// Degree days of the starter climate's kind of place: about 3,100 K d.
	envelope := t.volumeM3 / t.areaM2 / 2.6
	ua := t.areaM2 * (0.75*t.wallU*envelope + 0.17*t.windowU + 0.35 + 0.33*2.6*0.45)
	t.heatKWh = math.Round(ua * 3100 * 24 / 1000 / 0.85 * 0.8 * spread(r, 0.2))
}
