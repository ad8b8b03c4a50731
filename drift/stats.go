package drift

import (
	"math"
	"slices"

	"wakeback/drift/nav"
)

// Spread is a cloud in a few numbers.
type Spread struct {
	N, Ashore int
	// Mean is the mean of all members, in the plane and on the Earth. Of a
	// corridor it is no place to look at: show its regions.
	Mean         nav.Offset
	MeanPosition nav.Position
	// VarEE, VarNN and CovEN are the covariance, m².
	VarEE, VarNN, CovEN float64
	// SDMajorM and SDMinorM are the standard deviations along the longest axis
	// of the cloud and across; AxisDeg is where that axis points, from 0 up to
	// but not including 180.
	SDMajorM, SDMinorM, AxisDeg float64
	// R50M and R95M are the radii around the mean that hold half, and 95 of 100,
	// of the members.
	R50M, R95M float64
}

// Spread works the numbers out for the moment the cloud stands for.
func (cl *Cloud) Spread() Spread {
	n := float64(cl.N())
	var s Spread
	for i := range cl.eastM {
		s.Mean.EastM += cl.eastM[i]
		s.Mean.NorthM += cl.northM[i]
	}
	s.Mean = s.Mean.Scale(1 / n)
	far := make([]float64, cl.N())
	for i := range cl.eastM {
		e, o := cl.eastM[i]-s.Mean.EastM, cl.northM[i]-s.Mean.NorthM
		s.VarEE += e * e
		s.VarNN += o * o
		s.CovEN += e * o
		far[i] = math.Sqrt(e*e + o*o)
	}
	s.VarEE, s.VarNN, s.CovEN = s.VarEE/n, s.VarNN/n, s.CovEN/n
	s.SDMajorM, s.SDMinorM, s.AxisDeg = axes(s.VarEE, s.VarNN, s.CovEN)
	slices.Sort(far)
	s.R50M, s.R95M = quantileOf(far, 0.50), quantileOf(far, 0.95)
	s.N, s.Ashore = cl.N(), cl.Ashore()
	s.MeanPosition = cl.plane.Position(s.Mean)
	return s
}

// axes are the standard deviations along and across the longest axis of a
// covariance, and where it points.
func axes(ee, nn, en float64) (major, minor, axisDeg float64) {
	mid, half := (ee+nn)/2, math.Hypot((nn-ee)/2, en)
	major, minor = math.Sqrt(mid+half), math.Sqrt(math.Max(mid-half, 0))
	// Clockwise from north, the angle of the axis has tan 2a = 2 EN / (NN - EE).
	axisDeg = math.Mod(math.Atan2(2*en, nn-ee)/2*180/math.Pi+180, 180)
	return major, minor, axisDeg
}

// quantileOf is the value of a sorted list that a share of it does not exceed,
// between two of them on the line between.
func quantileOf(sorted []float64, share float64) float64 {
	at := share * float64(len(sorted)-1)
	i := int(at)
	if i+1 >= len(sorted) {
		return sorted[len(sorted)-1]
	}
	return sorted[i] + (at-float64(i))*(sorted[i+1]-sorted[i])
}
