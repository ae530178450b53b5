package estimate

import (
	"math"
	"math/bits"
	"testing"

	"kelvinrow/estimate/building"
	"kelvinrow/estimate/finance"
	"kelvinrow/estimate/result"
)

func bySaving(k *result.Package) float64 { return k.SavingKWh }

// packagesOf returns the packages of a building that are kept, and all combinations.
func packagesOf(t testing.TB, b *Basis, bl *building.Building, worth Worth) (kept, all []result.Package) {
	t.Helper()
	m, err := b.Model(bl)
	if err != nil {
		t.Fatal(err)
	}
	var base outcome
	b.run(m.State, &base)
	var out result.Building
	b.fill(&out, m, &base)
	var p packer
	kept = b.packages(&p, m, &base, worth)
	return kept, p.all
}

func everyPackage(t testing.TB, b *Basis, bl *building.Building) []result.Package {
	_, all := packagesOf(t, b, bl, bySaving)
	return all
}

// A package of one measure is that measure: the same balance, cost and saving, to the
// last bit but for the generator, which is sized by the same formula.
func TestPackagesOfOneAreTheMeasures(t *testing.T) {
	t.Parallel()
	b := testBasis(t)
	for _, bl := range testBuildings()[:40] {
		r := b.Evaluate(bl)
		singles := 0
		for _, k := range everyPackage(t, b, bl) {
			if k.Set == 0 {
				if k.Cost != 0 || k.SavingKWh != 0 || k.NPV != 0 || k.NeedKWh != r.NeedKWh {
					t.Fatalf("%s: doing nothing: %+v", bl.ID, k)
				}
			}
			if bits.OnesCount64(k.Set) != 1 {
				continue
			}
			singles++
			m := &r.Measures[bits.TrailingZeros64(k.Set)]
			if !m.Applies || k.Cost != m.Cost || k.SavingKWh != m.SavingKWh || k.CO2Kg != m.CO2Kg || k.CompanionQuantity != m.CompanionQuantity {
				t.Errorf("%s, %s alone: cost %g saves %g as a package, %g and %g as a measure", bl.ID,
					b.Measures[bits.TrailingZeros64(k.Set)].Terms.Key, k.Cost, k.SavingKWh, m.Cost, m.SavingKWh)
			}
		}
		applies := 0
		for i := range r.Measures {
			if r.Measures[i].Applies {
				applies++
			}
		}
		if singles != applies {
			t.Errorf("%s: %d measures apply, %d packages of one", bl.ID, applies, singles)
		}
	}
}

// Savings of insulation do not add up: together they save no more than the sum, but
// for the little that a slower building makes of its gains; and never more than there
// is.
func TestPackagesInteract(t *testing.T) {
	t.Parallel()
	b := testBasis(t)
	key := map[string]uint64{}
	for i := range b.Measures {
		key[b.Measures[i].Terms.Key] = 1 << i
	}
	pair := key["heating-controls"] | key["heat-generator"]
	for _, bl := range testBuildings()[:40] {
		r := b.Evaluate(bl)
		saves := map[uint64]float64{}
		all := everyPackage(t, b, bl)
		for i := range all {
			saves[all[i].Set] = all[i].SavingKWh
			if all[i].SavingKWh > r.DeliveredKWh+r.FansKWh || all[i].NeedKWh < 0 {
				t.Errorf("%s: package %b saves %g of %g", bl.ID, all[i].Set, all[i].SavingKWh, r.DeliveredKWh+r.FansKWh)
			}
		}
		// Controls and generator are factors on the same heat: two savings of shares a
		// and b save less than a + b.
		if both, ok := saves[pair]; ok && both >= saves[key["heating-controls"]]+saves[key["heat-generator"]] {
			t.Errorf("%s: controls and heat pump together save %g, apart %g and %g", bl.ID, both, saves[key["heating-controls"]], saves[key["heat-generator"]])
		}
	}
}

// What is kept: by cost, worth rising with it, nothing kept that another beats, and
// the best of all among them.
func TestKeptPackagesAreNotDominated(t *testing.T) {
	t.Parallel()
	b := testBasis(t)
	for _, worth := range []Worth{bySaving, func(k *result.Package) float64 { return k.NPV }, func(k *result.Package) float64 { return k.CO2Kg }} {
		for _, bl := range testBuildings()[:40] {
			kept, all := packagesOf(t, b, bl, worth)
			if kept[0].Set != 0 || len(kept) > MostPackages {
				t.Fatalf("%s: %d kept, first %b", bl.ID, len(kept), kept[0].Set)
			}
			best := 0.0
			for i := range all {
				best = math.Max(best, worth(&all[i]))
			}
			if last := worth(&kept[len(kept)-1]); last != best {
				t.Errorf("%s: best of those kept %g, of all %g", bl.ID, last, best)
			}
			for i := 1; i < len(kept); i++ {
				if kept[i].Cost <= kept[i-1].Cost && i > 1 || worth(&kept[i]) <= worth(&kept[i-1]) {
					t.Errorf("%s: package %d does not rise", bl.ID, i)
				}
				for j := range all {
					if all[j].Cost < kept[i].Cost && worth(&all[j]) > worth(&kept[i]) {
						t.Errorf("%s: %b is kept, %b is cheaper and better", bl.ID, kept[i].Set, all[j].Set)
					}
				}
			}
		}
	}
}

// The worth of a package over the period, by hand: insulation of 40 years over 30
// keeps a quarter of its cost at the end; controls of 15 are bought again after 15
// years and are worn out at the end.
func TestPackageWorthByHand(t *testing.T) {
	t.Parallel()
	b := testBasis(t)
	e := b.Set.Economics
	if e.DiscountRate != 0.03 || e.PeriodYears != 30 {
		t.Fatal("the example was made for 3 % and 30 years")
	}
	bl := testBuilding("x", values{building.UseField: "detached house", building.YearBuilt: 1960, building.FloorArea: 140, building.CarrierField: "gas", building.HeatingSystem: "boiler",
		building.VentilationField: "balanced", building.SupplyAirflow: 200.0}) // air enough, so that no ventilation is brought along
	want := uint64(0)
	var lives []float64
	for i := range b.Measures {
		if k := b.Measures[i].Terms.Key; k == "attic-insulation" || k == "heating-controls" {
			want |= 1 << i
			lives = append(lives, b.Measures[i].Terms.LifeYears)
		}
	}
	r := b.Evaluate(bl)
	for _, k := range everyPackage(t, b, bl) {
		if k.Set != want {
			continue
		}
		var costs, upkeep []float64
		for i := range r.Measures {
			if want&(1<<i) != 0 {
				costs = append(costs, r.Measures[i].Cost)
				upkeep = append(upkeep, r.Measures[i].UpkeepPerYear)
			}
		}
		if lives[0] != 40 || lives[1] != 15 {
			t.Fatal("the example was made for lives of 40 and 15 years")
		}
		d := func(y float64) float64 { return math.Pow(1.03, -y) }
		npv := -costs[0] - costs[1] - costs[1]*d(15) + costs[0]/4*d(30) +
			(r.DeliveredKWh-k.HeatAfterKWh)*0.1*finance.PresentValueFactor(0.03, 0.01, 30) -
			(upkeep[0]+upkeep[1])*finance.PresentValueFactor(0.03, 0, 30)
		if math.Abs(npv-k.NPV) > 1e-6*math.Abs(npv) {
			t.Errorf("%.2f, by hand %.2f", k.NPV, npv)
		}
		return
	}
	t.Error("the package of attic and controls is not made")
}

func BenchmarkPackages(b *testing.B) {
	basis := testBasis(b)
	in := many(1)
	n := 0
	for i := range b.N {
		kept, _ := packagesOf(b, basis, in[i%len(in)], bySaving)
		n += len(kept)
	}
	b.ReportMetric(float64(n)/float64(b.N), "kept")
}
