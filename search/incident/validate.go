package incident

import (
	"encoding/json"
	"errors"
	"fmt"
	"strings"

	"wakeback/drift/nav"
)

// FieldError names the field of an event that is wrong, and what was expected.
type FieldError struct {
	Field    string // "id", "at", "body.position", ...
	Expected string
	Err      error // the cause; may be nil
}

func (e *FieldError) Error() string {
	if e.Err != nil {
		return fmt.Sprintf("%s: expected %s: %v", e.Field, e.Expected, e.Err)
	}
	return fmt.Sprintf("%s: expected %s", e.Field, e.Expected)
}

func (e *FieldError) Unwrap() error { return e.Err }

// limits of what one event may carry; our choice, several times what the
// longest real event needs.
const (
	maxTextLen = 4000
	maxBodyLen = 32 << 10
)

// Validate checks an event as it came from outside: identity, times, length,
// and the body of every kind that is known. It returns a *[FieldError]. The
// body of an unknown kind only has to be a JSON object.
func (e Event) Validate() error {
	if !validUUID(string(e.ID), '7') {
		return &FieldError{Field: "id", Expected: "a UUIDv7 in lower case, like 018f3c2e-7b1a-7c3d-9e4f-0123456789ab"}
	}
	if !validUUID(string(e.Incident), 0) {
		return &FieldError{Field: "incident", Expected: "a UUID in lower case"}
	}
	if !validUUID(string(e.Device), 0) {
		return &FieldError{Field: "device", Expected: "a UUID in lower case"}
	}
	if e.DeviceSeq == 0 {
		return &FieldError{Field: "device_seq", Expected: "the device's number of the event, from 1"}
	}
	if e.At.IsZero() || e.At.Year() < 1970 || e.At.Year() > 9999 {
		return &FieldError{Field: "at", Expected: "a time in RFC 3339 in UTC, like 2026-06-01T02:14:07Z"}
	}
	if e.DeviceAt.IsZero() || e.DeviceAt.Year() < 1970 || e.DeviceAt.Year() > 9999 {
		return &FieldError{Field: "device_at", Expected: "a time in RFC 3339 in UTC, like 2026-06-01T02:14:07Z"}
	}
	if e.Kind == "" || len(e.Kind) > 64 {
		return &FieldError{Field: "kind", Expected: "the kind of the event, up to 64 letters"}
	}
	if len(e.By) > 200 {
		return &FieldError{Field: "by", Expected: "a name of up to 200 bytes"}
	}
	return e.validateBody()
}

func (e Event) validateBody() error {
	if len(e.Body) > maxBodyLen {
		return &FieldError{Field: "body", Expected: fmt.Sprintf("up to %d bytes", maxBodyLen)}
	}
	var object map[string]json.RawMessage
	if err := json.Unmarshal(e.Body, &object); err != nil || object == nil {
		return &FieldError{Field: "body", Expected: "a JSON object", Err: err}
	}
	body, err := e.decode()
	if err != nil {
		return err
	}
	if c, ok := body.(checker); ok {
		return c.check()
	}
	return nil
}

// decode reads the body into its type; a body of an unknown kind gives nil.
func (e Event) decode() (any, error) {
	newBody, ok := bodyOf[e.Kind]
	if !ok {
		return nil, nil
	}
	body := newBody()
	if err := json.Unmarshal(e.Body, body); err != nil {
		return nil, &FieldError{Field: bodyField(err), Expected: "the form of a body of kind " + string(e.Kind), Err: err}
	}
	return body, nil
}

func bodyField(err error) string {
	var te *json.UnmarshalTypeError
	switch {
	case errors.As(err, &te) && te.Field != "":
		return "body." + te.Field
	case errors.Is(err, nav.ErrPosition):
		return "body.position"
	}
	return "body"
}

// bodyOf makes an empty body for every kind that has one.
var bodyOf = map[Kind]func() any{
	KindMarked:        func() any { return new(Marked) },
	KindMarkPlaced:    func() any { return new(MarkPlaced) },
	KindMarkAdjusted:  func() any { return new(MarkAdjusted) },
	KindMarkDismissed: func() any { return new(MarkDismissed) },
	KindWorkingMark:   func() any { return new(WorkingMark) },
	KindBeacon:        func() any { return new(Beacon) },
	KindMissing:       func() any { return new(Missing) },
	KindClue:          func() any { return new(Clue) },
	KindSeen:          func() any { return new(Seen) },
	KindLostSight:     func() any { return new(Seen) },
	KindPerson:        func() any { return new(Person) },
	KindWind:          func() any { return new(WindObserved) },
	KindCurrent:       func() any { return new(CurrentObserved) },
	KindWater:         func() any { return new(WaterObserved) },
	KindInCharge:      func() any { return new(InCharge) },
	KindRole:          func() any { return new(Role) },
	KindHeadCount:     func() any { return new(HeadCount) },
	KindAttached:      func() any { return new(OfPerson) },
	KindAlongside:     func() any { return new(OfPerson) },
	KindParted:        func() any { return new(OfPerson) },
	KindAboard:        func() any { return new(Aboard) },
	KindMissedPass:    func() any { return new(MissedPass) },
	KindStoodDown:     func() any { return new(StoodDown) },
	KindReopened:      func() any { return new(StoodDown) },
	KindSuspended:     func() any { return new(Order) },
	KindOrder:         func() any { return new(Order) },
	KindCallMade:      func() any { return new(Call) },
	KindCallAnswered:  func() any { return new(Call) },
	KindBuoyDropped:   func() any { return new(Buoy) },
	KindBuoySeen:      func() any { return new(Buoy) },
	KindSearchLaid:    func() any { return new(SearchLaid) },
	KindLegBegun:      func() any { return new(LegBegun) },
	KindLegEnded:      func() any { return new(LegEnded) },
	KindSearchPaused:  func() any { return new(SearchWord) },
	KindSearchResumed: func() any { return new(SearchWord) },
	KindSearchDropped: func() any { return new(SearchWord) },
	KindNote:          func() any { return new(Note) },
	KindUndone:        func() any { return new(Undone) },
	KindJoined:        func() any { return new(Joined) },
}

// validUUID reports whether s is a UUID in lower case, of the version given
// (0 for any) and the variant of RFC 9562.
func validUUID(s string, version byte) bool {
	if len(s) != 36 || s[8] != '-' || s[13] != '-' || s[18] != '-' || s[23] != '-' {
		return false
	}
	for i := range len(s) {
		if i == 8 || i == 13 || i == 18 || i == 23 {
			continue
		}
		if !strings.ContainsRune("0123456789abcdef", rune(s[i])) {
			return false
		}
	}
	return version == 0 || s[14] == version && strings.ContainsRune("89ab", rune(s[19]))
}
