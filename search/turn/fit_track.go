package turn

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"wakeback/drift/nav"
)

// Sample is a point of a recorded circle.
type Sample struct {
	TS         float64 // from the helm order; before it negative
	At         nav.Offset
	HeadingDeg nav.Opt[nav.TrueDeg]
}

// Our choices for a recorded circle: a straight run of at least approachS
// before the order gives speed and course; a track that turns less than
// leastTurnDeg leaves radius and current undecided; a fix is good to fixM and
// a compass to compassDeg (one sigma).
const (
	approachS    = 5
	leastTurnDeg = 300
	fixM         = 3
	compassDeg   = 3
	leastSamples = 20
	pivotStart   = 0.15 // radii
)

// furtherStarts are the further radii, in parts of that read off the track, from
// which a fit begins: a track without headings may else be fitted a turn out.
func furtherStarts(track []Sample) []float64 {
	if slices.ContainsFunc(track, func(p Sample) bool { return p.HeadingDeg.IsSet() }) {
		return nil
	}
	return []float64{0.6, 0.8, 1.25}
}

// The further parameters of a track: where and how she was going when the
// order was given, and the motion of the water.
const (
	pSpeed = pShape + iota
	pCourse
	pEast
	pNorth
	pSet
	pSetNorth
	pTrack // how many
)

// FitTrack fits a model to a recorded circle with the helm hard over to a
// side, begun from a straight run. The start gives rudder and delay, which
// stay, and a first guess of the rest. A steady current is found along with
// the model; wind is not, so the circle is one for a calm.
func FitTrack(start Model, side Side, track []Sample) (Fit, error) {
	if side == Unknown {
		return Fit{}, fmt.Errorf("%w: the side of the circle is not stated", ErrFit)
	}
	x0, turned, err := firstGuess(start, side, track)
	if err != nil {
		return Fit{}, err
	}
	start.SpeedMs = math.Exp(x0[pSpeed])
	guess := start.shaped(x0)
	if err := guess.Validate(); err != nil {
		return Fit{}, fmt.Errorf("%w: %w", ErrFit, err)
	}
	misfit := func(x []float64) []float64 {
		r := trackMisfit(start, side, track, x)
		return append(r, priors(x[:pShape], x0[:pShape])...)
	}
	step := []float64{1e-3, 1e-3, 1e-3, 1e-3, 1e-3, 1e-3, 1e-3, 0.1, 0.1, 0.1, 1e-3, 1e-3}
	s := leastSquares(misfit, x0, step)
	for _, factor := range furtherStarts(track) {
		x := slices.Clone(x0)
		x[pRadius] += math.Log(factor)
		if other := leastSquares(misfit, x, step); other.sum < s.sum {
			s = other
		}
	}
	m := start
	m.SpeedMs = math.Exp(s.x[pSpeed])
	f := Fit{Model: m.shaped(s.x), TurnedDeg: turned, Drift: nav.Velocity{EastMs: s.x[pSet], NorthMs: s.x[pSetNorth]}}
	if err := f.Model.Validate(); err != nil {
		return Fit{}, fmt.Errorf("%w: %w", ErrFit, err)
	}
	f.RmsM = trackRms(start, side, track, s.x)
	f.errors(s, math.Max(1, s.sum/float64(max(1, s.n-pTrack))))
	return f, nil
}

// trackMisfit is the residual of each sample: east, north, and heading.
func trackMisfit(start Model, side Side, track []Sample, x []float64) []float64 {
	m := start
	m.SpeedMs = math.Exp(x[pSpeed])
	m = m.shaped(x)
	dt := m.trialStep()
	s, t := m.start(0), 0.0
	s.HeadingDeg = x[pCourse]
	out := make([]float64, 0, 3*len(track))
	for _, p := range track {
		for t+dt <= p.TS {
			s = m.step(s, Helm(float64(m.delayed(t))*float64(side)), dt)
			t += dt
		}
		at := s
		if p.TS > t {
			at = m.step(s, Helm(float64(m.delayed(t))*float64(side)), p.TS-t)
		} else if p.TS < 0 { // still on the straight run
			sin, cos := math.Sincos(x[pCourse] * math.Pi / 180)
			at.EastM, at.NorthM = sin*m.SpeedMs*p.TS, cos*m.SpeedMs*p.TS
		}
		out = append(out,
			(p.At.EastM-x[pEast]-x[pSet]*p.TS-at.EastM)/fixM,
			(p.At.NorthM-x[pNorth]-x[pSetNorth]*p.TS-at.NorthM)/fixM)
		if h, ok := p.HeadingDeg.Get(); ok {
			out = append(out, h.Minus(nav.True(at.HeadingDeg))/compassDeg)
		} else {
			out = append(out, 0)
		}
	}
	return out
}

func trackRms(start Model, side Side, track []Sample, x []float64) float64 {
	r := trackMisfit(start, side, track, x)
	sum := 0.0
	for i := 0; i < len(r); i += 3 {
		sum += (r[i]*r[i] + r[i+1]*r[i+1]) * fixM * fixM
	}
	return math.Sqrt(sum / float64(len(track)))
}

// firstGuess checks a track and reads off it where the fit begins.
func firstGuess(start Model, side Side, track []Sample) (x []float64, turnedDeg float64, err error) {
	if len(track) < leastSamples {
		return nil, 0, fmt.Errorf("%w: %d fixes, expected at least %d", ErrFit, len(track), leastSamples)
	}
	for i, p := range track {
		if !(math.Abs(p.At.EastM) < 1e6 && math.Abs(p.At.NorthM) < 1e6 && math.Abs(p.TS) < maxTurnS) {
			return nil, 0, fmt.Errorf("%w: fix %d is not a place", ErrFit, i+1)
		}
	}
	if !slices.IsSortedFunc(track, func(a, b Sample) int { return cmp.Compare(a.TS, b.TS) }) {
		return nil, 0, fmt.Errorf("%w: the fixes are not in order of time", ErrFit)
	}
	straight := slices.IndexFunc(track, func(p Sample) bool { return p.TS >= 0 })
	if straight < 2 || track[straight-1].TS-track[0].TS < approachS-1 {
		return nil, 0, fmt.Errorf("%w: expected a straight run of %d s before the helm order", ErrFit, approachS)
	}
	run := track[straight-1].At.Sub(track[0].At)
	seconds := track[straight-1].TS - track[0].TS
	course, ok := run.Direction().Get()
	if !ok || run.RangeM()/seconds < 0.3 {
		return nil, 0, fmt.Errorf("%w: no way on before the helm order", ErrFit)
	}
	turnedDeg = turnedBy(track[straight:], course, start.RadiusM) * float64(side)
	if turnedDeg < leastTurnDeg {
		return nil, 0, fmt.Errorf("%w: the track turns %.0f degrees to %s, expected at least %d", ErrFit, turnedDeg, side, leastTurnDeg)
	}
	u := run.RangeM() / seconds
	first := FromRadius(u/nav.MsPerKn, widthM(track[straight:])/2)
	first.PivotM = pivotStart * first.RadiusM
	x = append(shapeOf(first), math.Log(u), float64(course), track[straight].At.EastM, track[straight].At.NorthM, 0, 0)
	return x, turnedDeg, nil
}

// turnedBy is how far the track goes round in all, from the course of chords
// long enough for the noise of a fix not to matter.
func turnedBy(track []Sample, course nav.TrueDeg, radiusM float64) float64 {
	chord := math.Max(4*fixM, radiusM/3)
	sum, from, was := 0.0, track[0].At, course
	for _, p := range track {
		d := p.At.Sub(from)
		dir, ok := d.Direction().Get()
		if !ok || d.RangeM() < chord {
			continue
		}
		sum += dir.Minus(was)
		from, was = p.At, dir
	}
	return sum
}

// widthM is the smaller extent of the track: the diameter of its circle, but
// for a current.
func widthM(track []Sample) float64 {
	e, n := []float64{}, []float64{}
	for _, p := range track {
		e, n = append(e, p.At.EastM), append(n, p.At.NorthM)
	}
	return math.Max(2, math.Min(slices.Max(e)-slices.Min(e), slices.Max(n)-slices.Min(n)))
}
