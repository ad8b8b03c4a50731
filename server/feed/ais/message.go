package ais

import (
	"fmt"

	"wakeback/drift/nav"
)

// Message is one decoded message; what its type does not carry is absent.
type Message struct {
	Type     int
	MMSI     uint32
	Position nav.Opt[nav.Position]
	SogKn    nav.Opt[float64]
	CogTrue  nav.Opt[nav.TrueDeg]
	Heading  nav.Opt[nav.TrueDeg]
	Status   nav.Opt[int] // navigational status of types 1 to 3
	Second   nav.Opt[int] // of the minute, when the position was taken
	Name     string       // of types 5, 21 and 24
	Text     string       // of type 14
	// OffPosition and Virtual are of an aid to navigation (type 21).
	OffPosition, Virtual bool
}

// Navigational statuses that search and rescue devices use (ITU-R M.1371).
const (
	StatusActiveSART = 14 // a SART, a person-overboard or an EPIRB device is active
	StatusUndefined  = 15 // also: under test
)

// shortest is how many bits a message of a type has at least.
var shortest = map[int]int{1: 149, 2: 149, 3: 149, 5: 420, 14: 40, 18: 149, 21: 272, 24: 160}

// ErrType is wrapped for a type that is not read here.
var ErrType = fmt.Errorf("%w: type not read here", ErrMessage)

// decode reads a message.
func decode(b bits) (Message, error) {
	if len(b) < 38 {
		return Message{}, fmt.Errorf("%w: %d bits", ErrMessage, len(b))
	}
	m := Message{Type: int(b.uint(0, 6)), MMSI: uint32(b.uint(8, 30))}
	need, ok := shortest[m.Type]
	if !ok {
		return m, fmt.Errorf("%w: %d", ErrType, m.Type)
	}
	if len(b) < need {
		return m, fmt.Errorf("%w: type %d has %d bits, expected %d", ErrMessage, m.Type, len(b), need)
	}
	switch m.Type {
	case 1, 2, 3:
		m.Status = nav.Some(int(b.uint(38, 4)))
		m.report(b, 50, 61)
	case 18:
		m.report(b, 46, 57)
	case 5:
		m.Name = b.text(112, 20)
	case 14:
		m.Text = b.text(40, (len(b)-40)/6)
	case 21:
		m.aid(b)
	case 24:
		if b.uint(38, 2) == 0 {
			m.Name = b.text(40, 20)
		}
	}
	return m, nil
}

// report reads speed, position, course, heading and second, which stand in one
// order in the reports of both classes.
func (m *Message) report(b bits, sogAt, lonAt int) {
	if v := b.uint(sogAt, 10); v != 1023 {
		m.SogKn = nav.Some(float64(v) / 10)
	}
	m.Position = position(b, lonAt)
	if v := b.uint(lonAt+55, 12); v < 3600 {
		m.CogTrue = nav.Some(nav.TrueDeg(float64(v) / 10))
	}
	if v := b.uint(lonAt+67, 9); v < 360 {
		m.Heading = nav.Some(nav.TrueDeg(v))
	}
	if v := b.uint(lonAt+76, 6); v < 60 {
		m.Second = nav.Some(int(v))
	}
}

// position reads longitude (28 bits) and latitude (27 bits) in 1/600000
// degree; 181 and 91 degrees stand for "not available".
func position(b bits, at int) nav.Opt[nav.Position] {
	lon, lat := float64(b.int(at, 28))/600000, float64(b.int(at+28, 27))/600000
	if lon > 180 || lon < -180 || lat > 90 || lat < -90 {
		return nav.None[nav.Position]()
	}
	return nav.Some(nav.PositionFromDegrees(lat, lon))
}

// aid reads an aid to navigation. A name of more than 20 characters goes on
// behind the fixed part.
func (m *Message) aid(b bits) {
	m.Name = b.text(43, 20)
	m.Position = position(b, 164)
	m.OffPosition, m.Virtual = b.uint(259, 1) == 1, b.uint(269, 1) == 1
	if extra := (len(b) - 272) / 6; extra > 0 && len(m.Name) == 20 {
		m.Name += b.text(272, min(extra, 14))
	}
}

// Class is what an identity belongs to.
type Class int

// The classes (gpsd AIVDM.adoc, after ITU-R M.585).
const (
	Other Class = iota
	Ship
	SARTDevice    // 970...: radar transponder for search and rescue
	PersonDevice  // 972...: person-overboard device
	EPIRBDevice   // 974...: emergency position-indicating radio beacon
	SARAircraft   // 111...
	CoastStation  // 00...
	AidNavigation // 99...
)

// ClassOf tells the class of an identity by its first digits.
func ClassOf(mmsi uint32) Class {
	switch {
	case mmsi/1_000_000 == 970:
		return SARTDevice
	case mmsi/1_000_000 == 972:
		return PersonDevice
	case mmsi/1_000_000 == 974:
		return EPIRBDevice
	case mmsi/1_000_000 == 111:
		return SARAircraft
	case mmsi < 10_000_000:
		return CoastStation
	case mmsi/10_000_000 == 99:
		return AidNavigation
	case mmsi/100_000_000 >= 2 && mmsi/100_000_000 <= 7:
		return Ship
	}
	return Other
}

// Beacon reports whether the identity is that of a device that calls for help.
func (c Class) Beacon() bool { return c == SARTDevice || c == PersonDevice || c == EPIRBDevice }

// Alarm says what a message of a beacon means.
type Alarm int

// The meanings. A test must never raise an alarm.
const (
	NoAlarm Alarm = iota
	Active
	Test
)

// AlarmOf reads the meaning of a message: in position reports status 14 is
// active and 15 a test, in text messages the words ACTIVE and TEST say it
// (ITU-R M.1371, table of navigational statuses and texts of message 14).
//
// A position report of such a device with any other status, or of a kind that
// carries none, is active too: only what says that it is a test is one. Our
// choice, because a device on the air that calls itself neither is more likely
// worn by someone in the water than on a bench, and a false alarm costs less.
func AlarmOf(m Message) Alarm {
	if !ClassOf(m.MMSI).Beacon() {
		return NoAlarm
	}
	switch m.Type {
	case 14:
		return alarmOfText(m.Text)
	case 1, 2, 3, 18:
		if m.Status.Or(StatusActiveSART) == StatusUndefined {
			return Test
		}
		return Active
	}
	return NoAlarm
}

func alarmOfText(text string) Alarm {
	switch {
	case hasWord(text, "TEST"):
		return Test
	case hasWord(text, "ACTIVE"):
		return Active
	}
	return NoAlarm
}

func hasWord(text, word string) bool {
	for i := 0; i+len(word) <= len(text); i++ {
		if text[i:i+len(word)] == word {
			return true
		}
	}
	return false
}
