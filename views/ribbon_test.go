package views

import (
	"math"
	"strconv"
	"strings"
	"testing"
)

// TestRibbonIsItsSinuosity walks the drawn curve: arc length over axis length
// must be the sinuosity asked for, and the curve must end on its axis.
func TestRibbonIsItsSinuosity(t *testing.T) {
	for _, p := range []float64{1, 1.05, 1.34, 2.12, 3, 5} {
		s := RibbonShape(p, 300)
		length, x, y := walk(t, s.D)
		// 0.6 %: cubic pieces of a twelfth wave, coordinates to hundredths.
		if got := length / 300; math.Abs(got-p) > 0.006*p {
			t.Errorf("P %v: drawn %v", p, got)
		}
		if math.Abs(x-300) > 0.5 || math.Abs(y) > 0.5 {
			t.Errorf("P %v ends at %v, %v; want 300, 0", p, x, y)
		}
	}
}

// walk follows "M0 0c... s..." with relative cubic pieces and measures it.
func walk(t *testing.T, d string) (length, x, y float64) {
	t.Helper()
	d = strings.TrimPrefix(d, "M0 0")
	var hx, hy float64 // reflected handle
	for _, piece := range strings.FieldsFunc(strings.NewReplacer("c", "|c", "s", "|s").Replace(d), func(r rune) bool { return r == '|' }) {
		v := numbers(t, piece[1:])
		if piece[0] == 's' {
			v = append([]float64{hx, hy}, v...)
		}
		px, py := 0.0, 0.0
		for i := 1; i <= 40; i++ {
			u := float64(i) / 40
			b1, b2, b3 := 3*u*(1-u)*(1-u), 3*u*u*(1-u), u*u*u
			qx, qy := b1*v[0]+b2*v[2]+b3*v[4], b1*v[1]+b2*v[3]+b3*v[5]
			length += math.Hypot(qx-px, qy-py)
			px, py = qx, qy
		}
		hx, hy = v[4]-v[2], v[5]-v[3]
		x, y = x+v[4], y+v[5]
	}
	return length, x, y
}

func numbers(t *testing.T, s string) []float64 {
	t.Helper()
	var out []float64
	for _, f := range strings.Fields(strings.ReplaceAll(s, "-", " -")) {
		v, err := strconv.ParseFloat(f, 64)
		if err != nil {
			t.Fatalf("%q: %v", s, err)
		}
		out = append(out, v)
	}
	return out
}

func TestRibbonLimits(t *testing.T) {
	if !RibbonShape(7.7, 60).Capped || RibbonShape(5, 60).Capped {
		t.Error("only a sinuosity past 5 is marked as drawn at 5")
	}
	if RibbonShape(7.7, 60).D != RibbonShape(5, 60).D {
		t.Error("past 5 the curve is that of 5")
	}
	for _, p := range []float64{math.NaN(), 0, -3, math.Inf(-1)} {
		if s := RibbonShape(p, 60); s.Half != 0 {
			t.Errorf("%v is drawn straight, got half height %v", p, s.Half)
		}
	}
}
