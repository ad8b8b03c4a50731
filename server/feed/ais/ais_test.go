package ais

import (
	"encoding/csv"
	"errors"
	"math"
	"os"
	"strconv"
	"strings"
	"testing"
	"time"

	"wakeback/drift/nav"
	"wakeback/server/feed/nmea"
)

var t0 = time.Date(2026, 6, 1, 2, 0, 0, 0, time.UTC)

// fragmentOf reads a VDM sentence.
func fragmentOf(t testing.TB, line string) Fragment {
	t.Helper()
	_, body, err := nmea.Parse(line)
	if err != nil {
		t.Fatalf("%s: %v", line, err)
	}
	v, ok := body.(*nmea.VDM)
	if !ok {
		t.Fatalf("%s is a %T", line, body)
	}
	return Fragment{v.Fragments, v.Fragment, v.Sequence.Or(-1), v.Channel, v.Payload, v.FillBits}
}

// read puts the sentences of one message together.
func read(t testing.TB, lines ...string) (m Message, err error) {
	t.Helper()
	var a Assembler
	done := false
	for _, line := range lines {
		if done {
			t.Fatalf("done before %s", line)
		}
		if m, done, err = a.Add(fragmentOf(t, line), t0); err != nil {
			return m, err
		}
	}
	if !done {
		t.Fatalf("not done after %d sentences", len(lines))
	}
	return m, nil
}

func examples(t testing.TB) []map[string]string {
	t.Helper()
	text, err := os.ReadFile("testdata/examples.csv")
	if err != nil {
		t.Fatal(err)
	}
	r := csv.NewReader(strings.NewReader(string(text)))
	r.Comment = '#'
	all, err := r.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var out []map[string]string
	for _, row := range all[1:] {
		m := map[string]string{}
		for i, c := range row {
			m[all[0][i]] = c
		}
		if strings.HasPrefix(m["sentences"], "!") {
			out = append(out, m)
		}
	}
	return out
}

// Every published sentence and every fixture of the table decodes to what
// stands beside it.
func TestExamples(t *testing.T) {
	rows := examples(t)
	if len(rows) < 12 {
		t.Fatalf("%d rows", len(rows))
	}
	for _, row := range rows {
		m, err := read(t, strings.Split(row["sentences"], " | ")...)
		if err != nil {
			t.Errorf("%s: %v", row["sentences"], err)
			continue
		}
		typ, _ := strconv.Atoi(row["type"])
		mmsi, _ := strconv.ParseUint(row["mmsi"], 10, 32)
		if m.Type != typ || uint64(m.MMSI) != mmsi {
			t.Errorf("%s: type %d of %d", row["sentences"], m.Type, m.MMSI)
		}
		checkExpected(t, m, row["expected"])
	}
}

// checkExpected compares the figures named in the words of the table.
func checkExpected(t *testing.T, m Message, expected string) {
	t.Helper()
	for _, item := range strings.Split(expected, ";") {
		words := strings.Fields(item)
		if len(words) < 2 {
			continue
		}
		v, err := strconv.ParseFloat(words[1], 64)
		number := err == nil
		na := strings.Contains(item, "n/a") || words[0] == "HDG" && v == 511
		p, okP := m.Position.Get()
		switch {
		case words[0] == "SOG" && number:
			same(t, item, m.SogKn.Or(math.NaN()), v, 1e-9)
		case words[0] == "lat" && number:
			same(t, item, p.LatDeg(), v, 5e-8)
		case words[0] == "lon" && number && okP:
			same(t, item, p.LonDeg(), v, 5e-8)
		case words[0] == "COG" && na, words[0] == "HDG" && na:
			if words[0] == "COG" && m.CogTrue.IsSet() || words[0] == "HDG" && m.Heading.IsSet() {
				t.Errorf("%s: a value that is not available is there", item)
			}
		case words[0] == "COG" && number:
			same(t, item, float64(m.CogTrue.Or(-1)), v, 1e-9)
		case words[0] == "HDG" && number:
			same(t, item, float64(m.Heading.Or(-1)), v, 1e-9)
		case words[0] == "s" && number:
			same(t, item, float64(m.Second.Or(-1)), v, 0)
		case words[0] == "status" && number:
			same(t, item, float64(m.Status.Or(-1)), v, 0)
		}
	}
}

func same(t *testing.T, what string, got, want, tolerance float64) {
	t.Helper()
	if math.IsNaN(got) || math.Abs(got-want) > tolerance {
		t.Errorf("%s: got %v", strings.TrimSpace(what), got)
	}
}

// Texts and names of the same table, by hand.
func TestTexts(t *testing.T) {
	tests := []struct {
		lines      []string
		text, name string
		alarm      Alarm
	}{
		{[]string{"!AIVDM,1,1,,A,>5?Per18=HB1U:1@E=B0m<L,2*51"}, "RCVD YR TEST MSG", "", NoAlarm},
		{[]string{"!AIVDM,1,1,,A,>4aDT81@E=@,2*2E"}, "TEST", "", NoAlarm},
		{[]string{"!AIVDM,1,1,,A,>>O5e@0lt:04=@UHD,2*49"}, "MOB ACTIVE", "", Active},
		{[]string{"!AIVDM,1,1,,A,>>O5e@0lt:1@E=@,2*20"}, "MOB TEST", "", Test},
		{[]string{"!AIVDM,1,1,,A,>>M@rl1<59B1@E=@,2*3D"}, "SART TEST", "", Test},
		{[]string{"!AIVDM,1,1,,A,1>O5e@>P04we7P@Lh=L4lgvt0000,0*41"}, "", "", Active},
		{[]string{"!AIVDM,1,1,,A,1>O5e@?P00we7P@Lh=L>4?vt0000,0*4E"}, "", "", Test},
		{[]string{"!AIVDM,1,1,,A,H42O55i18tMET00000000000000,2*6D"}, "", "PROGUY", NoAlarm},
		{[]string{"!AIVDM,2,1,1,A,55?MbV02;H;s<HtKR20EHE:0@T4@Dn2222222216L961O5Gf0NSQEp6ClRp8,0*1C", "!AIVDM,2,2,1,A,88888888880,2*25"}, "", "EVER DIADEM", NoAlarm},
		{[]string{"!AIVDM,2,1,5,B,E1mg=5J1T4W0h97aRh6ba84<h2d;W:Te=eLvH50```q,0*46", "!AIVDM,2,2,5,B,:D44QDlp0C1DU00,2*36"}, "", "CHINA ROSE MURPHY EXPRESS ALERT", NoAlarm},
	}
	for _, tt := range tests {
		m, err := read(t, tt.lines...)
		if err != nil {
			t.Errorf("%s: %v", tt.lines[0], err)
			continue
		}
		if m.Text != tt.text || m.Name != tt.name || AlarmOf(m) != tt.alarm {
			t.Errorf("%s: text %q, name %q, alarm %d; want %q, %q, %d", tt.lines[0], m.Text, m.Name, AlarmOf(m), tt.text, tt.name, tt.alarm)
		}
	}
}

// What a report of a device means by its status: only 15 is a test.
func TestAlarmOf(t *testing.T) {
	const device, ship = 972123456, 371798000
	tests := []struct {
		name string
		m    Message
		want Alarm
	}{
		{"status 14", Message{Type: 1, MMSI: device, Status: nav.Some(14)}, Active},
		{"status 15", Message{Type: 1, MMSI: device, Status: nav.Some(15)}, Test},
		{"status 0, sent by a device that was set up wrongly", Message{Type: 1, MMSI: device, Status: nav.Some(0)}, Active},
		{"class B report, which has no status", Message{Type: 18, MMSI: device}, Active},
		{"name", Message{Type: 24, MMSI: device, Name: "MOB"}, NoAlarm},
		{"text that says neither", Message{Type: 14, MMSI: device, Text: "HELLO"}, NoAlarm},
		{"text that says both", Message{Type: 14, MMSI: device, Text: "MOB ACTIVE TEST"}, Test},
		{"a ship with status 14", Message{Type: 1, MMSI: ship, Status: nav.Some(14)}, NoAlarm},
		{"a ship that says MOB ACTIVE", Message{Type: 14, MMSI: ship, Text: "MOB ACTIVE"}, NoAlarm},
		{"SART", Message{Type: 1, MMSI: 970210000, Status: nav.Some(14)}, Active},
		{"EPIRB under test", Message{Type: 1, MMSI: 974210000, Status: nav.Some(15)}, Test},
	}
	for _, tt := range tests {
		if got := AlarmOf(tt.m); got != tt.want {
			t.Errorf("%s: %d, want %d", tt.name, got, tt.want)
		}
	}
}

func TestClasses(t *testing.T) {
	for mmsi, want := range map[uint32]Class{
		972123456: PersonDevice, 970210000: SARTDevice, 974000001: EPIRBDevice, 371798000: Ship, 111232511: SARAircraft,
		2320001: CoastStation, 992351234: AidNavigation, 982351234: Other,
	} {
		if got := ClassOf(mmsi); got != want {
			t.Errorf("ClassOf(%d) = %d, want %d", mmsi, got, want)
		}
	}
}

// Fragments that come late, twice, in another order or of two messages at once.
func TestFragments(t *testing.T) {
	one := fragmentOf(t, "!AIVDM,2,1,1,A,55?MbV02;H;s<HtKR20EHE:0@T4@Dn2222222216L961O5Gf0NSQEp6ClRp8,0*1C")
	two := fragmentOf(t, "!AIVDM,2,2,1,A,88888888880,2*25")
	var a Assembler
	add := func(f Fragment, at time.Duration) bool {
		_, done, err := a.Add(f, t0.Add(at))
		if err != nil {
			t.Fatal(err)
		}
		return done
	}
	if add(two, 0) || !add(one, time.Second) {
		t.Error("another order is not put together")
	}
	if add(one, 2*time.Second) || add(two, 10*time.Second) {
		t.Error("fragments far apart in time were put together")
	}
	for i := range 1000 {
		f := one
		f.Sequence, f.Channel = i, byte(i)
		add(f, 20*time.Second)
	}
	if len(a.parts) > maxParts {
		t.Errorf("%d messages half there", len(a.parts))
	}
}

func TestRefusals(t *testing.T) {
	var a Assembler
	for _, f := range []Fragment{
		{Count: 1, Number: 1, Payload: ""},
		{Count: 1, Number: 1, Payload: "1"},
		{Count: 1, Number: 1, Payload: "15RTgt0P\x7f"},
		{Count: 1, Number: 1, Payload: "15RTgt0PAso;90TK"},
		{Count: 1, Number: 2, Payload: "1"},
		{Count: 0, Number: 0},
		{Count: 1, Number: 1, Payload: strings.Repeat("1", 500)},
		{Count: 1, Number: 1, Payload: "K5RTgt0PAso;90TKcjM8h6g208CQ"}, // type 27
	} {
		if _, done, err := a.Add(f, t0); !errors.Is(err, ErrMessage) || done {
			t.Errorf("%+v: done %t, %v", f, done, err)
		}
	}
}

func FuzzAssembler(f *testing.F) {
	for _, row := range examples(f) {
		for _, line := range strings.Split(row["sentences"], " | ") {
			fr := fragmentOf(f, line)
			f.Add(fr.Count, fr.Number, fr.Sequence, fr.Payload, fr.FillBits)
		}
	}
	f.Fuzz(func(t *testing.T, count, number, sequence int, payload string, fill int) {
		var a Assembler
		for range 3 {
			m, done, err := a.Add(Fragment{count, number, sequence, 'A', payload, fill}, t0)
			if p, ok := m.Position.Get(); ok && p.Validate() != nil {
				t.Fatalf("position %v", p)
			}
			if done && err != nil {
				t.Fatal("done and an error")
			}
			AlarmOf(m)
		}
	})
}
