package feed

import (
	"context"
	"errors"
	"fmt"
	"net"
	"os"
	"os/exec"
	"path/filepath"
	"runtime"
	"testing"
	"time"

	"go.uber.org/goleak"

	"wakeback/drift/nav"
	"wakeback/server/feed/nmea"
)

func TestMain(m *testing.M) { goleak.VerifyTestMain(m) }

// running starts feeds and stops them at the end of the test.
func running(t *testing.T, urls ...string) *Feeds {
	t.Helper()
	f, err := New(Config{URLs: urls})
	if err != nil {
		t.Fatal(err)
	}
	ctx, cancel := context.WithCancel(t.Context())
	done := make(chan error, 1)
	go func() { done <- f.Run(ctx) }()
	t.Cleanup(func() {
		cancel()
		if err := <-done; !errors.Is(err, context.Canceled) && err != nil {
			t.Errorf("run: %v", err)
		}
	})
	return f
}

func nextFix(t *testing.T, f *Feeds) nav.Fix {
	t.Helper()
	select {
	case u := <-f.Updates():
		fix, ok := u.Fix.Get()
		if !ok {
			t.Fatalf("update %+v", u)
		}
		return fix
	case <-time.After(10 * time.Second):
		t.Fatalf("no fix; status %+v", f.Status())
		return nav.Fix{}
	}
}

// until waits for the first feed to be in some state.
func until(t *testing.T, f *Feeds, is func(SourceStatus) bool) SourceStatus {
	t.Helper()
	for deadline := time.Now().Add(10 * time.Second); time.Now().Before(deadline); runtime.Gosched() {
		if s := f.Status()[0]; is(s) {
			return s
		}
	}
	t.Fatalf("status stays %+v", f.Status()[0])
	return SourceStatus{}
}

func rmcAt(latDeg float64, second int) string {
	return nmea.EncodeRMC("GP", time.Now().Add(time.Duration(second)*time.Second), nmea.RMC{
		Quality: nmea.Autonomous, Position: nav.Some(nav.PositionFromDegrees(latDeg, 7.9)),
		SogKn: nav.Some(6.0), CogTrue: nav.Some(nav.TrueDeg(290)),
	})
}

// A plotter on TCP: its fix is the vessel's; it breaks off, comes back, and
// goes on; a wrong checksum is counted and not believed.
func TestTCPFeedComesBack(t *testing.T) {
	ln, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	defer ln.Close()
	f := running(t, "tcp://"+ln.Addr().String())
	for round := range 2 {
		c, err := ln.Accept()
		if err != nil {
			t.Fatal(err)
		}
		lat := 54.1 + float64(round)*0.0001
		fmt.Fprint(c, "$GPRMC,nonsense*00\r\n", rmcAt(lat, round))
		if got := nextFix(t, f); nav.Inverse(got.Position, nav.PositionFromDegrees(lat, 7.9)).RangeM > 1 || got.SogKn.Or(0) != 6 {
			t.Fatalf("round %d: fix %+v", round, got)
		}
		c.Close()
	}
	s := f.Status()[0]
	if s.Good != 2 || s.Checksum != 2 {
		t.Errorf("status = %+v", s)
	}
	if w, ok := f.Vessel(time.Now()).Where().Get(); !ok || w.DeadReckoned {
		t.Errorf("where = %+v, %t", w, ok)
	}
}

func TestUDPFeed(t *testing.T) {
	f := running(t, "udp://127.0.0.1:0")
	c, err := net.Dial("udp", until(t, f, func(s SourceStatus) bool { return s.Address != "" }).Address)
	if err != nil {
		t.Fatal(err)
	}
	defer c.Close()
	fmt.Fprint(c, rmcAt(54.1, 0))
	nextFix(t, f)
}

func TestFileFeedReplaysToItsEnd(t *testing.T) {
	path := filepath.Join(t.TempDir(), "recording.nmea")
	at := time.Date(2026, 6, 1, 2, 0, 0, 0, time.UTC)
	text := "# invented\n"
	for i := range 3 {
		text += at.Add(time.Duration(i)*time.Second).Format(time.RFC3339Nano) + " " + rmcAt(54.1+float64(i)*0.00002, i)
	}
	if err := os.WriteFile(path, []byte(text), 0o600); err != nil {
		t.Fatal(err)
	}
	f := running(t, "file:"+path+"?pace=0")
	for range 3 {
		nextFix(t, f)
	}
	if v := f.Vessel(time.Now()); !v.Replay {
		t.Errorf("a replay is shown as live")
	}
}

// A feed that cannot be opened says why, and does not stop another.
func TestFailedFeedSaysWhy(t *testing.T) {
	ln, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	defer ln.Close()
	f := running(t, "file:/no/such/recording", "tcp://"+ln.Addr().String())
	c, err := ln.Accept()
	if err != nil {
		t.Fatal(err)
	}
	defer c.Close()
	fmt.Fprint(c, rmcAt(54.1, 0))
	nextFix(t, f)
	if s := until(t, f, func(s SourceStatus) bool { return s.State == Failed }); s.Reason == "" {
		t.Errorf("status = %+v", s)
	}
}

func TestBadURLs(t *testing.T) {
	for _, raw := range []string{"", "tcp://", "tcp://host", "http://host:1", "serial:", "file:x?pace=-1", "tcp://host:99999"} {
		if _, err := New(Config{URLs: []string{raw}}); !errors.Is(err, ErrURL) {
			t.Errorf("%q: %v", raw, err)
		}
	}
}

func nextBeacon(t *testing.T, f *Feeds) Beacon {
	t.Helper()
	for {
		select {
		case u := <-f.Updates():
			if b, ok := u.Beacon.Get(); ok {
				return b
			}
		case <-time.After(10 * time.Second):
			t.Fatalf("no beacon; status %+v", f.Status())
		}
	}
}

// A person-overboard device that is active is told as one, with its place;
// one under test as a test; a flood of other stations does not bury it.
func TestBeaconsOverAIS(t *testing.T) {
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
	for range 2000 {
		fmt.Fprint(c, "!AIVDM,1,1,,A,15RTgt0PAso;90TKcjM8h6g208CQ,0*4A\r\n")
	}
	fmt.Fprint(c, "!AIVDM,1,1,,A,1>O5e@>P04we7P@Lh=L4lgvt0000,0*41\r\n")
	b := nextBeacon(t, f)
	if p, ok := b.Position.Get(); !ok || b.Test || b.MMSI != 972123456 || nav.Inverse(p, nav.PositionFromDegrees(50.25, -4.125)).RangeM > 1 {
		t.Errorf("active device: %+v", b)
	}
	fmt.Fprint(c, "!AIVDM,1,1,,A,1>O5e@?P00we7P@Lh=L>4?vt0000,0*4E\r\n")
	if b := nextBeacon(t, f); !b.Test || b.MMSI != 972123456 {
		t.Errorf("device under test: %+v", b)
	}
	fmt.Fprint(c, "$IIMOB,001A4,A,101530,1,011226,101528,5015.00,N,00407.50,W,123.4,0.4,235012345,0*50\r\n")
	if b := nextBeacon(t, f); b.Test || b.MMSI != 235012345 {
		t.Errorf("on-board system: %+v", b)
	}
	if n := len(f.Targets()); n != 1 {
		t.Errorf("%d targets", n)
	}
}

// A real pair of serial ports.
func TestSerialFeed(t *testing.T) {
	socat, err := exec.LookPath("socat")
	if err != nil {
		t.Skip("socat is not installed: it makes the pair of ports")
	}
	dir := t.TempDir()
	ours, theirs := filepath.Join(dir, "ours"), filepath.Join(dir, "theirs")
	cmd := exec.Command(socat, "pty,raw,echo=0,link="+ours, "pty,raw,echo=0,link="+theirs)
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { _ = cmd.Process.Kill(); _ = cmd.Wait() })
	var port *os.File
	for deadline := time.Now().Add(10 * time.Second); port == nil && time.Now().Before(deadline); runtime.Gosched() {
		port, _ = os.OpenFile(theirs, os.O_WRONLY, 0)
	}
	if port == nil {
		t.Fatal("socat made no ports")
	}
	defer port.Close()
	f := running(t, "serial:"+ours+"?baud=4800")
	until(t, f, func(s SourceStatus) bool { return s.State == Live || s.State == Silent })
	fmt.Fprint(port, rmcAt(54.1, 0))
	nextFix(t, f)
}
