package views

import (
	"math"
	"strconv"
	"strings"
	"sync"

	"fathombend/catalogue/planform"
)

// RibbonCap is the largest sinuosity drawn as it is; a larger one is drawn as
// RibbonCap with a mark at its end.
const RibbonCap = 5

// ribbonWaves is the number of waves in every ribbon: with the axis length
// fixed too, only sinuosity changes the shape.
const ribbonWaves = 3

// ribbonSteps are the cubic pieces of one wave. Twelve keep the largest turn
// of one piece under 65 degrees at RibbonCap.
const ribbonSteps = 12

// Shape is the outline of one ribbon: the sine-generated curve
// theta(s) = omega cos(2 pi s/M) whose sinuosity 1/J0(omega) is that asked for
// (Langbein & Leopold 1966, USGS Prof. Pap. 422-H), starting and ending on
// its axis. Lengths are in units of the axis length given.
type Shape struct {
	D           string  // path data, from (0,0) along +x
	Left, Right float64 // extent in x; loops of a strong bend overhang both ends
	Half        float64 // extent in y, each way
	Capped      bool    // P was above RibbonCap
}

// ribbonShapes keeps shapes by sinuosity (hundredths) and axis length: a
// catalogue has few distinct ones.
var ribbonShapes sync.Map

// RibbonShape draws the ribbon of sinuosity p over an axis of the given
// length. p is taken to hundredths; below 1, or not a number, it is a straight
// line.
func RibbonShape(p, axis float64) Shape {
	capped := p > RibbonCap
	if !(p >= 1) {
		p = 1
	}
	p = math.Round(min(p, RibbonCap)*100) / 100
	type key struct {
		p, axis float64
		capped  bool
	}
	k := key{p, axis, capped}
	if s, ok := ribbonShapes.Load(k); ok {
		return s.(Shape)
	}
	s := ribbonShape(p, axis)
	s.Capped = capped
	ribbonShapes.Store(k, s)
	return s
}

func ribbonShape(p, axis float64) Shape {
	omega := planform.OmegaOf(p)
	wave := p * axis / ribbonWaves // arc length of one wave
	ds := wave / ribbonSteps
	angle := func(s float64) float64 { return omega * math.Cos(2*math.Pi*s/wave) }
	var b strings.Builder
	b.WriteString("M0 0")
	x, y := 0.0, 0.0
	out := Shape{}
	grow := func(x, y float64) {
		out.Left, out.Right = min(out.Left, x), max(out.Right, x)
		out.Half = max(out.Half, math.Abs(y))
	}
	n := ribbonWaves * ribbonSteps
	for i := range n {
		s := float64(i) * ds
		dx, dy := 0.0, 0.0
		const m = 4 // Simpson pieces in one step
		for j := range m {
			h := ds / m
			a, c, e := angle(s+float64(j)*h), angle(s+(float64(j)+0.5)*h), angle(s+float64(j+1)*h)
			dx += h / 6 * (math.Cos(a) + 4*math.Cos(c) + math.Cos(e))
			dy -= h / 6 * (math.Sin(a) + 4*math.Sin(c) + math.Sin(e)) // page y runs down
			grow(x+dx, y+dy)
		}
		// Hermite piece of arc length ds: handles of ds/3 along the tangents.
		// The pieces are equally long, so "s" finds the first handle itself.
		end := angle(s + ds)
		c2x, c2y := dx-ds/3*math.Cos(end), dy+ds/3*math.Sin(end)
		if i == 0 {
			start := angle(s)
			b.WriteString("c" + nums(ds/3*math.Cos(start), -ds/3*math.Sin(start), c2x, c2y, dx, dy))
		} else {
			b.WriteString("s" + nums(c2x, c2y, dx, dy))
		}
		x, y = x+dx, y+dy
	}
	out.D = b.String()
	return out
}

// ribbonBetween is the area between the ribbons of two sinuosities over
// defsAxis, point by point of equal phase.
func ribbonBetween(low, high float64) string {
	a, b := ribbonPoints(low, 20), ribbonPoints(high, 20)
	var s strings.Builder
	s.WriteString("M0 0L")
	for _, p := range b {
		s.WriteString(nums(p[0], p[1]) + " ")
	}
	for i := len(a) - 1; i >= 0; i-- {
		s.WriteString(nums(a[i][0], a[i][1]) + " ")
	}
	return s.String() + "z"
}

// ribbonPoints walks the ribbon over defsAxis with perWave points a wave.
func ribbonPoints(p float64, perWave int) [][2]float64 {
	p = min(max(p, 1), RibbonCap)
	omega := planform.OmegaOf(p)
	n := ribbonWaves * perWave
	ds := p * defsAxis / float64(n)
	out := make([][2]float64, n)
	x, y := 0.0, 0.0
	for i := range n {
		const m = 4
		for j := range m {
			a := omega * math.Cos(2*math.Pi*(float64(i)+(float64(j)+.5)/m)/float64(perWave))
			x, y = x+ds/m*math.Cos(a), y-ds/m*math.Sin(a)
		}
		out[i] = [2]float64{math.Round(x*10) / 10, math.Round(y*10) / 10}
	}
	return out
}

// nums writes page coordinates as short as two decimals allow.
func nums(v ...float64) string {
	var b []byte
	for _, x := range v {
		s := num2(x)
		if len(b) > 0 && s[0] != '-' {
			b = append(b, ' ')
		}
		b = append(b, s...)
	}
	return string(b)
}

// num2 writes one page coordinate. A coordinate that is not finite would break
// the figure silently; it is drawn at 0, and callers filter before.
func num2(x float64) string {
	if math.IsNaN(x) || math.IsInf(x, 0) {
		return "0"
	}
	x = math.Round(x*100) / 100
	if x == 0 {
		return "0"
	}
	s := strconv.FormatFloat(x, 'f', -1, 64)
	switch {
	case strings.HasPrefix(s, "0."):
		return s[1:]
	case strings.HasPrefix(s, "-0."):
		return "-" + s[2:]
	}
	return s
}

// WidthClass is the stroke class of a channel width in m: w0 unknown, then
// under 300 m, to 1 km, to 3 km, and wider. The limits are a choice of this
// project for drawing only.
func WidthClass(m float64) string {
	switch {
	case !(m > 0):
		return "w0"
	case m < 300:
		return "w1"
	case m < 1000:
		return "w2"
	case m < 3000:
		return "w3"
	}
	return "w4"
}
