package nmea

import (
	"math"
	"strconv"
	"time"

	"wakeback/drift/nav"
)

// Encode makes a whole line of a sentence without its start and checksum, as in
// "GPHDT,274.07,T": it puts the start character before it and checksum and line
// end after it. It does not look at the fields.
func Encode(start byte, body string) string {
	return string(Append(make([]byte, 0, len(body)+6), start, body))
}

// Append is [Encode] onto dst.
func Append(dst []byte, start byte, body string) []byte {
	const hex = "0123456789ABCDEF"
	var sum byte
	for i := 0; i < len(body); i++ {
		sum ^= body[i]
	}
	dst = append(dst, start)
	dst = append(dst, body...)
	return append(dst, '*', hex[sum>>4], hex[sum&15], '\r', '\n')
}

// The writers below make one line each, for a talker of two letters. Absent
// values become empty fields. Positions have five decimals of a minute (2 cm),
// directions and speeds the decimals that instruments usually send.

// EncodeRMC writes position, speed, course, date and time. A position that is
// absent gives status V. The quality decides the mode letter; [NoFix] gives V.
func EncodeRMC(talker string, at time.Time, r RMC) string {
	w := writer(talker + "RMC")
	w.time(at)
	fix := r.Position.IsSet() && r.Quality != NoFix
	w.text(map[bool]string{true: "A", false: "V"}[fix])
	w.position(r.Position, fix)
	w.number(r.SogKn, 2)
	w.direction(r.CogTrue, 1)
	w.text(at.UTC().Format("020106"))
	v, has := r.Variation.Get()
	w.number(opt(math.Abs(float64(v)), has), 1)
	w.text(eastOrWest(float64(v), has))
	w.text(modeLetter(r.Quality, fix))
	return w.line()
}

// EncodeZDA writes date and time.
func EncodeZDA(talker string, at time.Time) string {
	w := writer(talker + "ZDA")
	w.time(at)
	w.text(at.UTC().Format("02,01,2006"))
	w.text("00,00")
	return w.line()
}

// EncodeHDT writes the true heading.
func EncodeHDT(talker string, h HDT) string {
	w := writer(talker + "HDT")
	w.direction(h.HeadingTrue, 1)
	w.text("T")
	return w.line()
}

// EncodeHDG writes a compass with deviation and variation.
func EncodeHDG(talker string, h HDG) string {
	w := writer(talker + "HDG")
	m, has := h.SensorMag.Get()
	w.direction(opt(nav.TrueDeg(m), has), 1)
	dev, has := h.DeviationDeg.Get()
	w.number(opt(math.Abs(dev), has), 1)
	w.text(eastOrWest(dev, has))
	v, has := h.Variation.Get()
	w.number(opt(math.Abs(float64(v)), has), 1)
	w.text(eastOrWest(float64(v), has))
	return w.line()
}

// EncodeVHW writes heading and speed through the water.
func EncodeVHW(talker string, v VHW) string {
	w := writer(talker + "VHW")
	w.direction(v.HeadingTrue, 1)
	w.text("T")
	m, has := v.HeadingMag.Get()
	w.direction(opt(nav.TrueDeg(m), has), 1)
	w.text("M")
	w.number(v.StwKn, 2)
	w.text("N")
	kn, has := v.StwKn.Get()
	w.number(opt(kn*nav.MetresPerNM/1000, has), 2)
	w.text("K")
	return w.line()
}

// EncodeMWV writes the wind as the bow sees it, in knots.
func EncodeMWV(talker string, m MWV) string {
	w := writer(talker + "MWV")
	a, has := m.Angle.Get()
	w.direction(opt(nav.True(float64(a)), has), 1)
	w.text(map[bool]string{true: "T", false: "R"}[m.True])
	w.number(m.SpeedKn, 1)
	w.text("N")
	w.text(map[bool]string{true: "A", false: "V"}[m.Angle.IsSet()])
	return w.line()
}

// EncodeMTW writes the temperature of the water.
func EncodeMTW(talker string, m MTW) string {
	w := writer(talker + "MTW")
	w.number(m.WaterC, 1)
	w.text("C")
	return w.line()
}

// EncodeDPT writes the depth.
func EncodeDPT(talker string, d DPT) string {
	w := writer(talker + "DPT")
	w.number(d.BelowTransducerM, 1)
	w.number(d.OffsetM, 1)
	return w.line()
}

// EncodeVDM writes one AIS fragment.
func EncodeVDM(talker string, v VDM) string {
	w := writer(talker + v.Formatter())
	w.text(strconv.Itoa(v.Fragments))
	w.text(strconv.Itoa(v.Fragment))
	if n, ok := v.Sequence.Get(); ok {
		w.text(strconv.Itoa(n))
	} else {
		w.text("")
	}
	if v.Channel == 0 {
		w.text("")
	} else {
		w.text(string(rune(v.Channel)))
	}
	w.text(v.Payload)
	w.text(strconv.Itoa(v.FillBits))
	return Encode(Encapsulated, string(w))
}

// writer collects the fields of a sentence.
type writer []byte

func (w *writer) text(s string) { *w = append(append(*w, ','), s...) }

func (w *writer) line() string { return Encode(Parametric, string(*w)) }

func (w *writer) number(v nav.Opt[float64], decimals int) {
	*w = append(*w, ',')
	if n, ok := v.Get(); ok {
		*w = strconv.AppendFloat(*w, n, 'f', decimals, 64)
	}
}

// direction writes 0 to 359.9: what rounds up to 360 is 0.
func (w *writer) direction(v nav.Opt[nav.TrueDeg], decimals int) {
	d, ok := v.Get()
	step := math.Pow10(decimals)
	w.number(opt(math.Mod(math.Round(float64(d)*step)/step, 360), ok), decimals)
}

func (w *writer) time(at time.Time) { w.text(at.UTC().Format("150405.00")) }

func (w *writer) position(p nav.Opt[nav.Position], fix bool) {
	pos, ok := p.Get()
	if !ok || !fix {
		w.text(",,,")
		return
	}
	w.coordinate(pos.LatDeg(), 2, "N", "S")
	w.coordinate(pos.LonDeg(), 3, "E", "W")
}

func (w *writer) coordinate(deg float64, degreeDigits int, positive, negative string) {
	hemisphere := positive
	if deg < 0 {
		deg, hemisphere = -deg, negative
	}
	// Whole units of 1e-5 minute, so that no minute ever rounds up to 60.
	units := int64(math.Round(deg * 60e5))
	d, m := units/60e5, units%60e5
	*w = append(*w, ',')
	*w = appendPadded(*w, d, degreeDigits)
	*w = appendPadded(*w, m/1e5, 2)
	*w = append(*w, '.')
	*w = appendPadded(*w, m%1e5, 5)
	w.text(hemisphere)
}

func appendPadded(dst []byte, v int64, width int) []byte {
	s := strconv.FormatInt(v, 10)
	for i := len(s); i < width; i++ {
		dst = append(dst, '0')
	}
	return append(dst, s...)
}

func eastOrWest(v float64, has bool) string {
	switch {
	case !has:
		return ""
	case v < 0:
		return "W"
	}
	return "E"
}

func modeLetter(q Quality, fix bool) string {
	if !fix {
		return "N"
	}
	return string("NSMEADPFR"[min(int(q), 8)])
}
