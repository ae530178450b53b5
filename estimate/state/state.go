// Package state describes a building as the heat balance sees it: elements,
// air, heat sources and system. A retrofit measure turns one state into
// another; everything the balance uses is in here and nothing else.
package state

import (
	"kelvinrow/estimate/building"
	"kelvinrow/estimate/climate"
	"kelvinrow/estimate/fabric"
	"kelvinrow/estimate/ground"
)

// Path is a way by which heat leaves the building.
type Path uint8

const (
	Wall Path = iota
	Roof
	Floor
	Window
	Door
	Bridge
	Infiltration
	Fans
	Airing

	NumPaths = int(iota)
)

var pathWords = [NumPaths]string{
	"wall", "roof", "floor", "window", "door", "bridge", "infiltration", "fans", "airing",
}

func (p Path) String() string { return pathWords[p] }

// Element is a part of the envelope with one U-value.
type Element struct {
	Kind       Path // Wall, Roof, Floor, Window or Door
	Name       string
	AreaM2     float64
	UWM2K      float64 // thermal transmittance, W/(m2K)
	Adjustment float64 // b: 1 to outside air and to ground; less towards an unheated space

	// Where the U-value comes from layers: surface resistances and layers from
	// inside to outside. Layers is never changed in place: states share it.
	RsiM2KW, RseM2KW float64
	Layers           []fabric.Layer

	// Floors on the ground, ISO 13370.
	OnGround bool
	Ground   ground.Slab
	// Floors over a vented void and heated basements, with what the ground
	// model needs beside Ground; zero elsewhere.
	VoidHeightM, VentAreaM2M, VoidWallUWM2K float64
	VoidWindMS, VoidShelter                 float64 // wind at 10 m and its shielding factor f_w
	BasementDepthM                          float64

	// Windows.
	Orientation climate.Orientation
	G           float64 // total solar energy transmittance at normal incidence
	FrameShare  float64
	Shading     float64 // factor, 1 = unshaded
}

// Air is what decides the flows of outdoor air.
type Air struct {
	Ventilation  building.Ventilation
	N50PerH      float64 // air changes at 50 Pa, 1/h
	FlowExponent float64
	StackHeightM float64 // height connected by air
	LeakageR     float64 // share of leakage in floor and ceiling
	LeakageX     float64 // ceiling minus floor share
	Shelter      float64 // S: factor on wind at eaves height
	EavesHeightM float64
	WindFactor   float64 // wind at eaves height / wind at 10 m, before shelter
	SupplyM3H    float64
	ExtractM3H   float64
	HeatRecovery float64 // effective share, after reduction for frost and unit leakage
	FanPowerWM3H float64 // specific fan power, W per m3/h of each stream moved
	AiringM3H    float64
	StackDuctM2  float64 // opening area of passive stack ducts; 0 without
	StackDuctCd  float64
	StackDuctM   float64 // height of the ducts
	MinimumM3H   float64 // least outdoor airflow the use needs
}

// System turns heat need into delivered energy.
type System struct {
	Heating      string  // canonical word of building.HeatingSystem
	Carrier      string  // canonical word of building.CarrierField
	Generation   float64 // seasonal efficiency or, for heat pumps, seasonal performance factor
	Distribution float64 // efficiency of distribution and control
	HotWaterKWh  float64 // hot water need at the tap with its circulation, kWh/a; 0 where heated apart
}

// State is one state of one building.
type State struct {
	FloorAreaM2     float64
	VolumeM3        float64
	IndoorC         float64
	InternalGainWM2 float64
	CapacityJK      float64
	SetpointShare   float64 // f_hr: share of hours at the set-point; 1 = heated all the time
	Storeys         float64
	BridgeUWM2K     float64 // Delta U_tb over the envelope area
	Elements        []Element
	Air             Air
	System          System
}

// CopyInto makes into a copy of s whose elements can be changed without changing
// s. It reuses what memory into has: a run copies a state for every measure of
// every building.
func (s *State) CopyInto(into *State) {
	elements := append(into.Elements[:0], s.Elements...)
	*into = *s
	into.Elements = elements
}

// EnvelopeM2 is the envelope area, the area thermal bridges are lumped over.
func (s *State) EnvelopeM2() float64 {
	a := 0.0
	for i := range s.Elements {
		a += s.Elements[i].AreaM2
	}
	return a
}

// BridgeWK is the heat transfer by thermal bridges, W/K.
func (s *State) BridgeWK() float64 { return s.BridgeUWM2K * s.EnvelopeM2() }

// TransmissionWK returns heat transfer through the envelope by path, W/K;
// entries of air paths are zero. Their sum is H_tr (ISO 13789).
func (s *State) TransmissionWK() (byPath [NumPaths]float64) {
	for i := range s.Elements {
		e := &s.Elements[i]
		byPath[e.Kind] += e.Adjustment * e.UWM2K * e.AreaM2
	}
	byPath[Bridge] = s.BridgeWK()
	return byPath
}
