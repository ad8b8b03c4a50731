package server

import (
	"context"
	"fmt"
	"time"

	"wakeback/drift/nav"
	"wakeback/search/incident"
	"wakeback/server/feed"
)

// A beacon that calls raises a mark by itself. All figures are our choice.
const (
	// beaconEvery: later reports move the datum. Devices send up to eight times
	// a minute; the log needs no more than this.
	beaconEvery = 10 * time.Second
	// beaconSilence: after so long without a word a beacon that calls again is
	// a new case. Until then one whose incident was stood down is only still
	// transmitting in somebody's locker.
	beaconSilence = 15 * time.Minute
	// maxBeacons in open incidents; more than any small crew, and a flood of
	// false ones does not bury a real mark.
	maxBeacons = 8
	// testEvery: a test transmission is shown once in this time.
	testEvery = 10 * time.Minute
)

// watchman raises marks for beacons. One goroutine uses it.
type watchman struct {
	s     *Server
	heard map[beaconKey]*heard
}

type beaconKey struct {
	mmsi uint32
	test bool
}

// heard is when a beacon was heard last, and when that was last written.
type heard struct {
	at      time.Time
	written time.Time
}

func newWatchman(s *Server) *watchman {
	return &watchman{s: s, heard: make(map[beaconKey]*heard)}
}

// run takes what the instruments tell until ctx ends.
func (w *watchman) run(ctx context.Context) {
	if w.s.vessel.instruments == nil {
		return
	}
	updates := w.s.vessel.instruments.Updates()
	for {
		select {
		case <-ctx.Done():
			return
		case u, ok := <-updates:
			if !ok {
				return
			}
			if b, ok := u.Beacon.Get(); ok {
				if err := w.beacon(b); err != nil {
					w.s.log.Error("beacon", "mmsi", b.MMSI, "error", err)
				}
			}
		}
	}
}

// isPersonal: man-overboard devices have identities 972xxyyyy (ITU-R M.585-9,
// annex 2). Search and rescue transmitters and distress beacons raise no mark
// here: their carriers are most likely other vessels. The vessel's own
// person-overboard system may know no identity; then it is 0.
func isPersonal(mmsi uint32) bool { return mmsi/1_000_000 == 972 || mmsi == 0 }

// maxHeardBeacons bounds the memory of what was heard; our choice.
const maxHeardBeacons = 1000

// beacon takes one report.
func (w *watchman) beacon(b feed.Beacon) error {
	if !isPersonal(b.MMSI) {
		return nil
	}
	now := w.s.now()
	key := beaconKey{b.MMSI, b.Test}
	h, known := w.heard[key]
	if !known {
		if len(w.heard) >= maxHeardBeacons {
			return nil
		}
		h = &heard{}
		w.heard[key] = h
	}
	before := h.at
	h.at = now
	if b.Test {
		return w.test(b, h, now)
	}
	if m, st, ok := w.mark(b.MMSI, true); ok {
		return w.report(b, h, m, st, now)
	}
	if w.stillTransmitting(b.MMSI, before, now) {
		return nil
	}
	return w.raise(b, h, now)
}

// mark finds the newest mark of a beacon, and its incident.
func (w *watchman) mark(mmsi uint32, live bool) (incident.Mark, incident.State, bool) {
	for _, st := range w.s.book.states() {
		if live && !st.Live() || st.Test {
			continue
		}
		for _, m := range st.Marks {
			if m.By == beaconName(mmsi) {
				return m, st, true
			}
		}
	}
	return incident.Mark{}, incident.State{}, false
}

// stillTransmitting: the incident of this beacon is over, and it has not been
// silent since.
func (w *watchman) stillTransmitting(mmsi uint32, before, now time.Time) bool {
	_, st, ok := w.mark(mmsi, false)
	return ok && (now.Sub(before) < beaconSilence || now.Sub(st.StatusAt) < beaconSilence)
}

// report writes where a beacon is now, so that the datum follows it.
func (w *watchman) report(b feed.Beacon, h *heard, m incident.Mark, st incident.State, now time.Time) error {
	pos, ok := b.Position.Get()
	p, _ := st.Person(m.Person)
	if !ok || b.MMSI == 0 || m.Dismissed.IsSet() || p.Status == incident.IsAboard || now.Sub(h.written) < beaconEvery {
		return nil
	}
	_, err := w.s.ledger.write(func(wr *writing) error {
		_, err := wr.author(incident.Event{Incident: st.ID, At: b.At, DeviceAt: now, By: beaconName(b.MMSI), Drill: st.Drill},
			incident.KindBeacon, incident.Beacon{Mmsi: b.MMSI, Position: pos, SogKn: b.SogKn, CogDeg: b.CogTrue})
		return err
	})
	if err == nil {
		h.written = now
		w.s.nudge()
	}
	return err
}

// raise makes a mark of a beacon that is heard for the first time.
func (w *watchman) raise(b feed.Beacon, h *heard, now time.Time) error {
	if n := w.beaconsOpen(); n >= maxBeacons {
		w.s.log.Warn("beacon not marked: too many at once", "mmsi", b.MMSI, "open", n)
		return nil
	}
	_, err := w.s.ledger.write(func(wr *writing) error {
		id, err := w.s.incidentFor(wr, false, false, false)
		if err != nil {
			return err
		}
		body := w.marked(b, now)
		if st, ok := w.s.book.state(id); ok {
			body.Person = otherPerson(st, b.MMSI)
		}
		_, err = wr.author(incident.Event{Incident: id, At: b.At, DeviceAt: now, By: beaconName(b.MMSI)}, incident.KindMarked, body)
		return err
	})
	if err == nil {
		h.written = now
		w.s.nudge()
	}
	return err
}

// test shows a test transmission as what it is: an incident of its own that is
// never live.
func (w *watchman) test(b feed.Beacon, h *heard, now time.Time) error {
	if !h.written.IsZero() && now.Sub(h.written) < testEvery {
		return nil
	}
	_, err := w.s.ledger.write(func(wr *writing) error {
		id, err := w.s.incidentFor(wr, true, false, true)
		if err != nil {
			return err
		}
		_, err = wr.author(incident.Event{Incident: id, At: b.At, DeviceAt: now, By: beaconName(b.MMSI), Test: true},
			incident.KindMarked, w.marked(b, now))
		return err
	})
	if err == nil {
		h.written = now
	}
	return err
}

// marked is the mark of a beacon: where it says it is, else where the vessel
// was, from which its wearer has just fallen.
func (w *watchman) marked(b feed.Beacon, now time.Time) incident.Marked {
	if pos, ok := b.Position.Get(); ok {
		return incident.Marked{Position: nav.Some(pos), Source: incident.FromBeacon, Mmsi: b.MMSI, SogKn: b.SogKn, CogDeg: b.CogTrue}
	}
	body := w.s.markedAt(markRequest{At: b.At})
	body.Mmsi = b.MMSI
	return body
}

// otherPerson: the first beacon of an incident is most likely worn by the one
// whom somebody marked. A second beacon is worn by somebody else.
func otherPerson(st incident.State, mmsi uint32) nav.Opt[incident.PersonNo] {
	most, another := incident.PersonNo(0), false
	for _, m := range st.Marks {
		most = max(most, m.Person)
		another = another || byBeacon(m) && m.Mmsi != mmsi
	}
	if !another {
		return nav.None[incident.PersonNo]()
	}
	return nav.Some(most + 1)
}

func (w *watchman) beaconsOpen() int {
	n := 0
	for _, st := range w.s.book.live() {
		for _, m := range st.Marks {
			if byBeacon(m) {
				n++
			}
		}
	}
	return n
}

// ownSystem is who a mark of the vessel's own person-overboard system is by.
const ownSystem = "overboard system"

func beaconName(mmsi uint32) string {
	if mmsi == 0 {
		return ownSystem
	}
	return fmt.Sprintf("beacon %09d", mmsi)
}

func byBeacon(m incident.Mark) bool { return m.Mmsi != 0 || m.By == ownSystem }
