package feed

import (
	"fmt"
	"math"
	"time"

	"wakeback/drift/nav"
)

// Held is a position that was received and not believed.
type Held struct {
	Source   string       `json:"source"`
	Sentence string       `json:"sentence"`
	At       time.Time    `json:"at"`
	Position nav.Position `json:"position"`
	Reason   string       `json:"reason"`
	// Count is how many this source has had held back in all.
	Count int `json:"count"`
	// Adopted is how often a run of such positions persisted and was taken.
	Adopted int `json:"adopted"`
	// Holding says that the newest position of this source is one of them.
	Holding bool `json:"holding"`
}

const (
	// defaultMaxKn is faster than a small vessel goes. Our choice, because what
	// must be caught are jumps of miles.
	defaultMaxKn = 60
	// jumpSlackM allows for the scatter of one receiver and for two receivers on
	// one wire, metres apart. Our choice.
	jumpSlackM = 100
	// backwardsSlack allows for two receivers on one wire whose sentences take
	// turns. Our choice.
	backwardsSlack = 2 * time.Second
	// A run of held positions is adopted once it has this many, each within reach
	// of the one before, over this time, and no believable one came between. Our
	// choice: a receiver that was off and wakes elsewhere is believed soon, a few
	// wild fixes never.
	adoptCount = 10
	adoptSpan  = 10 * time.Second
	// zeroDeg is how near to 0,0 counts as there: 0.1 m, so that only a receiver
	// that has nothing to say is meant, not a vessel in the Gulf of Guinea.
	zeroDeg = 1e-6
)

// fixPoint is a position as the gate looks at it.
type fixPoint struct {
	position nav.Position
	utc      nav.Opt[time.Time] // by the receiver's clock
	line     time.Time          // on the feed's own time line
}

// gate decides for one source which positions are believed.
type gate struct {
	maxKn float64
	good  nav.Opt[fixPoint] // the last believed
	run   []fixPoint        // first and last of the run of held ones
	count int               // of the run
}

// admit says whether a position is believed, and why not. adopted says that it
// is believed because it persisted.
func (g *gate) admit(f fixPoint) (reason string, adopted bool) {
	reason = g.objection(f)
	if reason == "" {
		g.take(f)
		return "", false
	}
	if isZero(f.position) {
		g.run, g.count = nil, 0 // nothing that persists at 0,0 becomes true by it
		return reason, false
	}
	if g.persists(f) {
		g.take(f)
		return "", true
	}
	return reason, false
}

func (g *gate) take(f fixPoint) {
	g.good, g.run, g.count = nav.Some(f), nil, 0
}

func (g *gate) objection(f fixPoint) string {
	last, has := g.good.Get()
	if !has {
		if isZero(f.position) {
			return "position is exactly 0,0: the receiver has none"
		}
		return ""
	}
	if reason := between(last, f, g.maxKn); reason != "" {
		if isZero(f.position) {
			return "position is exactly 0,0: the receiver has none"
		}
		return reason
	}
	return ""
}

// persists puts a held position into the run and says whether the run is long
// enough to be believed.
func (g *gate) persists(f fixPoint) bool {
	if g.count > 0 && between(g.run[1], f, g.maxKn) != "" {
		g.count = 0
	}
	if g.count == 0 {
		g.run = []fixPoint{f, f}
	}
	g.run[1] = f
	g.count++
	return g.count >= adoptCount && f.line.Sub(g.run[0].line) >= adoptSpan
}

// between says what speaks against going from a to b.
func between(a, b fixPoint, maxKn float64) string {
	elapsed := b.line.Sub(a.line)
	if ua, ok := a.utc.Get(); ok {
		if ub, ok := b.utc.Get(); ok {
			if back := ua.Sub(ub); back > backwardsSlack {
				return fmt.Sprintf("time of the fix ran back by %s", back.Round(time.Second))
			}
			// The shorter of the two: lines that waited on the way come in a
			// burst, and a receiver whose clock leaps must not excuse a jump.
			elapsed = min(elapsed, ub.Sub(ua))
		}
	}
	// One second more, for the rounding of times and for lines that waited.
	s := math.Max(elapsed.Seconds(), 0) + 1
	rangeM := nav.Inverse(a.position, b.position).RangeM
	if rangeM <= jumpSlackM+s*maxKn*nav.MsPerKn {
		return ""
	}
	return fmt.Sprintf("jump of %.0f m in %.0f s, faster than %.0f kn", rangeM, s, maxKn)
}

func isZero(p nav.Position) bool {
	return math.Abs(p.LatDeg()) < zeroDeg && math.Abs(p.LonDeg()) < zeroDeg
}
