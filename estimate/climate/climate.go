// Package climate holds the monthly outdoor conditions a building is judged
// in, reads them from EPW files, and ships starter climates of invented places.
package climate

// Orientation is the side a vertical plane faces.
type Orientation uint8

const (
	North Orientation = iota
	East
	South
	West

	NumOrientations = int(iota)
)

var orientationWords = [NumOrientations]string{"north", "east", "south", "west"}

func (o Orientation) String() string { return orientationWords[o] }

// Month is one month of a climate.
type Month struct {
	Hours           float64                  // length of the month, h
	OutdoorC        float64                  // mean outdoor temperature, degrees C
	Wind10M         float64                  // mean wind speed at 10 m, m/s
	HorizontalKWhM2 float64                  // global irradiation on the horizontal, kWh/m2 in the month
	VerticalKWhM2   [NumOrientations]float64 // global irradiation on vertical planes, kWh/m2 in the month
}

// Climate is a typical year by months.
type Climate struct {
	Name           string
	Source         string
	LatitudeDeg    float64 // north positive
	AltitudeM      float64
	DesignOutdoorC float64 // design outdoor temperature for the heat load, degrees C
	Terrain        Terrain // terrain around the wind station's buildings, for the wind at eaves height
	Months         [12]Month
}

// Terrain is the roughness class by which wind at 10 m over open country is
// turned into wind at eaves height.
type Terrain uint8

const (
	Suburb Terrain = iota
	Open
	City

	NumTerrains = int(iota)
)

var terrainWords = [NumTerrains]string{"suburb", "open country", "city"}

func (t Terrain) String() string { return terrainWords[t] }
