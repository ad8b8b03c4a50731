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
	"time"

	"wakeback/drift"
)

// dumpVariable makes TestDumpCloud print its cloud for TestWasmAgrees.
const dumpVariable = "DRIFT_DUMP"

// dumped is the cloud both machines make: with a window, so that members leave
// at their own times, over 6 h and some seconds.
func dumped(t testing.TB) *drift.Cloud {
	c := benchCase(t)
	c.FellTo = c.FellFrom.Add(20 * time.Minute)
	return cloudAt(t, c, drift.Options{Members: 500, Seed: 42}, c.FellFrom.Add(6*time.Hour+13*time.Second))
}

func TestDumpCloud(t *testing.T) {
	if os.Getenv(dumpVariable) == "" {
		t.Skip("only for TestWasmAgrees")
	}
	east, north := dumped(t).Points()
	for i := range east {
		fmt.Printf("member %x %x\n", math.Float64bits(east[i]), math.Float64bits(north[i]))
	}
}

// The cloud of the server and of a phone differ by rounding at most.
func TestWasmAgrees(t *testing.T) {
	if runtime.GOOS == "js" || testing.Short() {
		t.Skip("builds the tests for js/wasm")
	}
	out := runWasm(t, map[string]string{dumpVariable: "1"}, "-test.run=TestDumpCloud$", "-test.v")
	east, north := dumped(t).Points()
	// Each of 361 steps rounds some ten products of at most 20 km; the
	// coefficients may differ in the last bit.
	const tol = 361 * 10 * 2e4 * 0x1p-52
	i, worst := 0, 0.0
	for line := range strings.Lines(out) {
		var e, n uint64
		if got, _ := fmt.Sscanf(line, "member %x %x", &e, &n); got != 2 {
			continue
		}
		worst = max(worst, math.Abs(math.Float64frombits(e)-east[i]), math.Abs(math.Float64frombits(n)-north[i]))
		i++
	}
	if i != len(east) {
		t.Fatalf("%d members, want %d\n%s", i, len(east), out)
	}
	if !(worst <= tol) {
		t.Errorf("members differ by up to %v m, want at most %v", worst, tol)
	}
}

// runWasm builds this package's tests for js/wasm and runs them under Node.
func runWasm(t testing.TB, env map[string]string, arguments ...string) string {
	t.Helper()
	root, err := exec.Command("go", "env", "GOROOT").Output()
	if err != nil {
		t.Skip("no go command")
	}
	script := filepath.Join(strings.TrimSpace(string(root)), "lib", "wasm", "go_js_wasm_exec")
	if _, err := os.Stat(script); err != nil {
		t.Skip("no go_js_wasm_exec")
	}
	if _, err := exec.LookPath("node"); err != nil {
		t.Skip("no Node")
	}
	program := filepath.Join(t.TempDir(), "drift.wasm")
	build := exec.Command("go", "test", "-c", "-o", program, ".")
	build.Env = append(os.Environ(), "GOOS=js", "GOARCH=wasm")
	if out, err := build.CombinedOutput(); err != nil {
		t.Fatalf("building for js/wasm: %v\n%s", err, out)
	}
	run := exec.Command(script, append([]string{program}, arguments...)...)
	run.Env = []string{"PATH=" + os.Getenv("PATH"), "HOME=" + os.Getenv("HOME")} // js/wasm takes a small environment only
	for k, v := range env {
		run.Env = append(run.Env, k+"="+v)
	}
	out, err := run.CombinedOutput()
	if err != nil {
		t.Fatalf("running under Node: %v\n%s", err, out)
	}
	return string(out)
}

// BenchmarkCloud6hWasm is [BenchmarkCloud6h] under Node.
func BenchmarkCloud6hWasm(b *testing.B) {
	if runtime.GOOS == "js" {
		b.Skip("is started from the native one")
	}
	for b.Loop() {
		out := runWasm(b, nil, "-test.run=none", "-test.bench=BenchmarkCloud6h$", "-test.benchtime=5x")
		for line := range strings.Lines(out) {
			var n, ns float64
			if f := strings.Fields(line); len(f) > 3 && strings.HasPrefix(f[0], "BenchmarkCloud6h") {
				_, _ = fmt.Sscan(f[1], &n)
				_, _ = fmt.Sscan(f[2], &ns)
				b.ReportMetric(ns/1e6, "wasm-ms")
			}
		}
	}
}
