package views

import (
	"math"
	"strconv"
)

// FigureNames are the names of all figures of an answer.
func (p ExpectationPage) FigureNames() []string {
	out := p.Panels()
	if len(p.ribbons()) > 0 {
		out = append(out, "ribbons")
	}
	return out
}

// File is one figure of an answer with what it carries in print.
func (p ExpectationPage) File(panel string, from FigureSource) Plot {
	var out Plot
	caption := ""
	var key []KeyEntry
	switch panel {
	case "ribbons":
		out = p.ribbonPlot()
		caption = p.ribbonCaption()
	case "day_length":
		out = p.dayPlot()
		caption = p.dayCaption()
		key = p.dayKey()
	default:
		out = p.explanationPlot()
		caption = p.explanationCaption() + " " + p.drawsText()
	}
	if from.Data != "" && panel != "day_length" {
		caption += " " + from.Data + "."
	}
	out.Print = Print{Caption: caption, Settings: from.settings("Expectation"), Key: key}
	if panel != "day_length" {
		out.Print.Invented = p.Result.InventedRows
	}
	return out
}

func (p ExpectationPage) drawsText() string {
	return "Limits are for one new system; " + thousands(p.Target.Draws) + " draws, seed " + strconv.FormatUint(p.Target.Seed, 10) + "."
}

// ribbonPlot draws the answer as channels side by side on axes of one length.
func (p ExpectationPage) ribbonPlot() Plot {
	out := Plot{ID: "ribbons", Title: "The expected channel", Desc: p.sentence(), NoFrame: true, Equal: true, Width: singleUnits,
		Empty: "No expectation can be formed from these rows."}
	answers := p.ribbons()
	half := 8.0
	for _, r := range answers {
		half = math.Max(half, RibbonShape(r.P, defsAxis).Half)
	}
	// Data units are hundredths of an axis; loops of a strong bend overhang it.
	const pitch = 1.3 * defsAxis
	wide := pitch*float64(len(answers)-1) + defsAxis
	for i, r := range answers {
		x0 := pitch * float64(i)
		l := Line{X: []float64{x0}, Y: []float64{0}, Class: map[string]string{"limit": "l4", "middle": "", "observed": "l2 dash"}[r.Class]}
		for _, v := range ribbonPoints(r.P, 20) {
			l.X, l.Y = append(l.X, x0+v[0]), append(l.Y, -v[1])
		}
		out.Lines = append(out.Lines, l)
		out.Texts = append(out.Texts, Text{X: x0 + defsAxis/2, Y: -half - 14, Text: ribbonWords(r), Anchor: "middle"})
	}
	out.X.Min, out.X.Max = -12, wide+12
	out.Y.Min, out.Y.Max = -half-20, half+4
	out.Height = out.Width * (out.Y.Max - out.Y.Min) / (out.X.Max - out.X.Min)
	return out
}

func ribbonWords(r ribbonAnswer) string {
	v := fixedText(r.P, 2)
	switch {
	case r.Class == "middle":
		return "median " + v
	case r.Class == "observed":
		return "observed " + v
	case r.Label == "90 % lie below":
		return "90 % below " + v
	}
	return "10 % below " + v
}

func (p ExpectationPage) ribbonCaption() string {
	s := "Sine-generated curves of the " + p.responseName() + " expected of one new system at " + p.palaeolatitudeText() + " " + p.timeText() +
		": median and the limits that 80 % of new systems are expected between"
	if c := p.Result.Combined.Coverage; c != nil && !math.IsNaN(c.C80) {
		s += " (they held " + percent(c.C80) + " when each deposit was left out in turn)"
	}
	return s + ". " + countText(p.Result.Rows, "row", "rows") + " in " + countText(p.Result.Clusters, "cluster", "clusters") + "; explanations combined by weight. " + p.drawsText()
}

func (p ExpectationPage) dayKey() []KeyEntry {
	var out []KeyEntry
	for i, c := range p.Days.Curves {
		class := dayLineClasses[min(i, len(dayLineClasses)-1)].line
		if class == "" {
			class = "main"
		}
		out = append(out, KeyEntry{Text: c.Title, Line: class})
	}
	return append(out, KeyEntry{Text: "observed", Point: &Point{Class: "soft", Size: 4}}, KeyEntry{Text: "observed, not read in its source", Point: &Point{Class: "soft hollow", Size: 4}},
		KeyEntry{Text: "this target", Point: &Point{Class: "alarm", Shape: "diamond"}})
}
