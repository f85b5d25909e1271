package planform

import (
	"fmt"
	"math"
	"strings"
	"testing"
)

// offset moves a sine-generated curve sideways: a bank at a distance from the
// centreline.
func offset(pts []PlanPoint, d float64) []PlanPoint {
	out := make([]PlanPoint, len(pts))
	for i, p := range pts {
		a, b := pts[max(i-1, 0)], pts[min(i+1, len(pts)-1)]
		h := math.Hypot(b.X-a.X, b.Y-a.Y)
		out[i] = PlanPoint{X: p.X - d*(b.Y-a.Y)/h, Y: p.Y + d*(b.X-a.X)/h}
	}
	return out
}

// Two banks 150 m to either side of a sine-generated curve give back its
// sinuosity and a width of 300 m, whichever way the second bank was drawn, on
// the plane and on the globe.
func TestCentrelineFromBanks(t *testing.T) {
	omega := 70 * degree
	pts := SineGeneratedLine(omega, 60e3, 12, 120)
	left, right := planeLine(offset(pts, 150)), planeLine(offset(pts, -150))
	for name, pair := range map[string][2]Line{
		"plane": {left, right}, "turned": {left, reversedLine(right)},
		"globe": {onGlobe(left, 55, -20), onGlobe(right, 55, -20)},
	} {
		c, err := Centreline(pair[0], pair[1])
		if err != nil {
			t.Fatal(name, err)
		}
		m := mustMeasure(t, c, Settings{})
		near(t, name+" width", *m.Width, 300, 0.005)
		near(t, name+" sinuosity", m.ReachSinuosity, SinuosityOf(omega), 0.005)
		near(t, name+" bends", m.Typical.Sinuosity, SinuosityOf(omega), 0.005)
		if len(m.Bends) != 23 || m.Settings.WindowWidths != DefaultWindowWidths {
			t.Errorf("%s: %d bends, settings %+v", name, len(m.Bends), m.Settings)
		}
		for i, v := range c.Vertices {
			if math.Abs(v.Width-300) > 15 {
				t.Errorf("%s vertex %d: width %v", name, i, v.Width)
				break
			}
		}
	}
}

func banksCSV(pts []PlanPoint) string {
	l, r := offset(pts, 200), offset(pts, -200)
	var b strings.Builder
	b.WriteString("left_x,left_y,right_x,right_y\n")
	for i := range l {
		fmt.Fprintf(&b, "%.3f,%.3f,%.3f,%.3f\n", l[i].X, l[i].Y, r[i].X, r[i].Y)
	}
	return b.String()
}

// Banks are known by columns, by a bank column, by names and by the setting.
func TestBanksInFiles(t *testing.T) {
	pts := SineGeneratedLine(1, 40e3, 8, 80)
	l, r := offset(pts, 200), offset(pts, -200)
	var byColumn, wktL, wktR strings.Builder
	byColumn.WriteString("bank,x,y\n")
	for i := range l {
		fmt.Fprintf(&byColumn, "L,%.3f,%.3f\nR,%.3f,%.3f\n", l[i].X, l[i].Y, r[i].X, r[i].Y)
		fmt.Fprintf(&wktL, ",%.3f %.3f", l[i].X, l[i].Y)
		fmt.Fprintf(&wktR, ",%.3f %.3f", r[i].X, r[i].Y)
	}
	wkt := "LINESTRING(" + wktL.String()[1:] + ");LINESTRING(" + wktR.String()[1:] + ")"
	json := func(n1, n2 string) string {
		feature := func(name, c string) string {
			return `{"type":"Feature","properties":{"name":"` + name + `"},"geometry":{"type":"LineString","coordinates":[[` + strings.ReplaceAll(strings.ReplaceAll(c[1:], ",", "],["), " ", ",") + `]]}}`
		}
		return `{"type":"FeatureCollection","features":[` + feature(n1, wktL.String()) + "," + feature(n2, wktR.String()) + `]}`
	}
	for name, c := range map[string]struct {
		text  string
		lines string
		name  string
	}{
		"columns":  {banksCSV(pts), "", ""},
		"column":   {byColumn.String(), "", ""},
		"setting":  {wkt, "banks", ""},
		"names":    {json("Upper left bank", "Upper right bank"), "", "upper"},
		"two only": {json("left", "right"), "", ""},
	} {
		rep, err := MeasureFile([]byte(c.text), "", "", Settings{EPSG: "plane", Lines: c.lines})
		if err != nil || len(rep.Lines) != 1 || len(rep.Refused) != 0 {
			t.Errorf("%s: %v %+v", name, err, rep)
			continue
		}
		m := rep.Lines[0]
		near(t, name+" width", *m.Width, 400, 0.01)
		near(t, name+" sinuosity", m.ReachSinuosity, SinuosityOf(1), 0.01)
		if c.name != "" && m.Name != c.name {
			t.Errorf("%s: named %q", name, m.Name)
		}
	}
	if rep, err := MeasureFile([]byte(json("a left bank", "b")), "", "", Settings{EPSG: "plane"}); err != nil || len(rep.Lines) != 1 || len(rep.Refused) != 1 || !strings.Contains(rep.Refused[0].Reason, "other one is missing") {
		t.Errorf("one bank: %v %+v", err, rep)
	}
}

// A valley axis given as the belt axis of a sine-generated curve gives 1/J0; a
// curved one gives less than the end-to-end chord.
func TestValleyAxis(t *testing.T) {
	l := planeLine(SineGeneratedLine(1.2, 100e3, 10, 100))
	end := l.Vertices[len(l.Vertices)-1]
	l.Axis = []Vertex{{-500, 10, 0, 0}, {end.Lon / 2, 10, 0, 0}, {end.Lon + 900, 10, 0, 0}}
	m := mustMeasure(t, l, Settings{})
	near(t, "axis", *m.ValleyLengthM.Axis, end.Lon, 1e-9)
	near(t, "sinuosity along it", m.ChannelLengthM / *m.ValleyLengthM.Axis, SinuosityOf(1.2), 2e-3)
	l.Axis[1].Lat = 90000
	if m := mustMeasure(t, l, Settings{}); !warned(m, "below 1") {
		t.Errorf("axis %v of channel %v: %v", *m.ValleyLengthM.Axis, m.ChannelLengthM, m.Warnings)
	}
}

// A channel whose younger level is grown by a known factor and shifted down the
// valley by a known distance: swing and sweep of every bend.
func TestSwingAndSweep(t *testing.T) {
	old := SineGeneratedLine(50*degree, 80e3, 10, 100)
	young := make([]PlanPoint, len(old))
	const sweep, grow = 240.0, 1.25
	for i, p := range old {
		young[i] = PlanPoint{X: p.X + sweep, Y: grow * p.Y}
	}
	amplitude := math.Abs(old[0].Y)
	for name, pair := range map[string][2]Line{
		"plane": {planeLine(old), planeLine(young)},
		"globe": {onGlobe(planeLine(old), -12, 60), onGlobe(planeLine(young), -12, 60)},
	} {
		m, err := CompareLevels(pair[0], pair[1], Settings{})
		if err != nil {
			t.Fatal(name, err)
		}
		if len(m.Bends) < 18 {
			t.Fatalf("%s: %d of 19 bends matched, %d not", name, len(m.Bends), m.Unmatched)
		}
		for _, b := range m.Bends {
			if math.Abs(b.SwingM-(grow-1)*amplitude) > 0.01*amplitude || math.Abs(b.SweepM-sweep) > 0.01*amplitude {
				t.Errorf("%s bend %d (%s): swing %.1f, sweep %.1f; expected %.1f, %.1f", name, b.Bend, b.Side, b.SwingM, b.SweepM, (grow-1)*amplitude, sweep)
			}
		}
		if !strings.Contains(m.Text, "outwards") || !strings.Contains(m.Text, "down-valley") {
			t.Errorf("%s: %s", name, m.Text)
		}
		back, err := CompareLevels(pair[1], pair[0], Settings{})
		if err != nil || math.Abs(back.MeanSweep+m.MeanSweep) > 0.02*sweep || math.Abs(back.MeanSwing+m.MeanSwing) > 0.02*amplitude {
			t.Errorf("%s: the other way round %v %+v", name, err, back)
		}
	}
	far := make([]PlanPoint, len(old))
	for i, p := range old {
		far[i] = PlanPoint{X: p.X + 1e6, Y: p.Y}
	}
	if m, err := CompareLevels(planeLine(old), planeLine(far), Settings{}); err != nil || len(m.Bends) != 0 || !strings.Contains(m.Text, "No bend could be matched") {
		t.Errorf("far apart: %v %+v", err, m)
	}
}

// leveed gives a channel levee heights: base, plus right-minus-left differences
// per vertex.
func leveed(l Line, diff func(i int) float64) Line {
	for i := range l.Vertices {
		l.LeveeLeft = append(l.LeveeLeft, 60-diff(i)/2)
		l.LeveeRight = append(l.LeveeRight, 60+diff(i)/2)
		l.Vertices[i].Width = 2000
	}
	return l
}

func TestLeveePattern(t *testing.T) {
	const per = 100
	pts := SineGeneratedLine(50*degree, 200e3, 10, per)
	for _, c := range []struct {
		name, pattern, side string
		lat                 float64
		diff                func(i int) float64
		speed               bool
	}{
		{"right in the north", "same_side", "right", 60, func(int) float64 { return 25 }, true},
		{"left in the south", "same_side", "left", -60, func(int) float64 { return -25 }, true},
		{"left in the north", "same_side", "left", 60, func(int) float64 { return -25 }, false},
		{"at the equator", "same_side", "right", 0.2, func(int) float64 { return 25 }, false},
		// The curve starts at the apex of a left turn: the outer bank is the
		// right one while cos(2 pi s/M) > 0.
		{"outer", "alternating", "", 60, func(i int) float64 { return 20 * math.Cos(2*math.Pi*float64(i)/per) }, false},
		{"level", "undecided", "", 60, func(i int) float64 { return math.Sin(float64(i) * 1e3) }, false},
	} {
		m := mustMeasure(t, leveed(onGlobe(planeLine(pts), c.lat, 5), c.diff), Settings{})
		l := m.Levees
		if l == nil || l.Pattern != c.pattern || c.side != "" && l.Side != c.side || (l.SpeedMS != nil) != c.speed {
			t.Errorf("%s: %+v", c.name, l)
			continue
		}
		if c.speed {
			// U = g R C dh / (f W) by hand at the median concentration
			// sqrt(2e-4 x 5e-2) = 3.162e-3: f = 1.2630e-4 at 60 degrees.
			near(t, c.name+" speed", l.SpeedMS[1], 9.81*1.58*3.1623e-3*25/(1.2630e-4*2000), 0.01)
			if !(l.SpeedMS[0] < l.SpeedMS[1] && l.SpeedMS[1] < l.SpeedMS[2]) {
				t.Errorf("%s: range %v", c.name, *l.SpeedMS)
			}
		}
	}
	// Reversed, left and right change places.
	m := mustMeasure(t, leveed(onGlobe(planeLine(pts), 60, 5), func(int) float64 { return 25 }), Settings{Direction: "reversed"})
	if m.Levees.Side != "left" {
		t.Errorf("reversed: %+v", m.Levees)
	}
}

// Two-sided binomial by hand: 2 (1 + 6)/64 for 5 of 6; 2/64 for 6 of 6.
func TestCoin(t *testing.T) {
	near(t, "5 of 6", coin(6, 5), 14.0/64, 1e-12)
	near(t, "6 of 6", coin(6, 6), 2.0/64, 1e-12)
	near(t, "0 of 6", coin(6, 0), 2.0/64, 1e-12)
	near(t, "3 of 6", coin(6, 3), 1, 1e-12)
	near(t, "none", coin(0, 0), 1, 1e-12)
}

// The search for self-crossings against every pair of segments, on the rivers.
// Fourteen of the 106 that can be measured cross or touch themselves.
func TestCrossingsBruteForce(t *testing.T) {
	found := 0
	for _, l := range rivers(t) {
		tr, err := newTrack(l, false)
		if err != nil {
			continue // closed
		}
		want := math.NaN()
		n := len(tr.x) - 1
		for i := range n {
			for j := i + 2; j < n; j++ {
				if s, ok := tr.meets(i, j, n); ok && !(s >= want) {
					want = s
				}
			}
		}
		got, full := tr.crossesAt()
		if got != want && !(math.IsNaN(got) && math.IsNaN(want)) || !full {
			t.Errorf("line %s: at %v, expected %v", l.Name, got, want)
		}
		if !math.IsNaN(want) {
			found++
		}
	}
	if found != 14 {
		t.Errorf("%d cross or touch themselves", found)
	}
}

// Circle fits: exact on a circle, unbiased enough on a short noisy arc.
func TestFitCircle(t *testing.T) {
	var x, y []float64
	for i := range 20 {
		a := 0.8 + 0.03*float64(i)
		x, y = append(x, 7e4+500*math.Cos(a)), append(y, -3e4+500*math.Sin(a))
	}
	near(t, "radius", fitCircle(x, y), 500, 1e-6)
	if !math.IsNaN(fitCircle([]float64{0, 1, 2, 3}, []float64{0, 1, 2, 3})) {
		t.Error("a straight line has a circle")
	}
}

// The cubic filter reproduces cubics and their derivatives everywhere, ends
// included (Savitzky & Golay 1964), and its classic weights.
func TestCubicWeights(t *testing.T) {
	for i, w := range cubicWeights(2, 0, 0) { // five points: (-3 12 17 12 -3)/35
		near(t, "weight", w, []float64{-3, 12, 17, 12, -3}[i]/35, 1e-12)
	}
	f := func(u float64) [3]float64 {
		return [3]float64{2 - u + 0.3*u*u - 0.01*u*u*u, -1 + 0.6*u - 0.03*u*u, 0.6 - 0.06*u}
	}
	for _, m := range []int{2, 5, 40} {
		for _, at := range []float64{-float64(m), -1.5, 0, 2, float64(m)} {
			for d := range 3 {
				sum := 0.0
				for i, w := range cubicWeights(m, at, d) {
					sum += w * f(float64(i - m))[0]
				}
				if math.Abs(sum-f(at)[d]) > 1e-8 {
					t.Errorf("m=%d at %v derivative %d: %v, expected %v", m, at, d, sum, f(at)[d])
				}
			}
		}
	}
}
