package views

import (
	"fmt"
	"math"
	"net/url"
	"slices"
	"strconv"

	"fathombend/catalogue"
)

// RecomputePage is what /recompute shows: the form and what was asked before.
type RecomputePage struct {
	Page
	List   []Recomputation
	Values url.Values        // as typed
	Errors map[string]string // by field
}

// Recomputation is one with its settings in words.
type Recomputation struct {
	catalogue.Recomputation
	Asked string // settings as name=value
}

// RecomputationPage is what one gave, so far.
type RecomputationPage struct {
	Page
	Recomputation
	K      int
	Moves  []LevelMove
	Values []catalogue.RecomputedLine // in order
	Order  string                     // one of RecomputedOrders
	Here   bool                       // this program is running it
}

// LevelMove is how far one level moves over the lines that have it stored and
// recomputed: medians, and the range of the difference.
type LevelMove struct {
	Level                          string
	Lines                          int
	Stored, Recomputed, Difference float64
	Least, Most                    float64
}

// RecomputedOrders are the orders of the table, the first by default.
var RecomputedOrders = []string{"change", "system", "peak"}

var recomputeStates = map[string]string{"running": "running", "cancelled": "cancelled", "done": "done"}

// value is what a field holds; a new form proposes the windows of a line whose
// width is known.
func (p RecomputePage) value(name string) string {
	if len(p.Values) == 0 {
		return map[string]string{"window_widths": "20", "k": "5"}[name]
	}
	return p.Values.Get(name)
}

func recomputeHref(name string) string { return "/recompute/" + url.PathEscape(name) }

func (r Recomputation) progress() float64 {
	if r.Lines == 0 {
		return 0
	}
	return float64(r.Reached) / float64(r.Lines)
}

func (r Recomputation) progressText() string {
	return strconv.Itoa(r.Reached) + " of " + plural(r.Lines, "line", "lines")
}

// byText says who asked for it and when.
func (r Recomputation) byText() string {
	who := r.By
	if who == "" {
		who = "the command line"
	}
	return "Asked for by " + who + " on " + r.At.Format("2 January 2006") + ", of catalogue revision " + strconv.FormatInt(r.Revision, 10) + ", with version " + r.Program + "."
}

// refusedLines counts the lines that could not be measured.
func (p RecomputationPage) refusedLines() int {
	n := 0
	for _, l := range p.Values {
		if !l.New.Peak.Valid {
			n++
		}
	}
	return n
}

// sentence is the answer of the page.
func (p RecomputationPage) sentence() string {
	measured := len(p.Values) - p.refusedLines()
	text := fmt.Sprintf("With %s, %d of %s measured again", p.Asked, measured, plural(len(p.Values), "centreline was", "centrelines were"))
	peak := p.Moves[3]
	if peak.Lines == 0 {
		return text + "; none has a stored peak to set beside it."
	}
	text += fmt.Sprintf(": the peak moves by %s at the median, by %s to %s over the %s with a stored one.",
		signed(peak.Difference), signed(peak.Least), signed(peak.Most), plural(peak.Lines, "line", "lines"))
	if few := p.fewWindows(); few > 0 {
		verb := " hold"
		if few == 1 {
			verb = " holds"
		}
		text += " " + plural(few, "line", "lines") + verb + " fewer than " + strconv.Itoa(p.K) + " windows: no standardised peak there. A shorter window or a smaller k gives one."
	}
	return text
}

// fewWindows counts the measured lines with fewer windows than k.
func (p RecomputationPage) fewWindows() int {
	n := 0
	for _, l := range p.Values {
		if l.New.Peak.Valid && !l.New.Standardised.Valid {
			n++
		}
	}
	return n
}

// signed writes a difference with its sign and two decimals.
func signed(x float64) string {
	s := fixedText(x, 2)
	if math.IsNaN(x) || math.IsInf(x, 0) || s == "0.00" || x < 0 {
		return s
	}
	return "+" + s
}

func difference2(now, then catalogue.Number) float64 {
	if !now.Valid || !then.Valid {
		return math.NaN()
	}
	return now.V - then.V
}

func level2(n catalogue.Number) string {
	if !n.Valid {
		return unknownMark
	}
	return fixedText(n.V, 2)
}

func glyphOf(n catalogue.Number) float64 {
	if !n.Valid {
		return math.NaN()
	}
	return n.V
}

// recomputedShown is the most rows on the page; the CSV has all.
const recomputedShown = 300

func (p RecomputationPage) shown() []catalogue.RecomputedLine {
	return p.Values[:min(len(p.Values), recomputedShown)]
}

// regressionHref fits this recomputation.
func (p RecomputationPage) regressionHref() string {
	return "/regression?" + url.Values{"response": {"standardised_peak"}, "k": {strconv.Itoa(p.K)}, "recomputed": {p.Name}}.Encode()
}

// plot sets the recomputed peak against the stored one.
func (p RecomputationPage) plot() Plot {
	plot := Plot{ID: "recomputed", Title: "Peak sinuosity measured again against the stored one",
		Desc: "One mark a centreline, with its range under half and double the window and the smoothing. On the dashed line nothing changed.",
		X:    Axis{Label: "Peak as stored"}, Y: Axis{Label: "Peak measured again"}}
	top := 1.0
	for _, l := range p.Values {
		if !l.Old.Peak.Valid || !l.New.Peak.Valid {
			continue
		}
		top = max(top, min(l.Old.Peak.V, 1e6), min(l.New.Peak.V, 1e6))
		pt := Point{X: l.Old.Peak.V, Y: l.New.Peak.V, Href: "/systems/" + url.PathEscape(l.System), Size: 4,
			Title: fmt.Sprintf("%s, %s: %s stored, %s measured again", l.SystemName, l.Measurement, level2(l.Old.Peak), level2(l.New.Peak))}
		if l.Low.Valid && l.High.Valid && len(p.Values) <= recomputedShown {
			pt.Low, pt.High = l.Low.V, l.High.V
		}
		plot.Points = append(plot.Points, pt)
	}
	if len(plot.Points) > 0 {
		plot.Lines = []Line{{X: []float64{1, top}, Y: []float64{1, top}, Class: "l3 dash"}}
	}
	return plot
}

func (p RecomputationPage) sortHref(order string) string {
	if order == RecomputedOrders[0] {
		return recomputeHref(p.Name)
	}
	return recomputeHref(p.Name) + "?sort=" + order
}

// recomputedChoices are the stored values and every finished recomputation.
func (p RegressionPage) recomputedChoices() []choice {
	names, now := p.Recomputations, p.Request.Recomputed
	if now != "" && !slices.Contains(names, now) {
		names = append([]string{now}, names...)
	}
	out := []choice{{Value: "", Text: "recorded", Chosen: now == ""}}
	for _, n := range names {
		out = append(out, choice{Value: n, Text: "measured again: " + n, Chosen: n == now})
	}
	return out
}
