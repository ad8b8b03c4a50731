package nav

import (
	"bufio"
	"flag"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"os/exec"
	"strconv"
	"strings"
	"testing"
)

var remakeTable = flag.Bool("remake-geodesic-table", false, "write testdata/geodesic-table.csv anew with GeodSolve")

const tablePath = "testdata/geodesic-table.csv"

// TestGeodesicTable checks every line of the committed table, inverse and
// direct, wherever the tests run.
func TestGeodesicTable(t *testing.T) {
	if *remakeTable {
		writeTable(t)
	}
	seen := map[string]int{}
	for _, row := range readCSV(t, tablePath) {
		seen[row.name]++
		v := row.values
		k := known{
			pair:    pair{PositionFromDegrees(v[0], v[1]), PositionFromDegrees(v[3], v[4])},
			azi1Deg: v[2], azi2Deg: v[5], rangeM: v[6], reducedM: v[7],
		}
		checkInverse(t, row.name, k)
		checkDirect(t, row.name, k)
	}
	for _, class := range lineClasses {
		if seen[class.name] < 200 {
			t.Errorf("the table has %d lines of sort %q, expected 200 at least", seen[class.name], class.name)
		}
	}
}

// namedRow is a row of a test table: a word, then numbers.
type namedRow struct {
	name   string
	values []float64
}

func readCSV(t *testing.T, path string) []namedRow {
	t.Helper()
	f, err := os.Open(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	var rows []namedRow
	for lines := bufio.NewScanner(f); lines.Scan(); {
		name, rest, ok := strings.Cut(lines.Text(), ",")
		if !ok || strings.HasPrefix(name, "#") || name == "class" {
			continue
		}
		row := namedRow{name: name}
		for field := range strings.SplitSeq(rest, ",") {
			v, err := strconv.ParseFloat(field, 64)
			if err != nil {
				t.Fatalf("%s: row %q: %v", path, lines.Text(), err)
			}
			row.values = append(row.values, v)
		}
		rows = append(rows, row)
	}
	return rows
}

// writeTable draws 250 lines of each sort and lets GeodSolve solve them.
func writeTable(t *testing.T) {
	var names, lines []string
	for i, class := range lineClasses {
		r := rand.New(rand.NewPCG(uint64(i), 250))
		for range 250 {
			names, lines = append(names, class.name), append(lines, class.draw(r).input())
		}
	}
	rows := geodSolve(t, lines, "-E", "-i", "-f")
	version, err := exec.Command("GeodSolve", "--version").Output()
	if err != nil {
		t.Fatal(err)
	}
	var b strings.Builder
	fmt.Fprintf(&b, `# Geodesics on WGS 84, 250 of each sort. Made with %s
# of Debian package geographiclib-tools, option -E (elliptic integrals instead of
# series): GeodSolve -E -i -f -p 10, on lines drawn by lineClasses in
# geodesic_geodsolve_test.go. To make it anew:
# go test ./drift/nav -run TestGeodesicTable -remake-geodesic-table
# Degrees and metres; azi is the azimuth of the geodesic at either end, m12 its
# reduced length, which tells how far point 2 moves for a radian of azi1.
class,lat1,lon1,azi1,lat2,lon2,azi2,s12,m12
`, strings.TrimSpace(string(version)))
	for i, row := range rows {
		k := knownFrom(row)
		// Numbers are written so that they read back as the same.
		fmt.Fprintf(&b, "%s,%s\n", names[i], strings.ReplaceAll(numbers(row[0], row[1], k.azi1Deg, row[3], row[4], k.azi2Deg, k.rangeM, k.reducedM), " ", ","))
	}
	if err := os.WriteFile(tablePath, []byte(b.String()), 0o644); err != nil {
		t.Fatal(err)
	}
}

// TestGeodesicWorkedExamples are the worked examples of Karney (2013), tables 2
// to 4 (numbers and their places from memory), as far as printed there.
func TestGeodesicWorkedExamples(t *testing.T) {
	const printed = 0.5e-11 * math.Pi / 180 * 2 // the angles have 11 decimals

	p, azi2 := Direct(PositionFromDegrees(40, 0), 30, 10e6)
	if apart := apartM(p, PositionFromDegrees(41.79331020506, 137.84490004377)); !(apart < 2e-6) { // 1e-11 degree is 1e-6 m
		t.Errorf("direct example: end %v, %v is %v m off", p.LatDeg(), p.LonDeg(), apart)
	}
	checkBearing(t, "direct example", Some(azi2), 149.09016931807, printed)

	short := Inverse(PositionFromDegrees(-30.12345, 0), PositionFromDegrees(-30.12344, 0.00005))
	if math.Abs(short.RangeM-4.944208) > 0.6e-6 {
		t.Errorf("short example: range %v, want 4.944208", short.RangeM)
	}
	// Over 5 m the step of a position, 3e-9 m, turns the bearing by 6e-10.
	checkBearing(t, "short example", short.Bearing, 77.04353354237, 1e-9)
	checkBearing(t, "short example", short.FinalBearing, 77.04350844913, 1e-9)

	far := Inverse(PositionFromDegrees(-30, 0), PositionFromDegrees(29.9, 179.8))
	if math.Abs(far.RangeM-19989832.827610) > 0.6e-6 {
		t.Errorf("antipodal example: range %v, want 19989832.827610", far.RangeM)
	}
	checkBearing(t, "antipodal example", far.Bearing, 161.89052473633, printed)
	checkBearing(t, "antipodal example", far.FinalBearing, 18.09073724574, printed)
}

// TestInverseSpecial pins what is returned where the answer is not unique or
// not there, as the documentation of Line says.
func TestInverseSpecial(t *testing.T) {
	half := 20003931.4586 // the meridian from pole to pole
	none := math.NaN()
	for _, c := range []struct {
		name                   string
		lat1, lon1, lat2, lon2 float64
		rangeM, first, last    float64 // NaN: absent
	}{
		{"one point", 54.1, 7.9, 54.1, 7.9, 0, none, none},
		{"one point on the antimeridian", 10, 180, 10, -180, 0, none, none},
		{"one point at a pole", 90, 10, 90, 50, 0, none, none},
		{"one point but for a hair", 54.1, 7.9, 54.1, 7.9 + 1e-15, 0, none, none},
		{"due north", 0, 20, 1, 20, 110574.3886, 0, 0},
		{"due east on the equator", 0, 20, 0, 21, 111319.4908, 90, 90},
		{"due west on the equator", 0, -179.5, 0, 179.5, 111319.4908, 270, 270},
		{"antipodes on the equator", 0, 0, 0, 180, half, 0, 180},
		{"antipodes in the north", 40, 0, -40, 180, half, 0, 180},
		{"antipodes in the south", -40, 0, 40, 180, half, 180, 0},
		{"pole to pole", 90, 10, -90, 50, half, 140, 180},
		{"pole to pole, south", -90, 10, 90, 50, half, 40, 0},
		{"from the North Pole", 90, 10, 80, 10, 1116825.8574, 180, 180},
		{"from the North Pole east", 90, 10, 80, 100, 1116825.8574, 90, 180},
		{"from the South Pole east", -90, 10, -80, 100, 1116825.8574, 90, 0},
		{"over the North Pole", 80, 0, 80, 180, 2233651.7148, 0, 180},
		{"off the equator near the antipode", 0, 0, 0, 179.5, 19980861.9089, 55.966495140, 124.033504860},
		{"nearly antipodes, from the north", 30, 0, -30, 179.9, 20003008.4215, 11.030296533, 168.969703467},
	} {
		line := Inverse(PositionFromDegrees(c.lat1, c.lon1), PositionFromDegrees(c.lat2, c.lon2))
		if !(math.Abs(line.RangeM-c.rangeM) <= 1e-4) {
			t.Errorf("%s: range %.4f, want %.4f", c.name, line.RangeM, c.rangeM)
		}
		for i, v := range []struct {
			got  Opt[TrueDeg]
			want float64
		}{{line.Bearing, c.first}, {line.FinalBearing, c.last}} {
			if math.IsNaN(v.want) != !v.got.IsSet() {
				t.Errorf("%s: bearing %d present: %t", c.name, i, v.got.IsSet())
			} else if v.got.IsSet() {
				checkBearing(t, c.name, v.got, v.want, 1e-9)
			}
		}
	}
}

func TestGeodesicNotFinite(t *testing.T) {
	ok := PositionFromDegrees(10, 20)
	inf := math.Inf(1)
	for _, bad := range []Position{
		PositionFromDegrees(nan, 0), PositionFromDegrees(0, nan), PositionFromDegrees(inf, 0),
		{Lng: PositionFromDegrees(0, 1).Lng / 0x1p-1074}, PositionFromDegrees(90.001, 0), PositionFromDegrees(-91, 0),
	} {
		for _, line := range []Line{Inverse(ok, bad), Inverse(bad, ok), Inverse(bad, bad)} {
			if !math.IsNaN(line.RangeM) || line.Bearing.IsSet() || line.FinalBearing.IsSet() {
				t.Errorf("Inverse with %v: %+v, want a range of NaN and no bearings", bad, line)
			}
		}
		wantNoPosition(t, bad, 30, 1000)
		for _, o := range []Offtrack{CrossTrack(bad, 30, ok), CrossTrack(ok, 30, bad)} {
			wantNoOfftrack(t, o)
		}
	}
	wantNoPosition(t, ok, TrueDeg(nan), 1000)
	wantNoPosition(t, ok, TrueDeg(inf), 1000)
	wantNoPosition(t, ok, 30, nan)
	wantNoPosition(t, ok, 30, inf)
	wantNoOfftrack(t, CrossTrack(ok, TrueDeg(nan), ok))
}

func wantNoPosition(t *testing.T, a Position, bearing TrueDeg, rangeM float64) {
	t.Helper()
	p, last := Direct(a, bearing, rangeM)
	if !math.IsNaN(float64(p.Lat)) || !math.IsNaN(float64(p.Lng)) || !math.IsNaN(float64(last)) {
		t.Errorf("Direct(%v, %v, %v) = %v, %v, want NaN", a, bearing, rangeM, p, last)
	}
}

func wantNoOfftrack(t *testing.T, o Offtrack) {
	t.Helper()
	if !math.IsNaN(o.CrossM) || !math.IsNaN(o.AlongM) {
		t.Errorf("cross-track %+v, want NaN", o)
	}
}
