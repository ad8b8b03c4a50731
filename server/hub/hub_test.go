package hub

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"net"
	"net/http"
	"net/http/httptest"
	"slices"
	"strconv"
	"strings"
	"sync"
	"testing"
	"time"

	"github.com/gorilla/websocket"
	"go.uber.org/goleak"
	"pgregory.net/rapid"

	"wakeback/search/incident"
)

func TestMain(m *testing.M) { goleak.VerifyTestMain(m) }

// memory is a source in memory.
type memory struct {
	mu     sync.Mutex // guards events
	epoch  string
	events []incident.Event
}

func (m *memory) Epoch() string { return m.epoch }

func (m *memory) LastSeq() incident.Seq {
	m.mu.Lock()
	defer m.mu.Unlock()
	return incident.Seq(len(m.events))
}

func (m *memory) EventsAfter(after incident.Seq, limit int) ([]incident.Event, error) {
	m.mu.Lock()
	defer m.mu.Unlock()
	rest := m.events[min(int(after), len(m.events)):]
	return slices.Clone(rest[:min(limit, len(rest))]), nil
}

// add makes n events.
func (m *memory) add(n int, text string) []incident.Event {
	m.mu.Lock()
	defer m.mu.Unlock()
	from := len(m.events)
	for range n {
		seq := incident.Seq(len(m.events) + 1)
		m.events = append(m.events, incident.Event{
			ID: incident.EventID(fmt.Sprint("event-", seq)), Kind: incident.KindNote, Seq: seq,
			Body: json.RawMessage(`{"text":"` + text + `"}`),
		})
	}
	return slices.Clone(m.events[from:])
}

// stand is a hub on a real socket.
type stand struct {
	*Hub
	src *memory
	url string
}

type talk struct {
	mu   sync.Mutex // guards said
	said []string
}

func (k *talk) Message(_ context.Context, c *Client, kind string, raw []byte) {
	k.mu.Lock()
	defer k.mu.Unlock()
	k.said = append(k.said, kind)
	c.Send(map[string]any{"t": "ack", "n": len(k.said)})
}

func newStand(t testing.TB, change func(*Config)) *stand {
	t.Helper()
	s := &stand{src: &memory{epoch: "one"}}
	cfg := Config{Source: s.src, Handler: &talk{}, MaxClients: 1000, MaxPerDevice: 1000}
	if change != nil {
		change(&cfg)
	}
	s.Hub = New(cfg)
	up := websocket.Upgrader{}
	srv := httptest.NewServer(http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		conn, err := up.Upgrade(w, r, nil)
		if err != nil {
			return
		}
		q := r.URL.Query()
		if tcp, ok := conn.NetConn().(*net.TCPConn); ok && q.Has("small") {
			_ = tcp.SetWriteBuffer(4 << 10) // so that one who does not read is felt soon
		}
		after, _ := strconv.ParseUint(q.Get("after"), 10, 64)
		_ = s.Serve(context.Background(), conn, Info{Device: incident.DeviceID(q.Get("device"))},
			Request{After: incident.Seq(after), Epoch: q.Get("epoch")})
	}))
	s.url = "ws" + strings.TrimPrefix(srv.URL, "http")
	t.Cleanup(func() {
		ctx, cancel := context.WithTimeout(context.Background(), 10*time.Second)
		defer cancel()
		if err := s.Close(ctx); err != nil {
			t.Error(err)
		}
		srv.Close()
	})
	return s
}

// tell makes and publishes events.
func (s *stand) tell(t testing.TB, n int, text string) {
	t.Helper()
	if err := s.Publish(s.src.add(n, text)...); err != nil {
		t.Fatal(err)
	}
}

type failer interface {
	Helper()
	Fatalf(format string, args ...any)
}

func dial(t failer, s *stand, query string) *websocket.Conn {
	t.Helper()
	d := websocket.Dialer{NetDial: func(network, addr string) (net.Conn, error) {
		c, err := net.Dial(network, addr)
		if tcp, ok := c.(*net.TCPConn); ok && strings.Contains(query, "small") {
			_ = tcp.SetReadBuffer(4 << 10)
		}
		return c, err
	}}
	conn, _, err := d.Dial(s.url+"?"+query, nil)
	if err != nil {
		t.Fatalf("dial: %v", err)
	}
	return conn
}

// next reads one message.
func next(t failer, c *websocket.Conn) map[string]any {
	t.Helper()
	m, err := read(c)
	if err != nil {
		t.Fatalf("read: %v", err)
	}
	return m
}

func read(c *websocket.Conn) (map[string]any, error) {
	if err := c.SetReadDeadline(time.Now().Add(5 * time.Second)); err != nil {
		return nil, err
	}
	var m map[string]any
	err := c.ReadJSON(&m)
	return m, err
}

func seqOf(m map[string]any) int { return int(m["event"].(map[string]any)["seq"].(float64)) }

// closeCode reads until the stream ends, and returns with which code.
func closeCode(t failer, c *websocket.Conn) int {
	t.Helper()
	for {
		if _, err := read(c); err != nil {
			var ce *websocket.CloseError
			if !errors.As(err, &ce) {
				t.Fatalf("ended with %v, want a close code", err)
			}
			return ce.Code
		}
	}
}

func TestHelloThenMissingThenLive(t *testing.T) {
	s := newStand(t, nil)
	s.tell(t, 1000, "") // more than the hub holds, and several pages
	c := dial(t, s, "after=400&epoch=one")
	defer c.Close()
	hello := next(t, c)
	if hello["t"] != "hello" || hello["epoch"] != "one" || hello["last_seq"] != 1000.0 || hello["after"] != 400.0 || hello["reset"] != false {
		t.Errorf("hello = %v", hello)
	}
	for want := 401; want <= 1003; want++ {
		if want == 600 { // live events while the old ones are still on their way
			s.tell(t, 3, "")
		}
		if m := next(t, c); m["t"] != "event" || seqOf(m) != want {
			t.Fatalf("got %v, want event %d", m, want)
		}
	}
}

func TestAnotherEpochBeginsAnew(t *testing.T) {
	s := newStand(t, nil)
	s.tell(t, 3, "")
	for name, query := range map[string]string{
		"another store":       "after=2&epoch=zero",
		"a number from ahead": "after=9&epoch=one",
	} {
		t.Run(name, func(t *testing.T) {
			c := dial(t, s, query)
			defer c.Close()
			if hello := next(t, c); hello["reset"] != true || hello["after"] != 0.0 {
				t.Errorf("hello = %v, want reset and after 0", hello)
			}
			if m := next(t, c); seqOf(m) != 1 {
				t.Errorf("first event = %v, want 1", m)
			}
		})
	}
}

func TestStateIsOverwrittenInPlace(t *testing.T) {
	s := newStand(t, func(c *Config) { c.Limits.WriteWait = time.Minute }) // the reader below is slow on purpose
	big := strings.Repeat("x", 16<<10)
	c := dial(t, s, "")
	defer c.Close()
	next(t, c) // hello
	// The client does not read: after the buffers are full, all but the newest
	// word is passed over.
	const words = 2000
	for i := range words {
		if err := s.Show(Word{"steer", map[string]any{"t": "steer", "n": i, "pad": big}}); err != nil {
			t.Fatal(err)
		}
	}
	got, last := 0, -1
	for last != words-1 {
		m := next(t, c)
		n := int(m["n"].(float64))
		if n <= last {
			t.Fatalf("word %d after word %d", n, last)
		}
		got, last = got+1, n
	}
	if got == words {
		t.Errorf("a client that did not read got all %d words, want fewer", got)
	}
}

func TestFallingBehindEndsWithResync(t *testing.T) {
	s := newStand(t, nil)
	c := dial(t, s, "")
	defer c.Close()
	next(t, c)
	text := strings.Repeat("x", 16<<10)
	for range 40 { // 1000 events of 16 kB without a read: beyond the system's buffers and the row
		s.tell(t, 25, text)
	}
	if code := closeCode(t, c); code != CloseResync {
		t.Errorf("close code = %d, want %d", code, CloseResync)
	}
	if got := s.Stats().Resyncs; got != 1 {
		t.Errorf("resyncs = %d, want 1", got)
	}
}

func TestOneWhoStopsReadingHoldsNobodyUp(t *testing.T) {
	s := newStand(t, func(c *Config) { c.Limits.WriteWait = 200 * time.Millisecond })
	stuck := dial(t, s, "small&device=stuck")
	defer stuck.Close()
	next(t, stuck)
	well := dial(t, s, "device=well")
	defer well.Close()
	next(t, well)
	text := strings.Repeat("x", 8<<10)
	for want := 1; s.Stats().Failures == 0; want++ { // until the stuck one's write times out
		began := time.Now()
		s.tell(t, 1, text)
		for m := next(t, well); seqOf(m) != want; m = next(t, well) {
			t.Fatalf("got %v, want event %d", m, want)
		}
		// A generous bound: what is tested is that it does not wait for the
		// write deadline of the other.
		if took := time.Since(began); took > 150*time.Millisecond {
			t.Fatalf("event %d took %v beside a stuck client", want, took)
		}
	}
}

// TestResumeNeverLosesOrDoubles lets a client break off and come back at
// random while events are told, and looks at all it got.
func TestResumeNeverLosesOrDoubles(t *testing.T) {
	s := newStand(t, nil)
	rapid.Check(t, func(t *rapid.T) {
		r := &returner{t: t, s: s, last: int(s.src.LastSeq())} // others' events are not of this round
		r.connect()
		defer func() { r.conn.Close() }()
		total := r.last
		for range rapid.IntRange(1, 8).Draw(t, "steps") {
			n := rapid.IntRange(1, 300).Draw(t, "told")
			if err := s.Publish(s.src.add(n, "")...); err != nil {
				t.Fatalf("publish: %v", err)
			}
			total += n
			r.readTo(r.last + rapid.IntRange(0, total-r.last).Draw(t, "read"))
			if rapid.Bool().Draw(t, "breaks off") {
				r.connect()
			}
		}
		r.readTo(total)
	})
}

// returner is a client that comes back with the last number it has.
type returner struct {
	t    *rapid.T
	s    *stand
	conn *websocket.Conn
	last int
}

func (r *returner) connect() {
	if r.conn != nil {
		r.conn.Close()
	}
	r.conn = dial(r.t, r.s, fmt.Sprintf("after=%d&epoch=one", r.last))
	if m := next(r.t, r.conn); m["t"] != "hello" || m["reset"] != false {
		r.t.Fatalf("hello = %v", m)
	}
}

// readTo reads up to an event; a stream that was closed to come back is
// opened again.
func (r *returner) readTo(to int) {
	for r.last < to {
		m, err := read(r.conn)
		if websocket.IsCloseError(err, CloseResync) {
			r.connect()
			continue
		}
		if err != nil {
			r.t.Fatalf("read: %v", err)
		}
		if got := seqOf(m); got != r.last+1 {
			r.t.Fatalf("event %d after %d", got, r.last)
		}
		r.last++
	}
}

// TestManyJoiners has clients come and go from many goroutines while events
// and state are told from others.
func TestManyJoiners(t *testing.T) {
	s := newStand(t, nil)
	stop := make(chan struct{})
	var tellers, joiners sync.WaitGroup
	tellers.Go(func() {
		for i := 0; ; i++ {
			select {
			case <-stop:
				return
			default:
			}
			s.tell(t, 1, "")
			if err := s.Show(Word{"steer", map[string]any{"t": "steer", "n": i}}); err != nil {
				t.Error(err)
			}
			s.Tick()
			time.Sleep(time.Millisecond) // a pace, not a synchronisation
		}
	})
	for j := range 16 {
		joiners.Go(func() {
			for k := range 6 {
				after := int(s.src.LastSeq())
				c := dial(t, s, fmt.Sprintf("after=%d&epoch=one&device=d%d", after, j))
				next(t, c)
				for got := 0; got < 5+k; {
					if m := next(t, c); m["t"] == "event" {
						if seqOf(m) != after+1 {
							t.Errorf("event %d after %d", seqOf(m), after)
							return
						}
						after++
						got++
					}
				}
				c.Close()
			}
		})
	}
	joiners.Wait()
	close(stop)
	tellers.Wait()
}

func TestTimeAndAnswers(t *testing.T) {
	s := newStand(t, func(c *Config) { c.Now = func() time.Time { return time.UnixMilli(1_000_500) } })
	c := dial(t, s, "device=a")
	defer c.Close()
	next(t, c)
	if err := c.WriteJSON(map[string]any{"t": "time", "client_ms": 1_192_500}); err != nil {
		t.Fatal(err)
	}
	m := next(t, c)
	if m["t"] != "time" || m["client_ms"] != 1_192_500.0 || m["server_ms"] != 1_000_500.0 || m["received_ms"] != 1_000_500.0 {
		t.Errorf("answer = %v", m)
	}
	for _, bad := range []string{"", "{", "[]", `{"t":5}`, `{"x":1}`, "null"} {
		if err := c.WriteMessage(websocket.TextMessage, []byte(bad)); err != nil {
			t.Fatal(err)
		}
		if m := next(t, c); m["t"] != "problem" || m["code"] != "malformed" {
			t.Errorf("answer to %q = %v, want a problem", bad, m)
		}
	}
	if err := c.WriteJSON(map[string]any{"t": "fix"}); err != nil {
		t.Fatal(err)
	}
	if m := next(t, c); m["t"] != "ack" {
		t.Errorf("answer = %v, want that of the handler", m)
	}
}

func TestLimits(t *testing.T) {
	s := newStand(t, func(c *Config) { c.MaxClients, c.MaxPerDevice = 3, 2 })
	a, b := dial(t, s, "device=a"), dial(t, s, "device=a")
	defer a.Close()
	defer b.Close()
	next(t, a)
	next(t, b)
	third := dial(t, s, "device=a")
	defer third.Close()
	if code := closeCode(t, third); code != websocket.CloseTryAgainLater {
		t.Errorf("third of a device: close code = %d, want %d", code, websocket.CloseTryAgainLater)
	}
	other := dial(t, s, "device=b")
	defer other.Close()
	next(t, other)
	fourth := dial(t, s, "device=c")
	defer fourth.Close()
	if code := closeCode(t, fourth); code != websocket.CloseTryAgainLater {
		t.Errorf("fourth in all: close code = %d, want %d", code, websocket.CloseTryAgainLater)
	}
	if err := other.WriteMessage(websocket.TextMessage, make([]byte, 16<<10+1)); err != nil {
		t.Fatal(err)
	}
	if code := closeCode(t, other); code != websocket.CloseMessageTooBig {
		t.Errorf("a long message: close code = %d, want %d", code, websocket.CloseMessageTooBig)
	}
}

func TestSilentClientIsDropped(t *testing.T) {
	s := newStand(t, func(c *Config) { c.Limits.Ping, c.Limits.ReadWait = 20*time.Millisecond, 100*time.Millisecond })
	c := dial(t, s, "")
	defer c.Close()
	c.SetPingHandler(func(string) error { return nil }) // never answers
	if m := next(t, c); m["t"] != "hello" {
		t.Fatalf("got %v", m)
	}
	if _, err := read(c); err == nil {
		t.Error("a client that answers no ping is still served")
	}
	awake := dial(t, s, "")
	defer awake.Close()
	next(t, awake)
	deadline := time.Now().Add(400 * time.Millisecond)
	_ = awake.SetReadDeadline(deadline)
	_, _, err := awake.ReadMessage() // answers pings while it waits
	var timeout net.Error
	if !errors.As(err, &timeout) || !timeout.Timeout() {
		t.Errorf("a client that answers pings ended with %v, want to be served", err)
	}
}

func TestRevokedAndClosed(t *testing.T) {
	s := newStand(t, nil)
	a, b := dial(t, s, "device=a"), dial(t, s, "device=b")
	defer a.Close()
	defer b.Close()
	next(t, a)
	next(t, b)
	s.CloseDevice("a", "revoked")
	if code := closeCode(t, a); code != CloseRevoked {
		t.Errorf("close code = %d, want %d", code, CloseRevoked)
	}
	s.tell(t, 3, "")
	if err := s.Close(context.Background()); err != nil {
		t.Fatal(err)
	}
	for want := 1; want <= 3; want++ {
		if m := next(t, b); seqOf(m) != want {
			t.Errorf("before the close got %v, want event %d", m, want)
		}
	}
	if code := closeCode(t, b); code != websocket.CloseGoingAway {
		t.Errorf("close code = %d, want %d", code, websocket.CloseGoingAway)
	}
	late := dial(t, s, "")
	defer late.Close()
	if code := closeCode(t, late); code != websocket.CloseTryAgainLater {
		t.Errorf("after the close: code = %d, want %d", code, websocket.CloseTryAgainLater)
	}
}

func TestTalkativeDeviceIsReadMoreSlowly(t *testing.T) {
	s := newStand(t, func(c *Config) { c.Limits.Rate, c.Limits.Burst = 50, 5 })
	c := dial(t, s, "device=a")
	defer c.Close()
	next(t, c)
	began := time.Now()
	const said = 15
	for range said {
		if err := c.WriteJSON(map[string]any{"t": "fix"}); err != nil {
			t.Fatal(err)
		}
	}
	for n := 1; n <= said; n++ {
		if m := next(t, c); m["n"] != float64(n) {
			t.Fatalf("answer %v, want %d: nothing may be dropped", m, n)
		}
	}
	// Ten beyond the burst at 50 a second take 200 ms.
	if took := time.Since(began); took < 180*time.Millisecond {
		t.Errorf("%d messages took %v, want the rate kept", said, took)
	}
}
