package cell

import "testing"

func TestParseStoreys(t *testing.T) {
	for in, want := range map[string]Storeys{
		"R+5": {Count: 6}, "RDC + 3": {Count: 4}, "r+2+c": {Count: 3, Attic: true}, "R + 4 + combles": {Count: 5, Attic: true}, "SS+R+2": {Count: 3, Below: true},
		"3-4": {Count: 3.5, Range: true}, "3 – 4": {Count: 3.5, Range: true}, "2 bis 3 Geschosse": {Count: 2.5, Range: true}, "3 to 5 storeys": {Count: 4, Range: true}, "3/4": {Count: 3.5, Range: true}, "II-III": {Count: 2.5, Range: true},
		"2 + DG": {Count: 2, Attic: true}, "2+D": {Count: 2, Attic: true}, "II+D": {Count: 2, Attic: true}, "2 1/2": {Count: 2.5}, "2½": {Count: 2.5}, "3 Geschosse + ausgebautes Dachgeschoss": {Count: 3, Attic: true},
		"II": {Count: 2}, "iv": {Count: 4}, "XII": {Count: 12},
		"EG+2": {Count: 3}, "EG + 2 OG": {Count: 3}, "EG+2OG+DG": {Count: 3, Attic: true}, "KG+EG+1.OG+2.OG": {Count: 3, Below: true}, "UG, EG, OG, DG": {Count: 2, Below: true, Attic: true}, "E+2": {Count: 3},
		"G+4": {Count: 5}, "ground + 2 upper floors": {Count: 3}, "basement + 3": {Count: 3, Below: true}, "3 storeys and attic": {Count: 3, Attic: true},
		"bg + 2": {Count: 3}, "begane grond + 2 verdiepingen + zolder": {Count: 3, Attic: true}, "PB+3": {Count: 4}, "planta baja + 3 plantas + ático": {Count: 4, Attic: true},
		"3 plan + vind": {Count: 3, Attic: true}, "3 våningar och källare": {Count: 3, Below: true}, "st + 2 + tagetage": {Count: 3, Attic: true}, "3 etg": {Count: 3}, "zweigeschossig": {}, "2-geschossig": {Count: 2}, "5 vollgeschosse": {Count: 5},
		"many": {}, "4-2": {}, "1/9": {}, "R+": {Count: 1}, "DG": {}, "R+500": {}, "1965": {}, "2026-04-03": {}, "12 flats": {}, "0-0": {}, "0": {},
	} {
		got, st := ParseStoreys(in)
		if got != want || (st == OK) != (want.Count > 0) {
			t.Errorf("%q: %+v %d, want %+v", in, got, st, want)
		}
	}
	for _, in := range []string{"", "?", "n/a"} {
		if _, st := ParseStoreys(in); st != Absent {
			t.Errorf("%q: %d", in, st)
		}
	}
}
