package demo

import (
	"fmt"
	"math/rand/v2"
	"strings"
	"time"

	"wakeback/drift/nav"
	truewind "wakeback/drift/weather"
	"wakeback/server/feed/nmea"
)

// The errors of her instruments, one standard deviation each; our choice,
// those of good ones.
const (
	fixErrorM      = 1.5
	compassErrDeg  = 0.7
	logErrorKn     = 0.06
	windErrorDeg   = 2.0
	windErrorKn    = 0.4
	aisEvery       = 10 * time.Second
	waterC, depthM = 11.8, 31.0
)

// instruments are what turns the truth into sentences.
type instruments struct {
	chance *rand.Rand
	last   nav.Fix // what was last said of her own place
	ais    time.Time
}

func newInstruments(seed uint64) *instruments {
	return &instruments{chance: rand.New(rand.NewPCG(seed, 2))}
}

func (i *instruments) off(sd float64) float64 { return sd * i.chance.NormFloat64() }

// sentences are what the instruments say once a second.
func (i *instruments) sentences(w *world) string {
	heading := w.hull.heading().Add(i.off(compassErrDeg))
	stw := max(0, w.hull.speedMs/nav.MsPerKn+i.off(logErrorKn))
	over := w.ground()
	i.last = nav.Fix{
		At: w.at, Position: w.hull.place.Shift(nav.Offset{EastM: i.off(fixErrorM), NorthM: i.off(fixErrorM)}),
		SogKn: nav.Some(over.SpeedKn()), CogTrue: over.Direction(),
	}
	var b strings.Builder
	b.WriteString(nmea.EncodeRMC("GP", w.at, nmea.RMC{
		Quality: nmea.Autonomous, Position: nav.Some(i.last.Position), SogKn: i.last.SogKn, CogTrue: i.last.CogTrue,
	}))
	b.WriteString(nmea.EncodeZDA("GP", w.at))
	b.WriteString(nmea.EncodeHDT("HE", nmea.HDT{HeadingTrue: nav.Some(heading)}))
	b.WriteString(nmea.EncodeVHW("VW", nmea.VHW{HeadingTrue: nav.Some(heading), StwKn: nav.Some(stw)}))
	b.WriteString(i.wind(w, heading, over))
	b.WriteString(nmea.EncodeMTW("YX", nmea.MTW{WaterC: nav.Some(waterC)}))
	b.WriteString(nmea.EncodeDPT("SD", nmea.DPT{BelowTransducerM: nav.Some(depthM + i.off(0.1)), OffsetM: nav.Some(0.6)}))
	if w.at.Sub(i.ais) >= aisEvery {
		i.ais = w.at
		for _, t := range others {
			b.WriteString(t.sentence(w.at))
		}
	}
	return b.String()
}

// wind is the apparent wind, and the true wind as such an instrument works it
// out from the motion over the ground.
func (i *instruments) wind(w *world, heading nav.TrueDeg, over nav.Velocity) string {
	wind := w.weather.wind(w.at)
	felt, ms := truewind.ApparentWind(wind, heading, over)
	kn := max(0, ms/nav.MsPerKn+i.off(windErrorKn))
	if angle, ok := felt.Get(); ok {
		felt = nav.Some(nav.RelativeDeg(nav.NormSignedDeg(float64(angle) + i.off(windErrorDeg))))
	}
	apparent := nmea.EncodeMWV("WI", nmea.MWV{Angle: felt, SpeedKn: nav.Some(kn)})
	towards, ok := wind.Direction().Get()
	if !ok {
		return apparent
	}
	from := float64(towards.Reciprocal().Add(i.off(windErrorDeg)))
	kn = max(0, wind.SpeedKn()+i.off(windErrorKn))
	return apparent + nmea.Encode(nmea.Parametric, fmt.Sprintf("WIMWD,%.1f,T,,M,%.1f,N,%.1f,M", from, kn, kn*nav.MsPerKn))
}
