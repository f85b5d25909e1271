//go:build ignore

// This program makes the outlines from the TopoJSON files of the npm package
// world-atlas 2.0.2 (ISC; the data are Natural Earth 4.1, public domain):
//
//	go run outline.go -unit 0.05 -tolerance 0.04 land-50m.json > outline_50m.txt
//	go run outline.go -unit 0.1 -tolerance 0.05 land-110m.json > outline_110m.txt
//	go run outline.go -unit 0.1 -tolerance 0.05 -geojson land-110m.json > ../../static/land.json
//
// Rings are cut where they cross the antimeridian (the package stitches them
// across it), simplified (Douglas & Peucker 1973, Cartographica 10:112) and
// rounded to the unit. Rings that vanish by this are left out.
package main

import (
	"bufio"
	"encoding/json"
	"flag"
	"fmt"
	"log"
	"math"
	"os"
	"slices"
)

const credit = "Land outline: Natural Earth 4.1 (public domain), by way of the npm package world-atlas 2.0.2 (ISC, Copyright 2013-2019 Michael Bostock); simplified and rounded."

type pt [2]float64

type topology struct {
	Transform struct{ Scale, Translate pt }
	Arcs      [][][2]int
	Objects   struct {
		Land struct {
			Geometries []struct{ Arcs [][][]int }
		}
	}
}

func main() {
	unit := flag.Float64("unit", 0.1, "rounding, degrees")
	tol := flag.Float64("tolerance", 0.05, "simplification, degrees")
	asGeoJSON := flag.Bool("geojson", false, "write GeoJSON")
	flag.Parse()
	data, err := os.ReadFile(flag.Arg(0))
	if err != nil {
		log.Fatal(err)
	}
	var t topology
	if err := json.Unmarshal(data, &t); err != nil {
		log.Fatal(err)
	}
	// Polygons of integer rings, the outer one first.
	var polygons [][][][2]int
	for _, g := range t.Objects.Land.Geometries {
		for _, poly := range g.Arcs {
			var outers, holes [][][2]int
			for i, arcs := range poly {
				for _, r := range cut(t.ring(arcs)) {
					q := quantise(simplify(r, *tol), *unit)
					if len(q) < 3 || area(q) == 0 {
						continue
					}
					if i == 0 {
						outers = append(outers, q)
					} else {
						holes = append(holes, q)
					}
				}
			}
			for _, o := range outers {
				p := [][][2]int{o}
				for _, h := range holes {
					if inside(h[0], o) {
						p = append(p, h)
					}
				}
				polygons = append(polygons, p)
			}
		}
	}
	slices.SortStableFunc(polygons, func(a, b [][][2]int) int { return area(b[0]) - area(a[0]) })
	w := bufio.NewWriter(os.Stdout)
	defer w.Flush()
	if *asGeoJSON {
		writeGeoJSON(w, polygons, *unit)
		return
	}
	fmt.Fprintf(w, "# %s\n# One ring a line (even-odd: holes are rings too): longitude latitude of the first vertex, then differences, in units of\nunit %g\n", credit, *unit)
	for _, p := range polygons {
		for _, r := range p {
			last := [2]int{}
			for i, v := range r {
				if i > 0 {
					w.WriteByte(' ')
				}
				fmt.Fprintf(w, "%d %d", v[0]-last[0], v[1]-last[1])
				last = v
			}
			w.WriteByte('\n')
		}
	}
}

func (t *topology) ring(arcs []int) []pt {
	var out []pt
	for _, a := range arcs {
		i := a
		if a < 0 {
			i = ^a
		}
		var x, y int
		var line []pt
		for _, d := range t.Arcs[i] {
			x, y = x+d[0], y+d[1]
			line = append(line, pt{float64(x)*t.Transform.Scale[0] + t.Transform.Translate[0], float64(y)*t.Transform.Scale[1] + t.Transform.Translate[1]})
		}
		if a < 0 {
			slices.Reverse(line)
		}
		if len(out) > 0 {
			line = line[1:]
		}
		out = append(out, line...)
	}
	return out[:len(out)-1] // the last vertex repeats the first
}

// cut unwraps the ring in longitude, closes a ring round a pole over the pole,
// and cuts it into closed pieces inside -180..180.
func cut(r []pt) [][]pt {
	un := []pt{r[0]}
	for i := 1; i <= len(r); i++ {
		d := math.Mod(r[i%len(r)][0]-r[i-1][0]+540, 360) - 180
		if d == -180 {
			d = r[i%len(r)][0] - r[i-1][0]
		}
		un = append(un, pt{un[i-1][0] + d, r[i%len(r)][1]})
	}
	turn := un[len(un)-1][0] - un[0][0]
	if math.Abs(turn) > 180 { // round a pole
		pole := math.Copysign(90, r[0][1])
		un = append(un, pt{un[len(un)-1][0], pole}, pt{un[0][0], pole})
	} else {
		un = un[:len(un)-1]
	}
	pieces := [][]pt{un}
	for _, x := range []float64{-540, -180, 180, 540} {
		var next [][]pt
		for _, p := range pieces {
			next = append(next, split(p, x)...)
		}
		pieces = next
	}
	for _, p := range pieces {
		mid := 0.0
		for _, v := range p {
			mid += v[0] / float64(len(p))
		}
		shift := 360 * math.Round(mid/360)
		for i := range p {
			p[i][0] -= shift
		}
	}
	return pieces
}

// split cuts a simple ring along the meridian x: between the crossings, sorted
// by latitude, the meridian is inside the ring from the first to the second,
// from the third to the fourth, and so on.
func split(r []pt, x float64) [][]pt {
	right := func(v pt) bool { return v[0] >= x }
	first := -1
	for i, v := range r {
		if right(v) != right(r[(i+len(r)-1)%len(r)]) {
			first = i
			break
		}
	}
	if first < 0 {
		return [][]pt{r}
	}
	type chain struct {
		points     []pt
		start, end int // crossings
	}
	var chains []chain
	var lats []float64
	for k := range r {
		i := (first + k) % len(r)
		v, prev := r[i], r[(i+len(r)-1)%len(r)]
		if right(v) != right(prev) {
			lat := prev[1] + (v[1]-prev[1])*(x-prev[0])/(v[0]-prev[0])
			lats = append(lats, lat)
			c := pt{x, lat}
			if n := len(chains); n > 0 {
				chains[n-1].points = append(chains[n-1].points, c)
				chains[n-1].end = len(lats) - 1
			}
			chains = append(chains, chain{points: []pt{c}, start: len(lats) - 1})
		}
		n := len(chains) - 1
		chains[n].points = append(chains[n].points, v)
	}
	last := &chains[len(chains)-1]
	last.points = append(last.points, chains[0].points[0])
	last.end = 0
	order := make([]int, len(lats))
	for i := range order {
		order[i] = i
	}
	slices.SortFunc(order, func(a, b int) int {
		if lats[a] < lats[b] {
			return -1
		}
		return 1
	})
	partner := make([]int, len(lats))
	for i := range order {
		partner[order[i]] = order[i^1]
	}
	// Chain k starts at crossing k; from its end the piece goes along the
	// meridian to the partner and on with the chain that starts there.
	var out [][]pt
	done := make([]bool, len(chains))
	for i := range chains {
		var piece []pt
		for j := i; !done[j]; j = partner[chains[j].end] {
			done[j] = true
			piece = append(piece, chains[j].points...)
		}
		if len(piece) > 2 {
			out = append(out, piece)
		}
	}
	return out
}

// simplify is Douglas & Peucker on a closed ring: it is opened at its first
// vertex and at the one farthest from it.
func simplify(r []pt, tol float64) []pt {
	far, best := 0, 0.0
	for i, v := range r {
		if d := math.Hypot(v[0]-r[0][0], v[1]-r[0][1]); d > best {
			far, best = i, d
		}
	}
	a := peucker(r[:far+1], tol)
	b := peucker(append(slices.Clone(r[far:]), r[0]), tol)
	return append(a[:len(a)-1], b[:len(b)-1]...)
}

func peucker(l []pt, tol float64) []pt {
	if len(l) < 3 {
		return slices.Clone(l)
	}
	a, b := l[0], l[len(l)-1]
	n := math.Hypot(b[0]-a[0], b[1]-a[1])
	at, worst := 0, 0.0
	for i := 1; i < len(l)-1; i++ {
		d := math.Hypot(l[i][0]-a[0], l[i][1]-a[1])
		if n > 0 {
			d = math.Abs((b[0]-a[0])*(l[i][1]-a[1])-(b[1]-a[1])*(l[i][0]-a[0])) / n
		}
		if d > worst {
			at, worst = i, d
		}
	}
	if worst <= tol {
		return []pt{a, b}
	}
	left := peucker(l[:at+1], tol)
	return append(left[:len(left)-1], peucker(l[at:], tol)...)
}

func quantise(r []pt, unit float64) [][2]int {
	var out [][2]int
	for _, v := range r {
		q := [2]int{int(math.Round(v[0] / unit)), int(math.Round(v[1] / unit))}
		if len(out) == 0 || out[len(out)-1] != q {
			out = append(out, q)
		}
	}
	for len(out) > 1 && out[0] == out[len(out)-1] {
		out = out[:len(out)-1]
	}
	return out
}

// area is twice the area in units squared, unsigned.
func area(r [][2]int) int {
	s := 0
	for i, v := range r {
		n := r[(i+1)%len(r)]
		s += v[0]*n[1] - n[0]*v[1]
	}
	return max(s, -s)
}

func inside(v [2]int, r [][2]int) bool {
	in := false
	for i, a := range r {
		b := r[(i+1)%len(r)]
		if (a[1] > v[1]) != (b[1] > v[1]) &&
			float64(v[0]) < float64(a[0])+float64(b[0]-a[0])*float64(v[1]-a[1])/float64(b[1]-a[1]) {
			in = !in
		}
	}
	return in
}

func writeGeoJSON(w *bufio.Writer, polygons [][][][2]int, unit float64) {
	fmt.Fprintf(w, "{\"type\":\"Feature\",\"properties\":{\"credit\":%q},\"geometry\":{\"type\":\"MultiPolygon\",\"coordinates\":[", credit)
	for i, p := range polygons {
		if i > 0 {
			w.WriteString(",\n")
		}
		w.WriteByte('[')
		for j, r := range p {
			if j > 0 {
				w.WriteByte(',')
			}
			w.WriteByte('[')
			for k := 0; k <= len(r); k++ {
				if k > 0 {
					w.WriteByte(',')
				}
				v := r[k%len(r)]
				// %g of a rounded quotient: 0.1 steps print as 12.3, never as 12.299999.
				fmt.Fprintf(w, "[%g,%g]", math.Round(float64(v[0])*unit*100)/100, math.Round(float64(v[1])*unit*100)/100)
			}
			w.WriteByte(']')
		}
		w.WriteByte(']')
	}
	w.WriteString("]}}\n")
}
