package main

// aim is how fast a part of the program has to be.
type aim struct {
	what    string
	of      reading
	over    reading // what it is divided by, its floor; none when it has no bench
	scale   float64 // from the benchmark's unit to unit
	unit    string
	limit   float64
	atLeast bool // the limit is the least, not the most
}

// reading is a value that a benchmark reports.
type reading struct{ bench, unit string }

func (a aim) value(m measured) (float64, bool) {
	v, ok := m[a.of.bench][a.of.unit]
	if !ok {
		return 0, false
	}
	if a.over.bench != "" {
		floor, ok := m[a.over.bench][a.over.unit]
		if !ok || floor == 0 {
			return 0, false
		}
		v /= floor
	}
	return v * a.scale, true
}

func (a aim) aim() string {
	most := "at most "
	if a.atLeast {
		most = "at least "
	}
	return most + figure(a.limit) + " " + a.unit
}

// aims of the main job.
var aims = []aim{
	{what: "a mark to 201, 50 streams attached, over a bare commit", of: reading{"Mark", "x-floor"}, scale: 1, unit: "x", limit: 1.5},
	{what: "commit to the last of 200 clients, median", of: reading{"Fanout", "µs/last-of-200-median"}, scale: 1e-3, unit: "ms", limit: 20},
	{what: "steering 200 clients, over a bare broadcast", of: reading{"Steer", "x-floor"}, scale: 1, unit: "x", limit: 1.5},
	{what: "steering 200 clients at 5 Hz", of: reading{"Steer", "cores-at-5Hz"}, scale: 1, unit: "cores", limit: 0.1},
	{what: "reading and folding 10,000 events", of: reading{"Fold/read_and_fold", "ns/op"}, scale: 1e-6, unit: "ms", limit: 20},
	{what: "geodesic inverse, any two points, over GeodSolve", of: reading{"Inverse/random", "ns/op"}, over: reading{"GeodSolve/random", "ns/op"}, scale: 1, unit: "x", limit: 1},
	{what: "drift cloud, 10,000 members for 6 h", of: reading{"Cloud6h", "ns/op"}, scale: 1e-9, unit: "s", limit: 0.12},
	{what: "drift cloud, 10,000 members for a minute", of: reading{"CloudMinute", "ns/op"}, scale: 1e-6, unit: "ms", limit: 2},
	{what: "a member of the drift cloud and step, over plain C", of: reading{"BesideC", "go/c"}, scale: 1, unit: "x", limit: 1.3},
}
