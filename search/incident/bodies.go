package incident

import (
	"time"

	"wakeback/drift/nav"
)

// PersonNo counts the people of one incident, from 1.
type PersonNo int

// PositionSource says where a position came from.
type PositionSource string

// The sources of a position.
const (
	FromPhone   PositionSource = "phone"   // the receiver in the phone that marked
	FromVessel  PositionSource = "vessel"  // the vessel's instruments
	FromDR      PositionSource = "dr"      // carried on from the last fix by course and speed
	FromTrack   PositionSource = "track"   // a point of the recorded track
	FromTyped   PositionSource = "typed"   // a person typed it
	FromBeacon  PositionSource = "beacon"  // a beacon worn by the person
	FromNothing PositionSource = "nothing" // no position is known
)

// Marked says that someone went over the side, here and now. Without a
// position the server places it from the vessel's track: see [MarkPlaced].
type Marked struct {
	Position nav.Opt[nav.Position] `json:"position,omitzero"`
	Source   PositionSource        `json:"source"`
	// ErrorM is the radius that holds the true position in 95 of 100 cases.
	ErrorM nav.Opt[float64] `json:"error_m,omitzero"`
	// FixAgeS is how old the fix behind the position was at the press.
	FixAgeS    nav.Opt[float64]     `json:"fix_age_s,omitzero"`
	SogKn      nav.Opt[float64]     `json:"sog_kn,omitzero"`
	CogDeg     nav.Opt[nav.TrueDeg] `json:"cog_deg,omitzero"`
	HeadingDeg nav.Opt[nav.TrueDeg] `json:"heading_deg,omitzero"`
	// Person is who, where more than one is in the water; absent means the first.
	Person nav.Opt[PersonNo] `json:"person,omitzero"`
	// NewIncident says that the sender wanted an incident of its own.
	NewIncident bool `json:"new_incident,omitempty"`
	// Mmsi is the identity of the beacon that raised the mark, if one did.
	Mmsi uint32 `json:"mmsi,omitempty"`
	// Side is the side of the fall: "port", "starboard", or "" when unknown.
	Side string `json:"side,omitempty"`
}

// MarkPlaced gives a mark that had no position the one that the vessel's
// track says. It never moves a mark that has a position.
type MarkPlaced struct {
	Mark     EventID          `json:"mark"`
	Position nav.Position     `json:"position"`
	Source   PositionSource   `json:"source"`
	ErrorM   nav.Opt[float64] `json:"error_m,omitzero"`
	FixAgeS  nav.Opt[float64] `json:"fix_age_s,omitzero"`
}

// MarkAdjusted corrects the time or the place of a mark. The press stays in
// the log and on the screen beside it.
type MarkAdjusted struct {
	Mark EventID `json:"mark"`
	// FellAt is when the person fell, as now believed.
	FellAt   nav.Opt[time.Time]    `json:"fell_at,omitzero"`
	Position nav.Opt[nav.Position] `json:"position,omitzero"`
	Source   PositionSource        `json:"source,omitempty"`
	ErrorM   nav.Opt[float64]      `json:"error_m,omitzero"`
	// BackS says that the choice was "so many seconds ago".
	BackS nav.Opt[float64] `json:"back_s,omitzero"`
	Side  string           `json:"side,omitempty"`
}

// MarkDismissed says that a mark was not a person: pressed by mistake.
type MarkDismissed struct {
	Mark   EventID `json:"mark"`
	Reason string  `json:"reason,omitempty"`
}

// WorkingMark chooses the mark that everyone steers by, for one person.
type WorkingMark struct {
	Mark EventID `json:"mark"`
}

// Beacon is a report of a beacon worn by a person.
type Beacon struct {
	Mmsi     uint32               `json:"mmsi"`
	Position nav.Position         `json:"position"`
	SogKn    nav.Opt[float64]     `json:"sog_kn,omitzero"`
	CogDeg   nav.Opt[nav.TrueDeg] `json:"cog_deg,omitzero"`
}

// PathPoint is a point of a recorded track.
type PathPoint struct {
	At       time.Time    `json:"at"`
	Position nav.Position `json:"position"`
}

// Missing says that a person was not seen to fall: between LastSeen and
// Noticed lies a stretch of track, not a point.
type Missing struct {
	Person   nav.Opt[PersonNo] `json:"person,omitzero"`
	LastSeen time.Time         `json:"last_seen"`
	Noticed  time.Time         `json:"noticed"`
	// Path is the vessel's track between the two, thinned; it may be empty.
	Path []PathPoint `json:"path,omitempty"`
}

// Certainty says how sure a report is.
type Certainty string

// The certainties.
const (
	Certain  Certainty = "certain"
	Probable Certainty = "probable"
	Possible Certainty = "possible"
)

// Clue is something that tells more about when or where, with its own time.
// NotBefore and NotAfter narrow the time of the fall.
type Clue struct {
	Person    nav.Opt[PersonNo]     `json:"person,omitzero"`
	Text      string                `json:"text"`
	Sure      Certainty             `json:"sure"`
	Who       string                `json:"who,omitempty"`
	SeenAt    nav.Opt[time.Time]    `json:"seen_at,omitzero"`
	NotBefore nav.Opt[time.Time]    `json:"not_before,omitzero"`
	NotAfter  nav.Opt[time.Time]    `json:"not_after,omitzero"`
	Position  nav.Opt[nav.Position] `json:"position,omitzero"`
}

// Seen is a sighting: from where, in which direction, how far.
type Seen struct {
	Person     nav.Opt[PersonNo]     `json:"person,omitzero"`
	What       string                `json:"what,omitempty"` // "person", "light", "smoke", ...
	Observer   nav.Opt[nav.Position] `json:"observer,omitzero"`
	BearingDeg nav.Opt[nav.TrueDeg]  `json:"bearing_deg,omitzero"`
	RangeM     nav.Opt[float64]      `json:"range_m,omitzero"`
	Position   nav.Opt[nav.Position] `json:"position,omitzero"` // of what was seen
	Sure       Certainty             `json:"sure,omitempty"`
}

// Person tells about someone in the water. Each field said replaces what was
// said before; one left out leaves it.
type Person struct {
	Person     nav.Opt[PersonNo] `json:"person,omitzero"`
	Name       nav.Opt[string]   `json:"name,omitzero"`
	LifeJacket nav.Opt[string]   `json:"life_jacket,omitzero"` // "worn", "not_worn", "unknown"
	Clothing   nav.Opt[string]   `json:"clothing,omitzero"`    // free text, or a class of the leeway table
	Moving     nav.Opt[string]   `json:"moving,omitzero"`      // "yes", "no", "unknown"
	Light      nav.Opt[bool]     `json:"light,omitzero"`
	Beacon     nav.Opt[bool]     `json:"beacon,omitzero"`
	Injuries   nav.Opt[string]   `json:"injuries,omitzero"`
	// Object is the leeway class chosen for the drift; absent means "person".
	Object nav.Opt[string] `json:"object,omitzero"`
}

// ObservedBy says who or what an observation came from.
type ObservedBy struct {
	Source string             `json:"source"` // "instrument", "person", "measured", "forecast", "tables"
	Name   string             `json:"name,omitempty"`
	From   nav.Opt[time.Time] `json:"from,omitzero"` // when it holds from; absent means the event's time
}

// WindObserved is the true wind, reduced to 10 m where that was possible.
type WindObserved struct {
	FromDeg   nav.TrueDeg `json:"from_deg"`
	SpeedKn   float64     `json:"speed_kn"`
	SpeedSdKn float64     `json:"speed_sd_kn,omitempty"`
	ObservedBy
}

// CurrentObserved is what the water does over the ground.
type CurrentObserved struct {
	SetDeg  nav.TrueDeg `json:"set_deg"`
	DriftKn float64     `json:"drift_kn"`
	DriftSd float64     `json:"drift_sd_kn,omitempty"`
	ObservedBy
}

// WaterObserved is the temperature of the water.
type WaterObserved struct {
	TempC float64 `json:"temp_c"`
	ObservedBy
}

// InCharge says who is in charge now. A higher Term wins over a lower one; of
// two claims of one term the earlier holder stays and both are shown.
type InCharge struct {
	Name   string   `json:"name"`
	Device DeviceID `json:"device,omitempty"`
	Term   uint64   `json:"term"`
}

// Role says who does what: "helm", "spotter", "radio". An empty name means
// that the role is laid down.
type Role struct {
	Role   string   `json:"role"`
	Name   string   `json:"name,omitempty"`
	Device DeviceID `json:"device,omitempty"`
}

// HeadCount is how many were counted aboard, and how many should be.
type HeadCount struct {
	Aboard   int          `json:"aboard"`
	Expected nav.Opt[int] `json:"expected,omitzero"`
}

// OfPerson names the person an event is about; absent means the first.
type OfPerson struct {
	Person nav.Opt[PersonNo] `json:"person,omitzero"`
	Text   string            `json:"text,omitempty"`
}

// Aboard says that a person is back on board, and in what condition.
type Aboard struct {
	Person    nav.Opt[PersonNo] `json:"person,omitzero"`
	Condition string            `json:"condition"` // "well", "conscious", "unconscious", "not_breathing", "never_left", or free text
}

// MissedPass says that an approach did not end alongside.
type MissedPass struct {
	Person   nav.Opt[PersonNo] `json:"person,omitzero"`
	ClosestM nav.Opt[float64]  `json:"closest_m,omitzero"`
	Side     string            `json:"side,omitempty"`
}

// StoodDown ends an incident, with the reason. Asked for by a device that is
// not in charge it counts as a question to the one who is.
type StoodDown struct {
	Reason string `json:"reason"`
}

// Order is what the authority said, word for word.
type Order struct {
	Station  string `json:"station"`
	Channel  string `json:"channel,omitempty"`
	Text     string `json:"text"`
	ReadBack bool   `json:"read_back,omitempty"`
}

// Call is a call on the radio: made, or answered.
type Call struct {
	Call    string `json:"call"` // "distress", "urgency", "cancel", "update"
	Channel string `json:"channel,omitempty"`
	Station string `json:"station,omitempty"` // who answered
	Text    string `json:"text,omitempty"`
}

// Buoy is something thrown after the person whose drift can be watched.
type Buoy struct {
	Name     string                `json:"name"`
	Position nav.Opt[nav.Position] `json:"position,omitzero"`
}

// Note is free text.
type Note struct {
	Text string `json:"text"`
}

// Undone takes an event back. It stays in the log, struck through; only what
// it did is no longer counted. A mark is dismissed, not undone.
type Undone struct {
	Event EventID `json:"event"`
}

// Joined says that what was opened as its own incident belongs to another.
type Joined struct {
	Into IncidentID `json:"into"`
}
