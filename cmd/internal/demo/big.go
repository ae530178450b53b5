package demo

import (
	"archive/zip"
	"errors"
	"fmt"
	"io"
	"math/rand/v2"
	"os"

	"github.com/klauspost/compress/flate"
	"github.com/xuri/excelize/v2"
)

// bigColumns are columns of the register without their holes, and a few more.
var bigColumns = func() []column {
	l := list{columns: registerColumns}
	var out []column
	for _, head := range []string{"Asset ID", "Name", "Street", "Postcode", "Town", "District", "Use", "Attachment", "Year built",
		"Windows renewed", "Roof renewed", "Heated floor area", "Storey height", "Storeys", "Window area", "Wall construction",
		"Roof type", "Basement", "Ventilation type", "Heating system", "Fuel", "Occupants", "Listed"} {
		c := l.columns[l.index(head)]
		c.hole /= 4
		switch c.unit {
		case "m", "m2":
			c.head += " (" + c.unit + ")"
		}
		out = append(out, c)
	}
	return append(out,
		column{"Volume (m3)", "", 0, 0.1, func(a *asset, _ *rand.Rand) any { return round(a.volumeM3(), 0) }},
		column{"Metered heat (kWh)", "", 0, 0.5, func(a *asset, _ *rand.Rand) any { return round(a.heatKWh, 0) }})
}()

// Big writes n buildings, clean but for holes, as one wide sheet of 25 columns:
// an input to measure speed with.
func Big(path string, n int, seed int64) (err error) {
	f := excelize.NewFile()
	defer func() { err = errors.Join(err, f.Close()) }()
	w, err := f.NewStreamWriter("Sheet1")
	if err != nil {
		return err
	}
	rng := rand.New(rand.NewPCG(uint64(seed), 1))
	row := make([]any, len(bigColumns))
	for i, c := range bigColumns {
		row[i] = c.head
	}
	if err := w.SetRow("A1", row); err != nil {
		return err
	}
	for i, a := range newStock(Options{Buildings: n, Seed: seed}) {
		for j, c := range bigColumns {
			row[j] = c.value(&a, rng)
			if rng.Float64() < c.hole {
				row[j] = nil
			}
		}
		if err := w.SetRow(fmt.Sprintf("A%d", i+2), row); err != nil {
			return err
		}
	}
	if err := w.Flush(); err != nil {
		return err
	}
	f.SetZipWriter(func(out io.Writer) excelize.ZipWriter {
		z := zip.NewWriter(out)
		z.RegisterCompressor(zip.Deflate, func(w io.Writer) (io.WriteCloser, error) { return flate.NewWriter(w, 2) })
		return z
	})
	out, err := os.Create(path)
	if err != nil {
		return err
	}
	if err := f.Write(out); err != nil {
		return errors.Join(err, out.Close())
	}
	return out.Close()
}
