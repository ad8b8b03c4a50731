package server

import (
	"encoding/json"
	"net/http"
	"strconv"
	"strings"
	"testing"

	"wakeback/search/incident"
)

func itoa(s incident.Seq) string { return strconv.FormatUint(uint64(s), 10) }

// TestBadMarks shows what is told for each kind of bad input: always a problem
// that names the field, and nothing is kept.
func TestBadMarks(t *testing.T) {
	r := rigOn(t, realStore(t), nil)
	id := newID()
	deep := strings.Repeat("[", 70) + strings.Repeat("]", 70)
	cases := []struct {
		name, body string
		status     int
		field      string
		says       string // part of the detail
	}{
		{"nothing", ``, 400, "", "one JSON object"},
		{"not JSON", `{"id":`, 400, "", "byte 6"},
		{"a list", `[]`, 400, "", "one JSON object"},
		{"null", `null`, 400, "", "one JSON object"},
		{"two values", `{} {}`, 400, "", "one JSON object"},
		{"NaN", `{"id":"` + id + `","at":"2026-06-01T02:14:07Z","position":{"lat":NaN,"lon":1}}`, 400, "", "one JSON object"},
		{"Infinity", `{"id":"` + id + `","at":"2026-06-01T02:14:07Z","error_m":Infinity}`, 400, "", "one JSON object"},
		{"beyond a float", `{"id":"` + id + `","at":"2026-06-01T02:14:07Z","error_m":1e999}`, 400, "error_m", "metres"},
		{"deep", `{"id":"` + id + `","x":` + deep + `}`, 400, "", "nested deeper"},
		{"no id", `{"at":"2026-06-01T02:14:07Z"}`, 400, "id", "UUIDv7"},
		{"id a number", `{"id":7,"at":"2026-06-01T02:14:07Z"}`, 400, "id", "UUIDv7"},
		{"id version 4", `{"id":"a3bb189e-8bf9-4888-9912-ace4e6543002","at":"2026-06-01T02:14:07Z"}`, 400, "id", "UUIDv7"},
		{"id in braces", `{"id":"{` + id + `}","at":"2026-06-01T02:14:07Z"}`, 400, "id", "UUIDv7"},
		{"no time", `{"id":"` + id + `"}`, 400, "at", "RFC 3339"},
		{"time in words", `{"id":"` + id + `","at":"just now"}`, 400, "at", "RFC 3339"},
		{"time before 1970", `{"id":"` + id + `","at":"0001-01-01T00:00:00Z"}`, 400, "at", "RFC 3339"},
		{"half a position", `{"id":"` + id + `","at":"2026-06-01T02:14:07Z","position":{"lat":54}}`, 400, "position", "lat"},
		{"latitude 91", `{"id":"` + id + `","at":"2026-06-01T02:14:07Z","position":{"lat":91,"lon":0}}`, 400, "position", "-90 to 90"},
		{"longitude 181", `{"id":"` + id + `","at":"2026-06-01T02:14:07Z","position":{"lat":9,"lon":181}}`, 400, "position", "-180 to 180"},
		{"error below 0", `{"id":"` + id + `","at":"2026-06-01T02:14:07Z","position":{"lat":9,"lon":8},"error_m":-1}`, 400, "error_m", "metres"},
		{"person 0", `{"id":"` + id + `","at":"2026-06-01T02:14:07Z","person":0}`, 400, "person", "person"},
		{"side", `{"id":"` + id + `","at":"2026-06-01T02:14:07Z","side":"left"}`, 400, "side", "port"},
		{"long source", `{"id":"` + id + `","at":"2026-06-01T02:14:07Z","source":"` + strings.Repeat("x", 101) + `"}`, 400, "source", "100"},
		{"new_incident a word", `{"id":"` + id + `","at":"2026-06-01T02:14:07Z","new_incident":"yes"}`, 400, "new_incident", "true or false"},
		{"too large", `{"id":"` + id + `","x":"` + strings.Repeat("x", maxBody) + `"}`, 413, "", "65536 bytes"},
	}
	for _, c := range cases {
		t.Run(c.name, func(t *testing.T) {
			resp, body := r.raw("POST", api+"/marks", c.body, http.Header{"Content-Type": {"application/json"}})
			var p Problem
			if err := json.Unmarshal(body, &p); err != nil {
				t.Fatalf("answer %s: %v", body, err)
			}
			if resp.StatusCode != c.status || p.Status != c.status || p.Field != c.field || !strings.Contains(p.Detail+p.Expected, c.says) {
				t.Errorf("answer = %d %s; want %d, field %q, saying %q", resp.StatusCode, body, c.status, c.field, c.says)
			}
			if ct := resp.Header.Get("Content-Type"); ct != "application/problem+json" {
				t.Errorf("content type = %q, want application/problem+json", ct)
			}
		})
	}
	if n := r.store.LastSeq(); n != 0 {
		t.Errorf("%d events were kept from bad input", n)
	}
}

func TestOddButGoodMarks(t *testing.T) {
	r := rigOn(t, realStore(t), nil)
	for name, more := range map[string]map[string]any{
		"a word as source":    {"position": somewhere, "source": "bridge-script"},
		"members of a future": {"position": somewhere, "altitude_m": 3},
		"null for absent":     {"position": nil, "error_m": nil, "person": nil},
	} {
		t.Run(name, func(t *testing.T) { r.t = t; r.markNow(more) })
	}
	upper := strings.ToUpper(newID())
	var a markAnswer
	r.do("POST", api+"/marks", map[string]any{"id": upper, "at": start}, &a)
	if string(a.Event.ID) != strings.ToLower(upper) {
		t.Errorf("id = %s, want the lower case of %s", a.Event.ID, upper)
	}
}

func TestBadEvents(t *testing.T) {
	r := rigOn(t, realStore(t), nil)
	p, in := newPhone(), incident.IncidentID(newID())
	good := p.write(t, in, start, incident.KindMarked, marked())
	change := func(name string, value any) map[string]any {
		var m map[string]any
		text, _ := json.Marshal(good)
		_ = json.Unmarshal(text, &m)
		m[name] = value
		return m
	}
	many := make([]incident.Event, maxBatch+1)
	for i := range many {
		many[i] = good
	}
	for _, c := range []struct {
		name  string
		body  any
		field string
	}{
		{"no events", map[string]any{}, "events"},
		{"none", map[string]any{"events": []int{}}, "events"},
		{"not a list", map[string]any{"events": 5}, "events"},
		{"too many", batchOf(many...), "events"},
		{"an event of text", map[string]any{"events": []any{"x"}}, "events[0].event"},
		{"id", map[string]any{"events": []any{change("id", "x")}}, "events[0].id"},
		{"time", map[string]any{"events": []any{change("at", "noon")}}, "events[0].at"},
		{"number", map[string]any{"events": []any{change("device_seq", "one")}}, "events[0].device_seq"},
		{"number 0", map[string]any{"events": []any{change("device_seq", 0)}}, "events[0].device_seq"},
		{"content changed", map[string]any{"events": []any{change("by", "another")}}, "events[0].hash"},
		{"another incident", map[string]any{"events": []any{p.write(t, incident.IncidentID(newID()), start, incident.KindNote, incident.Note{Text: "x"})}}, "events[0].incident"},
		{"body", map[string]any{"events": []any{p.write(t, in, start, incident.KindMarked, map[string]any{"source": "phone"})}}, "events[0].body.source"},
	} {
		t.Run(c.name, func(t *testing.T) {
			var problem Problem
			resp := r.do("POST", eventsPath(in), c.body, &problem)
			if resp.StatusCode != 400 && resp.StatusCode != 413 || problem.Field != c.field && resp.StatusCode == 400 {
				t.Errorf("answer = %d %+v, want 400 about %s", resp.StatusCode, problem, c.field)
			}
		})
	}
	for path, field := range map[string]string{
		api + "/stream?after=-1":                 "after",
		api + "/stream?after=x":                  "after",
		api + "/track?from=yesterday":            "from",
		api + "/track?to=2026-06-01":             "to",
		api + "/incidents/" + string(in):         "",
		api + "/nowhere":                         "",
		eventsPath(in) + "?limit=5":              "",
		api + "/track?from=2020-01-01T00:00:00Z": "from",
	} {
		var problem Problem
		if resp := r.do("GET", path, nil, &problem); resp.StatusCode/100 != 4 || problem.Field != field {
			t.Errorf("GET %s = %d %+v, want a problem about %q", path, resp.StatusCode, problem, field)
		}
	}
}

// FuzzReadMark: whatever comes, it is read or refused with a problem that is
// no fault of the server.
func FuzzReadMark(f *testing.F) {
	for _, seed := range []string{
		`{"id":"018f3c2e-7b1a-7c3d-9e4f-0123456789ab","at":"2026-06-01T02:14:07Z"}`,
		`{"id":"018f3c2e-7b1a-7c3d-9e4f-0123456789ab","at":"2026-06-01T02:14:07Z","position":{"lat":54.1,"lon":7.9},"person":2,"side":"port"}`,
		`{"events":[{"id":"018f3c2e-7b1a-7c3d-9e4f-0123456789ab","body":{}}]}`, `[]`, `{"id":1e999}`, "{\"id\":\"\xff\"}",
	} {
		f.Add([]byte(seed))
	}
	f.Fuzz(func(t *testing.T, data []byte) {
		o, err := readObject(data)
		if err == nil {
			var m markRequest
			if m, err = readMark(o); err == nil {
				if _, err := m.fingerprint(); err != nil {
					t.Errorf("a mark that was read has no fingerprint: %v", err)
				}
			}
		}
		if err != nil {
			if p := problemOf(err); p.Status != 400 {
				t.Errorf("problem %+v, want 400", p)
			}
		}
		if _, err := readEvent(data); err != nil && problemOf(err).Status != 400 {
			t.Errorf("event: %v, want a problem of 400", err)
		}
	})
}
