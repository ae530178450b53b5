package climate

import (
	"bytes"
	_ "embed"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"math"
	"slices"
	"strconv"
	"strings"
)

// starterTable is one row per place and month. The first place is the default.
//
//go:embed starter/climates.csv
var starterTable []byte

var starterColumns = []string{
	"name", "month", "hours", "outdoor_c", "wind_10m_m_s", "horizontal_kwh_m2",
	"latitude_deg", "altitude_m", "design_outdoor_c", "terrain", "source",
}

// Starter returns the climates that ship with the program, of invented places
// from a mild coast to a cold inland, with their vertical planes filled. The
// first is the default. The slice is the caller's own.
func Starter() ([]Climate, error) {
	climates, err := readTable(bytes.NewReader(starterTable))
	if err != nil {
		return nil, fmt.Errorf("starter climates: %w", err)
	}
	return climates, nil
}

func readTable(r io.Reader) ([]Climate, error) {
	rows := csv.NewReader(r)
	rows.Comment = '#'
	header, err := rows.Read()
	if err != nil {
		return nil, fmt.Errorf("header: %w", err)
	}
	if !slices.Equal(header, starterColumns) {
		return nil, fmt.Errorf("columns are %q, not %q", header, starterColumns)
	}
	var climates []Climate
	month := 12
	for {
		row, err := rows.Read()
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil {
			return nil, err
		}
		line, _ := rows.FieldPos(0)
		if month == 12 {
			c, err := placeOf(row)
			if err != nil {
				return nil, fmt.Errorf("line %d: %w", line, err)
			}
			climates, month = append(climates, c), 0
		}
		c := &climates[len(climates)-1]
		month++
		if row[0] != c.Name || row[1] != strconv.Itoa(month) {
			return nil, fmt.Errorf("line %d: %s month %s, where %s month %d is due", line, row[0], row[1], c.Name, month)
		}
		var p numbers
		c.Months[month-1] = Month{
			Hours:           p.number(row, 2),
			OutdoorC:        p.number(row, 3),
			Wind10M:         p.number(row, 4),
			HorizontalKWhM2: p.number(row, 5),
		}
		if p.err != nil {
			return nil, fmt.Errorf("line %d: %w", line, p.err)
		}
	}
	if month != 12 {
		return nil, fmt.Errorf("%s ends with month %d", climates[len(climates)-1].Name, month)
	}
	for i := range climates {
		climates[i].FillVertical()
		if err := climates[i].Validate(); err != nil {
			return nil, fmt.Errorf("%s: %w", climates[i].Name, err)
		}
	}
	return climates, nil
}

func placeOf(row []string) (Climate, error) {
	var p numbers
	c := Climate{
		Name:           row[0],
		LatitudeDeg:    p.number(row, 6),
		AltitudeM:      p.number(row, 7),
		DesignOutdoorC: p.number(row, 8),
		Source:         row[10],
	}
	if p.err != nil {
		return c, p.err
	}
	terrain, ok := ParseTerrain(row[9])
	if !ok {
		return c, fmt.Errorf("terrain: %q is not one of %s", row[9], strings.Join(terrainWords[:], ", "))
	}
	c.Terrain = terrain
	return c, nil
}

// numbers reads the number columns of a row and keeps the first slip.
type numbers struct{ err error }

func (p *numbers) number(row []string, column int) float64 {
	x, err := parseNumber(row[column])
	if err != nil && p.err == nil {
		p.err = fmt.Errorf("%s: %w", starterColumns[column], err)
	}
	return x
}

// parseNumber reads a finite number.
func parseNumber(text string) (float64, error) {
	x, err := strconv.ParseFloat(strings.TrimSpace(text), 64)
	if err != nil || math.IsNaN(x) || math.IsInf(x, 0) {
		return 0, fmt.Errorf("%q is not a number", text)
	}
	return x, nil
}

// TerrainWords lists the words of the terrains.
func TerrainWords() []string { return slices.Clone(terrainWords[:]) }

// ParseTerrain returns the terrain of a word, whatever its case.
func ParseTerrain(word string) (Terrain, bool) {
	i := slices.Index(terrainWords[:], strings.ToLower(strings.TrimSpace(word)))
	if i < 0 {
		return 0, false
	}
	return Terrain(i), true
}
