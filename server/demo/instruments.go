package demo

import (
	"strings"

	"wakeback/drift/nav"
	"wakeback/drift/weather"
	"wakeback/server/feed/nmea"
)

// sentences are what the instruments say once a second. The apparent wind, the
// log and the compass carry the small errors that instruments have.
func (w *world) sentences() string {
	jitter := func(sd float64) float64 { return sd * w.rng.NormFloat64() }
	heading := nav.True(w.heading + jitter(0.5))
	stw := max(0, w.speedMs/nav.MsPerKn+jitter(0.05))
	over := w.ground()
	noisy := w.place.Shift(nav.Offset{EastM: jitter(1.5), NorthM: jitter(1.5)})
	through := nav.Towards(heading, stw)
	angle, apparentMs := weather.ApparentWind(w.wind(), heading, through)
	var b strings.Builder
	b.WriteString(nmea.EncodeRMC("GP", w.at, nmea.RMC{
		Quality: nmea.Autonomous, Position: nav.Some(noisy), SogKn: nav.Some(over.SpeedKn()), CogTrue: over.Direction(),
	}))
	b.WriteString(nmea.EncodeZDA("GP", w.at))
	b.WriteString(nmea.EncodeHDT("HE", nmea.HDT{HeadingTrue: nav.Some(heading)}))
	b.WriteString(nmea.EncodeVHW("VW", nmea.VHW{HeadingTrue: nav.Some(heading), StwKn: nav.Some(stw)}))
	b.WriteString(nmea.EncodeMWV("WI", nmea.MWV{Angle: angle, SpeedKn: nav.Some(apparentMs / nav.MsPerKn)}))
	b.WriteString(nmea.EncodeMTW("YX", nmea.MTW{WaterC: nav.Some(11.8)}))
	b.WriteString(nmea.EncodeDPT("SD", nmea.DPT{BelowTransducerM: nav.Some(31 + jitter(0.2)), OffsetM: nav.Some(0.6)}))
	return b.String()
}
