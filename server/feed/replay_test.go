package feed

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"net"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"github.com/google/go-cmp/cmp"

	"wakeback/drift/nav"
	"wakeback/server/feed/nmea"
)

// recording runs a recorder over lines and returns its file.
func recording(t *testing.T, c RecordConfig, lines ...recordLine) RecordStatus {
	t.Helper()
	r, err := newRecorder(c)
	if err != nil {
		t.Fatal(err)
	}
	ctx, cancel := context.WithCancel(t.Context())
	for _, l := range lines {
		r.write(l.at, l.feed, l.text)
	}
	cancel()
	if err := r.run(ctx); err != nil {
		t.Fatal(err)
	}
	return r.state()
}

// playAll replays a file at pace 0 into feeds that do nothing else.
func playAll(t *testing.T, path string) *Feeds {
	t.Helper()
	f := running(t, "file:"+path+"?pace=0")
	until(t, f, func(s SourceStatus) bool { return s.State == Ended })
	return f
}

// A voyage with two receivers, a compass with gaps, a jump, a wrong checksum
// and noise is recorded and replayed: the vessel is then, at any later moment,
// exactly what it was.
func TestReplayGivesTheSameState(t *testing.T) {
	var lines []recordLine
	say := func(at time.Time, feed int, text string) {
		lines = append(lines, recordLine{at, feed, strings.TrimSuffix(text, "\r\n")})
	}
	p := here
	for s := range 60 {
		at := start.Add(time.Duration(s)*time.Second + 123456789*time.Nanosecond)
		p, _ = nav.Direct(p, 290, 3)
		fix := nmea.RMC{Quality: nmea.Autonomous, Position: nav.Some(p), SogKn: nav.Some(6.0), CogTrue: nav.Some(nav.TrueDeg(290))}
		if s < 40 {
			say(at, 1, nmea.EncodeRMC("GP", at, fix))
		}
		if s == 20 {
			fix.Position = nav.Some(p.Shift(nav.Offset{NorthM: 9000}))
		}
		say(at, 2, nmea.EncodeRMC("GN", at, fix))
		if s%7 != 0 {
			say(at, 2, nmea.EncodeHDG("HC", nmea.HDG{SensorMag: nav.Some(nav.MagneticDeg(280)), Variation: nav.Some(nav.VariationDeg(4))}))
		}
		say(at, 2, nmea.EncodeVHW("VW", nmea.VHW{StwKn: nav.Some(5.5)}))
		say(at, 2, nmea.EncodeMWV("WI", nmea.MWV{Angle: nav.Some(nav.RelativeDeg(-30)), SpeedKn: nav.Some(15.0)}))
		say(at, 2, "$GPGLL,nonsense*00")
		say(at, 2, "\x00\xffnoise")
	}
	path := filepath.Join(t.TempDir(), "voyage.nmea")
	if st := recording(t, RecordConfig{Path: path}, lines...); st.Lines != uint64(len(lines)) || st.Dropped != 0 {
		t.Fatalf("recording = %+v", st)
	}

	live := newState() // what was live, taken in without any file
	var d nmea.Decoder
	for _, l := range lines {
		if s, body, err := d.Parse(l.text); err == nil {
			live.apply(said{src: sourceID(l.feed), at: l.at, line: l.at, sentence: s.Talker + s.Formatter}, body)
		}
	}
	f := playAll(t, path)
	for _, later := range []time.Duration{59500 * time.Millisecond, 63 * time.Second, 10 * time.Minute} {
		at := start.Add(later)
		want, got := live.snapshot(at), f.Vessel(at)
		if diff := cmp.Diff(stripped(t, want), stripped(t, got)); diff != "" {
			t.Errorf("%s later (-live +replayed):\n%s", later, diff)
		}
	}
	if s := f.Status()[0]; s.Checksum != 60 || s.Malformed != 60 {
		t.Errorf("status = %+v", s)
	}
}

// stripped is a vessel on the wire without the names of its feeds.
func stripped(t *testing.T, v Vessel) map[string]any {
	t.Helper()
	text, err := json.Marshal(v)
	if err != nil {
		t.Fatal(err)
	}
	var m map[string]any
	if err := json.Unmarshal(text, &m); err != nil {
		t.Fatal(err)
	}
	strip(m)
	delete(m, "replay")
	return m
}

func strip(v any) {
	switch v := v.(type) {
	case map[string]any:
		delete(v, "source")
		for _, x := range v {
			strip(x)
		}
	case []any:
		for _, x := range v {
			strip(x)
		}
	}
}

// Two feeds of a recording stay two.
func TestReplayKeepsFeedsApart(t *testing.T) {
	path := filepath.Join(t.TempDir(), "two.nmea")
	recording(t, RecordConfig{Path: path},
		recordLine{start, 1, "$GPHDT,274.07,T*03"},
		recordLine{start, 2, strings.TrimSpace(nmea.EncodeHDT("HE", nmea.HDT{HeadingTrue: nav.Some(nav.TrueDeg(20))}))})
	r, _ := playAll(t, path).Vessel(start).HeadingTrue.Get()
	if r.Value != 274.07 || r.Source != "file:"+path+"?pace=0#1" {
		t.Errorf("heading = %+v", r)
	}
}

// The files are rotated at their size, the oldest goes, and one that is there
// at the start is kept.
func TestRecordingIsBounded(t *testing.T) {
	dir := t.TempDir()
	path := filepath.Join(dir, "r.nmea")
	if err := os.WriteFile(path, []byte("# an older one\n"), 0o600); err != nil {
		t.Fatal(err)
	}
	var lines []recordLine
	for i := range 400 {
		lines = append(lines, recordLine{start.Add(time.Duration(i) * time.Second), 1, fmt.Sprintf("$GPHDT,%03d.0,T*00", i%360)})
	}
	const most = 2000
	recording(t, RecordConfig{Path: path, MaxBytes: most, Files: 3}, lines...)
	names, err := os.ReadDir(dir)
	if err != nil {
		t.Fatal(err)
	}
	if len(names) != 3 {
		t.Errorf("files = %v", names)
	}
	for _, n := range names {
		if info, _ := n.Info(); info.Size() > most {
			t.Errorf("%s has %d bytes", n.Name(), info.Size())
		}
	}
	text, _ := os.ReadFile(path)
	if !strings.HasSuffix(string(text), "$GPHDT,039.0,T*00\n") {
		t.Errorf("the newest file ends %q", text[max(0, len(text)-60):])
	}
	one := filepath.Join(t.TempDir(), "one")
	if err := os.WriteFile(one, []byte("# kept\n"), 0o600); err != nil {
		t.Fatal(err)
	}
	recording(t, RecordConfig{Path: one}, lines[0])
	if kept, _ := os.ReadFile(one + ".1"); string(kept) != "# kept\n" {
		t.Errorf("what was there is %q", kept)
	}
}

// A disk that cannot be written is said at the start; one that fails later
// stops nothing, and what is lost is counted.
func TestRecordingRefused(t *testing.T) {
	_, err := New(Config{Record: RecordConfig{Path: "/no/such/folder/r.nmea"}})
	if err == nil || !strings.Contains(err.Error(), "opening the recording") {
		t.Errorf("error = %v", err)
	}
	if _, err := os.Stat("/dev/full"); err != nil {
		t.Skip("no /dev/full here")
	}
	r, err := newRecorder(RecordConfig{Path: "/dev/full"})
	if err != nil {
		t.Fatal(err)
	}
	long := strings.Repeat("x", 5000) // past the buffer, so that the write is seen
	r.put(recordLine{start, 1, long})
	r.put(recordLine{start.Add(time.Second), 1, long})
	if st := r.state(); st.Dropped != 2 || !strings.Contains(st.Reason, "no space left") {
		t.Errorf("status = %+v", st)
	}
}

// played is what a player says of a recording.
func played(t *testing.T, pace float64, text string) (said []heard) {
	t.Helper()
	p := player{pace: pace, now: time.Now, say: func(h heard) { said = append(said, h) }}
	if err := p.all(t.Context(), strings.NewReader(text), nmea.ChecksumRequired); !errors.Is(err, errReplayed) {
		t.Fatal(err)
	}
	return said
}

// Bare sentences are paced by what they say of the time: those without one go
// with the one before, those before the first with the first.
func TestBareSentencesArePacedByThemselves(t *testing.T) {
	text := "# bare\n" + nmea.EncodeHDT("HE", nmea.HDT{HeadingTrue: nav.Some(nav.TrueDeg(10))})
	for s := range 3 {
		at := time.Date(2026, 6, 1, 23, 59, 59, 0, time.UTC).Add(time.Duration(s) * time.Second)
		if s == 0 {
			text += nmea.EncodeZDA("GP", at)
		} else {
			text += nmea.Encode(nmea.Parametric, "GPGLL,5400.0,N,00754.0,E,"+at.Format("150405")+",A,A")
		}
		text += nmea.EncodeHDT("HE", nmea.HDT{HeadingTrue: nav.Some(nav.TrueDeg(float64(s)))})
	}
	first := time.Date(2026, 6, 1, 23, 59, 59, 0, time.UTC)
	for i, h := range played(t, 0, text) {
		if want := first.Add(time.Duration(max(0, (i-1)/2)) * time.Second); !h.line.Equal(want) || !h.at.Equal(want) {
			t.Errorf("line %d %s: at %s, on the line of time %s; want %s", i, h.text, h.at, h.line, want)
		}
	}
	began := time.Now()
	said := played(t, 20, text) // two seconds at twenty times the pace: 100 ms
	if d := said[len(said)-1].at.Sub(began); d < 100*time.Millisecond || d > 5*time.Second {
		t.Errorf("it took %s", d)
	}
	if said[0].at.Before(began) {
		t.Error("a replayed line is as old as its recording")
	}
}

// A recording without any time is said as fast as it can.
func TestNoTimeAtAll(t *testing.T) {
	if said := played(t, 1, strings.Repeat("$GPHDT,274.07,T*03\n", 3000)); len(said) != 3000 {
		t.Errorf("%d lines", len(said))
	}
}

func FuzzSplitRecorded(f *testing.F) {
	for _, s := range []string{
		"2026-06-01T02:00:00.123456789Z 1 $GPHDT,274.07,T*03", "2026-06-01T02:00:00Z $GPHDT,274.07,T*03",
		"$GPHDT,274.07,T*03", "2026-06-01T02:00:00Z 99 x", "", " ", "2026-06-01T02:00:00Z",
	} {
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, line string) {
		r := splitRecorded(line)
		if r.sub < 0 || r.sub >= subFeeds || !r.stamp && r.text != line {
			t.Fatalf("%q: %+v", line, r)
		}
		if !r.stamp || r.at.Year() < 1 || r.at.Year() > 9999 {
			return
		}
		again := splitRecorded(strings.TrimSuffix(string(recorded(recordLine{r.at, max(r.sub, 1), r.text})), "\n"))
		if !again.at.Equal(r.at) || again.text != printableAll(r.text) {
			t.Fatalf("%q: %+v, then %+v", line, r, again)
		}
	})
}

func printableAll(s string) string {
	b := []byte(s)
	for i, c := range b {
		if c < ' ' || c > '~' {
			b[i] = '?'
		}
	}
	return string(b)
}

// Whatever a stream brings, the state holds only what can be.
func FuzzFeedLines(f *testing.F) {
	f.Add("$GPRMC,020000.00,A,5400.00000,N,00754.00000,E,6.0,290.0,010626,,,A*5A\r\n$GPHDT,274.07,T*03\r\n")
	f.Add("!AIVDM,1,1,,A,1>O5e@>P04we7P@Lh=L4lgvt0000,0*41\r\n$HCHDG,98.3,0.1,E,12.6,W*56\r\n")
	f.Add("$IIMOB,001A4,A,101530,1,011226,101528,5015.00,N,00407.50,W,123.4,0.4,235012345,0*50\n")
	f.Fuzz(func(t *testing.T, text string) {
		feeds, err := New(Config{URLs: []string{"udp://:0?checksum=optional"}})
		if err != nil {
			t.Fatal(err)
		}
		_ = readLines(strings.NewReader(text), func(line string) {
			feeds.take(feeds.sources[0], heard{text: line, at: start, line: start})
		})
		v := feeds.Vessel(start)
		if _, err := json.Marshal(v); err != nil {
			t.Fatalf("the vessel cannot be told: %v", err)
		}
		if _, err := json.Marshal(feeds.Status()); err != nil {
			t.Fatal(err)
		}
	})
}

// Each kind of bad line, over a real socket: counted by what it is, with the
// words that a person gets.
func TestBadLinesSayWhy(t *testing.T) {
	tests := []struct{ line, want string }{
		{"$GPBOD,099.3,T,105.6,M,POINTB*01", "bad checksum: *01 at the end, expected *64"},
		{"$GPBOD,097.0,T,103.2,M,POINTB,POINTA*52", "bad checksum: *52 at the end, expected *4A"},
		{"$GPAPB,A,A,0.10,R,N,V,V,011,M,DEST,011,M,011,M*82", "bad checksum: *82 at the end, expected *3C"},
		{"$GPRMB,A,0.66,L,003,004,4917.24,N,12309.57,W,001.3,052.5,000.5,V*0B", "bad checksum: *0B at the end, expected *20"},
		{"$GPBWC,081837,,,,,,T,,M,,N*13", "bad checksum: *13 at the end, expected *3F"},
		{"$GPHDT,274.07,T", "no checksum: expected *03 at the end"},
		{"GPHDT,274.07,T*03", "malformed sentence: expected $ or ! at the start"},
		{nmea.Encode('$', "HEHDT,400.0,T"), `HDT: heading is "400.0", expected 0 to 360 degrees`},
		{nmea.Encode('$', "GPGLL,5460.0,N,00754.0,E,020000,A,A"), `GLL: latitude is "5460.0", expected ddmm.mm, 0000 to 9000`},
		{nmea.Encode('$', "INMTW,17.9,F"), `MTW: C after the water temperature is "F", expected one of C`},
		{"$GP" + strings.Repeat("X", nmea.MaxLine), "malformed sentence: 513 bytes, expected at most 512"},
		{"$GPHDT,27\x01,T*03", "malformed sentence: byte 0x01 is not printable ASCII"},
		{`\s:r,g:1-2$GPHDT,274.07,T*03`, `malformed sentence: tag block without its closing \`},
	}
	ln, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	defer ln.Close()
	f := running(t, "tcp://"+ln.Addr().String())
	c, err := ln.Accept()
	if err != nil {
		t.Fatal(err)
	}
	defer c.Close()
	for i, tt := range tests {
		fmt.Fprint(c, strings.TrimSuffix(tt.line, "\r\n"), "\r\n")
		s := until(t, f, func(s SourceStatus) bool { return s.Checksum+s.Malformed == uint64(i+1) })
		if s.LastError != tt.want || s.LastBad == "" {
			t.Errorf("%.40s: %q, want %q", tt.line, s.LastError, tt.want)
		}
	}
	if s := f.Status()[0]; s.Good != 0 || s.Checksum != 6 {
		t.Errorf("status = %+v", s)
	}
}

// Half a line at the end of a stream is not believed, even from a talker
// without checksums.
func TestHalfALine(t *testing.T) {
	var got []string
	err := readLines(strings.NewReader("$SDDPT,23.5,0.0\r\n$SDDPT,2"), func(s string) { got = append(got, s) })
	if err != nil || len(got) != 1 {
		t.Errorf("lines %q, %v", got, err)
	}
}

// What a person reads who mistypes the address of a feed.
func TestBadURLsSayWhatIsExpected(t *testing.T) {
	for raw, want := range map[string]string{
		"plotter":                      `no scheme, expected tcp://HOST:PORT, udp://:PORT, serial:/dev/NAME?baud=4800 or file:PATH?pace=1`,
		"http://host:1":                `scheme "http" is not known, expected tcp://HOST:PORT, udp://:PORT, serial:/dev/NAME?baud=4800 or file:PATH?pace=1`,
		"tcp:host:1":                   `expected tcp://HOST:PORT`,
		"tcp://host":                   `address "host", expected HOST:PORT`,
		"tcp://:10110":                 `no host, expected tcp://HOST:PORT`,
		"tcp://host:99999":             `port "99999", expected 1 to 65535`,
		"serial:":                      `no path, expected serial:/dev/NAME?baud=4800`,
		"serial:/dev/ttyUSB0?baud=12":  `baud "12", expected a speed such as 4800 or 38400`,
		"serial:/dev/ttyUSB0?bauds=12": `option "bauds" is not known for serial`,
		"file:x?pace=-1":               `pace "-1", expected 0 (as fast as it can) to 1000`,
		"file:x?pace=1&pace=2":         `option "pace" is given 2 times, expected once`,
		"udp://:1?checksum=no":         `checksum "no", expected required or optional`,
	} {
		_, err := ParseURL(raw)
		if !errors.Is(err, ErrURL) || err.Error() != fmt.Sprintf("not a feed: %q: %s", raw, want) {
			t.Errorf("%s: %v\nwant ... %s", raw, err, want)
		}
	}
}
