package incident

import (
	"fmt"
	"math"
	"time"

	"wakeback/drift/nav"
)

// checker is a body that can be wrong in more ways than its JSON form.
type checker interface{ check() error }

// first returns the first error that is not nil.
func first(errs ...error) error {
	for _, err := range errs {
		if err != nil {
			return err
		}
	}
	return nil
}

func oneOf(field, got string, allowed ...string) error {
	for _, a := range allowed {
		if got == a {
			return nil
		}
	}
	return &FieldError{Field: field, Expected: fmt.Sprintf("one of %q", allowed)}
}

func within(field string, v, low, high float64, unit string) error {
	if math.IsNaN(v) || v < low || v > high {
		return &FieldError{Field: field, Expected: fmt.Sprintf("%v to %v %s", low, high, unit)}
	}
	return nil
}

func optWithin(field string, v nav.Opt[float64], low, high float64, unit string) error {
	x, ok := v.Get()
	if !ok {
		return nil
	}
	return within(field, x, low, high, unit)
}

func optDirection(field string, v nav.Opt[nav.TrueDeg]) error {
	x, ok := v.Get()
	if !ok {
		return nil
	}
	return within(field, float64(x), 0, 360, "degrees true")
}

func text(field, s string) error {
	if len(s) > maxTextLen {
		return &FieldError{Field: field, Expected: fmt.Sprintf("up to %d bytes of text", maxTextLen)}
	}
	return nil
}

func person(p nav.Opt[PersonNo]) error {
	if n, ok := p.Get(); ok && (n < 1 || n > 999) {
		return &FieldError{Field: "body.person", Expected: "the number of a person, from 1"}
	}
	return nil
}

func markID(id EventID) error {
	if !validUUID(string(id), 0) {
		return &FieldError{Field: "body.mark", Expected: "the id of a mark"}
	}
	return nil
}

// Highest values that a field takes; beyond them it is a slip of the finger
// or the wrong unit. Our choice: errors up to half the Earth, speeds beyond
// any craft's or wind's.
const (
	maxRangeM  = 2.1e7
	maxSpeedKn = 300
	maxAgeS    = 1e8
)

func source(s PositionSource, p nav.Opt[nav.Position]) error {
	if err := oneOf("body.source", string(s), string(FromPhone), string(FromVessel), string(FromDR),
		string(FromTrack), string(FromTyped), string(FromBeacon), string(FromNothing)); err != nil {
		return err
	}
	if (s == FromNothing) == p.IsSet() {
		return &FieldError{Field: "body.source", Expected: `"nothing" without a position, and another source with one`}
	}
	return nil
}

func (m *Marked) check() error {
	return first(
		source(m.Source, m.Position),
		optWithin("body.error_m", m.ErrorM, 0, maxRangeM, "metres"),
		optWithin("body.fix_age_s", m.FixAgeS, 0, maxAgeS, "seconds"),
		optWithin("body.sog_kn", m.SogKn, 0, maxSpeedKn, "knots"),
		optDirection("body.cog_deg", m.CogDeg),
		optDirection("body.heading_deg", m.HeadingDeg),
		person(m.Person),
		oneOf("body.side", m.Side, "", "port", "starboard"),
	)
}

func (m *MarkPlaced) check() error {
	return first(markID(m.Mark), source(m.Source, nav.Some(m.Position)),
		optWithin("body.error_m", m.ErrorM, 0, maxRangeM, "metres"))
}

func (m *MarkAdjusted) check() error {
	if !m.FellAt.IsSet() && !m.Position.IsSet() && m.Side == "" {
		return &FieldError{Field: "body", Expected: "fell_at, position or side"}
	}
	if m.Position.IsSet() {
		if err := source(m.Source, m.Position); err != nil {
			return err
		}
	}
	return first(markID(m.Mark),
		optWithin("body.error_m", m.ErrorM, 0, maxRangeM, "metres"),
		optWithin("body.back_s", m.BackS, 0, maxAgeS, "seconds"),
		oneOf("body.side", m.Side, "", "port", "starboard"))
}

func (m *MarkDismissed) check() error { return first(markID(m.Mark), text("body.reason", m.Reason)) }
func (m *WorkingMark) check() error   { return markID(m.Mark) }

func (b *Beacon) check() error {
	if b.Mmsi == 0 || b.Mmsi > 999999999 {
		return &FieldError{Field: "body.mmsi", Expected: "an identity of nine digits"}
	}
	return nil
}

func (m *Missing) check() error {
	if m.LastSeen.IsZero() || m.Noticed.IsZero() || m.Noticed.Before(m.LastSeen) {
		return &FieldError{Field: "body.noticed", Expected: "a time after last_seen"}
	}
	if len(m.Path) > 2000 {
		return &FieldError{Field: "body.path", Expected: "up to 2000 points"}
	}
	return person(m.Person)
}

func (c *Clue) check() error {
	if c.Text == "" {
		return &FieldError{Field: "body.text", Expected: "what was found or remembered"}
	}
	return first(text("body.text", c.Text), text("body.who", c.Who), person(c.Person),
		oneOf("body.sure", string(c.Sure), string(Certain), string(Probable), string(Possible)),
		ordered(c.NotBefore, c.NotAfter))
}

func ordered(from, to nav.Opt[time.Time]) error {
	f, okFrom := from.Get()
	t, okTo := to.Get()
	if okFrom && okTo && t.Before(f) {
		return &FieldError{Field: "body.not_after", Expected: "a time after not_before"}
	}
	return nil
}

func (s *Seen) check() error {
	return first(person(s.Person), text("body.what", s.What),
		optDirection("body.bearing_deg", s.BearingDeg),
		optWithin("body.range_m", s.RangeM, 0, maxRangeM, "metres"),
		oneOf("body.sure", string(s.Sure), "", string(Certain), string(Probable), string(Possible)))
}

func (p *Person) check() error {
	return first(person(p.Person),
		text("body.name", p.Name.Or("")), text("body.clothing", p.Clothing.Or("")),
		text("body.injuries", p.Injuries.Or("")), text("body.object", p.Object.Or("")),
		oneOf("body.life_jacket", p.LifeJacket.Or("unknown"), "worn", "not_worn", "unknown"),
		oneOf("body.moving", p.Moving.Or("unknown"), "yes", "no", "unknown"))
}

func (o ObservedBy) check() error {
	return first(oneOf("body.source", o.Source, "instrument", "person", "measured", "forecast", "tables"),
		text("body.name", o.Name))
}

func (w *WindObserved) check() error {
	return first(w.ObservedBy.check(),
		within("body.from_deg", float64(w.FromDeg), 0, 360, "degrees true"),
		within("body.speed_kn", w.SpeedKn, 0, maxSpeedKn, "knots"),
		within("body.speed_sd_kn", w.SpeedSdKn, 0, maxSpeedKn, "knots"))
}

func (c *CurrentObserved) check() error {
	return first(c.ObservedBy.check(),
		within("body.set_deg", float64(c.SetDeg), 0, 360, "degrees true"),
		within("body.drift_kn", c.DriftKn, 0, 30, "knots"),
		within("body.drift_sd_kn", c.DriftSd, 0, 30, "knots"))
}

func (w *WaterObserved) check() error {
	return first(w.ObservedBy.check(), within("body.temp_c", w.TempC, -5, 50, "degrees Celsius"))
}

func (i *InCharge) check() error {
	if i.Name == "" && i.Device == "" {
		return &FieldError{Field: "body.name", Expected: "the name of the one in charge"}
	}
	return text("body.name", i.Name)
}

func (r *Role) check() error {
	if r.Role == "" {
		return &FieldError{Field: "body.role", Expected: `a role, like "helm"`}
	}
	return first(text("body.role", r.Role), text("body.name", r.Name))
}

func (h *HeadCount) check() error {
	if h.Aboard < 0 || h.Aboard > 10000 {
		return &FieldError{Field: "body.aboard", Expected: "how many were counted, from 0"}
	}
	return nil
}

func (o *OfPerson) check() error { return first(person(o.Person), text("body.text", o.Text)) }

func (a *Aboard) check() error {
	if a.Condition == "" {
		return &FieldError{Field: "body.condition", Expected: `how the person is, like "conscious"`}
	}
	return first(person(a.Person), text("body.condition", a.Condition))
}

func (m *MissedPass) check() error {
	return first(person(m.Person), optWithin("body.closest_m", m.ClosestM, 0, maxRangeM, "metres"),
		oneOf("body.side", m.Side, "", "port", "starboard"))
}

func (s *StoodDown) check() error {
	if s.Reason == "" {
		return &FieldError{Field: "body.reason", Expected: "why"}
	}
	return text("body.reason", s.Reason)
}

func (o *Order) check() error {
	if o.Text == "" || o.Station == "" {
		return &FieldError{Field: "body.text", Expected: "what was said, and by which station"}
	}
	return first(text("body.text", o.Text), text("body.station", o.Station), text("body.channel", o.Channel))
}

func (c *Call) check() error {
	return first(oneOf("body.call", c.Call, "distress", "urgency", "cancel", "update"),
		text("body.text", c.Text), text("body.station", c.Station), text("body.channel", c.Channel))
}

func (b *Buoy) check() error {
	if b.Name == "" {
		return &FieldError{Field: "body.name", Expected: "what was thrown"}
	}
	return text("body.name", b.Name)
}

func (n *Note) check() error { return text("body.text", n.Text) }

func (u *Undone) check() error {
	if !validUUID(string(u.Event), 0) {
		return &FieldError{Field: "body.event", Expected: "the id of the event taken back"}
	}
	return nil
}

func (j *Joined) check() error {
	if !validUUID(string(j.Into), 0) {
		return &FieldError{Field: "body.into", Expected: "the id of an incident"}
	}
	return nil
}
