package server

import (
	"bytes"
	"context"
	"encoding/json"
	"io"
	"net/http"
	"regexp"
	"slices"
	"strings"
	"testing"
	"testing/fstest"
	"time"

	"github.com/getkin/kin-openapi/openapi3"
	"github.com/getkin/kin-openapi/openapi3filter"
	"github.com/getkin/kin-openapi/routers"
	"github.com/getkin/kin-openapi/routers/gorillamux"

	"wakeback/drift/nav"
	"wakeback/search/incident"
	"wakeback/server/feed"
	"wakeback/server/gate"
)

func document(t *testing.T) *openapi3.T {
	t.Helper()
	doc, err := openapi3.NewLoader().LoadFromData(openAPI)
	if err != nil {
		t.Fatal(err)
	}
	return doc
}

// TestDocumentHasEveryRoute compares the document with the routes, both ways.
func TestDocumentHasEveryRoute(t *testing.T) {
	r := rigOn(t, realStore(t), func(c *Config) { c.Page = fstest.MapFS{"index.html": {}} })
	param := regexp.MustCompile(`:(\w+)`)
	var real, written []string
	for _, route := range r.echo.Routes() {
		if route.Path == "/*" || strings.Contains(route.Method, "route_not_found") {
			continue // the page is not part of the API
		}
		real = append(real, route.Method+" "+param.ReplaceAllString(route.Path, "{$1}"))
	}
	for path, item := range document(t).Paths.Map() {
		for method := range item.Operations() {
			written = append(written, method+" "+path)
		}
	}
	slices.Sort(real)
	slices.Sort(written)
	for _, route := range real {
		if !slices.Contains(written, route) {
			t.Errorf("%s is served but not in the document", route)
		}
	}
	for _, route := range written {
		if !slices.Contains(real, route) {
			t.Errorf("%s is in the document but not served", route)
		}
	}
}

func TestDocumentHasEveryProblem(t *testing.T) {
	var doc struct {
		Problems map[string]string `json:"x-problems"`
	}
	if err := json.Unmarshal(openAPI, &doc); err != nil {
		t.Fatal(err)
	}
	for _, p := range problemTypes {
		if doc.Problems[p.name] == "" {
			t.Errorf("problem %s is not in the document", p.name)
		}
		delete(doc.Problems, p.name)
	}
	for name := range doc.Problems {
		t.Errorf("problem %s is in the document only", name)
	}
}

// checker sends requests and holds every answer against the document.
type checker struct {
	*rig
	router routers.Router
	seen   map[string]bool // method, path and status
}

func (c *checker) send(method, path string, body any, header http.Header) []byte {
	c.t.Helper()
	resp, text := c.raw(method, path, body, header)
	var in []byte
	if body != nil {
		in, _ = json.Marshal(body)
		if s, ok := body.(string); ok {
			in = []byte(s)
		}
	}
	req, err := http.NewRequest(method, path, bytes.NewReader(in))
	if err != nil {
		c.t.Fatal(err)
	}
	req.Header.Set("Content-Type", "application/json")
	route, params, err := c.router.FindRoute(req)
	if err != nil {
		c.t.Fatalf("%s %s: %v", method, path, err)
	}
	options := &openapi3filter.Options{IncludeResponseStatus: true, AuthenticationFunc: openapi3filter.NoopAuthenticationFunc}
	ri := &openapi3filter.RequestValidationInput{Request: req, PathParams: params, Route: route, Options: options}
	if resp.StatusCode < 300 {
		if err := openapi3filter.ValidateRequest(context.Background(), ri); err != nil {
			c.t.Errorf("%s %s was taken, but the document refuses the request: %v", method, path, err)
		}
	}
	out := &openapi3filter.ResponseValidationInput{
		RequestValidationInput: ri, Status: resp.StatusCode, Header: resp.Header,
		Body: io.NopCloser(bytes.NewReader(text)), Options: options,
	}
	if err := openapi3filter.ValidateResponse(context.Background(), out); err != nil {
		c.t.Errorf("%s %s = %d %s: %v", method, path, resp.StatusCode, text, err)
	}
	c.seen[method+" "+route.Path] = true
	return text
}

// TestAnswersFollowTheDocument makes each request at least once, and many that
// go wrong.
func TestAnswersFollowTheDocument(t *testing.T) {
	doc := document(t)
	doc.Servers = nil
	router, err := gorillamux.NewRouter(doc)
	if err != nil {
		t.Fatal(err)
	}
	r := rigOn(t, realStore(t), func(c *Config) { c.OpenPairing = false })
	r.bridge.set(sailing(somewhere, start, 30, 6))
	c := &checker{rig: r, router: router, seen: map[string]bool{}}
	code, err := r.gate.NewCode(gate.Skipper)
	if err != nil {
		t.Fatal(err)
	}
	c.send("POST", api+"/pair", map[string]any{"code": "00000000", "name": "x"}, nil)
	var paired pairAnswer
	if err := json.Unmarshal(c.send("POST", api+"/pair", map[string]any{"code": code.Code, "name": "Skipper"}, nil), &paired); err != nil {
		t.Fatal(err)
	}
	as := bearer(paired.Token)
	for range 5 {
		r.turn()
		r.clock.add(time.Second)
	}
	mark := map[string]any{"id": newID(), "at": r.clock.now()}
	var marked markAnswer
	if err := json.Unmarshal(c.send("POST", api+"/marks", mark, as), &marked); err != nil {
		t.Fatal(err)
	}
	c.send("POST", api+"/marks", mark, as)
	c.send("POST", api+"/marks", map[string]any{"id": mark["id"], "at": start, "position": somewhere}, as)
	c.send("POST", api+"/marks", map[string]any{"id": "x"}, as)
	c.send("POST", api+"/marks", map[string]any{"id": newID(), "at": start, "position": somewhere, "error_m": 3, "source": "phone", "person": 2, "side": "port", "new_incident": true}, as)
	c.send("POST", api+"/marks", mark, nil)
	p := newPhone()
	in := marked.Incident.ID
	batch := batchOf(
		p.write(t, in, start, incident.KindWind, incident.WindObserved{FromDeg: 200, SpeedKn: 12, ObservedBy: incident.ObservedBy{Source: "person"}}),
		p.write(t, in, start, incident.KindAlongside, incident.OfPerson{Person: nav.Some(incident.PersonNo(1))}))
	for range 2 {
		c.send("POST", eventsPath(in), batch, as)
	}
	c.send("POST", eventsPath(in), map[string]any{"events": []any{}}, as)
	for _, path := range []string{
		"/incidents", "/incidents/" + string(in), "/incidents/none", "/incidents/" + string(in) + "/events?after=1&limit=1",
		"/incidents/" + string(in) + "/events?limit=many", "/status", "/track", "/track?from=never", "/me", "/devices", "/stream",
	} {
		c.send("GET", api+path, nil, as)
		c.send("GET", api+path, nil, nil)
	}
	r.phones.put(phoneFix{Device: "d", Name: "n", At: start, Position: somewhere}, true)
	r.bridge.set(func(now time.Time) feed.Vessel { return feed.Vessel{At: now} })
	c.send("GET", api+"/status", nil, as)
	c.send("POST", api+"/codes", map[string]any{"role": "watch"}, as)
	c.send("POST", api+"/codes", map[string]any{"role": "king"}, as)
	c.send("PATCH", api+"/devices/"+string(paired.Device.ID), map[string]any{"name": "Other"}, as)
	c.send("PATCH", api+"/devices/"+string(paired.Device.ID), map[string]any{}, as)
	c.send("DELETE", api+"/devices/none", nil, as)
	c.send("DELETE", api+"/devices/"+string(paired.Device.ID), nil, as)
	for _, at := range []string{"", api} {
		for _, path := range []string{"/openapi.json", "/healthz", "/readyz", "/metrics"} {
			c.send("GET", at+path, nil, nil)
		}
	}
	for path, item := range doc.Paths.Map() {
		for method := range item.Operations() {
			if !c.seen[method+" "+path] {
				t.Errorf("%s %s was never asked", method, path)
			}
		}
	}
}
