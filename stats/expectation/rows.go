package expectation

import (
	"cmp"
	"encoding/binary"
	"fmt"
	"hash/fnv"
	"maps"
	"math"
	"slices"

	"fathombend/stats"
	"fathombend/stats/earth"
)

// modernMa: up to this age a row's own latitude stands for its
// palaeolatitude, as in the regressions.
const modernMa = 5

// standardK is the number of windows of a standardised peak when none is said.
const standardK = 5

// factors are the supply categories, in the order of inputs.level.
var factors = [...]string{"feeder", "grain", "large_river"}

// inputs are what an explanation may look at, of a row or of a target.
type inputs struct {
	sin      float64 // |sin palaeolatitude|
	ratio    float64 // rotation rate over today's
	logSlope float64 // log10 m/m; NaN = not known
	state    state   // climate state

	level [len(factors)]int16 // index into frame.levels; -1 = not known
}

// observation is one row used.
type observation struct {
	inputs
	p       float64 // sinuosity
	y       float64 // ln(P - 1); -Inf where P = 1
	cluster int
	weight  float64 // sums to 1 in its cluster, systems of a cluster alike
	latSE   float64 // degrees; 0 for modern rows
	latDeg  float64
	modern  bool
	row     *stats.Row
}

// frame is the rows one set of fits uses, ordered by cluster.
type frame struct {
	obs      []observation
	clusters []string
	start    []int // obs of cluster c are start[c]:start[c+1]
	levels   [len(factors)][]string
	response string
	line     string
	notes    []string
	dropped  map[string]int
	invented int
	private  int
	ones     float64 // share of P = 1, clusters alike
	all      []stats.Row
	climate  earth.ClimateTable
}

// chooseResponse is "peak, else any": peak when the rows allow a fit.
func chooseResponse(rows []stats.Row, o Options) (string, string) {
	if o.Response != "" {
		return o.Response, ""
	}
	n, clusters := 0, map[string]bool{}
	for i := range rows {
		if rows[i].SinuosityKind == "peak" && rows[i].Sinuosity >= 1 && lineFits(&rows[i], o.MeasuredLine) {
			n++
			clusters[clusterOf(&rows[i], o.Cluster)] = true
		}
	}
	if n >= 12 && len(clusters) >= 8 {
		return "peak", ""
	}
	return "any", fmt.Sprintf("Peak sinuosity is held by %s in %s only, too few to fit: sinuosities of every kind are used together.", plural(n, "row", "rows"), plural(len(clusters), "deposit", "deposits"))
}

func lineFits(r *stats.Row, line string) bool {
	return line == "" || line == "all" || line == "any" || r.MeasuredLine == line || (line == "unknown" && r.MeasuredLine == "")
}

func clusterOf(r *stats.Row, by string) string {
	label := ""
	switch by {
	case "", "parent_deposit":
		label = r.ParentDeposit
	case "source":
		label = r.Source
	case "basin":
		label = r.Basin
	case "none":
		return r.ID
	}
	if label == "" {
		label = r.System
	}
	if label == "" {
		label = r.ID
	}
	return label
}

// sinuosityOf is the response of a row, or NaN with the reason.
func sinuosityOf(r *stats.Row, response string) (float64, string) {
	p := r.Sinuosity
	switch response {
	case "any":
	case "standardised_peak":
		if len(r.Windows) < standardK {
			return math.NaN(), fmt.Sprintf("fewer than %d windows stored for a standardised peak", standardK)
		}
		p = standardisedPeak(r.Windows, standardK)
	default:
		if kind := cmp.Or(r.SinuosityKind, "unknown"); kind != response {
			return math.NaN(), "sinuosity of another kind than " + response
		}
	}
	if math.IsNaN(p) || math.IsInf(p, 0) || p < 1 {
		return math.NaN(), "no sinuosity of 1 or more"
	}
	return p, ""
}

// standardisedPeak is the expected largest of k of the windows drawn without
// replacement, sum_i x_(i) C(i-1,k-1)/C(n,k) (rarefaction, Hurlbert, Ecology
// 52:577 (1971)).
func standardisedPeak(windows []float64, k int) float64 {
	x := slices.Clone(windows)
	slices.Sort(x)
	n := len(x)
	w, sum := float64(k)/float64(n), 0.0
	for i := n; i >= k; i-- {
		sum += w * x[i-1]
		if i > 1 {
			w *= float64(i-k) / float64(i-1)
		}
	}
	return sum
}

// newFrame picks the rows and derives what the explanations look at. Of more
// than most clusters (0 = no limit) it keeps that many, drawn whole.
func newFrame(rows []stats.Row, o Options, most int) *frame {
	rows = slices.Clone(rows)
	// an order of their own values: that of the catalogue changes no digit
	slices.SortStableFunc(rows, func(a, b stats.Row) int {
		return cmp.Or(cmp.Compare(a.System, b.System), cmp.Compare(a.ID, b.ID), cmp.Compare(a.Sinuosity, b.Sinuosity), cmp.Compare(a.LatitudeDeg, b.LatitudeDeg))
	})
	f := &frame{dropped: map[string]int{}, all: rows, line: o.MeasuredLine, climate: o.Climate}
	if f.line == "" || f.line == "any" {
		f.line = "all"
	}
	if len(f.climate) == 0 {
		f.climate = earth.ClimateStates()
	}
	var note string
	if f.response, note = chooseResponse(rows, o); note != "" && len(rows) > 0 {
		f.notes = append(f.notes, note)
	}
	clusterNames := []string{}
	type line struct {
		system string
		p      float64
	}
	counted := map[line]bool{}
	for i := range rows {
		ob, why := observe(&rows[i], f)
		if why == "" && f.response == "standardised_peak" {
			// it belongs to the stored centreline, however many rows quote it
			if key := (line{rows[i].System, ob.p}); counted[key] {
				why = "the same centreline is already counted"
			} else {
				counted[key] = true
			}
		}
		if why != "" {
			f.dropped[why]++
			continue
		}
		f.obs = append(f.obs, ob)
		clusterNames = append(clusterNames, clusterOf(&rows[i], o.Cluster))
	}
	f.thin(&clusterNames, most, o.Seed)
	for i := range f.obs {
		if f.obs[i].row.Invented {
			f.invented++
		}
		if f.obs[i].row.Private {
			f.private++
		}
	}
	f.order(clusterNames)
	return f
}

// thin keeps most whole clusters, those that come first by a hash of their name
// and the seed: the choice follows from the names alone, and a filter that
// drops some of them changes as few as it can.
func (f *frame) thin(names *[]string, most int, seed uint64) {
	hashes := map[string]uint64{}
	for _, name := range *names {
		if _, ok := hashes[name]; !ok {
			h := fnv.New64a()
			_, _ = h.Write(binary.LittleEndian.AppendUint64([]byte(name), seed))
			hashes[name] = h.Sum64()
		}
	}
	if most <= 0 || len(hashes) <= most {
		return
	}
	order := slices.SortedFunc(maps.Keys(hashes), func(a, b string) int {
		return cmp.Or(cmp.Compare(hashes[a], hashes[b]), cmp.Compare(a, b))
	})
	kept := map[string]bool{}
	for _, name := range order[:most] {
		kept[name] = true
	}
	obs, of := f.obs[:0:0], (*names)[:0:0]
	for i, name := range *names {
		if kept[name] {
			obs, of = append(obs, f.obs[i]), append(of, name)
		}
	}
	f.notes = append(f.notes, fmt.Sprintf("The explanations are fitted on %d rows in %d whole deposits drawn at random (seed %d) from %d rows in %d: each deposit is left out in turn, which more would make too long. A new system scatters far more than this choice moves the answer. Narrow the filter to use every row.", len(obs), most, seed, len(f.obs), len(hashes)))
	f.obs, *names = obs, of
}

func observe(r *stats.Row, f *frame) (observation, string) {
	if !lineFits(r, f.line) {
		return observation{}, "measured along another line than " + f.line
	}
	p, why := sinuosityOf(r, f.response)
	if why != "" {
		return observation{}, why
	}
	ob := observation{p: p, y: math.Log(p - 1), latDeg: r.LatitudeDeg, modern: !(r.AgeMa > modernMa), row: r}
	age := r.AgeMa
	if math.IsNaN(age) {
		age = 0
	}
	if !ob.modern {
		ob.latDeg = r.PalaeolatitudeDeg
		if se := r.PalaeolatitudeSEDeg; se > 0 && !math.IsInf(se, 0) {
			ob.latSE = se
		}
	}
	switch {
	case math.IsNaN(ob.latDeg) && !ob.modern:
		return ob, "older than 5 Ma without a palaeolatitude"
	case !(math.Abs(ob.latDeg) <= 90):
		return ob, "no latitude"
	}
	day, err := earth.DayLengthAt(age, earth.HistoryOptions{})
	if err != nil {
		return ob, "age outside the history of the Earth's rotation"
	}
	ob.sin, ob.ratio = sinOf(ob.latDeg), day.Value.RotationRatio()
	ob.state = stateAt(f.climate, age)
	ob.logSlope = math.NaN()
	if r.ValleySlope > 0 && !math.IsInf(r.ValleySlope, 0) {
		ob.logSlope = math.Log10(r.ValleySlope)
	}
	return ob, ""
}

func sinOf(latDeg float64) float64 { return math.Abs(math.Sin(latDeg * math.Pi / 180)) }

// order sorts the observations by cluster (clusters by name, rows by their
// own values, so that the order in the catalogue changes nothing), sets the
// weights and the levels.
func (f *frame) order(names []string) {
	index := make([]int, len(f.obs))
	for i := range index {
		index[i] = i
	}
	slices.SortStableFunc(index, func(a, b int) int {
		x, y := &f.obs[a], &f.obs[b]
		return cmp.Or(cmp.Compare(names[a], names[b]), cmp.Compare(x.row.System, y.row.System), cmp.Compare(x.p, y.p), cmp.Compare(x.sin, y.sin), cmp.Compare(x.row.ID, y.row.ID))
	})
	sorted := make([]observation, len(index))
	for k, i := range index {
		sorted[k] = f.obs[i]
		if k == 0 || names[i] != f.clusters[len(f.clusters)-1] {
			f.clusters = append(f.clusters, names[i])
			f.start = append(f.start, k)
		}
		sorted[k].cluster = len(f.clusters) - 1
	}
	f.obs, f.start = sorted, append(f.start, len(sorted))
	f.setLevels()
	f.setWeights()
}

func (f *frame) setWeights() {
	for c := range f.clusters {
		of := f.obs[f.start[c]:f.start[c+1]]
		systems := map[string]int{}
		for i := range of {
			systems[of[i].row.System]++
		}
		for i := range of {
			of[i].weight = 1 / float64(len(systems)*systems[of[i].row.System])
			if of[i].p == 1 {
				f.ones += of[i].weight / float64(len(f.clusters))
			}
		}
	}
}

func (f *frame) setLevels() {
	for k, name := range factors {
		seen := map[string]bool{}
		for i := range f.obs {
			if v := f.obs[i].row.Categories[name]; v != "" && v != "unknown" {
				seen[v] = true
			}
		}
		for v := range seen {
			f.levels[k] = append(f.levels[k], v)
		}
		slices.Sort(f.levels[k])
		for i := range f.obs {
			f.obs[i].level[k] = f.levelOf(k, f.obs[i].row.Categories[name])
		}
	}
}

func (f *frame) levelOf(factor int, value string) int16 {
	return int16(slices.Index(f.levels[factor], value))
}

// noRows is said where nothing was given to learn from: no wider filter helps.
const noRows = "There is no row to learn from yet."

// more is what would help an explanation that cannot be fitted.
func (f *frame) more() string {
	if len(f.all) == 0 {
		return noRows
	}
	return "Widen the filter."
}
