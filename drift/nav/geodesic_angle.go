package nav

import "math"

// arc is an angle as its sine and cosine, so that none of its accuracy is lost
// near any quarter of the circle. Where a comment does not say otherwise
// sin² + cos² is 1.
type arc struct{ sin, cos float64 }

// tiny stands for a zero whose sign, or whose ratio to another tiny, matters.
// Its square is still far from underflow.
const tiny = 1e-140

// phase makes an arc of any vector that is not nil: Karney's ph(cos + i sin).
func phase(sin, cos float64) arc {
	h := math.Sqrt(sin*sin + cos*cos)
	return arc{sin / h, cos / h}
}

// radians is the angle in (-π, π]; it does not need sin² + cos² = 1.
func (a arc) radians() float64 { return math.Atan2(a.sin, a.cos) }

// bearing is the angle as a direction.
func (a arc) bearing() TrueDeg { return True(a.radians() * (180 / math.Pi)) }

// minus is the angle a - b.
func (a arc) minus(b arc) arc {
	return arc{a.sin*b.cos - a.cos*b.sin, a.cos*b.cos + a.sin*b.sin}
}

// plus is the angle a + b.
func (a arc) plus(b arc) arc {
	return arc{a.sin*b.cos + a.cos*b.sin, a.cos*b.cos - a.sin*b.sin}
}

// ahead is the angle a - b held in [0, π], where it lies but for rounding.
func (a arc) ahead(b arc) arc {
	d := a.minus(b)
	d.sin = max(0, d.sin)
	return d
}

// arcOf is the arc of an angle in radians.
func arcOf(rad float64) arc {
	sin, cos := math.Sincos(rad)
	return arc{sin, cos}
}

// arcOfDeg is the arc of an angle in degrees, exact at every multiple of 90.
func arcOfDeg(deg float64) arc {
	sin, cos := sinCosDeg(deg)
	return arc{sin, cos}
}

// sinCosDeg is the sine and cosine of an angle in degrees, exact at every
// multiple of 90: the angle is brought within 45 degrees of one, which costs
// no rounding, before it becomes radians.
func sinCosDeg(deg float64) (sin, cos float64) {
	deg = NormDeg(deg)
	quarter := math.Round(deg / 90)
	sin, cos = math.Sincos((deg - 90*quarter) * (math.Pi / 180))
	switch quarter {
	case 1:
		sin, cos = cos, -sin
	case 2:
		sin, cos = -sin, -cos
	case 3:
		sin, cos = -cos, sin
	}
	return sin + 0, cos + 0 // no zero with a minus
}

// The float64 nearest to π stands for half a turn exactly, because that is
// what 180 degrees convert to. This scales angles by 1 - 4e-17, under a
// nanometre on the Earth, and makes 90 and 180 degrees exact.
const (
	halfTurn    = float64(math.Pi)
	quarterTurn = float64(math.Pi / 2)
	fullTurn    = 2 * halfTurn
)

// latitudeArc is the arc of a latitude within ±quarterTurn; its cosine is
// exactly 0 at the poles.
func latitudeArc(lat float64) arc {
	if math.Abs(lat) <= quarterTurn/2 {
		return arcOf(lat)
	}
	colat := arcOf(quarterTurn - math.Abs(lat)) // exact difference (Sterbenz)
	return arc{math.Copysign(colat.cos, lat), colat.sin}
}

// reduced is the reduced latitude β of a latitude φ (Karney 6), at the poles
// with a cosine that is not quite zero: it keeps the meridian's name.
func reduced(lat float64) arc {
	phi := latitudeArc(lat)
	b := phase(axisRatio*phi.sin, phi.cos)
	b.cos = max(tiny, b.cos)
	return b
}

// coarsen rounds an angle near zero to a multiple of 2^-60 radian (5e-12 m),
// so that no product of small angles underflows later.
func coarsen(rad float64) float64 {
	const below = 1.0 / 128
	y := math.Abs(rad)
	if y < below {
		y = below - (below - y)
	}
	return math.Copysign(y, rad)
}

// longitudeStep is a difference of longitude, brought into [0, half a turn].
type longitudeStep struct {
	arc
	rad   float64 // the difference
	short float64 // half a turn less the difference, with its own full accuracy
	west  bool    // the difference was towards the west
}

// longitudeBetween is the shorter way from one longitude to another. The
// rounding of their difference is caught (two-sum: Knuth, The Art of Computer
// Programming, volume 2, section 4.2.2, theorem B) and given back to the small
// one of the two results, where it counts.
func longitudeBetween(from, to float64) longitudeStep {
	from, to = normLonRad(from), normLonRad(to)
	d := to - from
	back := d + from
	lost := (to - back) + ((back - d) - from)
	switch {
	case d > halfTurn:
		d -= fullTurn // exact (Sterbenz)
	case d < -halfTurn:
		d += fullTurn
	}
	l := longitudeStep{west: d < 0}
	if l.west {
		d, lost = -d, -lost
	}
	l.rad, l.short = coarsen(d+lost), coarsen((halfTurn-d)-lost)
	if l.short < 0 { // only the part caught is past half a turn
		l.short, l.west = -l.short, !l.west
	}
	if l.rad <= quarterTurn {
		l.arc = arcOf(l.rad)
		return l
	}
	l.arc = arcOf(l.short)
	l.cos = -l.cos
	return l
}

// normLonRad brings a longitude in radians into [-π, π).
func normLonRad(lon float64) float64 {
	if lon >= -halfTurn && lon < halfTurn {
		return lon
	}
	lon = math.Remainder(lon, fullTurn)
	if lon >= halfTurn {
		lon -= fullTurn
	}
	return lon
}
