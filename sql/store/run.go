package store

import (
	"context"
	"fmt"
	"reflect"
	"strings"
	"unicode"

	"github.com/jackc/pgx/v5"

	"kelvinrow/estimate/result"
)

// SaveRun stores a run and gives it its number: the next of its portfolio. It is
// there whole or not at all: publish, if not nil, is called when everything is
// written and the number is known, and its error undoes the run.
func (s *Store) SaveRun(ctx context.Context, run *result.Run, buildings []result.Building, publish func() error) error {
	return s.within(ctx, run.Portfolio, false, func(tx pgx.Tx) error {
		// The portfolio's row is the lock under which numbers are given.
		if _, err := tx.Exec(ctx, "select from kelvinrow.portfolio where portfolio = $1 for update", run.Portfolio); err != nil {
			return err
		}
		var number int
		err := tx.QueryRow(ctx, `insert into kelvinrow.run
			(portfolio, run, ran_at, version, climate, assumptions, inputs, yardstick, seed, measures, buildings, failed, files)
			select $1, coalesce((select max(run) from kelvinrow.run where portfolio = $1), 0) + 1, $2, $3, $4, $5, $6, $7, $8, $9, $10, $11, $12
			returning run`,
			run.Portfolio, run.Time, run.Version, run.Climate, run.Assumptions, run.Inputs, run.Yardstick, run.Seed,
			list(run.Measures), run.Buildings, run.Failed, list(run.Files)).Scan(&number)
		if err != nil {
			return err
		}
		columns := append([]string{"portfolio", "run"}, buildingColumns...)
		row := make([]any, len(columns))
		row[0], row[1] = run.Portfolio, int32(number)
		rows := pgx.CopyFromSlice(len(buildings), func(i int) ([]any, error) {
			encode(&buildings[i], len(run.Measures), row[2:])
			return row, nil
		})
		if _, err := s.copyInto(ctx, tx, "run_building", columns, rows); err != nil {
			return err
		}
		run.Number = number
		if publish == nil {
			return nil
		}
		return publish()
	})
}

func list(s []string) []string {
	if s == nil {
		return []string{}
	}
	return s
}

const runColumns = "portfolio, run, ran_at, version, climate, assumptions, inputs, yardstick, seed, measures, buildings, failed, files"

func scanRun(row pgx.CollectableRow) (r result.Run, err error) {
	err = row.Scan(&r.Portfolio, &r.Number, &r.Time, &r.Version, &r.Climate, &r.Assumptions, &r.Inputs, &r.Yardstick,
		&r.Seed, &r.Measures, &r.Buildings, &r.Failed, &r.Files)
	r.Time = r.Time.UTC()
	return r, err
}

// Runs lists the runs of a portfolio, oldest first.
func (s *Store) Runs(ctx context.Context, portfolio string) (out []result.Run, err error) {
	err = s.within(ctx, portfolio, true, func(tx pgx.Tx) error {
		rows, err := tx.Query(ctx, "select "+runColumns+" from kelvinrow.run where portfolio = $1 order by run", portfolio)
		if err != nil {
			return err
		}
		out, err = pgx.CollectRows(rows, scanRun)
		return err
	})
	return out, err
}

// Run reads one run back, its buildings in byte order of their ids.
func (s *Store) Run(ctx context.Context, portfolio string, number int) (*result.Run, []result.Building, error) {
	var run result.Run
	var buildings []result.Building
	err := s.within(ctx, portfolio, true, func(tx pgx.Tx) error {
		rows, err := tx.Query(ctx, "select "+runColumns+" from kelvinrow.run where portfolio = $1 and run = $2", portfolio, number)
		if err != nil {
			return err
		}
		if run, err = pgx.CollectExactlyOneRow(rows, scanRun); err != nil {
			return fmt.Errorf("run %d of portfolio %q: %w", number, portfolio, err)
		}
		rows, err = tx.Query(ctx, "select "+strings.Join(buildingColumns, ", ")+
			" from kelvinrow.run_building where portfolio = $1 and run = $2 order by id", portfolio, number)
		if err != nil {
			return err
		}
		buildings, err = pgx.CollectRows(rows, func(row pgx.CollectableRow) (b result.Building, err error) {
			targets, finish := decode(&b)
			if err := row.Scan(targets...); err != nil {
				return b, err
			}
			finish()
			return b, nil
		})
		return err
	})
	if err != nil {
		return nil, nil, err
	}
	return &run, buildings, nil
}

// The columns of run_building follow from the fields of result.Building and
// result.Measure, so that a new field without a column fails at once and none
// can be forgotten.
var (
	buildingType    = reflect.TypeFor[result.Building]()
	measureType     = reflect.TypeFor[result.Measure]()
	buildingColumns = columnNames()
)

func columnNames() (names []string) {
	for i := range buildingType.NumField() {
		if f := buildingType.Field(i); f.Name != "Measures" {
			names = append(names, snake(f.Name))
		}
	}
	for i := range measureType.NumField() {
		names = append(names, "measure_"+snake(measureType.Field(i).Name))
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

// encode fills the columns of one building.
func encode(b *result.Building, measures int, row []any) {
	v := reflect.ValueOf(b).Elem()
	n := 0
	for i := range buildingType.NumField() {
		if buildingType.Field(i).Name == "Measures" {
			continue
		}
		row[n] = columnValue(v.Field(i))
		n++
	}
	for i := range measureType.NumField() {
		if len(b.Measures) == 0 {
			row[n] = nil // a building that could not be estimated
			n++
			continue
		}
		switch measureType.Field(i).Type.Kind() {
		case reflect.Bool:
			row[n] = column(b, i, measures, reflect.Value.Bool)
		case reflect.String:
			row[n] = column(b, i, measures, func(f reflect.Value) string { return clean(f.String()) })
		case reflect.Uint64:
			row[n] = column(b, i, measures, func(f reflect.Value) int64 { return int64(f.Uint()) })
		default:
			row[n] = column(b, i, measures, reflect.Value.Float)
		}
		n++
	}
}

func column[T any](b *result.Building, field, measures int, get func(reflect.Value) T) []T {
	out := make([]T, measures)
	for m := range out {
		out[m] = get(reflect.ValueOf(&b.Measures[m]).Elem().Field(field))
	}
	return out
}

func columnValue(f reflect.Value) any {
	switch f.Kind() {
	case reflect.String:
		return clean(f.String())
	case reflect.Int:
		return int32(f.Int())
	case reflect.Bool:
		return f.Bool()
	case reflect.Uint64:
		return int64(f.Uint())
	case reflect.Array:
		out := make([]float64, f.Len())
		for i := range out {
			out[i] = f.Index(i).Float()
		}
		return out
	}
	return f.Float()
}

// decode returns where to scan one row, and what to do afterwards.
func decode(b *result.Building) (targets []any, finish func()) {
	v := reflect.ValueOf(b).Elem()
	var after []func()
	for i := range buildingType.NumField() {
		f := v.Field(i)
		switch {
		case buildingType.Field(i).Name == "Measures":
		case f.Kind() == reflect.Array:
			var in []float64
			targets = append(targets, &in)
			after = append(after, func() {
				for j := range min(len(in), f.Len()) {
					f.Index(j).SetFloat(in[j])
				}
			})
		case f.Kind() == reflect.Uint64:
			var in int64
			targets = append(targets, &in)
			after = append(after, func() { f.SetUint(uint64(in)) })
		default:
			targets = append(targets, f.Addr().Interface())
		}
	}
	for i := range measureType.NumField() {
		switch measureType.Field(i).Type.Kind() {
		case reflect.Bool:
			targets, after = measureColumn(b, i, targets, after, reflect.Value.SetBool)
		case reflect.String:
			targets, after = measureColumn(b, i, targets, after, reflect.Value.SetString)
		case reflect.Uint64:
			targets, after = measureColumn(b, i, targets, after, func(f reflect.Value, x int64) { f.SetUint(uint64(x)) })
		default:
			targets, after = measureColumn(b, i, targets, after, reflect.Value.SetFloat)
		}
	}
	return targets, func() {
		for _, f := range after {
			f()
		}
	}
}

func measureColumn[T any](b *result.Building, field int, targets []any, after []func(), set func(reflect.Value, T)) ([]any, []func()) {
	var in []T
	return append(targets, &in), append(after, func() {
		if b.Measures == nil && len(in) > 0 {
			b.Measures = make([]result.Measure, len(in))
		}
		for m := range in {
			set(reflect.ValueOf(&b.Measures[m]).Elem().Field(field), in[m])
		}
	})
}
