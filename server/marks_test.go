package server

import (
	"bytes"
	"net/http"
	"testing"

	"wakeback/drift/nav"
)

func TestMarkOpensAndIsHeard(t *testing.T) {
	r := rigOn(t, newMemStore(), nil)
	ear := r.listen("", nil)
	hello := ear.wait("hello", nil)
	if hello["last_seq"] != 0.0 || hello["epoch"] == "" {
		t.Errorf("hello = %v, want last_seq 0 and an epoch", hello)
	}
	id := newID()
	in := map[string]any{"id": id, "at": start, "position": nav.PositionFromDegrees(54.1, 7.9), "error_m": 5}
	resp, first := r.raw("POST", api+"/marks", in, nil)
	if resp.StatusCode != http.StatusCreated {
		t.Fatalf("POST /marks = %d %s, want 201", resp.StatusCode, first)
	}
	event := ear.wait("event", nil)["event"].(map[string]any)
	if event["id"] != id || event["seq"] != 1.0 {
		t.Errorf("streamed event = %v, want id %s and seq 1", event, id)
	}
	resp, again := r.raw("POST", api+"/marks", in, nil)
	if resp.StatusCode != http.StatusOK || !bytes.Equal(first, again) {
		t.Errorf("repeat = %d %s, want 200 and the same body %s", resp.StatusCode, again, first)
	}
	in["error_m"] = 6
	var p Problem
	if resp := r.do("POST", api+"/marks", in, &p); resp.StatusCode != http.StatusConflict || p.Field != "id" {
		t.Errorf("other content = %d %+v, want 409 about id", resp.StatusCode, p)
	}
	if st := r.only(); len(st.Marks) != 1 {
		t.Errorf("%d marks, want 1", len(st.Marks))
	}
}
