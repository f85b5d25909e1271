package expectation

import (
	"cmp"
	"fmt"
	"math"
	"slices"
	"strings"

	"fathombend/stats"
)

// nearestCount is how many analogues are listed.
const nearestCount = 8

// system gathers a system's rows.
type system struct {
	slug, name string
	rows       []*stats.Row
	sinuosity  moments
}

func systemsOf(f *frame) []*system {
	index := map[string]*system{}
	var out []*system
	for i := range f.all {
		r := &f.all[i]
		s, ok := index[r.System]
		if !ok {
			s = &system{slug: r.System, name: r.SystemName}
			index[r.System] = s
			out = append(out, s)
		}
		s.rows = append(s.rows, r)
	}
	for i := range f.obs {
		index[f.obs[i].row.System].sinuosity.add(f.obs[i].p)
	}
	return out
}

// attribute is one thing targets and systems are compared in.
type attribute struct {
	name string
	// distance is 0..1 with words; known is false where the system has no value.
	distance func(*system) (d float64, known bool, words string)
}

func (s *system) category(name string) string {
	for _, r := range s.rows {
		if v := r.Categories[name]; v != "" && v != "unknown" {
			return v
		}
	}
	return ""
}

func (s *system) median(of func(*stats.Row) float64) float64 {
	var x []float64
	for _, r := range s.rows {
		if v := of(r); v > 0 && !math.IsInf(v, 0) {
			x = append(x, v)
		}
	}
	if len(x) == 0 {
		return math.NaN()
	}
	slices.Sort(x)
	return quantileOf(x, 0.5)
}

// attributes of a target: those it gives, of setting, grain, slope,
// confinement and width. The Coriolis parameter is not among them: choosing
// analogues by it and then reading their planform would be circular.
func (f *Fits) attributes(t *Target, all []*system) []attribute {
	var out []attribute
	for _, c := range []struct{ name, want string }{{"setting", t.TargetSetting}, {"grain", t.TargetGrain}, {"confinement", t.TargetConfinement}} {
		if c.want == "" || c.want == "unknown" {
			continue
		}
		out = append(out, attribute{c.name, func(s *system) (float64, bool, string) {
			switch v := s.category(c.name); v {
			case "":
				return 0.5, false, c.name + " unknown"
			case c.want:
				return 0, true, "same " + c.name
			default:
				return 1, true, c.name + " " + v
			}
		}})
	}
	for _, n := range []struct {
		name, unit string
		want       float64
		of         func(*stats.Row) float64
	}{
		{"slope", "m/m", t.TargetSlope, func(r *stats.Row) float64 { return r.ValleySlope }},
		{"width", "m", t.TargetWidthM, func(r *stats.Row) float64 { return r.ChannelWidthM }},
	} {
		if !given(n.want) {
			continue
		}
		lo, hi := math.Log(n.want), math.Log(n.want)
		for _, s := range all {
			if v := math.Log(s.median(n.of)); !math.IsNaN(v) {
				lo, hi = math.Min(lo, v), math.Max(hi, v)
			}
		}
		out = append(out, attribute{n.name, func(s *system) (float64, bool, string) {
			v := s.median(n.of)
			if math.IsNaN(v) || hi == lo {
				return 0.5, false, n.name + " unknown"
			}
			return math.Abs(math.Log(v/n.want)) / (hi - lo), true, fmt.Sprintf("%s %.3g %s", n.name, v, n.unit)
		}})
	}
	return out
}

// nearest lists the systems closest to the target: the mean over what the
// target gives of 0 (same) to 1 (different category, or the whole range of the
// logarithm apart); not known counts a half (Gower, Biometrics 27:857 (1971),
// doi 10.2307/2528823, but for the half).
func (f *Fits) nearest(t *Target) []Nearest {
	all := f.systems
	attributes := f.attributes(t, all)
	out := []Nearest{}
	if len(attributes) == 0 {
		return out
	}
	for _, s := range all {
		if s.sinuosity.n == 0 {
			continue
		}
		var sum float64
		known := 0
		var words []string
		for _, a := range attributes {
			d, ok, w := a.distance(s)
			sum += d
			words = append(words, w)
			if ok {
				known++
			}
		}
		if known == 0 {
			continue
		}
		out = append(out, Nearest{Slug: s.slug, Name: s.name, Distance: sum / float64(len(attributes)), Sinuosity: s.sinuosity.mean, Why: strings.Join(words, ", ")})
	}
	slices.SortFunc(out, func(a, b Nearest) int {
		return cmp.Or(cmp.Compare(a.Distance, b.Distance), cmp.Compare(a.Slug, b.Slug))
	})
	return out[:min(len(out), nearestCount)]
}

// dimensions are quantiles of size over the nearest systems, or over all the
// chosen rows where there are none; each deposit counts alike.
func (f *Fits) dimensions(near []Nearest) []Dimension {
	if len(near) == 0 {
		f.filtered.Do(func() { f.dimensionsOfAll = f.dimensionsOf(nil) })
		return slices.Clone(f.dimensionsOfAll)
	}
	return f.dimensionsOf(near)
}

func (f *Fits) dimensionsOf(near []Nearest) []Dimension {
	from, use := "filtered", map[string]bool{}
	for _, n := range near {
		from, use[n.Slug] = "nearest", true
	}
	ratio := func(a, b float64) float64 {
		if b > 0 {
			return a / b
		}
		return math.NaN()
	}
	out := []Dimension{}
	for _, q := range []struct {
		name, unit string
		of         func(*stats.Row) float64
	}{
		{"width", "m", func(r *stats.Row) float64 { return r.ChannelWidthM }},
		{"depth", "m", func(r *stats.Row) float64 { return r.ChannelDepthM }},
		{"width/depth", "1", func(r *stats.Row) float64 { return ratio(r.ChannelWidthM, r.ChannelDepthM) }},
		{"wavelength", "m", func(r *stats.Row) float64 { return r.WavelengthM }},
		{"amplitude", "m", func(r *stats.Row) float64 { return r.AmplitudeM }},
		{"radius", "m", func(r *stats.Row) float64 { return r.RadiusM }},
	} {
		d := Dimension{Name: q.name, Unit: q.unit, From: from, P10: math.NaN(), P25: math.NaN(), P50: math.NaN(), P75: math.NaN(), P90: math.NaN()}
		count := map[string]float64{}
		var x []weighted
		var of []string
		for i := range f.frame.all {
			r := &f.frame.all[i]
			v := q.of(r)
			if (from == "nearest" && !use[r.System]) || !(v > 0) || math.IsInf(v, 0) {
				continue
			}
			c := clusterOf(r, f.options.Cluster)
			count[c]++
			x, of = append(x, weighted{v, 1}), append(of, c)
		}
		for i := range x {
			x[i].w = 1 / count[of[i]]
		}
		d.Rows, d.Deposits = len(x), len(count)
		if len(x) > 0 {
			v := weightedQuantiles(x, 0.1, 0.25, 0.5, 0.75, 0.9)
			d.P10, d.P25, d.P50, d.P75, d.P90 = v[0], v[1], v[2], v[3], v[4]
		}
		out = append(out, d)
	}
	return out
}
