package solar

import "math"

// GroundReflectance is the usual reflectance of snow-free ground (Liu and
// Jordan 1963).
const GroundReflectance = 0.2

// Vertical returns the month's global irradiation in kWh/m2 on vertical planes
// that face north, east, south and west, from that on the horizontal. month is
// 1 to 12; hours is the month's length; the planes are named by the compass in
// both hemispheres, so south of the equator it is the north plane that faces
// the sun.
//
// On the month's average day, with clearness K_T = H/H0, diffuse share f_d and
// the beam share D of BeamShare (normalised):
//
//	H_T = H (D + f_d/2 + rho/2)
//
// Beside the hours of a typical year of a North Sea coast, with isotropic sky,
// the year is 4 % low on the north, 7 % high on the south and 8 to 13 % high on
// west and east; the south is 14 to 38 % high from October to February, because
// that coast's sky is more diffuse than the correlation has it.
//
// East and west are equal: the representative day is symmetric about noon.
// Where K_T is above 0.8, the end of the correlation, the beam stays at what
// 0.8 gives and the rest counts as diffuse; so a polar month with little but
// twilight is all diffuse. Nothing falls on the planes where the horizontal is
// not positive or month or hours make no sense.
func Vertical(latitudeDeg float64, month int, hours float64, horizontalKWhM2, reflectance float64) (north, east, south, west float64) {
	n := AverageDay(month)
	if n == 0 || !(hours > 0) || !(horizontalKWhM2 > 0) || math.Abs(latitudeDeg) > 90 ||
		math.IsInf(horizontalKWhM2, 0) || math.IsInf(hours, 0) {
		return 0, 0, 0, 0
	}
	days := hours / 24
	s := pathOf(latitudeDeg, Declination(n))
	outside := days * ExtraterrestrialDay(latitudeDeg, n) / jouleKWh

	diffuse, beamed := horizontalKWhM2, 0.0 // all diffuse, and the global the beam share refers to
	diffuseShare := 1.0
	if sunRises(&s) && outside > 0 {
		clearness := horizontalKWhM2 / outside
		diffuseShare = DiffuseShare(clearness, s.ws/rad)
		beamed = math.Min(horizontalKWhM2, clearnessHigh*outside)
		diffuse = horizontalKWhM2 - (1-diffuseShare)*beamed
	}
	on := func(azimuthDeg float64) float64 {
		d := 0.0
		if beamed > 0 {
			d = s.beamShare(planeOf(90, azimuthDeg), diffuseShare, true)
		}
		return d*beamed + diffuse/2 + reflectance*horizontalKWhM2/2
	}
	east = on(-90)
	return on(180), east, on(0), east
}
