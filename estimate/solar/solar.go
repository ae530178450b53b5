// Package solar turns monthly irradiation on the horizontal into irradiation on
// tilted and vertical planes by representative days.
//
// Sources: Cooper (1969) for the declination; Klein (1977) for the average day
// of each month; Erbs, Klein and Duffie (1982) for the monthly diffuse share;
// Collares-Pereira and Rabl (1979) and Liu and Jordan (1960, 1963) for the
// split over the day and the isotropic sky; Klein and Theilacker (1981) for the
// closed form. Notation follows Duffie and Beckman, Solar Engineering of
// Thermal Processes, chapters 1 and 2: phi latitude, delta declination, omega
// hour angle, omega_s sunset hour angle, beta slope, gamma azimuth, theta angle
// of incidence, theta_z zenith angle, K_T clearness.
//
// Angles are in degrees at the border of the package. Latitude is north
// positive; azimuth is 0 for a plane that faces south, west positive, in both
// hemispheres. Left out: horizon and neighbouring buildings, the brighter sky
// around the sun and at the horizon, and the refraction of the atmosphere.
package solar

import "math"

// ConstantWM2 is the solar constant G_sc, W/m2 (Duffie and Beckman, 1.2).
const ConstantWM2 = 1367.0

const (
	rad         = math.Pi / 180
	daySeconds  = 86400.0
	jouleKWh    = 3.6e6
	yearDays    = 365.0
	tiltAxisDeg = 23.45
)

// averageDays are the days of the year whose extraterrestrial irradiation comes
// nearest to the month's mean (Klein 1977).
var averageDays = [12]int{17, 47, 75, 105, 135, 162, 198, 228, 258, 288, 318, 344}

// AverageDay returns the day of the year that stands for a month, 1 to 12; 0
// for any other month.
func AverageDay(month int) int {
	if month < 1 || month > len(averageDays) {
		return 0
	}
	return averageDays[month-1]
}

// Declination returns the declination in degrees on a day of the year, 1 to
// 365: delta = 23.45 sin(360 (284 + n)/365).
//
// Source: Cooper (1969); within half a degree of the sun's true declination.
func Declination(day int) float64 {
	return tiltAxisDeg * math.Sin(2*math.Pi*float64(284+day)/yearDays)
}

// DistanceFactor returns the square of mean over actual distance to the sun on
// a day of the year: 1 + 0.033 cos(360 n/365).
func DistanceFactor(day int) float64 {
	return 1 + 0.033*math.Cos(2*math.Pi*float64(day)/yearDays)
}

// SunsetHourAngle returns omega_s in degrees, cos omega_s = -tan phi tan delta;
// 0 where the sun does not rise and 180 where it does not set.
func SunsetHourAngle(latitudeDeg, declinationDeg float64) float64 {
	c := -math.Tan(latitudeDeg*rad) * math.Tan(declinationDeg*rad)
	return math.Acos(clip(c, -1, 1)) / rad
}

// Extraterrestrial returns H0, the irradiation in J/m2 of a day on a horizontal
// plane outside the atmosphere, from declination, distance factor and solar
// constant in W/m2:
//
//	H0 = 86400 G_sc/pi E (cos phi cos delta sin omega_s + omega_s sin phi sin delta)
func Extraterrestrial(latitudeDeg, declinationDeg, distance, constantWM2 float64) float64 {
	p := pathOf(latitudeDeg, declinationDeg)
	return math.Max(0, daySeconds*constantWM2/math.Pi*distance*p.zenithIntegral()/2)
}

// ExtraterrestrialDay returns H0 in J/m2 on a day of the year.
func ExtraterrestrialDay(latitudeDeg float64, day int) float64 {
	return Extraterrestrial(latitudeDeg, Declination(day), DistanceFactor(day), ConstantWM2)
}

// ExtraterrestrialKWhM2 returns H0 in kWh/m2 on the average day of a month, 1
// to 12; 0 for any other month.
func ExtraterrestrialKWhM2(latitudeDeg float64, month int) float64 {
	n := AverageDay(month)
	if n == 0 {
		return 0
	}
	return ExtraterrestrialDay(latitudeDeg, n) / jouleKWh
}

// path is the sun's way over a place on one day: cos theta_z = p cos omega + q
// between -ws and ws.
type path struct {
	sinPhi, cosPhi, sinDelta, cosDelta float64
	p, q                               float64
	ws                                 float64 // radians
}

func pathOf(latitudeDeg, declinationDeg float64) path {
	var s path
	s.sinPhi, s.cosPhi = math.Sincos(latitudeDeg * rad)
	s.sinDelta, s.cosDelta = math.Sincos(declinationDeg * rad)
	s.p, s.q = s.cosPhi*s.cosDelta, s.sinPhi*s.sinDelta
	s.ws = SunsetHourAngle(latitudeDeg, declinationDeg) * rad
	return s
}

// zenithIntegral is the integral of cos theta_z over the day.
func (s *path) zenithIntegral() float64 {
	return 2 * (s.p*math.Sin(s.ws) + s.q*s.ws)
}

// cosIncidence is cos theta on a plane at an hour angle; Duffie and Beckman,
// equation 1.6.2.
func (s *path) cosIncidence(pl plane, sinW, cosW float64) float64 {
	return s.sinDelta*s.sinPhi*pl.cosBeta -
		s.sinDelta*s.cosPhi*pl.sinBeta*pl.cosGamma +
		s.cosDelta*s.cosPhi*pl.cosBeta*cosW +
		s.cosDelta*s.sinPhi*pl.sinBeta*pl.cosGamma*cosW +
		s.cosDelta*pl.sinBeta*pl.sinGamma*sinW
}

type plane struct {
	sinBeta, cosBeta, sinGamma, cosGamma float64
}

func planeOf(slopeDeg, azimuthDeg float64) plane {
	var pl plane
	pl.sinBeta, pl.cosBeta = math.Sincos(slopeDeg * rad)
	pl.sinGamma, pl.cosGamma = math.Sincos(azimuthDeg * rad)
	return pl
}

func clip(x, low, high float64) float64 {
	return math.Min(math.Max(x, low), high)
}
