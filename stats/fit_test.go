package stats

import (
	"bufio"
	"encoding/csv"
	"math"
	"os"
	"strconv"
	"strings"
	"testing"
)

// digits is the log relative error: how many decimal digits agree.
func digits(got, want float64) float64 {
	if got == want {
		return 16
	}
	return -math.Log10(math.Abs(got-want) / math.Abs(want))
}

func needDigits(t *testing.T, what string, got, want, need float64) {
	t.Helper()
	if d := digits(got, want); !(d >= need) {
		t.Errorf("%s = %.15g, want %.15g: %.1f digits agree, %.0f are required", what, got, want, d, need)
	}
}

// nistData reads the numbers of a .dat file from the line that starts with
// "Data:" and holds the column names: y first, then x.
func nistData(t *testing.T, name string) (y, x []float64) {
	t.Helper()
	f, err := os.Open("testdata/nist/" + name)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	s := bufio.NewScanner(f)
	last, line := 0, 0
	for s.Scan() {
		line++
		w := strings.Fields(s.Text())
		if len(w) > 1 && w[0] == "Data:" {
			last = line
			y, x = nil, nil
			continue
		}
		if last == 0 || len(w) != 2 {
			continue
		}
		a, err1 := strconv.ParseFloat(w[0], 64)
		b, err2 := strconv.ParseFloat(w[1], 64)
		if err1 == nil && err2 == nil {
			y, x = append(y, a), append(x, b)
		}
	}
	if len(y) < 5 {
		t.Fatalf("%s: only %d rows read", name, len(y))
	}
	return y, x
}

// Certified values: NIST Statistical Reference Datasets, Norris.dat lines 31-46.
func TestNorris(t *testing.T) {
	y, x := nistData(t, "Norris.dat")
	f, err := FitLinear([][]float64{x}, y)
	if err != nil {
		t.Fatal(err)
	}
	needDigits(t, "b0", f.Coef[0], -0.262323073774029, 9)
	needDigits(t, "b1", f.Coef[1], 1.00211681802045, 9)
	needDigits(t, "se b0", f.SE[0], 0.232818234301152, 9)
	needDigits(t, "se b1", f.SE[1], 0.429796848199937e-03, 9)
	needDigits(t, "sigma", f.Sigma, 0.884796396144373, 9)
	needDigits(t, "R2", f.R2, 0.999993745883712, 9)
}

// R's rescaled Longley data: intercept and R2 from science notes (NIST digits
// after rescaling); NIST certifies the coefficients of the unscaled data, which
// differ by powers of ten: -3482258.63459582, 15.0618722713733,
// -0.358191792925910E-01, -2.02022980381683, -1.03322686717359,
// -0.511041056535807E-01, 1829.15146461355.
func TestLongley(t *testing.T) {
	f, err := os.Open("testdata/nist/Longley.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rec, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	cols, y := make([][]float64, 6), []float64{}
	for _, r := range rec[1:] {
		for j := range 7 {
			v, err := strconv.ParseFloat(r[j], 64)
			if err != nil {
				t.Fatal(err)
			}
			if j == 6 {
				y = append(y, v)
			} else {
				cols[j] = append(cols[j], v)
			}
		}
	}
	fit, err := FitLinear(cols, y)
	if err != nil {
		t.Fatal(err)
	}
	needDigits(t, "intercept", fit.Coef[0], -3482.258634596, 7)
	needDigits(t, "R2", fit.R2, 0.995479004577296, 7)
	for j, w := range []float64{15.0618722713733e-3, -0.358191792925910e-1, -2.02022980381683e-2, -1.03322686717359e-2, -0.511041056535807e-1, 1829.15146461355e-3} {
		needDigits(t, rec[0][j], fit.Coef[j+1], w, 7)
	}
	for j, w := range []float64{890420.383607373e-3, 84.9149257747669e-3, 0.334910077722432e-1, 0.488399681651699e-2, 0.214274163161675e-2, 0.226073200069370, 455.478499142212e-3} {
		needDigits(t, "standard error", fit.SE[j], w, 7)
	}
}

// Wampler1 and Wampler2 are generated; the certified coefficients are exactly
// those they are made of (NIST Statistical Reference Datasets).
func TestWampler(t *testing.T) {
	for name, coef := range map[string][]float64{"Wampler1": {1, 1, 1, 1, 1, 1}, "Wampler2": {1, 0.1, 0.01, 0.001, 0.0001, 0.00001}} {
		cols, y := make([][]float64, 5), []float64{}
		for x := 0.0; x <= 20; x++ {
			v, p := coef[0], 1.0
			for j := range 5 {
				p *= x
				cols[j] = append(cols[j], p)
				v += coef[j+1] * p
			}
			y = append(y, v)
		}
		fit, err := FitLinear(cols, y)
		if err != nil {
			t.Fatal(err)
		}
		for j, w := range coef {
			needDigits(t, name, fit.Coef[j], w, 6)
		}
	}
}

func TestFitLinearRefusals(t *testing.T) {
	x := []float64{1, 2, 3, 4, 5}
	twice := []float64{2, 4, 6, 8, 10}
	y := []float64{1, 3, 2, 5, 4}
	var c *CollinearError
	if _, err := FitLinear([][]float64{x, twice}, y); !asCollinear(err, &c) || c.Column != 1 {
		t.Errorf("a doubled column: %v", err)
	}
	if _, err := FitLinear([][]float64{{7, 7, 7, 7, 7}}, y); !asCollinear(err, &c) || c.Column != 0 {
		t.Errorf("a constant column: %v", err)
	}
	if _, err := FitLinear([][]float64{x}, y[:2]); err == nil {
		t.Error("two rows for two coefficients: no error")
	}
}

func asCollinear(err error, c **CollinearError) bool {
	e, ok := err.(*CollinearError)
	*c = e
	return ok
}
