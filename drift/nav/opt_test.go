package nav

import (
	"encoding/json"
	"testing"
)

func TestOpt(t *testing.T) {
	var absent Opt[float64]
	if absent != None[float64]() || absent.IsSet() || !absent.IsZero() || absent.Or(7) != 7 {
		t.Errorf("the zero Opt is not absent: %+v", absent)
	}
	if _, ok := absent.Get(); ok {
		t.Error("an absent value was there to get")
	}
	zero := Some(0.0)
	if v, ok := zero.Get(); !ok || v != 0 || !zero.IsSet() || zero.IsZero() || zero.Or(7) != 0 {
		t.Errorf("a present zero is not present: %+v", zero)
	}
}

// TestOptJSON: zero, null and nothing are three things.
func TestOptJSON(t *testing.T) {
	type body struct {
		A Opt[float64]  `json:"a"`
		B Opt[float64]  `json:"b,omitzero"`
		C Opt[Position] `json:"c,omitzero"`
	}
	for _, c := range []struct {
		name string
		v    body
		want string
	}{
		{"absent", body{}, `{"a":null}`},
		{"zero", body{A: Some(0.0), B: Some(0.0)}, `{"a":0,"b":0}`},
		{"position", body{C: Some(PositionFromDegrees(54.1, -7.9))}, `{"a":null,"c":{"lat":54.1,"lon":-7.9}}`},
	} {
		got, err := json.Marshal(c.v)
		if err != nil || string(got) != c.want {
			t.Errorf("%s: %s, %v, want %s", c.name, got, err, c.want)
		}
		var back body
		if err := json.Unmarshal(got, &back); err != nil || back.A != c.v.A || back.B != c.v.B || back.C.IsSet() != c.v.C.IsSet() {
			t.Errorf("%s: came back as %+v, %v", c.name, back, err)
		}
	}
}

func TestOptJSONReplaces(t *testing.T) {
	v := Some(3.0)
	if err := json.Unmarshal([]byte(" null "), &v); err != nil || v.IsSet() {
		t.Errorf("null left %+v, %v", v, err)
	}
	if err := json.Unmarshal([]byte(`"four"`), &v); err == nil || v.IsSet() {
		t.Errorf("a word was taken for a number: %+v", v)
	}
}
