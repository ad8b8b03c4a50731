package drift

import (
	"math"

	"wakeback/drift/nav"
)

// drawAll draws what each member keeps, and where and when it starts.
func (cl *Cloud) drawAll() {
	t := normals()
	start := cl.starter()
	base := mix64(cl.opt.Seed ^ stafford)
	for i := range cl.m.key {
		key := mix64(base + uint64(i)*golden)
		cl.m.key[i] = key
		s := stream{mix64(key ^ variant)}
		cl.m.east[i], cl.m.north[i], cl.m.release[i] = start(&s, t)
		cl.drawErrors(i, &s, t)
		cl.drawLeeway(i, &s, t)
		cl.m.state[i] = afloat
		if cl.land != nil && cl.land(cl.m.east[i], cl.m.north[i]) {
			cl.m.state[i] = unproven
		}
	}
}

// starter returns what draws where and when a member starts.
func (cl *Cloud) starter() func(*stream, *normalTable) (east, north, release float64) {
	c, window := cl.c, cl.c.FellTo.Sub(cl.c.FellFrom).Seconds()
	if !c.Start.Corridor() {
		sd := c.Start.error95M() / Radius95
		return func(s *stream, t *normalTable) (east, north, release float64) {
			return sd * s.normal(t), sd * s.normal(t), window * s.uniform()
		}
	}
	path := flatten(c, cl.plane)
	return func(s *stream, t *normalTable) (east, north, release float64) {
		release = window * s.uniform()
		o, sd := path.at(release)
		return o.EastM + sd*s.normal(t), o.NorthM + sd*s.normal(t), release
	}
}

// flatPath is a path in the plane.
type flatPath []flatFix

type flatFix struct {
	t  float64 // seconds after the earliest time of the fall
	o  nav.Offset
	sd float64 // of each component, m
}

// flatten brings the fixes that matter into the plane.
func flatten(c Case, plane nav.Plane) flatPath {
	var path flatPath
	for _, f := range c.pathFixes() {
		sd := f.ErrorM.Or(c.Start.error95M()) / Radius95
		path = append(path, flatFix{f.At.Sub(c.FellFrom).Seconds(), plane.Offset(f.Position), sd})
	}
	return path
}

// at is the place after t seconds, with its standard deviation.
func (p flatPath) at(t float64) (nav.Offset, float64) {
	lo, hi := 0, len(p)-1
	for hi-lo > 1 {
		mid := (lo + hi) / 2
		if p[mid].t <= t {
			lo = mid
		} else {
			hi = mid
		}
	}
	a, b := p[lo], p[hi]
	f := 0.0
	if b.t > a.t {
		f = math.Min(math.Max((t-a.t)/(b.t-a.t), 0), 1)
	}
	return a.o.Add(b.o.Sub(a.o).Scale(f)), math.Max(a.sd, b.sd)
}

// drawErrors draws the persisting part of the errors, and starts the wandering
// one in its steady state.
func (cl *Cloud) drawErrors(i int, s *stream, t *normalTable) {
	p := cl.opt.Model.Persisting.Or(0)
	stay, wander := math.Sqrt(p), math.Sqrt(1-p)
	keep := cl.coefficients().keep
	draw := func(now, each *float64) {
		bias := stay * s.normal(t)
		*now = bias + wander*s.normal(t)
		*each = (1 - keep) * bias
	}
	m := &cl.m
	draw(&m.windE[i], &m.pullE[i])
	draw(&m.windN[i], &m.pullN[i])
	draw(&m.currentE[i], &m.drawE[i])
	draw(&m.currentN[i], &m.drawN[i])
}

// drawLeeway draws the leeway a member keeps.
//
// With the report's regressions, as Breivik and Allen (2008, equations 1 and 2;
// from memory): slope + eps/20 and offset + eps/2 with the wind in m/s, so that
// at 10 m/s the disturbance is eps, a normal number of standard deviation Syx;
// the side by a fair coin. Without them: the angle evenly within the
// divergence, the speed with the relative spread of [speedSpread].
func (cl *Cloud) drawLeeway(i int, s *stream, t *normalTable) {
	m, c := &cl.m, cl.c.Class
	k, ok := c.Components.Get()
	if !ok {
		d := c.DivergenceDeg * math.Pi / 180
		sin, cos := math.Sincos((2*s.uniform() - 1) * d)
		f := math.Max(1+speedSpread*s.normal(t), 0)
		m.downA[i], m.downB[i] = f*cos*c.Slope, f*cos*c.OffsetMs
		m.sideA[i], m.sideB[i] = f*sin*c.Slope, f*sin*c.OffsetMs
		m.otherA[i], m.otherB[i] = -m.sideA[i], -m.sideB[i]
		return
	}
	down, side := s.normal(t), s.normal(t)
	m.downA[i], m.downB[i] = disturbed(k.Downwind, down)
	m.sideA[i], m.sideB[i] = disturbed(k.Right, side)
	m.otherA[i], m.otherB[i] = disturbed(k.Left, -side)
	if s.next()>>63 == 1 {
		m.sideA[i], m.otherA[i] = m.otherA[i], m.sideA[i]
		m.sideB[i], m.otherB[i] = m.otherB[i], m.sideB[i]
	}
}

func disturbed(r Regression, z float64) (a, b float64) {
	return r.Slope + r.SyxMs*z/20, r.OffsetMs + r.SyxMs*z/2
}
