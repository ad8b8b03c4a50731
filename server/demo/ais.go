package demo

import (
	"math"
	"time"

	"wakeback/drift/nav"
	"wakeback/server/feed/nmea"
)

// target is another invented vessel, seen over AIS. It goes to and fro on one
// line, so that it stays in view for as long as the demonstration runs.
type target struct {
	mmsi      uint32
	from      nav.Offset // of its line, from the start
	courseDeg float64
	lengthM   float64
	speedKn   float64
}

// others are the invented traffic. No country has the identification digits
// 200 (from memory), so that these numbers are nobody's.
var others = []target{
	{200000101, nav.Offset{EastM: -3000, NorthM: 2500}, 75, 5200, 9.5},
	{200000102, nav.Offset{EastM: -1500, NorthM: -2200}, 310, 4000, 5},
}

// at is where the target is and how it goes.
func (t target) at(when time.Time) (nav.Position, nav.TrueDeg) {
	along := math.Mod(seconds(when)*t.speedKn*nav.MsPerKn, 2*t.lengthM)
	course := nav.True(t.courseDeg)
	place := start.Shift(t.from)
	if along > t.lengthM {
		return place.Shift(nav.Along(course, 2*t.lengthM-along)), course.Reciprocal()
	}
	return place.Shift(nav.Along(course, along)), course
}

// sentence is a class A position report, message 1 of ITU-R M.1371-5, table 48
// (layout from memory).
func (t target) sentence(when time.Time) string {
	p, course := t.at(when)
	var b bits
	b.put(1, 6)
	b.put(0, 2) // repeated
	b.put(int64(t.mmsi), 30)
	b.put(0, 4)    // under way using engine
	b.put(-128, 8) // rate of turn not known
	b.put(int64(math.Round(t.speedKn*10)), 10)
	b.put(0, 1) // position within more than 10 m
	b.put(int64(math.Round(p.LonDeg()*600000)), 28)
	b.put(int64(math.Round(p.LatDeg()*600000)), 27)
	b.put(int64(math.Round(float64(course)*10))%3600, 12)
	b.put(int64(math.Round(float64(course)))%360, 9)
	b.put(int64(when.UTC().Second()), 6)
	b.put(0, 2+3+1+19) // manoeuvre, spare, RAIM, radio status
	return nmea.EncodeVDM("AI", nmea.VDM{Fragments: 1, Fragment: 1, Channel: 'A', Payload: b.armour()})
}

// bits are the bits of an AIS message, the first in front.
type bits []byte

// put adds the lowest n bits of a number.
func (b *bits) put(v int64, n int) {
	for i := n - 1; i >= 0; i-- {
		*b = append(*b, byte(v>>i&1))
	}
}

// armour writes six bits a character. The message above has 168, which six
// divides.
func (b bits) armour() string {
	out := make([]byte, 0, len(b)/6)
	for ; len(b) >= 6; b = b[6:] {
		var v byte
		for _, bit := range b[:6] {
			v = v<<1 | bit
		}
		if v += 48; v > 87 {
			v += 8
		}
		out = append(out, v)
	}
	return string(out)
}
