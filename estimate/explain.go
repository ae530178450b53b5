package estimate

import (
	"math"

	"kelvinrow/estimate/airflow"
	"kelvinrow/estimate/archetype"
	"kelvinrow/estimate/balance"
	"kelvinrow/estimate/building"
	"kelvinrow/estimate/caution"
	"kelvinrow/estimate/climate"
	"kelvinrow/estimate/fabric"
	"kelvinrow/estimate/finance"
	"kelvinrow/estimate/moisture"
	"kelvinrow/estimate/result"
	"kelvinrow/estimate/state"
)

// Explain evaluates one building exactly as Evaluate does and returns every
// number on the way.
func (b *Basis) Explain(bl *building.Building) (*Explanation, error) {
	var trail []InputDoc
	m, err := b.model(&reader{b: bl, set: b.Set, trail: &trail})
	if err != nil {
		return nil, err
	}
	var base outcome
	b.run(m.State, &base)
	sum := identity(bl)
	b.fill(&sum, m, &base)

	e := &Explanation{
		Building: bl.ID, Version: Version, Assumptions: b.Hash(),
		Climate: climateDoc(b.Climate), Inputs: distinct(trail), Notes: m.Notes,
		State:          b.stateDoc(m.State, &base),
		HeatingNeedKWh: sum.NeedKWh, DeliveredKWh: sum.DeliveredKWh, FansKWh: sum.FansKWh,
		LossByPathKWh: pathDoc(sum.LossByPathKWh), DesignHeatLoadW: sum.DesignLoadW,
		CO2Kg: sum.CO2Kg, MoneyPerYear: sum.MoneyPerYear,
		InputShare: map[string]float64{}, Cautions: texts(caution.Texts(sum.Cautions)),
		Measures: make([]MeasureDoc, len(b.Measures)),
	}
	e.Infiltration.Stack, e.Infiltration.Wind = balance.InfiltrationByDriver(&base.in, b.Climate, &base.months)
	for k, share := range sum.InputShare {
		e.InputShare[building.Kind(k).String()] = share
	}
	for i := range b.Measures {
		var after measured // the document points into it
		mm := &b.Measures[i]
		b.try(mm, m, &base, &after)
		e.Measures[i] = b.measureDoc(mm.Terms, &after)
	}
	var p packer
	for _, k := range b.packages(&p, m, &base, func(k *result.Package) float64 { return k.SavingKWh }) {
		d := PackageDoc{
			Measures: []string{}, Cost: k.Cost, UpkeepPerYear: k.UpkeepPerYear, CompanionM3H: present(k.CompanionQuantity), NeedKWh: k.NeedKWh,
			SavingKWh: k.SavingKWh, CO2Kg: k.CO2Kg, MoneyPerYear: k.MoneyPerYear, NPV: k.NPV, Cautions: texts(caution.Texts(k.Cautions)),
		}
		for i := range b.Measures {
			if k.Set&(1<<i) != 0 {
				d.Measures = append(d.Measures, b.Measures[i].Terms.Key)
			}
		}
		e.Packages = append(e.Packages, d)
	}
	return e, nil
}

// distinct drops repeated lines of the trail: a value may be asked for twice.
func distinct(trail []InputDoc) []InputDoc {
	seen := map[string]bool{}
	out := trail[:0]
	for _, d := range trail {
		if !seen[d.Field] {
			seen[d.Field] = true
			out = append(out, d)
		}
	}
	return out
}

func (b *Basis) measureDoc(t *archetype.Measure, a *measured) MeasureDoc {
	r := &a.result
	d := MeasureDoc{Measure: t.Key, Label: t.Label, Applies: r.Applies, Reason: r.Reason, Cautions: texts(caution.Texts(r.Cautions))}
	if !r.Applies {
		return d
	}
	d.Quantity, d.Unit = &r.Quantity, t.Unit
	if r.CompanionQuantity > 0 {
		d.CompanionM3H = &r.CompanionQuantity
	}
	d.Cost, d.UpkeepPerYear = &r.Cost, &r.UpkeepPerYear
	d.SavingKWh, d.NeedSavingKWh = &r.SavingKWh, &r.NeedSavingKWh
	d.CO2Kg, d.MoneyPerYear, d.NPV = &r.CO2Kg, &r.MoneyPerYear, &r.NPV
	rate := b.Set.Economics.DiscountRate
	d.DiscountedA = finite(finance.DiscountedPayback(r.Cost, r.MoneyPerYear-r.UpkeepPerYear, rate))
	d.AnnuityA = finite(r.Cost * finance.CapitalRecovery(rate, t.LifeYears))
	d.PaybackYears, d.CostOfSavedKWh = finite(r.PaybackYears), finite(r.CostOfSavedKWh)
	s := b.stateDoc(&a.state, &a.out)
	d.State = &s
	return d
}

func finite(v float64) *float64 {
	if math.IsInf(v, 0) || math.IsNaN(v) {
		return nil
	}
	return &v
}

// present returns a pointer to v, or nil where zero means that there is none.
func present(v float64) *float64 {
	if v == 0 {
		return nil
	}
	return &v
}

// texts makes an empty list of a nil one, so that JSON shows [] and not null.
func texts(s []string) []string {
	if s == nil {
		return []string{}
	}
	return s
}

func climateDoc(c *climate.Climate) ClimateDoc {
	d := ClimateDoc{
		Name: c.Name, LatitudeDeg: c.LatitudeDeg, AltitudeM: c.AltitudeM,
		DesignOutdoorC: c.DesignOutdoorC, Terrain: c.Terrain.String(),
	}
	for _, m := range c.Months {
		v := m.VerticalKWhM2
		d.Months = append(d.Months, ClimateMonthDoc{
			Hours: m.Hours, OutdoorC: m.OutdoorC, Wind10M: m.Wind10M, HorizontalKWhM2: m.HorizontalKWhM2,
			VerticalKWhM2: VerticalDoc{v[climate.North], v[climate.East], v[climate.South], v[climate.West]},
		})
	}
	return d
}

func pathDoc(q [state.NumPaths]float64) PathDoc {
	return PathDoc{
		Wall: q[state.Wall], Roof: q[state.Roof], Floor: q[state.Floor], Window: q[state.Window],
		Door: q[state.Door], Bridge: q[state.Bridge], Infiltration: q[state.Infiltration],
		Fans: q[state.Fans], Airing: q[state.Airing],
	}
}

func (b *Basis) stateDoc(s *state.State, o *outcome) StateDoc {
	d := StateDoc{
		FloorAreaM2: s.FloorAreaM2, VolumeM3: s.VolumeM3, Storeys: s.Storeys, IndoorC: s.IndoorC,
		InternalGainWM2: s.InternalGainWM2, CapacityJK: s.CapacityJK, SetpointShare: s.SetpointShare,
		BridgeUWM2K: s.BridgeUWM2K, BridgeWK: s.BridgeWK(), TransmissionWK: o.in.TransmissionWK,
		Air: b.airDoc(s, o), NeedKWh: o.needKWh,
		System: SystemDoc{
			Heating: s.System.Heating, Carrier: s.System.Carrier, Generation: s.System.Generation,
			Distribution: s.System.Distribution, HotWaterKWh: s.System.HotWaterKWh,
			FanKWh: o.fansKWh, DeliveredKWh: o.heatKWh,
		},
	}
	for i := range s.Elements {
		d.Elements = append(d.Elements, elementDoc(&s.Elements[i]))
	}
	for i := range o.months {
		m := &o.months[i]
		d.Balance = append(d.Balance, BalanceDoc{
			LossKWh: m.LossKWh, InternalKWh: m.InternalKWh, SolarKWh: m.SolarKWh,
			GainLossRatio: m.GainLossRatio, TimeConstantH: m.TimeConstantH, Utilisation: m.Utilisation,
			Intermittency: balance.IntermittencyFactor(m.TimeConstantH, m.GainLossRatio, s.SetpointShare),
			NeedKWh:       m.NeedKWh,
		})
	}
	return d
}

func (b *Basis) airDoc(s *state.State, o *outcome) AirDoc {
	a := &s.Air
	d := AirDoc{
		Ventilation: a.Ventilation.String(), N50PerH: a.N50PerH, FlowExponent: a.FlowExponent,
		FlowCoefficient: airflow.FlowCoefficient(a.N50PerH, s.VolumeM3, a.FlowExponent),
		StackHeightM:    a.StackHeightM, LeakageR: a.LeakageR, LeakageX: a.LeakageX, Shelter: a.Shelter,
		EavesHeightM: a.EavesHeightM, WindFactor: a.WindFactor, SupplyM3H: a.SupplyM3H, ExtractM3H: a.ExtractM3H,
		HeatRecovery: a.HeatRecovery, FanPowerWM3H: a.FanPowerWM3H, AiringM3H: a.AiringM3H,
		StackDuctM2: present(a.StackDuctM2), MinimumM3H: a.MinimumM3H,
		OutdoorAirM3H: o.outdoorAirM3H, AirChangesPerH: o.outdoorAirM3H / s.VolumeM3, UnderVentilated: o.underVentilated,
	}
	if a.StackDuctM2 > 0 {
		d.StackDuctCd, d.StackDuctM = present(a.StackDuctCd), present(a.StackDuctM)
	}
	for i := range o.months {
		f := &o.months[i].Flow
		d.Months = append(d.Months, AirMonthDoc{
			WindMS: f.WindMS, StackM3H: f.StackM3H, WindM3H: f.WindM3H, InfiltrationM3H: f.InfiltrationM3H,
			OutdoorAirM3H: f.OutdoorAirM3H, HeatWK: f.HeatWK, AirChangesPerH: f.AirChangesPerH,
		})
		if a.StackDuctM2 > 0 {
			d.StackDuctM3H = append(d.StackDuctM3H, f.StackDuctM3H)
		}
	}
	return d
}

func elementDoc(e *state.Element) ElementDoc {
	d := ElementDoc{
		Kind: e.Kind.String(), Name: e.Name, AreaM2: e.AreaM2, UWM2K: e.UWM2K, Adjustment: e.Adjustment,
	}
	switch e.Kind {
	case state.Window:
		d.Orientation = e.Orientation.String()
		d.G, d.FrameShare, d.Shading = &e.G, &e.FrameShare, &e.Shading
	case state.Wall, state.Roof, state.Floor:
		d.RsiM2KW, d.RseM2KW = &e.RsiM2KW, &e.RseM2KW
		d.Layers = layerDocs(e)
		if !e.OnGround {
			if t, err := fabric.Evaluate(e.RsiM2KW, e.Layers, e.RseM2KW); err == nil {
				if t.UpperM2KW != t.LowerM2KW {
					d.UpperM2KW, d.LowerM2KW, d.RelativeErr = &t.UpperM2KW, &t.LowerM2KW, &t.RelativeError
				}
				d.Correction = present(t.CorrectionWM2K)
			}
		}
		if e.Kind == state.Wall && !e.OnGround {
			f := moisture.TemperatureFactor(e.UWM2K, e.RsiM2KW)
			d.TempFactor = &f
		}
	}
	if e.OnGround {
		g := &e.Ground
		d.Ground = &GroundDoc{
			PerimeterM: g.PerimeterM, WallThicknessM: g.WallThicknessM, AreaM2: g.AreaM2,
			FloorResistanceM2KW: g.FloorResistanceM2KW, GroundConductivityWMK: g.GroundConductivityWMK,
			BasementDepthM: present(e.BasementDepthM),
		}
		if e.VoidHeightM > 0 {
			d.Ground.VoidHeightM, d.Ground.VentAreaM2M = present(e.VoidHeightM), present(e.VentAreaM2M)
			d.Ground.VoidWallUWM2K, d.Ground.WindMS = present(e.VoidWallUWM2K), present(e.VoidWindMS)
			d.Ground.WindShelter = present(e.VoidShelter)
		}
	}
	return d
}

func layerDocs(e *state.Element) []LayerDoc {
	effective, err := fabric.EffectiveResistances(e.RsiM2KW, e.Layers, e.RseM2KW)
	if err != nil {
		return nil
	}
	docs := make([]LayerDoc, len(e.Layers))
	for i, l := range e.Layers {
		docs[i] = LayerDoc{
			Name: l.Name, ThicknessM: present(l.ThicknessM), ConductivityWMK: present(l.ConductivityWMK),
			ResistanceM2KW: effective[i],
			BridgeShare:    present(l.BridgeShare), BridgeConductivityWMK: present(l.BridgeConductivityWMK),
			Gaps: l.Gaps.String(), FixingsPerM2: present(l.Fixings.PerM2),
		}
		if l.Fixings.PerM2 > 0 {
			docs[i].FixingM2, docs[i].FixingWMK = present(l.Fixings.SectionM2), present(l.Fixings.ConductivityWMK)
		}
	}
	return docs
}
