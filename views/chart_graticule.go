package views

import (
	"math"
	"strconv"
	"strings"
)

// chartBounds are the latitudes and longitudes in a frame: lon runs from Lon0
// east by Span degrees.
type chartBounds struct{ South, North, Lon0, Span float64 }

// bounds of the frame, by walking its inside.
func (p chartProjection) bounds() chartBounds {
	b := chartBounds{90, -90, -180, 360}
	west, east := 0.0, 0.0
	const n = 24
	for i := range n + 1 {
		for j := range n + 1 {
			lat, lon, ok := p.place(p.w*float64(i)/n, p.h*float64(j)/n)
			if !ok {
				continue
			}
			b.South, b.North = min(b.South, lat), max(b.North, lat)
			d := lonDifference(lon, p.v.Lon)
			west, east = min(west, d), max(east, d)
		}
	}
	for _, pole := range []float64{90, -90} {
		if x, y, shown := p.at(pole, p.v.Lon); shown && p.v.azimuthal() && x >= 0 && y >= 0 {
			b.South, b.North = min(b.South, pole), max(b.North, pole)
			return b
		}
	}
	if p.v.azimuthal() && east-west < 300 {
		b.Lon0, b.Span = p.v.Lon+west, east-west
	}
	return b
}

// graticuleSteps are the spacings of meridians and parallels, degrees.
func (p chartProjection) graticuleSteps() (lat, lon float64) {
	const room = 95.0 // page units between two lines
	if !p.v.azimuthal() {
		return 15, 30
	}
	lat = degreeStep(room / p.r / radian)
	if p.v.polar() {
		return min(lat, 15), 30
	}
	b := p.bounds()
	mid := math.Cos(min(math.Abs(b.North), math.Abs(b.South)) * radian)
	return lat, degreeStep(room / p.r / radian / max(mid, 0.05))
}

// degreeStep rounds a spacing up to one that divides degrees well.
func degreeStep(d float64) float64 {
	for _, s := range []float64{0.0005, 0.001, 0.002, 0.005, 0.01, 0.02, 0.05, 0.1, 0.2, 0.5, 1, 2, 5, 10, 15} {
		if d <= s {
			return s
		}
	}
	return 30
}

// graticuleLine is one meridian or parallel on the page.
type graticuleLine struct {
	points [][2]float64
	class  string // equator, practice: the limit poleward of which the field argues
}

// graticule are the lines in the frame.
func (p chartProjection) graticule() []graticuleLine {
	latStep, lonStep := p.graticuleSteps()
	b := p.bounds()
	var out []graticuleLine
	const pieces = 48
	walk := func(at func(t float64) (lat, lon float64), class string) {
		var l [][2]float64
		flush := func() {
			if len(l) > 1 {
				out = append(out, graticuleLine{l, class})
			}
			l = nil
		}
		for i := range pieces + 1 {
			lat, lon := at(float64(i) / pieces)
			x, y, _ := p.at(lat, lon)
			if p.hidden(lat, lon) || x < -p.w || x > 2*p.w || y < -p.h || y > 2*p.h {
				flush()
				continue
			}
			l = append(l, [2]float64{x, y})
		}
		flush()
	}
	if !p.v.azimuthal() {
		b = chartBounds{-90, 90, p.lon0 - 180, 360}
	}
	for k := math.Ceil(b.South / latStep); k*latStep <= b.North; k++ {
		lat := k * latStep
		if math.Abs(lat) < 90 {
			class := ""
			if lat == 0 {
				class = " equator"
			}
			walk(func(t float64) (float64, float64) { return lat, b.Lon0 + t*b.Span }, class)
		}
	}
	south, north := b.South, b.North
	if p.v.polar() { // meridians end before they crowd at the pole
		south, north = max(south, -90+latStep/3), min(north, 90-latStep/3)
	}
	for k := math.Ceil(b.Lon0 / lonStep); k*lonStep <= b.Lon0+b.Span+1e-9; k++ {
		lon := k * lonStep
		walk(func(t float64) (float64, float64) { return south + t*(north-south), lon }, "")
	}
	if p.v.polar() {
		walk(func(t float64) (float64, float64) { return math.Copysign(highLatitude, p.lat0), 360*t - 180 }, " practice")
	}
	return out
}

// hidden is true beyond the edge of an azimuthal view.
func (p chartProjection) hidden(lat, lon float64) bool {
	switch {
	case p.v.Name == "north":
		return lat < polarEdge
	case p.v.Name == "south":
		return lat > -polarEdge
	}
	return p.v.azimuthal() && arcBetween(lat, lon, p.lat0, p.lon0) > 100
}

// chartLabel is a letter of the graticule.
type chartLabel struct {
	x, y         float64
	anchor, text string
}

// labels of the graticule: at the edge of the frame where lines cross it, on
// the whole world along its left edge and the equator.
func (p chartProjection) labels() []chartLabel {
	latStep, lonStep := p.graticuleSteps()
	if !p.v.azimuthal() {
		return p.worldLabels(latStep, lonStep)
	}
	var out []chartLabel
	if p.v.polar() {
		for lat := math.Ceil((polarEdge+5)/latStep) * latStep; lat < 90; lat += latStep {
			sign := math.Copysign(1, p.lat0)
			if x, y, shown := p.at(sign*lat, 45); shown {
				out = append(out, chartLabel{x, y + 4, "middle", FormatLatitude(math.Round(sign*lat*1e4) / 1e4)})
			}
		}
		for lon := -180.0; lon < 180; lon += lonStep {
			x, y := p.toPage(azimuthal(math.Copysign(polarEdge+3, p.lat0), lon, p.lat0, p.lon0, 180))
			if x > 0 && x < p.w && y > 0 && y < p.h {
				out = append(out, chartLabel{x, y + 4, "middle", longitudeLetters(lon)})
			}
		}
		if len(out) > 2 {
			return out
		}
	}
	return append(p.edgeLabels(latStep, true), p.edgeLabels(lonStep, false)...)
}

func (p chartProjection) worldLabels(latStep, lonStep float64) []chartLabel {
	var out []chartLabel
	first := -75.0
	if p.r < 150 { // small maps: every second line is lettered
		first, latStep, lonStep = -60, 2*latStep, 2*lonStep
	}
	for lat := first; lat <= 75; lat += latStep {
		x, y := p.toPage(equalEarth(lat, -180))
		if y > 6 && y < p.h-6 {
			out = append(out, chartLabel{max(x+6, 4), y - 3, "start", FormatLatitude(lat)})
		}
	}
	_, y := p.toPage(0, 0)
	y = min(max(y, 14), p.h-8)
	for k := math.Ceil((p.lon0 - 150) / lonStep); k*lonStep <= p.lon0+150; k++ {
		x, _ := p.toPage(equalEarth(0, k*lonStep-p.lon0))
		if x > 30 && x < p.w-30 {
			out = append(out, chartLabel{x, y + 13, "middle", longitudeLetters(wrapLongitude(k * lonStep))})
		}
	}
	return out
}

// edgeLabels letters parallels where they meet the left edge of the frame, and
// meridians where they meet its lower edge.
func (p chartProjection) edgeLabels(step float64, parallels bool) []chartLabel {
	var out []chartLabel
	const n = 200
	last := math.NaN()
	for i := range n + 1 {
		t := float64(i) / n
		px, py := p.w*t, p.h
		if parallels {
			px, py = 0, p.h*t
		}
		lat, lon, ok := p.place(px, py)
		v := lat
		if !parallels {
			v = p.v.Lon + lonDifference(lon, p.v.Lon)
		}
		if !ok || p.hidden(lat, lon) {
			last = math.NaN()
			continue
		}
		if k := math.Floor(v / step); !math.IsNaN(last) && k != math.Floor(last/step) && math.Abs(v-last) < 90 {
			at := max(k, math.Floor(last/step)) * step
			switch {
			case parallels && py > 14 && py < p.h-24:
				out = append(out, chartLabel{5, py - 4, "start", FormatLatitude(roundDegrees(at))})
			case !parallels && px > 44 && px < p.w*0.78: // the scale stands right of it
				out = append(out, chartLabel{px, p.h - 6, "middle", longitudeLetters(wrapLongitude(roundDegrees(at)))})
			}
		}
		last = v
	}
	return out
}

func roundDegrees(v float64) float64 { return math.Round(v*1e6) / 1e6 }

func longitudeLetters(lon float64) string {
	if math.Abs(lon) == 180 {
		return "180°"
	}
	return strings.NewReplacer("N", "E", "S", "W").Replace(FormatLatitude(lon))
}

// scaleBar is a round length that fits a quarter of the frame, km and page
// units; ok is false where scale changes too much over the frame.
func (p chartProjection) scaleBar() (km, length float64, ok bool) {
	if !p.v.azimuthal() {
		return 0, 0, false
	}
	const earthKm = 6371.0088 // mean radius, IUGG
	perKm := p.r / earthKm
	raw := p.w / 5 / perKm
	mag := math.Pow(10, math.Floor(math.Log10(raw)))
	for _, m := range []float64{5, 2, 1} {
		if m*mag <= raw {
			return m * mag, m * mag * perKm, true
		}
	}
	return mag, mag * perKm, true
}

func kmText(km float64) string {
	if km < 1 {
		return strconv.FormatFloat(math.Round(km*1000), 'f', -1, 64) + " m"
	}
	return strconv.FormatFloat(km, 'f', -1, 64) + " km"
}
