package demo

import (
	"fmt"
	"math"
	"math/rand/v2"
	"time"

	"wakeback/drift"
	"wakeback/drift/nav"
	"wakeback/search/incident"
)

// who is one person of one incident.
type who struct {
	incident incident.IncidentID
	no       incident.PersonNo
}

// person is someone in the water. How the leeway differs from that of the
// class is this person's own and known to nobody.
type person struct {
	place  nav.Position
	factor float64 // of the class's speed
	offDeg float64 // from straight downwind
	class  drift.Class
	// held is where the person lies from the vessel, once her crew has hold of
	// them: they drift together.
	held nav.Opt[nav.Offset]
}

// How far one person's leeway may differ from the class's; our choice: the
// speed by a quarter, the direction anywhere within the divergence.
const factorSD = 0.25

func newPerson(at nav.Position, rng *rand.Rand) (*person, error) {
	class, err := drift.ClassByID(drift.DefaultClass)
	if err != nil {
		return nil, fmt.Errorf("put someone in the water: %w", err)
	}
	return &person{
		place: at, class: class,
		factor: math.Exp(factorSD * clamp(rng.NormFloat64(), 2)),
		offDeg: class.DivergenceDeg * (2*rng.Float64() - 1),
	}, nil
}

func (p *person) step(dt float64, wind, stream nav.Velocity) {
	over := drift.LeewayAt(p.class, wind).Downwind.Scale(p.factor).Rotate(p.offDeg).Add(stream)
	p.place = p.place.Shift(over.For(time.Duration(dt * float64(time.Second))))
}
