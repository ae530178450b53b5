package store

import (
	"encoding/binary"
	"math"
	"reflect"
	"strings"
	"unicode"

	"github.com/jackc/pgx/v5/pgtype"

	"kelvinrow/estimate/result"
)

// The columns of run_building follow from the fields of result.Building and
// result.Measure, so that a new field without a column fails at once and none
// can be forgotten.
var (
	buildingFields = fieldsOf(reflect.TypeFor[result.Building]())
	measureFields  = fieldsOf(reflect.TypeFor[result.Measure]())

	buildingColumns = columnNames()
)

// field is one stored field of a struct.
type field struct {
	index int
	name  string
	kind  reflect.Kind
}

func fieldsOf(t reflect.Type) (fields []field) {
	for i := range t.NumField() {
		f := t.Field(i)
		// Measures have columns of their own; packages are made anew where wanted.
		if f.Type != reflect.TypeFor[[]result.Measure]() && f.Type != reflect.TypeFor[[]result.Package]() {
			fields = append(fields, field{i, f.Name, f.Type.Kind()})
		}
	}
	return fields
}

func columnNames() (names []string) {
	for _, f := range buildingFields {
		names = append(names, snake(f.name))
	}
	for _, f := range measureFields {
		names = append(names, "measure_"+snake(f.name))
	}
	return names
}

// snake turns FloorAreaM2 into floor_area_m2.
func snake(name string) string {
	r := []rune(strings.ReplaceAll(name, "KWh", "Kwh"))
	var b strings.Builder
	for i, c := range r {
		if i > 0 && unicode.IsUpper(c) && (!unicode.IsUpper(r[i-1]) || i+1 < len(r) && unicode.IsLower(r[i+1])) {
			b.WriteByte('_')
		}
		b.WriteRune(unicode.ToLower(c))
	}
	return b.String()
}

// buildingRows are the estimates of a run for COPY.
func buildingRows(portfolio string, run int, buildings []result.Building) *rows {
	var measures []reflect.Value
	return &rows{
		columns: append([]string{"portfolio", "run"}, buildingColumns...),
		n:       len(buildings),
		encode: func(e *encoder, i int) error {
			e.text(portfolio)
			e.integer(int32(run))
			b := &buildings[i]
			v := reflect.ValueOf(b).Elem()
			for _, f := range buildingFields {
				encodeScalar(e, v.Field(f.index), f.kind)
			}
			measures = measures[:0]
			for m := range b.Measures {
				measures = append(measures, reflect.ValueOf(&b.Measures[m]).Elem())
			}
			for _, f := range measureFields {
				if len(measures) == 0 {
					e.null() // a building that could not be estimated
					continue
				}
				e.array(elementOID(f.kind), len(measures), func(m int) {
					v := measures[m].Field(f.index)
					if f.kind != reflect.Bool && !b.Measures[m].Applies && v.IsZero() && !(v.CanFloat() && math.Signbit(v.Float())) {
						e.null() // takes no space
						return
					}
					encodeScalar(e, v, f.kind)
				})
			}
			return nil
		},
	}
}

func encodeScalar(e *encoder, v reflect.Value, kind reflect.Kind) {
	switch kind {
	case reflect.String:
		e.text(v.String())
	case reflect.Int:
		e.integer(int32(v.Int()))
	case reflect.Bool:
		e.boolean(v.Bool())
	case reflect.Uint64:
		e.bigint(int64(v.Uint()))
	case reflect.Array:
		e.array(pgtype.Float8OID, v.Len(), func(i int) { e.float(v.Index(i).Float()) })
	default:
		e.float(v.Float())
	}
}

func elementOID(kind reflect.Kind) uint32 {
	switch kind {
	case reflect.String:
		return pgtype.TextOID
	case reflect.Bool:
		return pgtype.BoolOID
	case reflect.Uint64:
		return pgtype.Int8OID
	}
	return pgtype.Float8OID
}

// decodeBuilding reads one row of buildingColumns.
func decodeBuilding(b *result.Building, raw [][]byte, interned map[string]string) error {
	v := reflect.ValueOf(b).Elem()
	for i, f := range buildingFields {
		if err := decodeScalar(v.Field(f.index), f.kind, raw[i], interned); err != nil {
			return err
		}
	}
	for i, f := range measureFields {
		err := elements(raw[len(buildingFields)+i], func(m, n int, element []byte) error {
			if b.Measures == nil {
				b.Measures = make([]result.Measure, n)
			}
			if n != len(b.Measures) {
				return errShape
			}
			return decodeScalar(reflect.ValueOf(&b.Measures[m]).Elem().Field(f.index), f.kind, element, interned)
		})
		if err != nil {
			return err
		}
	}
	return nil
}

func decodeScalar(v reflect.Value, kind reflect.Kind, raw []byte, interned map[string]string) error {
	if raw == nil {
		return nil
	}
	switch kind {
	case reflect.String:
		// Few words fill these columns, but for names and addresses, and even
		// those are the same from one run to the next.
		s, ok := interned[string(raw)]
		if !ok {
			s = string(raw)
			interned[s] = s
		}
		v.SetString(s)
		return nil
	case reflect.Array:
		return elements(raw, func(i, n int, element []byte) error {
			if i >= v.Len() {
				return nil // stored by a program that knew more of them
			}
			return decodeScalar(v.Index(i), reflect.Float64, element, interned)
		})
	}
	var x uint64
	switch len(raw) {
	case 1:
		x = uint64(raw[0])
	case 4:
		x = uint64(int64(int32(binary.BigEndian.Uint32(raw))))
	case 8:
		x = binary.BigEndian.Uint64(raw)
	default:
		return errShape
	}
	switch kind {
	case reflect.Int:
		v.SetInt(int64(x))
	case reflect.Bool:
		v.SetBool(x != 0)
	case reflect.Uint64:
		v.SetUint(x)
	default:
		v.SetFloat(math.Float64frombits(x))
	}
	return nil
}

// elements calls f with each element of a one-dimensional array in binary form.
func elements(raw []byte, f func(i, n int, element []byte) error) error {
	if len(raw) < 20 { // null, or empty: no dimensions
		return nil
	}
	n := int(binary.BigEndian.Uint32(raw[12:]))
	raw = raw[20:]
	for i := range n {
		if len(raw) < 4 {
			return errShape
		}
		size := int(int32(binary.BigEndian.Uint32(raw)))
		raw = raw[4:]
		if size > len(raw) {
			return errShape
		}
		var element []byte // nil is null
		if size >= 0 {
			element, raw = raw[:size], raw[size:]
		}
		if err := f(i, n, element); err != nil {
			return err
		}
	}
	return nil
}
