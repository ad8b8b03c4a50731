package drift

import (
	"math"
	"sync"
)

// Random numbers of the cloud.
//
// Every member has its own stream, and every number in it its own place, so a
// cloud is the same however its steps are chunked. The stream is SplitMix64
// (Steele, Lea and Flood 2014, "Fast splittable pseudorandom number
// generators", OOPSLA): a counter that goes on by the golden ratio, mixed by
// Stafford's variant 13. Our choice over PCG, because WebAssembly has no
// multiplication to 128 bits.

const (
	golden   = 0x9e3779b97f4a7c15
	stafford = 0xbf58476d1ce4e5b9
	variant  = 0x94d049bb133111eb
)

// mix64 is the output function of SplitMix64.
func mix64(z uint64) uint64 {
	z = (z ^ z>>30) * stafford
	z = (z ^ z>>27) * variant
	return z ^ z>>31
}

// stream is one member's random numbers, in order.
type stream struct{ at uint64 }

func (s *stream) next() uint64 {
	s.at += golden
	return mix64(s.at)
}

// uniform is evenly spread over [0, 1).
func (s *stream) uniform() float64 { return float64(s.next()>>11) * 0x1p-53 }

func (s *stream) normal(t *normalTable) float64 { return t.normal(uint32(s.next() >> 32)) }

// Normal numbers come by inverting the normal distribution, from a table with
// straight lines between its points: 64 to each halving of the tail. One number
// of 32 bits makes one of them, without rejection, so that no comparison of
// rounded numbers can make two machines take different ways; they differ by
// rounding alone. The distribution is that of the straight lines: its variance
// is 1 within 1e-5, and no number is beyond 6.4. Both are checked by a test.

const (
	segmentBits = 6
	mantissa    = 52
	cellShift   = mantissa - segmentBits
	octaves     = 32
	firstCell   = 1023 << segmentBits // the cell of 1.0
)

// normalTable has, for each cell, the line z = c0 + c1 w, where w/2^33 is the
// probability left of -z.
type normalTable [octaves << segmentBits]struct{ c0, c1 float64 }

// normal turns 32 even bits into a normal number.
func (t *normalTable) normal(u uint32) float64 {
	w := float64(u<<1 | 1)
	b := math.Float64bits(w)
	cell := &t[(b>>cellShift-firstCell)&(octaves<<segmentBits-1)]
	z := cell.c0 + cell.c1*w
	return math.Float64frombits(math.Float64bits(z) | uint64(u>>31)<<63)
}

var normals = sync.OnceValue(func() *normalTable {
	t := new(normalTable)
	for i := range t {
		lo := math.Float64frombits(uint64(firstCell+i) << cellShift)
		hi := math.Float64frombits(uint64(firstCell+i+1) << cellShift)
		z0, z1 := quantile(lo), quantile(hi)
		t[i].c1 = (z1 - z0) / (hi - lo)
		t[i].c0 = z0 - t[i].c1*lo
	}
	return t
})

// quantile is the z that leaves w/2^33 on the other side of -z.
func quantile(w float64) float64 { return math.Sqrt2 * math.Erfinv(1-w*0x1p-32) }
