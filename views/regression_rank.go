package views

import (
	"math"
	"strings"

	"fathombend/stats"
)

const (
	rankWidth      = 540
	rankLeft       = 222
	rankStep       = 30
	rankNameLength = 29 // of 15 px lettering in the left margin
)

// shorten cuts a name that would run out of its margin.
func shorten(s string, n int) string {
	r := []rune(s)
	if len(r) <= n {
		return s
	}
	return strings.TrimSpace(string(r[:n-1])) + "…"
}

// rankItem is one line of a chart of named values.
type rankItem struct {
	Name, Title, Href string
	X, Low, High      float64
	Class, Shape      string
	Also              float64 // a second, hollow mark; NaN = none
}

// rankPlot sets named values under each other, each name to the left of its
// mark on its own grid line.
func rankPlot(p Plot, items []rankItem) Plot {
	lo, hi := math.Inf(1), math.Inf(-1)
	grow := func(x float64) {
		if !math.IsNaN(x) && !math.IsInf(x, 0) {
			lo, hi = min(lo, x), max(hi, x)
		}
	}
	for _, it := range items {
		grow(it.X)
		grow(it.Low)
		grow(it.High)
		grow(it.Also)
	}
	if p.X.Zero {
		grow(0)
	}
	if !(hi > lo) {
		lo, hi = lo-0.5, hi+0.5
	}
	p.X.Min, p.X.Max = lo-0.03*(hi-lo), hi+0.04*(hi-lo)
	p.Y.Min, p.Y.Max, p.Y.Reverse, p.Y.Ticks = 0.4, float64(len(items))+0.6, true, []float64{}
	p.Y.Format = func(y float64) string { return shorten(items[int(y)-1].Name, rankNameLength) }
	p.Width, p.Height, p.Left = rankWidth, 78+float64(len(items))*rankStep, rankLeft
	for i, it := range items {
		y := float64(i + 1)
		q := Point{X: it.X, Y: y, XLow: it.Low, XHigh: it.High, Href: it.Href, Title: it.Title, Class: it.Class, Shape: it.Shape}
		if it.Low == it.High {
			q.XLow, q.XHigh = 0, 0
		}
		p.Points = append(p.Points, q)
		if !math.IsNaN(it.Also) {
			p.Points = append(p.Points, Point{X: it.Also, Y: y, Class: "hollow", Shape: "diamond"})
		}
		p.Y.Ticks = append(p.Y.Ticks, y)
	}
	return p
}

// rSquaredPlot sets the models' R2 with their intervals under each other.
func rSquaredPlot(a *stats.Analysis) Plot {
	var items []rankItem
	for _, m := range a.Models {
		if m.Failure != "" {
			continue
		}
		t := estimateTexts(m.RSquared, m.RSquaredInterval)
		items = append(items, rankItem{Name: modelText(m), X: m.RSquared, Low: m.RSquaredInterval[0], High: m.RSquaredInterval[1], Also: m.OutOfSampleR2,
			Title: modelText(m) + ", R² " + t.value + " from " + t.low + " to " + t.high + ", out of sample " + fixedText(m.OutOfSampleR2, 2)})
	}
	return rankPlot(Plot{ID: "r-squared", Title: "R² of each model with its interval",
		Desc: "Round marks: R² in sinuosity units with its interval. Hollow marks: R² when each cluster is predicted from the others.",
		X:    Axis{Label: "R² (sinuosity units)", Zero: true}, Rules: []Rule{{At: 0, Vertical: true, Class: "dash"}}}, items)
}

const influenceShown = 12

// influencePlot shows how far R2 moves when one system is left out.
func influencePlot(a *stats.Analysis) Plot {
	m := leadingModel(a)
	p := Plot{ID: "influence", Title: "R² without one system",
		Desc: "The systems whose leaving out moves R² most; the line is R² with all of them.", X: Axis{Label: "R² without the system"}}
	var items []rankItem
	for i, s := range a.Influence {
		if i == influenceShown {
			break
		}
		items = append(items, rankItem{Name: s.SystemName, X: s.RSquaredWithout, Low: s.RSquaredWithout, High: s.RSquaredWithout, Also: math.NaN(), Href: string(systemHref(s.System)),
			Title: s.SystemName + ", R² without it " + fixedText(s.RSquaredWithout, 3)})
	}
	if m != nil {
		items = append(items, rankItem{Name: "all systems", X: m.RSquared, Low: m.RSquaredInterval[0], High: m.RSquaredInterval[1], Also: math.NaN(), Shape: "square",
			Title: "all systems, R² " + fixedText(m.RSquared, 3)})
		p.Rules = []Rule{{At: m.RSquared, Vertical: true, Class: "dash"}}
	}
	return rankPlot(p, items)
}

func sharesPlot(a *stats.Analysis) Plot {
	var items []rankItem
	for _, s := range a.Shares {
		t := estimateTexts(s.Share, s.Interval)
		items = append(items, rankItem{Name: bare(predictorText(s.Predictor).name), X: s.Share, Low: s.Interval[0], High: s.Interval[1], Also: math.NaN(),
			Title: predictorText(s.Predictor).name + ", share " + t.value + " from " + t.low + " to " + t.high})
	}
	return rankPlot(Plot{ID: "shares", Title: "Shares of the joint R²", Desc: "Each predictor's share of R² with its interval.",
		X: Axis{Label: "Share of R²", Zero: true}}, items)
}
