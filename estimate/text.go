package estimate

import (
	"fmt"
	"io"
	"strconv"
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
	numbers := cautionNumbers(e)
	if len(e.Cautions) > 0 {
		p("Cautions\t%s\tsee the end of this page\n", listed(e.Cautions, numbers))
	}

	p("\nInputs\n  field\tvalue\tunit\tkind\torigin\n")
	for _, in := range e.Inputs {
		p("  %s\t%s\t%s\t%s\t%s\n", in.Field, inputText(in), in.Unit, in.Kind, originText(in.Source))
	}
	for _, n := range e.Notes {
		p("  note: %s\n", n)
	}

	writeState(p, "As it is", s, &e.Climate)

	writePaths(p, e)
	writeMeasures(p, e, numbers)
	writePackages(p, e)
	if err := w.Flush(); err != nil {
		return err
	}
	return writeCautions(out, e, numbers)
}

// writePaths shows where the year's heat goes.
func writePaths(p func(string, ...any), e *Explanation) {
	q := &e.LossByPathKWh
	parts := []struct {
		name string
		v    float64
	}{
		{"wall", q.Wall}, {"roof", q.Roof}, {"floor", q.Floor}, {"window", q.Window}, {"door", q.Door},
		{"bridge", q.Bridge}, {"infiltration", q.Infiltration}, {"fans", q.Fans}, {"airing", q.Airing},
	}
	sum := 0.0
	for _, part := range parts {
		sum += part.v
	}
	p("\nHeat loss by path\n  path\tkWh/a\tshare\n")
	for _, part := range parts {
		note := ""
		if part.name == "infiltration" && part.v > 0 {
			note = fmt.Sprintf("\tstack %.0f, wind %.0f", e.Infiltration.Stack, e.Infiltration.Wind)
		}
		p("  %s\t%.0f\t%.0f %%%s\n", part.name, part.v, 100*part.v/sum, note)
	}
	p("  together\t%.0f\t\n", sum)
}

// writeMeasures shows what each measure does: first what it is worth, then what it
// changes, before and after.
func writeMeasures(p func(string, ...any), e *Explanation, numbers map[string]int) {
	p("\nMeasures\n  measure\tquantity\tcost\tsaves kWh/a\tneed after kWh/a\tmoney/a\tNPV\tpayback a\tdiscounted a\tcost of saved kWh\tCO2 kg/a\tcautions\n")
	for _, m := range e.Measures {
		if !m.Applies {
			p("  %s\tdoes not apply: %s\n", m.Label, m.Reason)
			continue
		}
		years := func(v *float64) string {
			if v == nil {
				return "never"
			}
			return fmt.Sprintf("%.1f", *v)
		}
		perKWh := "-"
		if m.CostOfSavedKWh != nil {
			perKWh = fmt.Sprintf("%.3f", *m.CostOfSavedKWh)
		}
		p("  %s\t%.0f %s\t%.0f\t%.0f\t%.0f\t%.0f\t%.0f\t%s\t%s\t%s\t%.0f\t%s\n", m.Label, *m.Quantity, m.Unit, *m.Cost,
			*m.SavingKWh, m.State.NeedKWh, *m.MoneyPerYear, *m.NPV, years(m.PaybackYears), years(m.DiscountedA), perKWh, *m.CO2Kg, listed(m.Cautions, numbers))
		if m.CompanionM3H != nil {
			p("    with %.0f m3/h of mechanical ventilation, which it then needs\n", *m.CompanionM3H)
		}
		if m.Reason != "" {
			p("    %s\n", m.Reason)
		}
	}
	p("\nWhat the measures change\n  measure\twhat\tbefore\tafter\n")
	for _, m := range e.Measures {
		if m.State == nil {
			continue
		}
		label := m.Label
		for _, c := range changes(&e.State, m.State) {
			p("  %s\t%s\t%s\t%s\n", label, c.what, c.before, c.after)
			label = ""
		}
	}
}

// writePackages shows the staircase from nothing to all that saves energy.
func writePackages(p func(string, ...any), e *Explanation) {
	labels := map[string]string{}
	for _, m := range e.Measures {
		labels[m.Measure] = m.Label
	}
	p("\nPackages: no other is both cheaper and saves more\n  cost\tsaves kWh/a\tneed after kWh/a\tmoney/a\tNPV\tCO2 kg/a\tmeasures\n")
	for _, k := range e.Packages {
		names := make([]string, len(k.Measures))
		for i, m := range k.Measures {
			names[i] = labels[m]
		}
		what := strings.Join(names, " + ")
		if len(names) == 0 {
			what = "nothing"
		}
		if k.CompanionM3H != nil {
			what += fmt.Sprintf(", with %.0f m3/h of mechanical ventilation", *k.CompanionM3H)
		}
		p("  %.0f\t%.0f\t%.0f\t%.0f\t%.0f\t%.0f\t%s\n", k.Cost, k.SavingKWh, k.NeedKWh, k.MoneyPerYear, k.NPV, k.CO2Kg, what)
	}
}

type change struct{ what, before, after string }

// changes lists what differs between two states of one building, in words.
func changes(a, b *StateDoc) []change {
	var out []change
	add := func(what, format string, x, y any) {
		if x, y := fmt.Sprintf(format, x), fmt.Sprintf(format, y); x != y {
			out = append(out, change{what, x, y})
		}
	}
	seen := map[string]bool{} // windows of four sides change alike
	for i := range min(len(a.Elements), len(b.Elements)) {
		x, y := &a.Elements[i], &b.Elements[i]
		key := fmt.Sprint(x.Kind, x.Name, x.UWM2K, y.UWM2K)
		if seen[key] {
			continue
		}
		seen[key] = true
		add("U of "+x.Kind+", "+x.Name+", W/(m2K)", "%.3f", x.UWM2K, y.UWM2K)
		if x.TempFactor != nil && y.TempFactor != nil {
			add("f_Rsi of it", "%.2f", *x.TempFactor, *y.TempFactor)
		}
		if x.G != nil && y.G != nil {
			add("g of it", "%.2f", *x.G, *y.G)
		}
	}
	add("thermal bridges, W/(m2K)", "%.3f", a.BridgeUWM2K, b.BridgeUWM2K)
	add("n50, 1/h", "%.2f", a.Air.N50PerH, b.Air.N50PerH)
	add("ventilation", "%s", a.Air.Ventilation, b.Air.Ventilation)
	add("supply, m3/h", "%.0f", a.Air.SupplyM3H, b.Air.SupplyM3H)
	add("extract, m3/h", "%.0f", a.Air.ExtractM3H, b.Air.ExtractM3H)
	add("heat recovery, share", "%.2f", a.Air.HeatRecovery, b.Air.HeatRecovery)
	add("airing, m3/h", "%.0f", a.Air.AiringM3H, b.Air.AiringM3H)
	add("outdoor air, m3/h (minimum "+fmt.Sprintf("%.0f", a.Air.MinimumM3H)+")", "%.0f", a.Air.OutdoorAirM3H, b.Air.OutdoorAirM3H)
	add("indoor temperature, C", "%.1f", a.IndoorC, b.IndoorC)
	add("heating", "%s", a.System.Heating+", "+a.System.Carrier, b.System.Heating+", "+b.System.Carrier)
	add("efficiency of generation", "%.2f", a.System.Generation, b.System.Generation)
	add("efficiency of distribution", "%.2f", a.System.Distribution, b.System.Distribution)
	add("transmission, W/K", "%.1f", a.TransmissionWK, b.TransmissionWK)
	add("heating need, kWh/a", "%.0f", a.NeedKWh, b.NeedKWh)
	add("delivered heat, kWh/a", "%.0f", a.System.DeliveredKWh, b.System.DeliveredKWh)
	add("electricity of fans, kWh/a", "%.0f", a.System.FanKWh, b.System.FanKWh)
	return out
}

// cautionNumbers numbers the cautions of the page in the order in which they come.
func cautionNumbers(e *Explanation) map[string]int {
	n := map[string]int{}
	count := func(texts []string) {
		for _, c := range texts {
			if n[c] == 0 {
				n[c] = len(n) + 1
			}
		}
	}
	count(e.Cautions)
	for _, m := range e.Measures {
		count(m.Cautions)
	}
	return n
}

// listed gives the numbers of cautions: "1, 4".
func listed(texts []string, numbers map[string]int) string {
	parts := make([]string, len(texts))
	for i, c := range texts {
		parts[i] = strconv.Itoa(numbers[c])
	}
	return strings.Join(parts, ", ")
}

// pageWidth is where long sentences are broken.
const pageWidth = 100

func writeCautions(out io.Writer, e *Explanation, numbers map[string]int) error {
	if len(numbers) == 0 {
		return nil
	}
	byNumber := make([]string, len(numbers))
	for text, n := range numbers {
		byNumber[n-1] = text
	}
	var b strings.Builder
	b.WriteString("\nCautions\n")
	for i, text := range byNumber {
		line := fmt.Sprintf("%3d", i+1)
		for _, word := range strings.Fields(text) {
			if len(line)+1+len(word) > pageWidth {
				b.WriteString(line + "\n")
				line = "   "
			}
			line += " " + word
		}
		b.WriteString(line + "\n")
	}
	_, err := io.WriteString(out, b.String())
	return err
}

func writeState(p func(string, ...any), title string, s *StateDoc, c *ClimateDoc) {
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
			layers = append(layers, groundText(el.Ground))
		case el.RseM2KW != nil:
			layers = append(layers, fmt.Sprintf("Rse %.2f", *el.RseM2KW))
		}
		if el.Orientation != "" {
			layers = append(layers, fmt.Sprintf("%s, g %.2f, frame %.2f, shading %.2f", el.Orientation, *el.G, *el.FrameShare, *el.Shading))
		}
		if el.UpperM2KW != nil {
			layers = append(layers, fmt.Sprintf("limits %.3f and %.3f m2K/W, at most %.0f %% off", *el.UpperM2KW, *el.LowerM2KW, 100**el.RelativeErr))
		}
		if el.Correction != nil {
			layers = append(layers, fmt.Sprintf("%.4f W/(m2K) for gaps and fixings within U", *el.Correction))
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
	p("\nBalance, kWh\n  month\toutdoors C\tloss\tinternal\tsolar\tgains/loss\ttime constant h\tutilisation\tneed\n")
	for i, m := range s.Balance {
		p("  %s\t%.1f\t%.0f\t%.0f\t%.0f\t%.3f\t%.1f\t%.3f\t%.0f\n", monthNames[i], c.Months[i].OutdoorC, m.LossKWh, m.InternalKWh, m.SolarKWh, m.GainLossRatio, m.TimeConstantH, m.Utilisation, m.NeedKWh)
	}
}

func groundText(g *GroundDoc) string {
	t := fmt.Sprintf("ground %.1f W/(mK), exposed perimeter %.1f m, wall %.2f m", g.GroundConductivityWMK, g.PerimeterM, g.WallThicknessM)
	if g.PerimeterM > 0 {
		t += fmt.Sprintf(", B' %.2f m", g.AreaM2/(0.5*g.PerimeterM))
	}
	if g.VoidHeightM != nil {
		t += fmt.Sprintf(", void %.2f m above ground", *g.VoidHeightM)
	}
	if g.BasementDepthM != nil {
		t += fmt.Sprintf(", %.1f m deep", *g.BasementDepthM)
	}
	return t
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
