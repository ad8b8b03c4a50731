package turn

import "math"

// residuals is how far a model with parameters x is from what was observed,
// each in units of its own error.
type residuals func(x []float64) []float64

// solution is a least-squares solution with the covariance that belongs to
// residuals of unit error.
type solution struct {
	x   []float64
	cov [][]float64
	sum float64 // of squares
	n   int
}

// leastSquares minimises by Levenberg and Marquardt's method with numerical
// derivatives (Press and others, Numerical Recipes, 15.5, from memory). step
// is the step of the derivative for each parameter.
func leastSquares(f residuals, x, step []float64) solution {
	damping := 1e-2
	r := f(x)
	sum := sumSquares(r)
	const most = 30
	for range most {
		jac := jacobian(f, x, r, step)
		a, g := normal(jac, r)
		better := false
		for range 8 {
			next := damped(a, g, x, damping)
			if next == nil {
				damping *= 10
				continue
			}
			nr := f(next)
			if s := sumSquares(nr); s < sum {
				better = sum-s > 1e-5*sum
				x, r, sum = next, nr, s
				damping = math.Max(damping/10, 1e-9)
				break
			}
			damping *= 10
		}
		if !better {
			break
		}
	}
	a, _ := normal(jacobian(f, x, r, step), r)
	return solution{x: x, cov: invert(a), sum: sum, n: len(r)}
}

func sumSquares(r []float64) float64 {
	s := 0.0
	for _, v := range r {
		s += v * v
	}
	if math.IsNaN(s) {
		return math.Inf(1)
	}
	return s
}

// jacobian is the derivative of each residual by each parameter.
func jacobian(f residuals, x, r, step []float64) [][]float64 {
	jac := make([][]float64, len(x))
	for i := range x {
		y := append([]float64(nil), x...)
		y[i] += step[i]
		col := f(y)
		for k := range col {
			col[k] = (col[k] - r[k]) / step[i]
		}
		jac[i] = col
	}
	return jac
}

// normal is the matrix JᵀJ and the vector -Jᵀr.
func normal(jac [][]float64, r []float64) (a [][]float64, g []float64) {
	n := len(jac)
	a, g = make([][]float64, n), make([]float64, n)
	for i := range n {
		a[i] = make([]float64, n)
		for j := range n {
			for k := range r {
				a[i][j] += jac[i][k] * jac[j][k]
			}
		}
		for k := range r {
			g[i] -= jac[i][k] * r[k]
		}
	}
	return a, g
}

// damped is the next point; nil when the matrix is singular.
func damped(a [][]float64, g, x []float64, damping float64) []float64 {
	b := make([][]float64, len(a))
	for i := range a {
		b[i] = append([]float64(nil), a[i]...)
		b[i][i] *= 1 + damping
	}
	inv := invert(b)
	if inv == nil {
		return nil
	}
	next := append([]float64(nil), x...)
	for i := range next {
		for j := range g {
			next[i] += inv[i][j] * g[j]
		}
	}
	return next
}

// invert inverts by Gauss and Jordan with the largest pivot of the column; nil
// when singular.
func invert(m [][]float64) [][]float64 {
	n := len(m)
	w := make([][]float64, n)
	for i := range m {
		w[i] = append(append([]float64(nil), m[i]...), make([]float64, n)...)
		w[i][n+i] = 1
	}
	for c := range n {
		p := c
		for r := c + 1; r < n; r++ {
			if math.Abs(w[r][c]) > math.Abs(w[p][c]) {
				p = r
			}
		}
		if !(math.Abs(w[p][c]) > 1e-14) {
			return nil
		}
		w[c], w[p] = w[p], w[c]
		scale(w[c], 1/w[c][c])
		for r := range n {
			if r != c {
				addScaled(w[r], w[c], -w[r][c])
			}
		}
	}
	for i := range w {
		w[i] = w[i][n:]
	}
	return w
}

func scale(row []float64, by float64) {
	for i := range row {
		row[i] *= by
	}
}

func addScaled(row, other []float64, by float64) {
	for i := range row {
		row[i] += by * other[i]
	}
}
