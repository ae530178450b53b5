package archetype

import (
	"cmp"
	"crypto/sha256"
	"encoding/binary"
	"encoding/hex"
	"fmt"
	"hash"
	"math"
	"reflect"
	"slices"
)

// Hash returns a hash of the content of the whole set, in hex: equal content,
// equal hash. The order of rows in tables where it means nothing (materials,
// build-ups, rules, carriers) does not count; the order of measures, climates
// and layers does.
func (s *Set) Hash() string {
	c := *s
	c.Materials = sortedBy(s.Materials, func(m Material) string { return m.Name })
	c.Buildups = sortedBy(s.Buildups, func(b Buildup) string { return b.Name })
	c.Rules = sortedBy(s.Rules, func(r Rule) string { return r.ID })
	c.Carriers = sortedBy(s.Carriers, func(c Carrier) string { return c.Word })
	h := sha256.New()
	writeCanonical(h, reflect.ValueOf(c))
	return hex.EncodeToString(h.Sum(nil))
}

func sortedBy[T any](rows []T, key func(T) string) []T {
	out := slices.Clone(rows)
	slices.SortStableFunc(out, func(a, b T) int { return cmp.Compare(key(a), key(b)) })
	return out
}

// writeCanonical writes exported content in declaration order, every part with
// its length, so that different contents never write the same bytes. Walking by
// reflection takes in fields added later.
func writeCanonical(h hash.Hash, v reflect.Value) {
	var buf [8]byte
	word := func(x uint64) {
		binary.LittleEndian.PutUint64(buf[:], x)
		h.Write(buf[:])
	}
	switch v.Kind() {
	case reflect.String:
		word(uint64(v.Len()))
		h.Write([]byte(v.String()))
	case reflect.Float64, reflect.Float32:
		x := v.Float()
		if x == 0 {
			x = 0 // minus zero is the same content
		}
		word(math.Float64bits(x))
	case reflect.Int, reflect.Int8, reflect.Int16, reflect.Int32, reflect.Int64:
		word(uint64(v.Int()))
	case reflect.Uint, reflect.Uint8, reflect.Uint16, reflect.Uint32, reflect.Uint64:
		word(v.Uint())
	case reflect.Bool:
		if v.Bool() {
			word(1)
		} else {
			word(0)
		}
	case reflect.Slice, reflect.Array:
		word(uint64(v.Len()))
		for i := range v.Len() {
			writeCanonical(h, v.Index(i))
		}
	case reflect.Map:
		keys := v.MapKeys()
		slices.SortFunc(keys, func(a, b reflect.Value) int { return cmp.Compare(a.String(), b.String()) })
		word(uint64(len(keys)))
		for _, k := range keys {
			writeCanonical(h, k)
			writeCanonical(h, v.MapIndex(k))
		}
	case reflect.Struct:
		t := v.Type()
		for i := range v.NumField() {
			if t.Field(i).IsExported() {
				writeCanonical(h, v.Field(i))
			}
		}
	default:
		// A programmer's slip, met by the first test that hashes the set.
		panic(fmt.Sprintf("archetype: cannot hash a %s", v.Type()))
	}
}
