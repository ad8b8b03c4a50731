package main

import (
	"bytes"
	"context"
	"encoding/json"
	"errors"
	"io"
	"os"
	"os/exec"
	"strings"
	"testing"
	"time"
)

// asProgram in the environment makes this test binary the program itself, so
// that whole commands run in a process of their own.
const asProgram = "WAKEBACK_TEST_PROGRAM"

func TestMain(m *testing.M) {
	if os.Getenv(asProgram) != "" {
		main()
	}
	os.Exit(m.Run())
}

// outcome is what a command leaves behind.
type outcome struct {
	out, err string
	code     int
}

// command is the program with its arguments, not started. Its home is empty.
func command(t *testing.T, ctx context.Context, args ...string) *exec.Cmd {
	t.Helper()
	self, err := os.Executable()
	if err != nil {
		t.Fatal(err)
	}
	c := exec.CommandContext(ctx, self, args...)
	home := t.TempDir()
	c.Env = append(os.Environ(), asProgram+"=1", "HOME="+home, "XDG_CONFIG_HOME="+home, "TZ=UTC",
		"GORACE=atexit_sleep_ms=20") // else each ends a second late under the race detector
	return c
}

// call runs a whole command.
func call(t *testing.T, args ...string) outcome {
	t.Helper()
	ctx, cancel := context.WithTimeout(t.Context(), time.Minute) // far more than any takes; for one that hangs
	defer cancel()
	c := command(t, ctx, args...)
	var out, errs bytes.Buffer
	c.Stdout, c.Stderr = &out, &errs
	err := c.Run()
	var exit *exec.ExitError
	if err != nil && !errors.As(err, &exit) {
		t.Fatalf("wakeback %v: %v", args, err)
	}
	return outcome{out.String(), errs.String(), c.ProcessState.ExitCode()}
}

// document is the one JSON document that a command printed, and nothing else.
func document(t *testing.T, o outcome) map[string]any {
	t.Helper()
	if o.code != exitOK {
		t.Fatalf("exit %d: %s", o.code, o.err)
	}
	dec := json.NewDecoder(strings.NewReader(o.out))
	var doc map[string]any
	if err := dec.Decode(&doc); err != nil {
		t.Fatalf("%v in %q", err, o.out)
	}
	if _, err := dec.Token(); !errors.Is(err, io.EOF) {
		t.Fatalf("more than one document: %q", o.out)
	}
	return doc
}

func TestHelp(t *testing.T) {
	for _, args := range [][]string{nil, {"--help"}, {"-h"}} {
		o := call(t, args...)
		if o.code != exitOK || !strings.Contains(o.out, "Call for help first") || o.err != "" {
			t.Errorf("wakeback %v = %d, %q, %q", args, o.code, o.out, o.err)
		}
	}
	for _, verb := range []string{"serve", "pair", "backup", "bearing", "drift", "legs square", "legs track", "turn", "version"} {
		o := call(t, append(strings.Fields(verb), "--help")...)
		if o.code != exitOK || !strings.Contains(o.out, "Usage: wakeback "+verb) {
			t.Errorf("wakeback %s --help = %d, %q", verb, o.code, o.out)
		}
	}
}

// Each kind of bad input: exit 2, nothing on standard output, and a message
// that names what is wrong and what was expected.
func TestBadInput(t *testing.T) {
	for _, test := range []struct{ name, args, want string }{
		{"no such verb", "fly", `unexpected argument fly`},
		{"no such flag", "version --fast", `unknown flag --fast`},
		{"an argument is missing", "bearing 54.1,7.9", `expected "<to>"`},
		{"too many", "bearing 54.1,7.9 54.2,8 54.3,8", `unexpected argument`},
		{"half a position", "bearing 54.1 54.2,8.1", `FROM: not a position: "54.1"`},
		{"latitude beyond the pole", "bearing 54.1,7.9 94.2,8.1", `TO: not a position`},
		{"a comma for the decimal point", "bearing 54,1;7,9 54.2,8.1", `FROM: not a position`},
		{"a southern position, wrong", "bearing -94.1,7.9 54.2,8.1", `"-94.1,7.9"`},
		{"a time without a zone", "bearing 54.1,7.9 54.2,8.1 --at 2026-07-01T12:00:00", `--at: not a time`},
		{"a time that is none", "bearing 54.1,7.9 54.2,8.1 --at noon", `--at: not a time`},
		{"a role that is none", "pair --role captain", `--role: role "captain", expected watch, crew or skipper`},
		{"a log level that is none", "serve --demo --log-level loud", `--log-level: "loud", expected debug, info, warn or error`},
		{"a network without TLS", "serve", `give --cert and --key; or use --plain or --demo`},
		{"plain on a network", "serve --plain --listen 0.0.0.0:0", `plain HTTP on "0.0.0.0:0"`},
		{"a demonstration on a network", "serve --demo --listen 0.0.0.0:0", `on "0.0.0.0:0"`},
		{"no port", "serve --plain --listen 127.0.0.1", `expected HOST:PORT`},
		{"a certificate without a key", "serve --cert boat.pem", `--cert and --key: expected both or none`},
		{"a certificate that is not there", "serve --cert none.pem --key none.pem", `no such file`},
		{"a certificate and plain", "serve --plain --cert a.pem --key b.pem", `leave one of the two out`},
		{"a feed that is none", "serve --plain --listen 127.0.0.1:0 --feed http://x", `expected tcp://HOST:PORT`},
		{"drift without a mark", "drift --at 2026-07-01T12:00:00Z", `--mark and --marked`},
		{"an object that is none", "drift --mark 54.1,7.9 --marked 2026-07-01T12:00:00Z --at 2026-07-01T13:00:00Z --object cork", `--object`},
		{"a wind that is none", "drift --mark 54.1,7.9 --marked 2026-07-01T12:00:00Z --at 2026-07-01T13:00:00Z --wind strong", `--wind`},
		{"legs to no side", "legs square --datum 54.1,7.9 --spacing 0.1 --first 90 --turns up", `--turns: "up", expected right or left`},
		{"a course that cannot be made good", "legs square --datum 54.1,7.9 --spacing 0.1 --first 0 --speed 2 --current 090/5", `made good`},
		{"a speed of nothing", "turn single --heading 0 --speed 0 --side port --turn-radius 30", `--speed: expected more than 0`},
		{"a manoeuvre that is none", "turn loop --heading 0 --speed 6 --side port --turn-radius 30", `loop`},
		{"a side that is none", "turn single --heading 0 --speed 6 --side left --turn-radius 30", `--side: "left", expected port or starboard`},
	} {
		t.Run(test.name, func(t *testing.T) {
			args := strings.Fields(test.args)
			if strings.HasPrefix(test.args, "serve --plain") {
				args = append(args, "--data", t.TempDir())
			}
			o := call(t, args...)
			if o.code != exitBadInput || o.out != "" || !strings.Contains(o.err, test.want) {
				t.Errorf("wakeback %s = exit %d, out %q, err %q; want exit 2 and %q", test.args, o.code, o.out, o.err, test.want)
			}
			if !strings.HasPrefix(o.err, "wakeback: ") {
				t.Errorf("err %q does not say who speaks", o.err)
			}
		})
	}
}

// Failures that are nobody's bad input: exit 1.
func TestFailures(t *testing.T) {
	for _, test := range []struct{ name, args, want string }{
		{"pair without a server", "pair --data DIR", `no server is running on this data folder`},
		{"backup without a server", "backup copy.db --data DIR", `no server is running on this data folder`},
		{"the data folder is a file", "serve --plain --listen 127.0.0.1:0 --data FILE", `open the store in`},
	} {
		t.Run(test.name, func(t *testing.T) {
			dir := t.TempDir()
			file := dir + "/file"
			if err := os.WriteFile(file, nil, 0o600); err != nil {
				t.Fatal(err)
			}
			o := call(t, strings.Fields(strings.NewReplacer("DIR", dir, "FILE", file).Replace(test.args))...)
			if o.code != exitFailure || o.out != "" || !strings.Contains(o.err, test.want) {
				t.Errorf("wakeback %s = exit %d, out %q, err %q; want exit 1 and %q", test.args, o.code, o.out, o.err, test.want)
			}
		})
	}
}

func TestVersion(t *testing.T) {
	if o := call(t, "version"); o.code != exitOK || strings.TrimSpace(o.out) == "" {
		t.Errorf("version = %+v", o)
	}
	if doc := document(t, call(t, "version", "--json")); doc["version"] == "" {
		t.Errorf("version --json = %v", doc)
	}
}
