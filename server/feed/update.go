package feed

import (
	"time"

	"wakeback/drift/nav"
)

// UpdateKind says what an [Update] is about.
type UpdateKind string

// The kinds of update.
const (
	// UpdateFix is a new believed position of the vessel.
	UpdateFix UpdateKind = "fix"
	// UpdateBeacon is a report of a beacon.
	UpdateBeacon UpdateKind = "beacon"
)

// Update tells that something new was received.
type Update struct {
	Kind   UpdateKind       `json:"kind"`
	At     time.Time        `json:"at"`
	Source string           `json:"source"`
	Fix    nav.Opt[nav.Fix] `json:"fix,omitzero"`
	Beacon nav.Opt[Beacon]  `json:"beacon,omitzero"`
}
