package nmea

import (
	"fmt"
	"strings"
	"time"

	"wakeback/drift/nav"
)

// Decoder frames and decodes lines one after the other. What it returns points
// into the Decoder and holds until its next use. The zero Decoder is ready; it
// is not for two goroutines at once.
type Decoder struct {
	// Rule is what to do with lines that carry no checksum.
	Rule ChecksumRule

	rmc RMC
	gga GGA
	gll GLL
	gns GNS
	vtg VTG
	hdg HDG
	hdt HDT
	hdm HDM
	vhw VHW
	vbw VBW
	vdr VDR
	mwv MWV
	mwd MWD
	mtw MTW
	dpt DPT
	zda ZDA
	mob MOB
	vdm VDM
}

// Parse frames and decodes one line with checksum. What it returns is the
// caller's to keep.
func Parse(line string) (Sentence, Body, error) { return new(Decoder).Parse(line) }

// Parse frames and decodes one line. The sentence is returned as far as it was
// framed, also beside an error: [ErrUnknown] comes with a sound one.
func (d *Decoder) Parse(line string) (Sentence, Body, error) {
	s, err := Frame(line, d.Rule)
	if err != nil {
		return s, nil, err
	}
	b, err := d.Decode(s)
	return s, b, err
}

// Decode reads the fields of a framed sentence.
func (d *Decoder) Decode(s Sentence) (Body, error) {
	f := newFields(s)
	var b Body
	if s.Start == Encapsulated {
		b = d.decodeEncapsulated(s, &f)
	} else if s.Talker != "P" {
		b = d.decodeParametric(s, &f)
	}
	if b == nil {
		return nil, fmt.Errorf("%w: %s", ErrUnknown, clip(s.Formatter))
	}
	if f.err != nil {
		return nil, f.err
	}
	return b, nil
}

func (d *Decoder) decodeEncapsulated(s Sentence, f *fields) Body {
	if s.Formatter != "VDM" && s.Formatter != "VDO" {
		return nil
	}
	f.need(s, 6)
	d.vdm = f.vdm(s.Formatter == "VDO")
	return &d.vdm
}

// decodeParametric is one switch over all formatters: long, and flat.
func (d *Decoder) decodeParametric(s Sentence, f *fields) Body {
	switch s.Formatter {
	case "RMC":
		f.need(s, 9)
		d.rmc = f.rmc()
		return &d.rmc
	case "GGA":
		f.need(s, 6)
		d.gga = f.gga()
		return &d.gga
	case "GLL":
		f.need(s, 6)
		d.gll = f.gll()
		return &d.gll
	case "GNS":
		f.need(s, 6)
		d.gns = f.gns()
		return &d.gns
	case "VTG":
		f.need(s, 6)
		d.vtg = f.vtg()
		return &d.vtg
	case "HDG":
		f.need(s, 1)
		d.hdg = f.hdg()
		return &d.hdg
	case "HDT":
		f.need(s, 2)
		d.hdt = f.hdt()
		return &d.hdt
	case "HDM":
		f.need(s, 2)
		d.hdm = f.hdm()
		return &d.hdm
	case "VHW":
		f.need(s, 6)
		d.vhw = f.vhw()
		return &d.vhw
	case "VBW":
		f.need(s, 3)
		d.vbw = f.vbw()
		return &d.vbw
	case "VDR":
		f.need(s, 6)
		d.vdr = f.vdr()
		return &d.vdr
	case "MWV":
		f.need(s, 5)
		d.mwv = f.mwv()
		return &d.mwv
	case "MWD":
		f.need(s, 6)
		d.mwd = f.mwd()
		return &d.mwd
	case "MTW":
		f.need(s, 2)
		d.mtw = f.mtw()
		return &d.mtw
	case "DPT":
		f.need(s, 1)
		d.dpt = f.dpt()
		return &d.dpt
	case "ZDA":
		f.need(s, 4)
		d.zda = f.zda()
		return &d.zda
	case "MOB":
		f.need(s, 10)
		d.mob = f.mob()
		return &d.mob
	}
	return nil
}

func (f *fields) rmc() RMC {
	t := f.timeOfDay("time")
	status := f.letter("status", "AV")
	r := RMC{
		Time:     t,
		Position: f.position(),
		SogKn:    f.speed("speed over ground"),
		CogTrue:  f.trueDeg("course over ground"),
		Date:     f.date("date"),
	}
	v, has := f.eastPositive("variation").Get()
	r.Variation = opt(nav.VariationDeg(v), has)
	r.Quality = statusAndMode(status, f.letter("mode", qualityLetters))
	if r.Quality == NoFix {
		r.Position, r.SogKn, r.CogTrue = nav.None[nav.Position](), nav.None[float64](), nav.None[nav.TrueDeg]()
	}
	return r
}

func (f *fields) gga() GGA {
	g := GGA{
		Time:     f.timeOfDay("time"),
		Position: f.position(),
		Quality:  qualityOfGGA[f.count("quality", len(qualityOfGGA)-1).Or(0)],
	}
	g.Satellites, g.HDOP, g.AltitudeM, g.GeoidM = f.receiver()
	if g.Quality == NoFix {
		g.Position = nav.None[nav.Position]()
	}
	return g
}

// receiver reads satellites, HDOP and the two heights with their units.
func (f *fields) receiver() (sats nav.Opt[int], hdop, alt, geoid nav.Opt[float64]) {
	sats = f.count("satellites", 999)
	hdop = f.number("HDOP", 0, 1000, "0 to 1000")
	alt = f.number("altitude", -20000, 100000, "metres")
	if f.formatter == "GGA" {
		f.unit("altitude unit", "M", alt.IsSet())
	}
	geoid = f.number("geoid separation", -1000, 1000, "metres")
	if f.formatter == "GGA" {
		f.unit("geoid separation unit", "M", geoid.IsSet())
	}
	return sats, hdop, alt, geoid
}

func (f *fields) gll() GLL {
	g := GLL{Position: f.position(), Time: f.timeOfDay("time")}
	status := f.letter("status", "AV")
	g.Quality = statusAndMode(status, f.letter("mode", qualityLetters))
	if g.Quality == NoFix {
		g.Position = nav.None[nav.Position]()
	}
	return g
}

func (f *fields) gns() GNS {
	g := GNS{
		Time:     f.timeOfDay("time"),
		Position: f.position(),
		Quality:  f.gnsMode(),
	}
	g.Satellites, g.HDOP, g.AltitudeM, g.GeoidM = f.receiver()
	if g.Quality == NoFix {
		g.Position = nav.None[nav.Position]()
	}
	return g
}

// gnsMode reads one mode letter for each satellite system and returns the best.
func (f *fields) gnsMode() Quality {
	s, best := f.next(), NoFix
	for i := 0; i < len(s); i++ {
		if strings.IndexByte(qualityLetters, s[i]) < 0 {
			f.fail("mode", s, "letters of "+qualityLetters)
			return NoFix
		}
		best = max(best, qualityOfLetter(s[i]))
	}
	return best
}

func (f *fields) vtg() VTG {
	var v VTG
	v.CogTrue = f.trueDeg("course over ground")
	f.unit("T after the course", "T", v.CogTrue.IsSet())
	v.CogMag = f.magDeg("magnetic course over ground")
	f.unit("M after the magnetic course", "M", v.CogMag.IsSet())
	v.SogKn = f.knots("speed over ground")
	v.Quality = statusAndMode('A', f.letter("mode", qualityLetters))
	if v.Quality == NoFix {
		return VTG{}
	}
	return v
}

func (f *fields) hdg() HDG {
	h := HDG{
		SensorMag:    f.magDeg("compass heading"),
		DeviationDeg: f.eastPositive("deviation"),
	}
	v, has := f.eastPositive("variation").Get()
	h.Variation = opt(nav.VariationDeg(v), has)
	return h
}

func (f *fields) hdt() HDT {
	h := HDT{HeadingTrue: f.trueDeg("heading")}
	f.unit("T after the heading", "T", h.HeadingTrue.IsSet())
	return h
}

func (f *fields) hdm() HDM {
	h := HDM{HeadingMag: f.magDeg("heading")}
	f.unit("M after the heading", "M", h.HeadingMag.IsSet())
	return h
}

func (f *fields) vhw() VHW {
	var v VHW
	v.HeadingTrue = f.trueDeg("heading")
	f.unit("T after the heading", "T", v.HeadingTrue.IsSet())
	v.HeadingMag = f.magDeg("magnetic heading")
	f.unit("M after the magnetic heading", "M", v.HeadingMag.IsSet())
	v.StwKn = f.knots("speed through water")
	return v
}

func (f *fields) vbw() VBW {
	var v VBW
	v.WaterAheadKn, v.WaterStarboardKn = f.twoAxes("water speed ahead", "water speed to starboard")
	v.GroundAheadKn, v.GroundStarboardKn = f.twoAxes("ground speed ahead", "ground speed to starboard")
	return v
}

func (f *fields) twoAxes(aheadField, starboardField string) (ahead, starboard nav.Opt[float64]) {
	ahead = f.signedSpeed(aheadField)
	starboard = f.signedSpeed(starboardField)
	if f.letter("speed status", "AV") != 'A' {
		return nav.None[float64](), nav.None[float64]()
	}
	return ahead, starboard
}

func (f *fields) vdr() VDR {
	var v VDR
	v.SetTrue = f.trueDeg("set")
	f.unit("T after the set", "T", v.SetTrue.IsSet())
	v.SetMag = f.magDeg("magnetic set")
	f.unit("M after the magnetic set", "M", v.SetMag.IsSet())
	v.DriftKn = f.speed("drift")
	f.unit("N after the drift", "N", v.DriftKn.IsSet())
	return v
}

func (f *fields) mwv() MWV {
	angle := f.direction("wind angle")
	reference := f.unit("wind reference", "RT", angle.IsSet())
	speed := f.speed("wind speed")
	unit := f.unit("wind speed unit", "KMNS", speed.IsSet())
	if f.letter("status", "AV") != 'A' || f.err != nil {
		return MWV{True: reference == 'T'}
	}
	m := MWV{True: reference == 'T', SpeedKn: toKnots(speed, unit)}
	if a, ok := angle.Get(); ok {
		m.Angle = nav.Some(nav.RelativeDeg(nav.NormSignedDeg(a)))
	}
	return m
}

// metresPerStatuteMile is the international mile of 5280 international feet of
// 0.3048 m (1959 agreement).
const metresPerStatuteMile = 1609.344

// toKnots turns a speed by its unit letter: K km/h, M m/s, N knots, S statute
// miles an hour.
func toKnots(speed nav.Opt[float64], unit byte) nav.Opt[float64] {
	v, ok := speed.Get()
	switch unit {
	case 'K':
		v *= 1000 / nav.MetresPerNM
	case 'M':
		v /= nav.MsPerKn
	case 'S':
		v *= metresPerStatuteMile / nav.MetresPerNM
	}
	return opt(v, ok)
}

func (f *fields) mwd() MWD {
	var m MWD
	m.FromTrue = f.trueDeg("wind direction")
	f.unit("T after the wind direction", "T", m.FromTrue.IsSet())
	m.FromMag = f.magDeg("magnetic wind direction")
	f.unit("M after the magnetic wind direction", "M", m.FromMag.IsSet())
	m.SpeedKn = f.speed("wind speed")
	f.unit("N after the wind speed", "N", m.SpeedKn.IsSet())
	ms := f.speed("wind speed in m/s")
	f.unit("M after the wind speed in m/s", "M", ms.IsSet())
	if !m.SpeedKn.IsSet() {
		m.SpeedKn = toKnots(ms, 'M')
	}
	return m
}

func (f *fields) mtw() MTW {
	// Sea water freezes near -2 C; 60 C bounds a sensor in the sun. Our choice.
	m := MTW{WaterC: f.number("water temperature", -10, 60, "-10 to 60 degrees C")}
	f.unit("C after the water temperature", "C", m.WaterC.IsSet())
	return m
}

func (f *fields) dpt() DPT {
	return DPT{
		BelowTransducerM: f.number("depth", 0, 12000, "0 to 12000 m"),
		OffsetM:          f.number("offset", -100, 100, "-100 to 100 m"),
	}
}

func (f *fields) zda() ZDA {
	z := ZDA{Time: f.timeOfDay("time")}
	day := f.count("day", 31)
	month := f.count("month", 12)
	year := f.count("year", 9999)
	if !day.IsSet() && !month.IsSet() && !year.IsSet() {
		return z
	}
	d := Date{Year: year.Or(0), Month: time.Month(month.Or(0)), Day: day.Or(0)}
	if !d.valid() || d.Year < 1900+twoDigitPivot {
		f.fail("date", "no such day", "day, month and year from 1980 on")
	}
	z.Date = nav.Some(d)
	return z
}

func (f *fields) mob() MOB {
	m := MOB{
		Emitter:    f.emitter(),
		Status:     MOBStatus(f.unit("status", "AMTVE", true)),
		Activation: f.timeOfDay("activation time"),
	}
	m.FromEmitter = f.flagOrError("position source")
	m.Date = f.date("date")
	m.Time = f.timeOfDay("time of position")
	m.Position = f.position()
	m.CogTrue = f.trueDeg("course over ground")
	m.SogKn = f.speed("speed over ground")
	n, has := f.count("MMSI", 999_999_999).Get()
	m.MMSI = opt(uint32(n), has)
	m.BatteryLow = f.flagOrError("battery status")
	return m
}

// emitter reads the emitter's number, five hexadecimal digits at most.
func (f *fields) emitter() string {
	s := f.next()
	for i := 0; i < len(s); i++ {
		if hexDigit(s[i]) < 0 || len(s) > 5 {
			f.fail("emitter", s, "up to five hexadecimal digits")
			return ""
		}
	}
	return s
}

// flagOrError reads 0, 1, or 6 for an error, which is absent.
func (f *fields) flagOrError(field string) nav.Opt[bool] {
	switch f.letter(field, "016") {
	case '0':
		return nav.Some(false)
	case '1':
		return nav.Some(true)
	}
	return nav.None[bool]()
}

func (f *fields) vdm(own bool) VDM {
	v := VDM{Own: own}
	v.Fragments = f.needCount("number of fragments", 1, 9)
	v.Fragment = f.needCount("fragment", 1, 9)
	v.Sequence = f.count("sequence", 9)
	v.Channel = f.letter("channel", "AB12CD")
	v.Payload = f.next()
	v.FillBits = f.needCount("fill bits", 0, 5)
	if v.Fragment > v.Fragments {
		f.fail("fragment", itoa(v.Fragment), "at most the number of fragments, "+itoa(v.Fragments))
	}
	return v
}

// needCount reads a whole number that must be there.
func (f *fields) needCount(field string, lo, hi int) int {
	s := f.next()
	v, ok := parseDigits(s)
	if !ok || v < lo || v > hi {
		f.fail(field, s, itoa(lo)+" to "+itoa(hi))
		return lo
	}
	return v
}
