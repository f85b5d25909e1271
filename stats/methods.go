package stats

import (
	"fmt"
	"slices"
	"strings"
)

// methodsText is a paragraph that can stand in a paper, with its numbers.
func (s *study) methodsText(a *Analysis) string {
	r := s.req
	var b strings.Builder
	say := func(format string, args ...any) { fmt.Fprintf(&b, format+" ", args...) }
	response := map[string]string{"any": "sinuosity", "standardised_peak": fmt.Sprintf("standardised peak sinuosity (expected largest of %s)", plural(r.K, "window", "windows"))}[r.Response]
	if response == "" {
		response = r.Response + " sinuosity"
	}
	scale := map[string]string{"raw": "untransformed", "ln": "as ln P", "ln_excess": "as ln(P - 1)"}[r.Scale]
	say("%s, %s%s, was regressed on %s in %s of %s (%s; %s).",
		upperFirst(response), scale, map[bool]string{true: " unless the form sets its own scale"}[s.anyOwnScale()], list(mapSlice(predictorsIn(r), nameOf)), plural(a.Rows, "row", "rows"),
		plural(a.Systems, "system", "systems"), s.clustersText(a.Clusters), droppedText(a.Dropped))
	say("%s", s.rowsText())
	if r.Recomputed != "" {
		say("Sinuosity was measured anew on the stored centrelines, all with one set of settings (recomputation %s%s).", r.Recomputed, prefixed(": ", r.RecomputedAs))
	}
	if a.PrivateRows > 0 {
		say("%s private: only their owner and those the owner names see them.", plural(a.PrivateRows, "row is", "rows are"))
	}
	if a.InventedRows > 0 {
		say("%s invented.", plural(a.InventedRows, "row is", "rows are"))
	}
	if usesLatitude(r) {
		if r.Time == "of_deposition" {
			say("Rows older than 5 Ma use their palaeolatitude and the rotation rate of their age; younger rows use today's.")
		} else {
			say("All rows use today's latitude and rotation rate.")
		}
	}
	if s.boot == nil {
		say("No interval is given.")
		return strings.TrimSpace(b.String())
	}
	say("Reported fits are least squares by QR on centred, scaled columns; fits that are nonlinear in their parameters by damped Gauss-Newton to a relative change of 1e-10.")
	say("Whole %s were resampled %d times (bootstrap of pairs; Efron & Tibshirani 1993; seed %d, one generator stream a resample).", s.t.many(), r.Resamples, r.Seed)
	say("%s", intervalText(r))
	say("Beside them stand the CR2 error with Satterthwaite degrees of freedom (Bell & McCaffrey 2002; Pustejovsky & Tipton 2018), BCa and percentile intervals, and the interval of rows resampled as if independent (BCa, at most 3,999 resamples).")
	say("R2 and differences of R2 (same resamples, paired) are in sinuosity units, Lindeman-Merenda-Gold shares on the scale of %s; their intervals are %s at %s.", scaleName(r.Scale), statKindText(s.statKind()), percent(r.Level))
	say("Out-of-sample R2 leaves each %s out in turn. p values come from %d sign flips of whole %s of the residuals of the null model (%s weights). AICc counts rows as independent.",
		s.t.one(), r.Permutations, s.t.many(), weightsText(s.t.cluster.count()))
	if r.MeasurementError {
		say("Stated errors of measurement were drawn anew in every resample.")
	}
	say("In 1,000 simulated catalogues of 12 to 45 unequal clusters about a skewed law, nominal 95 %% intervals held the truth as follows: %s.", coverageSentence())
	for _, m := range a.Models {
		if m.Failure == "" && m.slope() != nil {
			c := m.slope()
			say("%s: R2 = %.3f [%s], coefficient of %s = %s [%s] (%s), out-of-sample R2 = %s, p = %s.", upperFirst(m.name()), m.RSquared, between(m.RSquaredInterval),
				coefficientText(c.Name), number(c.Estimate), between(c.Interval), kindName(c.IntervalKind), number(m.OutOfSampleR2), number(m.PermutationP))
		}
	}
	if a.Breakpoint != nil {
		say("%s", a.Breakpoint.Text)
	}
	for _, g := range a.Groups {
		say("%s", g.Text)
	}
	for _, x := range a.Selection {
		say("%s", x.Text)
	}
	return strings.TrimSpace(b.String())
}

// anyOwnScale says whether a form of the question sets its own response scale.
func (s *study) anyOwnScale() bool {
	return slices.ContainsFunc(s.req.Models, func(m ModelSpec) bool { return setsOwnScale(m.Form) })
}

// clustersText counts what is resampled whole, and the systems that stand for
// themselves in it because no deposit, source or basin is recorded for them.
func (s *study) clustersText(clusters int) string {
	if s.req.Cluster == "none" {
		return "each row taken for independent"
	}
	alone := map[string]bool{}
	for _, r := range s.t.source {
		if s.req.Cluster != "system" && clusterLabel(r, s.req.Cluster) == r.System {
			alone[r.System] = true
		}
	}
	by := strings.ReplaceAll(s.req.Cluster, "_", " ")
	text := "in " + plural(clusters, s.t.one(), s.t.many())
	switch {
	case s.t.unit != s.req.Cluster:
		return "each standing for itself, as no " + by + " is recorded for any"
	case len(alone) > 0:
		text += fmt.Sprintf(", of which %s for want of a recorded %s", plural(len(alone), "is a single system", "are single systems"), by)
	}
	return text
}

// rowsText says which rows these are: kinds of channel, kinds of sinuosity and
// measured lines as they occur, and the filter.
func (s *study) rowsText() string {
	var parts []string
	of := func(what string, values []string) {
		if len(values) == 0 {
			return
		}
		text := tally(values)
		if text == "" {
			text = strings.ReplaceAll(orUnknown(values[0]), "_", " ") + " throughout"
		}
		parts = append(parts, what+": "+text)
	}
	of("Kind of channel", s.t.kind)
	of("sinuosity", s.t.sinuosityKind)
	of("measured line", s.t.measuredLine)
	text := ""
	if len(parts) > 0 {
		text = strings.Join(parts, "; ") + "."
	}
	if s.req.Chosen == "" {
		return text + " No other filter was set."
	}
	return text + " Filter: " + s.req.Chosen + "."
}

func prefixed(prefix, s string) string {
	if s == "" {
		return ""
	}
	return prefix + s
}

func predictorsIn(r *Request) []string {
	p, c := r.needs()
	return append(p, c...)
}

func usesLatitude(r *Request) bool {
	for _, p := range predictorsIn(r) {
		if isLatitude(p) {
			return true
		}
	}
	return false
}

func droppedText(d []Dropped) string {
	if len(d) == 0 {
		return "no row was dropped"
	}
	var parts []string
	for _, x := range d {
		parts = append(parts, fmt.Sprintf("%d: %s", x.Rows, x.Reason))
	}
	return "dropped " + strings.Join(parts, "; ")
}

func intervalText(r *Request) string {
	level := percent(r.Level)
	switch r.Interval {
	case "cr2":
		return "Coefficient intervals (" + level + ") are CR2 with Satterthwaite degrees of freedom."
	case "bca":
		return "Coefficient intervals (" + level + ") are BCa (Efron 1987) with leave-one-cluster-out acceleration."
	case "percentile":
		return "Coefficient intervals (" + level + ") are percentile intervals."
	}
	return "Coefficient intervals (" + level + ") are symmetric whole-cluster bootstrap-t (Cameron, Gelbach & Miller 2008), BCa where the form has no cluster error."
}

func statKindText(kind string) string {
	if kind == "percentile" {
		return "percentile intervals"
	}
	return "BCa (Efron 1987) with leave-one-cluster-out acceleration"
}

func weightsText(clusters int) string {
	if clusters < fewGroupsForSigns {
		return "Webb's six-point"
	}
	return "Rademacher"
}

// Covered is what nominal 95 % intervals of one kind held on simulated
// catalogues: percent, lowest and highest over 12, 18, 30 and 45 clusters.
type Covered struct {
	Kind       string // as in Coefficient.Intervals
	Name       string
	OnLnExcess [2]float64 // response ln(P - 1)
	OnRaw      [2]float64 // response P
}

// IntervalCoverage is the small print of every interval. It repeats
// testdata/coverage.md, which a test compares with it.
var IntervalCoverage = []Covered{
	{"studentised", "studentised", [2]float64{93.2, 95.7}, [2]float64{88.6, 91.6}},
	{"cr2", "CR2", [2]float64{93.5, 95.9}, [2]float64{87.5, 91.3}},
	{"bca", "BCa", [2]float64{89.7, 91.4}, [2]float64{83.9, 87.8}},
	{"percentile", "percentile", [2]float64{91.8, 94.3}, [2]float64{84.2, 91.3}},
	{"row_bootstrap", "rows taken for independent", [2]float64{74.4, 79.6}, [2]float64{68.1, 72.7}},
}

func coverageSentence() string {
	var parts []string
	for _, c := range IntervalCoverage {
		parts = append(parts, fmt.Sprintf("%s %.0f-%.0f %% on ln(P - 1), %.0f-%.0f %% on P", c.Name, c.OnLnExcess[0], c.OnLnExcess[1], c.OnRaw[0], c.OnRaw[1]))
	}
	return strings.Join(parts, "; ")
}
