package gate

import (
	"errors"
	"maps"
	"net"
	"strings"
	"sync"
	"testing"
	"time"

	"pgregory.net/rapid"
)

// shelf keeps documents in memory.
type shelf struct {
	mu   sync.Mutex // guards both
	docs map[string][]byte
	fail error
}

func newShelf() *shelf { return &shelf{docs: map[string][]byte{}} }

func (s *shelf) PutDoc(kind, name string, doc []byte) error {
	s.mu.Lock()
	defer s.mu.Unlock()
	if s.fail == nil {
		s.docs[kind+"/"+name] = doc
	}
	return s.fail
}

func (s *shelf) Docs(kind string) (map[string][]byte, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	out := map[string][]byte{}
	for k, v := range maps.All(s.docs) {
		if name, ok := strings.CutPrefix(k, kind+"/"); ok {
			out[name] = v
		}
	}
	return out, nil
}

func (s *shelf) DeleteDoc(kind, name string) error {
	s.mu.Lock()
	defer s.mu.Unlock()
	if s.fail == nil {
		delete(s.docs, kind+"/"+name)
	}
	return s.fail
}

func newGate(t *testing.T, docs Docs, now *time.Time) *Gate {
	t.Helper()
	g, err := New(docs, false, func() time.Time { return *now })
	if err != nil {
		t.Fatal(err)
	}
	return g
}

func pair(t *testing.T, g *Gate, role Role, name string) (Device, string) {
	t.Helper()
	c, err := g.NewCode(role)
	if err != nil {
		t.Fatal(err)
	}
	d, token, err := g.Pair(c.Code, name)
	if err != nil {
		t.Fatal(err)
	}
	return d, token
}

func TestDevicesOutliveTheGate(t *testing.T) {
	docs, now := newShelf(), time.Unix(1e9, 0)
	g := newGate(t, docs, &now)
	d, token := pair(t, g, Crew, "Anna")
	if err := g.MayWriteAs(d.ID, "phone-1"); err != nil {
		t.Fatal(err)
	}
	now = now.Add(300 * 24 * time.Hour) // months later, without asking
	g = newGate(t, docs, &now)
	got, err := g.Who(token)
	if err != nil || got.Name != "Anna" || got.Role != Crew || got.Writes != "phone-1" {
		t.Errorf("Who = %+v, %v; want Anna, crew, writing as phone-1", got, err)
	}
	if _, err := g.Who(token + "0"); !errors.Is(err, ErrUnpaired) {
		t.Errorf("a wrong token: %v, want ErrUnpaired", err)
	}
	if err := g.Revoke(d.ID); err != nil {
		t.Fatal(err)
	}
	if _, err := newGate(t, docs, &now).Who(token); !errors.Is(err, ErrUnpaired) {
		t.Errorf("after revoking and a restart: %v, want ErrUnpaired", err)
	}
}

func TestRevokedEvenIfTheDiskFails(t *testing.T) {
	docs, now := newShelf(), time.Unix(1e9, 0)
	g := newGate(t, docs, &now)
	d, token := pair(t, g, Crew, "Anna")
	docs.fail = errors.New("disk")
	if err := g.Revoke(d.ID); err == nil {
		t.Error("revoking without a disk told no error")
	}
	if _, err := g.Who(token); !errors.Is(err, ErrUnpaired) {
		t.Errorf("Who = %v, want ErrUnpaired at once", err)
	}
}

// TestCodeAsTyped: however a code is typed, it is the same code, and it works
// once.
func TestCodeAsTyped(t *testing.T) {
	docs, now := newShelf(), time.Unix(1e9, 0)
	g := newGate(t, docs, &now)
	rapid.Check(t, func(t *rapid.T) {
		c, err := g.NewCode(Watch)
		if err != nil {
			t.Fatal(err)
		}
		typed := ""
		for _, r := range c.Code {
			s := string(r)
			if rapid.Bool().Draw(t, "lower") {
				s = strings.ToLower(s)
			}
			switch {
			case s == "0" && rapid.Bool().Draw(t, "letter"):
				s = "o"
			case s == "1" && rapid.Bool().Draw(t, "letter"):
				s = rapid.SampledFrom([]string{"i", "L", "I", "l"}).Draw(t, "which")
			}
			typed += s + rapid.SampledFrom([]string{"", "", " ", "-"}).Draw(t, "between")
		}
		if _, _, err := g.Pair(typed, "x"); err != nil {
			t.Fatalf("Pair(%q) for %q = %v", typed, c.Code, err)
		}
		if _, _, err := g.Pair(typed, "x"); !errors.Is(err, ErrCode) {
			t.Fatalf("the second time: %v, want ErrCode", err)
		}
	})
}

func TestPairedAnewTakesOver(t *testing.T) {
	docs, now := newShelf(), time.Unix(1e9, 0)
	g := newGate(t, docs, &now)
	old, _ := pair(t, g, Crew, "old")
	if err := g.MayWriteAs(old.ID, "phone"); err != nil {
		t.Fatal(err)
	}
	now = now.Add(time.Hour)
	anew, _ := pair(t, g, Crew, "anew")
	if err := g.MayWriteAs(anew.ID, "phone"); err != nil {
		t.Errorf("paired anew: %v", err)
	}
	if err := g.MayWriteAs(old.ID, "phone"); !errors.Is(err, ErrForeign) {
		t.Errorf("the older pairing: %v, want ErrForeign", err)
	}
	third, _ := pair(t, g, Crew, "third")
	if err := g.MayWriteAs(third.ID, "tablet"); err != nil {
		t.Fatal(err)
	}
	if err := g.MayWriteAs(anew.ID, "tablet"); !errors.Is(err, ErrForeign) {
		t.Errorf("another's id: %v, want ErrForeign", err)
	}
	if err := g.MayWriteAs(anew.ID, "begun anew"); err != nil {
		t.Errorf("a phone that lost its storage: %v", err)
	}
	if err := g.MayWriteAs("nobody", "phone"); !errors.Is(err, ErrUnpaired) {
		t.Errorf("nobody: %v, want ErrUnpaired", err)
	}
}

func TestNames(t *testing.T) {
	for in, want := range map[string]string{" Anna  B ": "Anna B", "Åse": "Åse", "": "", "\x1b[31m": "", strings.Repeat("é", 61): "", "a\xff": ""} {
		got, err := cleanName(in)
		if got != want || (err == nil) != (want != "") {
			t.Errorf("cleanName(%q) = %q, %v; want %q", in, got, err, want)
		}
	}
}

func TestManyCodes(t *testing.T) {
	docs, now := newShelf(), time.Unix(1e9, 0)
	g := newGate(t, docs, &now)
	for range codesOpen {
		if _, err := g.NewCode(Crew); err != nil {
			t.Fatal(err)
		}
	}
	if _, err := g.NewCode(Crew); !errors.Is(err, ErrManyCodes) {
		t.Errorf("one more: %v, want ErrManyCodes", err)
	}
	now = now.Add(codeLife)
	if _, err := g.NewCode(Crew); err != nil {
		t.Errorf("after the others are old: %v", err)
	}
}

func TestHosts(t *testing.T) {
	h := NewHosts("8080", "Boat.local", "192.168.1.5", "fe80::1%eth0")
	for host, want := range map[string]bool{
		"localhost:8080": true, "127.0.0.1:8080": true, "[::1]:8080": true, "boat.local:8080": true, "BOAT.local.:8080": true,
		"192.168.1.5:8080": true, "[fe80::1]:8080": true,
		"localhost": false, "localhost:80": false, "evil.example:8080": false, "boat.local.evil.example:8080": false,
		"192.168.1.6:8080": false, "": false, ":8080": false, "localhost:8080:8080": false,
	} {
		if got := h.Allowed(host); got != want {
			t.Errorf("Allowed(%q) = %t, want %t", host, got, want)
		}
	}
	for origin, want := range map[string]bool{
		"http://localhost:8080": true, "https://localhost:8080": true, "http://boat.local:8080": false, "http://localhost": false,
		"null": false, "": false, "file://localhost:8080": false, "http://evil.example:8080": false, "://": false,
	} {
		if got := SameOrigin(origin, "localhost:8080"); got != want {
			t.Errorf("SameOrigin(%q) = %t, want %t", origin, got, want)
		}
	}
}

func TestIsAddress(t *testing.T) {
	local := &net.TCPAddr{IP: net.ParseIP("192.168.1.5"), Port: 8080}
	for host, want := range map[string]bool{
		"192.168.1.5:8080": true, "[::ffff:192.168.1.5]:8080": true,
		"192.168.1.5": false, "192.168.1.5:80": false, "192.168.1.6:8080": false, "boat.local:8080": false, "": false,
	} {
		if got := IsAddress(host, local); got != want {
			t.Errorf("IsAddress(%q) = %t, want %t", host, got, want)
		}
	}
}

func TestRoleText(t *testing.T) {
	for _, r := range []Role{Watch, Crew, Skipper} {
		got, err := ParseRole(r.String())
		if err != nil || got != r {
			t.Errorf("ParseRole(%s) = %v, %v", r, got, err)
		}
	}
	for _, bad := range []string{"", "nobody", "king", "Crew"} {
		if _, err := ParseRole(bad); err == nil {
			t.Errorf("ParseRole(%q) has no error", bad)
		}
	}
	if got := Role(99).String(); got != "nobody" {
		t.Errorf("Role(99) = %s", got)
	}
}
