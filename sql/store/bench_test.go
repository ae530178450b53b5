package store

import (
	"context"
	"fmt"
	"testing"

	"github.com/jackc/pgx/v5"

	"kelvinrow/estimate/building"
	"kelvinrow/estimate/result"
	"kelvinrow/sql/dbtest"
)

// The benchmarks report how many times longer than a bare COPY of the same rows,
// encoded beforehand, into a table without keys storing takes: seconds differ
// from machine to machine, ratios hardly.

func setupBenchmark(b *testing.B) *Store {
	b.Helper()
	s, err := Open(context.Background(), dbtest.URL(b))
	must(b, err)
	b.Cleanup(s.Close)
	return s
}

// benchmarkRecords are like a register's rows: some thirty fields each.
func benchmarkRecords(n int) []building.Record {
	records := make([]building.Record, n)
	for i := range records {
		r := &records[i]
		r.Building, r.Row = fmt.Sprintf("B-%06d", i), i+2
		for f := building.Name; f <= building.WindowU; f++ {
			v := building.Value{Field: f, Kind: building.Registered}
			switch f.Info().Type {
			case building.Text:
				v.Text = fmt.Sprintf("%s %d", f, i%1000)
			case building.Word:
				v.Text = building.Words(f)[i%len(building.Words(f))]
			case building.Number:
				v.Number = float64(i%1000) / 3
			case building.Year:
				v.Low, v.High, v.Number = 1950, 1959, 1954.5
			}
			r.Values = append(r.Values, v)
		}
	}
	return records
}

func BenchmarkLoad(b *testing.B) {
	for _, n := range []int{1000, 100_000} {
		b.Run(fmt.Sprint("records=", n), func(b *testing.B) {
			if n > 1000 && testing.Short() {
				b.Skip("-short")
			}
			s := setupBenchmark(b)
			records := benchmarkRecords(n)
			b.ResetTimer()
			for i := range b.N {
				load(b, s, fmt.Sprint("p", i), "a.csv", 1, records...)
			}
			b.StopTimer()
			seconds := b.Elapsed().Seconds() / float64(b.N)
			floor, err := s.CopyFloor(context.Background(), "p0")
			must(b, err)
			b.ReportMetric(float64(n)/seconds, "records/s")
			b.ReportMetric(seconds/floor, "x-copy")
		})
	}
}

// benchmarkBuildings are estimates of which two measures in three apply.
func benchmarkBuildings(n, measures int) []result.Building {
	out := make([]result.Building, n)
	for i := range out {
		b := &out[i]
		*b = result.Building{
			ID: fmt.Sprintf("B-%06d", i), Name: "a name", Street: fmt.Sprint("Street ", i), Postcode: "12345", Town: "a town",
			Use: "apartment block", Attachment: "detached", Ventilation: "natural", Heating: "boiler", Carrier: "gas",
			YearBuilt: 1955, FloorAreaM2: 812.5 + float64(i), NeedKWh: 1e5 / 3, DeliveredKWh: 1e5 / 7, Measures: make([]result.Measure, measures),
		}
		for p := range b.LossByPathKWh {
			b.LossByPathKWh[p] = float64(i*p) / 3
		}
		for m := range b.Measures {
			x := float64(i+m) / 7
			if (i+m)%3 == 0 {
				b.Measures[m] = result.Measure{Reason: "there is no such thing in this building"}
				continue
			}
			b.Measures[m] = result.Measure{
				Applies: true, Quantity: x, Cost: 100 * x, NeedSavingKWh: x / 3, CarrierAfter: "gas", HeatBeforeKWh: x * 3, HeatAfterKWh: x * 2,
				SavingKWh: x * 1.1, CO2Kg: x / 9, MoneyPerYear: x / 11, NPV: -x / 13, PaybackYears: x / 17, CostOfSavedKWh: x / 19, Cautions: 5,
			}
		}
	}
	return out
}

func BenchmarkSaveRun(b *testing.B) {
	for _, n := range []int{1000, 100_000} {
		b.Run(fmt.Sprint("buildings=", n), func(b *testing.B) {
			if n > 1000 && testing.Short() {
				b.Skip("-short")
			}
			s := setupBenchmark(b)
			load(b, s, "p", "a.csv", 1, area("A", 2, 1))
			run := &result.Run{Portfolio: "p", Measures: make([]string, 14), Buildings: n}
			buildings := benchmarkBuildings(n, len(run.Measures))
			b.ResetTimer()
			for range b.N {
				must(b, s.SaveRun(context.Background(), run, nil, buildings, nil))
			}
			b.StopTimer()
			seconds := b.Elapsed().Seconds() / float64(b.N)
			var copied float64
			must(b, s.within(context.Background(), "p", false, func(tx pgx.Tx) (err error) {
				copied, err = floor(context.Background(), tx, "run_building", buildingRows("p", 1, buildings))
				return err
			}))
			var bytes float64
			must(b, s.conn.QueryRow(context.Background(), "select pg_total_relation_size('kelvinrow.run_building')").Scan(&bytes))
			b.ReportMetric(float64(n)/seconds, "buildings/s")
			b.ReportMetric(seconds/copied, "x-copy")
			b.ReportMetric(bytes/float64(b.N*n), "B/building")
		})
	}
}

func BenchmarkReadRun(b *testing.B) {
	for _, n := range []int{1000, 100_000} {
		b.Run(fmt.Sprint("buildings=", n), func(b *testing.B) {
			if n > 1000 && testing.Short() {
				b.Skip("-short")
			}
			s := setupBenchmark(b)
			load(b, s, "p", "a.csv", 1, area("A", 2, 1))
			run := &result.Run{Portfolio: "p", Measures: make([]string, 14), Buildings: n}
			must(b, s.SaveRun(context.Background(), run, nil, benchmarkBuildings(n, len(run.Measures)), nil))
			b.ResetTimer()
			for range b.N {
				_, _, err := s.Run(context.Background(), "p", run.Number)
				must(b, err)
			}
			b.ReportMetric(float64(n*b.N)/b.Elapsed().Seconds(), "buildings/s")
		})
	}
}

func BenchmarkReadBuildings(b *testing.B) {
	const n = 20_000
	s := setupBenchmark(b)
	load(b, s, "p", "a.csv", 1, benchmarkRecords(n)...)
	b.ResetTimer()
	for range b.N {
		must(b, s.Buildings(context.Background(), "p", func(*building.Building) error { return nil }))
	}
	b.ReportMetric(float64(n*b.N)/b.Elapsed().Seconds(), "buildings/s")
}
