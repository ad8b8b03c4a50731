package incident

import (
	"math"
	"math/rand/v2"
	"testing"

	"github.com/google/go-cmp/cmp"
	"pgregory.net/rapid"

	"wakeback/drift/nav"
)

// Two phones press 40 s apart: both presses stay, the first is steered by
// until the one in charge chooses, and nothing is averaged.
func TestScenario05TwoMarks(t *testing.T) {
	s := newStory(t)
	a := s.say("a", 0, KindMarked, markedAt(54, 7))
	b := s.say("b", 40, KindMarked, markedAt(54.001, 7))
	st := s.state()
	if len(st.Marks) != 2 || st.Marks[0].Number != 1 || st.Marks[1].Number != 2 {
		t.Fatalf("marks = %s", toJSON(t, st.Marks))
	}
	if got := st.Persons[0].WorkingMark.Or(""); got != a.ID {
		t.Fatalf("working mark = %s, want the first, %s", got, a.ID)
	}
	s.say("a", 50, KindInCharge, InCharge{Name: "Skipper", Term: 1})
	s.say("b", 55, KindWorkingMark, WorkingMark{Mark: b.ID})
	if got := s.state().Persons[0].WorkingMark.Or(""); got != a.ID {
		t.Errorf("a phone that is not in charge changed the working mark to %s", got)
	}
	s.say("a", 60, KindWorkingMark, WorkingMark{Mark: b.ID})
	st = s.state()
	if got := st.Persons[0].WorkingMark.Or(""); got != b.ID {
		t.Errorf("working mark = %s, want the one chosen by the one in charge, %s", got, b.ID)
	}
	if len(st.Asked) != 0 {
		t.Errorf("the granted wish is still there: %s", toJSON(t, st.Asked))
	}
}

// The last fix was 95 s old at 6.5 kn: the press is kept with it, and the place
// is 318 m further on, with an error that grows.
func TestScenario08NoFixAtThePress(t *testing.T) {
	s := newStory(t)
	m := markedAt(54, 7)
	m.FixAgeS, m.SogKn, m.CogDeg = nav.Some(95.0), nav.Some(6.5), nav.Some(nav.TrueDeg(30))
	s.say("a", 0, KindMarked, m)
	got := s.state().Marks[0]
	press, place := got.Press.Or(Place{}), got.Place.Or(Place{})
	line := nav.Inverse(press.Position, place.Position)
	if math.Abs(line.RangeM-318) > 3 || math.Abs(line.Bearing.Or(0).Minus(30)) > 0.1 || place.Source != FromDR {
		t.Errorf("carried on %v m towards %v, source %s", line.RangeM, line.Bearing, place.Source)
	}
	if e := place.ErrorM.Or(0); e < 60 || e > 120 {
		t.Errorf("error = %v m", e)
	}
	if press.FixAgeS.Or(0) != 95 {
		t.Errorf("the press lost the age of its fix")
	}
}

// A false mark is dismissed within 20 s: no person is left to steer to, the
// log keeps mark, who dismissed it, and when.
func TestScenario06FalseMark(t *testing.T) {
	s := newStory(t)
	m := s.say("a", 0, KindMarked, markedAt(54, 7))
	s.say("b", 5, KindCallMade, Call{Call: "distress", Channel: "16"})
	s.say("b", 20, KindMarkDismissed, MarkDismissed{Mark: m.ID, Reason: "phone in a pocket"})
	st := s.state()
	d, ok := st.Marks[0].Dismissed.Get()
	if !ok || d.By != "b" || !d.At.Equal(s.at(20)) {
		t.Fatalf("dismissed = %s", toJSON(t, st.Marks[0]))
	}
	if len(st.Persons) != 0 || st.Status != StoodDownSt {
		t.Errorf("persons %s, status %s; want none and stood down", toJSON(t, st.Persons), st.Status)
	}
	if len(st.Calls) != 1 {
		t.Errorf("the distress call is not in the state, so its cancelling cannot be offered")
	}
}

// Somebody who is not in charge cancels a mark that is acted on: it becomes a
// question to the one in charge, and the mark stays.
func TestScenario07CancelOfARealOne(t *testing.T) {
	s := newStory(t)
	m := s.say("a", 0, KindMarked, markedAt(54, 7))
	s.say("c", 10, KindInCharge, InCharge{Name: "Skipper", Term: 1})
	s.say("b", 30, KindMarkDismissed, MarkDismissed{Mark: m.ID, Reason: "I think it was nothing"})
	s.say("b", 31, KindStoodDown, StoodDown{Reason: "nothing there"})
	st := s.state()
	if st.Marks[0].Dismissed.IsSet() || st.Status != Open || len(st.Persons) != 1 {
		t.Fatalf("the mark was cancelled by a phone that is not in charge: %s", toJSON(t, st))
	}
	if len(st.Asked) != 2 || st.Asked[0].Mark != m.ID {
		t.Fatalf("asked = %s, want the two wishes", toJSON(t, st.Asked))
	}
	s.say("c", 60, KindStoodDown, StoodDown{Reason: "seen on deck"})
	if st = s.state(); st.Status != StoodDownSt {
		t.Errorf("status = %s after the one in charge stood down", st.Status)
	}
}

func TestScenario17AlongsideIsNotAboard(t *testing.T) {
	s := newStory(t)
	s.say("a", 0, KindMarked, markedAt(54, 7))
	s.say("a", 300, KindAlongside, OfPerson{})
	st := s.state()
	if st.Persons[0].Status != Alongside || st.Status != Open {
		t.Errorf("status %s, incident %s", st.Persons[0].Status, st.Status)
	}
	s.say("a", 400, KindParted, OfPerson{})
	if got := s.state().Persons[0].Status; got != InWater {
		t.Errorf("after parting: %s", got)
	}
}

// A person missing since the watch changed has a window, no point; a clue
// narrows it, and taking the clue back restores it.
func TestScenario28And29MissingAndClue(t *testing.T) {
	s := newStory(t)
	s.say("a", 4*3600, KindMissing, Missing{LastSeen: s.at(0), Noticed: s.at(4 * 3600)})
	st := s.state()
	p := st.Persons[0]
	if p.Status != IsMissing || p.WorkingMark.IsSet() || len(st.Marks) != 0 {
		t.Fatalf("person = %s", toJSON(t, p))
	}
	clue := s.say("b", 4*3600+60, KindClue, Clue{
		Text: "pump switched on", Sure: Certain, Who: "gauge", NotBefore: nav.Some(s.at(2*3600 + 600)),
	})
	w, _ := s.state().Persons[0].Window.Get()
	if !w.From.Equal(s.at(2*3600+600)) || !w.To.Equal(s.at(4*3600)) || !w.LastSeen.Equal(s.at(0)) {
		t.Errorf("window = %s", toJSON(t, w))
	}
	bad := s.say("b", 4*3600+90, KindClue, Clue{Text: "heard a splash", Sure: Possible, NotAfter: nav.Some(s.at(3600))})
	w, _ = s.state().Persons[0].Window.Get()
	if len(w.Against) != 1 || w.Against[0] != bad.ID || !w.To.Equal(s.at(4*3600)) {
		t.Errorf("a clue that cannot be true with the others narrowed the window: %s", toJSON(t, w))
	}
	s.say("b", 4*3600+120, KindUndone, Undone{Event: clue.ID})
	w, _ = s.state().Persons[0].Window.Get()
	if !w.From.Equal(s.at(0)) || !w.To.Equal(s.at(3600)) {
		t.Errorf("window after the clue was taken back = %s", toJSON(t, w))
	}
}

func TestScenario30FoundAboard(t *testing.T) {
	s := newStory(t)
	s.say("a", 4*3600, KindMissing, Missing{LastSeen: s.at(0), Noticed: s.at(4 * 3600)})
	s.say("a", 4*3600+2400, KindAboard, Aboard{Condition: "never_left"})
	s.say("a", 4*3600+2401, KindStoodDown, StoodDown{Reason: "asleep in the forepeak"})
	st := s.state()
	if st.Status != StoodDownSt || st.Persons[0].Status != IsAboard || st.Events != 3 {
		t.Errorf("state = %s", toJSON(t, st))
	}
}

// Two people fall: two marks with their own clocks, and recovering one does
// not clear the other.
func TestScenario31TwoPersons(t *testing.T) {
	s := newStory(t)
	s.say("a", 0, KindMarked, markedAt(54, 7))
	b := s.say("a", 55, KindMarked, func() Marked {
		m := markedAt(54.002, 7)
		m.Person = nav.Some(PersonNo(2))
		return m
	}())
	s.say("a", 300, KindAboard, Aboard{Person: nav.Some(PersonNo(1)), Condition: "conscious"})
	st := s.state()
	if len(st.Persons) != 2 || st.Persons[0].Status != IsAboard || st.Persons[1].Status != InWater {
		t.Fatalf("persons = %s", toJSON(t, st.Persons))
	}
	if st.Persons[1].WorkingMark.Or("") != b.ID || st.Status != Open {
		t.Errorf("the second person's mark is %v, status %s", st.Persons[1].WorkingMark, st.Status)
	}
}

// Once the first person is aboard again, a new press without a number is for
// somebody else.
func TestScenario32HelperGoesIn(t *testing.T) {
	s := newStory(t)
	s.say("a", 0, KindMarked, markedAt(54, 7))
	s.say("a", 100, KindAlongside, OfPerson{})
	s.say("a", 110, KindMarked, func() Marked {
		m := markedAt(54, 7.0001)
		m.Person = nav.Some(PersonNo(2))
		return m
	}())
	s.say("a", 112, KindHeadCount, HeadCount{Aboard: 3, Expected: nav.Some(5)})
	st := s.state()
	if len(st.Persons) != 2 || st.Persons[0].Status != Alongside || st.Persons[1].Status != InWater {
		t.Fatalf("persons = %s", toJSON(t, st.Persons))
	}
	s.say("a", 200, KindAboard, Aboard{Condition: "well"})
	s.say("b", 210, KindAboard, Aboard{Person: nav.Some(PersonNo(2)), Condition: "well"})
	s.say("b", 220, KindMarked, markedAt(54, 7))
	if st = s.state(); len(st.Persons) != 3 || st.Persons[2].Status != InWater {
		t.Errorf("a press after everyone was aboard did not make a new person: %s", toJSON(t, st.Persons))
	}
}

func TestScenario39SuspendedIsNotClosed(t *testing.T) {
	s := newStory(t)
	s.say("a", 0, KindMarked, markedAt(54, 7))
	s.say("a", 100, KindSuspended, Order{Station: "Exempla Rescue", Channel: "16", Text: "active search suspended", ReadBack: true})
	st := s.state()
	if st.Status != Suspended || st.StatusBy != "Exempla Rescue" || !st.Live() {
		t.Errorf("status = %s by %s, live %t", st.Status, st.StatusBy, st.Live())
	}
}

// What comes after a stand-down, or just before it on another phone, keeps
// the incident open.
func TestStandDownYieldsToSigns(t *testing.T) {
	tests := map[string]struct {
		device string
		sec    float64
		kind   Kind
		body   any
		want   Status
	}{
		"sighting after, same phone":       {"a", 101, KindSeen, Seen{What: "light"}, Open},
		"sighting just before, same phone": {"a", 95, KindSeen, Seen{What: "light"}, StoodDownSt},
		"sighting just before, elsewhere":  {"b", 95, KindSeen, Seen{What: "light"}, Open},
		"sighting long before, elsewhere":  {"b", 30, KindSeen, Seen{What: "light"}, StoodDownSt},
		"new mark after":                   {"b", 130, KindMarked, markedAt(54, 7), Open},
		"note after":                       {"b", 130, KindNote, Note{Text: "all well"}, StoodDownSt},
		"lost sight after":                 {"b", 130, KindLostSight, Seen{}, StoodDownSt},
	}
	for name, tt := range tests {
		t.Run(name, func(t *testing.T) {
			s := newStory(t)
			s.say("a", 0, KindMarked, markedAt(54, 7))
			s.say("a", 100, KindStoodDown, StoodDown{Reason: "found aboard"})
			s.say(tt.device, tt.sec, tt.kind, tt.body)
			if got := s.state().Status; got != tt.want {
				t.Errorf("status = %s, want %s", got, tt.want)
			}
		})
	}
}

// A beacon that goes on sending keeps an incident open, unless the one who
// wears it is aboard again.
func TestBeaconAfterStandDown(t *testing.T) {
	for _, aboard := range []bool{false, true} {
		s := newStory(t)
		m := markedAt(54, 7)
		m.Mmsi = 972123456
		s.say("z", 0, KindMarked, m)
		if aboard {
			s.say("a", 90, KindAboard, Aboard{Condition: "well"})
		}
		s.say("a", 100, KindStoodDown, StoodDown{Reason: "over"})
		s.say("z", 110, KindBeacon, Beacon{Mmsi: 972123456, Position: nav.PositionFromDegrees(54, 7)})
		want := Open
		if aboard {
			want = StoodDownSt
		}
		if got := s.state().Status; got != want {
			t.Errorf("aboard %t: %s, want %s", aboard, got, want)
		}
	}
}

func TestChargeTerms(t *testing.T) {
	s := newStory(t)
	s.say("a", 0, KindMarked, markedAt(54, 7))
	s.say("a", 1, KindInCharge, InCharge{Name: "Ane", Term: 1})
	s.say("b", 2, KindInCharge, InCharge{Name: "Bo", Term: 1})
	st := s.state()
	if c, _ := st.InCharge.Get(); c.Name != "Ane" || len(st.Rivals) != 1 {
		t.Fatalf("in charge %s, rivals %s", toJSON(t, st.InCharge), toJSON(t, st.Rivals))
	}
	s.say("b", 3, KindInCharge, InCharge{Name: "Bo", Term: 2})
	st = s.state()
	if c, _ := st.InCharge.Get(); c.Name != "Bo" || len(st.Rivals) != 0 {
		t.Errorf("in charge %s, rivals %s", toJSON(t, st.InCharge), toJSON(t, st.Rivals))
	}
}

// An adjustment whose clock is behind its mark's still counts.
func TestEarlyAdjustment(t *testing.T) {
	s := newStory(t)
	m := s.say("a", 10, KindMarked, markedAt(54, 7))
	s.say("b", 5, KindMarkAdjusted, MarkAdjusted{
		Mark: m.ID, FellAt: nav.Some(s.at(-15)), Position: at(54.01, 7), Source: FromTrack, BackS: nav.Some(25.0),
	})
	got := s.state().Marks[0]
	if !got.FellAt.Equal(s.at(-15)) || !got.Adjusted.IsSet() || !got.Press.IsSet() {
		t.Errorf("mark = %s", toJSON(t, got))
	}
	place, _ := got.Place.Get()
	press, _ := got.Press.Get()
	if place.Position == press.Position {
		t.Errorf("the press was moved, or the place was not")
	}
}

func TestMarkPlacedBeforeOrAfterItsMark(t *testing.T) {
	for _, sec := range []float64{-1, 1} {
		s := newStory(t)
		m := s.say("a", 0, KindMarked, Marked{Source: FromNothing})
		s.say("z", sec, KindMarkPlaced, MarkPlaced{Mark: m.ID, Position: nav.PositionFromDegrees(54, 7), Source: FromVessel})
		place, ok := s.state().Marks[0].Place.Get()
		if !ok || place.Source != FromVessel {
			t.Errorf("placed %v s from the mark: %s", sec, toJSON(t, s.state().Marks))
		}
	}
}

func TestJoinedIncidents(t *testing.T) {
	s := newStory(t)
	s.say("a", 0, KindMarked, markedAt(54, 7))
	s.inc = incidentID(2)
	s.say("b", 5, KindMarked, markedAt(54, 7.001))
	if n := len(Fold(s.all)); n != 2 {
		t.Fatalf("%d incidents before joining", n)
	}
	// Each phone joins its own to the other's; that must not make a circle.
	s.say("b", 20, KindJoined, Joined{Into: incidentID(1)})
	s.inc = incidentID(1)
	s.say("a", 21, KindJoined, Joined{Into: incidentID(2)})
	st := s.state()
	if st.ID != incidentID(1) || len(st.Marks) != 2 || len(st.Joined) != 1 {
		t.Errorf("state = %s", toJSON(t, st))
	}
}

func TestUndoneIsUndone(t *testing.T) {
	s := newStory(t)
	s.say("a", 0, KindMarked, markedAt(54, 7))
	along := s.say("a", 10, KindAlongside, OfPerson{})
	u := s.say("a", 11, KindUndone, Undone{Event: along.ID})
	if got := s.state().Persons[0].Status; got != InWater {
		t.Fatalf("after undoing: %s", got)
	}
	s.say("a", 12, KindUndone, Undone{Event: u.ID})
	if got := s.state().Persons[0].Status; got != Alongside {
		t.Errorf("after undoing the undoing: %s", got)
	}
}

func TestMarkCannotBeUndone(t *testing.T) {
	s := newStory(t)
	m := s.say("a", 0, KindMarked, markedAt(54, 7))
	s.say("a", 1, KindUndone, Undone{Event: m.ID})
	if st := s.state(); len(st.Marks) != 1 || len(st.Persons) != 1 {
		t.Errorf("a mark vanished: %s", toJSON(t, st))
	}
}

func TestUnknownKindIsKept(t *testing.T) {
	s := newStory(t)
	s.say("a", 0, KindMarked, markedAt(54, 7))
	s.say("a", 1, "weather_balloon", map[string]any{"height_m": 3})
	if st := s.state(); st.Unread != 1 || st.Events != 2 {
		t.Errorf("state = %s", toJSON(t, st))
	}
}

func TestDrillAndTestStayApart(t *testing.T) {
	drill := func(e *Event) { e.Drill = true }
	test := func(e *Event) { e.Test = true }
	s := newStory(t)
	s.say("a", 0, KindMarked, markedAt(54, 7), test)
	if st := s.state(); !st.Test || st.Live() {
		t.Errorf("a test is live: %s", toJSON(t, st))
	}
	s.say("a", 10, KindMarked, markedAt(54, 7), drill)
	if st := s.state(); !st.Drill || !st.Live() {
		t.Errorf("a drill does not show as one: %s", toJSON(t, st))
	}
	s.say("a", 20, KindMarked, markedAt(54, 7))
	if st := s.state(); st.Drill || st.Test {
		t.Errorf("a real mark shows as a drill: %s", toJSON(t, st))
	}
}

// Any order, any repetition and any batching of the same events folds to the
// same state.
func TestFoldIsTheSameInAnyOrder(t *testing.T) {
	rapid.Check(t, func(rt *rapid.T) {
		s := randomStory(t, rt)
		want := toJSON(t, Fold(s.all))
		rng := rand.New(rand.NewPCG(rapid.Uint64().Draw(rt, "seed"), 1))
		var l Log
		for len(l.byID) < len(s.all) {
			batch := make([]Event, 1+rng.IntN(5))
			for i := range batch {
				batch[i] = s.all[rng.IntN(len(s.all))]
			}
			l.Add(batch...)
			if rng.IntN(4) == 0 {
				l.States() // folding in between must not change what follows
			}
		}
		if got := toJSON(t, l.States()); got != want {
			rt.Fatalf("another order folds differently:\n%s", cmp.Diff(want, got))
		}
	})
}

// randomStory makes a log in which several devices say anything about
// anything, at times that collide and run backwards.
func randomStory(t *testing.T, rt *rapid.T) *story {
	s := newStory(t)
	var marks, events, searches []EventID
	for i := range rapid.IntRange(1, 40).Draw(rt, "n") {
		device := rapid.SampledFrom([]string{"a", "b", "c"}).Draw(rt, "device")
		sec := float64(rapid.IntRange(-30, 60).Draw(rt, "sec") + i)
		s.inc = incidentID(rapid.IntRange(1, 3).Draw(rt, "incident"))
		person := nav.Opt[PersonNo]{}
		if rapid.Bool().Draw(rt, "named") {
			person = nav.Some(PersonNo(rapid.IntRange(1, 3).Draw(rt, "person")))
		}
		pick := func(ids []EventID) EventID {
			if len(ids) == 0 {
				return EventID("018f3c2e-0000-7000-8000-999999999999")
			}
			return rapid.SampledFrom(ids).Draw(rt, "pick")
		}
		var e Event
		switch rapid.IntRange(0, 19).Draw(rt, "kind") {
		case 0, 1:
			m := markedAt(54, 7)
			m.Person = person
			e = s.say(device, sec, KindMarked, m)
			marks = append(marks, e.ID)
		case 2:
			e = s.say(device, sec, KindMarkDismissed, MarkDismissed{Mark: pick(marks), Reason: "no person"})
		case 3:
			e = s.say(device, sec, KindWorkingMark, WorkingMark{Mark: pick(marks)})
		case 4:
			e = s.say(device, sec, KindMarkAdjusted, MarkAdjusted{Mark: pick(marks), FellAt: nav.Some(s.at(sec - 30))})
		case 5:
			e = s.say(device, sec, KindInCharge, InCharge{Name: device, Term: uint64(rapid.IntRange(1, 3).Draw(rt, "term"))})
		case 6:
			e = s.say(device, sec, KindStoodDown, StoodDown{Reason: "over"})
		case 7:
			e = s.say(device, sec, KindReopened, StoodDown{Reason: "not over"})
		case 8:
			e = s.say(device, sec, KindSeen, Seen{Person: person})
		case 9:
			e = s.say(device, sec, KindAboard, Aboard{Person: person, Condition: "well"})
		case 10:
			e = s.say(device, sec, KindAlongside, OfPerson{Person: person})
		case 11:
			e = s.say(device, sec, KindUndone, Undone{Event: pick(events)})
		case 12:
			e = s.say(device, sec, KindJoined, Joined{Into: incidentID(rapid.IntRange(1, 4).Draw(rt, "into"))})
		case 13:
			e = s.say(device, sec, KindMissing, Missing{Person: person, LastSeen: s.at(-9000), Noticed: s.at(sec)})
		case 14:
			e = s.say(device, sec, KindClue, Clue{Person: person, Text: "x", Sure: Probable, NotBefore: nav.Some(s.at(sec - 1000))})
		case 15:
			e = s.say(device, sec, KindRole, Role{Role: "helm", Name: device})
		case 16:
			e = s.say(device, sec, KindSearchLaid, plan())
			searches = append(searches, e.ID)
		case 17:
			e = s.say(device, sec, KindLegBegun, LegBegun{Search: pick(searches), Leg: rapid.IntRange(1, 3).Draw(rt, "leg")})
		case 18:
			e = s.say(device, sec, KindLegEnded, LegEnded{Search: pick(searches), Leg: rapid.IntRange(1, 3).Draw(rt, "leg"), Part: 1, How: "run"})
		default:
			e = s.say(device, sec, KindSearchPaused, SearchWord{Search: pick(searches)})
		}
		events = append(events, e.ID)
	}
	return s
}

// plan is a search of two legs.
func plan() SearchLaid {
	return SearchLaid{
		Pattern: "square", Datum: nav.PositionFromDegrees(54, 7), Begin: t0, SpeedKn: 5,
		Legs: []LegLaid{
			{Kind: "search", CourseDeg: 0, LengthM: 185.2, To: nav.Offset{NorthM: 185.2}},
			{Kind: "search", CourseDeg: 90, LengthM: 185.2, From: nav.Offset{NorthM: 185.2}, To: nav.Offset{EastM: 185.2, NorthM: 185.2}},
		},
	}
}

// The helm leaves leg 1 after 40 per cent and runs leg 2: that is what stands,
// also when the phone that began the leg has a clock that is behind.
func TestScenario22LegsNotRun(t *testing.T) {
	s := newStory(t)
	s.say("a", 0, KindMarked, markedAt(54, 7))
	laid := s.say("a", 100, KindSearchLaid, plan())
	s.say("b", 95, KindLegBegun, LegBegun{Search: laid.ID, Leg: 1})
	s.say("a", 200, KindLegEnded, LegEnded{Search: laid.ID, Leg: 1, Part: 0.4, How: "broken_off", Lookouts: nav.Some(2)})
	s.say("a", 201, KindLegBegun, LegBegun{Search: laid.ID, Leg: 2})
	search := s.state().Searches[0]
	if search.Status != SearchRunning || search.Leg != 2 || len(search.Done) != 2 {
		t.Fatalf("search = %s", toJSON(t, search))
	}
	if d := search.Done[0]; d.Part != 0.4 || d.How != "broken_off" || !d.BegunAt.Equal(s.at(95)) || !d.EndedAt.Equal(s.at(200)) {
		t.Errorf("leg 1 = %s", toJSON(t, d))
	}
	if !search.Done[1].EndedAt.IsZero() || search.Done[1].Part != 0 {
		t.Errorf("leg 2 counts as run before it ended: %s", toJSON(t, search.Done[1]))
	}
	s.say("a", 300, KindLegEnded, LegEnded{Search: laid.ID, Leg: 2, Part: 1, How: "run"})
	if got := s.state().Searches[0].Status; got != SearchFinished {
		t.Errorf("status = %s", got)
	}
}

func TestOpenAt(t *testing.T) {
	s := newStory(t)
	s.say("a", 0, KindMarked, markedAt(54, 7), func(e *Event) { e.Test = true })
	if id, ok := OpenAt(Fold(s.all), false); ok {
		t.Errorf("a real mark would join the test %s", id)
	}
	s.inc = incidentID(2)
	s.say("a", 10, KindMarked, markedAt(54, 7))
	if id, _ := OpenAt(Fold(s.all), false); id != incidentID(2) {
		t.Errorf("open incident = %q", id)
	}
	if _, ok := OpenAt(Fold(s.all), true); ok {
		t.Errorf("a drill mark would join a real incident")
	}
	s.say("a", 20, KindStoodDown, StoodDown{Reason: "over"})
	if id, ok := OpenAt(Fold(s.all), false); ok {
		t.Errorf("a mark would join %s, which is over", id)
	}
}

// BenchmarkFold folds 10,000 events as they come from the store: bodies are
// read, sorted and counted. Aim: under 20 ms.
func BenchmarkFold(b *testing.B) {
	s := newStory(b)
	s.say("a", 0, KindMarked, markedAt(54, 7))
	for i := range 9999 {
		switch i % 4 {
		case 0:
			s.say("a", float64(i), KindNote, Note{Text: "a note about what was seen"})
		case 1:
			s.say("b", float64(i), KindWind, WindObserved{FromDeg: 240, SpeedKn: 15, ObservedBy: ObservedBy{Source: "instrument"}})
		case 2:
			s.say("c", float64(i), KindSeen, Seen{What: "light", BearingDeg: nav.Some(nav.TrueDeg(160))})
		default:
			s.say("d", float64(i), KindRole, Role{Role: "helm", Name: "Ane"})
		}
	}
	b.Run("read and fold", func(b *testing.B) {
		for b.Loop() {
			Fold(s.all)
		}
	})
	b.Run("fold again", func(b *testing.B) {
		var l Log
		l.Add(s.all...)
		l.States()
		for b.Loop() {
			l.States()
		}
	})
}
