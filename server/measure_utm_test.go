package main

import (
	"encoding/json"
	"fmt"
	"math"
	"net/http"
	"strings"
	"testing"

	"fathombend/catalogue/planform"
)

// TestMetresAndDegreesAgree: one sine-generated line of 90 degrees, given as
// easting and northing of a UTM zone and as longitude and latitude, measures
// the same. Its sinuosity is 1/J0(90 degrees) = 2.1190.
func TestMetresAndDegreesAgree(t *testing.T) {
	var metres, degrees []string
	x, y := 480e3, 3.2e6
	const step = 25.0
	for i := range 801 {
		lat, lon := planform.FromUTM(x, y, 31, false)
		metres = append(metres, fmt.Sprintf("%.6f %.6f", x, y))
		degrees = append(degrees, fmt.Sprintf("%.12f %.12f", lon, lat))
		theta := math.Pi / 2 * math.Sin(2*math.Pi*(float64(i)+0.5)/100)
		x, y = x+step*math.Cos(theta), y+step*math.Sin(theta)
	}
	v := newSite(t).visitor()
	type measured struct {
		Length float64 `json:"channel_length_m"`
		Reach  float64 `json:"reach_sinuosity"`
		Mean   float64 `json:"mean_sinuosity"`
		Peak   float64 `json:"peak_sinuosity"`
		Bends  []struct {
			Radius float64 `json:"radius_m"`
		}
	}
	ask := func(query string, line []string) measured {
		a := v.request("POST", "/measure.json"+query, "", strings.NewReader("LINESTRING ("+strings.Join(line, ", ")+")")).is(http.StatusOK)
		var doc struct{ Lines []measured }
		if err := json.Unmarshal([]byte(a.body), &doc); err != nil || len(doc.Lines) != 1 {
			t.Fatalf("%v: %.200s", err, a.body)
		}
		return doc.Lines[0]
	}
	m, d := ask("?epsg=32631", metres), ask("", degrees)
	// The line is drawn on the map, whose scale differs from 1 by 0.04 % at most
	// near its central meridian; both readings see the same ground.
	for _, c := range []struct {
		what string
		a, b float64
	}{{"length", m.Length, d.Length}, {"reach", m.Reach, d.Reach}, {"mean", m.Mean, d.Mean}, {"peak", m.Peak, d.Peak}, {"bends", float64(len(m.Bends)), float64(len(d.Bends))}, {"radius", m.Bends[4].Radius, d.Bends[4].Radius}} {
		near(t, c.what, c.a, c.b, 1e-6)
	}
	near(t, "reach against 1/J0", m.Reach, 2.1190, 2e-3)
}
