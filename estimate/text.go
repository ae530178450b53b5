package estimate

import (
	"fmt"
	"io"
	"strings"
	"text/tabwriter"
)

var monthNames = [12]string{"Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec"}

// WriteText writes the explanation as a page for reading.
func (e *Explanation) WriteText(out io.Writer) error {
	w := tabwriter.NewWriter(out, 0, 4, 2, ' ', 0)
	p := func(format string, args ...any) { fmt.Fprintf(w, format, args...) }
	s := &e.State

	p("Building %s, portfolio %s, kelvinrow %s, climate %s\n\n", e.Building, e.Portfolio, e.Version, e.Climate.Name)
	p("Heating need\t%.0f kWh/a\t%.1f kWh/(m2 a)\n", e.HeatingNeedKWh, e.HeatingNeedKWh/s.FloorAreaM2)
	p("Delivered heat\t%.0f kWh/a\t%s, %s; hot water included\n", e.DeliveredKWh, s.System.Heating, s.System.Carrier)
	p("Electricity of fans\t%.0f kWh/a\t\n", e.FansKWh)
	p("CO2\t%.0f kg/a\t\n", e.CO2Kg)
	p("Design heat load\t%.1f kW\tat %.1f C outdoors\n", e.DesignHeatLoadW/1000, e.Climate.DesignOutdoorC)
	for _, c := range e.Cautions {
		p("Caution\t%s\n", c)
	}

	p("\nInputs\n  field\tvalue\tunit\tkind\torigin\n")
	for _, in := range e.Inputs {
		p("  %s\t%s\t%s\t%s\t%s\n", in.Field, inputText(in), in.Unit, in.Kind, originText(in.Source))
	}
	for _, n := range e.Notes {
		p("  note: %s\n", n)
	}

	writeState(p, "As it is", s)

	q := &e.LossByPathKWh
	p("\nHeat loss by path, kWh/a\n")
	for _, part := range []struct {
		name string
		v    float64
	}{
		{"wall", q.Wall}, {"roof", q.Roof}, {"floor", q.Floor}, {"window", q.Window}, {"door", q.Door},
		{"bridge", q.Bridge}, {"infiltration", q.Infiltration}, {"fans", q.Fans}, {"airing", q.Airing},
	} {
		p("  %s\t%.0f\n", part.name, part.v)
	}

	p("\nMeasures\n  measure\tquantity\tcost\tsaves kWh/a\tneed after kWh/a\tmoney/a\tNPV\tpayback a\tCO2 kg/a\n")
	for _, m := range e.Measures {
		if !m.Applies {
			p("  %s\tdoes not apply: %s\n", m.Label, m.Reason)
			continue
		}
		payback := "never"
		if m.PaybackYears != nil {
			payback = fmt.Sprintf("%.1f", *m.PaybackYears)
		}
		p("  %s\t%.0f %s\t%.0f\t%.0f\t%.0f\t%.0f\t%.0f\t%s\t%.0f\n", m.Label, *m.Quantity, m.Unit, *m.Cost,
			*m.SavingKWh, m.State.NeedKWh, *m.MoneyPerYear, *m.NPV, payback, *m.CO2Kg)
		if m.CompanionM3H != nil {
			p("    with %.0f m3/h of demand-controlled extract, which it then needs\n", *m.CompanionM3H)
		}
		if m.Reason != "" {
			p("    %s\n", m.Reason)
		}
	}
	seen := map[string]bool{}
	p("\nCautions\n")
	for _, m := range e.Measures {
		for _, c := range m.Cautions {
			if !seen[c] {
				seen[c] = true
				p("  %s\n", c)
			}
		}
	}
	return w.Flush()
}

func writeState(p func(string, ...any), title string, s *StateDoc) {
	p("\n%s: %.0f m2 heated, %.0f m3, %.1f storeys, %.1f C indoors\n", title, s.FloorAreaM2, s.VolumeM3, s.Storeys, s.IndoorC)
	p("  element\tname\tarea m2\tU W/(m2K)\tb\tlayers from inside, R m2K/W\n")
	for _, el := range s.Elements {
		var layers []string
		if el.RsiM2KW != nil && el.Ground == nil {
			layers = append(layers, fmt.Sprintf("Rsi %.2f", *el.RsiM2KW))
		}
		for _, l := range el.Layers {
			t := l.Name
			if l.ThicknessM != nil {
				t += fmt.Sprintf(" %.0f mm", *l.ThicknessM*1000)
			}
			layers = append(layers, fmt.Sprintf("%s %.3f", t, l.ResistanceM2KW))
		}
		switch {
		case el.Ground != nil:
			layers = append(layers, fmt.Sprintf("ground: exposed perimeter %.1f m", el.Ground.PerimeterM))
		case el.RseM2KW != nil:
			layers = append(layers, fmt.Sprintf("Rse %.2f", *el.RseM2KW))
		}
		if el.Orientation != "" {
			layers = append(layers, fmt.Sprintf("%s, g %.2f, frame %.2f, shading %.2f", el.Orientation, *el.G, *el.FrameShare, *el.Shading))
		}
		if el.TempFactor != nil {
			layers = append(layers, fmt.Sprintf("f_Rsi %.2f", *el.TempFactor))
		}
		p("  %s\t%s\t%.1f\t%.3f\t%.2f\t%s\n", el.Kind, el.Name, el.AreaM2, el.UWM2K, el.Adjustment, strings.Join(layers, "; "))
	}
	p("  thermal bridges\t%.3f W/(m2K) over the envelope\t\t%.1f W/K\n", s.BridgeUWM2K, s.BridgeWK)
	p("  transmission in all\t\t\t%.1f W/K\n", s.TransmissionWK)

	a := &s.Air
	p("\nAir: %s, n50 %.1f 1/h, minimum %.0f m3/h, mean outdoor air %.0f m3/h (%.2f 1/h)%s\n", a.Ventilation, a.N50PerH,
		a.MinimumM3H, a.OutdoorAirM3H, a.AirChangesPerH, map[bool]string{true: ": under-ventilated"}[a.UnderVentilated])
	p("  month\twind m/s\tstack m3/h\twind m3/h\tinfiltration m3/h\toutdoor air m3/h\theat W/K\tn 1/h\n")
	for i, m := range a.Months {
		p("  %s\t%.2f\t%.0f\t%.0f\t%.0f\t%.0f\t%.1f\t%.2f\n", monthNames[i], m.WindMS, m.StackM3H, m.WindM3H, m.InfiltrationM3H, m.OutdoorAirM3H, m.HeatWK, m.AirChangesPerH)
	}
	p("\nBalance, kWh\n  month\tloss\tinternal\tsolar\tgains/loss\ttime constant h\tutilisation\tneed\n")
	for i, m := range s.Balance {
		p("  %s\t%.0f\t%.0f\t%.0f\t%.3f\t%.1f\t%.3f\t%.0f\n", monthNames[i], m.LossKWh, m.InternalKWh, m.SolarKWh, m.GainLossRatio, m.TimeConstantH, m.Utilisation, m.NeedKWh)
	}
}

func inputText(in InputDoc) string {
	if in.From != 0 || in.To != 0 {
		return fmt.Sprintf("%.0f-%.0f", in.From, in.To)
	}
	if v, ok := in.Value.(float64); ok {
		if strings.HasPrefix(in.Field, "year") || strings.HasPrefix(in.Field, "windows_not") {
			return fmt.Sprintf("%.0f", v)
		}
		return fmt.Sprintf("%.6g", v)
	}
	return fmt.Sprint(in.Value)
}

func originText(s SourceDoc) string {
	if s.Rule != "" {
		t := s.Rule
		if s.Low != nil && s.High != nil && *s.Low != *s.High {
			t += fmt.Sprintf(" (%.4g to %.4g)", *s.Low, *s.High)
		}
		if s.Note != "" {
			t += ": " + s.Note
		}
		return t
	}
	t := s.File
	if s.Sheet != "" {
		t += ", sheet " + s.Sheet
	}
	t += fmt.Sprintf(", row %d", s.Row)
	if s.Column != "" {
		t += ", column " + s.Column
	}
	if s.Date != "" {
		t += ", " + s.Date
	}
	return t
}
