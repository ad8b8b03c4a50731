package server

import (
	"bytes"
	"encoding/json"
	"fmt"
	"math/rand/v2"
	"net/http"
	"os"
	"sync"
	"testing"
	"time"

	"github.com/gorilla/websocket"

	"wakeback/search/incident"
)

// sender is a phone or a script that sends what it has until it is told that
// it is kept, and remembers that.
type sender struct {
	phone *phone // nil for a script that posts marks
	in    incident.IncidentID
	// The request that waits for its answer, and what was acknowledged.
	body  []byte
	path  string
	ids   []incident.EventID
	acked map[incident.EventID]incident.Seq
}

func (s *sender) next(t *testing.T) {
	var err error
	if s.phone == nil {
		id := newID()
		s.path, s.ids = api+"/marks", []incident.EventID{incident.EventID(id)}
		s.body, err = json.Marshal(map[string]any{"id": id, "at": time.Now(), "position": somewhere, "new_incident": len(s.acked) == 0})
	} else {
		s.path, s.ids = eventsPath(s.in), nil
		var batch []incident.Event
		for range 1 + rand.IntN(3) {
			e := s.phone.write(t, s.in, time.Now(), incident.KindNote, incident.Note{Text: "under load"})
			batch, s.ids = append(batch, e), append(s.ids, e.ID)
		}
		s.body, err = json.Marshal(batchOf(batch...))
	}
	if err != nil {
		t.Error(err)
	}
}

// send tries once; an answer that did not come leaves the request as it is.
func (s *sender) send(t *testing.T, client *http.Client, base string) bool {
	if s.body == nil {
		s.next(t)
	}
	resp, err := client.Post(base+s.path, "application/json", bytes.NewReader(s.body))
	if err != nil {
		return false
	}
	defer resp.Body.Close()
	var text bytes.Buffer
	if _, err := text.ReadFrom(resp.Body); err != nil {
		return false
	}
	if resp.StatusCode/100 != 2 {
		t.Errorf("%s = %d %s", s.path, resp.StatusCode, text.Bytes())
		return false
	}
	s.took(t, text.Bytes())
	s.body = nil
	return true
}

func (s *sender) took(t *testing.T, text []byte) {
	var a struct {
		Event  incident.Event `json:"event"`
		Events []kept         `json:"events"`
	}
	if err := json.Unmarshal(text, &a); err != nil {
		t.Errorf("answer %s: %v", text, err)
	}
	if s.phone == nil {
		s.acked[s.ids[0]] = a.Event.Seq
		return
	}
	for i, id := range s.ids {
		s.acked[id] = a.Events[i].Seq
	}
}

// TestKilledUnderLoad kills the serving process at random moments while marks
// and batches come in, and holds each start against what was acknowledged:
// nothing is lost, nothing is there twice, and a stream goes on without a gap.
func TestKilledUnderLoad(t *testing.T) {
	rounds := 30
	if testing.Short() {
		rounds = 5
	}
	dir, err := os.MkdirTemp("", "wb") // short, for the socket in it
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { os.RemoveAll(dir) })
	senders := []*sender{{}, {}}
	for range 3 {
		senders = append(senders, &sender{phone: newPhone(), in: incident.IncidentID(newID())})
	}
	for _, s := range senders {
		s.acked = map[incident.EventID]incident.Seq{}
	}
	follow := &follower{seen: map[incident.EventID]incident.Seq{}}
	sent := 0
	for round := range rounds {
		c := startChild(t, childServe, dir)
		base := "http://" + c.said
		var load sync.WaitGroup
		load.Go(func() { follow.follow(t, c.said) })
		for _, s := range senders {
			load.Go(func() {
				client := &http.Client{Transport: &http.Transport{}}
				defer client.CloseIdleConnections()
				for s.send(t, client, base) {
				}
			})
		}
		time.Sleep(time.Duration(20+rand.IntN(150)) * time.Millisecond) // the random moment
		c.kill()
		load.Wait()
		if t.Failed() {
			t.Fatalf("in round %d", round)
		}
	}
	c := startChild(t, childServe, dir)
	for _, s := range senders { // what had no answer is sent again
		if s.body != nil && !s.send(t, http.DefaultClient, "http://"+c.said) {
			t.Error("not taken after the last start")
		}
		sent += len(s.acked)
	}
	http.DefaultClient.CloseIdleConnections()
	all := &follower{seen: map[incident.EventID]incident.Seq{}, until: lastOf(senders)}
	all.follow(t, c.said)
	for i, s := range senders {
		for id, seq := range s.acked {
			if got, ok := all.seen[id]; !ok || got != seq {
				t.Errorf("sender %d: event %s was acknowledged as %d and is %d", i, id, seq, got)
			}
		}
	}
	if len(all.seen) < sent {
		t.Errorf("%d events in the log, %d were acknowledged", len(all.seen), sent)
	}
	for id, seq := range follow.seen {
		if all.seen[id] != seq {
			t.Errorf("event %s was streamed as %d and is %d", id, seq, all.seen[id])
		}
	}
	t.Logf("%d kills, %d events acknowledged, %d followed on the stream: none lost, none doubled", rounds, sent, len(follow.seen))
}

func lastOf(senders []*sender) incident.Seq {
	var last incident.Seq
	for _, s := range senders {
		for _, seq := range s.acked {
			last = max(last, seq)
		}
	}
	return last
}

// follower is a page: it comes back with the last number it has.
type follower struct {
	epoch string
	last  incident.Seq
	seen  map[incident.EventID]incident.Seq
	until incident.Seq // 0: until the stream ends
}

func (f *follower) follow(t *testing.T, addr string) {
	conn, _, err := websocket.DefaultDialer.Dial(fmt.Sprintf("ws://%s%s/stream?after=%d&epoch=%s", addr, api, f.last, f.epoch), nil)
	if err != nil {
		return // killed before it answered
	}
	defer conn.Close()
	for f.until == 0 || f.last < f.until {
		var m struct {
			T     string         `json:"t"`
			Epoch string         `json:"epoch"`
			Reset bool           `json:"reset"`
			Event incident.Event `json:"event"`
		}
		if err := conn.ReadJSON(&m); err != nil {
			if f.until != 0 {
				t.Error(err)
			}
			return
		}
		switch {
		case m.T == "hello" && (m.Reset || f.epoch != "" && m.Epoch != f.epoch):
			t.Errorf("hello = %+v after %d of epoch %s, want to go on", m, f.last, f.epoch)
		case m.T == "hello":
			f.epoch = m.Epoch
		case m.T == "event" && m.Event.Seq != f.last+1:
			t.Errorf("event %d after %d", m.Event.Seq, f.last)
		case m.T == "event":
			if _, ok := f.seen[m.Event.ID]; ok {
				t.Errorf("event %s twice", m.Event.ID)
			}
			f.last, f.seen[m.Event.ID] = m.Event.Seq, m.Event.Seq
		}
	}
}
