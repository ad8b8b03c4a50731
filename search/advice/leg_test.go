package advice

import (
	"testing"
	"time"

	"wakeback/drift/nav"
	"wakeback/search/incident"
	"wakeback/search/pattern"
)

// laid is an expanding square around a mark, in a stream that carries both.
func laid(t *testing.T, datum nav.Position) incident.SearchLaid {
	t.Helper()
	legs, err := pattern.Square(40, 0.1*nav.MetresPerNM, 4, pattern.Right)
	if err != nil {
		t.Fatal(err)
	}
	s := incident.SearchLaid{
		Pattern: "square", Datum: datum, Begin: t0.Add(10 * time.Minute), SpeedKn: 5,
		Current: incident.SetDrift{SetDeg: 90, DriftKn: 1.5}, DatumDrift: incident.SetDrift{SetDeg: 90, DriftKn: 1.5},
	}
	for _, l := range legs {
		s.Legs = append(s.Legs, incident.LegLaid{Kind: string(l.Kind), CourseDeg: l.Course, LengthM: l.LengthM, From: l.From, To: l.To})
	}
	return s
}

// On a leg the thing to do is to steer it; a sighting turns the order to the
// person while the leg stays where it was.
func TestLegIsSteeredUntilSomethingIsSeen(t *testing.T) {
	at := nav.PositionFromDegrees(54.1, 7.9)
	l := &logOf{t: t}
	l.say(0, incident.KindMarked, mark(at))
	id := l.say(590, incident.KindSearchLaid, laid(t, at))
	l.say(600, incident.KindLegBegun, incident.LegBegun{Search: id, Leg: 1})
	now := t0.Add(11 * time.Minute)
	carried := nav.Towards(90, 1.5).For(time.Minute)
	own := vessel(at.Shift(nav.Along(40, 100).Add(carried)), 5, 40, now)
	f := Steer(Input{Now: now, State: l.state(), Own: own})
	leg, ok := f.Leg.Get()
	if !ok || f.Do.Code != SteerLeg {
		t.Fatalf("frame = %s", show(f))
	}
	near(t, "off the leg", leg.CrossM.Or(99), 0, 0.1)
	near(t, "to go", leg.ToGoM.Or(99), 85.2, 0.1)
	near(t, "turn in", leg.TurnInS.Or(0), 85.2/(5*nav.MsPerKn), 0.1)
	near(t, "heading: the stream carries both", leg.SteerDeg.Or(0).Minus(40), 0, 0.1)
	near(t, "next turn", leg.NextTurnDeg.Or(0), 90, 1e-6)
	if leg.Leg != 1 || leg.Of != 4 {
		t.Errorf("leg %d of %d", leg.Leg, leg.Of)
	}
	l.say(650, incident.KindSeen, incident.Seen{What: "light"})
	if f = Steer(Input{Now: now, State: l.state(), Own: own}); f.Do.Code == SteerLeg || !f.Leg.IsSet() {
		t.Errorf("in sight: do %s, leg %v", f.Do.Code, f.Leg.IsSet())
	}
	l.say(655, incident.KindSearchPaused, incident.SearchWord{Search: id})
	if f = Steer(Input{Now: now, State: l.state(), Own: own}); !f.Leg.Or(LegSeen{}).Paused {
		t.Errorf("not shown as paused")
	}
}

// Without a position the leg is steered by heading and time.
func TestLegWithoutPosition(t *testing.T) {
	at := nav.PositionFromDegrees(54.1, 7.9)
	l := &logOf{t: t}
	l.say(0, incident.KindMarked, mark(at))
	id := l.say(590, incident.KindSearchLaid, laid(t, at))
	l.say(600, incident.KindLegBegun, incident.LegBegun{Search: id, Leg: 2})
	f := Steer(Input{Now: t0.Add(11 * time.Minute), State: l.state()})
	leg, _ := f.Leg.Get()
	if leg.SteerDeg.Or(0) != 130 || leg.CrossM.IsSet() || leg.Note == "" || f.Do.Code != SteerLeg {
		t.Errorf("leg = %s, do %s", show(leg), f.Do.Code)
	}
}
