package drift

import "math"

// chunk is how many steps a member makes in one go.
const chunk = 64

// jibeEvery is every how many steps it is decided whether members jibe. Our
// choice, because once in 25 h is rare: the sides' correlation is kept exactly
// at those steps, and one random number in five is saved.
const jibeEvery = 4

// A member's stream has three places for each step: one for jibing, two for the
// errors.

// run makes the next n steps, at most chunk.
func (cl *Cloud) run(n int) {
	cl.env = cl.env[:0]
	for k := range n {
		f := cl.forcing(cl.c, cl.steps+k)
		cl.env = append(cl.env, f)
		cl.past = f.hash(cl.past)
	}
	k := cl.coefficients()
	var e series
	for i := range cl.m.key {
		if cl.m.state[i] != ashore {
			cl.runMember(i, &k, &e)
		}
	}
	cl.steps += n
}

// series are the errors of one member over a chunk, in standard deviations, one
// before each step.
type series [chunk]struct{ windE, windN, currentE, currentN float64 }

// runMember makes one member's steps: first all its errors, then all its ways.
// Each loop has so much in hand as fits into registers; this is why there are
// two, and why they are not cut further.
func (cl *Cloud) runMember(i int, k *coefficients, e *series) {
	env, step, dt := cl.env, cl.steps, k.dt
	if fell := int(cl.m.release[i] / k.dt); fell >= step {
		if fell-step >= len(env) {
			return
		}
		env = env[fell-step:]
		step = fell
		dt = float64(fell+1)*k.dt - cl.m.release[i] // the step it falls in is shorter
	}
	key := cl.m.key[i] + uint64(step)*golden3
	cl.m.wander(i, k, e[:len(env)], key)
	cl.move(i, k, env, e, step, dt)
}

// wander makes a member's errors for as many steps as e has room for.
func (m *members) wander(i int, k *coefficients, e []struct{ windE, windN, currentE, currentN float64 }, key uint64) {
	t, keep, kick := k.normals, k.keep, k.kick
	wE, wN, cE, cN := m.windE[i], m.windN[i], m.currentE[i], m.currentN[i]
	wEach, wNach, cEach, cNach := m.pullE[i], m.pullN[i], m.drawE[i], m.drawN[i]
	for s := range e {
		at := &e[s]
		at.windE, at.windN, at.currentE, at.currentN = wE, wN, cE, cN
		a, b := mix64(key+golden), mix64(key+golden2)
		wE = keep*wE + wEach + kick*t.normal(uint32(a))
		wN = keep*wN + wNach + kick*t.normal(uint32(a>>32))
		cE = keep*cE + cEach + kick*t.normal(uint32(b))
		cN = keep*cN + cNach + kick*t.normal(uint32(b>>32))
		key += golden3
	}
	m.windE[i], m.windN[i], m.currentE[i], m.currentN[i] = wE, wN, cE, cN
}

// move makes a member's way, the first step of it dt long.
func (cl *Cloud) move(i int, k *coefficients, env []forcing, e *series, step int, dt float64) {
	m, land := &cl.m, cl.land
	x, y := m.east[i], m.north[i]
	downA, downB, sideA, sideB := m.downA[i], m.downB[i], m.sideA[i], m.sideB[i]
	for s := range env {
		f, err := &env[s], &e[s%chunk]
		wx, wy := f.wind.EastMs+f.windSD*err.windE, f.wind.NorthMs+f.windSD*err.windN
		vx, vy := f.current.EastMs+f.currentSD*err.currentE, f.current.NorthMs+f.currentSD*err.currentN
		if w := math.Sqrt(wx*wx + wy*wy); w > 0 {
			down, side := downA*w+downB, sideA*w+sideB
			if down > k.floor {
				per := 1 / w
				down, side = down*per, side*per
				vx += down*wx + side*wy
				vy += down*wy - side*wx
			}
		}
		x += vx * dt
		y += vy * dt
		dt = k.dt
		if land != nil && cl.strand(i, x, y) {
			break
		}
		if step%jibeEvery == jibeEvery-1 && k.jibes(m.key[i]+uint64(step)*golden3) {
			sideA, m.otherA[i] = m.otherA[i], sideA
			sideB, m.otherB[i] = m.otherB[i], sideB
		}
		step++
	}
	m.east[i], m.north[i] = x, y
	m.sideA[i], m.sideB[i] = sideA, sideB
}

func (k *coefficients) jibes(key uint64) bool { return uint32(mix64(key)>>32) < k.jibe }

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
func (m *members) velocity(i int, f forcing, floor float64) (vx, vy float64) {
	wx, wy := f.wind.EastMs+f.windSD*m.windE[i], f.wind.NorthMs+f.windSD*m.windN[i]
	vx, vy = f.current.EastMs+f.currentSD*m.currentE[i], f.current.NorthMs+f.currentSD*m.currentN[i]
	w := math.Sqrt(wx*wx + wy*wy)
	down, side := m.downA[i]*w+m.downB[i], m.sideA[i]*w+m.sideB[i]
	if w > 0 && down > floor {
		vx += (down*wx + side*wy) / w
		vy += (down*wy - side*wx) / w
	}
	return vx, vy
}
