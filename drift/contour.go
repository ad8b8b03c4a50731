package drift

import (
	"slices"

	"wakeback/drift/nav"
)

// rings are the lines around what is denser than level, by marching squares:
// each square between four cells is crossed from one of its edges to another,
// with the dense side to the left, so that the crossings join up to rings.
func (g *grid) rings(level float64) [][]nav.Offset {
	// next leads from each edge crossed to the next one. The edge to the right of
	// a cell has its number twice, the one above one more.
	next := make([]int32, 2*len(g.density))
	for i := range next {
		next[i] = -1
	}
	for j := range regionSide - 1 {
		for i := range regionSide - 1 {
			g.cross(next, j*regionSide+i, level)
		}
	}
	var rings [][]nav.Offset
	for start := range next {
		var ring []nav.Offset
		for e := int32(start); next[e] >= 0; {
			ring = append(ring, g.crossing(int(e), level))
			e, next[e] = next[e], -1
		}
		if len(ring) >= 3 {
			rings = append(rings, g.outward(ring))
		}
	}
	return rings
}

// The edges of a square whose lower left cell is c.
func bottom(c int) int32 { return int32(2 * c) }
func left(c int) int32   { return int32(2*c + 1) }
func top(c int) int32    { return bottom(c + regionSide) }
func right(c int) int32  { return left(c + 1) }

// cross sets how the square above and to the right of cell c is crossed. Where
// two opposite corners are dense, they are joined if the middle is.
func (g *grid) cross(next []int32, c int, level float64) {
	d := [4]float64{g.density[c], g.density[c+1], g.density[c+1+regionSide], g.density[c+regionSide]}
	mask := 0
	for k, v := range d {
		if v >= level {
			mask |= 1 << k
		}
	}
	joined := d[0]+d[1]+d[2]+d[3] >= 4*level
	b, r, t, l := bottom(c), right(c), top(c), left(c)
	switch mask {
	case 1:
		next[b] = l
	case 2:
		next[r] = b
	case 3:
		next[r] = l
	case 4:
		next[t] = r
	case 5:
		if joined {
			next[b], next[t] = r, l
		} else {
			next[b], next[t] = l, r
		}
	case 6:
		next[t] = b
	case 7:
		next[t] = l
	case 8:
		next[l] = t
	case 9:
		next[b] = t
	case 10:
		if joined {
			next[r], next[l] = t, b
		} else {
			next[r], next[l] = b, t
		}
	case 11:
		next[r] = t
	case 12:
		next[l] = r
	case 13:
		next[b] = r
	case 14:
		next[l] = b
	}
}

// crossing is where the level lies on an edge, between its two cells.
func (g *grid) crossing(edge int, level float64) nav.Offset {
	a := edge / 2
	b := a + 1
	if edge%2 == 1 {
		b = a + regionSide
	}
	f := 0.5
	if da, db := g.density[a], g.density[b]; da != db {
		f = (level - da) / (db - da)
	}
	i, j := float64(a%regionSide), float64(a/regionSide)
	if edge%2 == 1 {
		j += f
	} else {
		i += f
	}
	return g.point(g.u0+i*g.du, g.v0+j*g.dv)
}

// outward turns a ring of the frame, whose axes lie along and to the right of
// the cloud's, so that on the chart it runs against the clock around what is
// dense.
func (g *grid) outward(ring []nav.Offset) []nav.Offset {
	slices.Reverse(ring)
	return ring
}
