// Package result holds what an estimate says of a building, in the form that
// is stored, ranked and written to the workbook.
package result

import (
	"time"

	"kelvinrow/estimate/building"
	"kelvinrow/estimate/state"
)

// Caution is a warning that must stand beside a number. Its wording is in
// package caution; results carry only the set.
type Caution uint64

// Has reports whether all cautions of o are in c.
func (c Caution) Has(o Caution) bool { return c&o == o }

// Building is the estimate of one building.
type Building struct {
	ID                                     string
	Name, Street, Postcode, Town, District string
	Use, Attachment                        string // canonical words
	Ventilation, Heating, Carrier          string // canonical words as used, defaults included
	YearBuilt                              int    // middle of the span; 0 when unknown
	Failed                                 string // why no estimate could be made; then only identity is set

	FloorAreaM2, VolumeM3         float64
	UWall, URoof, UFloor, UWindow float64 // area-weighted, W/(m2K)
	N50PerH                       float64
	AirChangesPerH                float64 // annual mean of outdoor air, 1/h
	UnderVentilated               bool
	TransmissionWK                float64
	VentilationWK                 float64 // annual mean
	LossByPathKWh                 [state.NumPaths]float64
	GainsUsedKWh                  float64 // utilised solar and internal gains
	NeedKWh                       float64 // heating need
	DeliveredKWh                  float64 // carrier, heating and hot water
	FansKWh                       float64 // electricity of fans
	DesignLoadW                   float64
	CO2Kg                         float64
	MoneyPerYear                  float64 // at the run's prices
	MeteredKWh                    float64 // 0 when no usable meter

	// InputShare is the share of the inputs that matter (floor area, volume or
	// height, year, U-values, airtightness, ventilation, ...) by kind; sums to 1.
	InputShare [building.NumKinds]float64

	Cautions Caution
	Measures []Measure // parallel to Run.Measures
	Packages []Package // cheapest first, the first to do nothing; only where asked for, never stored
}

// Measure is what one measure does to one building.
type Measure struct {
	Applies bool
	Reason  string // why it does not apply, in words; "" when it applies

	Quantity          float64 // treated amount in the measure's unit (m2, m3/h, dwellings, ...)
	CompanionQuantity float64 // m3/h of ventilation it brings along; 0 = none
	Cost              float64 // investment, companion included
	UpkeepPerYear     float64

	NeedSavingKWh float64
	CarrierAfter  string  // canonical word; same as the building's unless the measure changes it
	HeatBeforeKWh float64 // delivered, in the building's carrier
	HeatAfterKWh  float64 // delivered, in CarrierAfter
	FansBeforeKWh float64
	FansAfterKWh  float64
	SavingKWh     float64 // delivered energy saved: heat and fans together
	CO2Kg         float64 // saved per year
	MoneyPerYear  float64 // saved per year at the run's prices, upkeep not deducted

	NPV             float64
	PaybackYears    float64 // simple; +Inf is "never"
	CostOfSavedKWh  float64 // +Inf where nothing is saved
	UnderVentilated bool    // after the measure
	Cautions        Caution
}

// Package is several measures carried out together on one building, the balance made
// again: savings of measures do not add up.
type Package struct {
	Set           uint64  // bit i is measure i of Run.Measures; 0 is to do nothing
	Cost          float64 // investment, ventilation brought along included
	UpkeepPerYear float64

	NeedKWh           float64 // after it
	CarrierAfter      string
	HeatAfterKWh      float64 // delivered, in CarrierAfter
	FansAfterKWh      float64
	CompanionQuantity float64 // m3/h of ventilation it brings along; 0 = none

	SavingKWh       float64 // delivered energy saved: heat and fans together
	CO2Kg           float64
	MoneyPerYear    float64
	NPV             float64 // over the calculation period, replacements and residual values in it
	UnderVentilated bool
	Cautions        Caution
}

// Run is one numbered estimate of a portfolio.
type Run struct {
	Portfolio   string
	Number      int
	Time        time.Time
	Version     string
	Climate     string
	Assumptions string // content hash of the assumptions, hex
	Inputs      string // content hash of the stored inputs, hex
	Yardstick   string
	Seed        int64
	Measures    []string // measure keys, in order; Building.Measures is parallel to it
	Buildings   int
	Failed      int
	Files       []string // source files in the store at that time
	Options     []byte   `json:"-"` // what else its workbook was written from, as the program keeps it
}
