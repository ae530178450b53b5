package archetype

import (
	"testing"

	"kelvinrow/estimate/building"
)

func starterSet(t testing.TB) *Set {
	t.Helper()
	s, err := Starter()
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// constructionsOf returns the words a property is looked up with.
func constructionsOf(info PropertyInfo) []string {
	if info.ByConstruction {
		return building.Words(info.ConstructionField)
	}
	return []string{""}
}

func TestEveryStarterRuleAnswersSomewhere(t *testing.T) {
	s := starterSet(t)
	answers := map[string]bool{}
	for _, info := range Properties() {
		for _, c := range append(constructionsOf(info), "") {
			for u := range building.Use(building.NumUses) {
				for a := range building.Attachment(building.NumAttachments) {
					for y := firstYear; y <= lastYear; y++ {
						if r, ok := s.Find(info.Property, Key{Use: u, Attachment: a, Year: y, Construction: c}); ok {
							answers[r.ID] = true
						}
					}
				}
			}
		}
	}
	for _, r := range s.Rules {
		if !answers[r.ID] {
			t.Errorf("rule %q never answers: another one hides it", r.ID)
		}
	}
}
