package archetype

import (
	"strings"
	"testing"
)

func TestOverride(t *testing.T) {
	s := starterSet(t)
	before := s.Hash()
	for _, a := range []string{
		"gas.price=0.14", "district heat.co2=0.08", "district-heat.price_rise=2%", "economics.discount_rate=0.02",
		"new-windows.unit_cost=700", "new-windows.u=1.2", "heat-generator.spf=2.1", "school.temperature=19",
	} {
		if err := s.Override(a); err != nil {
			t.Errorf("%s: %v", a, err)
		}
		if h := s.Hash(); h == before {
			t.Errorf("%s changes nothing", a)
		} else {
			before = h
		}
	}
	if err := s.Validate(); err != nil {
		t.Error(err)
	}
	if c, _ := s.Carrier("district heat"); c.PriceRise != 0.02 {
		t.Errorf("2%% is %g", c.PriceRise)
	}
	for a, want := range map[string]string{
		"gas": "NAME=NUMBER", "gas.price=dear": "NAME=NUMBER", "price=1": "names no quantity", "gass.price=1": `did you mean "gas"`,
		"gas.colour=1": "has no", "gas.price=NaN": "NAME=NUMBER",
	} {
		if err := s.Override(a); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%s: %v, want %q", a, err, want)
		}
	}
}
