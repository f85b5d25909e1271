package planform

import (
	"encoding/csv"
	"encoding/json"
	"math"
	"os"
	"reflect"
	"strconv"
	"strings"
	"testing"
)

// Sine-generated curves against 1/J0(omega) (Langbein & Leopold 1966, USGS
// Prof. Pap. 422-H) at 200 vertices a wavelength: 0.2 %, for reach, bends and
// windows, on the plane and on the globe.
func TestSineGeneratedCurves(t *testing.T) {
	for _, deg := range []float64{30, 60, 90, 110} {
		want := SinuosityOf(deg * degree)
		plane := planeLine(SineGeneratedLine(deg*degree, 240e3, 24, 200))
		for name, l := range map[string]Line{"plane": plane, "globe": onGlobe(plane, -47, 179.5)} {
			m := mustMeasure(t, l, Settings{})
			near(t, name+" reach", m.ReachSinuosity, want, 2e-3)
			near(t, name+" mean", m.MeanSinuosity, want, 2e-3)
			near(t, name+" P90", m.P90Sinuosity, want, 2e-3)
			near(t, name+" peak", m.PeakSinuosity, want, 2e-3)
			near(t, name+" standardised peak", m.StandardisedPeak.Expected, want, 2e-3)
			near(t, name+" over inflections", m.ChannelLengthM/m.ValleyLengthM.Inflections, want, 0.05) // ends are part bends
			if len(m.Bends) != 47 {
				t.Errorf("%s %v degrees: %d bends, expected 47 between the 48 inflections", name, deg, len(m.Bends))
			}
			checkSineBends(t, name, m, deg*degree, 10e3)
			if m.Coarse {
				t.Errorf("%s %v degrees: called too coarse: %v", name, deg, m.Warnings)
			}
		}
	}
}

// Per bend: arc M/2, sinuosity 1/J0, wavelength M J0, least radius M/(2 pi
// omega) (3 % more from the circle about the apex, see radius), symmetric, and
// sides that alternate. The curve starts at an apex and turns left at first,
// so its first whole bend turns right.
func checkSineBends(t *testing.T, name string, m *Measured, omega, M float64) {
	t.Helper()
	for i, b := range m.Bends {
		near(t, name+" bend arc", b.ArcM, M/2, 2e-3)
		near(t, name+" bend sinuosity", b.Sinuosity, SinuosityOf(omega), 2e-3)
		near(t, name+" wavelength", b.WavelengthM, M*math.J0(omega), 3e-3)
		if r := b.RadiusM / (M / (2 * math.Pi * omega)); r < 1 || r > 1.04 {
			t.Errorf("%s bend %d: radius %.3f of the least one", name, i, r)
		}
		if math.Abs(b.Asymmetry) > 0.02 {
			t.Errorf("%s bend %d: asymmetry %v", name, i, b.Asymmetry)
		}
		if want := []string{"right", "left"}[i%2]; b.Side != want {
			t.Errorf("%s bend %d turns %s, expected %s", name, i, b.Side, want)
		}
	}
	// Amplitude: half the distance between opposite apices, by quadrature.
	p := SineGeneratedLine(omega, M, 1, 4000)
	near(t, name+" amplitude", m.Bends[20].AmplitudeM, math.Abs(p[0].Y), 3e-3)
}

// How the error grows as vertices thin, omega 90 degrees: chords of an arc
// fall short as the square of the vertex spacing. The line is called too
// coarse before its reach reads more than 2 % low.
func TestErrorGrowsAsVerticesThin(t *testing.T) {
	want := SinuosityOf(math.Pi / 2)
	last := 0.0
	for _, per := range []int{200, 100, 50, 20, 12, 8, 6} {
		m := mustMeasure(t, planeLine(SineGeneratedLine(math.Pi/2, 240e3, 24, per)), Settings{})
		short := 1 - m.ReachSinuosity/want
		t.Logf("%3d vertices a wavelength: reach %.4f, %.2f %% low, peak %.4f, coarse %v", per, m.ReachSinuosity, 100*short, m.PeakSinuosity, m.Coarse)
		if short < last {
			t.Errorf("%d vertices: the error does not grow", per)
		}
		last = short
		if (short > 0.02 && !m.Coarse) || (short < 0.005 && m.Coarse) {
			t.Errorf("%d vertices, %.2f %% low: coarse %v", per, 100*short, m.Coarse)
		}
	}
}

// Semicircles end to end: pi/2 for every bend and for the whole, radius and
// amplitude those of the circle.
func TestSemicircles(t *testing.T) {
	const r, n = 1500.0, 400
	var pts []PlanPoint
	for k := range 16 {
		for i := range n {
			a := math.Pi * float64(i) / n
			side := 1.0
			if k%2 == 1 {
				side = -1
			}
			pts = append(pts, PlanPoint{X: 2*r*float64(k) + r - r*math.Cos(a), Y: side * r * math.Sin(a)})
		}
	}
	pts = append(pts, PlanPoint{X: 32 * r})
	m := mustMeasure(t, planeLine(pts), Settings{})
	near(t, "reach", m.ReachSinuosity, math.Pi/2, 1e-5)
	near(t, "over inflections", m.ChannelLengthM/m.ValleyLengthM.Inflections, math.Pi/2, 1e-3)
	if len(m.Bends) != 14 {
		t.Fatalf("%d bends, expected the 14 between the ends", len(m.Bends))
	}
	for i, b := range m.Bends {
		near(t, "bend", b.Sinuosity, math.Pi/2, 1e-3)
		near(t, "radius", b.RadiusM, r, 1e-3)
		near(t, "amplitude", b.AmplitudeM, r, 1e-2)
		if want := []string{"left", "right"}[i%2]; b.Side != want {
			t.Errorf("bend %d turns %s, expected %s", i, b.Side, want)
		}
	}
}

// The 114 real river lines against length and chord computed elsewhere
// (testdata/README.md): 1e-6 relative; the eight closed ones refused with the
// reason; too coarse for their bends, nearly all; ten cross themselves.
func TestRivers(t *testing.T) {
	f, err := os.Open("testdata/rivers_wdb2_reference.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	ref, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	lines := rivers(t)
	if len(lines) != 114 || len(ref) != 115 {
		t.Fatalf("%d lines, %d reference rows", len(lines), len(ref)-1)
	}
	var closed []string
	measured, coarse, crossing := 0, 0, 0
	for i, l := range lines {
		num := func(k int) float64 { v, _ := strconv.ParseFloat(ref[i+1][k], 64); return v }
		length, err := Length(l)
		if err != nil {
			t.Fatal(err)
		}
		near(t, "length of "+l.Name, length, num(4), 1e-6)
		m, err := Measure(l, Settings{})
		if err != nil {
			if !strings.Contains(err.Error(), "closed") || num(5) != 0 {
				t.Errorf("line %s: %v", l.Name, err)
			}
			closed = append(closed, l.Name)
			continue
		}
		measured++
		near(t, "measured length of "+l.Name, m.ChannelLengthM, num(4), 1e-6)
		near(t, "chord of "+l.Name, m.ChordM, num(5), 1e-6)
		near(t, "sinuosity of "+l.Name, m.ReachSinuosity, num(6), 2e-6)
		if m.Coarse {
			coarse++
		}
		for _, w := range m.Warnings {
			if strings.Contains(w, "crosses or touches itself") {
				crossing++
			}
		}
	}
	if want := "1 2 5 7 8 9 47 97"; strings.Join(closed, " ") != want {
		t.Errorf("closed: %v, expected %s", closed, want)
	}
	if measured != 106 || coarse < 100 {
		t.Errorf("%d measured, %d called too coarse; expected 106 and nearly all", measured, coarse)
	}
	t.Logf("%d measured, %d too coarse, %d cross or touch themselves", measured, coarse, crossing)
}

// A curve with everything about it irregular, for laws that must hold exactly.
func wild(n int) Line {
	var pts []PlanPoint
	x, y := 0.0, 0.0
	for i := range n {
		s := float64(i) / 50
		a := 1.1*math.Sin(s*2.1) + 0.5*math.Sin(s*0.37+1) + 0.3*math.Cos(s*5.3)
		step := 20 * (1.3 + math.Sin(s*11))
		x += step * math.Cos(a)
		y += step * math.Sin(a)
		pts = append(pts, PlanPoint{X: x - 25000, Y: y - 2000})
	}
	l := planeLine(pts)
	for i := range l.Vertices {
		l.Vertices[i].Depth = 2000 + float64(i)*0.1 + 5*math.Sin(float64(i)/50)
	}
	return l
}

// sameShape compares what must not change, lengths divided by scale.
func sameShape(t *testing.T, what string, a, b *Measured, scale, tol float64) {
	t.Helper()
	near(t, what+" length", b.ChannelLengthM/scale, a.ChannelLengthM, tol)
	near(t, what+" chord", b.ChordM/scale, a.ChordM, tol)
	near(t, what+" over inflections", b.ValleyLengthM.Inflections/scale, a.ValleyLengthM.Inflections, 20*tol)
	near(t, what+" mean", b.MeanSinuosity, a.MeanSinuosity, 20*tol)
	near(t, what+" p90", b.P90Sinuosity, a.P90Sinuosity, 20*tol)
	near(t, what+" peak", b.PeakSinuosity, a.PeakSinuosity, 20*tol)
	near(t, what+" standardised peak", b.StandardisedPeak.Expected, a.StandardisedPeak.Expected, 20*tol)
	near(t, what+" sensitivity", b.Sensitivity.High, a.Sensitivity.High, 20*tol)
	if len(a.Bends) != len(b.Bends) || len(a.Windows) != len(b.Windows) || len(a.Ruler) != len(b.Ruler) {
		t.Fatalf("%s: %d bends, %d windows, %d rulers; expected %d, %d, %d", what, len(b.Bends), len(b.Windows), len(b.Ruler), len(a.Bends), len(a.Windows), len(a.Ruler))
	}
	for i := range a.Bends {
		p, q := a.Bends[i], b.Bends[i]
		near(t, what+" bend", q.Sinuosity, p.Sinuosity, 20*tol)
		near(t, what+" amplitude", q.AmplitudeM/scale, p.AmplitudeM, 50*tol)
		near(t, what+" radius", q.RadiusM/scale, p.RadiusM, 1e3*tol)
	}
	for i := range a.Ruler {
		near(t, what+" ruler", b.Ruler[i].LengthM/scale, a.Ruler[i].LengthM, 20*tol)
	}
}

func TestLawScaling(t *testing.T) {
	l := wild(4000)
	a := mustMeasure(t, l, Settings{})
	big := l
	big.Vertices = make([]Vertex, len(l.Vertices))
	for i, v := range l.Vertices {
		big.Vertices[i] = Vertex{v.Lon * 7, v.Lat * 7, v.Depth * 7, v.Width}
	}
	b := mustMeasure(t, big, Settings{})
	sameShape(t, "scaled", a, b, 7, 1e-9)
	near(t, "slope", *b.ValleySlope, *a.ValleySlope, 1e-9)
}

// Turning the globe about its axis changes nothing.
func TestLawRotationAboutThePole(t *testing.T) {
	l := onGlobe(wild(4000), 61, 12)
	a := mustMeasure(t, l, Settings{})
	for _, by := range []float64{37.25, 168, -200} {
		turned := l
		turned.Vertices = make([]Vertex, len(l.Vertices))
		for i, v := range l.Vertices {
			v.Lon = math.Remainder(v.Lon+by, 360)
			turned.Vertices[i] = v
		}
		sameShape(t, "rotated", a, mustMeasure(t, turned, Settings{}), 1, 1e-8)
	}
}

// The reversed line has the same numbers, the slope negated, the bends in the
// other order turning to the other side, their asymmetry negated.
func TestLawReversal(t *testing.T) {
	for name, l := range map[string]Line{"plane": wild(4000), "globe": onGlobe(wild(4000), -33, 151)} {
		s := Settings{Direction: "as_given"}
		a, b := mustMeasure(t, l, s), mustMeasure(t, reversedLine(l), s)
		near(t, "slope", *b.ValleySlope, -*a.ValleySlope, 1e-9)
		n := len(a.Bends)
		if n < 20 || len(b.Bends) != n {
			t.Fatalf("%s: %d and %d bends", name, n, len(b.Bends))
		}
		for i, p := range a.Bends {
			q := b.Bends[n-1-i]
			near(t, name+" bend", q.Sinuosity, p.Sinuosity, 1e-8)
			near(t, name+" amplitude", q.AmplitudeM, p.AmplitudeM, 1e-7)
			near(t, name+" radius", q.RadiusM, p.RadiusM, 1e-5)
			if q.Side == p.Side || math.Abs(q.Asymmetry+p.Asymmetry) > 1e-6 {
				t.Errorf("%s bend %d: side %s and %s, asymmetry %v and %v", name, i, p.Side, q.Side, p.Asymmetry, q.Asymmetry)
			}
		}
		near(t, name+" peak", b.PeakSinuosity, a.PeakSinuosity, 1e-8)
		near(t, name+" mean", b.MeanSinuosity, a.MeanSinuosity, 1e-8)
		near(t, name+" standardised peak", b.StandardisedPeak.Expected, a.StandardisedPeak.Expected, 1e-8)
	}
}

// Vertices put on straight pieces change nothing, vertex spacing included.
func TestLawCollinearVertices(t *testing.T) {
	l := wild(2000)
	a := mustMeasure(t, l, Settings{})
	dense := l
	dense.Vertices = nil
	for i, v := range l.Vertices {
		if i > 0 {
			p := l.Vertices[i-1]
			for _, f := range []float64{0.2, 0.5, 0.9} {
				dense.Vertices = append(dense.Vertices, Vertex{p.Lon + f*(v.Lon-p.Lon), p.Lat + f*(v.Lat-p.Lat), p.Depth + f*(v.Depth-p.Depth), math.NaN()})
			}
		}
		dense.Vertices = append(dense.Vertices, v)
	}
	b := mustMeasure(t, dense, Settings{})
	sameShape(t, "denser", a, b, 1, 1e-9)
	near(t, "vertex spacing", b.MedianSpacingM, a.MedianSpacingM, 1e-9)
	near(t, "sample spacing", b.Settings.SpacingM, a.Settings.SpacingM, 1e-9)
	if b.Coarse != a.Coarse {
		t.Error("a line made dense by interpolation changed its verdict on coarseness")
	}
}

// Stored settings reproduce the stored numbers to the last bit.
func TestSettingsReproduce(t *testing.T) {
	l := onGlobe(wild(3000), 5, 100)
	for i := range l.Vertices {
		l.Vertices[i].Width = 200 + 10*math.Sin(float64(i)/100)
	}
	for _, s := range []Settings{{}, {SpacingM: 300}, {WindowM: 5000, K: 3}, {WindowBends: 4}, {WidthM: 150, WindowWidths: 12, Smooth: 21}, {Direction: "reversed", Smooth: 1}} {
		a := mustMeasure(t, l, s)
		var stored Settings
		b, _ := json.Marshal(a.Settings)
		if err := json.Unmarshal(b, &stored); err != nil {
			t.Fatal(err)
		}
		again := mustMeasure(t, l, stored)
		again.Notes = a.Notes
		if !reflect.DeepEqual(a, again) {
			t.Errorf("%+v: measuring again with %+v gives other numbers: peak %v and %v", s, stored, a.PeakSinuosity, again.PeakSinuosity)
		}
	}
}

// A coarser spacing reads straighter, and reads two lines of different vertex
// spacing alike.
func TestSpacingStandardises(t *testing.T) {
	fine := planeLine(SineGeneratedLine(80*degree, 120e3, 12, 400))
	thin := planeLine(SineGeneratedLine(80*degree, 120e3, 12, 40))
	own := mustMeasure(t, fine, Settings{})
	a, b := mustMeasure(t, fine, Settings{SpacingM: 2000}), mustMeasure(t, thin, Settings{SpacingM: 2000})
	if !(a.MeanSinuosity < 0.97*own.MeanSinuosity) {
		t.Errorf("2 km spacing reads %.4f, its own %.4f", a.MeanSinuosity, own.MeanSinuosity)
	}
	near(t, "mean at 2 km", b.MeanSinuosity, a.MeanSinuosity, 0.01)
}

// One real centreline reads very differently by window: a line with one tight
// reach shows why the window stands beside the number.
func TestWindowMatters(t *testing.T) {
	pts := SineGeneratedLine(30*degree, 60e3, 12, 100)
	tight := SineGeneratedLine(115*degree, 20e3, 4, 100)
	end := pts[len(pts)-1]
	for _, p := range tight[1:] {
		pts = append(pts, PlanPoint{X: end.X + p.X, Y: p.Y + end.Y - tight[0].Y})
	}
	l := planeLine(pts)
	short, long := mustMeasure(t, l, Settings{WindowM: 5000}), mustMeasure(t, l, Settings{WindowM: 40000})
	if !(short.PeakSinuosity > 1.5*long.PeakSinuosity) {
		t.Errorf("peaks %.2f and %.2f", short.PeakSinuosity, long.PeakSinuosity)
	}
	if !(short.StandardisedPeak.Expected < short.PeakSinuosity) || !(short.Sensitivity.Low < short.Sensitivity.High) {
		t.Errorf("standardised peak %+v of peak %v, sensitivity %+v", short.StandardisedPeak, short.PeakSinuosity, short.Sensitivity)
	}
}
