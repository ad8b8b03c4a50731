package advice

import (
	"time"

	"wakeback/drift/nav"
	"wakeback/search/incident"
)

// Frame is what a screen shows at one moment: the steer message of the
// stream. Figures that are not known are null, never zero. Directions are
// degrees true unless the name says otherwise.
type Frame struct {
	Incident incident.IncidentID `json:"incident"`
	At       time.Time           `json:"at"`
	Drill    bool                `json:"drill,omitempty"`
	Test     bool                `json:"test,omitempty"`
	Status   incident.Status     `json:"status"`

	// Person is whom this frame steers for; Persons lists everyone.
	Person  incident.PersonNo `json:"person"`
	Persons []PersonLine      `json:"persons"`
	// ElapsedS counts from the fall as now believed.
	ElapsedS nav.Opt[float64] `json:"elapsed_s"`

	Mark  nav.Opt[MarkSeen] `json:"mark"`
	Fix   nav.Opt[FixSeen]  `json:"fix"`
	Datum nav.Opt[Datum]    `json:"datum"`
	// Corridor takes the place of the datum for a person who was not seen to
	// fall: a stretch of track, drifted, never one point.
	Corridor []CorridorPoint `json:"corridor,omitempty"`
	// DriftNote says why there is no datum, when it could not be worked out.
	DriftNote string `json:"drift_note,omitempty"`

	HeadingDeg    nav.Opt[nav.TrueDeg] `json:"heading_deg"`
	HeadingSource string               `json:"heading_source,omitempty"` // "compass" or "course"

	RangeM        nav.Opt[float64]          `json:"range_m"`
	BearingDeg    nav.Opt[nav.TrueDeg]      `json:"bearing_deg"`
	BearingMagDeg nav.Opt[nav.MagneticDeg]  `json:"bearing_mag_deg"`
	VariationDeg  nav.Opt[nav.VariationDeg] `json:"variation_deg"`
	VariationNote string                    `json:"variation_note,omitempty"`
	RelativeDeg   nav.Opt[nav.RelativeDeg]  `json:"relative_deg"`
	// WedgeDeg is half the angle in which the person lies in 95 of 100 cases,
	// as seen from here; 180 when it is all round.
	WedgeDeg  nav.Opt[float64] `json:"wedge_deg"`
	ClosingKn nav.Opt[float64] `json:"closing_kn"`
	EtaS      nav.Opt[float64] `json:"eta_s"`

	// Leg is the search leg being steered, if there is one.
	Leg nav.Opt[LegSeen] `json:"leg,omitzero"`

	Do       Do       `json:"do"`
	Cautions []string `json:"cautions"`
}

// PersonLine is one person in the list of all.
type PersonLine struct {
	No        incident.PersonNo     `json:"no"`
	Name      string                `json:"name,omitempty"`
	Status    incident.PersonStatus `json:"status"`
	Condition string                `json:"condition,omitempty"`
	ElapsedS  nav.Opt[float64]      `json:"elapsed_s"`
	InSight   bool                  `json:"in_sight"`
	RangeM    nav.Opt[float64]      `json:"range_m"`
	Bearing   nav.Opt[nav.TrueDeg]  `json:"bearing_deg"`
}

// MarkSeen is where it happened: fixed.
type MarkSeen struct {
	Event    incident.EventID        `json:"event"`
	Number   int                     `json:"number"`
	Position nav.Opt[nav.Position]   `json:"position"`
	At       time.Time               `json:"at"`       // the fall, as now believed
	PressAt  time.Time               `json:"press_at"` // the press
	Source   incident.PositionSource `json:"source"`
	ErrorM   nav.Opt[float64]        `json:"error_m"`
	FixAgeS  nav.Opt[float64]        `json:"fix_age_s"`
	Adjusted bool                    `json:"adjusted,omitempty"`
	Side     string                  `json:"side,omitempty"`
}

// FixSeen is where the own vessel is.
type FixSeen struct {
	Position nav.Position            `json:"position"`
	At       time.Time               `json:"at"`
	AgeS     float64                 `json:"age_s"`
	SogKn    nav.Opt[float64]        `json:"sog_kn"`
	CogDeg   nav.Opt[nav.TrueDeg]    `json:"cog_deg"`
	Source   incident.PositionSource `json:"source"`
	ErrorM   nav.Opt[float64]        `json:"error_m"`
	Stale    bool                    `json:"stale,omitempty"`
}

// Datum is where to look now: it moves.
type Datum struct {
	Position nav.Position `json:"position"`
	// ErrorM is the radius around Position that holds the person in 95 of 100
	// cases, as far as the inputs are right; it reaches around the left and the
	// right datum too, where leeway diverges.
	ErrorM float64 `json:"error_m"`
	// ProbableErrorM is the total probable error of the manuals: half of all
	// cases, around each of the datums.
	ProbableErrorM float64               `json:"probable_error_m"`
	AgeS           float64               `json:"age_s"` // since the position it starts from
	MovedM         float64               `json:"moved_m"`
	MovedTowards   nav.Opt[nav.TrueDeg]  `json:"moved_towards_deg"`
	DriftKn        float64               `json:"drift_kn"`
	DriftTowards   nav.Opt[nav.TrueDeg]  `json:"drift_towards_deg"`
	Left           nav.Opt[nav.Position] `json:"left"`
	Right          nav.Opt[nav.Position] `json:"right"`
	Object         string                `json:"object"`
	WindFromDeg    nav.Opt[nav.TrueDeg]  `json:"wind_from_deg"`
	WindKn         nav.Opt[float64]      `json:"wind_kn"`
	WindAt         nav.Opt[time.Time]    `json:"wind_at"`
	WindBy         string                `json:"wind_by,omitempty"` // "instrument", "person", ...
	CurrentSetDeg  nav.Opt[nav.TrueDeg]  `json:"current_set_deg"`
	CurrentDriftKn nav.Opt[float64]      `json:"current_drift_kn"`
	CurrentAt      nav.Opt[time.Time]    `json:"current_at"`
	CurrentBy      string                `json:"current_by,omitempty"`
	// Basis says what the datum starts from: "mark" or "beacon".
	Basis string `json:"basis"`

	// beyondTrials: the wind is stronger than the leeway was measured in.
	beyondTrials bool
}
