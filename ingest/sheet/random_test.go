package sheet

import (
	"math/rand/v2"
	"slices"
	"strings"
	"testing"
)

// pieces of sheets, as programs write them and as they do not.
var pieces = strings.Split(`<worksheet>|</worksheet>|<sheetData>|</sheetData>|<row>|<row r="7">|<x:row r='9' spans="1:3">|<row r="12"/>|</row>|</x:row>|`+
	`<c>|<c r="B7">|<c r="D9" s="1" t="s">|<c t="str">|<c t="inlineStr">|<c t="b" >|<c t="e">|<c t="d">|<c s="2"/>|<c r="C7"><v>3</v></c>|<c t="s"><v>2</v></c>|<c t="inlineStr"><is><t>d</t></is></c>|`+
	`<c t="inlineStr"><is><t xml:space="preserve"> e</t></is></c>|<c><f>A1</f><v>4</v></c>|</c>|<v>|</v>|<v/>|<is>|</is>|<t>|</t>|<r>|</r>|<rPh>|</rPh>|<f>|</f>|<extLst>|</extLst>|<a b="c">|</a>|`+
	`1|0.5|1e3| |x|&amp;|&#65;|&|]]>|]]|<![CDATA[y]]>|<![CDATA[|<!-- z -->|<!--|<?p q?>|<|>|"|`+"\r\n|\r|\x00|\xc3|ä", "|")

// harmless is what may stand in most places.
var harmless = strings.Split(`<!-- z -->|<?p q?>| |&#10;|<a b="c"/>|<extLst><v>9</v></extLst>|<c><v>3</v></c>|<c t="s"><v>0</v></c>|`+"\r\n", "|")

const regular = `<worksheet>|<sheetData>|<row>|<c t="str">|<v>|x|</v>|</c>|<c r="B1">|<v>|1|</v>|</c>|</row>|<row r="7">|<c t="inlineStr">|<is>|<r>|<t>|y|</t>|</r>|</is>|</c>|<c>|<f>|A1|</f>|<v>|0.5|</v>|</c>|</row>|</sheetData>|</worksheet>`

// Sheets of which some pieces are lost, doubled, swapped or strange are read as
// the standard library reads them, or refused.
func TestRandomSheets(t *testing.T) {
	rng := rand.New(rand.NewPCG(7, 11))
	whole := strings.Split(regular, "|")
	believed := 0
	var part []byte
	defer func() {
		if t.Failed() {
			t.Logf("the last was %s", part)
		}
	}()
	for range 5000 {
		p := slices.Clone(whole)
		for range 1 + rng.IntN(2) {
			i := rng.IntN(len(p))
			switch rng.IntN(8) {
			case 0:
				p = slices.Delete(p, i, i+1)
			case 1:
				p = slices.Insert(p, i, p[i])
			case 2:
				j := rng.IntN(len(p))
				p[i], p[j] = p[j], p[i]
			case 3:
				p = slices.Insert(p, i, pieces[rng.IntN(len(pieces))])
			default:
				p = slices.Insert(p, i, harmless[rng.IntN(len(harmless))])
			}
		}
		part = []byte(strings.Join(p, ""))
		if _, _, err := ownRows(part, someTexts(), oneBlock); err == nil {
			believed++
		}
		checkSheet(t, part)
	}
	if believed < 500 || believed > 4500 {
		t.Errorf("%d believed, which tries one side only", believed)
	}
}
