package stats

import (
	"cmp"
	"math"
	"slices"
	"strconv"
	"strings"
)

// table is the rows one analysis uses, in the order of the request, complete
// for every model.
type table struct {
	row       []int // index into Analysis.Used
	y         []float64
	predictor map[string][]float64 // as named, in its unit
	category  map[string][]string
	kind      []string
	label     []string // name of the system of each row
	supply    map[string][]string
	source    []*Row

	sinuosityKind, measuredLine []string
	cluster                     grouping
	system                      grouping
	considered                  int    // rows that came in, before any was dropped
	unit                        string // what a cluster is: a Clustering, "system" where no row names a deposit
}

// many and one are what is resampled whole, in words.
func (t *table) many() string { return clusterNoun(t.unit) }
func (t *table) one() string  { return clusterOne(t.unit) }

func (t *table) n() int { return len(t.y) }

// grouping numbers the groups of rows 0..G-1 in the order of their names, so
// that neither the order of the rows nor the way labels are written changes a
// result other than through the order of names.
type grouping struct {
	of    []int // by row
	names []string
	start []int // rows of group g are rows[start[g]:start[g+1]]
	rows  []int
}

func (g *grouping) count() int { return len(g.names) }

func (g *grouping) members(i int) []int { return g.rows[g.start[i]:g.start[i+1]] }

// newGrouping groups rows by label. Groups are numbered by their first row in
// canonical order (see sortRows), not by name: a renamed cluster keeps its
// number and so its resamples.
func newGrouping(labels []string) grouping {
	g := grouping{of: make([]int, len(labels))}
	index := map[string]int{}
	for i, l := range labels {
		k, ok := index[l]
		if !ok {
			k = len(g.names)
			index[l] = k
			g.names = append(g.names, l)
		}
		g.of[i] = k
	}
	g.start = make([]int, len(g.names)+1)
	for _, k := range g.of {
		g.start[k+1]++
	}
	for k := range g.names {
		g.start[k+1] += g.start[k]
	}
	at := slices.Clone(g.start)
	g.rows = make([]int, len(labels))
	for i, k := range g.of {
		g.rows[at[k]] = i
		at[k]++
	}
	return g
}

// clusterLabel is the cluster a row belongs to. A row without a parent
// deposit, source or basin stands with its system alone.
func clusterLabel(r *Row, by string) string {
	label := ""
	switch by {
	case "parent_deposit":
		label = r.ParentDeposit
	case "source":
		label = r.Source
	case "basin":
		label = r.Basin
	}
	if label == "" {
		label = r.System
	}
	return label
}

// wantedResponse derives the response of a row, or says why it has none.
func wantedResponse(r *Row, req *Request) derived {
	if req.MeasuredLine != "all" && orUnknown(r.MeasuredLine) != req.MeasuredLine {
		return derived{why: "measured along another line than " + strings.ReplaceAll(req.MeasuredLine, "_", " ")}
	}
	p := r.Sinuosity
	if req.Recomputed != "" && !finite(p) {
		return derived{why: "no centreline that was measured again"}
	}
	switch req.Response {
	case "any":
	case "standardised_peak":
		if len(r.Windows) < req.K {
			return derived{why: "fewer windows stored than the k of a standardised peak"}
		}
		p = standardisedPeak(r.Windows, req.K)
	default:
		if orUnknown(r.SinuosityKind) != req.Response {
			return derived{why: "sinuosity of another kind than " + strings.ReplaceAll(req.Response, "_", " ")}
		}
	}
	switch {
	case !finite(p):
		return derived{why: "no sinuosity"}
	case p < 1:
		return derived{why: "sinuosity below 1"}
	case p == 1 && req.Scale == "ln_excess":
		return derived{why: "sinuosity of 1 has no ln(P - 1)"}
	}
	return derived{value: p}
}

func orUnknown(s string) string {
	if s == "" {
		return "unknown"
	}
	return s
}

// standardisedPeak is the expected largest of k of the windows drawn without
// replacement: sum_i x_(i) C(i-1,k-1)/C(n,k) over the sorted windows
// (rarefaction; Hurlbert, Ecology 52:577 (1971), doi 10.2307/1934145, gives
// the same combinatorics for species counts). k <= len(windows).
func standardisedPeak(windows []float64, k int) float64 {
	x := slices.Sorted(slices.Values(windows))
	n := len(x)
	// Weight of the largest is k/n; each step down multiplies by
	// (i-k)/(i-1) for the i-th smallest (1-based), from C(i-2,k-1)/C(i-1,k-1).
	w, sum := float64(k)/float64(n), 0.0
	for i := n; i >= k; i-- {
		sum += w * x[i-1]
		if i > 1 {
			w *= float64(i-k) / float64(i-1)
		}
	}
	return sum
}

// needs lists the predictors and categories a request uses, each once.
func (r *Request) needs() (predictors, categories []string) {
	add := func(list *[]string, name string) {
		if !slices.Contains(*list, name) {
			*list = append(*list, name)
		}
	}
	for _, m := range r.Models {
		add(&predictors, m.Predictor)
	}
	for _, name := range r.Joint {
		if slices.Contains(Predictors, name) {
			add(&predictors, name)
		} else {
			add(&categories, name)
		}
	}
	return predictors, categories
}

// consider derives every row's values and decides which rows are complete for
// all models of the request.
func consider(rows []Row, req *Request) []UsedRow {
	predictors, categories := req.needs()
	used := make([]UsedRow, len(rows))
	for i := range rows {
		u := &used[i]
		*u = UsedRow{Row: rows[i], Kept: true, Response: math.NaN(),
			PredictorOf: make(map[string]float64, len(predictors)), ResidualOf: make(map[string]float64, len(req.Models)), PredictedOf: make(map[string]float64, len(req.Models))}
		u.ClusterID = clusterLabel(&u.Row, req.Cluster)
		if req.Cluster == "none" {
			u.ClusterID = u.ID
		}
		drop := func(why string) {
			if u.Kept {
				u.Kept, u.WhyDropped = false, why
			}
		}
		if d := wantedResponse(&u.Row, req); d.why != "" {
			drop(d.why)
		} else {
			u.Response = d.value
		}
		for _, name := range predictors {
			u.PredictorOf[name] = storedValue(&u.Row, name)
			if d := predictorOf(&u.Row, name, req.Time); d.why != "" {
				drop(d.why)
			} else {
				u.PredictorOf[name] = d.value
			}
		}
		for _, m := range req.Models {
			if d := transform(m.Form, m.Predictor, u.PredictorOf[m.Predictor]); d.why != "" {
				drop(d.why)
			}
		}
		for _, name := range categories {
			if v := u.Categories[name]; v == "" || v == "unknown" {
				drop(nameOf(name) + " unknown")
			}
		}
	}
	if req.Response == "standardised_peak" || req.Recomputed != "" {
		dropSameWindows(used)
	}
	if req.Pick == "best" {
		pickBest(used)
	}
	return used
}

var gradeRank = map[string]int{"remeasured": 4, "surveyed": 3, "traced": 2, "quoted": 1}

// better orders two rows of one system: the better grade, then the newer.
func better(a, b *UsedRow) int {
	return cmp.Or(-cmp.Compare(gradeRank[a.Grade], gradeRank[b.Grade]), -cmp.Compare(a.Order, b.Order), cmp.Compare(a.ID, b.ID))
}

// pickBest keeps one row a system: its best-graded, then newest.
func pickBest(used []UsedRow) {
	best := map[string]*UsedRow{}
	for i := range used {
		u := &used[i]
		if !u.Kept {
			continue
		}
		b, ok := best[u.System]
		switch {
		case !ok:
			best[u.System] = u
			continue
		case better(u, b) < 0:
			best[u.System] = u
			u = b
		}
		u.Kept, u.WhyDropped = false, "a better-graded or newer measurement of the same system is used (pick=best)"
	}
}

// dropSameWindows keeps one row for each stored centreline: a standardised
// peak belongs to the line, however many rows quote it.
func dropSameWindows(used []UsedRow) {
	type line struct {
		system   string
		response float64
		windows  int
	}
	seen := map[line]bool{}
	for i := range used {
		u := &used[i]
		if !u.Kept {
			continue
		}
		key := line{u.System, u.Response, len(u.Windows)}
		if seen[key] {
			u.Kept, u.WhyDropped = false, "the same centreline is already counted"
		}
		seen[key] = true
	}
}

// countDropped tallies the reasons, most frequent first.
func countDropped(used []UsedRow) []Dropped {
	count := map[string]int{}
	for i := range used {
		if !used[i].Kept {
			count[used[i].WhyDropped]++
		}
	}
	out := make([]Dropped, 0, len(count))
	for why, n := range count {
		out = append(out, Dropped{why, n})
	}
	slices.SortFunc(out, func(a, b Dropped) int {
		return cmp.Or(-cmp.Compare(a.Rows, b.Rows), cmp.Compare(a.Reason, b.Reason))
	})
	return out
}

// newTable gathers the kept rows, only of one kind if kind is not "". Rows are
// put in a canonical order of their own values so that their order in the
// catalogue changes no digit of the answer.
func newTable(used []UsedRow, req *Request, kind string) *table {
	t := &table{predictor: map[string][]float64{}, category: map[string][]string{}, supply: map[string][]string{}}
	for i := range used {
		if used[i].Kept && (kind == "" || used[i].Kind == kind) {
			t.row = append(t.row, i)
		}
	}
	predictors, categories := req.needs()
	t.row = inCanonicalOrder(used, t.row, predictors)
	column := func(get func(u *UsedRow) float64) []float64 {
		c := make([]float64, len(t.row))
		for k, i := range t.row {
			c[k] = get(&used[i])
		}
		return c
	}
	words := func(get func(u *UsedRow) string) []string {
		c := make([]string, len(t.row))
		for k, i := range t.row {
			c[k] = get(&used[i])
		}
		return c
	}
	t.y = column(func(u *UsedRow) float64 { return u.Response })
	for _, name := range predictors {
		t.predictor[name] = column(func(u *UsedRow) float64 { return u.PredictorOf[name] })
	}
	for _, name := range categories {
		t.category[name] = words(func(u *UsedRow) string { return u.Categories[name] })
	}
	for _, name := range supplyCategories {
		t.supply[name] = words(func(u *UsedRow) string { return u.Categories[name] })
	}
	t.kind = words(func(u *UsedRow) string { return u.Kind })
	t.sinuosityKind = words(func(u *UsedRow) string { return u.SinuosityKind })
	t.measuredLine = words(func(u *UsedRow) string { return u.MeasuredLine })
	t.label = words(func(u *UsedRow) string { return cmp.Or(u.SystemName, u.System) })
	for _, i := range t.row {
		t.source = append(t.source, &used[i].Row)
	}
	clusters, systems := words(func(u *UsedRow) string { return u.ClusterID }), words(func(u *UsedRow) string { return u.System })
	if req.Cluster == "none" {
		for k := range clusters {
			clusters[k] = strconv.Itoa(k) // every row by itself, whatever its id
		}
	}
	t.considered, t.unit = len(used), req.Cluster
	if req.Cluster == "parent_deposit" && !slices.ContainsFunc(t.source, func(r *Row) bool { return r.ParentDeposit != "" }) {
		t.unit = "system" // rivers, say: no row names a deposit, and each system stands for itself
	}
	t.cluster, t.system = newGrouping(clusters), newGrouping(systems)
	if req.Cluster == "none" {
		for k, i := range t.row {
			t.cluster.names[k] = used[i].ID
		}
	}
	return t
}

// inCanonicalOrder sorts rows by response, then by predictors, system and id.
// The predictors count in the order of Predictors, so that the order in which
// models are asked for changes no digit either.
func inCanonicalOrder(used []UsedRow, rows []int, predictors []string) []int {
	type key struct {
		response float64
		row      int
	}
	predictors = slices.Clone(predictors)
	slices.SortFunc(predictors, func(a, b string) int {
		return cmp.Compare(slices.Index(Predictors, a), slices.Index(Predictors, b))
	})
	keys := make([]key, len(rows))
	for k, i := range rows {
		keys[k] = key{used[i].Response, i}
	}
	slices.SortFunc(keys, func(a, b key) int {
		if c := cmp.Compare(a.response, b.response); c != 0 {
			return c
		}
		return canonical(&used[a.row], &used[b.row], predictors)
	})
	out := make([]int, len(rows))
	for k := range keys {
		out[k] = keys[k].row
	}
	return out
}

func canonical(a, b *UsedRow, predictors []string) int {
	for _, p := range predictors {
		if c := cmp.Compare(a.PredictorOf[p], b.PredictorOf[p]); c != 0 {
			return c
		}
	}
	return cmp.Or(cmp.Compare(a.System, b.System), cmp.Compare(a.ID, b.ID))
}
