package nav

import "math"

// Geodesics on WGS 84 after C. F. F. Karney, "Algorithms for geodesics",
// Journal of Geodesy 87 (2013), pages 43-55, doi:10.1007/s00190-012-0578-z;
// below "Karney" with the number of an equation or section. Text and numbers
// of the equations are from memory; the series are checked by quadrature of
// the integrals they stand for, the whole against an independent program.
//
// Symbols as there: φ latitude, β reduced latitude, α azimuth (bearing), λ
// longitude, σ and ω arc length and longitude on the auxiliary sphere, s
// distance, m reduced length, M geodesic scale; index 0 is the node where the
// geodesic crosses the equator going north, 1 the start, 2 the end; 12 is from
// 1 to 2. An angle that is wanted only by its sine and cosine is an [arc].

// Line is the shortest line between two positions.
//
// Range and position errors are below 1e-7 m, bearing errors below 1e-9
// radian except where a bearing is that of a line shorter than 100 m, or ends
// within 100 m of where its neighbours cross: there the end point moves by
// less than 1e-7 m. The positions themselves are held in steps of up to 3e-9 m.
//
// What is not unique or not defined:
//
//   - Positions within 1e-9 m of each other coincide: RangeM is 0 and both
//     bearings are absent. All longitudes are one point at a pole.
//   - At a pole a bearing is counted from the north of the meridian that the
//     position's longitude names: from the North Pole, (90, 10), the meridian
//     10°E itself leads away towards 180, 100°E towards 90.
//   - Antipodes have two shortest lines, along the meridian over either pole
//     (from pole to pole: one along every meridian), and we return the one over
//     the pole nearer to the start, from the equator the northern one, from a
//     pole the one along the end's meridian.
//   - Nearly antipodal positions of opposite latitude have two, mirror images
//     with RangeM equal; we return the one that sets out towards the start's
//     nearer pole, from the equator the northern one. So there, and there
//     only, Inverse(b, a) need not be Inverse(a, b) reversed.
type Line struct {
	RangeM       float64
	Bearing      Opt[TrueDeg] // at the start, towards the end; absent when the two coincide
	FinalBearing Opt[TrueDeg] // at the end, going on; absent when the two coincide
}

// coincideM is the range below which two positions are one. Our choice,
// because a position is held in steps of up to 3e-9 m: see [Line].
const coincideM = 1e-9

// Inverse solves the inverse problem: range and bearings from a to b, at most
// half the circumference (20,003.93 km). If a coordinate is not finite or a
// latitude is beyond 90 degrees, RangeM is NaN and the bearings are absent.
func Inverse(a, b Position) Line {
	s := solveInverse(a, b)
	if !(s.rangeM >= coincideM) { // NaN too
		if s.rangeM < coincideM {
			s.rangeM = 0
		}
		return Line{RangeM: s.rangeM}
	}
	return Line{RangeM: s.rangeM, Bearing: Some(s.azi1.bearing()), FinalBearing: Some(s.azi2.bearing())}
}

// Direct solves the direct problem: the position reached by going rangeM
// metres from a on the geodesic that starts towards bearing, and the bearing
// there, going on. A negative range goes backwards, with the bearing still that
// of going forwards; a range may be longer than the circumference. Everything
// is NaN if an argument is not finite or the latitude beyond 90 degrees. At a
// pole the bearing is counted as [Line] says.
func Direct(a Position, bearing TrueDeg, rangeM float64) (Position, TrueDeg) {
	g := LineFrom(a, bearing)
	return g.At(rangeM)
}

// CrossTrack measures p against the geodesic that leaves a towards bearing:
// see [Geodesic.Offtrack].
func CrossTrack(a Position, bearing TrueDeg, p Position) Offtrack {
	g := LineFrom(a, bearing)
	return g.Offtrack(p)
}

// The one Earth: WGS 84 (NIMA TR8350.2, 3rd edition, 2000, table 3.1).
// Constants without a type keep the coefficients derived from them exact.
const (
	semiMajorM  = 6378137.0
	flattening  = 1 / 298.257223563
	axisRatio   = 1 - flattening
	semiMinorM  = semiMajorM * axisRatio
	thirdFlat   = flattening / (2 - flattening)                         // n, Karney 2
	eccSq       = flattening * (2 - flattening)                         // e², Karney 1
	secondEccSq = flattening * (2 - flattening) / axisRatio / axisRatio // e'², Karney 3
)

// latitude returns a latitude in radians clamped to the poles, and whether it
// is one. A value that only rounding took past the pole is the pole, as in
// [Position.Validate].
func latitude(p Position) (float64, bool) {
	const slack = 2e-11 // radian: 1e-9 degree and the rounding of the conversion
	lat := float64(p.Lat)
	if !(math.Abs(lat) <= math.Pi/2+slack) {
		return math.NaN(), false
	}
	return max(-math.Pi/2, min(math.Pi/2, lat)), true
}

func finite(x float64) bool { return x-x == 0 }

var nan = math.NaN()
