package drift

import "math"

// chunk is how many steps a member makes in one go.
const chunk = 64

// jibeEvery is every how many steps it is decided whether members jibe. Our
// choice, because once in 25 h is rare: the sides' correlation is kept exactly
// at those steps, and one random number in five is saved.
const jibeEvery = 4

// Numbers of a member's stream: each step has three places.
const perStep = 3

// run makes the next n steps, at most chunk.
func (cl *Cloud) run(n int) {
	cl.env = cl.env[:0]
	for k := range n {
		f := cl.forcing(cl.c, cl.steps+k)
		cl.env = append(cl.env, f)
		cl.past = f.hash(cl.past)
	}
	k := cl.coefficients()
	for i := range cl.m.key {
		if cl.m.state[i] != ashore {
			cl.runMember(i, k)
		}
	}
	cl.steps += n
}

// runMember makes one member's steps. It is long because all of a member's
// state stays in registers for the length of a chunk.
func (cl *Cloud) runMember(i int, k coefficients) {
	m, t := &cl.m, normals()
	first, dt := 0, k.dt
	if fell := int(m.release[i] / k.dt); fell >= cl.steps {
		first = fell - cl.steps
		if first >= len(cl.env) {
			return
		}
		dt = float64(fell+1)*k.dt - m.release[i] // the step it falls in is shorter
	}
	x, y := m.east[i], m.north[i]
	wE, wN, cE, cN := m.windE[i], m.windN[i], m.currentE[i], m.currentN[i]
	wEach, wNach, cEach, cNach := m.pullE[i], m.pullN[i], m.drawE[i], m.drawN[i]
	downA, downB, sideA, sideB := m.downA[i], m.downB[i], m.sideA[i], m.sideB[i]
	key := m.key[i] + uint64(cl.steps+first)*(golden*perStep&math.MaxUint64)
	for s := first; s < len(cl.env); s++ {
		f := &cl.env[s]
		wx, wy := f.wind.EastMs+f.windSD*wE, f.wind.NorthMs+f.windSD*wN
		vx, vy := f.current.EastMs+f.currentSD*cE, f.current.NorthMs+f.currentSD*cN
		if w := math.Sqrt(wx*wx + wy*wy); w > 0 {
			down, side := downA*w+downB, sideA*w+sideB
			if down > 0 || !k.floor {
				down, side = down/w, side/w
				vx += down*wx + side*wy
				vy += down*wy - side*wx
			}
		}
		x += vx * dt
		y += vy * dt
		dt = k.dt
		if cl.land != nil && cl.strand(i, x, y) {
			break
		}
		a, b := mix64(key+golden), mix64(key+2*golden&math.MaxUint64)
		wE = k.keep*wE + wEach + k.kick*t.normal(uint32(a))
		wN = k.keep*wN + wNach + k.kick*t.normal(uint32(a>>32))
		cE = k.keep*cE + cEach + k.kick*t.normal(uint32(b))
		cN = k.keep*cN + cNach + k.kick*t.normal(uint32(b>>32))
		if (cl.steps+s)%jibeEvery == jibeEvery-1 && uint32(mix64(key)>>32) < k.jibe {
			sideA, m.otherA[i] = m.otherA[i], sideA
			sideB, m.otherB[i] = m.otherB[i], sideB
		}
		key += golden * perStep & math.MaxUint64
	}
	m.east[i], m.north[i] = x, y
	m.windE[i], m.windN[i], m.currentE[i], m.currentN[i] = wE, wN, cE, cN
	m.sideA[i], m.sideB[i] = sideA, sideB
}

// strand keeps the member's dealings with the coast, and reports whether it is
// ashore. A member that starts on land is taken for afloat until it has been
// in the water: there the coast or the mark is wrong, not the fall.
func (cl *Cloud) strand(i int, x, y float64) bool {
	land := cl.land(x, y)
	switch s := &cl.m.state[i]; {
	case land && *s == afloat:
		*s = ashore
	case !land:
		*s = afloat
	}
	return cl.m.state[i] == ashore
}

// look puts the members where they are rest seconds after the whole steps
// done, without moving them on.
func (cl *Cloud) look(rest float64, f forcing) {
	m, k := &cl.m, cl.coefficients()
	now := float64(cl.steps)*k.dt + rest
	for i := range m.key {
		x, y := m.east[i], m.north[i]
		if dt := math.Min(rest, now-m.release[i]); dt > 0 && m.state[i] != ashore {
			vx, vy := m.velocity(i, f, k.floor)
			x += vx * dt
			y += vy * dt
		}
		cl.eastM[i], cl.northM[i] = x, y
	}
}

// velocity is a member's motion over the ground.
func (m *members) velocity(i int, f forcing, floor bool) (vx, vy float64) {
	wx, wy := f.wind.EastMs+f.windSD*m.windE[i], f.wind.NorthMs+f.windSD*m.windN[i]
	vx, vy = f.current.EastMs+f.currentSD*m.currentE[i], f.current.NorthMs+f.currentSD*m.currentN[i]
	w := math.Sqrt(wx*wx + wy*wy)
	down, side := m.downA[i]*w+m.downB[i], m.sideA[i]*w+m.sideB[i]
	if w > 0 && (down > 0 || !floor) {
		vx += (down*wx + side*wy) / w
		vy += (down*wy - side*wx) / w
	}
	return vx, vy
}
