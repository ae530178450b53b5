package solar

import "math"

// steps of the hour angle between sunrise and sunset in numeric integrals: 0.5
// degree at the equinox; the midpoint rule is then right to five digits.
const steps = 360

// BeamRatio returns R_b, the day's beam irradiation on a plane that slopes
// towards the equator over that on the horizontal, outside the atmosphere:
//
//	R_b = [cos(phi-beta) cos delta sin w' + w' sin(phi-beta) sin delta]
//	    / [cos phi cos delta sin omega_s + omega_s sin phi sin delta]
//	w'  = min(omega_s, arccos(-tan(phi-beta) tan delta))
//
// The southern hemisphere is the mirror image: phi and delta change sign. 0
// where the sun does not rise.
//
// Source: Liu and Jordan (1962) as in Duffie and Beckman, 2.19.
func BeamRatio(latitudeDeg, declinationDeg, slopeDeg float64) float64 {
	if latitudeDeg < 0 {
		latitudeDeg, declinationDeg = -latitudeDeg, -declinationDeg
	}
	s := pathOf(latitudeDeg, declinationDeg)
	below := s.zenithIntegral()
	if !sunRises(&s) {
		return 0
	}
	tilted := (latitudeDeg - slopeDeg) * rad
	w := math.Min(s.ws, SunsetHourAngle(latitudeDeg-slopeDeg, declinationDeg)*rad)
	above := 2 * (math.Cos(tilted)*s.cosDelta*math.Sin(w) + w*math.Sin(tilted)*s.sinDelta)
	return math.Max(0, above) / below
}

// BeamRatioNumeric returns R_b for a plane of any azimuth: the integral of
// max(cos theta, 0) over that of cos theta_z from sunrise to sunset.
func BeamRatioNumeric(latitudeDeg, declinationDeg, slopeDeg, azimuthDeg float64) float64 {
	s := pathOf(latitudeDeg, declinationDeg)
	if !sunRises(&s) {
		return 0
	}
	pl := planeOf(slopeDeg, azimuthDeg)
	return s.integrate(pl, 1, 0) / s.zenithIntegral()
}

// Isotropic returns the irradiation on a tilted plane from that on the
// horizontal, in the horizontal's unit:
//
//	H_T = H [(1 - f_d) R_b + f_d (1 + cos beta)/2 + rho (1 - cos beta)/2]
//
// Source: Liu and Jordan (1963), Klein (1977).
func Isotropic(horizontal, diffuseShare, beamRatio, slopeDeg, reflectance float64) float64 {
	c := math.Cos(slopeDeg * rad)
	return horizontal * ((1-diffuseShare)*beamRatio + diffuseShare*(1+c)/2 + reflectance*(1-c)/2)
}

// BeamShare returns D, the day's beam irradiation on a tilted plane over the
// day's global irradiation on the horizontal, from the hourly weights of
// GlobalHour and DiffuseHour:
//
//	D = integral of (r_t - f_d r_d) max(cos theta, 0)/cos theta_z
//
// Because r_d goes with cos theta_z, cos theta_z cancels and the integrand is
// bounded at sunrise. normalise divides r_t by its own integral; without it, D
// is what the closed form of Klein and Theilacker integrates. Never negative.
func BeamShare(latitudeDeg, declinationDeg, slopeDeg, azimuthDeg, diffuseShare float64, normalise bool) float64 {
	s := pathOf(latitudeDeg, declinationDeg)
	if !sunRises(&s) {
		return 0
	}
	return s.beamShare(planeOf(slopeDeg, azimuthDeg), diffuseShare, normalise)
}

func (s *path) beamShare(pl plane, diffuseShare float64, normalise bool) float64 {
	a, b := globalShape(s.ws)
	day := s.zenithIntegral()
	if normalise {
		n := a + b*(s.p*(s.ws+math.Sin(s.ws)*math.Cos(s.ws))+2*s.q*math.Sin(s.ws))/day
		a, b = a/n, b/n
	}
	return math.Max(0, s.integrate(pl, a-diffuseShare, b)) / day
}

// integrate returns the integral of (c + d cos omega) max(cos theta, 0) from
// sunrise to sunset.
func (s *path) integrate(pl plane, c, d float64) float64 {
	h := 2 * s.ws / steps
	sum := 0.0
	for i := range steps {
		sinW, cosW := math.Sincos(-s.ws + h*(float64(i)+0.5))
		if t := s.cosIncidence(pl, sinW, cosW); t > 0 {
			sum += (c + d*cosW) * t
		}
	}
	return sum * h
}

// sunRises is false where day length or height of the sun vanish to within
// rounding: a ratio to the horizontal then has no meaning.
func sunRises(s *path) bool {
	return s.ws > 1e-6 && s.zenithIntegral() > 1e-12
}

// KleinTheilacker returns D of BeamShare, without normalising, in closed form.
// The southern hemisphere is the mirror image: phi and delta change sign and
// the azimuth is counted from the north.
//
// Source: Klein and Theilacker (1981) as in Duffie and Beckman, 2.20, with one
// departure: the hour angles at which the sun comes before the plane and goes
// behind it are solved directly. The published rule for their signs takes them
// to lie on either side of noon and to exist, which steep planes in summer and
// planes turned away in low latitudes break. Valid where the sun rises and
// sets; BeamShare also covers the polar day.
func KleinTheilacker(latitudeDeg, declinationDeg, slopeDeg, azimuthDeg, diffuseShare float64) float64 {
	if latitudeDeg < 0 {
		latitudeDeg, declinationDeg, azimuthDeg = -latitudeDeg, -declinationDeg, 180-azimuthDeg
	}
	p := pathOf(latitudeDeg, declinationDeg)
	if !sunRises(&p) {
		return 0
	}
	pl := planeOf(slopeDeg, azimuthDeg)
	ws := p.ws
	at, bt := globalShape(ws)
	at -= diffuseShare
	d := math.Sin(ws) - ws*math.Cos(ws)

	tanPhi, tanDelta := p.sinPhi/p.cosPhi, p.sinDelta/p.cosDelta
	a := pl.cosBeta + tanPhi*pl.cosGamma*pl.sinBeta
	b := math.Cos(ws)*pl.cosBeta + tanDelta*pl.sinBeta*pl.cosGamma
	c := pl.sinBeta * pl.sinGamma / p.cosPhi

	g := func(u, v float64) float64 {
		sinU, cosU := math.Sincos(u)
		sinV, cosV := math.Sincos(v)
		return ((bt*a/2-at*b)*(u-v) +
			(at*a-bt*b)*(sinU-sinV) -
			at*c*(cosU-cosV) +
			bt*a/2*(sinU*cosU-sinV*cosV) +
			bt*c/2*(sinU*sinU-sinV*sinV)) / (2 * d)
	}
	// The sun is before the plane where a cos omega + c sin omega > b, an arc
	// around omega = atan2(c, a).
	r := math.Hypot(a, c)
	if b <= -r {
		return math.Max(0, g(ws, -ws))
	}
	if b >= r {
		return 0
	}
	mid, half := math.Atan2(c, a), math.Acos(b/r)
	sum := 0.0
	for _, turn := range [3]float64{-2 * math.Pi, 0, 2 * math.Pi} {
		rise, set := math.Max(-ws, mid-half+turn), math.Min(ws, mid+half+turn)
		if set > rise {
			sum += g(set, rise)
		}
	}
	return math.Max(0, sum)
}
