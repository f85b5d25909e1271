package stats

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"strings"
)

// NextOptions is what to ask about the next measurements.
type NextOptions struct {
	Term         string    // predictor whose interval is to narrow; "" = abs_latitude
	Beside       string    // predictor fitted with it; "" = log10_slope
	Explanations [2]string // two predictors or categories to separate; "" = coriolis, feeder
	Poleward     float64   // degrees: where new systems are sought
	Draws        int       // simulated systems a cell; 0 = 200
}

// NextAnswer says where one more system would help most.
type NextAnswer struct {
	Term       string     `json:"term"`
	Beside     string     `json:"beside"`
	Scale      string     `json:"scale"`
	Rows       int        `json:"rows"`
	Clusters   int        `json:"clusters"`
	Interval   Interval   `json:"interval"` // of the term today, CR2
	Cells      []NextCell `json:"cells"`    // latitude varies slowest
	Bands      []NextBand `json:"bands"`    // of |latitude|, 10 degrees each
	Boxes      []NextBox  `json:"boxes"`    // of the map, 15 by 30 degrees
	Separation Separation `json:"separation"`
	Text       []string   `json:"text"`
	unit       string     // what a cluster is, as a plural
}

// NextCell is a cell of the latitude-slope grid; Narrowing is the fraction by
// which the interval of the term is expected to shrink with one more system
// there (negative: it would widen).
type NextCell struct {
	LatitudeFrom float64 `json:"latitude_from"` // degrees, of |latitude|
	LatitudeTo   float64 `json:"latitude_to"`
	SlopeFrom    float64 `json:"slope_from"` // m/m
	SlopeTo      float64 `json:"slope_to"`
	Systems      int     `json:"systems"`
	Narrowing    float64 `json:"narrowing"`
}

// NextBand counts the systems of a band of |latitude|.
type NextBand struct {
	From    float64 `json:"from"`
	To      float64 `json:"to"`
	Systems int     `json:"systems"`
}

// NextBox counts the systems of a box of the map.
type NextBox struct {
	South   float64 `json:"south"`
	West    float64 `json:"west"`
	Systems int     `json:"systems"`
}

var (
	nextLatitudes = []float64{0, 10, 20, 30, 40, 50, 60, 70, 80}
	nextSlopes    = []float64{0.0003, 0.001, 0.003, 0.01, 0.03}
)

// nextStream keeps simulated systems apart from the other uses of a seed.
const nextStream = 0xbf58476d1ce4e5b9

// Next fits term and beside jointly on the rows (on ln(P - 1) where every P is
// above 1, else raw), adds one simulated system at the middle of each cell of a
// latitude-slope grid - its sinuosity the fitted value and a leave-one-cluster-out
// residual - and gives the expected change of the term's interval (CR2 with
// Satterthwaite degrees of freedom, refitted for every simulated system). It
// also says how many systems poleward of a latitude would separate two
// explanations; see Separation.
func Next(ctx context.Context, rows []Row, req Request, o NextOptions) (*NextAnswer, error) {
	if err := o.fill(); err != nil {
		return nil, err
	}
	req.Models = []ModelSpec{{"linear", o.Term}, {"linear", o.Beside}, {"linear", "abs_latitude"}, {"linear", "valley_slope"}}
	req.Models = compactModels(req.Models)
	req.Joint, req.Interaction, req.Group, req.Scale = []string{o.Term, o.Beside}, [2]string{}, "", "raw"
	if err := req.Validate(); err != nil {
		return nil, err
	}
	used := consider(rows, &req)
	t := newTable(used, &req, "")
	a := &NextAnswer{Term: o.Term, Beside: o.Beside, Scale: "raw", Rows: t.n(), Clusters: t.cluster.count(), Interval: noInterval}
	a.count(t)
	if t.n() > 0 && !slices.ContainsFunc(t.y, func(p float64) bool { return p <= 1 }) {
		req.Scale, a.Scale = "ln_excess", "ln_excess"
	}
	f := fitPlan(t, newJointPlan(t, req.Joint, [2]string{}, req.Scale))
	switch {
	case f.failure != "":
		a.Text = append(a.Text, "Nothing can be said about the next system: "+f.failure)
		return a, nil
	case t.cluster.count() < 4:
		a.Text = append(a.Text, fmt.Sprintf("Nothing can be said about the next system: there are only %d %s. Widen the filter.", t.cluster.count(), t.many()))
		return a, nil
	}
	if err := a.cells(ctx, &req, o, t, f); err != nil {
		return nil, err
	}
	var err error
	if a.Separation, err = separate(ctx, rows, req, o); err != nil {
		return nil, err
	}
	a.sentences(&req)
	return a, nil
}

func compactModels(in []ModelSpec) []ModelSpec {
	var out []ModelSpec
	for _, m := range in {
		if !slices.Contains(out, m) {
			out = append(out, m)
		}
	}
	return out
}

func (o *NextOptions) fill() error {
	def := func(s *string, v string) {
		if *s == "" {
			*s = v
		}
	}
	def(&o.Term, "abs_latitude")
	def(&o.Beside, "log10_slope")
	def(&o.Explanations[0], "coriolis")
	def(&o.Explanations[1], "feeder")
	if o.Draws == 0 {
		o.Draws = 200
	}
	for name, v := range map[string]string{"term": o.Term, "beside": o.Beside} {
		if !isLatitude(v) && explanationOf(v) != "valley_slope" {
			return refuse(name, "%q has no place on a latitude-slope grid. Expected one of: abs_latitude, sin_abs_latitude, coriolis, valley_slope, log10_slope", v)
		}
	}
	if explanationOf(o.Term) == explanationOf(o.Beside) {
		return refuse("beside", "%s and %s are one explanation. Expected a latitude and a slope", o.Term, o.Beside)
	}
	for _, v := range o.Explanations {
		if !slices.Contains(Predictors, v) && !slices.Contains(Categories, v) {
			return refuse("explanations", "%q is neither a predictor nor a category. Expected two of: %s, %s", v, strings.Join(Predictors, ", "), strings.Join(Categories, ", "))
		}
	}
	if o.Explanations[0] == o.Explanations[1] {
		return refuse("explanations", "%s is named twice. Expected two different ones", o.Explanations[0])
	}
	if !(o.Poleward >= 0 && o.Poleward < 85) {
		return refuse("poleward", "%v is not allowed. Expected degrees from 0 to 85", o.Poleward)
	}
	if o.Draws < 20 || o.Draws > 2000 {
		return refuse("draws", "%d is not allowed. Expected a whole number from 20 to 2000", o.Draws)
	}
	return nil
}

// cells fills the grid.
func (a *NextAnswer) cells(ctx context.Context, req *Request, o NextOptions, t *table, f *fitted) error {
	m := momentsOf(f.cluster)
	width := func(xx, xe [][]float64, coef float64) Interval {
		ct := &clusterTerms{p: m.q + 1, xx: xx, xe: xe}
		con, unit := m.contrast(1)
		se, df := ct.cr2(con)
		return cr2Interval(coef, se*unit, df, req.Level)
	}
	now := f.robust(f.cluster).terms
	a.Interval = width(now.xx, now.xe, f.coef[1])
	if !a.Interval.known() {
		return nil
	}
	residuals := leftOutResiduals(t, f)
	newXZ := m.responseTerms()
	for i := range len(nextLatitudes) - 1 {
		for j := range len(nextSlopes) - 1 {
			if err := ctx.Err(); err != nil {
				return err
			}
			c := NextCell{LatitudeFrom: nextLatitudes[i], LatitudeTo: nextLatitudes[i+1], SlopeFrom: nextSlopes[j], SlopeTo: nextSlopes[j+1]}
			c.Systems = a.systemsIn(t, c)
			x := cellColumns(o, c)
			rng := rand.New(rand.NewPCG(req.Seed^nextStream, uint64(i*100+j)))
			sum, n := 0.0, 0.0
			for range o.Draws {
				z := f.coef[0] + f.coef[1]*x[0] + f.coef[2]*x[1] + residuals[rng.IntN(len(residuals))]
				if iv := m.refit(newXZ, x, z, req.Level); iv.known() {
					sum += iv.width()
					n++
				}
			}
			c.Narrowing = 1 - sum/n/a.Interval.width()
			a.Cells = append(a.Cells, c)
		}
	}
	return nil
}

// cellColumns are term and beside at the middle of a cell (the geometric middle
// of the slopes), for a system of today.
func cellColumns(o NextOptions, c NextCell) [2]float64 {
	r := EmptyRow()
	r.LatitudeDeg, r.ValleySlope = (c.LatitudeFrom+c.LatitudeTo)/2, math.Sqrt(c.SlopeFrom*c.SlopeTo)
	return [2]float64{predictorOf(&r, o.Term, "present").value, predictorOf(&r, o.Beside, "present").value}
}

// refit adds one row, a cluster of its own, to the cross-products and returns
// the CR2 interval of the first column.
func (m *moments) refit(xz [][]float64, x [2]float64, z, level float64) Interval {
	p := m.q + 1
	row := []float64{1, (x[0] - m.mean[0]) / m.sd[0], (x[1] - m.mean[1]) / m.sd[1]}
	zs := (z - m.zMean) / m.zSD
	ct := &clusterTerms{p: p}
	sum, rhs := make([]float64, p*p), make([]float64, p)
	add := func(xx, xz []float64) {
		ct.xx, ct.xe = append(ct.xx, xx), append(ct.xe, append([]float64(nil), xz...))
		axpy(1, xx, sum)
		axpy(1, xz, rhs)
	}
	for g := range m.groups {
		s := m.sums[g*m.width : (g+1)*m.width]
		xx := make([]float64, p*p)
		for i := range p {
			for j := range p {
				xx[i*p+j] = s[m.at(min(i, j), max(i, j))]
			}
		}
		add(xx, xz[g])
	}
	xx, one := make([]float64, p*p), make([]float64, p)
	for i := range p {
		one[i] = row[i] * zs
		for j := range p {
			xx[i*p+j] = row[i] * row[j]
		}
	}
	add(xx, one)
	l, b := make([]float64, p*p), make([]float64, p)
	if !cholesky(sum, l, p) {
		return noInterval
	}
	cholSolve(l, rhs, b, p)
	for g := range ct.xe {
		for i := range p {
			ct.xe[g][i] -= dot(ct.xx[g][i*p:(i+1)*p], b)
		}
	}
	con, unit := m.contrast(1)
	se, df := ct.cr2(con)
	return cr2Interval(b[1]*unit, se*unit, df, level)
}

// leftOutResiduals are the residuals on the scale fitted when a row's cluster is
// left out: what a new system does.
func leftOutResiduals(t *table, f *fitted) []float64 {
	jack := jackknife(f.cluster, t.cluster.count())
	var out []float64
	for i, z := range f.z {
		v := jack[t.cluster.of[i]]
		r := z - v[0]
		for j, c := range f.cols {
			r -= v[j+1] * c[i]
		}
		if finite(r) {
			out = append(out, r)
		}
	}
	if len(out) == 0 {
		return f.resid
	}
	return out
}

// count fills bands and boxes.
func (a *NextAnswer) count(t *table) {
	a.unit = t.many()
	for i := range len(nextLatitudes) - 1 {
		a.Bands = append(a.Bands, NextBand{From: nextLatitudes[i], To: nextLatitudes[i+1]})
	}
	boxes := map[[2]float64]int{}
	for g := range t.system.count() {
		i := t.system.members(g)[0]
		if lat, lon := t.source[i].LatitudeDeg, t.source[i].LongitudeDeg; finite(lat) && finite(lon) {
			lon = math.Mod(lon+540, 360) - 180
			boxes[[2]float64{math.Floor(min(lat, 89.9)/15) * 15, math.Floor(lon/30) * 30}]++
		}
		for b := range a.Bands {
			if v := t.predictor["abs_latitude"][i]; v >= a.Bands[b].From && v < a.Bands[b].To {
				a.Bands[b].Systems++
			}
		}
	}
	for south := -90.0; south < 90; south += 15 {
		for west := -180.0; west < 180; west += 30 {
			a.Boxes = append(a.Boxes, NextBox{South: south, West: west, Systems: boxes[[2]float64{south, west}]})
		}
	}
}

func (a *NextAnswer) systemsIn(t *table, c NextCell) int {
	n := 0
	for g := range t.system.count() {
		i := t.system.members(g)[0]
		lat, slope := t.predictor["abs_latitude"][i], t.predictor["valley_slope"][i]
		if lat >= c.LatitudeFrom && lat < c.LatitudeTo && slope >= c.SlopeFrom && slope < c.SlopeTo {
			n++
		}
	}
	return n
}

// sentences says it in words.
func (a *NextAnswer) sentences(req *Request) {
	if len(a.Cells) > 0 {
		best := slices.MaxFunc(a.Cells, func(x, y NextCell) int {
			switch {
			case x.Narrowing < y.Narrowing || math.IsNaN(x.Narrowing):
				return -1
			case x.Narrowing > y.Narrowing || math.IsNaN(y.Narrowing):
				return 1
			}
			return 0
		})
		if best.Narrowing > 0 {
			a.Text = append(a.Text, fmt.Sprintf("One more system between %s and %s degrees on a slope of %s to %s m/m would narrow the interval of %s by %s (%s there now).",
				number(best.LatitudeFrom), number(best.LatitudeTo), number(best.SlopeFrom), number(best.SlopeTo), nameOf(a.Term), percent(best.Narrowing), plural(best.Systems, "system is", "systems are")))
		} else {
			a.Text = append(a.Text, "One more system would not be expected to narrow the interval of "+nameOf(a.Term)+" anywhere on the grid: its scatter between "+a.unit+" is too large. It takes several.")
		}
	}
	empty := 0
	for _, c := range a.Cells {
		if c.Systems == 0 {
			empty++
		}
	}
	if empty > 0 {
		a.Text = append(a.Text, fmt.Sprintf("%s no system, of the %d cells of latitude and slope.", plural(empty, "cell holds", "cells hold"), len(a.Cells)))
	}
	if a.Separation.Text != "" {
		a.Text = append(a.Text, a.Separation.Text)
	}
}
