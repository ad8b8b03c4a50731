package incident

import (
	"encoding/json"
	"errors"
	"os"
	"strings"
	"testing"
)

// Bad input of each sort names the field and says what was expected.
func TestValidateNamesTheField(t *testing.T) {
	s := newStory(t)
	good := s.say("a", 0, KindMarked, markedAt(54, 7))
	body := func(kind Kind, text string) func(*Event) {
		return func(e *Event) { e.Kind, e.Body = kind, json.RawMessage(text) }
	}
	tests := map[string]struct {
		change func(*Event)
		field  string
		says   string
	}{
		"version 4 id":        {func(e *Event) { e.ID = "018f3c2e-0000-4000-8000-000000000001" }, "id", "UUIDv7"},
		"upper case id":       {func(e *Event) { e.ID = EventID(strings.ToUpper(string(e.ID))) + "A" }, "id", "UUIDv7"},
		"no incident":         {func(e *Event) { e.Incident = "" }, "incident", "UUID"},
		"no device":           {func(e *Event) { e.Device = "helm" }, "device", "UUID"},
		"number 0":            {func(e *Event) { e.DeviceSeq = 0 }, "device_seq", "from 1"},
		"no time":             {func(e *Event) { e.At = e.At.AddDate(-3000, 0, 0) }, "at", "RFC 3339"},
		"no kind":             {func(e *Event) { e.Kind = "" }, "kind", "kind"},
		"body is a list":      {body(KindNote, `[]`), "body", "object"},
		"body is null":        {body(KindNote, `null`), "body", "object"},
		"half a position":     {body(KindMarked, `{"source":"phone","position":{"lat":54}}`), "body.position", "missing"},
		"latitude 91":         {body(KindMarked, `{"source":"phone","position":{"lat":91,"lon":7}}`), "body.position", "-90 to 90"},
		"position is text":    {body(KindMarked, `{"source":"phone","position":"54N 7E"}`), "body.position", "lat"},
		"unknown source":      {body(KindMarked, `{"source":"magic","position":{"lat":54,"lon":7}}`), "body.source", "phone"},
		"source, no position": {body(KindMarked, `{"source":"phone"}`), "body.source", "nothing"},
		"error as text":       {body(KindMarked, `{"source":"nothing","error_m":"small"}`), "body.error_m", "form"},
		"negative error":      {body(KindMarked, `{"source":"nothing","error_m":-1}`), "body.error_m", "metres"},
		"course 361":          {body(KindMarked, `{"source":"nothing","cog_deg":361}`), "body.cog_deg", "360"},
		"person 0":            {body(KindMarked, `{"source":"nothing","person":0}`), "body.person", "from 1"},
		"side up":             {body(KindMarked, `{"source":"nothing","side":"up"}`), "body.side", "port"},
		"adjusts nothing":     {body(KindMarkAdjusted, `{"mark":"018f3c2e-0000-7000-8000-000000000001"}`), "body", "fell_at"},
		"adjusts no mark":     {body(KindMarkAdjusted, `{"mark":"7","back_s":3,"side":"port"}`), "body.mark", "id of a mark"},
		"noticed before seen": {body(KindMissing, `{"last_seen":"2026-01-01T04:00:00Z","noticed":"2026-01-01T00:00:00Z"}`), "body.noticed", "after"},
		"wind of 400 kn":      {body(KindWind, `{"from_deg":20,"speed_kn":400,"source":"person"}`), "body.speed_kn", "knots"},
		"wind from nobody":    {body(KindWind, `{"from_deg":20,"speed_kn":4}`), "body.source", "instrument"},
		"water at 99 degrees": {body(KindWater, `{"temp_c":99,"source":"person"}`), "body.temp_c", "Celsius"},
		"call of no sort":     {body(KindCallMade, `{"call":"hello"}`), "body.call", "distress"},
		"aboard without how":  {body(KindAboard, `{}`), "body.condition", "how"},
		"stood down, no why":  {body(KindStoodDown, `{}`), "body.reason", "why"},
		"text too long":       {body(KindNote, `{"text":"`+strings.Repeat("x", 5000)+`"}`), "body.text", "4000"},
		"body too long":       {body("later", `{"text":"`+strings.Repeat("x", 40000)+`"}`), "body", "32768"},
		"undoes nothing":      {body(KindUndone, `{}`), "body.event", "id of the event"},
	}
	for name, tt := range tests {
		t.Run(name, func(t *testing.T) {
			e := good
			tt.change(&e)
			err := e.Validate()
			var fe *FieldError
			if !errors.As(err, &fe) {
				t.Fatalf("Validate = %v, want a *FieldError", err)
			}
			if fe.Field != tt.field || !strings.Contains(err.Error(), tt.says) {
				t.Errorf("Validate = %q, want field %s and %q", err, tt.field, tt.says)
			}
		})
	}
	if err := good.Validate(); err != nil {
		t.Errorf("a good event is refused: %v", err)
	}
}

// Whatever comes as an event: reading, checking, hashing and folding it never
// panics, and what is accepted hashes the same after a trip over the wire.
func FuzzEvent(f *testing.F) {
	vectors, err := os.ReadFile(vectorFile)
	if err != nil {
		f.Fatal(err)
	}
	var list []json.RawMessage
	if err := json.Unmarshal(vectors, &list); err != nil {
		f.Fatal(err)
	}
	for _, e := range list {
		f.Add([]byte(e))
	}
	f.Add([]byte(`{"id":"","body":[1e400]}`))
	f.Fuzz(func(t *testing.T, data []byte) {
		var e Event
		if json.Unmarshal(data, &e) != nil {
			return
		}
		Fold([]Event{e, e})
		if e.Validate() != nil {
			return
		}
		sealed, err := e.Seal()
		if err != nil {
			return
		}
		wire, err := json.Marshal(sealed)
		if err != nil {
			t.Fatalf("write an accepted event: %v", err)
		}
		var back Event
		if err := json.Unmarshal(wire, &back); err != nil {
			t.Fatalf("read it back: %v", err)
		}
		if err := back.Verify(); err != nil {
			t.Fatalf("after the wire: %v", err)
		}
		Fold([]Event{back})
	})
}
