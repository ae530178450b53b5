package estimate

import (
	"math"
	"sync"

	"kelvinrow/estimate/airflow"
	"kelvinrow/estimate/balance"
	"kelvinrow/estimate/building"
	"kelvinrow/estimate/caution"
	"kelvinrow/estimate/finance"
	"kelvinrow/estimate/measure"
	"kelvinrow/estimate/moisture"
	"kelvinrow/estimate/result"
	"kelvinrow/estimate/state"
)

// nonPerpendicular is the factor on g for light that does not fall square on
// the glass (ISO 13790:2008, 11.4.2).
const nonPerpendicular = 0.9

// mouldLimit is the temperature factor below which mould is likely (ISO 13788;
// the limit in use in several countries).
const mouldLimit = 0.70

// balanceInput lumps a state into what the balance kernel reads.
func balanceInput(s *state.State) balance.Input {
	in := balance.Input{
		FloorAreaM2: s.FloorAreaM2, IndoorC: s.IndoorC, InternalGainWM2: s.InternalGainWM2,
		CapacityJK: s.CapacityJK, SetpointShare: s.SetpointShare,
	}
	for _, h := range s.TransmissionWK() {
		in.TransmissionWK += h
	}
	for i := range s.Elements {
		e := &s.Elements[i]
		if e.Kind == state.Window {
			in.ApertureM2[e.Orientation] += e.AreaM2 * e.G * nonPerpendicular * (1 - e.FrameShare) * e.Shading
		}
	}
	a := &s.Air
	in.Air = airflow.Input{
		VolumeM3: s.VolumeM3, N50PerH: a.N50PerH, FlowExponent: a.FlowExponent,
		StackHeightM: a.StackHeightM, LeakageR: a.LeakageR, LeakageX: a.LeakageX,
		Shelter: a.Shelter, WindFactor: a.WindFactor, IndoorC: s.IndoorC,
		SupplyM3H: a.SupplyM3H, ExtractM3H: a.ExtractM3H, HeatRecovery: a.HeatRecovery,
		AiringM3H: a.AiringM3H, StackDuctM2: a.StackDuctM2, StackDuctCd: a.StackDuctCd, StackDuctM: a.StackDuctM,
	}
	return in
}

// outcome is what the balance says of one state.
type outcome struct {
	in              balance.Input
	months          [12]balance.Month
	needKWh         float64
	heatKWh         float64 // delivered, heating and hot water
	fansKWh         float64
	outdoorAirM3H   float64 // mean over the hours of the year
	ventilationWK   float64 // mean over the hours of the year
	underVentilated bool
	co2Kg           float64
	money           float64
}

// run makes the balance of one state. It allocates nothing.
func (b *Basis) run(s *state.State, o *outcome) {
	o.in = balanceInput(s)
	o.needKWh = balance.Year(&o.in, b.Climate, &o.months)
	hours := 0.0
	o.outdoorAirM3H, o.ventilationWK = 0, 0
	for i := range o.months {
		h := b.Climate.Months[i].Hours
		hours += h
		o.outdoorAirM3H += o.months[i].Flow.OutdoorAirM3H * h
		o.ventilationWK += o.months[i].Flow.HeatWK * h
	}
	o.outdoorAirM3H /= hours
	o.ventilationWK /= hours
	// A millionth of slack: a flow sized to the minimum must not fall short of it
	// by rounding.
	o.underVentilated = o.outdoorAirM3H < s.Air.MinimumM3H*(1-1e-6)

	sys := &s.System
	o.heatKWh = o.needKWh/(sys.Generation*sys.Distribution) + sys.HotWaterKWh/sys.Generation
	o.fansKWh = (s.Air.SupplyM3H + s.Air.ExtractM3H) * s.Air.FanPowerWM3H * hours / 1000
	heat, power := b.carriers[sys.Carrier], b.carriers["electricity"]
	o.co2Kg = o.heatKWh*heat.CO2KgKWh + o.fansKWh*power.CO2KgKWh
	o.money = o.heatKWh*heat.PricePerKWh + o.fansKWh*power.PricePerKWh
}

// measured is one measure carried out on one building. Its memory is used again
// for the next.
type measured struct {
	state  state.State
	out    outcome
	result result.Measure
}

// try carries out one measure and says what it saves.
func (b *Basis) try(mm *measure.Measure, m *Model, before *outcome, after *measured) {
	r := &after.result
	*r = result.Measure{}
	effect, why := mm.Apply(m.State, &m.Facts, &after.state)
	if why != "" {
		r.Reason = why
		return
	}
	b.run(effect.State, &after.out)
	cost := mm.Cost(effect.Quantity)
	upkeep := mm.Terms.UpkeepShare * cost
	if effect.LessAir && after.out.underVentilated {
		r.CompanionQuantity = measure.Companion(effect.State, b.companion)
		if r.CompanionQuantity > 0 {
			c := b.companion.Cost(r.CompanionQuantity)
			cost += c
			upkeep += b.companion.UpkeepShare * c
			b.run(effect.State, &after.out)
		}
	}
	o := &after.out
	r.Applies = true
	r.Quantity = effect.Quantity
	r.Cost, r.UpkeepPerYear = cost, upkeep
	r.NeedSavingKWh = before.needKWh - o.needKWh
	r.CarrierAfter = effect.State.System.Carrier
	r.HeatBeforeKWh, r.HeatAfterKWh = before.heatKWh, o.heatKWh
	r.FansBeforeKWh, r.FansAfterKWh = before.fansKWh, o.fansKWh
	r.SavingKWh = (before.heatKWh - o.heatKWh) + (before.fansKWh - o.fansKWh)
	r.CO2Kg = before.co2Kg - o.co2Kg
	r.MoneyPerYear = before.money - o.money
	r.UnderVentilated = o.underVentilated
	if r.SavingKWh <= 0 {
		r.Reason = noSaving(before, o, r)
	}
	b.worth(mm, m, r)
	r.Cautions = effect.Cautions | b.cautions(effect.State, o, m) | buildingCautions(m)
}

// noSaving says why a measure that applies saves nothing.
func noSaving(before, after *outcome, r *result.Measure) string {
	if after.outdoorAirM3H > before.outdoorAirM3H {
		return "brings the outdoor air the building lacks today, and that air must be heated"
	}
	if r.FansAfterKWh > r.FansBeforeKWh {
		return "its fans use more than it saves in heat"
	}
	return "gains lost outweigh the heat kept"
}

// worth fills in the money of a measure over its life, price rises included.
func (b *Basis) worth(mm *measure.Measure, m *Model, r *result.Measure) {
	rate, life := b.Set.Economics.DiscountRate, mm.Terms.LifeYears
	was, is, power := b.carriers[m.State.System.Carrier], b.carriers[r.CarrierAfter], b.carriers["electricity"]
	worth := -r.Cost +
		r.HeatBeforeKWh*was.PricePerKWh*finance.PresentValueFactor(rate, was.PriceRise, life) -
		r.HeatAfterKWh*is.PricePerKWh*finance.PresentValueFactor(rate, is.PriceRise, life) +
		(r.FansBeforeKWh-r.FansAfterKWh)*power.PricePerKWh*finance.PresentValueFactor(rate, power.PriceRise, life) -
		r.UpkeepPerYear*finance.PresentValueFactor(rate, 0, life)
	r.NPV = worth
	r.PaybackYears = finance.SimplePayback(r.Cost, r.MoneyPerYear-r.UpkeepPerYear)
	r.CostOfSavedKWh = math.Inf(1)
	if r.SavingKWh > 0 {
		r.CostOfSavedKWh = finance.CostOfSavedEnergy(r.Cost, r.UpkeepPerYear, r.SavingKWh, rate, life)
	}
}

// cautions are those that follow from a state whatever led to it.
func (b *Basis) cautions(s *state.State, o *outcome, m *Model) (c result.Caution) {
	if o.underVentilated {
		c |= caution.Air
	}
	for i := range s.Elements {
		e := &s.Elements[i]
		if e.Kind == state.Wall && !e.OnGround && e.UWM2K > 0 &&
			moisture.TemperatureFactor(e.UWM2K, e.RsiM2KW) < mouldLimit {
			c |= caution.Mould
		}
	}
	return c
}

// buildingCautions are those of the building itself.
func buildingCautions(m *Model) (c result.Caution) {
	if m.Facts.Protected {
		c |= caution.Protected
	}
	if m.shares[building.Default] > 0.5 {
		c |= caution.Defaults
	}
	return c
}

// Evaluate makes the estimate of one building: as it is and after each measure.
// A building that cannot be estimated carries the reason instead.
func (b *Basis) Evaluate(bl *building.Building) result.Building {
	out := identity(bl)
	m, err := b.Model(bl)
	if err != nil {
		out.Failed = err.Error()
		return out
	}
	var base outcome
	b.run(m.State, &base)
	b.fill(&out, m, &base)
	out.Measures = make([]result.Measure, len(b.Measures))
	var after measured
	for i := range b.Measures {
		b.try(&b.Measures[i], m, &base, &after)
		out.Measures[i] = after.result
	}
	if b.Worth != nil {
		p := packers.Get().(*packer)
		out.Packages = b.packages(p, m, &base, b.Worth)
		packers.Put(p)
	}
	return out
}

// packers holds the memory packages are made in.
var packers = sync.Pool{New: func() any { return new(packer) }}

func identity(bl *building.Building) result.Building {
	return result.Building{
		ID: bl.ID, Name: bl.Text(building.Name), Street: bl.Text(building.Street),
		Postcode: bl.Text(building.Postcode), Town: bl.Text(building.Town), District: bl.Text(building.District),
	}
}

// fill puts the building as it is into its result.
func (b *Basis) fill(out *result.Building, m *Model, o *outcome) {
	s := m.State
	out.Use, out.Attachment = m.Facts.Use.String(), m.attachment.String()
	out.Ventilation = s.Air.Ventilation.String()
	out.Heating, out.Carrier = s.System.Heating, s.System.Carrier
	out.YearBuilt = m.years.built
	out.FloorAreaM2, out.VolumeM3 = s.FloorAreaM2, s.VolumeM3
	out.UWall, out.URoof = meanU(s, state.Wall), meanU(s, state.Roof)
	out.UFloor, out.UWindow = meanU(s, state.Floor), meanU(s, state.Window)
	out.N50PerH = s.Air.N50PerH
	out.AirChangesPerH = o.outdoorAirM3H / s.VolumeM3
	out.UnderVentilated = o.underVentilated
	out.TransmissionWK = o.in.TransmissionWK
	out.VentilationWK = o.ventilationWK
	out.LossByPathKWh = balance.LossByPath(&o.in, b.Climate, &o.months, s.TransmissionWK())
	for i := range o.months {
		mo := &o.months[i]
		if mo.NeedKWh > 0 {
			out.GainsUsedKWh += mo.Utilisation * (mo.InternalKWh + mo.SolarKWh)
		}
	}
	out.NeedKWh = o.needKWh
	out.DeliveredKWh, out.FansKWh = o.heatKWh, o.fansKWh
	out.DesignLoadW = b.designLoad(s, &o.in)
	m.Facts.DesignLoadW = out.DesignLoadW
	out.CO2Kg, out.MoneyPerYear = o.co2Kg, o.money
	out.MeteredKWh = m.meteredKWh
	out.InputShare = m.shares
	out.Cautions = b.cautions(s, o, m) | buildingCautions(m)
}

// designLoad is the heat load in design weather (EN 12831, simplified): the
// flows are those of the design temperature at the windiest month's mean wind.
func (b *Basis) designLoad(s *state.State, in *balance.Input) float64 {
	wind := 0.0
	for i := range b.Climate.Months {
		wind = math.Max(wind, b.Climate.Months[i].Wind10M)
	}
	c := airflow.Prepare(&in.Air)
	return balance.DesignHeatLoadW(in.TransmissionWK, c.HeatWK(b.Climate.DesignOutdoorC, wind), s.IndoorC, b.Climate.DesignOutdoorC)
}

// meanU is the area-weighted U-value of one kind of element.
func meanU(s *state.State, kind state.Path) float64 {
	ua, a := 0.0, 0.0
	for i := range s.Elements {
		if e := &s.Elements[i]; e.Kind == kind {
			ua += e.UWM2K * e.AreaM2
			a += e.AreaM2
		}
	}
	if a == 0 {
		return 0
	}
	return ua / a
}
