package incident

import (
	"encoding/json"
	"errors"
	"fmt"
	"reflect"
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
	body := newBody(e.Kind)
	if body == nil {
		return nil, nil
	}
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

// newBody is an empty body of a kind, or nil for a kind that has none.
func newBody(k Kind) any {
	for _, b := range bodies {
		if b.kind == k {
			return reflect.New(reflect.TypeOf(b.body).Elem()).Interface()
		}
	}
	return nil
}

// bodies are the kinds that have a body, with a pointer of its type. A table
// that the linker lays out is smaller in the engine than a map of functions
// that is made at its start.
var bodies = [...]struct {
	kind Kind
	body any
}{
	{KindMarked, (*Marked)(nil)},
	{KindMarkPlaced, (*MarkPlaced)(nil)},
	{KindMarkAdjusted, (*MarkAdjusted)(nil)},
	{KindMarkDismissed, (*MarkDismissed)(nil)},
	{KindWorkingMark, (*WorkingMark)(nil)},
	{KindBeacon, (*Beacon)(nil)},
	{KindMissing, (*Missing)(nil)},
	{KindClue, (*Clue)(nil)},
	{KindSeen, (*Seen)(nil)},
	{KindLostSight, (*Seen)(nil)},
	{KindPerson, (*Person)(nil)},
	{KindWind, (*WindObserved)(nil)},
	{KindCurrent, (*CurrentObserved)(nil)},
	{KindWater, (*WaterObserved)(nil)},
	{KindInCharge, (*InCharge)(nil)},
	{KindRole, (*Role)(nil)},
	{KindHeadCount, (*HeadCount)(nil)},
	{KindAttached, (*OfPerson)(nil)},
	{KindAlongside, (*OfPerson)(nil)},
	{KindParted, (*OfPerson)(nil)},
	{KindAboard, (*Aboard)(nil)},
	{KindMissedPass, (*MissedPass)(nil)},
	{KindStoodDown, (*StoodDown)(nil)},
	{KindReopened, (*StoodDown)(nil)},
	{KindSuspended, (*Order)(nil)},
	{KindOrder, (*Order)(nil)},
	{KindCallMade, (*Call)(nil)},
	{KindCallAnswered, (*Call)(nil)},
	{KindBuoyDropped, (*Buoy)(nil)},
	{KindBuoySeen, (*Buoy)(nil)},
	{KindSearchLaid, (*SearchLaid)(nil)},
	{KindLegBegun, (*LegBegun)(nil)},
	{KindLegEnded, (*LegEnded)(nil)},
	{KindSearchPaused, (*SearchWord)(nil)},
	{KindSearchResumed, (*SearchWord)(nil)},
	{KindSearchDropped, (*SearchWord)(nil)},
	{KindNote, (*Note)(nil)},
	{KindUndone, (*Undone)(nil)},
	{KindJoined, (*Joined)(nil)},
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
