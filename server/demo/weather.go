package demo

import (
	"math"
	"time"

	"wakeback/drift/nav"
)

// The invented weather: a fresh south-westerly over a tidal stream that turns.
// All figures are our choice: enough wind and stream to see a drift within
// minutes.
const (
	windFromDeg, windKn    = 240, 14
	streamAlongDeg         = 100
	streamKn, streamSideKn = 0.9, 0.3
	eddyMs, eddySizeM      = 0.06, 900
	// tideS is the principal lunar semidiurnal period, 12.42 h.
	tideS = 12.42 * 3600
)

// weather is the wind and the stream. It does not change but with time and
// place; eddy is where its eddies stand.
type weather struct {
	plane nav.Plane
	eddy  float64
}

// wind is the true wind over the ground: it veers and backs over minutes, and
// gusts.
func (weather) wind(at time.Time) nav.Velocity {
	minutes := math.Mod(seconds(at), 86400) / 60
	from := windFromDeg + 6*math.Sin(minutes/11) + 2*math.Sin(minutes*3.1)
	kn := windKn + 1.5*math.Sin(minutes/3.7) + math.Sin(minutes*4.3)
	return nav.BlowingFrom(nav.True(from), kn)
}

// stream is the water's motion over the ground: one tide everywhere, with
// eddies that no instrument on the vessel can know elsewhere.
func (w weather) stream(at time.Time, p nav.Position) nav.Velocity {
	phase := 2 * math.Pi * math.Mod(seconds(at), tideS) / tideS
	along := nav.Towards(streamAlongDeg, streamKn).Scale(math.Cos(phase))
	across := nav.Towards(streamAlongDeg-90, streamSideKn).Scale(math.Sin(phase))
	o := w.plane.Offset(p)
	eddy := nav.Velocity{
		EastMs:  eddyMs * math.Sin(2*math.Pi*o.NorthM/eddySizeM+w.eddy),
		NorthMs: eddyMs * math.Cos(2*math.Pi*o.EastM/eddySizeM+w.eddy),
	}
	return along.Add(across).Add(eddy)
}

func seconds(at time.Time) float64 { return float64(at.UnixMilli()) / 1000 }
