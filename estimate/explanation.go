package estimate

// Explanation is everything that went into one building's numbers and came out
// of them, in full precision: enough for another program to recompute it.
// Unknown values are absent.
type Explanation struct {
	Building        string             `json:"building"`
	Portfolio       string             `json:"portfolio"`
	Run             int                `json:"run,omitempty"`
	Version         string             `json:"version"`
	Assumptions     string             `json:"assumptions"`
	Climate         ClimateDoc         `json:"climate"`
	Inputs          []InputDoc         `json:"inputs"`
	Notes           []string           `json:"notes,omitempty"`
	State           StateDoc           `json:"state"`
	HeatingNeedKWh  float64            `json:"heating_need_kwh_a"`
	DeliveredKWh    float64            `json:"delivered_kwh_a"`
	FansKWh         float64            `json:"fans_kwh_a"`
	LossByPathKWh   PathDoc            `json:"loss_by_path_kwh_a"`
	Infiltration    DriverDoc          `json:"infiltration_by_driver_kwh_a"`
	DesignHeatLoadW float64            `json:"design_heat_load_w"`
	CO2Kg           float64            `json:"co2_kg_a"`
	MoneyPerYear    float64            `json:"money_a"`
	InputShare      map[string]float64 `json:"input_share"`
	Cautions        []string           `json:"cautions"`
	Measures        []MeasureDoc       `json:"measures"`
	Packages        []PackageDoc       `json:"packages"`
}

// PackageDoc is one package of measures: of those that save energy, one that no other
// beats in both cost and saving.
type PackageDoc struct {
	Measures      []string `json:"measures"` // keys; none is to do nothing
	Cost          float64  `json:"cost"`
	UpkeepPerYear float64  `json:"upkeep_a"`
	CompanionM3H  *float64 `json:"companion_ventilation_m3_h,omitempty"`
	NeedKWh       float64  `json:"need_kwh_a"`
	SavingKWh     float64  `json:"saving_kwh_a"`
	CO2Kg         float64  `json:"co2_kg_a"`
	MoneyPerYear  float64  `json:"money_a"`
	NPV           float64  `json:"npv"` // over the calculation period
	Cautions      []string `json:"cautions"`
}

// ClimateDoc is the climate used.
type ClimateDoc struct {
	Name           string            `json:"name"`
	LatitudeDeg    float64           `json:"latitude_deg"`
	AltitudeM      float64           `json:"altitude_m"`
	DesignOutdoorC float64           `json:"design_outdoor_c"`
	Terrain        string            `json:"terrain"`
	Months         []ClimateMonthDoc `json:"months"`
}

// ClimateMonthDoc is one month of the climate.
type ClimateMonthDoc struct {
	Hours           float64     `json:"hours"`
	OutdoorC        float64     `json:"outdoor_c"`
	Wind10M         float64     `json:"wind_10m_m_s"`
	HorizontalKWhM2 float64     `json:"horizontal_kwh_m2"`
	VerticalKWhM2   VerticalDoc `json:"vertical_kwh_m2"`
}

// VerticalDoc is irradiation on the four vertical planes.
type VerticalDoc struct {
	North float64 `json:"north"`
	East  float64 `json:"east"`
	South float64 `json:"south"`
	West  float64 `json:"west"`
}

// InputDoc is one input with its origin.
type InputDoc struct {
	Field  string    `json:"field"`
	Value  any       `json:"value"`
	From   float64   `json:"from,omitempty"` // years: first of the span
	To     float64   `json:"to,omitempty"`
	Unit   string    `json:"unit,omitempty"`
	Kind   string    `json:"kind"`
	Source SourceDoc `json:"source"`
}

// SourceDoc says where an input came from: a cell, or a rule.
type SourceDoc struct {
	File   string   `json:"file,omitempty"`
	Sheet  string   `json:"sheet,omitempty"`
	Row    int      `json:"row,omitempty"`
	Column string   `json:"column,omitempty"`
	Date   string   `json:"date,omitempty"`
	Rule   string   `json:"rule,omitempty"`
	Note   string   `json:"note,omitempty"`
	Low    *float64 `json:"low,omitempty"`
	High   *float64 `json:"high,omitempty"`
}

// PathDoc is a loss by path.
type PathDoc struct {
	Wall         float64 `json:"wall"`
	Roof         float64 `json:"roof"`
	Floor        float64 `json:"floor"`
	Window       float64 `json:"window"`
	Door         float64 `json:"door"`
	Bridge       float64 `json:"bridge"`
	Infiltration float64 `json:"infiltration"`
	Fans         float64 `json:"fans"`
	Airing       float64 `json:"airing"`
}

// DriverDoc splits the infiltration of PathDoc between stack and wind, in proportion
// to their driving terms.
type DriverDoc struct {
	Stack float64 `json:"stack"`
	Wind  float64 `json:"wind"`
}

// MeasureDoc is one measure on the building.
type MeasureDoc struct {
	Measure        string    `json:"measure"`
	Label          string    `json:"label"`
	Applies        bool      `json:"applies"`
	Reason         string    `json:"reason"`
	Quantity       *float64  `json:"quantity,omitempty"`
	Unit           string    `json:"unit,omitempty"`
	CompanionM3H   *float64  `json:"companion_ventilation_m3_h,omitempty"`
	Cost           *float64  `json:"cost,omitempty"`
	UpkeepPerYear  *float64  `json:"upkeep_a,omitempty"`
	SavingKWh      *float64  `json:"saving_kwh_a,omitempty"`
	NeedSavingKWh  *float64  `json:"need_saving_kwh_a,omitempty"`
	CO2Kg          *float64  `json:"co2_kg_a,omitempty"`
	MoneyPerYear   *float64  `json:"money_a,omitempty"`
	NPV            *float64  `json:"npv,omitempty"`
	PaybackYears   *float64  `json:"payback_a,omitempty"`            // absent: never
	DiscountedA    *float64  `json:"discounted_payback_a,omitempty"` // at level prices; absent: never
	AnnuityA       *float64  `json:"annuity_a,omitempty"`            // of the cost over its life
	CostOfSavedKWh *float64  `json:"cost_of_saved_kwh,omitempty"`
	Cautions       []string  `json:"cautions"`
	State          *StateDoc `json:"state,omitempty"`
}

// StateDoc is one state with its balance.
type StateDoc struct {
	FloorAreaM2     float64      `json:"floor_area_m2"`
	VolumeM3        float64      `json:"volume_m3"`
	Storeys         float64      `json:"storeys"`
	IndoorC         float64      `json:"indoor_c"`
	InternalGainWM2 float64      `json:"internal_gain_w_m2"`
	CapacityJK      float64      `json:"capacity_j_k"`
	SetpointShare   float64      `json:"setpoint_share"`
	Elements        []ElementDoc `json:"elements"`
	BridgeUWM2K     float64      `json:"bridge_u_w_m2k"`
	BridgeWK        float64      `json:"bridge_w_k"`
	TransmissionWK  float64      `json:"transmission_w_k"`
	Air             AirDoc       `json:"air"`
	Balance         []BalanceDoc `json:"balance"`
	NeedKWh         float64      `json:"need_kwh_a"`
	System          SystemDoc    `json:"system"`
}

// ElementDoc is one element of the envelope.
type ElementDoc struct {
	Kind        string     `json:"kind"`
	Name        string     `json:"name"`
	AreaM2      float64    `json:"area_m2"`
	UWM2K       float64    `json:"u_w_m2k"`
	Adjustment  float64    `json:"adjustment"`
	RsiM2KW     *float64   `json:"rsi_m2k_w,omitempty"`
	RseM2KW     *float64   `json:"rse_m2k_w,omitempty"`
	Layers      []LayerDoc `json:"layers,omitempty"`
	UpperM2KW   *float64   `json:"resistance_upper_m2k_w,omitempty"` // layers of two materials
	LowerM2KW   *float64   `json:"resistance_lower_m2k_w,omitempty"`
	RelativeErr *float64   `json:"relative_error,omitempty"`
	Correction  *float64   `json:"correction_w_m2k,omitempty"` // for air gaps and fixings; within u_w_m2k and the layers' resistances
	Ground      *GroundDoc `json:"ground,omitempty"`
	Orientation string     `json:"orientation,omitempty"`
	G           *float64   `json:"g,omitempty"`
	FrameShare  *float64   `json:"frame_share,omitempty"`
	Shading     *float64   `json:"shading,omitempty"`
	TempFactor  *float64   `json:"temperature_factor,omitempty"` // f_Rsi at Rsi 0.25
}

// LayerDoc is one layer. ResistanceM2KW is such that Rsi, the layers and Rse add
// up to 1/U also where a layer has two materials, gaps or fixings.
type LayerDoc struct {
	Name                  string   `json:"name"`
	ThicknessM            *float64 `json:"thickness_m,omitempty"`
	ConductivityWMK       *float64 `json:"conductivity_w_mk,omitempty"`
	ResistanceM2KW        float64  `json:"resistance_m2k_w"`
	BridgeShare           *float64 `json:"bridge_share,omitempty"`
	BridgeConductivityWMK *float64 `json:"bridge_conductivity_w_mk,omitempty"`
	Gaps                  string   `json:"air_gaps,omitempty"`
	FixingsPerM2          *float64 `json:"fixings_per_m2,omitempty"`
	FixingM2              *float64 `json:"fixing_section_m2,omitempty"`
	FixingWMK             *float64 `json:"fixing_conductivity_w_mk,omitempty"`
}

// GroundDoc is what the ground model used.
type GroundDoc struct {
	PerimeterM            float64  `json:"perimeter_m"`
	WallThicknessM        float64  `json:"wall_thickness_m"`
	FloorResistanceM2KW   float64  `json:"floor_resistance_m2k_w"`
	GroundConductivityWMK float64  `json:"ground_conductivity_w_mk"`
	AreaM2                float64  `json:"area_m2"`
	FloorUWM2K            *float64 `json:"suspended_floor_u_w_m2k,omitempty"`
	VoidHeightM           *float64 `json:"void_height_m,omitempty"`
	VentAreaM2M           *float64 `json:"vent_area_m2_m,omitempty"`
	VoidWallUWM2K         *float64 `json:"void_wall_u_w_m2k,omitempty"`
	WindMS                *float64 `json:"void_wind_m_s,omitempty"`
	WindShelter           *float64 `json:"void_wind_shelter,omitempty"`
	BasementDepthM        *float64 `json:"basement_depth_m,omitempty"`
	WallResistanceM2KW    *float64 `json:"basement_wall_resistance_m2k_w,omitempty"`
}

// AirDoc is the air side of a state.
type AirDoc struct {
	Ventilation     string        `json:"ventilation"`
	N50PerH         float64       `json:"n50_per_h"`
	FlowExponent    float64       `json:"flow_exponent"`
	FlowCoefficient float64       `json:"flow_coefficient_m3_s_pa_n"`
	StackHeightM    float64       `json:"stack_height_m"`
	LeakageR        float64       `json:"leakage_r"`
	LeakageX        float64       `json:"leakage_x"`
	Shelter         float64       `json:"shelter"`
	EavesHeightM    float64       `json:"eaves_height_m"`
	WindFactor      float64       `json:"wind_factor"`
	SupplyM3H       float64       `json:"supply_m3_h"`
	ExtractM3H      float64       `json:"extract_m3_h"`
	HeatRecovery    float64       `json:"heat_recovery"`
	FanPowerWM3H    float64       `json:"fan_power_w_m3_h"`
	AiringM3H       float64       `json:"airing_m3_h"`
	StackDuctM3H    []float64     `json:"stack_duct_m3_h,omitempty"`
	StackDuctM2     *float64      `json:"stack_duct_m2,omitempty"`
	StackDuctCd     *float64      `json:"stack_duct_discharge,omitempty"`
	StackDuctM      *float64      `json:"stack_duct_height_m,omitempty"`
	MinimumM3H      float64       `json:"minimum_m3_h"`
	OutdoorAirM3H   float64       `json:"outdoor_air_mean_m3_h"` // mean over the hours of the year
	AirChangesPerH  float64       `json:"air_changes_mean_per_h"`
	UnderVentilated bool          `json:"under_ventilated"`
	Months          []AirMonthDoc `json:"months"`
}

// AirMonthDoc is one month of air flows.
type AirMonthDoc struct {
	WindMS          float64 `json:"wind_m_s"`
	StackM3H        float64 `json:"stack_m3_h"`
	WindM3H         float64 `json:"wind_m3_h"`
	InfiltrationM3H float64 `json:"infiltration_m3_h"`
	OutdoorAirM3H   float64 `json:"outdoor_air_m3_h"`
	HeatWK          float64 `json:"heat_w_k"`
	AirChangesPerH  float64 `json:"air_changes_per_h"`
}

// BalanceDoc is one month of the balance.
type BalanceDoc struct {
	LossKWh       float64 `json:"loss_kwh"`
	InternalKWh   float64 `json:"internal_kwh"`
	SolarKWh      float64 `json:"solar_kwh"`
	GainLossRatio float64 `json:"gain_loss_ratio"`
	TimeConstantH float64 `json:"time_constant_h"`
	Utilisation   float64 `json:"utilisation"`
	Intermittency float64 `json:"intermittency_factor"`
	NeedKWh       float64 `json:"need_kwh"`
}

// SystemDoc is how need becomes delivered energy.
type SystemDoc struct {
	Heating      string  `json:"heating"`
	Carrier      string  `json:"carrier"`
	Generation   float64 `json:"generation_efficiency"`
	Distribution float64 `json:"distribution_efficiency"`
	HotWaterKWh  float64 `json:"hot_water_kwh_a"`
	FanKWh       float64 `json:"fans_kwh_a"`
	DeliveredKWh float64 `json:"delivered_kwh_a"`
}
