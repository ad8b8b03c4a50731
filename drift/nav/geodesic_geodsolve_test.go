package nav

import (
	"math"
	"math/rand/v2"
	"os/exec"
	"strconv"
	"strings"
	"testing"
)

// The outside check: GeodSolve, of Debian's geographiclib-tools. With -E it
// does not use series but elliptic integrals, so that it shares with this
// package neither code nor coefficients.

// geodSolve runs lines of input through GeodSolve and returns its numbers.
func geodSolve(t testing.TB, lines []string, args ...string) [][]float64 {
	t.Helper()
	program, err := exec.LookPath("GeodSolve")
	if err != nil {
		t.Skip("GeodSolve is not on the PATH (Debian package geographiclib-tools): the comparison with it is not run")
	}
	cmd := exec.Command(program, append(args, "-p", "10")...)
	cmd.Stdin = strings.NewReader(strings.Join(lines, "\n") + "\n")
	var stderr strings.Builder
	cmd.Stderr = &stderr
	out, err := cmd.Output()
	if err != nil {
		t.Fatalf("GeodSolve %v: %v: %s", args, err, stderr.String())
	}
	got := strings.Split(strings.TrimSpace(string(out)), "\n")
	if len(got) != len(lines) {
		t.Fatalf("GeodSolve gave %d lines for %d", len(got), len(lines))
	}
	rows := make([][]float64, len(got))
	for i, line := range got {
		for field := range strings.FieldsSeq(line) {
			v, err := strconv.ParseFloat(field, 64)
			if err != nil {
				t.Fatalf("GeodSolve answered %q to %q", line, lines[i])
			}
			rows[i] = append(rows[i], v)
		}
	}
	return rows
}

// num prints a number so that it reads back as the same.
func num(v float64) string { return strconv.FormatFloat(v, 'f', -1, 64) }

func numbers(vs ...float64) string {
	words := make([]string, len(vs))
	for i, v := range vs {
		words[i] = num(v)
	}
	return strings.Join(words, " ")
}

// pair is a line to be solved, by its ends.
type pair struct{ a, b Position }

func (p pair) input() string {
	return numbers(p.a.LatDeg(), p.a.LonDeg(), p.b.LatDeg(), p.b.LonDeg())
}

// known is a line with its answer: what GeodSolve -i -f prints.
type known struct {
	pair
	azi1Deg, azi2Deg, rangeM, reducedM float64
}

func knownFrom(row []float64) known {
	return known{
		pair:    pair{PositionFromDegrees(row[0], row[1]), PositionFromDegrees(row[3], row[4])},
		azi1Deg: row[2], azi2Deg: row[5], rangeM: row[6], reducedM: row[8],
	}
}

// lineClass draws lines of one sort.
type lineClass struct {
	name string
	draw func(r *rand.Rand) pair
}

// lineClasses are the sorts of lines on which geodesics go wrong.
var lineClasses = []lineClass{
	{"random", func(r *rand.Rand) pair { return pair{anywhere(r), anywhere(r)} }},
	{"short-1m", func(r *rand.Rand) pair { return beside(r, anywhere(r), 1) }},
	{"short-1km", func(r *rand.Rand) pair { return beside(r, anywhere(r), 1000) }},
	{"antipodal", func(r *rand.Rand) pair {
		a := anywhere(r)
		// From 1 m to the 70 km of the astroid and beyond.
		return pair{a, beside(r, PositionFromDegrees(-a.LatDeg(), a.LonDeg()+180), math.Pow(10, 5.3*r.Float64())).b}
	}},
	{"pole", func(r *rand.Rand) pair {
		a := beside(r, pole(r), math.Pow(10, 8*r.Float64()-3)).b
		if r.IntN(10) == 0 {
			a = PositionFromDegrees(math.Copysign(90, a.LatDeg()), anywhere(r).LonDeg())
		}
		switch r.IntN(3) {
		case 0:
			return pair{a, anywhere(r)}
		case 1:
			return pair{anywhere(r), a}
		}
		return pair{a, beside(r, pole(r), math.Pow(10, 8*r.Float64()-3)).b}
	}},
	{"meridional", func(r *rand.Rand) pair {
		a, b := anywhere(r), anywhere(r)
		return pair{a, PositionFromDegrees(b.LatDeg(), a.LonDeg()+180*float64(r.IntN(2)))}
	}},
	{"equatorial", func(r *rand.Rand) pair {
		a := PositionFromDegrees(0, anywhere(r).LonDeg())
		b := PositionFromDegrees(0, anywhere(r).LonDeg())
		if r.IntN(2) == 0 { // nearly equatorial, and past the end of the equator's own way
			b = beside(r, PositionFromDegrees(0, a.LonDeg()+178+2*r.Float64()), 10).b
		}
		return pair{a, b}
	}},
	{"antimeridian", func(r *rand.Rand) pair {
		a := PositionFromDegrees(anywhere(r).LatDeg(), 180-math.Pow(10, 4*r.Float64()-3))
		b := PositionFromDegrees(anywhere(r).LatDeg(), -180+math.Pow(10, 4*r.Float64()-3))
		return pair{a, b}
	}},
}

// anywhere is even over the sphere.
func anywhere(r *rand.Rand) Position {
	return PositionFromDegrees(math.Asin(2*r.Float64()-1)*180/math.Pi, 360*r.Float64()-180)
}

func pole(r *rand.Rand) Position {
	return PositionFromDegrees(90-180*float64(r.IntN(2)), 360*r.Float64()-180)
}

// beside is a point and another up to roughly withinM away, reached on a
// sphere by vectors: how far exactly does not matter.
func beside(r *rand.Rand, a Position, withinM float64) pair {
	d := withinM * r.Float64() / 6.37e6
	sin, cos := math.Sincos(2 * math.Pi * r.Float64())
	sa, ca := math.Sincos(float64(a.Lat))
	lat := float64(a.Lat) + d*cos
	if math.Abs(a.LatDeg()) > 85 { // on a flat map around the pole
		x, y := math.Hypot(d*sin, ca-d*cos), a.LonDeg()+math.Atan2(d*sin, ca-d*cos)*180/math.Pi
		return pair{a, PositionFromDegrees(math.Copysign(90-x*180/math.Pi, sa), y)}
	}
	return pair{a, PositionFromDegrees(lat*180/math.Pi, a.LonDeg()+d*sin/ca*180/math.Pi)}
}

// checkInverse compares with the stated accuracy of [Line]. The reduced length
// is how far the end moves per radian of the bearing.
func checkInverse(t *testing.T, name string, k known) {
	t.Helper()
	line := Inverse(k.a, k.b)
	if err := math.Abs(line.RangeM - k.rangeM); !(err <= 1e-7) {
		t.Errorf("%s: Inverse(%s).RangeM = %.10f, want %.10f (off by %.2g m)", name, k.input(), line.RangeM, k.rangeM, err)
	}
	if k.rangeM < 2*coincideM {
		return
	}
	limit := max(1e-9, 1e-7/math.Abs(k.reducedM))
	checkBearing(t, name+" "+k.input()+" start", line.Bearing, k.azi1Deg, limit)
	checkBearing(t, name+" "+k.input()+" end", line.FinalBearing, k.azi2Deg, limit)
}

func checkBearing(t *testing.T, name string, got Opt[TrueDeg], wantDeg, limitRad float64) {
	t.Helper()
	b, ok := got.Get()
	if err := math.Abs(b.Minus(True(wantDeg))) * math.Pi / 180; !ok || !(err <= limitRad) {
		t.Errorf("%s: bearing %v (present: %t), want %v: off by %.3g rad, limit %.3g", name, float64(b), ok, wantDeg, err, limitRad)
	}
}

// checkDirect goes the known line and compares where it ends. Close to a pole
// a step changes the bearing as it does the longitude.
func checkDirect(t *testing.T, name string, k known) {
	t.Helper()
	p, azi2 := Direct(k.a, True(k.azi1Deg), k.rangeM)
	if err := apartM(p, k.b); !(err <= 1e-7) {
		t.Errorf("%s: Direct(%s %s) is %.3g m off", name, numbers(k.a.LatDeg(), k.a.LonDeg()), numbers(k.azi1Deg, k.rangeM), err)
	}
	// Near a pole count both bearings from the same meridian.
	if shift := k.b.LonDeg() - p.LonDeg(); k.b.LatDeg() > 89 {
		azi2 = azi2.Add(shift)
	} else if k.b.LatDeg() < -89 {
		azi2 = azi2.Add(-shift)
	}
	checkBearing(t, name+" direct "+k.input(), Some(azi2), k.azi2Deg, 1e-9)
}

// apartM is how far two points close to each other are apart: the chord
// between them in space.
func apartM(p, q Position) float64 {
	x1, y1, z1 := inSpace(p)
	x2, y2, z2 := inSpace(q)
	return math.Sqrt((x1-x2)*(x1-x2) + (y1-y2)*(y1-y2) + (z1-z2)*(z1-z2))
}

func inSpace(p Position) (x, y, z float64) {
	lat := latitudeArc(float64(p.Lat))
	n := semiMajorM / math.Sqrt(1-eccSq*lat.sin*lat.sin)
	sin, cos := math.Sincos(float64(p.Lng))
	return n * lat.cos * cos, n * lat.cos * sin, n * (1 - eccSq) * lat.sin
}

// TestGeodesicAgainstGeodSolve runs 2000 fresh lines of each sort, 16,000 in
// all, through GeodSolve by elliptic integrals: inverse, and direct.
func TestGeodesicAgainstGeodSolve(t *testing.T) {
	const each = 2000
	for i, class := range lineClasses {
		t.Run(class.name, func(t *testing.T) {
			r := rand.New(rand.NewPCG(uint64(i), 2013))
			lines := make([]string, each)
			for j := range lines {
				lines[j] = class.draw(r).input()
			}
			for _, row := range geodSolve(t, lines, "-E", "-i", "-f") {
				k := knownFrom(row)
				checkInverse(t, class.name, k)
				checkDirect(t, class.name, k)
			}
		})
	}
}

// TestNewtonSteps guards the guesses: with a bad one the answer is still right,
// but late. Our choice of limits: what is measured, and a third more.
func TestNewtonSteps(t *testing.T) {
	for i, class := range lineClasses {
		r := rand.New(rand.NewPCG(uint64(i), 5))
		const n = 20000
		sum, most := 0, 0
		for range n {
			p := class.draw(r)
			trials := solveInverse(p.a, p.b).trials
			sum, most = sum+trials, max(most, trials)
		}
		t.Logf("%s: %.2f trials on average, %d at most", class.name, float64(sum)/n, most)
		if mean := float64(sum) / n; mean > 5 || most > 8 {
			t.Errorf("%s: %.2f trials on average, %d at most", class.name, mean, most)
		}
	}
}

// TestDirectAgainstGeodSolve goes far, also backwards and more than once
// around.
func TestDirectAgainstGeodSolve(t *testing.T) {
	r := rand.New(rand.NewPCG(7, 2013))
	lines := make([]string, 4000)
	for i := range lines {
		a := anywhere(r)
		lines[i] = numbers(a.LatDeg(), a.LonDeg(), 360*r.Float64(), 1e8*(2*r.Float64()-1))
	}
	for _, row := range geodSolve(t, lines, "-E", "-f") {
		checkDirect(t, "far", knownFrom(row))
	}
}

// TestScalesAgainstGeodSolve checks reduced length and geodesic scales, on
// which Newton's steps and the cross-track rest.
func TestScalesAgainstGeodSolve(t *testing.T) {
	r := rand.New(rand.NewPCG(8, 2013))
	lines := make([]string, 2000)
	for i := range lines {
		lines[i] = lineClasses[i%2*2].draw(r).input() // random and within 1 km
	}
	for _, row := range geodSolve(t, lines, "-E", "-i", "-f") {
		k := knownFrom(row)
		s := solveInverse(k.a, k.b)
		// The scales are of order 1 and change by less than 1 per radian of arc
		// or bearing, until close to the antipode, where they change fast.
		for i, v := range []struct{ got, want, limit float64 }{
			{s.reducedM, k.reducedM, 1e-7}, {s.scale12, row[9], 1e-9}, {s.scale21, row[10], 1e-9},
		} {
			if !(math.Abs(v.got-v.want) <= v.limit) && k.rangeM < 1.98e7 {
				t.Errorf("%s: quantity %d = %v, want %v", k.input(), i, v.got, v.want)
			}
		}
	}
}

// benchPairs are lines all over the globe, or within 1 km of each other.
func benchPairs(class int) []pair {
	r := rand.New(rand.NewPCG(9, 2013))
	ps := make([]pair, 4096)
	for i := range ps {
		ps[i] = lineClasses[class].draw(r)
	}
	return ps
}

func BenchmarkInverse(b *testing.B) {
	for _, class := range []int{0, 2} {
		ps := benchPairs(class)
		b.Run(lineClasses[class].name, func(b *testing.B) {
			i := 0
			for b.Loop() {
				p := &ps[i&4095]
				_ = Inverse(p.a, p.b)
				i++
			}
		})
	}
}

// BenchmarkGeodSolve times the program on the same lines as BenchmarkInverse,
// reading and printing included, as a program is used. What these cost is
// about what it takes for lines of no length: the last sort.
func BenchmarkGeodSolve(b *testing.B) {
	ps0 := benchPairs(0)
	for _, c := range []struct {
		name string
		line func(i int) pair
	}{
		{lineClasses[0].name, pickFrom(ps0)},
		{lineClasses[2].name, pickFrom(benchPairs(2))},
		{"no-length", func(i int) pair { p := ps0[i&4095]; return pair{p.a, p.a} }},
	} {
		b.Run(c.name, func(b *testing.B) {
			lines := make([]string, b.N)
			for i := range lines {
				lines[i] = c.line(i).input()
			}
			b.ResetTimer()
			geodSolve(b, lines, "-i")
		})
	}
}

func pickFrom(ps []pair) func(int) pair { return func(i int) pair { return ps[i&4095] } }

func BenchmarkDirect(b *testing.B) {
	a := PositionFromDegrees(54.1, 7.9)
	for b.Loop() {
		_, _ = Direct(a, 30, 10e3)
	}
}

func BenchmarkGeodesicAt(b *testing.B) {
	g := LineFrom(PositionFromDegrees(54.1, 7.9), 30)
	for b.Loop() {
		_, _ = g.At(10e3)
	}
}

func BenchmarkCrossTrack(b *testing.B) {
	a, p := PositionFromDegrees(54.1, 7.9), PositionFromDegrees(54.3, 8.1)
	for b.Loop() {
		_ = CrossTrack(a, 30, p)
	}
}
