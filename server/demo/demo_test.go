package demo

import (
	"bufio"
	"context"
	"encoding/json"
	"fmt"
	"math"
	"net"
	"slices"
	"strings"
	"testing"
	"time"

	"github.com/google/uuid"
	"go.uber.org/goleak"

	"wakeback/drift/nav"
	"wakeback/search/incident"
	"wakeback/server/feed/nmea"
)

// noon is when the tests begin; the tide is where it then is.
var noon = time.Date(2026, 7, 1, 12, 0, 0, 0, time.UTC)

// trial is a demonstration whose clock the test turns.
type trial struct {
	*Vessel
	t      *testing.T
	now    time.Time
	events []incident.Event
}

func newTrial(t *testing.T, seed uint64) *trial {
	t.Helper()
	tr := &trial{t: t, now: noon}
	v, err := New(Config{Seed: seed, Now: func() time.Time { return tr.now }})
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(v.speaker.close)
	tr.Vessel = v
	return tr
}

// after lets seconds pass, and returns what the instruments said.
func (tr *trial) after(seconds int) string {
	var said strings.Builder
	for range seconds {
		tr.now = tr.now.Add(time.Second)
		said.WriteString(tr.tick(tr.now, incident.Fold(tr.events), true))
	}
	return said.String()
}

// say puts an event into the log, as a device would.
func (tr *trial) say(kind incident.Kind, body any) incident.EventID {
	tr.t.Helper()
	text, err := json.Marshal(body)
	if err != nil {
		tr.t.Fatal(err)
	}
	e := incident.Event{
		ID: incident.EventID(uuid.Must(uuid.NewV7()).String()), Incident: "trial", Device: "phone",
		DeviceSeq: uint64(len(tr.events) + 1), Kind: kind, At: tr.now, DeviceAt: tr.now, Body: text,
	}
	tr.events = append(tr.events, e)
	return e.ID
}

// mark marks where the instruments last said that the vessel is.
func (tr *trial) mark() {
	tr.t.Helper()
	tr.say(incident.KindMarked, incident.Marked{
		Position: nav.Some(tr.said.last.Position), Source: incident.FromVessel,
		SogKn: tr.said.last.SogKn, CogDeg: tr.said.last.CogTrue,
	})
}

// Whatever the weather, the crew comes back to the person, and soon: eight
// seconds to react, a turn of about 250 degrees at half of cruising speed, and
// the way back are under two minutes and a half.
func TestCrewComesBack(t *testing.T) {
	for seed := range uint64(20) {
		tr := newTrial(t, seed)
		tr.now = tr.now.Add(time.Duration(seed) * 37 * time.Minute) // another state of the tide
		tr.after(1)
		tr.after(60)
		tr.mark()
		took := 0
		for ; took < 150 && !tr.crew.beside; took++ {
			tr.after(1)
		}
		if !tr.crew.beside {
			t.Errorf("seed %d: %.0f m from the person after %d s", seed, tr.Truth().Persons[0].RangeM, took)
			continue
		}
		tr.after(60)
		if r := tr.Truth().Persons[0].RangeM; r > besideM {
			t.Errorf("seed %d: a minute after the crew had hold of the person, they are %.0f m off", seed, r)
		}
	}
}

// The person falls where the vessel truly was, drifts by more than the stream
// alone, and is gone from the water when aboard.
func TestPerson(t *testing.T) {
	tr := newTrial(t, 3)
	tr.after(30)
	tr.SetSpeed(cruiseKn) // by hand, so that nobody turns back
	tr.mark()
	fell := tr.Truth().Vessel
	tr.after(5) // the server tells her of it later
	p := tr.Truth().Persons
	if len(p) != 1 {
		t.Fatalf("persons = %v, want one", p)
	}
	// In the seconds since, a person moves with stream and leeway, 1 m/s at most.
	if d := nav.Inverse(fell, p[0].Position).RangeM; d > 6 {
		t.Errorf("fell %.1f m from where the vessel was", d)
	}
	tr.after(600)
	p = tr.Truth().Persons
	line := nav.Inverse(fell, p[0].Position)
	var byStream nav.Offset
	for at := noon.Add(30 * time.Second); at.Before(tr.now); at = at.Add(time.Second) {
		byStream = byStream.Add(tr.world.weather.stream(at, fell).For(time.Second))
	}
	leeway := nav.NewPlane(fell).Offset(p[0].Position).Sub(byStream)
	// The class's leeway in 14 kn is 0.15 m/s, times exp(±0.5) at most: 55 to
	// 150 m in ten minutes; the eddies add up to 0.12 m/s.
	if r := leeway.RangeM(); line.RangeM < 60 || r < 20 || r > 240 {
		t.Errorf("drifted %.0f m, of that %.0f m not with the stream", line.RangeM, r)
	}
	tr.say(incident.KindAboard, incident.Aboard{Person: nav.Some(incident.PersonNo(1))})
	tr.after(1)
	if p := tr.Truth().Persons; len(p) != 0 {
		t.Errorf("aboard, and in the water: %v", p)
	}
}

// What is known of the truth does not tell it: two persons at one place drift
// apart.
func TestTruthIsHidden(t *testing.T) {
	a, b := newTrial(t, 1), newTrial(t, 2)
	var at [2]nav.Position
	for i, tr := range []*trial{a, b} {
		tr.mark()
		tr.after(900)
		at[i] = tr.Truth().Persons[0].Position
	}
	if d := nav.Inverse(at[0], at[1]).RangeM; d < 5 {
		t.Errorf("two seeds end %.1f m apart", d)
	}
}

func TestSameSeedSameWords(t *testing.T) {
	words := func(seed uint64) string {
		tr := newTrial(t, seed)
		said := tr.after(20)
		tr.mark()
		return said + tr.after(60)
	}
	first, again, other := words(7), words(7), words(8)
	if first != again {
		t.Error("the same seed told two stories")
	}
	if first == other {
		t.Error("two seeds told one story")
	}
}

// The world keeps up with the clock, and stands still while a machine sleeps.
func TestClock(t *testing.T) {
	tr := newTrial(t, 1)
	tr.now = tr.now.Add(30 * time.Millisecond) // between two steps
	tr.after(300)
	if late := tr.now.Sub(tr.Truth().At); late < 0 || late > time.Duration(stepS*float64(time.Second)) {
		t.Errorf("the world is %s behind the clock, want less than a step", late)
	}
	before := tr.Truth().Vessel
	for _, jump := range []time.Duration{2 * time.Hour, -3 * time.Hour} {
		tr.now = tr.now.Add(jump)
		tr.tick(tr.now, nil, true)
		if d := nav.Inverse(before, tr.Truth().Vessel).RangeM; d > 0 {
			t.Errorf("a jump of the clock by %s moved her %.0f m", jump, d)
		}
	}
}

func TestByHand(t *testing.T) {
	tr := newTrial(t, 1)
	tr.after(5)
	tr.SetHelm(2) // more than hard over is hard over
	tr.after(10)
	// Through the water, so that the stream does not count.
	var turned float64
	last := tr.Truth().Heading
	for range 30 {
		tr.after(1)
		h := tr.Truth().Heading
		turned += h.Minus(last)
		last = h
	}
	// A steady circle of 25 m at 6 kn less the quarter that a turn costs: 5.3
	// degrees a second; a fifth more or less for the sea.
	if want := cruiseKn * 0.75 * nav.MsPerKn / radiusM * 180 / math.Pi * 30; math.Abs(turned-want) > want/5 {
		t.Errorf("turned %.0f degrees to starboard in 30 s, want %.0f", turned, want)
	}
	tr.Steer(90)
	tr.SetSpeed(3)
	tr.after(90)
	if off := math.Abs(tr.Truth().Heading.Minus(90)); off > 15 || math.Abs(tr.Truth().SpeedKn-3) > 0.5 {
		t.Errorf("told 090 at 3 kn: %v at %.1f kn", tr.Truth().Heading, tr.Truth().SpeedKn)
	}
	tr.mark() // by hand she does not turn back
	tr.after(60)
	if off := math.Abs(tr.Truth().Heading.Minus(90)); off > 15 {
		t.Errorf("by hand the crew took the helm: %v", tr.Truth().Heading)
	}
	tr.FollowSteer()
	for took := 0; !tr.crew.beside; took++ {
		if took > 240 {
			t.Fatal("the crew has the helm and does not come back")
		}
		tr.after(1)
	}
}

// Every sentence is sound and of the kinds that instruments on board send.
func TestSentences(t *testing.T) {
	tr := newTrial(t, 1)
	count := make(map[string]int)
	for line := range strings.Lines(tr.after(30)) {
		s, body, err := nmea.Parse(line)
		if err != nil {
			t.Fatalf("%q: %v", line, err)
		}
		count[s.Formatter]++
		if rmc, ok := body.(*nmea.RMC); ok {
			p, _ := rmc.Position.Get()
			// 30 s at 6 kn and a stream of 1 are 108 m.
			if d := nav.Inverse(start, p).RangeM; d > 130 {
				t.Errorf("RMC is %.0f m from the start", d)
			}
		}
	}
	want := map[string]int{"RMC": 30, "ZDA": 30, "HDT": 30, "VHW": 30, "MWV": 30, "MWD": 30, "MTW": 30, "DPT": 30, "VDM": 6}
	for k, n := range want {
		if count[k] != n {
			t.Errorf("%d of %s in 30 s, want %d", count[k], k, n)
		}
	}
}

// The sentences arrive over the socket, for each who listens, and all ends
// with the context.
func TestSocket(t *testing.T) {
	defer goleak.VerifyNone(t)
	v, err := New(Config{Seed: 1})
	if err != nil {
		t.Fatal(err)
	}
	ctx, cancel := context.WithCancel(t.Context())
	done := make(chan struct{})
	go func() { v.Run(ctx, nil); close(done) }()
	var ends []*bufio.Reader
	for range 2 {
		c, err := net.Dial("tcp", strings.TrimPrefix(v.FeedURL(), "tcp://"))
		if err != nil {
			t.Fatal(err)
		}
		defer c.Close()
		_ = c.SetReadDeadline(time.Now().Add(30 * time.Second)) // for a test that hangs
		r := bufio.NewReader(c)
		line, err := r.ReadString('\n')
		if err != nil {
			t.Fatal(err)
		}
		if s, _, err := nmea.Parse(line); err != nil || s.Formatter != "RMC" {
			t.Errorf("the first line is %q, %v, want RMC", line, err)
		}
		ends = append(ends, r)
	}
	cancel()
	<-done
	for _, r := range ends {
		for {
			if _, err := r.ReadString('\n'); err != nil {
				break
			}
		}
	}
	if c, err := net.Dial("tcp", strings.TrimPrefix(v.FeedURL(), "tcp://")); err == nil {
		c.Close()
		t.Error("it still listens")
	}
}

// A report published with its meaning comes out letter for letter: the example
// of the AIVDM/AIVDO protocol notes (gpsd project, "AIS Payload
// Interpretation"; fields from memory, which the letters prove).
func TestArmour(t *testing.T) {
	var b bits
	for _, f := range []struct {
		v int64
		n int
	}{
		{1, 6}, {0, 2}, {477553000, 30}, {5, 4}, {0, 8}, {0, 10}, {0, 1}, {-73407500, 28}, {28549700, 27},
		{510, 12}, {181, 9}, {15, 6}, {0, 2}, {0, 3}, {0, 1}, {149208, 19},
	} {
		b.put(f.v, f.n)
	}
	if got, want := b.armour(), "177KQJ5000G?tO`K>RA1wUbN0TKH"; got != want {
		t.Errorf("armour = %s, want %s", got, want)
	}
}

// The other vessels stay within sight of the start and keep to their speed.
func TestTargets(t *testing.T) {
	for _, g := range others {
		for s := range 3600 {
			at := noon.Add(time.Duration(s) * time.Second)
			p, _ := g.at(at)
			q, _ := g.at(at.Add(time.Second))
			if d := nav.Inverse(p, q).RangeM; d > g.speedKn*nav.MsPerKn*1.01 {
				t.Fatalf("%d goes %.1f m in a second", g.mmsi, d)
			}
			if d := nav.Inverse(start, p).RangeM; d > 8000 {
				t.Fatalf("%d is %.0f m away", g.mmsi, d)
			}
		}
	}
	if !slices.ContainsFunc(others, func(g target) bool { return strings.HasPrefix(fmt.Sprint(g.mmsi), "200") }) {
		t.Error("no target has the digits of no country")
	}
}
