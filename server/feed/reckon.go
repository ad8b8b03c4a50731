package feed

import (
	"math"
	"time"

	"wakeback/drift/nav"
)

// Basis says by what a dead reckoning is carried on.
type Basis string

// The bases, best first.
const (
	ByWater  Basis = "heading and speed through water"
	ByGround Basis = "course and speed over ground"
	ByLast   Basis = "last known course and speed, held"
)

// DeadReckoned is where the vessel should have got to since its last fix.
type DeadReckoned struct {
	Position nav.Position `json:"position"`
	// ErrorM is the radius that holds the true position in 95 of 100 cases, as
	// far as its causes are known.
	ErrorM  float64 `json:"error_m"`
	FixAgeS float64 `json:"fix_age_s"`
	RunM    float64 `json:"run_m"` // distance run since the fix
	Basis   Basis   `json:"basis"` // of the worst part of the run
}

const (
	// Standard errors of a dead reckoning: the sum of course and speed errors
	// after Bowditch, sigma = sqrt((D sin sigma_c)^2 + (D sigma_s)^2), with the
	// upper ends of the usual ranges (2 to 5 degrees, 3 to 10 per cent; a
	// dead-reckoning table of a navigation handbook, not a manual). The upper
	// ends are our choice, because the log and compass of a small vessel are
	// seldom calibrated.
	sigmaCourseDeg = 5
	sigmaSpeed     = 0.10
	// sigmaCurrentKn is the current that nobody has told us of. Our choice: 1 kn
	// is a common tidal stream in open coastal water.
	sigmaCurrentKn = 1.0
	// sigmaToldCurrentKn is what remains when an instrument sends set and drift.
	// Our choice, half of it.
	sigmaToldCurrentKn = 0.5
	// sigmaFixM is the error of the fix at the start: a civil receiver is within
	// about 8 m in 95 of 100 cases (GPS standard positioning service, 2020, from
	// memory), twice its standard error.
	sigmaFixM = 4
	// to95 turns a distance root mean square into a radius of 95 per cent:
	// common practice (2 drms holds 95 to 98 of 100).
	to95 = 2
)

// motion is how the vessel moves at one moment, for the reckoning.
type motion struct {
	velocity       nav.Velocity // over the ground
	basis          Basis
	sigmaCurrentMs float64 // of the water; 0 when the velocity is over the ground
}

// reckoner carries a position on from the last fix. It adds up the run piece by
// piece, so that turns made since the fix are in it.
type reckoner struct {
	from    nav.Opt[nav.Position]
	fixAt   time.Time
	to      time.Time // up to when the run is added up
	run     nav.Offset
	runM    float64
	driftM  float64 // what the unknown current may have done, standard error
	basis   Basis
	lastWas nav.Opt[nav.Velocity] // over the ground, when it was last known
}

// fix starts the reckoning anew at a fix.
func (r *reckoner) fix(p nav.Position, at time.Time, over nav.Opt[nav.Velocity]) {
	*r = reckoner{from: nav.Some(p), fixAt: at, to: at, lastWas: r.lastWas}
	if over.IsSet() {
		r.lastWas = over
	}
}

// advance adds the run up to now, made with motion m; without one the last known
// velocity is held.
func (r *reckoner) advance(now time.Time, m nav.Opt[motion]) {
	if !r.from.IsSet() || !now.After(r.to) {
		return
	}
	d := now.Sub(r.to)
	r.to = now
	mv, ok := m.Get()
	if !ok {
		mv = motion{velocity: r.lastWas.Or(nav.Velocity{}), basis: ByLast}
	}
	r.run = r.run.Add(mv.velocity.For(d))
	r.runM += mv.velocity.SpeedMs() * d.Seconds()
	r.driftM += mv.sigmaCurrentMs * d.Seconds()
	if r.basis == "" || mv.basis == ByLast || mv.basis == ByGround && r.basis == ByWater {
		r.basis = mv.basis
	}
	if ok {
		r.lastWas = nav.Some(mv.velocity)
	}
}

// reckoned is the result; absent before the first fix and while nothing at all
// is known of the vessel's motion.
func (r *reckoner) reckoned() nav.Opt[DeadReckoned] {
	from, ok := r.from.Get()
	if !ok || r.basis == "" || r.basis == ByLast && !r.lastWas.IsSet() {
		return nav.None[DeadReckoned]()
	}
	return nav.Some(DeadReckoned{
		Position: from.Shift(r.run),
		ErrorM:   r.errorM(),
		FixAgeS:  r.to.Sub(r.fixAt).Seconds(),
		RunM:     r.runM,
		Basis:    r.basis,
	})
}

// runSigmaM is the standard error of a run of runM metres, from those of course
// and speed.
func runSigmaM(runM, sigmaCourse, sigmaSpeed float64) float64 {
	return math.Hypot(runM*math.Sin(sigmaCourse*math.Pi/180), runM*sigmaSpeed)
}

func (r *reckoner) errorM() float64 {
	run := runSigmaM(r.runM, sigmaCourseDeg, sigmaSpeed)
	e := to95 * math.Sqrt(run*run+r.driftM*r.driftM+sigmaFixM*sigmaFixM)
	if r.basis == ByLast {
		// Nothing tells whether she kept her course: she may be anywhere within
		// the distance she could run, on any side of where she was.
		e = math.Max(e, 2*r.runM)
	}
	return e
}
