package feed

import (
	"bufio"
	"context"
	"errors"
	"fmt"
	"io"
	"strconv"
	"strings"
	"time"

	"wakeback/drift/nav"
	"wakeback/server/feed/nmea"
)

// errReplayed ends a recording that was replayed to its end.
var errReplayed = errors.New("the recording has ended")

// recordedLine is one line of a recording.
type recordedLine struct {
	at    time.Time // zero when it has no time
	sub   int       // feed within the recording, 0 when not said
	text  string
	stamp bool // at was written beside it
}

// splitRecorded takes a line of a recording apart: the moment in RFC 3339, a
// number of the feed where there were several, the sentence. A line without a
// moment is a bare sentence.
func splitRecorded(line string) recordedLine {
	stamp, rest, found := strings.Cut(line, " ")
	if !found {
		return recordedLine{text: line}
	}
	at, err := time.Parse(time.RFC3339Nano, stamp)
	if err != nil {
		return recordedLine{text: line}
	}
	r := recordedLine{at: at, text: rest, stamp: true}
	if number, text, ok := strings.Cut(rest, " "); ok {
		if n, err := strconv.Atoi(number); err == nil && n > 0 && n < subFeeds {
			r.sub, r.text = n, text
		}
	}
	return r
}

// ownTime gives bare sentences their times by what they say themselves: date
// and time of RMC and ZDA, the time of GGA, GLL and GNS on the day nearest to the
// last. A sentence without a time has that of the one before.
type ownTime struct {
	decoder nmea.Decoder
	last    time.Time // zero before the first
	day     time.Time // what a time without a date is nearest to, before the first
}

func (o *ownTime) of(line string) time.Time {
	_, body, err := o.decoder.Parse(line)
	if err != nil {
		return o.last
	}
	var t nav.Opt[nmea.TimeOfDay]
	var d nav.Opt[nmea.Date]
	switch b := body.(type) {
	case *nmea.RMC:
		t, d = b.Time, b.Date
	case *nmea.ZDA:
		t, d = b.Time, b.Date
	case *nmea.GGA:
		t = b.Time
	case *nmea.GLL:
		t = b.Time
	case *nmea.GNS:
		t = b.Time
	}
	tod, ok := t.Get()
	if !ok {
		return o.last
	}
	if date, ok := d.Get(); ok {
		o.last = tod.On(date)
	} else {
		ref := o.last
		if ref.IsZero() {
			ref = o.day
		}
		o.last = tod.Near(ref)
	}
	return o.last
}

// untimed is how many bare sentences before the first that has a time wait for
// it. Our choice: several seconds of a busy feed.
const untimed = 1000

// player says a recording's lines at its pace.
type player struct {
	pace  float64
	now   func() time.Time
	say   func(heard)
	began time.Time // when the first line with a time was said
	first time.Time // what time that was
}

// heard is one line of a feed.
type heard struct {
	text string
	at   time.Time // when it counts as received
	line time.Time // on the feed's own time line
	sub  int       // feed within a recording
}

// play says one line when it is due. At pace 0 a line counts as received when it
// was recorded, so that the state is the one that was; at any other pace it
// counts as received now.
func (p *player) play(ctx context.Context, r recordedLine) error {
	if err := ctx.Err(); err != nil {
		return err
	}
	h := heard{text: r.text, at: p.now(), line: r.at, sub: r.sub}
	switch {
	case r.at.IsZero():
		h.line = h.at
	case p.pace == 0:
		h.at = r.at
	default:
		if p.first.IsZero() {
			p.began, p.first = h.at, r.at
		}
		due := p.began.Add(time.Duration(float64(r.at.Sub(p.first)) / p.pace))
		if err := wait(ctx, due.Sub(h.at)); err != nil {
			return err
		}
		h.at = p.now()
	}
	p.say(h)
	return nil
}

// all plays a recording to its end.
func (p *player) all(ctx context.Context, in io.Reader, rule nmea.ChecksumRule) error {
	lines := bufio.NewScanner(in)
	own := ownTime{day: p.now()}
	own.decoder.Rule = rule
	var waiting []recordedLine // bare ones before the first that has a time
	for lines.Scan() {
		text := strings.TrimRight(lines.Text(), "\r")
		if text == "" || text[0] == '#' {
			continue
		}
		r := splitRecorded(text)
		if !r.stamp {
			r.at = own.of(r.text)
		}
		waiting = append(waiting, r)
		if r.at.IsZero() && len(waiting) < untimed {
			continue
		}
		for _, w := range waiting {
			w.at = firstTime(w.at, r.at)
			if err := p.play(ctx, w); err != nil {
				return err
			}
		}
		waiting = waiting[:0]
	}
	for _, w := range waiting {
		if err := p.play(ctx, w); err != nil {
			return err
		}
	}
	if err := lines.Err(); err != nil {
		return fmt.Errorf("read the recording: %w", err)
	}
	return errReplayed
}

func firstTime(t, otherwise time.Time) time.Time {
	if t.IsZero() {
		return otherwise
	}
	return t
}

func wait(ctx context.Context, d time.Duration) error {
	if d <= 0 {
		return nil
	}
	t := time.NewTimer(d)
	defer t.Stop()
	select {
	case <-ctx.Done():
		return ctx.Err()
	case <-t.C:
		return nil
	}
}
