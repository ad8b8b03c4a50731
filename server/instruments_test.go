package server

import (
	"net"
	"testing"
	"time"

	"github.com/gorilla/websocket"

	"wakeback/drift/nav"
	"wakeback/server/feed/nmea"
)

// talker is an instrument on a TCP socket that says the same lines, with the
// time of the moment, ten times a second to everyone who connects.
func talker(t *testing.T, lines func(now time.Time) []string) string {
	t.Helper()
	ln, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { ln.Close() })
	go func() {
		for {
			c, err := ln.Accept()
			if err != nil {
				return
			}
			go func() {
				defer c.Close()
				for {
					for _, line := range lines(time.Now()) {
						if _, err := c.Write([]byte(line)); err != nil {
							return
						}
					}
					time.Sleep(100 * time.Millisecond) // the pace of an instrument
				}
			}()
		}
	}()
	return "tcp://" + ln.Addr().String()
}

// TestFromInstrumentToArrow is the thin line end to end: sentences over a real
// socket, a mark without a position, and the arrow on a stream.
func TestFromInstrumentToArrow(t *testing.T) {
	moving := nav.PositionFromDegrees(54.1, 7.9)
	url := talker(t, func(now time.Time) []string {
		return []string{
			nmea.EncodeRMC("GP", now, nmea.RMC{Position: nav.Some(moving), SogKn: nav.Some(6.0), CogTrue: nav.Some(nav.TrueDeg(30)), Quality: nmea.Autonomous}),
			nmea.EncodeHDT("HE", nmea.HDT{HeadingTrue: nav.Some(nav.TrueDeg(33))}),
		}
	})
	r := runServer(t, t.TempDir(), func(c *Config) { c.Feeds, c.OpenPairing = []string{url}, true })
	conn, _, err := websocket.DefaultDialer.Dial("ws://"+r.Addr.String()+api+"/stream", nil)
	if err != nil {
		t.Fatal(err)
	}
	defer conn.Close()
	ear := &ear{t, conn}
	fix := ear.wait("fix", func(m map[string]any) bool { return m["source"] == "vessel" && m["heading_deg"] != nil })
	if fix["sog_kn"] != 6.0 || fix["cog_deg"] != 30.0 || fix["heading_deg"] != 33.0 || fix["stale"] != false {
		t.Errorf("fix = %v", fix)
	}
	if status, body := r.post(t, api+"/marks", "", map[string]any{"id": newID(), "at": time.Now()}); status != 201 {
		t.Fatalf("mark = %d %s", status, body)
	}
	steer := ear.wait("steer", func(m map[string]any) bool { return m["mark"] != nil })
	mark := steer["mark"].(map[string]any)
	position := mark["position"].(map[string]any)
	// EncodeRMC has five decimals of a minute: 1e-5/60 degree.
	if lat, lon := position["lat"].(float64), position["lon"].(float64); abs(lat-54.1) > 1e-6 || abs(lon-7.9) > 1e-6 {
		t.Errorf("marked at %v, want the vessel's 54.1, 7.9", position)
	}
	if mark["source"] != "vessel" || steer["datum"] == nil {
		t.Errorf("steer = %v, want a mark by the vessel's fix, and a datum", steer)
	}
}

// TestOverboardSystemRaisesAMark: the sentence of the vessel's own system goes
// all the way from the socket to the screens, without a hand.
func TestOverboardSystemRaisesAMark(t *testing.T) {
	line := nmea.Encode('$', "VRMOB,12345,A,021407.00,1,010626,021407.00,5406.06000,N,00754.06000,E,,,972123456,0")
	if _, _, err := nmea.Parse(line); err != nil {
		t.Fatal(err)
	}
	url := talker(t, func(time.Time) []string { return []string{line} })
	r := runServer(t, t.TempDir(), func(c *Config) { c.Feeds, c.OpenPairing = []string{url}, true })
	conn, _, err := websocket.DefaultDialer.Dial("ws://"+r.Addr.String()+api+"/stream", nil)
	if err != nil {
		t.Fatal(err)
	}
	defer conn.Close()
	e := (&ear{t, conn}).wait("event", nil)["event"].(map[string]any)
	if e["kind"] != "marked" || e["by"] != "beacon 972123456" || e["body"].(map[string]any)["source"] != "beacon" {
		t.Errorf("event = %v, want a mark by beacon 972123456", e)
	}
}

func abs(x float64) float64 { return max(x, -x) }
