package store

import (
	"encoding/binary"
	"errors"
	"fmt"
	"math"
	"strings"

	"github.com/jackc/pgx/v5"
	"github.com/jackc/pgx/v5/pgtype"

	"kelvinrow/estimate/building"
)

// decoder turns the binary columns of a record into values, without the
// reflection that scanning sixty columns of a million rows would cost.
type decoder struct {
	types    *pgtype.Map
	sheets   map[int64]*building.Sheet
	interned map[string]string
}

var errShape = errors.New("a column is not of the size its type has")

func (d *decoder) record(raw [][]byte) (building.Record, error) {
	r := building.Record{Building: string(raw[0])}
	if len(raw[1]) != 8 || len(raw[2]) != 4 {
		return r, errShape
	}
	sheet := int64(binary.BigEndian.Uint64(raw[1]))
	r.Sheet = d.sheets[sheet]
	if r.Sheet == nil {
		return r, fmt.Errorf("building %s: sheet %d is missing", r.Building, sheet)
	}
	r.Row = int(binary.BigEndian.Uint32(raw[2]))
	r.SurveyDate = d.intern(raw[3])
	kind, ok := building.KindByWord(d.intern(raw[4]))
	if !ok {
		return r, fmt.Errorf("building %s: kind %q is unknown", r.Building, raw[4])
	}
	n := 0
	for _, b := range raw[6:] {
		if b != nil {
			n++
		}
	}
	r.Values = make([]building.Value, 0, n)
	i := 6
	for f := range building.NumFields {
		v := building.Value{Field: building.Field(f), Kind: kind}
		b := raw[i]
		i++
		switch building.Field(f).Info().Type {
		case building.Text:
			v.Text = string(b)
		case building.Word:
			v.Text = d.intern(b)
		case building.Number:
			if b != nil && len(b) != 8 {
				return r, errShape
			}
			if b != nil {
				v.Number = math.Float64frombits(binary.BigEndian.Uint64(b))
			}
		case building.YesNo:
			if len(b) == 1 && b[0] != 0 {
				v.Number = 1
			}
		case building.Year:
			to := raw[i]
			i++
			if b == nil || to == nil {
				continue
			}
			if len(b) != 2 || len(to) != 2 {
				return r, errShape
			}
			v.Low = float64(int16(binary.BigEndian.Uint16(b)))
			v.High = float64(int16(binary.BigEndian.Uint16(to)))
			v.Number = (v.Low + v.High) / 2
		}
		if b != nil {
			r.Values = append(r.Values, v)
		}
	}
	return r, d.otherKinds(&r, raw[5])
}

// otherKinds applies the exceptions to the row's kind.
func (d *decoder) otherKinds(r *building.Record, raw []byte) error {
	if raw == nil {
		return nil
	}
	var others []string
	if err := d.types.Scan(pgtype.TextArrayOID, pgx.BinaryFormatCode, raw, &others); err != nil {
		return err
	}
	for _, o := range others {
		key, word, _ := strings.Cut(o, "=")
		f, ok1 := building.FieldByKey(key)
		k, ok2 := building.KindByWord(word)
		if !ok1 || !ok2 {
			return fmt.Errorf("building %s: kind %q is unknown", r.Building, o)
		}
		for i := range r.Values {
			if r.Values[i].Field == f {
				r.Values[i].Kind = k
			}
		}
	}
	return nil
}

// intern keeps one copy of each of the few words that fill a column.
func (d *decoder) intern(b []byte) string {
	if s, ok := d.interned[string(b)]; ok {
		return s
	}
	s := string(b)
	d.interned[s] = s
	return s
}
