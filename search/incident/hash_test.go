package incident

import (
	"encoding/json"
	"errors"
	"flag"
	"os"
	"os/exec"
	"strings"
	"testing"

	"wakeback/drift/nav"
)

var update = flag.Bool("update", false, "write the vectors that the page's tests read")

// The sample of RFC 8785 section 3.2.2 and its canonical form, section 3.2.3
// (from memory), and the traps of numbers and strings.
func TestCanonicalJSON(t *testing.T) {
	tests := map[string]struct{ in, want string }{
		"RFC 8785 sample": {
			`{"numbers":[333333333.33333329,1E30,4.50,2e-3,0.000000000000000000000000001],"string":"\u20ac$\u000F\u000aA'\u0042\u0022\u005c\\\"\/","literals":[null,true,false]}`,
			`{"literals":[null,true,false],"numbers":[333333333.3333333,1e+30,4.5,0.002,1e-27],"string":"€$\u000f\nA'B\"\\\\\"/"}`,
		},
		"negative zero":        {`[-0, -0.0, 0]`, `[0,0,0]`},
		"large and small":      {`[1e21, 1e20, 123456789012345680000, 1e-6, 1e-7]`, `[1e+21,100000000000000000000,123456789012345680000,0.000001,1e-7]`},
		"members by code unit": {`{"b":1,"a":2,"\u00e9":3,"\ud83d\ude00":4,"\ufb33":5,"B":6}`, "{\"B\":6,\"a\":2,\"b\":1,\"\u00e9\":3,\"\U0001F600\":4,\"\ufb33\":5}"},
		"nothing escaped more": {`"<&>\u2028\u007f"`, "\"<&>\u2028\u007f\""},
	}
	for name, tt := range tests {
		t.Run(name, func(t *testing.T) {
			got, err := appendCanonicalJSON(nil, []byte(tt.in))
			if err != nil || string(got) != tt.want {
				t.Errorf("canonical(%s)\n got %s, %v\nwant %s", tt.in, got, err, tt.want)
			}
		})
	}
	for _, bad := range []string{``, `{`, `1 2`, `[1e999]`, strings.Repeat("[", 100) + strings.Repeat("]", 100)} {
		if got, err := appendCanonicalJSON(nil, []byte(bad)); !errors.Is(err, ErrCanonical) {
			t.Errorf("canonical(%.20s) = %s, %v; want an error", bad, got, err)
		}
	}
}

// canonicalInNode is the rule of RFC 8785 as an ECMAScript engine runs it.
const canonicalInNode = `
const c = v => Array.isArray(v) ? '[' + v.map(c).join(',') + ']'
  : v && typeof v === 'object' ? '{' + Object.keys(v).sort().map(k => JSON.stringify(k) + ':' + c(v[k])).join(',') + '}'
  : JSON.stringify(v)
const lines = require('fs').readFileSync(0, 'utf8').split('\n').filter(Boolean)
console.log(lines.map(l => c(JSON.parse(l))).join('\n'))`

// A real ECMAScript engine makes the same bytes.
func TestCanonicalJSONAgainstNode(t *testing.T) {
	node, err := exec.LookPath("node")
	if err != nil {
		t.Skip("node is not installed: it is the outside check of canonical JSON")
	}
	lines := []string{
		`{"x":[0.1,1e-9,123456.789e3,5e-324,1.7976931348623157e308,-0,9007199254740993]}`,
		`{"lat":54.1234567,"lon":-7.0000001,"a":{"z":1,"y":[{"b":null,"a":true}]}}`,
		`{"text":"a\u0001\t\"\\\/ <b>&amp; \u00e9 \ud83d\ude00 \u2028","\ud83d\ude00":1,"\ufb33":2}`,
	}
	cmd := exec.Command(node, "-e", canonicalInNode)
	cmd.Stdin = strings.NewReader(strings.Join(lines, "\n"))
	out, err := cmd.Output()
	if err != nil {
		t.Fatalf("run node: %v", err)
	}
	for i, want := range strings.Split(strings.TrimRight(string(out), "\n"), "\n") {
		got, err := appendCanonicalJSON(nil, []byte(lines[i]))
		if err != nil || string(got) != want {
			t.Errorf("canonical(%s)\n got %s, %v\nnode %s", lines[i], got, err, want)
		}
	}
}

const vectorFile = "testdata/hash-vectors.json"

// The page makes the same hashes: its tests read the same file.
func TestHashVectors(t *testing.T) {
	if *update {
		writeVectors(t)
	}
	text, err := os.ReadFile(vectorFile)
	if err != nil {
		t.Fatal(err)
	}
	var events []Event
	if err := json.Unmarshal(text, &events); err != nil {
		t.Fatal(err)
	}
	if len(events) < 5 {
		t.Fatalf("%d vectors", len(events))
	}
	prev := ""
	for _, e := range events {
		if err := e.Verify(); err != nil {
			t.Errorf("%s: %v", e.Kind, err)
		}
		if e.PrevHash != prev {
			t.Errorf("%s is not chained to the event before", e.Kind)
		}
		prev = e.Hash
	}
}

func writeVectors(t *testing.T) {
	s := newStory(t)
	s.say("a", 0, KindMarked, Marked{Source: FromNothing})
	s.say("a", 0.08, KindMarked, Marked{
		Position: at(54.1234567, -7.9), Source: FromPhone, ErrorM: nav.Some(4.5), FixAgeS: nav.Some(0.25),
		SogKn: nav.Some(6.0), CogDeg: nav.Some(nav.TrueDeg(359.9)),
	}, func(e *Event) { n := int64(1500); e.ClockErrorMs = &n; e.DeviceAt = s.at(192) })
	s.say("a", 10, KindNote, Note{Text: "wind \u201csouth-west\u201d, 6 \u00b0C <b>\t\"\\ \U0001F6DF"}, func(e *Event) { e.Drill = true })
	s.say("a", 11, KindPerson, Person{Light: nav.Some(true), LifeJacket: nav.Some("worn")}, func(e *Event) { e.Test = true })
	s.say("a", 12, "kind_of_a_later_year", map[string]any{"b": []any{1e21, 0, 1e-7, nil, true}, "a": map[string]any{"é": 1, "z": 2}})
	text, err := json.MarshalIndent(s.all, "", "  ")
	if err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(vectorFile, append(text, '\n'), 0o644); err != nil {
		t.Fatal(err)
	}
}

func TestVerifyFindsAChange(t *testing.T) {
	s := newStory(t)
	e := s.say("a", 0, KindNote, Note{Text: "as it was"})
	changes := map[string]func(*Event){
		"body":       func(e *Event) { e.Body = json.RawMessage(`{"text":"as it was not"}`) },
		"time":       func(e *Event) { e.At = s.at(1) },
		"own time":   func(e *Event) { e.DeviceAt = s.at(1) },
		"author":     func(e *Event) { e.By = "b" },
		"device":     func(e *Event) { e.Device = deviceID("b") },
		"number":     func(e *Event) { e.DeviceSeq = 9 },
		"chain":      func(e *Event) { e.PrevHash = e.Hash },
		"incident":   func(e *Event) { e.Incident = incidentID(9) },
		"drill":      func(e *Event) { e.Drill = true },
		"clock":      func(e *Event) { n := int64(1); e.ClockErrorMs = &n },
		"kind":       func(e *Event) { e.Kind = KindClue },
		"event's id": func(e *Event) { e.ID = "018f3c2e-0000-7000-8000-000000000777" },
	}
	for name, change := range changes {
		changed := e
		change(&changed)
		if err := changed.Verify(); !errors.Is(err, ErrHash) {
			t.Errorf("a changed %s is not found: %v", name, err)
		}
	}
	same := e
	same.Seq, same.ReceivedAt = 7, s.at(3)
	same.Body = json.RawMessage(" { \"text\" : \"as it was\" } ")
	if err := same.Verify(); err != nil {
		t.Errorf("what the server adds, or white space, changes the hash: %v", err)
	}
}
