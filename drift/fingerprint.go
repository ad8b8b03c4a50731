package drift

import (
	"math"

	"wakeback/drift/nav"
)

// The past of a cloud is hashed, so that new inputs can be compared with those
// it was made of. Only hashes of one machine are compared, and a clash (one in
// 2^64) would leave a cloud as it is until the next change.

// FNV-1a, 64 bits (Fowler, Noll and Vo), taken by whole words.
const (
	fnvOffset = 0xcbf29ce484222325
	fnvPrime  = 0x100000001b3
)

type hash uint64

func (h hash) word(w uint64) hash   { return hash(mix64(uint64(h)^w) * fnvPrime) }
func (h hash) float(v float64) hash { return h.word(math.Float64bits(v)) }

// hash adds a step's forcing to a hash.
func (f forcing) hash(h uint64) uint64 {
	return uint64(hash(h).float(f.wind.EastMs).float(f.wind.NorthMs).float(f.windSD).
		float(f.current.EastMs).float(f.current.NorthMs).float(f.currentSD))
}

// fingerprint hashes what a case starts from; the coast by its own word.
func (c Case) fingerprint() uint64 {
	h := hash(fnvOffset)
	h = h.word(uint64(c.FellFrom.UnixNano())).word(uint64(c.FellTo.UnixNano()))
	h = h.float(c.Start.Position.LatDeg()).float(c.Start.Position.LonDeg()).float(c.Start.error95M())
	for _, f := range c.startFixes() {
		h = h.word(uint64(f.At.UnixNano())).float(f.Position.LatDeg()).float(f.Position.LonDeg()).float(f.ErrorM.Or(-1))
	}
	k := c.Class
	h = h.float(k.Slope).float(k.OffsetMs).float(k.DivergenceDeg).float(k.JibesPerHour)
	if r, ok := k.Components.Get(); ok {
		for _, r := range []Regression{r.Downwind, r.Right, r.Left} {
			h = h.float(r.Slope).float(r.OffsetMs).float(r.SyxMs)
		}
	}
	if c.Coast != nil {
		h = h.word(c.Coast.Fingerprint())
	}
	return uint64(h)
}

// startFixes are the fixes a case starts from, none for a point.
func (c Case) startFixes() []nav.Fix {
	if !c.Start.Corridor() {
		return nil
	}
	return c.pathFixes()
}

// pastOf is the hash of a case's past, as far as the cloud has come.
func (cl *Cloud) pastOf(c Case) uint64 {
	h := c.fingerprint()
	for k := range cl.steps {
		h = cl.forcing(c, k).hash(h)
	}
	return h
}
