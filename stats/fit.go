package stats

import (
	"fmt"
	"math"
)

// rankTolerance is how much of a column, centred and scaled to length 1, must
// be left after the columns before it are taken out. Below it the column says
// nothing of its own in double precision.
const rankTolerance = 1e-9

// LinearFit is an ordinary least-squares fit with an intercept.
type LinearFit struct {
	Coef     []float64 // intercept first, then one a column
	SE       []float64 // classical standard errors, same order
	Fitted   []float64
	Residual []float64
	Hat      []float64 // leverages h_i
	RSS, TSS float64
	R2       float64
	Sigma    float64 // sqrt(RSS/(n-p))
	N, P     int     // rows; coefficients with the intercept
}

// CollinearError says which column could not be told from those before it.
type CollinearError struct{ Column int }

func (e *CollinearError) Error() string {
	return fmt.Sprintf("column %d is a combination of the columns before it", e.Column)
}

// FitLinear fits y = b0 + sum_j b_j cols_j by QR of the centred, scaled columns
// (Gram-Schmidt with reorthogonalisation, as stable as Householder: Giraud,
// Langou & Rozloznik, Numer. Math. 101:87 (2005), doi
// 10.1007/s00211-005-0615-4). Columns are never multiplied with each other raw.
// Standard errors are sigma sqrt(diag (X'X)^-1). The error is a
// *CollinearError, or says that there are too few rows for the coefficients.
func FitLinear(cols [][]float64, y []float64) (*LinearFit, error) {
	n, q := len(y), len(cols)
	if n < q+2 {
		return nil, fmt.Errorf("%d rows are too few for %d coefficients", n, q+1)
	}
	mean, length := make([]float64, q), make([]float64, q)
	x := make([][]float64, q)
	for j, c := range cols {
		mean[j], length[j] = centreScale(c)
		if length[j] <= 1e-13*math.Abs(mean[j])*math.Sqrt(float64(n)) || !finite(length[j]) {
			return nil, &CollinearError{j}
		}
		x[j] = make([]float64, n)
		for i, v := range c {
			x[j][i] = (v - mean[j]) / length[j]
		}
	}
	f := &LinearFit{N: n, P: q + 1, Coef: make([]float64, q+1), SE: make([]float64, q+1),
		Fitted: make([]float64, n), Residual: make([]float64, n), Hat: make([]float64, n)}
	r, err := orthogonalise(x)
	if err != nil {
		return nil, err
	}
	f.solve(x, r, mean, length, y)
	return f, nil
}

// orthogonalise replaces the columns by an orthonormal basis Q and returns the
// upper triangle R with X = Q R.
func orthogonalise(x [][]float64) ([][]float64, error) {
	r := make([][]float64, len(x))
	for j := range x {
		r[j] = make([]float64, len(x))
	}
	for j, c := range x {
		for range 2 {
			for k := range j {
				d := dot(x[k], c)
				r[k][j] += d
				axpy(-d, x[k], c)
			}
		}
		l := math.Sqrt(dot(c, c))
		if l < rankTolerance {
			return nil, &CollinearError{j}
		}
		r[j][j] = l
		for i := range c {
			c[i] /= l
		}
	}
	return r, nil
}

// solve fills the fit from Q (n x q), R and the moments of the raw columns.
func (f *LinearFit) solve(q, r [][]float64, mean, length, y []float64) {
	p := len(q)
	yMean, _ := centreScale(y)
	for i, v := range y {
		f.Residual[i] = v - yMean
		f.TSS += f.Residual[i] * f.Residual[i]
		f.Hat[i] = 1 / float64(f.N)
	}
	c := make([]float64, p)
	for range 2 {
		for j := range p {
			d := dot(q[j], f.Residual)
			c[j] += d
			axpy(-d, q[j], f.Residual)
		}
	}
	for j := range p {
		for i, v := range q[j] {
			f.Hat[i] += v * v
		}
	}
	for i, v := range y {
		f.Fitted[i] = v - f.Residual[i]
	}
	f.RSS = dot(f.Residual, f.Residual)
	f.R2 = 1 - f.RSS/f.TSS
	f.Sigma = math.Sqrt(f.RSS / float64(f.N-f.P))
	inv := invertUpper(r)
	f.Coef[0] = yMean
	// The intercept is the prediction where every column is zero:
	// variance sigma^2 (1/n + |R^-T m|^2) with m = mean/length.
	v0 := 1 / float64(f.N)
	for k := range p {
		s := 0.0
		for j := range p {
			s += inv[j][k] * mean[j] / length[j]
		}
		v0 += s * s
	}
	f.SE[0] = f.Sigma * math.Sqrt(v0)
	for j := range p {
		f.Coef[j+1] = dot(inv[j], c) / length[j]
		f.Coef[0] -= f.Coef[j+1] * mean[j]
		f.SE[j+1] = f.Sigma * math.Sqrt(dot(inv[j], inv[j])) / length[j]
	}
}

// invertUpper inverts an upper triangle.
func invertUpper(r [][]float64) [][]float64 {
	q := len(r)
	inv := make([][]float64, q)
	for i := range inv {
		inv[i] = make([]float64, q)
	}
	for k := range q {
		inv[k][k] = 1 / r[k][k]
		for i := k - 1; i >= 0; i-- {
			s := 0.0
			for m := i + 1; m <= k; m++ {
				s += r[i][m] * inv[m][k]
			}
			inv[i][k] = -s / r[i][i]
		}
	}
	return inv
}

func dot(a, b []float64) float64 {
	s := 0.0
	for i, v := range a {
		s += v * b[i]
	}
	return s
}

func axpy(k float64, x, y []float64) {
	for i, v := range x {
		y[i] += k * v
	}
}

// centreScale returns the mean and the length of the centred column. The mean
// is corrected once for rounding.
func centreScale(c []float64) (mean, length float64) {
	n := float64(len(c))
	for _, v := range c {
		mean += v / n
	}
	d := 0.0
	for _, v := range c {
		d += v - mean
	}
	mean += d / n
	for _, v := range c {
		length += (v - mean) * (v - mean)
	}
	return mean, math.Sqrt(length)
}

// logLikelihood is the Gaussian log-likelihood at the maximum-likelihood
// variance RSS/n, as R's logLik.lm gives it.
func logLikelihood(rss float64, n int) float64 {
	m := float64(n)
	return -m / 2 * (math.Log(2*math.Pi) + math.Log(rss/m) + 1)
}

// aicc is Akaike's criterion with the small-sample correction (Hurvich & Tsai,
// Biometrika 76:297 (1989), doi 10.1093/biomet/76.2.297); k counts the
// coefficients and sigma. NaN when n <= k + 1.
func aicc(rss float64, n, coefficients int) float64 {
	k := float64(coefficients + 1)
	if float64(n)-k-1 <= 0 {
		return math.NaN()
	}
	return -2*logLikelihood(rss, n) + 2*k + 2*k*(k+1)/(float64(n)-k-1)
}

// BIC is Schwarz's criterion, k counting sigma.
func (f *LinearFit) BIC() float64 {
	return -2*logLikelihood(f.RSS, f.N) + float64(f.P+1)*math.Log(float64(f.N))
}

// AICc of the fit.
func (f *LinearFit) AICc() float64 { return aicc(f.RSS, f.N, f.P) }

// PRESS is the sum of squared leave-one-row-out errors, sum (e_i/(1-h_i))^2.
func (f *LinearFit) PRESS() float64 {
	s := 0.0
	for i, e := range f.Residual {
		d := e / (1 - f.Hat[i])
		s += d * d
	}
	return s
}

// Cook is Cook's distance of each row: e^2 h / (p sigma^2 (1-h)^2)
// (Cook, Technometrics 19:15 (1977), doi 10.2307/1268249).
func (f *LinearFit) Cook() []float64 {
	out := make([]float64, f.N)
	for i, e := range f.Residual {
		h := f.Hat[i]
		out[i] = e * e * h / (float64(f.P) * f.Sigma * f.Sigma * (1 - h) * (1 - h))
	}
	return out
}
