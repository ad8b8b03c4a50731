package store

import (
	"bufio"
	"context"
	"encoding/json"
	"fmt"
	"math/rand/v2"
	"os"
	"os/exec"
	"strconv"
	"testing"
	"time"

	"wakeback/drift/nav"
	"wakeback/search/incident"
)

// writerEnv makes this test binary a writer: it appends events to the store
// in the folder named and prints the number of each once it is acknowledged.
const writerEnv = "WAKEBACK_STORE_WRITER"

func writerMain() {
	dir := os.Getenv(writerEnv)
	if dir == "" {
		return
	}
	s, _, err := Open(context.Background(), Options{Dir: dir})
	if err != nil {
		fmt.Fprintln(os.Stderr, err)
		os.Exit(1)
	}
	c := newChain('w')
	n, hash, _ := s.ChainEnd(c.device)
	c.last.DeviceSeq, c.last.Hash = n, hash
	out := bufio.NewWriter(os.Stdout)
	for {
		kept, err := s.Append([]incident.Event{writerEvent(c)})
		if err != nil {
			fmt.Fprintln(os.Stderr, err)
			os.Exit(1)
		}
		n := kept[0].DeviceSeq
		if n%3 == 0 {
			err = s.PutDoc("device", "counter", []byte(strconv.FormatUint(n, 10)))
		}
		if err == nil && n%2 == 0 {
			err = s.AppendTrack(phone, []nav.Fix{{At: t0.Add(time.Duration(n) * time.Second)}})
		}
		if err != nil {
			fmt.Fprintln(os.Stderr, err)
			os.Exit(1)
		}
		fmt.Fprintln(out, n)
		if out.Flush() != nil {
			os.Exit(0)
		}
	}
}

func writerEvent(c *chain) incident.Event {
	n := c.last.DeviceSeq + 1
	at := t0.Add(time.Duration(n) * time.Second)
	body, _ := json.Marshal(incident.Note{Text: "entry " + strconv.FormatUint(n, 10)})
	e, err := incident.New(incident.Event{
		ID:       incident.EventID(fmt.Sprintf("018f3c2e-%04x-7000-8%03x-000000000077", n%65536, n/65536)),
		Incident: "018f3c2e-7b1a-7c3d-9e4f-000000000001", Device: c.device, DeviceSeq: n, PrevHash: c.last.Hash, At: at, DeviceAt: at,
	}, incident.KindNote, json.RawMessage(body))
	if err != nil {
		panic(err)
	}
	c.last = e
	return e
}

// The writer is killed at random moments, some of them while it opens:
// whatever it acknowledged is there,
// once, in an unbroken chain, and opening is quick. The seed is printed.
func TestKilledWhileWriting(t *testing.T) {
	rounds := 30
	if testing.Short() {
		rounds = 5
	}
	seed := uint64(time.Now().UnixNano())
	t.Logf("seed %d", seed)
	rng := rand.New(rand.NewPCG(seed, 0))
	dir := t.TempDir()
	acknowledged := uint64(0)
	for round := range rounds {
		acknowledged = max(acknowledged, killedRound(t, dir, time.Duration(5+rng.IntN(150))*time.Millisecond))
		begin := time.Now()
		s, r := open(t, Options{Dir: dir})
		if took := time.Since(begin); took > 15*time.Second {
			t.Fatalf("round %d: opening took %s", round, took)
		}
		if len(r.Warnings) != 0 {
			t.Fatalf("round %d: %+v", round, r)
		}
		checkChain(t, all(t, s), acknowledged)
		checkTraffic(t, s, acknowledged, uint64(round))
		closeStore(t, s)
	}
	if acknowledged == 0 {
		t.Fatal("nothing was written")
	}
	t.Logf("%d events acknowledged", acknowledged)
}

// checkTraffic: the documents and tracks that the writer kept beside the
// events it acknowledged. Each kill may fall between an event and its document
// or fix, which the next writer does not make up for.
func checkTraffic(t *testing.T, s *Store, acknowledged, kills uint64) {
	t.Helper()
	docs, _ := s.Docs("device")
	if got, _ := strconv.ParseUint(string(docs["counter"]), 10, 64); got+6 < acknowledged { // every third has one
		t.Fatalf("the document says %d, acknowledged were %d", got, acknowledged)
	}
	fixes := track(t, s, t0, t0.Add(1e6*time.Second))
	if uint64(len(fixes))+kills+1 < acknowledged/2 {
		t.Fatalf("%d of %d fixes", len(fixes), acknowledged/2)
	}
}

func killedRound(t *testing.T, dir string, after time.Duration) (acknowledged uint64) {
	t.Helper()
	cmd := exec.Command(os.Args[0])
	cmd.Env = append(os.Environ(), writerEnv+"="+dir)
	cmd.Stderr = os.Stderr
	out, err := cmd.StdoutPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	timer := time.AfterFunc(after, func() { _ = cmd.Process.Kill() })
	defer timer.Stop()
	lines := bufio.NewScanner(out)
	for lines.Scan() {
		if n, err := strconv.ParseUint(lines.Text(), 10, 64); err == nil {
			acknowledged = n
		}
	}
	_ = cmd.Wait()
	return acknowledged
}

// checkChain: numbers and chain are unbroken, nothing stands twice, and all
// that was acknowledged is there.
func checkChain(t *testing.T, events []incident.Event, acknowledged uint64) {
	t.Helper()
	if uint64(len(events)) < acknowledged {
		t.Fatalf("%d events are left of %d acknowledged", len(events), acknowledged)
	}
	prev := ""
	for i, e := range events {
		if e.Seq != incident.Seq(i+1) || e.DeviceSeq != uint64(i+1) || e.PrevHash != prev {
			t.Fatalf("event %d has number %d, device number %d", i+1, e.Seq, e.DeviceSeq)
		}
		if err := e.Verify(); err != nil {
			t.Fatal(err)
		}
		prev = e.Hash
	}
}
