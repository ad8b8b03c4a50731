package drift

import (
	"fmt"
	"math"
	"time"

	"wakeback/drift/nav"
)

// Model says how the errors of wind and current go on in time. The zero Model
// is the usual one.
//
// Each component of the error of a wind or current has the standard deviation
// of its history. A share of its variance stays the same for a member all
// through, as a wrong log or forecast does; the rest wanders with a correlation
// time (random flight). Breivik and Allen (2008) draw it anew each step (random
// walk; from memory), which makes the spread depend on the length of a step;
// Ullman et al. (2006) found random flight consistent with real drifters and
// random walk not.
type Model struct {
	// Persisting is the share of variance that stays: our choice of 0.5,
	// because the sources name both kinds and give no shares.
	Persisting nav.Opt[float64]
	// Correlation is the correlation time of the rest: our choice of 2 h, the
	// middle of the 1 to 3 h usual with random flight.
	Correlation time.Duration
	// Step is the length of a step: our choice of 60 s.
	Step time.Duration
}

// The usual model, and its limits.
const (
	usualPersisting  = 0.5
	usualCorrelation = 2 * time.Hour
	usualStep        = time.Minute
	maxStep          = 15 * time.Minute
)

func (m Model) filled() Model {
	m.Persisting = nav.Some(m.Persisting.Or(usualPersisting))
	if m.Correlation == 0 {
		m.Correlation = usualCorrelation
	}
	if m.Step == 0 {
		m.Step = usualStep
	}
	return m
}

// Options are how a cloud is made. The same options and case make the same
// cloud: to the last bit on one machine, within a bound on others.
type Options struct {
	Members int // 0 means [DefaultMembers]
	Seed    uint64
	Model   Model
}

// DefaultMembers is our choice, because at least 2000 are needed to agree very
// well with diffusion (Spaulding, Isaji, Hall and Allen 2006), and 5000 put the
// 95 % radius within 1 %.
const DefaultMembers = 5000

// MaxMembers bounds the memory of a cloud to some 20 MB. Our choice.
const MaxMembers = 100_000

// ErrOptions is wrapped by every refusal of options.
var ErrOptions = fmt.Errorf("%w: options of the cloud", ErrCase)

func (o Options) filled() (Options, error) {
	if o.Members == 0 {
		o.Members = DefaultMembers
	}
	o.Model = o.Model.filled()
	p := o.Model.Persisting.Or(0)
	switch {
	case o.Members < 1 || o.Members > MaxMembers:
		return o, fmt.Errorf("%w: members: expected 1 to %d", ErrOptions, MaxMembers)
	case !(p >= 0 && p <= 1):
		return o, fmt.Errorf("%w: persisting share: expected 0 to 1", ErrOptions)
	case o.Model.Correlation < time.Second:
		return o, fmt.Errorf("%w: correlation time: expected a second or more", ErrOptions)
	case o.Model.Step < time.Second || o.Model.Step > maxStep:
		return o, fmt.Errorf("%w: step: expected 1 s to 15 min", ErrOptions)
	}
	return o, nil
}

// Cloud is where someone may be now: many members, each with its own start,
// leeway and errors of wind and current, all of which it keeps.
type Cloud struct {
	c     Case
	opt   Options
	plane nav.Plane
	land  func(eastM, northM float64) bool // nil for open water
	begin time.Time                        // step 0 begins here
	steps int                              // whole steps done
	at    time.Time                        // what Points are for
	past  uint64                           // hash of everything about the past that was used
	env   []forcing                        // scratch for one chunk
	m     members
	// Points are the members at [Cloud.At], east and north of the origin.
	eastM, northM []float64
}

// members are held by field, not by member: the steps of one member run in
// registers.
type members struct {
	east, north                      []float64 // after the whole steps done
	windE, windN, currentE, currentN []float64 // errors now, in standard deviations
	pullE, pullN, drawE, drawN       []float64 // what the persisting share adds each step: wind, current
	downA, downB                     []float64 // downwind leeway: a × wind + b
	sideA, sideB, otherA, otherB     []float64 // crosswind leeway to the right, on this side and the other
	release                          []float64 // seconds after begin at which it fell
	key                              []uint64
	state                            []memberState
}

// memberState is what the coast has to do with a member.
type memberState uint8

const (
	unproven memberState = iota // started on land, by the coast's word, and has not been afloat
	afloat
	ashore
)

// NewCloud makes the cloud of a case at the moment of the fall. The error wraps
// [ErrCase].
func NewCloud(c Case, opt Options) (*Cloud, error) {
	opt, err := opt.filled()
	if err != nil {
		return nil, err
	}
	if err := c.Validate(); err != nil {
		return nil, err
	}
	cl := &Cloud{opt: opt, env: make([]forcing, 0, chunk)}
	cl.m.allocate(opt.Members)
	cl.eastM, cl.northM = make([]float64, opt.Members), make([]float64, opt.Members)
	cl.restart(c)
	return cl, nil
}

// restart puts every member at its start.
func (cl *Cloud) restart(c Case) {
	cl.c, cl.plane, cl.begin, cl.at = c, c.plane(), c.FellFrom, c.FellFrom
	cl.steps, cl.land = 0, nil
	if c.Coast != nil {
		cl.land = c.Coast.In(cl.plane)
	}
	cl.past = c.fingerprint()
	cl.drawAll()
	cl.look(0, forcing{})
}

func (m *members) allocate(n int) {
	for _, f := range []*[]float64{
		&m.east, &m.north, &m.windE, &m.windN, &m.currentE, &m.currentN, &m.pullE, &m.pullN, &m.drawE, &m.drawN,
		&m.downA, &m.downB, &m.sideA, &m.sideB, &m.otherA, &m.otherB, &m.release,
	} {
		*f = make([]float64, n)
	}
	m.key, m.state = make([]uint64, n), make([]memberState, n)
}

// N is the number of members.
func (cl *Cloud) N() int { return len(cl.eastM) }

// At is the moment the cloud stands for.
func (cl *Cloud) At() time.Time { return cl.at }

// Case is the case the cloud was made from.
func (cl *Cloud) Case() Case { return cl.c }

// Plane is the plane the members lie in.
func (cl *Cloud) Plane() nav.Plane { return cl.plane }

// Points are the members' places in [Cloud.Plane], metres east and north. They
// belong to the cloud, and hold until it moves on.
func (cl *Cloud) Points() (eastM, northM []float64) { return cl.eastM, cl.northM }

// Ashore is how many members have come to a coast; they stay in the cloud.
func (cl *Cloud) Ashore() int {
	n := 0
	for _, s := range cl.m.state {
		if s == ashore {
			n++
		}
	}
	return n
}

// Advance moves the cloud on to a moment. A moment before the one it stands for
// makes it anew up to there; a moment before the fall is that of the fall, when
// nothing has drifted. The result is the same however the way is divided.
func (cl *Cloud) Advance(to time.Time) error {
	age := to.Sub(cl.begin)
	if age > MaxAge {
		return fmt.Errorf("%w: time: expected at most %d days after the fall", ErrCase, int(MaxAge.Hours()/24))
	}
	step := cl.opt.Model.Step
	whole := int(max(age, 0) / step)
	if whole < cl.steps {
		cl.restart(cl.c)
	}
	for cl.steps < whole {
		cl.run(min(whole-cl.steps, chunk))
	}
	cl.at = cl.begin.Add(max(age, 0))
	rest := cl.at.Sub(cl.stepStart(cl.steps))
	var f forcing
	if rest > 0 {
		f = cl.forcing(cl.c, cl.steps)
	}
	cl.look(rest.Seconds(), f)
	return nil
}

// Update takes a case with other inputs. If they change nothing about the past
// the cloud used, it goes on from where it is; else it is made anew up to the
// moment it stands for, and Update returns true. The error wraps [ErrCase], and
// leaves the cloud as it was.
func (cl *Cloud) Update(c Case) (rebuilt bool, err error) {
	if err := c.Validate(); err != nil {
		return false, err
	}
	if cl.pastOf(c) == cl.past {
		cl.c = c
		return false, cl.Advance(cl.at)
	}
	at := cl.at
	cl.restart(c)
	return true, cl.Advance(at)
}

func (cl *Cloud) stepStart(step int) time.Time {
	return cl.begin.Add(time.Duration(step) * cl.opt.Model.Step)
}

// forcing is wind and current over one step.
func (cl *Cloud) forcing(c Case, step int) forcing {
	return c.forcingOver(cl.stepStart(step), cl.stepStart(step+1), cl.plane.Origin().LatDeg())
}

// coefficients are what the steps need of the model.
type coefficients struct {
	dt         float64 // seconds
	keep, kick float64 // of the errors, each step
	jibe       uint32  // of 2^32, each step that decides
	floor      float64 // downwind leeway at or below which there is none
	normals    *normalTable
}

// coefficients of the random flight: e' = keep e + (1-keep) bias + kick z, which
// keeps a variance of one; exact for any step.
func (cl *Cloud) coefficients() coefficients {
	m := cl.opt.Model
	p := m.Persisting.Or(0)
	keep := math.Exp(-m.Step.Seconds() / m.Correlation.Seconds())
	hours := m.Step.Hours() * jibeEvery
	floor := math.Inf(-1) // a regression may go to windward in a light wind
	if cl.c.Class.Derived() {
		floor = 0
	}
	return coefficients{
		dt: m.Step.Seconds(), keep: keep, kick: math.Sqrt((1 - p) * (1 - keep*keep)),
		// This chance keeps exp(-2 rate t), the correlation of the side in time,
		// for any step.
		jibe:  uint32(math.Round((1 - math.Exp(-2*cl.c.Class.JibesPerHour*hours)) / 2 * (1 << 32))),
		floor: floor, normals: normals(),
	}
}
