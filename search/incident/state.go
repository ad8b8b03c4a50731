package incident

import (
	"time"

	"wakeback/drift/nav"
)

// Status says where an incident stands.
type Status string

// The statuses.
const (
	Open        Status = "open"
	Suspended   Status = "suspended"  // by the authority; not closed
	StoodDownSt Status = "stood_down" // closed, with a reason
)

// State is what the events of one incident add up to.
type State struct {
	ID       IncidentID   `json:"id"`
	Joined   []IncidentID `json:"joined,omitempty"` // incidents that became part of this one
	Drill    bool         `json:"drill,omitempty"`  // all of it was a drill
	Test     bool         `json:"test,omitempty"`   // all of it was a test of the button
	OpenedAt time.Time    `json:"opened_at"`
	LastAt   time.Time    `json:"last_at"`
	Events   int          `json:"events"`

	Status       Status    `json:"status"`
	StatusAt     time.Time `json:"status_at,omitzero"`
	StatusBy     string    `json:"status_by,omitempty"`
	StatusReason string    `json:"status_reason,omitempty"`
	// Asked are wishes of devices that are not in charge, waiting for the one who is.
	Asked []Asked `json:"asked,omitempty"`

	Marks   []Mark        `json:"marks"`
	Persons []PersonState `json:"persons"`

	InCharge nav.Opt[Charge] `json:"in_charge,omitzero"`
	// Rivals are other claims of the same term: people have to settle it.
	Rivals    []Charge           `json:"rivals,omitempty"`
	Roles     []RoleHeld         `json:"roles,omitempty"`
	HeadCount nav.Opt[HeadCount] `json:"head_count,omitzero"`

	Winds    []WindSaid    `json:"winds,omitempty"`
	Currents []CurrentSaid `json:"currents,omitempty"`
	Waters   []WaterSaid   `json:"waters,omitempty"`

	Sightings []Sighting  `json:"sightings,omitempty"`
	Clues     []ClueSaid  `json:"clues,omitempty"`
	Buoys     []BuoySaid  `json:"buoys,omitempty"`
	Calls     []CallSaid  `json:"calls,omitempty"`
	Orders    []OrderSaid `json:"orders,omitempty"`
	Notes     []NoteSaid  `json:"notes,omitempty"`

	Searches []Search `json:"searches,omitempty"`

	// Unread counts events of kinds this program does not know, and events
	// whose body it could not read; they are kept in the log.
	Unread int `json:"unread,omitempty"`
}

// Said is who said a thing, and when.
type Said struct {
	Event  EventID   `json:"event"`
	At     time.Time `json:"at"`
	By     string    `json:"by,omitempty"`
	Device DeviceID  `json:"device"`
}

// Asked is a wish that only the one in charge can grant.
type Asked struct {
	Said
	Kind   Kind    `json:"kind"` // stood_down, mark_dismissed or working_mark
	Mark   EventID `json:"mark,omitempty"`
	Reason string  `json:"reason,omitempty"`
}

// Place is a position with its source and error.
type Place struct {
	Position nav.Position     `json:"position"`
	Source   PositionSource   `json:"source"`
	ErrorM   nav.Opt[float64] `json:"error_m,omitzero"` // 95 in 100
	FixAgeS  nav.Opt[float64] `json:"fix_age_s,omitzero"`
}

// Mark is one press of the button.
type Mark struct {
	Said                  // At is the moment of the press
	Number int            `json:"number"` // in order of the press, from 1
	Person PersonNo       `json:"person"`
	FellAt time.Time      `json:"fell_at"` // when the person fell, as now believed
	Press  nav.Opt[Place] `json:"press,omitzero"`
	// Place is where it happened as now believed: the press, or its adjustment.
	Place     nav.Opt[Place]       `json:"place,omitzero"`
	Adjusted  nav.Opt[Said]        `json:"adjusted,omitzero"`
	BackS     nav.Opt[float64]     `json:"back_s,omitzero"`
	Dismissed nav.Opt[Said]        `json:"dismissed,omitzero"`
	Reason    string               `json:"reason,omitempty"`
	Mmsi      uint32               `json:"mmsi,omitempty"`
	Side      string               `json:"side,omitempty"`
	SogKn     nav.Opt[float64]     `json:"sog_kn,omitzero"`
	CogDeg    nav.Opt[nav.TrueDeg] `json:"cog_deg,omitzero"`
	Heading   nav.Opt[nav.TrueDeg] `json:"heading_deg,omitzero"`
	Drill     bool                 `json:"drill,omitempty"`
	Test      bool                 `json:"test,omitempty"`
	// ClockErrorMs is how far At may be off.
	ClockErrorMs *int64    `json:"clock_error_ms,omitempty"`
	DeviceAt     time.Time `json:"device_at"`
}

// PersonStatus says where a person is.
type PersonStatus string

// The statuses of a person. Alongside is not aboard.
const (
	InWater   PersonStatus = "in_water"
	IsMissing PersonStatus = "missing" // not seen to fall
	Attached  PersonStatus = "attached"
	Alongside PersonStatus = "alongside"
	IsAboard  PersonStatus = "aboard"
)

// PersonState is what is known of one person.
type PersonState struct {
	No        PersonNo     `json:"no"`
	Status    PersonStatus `json:"status"`
	StatusAt  time.Time    `json:"status_at"`
	Condition string       `json:"condition,omitempty"`

	Name       string `json:"name,omitempty"`
	LifeJacket string `json:"life_jacket"` // "unknown" until said
	Clothing   string `json:"clothing,omitempty"`
	Moving     string `json:"moving"`
	Light      string `json:"light"` // "yes", "no", "unknown"
	BeaconWorn string `json:"beacon"`
	Injuries   string `json:"injuries,omitempty"`
	Object     string `json:"object"` // leeway class

	// WorkingMark is the mark steered by: the first, unless the one in charge
	// chose another. Absent when the person is missing and nothing was marked.
	WorkingMark nav.Opt[EventID] `json:"working_mark,omitzero"`
	// Window is when the fall happened, for a person who was not seen to fall.
	Window nav.Opt[Window]     `json:"window,omitzero"`
	Path   []PathPoint         `json:"path,omitempty"`
	Beacon nav.Opt[BeaconSaid] `json:"beacon_report,omitzero"`

	InSight      bool      `json:"in_sight"`
	SightAt      time.Time `json:"sight_at,omitzero"`
	MissedPasses []Pass    `json:"missed_passes,omitempty"`
}

// Window is the time in which a fall happened. Said are its outer ends, From
// and To what clues narrow it to.
type Window struct {
	LastSeen time.Time `json:"last_seen"`
	Noticed  time.Time `json:"noticed"`
	From     time.Time `json:"from"`
	To       time.Time `json:"to"`
	// Against are clues that cannot be true together with the others.
	Against []EventID `json:"against,omitempty"`
}

// Pass is an approach that did not end alongside.
type Pass struct {
	Said
	Number int `json:"number"`
	MissedPass
}

// Charge is who is in charge.
type Charge struct {
	Said
	Name   string   `json:"name"`
	Holder DeviceID `json:"holder"`
	Term   uint64   `json:"term"`
}

// RoleHeld is who does what.
type RoleHeld struct {
	Said
	Role   string   `json:"role"`
	Name   string   `json:"name,omitempty"`
	Holder DeviceID `json:"holder,omitempty"`
}

// The observations and entries of the log, each with who said it.
type (
	// WindSaid is a wind that someone or something observed.
	WindSaid struct {
		Said
		WindObserved
	}
	// CurrentSaid is a current that someone or something observed.
	CurrentSaid struct {
		Said
		CurrentObserved
	}
	// WaterSaid is a water temperature.
	WaterSaid struct {
		Said
		WaterObserved
	}
	// Sighting is a thing seen, or lost from sight.
	Sighting struct {
		Said
		Lost bool `json:"lost,omitempty"`
		Seen
	}
	// ClueSaid is a clue.
	ClueSaid struct {
		Said
		Clue
	}
	// BuoySaid is a thing thrown, or seen again.
	BuoySaid struct {
		Said
		Again bool `json:"again,omitempty"`
		Buoy
	}
	// CallSaid is a call made or answered.
	CallSaid struct {
		Said
		Answered bool `json:"answered,omitempty"`
		Call
	}
	// OrderSaid is an order of the authority.
	OrderSaid struct {
		Said
		Order
	}
	// NoteSaid is a note.
	NoteSaid struct {
		Said
		Text string `json:"text"`
	}
	// BeaconSaid is the newest report of a beacon.
	BeaconSaid struct {
		Said
		Beacon
	}
)

// Person returns the person of a number.
func (s *State) Person(no PersonNo) (PersonState, bool) {
	for _, p := range s.Persons {
		if p.No == no {
			return p, true
		}
	}
	return PersonState{}, false
}

// Mark returns the mark of an event.
func (s *State) Mark(id EventID) (Mark, bool) {
	for _, m := range s.Marks {
		if m.Event == id {
			return m, true
		}
	}
	return Mark{}, false
}

// Live reports whether someone still has to be found or brought aboard as far
// as the log says: the incident is not stood down, and is not a test.
func (s *State) Live() bool { return s.Status != StoodDownSt && !s.Test }
