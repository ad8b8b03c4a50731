package incident

import (
	"fmt"
	"time"

	"wakeback/drift/nav"
)

// SearchLaid is a search plan: legs on a datum that drifts. The id of the
// event names the search. A plan is only what is meant: what was searched
// comes from the legs that were run and the track.
type SearchLaid struct {
	Person nav.Opt[PersonNo] `json:"person,omitzero"`
	// Vessel is whose legs these are; "" is the own vessel.
	Vessel  string       `json:"vessel,omitempty"`
	Pattern string       `json:"pattern"` // "square", "sector", "parallel", "creeping", "track"
	Datum   nav.Position `json:"datum"`   // at Begin
	Begin   time.Time    `json:"begin"`
	// SpeedKn is through the water; Current what the water does, DatumDrift
	// what the datum does, both over the ground.
	SpeedKn    float64   `json:"speed_kn"`
	Current    SetDrift  `json:"current"`
	DatumDrift SetDrift  `json:"datum_drift"`
	SpacingNM  float64   `json:"spacing_nm,omitempty"`
	WidthNM    float64   `json:"sweep_width_nm,omitempty"`
	WidthBy    string    `json:"sweep_width_by,omitempty"` // the table, or "measured"
	Legs       []LegLaid `json:"legs"`
	Reason     string    `json:"reason,omitempty"` // why this pattern and this first course
}

// SetDrift is a motion over the ground.
type SetDrift struct {
	SetDeg  nav.TrueDeg `json:"set_deg"`
	DriftKn float64     `json:"drift_kn"`
}

// Velocity is the motion as a vector.
func (s SetDrift) Velocity() nav.Velocity { return nav.Towards(s.SetDeg, s.DriftKn) }

// LegLaid is a leg in the datum frame.
type LegLaid struct {
	Kind      string      `json:"kind"` // "search" or "cross"
	CourseDeg nav.TrueDeg `json:"course_deg"`
	LengthM   float64     `json:"length_m"`
	From      nav.Offset  `json:"from"`
	To        nav.Offset  `json:"to"`
}

// LegBegun says that a leg is being steered from now on; legs count from 1.
type LegBegun struct {
	Search EventID `json:"search"`
	Leg    int     `json:"leg"`
}

// LegEnded says how a leg ended, with the conditions it was searched in.
type LegEnded struct {
	Search EventID `json:"search"`
	Leg    int     `json:"leg"`
	// Part is how much of the leg was run, 0 to 1.
	Part         float64          `json:"part"`
	How          string           `json:"how"` // "run", "broken_off", "skipped"
	Lookouts     nav.Opt[int]     `json:"lookouts,omitzero"`
	EyeHeightM   nav.Opt[float64] `json:"eye_height_m,omitzero"`
	VisibilityNM nav.Opt[float64] `json:"visibility_nm,omitzero"`
	Light        string           `json:"light,omitempty"` // "day", "dusk", "night"
}

// SearchWord pauses, resumes or drops a search, with the reason.
type SearchWord struct {
	Search EventID `json:"search"`
	Reason string  `json:"reason,omitempty"`
}

func searchID(id EventID) error {
	if !validUUID(string(id), 0) {
		return &FieldError{Field: "body.search", Expected: "the id of a search"}
	}
	return nil
}

func legNo(n int) error {
	if n < 1 || n > maxLegs {
		return &FieldError{Field: "body.leg", Expected: fmt.Sprintf("the number of a leg, 1 to %d", maxLegs)}
	}
	return nil
}

// maxLegs bounds a plan; as many as the patterns allow.
const maxLegs = 500

func (s *SearchLaid) check() error {
	if len(s.Legs) < 1 || len(s.Legs) > maxLegs {
		return &FieldError{Field: "body.legs", Expected: fmt.Sprintf("1 to %d legs", maxLegs)}
	}
	if s.Begin.IsZero() {
		return &FieldError{Field: "body.begin", Expected: "when the search begins"}
	}
	return first(person(s.Person), text("body.reason", s.Reason),
		oneOf("body.pattern", s.Pattern, "square", "sector", "parallel", "creeping", "track"),
		within("body.speed_kn", s.SpeedKn, 0.1, maxSpeedKn, "knots"),
		within("body.current.drift_kn", s.Current.DriftKn, 0, 30, "knots"),
		within("body.datum_drift.drift_kn", s.DatumDrift.DriftKn, 0, 30, "knots"),
		within("body.spacing_nm", s.SpacingNM, 0, 100, "nautical miles"),
		within("body.sweep_width_nm", s.WidthNM, 0, 100, "nautical miles"))
}

func (l *LegBegun) check() error { return first(searchID(l.Search), legNo(l.Leg)) }

func (l *LegEnded) check() error {
	return first(searchID(l.Search), legNo(l.Leg), within("body.part", l.Part, 0, 1, "of the leg"),
		oneOf("body.how", l.How, "run", "broken_off", "skipped"),
		oneOf("body.light", l.Light, "", "day", "dusk", "night"))
}

func (s *SearchWord) check() error { return first(searchID(s.Search), text("body.reason", s.Reason)) }
