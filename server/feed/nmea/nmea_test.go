package nmea

import (
	"encoding/csv"
	"errors"
	"fmt"
	"math"
	"os"
	"reflect"
	"strings"
	"testing"
	"time"

	"pgregory.net/rapid"

	"wakeback/drift/nav"
)

type example struct {
	sentence, checksum string
	printedOK          bool
}

func examples(t testing.TB) []example {
	t.Helper()
	text, err := os.ReadFile("testdata/examples.csv")
	if err != nil {
		t.Fatal(err)
	}
	r := csv.NewReader(strings.NewReader(string(text)))
	r.Comment = '#'
	rows, err := r.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var out []example
	for _, row := range rows[1:] {
		out = append(out, example{row[0], row[1], row[2] == "yes"})
	}
	return out
}

// The sentences that are not decoded here, because nothing on board needs them
// from others: routes and autopilot words are what this program will send.
var notDecoded = []string{"WPL", "RTE", "RMB", "APB", "XTE", "BOD", "BWC", "TTM"}

// Every published sentence with a right checksum is read, and the five that
// were published with a wrong one are refused.
func TestPublishedSentences(t *testing.T) {
	good, bad := 0, 0
	for _, ex := range examples(t) {
		s, body, err := Parse(ex.sentence)
		switch {
		case !ex.printedOK:
			bad++
			if !errors.Is(err, ErrChecksum) || !strings.Contains(err.Error(), ex.checksum) {
				t.Errorf("%s: %v, want a checksum error that names %s", ex.sentence, err, ex.checksum)
			}
		case contains(notDecoded, s.Formatter):
			good++
			if !errors.Is(err, ErrUnknown) {
				t.Errorf("%s: %v", ex.sentence, err)
			}
		case err != nil || body == nil:
			t.Errorf("%s: %v", ex.sentence, err)
		default:
			good++
		}
		body2 := ex.sentence[1:strings.LastIndexByte(ex.sentence, '*')]
		if got := Encode(ex.sentence[0], body2); !strings.HasSuffix(strings.TrimSpace(got), "*"+ex.checksum) {
			t.Errorf("Encode(%s) = %q, want checksum %s", body2, got, ex.checksum)
		}
	}
	if good < 25 || bad != 5 {
		t.Errorf("%d good and %d bad sentences", good, bad)
	}
}

func contains(list []string, s string) bool {
	for _, x := range list {
		if x == s {
			return true
		}
	}
	return false
}

func near(t *testing.T, what string, got, want, tolerance float64) {
	t.Helper()
	if math.IsNaN(got) || math.Abs(got-want) > tolerance {
		t.Errorf("%s = %v, want %v", what, got, want)
	}
}

func decode[T any](t *testing.T, line string) *T {
	t.Helper()
	_, body, err := Parse(line)
	if err != nil {
		t.Fatalf("%s: %v", line, err)
	}
	b, ok := any(body).(*T)
	if !ok {
		t.Fatalf("%s is a %T", line, body)
	}
	return b
}

// The decode that stands beside the published sentences in the table.
func TestPublishedValues(t *testing.T) {
	rmc := decode[RMC](t, "$GNRMC,220516,A,5133.82,N,00042.24,W,173.8,231.8,130694,004.2,W*6E")
	p := rmc.Position.Or(nav.Position{})
	near(t, "latitude", p.LatDeg(), 51.563667, 5e-7)
	near(t, "longitude", p.LonDeg(), -0.704, 5e-7)
	near(t, "speed", rmc.SogKn.Or(-1), 173.8, 0)
	near(t, "course", float64(rmc.CogTrue.Or(-1)), 231.8, 0)
	near(t, "variation", float64(rmc.Variation.Or(0)), -4.2, 1e-12)
	if d := rmc.Date.Or(Date{}); d != (Date{1994, time.June, 13}) {
		t.Errorf("date = %+v", d)
	}
	still := decode[RMC](t, "$GNRMC,001031.00,A,4404.13993,N,12118.86023,W,0.146,,100117,,,A*7B")
	if still.CogTrue.IsSet() || still.Variation.IsSet() {
		t.Errorf("an empty course or variation is there: %+v", still)
	}
	gga := decode[GGA](t, "$GNGGA,203415.000,6325.6138,N,01021.4290,E,1,8,2.42,72.5,M,41.5,M,,*7C")
	near(t, "HDOP", gga.HDOP.Or(0), 2.42, 0)
	near(t, "GGA latitude", gga.Position.Or(nav.Position{}).LatDeg(), 63.426897, 5e-7)
	hdg := decode[HDG](t, "$HCHDG,98.3,0.1,E,12.6,W*56")
	near(t, "sensor, deviation and variation", float64(hdg.HeadingMag().Or(0).True(hdg.Variation.Or(0))), 85.8, 1e-9)
	vbw := decode[VBW](t, "$VMVBW,-7.1,0.1,A,,,V,,V,,V*65")
	near(t, "astern", vbw.WaterAheadKn.Or(0), -7.1, 0)
	if vbw.GroundAheadKn.IsSet() {
		t.Error("an invalid ground speed is there")
	}
	near(t, "true heading", float64(decode[HDT](t, "$GPHDT,274.07,T*03").HeadingTrue.Or(0)), 274.07, 1e-9)
	near(t, "speed through water", decode[VHW](t, "$VWVHW,45.0,T,43.0,M,3.5,N,6.4,K*56").StwKn.Or(0), 3.5, 0)
	near(t, "set", float64(decode[VDR](t, "$IIVDR,10.1,T,12.3,M,1.2,N*3A").SetTrue.Or(0)), 10.1, 0)
	near(t, "wind", decode[MWV](t, "$WIMWV,12.1,T,10.1,N,A*27").SpeedKn.Or(0), 10.1, 0)
	near(t, "true wind", float64(decode[MWD](t, "$WIMWD,302.4,T,289.6,M,10.5,N,5.4,M*6F").FromTrue.Or(0)), 302.4, 1e-9)
	near(t, "water", decode[MTW](t, "$INMTW,17.9,C*1B").WaterC.Or(0), 17.9, 0)
	near(t, "depth", decode[DPT](t, "$INDPT,2.3,0.0*46").BelowTransducerM.Or(0), 2.3, 0)
	if m := decode[MOB](t, Encode('$', "IIMOB,001A4,T,101530,1,011226,101528,5015.00,N,00407.50,W,123,0.4,235012345,1")); m.Status != MOBTest {
		t.Errorf("a test is %c", m.Status)
	}
}

// Absent is never zero, and no fix is no position.
func TestAbsentIsNotZero(t *testing.T) {
	line := func(body string) string { return Encode('$', body) }
	if h := decode[HDT](t, line("HEHDT,,T")); h.HeadingTrue.IsSet() {
		t.Error("an empty heading is there")
	}
	if r := decode[RMC](t, line("GPRMC,001031,V,,,,,,,100117,,")); r.Position.IsSet() || r.Quality != NoFix {
		t.Errorf("no fix: %+v", r)
	}
	if r := decode[RMC](t, line("GPRMC,001031,V,5133.82,N,00042.24,W,3.0,20.0,100117,,")); r.Position.IsSet() || r.SogKn.IsSet() {
		t.Errorf("a position marked not valid is used: %+v", r)
	}
	if g := decode[GGA](t, line("GPGGA,001031,5133.82,N,00042.24,W,0,,,,M,,M,,")); g.Position.IsSet() {
		t.Error("a position of quality 0 is used")
	}
	if w := decode[MWV](t, line("WIMWV,12.1,R,10.1,N,V")); w.SpeedKn.IsSet() || w.Angle.IsSet() {
		t.Error("a wind marked not valid is used")
	}
}

// Bad input of each sort says what it is, and where.
func TestRefusals(t *testing.T) {
	line := func(body string) string { return Encode('$', body) }
	tests := map[string]struct {
		line string
		is   error
		says string
	}{
		"nothing":           {"", ErrMalformed, ""},
		"noise":             {"\x00\xff\x13garbage", ErrMalformed, ""},
		"no checksum":       {"$GPHDT,274.07,T", ErrNoChecksum, "checksum"},
		"half a checksum":   {"$GPHDT,274.07,T*0", ErrMalformed, ""},
		"latitude 91":       {line("GPGLL,9100.00,N,00042.24,W,001031,A"), ErrMalformed, "latitude"},
		"61 minutes":        {line("GPGLL,5161.00,N,00042.24,W,001031,A"), ErrMalformed, "latitude"},
		"no hemisphere":     {line("GPGLL,5133.00,,00042.24,W,001031,A"), ErrMalformed, "hemisphere"},
		"speed as text":     {line("GPRMC,001031,A,5133.82,N,00042.24,W,fast,20.0,100117,,"), ErrMalformed, "speed"},
		"course 400":        {line("GPRMC,001031,A,5133.82,N,00042.24,W,3.0,400.0,100117,,"), ErrMalformed, "course"},
		"31 February":       {line("GPRMC,001031,A,5133.82,N,00042.24,W,3.0,20.0,310217,,"), ErrMalformed, "date"},
		"25 o'clock":        {line("GPRMC,250000,A,5133.82,N,00042.24,W,3.0,20.0,100117,,"), ErrMalformed, "time"},
		"a line too long":   {"$GPHDT," + strings.Repeat("1", 600) + ",T*00", ErrMalformed, "512"},
		"infinity":          {line("INMTW,Inf,C"), ErrMalformed, "water"},
		"unknown formatter": {line("GPXYZ,1,2"), ErrUnknown, ""},
	}
	for name, tt := range tests {
		if _, _, err := Parse(tt.line); !errors.Is(err, tt.is) || !strings.Contains(strings.ToLower(fmt.Sprint(err)), tt.says) {
			t.Errorf("%s: %v, want %v and %q", name, err, tt.is, tt.says)
		}
	}
}

// What is written is read back, to the printed digits.
func TestEncodeThenParse(t *testing.T) {
	rapid.Check(t, func(rt *rapid.T) {
		at := time.Unix(rapid.Int64Range(946684800, 3000000000).Draw(rt, "time"), 0).UTC()
		want := nav.PositionFromDegrees(rapid.Float64Range(-89.99, 89.99).Draw(rt, "lat"), rapid.Float64Range(-179.99, 179.99).Draw(rt, "lon"))
		kn, course := rapid.Float64Range(0, 40).Draw(rt, "speed"), rapid.Float64Range(0, 359.9).Draw(rt, "course")
		text := EncodeRMC("GP", at, RMC{Quality: Autonomous, Position: nav.Some(want), SogKn: nav.Some(kn), CogTrue: nav.Some(nav.True(course))})
		_, body, err := Parse(text)
		if err != nil {
			rt.Fatalf("%q: %v", text, err)
		}
		r := body.(*RMC)
		got, ok := r.Position.Get()
		if !ok || nav.Inverse(got, want).RangeM > 0.3 { // four decimals of a minute: 0.19 m, half of it each way and axis
			rt.Fatalf("%q: %v, want %v", text, got, want)
		}
		if math.Abs(r.SogKn.Or(-1)-kn) > 0.06 || math.Abs(r.CogTrue.Or(0).Minus(nav.True(course))) > 0.06 {
			rt.Fatalf("%q: %v kn on %v", text, r.SogKn, r.CogTrue)
		}
		if moment := r.Time.Or(0).On(r.Date.Or(Date{})); !moment.Equal(at) && at.Year() < 2080 {
			rt.Fatalf("%q: %v, want %v", text, moment, at)
		}
	})
}

// Whatever comes on the line, reading it never panics, what is read has only
// finite values, and the same line is read the same way again.
func FuzzParse(f *testing.F) {
	for _, ex := range examples(f) {
		f.Add(ex.sentence)
	}
	f.Add("$GPRMC,,,,,,,,,,,*00")
	f.Add("\\s:x*00\\$GPHDT,1,T*2A")
	f.Fuzz(func(t *testing.T, line string) {
		for _, rule := range []ChecksumRule{ChecksumRequired, ChecksumOptional} {
			d := Decoder{Rule: rule}
			_, a, errA := d.Parse(line)
			if errA != nil {
				continue
			}
			first := reflect.ValueOf(a).Elem().Interface()
			_, b, errB := d.Parse(line)
			if errB != nil || !reflect.DeepEqual(first, reflect.ValueOf(b).Elem().Interface()) {
				t.Fatalf("%q is read two ways", line)
			}
			if r, ok := a.(*RMC); ok {
				if p, ok := r.Position.Get(); ok && p.Validate() != nil {
					t.Fatalf("%q: position %v", line, p)
				}
			}
		}
	})
}

// BenchmarkParse reads the published sentences. Aim: over a million a second
// on one core, so under 1000 ns each.
func BenchmarkParse(b *testing.B) {
	var lines []string
	for _, ex := range examples(b) {
		if ex.printedOK {
			lines = append(lines, ex.sentence)
		}
	}
	var d Decoder
	i := 0
	b.ReportAllocs()
	for b.Loop() {
		_, _, _ = d.Parse(lines[i%len(lines)])
		i++
	}
}
