package store

import (
	"context"
	"encoding/binary"
	"errors"
	"fmt"
	"math"
	"strings"

	"github.com/jackc/pgx/v5"
	"github.com/jackc/pgx/v5/pgtype"

	"kelvinrow/estimate/building"
	"kelvinrow/ingest/finding"
)

// NotFoundError says that a portfolio has no such building, and which ids are
// like it.
type NotFoundError struct {
	Portfolio, ID string
	Near          []string
}

func (e *NotFoundError) Error() string {
	s := fmt.Sprintf("portfolio %q has no building %q", e.Portfolio, e.ID)
	if len(e.Near) > 0 {
		s += "; there are: " + strings.Join(e.Near, ", ")
	}
	return s
}

// Count returns how many buildings a portfolio has.
func (s *Store) Count(ctx context.Context, portfolio string) (n int, err error) {
	err = s.within(ctx, portfolio, true, func(tx pgx.Tx) error {
		return tx.QueryRow(ctx, "select count(distinct building) from kelvinrow.record where portfolio = $1", portfolio).Scan(&n)
	})
	return n, err
}

// Buildings yields the buildings of a portfolio in byte order of their ids, each
// merged from all records about it.
func (s *Store) Buildings(ctx context.Context, portfolio string, yield func(*building.Building) error) error {
	return s.within(ctx, portfolio, true, func(tx pgx.Tx) error {
		var group []building.Record
		flush := func() error {
			if len(group) == 0 {
				return nil
			}
			err := yield(building.Merge(group[0].Building, group))
			group = group[:0]
			return err
		}
		err := records(ctx, tx, portfolio, "", func(r building.Record) error {
			if len(group) > 0 && group[0].Building != r.Building {
				if err := flush(); err != nil {
					return err
				}
			}
			group = append(group, r)
			return nil
		})
		if err != nil {
			return err
		}
		return flush()
	})
}

// Building returns one building and the records it is merged from; a
// *NotFoundError where there is none.
func (s *Store) Building(ctx context.Context, portfolio, id string) (*building.Building, []building.Record, error) {
	var found []building.Record
	var near []string
	err := s.within(ctx, portfolio, true, func(tx pgx.Tx) error {
		err := records(ctx, tx, portfolio, id, func(r building.Record) error {
			found = append(found, r)
			return nil
		})
		if err != nil || len(found) > 0 {
			return err
		}
		rows, err := tx.Query(ctx, `select distinct building from kelvinrow.record
			where portfolio = $1 and (lower(building) = lower($2) or building like $3) order by building limit 5`,
			portfolio, id, likePrefix(id))
		if err != nil {
			return err
		}
		near, err = pgx.CollectRows(rows, pgx.RowTo[string])
		return err
	})
	if err != nil {
		return nil, nil, err
	}
	if len(found) == 0 {
		return nil, nil, &NotFoundError{portfolio, id, near}
	}
	return building.Merge(id, found), found, nil
}

// likePrefix matches ids that begin like the given one, less its last letters.
func likePrefix(id string) string {
	r := []rune(id)
	r = r[:max(1, len(r)-2)]
	if len(id) == 0 {
		return ""
	}
	return strings.NewReplacer(`\`, `\\`, `%`, `\%`, `_`, `\_`).Replace(string(r)) + "%"
}

// records reads the records of a portfolio, or of one building of it, in order
// of building, sheet and row.
func records(ctx context.Context, tx pgx.Tx, portfolio, id string, yield func(building.Record) error) error {
	sheets, err := readSheets(ctx, tx, portfolio)
	if err != nil {
		return err
	}
	columns := []string{"building", "sheet", "row_number", "survey_date", "kind", "other_kinds"}
	for f := range building.NumFields {
		columns = append(columns, fieldColumns(building.Field(f))...)
	}
	query := "select " + strings.Join(columns, ", ") + " from kelvinrow.record where portfolio = $1"
	args := []any{pgx.QueryResultFormatsByOID{
		pgtype.TextOID: pgx.BinaryFormatCode, pgtype.TextArrayOID: pgx.BinaryFormatCode, pgtype.Float8OID: pgx.BinaryFormatCode, pgtype.BoolOID: pgx.BinaryFormatCode,
		pgtype.Int2OID: pgx.BinaryFormatCode, pgtype.Int4OID: pgx.BinaryFormatCode, pgtype.Int8OID: pgx.BinaryFormatCode,
	}, portfolio}
	if id != "" {
		query += " and building = $2"
		args = append(args, id)
	}
	rows, err := tx.Query(ctx, query+" order by building, sheet, row_number", args...)
	if err != nil {
		return err
	}
	defer rows.Close()
	d := decoder{types: tx.Conn().TypeMap(), sheets: sheets, interned: map[string]string{}}
	for rows.Next() {
		r, err := d.record(rows.RawValues())
		if err != nil {
			return fmt.Errorf("read a record: %w", err)
		}
		if err := yield(r); err != nil {
			return err
		}
	}
	return rows.Err()
}

func readSheets(ctx context.Context, tx pgx.Tx, portfolio string) (map[int64]*building.Sheet, error) {
	rows, err := tx.Query(ctx, `select h.sheet, h.load, s.file, h.name, h.file_date, h.columns
		from kelvinrow.sheet h join kelvinrow.source s using (portfolio, source) where portfolio = $1`, portfolio)
	if err != nil {
		return nil, err
	}
	sheets := map[int64]*building.Sheet{}
	sh, columns := &building.Sheet{}, map[string]string{}
	_, err = pgx.ForEachRow(rows, []any{&sh.ID, &sh.LoadID, &sh.File, &sh.Name, &sh.FileDate, &columns}, func() error {
		c := *sh
		for key, letters := range columns {
			if f, ok := building.FieldByKey(key); ok {
				c.Columns[f] = letters
			}
		}
		clear(columns)
		sheets[c.ID] = &c
		return nil
	})
	return sheets, err
}

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

// Findings returns what the loads of a portfolio found, in order of place.
func (s *Store) Findings(ctx context.Context, portfolio string) (out []finding.Finding, err error) {
	err = s.within(ctx, portfolio, true, func(tx pgx.Tx) error {
		rows, err := tx.Query(ctx, `select severity, check_name, file, sheet, row_number, column_letters, field, building, raw, message, fix
			from kelvinrow.finding where portfolio = $1 order by source, number`, portfolio)
		if err != nil {
			return err
		}
		var f finding.Finding
		var severity string
		_, err = pgx.ForEachRow(rows, []any{&severity, &f.Check, &f.File, &f.Sheet, &f.Row, &f.Column, &f.Field, &f.Building, &f.Raw, &f.Text, &f.Fix}, func() error {
			f.Severity, _ = finding.SeverityByWord(severity) // the table checks it
			out = append(out, f)
			return nil
		})
		return err
	})
	finding.Sort(out)
	return out, err
}

// Sources lists the files loaded into a portfolio, by name.
func (s *Store) Sources(ctx context.Context, portfolio string) (out []Source, err error) {
	err = s.within(ctx, portfolio, true, func(tx pgx.Tx) error {
		rows, err := tx.Query(ctx, `select file, file_date, bytes, load from kelvinrow.source where portfolio = $1 order by file collate "C"`, portfolio)
		if err != nil {
			return err
		}
		out, err = pgx.CollectRows(rows, pgx.RowToStructByPos[Source])
		return err
	})
	return out, err
}
