// Package land holds a coarse outline of the land and answers whether a point
// lies on it. Pure.
//
// The outlines are Natural Earth's (public domain). Contains uses the 1:50
// million one, kept to 0.05 degrees (5 km): good enough to notice a longitude
// with the wrong sign, too coarse to judge a place within about 10 km of a
// coast, and without the smallest islands. Seas without a link to the ocean
// are land here, except the Caspian. Rings is the 1:110 million outline, for
// maps of a page's size.
package land

import (
	"bufio"
	_ "embed"
	"fmt"
	"math"
	"strconv"
	"strings"
	"sync"
)

//go:embed outline_50m.txt
var fineText string

//go:embed outline_110m.txt
var coarseText string

// Credit is the sentence to print beside a map drawn from the outlines.
const Credit = "Land outline: Natural Earth (public domain)."

// Contains says whether the point, in WGS84 degrees, lies on land. Any
// longitude is accepted (190 is -170). A latitude beyond the poles and values
// that are not finite are not on land.
func Contains(lat, lon float64) bool {
	if !(lat >= -90 && lat <= 90) || math.IsInf(lon, 0) || math.IsNaN(lon) {
		return false
	}
	lon = math.Mod(lon, 360)
	switch {
	case lon >= 180:
		lon -= 360
	case lon < -180:
		lon += 360
	}
	in := false
	// Even-odd rule along the parallel: only the edges of the point's band of
	// latitude can cross it.
	for _, e := range fineBands()[band(lat)] {
		if (e.lat1 > lat) != (e.lat2 > lat) && lon < e.lon1+(e.lon2-e.lon1)*(lat-e.lat1)/(e.lat2-e.lat1) {
			in = !in
		}
	}
	return in
}

// Rings returns closed rings (the first vertex is not repeated) of longitude
// and latitude in degrees, cut at the antimeridian, to be filled by the
// even-odd rule: a hole is a ring too. The caller must not change them.
func Rings() [][][2]float64 { return coarse() }

var coarse = sync.OnceValue(func() [][][2]float64 { return mustDecode(coarseText) })

type edge struct{ lon1, lat1, lon2, lat2 float64 }

func band(lat float64) int { return min(int(math.Floor(lat))+90, 179) }

// fineBands holds every edge once for each whole degree of latitude it
// touches.
var fineBands = sync.OnceValue(func() *[180][]edge {
	var b [180][]edge
	for _, r := range fine() {
		for i, v := range r {
			n := r[(i+1)%len(r)]
			for k := band(min(v[1], n[1])); k <= band(max(v[1], n[1])); k++ {
				b[k] = append(b[k], edge{v[0], v[1], n[0], n[1]})
			}
		}
	}
	return &b
})

// mustDecode panics on a bad outline: the texts are embedded, so that a bad
// one is a fault of the build and every test of this package would show it.
func mustDecode(text string) [][][2]float64 {
	r, err := decode(text)
	if err != nil {
		panic(err)
	}
	return r
}

// decode reads an outline as outline.go writes it: comment lines, "unit U",
// then one ring a line as differences in units.
func decode(text string) ([][][2]float64, error) {
	var rings [][][2]float64
	unit := 0.0
	sc := bufio.NewScanner(strings.NewReader(text))
	sc.Buffer(nil, 1<<20)
	for n := 1; sc.Scan(); n++ {
		line := sc.Text()
		if strings.HasPrefix(line, "#") {
			continue
		}
		if u, ok := strings.CutPrefix(line, "unit "); ok {
			var err error
			if unit, err = strconv.ParseFloat(u, 64); err != nil {
				return nil, fmt.Errorf("outline line %d: %w", n, err)
			}
			continue
		}
		words := strings.Fields(line)
		if unit <= 0 || len(words) < 6 || len(words)%2 != 0 {
			return nil, fmt.Errorf("outline line %d: expected a unit above and at least three pairs", n)
		}
		ring := make([][2]float64, 0, len(words)/2)
		var x, y int
		for i := 0; i < len(words); i += 2 {
			dx, err := strconv.Atoi(words[i])
			if err != nil {
				return nil, fmt.Errorf("outline line %d: %w", n, err)
			}
			dy, err := strconv.Atoi(words[i+1])
			if err != nil {
				return nil, fmt.Errorf("outline line %d: %w", n, err)
			}
			x, y = x+dx, y+dy
			// Through the reciprocal: 123 * 0.1 is not 12.3, 123 / 10 is.
			ring = append(ring, [2]float64{float64(x) / math.Round(1/unit), float64(y) / math.Round(1/unit)})
		}
		rings = append(rings, ring)
	}
	return rings, sc.Err()
}

// FineRings are the rings that Contains uses, as Rings gives the coarse ones:
// for maps of a region.
func FineRings() [][][2]float64 { return fine() }

var fine = sync.OnceValue(func() [][][2]float64 { return mustDecode(fineText) })
