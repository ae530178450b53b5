package rank

import (
	"slices"

	"kelvinrow/estimate/building"
	"kelvinrow/estimate/result"
	"kelvinrow/estimate/state"
)

// Totals adds up the buildings as they are.
type Totals struct {
	Buildings       int // all, those that could not be estimated included
	Failed          int // could not be estimated; not in the sums
	UnderVentilated int
	Metered         int // have a usable meter reading

	FloorAreaM2   float64
	NeedKWh       float64
	DeliveredKWh  float64 // heating and hot water, in the buildings' carriers
	FansKWh       float64
	LossByPathKWh [state.NumPaths]float64
	GainsUsedKWh  float64
	MoneyPerYear  float64
	CO2Kg         float64

	// CarrierKWh is what is delivered now by carrier, parallel to
	// Summary.Carriers; the fans' electricity is in it.
	CarrierKWh []float64

	// InputShare is the share of the decisive inputs by kind, weighted by floor
	// area; sums to 1 where there is a floor area.
	InputShare [building.NumKinds]float64
}

// MeasureTotals adds up one measure over all buildings where it applies and
// saves energy. Savings of different measures do not add up.
type MeasureTotals struct {
	Key      string
	Applies  int // buildings where it applies and saves: those ranked
	NoSaving int // applies, but would save nothing
	Excluded int // does not apply

	SavingKWh    float64
	CO2Kg        float64
	MoneyPerYear float64
	Cost         float64

	Quantity          float64
	CompanionCount    int // buildings it brings ventilation to
	CompanionQuantity float64
	// SavedKWh is what is saved by carrier, parallel to Summary.Carriers: what
	// changes carrier is a saving in the old and a negative one in the new.
	SavedKWh []float64

	Best int // index of the building ranked first, -1 without one
}

// Summary is a run added up.
type Summary struct {
	Totals
	Carriers []string        // every carrier met, in the order of the canonical words
	Measures []MeasureTotals // parallel to Run.Measures
}

const electricity = "electricity"

// Summarise adds up a run. Sums are made in the order of the buildings, so that
// they do not depend on anything else. The best building of each measure goes by
// the run's yardstick.
func Summarise(run *result.Run, buildings []result.Building) Summary {
	s := Summary{Carriers: carriersOf(buildings)}
	place := make(map[string]int, len(s.Carriers))
	for i, word := range s.Carriers {
		place[word] = i
	}
	y, err := ParseYardstick(run.Yardstick)
	if err != nil {
		y = Default
	}
	by := y.find()

	s.CarrierKWh = make([]float64, len(s.Carriers))
	s.Measures = make([]MeasureTotals, len(run.Measures))
	keys := make([]float64, len(run.Measures))
	for m := range s.Measures {
		s.Measures[m] = MeasureTotals{Key: run.Measures[m], Best: -1, SavedKWh: make([]float64, len(s.Carriers))}
	}
	s.Buildings = len(buildings)
	for i := range buildings {
		b := &buildings[i]
		if b.Failed != "" {
			s.Failed++
			continue
		}
		s.add(b, place)
		for m := range s.Measures {
			t := &s.Measures[m]
			if !t.add(b, m, place) {
				continue
			}
			k := by.rounded(&b.Measures[m])
			if t.Best < 0 || k > keys[m] || k == keys[m] && b.ID < buildings[t.Best].ID {
				t.Best, keys[m] = i, k
			}
		}
	}
	if s.FloorAreaM2 > 0 {
		for k := range s.InputShare {
			s.InputShare[k] /= s.FloorAreaM2
		}
	}
	return s
}

func (s *Summary) add(b *result.Building, place map[string]int) {
	if b.UnderVentilated {
		s.UnderVentilated++
	}
	if b.MeteredKWh > 0 {
		s.Metered++
	}
	s.FloorAreaM2 += b.FloorAreaM2
	s.NeedKWh += b.NeedKWh
	s.DeliveredKWh += b.DeliveredKWh
	s.FansKWh += b.FansKWh
	s.GainsUsedKWh += b.GainsUsedKWh
	s.MoneyPerYear += b.MoneyPerYear
	s.CO2Kg += b.CO2Kg
	for p, q := range b.LossByPathKWh {
		s.LossByPathKWh[p] += q
	}
	for k, share := range b.InputShare {
		s.InputShare[k] += float64(share * b.FloorAreaM2)
	}
	s.CarrierKWh[place[b.Carrier]] += b.DeliveredKWh
	s.CarrierKWh[place[electricity]] += b.FansKWh
}

// add adds one building and reports whether the measure is ranked there.
func (t *MeasureTotals) add(b *result.Building, m int, place map[string]int) bool {
	if !Counts(b, m) {
		if m < len(b.Measures) && b.Measures[m].Applies {
			t.NoSaving++
		} else {
			t.Excluded++
		}
		return false
	}
	r := &b.Measures[m]
	t.Applies++
	t.SavingKWh += r.SavingKWh
	t.CO2Kg += r.CO2Kg
	t.MoneyPerYear += r.MoneyPerYear
	t.Cost += r.Cost
	t.Quantity += r.Quantity
	if r.CompanionQuantity > 0 {
		t.CompanionCount++
		t.CompanionQuantity += r.CompanionQuantity
	}
	t.SavedKWh[place[b.Carrier]] += r.HeatBeforeKWh
	t.SavedKWh[place[r.CarrierAfter]] -= r.HeatAfterKWh
	t.SavedKWh[place[electricity]] += r.FansBeforeKWh - r.FansAfterKWh
	return true
}

// carriersOf lists the carriers met in the buildings, before or after any
// measure; electricity is always among them, because fans need it.
func carriersOf(buildings []result.Building) []string {
	met := map[string]bool{electricity: true}
	for i := range buildings {
		b := &buildings[i]
		if b.Failed != "" {
			continue
		}
		met[b.Carrier] = true
		for m := range b.Measures {
			if Counts(b, m) {
				met[b.Measures[m].CarrierAfter] = true
			}
		}
	}
	var out []string
	for _, word := range building.Words(building.CarrierField) {
		if met[word] {
			out = append(out, word)
			delete(met, word)
		}
	}
	n := len(out)
	for word := range met {
		out = append(out, word)
	}
	slices.Sort(out[n:])
	return out
}
