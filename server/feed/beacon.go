package feed

import (
	"time"

	"wakeback/drift/nav"
)

// Beacon is a device that calls for help by itself.
type Beacon struct {
	MMSI     uint32                `json:"mmsi"`
	Position nav.Opt[nav.Position] `json:"position"`
	SogKn    nav.Opt[float64]      `json:"sog_kn"`
	CogTrue  nav.Opt[nav.TrueDeg]  `json:"cog_deg"`
	Test     bool                  `json:"test"`
	At       time.Time             `json:"at"`
}
