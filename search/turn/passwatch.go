package turn

import "math"

// PassWatch notices a missed pass: the range closed, was least, and opens
// again without the person having been reached. A missed pass is a normal
// event: it begins the next approach.
type PassWatch struct {
	Missed   int     // passes missed
	ClosestM float64 // of the pass in hand, or of the last one missed
	closing  bool
	begun    bool
	farM     float64
}

// A range has to move by so much before it counts as closing or opening: the
// noise of a position, and no less than a tenth of the turning radius. Our
// choice.
const passNoiseM = 10

// Add takes a range and reports whether with it a pass was missed. The turning
// radius sets how near a pass has to be to count as one: within three radii.
func (w *PassWatch) Add(rangeM, radiusM float64) bool {
	slack := math.Max(passNoiseM, radiusM/10)
	if !w.begun {
		w.begun, w.farM, w.ClosestM = true, rangeM, rangeM
		return false
	}
	if !w.closing {
		w.farM = math.Max(w.farM, rangeM)
		if rangeM < w.farM-slack {
			w.closing, w.ClosestM = true, rangeM
		}
		return false
	}
	w.ClosestM = math.Min(w.ClosestM, rangeM)
	if rangeM < w.ClosestM+slack {
		return false
	}
	w.closing, w.farM = false, rangeM
	if w.ClosestM > math.Max(wideRadii*radiusM, passNearM) {
		return false
	}
	w.Missed++
	return true
}

// passNearM is the range within which a pass counts also for a vessel that
// turns on the spot; our choice, a few boat's lengths and the error of a fix.
const passNearM = 50
