// Package demo writes the spreadsheets of an invented landlord, with the holes
// and the dirt that real ones have.
//
// Everything is invented: landlord, towns, streets, people. The same options
// make the same bytes. Behind the spreadsheets stands one hidden, physically
// consistent stock of buildings; each department knows a part of it, in its own
// language and layout, and of a date of its own.
package demo

import (
	"fmt"
	"math/rand/v2"
	"path/filepath"
)

// Landlord is the invented owner of the portfolio.
const Landlord = "Marrowfen Homes and Halls"

// Options says what portfolio to write.
type Options struct {
	Buildings int   // 0 is 2000
	Seed      int64 // another seed makes another portfolio
}

// Write writes the spreadsheets into dir, which must exist, and returns their
// paths in the order in which they should be loaded.
func Write(dir string, opt Options) ([]string, error) {
	if opt.Buildings == 0 {
		opt.Buildings = 2000
	}
	if opt.Buildings < 0 {
		return nil, fmt.Errorf("%d buildings: give at least 1", opt.Buildings)
	}
	stock := newStock(opt)
	var paths []string
	for i, d := range departments {
		// A stream of its own keeps a department's file the same whatever the
		// others do.
		rng := rand.New(rand.NewPCG(uint64(opt.Seed), uint64(i+1)))
		path := filepath.Join(dir, d.file)
		if err := d.write(path, stock, rng); err != nil {
			return nil, fmt.Errorf("write %s: %w", path, err)
		}
		paths = append(paths, path)
	}
	return paths, nil
}

// departments in the order in which their files should be loaded.
var departments = []struct {
	file  string
	write func(path string, stock []asset, rng *rand.Rand) error
}{
	{"technik-gebaeudeliste-2023-09-30.xlsx", writeTechnical},
	{"ecoles-eglises-2024-06-03.csv", writeBureau},
	{"estates-register-2025-01-15.xlsx", writeRegister},
	{"energy-controlling-2025-03-10.xlsx", writeEnergy},
	{"fonsterbyten-2025-04-22.csv", writeWindows},
	{"survey-results-2025-06-30.xlsx", writeSurvey},
}

// held says which departments hold a building's data.
type held struct {
	register, technical, bureau, energy, windows, survey bool
}

// maxFiles is how many files a building appears in at most.
const maxFiles = 3

// assign decides who holds data of a. Exactly one department is responsible,
// so that every building is known with its size to somebody.
func (a *asset) assign(rng *rand.Rand) {
	h := &a.held
	switch {
	case a.use.public():
		h.bureau = true
	case a.town.technical:
		h.technical = true
	default:
		h.register = true
		h.technical = rng.Float64() < 0.18
	}
	n := 1
	if h.register && h.technical {
		n = 2
	}
	more := func(share float64, flag *bool) {
		if rng.Float64() < share && n < maxFiles {
			*flag = true
			n++
		}
	}
	more(0.05, &h.survey)
	metered := 0.3
	if a.floorAreaM2 > 400 {
		metered = 0.75
	}
	more(metered, &h.energy)
	if a.yearWindows >= 2005 {
		more(0.6, &h.windows)
	}
}
