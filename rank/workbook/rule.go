package workbook

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"

	"kelvinrow/estimate/archetype"
	"kelvinrow/estimate/fabric"
)

const (
	rulesSheet    = "Default rules"
	buildupsSheet = "Build-ups"

	materialsSheet = "Materials"
)

// addRules lists the rules that fill what is not known.
func (b *book) addRules() error {
	set := b.in.Set
	s := b.planFixed(rulesSheet, len(set.Rules))
	l := &list[archetype.Rule]{
		about: "what fills the gaps in the data",
		tab:   muted, title: "Default rules",
		notes: []string{
			"For buildings of this use, attachment, span of years, construction and region (empty: any), the property has this value. The most specific rule wins.",
			"Low and high are the 5th and 95th percentile over such buildings. This version ranks by the typical value.",
		},
		frozen: 2, wide: 2, rows: len(set.Rules), table: "rules",
	}
	text := func(band, head string, width float64, get func(*archetype.Rule) string) {
		l.columns = append(l.columns, textColumn(b, band, head, width, get))
	}
	number := func(band, head string, width float64, format string, get func(*archetype.Rule) float64) {
		l.columns = append(l.columns, numberColumn(b, "", band, head, width, format, 6, get))
	}
	year := func(y int) float64 {
		if y == 0 {
			return math.NaN()
		}
		return float64(y)
	}
	value := func(r *archetype.Rule, v float64) float64 {
		if r.Word != "" {
			return math.NaN()
		}
		return v
	}
	const what, who, how = "Property", "For buildings of", "Value"
	text(what, "Rule", 34, func(r *archetype.Rule) string { return r.ID })
	text(what, "Property", 36, func(r *archetype.Rule) string {
		if i, ok := r.Property.Info(); ok {
			return i.Label
		}
		return string(r.Property)
	})
	text(what, "Unit", 12, func(r *archetype.Rule) string {
		i, _ := r.Property.Info()
		return i.Unit
	})
	text(who, "Use", 18, func(r *archetype.Rule) string { return r.Use })
	text(who, "Attachment", 16, func(r *archetype.Rule) string { return r.Attachment })
	number(who, "Years from", 9, plain, func(r *archetype.Rule) float64 { return year(r.YearFrom) })
	number(who, "Years to", 9, plain, func(r *archetype.Rule) float64 { return year(r.YearTo) })
	text(who, "Construction", 24, func(r *archetype.Rule) string { return r.Construction })
	text(who, "Region", 10, func(r *archetype.Rule) string { return r.Region })
	number(how, "Typical", 10, general, func(r *archetype.Rule) float64 { return value(r, r.Typical) })
	number(how, "Low", 10, general, func(r *archetype.Rule) float64 { return value(r, r.Low) })
	number(how, "High", 10, general, func(r *archetype.Rule) float64 { return value(r, r.High) })
	text(how, "Word", 34, func(r *archetype.Rule) string { return r.Word })
	number(how, "Spread shared by all (share)", 12, percent, func(r *archetype.Rule) float64 { return r.Shared })
	text(how, "Source", 90, func(r *archetype.Rule) string { return r.Source })
	l.columns[len(l.columns)-1].style = b.st.wrapped()
	l.load = func(i int, x *archetype.Rule) { *x = set.Rules[i] }
	l.height = func(r *archetype.Rule) float64 {
		return rowHeight(wrappedText{r.Source, 90})
	}
	return addList(b, &s, l)
}

// layerRow is one layer of a build-up.
type layerRow struct {
	b     *archetype.Buildup
	layer *fabric.Layer
	n     int // 1 is innermost
}

// addBuildups lists the build-ups by layers with the U-value they lead to.
func (b *book) addBuildups() error {
	set := b.in.Set
	var all []layerRow
	for i := range set.Buildups {
		bu := &set.Buildups[i]
		for k := range bu.Layers {
			all = append(all, layerRow{bu, &bu.Layers[k], k + 1})
		}
	}
	s := b.planFixed(buildupsSheet, len(all))
	l := &list[layerRow]{
		about: "the layers behind default U-values",
		tab:   muted, title: "Build-ups",
		notes: []string{
			fmt.Sprintf("%s build-ups, from inside to outside. U by ISO 6946 at normal exposure; floors on the ground get theirs from ISO 13370 and each building's shape, so none stands here.", count(len(set.Buildups))),
			"A layer of two materials side by side (studs, joists, rafters) names the share of the second and its conductivity.",
		},
		frozen: 1, rows: len(all), table: "buildups",
	}
	text := func(band, head string, width float64, get func(*layerRow) string) {
		l.columns = append(l.columns, textColumn(b, band, head, width, get))
	}
	number := func(band, head string, width float64, format string, get func(*layerRow) float64) {
		l.columns = append(l.columns, numberColumn(b, "", band, head, width, format, 6, func(x *layerRow) float64 {
			if v := get(x); v != 0 {
				return v
			}
			return math.NaN()
		}))
	}
	const what, layer, whole = "Build-up", "Layer", "Whole build-up"
	text(what, "Build-up", 44, func(x *layerRow) string { return x.b.Name })
	text(what, "Element", 10, func(x *layerRow) string { return x.b.Element })
	number(layer, "No. from inside", 9, plain, func(x *layerRow) float64 { return float64(x.n) })
	text(layer, "Layer", 34, func(x *layerRow) string { return x.layer.Name })
	number(layer, "Thickness (m)", 11, three, func(x *layerRow) float64 { return x.layer.ThicknessM })
	number(layer, "Conductivity (W/(mK))", 13, three, func(x *layerRow) float64 { return x.layer.ConductivityWMK })
	number(layer, "Declared resistance (m²K/W)", 13, three, func(x *layerRow) float64 { return x.layer.ResistanceM2KW })
	number(layer, "Second material (share)", 11, percent, func(x *layerRow) float64 { return x.layer.BridgeShare })
	number(layer, "its conductivity (W/(mK))", 13, three, func(x *layerRow) float64 { return x.layer.BridgeConductivityWMK })
	text(layer, "Air gaps", 10, func(x *layerRow) string { return x.layer.Gaps.String() })
	number(layer, "Fixings (1/m2)", 9, general, func(x *layerRow) float64 { return x.layer.Fixings.PerM2 })
	number(layer, "of section (mm2)", 9, general, func(x *layerRow) float64 { return 1e6 * x.layer.Fixings.SectionM2 })
	number(layer, "and conductivity (W/(mK))", 13, general, func(x *layerRow) float64 { return x.layer.Fixings.ConductivityWMK })
	number(whole, "U (W/(m²K))", 11, two, func(x *layerRow) float64 {
		if x.n > 1 {
			return 0
		}
		return transmittance(x.b)
	})
	text(whole, "Source", 90, func(x *layerRow) string {
		if x.n > 1 {
			return ""
		}
		return once(x.b.Source)
	})
	l.columns[len(l.columns)-1].style = b.st.wrapped()
	l.load = func(i int, x *layerRow) { *x = all[i] }
	l.height = func(x *layerRow) float64 {
		if x.n > 1 {
			return 0
		}
		return rowHeight(wrappedText{once(x.b.Source), 90})
	}
	return addList(b, &s, l)
}

// once drops repeated parts of a source note that was put together from those of
// the layers.
func once(source string) string {
	var parts []string
	for part := range strings.SplitSeq(source, "; ") {
		if !slices.Contains(parts, part) {
			parts = append(parts, part)
		}
	}
	return strings.Join(parts, "; ")
}

// addMaterials lists the conductivities that the layers are made of.
func (b *book) addMaterials() error {
	set := b.in.Set
	s := b.planFixed(materialsSheet, len(set.Materials))
	l := &list[archetype.Material]{
		about: "conductivities that build-ups use",
		tab:   muted, title: "Materials",
		notes:  []string{"Design thermal conductivities that the layers of the build-ups use.", ""},
		frozen: 1, rows: len(set.Materials), table: "materials",
	}
	l.columns = []column[archetype.Material]{
		textColumn(b, "Material", "Material", 40, func(m *archetype.Material) string { return m.Name }),
		numberColumn(b, "", "Material", "Conductivity (W/(mK))", 14, three, 6, func(m *archetype.Material) float64 { return m.ConductivityWMK }),
		textColumn(b, "Material", "Source", 100, func(m *archetype.Material) string { return m.Source }),
	}
	l.load = func(i int, x *archetype.Material) { *x = set.Materials[i] }
	return addList(b, &s, l)
}

// transmittance is U of a build-up between ordinary surfaces, 0 where it has none
// of its own: on the ground, or where its layers do not lead to one.
func transmittance(bu *archetype.Buildup) float64 {
	rsi, rse := fabric.InsideResistance(bu.Direction), fabric.OutsideResistance(4)
	switch {
	case bu.BothInside:
		rse = rsi
	case bu.Element == "floor":
		return 0
	}
	t, err := fabric.Evaluate(rsi, bu.Layers, rse)
	if err != nil && !errors.Is(err, fabric.ErrUneven) {
		return 0
	}
	return t.UWM2K
}
