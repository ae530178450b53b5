package rank

import (
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"kelvinrow/estimate/building"
	"kelvinrow/estimate/result"
)

// saves makes a building on which a single measure saves as told.
func saves(id string, m result.Measure) result.Building {
	m.Applies = true
	if m.CarrierAfter == "" {
		m.CarrierAfter = "gas"
	}
	return result.Building{ID: id, Carrier: "gas", FloorAreaM2: 100, Measures: []result.Measure{m}}
}

func ids(buildings []result.Building, rows []Row) string {
	var out []string
	for i, r := range rows {
		if r.Rank != i+1 {
			out = append(out, "wrong rank")
		}
		out = append(out, buildings[r.Index].ID)
	}
	return strings.Join(out, " ")
}

func TestParseYardstick(t *testing.T) {
	t.Parallel()
	for _, y := range Yardsticks() {
		got, err := ParseYardstick(" " + strings.ToUpper(string(y)))
		if err != nil || got != y {
			t.Errorf("%s: got %q, %v", y, got, err)
		}
		if y.Words() == "" {
			t.Errorf("%s has no words", y)
		}
	}
	if y, err := ParseYardstick(""); err != nil || y != Default {
		t.Errorf("empty: got %q, %v", y, err)
	}
	_, err := ParseYardstick("joules")
	if err == nil {
		t.Fatal("joules was taken")
	}
	for _, y := range Yardsticks() {
		if !strings.Contains(err.Error(), string(y)) {
			t.Errorf("message does not list %s: %v", y, err)
		}
	}
}

func TestListByEachYardstick(t *testing.T) {
	t.Parallel()
	never := math.Inf(1)
	buildings := []result.Building{
		saves("a", result.Measure{SavingKWh: 300, CO2Kg: 10, MoneyPerYear: 40, Cost: 3000, NPV: -50, PaybackYears: never}),
		saves("b", result.Measure{SavingKWh: 200, CO2Kg: 30, MoneyPerYear: 20, Cost: 1000, NPV: 70, PaybackYears: 9}),
		saves("c", result.Measure{SavingKWh: 100, CO2Kg: 20, MoneyPerYear: 30, Cost: 800, NPV: 10, PaybackYears: 4}),
		saves("d", result.Measure{SavingKWh: 50, CO2Kg: 5, MoneyPerYear: 10, Cost: 0, NPV: 5, PaybackYears: 0}),
	}
	for y, want := range map[Yardstick]string{
		Energy:         "a b c d",
		CO2:            "b c a d",
		Money:          "a c b d",
		EnergyPerMoney: "d b c a", // free comes first
		NPV:            "b c d a",
		Payback:        "d c b a", // never comes last
	} {
		if got := ids(buildings, List(buildings, 0, y)); got != want {
			t.Errorf("%s: got %s, want %s", y, got, want)
		}
	}
}

func TestListLeavesOutWhatDoesNotCount(t *testing.T) {
	t.Parallel()
	no := saves("no", result.Measure{SavingKWh: 900})
	no.Measures[0].Applies = false
	failed := saves("failed", result.Measure{SavingKWh: 900})
	failed.Failed = "no floor area"
	buildings := []result.Building{
		no, failed,
		saves("zero", result.Measure{SavingKWh: 0}),
		saves("worse", result.Measure{SavingKWh: -5}),
		{ID: "bare"},
		saves("yes", result.Measure{SavingKWh: 1}),
		saves("lost", result.Measure{SavingKWh: 2, NPV: math.NaN()}),
	}
	if got := ids(buildings, List(buildings, 0, NPV)); got != "yes lost" {
		t.Errorf("got %q", got)
	}
	if rows := List(buildings, 1, Energy); len(rows) != 0 {
		t.Errorf("a measure that is not there ranks %d buildings", len(rows))
	}
	if rows := List(nil, 0, Energy); len(rows) != 0 {
		t.Errorf("no buildings rank as %d", len(rows))
	}
}

func TestTiesGoByIdInByteOrder(t *testing.T) {
	t.Parallel()
	var buildings []result.Building
	for _, id := range []string{"b", "a10", "a2", "B", "é", "a"} {
		buildings = append(buildings, saves(id, result.Measure{SavingKWh: 5}))
	}
	if got, want := ids(buildings, List(buildings, 0, Energy)), "B a a10 a2 b é"; got != want {
		t.Errorf("got %s, want %s", got, want)
	}
}

// What differs only in the last bits of a float must not be told apart: another
// processor may round it the other way.
func TestNoiseDoesNotReorder(t *testing.T) {
	t.Parallel()
	const x = 123456.78912
	buildings := []result.Building{
		saves("2", result.Measure{SavingKWh: math.Nextafter(x, math.Inf(1))}),
		saves("1", result.Measure{SavingKWh: x}),
		saves("3", result.Measure{SavingKWh: math.Nextafter(x, math.Inf(-1))}),
	}
	if got := ids(buildings, List(buildings, 0, Energy)); got != "1 2 3" {
		t.Errorf("got %s", got)
	}
}

func TestListDoesNotDependOnOrder(t *testing.T) {
	t.Parallel()
	rnd := rand.New(rand.NewPCG(1, 2))
	var buildings []result.Building
	for i := range 300 {
		buildings = append(buildings, saves(string(rune('a'+i%26))+strings.Repeat("x", i/26), result.Measure{SavingKWh: float64(1 + rnd.IntN(20))}))
	}
	want := ids(buildings, List(buildings, 0, Energy))
	for range 5 {
		rnd.Shuffle(len(buildings), func(i, j int) { buildings[i], buildings[j] = buildings[j], buildings[i] })
		if got := ids(buildings, List(buildings, 0, Energy)); got != want {
			t.Fatalf("got %s, want %s", got, want)
		}
	}
}

// Sums worked by hand.
func TestSummarise(t *testing.T) {
	t.Parallel()
	a := result.Building{
		ID: "a", Carrier: "gas", FloorAreaM2: 100, NeedKWh: 8000, DeliveredKWh: 10000, FansKWh: 50, MoneyPerYear: 1014, CO2Kg: 2015,
		MeteredKWh: 9000, UnderVentilated: true,
		Measures: []result.Measure{
			{Applies: true, Quantity: 60, CompanionQuantity: 40, Cost: 5000, SavingKWh: 2900, CO2Kg: 570, MoneyPerYear: 270,
				CarrierAfter: "gas", HeatBeforeKWh: 10000, HeatAfterKWh: 7000, FansBeforeKWh: 50, FansAfterKWh: 150},
			{Applies: true, Quantity: 5, Cost: 9000, SavingKWh: 7000, CarrierAfter: "electricity", HeatBeforeKWh: 10000, HeatAfterKWh: 3000, FansBeforeKWh: 50, FansAfterKWh: 50},
		},
	}
	a.LossByPathKWh[0] = 7000
	a.InputShare[building.Default], a.InputShare[building.Surveyed] = 0.25, 0.75
	b := result.Building{
		ID: "b", Carrier: "wood", FloorAreaM2: 300, NeedKWh: 20000, DeliveredKWh: 30000,
		Measures: []result.Measure{
			{Applies: true, SavingKWh: -10, CarrierAfter: "wood"},
			{Reason: "has a heat pump"},
		},
	}
	b.LossByPathKWh[0] = 1000
	b.InputShare[building.Default] = 1
	failed := result.Building{ID: "c", Failed: "no size", FloorAreaM2: 1e9}

	s := Summarise(&result.Run{Measures: []string{"walls", "pump"}}, []result.Building{a, b, failed})
	want := Totals{
		Buildings: 3, Failed: 1, UnderVentilated: 1, Metered: 1,
		FloorAreaM2: 400, NeedKWh: 28000, DeliveredKWh: 40000, FansKWh: 50, MoneyPerYear: 1014, CO2Kg: 2015,
		CarrierKWh: []float64{10000, 50, 30000},
	}
	want.LossByPathKWh[0] = 8000
	want.InputShare[building.Default] = (0.25*100 + 300) / 400
	want.InputShare[building.Surveyed] = 75.0 / 400
	if d := cmp.Diff(want, s.Totals); d != "" {
		t.Errorf("totals (-want +got):\n%s", d)
	}
	if d := cmp.Diff([]string{"gas", "electricity", "wood"}, s.Carriers); d != "" {
		t.Errorf("carriers (-want +got):\n%s", d)
	}
	if d := cmp.Diff([]MeasureTotals{
		{Key: "walls", Applies: 1, NoSaving: 1, SavingKWh: 2900, CO2Kg: 570, MoneyPerYear: 270, Cost: 5000, Quantity: 60,
			CompanionCount: 1, CompanionQuantity: 40, SavedKWh: []float64{3000, -100, 0}, Best: 0},
		{Key: "pump", Applies: 1, Excluded: 1, SavingKWh: 7000, Cost: 9000, Quantity: 5, SavedKWh: []float64{10000, -3000, 0}, Best: 0},
	}, s.Measures); d != "" {
		t.Errorf("measures (-want +got):\n%s", d)
	}
}

func TestSummariseBestIsFirstOfTheList(t *testing.T) {
	t.Parallel()
	rnd := rand.New(rand.NewPCG(3, 4))
	for _, y := range Yardsticks() {
		var buildings []result.Building
		for i := range 50 {
			buildings = append(buildings, saves(string(rune('A'+i)), result.Measure{
				SavingKWh: float64(rnd.IntN(6)), CO2Kg: float64(rnd.IntN(6)), MoneyPerYear: float64(rnd.IntN(6)),
				Cost: float64(rnd.IntN(6)), NPV: float64(rnd.IntN(6)), PaybackYears: float64(rnd.IntN(6)),
			}))
		}
		slices.Reverse(buildings)
		s := Summarise(&result.Run{Measures: []string{"m"}, Yardstick: string(y)}, buildings)
		if list := List(buildings, 0, y); s.Measures[0].Best != list[0].Index || s.Measures[0].Applies != len(list) {
			t.Errorf("%s: best is %d, the list begins with %d", y, s.Measures[0].Best, list[0].Index)
		}
	}
	s := Summarise(&result.Run{Measures: []string{"m"}}, nil)
	if s.Measures[0].Best != -1 {
		t.Error("without buildings there is a best one")
	}
}

func TestLeading(t *testing.T) {
	t.Parallel()
	two := func(id string, first, second float64) result.Building {
		return result.Building{ID: id, Carrier: "gas", Measures: []result.Measure{
			{Applies: true, SavingKWh: first, CarrierAfter: "gas"}, {Applies: true, SavingKWh: second, CarrierAfter: "gas"},
		}}
	}
	buildings := []result.Building{
		two("huge once", 1000, 1), two("second twice", 90, 80), two("first once", 10, 100), two("nothing", 0, 0),
	}
	lists := [][]Row{List(buildings, 0, Energy), List(buildings, 1, Energy)}
	got := Leading(buildings, lists, Energy, 2)
	want := []Lead{{Index: 1, Measure: 0, Among: []int{0, 1}}, {Index: 0, Measure: 0, Among: []int{0}}}
	if d := cmp.Diff(want, got); d != "" {
		t.Errorf("(-want +got):\n%s", d)
	}
	if got := Leading(nil, nil, Energy, 10); len(got) != 0 {
		t.Errorf("got %v of nothing", got)
	}
}
