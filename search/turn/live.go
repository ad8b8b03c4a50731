package turn

import (
	"fmt"
	"math"
	"time"

	"wakeback/drift/nav"
)

// Begun says when and how a manoeuvre began.
type Begun struct {
	At time.Time // of the first order
	// Back means that the person is somewhere along the old track and not at a
	// datum: after the turn the old track is followed back.
	Back bool
	// LengthM and StoppingM, from her search speed, time the last cues.
	LengthM   nav.Opt[float64]
	StoppingM nav.Opt[float64]
}

// Sensed is what the instruments say at one moment. Whatever is absent is
// worked out from what went before, and the advice says so.
type Sensed struct {
	At      time.Time
	Fix     nav.Opt[nav.Fix]     // older than fixAgeS it is not used
	Heading nav.Opt[nav.TrueDeg] // by compass; the course over the ground is used when it is absent
	StwKn   nav.Opt[float64]     // speed through the water; else the speed over the ground is used
	Datum   nav.Opt[nav.Position]
}

// Next is the order that comes after the present one.
type Next struct {
	Code      Code                 `json:"code"`
	Helm      nav.Opt[Helm]        `json:"helm"`
	AtHeading nav.Opt[nav.TrueDeg] `json:"at_heading_deg"` // given at this heading
	InS       nav.Opt[float64]     `json:"in_s"`           // about so many seconds on, by the model
}

// Advice is what to do now. It is made anew from each observation: nothing in
// it is a script.
type Advice struct {
	At    time.Time            `json:"at"`
	Code  Code                 `json:"code"`
	Helm  nav.Opt[Helm]        `json:"helm"`      // -1 hard a-port to +1 hard a-starboard; absent where a heading is steered
	Turn  Side                 `json:"turn"`      // which way she is to turn; 0 when steady
	Steer nav.Opt[nav.TrueDeg] `json:"steer_deg"` // the heading to steer or to stop at
	Next  nav.Opt[Next]        `json:"next"`

	RangeM  nav.Opt[float64]     `json:"range_m"`     // to the datum, or to where the person was reckoned to be
	Bearing nav.Opt[nav.TrueDeg] `json:"bearing_deg"` // the same
	// ChangeDeg is the change of heading from the old course, positive to the
	// side of the first turn, not brought into a circle.
	ChangeDeg float64 `json:"change_deg"`
	Stage     int     `json:"stage"`  // of the manoeuvre's orders, from 0; their number when all are done
	Passes    int     `json:"passes"` // missed so far

	// Cue is what the engine is to do beside the steering: way_off or
	// engine_neutral; empty further off.
	Cue Code `json:"cue,omitempty"`

	Doubts []Doubt `json:"doubts,omitempty"`
}

// Doubt is a reason to trust the advice less.
type Doubt string

// The doubts.
const (
	HeadingByCourse Doubt = "heading_by_course"   // by the course over the ground
	HeadingByModel  Doubt = "heading_by_model"    // by the model and the clock
	PositionByModel Doubt = "position_by_model"   // no fix
	PositionJumped  Doubt = "position_jumped"     // the fix is not where a vessel can have got to; held back
	NotTurning      Doubt = "not_turning"         // the order is not seen in the heading: repeat it
	WrongWay        Doubt = "wrong_way"           // she turns the other way
	SideTakenOver   Doubt = "other_side_adopted"  // she has turned so far the other way that the rest is worked out for that side
	LongGap         Doubt = "gap_in_observations" // longer than gapS
)

// Our choices for the live advice. A fix is old after five seconds and a gap
// long after twenty, the quarter of a turn of a slow vessel. A vessel adopts
// the side she turns to by mistake when she is so far round, a third of the
// half circle, that going back costs more than going on; by then the person
// is clear of the stern.
const (
	fixAgeS      = 5
	gapS         = 20
	longestGapS  = 60
	wrongWayDeg  = 15
	adoptDeg     = 60
	courseFromKn = 2   // a course over the ground serves as heading from here on
	noWayKn      = 0.5 // below it she does not answer the helm
	wayAgainKn   = 1.0
	liveHorizonS = 900 // how far ahead the next order is looked for
	slackSwing   = 0.1 // of the rate hard over: not turning
	hesitateS    = 3   // allowed to a helmsman beyond the order's delay
	learnPart    = 0.2 // weight of each second's radius
	learnLimit   = 2.0 // times the trial's radius, or its part, at most
)

// Live gives helm orders from the real track. It is made when the first order
// is given, and fed with each observation in turn. It is not safe for use by
// two goroutines; a copy is independent of the original.
type Live struct {
	c      Case
	name   Name
	side   Side
	begun  Begun
	phases []phase
	stage  int

	at     time.Time
	est    State // relative to the person, in the water's frame
	sinceS float64
	jump   jumpGate
	steer  steerer
	watch  PassWatch
	still  bool
	doubts []Doubt
	// swingDegS is the rate of turn seen, smoothed; the state's own is half reckoned.
	swingDegS float64
	tookOver  bool
	trialM    float64 // the radius given
	last      Advice
}

// NewLive begins a manoeuvre. It refuses what [Plan] refuses.
func NewLive(n Name, c Case, b Begun) (*Live, error) {
	if err := c.Model.Validate(); err != nil {
		return nil, err
	}
	side := c.turnTo()
	if side == Unknown {
		return nil, fmt.Errorf("%w: the side of the fall is unknown, so no way to turn is advised", ErrManoeuvre)
	}
	if err := c.applies(n); err != nil {
		return nil, err
	}
	seq, err := c.sequence(n)
	if err != nil {
		return nil, err
	}
	r := newRunner(c, side)
	p := r.person()
	r.s.EastM -= p.EastM
	r.s.NorthM -= p.NorthM
	l := &Live{c: c, name: n, side: side, begun: b, phases: seq, at: b.At, est: r.s, trialM: c.Model.RadiusM}
	l.steer.model = c.Model
	l.last = l.advise()
	return l, nil
}

// Now is the newest advice.
func (l *Live) Now() Advice { return l.last }

// Update takes an observation and says what to do. One that is not newer than
// the last changes nothing.
func (l *Live) Update(o Sensed) Advice {
	dt := o.At.Sub(l.at).Seconds()
	if !(dt > 0) {
		return l.last
	}
	l.doubts = nil
	if dt > gapS {
		l.doubt(LongGap)
	}
	was := l.est
	l.est = l.predict(dt)
	l.at = o.At
	l.sinceS += dt
	headed := l.senseHeading(o, was, dt)
	l.sensePosition(o, dt)
	l.checkSide()
	if l.tookOver {
		l.doubt(SideTakenOver)
	}
	l.advance()
	l.last = l.advise()
	if !headed && l.stage >= len(l.phases) && l.last.Code != Alongside {
		l.last.Code, l.last.Steer, l.last.Turn = ByBearing, nav.None[nav.TrueDeg](), Unknown
	}
	return l.last
}

func (l *Live) doubt(d Doubt) { l.doubts = append(l.doubts, d) }

// hardRate is the rate of turn hard over, degrees a second, at the speed she has.
func (l *Live) hardRate() float64 {
	return l.est.SpeedMs / l.c.Model.RadiusM * 180 / math.Pi
}

// checkSide notices a vessel that turns the wrong way, or not at all, under
// the first helm order.
func (l *Live) checkSide() {
	if l.stage >= len(l.phases) {
		return
	}
	ph := l.phases[l.stage]
	if ph.helm == 0 || l.still {
		return
	}
	change := change(l.est, l.c.Heading, l.side)
	if l.stage == 0 && change < -adoptDeg {
		l.side, l.tookOver = -l.side, true
		return
	}
	if l.stage == 0 && change < -wrongWayDeg {
		l.doubt(WrongWay)
	}
	m := l.c.Model
	answered := m.OrderDelayS + m.RudderDeg/m.RudderRate + 2*m.LagS + hesitateS
	if l.sinceS < answered || ph.slow {
		return
	}
	rate := l.swingDegS * ph.helm * float64(l.side)
	if rate < slackSwing*l.hardRate() {
		l.doubt(NotTurning)
		return
	}
	l.learnRadius(rate)
}

// learnRadius brings the model's radius towards that of the turn she is in. A
// vessel in a seaway, loaded or slow to be put hard over turns unlike her
// trial; what she does now decides whether the person can be turned at.
func (l *Live) learnRadius(rateDegS float64) {
	seen := l.est.SpeedMs / (rateDegS * math.Pi / 180)
	seen = math.Max(l.trialM/learnLimit, math.Min(l.trialM*learnLimit, seen))
	l.c.Model.RadiusM += learnPart * (seen - l.c.Model.RadiusM)
	l.steer.model = l.c.Model
}

// advance moves on to the order that is due. It never goes back: an order
// once given is not taken back by a fix that reads a little less.
func (l *Live) advance() {
	for l.stage < len(l.phases) && l.done(l.phases[l.stage]) {
		l.stage++
		l.sinceS = 0
	}
}

// done reports whether an order has done its work: by heading; for a leg that
// is held, by the bearing of the person; and for the last turn also when the
// person is ahead, so that a late or wide turn is not driven past them.
func (l *Live) done(ph phase) bool {
	if ph.hold {
		_, relative := l.sight()
		return math.Abs(relative) >= ph.abaftDeg
	}
	if l.comingAtThem() {
		if rangeM, relative := l.sight(); math.Abs(nav.NormSignedDeg(relative-l.swing())) < facingDeg && rangeM > l.c.Model.RadiusM {
			return true
		}
	}
	if ph.code == Midships && l.sinceS > l.c.Model.OrderDelayS+hesitateS && math.Abs(l.est.RateDegS) < slackSwing*l.hardRate() {
		return true // stopped swinging: the heading is steered from here
	}
	return reached(l.est, l.c.Heading, l.side, ph)
}

// comingAtThem reports whether the orders left only turn her at the person,
// who is at a datum.
func (l *Live) comingAtThem() bool {
	last := l.stage == len(l.phases)-1 || l.stage == len(l.phases)-2 && l.phases[l.stage].code != HelmOver
	return !l.begun.Back && last && math.Abs(change(l.est, l.c.Heading, l.side)) > 90 || l.name == RaceTrack && l.stage == 2
}

// swing is how far she goes on turning before an order given now is felt: the
// order's delay, half the rudder's travel and the lag.
func (l *Live) swing() float64 { return l.est.RateDegS * l.c.Model.answersS() }

// sight is the range of the person and the bearing from the bow.
func (l *Live) sight() (rangeM, relativeDeg float64) {
	o := nav.Offset{EastM: -l.est.EastM, NorthM: -l.est.NorthM}
	dir, ok := o.Direction().Get()
	if !ok {
		return 0, 0
	}
	return o.RangeM(), dir.Minus(nav.True(l.est.HeadingDeg))
}

// advise says what to do in the state as it is.
func (l *Live) advise() Advice {
	rangeM, relative := l.sight()
	a := Advice{
		At: l.at, Stage: l.stage, ChangeDeg: change(l.est, l.c.Heading, l.side),
		RangeM: nav.Some(rangeM), Bearing: nav.Some(nav.True(l.est.HeadingDeg + relative)),
	}
	switch {
	case l.still && (l.stage < len(l.phases) || l.begun.Back || rangeM > passNearM):
		a.Code = NoWay
	case l.stage < len(l.phases):
		l.ordered(&a)
	default:
		l.steered(&a, rangeM, relative)
	}
	a.Passes = l.watch.Missed
	a.Doubts = l.doubts
	return a
}

// ordered is the advice while the manoeuvre's orders last.
func (l *Live) ordered(a *Advice) {
	ph := l.phases[l.stage]
	a.Code = ph.code
	until := l.c.Heading.Add(ph.until * float64(l.side))
	a.Steer = nav.Some(until)
	if !ph.hold {
		h := ph.to(l.side)
		a.Helm = nav.Some(h)
		a.Turn = sideOf(float64(h))
	}
	next := Next{Code: ComeTo}
	if l.stage+1 < len(l.phases) {
		then := l.phases[l.stage+1]
		next.Code = then.code
		if !then.hold {
			next.Helm = nav.Some(then.to(l.side))
		}
	}
	if !ph.hold {
		next.AtHeading = nav.Some(until)
	}
	next.InS = l.lookAhead(ph)
	a.Next = nav.Some(next)
}

func sideOf(v float64) Side {
	switch {
	case v > 0:
		return Starboard
	case v < 0:
		return Port
	}
	return Unknown
}

// lookAhead is the time until an order is done if it is obeyed from now on;
// absent when that is beyond the horizon.
func (l *Live) lookAhead(ph phase) nav.Opt[float64] {
	ahead := *l
	order := ph.to(l.side)
	dt := l.c.Model.coarseStep()
	for t := 0.0; t < liveHorizonS; t += dt {
		if ahead.done(ph) {
			return nav.Some(t)
		}
		h := order
		if ph.hold {
			h = helmsman(l.c.Heading.Add(ph.until*float64(l.side)), ahead.est, l.c.Model)
		}
		ahead.move(h, dt)
		ahead.sinceS += dt
	}
	return nav.None[float64]()
}
