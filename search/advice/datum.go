package advice

import (
	"math"
	"time"

	"wakeback/drift/nav"
	"wakeback/search/incident"
)

// datumOf is where to look now for one person: from the newest report of a
// beacon, else from the working mark. It is absent for a person aboard, for
// one whose place of the fall is not known, and for one who was not seen to
// fall: a stretch of track is never shown as one point.
func datumOf(in Input, p incident.PersonState) nav.Opt[Datum] {
	if p.Status == incident.IsAboard {
		return nav.None[Datum]()
	}
	if b, ok := p.Beacon.Get(); ok {
		return nav.Some(drifted(in, p, start{b.Position, b.At, beaconErrorM, "beacon"}))
	}
	m, ok := workingMark(in.State, p)
	if !ok {
		return nav.None[Datum]()
	}
	place, ok := m.Place.Get()
	if !ok {
		return nav.None[Datum]()
	}
	return nav.Some(drifted(in, p, start{place.Position, m.FellAt, markErrorM(m, place), "mark"}))
}

// start is what a datum drifts from.
type start struct {
	at     nav.Position
	from   time.Time
	errorM float64 // 95 in 100
	basis  string
}

// Errors of a start, 95 in 100. A receiver that does not state its error
// counts as 15 m: about twice the 8 m of the GPS Standard Positioning Service
// Performance Standard (5th ed., 2020; from memory), for the way from the
// aerial to the rail. The press comes late by reactionS; our choice, after the
// ten seconds that search planning allows for reaction, halved because people
// also move the mark back.
const (
	receiverErrorM = 15
	beaconErrorM   = 30
	reactionS      = 5
)

func markErrorM(m incident.Mark, place incident.Place) float64 {
	reaction := m.SogKn.Or(0) * nav.MsPerKn * reactionS
	return math.Hypot(place.ErrorM.Or(receiverErrorM), reaction)
}
