package stats

import (
	"bufio"
	"math"
	"os"
	"strconv"
	"strings"
	"testing"
)

// certified reads "b1 = start1 start2 value deviation" lines of a NIST file.
func certified(t *testing.T, name string) (starts [2][]float64, value, deviation []float64) {
	t.Helper()
	f, err := os.Open("testdata/nist/" + name)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	s := bufio.NewScanner(f)
	for s.Scan() {
		w := strings.Fields(s.Text())
		if len(w) != 6 || w[1] != "=" || !strings.HasPrefix(w[0], "b") {
			continue
		}
		var v [4]float64
		for i := range v {
			if v[i], err = strconv.ParseFloat(w[i+2], 64); err != nil {
				t.Fatal(err)
			}
		}
		starts[0], starts[1] = append(starts[0], v[0]), append(starts[1], v[1])
		value, deviation = append(value, v[2]), append(deviation, v[3])
	}
	if len(value) < 2 {
		t.Fatalf("%s: no certified values read", name)
	}
	return starts, value, deviation
}

// NIST nonlinear sets, from both of their starting points; the certified values
// have 11 digits and are read from the files.
func TestNonlinearNIST(t *testing.T) {
	models := map[string]func(x float64) func(b, g []float64) float64{
		"Misra1a.dat": func(x float64) func(b, g []float64) float64 {
			return func(b, g []float64) float64 {
				e := math.Exp(-b[1] * x)
				g[0], g[1] = 1-e, b[0]*x*e
				return b[0] * (1 - e)
			}
		},
		"DanWood.dat": func(x float64) func(b, g []float64) float64 {
			return func(b, g []float64) float64 {
				e := math.Pow(x, b[1])
				g[0], g[1] = e, b[0]*e*math.Log(x)
				return b[0] * e
			}
		},
		"Chwirut2.dat": func(x float64) func(b, g []float64) float64 {
			return func(b, g []float64) float64 {
				e, d := math.Exp(-b[0]*x), b[1]+b[2]*x
				g[0], g[1], g[2] = -x*e/d, -e/(d*d), -x*e/(d*d)
				return e / d
			}
		},
		"Rat42.dat": func(x float64) func(b, g []float64) float64 {
			return func(b, g []float64) float64 {
				e := math.Exp(b[1] - b[2]*x)
				d := 1 + e
				g[0], g[1], g[2] = 1/d, -b[0]*e/(d*d), b[0]*x*e/(d*d)
				return b[0] / d
			}
		},
	}
	models["BoxBOD.dat"] = models["Misra1a.dat"]
	for name, m := range models {
		y, x := nistData(t, name)
		starts, value, deviation := certified(t, name)
		rows := make([]func(b, g []float64) float64, len(x))
		for i := range x {
			rows[i] = m(x[i])
		}
		curve := func(i int, b, g []float64) float64 { return rows[i](b, g) }
		for k, start := range starts {
			fit, err := FitNonlinear(curve, y, start)
			if err != nil {
				t.Errorf("%s from start %d: %v", name, k+1, err)
				continue
			}
			for j := range value {
				needDigits(t, name+" coefficient", fit.Coef[j], value[j], 8)
				needDigits(t, name+" standard error", fit.SE[j], deviation[j], 6)
			}
		}
	}
}
