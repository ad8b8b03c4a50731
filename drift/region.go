package drift

import (
	"math"
	"slices"

	"wakeback/drift/nav"
)

// Region is where a share of the members is, as densely as can be: the smallest
// such area, within the smoothing of the density.
type Region struct {
	Share float64
	// Rings are its edges in the cloud's plane, without the first point again.
	// Those that run with the clock are holes in it.
	Rings  [][]nav.Offset
	AreaM2 float64
}

// regionCells is how many cells the members' extent is cut into each way. Our
// choice: an eighth of a standard deviation of a normal cloud, which is finer
// than the smoothing.
const (
	regionCells = 64
	regionPad   = 6 // empty cells around, so that every edge closes
	regionSide  = regionCells + 2*regionPad
)

// Regions are the regions of some shares, each over 0 and under 1, of the cloud
// as it stands. A cloud without extent has no rings.
func (cl *Cloud) Regions(shares ...float64) []Region {
	g := newGrid(cl)
	out := make([]Region, len(shares))
	for i, share := range shares {
		out[i].Share = share
		if g == nil || !(share > 0 && share < 1) {
			continue
		}
		out[i].Rings = g.rings(g.level(cl, share))
		for _, ring := range out[i].Rings {
			out[i].AreaM2 += area(ring)
		}
	}
	return out
}

// grid is the smoothed density in a frame along the cloud's axes, so that a
// narrow corridor is resolved across as well as along.
type grid struct {
	mean           nav.Offset
	sin, cos       float64 // of the major axis
	u0, v0, du, dv float64 // along and across: the middle of cell 0, and the step
	density        [regionSide * regionSide]float64
}

func newGrid(cl *Cloud) *grid {
	s := cl.Spread()
	g := &grid{mean: s.Mean}
	g.sin, g.cos = math.Sincos(s.AxisDeg * math.Pi / 180)
	if s.SDMajorM < 1e-3 {
		return nil
	}
	var u, v [2]float64
	for i := range cl.eastM {
		a, b := g.along(nav.Offset{EastM: cl.eastM[i], NorthM: cl.northM[i]})
		u[0], u[1], v[0], v[1] = min(u[0], a), max(u[1], a), min(v[0], b), max(v[1], b)
	}
	// A cloud that is a line gets a width of a metre, to be drawn at all.
	g.du, g.dv = max(u[1]-u[0], 1)/regionCells, max(v[1]-v[0], 1)/regionCells
	g.u0, g.v0 = u[0]+(0.5-regionPad)*g.du, v[0]+(0.5-regionPad)*g.dv
	for i := range cl.eastM {
		a, b := g.along(nav.Offset{EastM: cl.eastM[i], NorthM: cl.northM[i]})
		g.density[g.cell(a, b)] += 1 / float64(cl.N())
	}
	// Scott's rule (1992, "Multivariate Density Estimation") for two dimensions:
	// the standard deviation by n^(-1/6).
	h := math.Pow(float64(cl.N()), -1.0/6)
	g.smooth(h*s.SDMajorM/g.du, 1)
	g.smooth(h*s.SDMinorM/g.dv, regionSide)
	return g
}

// along turns a point into the frame of the grid.
func (g *grid) along(o nav.Offset) (u, v float64) {
	e, n := o.EastM-g.mean.EastM, o.NorthM-g.mean.NorthM
	return e*g.sin + n*g.cos, e*g.cos - n*g.sin
}

// point turns a place of the frame back.
func (g *grid) point(u, v float64) nav.Offset {
	return g.mean.Add(nav.Offset{EastM: u*g.sin + v*g.cos, NorthM: u*g.cos - v*g.sin})
}

func (g *grid) cell(u, v float64) int {
	i := int(math.Round((u - g.u0) / g.du))
	j := int(math.Round((v - g.v0) / g.dv))
	return min(max(j, regionPad), regionSide-1-regionPad)*regionSide + min(max(i, regionPad), regionSide-1-regionPad)
}

// smooth spreads each cell along one way by a normal curve of standard
// deviation sd, in cells; stride is how far the next cell that way is. The curve
// ends within the empty cells around.
func (g *grid) smooth(sd float64, stride int) {
	var weight [2*regionPad - 1]float64
	sum := 0.0
	for k := range weight {
		d := float64(k - regionPad + 1)
		weight[k] = math.Exp(-d * d / (2 * max(sd*sd, 0.01)))
		sum += weight[k]
	}
	was := g.density
	g.density = [regionSide * regionSide]float64{}
	for i, d := range was {
		if d == 0 {
			continue
		}
		for k, w := range weight {
			// A second smoothing reaches no further this way than the first.
			if to := i + (k-regionPad+1)*stride; to >= 0 && to < len(g.density) {
				g.density[to] += d * w / sum
			}
		}
	}
}

// level is the density that a share of the members lie above: the quantile of
// the density at their own places (Hyndman 1996, "Computing and graphing highest
// density regions"), so that smoothing does not change what a region holds.
func (g *grid) level(cl *Cloud, share float64) float64 {
	at := make([]float64, cl.N())
	for i := range at {
		at[i] = g.at(g.along(nav.Offset{EastM: cl.eastM[i], NorthM: cl.northM[i]}))
	}
	slices.Sort(at)
	return quantileOf(at, 1-share)
}

// at is the density at a place of the frame, between its four cells.
func (g *grid) at(u, v float64) float64 {
	fi, fj := (u-g.u0)/g.du, (v-g.v0)/g.dv
	i := min(max(int(fi), 0), regionSide-2)
	j := min(max(int(fj), 0), regionSide-2)
	fi, fj = fi-float64(i), fj-float64(j)
	c := j*regionSide + i
	low := g.density[c]*(1-fi) + g.density[c+1]*fi
	high := g.density[c+regionSide]*(1-fi) + g.density[c+regionSide+1]*fi
	return low*(1-fj) + high*fj
}

// area is the area of a ring, negative for one that runs with the clock.
func area(ring []nav.Offset) float64 {
	sum := 0.0
	for i, p := range ring {
		q := ring[(i+1)%len(ring)]
		sum += p.EastM*q.NorthM - q.EastM*p.NorthM
	}
	return sum / 2
}
