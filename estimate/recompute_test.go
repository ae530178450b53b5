package estimate

import (
	"encoding/json"
	"fmt"
	"math"
	"testing"
)

// doc is an explanation as another program would read it.
type doc = map[string]any

func num(t *testing.T, d any, path ...any) float64 {
	t.Helper()
	v := at(t, d, path...)
	f, ok := v.(float64)
	if !ok {
		t.Fatalf("%v is %T, want a number", path, v)
	}
	return f
}

func opt(d any, key string) float64 {
	f, _ := d.(doc)[key].(float64)
	return f
}

func at(t *testing.T, d any, path ...any) any {
	t.Helper()
	for _, p := range path {
		switch p := p.(type) {
		case string:
			m, ok := d.(doc)
			if !ok || m[p] == nil {
				t.Fatalf("%v: no %q", path, p)
			}
			d = m[p]
		case int:
			d = d.([]any)[p]
		}
	}
	return d
}

func near(t *testing.T, what string, got, want float64) {
	t.Helper()
	// Full precision travels through JSON; what is left is the rounding of a
	// different order of the same operations.
	if math.Abs(got-want) > 1e-9*math.Max(1, math.Abs(want)) {
		t.Errorf("%s: the explanation says %.12g, recomputed %.12g", what, got, want)
	}
}

// TestExplanationRecomputes recomputes every number of an explanation from its
// JSON alone, with formulas written out anew from the publications: ISO 6946,
// ISO 13370, Walker and Wilson (1998), ISO 13789 and ISO 13790.
func TestExplanationRecomputes(t *testing.T) {
	b := testBasis(t)
	for i, bl := range testBuildings() {
		e, err := b.Explain(bl)
		if err != nil {
			t.Fatalf("%s: %v", bl.ID, err)
		}
		raw, err := json.Marshal(e)
		if err != nil {
			t.Fatalf("%s: %v", bl.ID, err)
		}
		var d doc
		if err := json.Unmarshal(raw, &d); err != nil {
			t.Fatal(err)
		}
		t.Run(fmt.Sprint(i, bl.ID), func(t *testing.T) {
			recomputeState(t, d, d["state"])
			near(t, "need", num(t, d, "heating_need_kwh_a"), num(t, d, "state", "need_kwh_a"))
			near(t, "delivered", num(t, d, "delivered_kwh_a"), num(t, d, "state", "system", "delivered_kwh_a"))
			paths := 0.0
			for _, v := range at(t, d, "loss_by_path_kwh_a").(doc) {
				paths += v.(float64)
			}
			losses := 0.0
			for i := range 12 {
				losses += num(t, d, "state", "balance", i, "loss_kwh")
			}
			near(t, "losses by path add up", paths, losses)
			for _, m := range at(t, d, "measures").([]any) {
				if !at(t, m, "applies").(bool) {
					if at(t, m, "reason") == "" {
						t.Errorf("%v does not apply and does not say why", at(t, m, "measure"))
					}
					continue
				}
				recomputeState(t, d, at(t, m, "state"))
				near(t, "need saving", num(t, m, "need_saving_kwh_a"), num(t, d, "state", "need_kwh_a")-num(t, m, "state", "need_kwh_a"))
				saving := num(t, d, "state", "system", "delivered_kwh_a") - num(t, m, "state", "system", "delivered_kwh_a") +
					num(t, d, "state", "system", "fans_kwh_a") - num(t, m, "state", "system", "fans_kwh_a")
				near(t, "saving", num(t, m, "saving_kwh_a"), saving)
			}
		})
	}
}

func recomputeState(t *testing.T, d doc, s any) {
	t.Helper()
	ua, area := 0.0, 0.0
	aperture := map[string]float64{}
	for i := range at(t, s, "elements").([]any) {
		e := at(t, s, "elements", i)
		u := num(t, e, "u_w_m2k")
		ua += num(t, e, "adjustment") * u * num(t, e, "area_m2")
		area += num(t, e, "area_m2")
		what := fmt.Sprint("U of ", at(t, e, "kind"), " ", at(t, e, "name"))
		switch at(t, e, "kind") {
		case "window":
			aperture[at(t, e, "orientation").(string)] += num(t, e, "area_m2") * num(t, e, "g") * 0.9 * (1 - num(t, e, "frame_share")) * num(t, e, "shading")
		case "wall", "roof", "floor":
			layers := 0.0
			if l, ok := e.(doc)["layers"].([]any); ok {
				for i := range l {
					layers += num(t, l[i], "resistance_m2k_w")
				}
			}
			if g, ok := e.(doc)["ground"]; ok {
				near(t, what, u, groundU(t, e, g, layers))
			} else if layers > 0 {
				near(t, what, u, 1/(num(t, e, "rsi_m2k_w")+layers+num(t, e, "rse_m2k_w")))
			}
		}
	}
	bridge := num(t, s, "bridge_u_w_m2k") * area
	near(t, "bridges", num(t, s, "bridge_w_k"), bridge)
	near(t, "transmission", num(t, s, "transmission_w_k"), ua+bridge)

	air := at(t, s, "air")
	volume, indoor := num(t, s, "volume_m3"), num(t, s, "indoor_c")
	n := num(t, air, "flow_exponent")
	c := num(t, air, "n50_per_h") * volume / 3600 / math.Pow(50, n)
	near(t, "flow coefficient", num(t, air, "flow_coefficient_m3_s_pa_n"), c)
	need := 0.0
	for i := range 12 {
		cm := at(t, d, "climate", "months", i)
		am := at(t, air, "months", i)
		outdoor, hours := num(t, cm, "outdoor_c"), num(t, cm, "hours")
		wind := num(t, cm, "wind_10m_m_s") * num(t, air, "wind_factor")
		near(t, "wind", num(t, am, "wind_m_s"), wind)
		rho := 353 / (outdoor + 273.15)
		r, x := num(t, air, "leakage_r"), num(t, air, "leakage_x")
		dps := rho * 9.81 * num(t, air, "stack_height_m") * math.Abs(indoor-outdoor) / (indoor + 273.15)
		m := math.Min(1, x*x/(2-r))
		fs := (1 + n*r) / (n + 1) * math.Pow(0.5-0.5*math.Pow(m, 1.25), n+1)
		dpw := rho * math.Pow(num(t, air, "shelter")*wind, 2) / 2
		fw := 0.19 * (2 - n) * (1 - math.Pow((x+r)/2, 1.5))
		vs, vw := c*fs*math.Pow(dps, n), c*fw*math.Pow(dpw, n)
		inf := math.Pow(math.Pow(vs, 1/n)+math.Pow(vw, 1/n)-0.33*math.Pow(vs*vw, 1/(2*n)), n)
		near(t, "stack", num(t, am, "stack_m3_h"), vs*3600)
		near(t, "wind flow", num(t, am, "wind_m3_h"), vw*3600)
		near(t, "infiltration", num(t, am, "infiltration_m3_h"), inf*3600)
		supply, extract := num(t, air, "supply_m3_h"), num(t, air, "extract_m3_h")
		balanced, unbalanced := math.Min(supply, extract), math.Abs(supply-extract)
		root := math.Sqrt(unbalanced*unbalanced + inf*3600*inf*3600)
		rest := root + num(t, air, "airing_m3_h")
		if ducts, ok := air.(doc)["stack_duct_m3_h"].([]any); ok {
			rest += ducts[i].(float64)
			dp := math.Max(0, rho*9.81*opt(air, "stack_duct_height_m")*(indoor-outdoor)/(indoor+273.15))
			near(t, "duct", ducts[i].(float64), 3600*opt(air, "stack_duct_discharge")*opt(air, "stack_duct_m2")*math.Sqrt(2*dp/rho))
		}
		near(t, "outdoor air", num(t, am, "outdoor_air_m3_h"), balanced+rest)
		hve := 1200.0 / 3600 * (balanced*(1-num(t, air, "heat_recovery")) + rest)
		near(t, "heat by air", num(t, am, "heat_w_k"), hve)

		bm := at(t, s, "balance", i)
		h := ua + bridge + hve
		loss := h * (indoor - outdoor) * hours / 1000
		near(t, "loss", num(t, bm, "loss_kwh"), loss)
		internal := num(t, s, "internal_gain_w_m2") * num(t, s, "floor_area_m2") * hours / 1000
		near(t, "internal", num(t, bm, "internal_kwh"), internal)
		solar := 0.0
		for _, o := range []string{"north", "east", "south", "west"} {
			solar += aperture[o] * num(t, cm, "vertical_kwh_m2", o)
		}
		near(t, "solar", num(t, bm, "solar_kwh"), solar)
		tau := num(t, s, "capacity_j_k") / 3600 / h
		near(t, "time constant", num(t, bm, "time_constant_h"), tau)
		if loss <= 0 {
			near(t, "need of a warm month", num(t, bm, "need_kwh"), 0)
			continue
		}
		gamma := (internal + solar) / loss
		a := 1 + tau/15
		eta := (1 - math.Pow(gamma, a)) / (1 - math.Pow(gamma, a+1))
		near(t, "utilisation", num(t, bm, "utilisation"), eta)
		share := num(t, s, "setpoint_share")
		q := math.Max(0, loss-eta*(internal+solar)) * math.Min(1, math.Max(share, 1-3*(15/tau)*gamma*(1-share)))
		if got := num(t, bm, "need_kwh"); math.Abs(got-q) > 1e-6*math.Max(1, loss) {
			t.Errorf("need of month %d: the explanation says %g, recomputed %g", i+1, got, q)
		}
		need += num(t, bm, "need_kwh")
	}
	near(t, "need of the year", num(t, s, "need_kwh_a"), need)
	sys := at(t, s, "system")
	near(t, "delivered", num(t, sys, "delivered_kwh_a"), need/(num(t, sys, "generation_efficiency")*num(t, sys, "distribution_efficiency"))+
		num(t, sys, "hot_water_kwh_a")/num(t, sys, "generation_efficiency"))
}

// groundU is ISO 13370:2017 from the explanation alone.
func groundU(t *testing.T, e, g any, layers float64) float64 {
	t.Helper()
	lambda, w := num(t, g, "ground_conductivity_w_mk"), num(t, g, "wall_thickness_m")
	b := num(t, g, "area_m2") / (0.5 * num(t, g, "perimeter_m"))
	slab := func(dt, extra float64) float64 {
		x := dt + extra
		if x < b {
			return 2 * lambda / (math.Pi*b + x) * math.Log(math.Pi*b/x+1)
		}
		return lambda / (0.457*b + x)
	}
	rf := num(t, g, "floor_resistance_m2k_w")
	depth := opt(g, "basement_depth_m")
	switch {
	case at(t, e, "kind") == "wall":
		dt := w + lambda*(0.17+rf+0.04)
		dw := lambda * (0.13 + layers + 0.04)
		if dw < dt {
			dt = dw
		}
		return 2 * lambda / (math.Pi * depth) * (1 + 0.5*dt/(dt+depth)) * math.Log(depth/dw+1)
	case depth > 0:
		return slab(w+lambda*(0.17+rf+0.04), depth/2)
	case opt(g, "void_height_m") > 0:
		uf := 1 / (0.17 + layers + 0.17)
		ug := 2 * lambda
		dg := w + lambda*(0.17+0.17)
		ug = ug / (math.Pi*b + dg) * math.Log(math.Pi*b/dg+1)
		ux := 2*opt(g, "void_height_m")*opt(g, "void_wall_u_w_m2k")/b +
			1450*opt(g, "vent_area_m2_m")*opt(g, "void_wind_m_s")*opt(g, "void_wind_shelter")/b
		return 1 / (1/uf + 1/(ug+ux))
	}
	near(t, "floor resistance", rf, layers)
	return slab(w+lambda*(0.17+rf+0.04), 0)
}
