package turn

import (
	"fmt"
	"math"

	"wakeback/drift/nav"
)

// runner steers a vessel through phases, with the person in the water beside it.
type runner struct {
	c        Case
	side     Side
	s        State
	t        float64
	helm     Helm
	slow     bool
	orders   []Order
	path     []Point
	recorded float64
	turned   bool // more than 90 degrees from the old course: on the way back
	closestM float64
	peakDeg  float64 // largest change of heading to the side of the first turn
}

func newRunner(c Case, side Side) *runner {
	r := &runner{c: c, side: side, s: c.Model.start(c.Heading), closestM: math.Inf(1), recorded: -1}
	run := nav.Along(c.Heading, c.runSinceFallM())
	r.s.EastM, r.s.NorthM = run.EastM, run.NorthM
	r.record()
	return r
}

func (r *runner) record() {
	if r.t-r.recorded < 1 && r.recorded >= 0 {
		return
	}
	r.recorded = r.t
	r.path = append(r.path, Point{
		TS: r.t, Offset: nav.Offset{EastM: r.s.EastM, NorthM: r.s.NorthM},
		HeadingDeg: nav.True(r.s.HeadingDeg), SpeedMs: r.s.SpeedMs,
	})
}

// person is where the person is now: carried off from the water they fell
// into by the wind alone.
func (r *runner) person() nav.Offset {
	s := r.c.Delay.Seconds() + r.t
	return nav.Offset{EastM: r.c.PersonDrift.EastMs * s, NorthM: r.c.PersonDrift.NorthMs * s}
}

// sight is the person's range, and bearing from the bow.
func (r *runner) sight() (rangeM, relativeDeg float64) {
	o := r.person().Sub(nav.Offset{EastM: r.s.EastM, NorthM: r.s.NorthM})
	dir, ok := o.Direction().Get()
	if !ok {
		return 0, 0
	}
	return o.RangeM(), dir.Minus(nav.True(r.s.HeadingDeg))
}

// step moves vessel and clock on, and keeps the closest approach of the way back.
func (r *runner) step(h Helm) {
	m := r.c.Model
	if r.slow {
		m.SpeedRatio *= slowPart
	}
	r.s = m.step(r.s, h, stepS)
	r.helm, r.t = h, r.t+stepS
	turned := change(r.s, r.c.Heading, r.side)
	r.peakDeg = math.Max(r.peakDeg, turned)
	if math.Abs(turned) > 90 {
		r.turned = true
	}
	if r.turned {
		rangeM, _ := r.sight()
		r.closestM = math.Min(r.closestM, rangeM)
	}
	r.record()
}

// slowPart is what is left of the speed in a circle at idle; our choice.
const slowPart = 0.5

// phase steers one order until it is done.
func (r *runner) phase(ph phase) error {
	helm := ph.to(r.side)
	r.orders = append(r.orders, Order{
		AtS: r.t, Word: ph.word, Code: ph.code, Helm: helm, UntilOf: ph.until, Until: r.c.Heading.Add(ph.until * float64(r.side)),
	})
	r.slow = ph.slow
	before, begun, eased := r.helm, r.t, false
	for !r.done(ph) {
		order := helm
		switch {
		case r.t-begun < r.c.Model.OrderDelayS:
			order = before
		case ph.hold:
			order = r.steer(r.c.Heading.Add(ph.until * float64(r.side)))
		default:
			eased = eased || ph.stops(order, r.s, r.c.Model)
			order = ph.meet(order, eased, r.side)
		}
		r.step(order)
		if r.t > maxTurnS {
			return fmt.Errorf("%w: the vessel does not come round within an hour", ErrManoeuvre)
		}
	}
	return nil
}

func (r *runner) done(ph phase) bool {
	_, relative := r.sight()
	switch {
	case ph.hold:
		return math.Abs(relative) >= ph.abaftDeg
	case ph.facing && r.turned && math.Abs(relative) < facingDeg:
		return true
	}
	return reached(r.s, r.c.Heading, r.side, ph)
}

// facingDeg is when the person is ahead; our choice.
const facingDeg = 10

func (r *runner) steer(course nav.TrueDeg) Helm { return helmsman(course, r.s, r.c.Model) }

// runBack steers for the person until they are alongside, or until they have
// been passed as close as the vessel can come: a person within the turning
// circle cannot be steered at, so the vessel first opens the range.
func (r *runner) runBack() {
	r.slow = false
	wide := wideRadii * r.c.Model.RadiusM
	open, passes := false, 0
	for r.t < maxTurnS && passes < 2 {
		rangeM, relative := r.sight()
		if rangeM < alongsideM {
			break
		}
		abeam := math.Abs(relative) > 90
		switch {
		case !open && abeam && rangeM < wide:
			open = true
			if r.closestM < r.c.Model.RadiusM/2 {
				passes = 2 // passed close by: alongside but for the last boat's length
			} else {
				passes++
			}
		case open && rangeM >= wide:
			open = false
		}
		if open {
			r.step(0)
			continue
		}
		r.step(r.steer(nav.True(r.s.HeadingDeg + relative)))
	}
	r.recorded = -1
	r.record()
}

// The run back ends within alongsideM of the person. A person abaft the beam
// and nearer than wideRadii turning radii cannot be turned at. Our choice.
const (
	alongsideM = 5
	wideRadii  = 3
)
