package server

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"mime"
	"net/http"
	"time"

	"github.com/google/uuid"

	"wakeback/search/incident"
)

// Limits of what a request may carry.
const (
	maxBody  = 64 << 10
	maxDepth = 64 // nesting of arrays and objects; the deepest of ours is 8
)

// object is a JSON object from outside, its members not yet read. Members
// that nobody asks for are passed over, so that an older server takes what a
// newer page sends.
type object map[string]json.RawMessage

// readBody reads the one JSON object of a request.
func readBody(w http.ResponseWriter, r *http.Request) (object, error) {
	media, _, err := mime.ParseMediaType(r.Header.Get("Content-Type"))
	if err != nil || media != "application/json" {
		return nil, pMediaType.because(err, "Send the body as application/json.")
	}
	if enc := r.Header.Get("Content-Encoding"); enc != "" && enc != "identity" {
		return nil, pMediaType.problem("Send the body without compression.")
	}
	data, err := io.ReadAll(http.MaxBytesReader(w, r.Body, maxBody))
	if err != nil {
		return nil, fmt.Errorf("read the body: %w", err)
	}
	return readObject(data)
}

func readObject(data []byte) (object, error) {
	if depth(data) > maxDepth {
		return nil, pMalformed.problem(fmt.Sprintf("The JSON is nested deeper than %d.", maxDepth))
	}
	var o object
	if err := json.Unmarshal(data, &o); err != nil || o == nil {
		return nil, pMalformed.because(err, "Expected one JSON object."+where(err))
	}
	return o, nil
}

func where(err error) string {
	var syntax *json.SyntaxError
	if errors.As(err, &syntax) {
		return fmt.Sprintf(" It goes wrong at byte %d.", syntax.Offset)
	}
	return ""
}

// depth is how deep brackets nest, strings left out.
func depth(data []byte) int {
	now, deepest, inString := 0, 0, false
	for i := 0; i < len(data); i++ {
		switch b := data[i]; {
		case inString && b == '\\':
			i++
		case b == '"':
			inString = !inString
		case inString:
		case b == '{' || b == '[':
			now++
			deepest = max(deepest, now)
		case b == '}' || b == ']':
			now--
		}
	}
	return deepest
}

// reader takes members out of an object and keeps the first error, so that a
// request is read in one flat list.
type reader struct {
	o   object
	err error
}

// take reads a member that may be left out; null counts as left out. It
// reports whether it was there.
func take[T any](r *reader, name, expected string, into *T) bool {
	raw, ok := r.o[name]
	if r.err != nil || !ok || bytes.Equal(bytes.TrimSpace(raw), []byte("null")) {
		return false
	}
	if err := json.Unmarshal(raw, into); err != nil {
		r.err = fieldError(name, expected, err)
		return false
	}
	return true
}

// need reads a member that must be there.
func need[T any](r *reader, name, expected string, into *T) {
	if !take(r, name, expected, into) && r.err == nil {
		r.err = fieldError(name, expected, nil)
	}
}

const (
	wantUUIDv7 = "a UUIDv7 (RFC 9562), like 018f3c2e-7b1a-7c3d-9e4f-0123456789ab"
	wantTime   = "a time in RFC 3339, like 2026-06-01T02:14:07Z"
)

// eventID reads an id in any case and brings it into the one form of the log.
func (r *reader) eventID(name string) incident.EventID {
	var text string
	need(r, name, wantUUIDv7, &text)
	if r.err != nil {
		return ""
	}
	id, err := uuid.Parse(text)
	if err != nil || len(text) != 36 || id.Version() != 7 || id.Variant() != uuid.RFC4122 {
		r.err = fieldError(name, wantUUIDv7, err)
		return ""
	}
	return incident.EventID(id.String())
}

// readEvents reads a batch: each event with its place in the errors.
func readEvents(raw []json.RawMessage) ([]incident.Event, error) {
	events := make([]incident.Event, len(raw))
	for i, text := range raw {
		e, err := readEvent(text)
		if err != nil {
			return nil, &fieldIn{prefix: fmt.Sprintf("events[%d].", i), err: err}
		}
		events[i] = e
	}
	return events, nil
}

// readEvent reads and checks one event from outside: its form, its content,
// and that its hash is that of its content.
func readEvent(text []byte) (incident.Event, error) {
	var e incident.Event
	if err := json.Unmarshal(text, &e); err != nil {
		return incident.Event{}, eventFormError(text, err)
	}
	e.Seq, e.ReceivedAt = 0, time.Time{} // the server's own to give
	if err := e.Validate(); err != nil {
		return incident.Event{}, err
	}
	if err := e.Verify(); err != nil {
		return incident.Event{}, fieldError("hash", "the SHA-256 of the event's canonical JSON", err)
	}
	return e, nil
}

// eventFormError names the member that could not be read.
func eventFormError(text []byte, err error) error {
	var wrong *json.UnmarshalTypeError
	if errors.As(err, &wrong) && wrong.Field != "" {
		return fieldError(wrong.Field, "a "+wrong.Type.String(), err)
	}
	var times map[string]json.RawMessage
	if json.Unmarshal(text, &times) == nil {
		for _, name := range []string{"at", "device_at", "received_at"} {
			var t time.Time
			if raw, ok := times[name]; ok && json.Unmarshal(raw, &t) != nil {
				return fieldError(name, wantTime, err)
			}
		}
	}
	return fieldError("event", "an event of the log", err)
}
