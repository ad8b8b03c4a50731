package turn

import (
	"math"
	"math/rand/v2"
	"testing"
	"time"

	"wakeback/drift/nav"
)

var begun = time.Date(2031, 5, 4, 12, 0, 0, 0, time.UTC)

// sloppy is a vessel with a helmsman who does what the live orders say, two
// seconds late and up to some degrees off, in a current, with a noisy compass
// and receiver.
type sloppy struct {
	m       Model // as she really is
	s       State // in the water's frame, from the place of the fall
	t       float64
	rng     *rand.Rand
	errDeg  float64 // the helmsman's present error
	heard   []heard
	current nav.Velocity
	leeway  nav.Velocity
	delayS  float64 // since the fall at the first order
	origin  nav.Position
}

type heard struct {
	dueS float64
	a    Advice
}

const (
	helmsmanDelayS = 2
	helmsmanErrDeg = 5
)

func newSloppy(m Model, c Case, seed uint64) *sloppy {
	v := &sloppy{
		m: m, s: m.start(c.Heading), rng: rand.New(rand.NewPCG(seed, 7)), delayS: c.Delay.Seconds(),
		current: nav.Towards(nav.True(float64(seed*37)), 2), leeway: c.PersonDrift,
		origin: nav.PositionFromDegrees(54, 7.9),
	}
	run := nav.Along(c.Heading, c.runSinceFallM())
	v.s.EastM, v.s.NorthM = run.EastM, run.NorthM
	v.errDeg = v.rng.NormFloat64() * helmsmanErrDeg
	return v
}

func (v *sloppy) person() nav.Offset {
	s := v.t + v.delayS
	return nav.Offset{EastM: v.leeway.EastMs * s, NorthM: v.leeway.NorthMs * s}
}

func (v *sloppy) rangeM() float64 {
	return v.person().Sub(nav.Offset{EastM: v.s.EastM, NorthM: v.s.NorthM}).RangeM()
}

// helm is what the helmsman lays for the advice as heard.
func (v *sloppy) helm() Helm {
	for len(v.heard) > 1 && v.heard[1].dueS <= v.t {
		v.heard = v.heard[1:]
	}
	if len(v.heard) == 0 || v.heard[0].dueS > v.t {
		return 0
	}
	a := v.heard[0].a
	if h, ok := a.Helm.Get(); ok && a.Code != Midships {
		return h
	}
	steer, ok := a.Steer.Get()
	if !ok {
		return 0
	}
	return helmsman(steer.Add(v.errDeg), v.s, v.m)
}

// second runs a second. The error wanders with a memory of ten seconds and
// keeps its size.
func (v *sloppy) second() {
	keep := math.Exp(-0.1)
	v.errDeg = v.errDeg*keep + v.rng.NormFloat64()*helmsmanErrDeg*math.Sqrt(1-keep*keep)
	const dt = 0.1 // twice the model's step, for the time of the tests
	for range int(math.Round(1 / dt)) {
		h, m := v.helm(), v.m
		if len(v.heard) > 0 && v.heard[0].a.Code == IdleTurn {
			m.SpeedRatio *= slowPart
		}
		v.s = m.step(v.s, h, dt)
		v.t += dt
	}
}

// sensed is what her instruments say: 3 m of noise on the fix, 2 degrees on
// the compass, all of it carried by the current.
func (v *sloppy) sensed() Sensed {
	d := v.current.For(time.Duration((v.t + v.delayS) * float64(time.Second)))
	noise := nav.Offset{EastM: v.rng.NormFloat64() * 3, NorthM: v.rng.NormFloat64() * 3}
	pl := nav.NewPlane(v.origin)
	at := begun.Add(time.Duration(v.t * float64(time.Second)))
	through := nav.Towards(nav.True(v.s.HeadingDeg), v.s.SpeedMs/nav.MsPerKn).Add(v.current)
	fix := nav.Fix{
		At: at, Position: pl.Position(nav.Offset{EastM: v.s.EastM, NorthM: v.s.NorthM}.Add(d).Add(noise)),
		SogKn: nav.Some(through.SpeedKn()), CogTrue: through.Direction(),
	}
	return Sensed{
		At: at, Fix: nav.Some(fix), Heading: nav.Some(nav.True(v.s.HeadingDeg + v.rng.NormFloat64()*2)),
		StwKn: nav.Some(v.s.SpeedMs / nav.MsPerKn),
		Datum: nav.Some(pl.Position(v.person().Add(d))),
	}
}

// outcome is how a run ended: the closest approach of the first pass.
type outcome struct {
	closestM float64
	seconds  float64
	advice   []Advice
}

// follow runs until alongside, until the first pass is over, or for an hour.
func (v *sloppy) follow(l *Live, spoil func(*Sensed, float64)) outcome {
	out := outcome{closestM: math.Inf(1)}
	v.heard = append(v.heard, heard{helmsmanDelayS, l.Now()})
	for v.t < maxTurnS {
		v.second()
		o := v.sensed()
		if spoil != nil {
			spoil(&o, v.t)
		}
		a := l.Update(o)
		out.advice = append(out.advice, a)
		v.heard = append(v.heard, heard{v.t + helmsmanDelayS, a})
		if a.Stage < len(l.phases) && a.ChangeDeg*a.ChangeDeg < 90*90 {
			continue
		}
		out.closestM = math.Min(out.closestM, v.rangeM())
		if a.Code == Alongside || a.Passes > 0 {
			break
		}
	}
	out.seconds = v.t
	return out
}

// The orders followed sloppily pass within one turning radius of the drifting
// datum in at least 95 of 100 runs, on the first pass.
func TestFollowingTheOrdersComesBack(t *testing.T) {
	for name, m := range vessels(t) {
		for _, n := range []Name{Single, Williamson, Scharnow, RaceTrack} {
			t.Run(name+" "+string(n), func(t *testing.T) {
				t.Parallel()
				good, worst := 0, 0.0
				for seed := range uint64(100) {
					closest := followed(t, n, m, seed)
					worst = max(worst, closest)
					if closest <= m.RadiusM {
						good++
					}
				}
				t.Logf("%d of 100, worst %.0f m of a radius of %.0f m", good, worst, m.RadiusM)
				if good < 95 {
					t.Errorf("%d of 100 within one radius", good)
				}
			})
		}
	}
}

// The slow circle of a small boat, steered by the orders.
func TestFollowingTheSlowCircle(t *testing.T) {
	m, good := yacht(t), 0
	for seed := range uint64(100) {
		if followed(t, SlowCircle, m, seed) <= m.RadiusM {
			good++
		}
	}
	if good < 95 {
		t.Errorf("%d of 100 within one radius", good)
	}
}

// followed is the closest approach of one run.
func followed(t *testing.T, n Name, m Model, seed uint64) float64 {
	c := Case{
		Model: m, Side: []Side{Port, Starboard}[seed%2], Heading: nav.True(float64(seed) * 53),
		PersonDrift: nav.Towards(nav.True(float64(seed)*71), 0.6), Delay: time.Duration(seed%5) * 5 * time.Second,
	}
	if n == Scharnow {
		c.Delay = time.Duration(4+seed%5) * time.Minute
	}
	l, err := NewLive(n, c, Begun{At: begun})
	if err != nil {
		t.Fatal(err)
	}
	out := newSloppy(m, c, seed).follow(l, nil)
	noContradiction(t, n, out.advice)
	return out.closestM
}

// noContradiction: no order is taken back. Stages only go forwards; within a
// stage the helm ordered stays; and once a heading is steered, the way to turn
// changes only through steady.
func noContradiction(t *testing.T, n Name, as []Advice) {
	t.Helper()
	for i := 1; i < len(as); i++ {
		a, b := as[i-1], as[i]
		switch {
		case b.Stage < a.Stage:
			t.Fatalf("%s: stage %d after %d", n, b.Stage, a.Stage)
		case b.Stage == a.Stage && a.Helm.IsSet() && a.Helm != b.Helm:
			t.Fatalf("%s: helm %v after %v in one stage", n, b.Helm, a.Helm)
		case !a.Helm.IsSet() && !b.Helm.IsSet() && a.Turn == -b.Turn && a.Turn != Unknown:
			t.Fatalf("%s: to %s after to %s", n, b.Turn, a.Turn)
		}
	}
}
