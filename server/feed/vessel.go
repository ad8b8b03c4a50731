package feed

import (
	"time"

	"wakeback/drift/nav"
	"wakeback/server/feed/nmea"
)

// RelativeWind is wind as the bow sees it.
type RelativeWind struct {
	// AngleRelativeDeg is where it comes from, from the bow, starboard positive.
	AngleRelativeDeg nav.RelativeDeg `json:"angle_relative_deg"`
	SpeedKn          float64         `json:"speed_kn"`
}

// WindReference says against what the speed of a wind is measured.
type WindReference string

// The references. The two differ by the current.
const (
	OverGround   WindReference = "ground"
	OverWater    WindReference = "water"
	AsInstrument WindReference = "instrument" // the sentence does not say which
)

// Wind is wind with respect to true north.
type Wind struct {
	FromDeg   nav.TrueDeg   `json:"wind_from_deg"`
	SpeedKn   float64       `json:"speed_kn"`
	Reference WindReference `json:"reference"`
}

// Current is what the instruments say of the water's motion over the ground.
type Current struct {
	SetDeg  nav.TrueDeg `json:"set_deg"` // towards
	DriftKn float64     `json:"drift_kn"`
}

// FixDetail is what is known of a position beside where it is.
type FixDetail struct {
	// UTC is the moment of the fix by the receiver's own clock.
	UTC        nav.Opt[time.Time] `json:"utc"`
	Quality    nmea.Quality       `json:"quality"`
	Satellites nav.Opt[int]       `json:"satellites"`
	HDOP       nav.Opt[float64]   `json:"hdop"`
}

// InstrumentTime is what the instruments say of the time.
type InstrumentTime struct {
	UTC time.Time `json:"utc"`
	// OffsetS is instruments minus this machine's clock, at the receipt.
	OffsetS float64 `json:"offset_s"`
	// Suspect says why it should not be believed, "" when nothing speaks
	// against it.
	Suspect string `json:"suspect,omitempty"`
}

// Vessel is all that the instruments say at one moment. What was never received
// is absent.
type Vessel struct {
	At           time.Time                          `json:"at"`
	Position     nav.Opt[Reading[nav.Position]]     `json:"position"`
	Fix          nav.Opt[FixDetail]                 `json:"fix"`
	SogKn        nav.Opt[Reading[float64]]          `json:"sog_kn"`
	CogTrue      nav.Opt[Reading[nav.TrueDeg]]      `json:"cog_deg"`
	HeadingTrue  nav.Opt[Reading[nav.TrueDeg]]      `json:"heading_deg"`
	HeadingMag   nav.Opt[Reading[nav.MagneticDeg]]  `json:"heading_mag_deg"`
	Variation    nav.Opt[Reading[nav.VariationDeg]] `json:"variation_deg"`
	StwKn        nav.Opt[Reading[float64]]          `json:"stw_kn"`
	WindApparent nav.Opt[Reading[RelativeWind]]     `json:"wind_apparent"`
	WindRelative nav.Opt[Reading[RelativeWind]]     `json:"wind_true_relative"`
	Wind         nav.Opt[Reading[Wind]]             `json:"wind"`
	Current      nav.Opt[Reading[Current]]          `json:"current"`
	WaterC       nav.Opt[Reading[float64]]          `json:"water_c"`
	DepthM       nav.Opt[Reading[float64]]          `json:"depth_m"`
	Time         nav.Opt[Reading[InstrumentTime]]   `json:"instrument_time"`
	// DeadReckoned is where the vessel has got to since its last fix; present
	// from the moment the position is stale.
	DeadReckoned nav.Opt[DeadReckoned] `json:"dead_reckoned"`
	// SpreadM is the greatest distance between fresh positions of different
	// sources; absent with fewer than two.
	SpreadM nav.Opt[float64] `json:"position_spread_m"`
	// Held is what was held back and why, one entry a source, newest first.
	Held []Held `json:"held"`
	// Replay says that the position comes from a recording, not from the sea.
	Replay bool `json:"replay"`
}

// Where is the vessel's position for use: the fix where it is fresh, else the
// dead reckoning, which says so.
type Where struct {
	Position nav.Position `json:"position"`
	// FixAgeS is how old the fix is on which this rests.
	FixAgeS float64 `json:"fix_age_s"`
	// ErrorM is the radius that holds the true position in 95 of 100 cases;
	// absent for a fix, whose receiver did not state it.
	ErrorM       nav.Opt[float64] `json:"error_m"`
	DeadReckoned bool             `json:"dead_reckoned"`
}

// Where returns the position for use, absent when there is neither a fresh fix
// nor a dead reckoning.
func (v Vessel) Where() nav.Opt[Where] {
	if r, ok := v.Position.Get(); ok && !r.Stale {
		return nav.Some(Where{Position: r.Value, FixAgeS: r.AgeS})
	}
	if d, ok := v.DeadReckoned.Get(); ok {
		return nav.Some(Where{Position: d.Position, FixAgeS: d.FixAgeS, ErrorM: nav.Some(d.ErrorM), DeadReckoned: true})
	}
	return nav.None[Where]()
}

// FixNow is the fresh position with fresh course and speed, absent when the
// position is stale.
func (v Vessel) FixNow() nav.Opt[nav.Fix] {
	r, ok := v.Position.Get()
	if !ok || r.Stale {
		return nav.None[nav.Fix]()
	}
	return nav.Some(nav.Fix{At: r.At, Position: r.Value, SogKn: Fresh(v.SogKn), CogTrue: Fresh(v.CogTrue)})
}
