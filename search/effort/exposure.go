package effort

import (
	"math"

	"wakeback/drift/nav"
)

// Run is a straight piece of track in the datum frame.
type Run struct {
	From, To nav.Offset
	WidthM   float64 // sweep width that held; nil when nobody looked out
}

// LengthM is how long the run is.
func (r Run) LengthM() float64 { return r.To.Sub(r.From).RangeM() }

// Exposure is the expected number of detections of a person at p during the
// run. The inverse cube law makes the rate of detection proportional to 1/r³,
// so that along a straight line at a distance x abeam, from s1 to s2,
//
//	exposure = a/2 · [ s / (x² sqrt(x² + s²)) ] from s1 to s2,  a = W²/(4 pi),
//
// which for a line without ends is a/x², the lateral range law. Runs add up.
func (r Run) Exposure(p nav.Offset) float64 {
	length := r.LengthM()
	if length == 0 || r.WidthM <= 0 {
		return 0
	}
	e := r.To.Sub(r.From).Scale(1 / length)
	d := p.Sub(r.From)
	s := d.EastM*e.EastM + d.NorthM*e.NorthM // along the run to the foot
	x := d.EastM*e.NorthM - d.NorthM*e.EastM // abeam
	a := r.WidthM * r.WidthM / (4 * math.Pi)
	return a / 2 * (antiderivative(length-s, x) - antiderivative(-s, x))
}

// closeM stops the law from growing without bound: a person nearer than half
// a metre to the track is seen or run over. Our choice.
const closeM = 0.5

// antiderivative of (x² + s²)^(-3/2).
func antiderivative(s, x float64) float64 {
	x2 := math.Max(x*x, closeM*closeM)
	return s / (x2 * math.Sqrt(x2+s*s))
}

// Log is everything that was run. The zero Log is empty and ready.
type Log struct {
	runs []Run
}

// Add counts a run.
func (l *Log) Add(r Run) {
	if r.LengthM() > 0 && r.WidthM > 0 {
		l.runs = append(l.runs, r)
	}
}

// POD is the chance that a person at p was seen by now.
func (l *Log) POD(p nav.Offset) float64 {
	var exposure float64
	for _, r := range l.runs {
		exposure += r.Exposure(p)
	}
	return -math.Expm1(-exposure)
}

// RunM is the length run with a lookout.
func (l *Log) RunM() float64 {
	var sum float64
	for _, r := range l.runs {
		sum += r.LengthM()
	}
	return sum
}

// SweptM2 is the effort: sweep width times length, over all runs. Water looked
// at twice counts twice.
func (l *Log) SweptM2() float64 {
	var sum float64
	for _, r := range l.runs {
		sum += r.LengthM() * r.WidthM
	}
	return sum
}

// PODOver is the mean over places that are equally likely: the particles of a
// cloud. It is the chance that the person was seen by now, if the cloud is
// right; without places it is nil.
func (l *Log) PODOver(places []nav.Offset) float64 {
	if len(places) == 0 {
		return 0
	}
	var sum float64
	for _, p := range places {
		sum += l.POD(p)
	}
	return sum / float64(len(places))
}

// Weights is what is left of each place after all that was searched without a
// find: prior · (1 - POD), not brought to a sum of one, so that what was
// searched away stays visible (IAMSAR keeps it so; from memory). A nil prior
// stands for equal shares.
func (l *Log) Weights(places []nav.Offset, prior []float64) []float64 {
	out := make([]float64, len(places))
	for i, p := range places {
		w := 1 / float64(len(places))
		if prior != nil {
			w = prior[i]
		}
		out[i] = w * (1 - l.POD(p))
	}
	return out
}
