package ais

import (
	"fmt"
	"time"
)

// Fragment is one VDM sentence.
type Fragment struct {
	Count, Number int // of how many, which
	Sequence      int // ties fragments together; -1 for none
	Channel       byte
	Payload       string
	FillBits      int
}

// partKey tells the messages apart that are being put together.
type partKey struct {
	sequence int
	channel  byte
}

type part struct {
	at       time.Time
	payloads []string
	fill     int
	have     int
}

// maxParts bounds how many messages are half there: a sequence has one digit
// and there are two channels, so more is noise. Those that take longer than
// fragmentWait are dropped: the fragments of one message come within a second.
const (
	maxParts     = 40
	fragmentWait = 3 * time.Second
)

// Assembler puts fragments together. The zero Assembler is ready. It is not
// safe for use by several goroutines at once.
type Assembler struct{ parts map[partKey]*part }

// Add takes a fragment and returns the message that it completes; done is
// false while fragments are missing. Errors wrap [ErrMessage].
func (a *Assembler) Add(f Fragment, now time.Time) (m Message, done bool, err error) {
	if f.Count < 1 || f.Count > 9 || f.Number < 1 || f.Number > f.Count {
		return Message{}, false, fmt.Errorf("%w: fragment %d of %d", ErrMessage, f.Number, f.Count)
	}
	if f.Count == 1 {
		m, err = parse(f.Payload, f.FillBits)
		return m, err == nil, err
	}
	p := a.part(f, now)
	if p.payloads[f.Number-1] == "" {
		p.payloads[f.Number-1] = f.Payload
		p.have++
	}
	if f.Number == f.Count {
		p.fill = f.FillBits
	}
	if p.have < f.Count {
		return Message{}, false, nil
	}
	delete(a.parts, partKey{f.Sequence, f.Channel})
	whole := ""
	for _, s := range p.payloads {
		whole += s
	}
	m, err = parse(whole, p.fill)
	return m, err == nil, err
}

// part is the message a fragment belongs to; a fragment that does not fit what
// is there begins anew.
func (a *Assembler) part(f Fragment, now time.Time) *part {
	if a.parts == nil {
		a.parts = make(map[partKey]*part)
	}
	for k, p := range a.parts {
		if age := now.Sub(p.at); age > fragmentWait || age < 0 {
			delete(a.parts, k)
		}
	}
	key := partKey{f.Sequence, f.Channel}
	p, ok := a.parts[key]
	if ok && len(p.payloads) == f.Count && (f.Number != 1 || p.payloads[0] == "") {
		return p
	}
	if len(a.parts) >= maxParts {
		clear(a.parts)
	}
	p = &part{at: now, payloads: make([]string, f.Count)}
	a.parts[key] = p
	return p
}

func parse(payload string, fill int) (Message, error) {
	b, err := unarmour(payload, fill)
	if err != nil {
		return Message{}, err
	}
	return decode(b)
}
