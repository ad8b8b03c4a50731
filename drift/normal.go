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
	golden2  = golden * 2 & (1<<64 - 1)
	golden3  = golden * 3 & (1<<64 - 1)
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
// is 1 within 1e-5, and no number is beyond 6.3. Both are checked by a test.

const (
	segmentBits = 6
	segments    = 1 << segmentBits
	octaves     = 32 // one is never used: the numbers have 31 bits
	halfTable   = octaves << segmentBits
	cellShift   = 52 - segmentBits    // of the bits of a float64
	firstCell   = 1023 << segmentBits // the cell of 1.0
)

// normalTable has, for each cell, the line z = c0 + c1 w, where |w|/2^32 is the
// probability beyond z; the second half is that of negative w.
type normalTable [2 * halfTable]struct{ c0, c1 float64 }

// normal turns 32 even bits into a normal number. The exponent and the first
// bits of the number as a float64 are its cell.
func (t *normalTable) normal(u uint32) float64 {
	w := float64(int32(u) | 1)
	b := math.Float64bits(w)
	// 1023, the exponent of 1.0, and 1 more make a number divisible by 32.
	cell := &t[(b>>cellShift+segments)&(halfTable-1)|b>>63*halfTable]
	return cell.c0 + cell.c1*w
}

var normals = sync.OnceValue(func() *normalTable {
	t := new(normalTable)
	for i := range halfTable - segments {
		lo := math.Float64frombits(uint64(firstCell+i) << cellShift)
		hi := math.Float64frombits(uint64(firstCell+i+1) << cellShift)
		z0, z1 := quantile(lo), quantile(hi)
		slope := (z1 - z0) / (hi - lo)
		t[i].c0, t[i].c1 = z0-slope*lo, slope
		t[i+halfTable].c0, t[i+halfTable].c1 = -t[i].c0, slope
	}
	return t
})

// quantile is the z with the probability w/2^32 beyond it.
func quantile(w float64) float64 { return math.Sqrt2 * math.Erfinv(1-w*0x1p-31) }
