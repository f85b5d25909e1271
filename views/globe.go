package views

import (
	"context"
	"fmt"
	"io"
	"math"
	"strings"

	"github.com/a-h/templ"
)

// Globe is a small locator map: the half of the Earth around a place, in
// orthographic projection.
type Globe struct {
	ID       string
	Title    string
	Lat, Lon float64        // centre, degrees
	Rings    [][][2]float64 // land: closed rings of longitude and latitude, degrees
	Marks    [][2]float64   // longitude and latitude; the first is the place itself
}

const globeR = 150.0

// project gives the page position and whether it is on the near half; a far
// point is put on the limb, so that rings that go round stay closed.
func (g Globe) project(lon, lat float64) (x, y float64, near bool) {
	const rad = math.Pi / 180
	sl, cl := math.Sincos(lat * rad)
	s0, c0 := math.Sincos(g.Lat * rad)
	sd, cd := math.Sincos((lon - g.Lon) * rad)
	x, y = cl*sd, c0*sl-s0*cl*cd
	if s0*sl+c0*cl*cd >= 0 {
		return globeR * x, -globeR * y, true
	}
	r := math.Hypot(x, y)
	if r < 1e-9 {
		return 0, globeR, false
	}
	return globeR * x / r, -globeR * y / r, false
}

// SVG draws it inline.
func (g Globe) SVG() templ.Component {
	return templ.ComponentFunc(func(_ context.Context, w io.Writer) error {
		if !drawable(g.Lat, false) || !drawable(g.Lon, false) {
			_, err := io.WriteString(w, `<p class="small">Its place is not known.</p>`)
			return err
		}
		var b strings.Builder
		fmt.Fprintf(&b, `<svg id="%s" class="globe" viewBox="-156 -156 312 312" role="img" aria-labelledby="%s-t"><title id="%s-t">%s</title>`, esc(g.ID), esc(g.ID), esc(g.ID), esc(g.Title))
		fmt.Fprintf(&b, `<circle class="sea" r="%s"/>`, num2(globeR))
		for _, ring := range g.Rings {
			if d := g.ring(ring); d != "" {
				b.WriteString(`<path class="land" d="` + d + `"/>`)
			}
		}
		b.WriteString(`<path class="graticule" d="` + g.graticule() + `"/>`)
		fmt.Fprintf(&b, `<circle class="limb" r="%s"/>`, num2(globeR))
		for i := len(g.Marks) - 1; i >= 0; i-- {
			x, y, near := g.project(g.Marks[i][0], g.Marks[i][1])
			if near {
				class, r := "spot", 5.5
				if i > 0 {
					class, r = "spot other", 3
				}
				fmt.Fprintf(&b, `<circle class="%s" cx="%s" cy="%s" r="%s"/>`, class, num2(x), num2(y), num2(r))
			}
		}
		b.WriteString(`</svg>`)
		_, err := io.WriteString(w, b.String())
		return err
	})
}

// ring is one land ring as path data in tenths of a unit, "" when it lies on
// the far side. Steps under a unit are left out: they are not seen.
func (g Globe) ring(ring [][2]float64) string {
	var b strings.Builder
	seen := false
	px, py := math.Inf(1), math.Inf(1)
	for _, v := range ring {
		x, y, near := g.project(v[0], v[1])
		seen = seen || near
		if math.Hypot(x-px, y-py) < 1.1 {
			continue
		}
		px, py = x, y
		sep := "L"
		if b.Len() == 0 {
			sep = "M"
		}
		b.WriteString(sep + nums(math.Round(x*10)/10, math.Round(y*10)/10))
	}
	if !seen || strings.Count(b.String(), "L") < 2 {
		return ""
	}
	return b.String() + "z"
}

// graticule is every fifteenth parallel and thirtieth meridian on the near
// half.
func (g Globe) graticule() string {
	var b strings.Builder
	walk := func(at func(t float64) (lon, lat float64), from, to, step float64) {
		pen := false
		for t := from; t <= to; t += step {
			lon, lat := at(t)
			x, y, near := g.project(lon, lat)
			if !near {
				pen = false
				continue
			}
			if pen {
				b.WriteString("L")
			} else {
				b.WriteString("M")
			}
			b.WriteString(nums(math.Round(x*10)/10, math.Round(y*10)/10))
			pen = true
		}
	}
	for lat := -75.0; lat <= 75; lat += 15 {
		walk(func(t float64) (float64, float64) { return t, lat }, g.Lon-90, g.Lon+90, 6)
		if math.Abs(g.Lat) > 20 {
			walk(func(t float64) (float64, float64) { return t, lat }, g.Lon+90, g.Lon+270, 6)
		}
	}
	for lon := -180.0; lon < 180; lon += 30 {
		walk(func(t float64) (float64, float64) { return lon, t }, -84, 84, 6)
	}
	return b.String()
}
