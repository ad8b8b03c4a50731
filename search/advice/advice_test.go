package advice

import (
	"encoding/json"
	"fmt"
	"math"
	"slices"
	"testing"
	"time"

	"wakeback/drift/nav"
	"wakeback/search/incident"
)

var t0 = time.Date(2026, 6, 1, 2, 14, 7, 0, time.UTC)

const (
	me      = incident.DeviceID("de000000-0000-4000-8000-000000000001")
	theCase = incident.IncidentID("018f3c2e-7b1a-7c3d-9e4f-000000000001")
)

// logOf builds a log of one device from kinds and bodies at seconds from t0.
type logOf struct {
	t   testing.TB
	all []incident.Event
}

func (l *logOf) say(sec float64, kind incident.Kind, body any) incident.EventID {
	l.t.Helper()
	n := len(l.all) + 1
	at := t0.Add(time.Duration(sec * float64(time.Second)))
	e, err := incident.New(incident.Event{
		ID: incident.EventID(fmt.Sprintf("018f3c2e-0000-7000-8000-%012d", n)), Incident: theCase,
		Device: me, DeviceSeq: uint64(n), At: at, DeviceAt: at,
	}, kind, body)
	if err != nil {
		l.t.Fatal(err)
	}
	if err := e.Validate(); err != nil {
		l.t.Fatal(err)
	}
	l.all = append(l.all, e)
	return e.ID
}

func (l *logOf) state() incident.State {
	l.t.Helper()
	states := incident.Fold(l.all)
	if len(states) != 1 {
		l.t.Fatalf("%d incidents", len(states))
	}
	return states[0]
}

// vessel is the own vessel with a fix of that moment.
func vessel(p nav.Position, sogKn float64, course nav.TrueDeg, at time.Time) Own {
	return Own{
		Source: incident.FromVessel, Heading: nav.Some(course), HeadingAt: at,
		Fix: nav.Some(nav.Fix{At: at, Position: p, SogKn: nav.Some(sogKn), CogTrue: nav.Some(course)}),
	}
}

func mark(p nav.Position) incident.Marked {
	return incident.Marked{Position: nav.Some(p), Source: incident.FromVessel, ErrorM: nav.Some(10.0)}
}

func show(v any) string {
	text, _ := json.MarshalIndent(v, "", " ")
	return string(text)
}

func near(t *testing.T, what string, got, want, tolerance float64) {
	t.Helper()
	if math.IsNaN(got) || math.Abs(got-want) > tolerance {
		t.Errorf("%s = %v, want %v within %v", what, got, want, tolerance)
	}
}

// Mark 50 40.000 N 001 10.000 W, stream 090 at 1.8 kn, no wind, twelve minutes
// on: the datum is at 50 40.000 N 001 09.432 W, 0.36 nm east; the mark is
// still shown.
func TestScenario11DriftWhileReturning(t *testing.T) {
	at := nav.PositionFromDegrees(50+40.0/60, -(1 + 10.0/60))
	l := &logOf{t: t}
	l.say(0, incident.KindMarked, mark(at))
	l.say(1, incident.KindWind, incident.WindObserved{SpeedKn: 0, ObservedBy: incident.ObservedBy{
		Source: "person", From: nav.Some(t0)}})
	l.say(2, incident.KindCurrent, incident.CurrentObserved{SetDeg: 90, DriftKn: 1.8, ObservedBy: incident.ObservedBy{
		Source: "tables", From: nav.Some(t0)}})
	now := t0.Add(12 * time.Minute)
	f := Steer(Input{Now: now, State: l.state(), Own: vessel(at.Shift(nav.Along(180, 1000)), 6, 0, now)})
	d, ok := f.Datum.Get()
	if !ok {
		t.Fatalf("no datum: %s", show(f))
	}
	want := nav.PositionFromDegrees(50+40.0/60, -(1 + 9.432/60))
	near(t, "off the datum of the scenario", nav.Inverse(want, d.Position).RangeM, 0, 5)
	near(t, "moved", d.MovedM, 0.36*nav.MetresPerNM, 5)
	near(t, "moved towards", float64(d.MovedTowards.Or(0)), 90, 1)
	if m, _ := f.Mark.Get(); nav.Inverse(m.Position.Or(nav.Position{}), at).RangeM > 0.02 {
		t.Errorf("the mark moved: %s", show(m))
	}
	if d.ErrorM < 10 {
		t.Errorf("error of the datum = %v m, less than that of the mark", d.ErrorM)
	}
}

// No side entered: the order to come about is either way, with the heading to
// steer and the reciprocal of the present one.
func TestScenario13SideUnknown(t *testing.T) {
	at := nav.PositionFromDegrees(54.1, 7.9)
	now := t0.Add(30 * time.Second)
	own := vessel(at.Shift(nav.Along(20, 2000)), 8, 20, now)
	for _, tt := range []struct{ side, way string }{{"", "either"}, {"port", "port"}, {"starboard", "port"}} {
		l := &logOf{t: t}
		m := mark(at.Shift(nav.Along(290, 150))) // a little to port of the wake
		m.Side = tt.side
		l.say(0, incident.KindMarked, m)
		f := Steer(Input{Now: now, State: l.state(), Own: own})
		if f.Do.Code != ComeAbout || f.Do.Way != tt.way {
			t.Errorf("side %q: do %s %s, want come_about %s", tt.side, f.Do.Code, f.Do.Way, tt.way)
		}
		if f.Do.Back.Or(0) != 200 {
			t.Errorf("reciprocal = %v, want 200", f.Do.Back)
		}
		if slices.Contains(f.Cautions, CautionSide) != (tt.side == "") {
			t.Errorf("side %q: cautions %v", tt.side, f.Cautions)
		}
	}
}

// No course change for half an hour: range grows, time and datum go on
// untouched, and the call is asked for as long as no answer is logged.
func TestScenario15StormCannotTurn(t *testing.T) {
	at := nav.PositionFromDegrees(54.1, 7.9)
	l := &logOf{t: t}
	l.say(0, incident.KindMarked, mark(at))
	var lastRange, lastError float64
	for minute := 1; minute <= 30; minute++ {
		now := t0.Add(time.Duration(minute) * time.Minute)
		away := nav.Along(90, 4*nav.MsPerKn*60*float64(minute))
		f := Steer(Input{Now: now, State: l.state(), Own: vessel(at.Shift(away), 4, 90, now)})
		near(t, "elapsed", f.ElapsedS.Or(-1), float64(60*minute), 0)
		d, _ := f.Datum.Get()
		if r := f.RangeM.Or(0); r <= lastRange || d.ErrorM <= lastError {
			t.Fatalf("minute %d: range %v after %v, error %v after %v", minute, r, lastRange, d.ErrorM, lastError)
		} else {
			lastRange, lastError = r, d.ErrorM
		}
		if !slices.Contains(f.Cautions, CautionCall) {
			t.Fatalf("minute %d: no prompt to call: %v", minute, f.Cautions)
		}
	}
	l.say(1800, incident.KindCallMade, incident.Call{Call: "distress", Channel: "16"})
	now := t0.Add(31 * time.Minute)
	f := Steer(Input{Now: now, State: l.state(), Own: vessel(at, 4, 90, now)})
	if !slices.Contains(f.Cautions, CautionCallAgain) {
		t.Errorf("called and not answered: %v", f.Cautions)
	}
	l.say(1900, incident.KindCallAnswered, incident.Call{Call: "distress", Station: "Exempla Rescue"})
	f = Steer(Input{Now: now, State: l.state(), Own: vessel(at, 4, 90, now)})
	if slices.Contains(f.Cautions, CautionCallAgain) || slices.Contains(f.Cautions, CautionCall) {
		t.Errorf("answered, and still asked to call: %v", f.Cautions)
	}
}

func TestScenario17ClockRunsAlongside(t *testing.T) {
	at := nav.PositionFromDegrees(54.1, 7.9)
	l := &logOf{t: t}
	l.say(0, incident.KindMarked, mark(at))
	l.say(300, incident.KindAlongside, incident.OfPerson{})
	now := t0.Add(6 * time.Minute)
	f := Steer(Input{Now: now, State: l.state(), Own: vessel(at, 0, 90, now)})
	near(t, "elapsed alongside", f.ElapsedS.Or(-1), 360, 0)
	if f.Do.Code != Recover || !slices.Contains(f.Cautions, CautionNotAboard) || !slices.Contains(f.Cautions, CautionCall) {
		t.Errorf("do %s, cautions %v", f.Do.Code, f.Cautions)
	}
	l.say(420, incident.KindAboard, incident.Aboard{Condition: "conscious"})
	now = t0.Add(20 * time.Minute)
	f = Steer(Input{Now: now, State: l.state(), Own: vessel(at, 0, 90, now)})
	near(t, "elapsed aboard", f.ElapsedS.Or(-1), 420, 0)
	if f.Do.Code != AllAboard {
		t.Errorf("do %s", f.Do.Code)
	}
}

// Two people: the frame steers for one and lists both; with the first aboard
// it steers for the second and says so.
func TestScenario31TwoPersons(t *testing.T) {
	at := nav.PositionFromDegrees(54.1, 7.9)
	l := &logOf{t: t}
	l.say(0, incident.KindMarked, mark(at))
	b := mark(at.Shift(nav.Along(0, 255)))
	b.Person = nav.Some(incident.PersonNo(2))
	l.say(55, incident.KindMarked, b)
	now := t0.Add(2 * time.Minute)
	own := vessel(at.Shift(nav.Along(0, 800)), 5, 180, now)
	f := Steer(Input{Now: now, State: l.state(), Own: own})
	if f.Person != 1 || len(f.Persons) != 2 || !slices.Contains(f.Cautions, CautionOthers) {
		t.Fatalf("frame = %s", show(f))
	}
	near(t, "first person's clock", f.Persons[0].ElapsedS.Or(0), 120, 0)
	near(t, "second person's clock", f.Persons[1].ElapsedS.Or(0), 65, 0)
	l.say(200, incident.KindAboard, incident.Aboard{Person: nav.Some(incident.PersonNo(1)), Condition: "well"})
	f = Steer(Input{Now: now, State: l.state(), Own: own})
	if f.Person != 2 || f.Do.Code == AllAboard {
		t.Errorf("steers for %d, do %s: recovering one cleared the other", f.Person, f.Do.Code)
	}
}

// The wedge is twice the angle of the error at this range; within the error
// it is the whole ring and the sentence changes.
func TestWedgeAndLookAllRound(t *testing.T) {
	at := nav.PositionFromDegrees(54.1, 7.9)
	l := &logOf{t: t}
	l.say(0, incident.KindMarked, mark(at))
	now := t0.Add(10 * time.Second)
	state := l.state()
	far := Steer(Input{Now: now, State: state, Own: vessel(at.Shift(nav.Along(180, 3000)), 6, 0, now)})
	d, _ := far.Datum.Get()
	r, _ := far.RangeM.Get()
	near(t, "wedge", far.WedgeDeg.Or(-1), math.Asin(d.ErrorM/r)*180/math.Pi, 1e-9)
	if far.Do.Code != SteerTo {
		t.Errorf("far off: %s", far.Do.Code)
	}
	in := Steer(Input{Now: now, State: state, Own: vessel(d.Position.Shift(nav.Along(180, d.ErrorM*0.9)), 6, 0, now)})
	if in.Do.Code != LookAllRound || in.WedgeDeg.Or(0) != 180 {
		t.Errorf("within the error: %s, wedge %v", in.Do.Code, in.WedgeDeg)
	}
	onTop := Steer(Input{Now: now, State: state, Own: vessel(d.Position, 6, 0, now)})
	if onTop.Do.Code != LookAllRound || onTop.BearingDeg.IsSet() && onTop.RangeM.Or(1) == 0 {
		t.Errorf("at the datum: %s", show(onTop.Do))
	}
}

// An own fix that is old is shown as old, then no longer steered by.
func TestOldFixIsNotThePresent(t *testing.T) {
	at := nav.PositionFromDegrees(54.1, 7.9)
	l := &logOf{t: t}
	l.say(0, incident.KindMarked, mark(at))
	own := vessel(at.Shift(nav.Along(180, 3000)), 6, 0, t0)
	for _, tt := range []struct {
		age   float64
		stale bool
		code  Code
	}{{1, false, SteerTo}, {6, true, SteerTo}, {31, true, NoFix}} {
		now := t0.Add(time.Duration(tt.age * float64(time.Second)))
		f := Steer(Input{Now: now, State: l.state(), Own: own})
		fix, _ := f.Fix.Get()
		if fix.Stale != tt.stale || f.Do.Code != tt.code {
			t.Errorf("age %v s: stale %t, do %s; want %t, %s", tt.age, fix.Stale, f.Do.Code, tt.stale, tt.code)
		}
		if tt.code == NoFix && f.RangeM.IsSet() {
			t.Errorf("age %v s: a range from a lost fix", tt.age)
		}
	}
}

// Nothing known is null, and no zero stands for it.
func TestNothingKnown(t *testing.T) {
	l := &logOf{t: t}
	l.say(0, incident.KindMarked, incident.Marked{Source: incident.FromNothing})
	f := Steer(Input{Now: t0.Add(time.Minute), State: l.state()})
	if f.Do.Code != NoPosition {
		t.Errorf("do %s", f.Do.Code)
	}
	var wire map[string]any
	if err := json.Unmarshal([]byte(show(f)), &wire); err != nil {
		t.Fatal(err)
	}
	for _, name := range []string{"fix", "datum", "range_m", "bearing_deg", "bearing_mag_deg", "relative_deg", "closing_kn", "eta_s", "heading_deg"} {
		if v, ok := wire[name]; !ok || v != nil {
			t.Errorf("%s = %v, want null", name, v)
		}
	}
	if wire["elapsed_s"] != 60.0 {
		t.Errorf("the clock does not run without a position: %v", wire["elapsed_s"])
	}
}

// Times outside the magnetic model give no magnetic bearing and say why.
func TestNoVariationRatherThanAWrongOne(t *testing.T) {
	at := nav.PositionFromDegrees(54.1, 7.9)
	l := &logOf{t: t}
	l.say(0, incident.KindMarked, mark(at))
	late := time.Date(2031, 1, 1, 0, 0, 0, 0, time.UTC)
	f := Steer(Input{Now: late, State: l.state(), Own: vessel(at.Shift(nav.Along(180, 90000)), 6, 0, late)})
	if f.BearingMagDeg.IsSet() || f.VariationNote == "" || !slices.Contains(f.Cautions, CautionVariation) {
		t.Errorf("variation %v, note %q, cautions %v", f.VariationDeg, f.VariationNote, f.Cautions)
	}
}

func TestClosing(t *testing.T) {
	at := nav.PositionFromDegrees(54.1, 7.9)
	l := &logOf{t: t}
	l.say(0, incident.KindMarked, mark(at))
	l.say(1, incident.KindWind, incident.WindObserved{ObservedBy: incident.ObservedBy{Source: "person", From: nav.Some(t0)}})
	l.say(1, incident.KindCurrent, incident.CurrentObserved{ObservedBy: incident.ObservedBy{Source: "person", From: nav.Some(t0)}})
	now := t0.Add(10 * time.Second)
	towards := Steer(Input{Now: now, State: l.state(), Own: vessel(at.Shift(nav.Along(180, 1852)), 6, 0, now)})
	near(t, "closing", towards.ClosingKn.Or(0), 6, 0.01)
	near(t, "time to go", towards.EtaS.Or(0), 600, 2)
	away := Steer(Input{Now: now, State: l.state(), Own: vessel(at.Shift(nav.Along(180, 1852)), 6, 180, now)})
	near(t, "closing when going away", away.ClosingKn.Or(0), -6, 0.01)
	if away.EtaS.IsSet() {
		t.Errorf("time of arrival when going away: %v", away.EtaS)
	}
}
