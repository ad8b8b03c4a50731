package turn

import (
	"errors"
	"math"

	"wakeback/drift/nav"
)

// ErrManoeuvre is wrapped when a manoeuvre cannot be run or does not apply.
var ErrManoeuvre = errors.New("the manoeuvre does not apply")

// Track is a manoeuvre's outcome against the original track: how far along it
// and how far off it the vessel ends, from where the first order was given.
type Track struct {
	AlongM  float64 // ahead of the first order
	OffsetM float64 // off the original track, positive to the side of the first turn
	TimeS   float64
	RunM    float64
	PeakDeg float64 // largest change of heading to the first side
	SpeedKn float64 // when it ends
	EndDeg  float64 // change of heading when it ends, to the first side
}

// Trial runs a manoeuvre with a shift angle and says where it ends. It needs a
// side; both give the same figures in still water.
func (m Model) Trial(n Name, shiftDeg float64) (Track, error) {
	if err := m.Validate(); err != nil {
		return Track{}, err
	}
	seq, err := sequence(n, shiftDeg)
	if err != nil {
		return Track{}, err
	}
	r := newRunner(Case{Model: m, Heading: 0}, Starboard)
	for _, ph := range seq {
		if err := r.phase(ph); err != nil {
			return Track{}, err
		}
	}
	return Track{
		AlongM: r.s.NorthM, OffsetM: r.s.EastM, TimeS: r.t, RunM: r.s.RunM,
		PeakDeg: r.peakDeg, SpeedKn: r.s.SpeedMs / nav.MsPerKn, EndDeg: r.s.HeadingDeg,
	}, nil
}

// OwnShiftDeg is the shift angle that brings this vessel back onto its own
// track, and the offset it leaves. The textbook angle does that only for some
// vessels. Found by bisection; where no angle between the limits does, the one
// with the smallest offset is given.
func (m Model) OwnShiftDeg(n Name) (shiftDeg, offsetM float64, err error) {
	low, high := 1.0, 140.0
	if n == Scharnow {
		low, high = 190, 320
	}
	f := func(shift float64) (float64, error) {
		t, err := m.Trial(n, shift)
		return t.OffsetM, err
	}
	a, errA := f(low)
	b, errB := f(high)
	if err := errors.Join(errA, errB); err != nil {
		return 0, 0, err
	}
	if a*b > 0 {
		if math.Abs(a) < math.Abs(b) {
			return low, a, nil
		}
		return high, b, nil
	}
	for high-low > 0.05 {
		mid := (low + high) / 2
		c, err := f(mid)
		if err != nil {
			return 0, 0, err
		}
		if a*c <= 0 {
			high = mid
		} else {
			low, a = mid, c
		}
	}
	shiftDeg = (low + high) / 2
	offsetM, err = f(shiftDeg)
	return shiftDeg, offsetM, err
}
