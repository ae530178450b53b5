// Package demo invents a landlord's portfolio and writes it as the departments
// of such a landlord would: several workbooks in several layouts and languages,
// half empty, with the dirt of years. All names in it are invented.
package demo

import (
	"bytes"
	"fmt"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strings"

	"github.com/xuri/excelize/v2"
	"golang.org/x/text/encoding/charmap"
)

// Landlord is the invented landlord.
const Landlord = "Marrowfen Homes and Halls"

// Options says how much to invent.
type Options struct {
	Buildings int   // 0 is 2000
	Seed      int64 // the same seed gives the same files, byte for byte
}

// Write writes the portfolio into dir and returns its files in the order they
// were made.
func Write(dir string, opt Options) ([]string, error) {
	if opt.Buildings <= 0 {
		opt.Buildings = 2000
	}
	w := &writer{dir: dir, all: stock(opt.Buildings, opt.Seed), r: rand.New(rand.NewPCG(uint64(opt.Seed), 0x64697274))}
	for _, write := range []func() error{w.register, w.technical, w.churches, w.windows, w.meters, w.survey} {
		if err := write(); err != nil {
			return nil, err
		}
	}
	return w.files, nil
}

type writer struct {
	dir   string
	all   []truth
	r     *rand.Rand
	files []string
}

// often is true with the given chance: for holes and dirt.
func (w *writer) often(chance float64) bool { return w.r.Float64() < chance }

// unless leaves a cell empty with the given chance.
func (w *writer) unless(chance float64, v any) any {
	if w.often(chance) {
		return nil
	}
	return v
}

func (w *writer) save(f *excelize.File, name string) error {
	path := filepath.Join(w.dir, name)
	w.files = append(w.files, path)
	if err := f.SaveAs(path); err != nil {
		return fmt.Errorf("write %s: %w", path, err)
	}
	return f.Close()
}

// table writes rows under a title on a sheet, in streaming mode.
func table(f *excelize.File, sheet, title string, rows [][]any) error {
	if _, err := f.NewSheet(sheet); err != nil {
		return err
	}
	s, err := f.NewStreamWriter(sheet)
	if err != nil {
		return err
	}
	if err := s.SetColWidth(1, 24, 15); err != nil {
		return err
	}
	at := 1
	if title != "" {
		if err := s.SetRow("A1", []any{title}); err != nil {
			return err
		}
		if err := s.MergeCell("A1", "F1"); err != nil {
			return err
		}
		at = 4
	}
	for i, row := range rows {
		if err := s.SetRow(fmt.Sprintf("A%d", at+i), row); err != nil {
			return err
		}
	}
	return s.Flush()
}

// spoil puts wrong things into a row of the register, a few in a thousand.
func (w *writer) spoil(row []any, area int) []any {
	switch x := w.r.Float64(); {
	case x < 0.003:
		row[0] = nil // no id
	case x < 0.006:
		if v, ok := row[area].(float64); ok {
			row[area] = -v
		}
	case x < 0.010:
		row[area] = "see plan"
	case x < 0.020:
		if v, ok := row[area].(float64); ok {
			row[area] = fmt.Sprintf("approx. %.0f", v)
		}
	case x < 0.026:
		if v, ok := row[area].(float64); ok {
			row[area] = fmt.Sprintf("%.1f m²", v)
		}
	case x < 0.030:
		row[area] = "n/a"
	}
	return row
}

// year writes a year as offices do.
func (w *writer) year(y int) any {
	switch x := w.r.Float64(); {
	case x < 0.06:
		return nil
	case x < 0.08:
		return fmt.Sprintf("c. %d", y)
	case x < 0.12 && y < 1919:
		return "before 1919"
	case x < 0.16:
		return fmt.Sprintf("%d-%02d", y/10*10, y/10*10%100+9)
	case x < 0.162:
		return 9999
	}
	return y
}

const square = 0.09290304 // m2 per ft2, exact

// register is the estates department's list: the spine of the portfolio.
func (w *writer) register() error {
	f := excelize.NewFile()
	head := []any{"Object no.", "Name", "Street", "Postcode", "Town", "District", "Use", "Attachment", "Year built",
		"Heated floor area", "Volume", "Storeys", "Wall construction", "Roof type", "Ground floor", "Ventilation", "Heating system", "Energy carrier", "Listed building", "Facade must stay"}
	units := []any{nil, nil, nil, nil, nil, nil, nil, nil, nil, "m2", "m3", nil, nil, nil, nil, nil, nil, nil, "yes/no", "yes/no"}
	const area = 9
	sheets := map[string][][]any{}
	names := []string{"Houses", "Apartment blocks", "Other buildings", "Outlying houses"}
	for _, n := range names {
		sheets[n] = [][]any{head, units}
	}
	feet := append([]any{}, units...)
	feet[9], feet[10] = "sq ft", "cu ft"
	sheets["Outlying houses"][1] = feet
	for i := range w.all {
		t := &w.all[i]
		if church(t) {
			continue
		}
		sheet := "Other buildings"
		switch {
		case t.use.IsHouse() && t.town == "Ombermouth":
			sheet = "Outlying houses"
		case t.use.IsHouse():
			sheet = "Houses"
		case t.use.IsHousing():
			sheet = "Apartment blocks"
		}
		row := []any{t.id, w.unless(0.1, t.name), t.street, t.postcode, t.town, t.district, t.use.String(),
			w.unless(0.3, t.attachment.String()), w.year(t.year), t.areaM2, w.unless(0.55, t.volumeM3), w.unless(0.15, t.storeys),
			w.unless(0.5, t.wall), w.unless(0.4, t.roof), w.unless(0.6, t.floor), w.unless(0.35, english[t.ventilation]),
			w.unless(0.2, t.heating), w.unless(0.2, t.carrier), w.unless(0.3, yesNo(t.listed)), w.unless(0.5, yesNo(t.facadeStays))}
		if t.name == "" {
			row[1] = nil
		}
		if sheet == "Outlying houses" {
			row[9] = float64(int(t.areaM2 / square))
			if v, ok := row[10].(float64); ok {
				row[10] = float64(int(v / 0.028316846592))
			}
		}
		row = w.spoil(row, area)
		sheets[sheet] = append(sheets[sheet], row)
		if w.often(0.002) {
			double := append([]any{}, row...)
			double[area] = t.areaM2 + 40
			sheets[sheet] = append(sheets[sheet], double)
		}
	}
	for _, n := range names {
		if err := table(f, n, Landlord+" - estates register, "+strings.ToLower(n)+", state 2025-11-03", sheets[n]); err != nil {
			return err
		}
	}
	notes := [][]any{{"Notes"}, {"Areas are from the rent roll."}, {"Ask the technical department about volumes."}}
	if err := table(f, "Read me", "", notes); err != nil {
		return err
	}
	if err := f.DeleteSheet("Sheet1"); err != nil {
		return err
	}
	return w.save(f, "estates-register.xlsx")
}

func church(t *truth) bool {
	switch t.use.String() {
	case "church", "school", "nursery":
		return true
	}
	return false
}

func yesNo(b bool) string { return map[bool]string{true: "yes", false: "no"}[b] }

// windows is a list of the works department: tab-separated, ids and years.
func (w *writer) windows() error {
	var b bytes.Buffer
	b.WriteString("Building no.\tWindows renewed\tGlazing\n")
	for i := range w.all {
		if t := &w.all[i]; t.windowYear > t.year && w.often(0.5) {
			fmt.Fprintf(&b, "%s\t%d\t%s\n", t.id, t.windowYear, t.glazing)
		}
	}
	return w.write("window-works.tsv", b.Bytes())
}

func (w *writer) write(name string, content []byte) error {
	path := filepath.Join(w.dir, name)
	w.files = append(w.files, path)
	return os.WriteFile(path, content, 0o644)
}

// churches is a semicolon file in French and Windows-1252, as an old database
// exports it.
func (w *writer) churches() error {
	var b strings.Builder
	b.WriteString("N° bâtiment;Désignation;Rue;Ville;Usage;Année de construction;Surface chauffée (m²);Volume (m³);Niveaux;Ventilation;Monument historique\r\n")
	for i := range w.all {
		t := &w.all[i]
		if !church(t) {
			continue
		}
		volume := comma(t.volumeM3)
		if w.often(0.3) {
			volume = "?"
		}
		protected := map[bool]string{true: "oui", false: "non"}[t.listed]
		fmt.Fprintf(&b, "%s;%s;%s;%s;%s;%d;%s;%s;%g;%s;%s\r\n", t.id, t.name, t.street, t.town, french[t.use.String()], t.year,
			comma(t.areaM2), volume, t.storeys, frenchVentilation[t.ventilation], protected)
	}
	enc, err := charmap.Windows1252.NewEncoder().String(b.String())
	if err != nil {
		return err
	}
	return w.write("ecoles-eglises.csv", []byte(enc))
}

func comma(v float64) string { return strings.Replace(fmt.Sprintf("%.1f", v), ".", ",", 1) }
