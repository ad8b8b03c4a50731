package server

import (
	"bytes"
	"encoding/json"
	"fmt"
	"net"
	"net/http"
	"path/filepath"
	"slices"
	"strings"
	"sync"
	"sync/atomic"
	"syscall"
	"testing"
	"time"

	"github.com/gorilla/websocket"
	"go.etcd.io/bbolt"

	"wakeback/search/incident"
	"wakeback/server/hub"
)

// Each benchmark stands beside its floor: the least that the same work could
// cost here, measured in the same run, in turns.

// listeners are clients that read all they are sent.
type listeners struct {
	conns []*websocket.Conn
	wg    sync.WaitGroup
}

// attach opens n streams; on, which may be nil, gets every message.
func (r *rig) attach(b *testing.B, n int, on func(text []byte)) *listeners {
	b.Helper()
	l := &listeners{}
	url := "ws" + strings.TrimPrefix(r.http.URL, "http") + api + "/stream"
	for range n {
		conn, _, err := websocket.DefaultDialer.Dial(url, nil)
		if err != nil {
			b.Fatal(err)
		}
		l.conns = append(l.conns, conn)
		l.wg.Go(func() {
			for {
				_, text, err := conn.ReadMessage()
				if err != nil {
					return
				}
				if on != nil {
					on(text)
				}
			}
		})
	}
	return l
}

func (l *listeners) close() {
	for _, c := range l.conns {
		c.Close()
	}
	l.wg.Wait()
}

func median(d []time.Duration) time.Duration {
	s := slices.Clone(d)
	slices.Sort(s)
	return s[len(s)/2]
}

// bareCommit is one bbolt commit of some bytes under the next number.
type bareCommit struct {
	db *bbolt.DB
	n  uint64
}

func newBareCommit(b *testing.B) *bareCommit {
	b.Helper()
	db, err := bbolt.Open(filepath.Join(b.TempDir(), "bare.db"), 0o600, nil)
	if err != nil {
		b.Fatal(err)
	}
	b.Cleanup(func() { db.Close() })
	return &bareCommit{db: db}
}

func (c *bareCommit) put(b *testing.B, text []byte) {
	b.Helper()
	c.n++
	err := c.db.Update(func(tx *bbolt.Tx) error {
		bucket, err := tx.CreateBucketIfNotExists([]byte("events"))
		if err != nil {
			return err
		}
		return bucket.Put([]byte(fmt.Sprintf("%016x", c.n)), text)
	})
	if err != nil {
		b.Fatal(err)
	}
}

// BenchmarkMark is POST of a mark to 201 with 50 streams attached, beside a
// bare bbolt commit of the same bytes. Server and listeners are processes of
// their own, as they are at sea; only the disk and the processor are shared.
func BenchmarkMark(b *testing.B) {
	server := startChild(b, childServe, b.TempDir())
	startChild(b, childListen, "50 ws://"+server.said+api+"/stream")
	bare := newBareCommit(b)
	client := &http.Client{Transport: &http.Transport{}}
	defer client.CloseIdleConnections()
	var posts, commits []time.Duration
	p, base := newPhone(), "http://"+server.said
	var a markAnswer
	for i := 0; b.Loop(); i++ {
		if i%10 == 0 && i > 0 { // an incident has few marks: this one is over
			down, _ := json.Marshal(batchOf(p.write(b, a.Incident.ID, time.Now(), incident.KindStoodDown, incident.StoodDown{Reason: "aboard"})))
			resp, err := client.Post(base+eventsPath(a.Incident.ID), "application/json", bytes.NewReader(down))
			if err != nil || resp.StatusCode != http.StatusOK {
				b.Fatal(resp.StatusCode, err)
			}
			resp.Body.Close()
		}
		body, _ := json.Marshal(map[string]any{"id": newID(), "at": time.Now(), "position": somewhere})
		began := time.Now()
		resp, err := client.Post(base+api+"/marks", "application/json", bytes.NewReader(body))
		if err != nil {
			b.Fatal(err)
		}
		var answer bytes.Buffer
		_, _ = answer.ReadFrom(resp.Body)
		resp.Body.Close()
		posts = append(posts, time.Since(began))
		if resp.StatusCode != http.StatusCreated {
			b.Fatalf("POST = %d %s", resp.StatusCode, answer.String())
		}
		if err := json.Unmarshal(answer.Bytes(), &a); err != nil {
			b.Fatal(err)
		}
		began = time.Now()
		bare.put(b, answer.Bytes())
		commits = append(commits, time.Since(began))
	}
	b.ReportMetric(float64(median(posts).Microseconds()), "µs/mark-median")
	b.ReportMetric(float64(median(commits).Microseconds()), "µs/bare-commit-median")
	b.ReportMetric(float64(median(posts))/float64(median(commits)), "x-floor")
}

// BenchmarkFanout is from the commit of an event to the last of 200 clients
// having it, beside a broadcast of the same bytes over bare connections.
func BenchmarkFanout(b *testing.B) {
	const clients = 200
	r := rigOn(b, realStore(b), nil)
	var got atomic.Int64
	all := make(chan struct{}, 1)
	l := r.attach(b, clients, func(text []byte) {
		if bytes.HasPrefix(text, []byte(`{"t":"event"`)) && got.Add(1)%clients == 0 {
			all <- struct{}{}
		}
	})
	defer l.close()
	bare := newBareBroadcast(b, clients)
	p, in := newPhone(), incident.IncidentID(newID())
	var ours, floor []time.Duration
	for b.Loop() {
		e := p.write(b, in, start, incident.KindNote, incident.Note{Text: strings.Repeat("x", 100)})
		kept, err := r.store.Append([]incident.Event{e})
		if err != nil {
			b.Fatal(err)
		}
		began := time.Now()
		if err := r.hub.Publish(kept...); err != nil {
			b.Fatal(err)
		}
		<-all
		ours = append(ours, time.Since(began))
		text, _ := json.Marshal(kept[0])
		floor = append(floor, bare.send(b, text))
	}
	b.ReportMetric(float64(median(ours).Microseconds()), "µs/last-of-200-median")
	b.ReportMetric(float64(slices.Max(ours).Microseconds()), "µs/last-of-200-max")
	b.ReportMetric(float64(median(floor).Microseconds()), "µs/bare-median")
}

// bareBroadcast writes the same bytes to many TCP connections and waits until
// all are read: no frames, no lanes, one goroutine for each reader.
type bareBroadcast struct {
	out []net.Conn
	got atomic.Int64
	all chan struct{}
	n   atomic.Int64 // bytes of a message
}

func newBareBroadcast(b *testing.B, clients int) *bareBroadcast {
	b.Helper()
	ln, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		b.Fatal(err)
	}
	defer ln.Close()
	bb := &bareBroadcast{all: make(chan struct{}, 1)}
	for range clients {
		in, err := net.Dial("tcp", ln.Addr().String())
		if err != nil {
			b.Fatal(err)
		}
		out, err := ln.Accept()
		if err != nil {
			b.Fatal(err)
		}
		bb.out = append(bb.out, out)
		go bb.read(in, clients)
	}
	b.Cleanup(func() {
		for _, c := range bb.out {
			c.Close()
		}
	})
	return bb
}

func (bb *bareBroadcast) read(in net.Conn, clients int) {
	defer in.Close()
	buf := make([]byte, 64<<10)
	have := int64(0)
	for {
		n, err := in.Read(buf)
		if err != nil {
			return
		}
		for have += int64(n); have >= bb.n.Load() && bb.n.Load() > 0; have -= bb.n.Load() {
			if bb.got.Add(1)%int64(clients) == 0 {
				bb.all <- struct{}{}
			}
		}
	}
}

// write sends one message to all, and send waits until all have it.
func (bb *bareBroadcast) write(b *testing.B, text []byte) {
	for _, c := range bb.out {
		if _, err := c.Write(text); err != nil {
			b.Fatal(err)
		}
	}
}

func (bb *bareBroadcast) send(b *testing.B, text []byte) time.Duration {
	bb.n.Store(int64(len(text)))
	began := time.Now()
	bb.write(b, text)
	<-bb.all
	return time.Since(began)
}

// cpu is the time that this process has used.
func cpu(b *testing.B) time.Duration {
	var u syscall.Rusage
	if err := syscall.Getrusage(syscall.RUSAGE_SELF, &u); err != nil {
		b.Fatal(err)
	}
	return time.Duration(u.Utime.Nano() + u.Stime.Nano())
}

// BenchmarkSteer is one steer word, marshalled once, to 200 clients, beside a
// broadcast of the same bytes over bare connections. Both count the processor
// time of this process, readers included; at 5 Hz a word is due each 200 ms.
func BenchmarkSteer(b *testing.B) {
	const clients = 200
	r := rigOn(b, realStore(b), nil)
	r.bridge.set(sailing(somewhere, start, 0, 6))
	r.markNow(nil)
	var got atomic.Int64
	all := make(chan struct{}, 1)
	l := r.attach(b, clients, func(text []byte) {
		if bytes.HasPrefix(text, []byte(`{"t":"steer"`)) && got.Add(1)%clients == 0 {
			all <- struct{}{}
		}
	})
	defer l.close()
	bare := newBareBroadcast(b, clients)
	state := r.book.live()
	words, _ := r.live.words(start, r.vessel.now(start), state)
	text, _ := json.Marshal(words[1].Message)
	var ours, floor time.Duration
	n := 0
	for b.Loop() {
		before := cpu(b)
		words, _ := r.live.words(start, r.vessel.now(start), state)
		if err := r.hub.Show(hub.Word{Key: "steer", Message: words[1].Message}); err != nil {
			b.Fatal(err)
		}
		<-all
		middle := cpu(b)
		bare.send(b, text)
		floor += cpu(b) - middle
		ours += middle - before
		n++
	}
	b.ReportMetric(float64(ours.Microseconds())/float64(n), "µs-cpu/word")
	b.ReportMetric(float64(floor.Microseconds())/float64(n), "µs-cpu/bare")
	b.ReportMetric(float64(ours)/float64(floor), "x-floor")
	b.ReportMetric(5*ours.Seconds()/float64(n), "cores-at-5Hz")
}
