package balance

// ApertureM2 is the effective collecting area of glazing: F_sh F_w g (1 - F_F) A.
// Source: ISO 13790:2008, 11.3.2 and 11.4.2.
func ApertureM2(areaM2, g, nonPerpendicular, frameShare, shading float64) float64 {
	return areaM2 * g * nonPerpendicular * (1 - frameShare) * shading
}

// SkyRadiationW is the extra loss of an opaque element to the sky: F_r R_se U A h_r
// dtheta, in W; F_r 1 for a flat roof, 0.5 for a wall; h_r about 5 emissivity; dtheta
// 11 K in middle latitudes. The monthly balance leaves it out, with the sun on
// opaque parts that offsets it. Source: ISO 13790:2008, 11.3.5.
func SkyRadiationW(formFactor, rseM2KW, uWM2K, areaM2, radiativeWM2K, skyK float64) float64 {
	return formFactor * rseM2KW * uWM2K * areaM2 * radiativeWM2K * skyK
}
