package incident

import (
	"encoding/json"
	"time"
)

// EventID names an event for ever: a UUIDv7 (RFC 9562) in lower case, like
// "018f3c2e-7b1a-7c3d-9e4f-0123456789ab". Order never comes from it.
type EventID string

// IncidentID names an incident: a UUIDv7 made by the device that opened it.
type IncidentID string

// DeviceID names a phone, a script or the server itself: a UUID.
type DeviceID string

// Seq is the server's number of an event: one gap-free sequence for all
// incidents in one store. Zero means that no server has it yet.
type Seq uint64

// Event is one entry of the log. All fields down to Body are covered by Hash;
// Seq and ReceivedAt are added by the server that stores it.
type Event struct {
	ID        EventID    `json:"id"`
	Incident  IncidentID `json:"incident"`
	Device    DeviceID   `json:"device"`
	DeviceSeq uint64     `json:"device_seq"` // 1, 2, 3 ... for each device
	PrevHash  string     `json:"prev_hash"`  // Hash of the device's event before; "" for its first
	Kind      Kind       `json:"kind"`
	// At is when it happened, on the common clock of the vessel as well as the
	// device knew it; DeviceAt is the same moment on the device's own clock,
	// and is never corrected.
	At       time.Time `json:"at"`
	DeviceAt time.Time `json:"device_at"`
	// ClockErrorMs is how far At may be off, if that was measured.
	ClockErrorMs *int64 `json:"clock_error_ms,omitempty"`
	// By says who, as the device's owner named it; it may be empty.
	By string `json:"by,omitempty"`
	// Drill and Test keep a rehearsal and a trial of the button apart from the real thing.
	Drill bool            `json:"drill,omitempty"`
	Test  bool            `json:"test,omitempty"`
	Body  json.RawMessage `json:"body"` // one of the bodies, by Kind; {} when there is nothing to say

	Hash string `json:"hash"` // lower-case hexadecimal SHA-256, see [Event.ComputeHash]

	Seq        Seq       `json:"seq,omitempty"`
	ReceivedAt time.Time `json:"received_at,omitzero"`
}

// Kind says what an event is about. The list only grows: a kind once written
// to a log keeps its meaning, and one that a program does not know is kept
// and counted, never refused.
type Kind string

// The kinds, with their bodies.
const (
	KindMarked        Kind = "marked"         // [Marked]
	KindMarkPlaced    Kind = "mark_placed"    // [MarkPlaced]
	KindMarkAdjusted  Kind = "mark_adjusted"  // [MarkAdjusted]
	KindMarkDismissed Kind = "mark_dismissed" // [MarkDismissed]
	KindWorkingMark   Kind = "working_mark"   // [WorkingMark]
	KindBeacon        Kind = "beacon"         // [Beacon]
	KindMissing       Kind = "missing"        // [Missing]
	KindClue          Kind = "clue"           // [Clue]
	KindSeen          Kind = "seen"           // [Seen]
	KindLostSight     Kind = "lost_sight"     // [Seen], position and bearing as last seen
	KindPerson        Kind = "person"         // [Person]
	KindWind          Kind = "wind"           // [WindObserved]
	KindCurrent       Kind = "current"        // [CurrentObserved]
	KindWater         Kind = "water"          // [WaterObserved]
	KindInCharge      Kind = "in_charge"      // [InCharge]
	KindRole          Kind = "role"           // [Role]
	KindHeadCount     Kind = "head_count"     // [HeadCount]
	KindAttached      Kind = "attached"       // [OfPerson]
	KindAlongside     Kind = "alongside"      // [OfPerson]
	KindParted        Kind = "parted"         // [OfPerson]: no longer alongside or attached, not aboard
	KindAboard        Kind = "aboard"         // [Aboard]
	KindMissedPass    Kind = "missed_pass"    // [MissedPass]
	KindStoodDown     Kind = "stood_down"     // [StoodDown]
	KindReopened      Kind = "reopened"       // [StoodDown]
	KindSuspended     Kind = "suspended"      // [Order]: by the authority, in its words
	KindOrder         Kind = "order"          // [Order]
	KindCallMade      Kind = "call_made"      // [Call]
	KindCallAnswered  Kind = "call_answered"  // [Call]
	KindBuoyDropped   Kind = "buoy_dropped"   // [Buoy]
	KindBuoySeen      Kind = "buoy_seen"      // [Buoy]
	KindSearchLaid    Kind = "search_laid"    // [SearchLaid]
	KindLegBegun      Kind = "leg_begun"      // [LegBegun]
	KindLegEnded      Kind = "leg_ended"      // [LegEnded]
	KindSearchPaused  Kind = "search_paused"  // [SearchWord]
	KindSearchResumed Kind = "search_resumed" // [SearchWord]
	KindSearchDropped Kind = "search_dropped" // [SearchWord]
	KindNote          Kind = "note"           // [Note]
	KindUndone        Kind = "undone"         // [Undone]
	KindJoined        Kind = "joined"         // [Joined]
)
