package building

import (
	"encoding/binary"
	"hash"
	"math"
)

// WriteHash writes everything that an estimate can see of b to h: not where the
// values came from, but what they are and how firm.
func (b *Building) WriteHash(h hash.Hash) {
	var buf []byte
	text := func(s string) {
		buf = binary.LittleEndian.AppendUint32(buf, uint32(len(s)))
		buf = append(buf, s...)
	}
	text(b.ID)
	for i := range b.known {
		k := &b.known[i]
		text(k.Field.Key())
		buf = append(buf, byte(k.Kind))
		for _, v := range [...]float64{k.Number, k.Low, k.High} {
			buf = binary.LittleEndian.AppendUint64(buf, math.Float64bits(v))
		}
		text(k.Text)
	}
	h.Write(buf)
}
