package server

import (
	"math"
	"net/http"
	"sync/atomic"
	"testing"
	"time"

	"github.com/google/uuid"

	"wakeback/drift/nav"
	"wakeback/search/incident"
	"wakeback/server/feed"
)

// inWeather is a vessel that holds her course in a current, with a wind that a
// test can change.
func inWeather(wind *atomic.Pointer[feed.Wind], current nav.Velocity) func(time.Time) feed.Vessel {
	heading, stw := nav.TrueDeg(290), 6.0
	over := nav.Towards(heading, stw).Add(current)
	sail := sailing(nav.PositionFromDegrees(54.1, 7.9), start, over.Direction().Or(0), over.SpeedKn())
	return func(now time.Time) feed.Vessel {
		v := sail(now)
		v.HeadingTrue = nav.Some(feed.Reading[nav.TrueDeg]{Value: heading, At: now})
		v.StwKn = nav.Some(feed.Reading[float64]{Value: stw, At: now})
		v.Wind = nav.Some(feed.Reading[feed.Wind]{Value: *wind.Load(), At: now})
		v.WaterC = nav.Some(feed.Reading[float64]{Value: 11.8, At: now})
		return v
	}
}

// What the instruments say of wind, current and water stands in the log of an
// incident: at its beginning, and again when it changed, not every second.
func TestInstrumentsTestify(t *testing.T) {
	r := rigOn(t, realStore(t), nil)
	var wind atomic.Pointer[feed.Wind]
	wind.Store(&feed.Wind{FromDeg: 240, SpeedKn: 14})
	current := nav.Towards(100, 1)
	r.bridge.set(inWeather(&wind, current))
	w := &witness{s: r.Server, wind: average{over: windOver}, current: average{over: currentOver}}
	seconds := func(n int) {
		for range n {
			r.clock.add(time.Second)
			w.round(r.clock.now())
		}
	}
	seconds(120)
	id, err := uuid.NewV7()
	if err != nil {
		t.Fatal(err)
	}
	if resp := r.do(http.MethodPost, "/api/v1/marks", map[string]any{"id": id.String(), "at": r.clock.now().Format(time.RFC3339)}, nil); resp.StatusCode != http.StatusCreated {
		t.Fatalf("mark: %s", resp.Status)
	}
	seconds(60)
	st := onlyState(t, r)
	if len(st.Winds) != 1 || len(st.Currents) != 1 || len(st.Waters) != 1 {
		t.Fatalf("a minute later: %d winds, %d currents, %d waters", len(st.Winds), len(st.Currents), len(st.Waters))
	}
	if x := st.Winds[0]; x.Source != "instrument" || math.Abs(x.FromDeg.Minus(240)) > 0.2 || math.Abs(x.SpeedKn-14) > 0.1 {
		t.Errorf("wind = %+v", x)
	}
	x := st.Currents[0]
	if x.Source != "measured" || nav.Towards(x.SetDeg, x.DriftKn).Sub(current).SpeedKn() > 0.02 || x.DriftSd <= 0 {
		t.Errorf("current = %+v, want 100/1.0 with its error", x)
	}
	wind.Store(&feed.Wind{FromDeg: 280, SpeedKn: 22})
	seconds(200)
	st = onlyState(t, r)
	last := st.Winds[len(st.Winds)-1]
	if n := len(st.Winds); n < 2 || n > 6 || math.Abs(last.SpeedKn-22) > windChangeKn {
		t.Errorf("after the wind changed: %d winds, the last %+v", n, last)
	}
	seconds(int(sayAgain.Seconds()) + 10)
	if n := len(onlyState(t, r).Winds); n != len(st.Winds)+1 {
		t.Errorf("a steady wind was said %d times in ten minutes", n-len(st.Winds))
	}
}

func onlyState(t *testing.T, r *rig) incident.State {
	t.Helper()
	states := r.book.states()
	if len(states) != 1 {
		t.Fatalf("%d incidents", len(states))
	}
	return states[0]
}
