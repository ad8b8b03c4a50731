package feed

import (
	"slices"
	"time"

	"wakeback/drift/nav"
	"wakeback/server/feed/nmea"
)

// VariationFunc gives the magnetic variation at a place and time; absent where
// it is not known.
type VariationFunc func(nav.Position, time.Time) nav.Opt[nav.VariationDeg]

// sourceID names a feed, or one of the feeds within a recording. Less is
// preferred.
type sourceID int

// position is a position with what its sentence said of it.
type position struct {
	position nav.Position
	detail   FixDetail
}

// state is what the instruments said. It is not safe for two goroutines at once:
// [Feeds] holds a lock around it.
type state struct {
	variation      VariationFunc
	maxKn          float64
	allowSimulated bool
	name           func(sourceID) string
	replayed       func(sourceID) bool

	position     quantity[position]
	sog          quantity[float64]
	cog          quantity[nav.TrueDeg]
	headingTrue  quantity[nav.TrueDeg]
	headingMag   quantity[nav.MagneticDeg]
	sentVar      quantity[nav.VariationDeg]
	stw          quantity[float64]
	windApparent quantity[RelativeWind]
	windRelative quantity[RelativeWind]
	windNorth    quantity[Wind]
	current      quantity[Current]
	water        quantity[float64]
	depth        quantity[float64]
	time         quantity[InstrumentTime]

	sources map[sourceID]*sourceState
	reckon  reckoner
}

// sourceState is what is kept for each source.
type sourceState struct {
	gate   gate
	held   Held
	ref    time.Time // the last full date and time it sent
	refA   time.Time // when that was, on its time line
	detail FixDetail // satellites and HDOP of its last GGA or GNS
}

func newState() *state {
	return &state{
		maxKn:        defaultMaxKn,
		name:         func(sourceID) string { return "" },
		replayed:     func(sourceID) bool { return false },
		position:     newQuantity[position](limitPosition),
		sog:          newQuantity[float64](limitMotion),
		cog:          newQuantity[nav.TrueDeg](limitMotion),
		headingTrue:  newQuantity[nav.TrueDeg](limitHeading),
		headingMag:   newQuantity[nav.MagneticDeg](limitHeading),
		sentVar:      newQuantity[nav.VariationDeg](limitVariation),
		stw:          newQuantity[float64](limitStw),
		windApparent: newQuantity[RelativeWind](limitWind),
		windRelative: newQuantity[RelativeWind](limitWind),
		windNorth:    newQuantity[Wind](limitWind),
		current:      newQuantity[Current](limitCurrent),
		water:        newQuantity[float64](limitWater),
		depth:        newQuantity[float64](limitDepth),
		time:         newQuantity[InstrumentTime](limitTime),
		sources:      map[sourceID]*sourceState{},
	}
}

// said is one sentence with where and when it was said.
type said struct {
	src sourceID
	at  time.Time // when received: ages count from here
	// line is the moment on the feed's own time line: the same as at, except in
	// a recording that is replayed at another pace.
	line     time.Time
	sentence string // "GPRMC"
}

// kinds of sentence for one quantity, the more direct first.
const (
	direct = iota
	second
	third
	fourth
)

func (m said) rank(kind int) rank { return rank{feed: m.src, kind: kind} }

func (st *state) source(id sourceID) *sourceState {
	s := st.sources[id]
	if s == nil {
		s = &sourceState{gate: gate{maxKn: st.maxKn}}
		st.sources[id] = s
	}
	return s
}

// apply takes in one sentence. It returns the new fix of the vessel, if the
// sentence gave one and its source is the one in use.
func (st *state) apply(m said, body nmea.Body) nav.Opt[nav.Fix] {
	st.reckon.advance(m.at, st.motion(m.at))
	switch b := body.(type) {
	case *nmea.RMC:
		return st.rmc(m, b)
	case *nmea.GGA:
		s := st.source(m.src)
		s.detail.Satellites, s.detail.HDOP = b.Satellites, b.HDOP
		return st.fix(m, b.Position, b.Quality, st.utc(m, b.Time, nav.None[nmea.Date]()))
	case *nmea.GLL:
		return st.fix(m, b.Position, b.Quality, st.utc(m, b.Time, nav.None[nmea.Date]()))
	case *nmea.GNS:
		s := st.source(m.src)
		s.detail.Satellites, s.detail.HDOP = b.Satellites, b.HDOP
		return st.fix(m, b.Position, b.Quality, st.utc(m, b.Time, nav.None[nmea.Date]()))
	case *nmea.VTG:
		if st.usable(b.Quality) {
			put(&st.sog, m, direct, b.SogKn)
			put(&st.cog, m, direct, b.CogTrue)
		}
	case *nmea.ZDA:
		st.utc(m, b.Time, b.Date)
	default:
		st.instruments(m, body)
	}
	return nav.None[nav.Fix]()
}

// instruments takes in what is neither position nor time.
func (st *state) instruments(m said, body nmea.Body) {
	switch b := body.(type) {
	case *nmea.HDT:
		put(&st.headingTrue, m, direct, b.HeadingTrue)
	case *nmea.HDG:
		put(&st.headingMag, m, direct, b.HeadingMag())
		put(&st.sentVar, m, direct, b.Variation)
	case *nmea.HDM:
		put(&st.headingMag, m, second, b.HeadingMag)
	case *nmea.VHW:
		put(&st.headingTrue, m, second, b.HeadingTrue)
		put(&st.headingMag, m, third, b.HeadingMag)
		put(&st.stw, m, direct, b.StwKn)
	case *nmea.VBW:
		put(&st.stw, m, second, b.WaterAheadKn)
	case *nmea.VDR:
		st.vdr(m, b)
	case *nmea.MWV:
		st.mwv(m, b)
	case *nmea.MWD:
		st.mwd(m, b)
	case *nmea.MTW:
		put(&st.water, m, direct, b.WaterC)
	case *nmea.DPT:
		st.dpt(m, b)
	}
}

// put stores a value that is there.
func put[T any](q *quantity[T], m said, kind int, v nav.Opt[T]) {
	if x, ok := v.Get(); ok {
		q.put(m.rank(kind), m.sentence, x, m.at)
	}
}

func (st *state) rmc(m said, b *nmea.RMC) nav.Opt[nav.Fix] {
	utc := st.utc(m, b.Time, b.Date)
	if v, ok := b.Variation.Get(); ok {
		st.sentVar.put(m.rank(second), m.sentence, v, m.at)
	}
	// Course and speed before the position, so that the fix carries them; but
	// not those of a fix that is held back.
	if st.usable(b.Quality) && st.believes(m, b.Position, utc) {
		put(&st.sog, m, direct, b.SogKn)
		put(&st.cog, m, direct, b.CogTrue)
	}
	return st.fix(m, b.Position, b.Quality, utc)
}

// believes asks the gate without passing through it.
func (st *state) believes(m said, p nav.Opt[nav.Position], utc nav.Opt[time.Time]) bool {
	pos, ok := p.Get()
	return ok && st.source(m.src).gate.objection(fixPoint{pos, utc, m.line}) == ""
}

// usable says whether positions of a quality may be used.
func (st *state) usable(q nmea.Quality) bool {
	return q >= nmea.Estimated || st.allowSimulated && q > nmea.NoFix
}

// fix takes in a position.
func (st *state) fix(m said, p nav.Opt[nav.Position], q nmea.Quality, utc nav.Opt[time.Time]) nav.Opt[nav.Fix] {
	pos, ok := p.Get()
	if !ok {
		return nav.None[nav.Fix]()
	}
	s := st.source(m.src)
	if !st.usable(q) {
		st.hold(m, s, pos, "position is "+q.String()+", not measured")
		return nav.None[nav.Fix]()
	}
	reason, adopted := s.gate.admit(fixPoint{pos, utc, m.line})
	if reason != "" {
		st.hold(m, s, pos, reason)
		return nav.None[nav.Fix]()
	}
	s.held.Holding = false
	if adopted {
		s.held.Adopted++
	}
	detail := s.detail
	detail.UTC, detail.Quality = utc, q
	r := m.rank(direct)
	r.quality = qualityClass(q)
	st.position.put(r, m.sentence, position{pos, detail}, m.at)
	return st.newFix(m, pos)
}

// qualityClass makes a position by satellites better than the rest, whatever
// the order of the feeds; among those by satellites the order decides.
func qualityClass(q nmea.Quality) int {
	if q.UsesSatellites() {
		return 0
	}
	return int(nmea.Autonomous - q)
}

func (st *state) hold(m said, s *sourceState, p nav.Position, reason string) {
	s.held = Held{
		Source: st.name(m.src), Sentence: m.sentence, At: m.at, Position: p, Reason: reason,
		Count: s.held.Count + 1, Adopted: s.held.Adopted, Holding: true,
	}
}

// newFix tells of a fix when it comes from the source in use.
func (st *state) newFix(m said, p nav.Position) nav.Opt[nav.Fix] {
	if st.position.pick(m.at).rank.feed != m.src {
		return nav.None[nav.Fix]()
	}
	f := nav.Fix{At: m.at, Position: p, SogKn: freshValue(&st.sog, m.at), CogTrue: freshValue(&st.cog, m.at)}
	st.reckon.fix(p, m.at, f.Velocity())
	return nav.Some(f)
}

func freshValue[T any](q *quantity[T], now time.Time) nav.Opt[T] {
	if s := q.pick(now); s != nil && q.fresh(s, now) {
		return nav.Some(s.value)
	}
	return nav.None[T]()
}

// utc puts together the moment that a sentence states. A sentence with a date
// also sets the instruments' time; one without is given the day nearest to the
// last that the same source sent, else to the receipt.
func (st *state) utc(m said, t nav.Opt[nmea.TimeOfDay], d nav.Opt[nmea.Date]) nav.Opt[time.Time] {
	tod, ok := t.Get()
	if !ok {
		return nav.None[time.Time]()
	}
	s := st.source(m.src)
	date, ok := d.Get()
	if !ok {
		ref := m.line
		if !s.ref.IsZero() {
			ref = s.ref.Add(m.line.Sub(s.refA))
		}
		return nav.Some(tod.Near(ref))
	}
	at := tod.On(date)
	s.ref, s.refA = at, m.line
	st.time.put(m.rank(direct), m.sentence, InstrumentTime{
		UTC: at, OffsetS: at.Sub(m.at).Seconds(), Suspect: suspectTime(at),
	}, m.at)
	return nav.Some(at)
}

// writtenIn is a moment before this program existed: no true clock shows an
// earlier one.
var writtenIn = time.Date(2026, 1, 1, 0, 0, 0, 0, time.UTC)

func suspectTime(at time.Time) string {
	if at.Before(writtenIn) {
		return "before this program was written; a receiver whose week number has rolled over is 1024 weeks behind"
	}
	return ""
}

func (st *state) vdr(m said, b *nmea.VDR) {
	set, ok1 := b.SetTrue.Get()
	drift, ok2 := b.DriftKn.Get()
	if ok1 && ok2 {
		st.current.put(m.rank(direct), m.sentence, Current{set, drift}, m.at)
	}
}

func (st *state) mwv(m said, b *nmea.MWV) {
	angle, ok1 := b.Angle.Get()
	speed, ok2 := b.SpeedKn.Get()
	if !ok1 || !ok2 {
		return
	}
	q := &st.windApparent
	if b.True {
		q = &st.windRelative
	}
	q.put(m.rank(direct), m.sentence, RelativeWind{angle, speed}, m.at)
}

func (st *state) mwd(m said, b *nmea.MWD) {
	from, ok1 := b.FromTrue.Get()
	speed, ok2 := b.SpeedKn.Get()
	if ok1 && ok2 {
		st.windNorth.put(m.rank(direct), m.sentence, Wind{from, speed, AsInstrument}, m.at)
	}
}

// dpt takes the depth below the surface where the offset tells it, else below
// the transducer or the keel, as sent.
func (st *state) dpt(m said, b *nmea.DPT) {
	if d, ok := b.BelowTransducerM.Get(); ok {
		st.depth.put(m.rank(direct), m.sentence, d+b.OffsetM.Or(0), m.at)
	}
}

// snapshot says what is known at a moment.
func (st *state) snapshot(now time.Time) Vessel {
	st.reckon.advance(now, st.motion(now))
	v := Vessel{
		At:           now.UTC(),
		SogKn:        reading(st, &st.sog, now),
		CogTrue:      reading(st, &st.cog, now),
		StwKn:        reading(st, &st.stw, now),
		WindApparent: reading(st, &st.windApparent, now),
		WindRelative: reading(st, &st.windRelative, now),
		Current:      reading(st, &st.current, now),
		WaterC:       reading(st, &st.water, now),
		DepthM:       reading(st, &st.depth, now),
		Time:         reading(st, &st.time, now),
		SpreadM:      st.spread(now),
		Held:         st.heldList(),
	}
	v.Position, v.Fix, v.Replay = st.positionReading(now)
	v.Variation = st.variationReading(v, now)
	v.HeadingTrue, v.HeadingMag = st.headings(v, now)
	v.Wind = st.wind(v, now)
	if p, ok := v.Position.Get(); ok && p.Stale {
		v.DeadReckoned = st.reckon.reckoned()
	}
	return v
}

// reading makes a reading of the slot in use.
func reading[T any](st *state, q *quantity[T], now time.Time) nav.Opt[Reading[T]] {
	s := q.pick(now)
	if s == nil {
		return nav.None[Reading[T]]()
	}
	return nav.Some(Reading[T]{
		Value: s.value, At: s.at.UTC(), AgeS: now.Sub(s.at).Seconds(), Stale: !q.fresh(s, now),
		Source: st.name(s.rank.feed), Sentence: s.sentence,
	})
}

func (st *state) positionReading(now time.Time) (nav.Opt[Reading[nav.Position]], nav.Opt[FixDetail], bool) {
	r, ok := reading(st, &st.position, now).Get()
	if !ok {
		return nav.None[Reading[nav.Position]](), nav.None[FixDetail](), false
	}
	p := Reading[nav.Position]{
		Value: r.Value.position, At: r.At, AgeS: r.AgeS, Stale: r.Stale, Source: r.Source, Sentence: r.Sentence,
	}
	return nav.Some(p), nav.Some(r.Value.detail), st.replayed(st.position.pick(now).rank.feed)
}

func (st *state) spread(now time.Time) nav.Opt[float64] {
	var fresh []nav.Position
	for i := range st.position.slots {
		if s := &st.position.slots[i]; st.position.fresh(s, now) {
			fresh = append(fresh, s.value.position)
		}
	}
	if len(fresh) < 2 {
		return nav.None[float64]()
	}
	widest := 0.0
	for i, a := range fresh {
		for _, b := range fresh[:i] {
			widest = max(widest, nav.Inverse(a, b).RangeM)
		}
	}
	return nav.Some(widest)
}

func (st *state) heldList() []Held {
	list := []Held{}
	for _, s := range st.sources {
		if s.held.Count > 0 {
			list = append(list, s.held)
		}
	}
	slices.SortFunc(list, func(a, b Held) int { return b.At.Compare(a.At) })
	return list
}
