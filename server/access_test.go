package server

import (
	"encoding/json"
	"net/http"
	"strings"
	"testing"
	"time"

	"github.com/gorilla/websocket"

	"wakeback/search/incident"
	"wakeback/server/gate"
)

// closed is a server with pairing closed.
func closed(t testing.TB) *rig {
	return rigOn(t, realStore(t), func(c *Config) { c.OpenPairing = false })
}

func bearer(token string) http.Header { return http.Header{"Authorization": {"Bearer " + token}} }

// pair makes a device of a role.
func (r *rig) pair(role gate.Role, name string) pairAnswer {
	r.t.Helper()
	code, err := r.gate.NewCode(role)
	if err != nil {
		r.t.Fatal(err)
	}
	var a pairAnswer
	if resp := r.do("POST", api+"/pair", map[string]any{"code": code.Code, "name": name}, &a); resp.StatusCode != http.StatusCreated {
		r.t.Fatalf("pair = %d, want 201", resp.StatusCode)
	}
	return a
}

func TestPairing(t *testing.T) {
	r := closed(t)
	if resp := r.do("GET", api+"/status", nil, nil); resp.StatusCode != 401 {
		t.Errorf("status without pairing = %d, want 401", resp.StatusCode)
	}
	code, err := r.gate.NewCode(gate.Crew)
	if err != nil {
		t.Fatal(err)
	}
	typed := strings.ToLower(code.Code[:4]) + "-" + code.Code[4:]
	resp, body := r.raw("POST", api+"/pair", map[string]any{"code": typed, "name": " Anna  B "}, nil)
	var a pairAnswer
	if err := json.Unmarshal(body, &a); err != nil || resp.StatusCode != 201 || a.Device.Name != "Anna B" || a.Device.Role != gate.Crew {
		t.Fatalf("pair = %d %s", resp.StatusCode, body)
	}
	cookie := resp.Cookies()[0]
	if !cookie.HttpOnly || cookie.SameSite != http.SameSiteStrictMode || cookie.Path != "/" || cookie.Value != a.Token {
		t.Errorf("cookie = %+v, want HttpOnly, SameSite=Strict, Path=/", cookie)
	}
	for name, h := range map[string]http.Header{"bearer": bearer(a.Token), "cookie": {"Cookie": {cookie.Name + "=" + cookie.Value}}} {
		var me meAnswer
		if _, body := r.raw("GET", api+"/me", nil, h); json.Unmarshal(body, &me) != nil || me.Name != "Anna B" || !me.Paired {
			t.Errorf("me by %s = %s", name, body)
		}
	}
	var p Problem
	if resp := r.do("POST", api+"/pair", map[string]any{"code": code.Code, "name": "again"}, &p); resp.StatusCode != 403 || p.Field != "code" {
		t.Errorf("used code = %d %+v, want 403 about code", resp.StatusCode, p)
	}
	docs, err := r.store.Docs("device")
	if err != nil {
		t.Fatal(err)
	}
	for _, doc := range docs {
		if strings.Contains(string(doc), a.Token) {
			t.Errorf("the token lies in the store: %s", doc)
		}
	}
}

func TestCodesCannotBeGuessed(t *testing.T) {
	r := closed(t)
	code, err := r.gate.NewCode(gate.Skipper)
	if err != nil {
		t.Fatal(err)
	}
	for try := 1; try <= 5; try++ {
		want := 403
		if try == 5 {
			want = 429
		}
		if resp := r.do("POST", api+"/pair", map[string]any{"code": "0000000" + string(rune('0'+try)), "name": "x"}, nil); resp.StatusCode != want {
			t.Errorf("guess %d = %d, want %d", try, resp.StatusCode, want)
		}
	}
	if resp := r.do("POST", api+"/pair", map[string]any{"code": code.Code, "name": "x"}, nil); resp.StatusCode == 201 {
		t.Error("the right code still works after five wrong ones")
	}
	late, err := r.gate.NewCode(gate.Skipper)
	if err != nil {
		t.Fatal(err)
	}
	r.clock.add(10 * time.Minute)
	if resp := r.do("POST", api+"/pair", map[string]any{"code": late.Code, "name": "x"}, nil); resp.StatusCode != 403 {
		t.Errorf("a code of ten minutes ago = %d, want 403", resp.StatusCode)
	}
}

func TestRoles(t *testing.T) {
	r := closed(t)
	tokens := map[gate.Role]pairAnswer{}
	for _, role := range []gate.Role{gate.Watch, gate.Crew, gate.Skipper} {
		tokens[role] = r.pair(role, role.String())
	}
	p := map[gate.Role]*phone{gate.Watch: newPhone(), gate.Crew: newPhone(), gate.Skipper: newPhone()}
	in := incident.IncidentID(newID())
	event := func(role gate.Role, kind incident.Kind, body any) any {
		return batchOf(p[role].write(t, in, start, kind, body))
	}
	for _, c := range []struct {
		name, method, path string
		body               func(gate.Role) any
		watch, crew        int // what these get; a skipper gets what crew gets, or 2xx
		skipper            int
	}{
		{"mark", "POST", eventsPath(in), func(r gate.Role) any { return event(r, incident.KindMarked, marked()) }, 200, 200, 200},
		{"wind", "POST", eventsPath(in), func(r gate.Role) any {
			return event(r, incident.KindWind, incident.WindObserved{FromDeg: 200, SpeedKn: 12, ObservedBy: incident.ObservedBy{Source: "person"}})
		}, 403, 200, 200},
		{"devices", "GET", api + "/devices", nil, 200, 200, 200},
		{"code", "POST", api + "/codes", func(gate.Role) any { return map[string]any{"role": "crew"} }, 403, 403, 201},
		{"rename", "PATCH", api + "/devices/" + string(tokens[gate.Crew].Device.ID), func(gate.Role) any { return map[string]any{"name": "Ben"} }, 403, 403, 200},
		{"revoke nobody", "DELETE", api + "/devices/nobody", nil, 403, 403, 404},
	} {
		for role, want := range map[gate.Role]int{gate.Watch: c.watch, gate.Crew: c.crew, gate.Skipper: c.skipper} {
			var body any
			if c.body != nil {
				body = c.body(role)
			}
			if resp, text := r.raw(c.method, c.path, body, bearer(tokens[role].Token)); resp.StatusCode != want {
				t.Errorf("%s as %s = %d %s, want %d", c.name, role, resp.StatusCode, text, want)
			}
		}
	}
}

func TestDeviceCannotWriteAsAnother(t *testing.T) {
	r := closed(t)
	a, b := r.pair(gate.Crew, "a"), r.pair(gate.Crew, "b")
	pa, in := newPhone(), incident.IncidentID(newID())
	post := func(token string, e incident.Event) int {
		resp, _ := r.raw("POST", eventsPath(in), batchOf(e), bearer(token))
		return resp.StatusCode
	}
	pb := newPhone()
	if got := post(a.Token, pa.write(t, in, start, incident.KindMarked, marked())); got != 200 {
		t.Fatalf("first = %d", got)
	}
	if got := post(b.Token, pb.write(t, in, start, incident.KindMarked, marked())); got != 200 {
		t.Fatalf("second = %d", got)
	}
	if got := post(b.Token, pa.write(t, in, start, incident.KindNote, incident.Note{Text: "forged"})); got != 403 {
		t.Errorf("writing as another = %d, want 403", got)
	}
	server := &phone{id: r.ledger.self}
	if got := post(b.Token, server.write(t, in, start, incident.KindNote, incident.Note{Text: "forged"})); got != 403 {
		t.Errorf("writing as the server = %d, want 403", got)
	}
	// Paired anew, the same phone goes on with its own chain.
	r.clock.add(time.Minute)
	again := r.pair(gate.Crew, "a again")
	if got := post(again.Token, pa.write(t, in, start, incident.KindNote, incident.Note{Text: "mine"})); got != 200 {
		t.Errorf("paired anew = %d, want 200", got)
	}
}

func TestRevokedAtOnce(t *testing.T) {
	r := closed(t)
	crew, skipper := r.pair(gate.Crew, "crew"), r.pair(gate.Skipper, "skipper")
	ear := r.listen("", bearer(crew.Token))
	ear.wait("hello", func(m map[string]any) bool { return m["role"] == "crew" && m["device"] == string(crew.Device.ID) })
	if resp, _ := r.raw("DELETE", api+"/devices/"+string(crew.Device.ID), nil, bearer(skipper.Token)); resp.StatusCode != 204 {
		t.Fatalf("revoke = %d, want 204", resp.StatusCode)
	}
	_ = ear.conn.SetReadDeadline(time.Now().Add(5 * time.Second))
	for {
		_, _, err := ear.conn.ReadMessage()
		if websocket.IsCloseError(err, 4001) {
			break
		}
		if err != nil {
			t.Fatalf("stream ended with %v, want close code 4001", err)
		}
	}
	if resp, _ := r.raw("GET", api+"/status", nil, bearer(crew.Token)); resp.StatusCode != 401 {
		t.Errorf("status after revoking = %d, want 401", resp.StatusCode)
	}
}

// TestOtherSites: what a page of another site can have a browser do, and what
// a name that points here by deceit can.
func TestOtherSites(t *testing.T) {
	r := rigOn(t, realStore(t), nil)
	host := strings.TrimPrefix(r.http.URL, "http://")
	mark := func() any { return map[string]any{"id": newID(), "at": start} }
	for _, c := range []struct {
		name, method, path string
		header             http.Header
		want               int
	}{
		{"own page", "POST", "/marks", http.Header{"Origin": {"http://" + host}, "Sec-Fetch-Site": {"same-origin"}}, 201},
		{"script", "POST", "/marks", nil, 201},
		{"other origin", "POST", "/marks", http.Header{"Origin": {"http://evil.example"}}, 403},
		{"null origin", "POST", "/marks", http.Header{"Origin": {"null"}}, 403},
		{"cross site", "POST", "/marks", http.Header{"Sec-Fetch-Site": {"cross-site"}}, 403},
		{"form", "POST", "/marks", http.Header{"Content-Type": {"text/plain"}}, 415},
		{"other host", "GET", "/status", http.Header{"Host": {"evil.example"}}, 421},
		{"other host, own port", "GET", "/status", http.Header{"Host": {"evil.example:80"}}, 421},
		{"compressed", "POST", "/marks", http.Header{"Content-Encoding": {"gzip"}}, 415},
	} {
		var body any
		if c.method == "POST" {
			body = mark()
		}
		if resp, text := r.raw(c.method, api+c.path, body, c.header); resp.StatusCode != c.want {
			t.Errorf("%s = %d %s, want %d", c.name, resp.StatusCode, text, c.want)
		}
	}
	url := "ws" + strings.TrimPrefix(r.http.URL, "http") + api + "/stream"
	for name, h := range map[string]http.Header{
		"another origin":        {"Origin": {"http://evil.example"}},
		"null origin":           {"Origin": {"null"}},
		"cookie without origin": {"Cookie": {"wakeback=x"}},
	} {
		if conn, resp, err := websocket.DefaultDialer.Dial(url, h); err == nil || resp == nil || resp.StatusCode != 403 {
			t.Errorf("stream with %s: %v, want 403", name, err)
			if conn != nil {
				conn.Close()
			}
		}
	}
	if resp, _ := r.raw("GET", api+"/stream", nil, nil); resp.StatusCode != 400 {
		t.Errorf("stream without a handshake = %d, want 400", resp.StatusCode)
	}
}

func TestConfigRefusesWhatLiesOpen(t *testing.T) {
	for _, c := range []struct {
		cfg  Config
		says string
	}{
		{Config{Listen: "0.0.0.0:80", Data: "d"}, "plain HTTP"},
		{Config{Listen: ":80", Data: "d"}, "plain HTTP"},
		{Config{Listen: "boat.local:80", Data: "d"}, "plain HTTP"},
		{Config{Listen: "80", Data: "d"}, "HOST:PORT"},
		{Config{Listen: "127.0.0.1:80"}, "data folder"},
	} {
		if err := c.cfg.check(); err == nil || !strings.Contains(err.Error(), c.says) {
			t.Errorf("check(%+v) = %v, want an error about %s", c.cfg, err, c.says)
		}
	}
	for _, listen := range []string{"127.0.0.1:0", "[::1]:80", "localhost:80", "127.3.2.1:9"} {
		if err := (Config{Listen: listen, Data: "d", OpenPairing: true}).check(); err != nil {
			t.Errorf("check(%s) = %v, want none", listen, err)
		}
	}
}
