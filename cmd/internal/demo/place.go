package demo

import "math/rand/v2"

// town is an invented place. Its letter begins the ids of its buildings.
type town struct {
	letter    string
	name      string
	weight    float64 // share of the stock
	district  float64 // share of buildings with district heating
	technical bool    // kept by the technical department alone
	postcode  string
}

var towns = []town{
	{"A", "Brelkstow", 30, 0.45, false, "Q1"},
	{"B", "Quorvhaven", 18, 0.25, false, "Q2"},
	{"C", "Thwallmere", 12, 0, false, "Q3"},
	{"D", "Okkendby", 11, 0.3, true, "Q4"},
	{"E", "Yarvenford", 10, 0, true, "Q5"},
	{"F", "Zemmerholt", 9, 0.1, true, "Q6"},
	{"G", "Feskalby", 6, 0, false, "Q7"},
	{"H", "Drunnelow", 4, 0, true, "Q8"},
}

var quarters = []string{"North", "South", "Harbour", "Hill", "Mill", "Old Town"}

// German names of the quarters, as the technical department has them.
var quartersGerman = map[string]string{
	"North": "Nord", "South": "Süd", "Harbour": "Hafen", "Hill": "Berg", "Mill": "Mühle", "Old Town": "Altstadt",
}

var (
	streetFirst  = []string{"Tilv", "Morv", "Quen", "Sard", "Vask", "Ebbr", "Ulv", "Jorl", "Plenn", "Wemm", "Kestr", "Rydd"}
	streetSecond = []string{"a", "orra", "im", "esk", "unn", "osta", "ack", "ilt"}
	streetKind   = []string{"Street", "Lane", "Row", "Road", "Close", "Way", "Rise", "Yard"}

	saints = []string{"Orvina", "Taskel", "Wemmo", "Ildrun", "Quorran", "Pelvin"}
)

func street(rng *rand.Rand) string {
	return pick(rng, streetFirst) + pick(rng, streetSecond) + " " + pick(rng, streetKind)
}

func pick[T any](rng *rand.Rand, of []T) T { return of[rng.IntN(len(of))] }

// weighted draws an index in proportion to its weight.
func weighted(rng *rand.Rand, weights []float64) int {
	sum := 0.0
	for _, w := range weights {
		sum += w
	}
	x := rng.Float64() * sum
	for i, w := range weights {
		if x -= w; x < 0 {
			return i
		}
	}
	return len(weights) - 1
}
