package feed

import (
	"time"

	"wakeback/drift/nav"
)

// Beacon is a device that calls for help by itself.
type Beacon struct {
	// MMSI is its identity; 0 when an on-board system does not know one.
	MMSI uint32 `json:"mmsi"`
	// Emitter is the number that an on-board system gave it, "" otherwise.
	Emitter  string                `json:"emitter,omitempty"`
	Position nav.Opt[nav.Position] `json:"position"`
	SogKn    nav.Opt[float64]      `json:"sog_kn"`
	CogTrue  nav.Opt[nav.TrueDeg]  `json:"cog_deg"`
	Test     bool                  `json:"test"`
	At       time.Time             `json:"at"`
}
