package solar

import "math"

const (
	// Range of clearness of the correlation of Erbs et al.
	clearnessLow  = 0.3
	clearnessHigh = 0.8
	// winterSunsetDeg parts the correlation's winter from its other seasons.
	winterSunsetDeg = 81.4
)

// DiffuseShare returns the share of the month's irradiation on the horizontal
// that comes from the sky and not from the sun's disc, by clearness K_T and
// sunset hour angle:
//
//	omega_s <= 81.4: 1.391 - 3.560 K + 4.189 K^2 - 2.137 K^3
//	omega_s >  81.4: 1.311 - 3.022 K + 3.427 K^2 - 1.821 K^3
//
// Source: Erbs, Klein and Duffie (1982), monthly, for 0.3 <= K <= 0.8. Dull
// winters of high latitudes fall below 0.3: there the cubic is carried on and
// capped at 1, because holding K at 0.3 would give too little diffuse. Above
// 0.8 K is held at 0.8.
func DiffuseShare(clearness, sunsetHourAngleDeg float64) float64 {
	k := clip(clearness, 0, clearnessHigh)
	var f float64
	if sunsetHourAngleDeg <= winterSunsetDeg {
		f = 1.391 + k*(-3.560+k*(4.189-2.137*k))
	} else {
		f = 1.311 + k*(-3.022+k*(3.427-1.821*k))
	}
	return clip(f, 0, 1)
}

// globalShape returns a and b of r_t = (a + b cos omega) r_d; Collares-Pereira
// and Rabl (1979).
func globalShape(ws float64) (a, b float64) {
	s := math.Sin(ws - math.Pi/3)
	return 0.409 + 0.5016*s, 0.6609 - 0.4767*s
}

// DiffuseHour returns r_d, the hour's share of the day's diffuse irradiation
// with its middle at hour angle omega; both angles in degrees, 0 at night:
//
//	r_d = pi/24 (cos omega - cos omega_s)/(sin omega_s - omega_s cos omega_s)
//
// Source: Liu and Jordan (1960).
func DiffuseHour(hourAngleDeg, sunsetHourAngleDeg float64) float64 {
	w, ws := hourAngleDeg*rad, sunsetHourAngleDeg*rad
	d := math.Sin(ws) - ws*math.Cos(ws)
	if d <= 0 || math.Abs(w) >= ws {
		return 0
	}
	return math.Pi / 24 * (math.Cos(w) - math.Cos(ws)) / d
}

// GlobalHour returns r_t, the hour's share of the day's global irradiation with
// its middle at hour angle omega, divided by its own integral so that the day
// adds up to 1:
//
//	r_t = (a + b cos omega) r_d / N
//	a = 0.409 + 0.5016 sin(omega_s - 60), b = 0.6609 - 0.4767 sin(omega_s - 60)
//	N = a + b (omega_s - sin omega_s cos omega_s)/(2 (sin omega_s - omega_s cos omega_s))
//
// Source: Collares-Pereira and Rabl (1979); N is the integral of the
// unscaled curve, within 1 % of 1 for days of 8 to 16 hours.
func GlobalHour(hourAngleDeg, sunsetHourAngleDeg float64) float64 {
	ws := sunsetHourAngleDeg * rad
	d := math.Sin(ws) - ws*math.Cos(ws)
	if d <= 0 {
		return 0
	}
	a, b := globalShape(ws)
	n := a + b*(ws-math.Sin(ws)*math.Cos(ws))/(2*d)
	return (a + b*math.Cos(hourAngleDeg*rad)) / n * DiffuseHour(hourAngleDeg, sunsetHourAngleDeg)
}
