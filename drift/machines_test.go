package drift_test

import (
	"fmt"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"runtime"
	"strings"
	"testing"
)

// The cloud of the server and of a phone differ by rounding at most. Each of
// 361 steps rounds some ten products of at most 20 km; the coefficients may
// differ in the last bit.
const machinesTolM = 361 * 10 * 2e4 * 0x1p-52

func TestWasmAgrees(t *testing.T) {
	agree(t, node(t, dump(t, "GOOS=js", "GOARCH=wasm")))
}

// Machines that fuse multiplication and addition, as arm64 does, round
// differently. Processors of this kind do so too, when built for.
func TestFusedAgrees(t *testing.T) {
	if runtime.GOARCH != "amd64" {
		t.Skip("not amd64")
	}
	out, err := exec.Command(dump(t, "GOAMD64=v3")).CombinedOutput()
	if err != nil && strings.Contains(string(out), "GOAMD64") {
		t.Skip("this processor does not fuse")
	}
	if err != nil {
		t.Fatalf("%v\n%s", err, out)
	}
	agree(t, string(out))
}

// agree compares what testdata/dump printed elsewhere with what it prints here.
func agree(t *testing.T, other string) {
	t.Helper()
	out, err := exec.Command(dump(t)).Output()
	if err != nil {
		t.Fatal(err)
	}
	here, there := strings.Fields(string(out)), strings.Fields(other)
	if len(here) != 3*500 || len(there) != len(here) {
		t.Fatalf("%d fields here, %d there", len(here), len(there))
	}
	worst := 0.0
	for i, field := range here {
		var a, b uint64
		if field == "member" {
			continue
		}
		if _, err := fmt.Sscanf(field+" "+there[i], "%x %x", &a, &b); err != nil {
			t.Fatal(err)
		}
		worst = max(worst, math.Abs(math.Float64frombits(a)-math.Float64frombits(b)))
	}
	t.Logf("members differ by up to %.2g m, bound %.2g m", worst, machinesTolM)
	if !(worst <= machinesTolM) {
		t.Errorf("members differ by up to %v m, want at most %v", worst, machinesTolM)
	}
}

// dump builds testdata/dump with some settings.
func dump(t testing.TB, settings ...string) string {
	t.Helper()
	if runtime.GOOS == "js" || testing.Short() {
		t.Skip("builds programs")
	}
	if _, err := exec.LookPath("go"); err != nil {
		t.Skip("no go command")
	}
	program := filepath.Join(t.TempDir(), "dump")
	command := exec.Command("go", "build", "-o", program, "./testdata/dump")
	command.Env = append(os.Environ(), settings...)
	if out, err := command.CombinedOutput(); err != nil {
		t.Fatalf("building with %v: %v\n%s", settings, err, out)
	}
	return program
}

// node runs a js/wasm program.
func node(t testing.TB, program string, arguments ...string) string {
	t.Helper()
	root, err := exec.Command("go", "env", "GOROOT").Output()
	if err != nil {
		t.Fatal(err)
	}
	script := filepath.Join(strings.TrimSpace(string(root)), "lib", "wasm", "go_js_wasm_exec")
	if _, err := os.Stat(script); err != nil {
		t.Skip("no go_js_wasm_exec")
	}
	if _, err := exec.LookPath("node"); err != nil {
		t.Skip("no Node")
	}
	run := exec.Command(script, append([]string{program}, arguments...)...)
	run.Env = []string{"PATH=" + os.Getenv("PATH"), "HOME=" + os.Getenv("HOME")} // js/wasm takes a small environment only
	out, err := run.CombinedOutput()
	if err != nil {
		t.Fatalf("running under Node: %v\n%s", err, out)
	}
	return string(out)
}

// BenchmarkCloud6hWasm is the least of several runs of 10,000 members over 6 h
// under Node.
func BenchmarkCloud6hWasm(b *testing.B) {
	program := dump(b, "GOOS=js", "GOARCH=wasm")
	for b.Loop() {
		var ms float64
		if _, err := fmt.Sscan(node(b, program, "time"), &ms); err != nil {
			b.Fatal(err)
		}
		b.ReportMetric(ms, "wasm-ms")
	}
}
