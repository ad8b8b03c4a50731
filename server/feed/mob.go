package feed

import (
	"time"

	"wakeback/drift/nav"
	"wakeback/server/feed/nmea"
)

// mobBeacon is the beacon that a MOB sentence reports, if it reports one: an
// alarm or a press of a button on an on-board system, or a test of it.
func mobBeacon(body nmea.Body, now time.Time) nav.Opt[Beacon] {
	m, ok := body.(*nmea.MOB)
	if !ok {
		return nav.None[Beacon]()
	}
	b := Beacon{MMSI: m.MMSI.Or(0), Emitter: m.Emitter, Position: m.Position, SogKn: m.SogKn, CogTrue: m.CogTrue, At: now}
	switch m.Status {
	case nmea.MOBActive, nmea.MOBManual:
		return nav.Some(b)
	case nmea.MOBTest:
		b.Test = true
		return nav.Some(b)
	}
	return nav.None[Beacon]()
}
