package hub

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"sync"
	"time"

	"github.com/gorilla/websocket"
	"golang.org/x/time/rate"

	"wakeback/search/incident"
)

// page is how many events are read from the source at a time.
const page = 128

// directMax bounds what waits for one client alone: answers to what it said.
// Its reading is held back when its writing is, so more means a fault.
const directMax = 64

// Handler takes what clients say beside the question for the time. It is
// called by the client's reading goroutine, one message after the other; it
// must not keep raw.
type Handler interface {
	Message(ctx context.Context, c *Client, kind string, raw []byte)
}

// Info is who a client is.
type Info struct {
	Device incident.DeviceID `json:"device"`
	Name   string            `json:"name"`
	Role   string            `json:"role"`
	Remote string            `json:"remote"`
	Since  time.Time         `json:"since"`
}

// Client is one connection.
type Client struct {
	hub   *Hub
	conn  *websocket.Conn
	info  Info
	limit *rate.Limiter

	wake chan struct{} // of size 1: there is something to write

	// Only the writing goroutine touches these three.
	cursor  incident.Seq // last event written
	live    bool         // has reached the hub's own row of events
	version uint64       // newest state written

	// mu guards what others leave for the writing goroutine.
	mu     sync.Mutex
	direct [][]byte
	ending *websocket.CloseError // the reason to stop, once there is one
}

// Info returns who the client is.
func (c *Client) Info() Info { return c.info }

// Request is where a client wants to go on.
type Request struct {
	After incident.Seq
	Epoch string // "" when the client knows none
}

// Serve runs a connection until it ends. It takes the connection over, closes
// it, and returns when both its goroutines are done.
func (h *Hub) Serve(ctx context.Context, conn *websocket.Conn, info Info, req Request) error {
	c, err := h.join(conn, info)
	if err != nil {
		closeNow(conn, websocket.CloseTryAgainLater, err.Error(), h.cfg.Limits.WriteWait)
		return err
	}
	defer h.running.Done()
	ctx, cancel := context.WithCancel(ctx)
	defer cancel()
	if err := c.hello(req); err != nil {
		h.leave(c)
		_ = conn.Close()
		return err
	}
	written := make(chan struct{})
	go func() {
		defer close(written)
		defer cancel() // ends a reader that waits for its rate
		c.write(ctx)
	}()
	c.read(ctx)
	h.leave(c)
	c.end(websocket.CloseNormalClosure, "")
	cancel()
	<-written
	return nil
}

// join counts the client in.
func (h *Hub) join(conn *websocket.Conn, info Info) (*Client, error) {
	h.mu.Lock()
	defer h.mu.Unlock()
	d := h.devices[info.Device]
	switch {
	case h.closed:
		return nil, ErrClosed
	case len(h.clients) >= h.cfg.MaxClients:
		return nil, ErrFull
	case d != nil && d.clients >= h.cfg.MaxPerDevice:
		return nil, ErrFullDevice
	case d == nil:
		d = &device{limit: rate.NewLimiter(h.cfg.Limits.Rate, h.cfg.Limits.Burst)}
		h.devices[info.Device] = d
	}
	d.clients++
	info.Since = h.cfg.Now().UTC()
	c := &Client{hub: h, conn: conn, info: info, limit: d.limit, wake: make(chan struct{}, 1)}
	h.clients[c] = struct{}{}
	h.running.Add(1)
	return c, nil
}

func (h *Hub) leave(c *Client) {
	h.mu.Lock()
	defer h.mu.Unlock()
	delete(h.clients, c)
	d := h.devices[c.info.Device]
	if d.clients--; d.clients == 0 {
		delete(h.devices, c.info.Device)
	}
}

// hello decides where the client goes on, and tells it.
func (c *Client) hello(req Request) error {
	epoch := c.hub.cfg.Source.Epoch()
	c.hub.mu.Lock()
	last := c.hub.last
	c.hub.mu.Unlock()
	c.cursor = req.After
	// What is on disk may be a moment ahead of what is published, and a client
	// may know of it already.
	ahead := max(last, c.hub.cfg.Source.LastSeq())
	reset := req.After > 0 && (req.Epoch != "" && req.Epoch != epoch || req.After > ahead)
	if reset {
		c.cursor = 0
	}
	text, err := json.Marshal(helloMessage{
		T: "hello", Protocol: Protocol, Epoch: epoch, LastSeq: last, ServerTime: c.hub.cfg.Now().UTC(),
		Device: c.info.Device, Role: c.info.Role, After: c.cursor, Reset: reset,
	})
	if err != nil {
		return fmt.Errorf("write hello: %w", err)
	}
	return c.put(text)
}

// Send leaves a message for this client alone.
func (c *Client) Send(message any) {
	text, err := json.Marshal(message)
	if err != nil {
		c.hub.cfg.Log.Error("send to one client", "error", err)
		return
	}
	c.mu.Lock()
	full := len(c.direct) >= directMax
	if !full {
		c.direct = append(c.direct, text)
	}
	c.mu.Unlock()
	if full {
		c.end(CloseResync, "too many answers wait")
	}
	c.wakeUp()
}

// end asks the writing goroutine to close; the first reason stays.
func (c *Client) end(code int, reason string) {
	c.mu.Lock()
	if c.ending == nil {
		c.ending = &websocket.CloseError{Code: code, Text: reason}
	}
	c.mu.Unlock()
	c.wakeUp()
}

func (c *Client) wakeUp() {
	select {
	case c.wake <- struct{}{}:
	default: // it is awake already, and looks once more before it sleeps
	}
}

// --- reading ---

// read takes messages until the connection fails or closes.
func (c *Client) read(ctx context.Context) {
	lim := c.hub.cfg.Limits
	c.conn.SetReadLimit(lim.ReadBytes)
	alive := func(string) error { return c.conn.SetReadDeadline(time.Now().Add(lim.ReadWait)) }
	c.conn.SetPongHandler(alive)
	if alive("") != nil {
		return
	}
	for {
		kind, data, err := c.conn.ReadMessage()
		if err != nil || alive("") != nil {
			return
		}
		received := c.hub.cfg.Now()
		if c.limit.Wait(ctx) != nil {
			return
		}
		if kind != websocket.TextMessage {
			c.end(websocket.CloseUnsupportedData, "expected text messages")
			continue
		}
		c.took(ctx, data, received)
	}
}

func (c *Client) took(ctx context.Context, data []byte, received time.Time) {
	e, err := readEnvelope(data)
	switch {
	case err != nil:
		c.Send(Problem{T: "problem", Code: "malformed", Title: "The message could not be read", Detail: err.Error(), Field: "t"})
	case e.T == "time":
		c.Send(e.answer(received, c.hub.cfg.Now()))
	case c.hub.cfg.Handler != nil:
		c.hub.cfg.Handler.Message(ctx, c, e.T, data)
	}
}

// --- writing ---

// write sends what there is until something fails or an end was asked for.
func (c *Client) write(ctx context.Context) {
	defer c.conn.Close() // ends the reader too
	ping := time.NewTicker(c.hub.cfg.Limits.Ping)
	defer ping.Stop()
	for {
		if err := c.flush(); err != nil {
			c.failed(err)
			return
		}
		select {
		case <-c.wake:
		case <-ping.C:
			if err := c.conn.WriteControl(websocket.PingMessage, nil, time.Now().Add(c.hub.cfg.Limits.WriteWait)); err != nil {
				c.failed(err)
				return
			}
		case <-ctx.Done():
			c.end(websocket.CloseGoingAway, "the server is stopping")
		}
	}
}

// failed notes why a connection ended, and says it to the client where that
// is still possible.
func (c *Client) failed(err error) {
	var ce *websocket.CloseError
	if !errors.As(err, &ce) {
		c.hub.failures.Add(1)
		c.hub.cfg.Log.Info("stream lost", "device", c.info.Device, "name", c.info.Name, "error", err)
		return
	}
	if ce.Code == CloseResync {
		c.hub.resyncs.Add(1)
	}
	closeNow(c.conn, ce.Code, ce.Text, c.hub.cfg.Limits.WriteWait)
}

func closeNow(conn *websocket.Conn, code int, reason string, wait time.Duration) {
	_ = conn.WriteControl(websocket.CloseMessage, websocket.FormatCloseMessage(code, reason), time.Now().Add(wait))
	_ = conn.Close()
}

// flush writes until nothing is left. A *websocket.CloseError is a reason to
// close, any other error a failed write.
func (c *Client) flush() error {
	for {
		w, err := c.take()
		if err != nil {
			return err
		}
		if w.behind {
			if err := c.catchUp(); err != nil {
				return err
			}
		}
		for _, m := range w.events {
			if err := c.putPrepared(m); err != nil {
				return err
			}
			c.cursor++
		}
		for _, text := range w.direct {
			if err := c.put(text); err != nil {
				return err
			}
		}
		for _, m := range w.state {
			if err := c.putPrepared(m); err != nil {
				return err
			}
		}
		if w.ending != nil && !w.behind && len(w.events) == 0 {
			return w.ending
		}
		if w.empty() {
			return nil
		}
	}
}

// work is what there is to write at one moment.
type work struct {
	behind bool // older events have to come from the source first
	events []*websocket.PreparedMessage
	direct [][]byte
	state  []*websocket.PreparedMessage
	ending *websocket.CloseError
}

func (w work) empty() bool {
	return !w.behind && len(w.events) == 0 && len(w.direct) == 0 && len(w.state) == 0
}

// take collects what there is to write. Events of a live client that the hub
// no longer holds are lost to it: it has to come back.
func (c *Client) take() (work, error) {
	var w work
	c.mu.Lock()
	w.direct, c.direct = c.direct, nil
	w.ending = c.ending
	c.mu.Unlock()
	if w.ending != nil && w.ending.Code != websocket.CloseGoingAway {
		return w, w.ending
	}
	h := c.hub
	h.mu.Lock()
	defer h.mu.Unlock()
	switch {
	case c.cursor >= h.last:
		c.live = true
	case c.cursor+1 >= h.oldest:
		c.live = true
		for seq := c.cursor + 1; seq <= h.last; seq++ {
			w.events = append(w.events, h.ring[seq%Queue])
		}
	case c.live:
		return w, &websocket.CloseError{Code: CloseResync, Text: "resync"}
	default:
		w.behind = true
	}
	for _, s := range h.slots {
		if s.version > c.version {
			w.state = append(w.state, s.message)
		}
	}
	c.version = h.version
	return w, nil
}

// catchUp writes one page of older events.
func (c *Client) catchUp() error {
	events, err := c.hub.cfg.Source.EventsAfter(c.cursor, page)
	if err != nil {
		return fmt.Errorf("read events after %d: %w", c.cursor, err)
	}
	if len(events) == 0 {
		return fmt.Errorf("read events after %d: the store has none, but the hub has", c.cursor)
	}
	for _, e := range events {
		text, err := json.Marshal(eventMessage{T: "event", Event: e})
		if err != nil {
			return fmt.Errorf("write event %s: %w", e.ID, err)
		}
		if err := c.put(text); err != nil {
			return err
		}
		c.cursor = e.Seq
	}
	return nil
}

func (c *Client) put(text []byte) error {
	if err := c.deadline(); err != nil {
		return err
	}
	c.hub.sent.Add(1)
	return c.conn.WriteMessage(websocket.TextMessage, text)
}

func (c *Client) putPrepared(m *websocket.PreparedMessage) error {
	if err := c.deadline(); err != nil {
		return err
	}
	c.hub.sent.Add(1)
	return c.conn.WritePreparedMessage(m)
}

func (c *Client) deadline() error {
	return c.conn.SetWriteDeadline(time.Now().Add(c.hub.cfg.Limits.WriteWait))
}
