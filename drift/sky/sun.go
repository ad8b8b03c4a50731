package sky

import (
	"errors"
	"fmt"
	"math"
	"time"

	"wakeback/drift/nav"
)

// SunPosition is where the sun's centre stands, without refraction. Accuracy
// is about 0.01 degree.
type SunPosition struct {
	AltitudeDeg float64     // above the horizon, -90 to 90
	AzimuthTrue nav.TrueDeg // bearing; meaningless within 0.02 degree of the zenith or nadir
}

// ErrSunTime is wrapped by the error for a time at which the sun is not known.
var ErrSunTime = errors.New("sun unknown")

// Years in which the formulas are used. Our choice, because that is a century
// to either side of those they were checked in, and a time outside is more
// likely a clock that was never set than a question.
const (
	sunFirstYear = 1900
	sunLastYear  = 2100
)

// Sun is where the sun stands, seen from p. Errors wrap [nav.ErrPosition] or
// [ErrSunTime] (years 1900 to 2100 are covered).
func Sun(p nav.Position, at time.Time) (SunPosition, error) {
	if err := checkSun(p, at); err != nil {
		return SunPosition{}, err
	}
	return placeOf(p).sun(unixSeconds(at)), nil
}

func checkSun(p nav.Position, at time.Time) error {
	if err := p.Validate(); err != nil {
		return fmt.Errorf("sun: %w", err)
	}
	if year := at.UTC().Year(); year < sunFirstYear || year > sunLastYear {
		return fmt.Errorf("%w: years %d to %d are covered, the date is %s",
			ErrSunTime, sunFirstYear, sunLastYear, at.UTC().Format(time.DateOnly))
	}
	return nil
}

// unixSeconds loses less than a microsecond.
func unixSeconds(at time.Time) float64 {
	return float64(at.Unix()) + float64(at.Nanosecond())/1e9
}

// place is an observer, with the sine and cosine of the latitude worked out.
type place struct {
	sinLat, cosLat, lonDeg float64
}

func placeOf(p nav.Position) place {
	sin, cos := math.Sincos(p.Lat.Radians())
	return place{sin, cos, p.LonDeg()}
}

// altitudeDeg is the sun's altitude at a Unix time.
func (pl place) altitudeDeg(unix float64) float64 {
	o := orbitAt(unix)
	return pl.altitude(o, pl.hourAngleDeg(o, unix))
}

func (pl place) altitude(o orbit, hourAngleDeg float64) float64 {
	sin := pl.sinLat*o.sinDec + pl.cosLat*o.cosDec*math.Cos(hourAngleDeg*radPerDeg)
	return math.Asin(math.Min(math.Max(sin, -1), 1)) * degPerRad
}

// hourAngleDeg is the sun's local hour angle, west of the meridian positive,
// in (-180, 180]. A day of mean time is 1440 minutes of 0.25 degree.
func (pl place) hourAngleDeg(o orbit, unix float64) float64 {
	utMin := math.Mod(unix, 86400) / 60
	return nav.NormSignedDeg((utMin+o.equationMin)/4 + pl.lonDeg - 180)
}

func (pl place) sun(unix float64) SunPosition {
	o := orbitAt(unix)
	hourAngle := pl.hourAngleDeg(o, unix)
	sinH, cosH := math.Sincos(hourAngle * radPerDeg)
	// From the south, towards the west. Multiplied through by cos dec, so that
	// nothing is divided.
	west := math.Atan2(o.cosDec*sinH, o.cosDec*cosH*pl.sinLat-o.sinDec*pl.cosLat)
	return SunPosition{
		AltitudeDeg: pl.altitude(o, hourAngle),
		AzimuthTrue: nav.True(180 + west*degPerRad),
	}
}

// orbit is what the sun does for everyone at one moment.
type orbit struct {
	sinDec, cosDec float64 // of the declination
	equationMin    float64 // equation of time: apparent less mean solar time, in minutes
	apparentDeg    float64 // apparent longitude
}

// orbitAt is the low-accuracy sun of Meeus, Astronomical Algorithms, 2nd ed.
// (1998), chapters 22, 25 and 28 (from memory; checked against that book's
// example 25.a, a published worked example and published almanac times). The
// symbols are Meeus's: T centuries from J2000.0, L0 mean longitude, M mean
// anomaly, e eccentricity, C equation of centre, Om node of the moon, eps
// obliquity, y = tan²(eps/2). Universal time is taken for dynamical time: 70 s
// of it move the sun by 0.0008 degree.
func orbitAt(unix float64) orbit {
	const j2000Unix = 946728000 // 2000-01-01T12:00:00Z
	T := (unix - j2000Unix) / (86400 * 36525)
	L0 := (280.46646 + T*(36000.76983+T*0.0003032)) * radPerDeg
	M := (357.52911 + T*(35999.05029-T*0.0001537)) * radPerDeg
	e := 0.016708634 - T*(0.000042037+T*0.0000001267)
	sinM, cosM := math.Sincos(M)
	sin2M, cos2M := 2*sinM*cosM, 1-2*sinM*sinM
	C := (1.914602-T*(0.004817+T*0.000014))*sinM + (0.019993-T*0.000101)*sin2M +
		0.000289*(sin2M*cosM+cos2M*sinM)
	sinOm, cosOm := math.Sincos((125.04 - 1934.136*T) * radPerDeg)
	lambda := L0 + (C-0.00569-0.00478*sinOm)*radPerDeg
	epsArcsec := 84381.448 - T*(46.815+T*(0.00059-T*0.001813)) // 23°26'21.448"
	eps := (epsArcsec/3600 + 0.00256*cosOm) * radPerDeg

	sinDec := math.Sin(eps) * math.Sin(lambda)
	return orbit{
		sinDec:      sinDec,
		cosDec:      math.Sqrt(1 - sinDec*sinDec),
		equationMin: equationOfTimeMin(L0, e, eps, sinM, cosM),
		apparentDeg: nav.NormDeg(lambda * degPerRad),
	}
}

// equationOfTimeMin is Smart's series (Meeus, equation 28.3), in minutes.
func equationOfTimeMin(L0, e, eps, sinM, cosM float64) float64 {
	tan := math.Tan(eps / 2)
	y := tan * tan
	sin2L, cos2L := math.Sincos(2 * L0)
	E := y*sin2L - 2*e*sinM + 4*e*y*sinM*cos2L - y*y*sin2L*cos2L - 2.5*e*e*sinM*cosM
	return 4 * degPerRad * E
}
