package hub

import (
	"encoding/json"
	"errors"
	"time"

	"wakeback/search/incident"
)

// Protocol is the version of the messages. It grows when an older page could
// no longer follow.
const Protocol = 1

// Close codes of our own (RFC 6455, section 7.4.2: 4000 to 4999 are private).
const (
	// CloseResync: fell behind; come back with the last number you have.
	CloseResync = 4008
	// CloseRevoked: the device may no longer listen.
	CloseRevoked = 4001
)

type helloMessage struct {
	T          string            `json:"t"`
	Protocol   int               `json:"protocol"`
	Epoch      string            `json:"epoch"`
	LastSeq    incident.Seq      `json:"last_seq"`
	ServerTime time.Time         `json:"server_time"`
	Device     incident.DeviceID `json:"device"`
	Role       string            `json:"role"`
	// After is the number from which events follow; Reset says that it is not
	// the one asked for, because the store is another or the number unknown.
	After incident.Seq `json:"after"`
	Reset bool         `json:"reset"`
}

type eventMessage struct {
	T     string         `json:"t"`
	Event incident.Event `json:"event"`
}

type tickMessage struct {
	T       string       `json:"t"`
	At      time.Time    `json:"at"`
	Seq     incident.Seq `json:"seq"`
	Clients int          `json:"clients"`
}

// timeMessage answers a question for the time: with the client's own times
// of sending and receipt the offset of its clock and half the round trip as
// its error follow (the exchange of RFC 5905, section 8).
type timeMessage struct {
	T          string    `json:"t"`
	ClientMs   float64   `json:"client_ms"`
	ReceivedMs int64     `json:"received_ms"` // when the question came in
	ServerMs   int64     `json:"server_ms"`   // when the answer was made
	ServerTime time.Time `json:"server_time"`
}

// Problem is told to one client about what it said, or to all.
type Problem struct {
	T      string `json:"t"`
	Code   string `json:"code"`
	Title  string `json:"title"`
	Detail string `json:"detail,omitempty"`
	Field  string `json:"field,omitempty"`
	// Of are the ids of the events it is about.
	Of []incident.EventID `json:"of,omitempty"`
	// Over says that a problem told before has passed.
	Over bool `json:"over,omitempty"`
}

// envelope is what every message of a client has.
type envelope struct {
	T        string   `json:"t"`
	ClientMs *float64 `json:"client_ms"`
	DeviceMs *float64 `json:"device_ms"` // another name for client_ms
}

var errEnvelope = errors.New(`expected a JSON object with "t": "time", "fix" or "event"`)

func readEnvelope(data []byte) (envelope, error) {
	var e envelope
	if err := json.Unmarshal(data, &e); err != nil || e.T == "" {
		return envelope{}, errEnvelope
	}
	return e, nil
}

func (e envelope) answer(received, now time.Time) timeMessage {
	m := timeMessage{T: "time", ReceivedMs: received.UnixMilli(), ServerMs: now.UnixMilli(), ServerTime: now.UTC()}
	switch {
	case e.ClientMs != nil:
		m.ClientMs = *e.ClientMs
	case e.DeviceMs != nil:
		m.ClientMs = *e.DeviceMs
	}
	return m
}
