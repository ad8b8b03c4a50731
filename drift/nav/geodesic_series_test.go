package nav

import (
	"math"
	"math/big"
	"testing"
)

// harmonics are the mean of f over half a turn and the coefficients of cos 2lσ
// relative to it, by the trapezium rule, which for a smooth periodic function
// is exact to rounding as soon as the points are close enough.
func harmonics(f func(sigma float64) float64) (mean float64, relative [20]float64) {
	const n = 256
	for i := range n {
		sigma := math.Pi * float64(i) / n
		v := f(sigma) / n
		mean += v
		for l := range relative {
			relative[l] += 2 * v * math.Cos(2*float64(l+1)*sigma)
		}
	}
	for l := range relative {
		relative[l] /= mean
	}
	return mean, relative
}

// TestSeriesAgainstQuadrature checks every coefficient against the integral
// that its series stands for (integrands: Karney 7, 8 and 41). At the Earth's
// own ε, up to 0.0017, the high orders vanish below rounding, so ε is taken up
// to 0.1, allowing for what the first order left out would make.
func TestSeriesAgainstQuadrature(t *testing.T) {
	const rounding = 1e-15 // sums of 256 numbers of order 1
	for _, eps := range []float64{0.0016, 0.01, 0.03, 0.1} {
		k2 := 4 * eps / ((1 - eps) * (1 - eps)) // the inverse of Karney 16
		if got := expansion(k2); math.Abs(got-eps) > 1e-16 {
			t.Errorf("expansion(%v) = %v, want %v", k2, got, eps)
		}
		root := func(s float64) float64 { return math.Sqrt(1 + k2*math.Sin(s)*math.Sin(s)) }
		// Coefficients of even index have even orders only, so that ε⁸ is the
		// first left out, the odd ones ε⁷. The factors bound the coefficients
		// of those orders: they fall slowly, and from some 0.5 in C1 and C2,
		// but grow in C'1.
		tail := func(factor float64) func(l int) float64 {
			return func(l int) float64 { return rounding + factor*math.Pow(eps, float64(7+(l+1)%2)) }
		}
		// A3 and C3 are cut at order 5 of n and ε together.
		tail3 := func(l int) float64 {
			return rounding + 0.025*math.Pow(eps, float64(l))*math.Pow(eps+thirdFlat, float64(order-l))
		}
		for _, v := range []struct {
			name string
			f    func(float64) float64
			mean float64
			wave coeffs
			tail func(l int) float64
		}{
			{"1", root, a1(eps), c1(eps), tail(0.05)},
			{"2", func(s float64) float64 { return 1 / root(s) }, a2(eps), c2(eps), tail(0.2)},
			{"3", func(s float64) float64 { return (2 - flattening) / (1 + axisRatio*root(s)) }, a3(eps), c3(eps), tail3},
		} {
			mean, relative := harmonics(v.f)
			if err := math.Abs(v.mean - mean); !(err <= v.tail(0)) {
				t.Errorf("A%s at ε %v = %v, want %v", v.name, eps, v.mean, mean)
			}
			for l, got := range v.wave {
				// The integral of cos 2lσ is sin 2lσ / 2l.
				checkCoefficient(t, "C"+v.name, eps, l+1, got, relative[l]/(2*float64(l+1)), v.tail(l+1))
			}
		}
		checkReverted(t, eps, root, tail(6))
	}
}

// checkReverted checks C'1l. With σ - τ = Σ C'1l sin 2lτ, integrating by parts
// gives C'1l = ∫ cos 2lτ dσ / (l π) from 0 to π.
func checkReverted(t *testing.T, eps float64, root func(float64) float64, tail func(int) float64) {
	_, relative := harmonics(root)
	tau := func(sigma float64) float64 {
		sum := sigma
		for l, c := range relative {
			sum += c * math.Sin(2*float64(l+1)*sigma) / (2 * float64(l+1))
		}
		return sum
	}
	for l, got := range c1Reverted(eps) {
		const n = 256
		mean := 0.0
		for i := range n {
			mean += math.Cos(2*float64(l+1)*tau(math.Pi*float64(i)/n)) / n
		}
		checkCoefficient(t, "C'1", eps, l+1, got, mean/float64(l+1), tail(l+1))
	}
}

func checkCoefficient(t *testing.T, name string, eps float64, l int, got, want, limit float64) {
	t.Helper()
	if err := math.Abs(got - want); !(err <= limit) {
		t.Errorf("%s%d at ε %v = %v, want %v (off by %.2g, limit %.2g)", name, l, eps, got, want, err, limit)
	}
}

func TestSineSeries(t *testing.T) {
	c := coeffs{0.5, -0.25, 0.125, 0.75, -0.375, 0.0625}
	for _, sigma := range []float64{-3, -0.1, 0, 0.7, 1.5, 3.1} {
		want := 0.0
		for l, v := range c {
			want += v * math.Sin(2*float64(l+1)*sigma)
		}
		if got := c.at(arcOf(sigma)); math.Abs(got-want) > 1e-14 { // a few roundings of terms below 1, amplified at most l times
			t.Errorf("series at %v = %v, want %v", sigma, got, want)
		}
	}
}

// TestAstroid puts the root back into the quartic.
func TestAstroid(t *testing.T) {
	for x := -3.0; x <= 0; x += 0.125 {
		for y := -3.0; y <= 0; y += 0.125 {
			mu := astroid(x, y)
			p, q := x*x, y*y
			terms := []float64{mu * mu * mu * mu, 2 * mu * mu * mu, (1 - p - q) * mu * mu, -2 * q * mu, -q}
			sum, size := 0.0, 0.0
			for _, v := range terms {
				sum += v
				size += math.Abs(v)
			}
			if !(mu >= 0) || math.Abs(sum) > 1e-13*size { // 500 rounding units: it is but a first guess
				t.Errorf("astroid(%v, %v) = %v: quartic %.3g, terms of %.3g", x, y, mu, sum, size)
			}
		}
	}
}

func TestSinCosDegExact(t *testing.T) {
	for _, c := range []struct{ deg, sin, cos float64 }{
		{0, 0, 1}, {90, 1, 0}, {180, 0, -1}, {270, -1, 0}, {360, 0, 1}, {-90, -1, 0}, {450, 1, 0}, {-180, 0, -1},
	} {
		sin, cos := sinCosDeg(c.deg)
		if sin != c.sin || cos != c.cos || math.Signbit(sin) != (c.sin < 0) || math.Signbit(cos) != (c.cos < 0) {
			t.Errorf("sinCosDeg(%v) = %v, %v, want %v, %v", c.deg, sin, cos, c.sin, c.cos)
		}
	}
	for deg := -400.0; deg < 400; deg += 0.37 {
		sin, cos := sinCosDeg(deg)
		rad := deg * math.Pi / 180
		// The plain way errs by the rounding of up to 7 radians: 9e-16.
		if math.Abs(sin-math.Sin(rad)) > 2e-15 || math.Abs(cos-math.Cos(rad)) > 2e-15 {
			t.Errorf("sinCosDeg(%v) = %v, %v", deg, sin, cos)
		}
	}
}

// TestLongitudeShort checks by exact sums that what is left to half a turn keeps
// all its figures, although the difference itself is rounded.
func TestLongitudeShort(t *testing.T) {
	exact := func(v float64) *big.Float { return new(big.Float).SetPrec(500).SetFloat64(v) }
	for from := -3.1; from < -0.01; from += 0.0371 {
		for _, short := range []float64{1e-15, 3e-12, 1e-9, 1e-6, 0.01} {
			to := from + halfTurn - short
			want := exact(halfTurn)
			want.Sub(want, exact(to)).Add(want, exact(from))
			w, _ := want.Float64()
			got := longitudeBetween(from, to)
			// 4e-19: half the step of coarsen.
			if math.Abs(got.short-math.Abs(w)) > 1e-15*math.Abs(w)+0x1p-61 || got.west != (w < 0) {
				t.Errorf("from %v to %v: %v short of half a turn, want %v", from, to, got.short, w)
			}
		}
	}
}

func TestLongitudeBetween(t *testing.T) {
	for _, c := range []struct {
		from, to, want float64
		west           bool
	}{
		{0, 0, 0, false}, {10, 20, 10, false}, {20, 10, 10, true}, {170, -170, 20, false}, {-170, 170, 20, true},
		{0, 180, 180, true}, {-180, 180, 0, false}, {0, 540, 180, true}, {350, 10, 20, false},
	} {
		from, to := degrees(c.from), degrees(c.to)
		l := longitudeBetween(float64(from), float64(to))
		if math.Abs(l.rad*180/math.Pi-c.want) > 1e-13 || math.Abs(l.rad+l.short-halfTurn) > 1e-15 {
			t.Errorf("from %v to %v: %v rad, %v short of half a turn", c.from, c.to, l.rad, l.short)
		}
		if c.want > 0 && c.want < 180 && l.west != c.west {
			t.Errorf("from %v to %v: west %t", c.from, c.to, l.west)
		}
	}
}
