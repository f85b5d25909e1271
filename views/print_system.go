package views

import (
	"fmt"
	"net/url"
	"strings"

	"github.com/a-h/templ"
)

// FigureNames are the names of the figures of a system: those of each stored
// line end in its number where there are several.
func (p SystemPage) FigureNames() []string {
	var out []string
	for i, l := range p.Lines {
		if l.Measured == nil {
			continue
		}
		for _, name := range []string{"plan", "windows", "depth"} {
			if name == "depth" && len(l.Measured.Profile) < 2 {
				continue
			}
			out = append(out, p.lineFigure(name, i))
		}
	}
	if p.Fit != nil {
		out = append(out, "fit")
	}
	return out
}

func (p SystemPage) lineFigure(name string, line int) string {
	if len(p.Lines) == 1 {
		return name
	}
	return fmt.Sprintf("%s:%d", name, line+1)
}

// File is one figure of a system with what it carries in print.
func (p SystemPage) File(panel string, from FigureSource) Plot {
	name := p.Detail.Name
	row := p.best()
	source := ""
	if row.Source != "" {
		source = " Measurement " + row.Measurement + ", " + row.Grade + ": " + strings.TrimRight(row.Source, ".") + "."
	}
	for i, l := range p.Lines {
		if l.Measured == nil {
			continue
		}
		var out Plot
		caption := ""
		switch panel {
		case p.lineFigure("plan", i):
			out, caption = planPlot(i, name, l.Measured), planCaption(l)
		case p.lineFigure("windows", i):
			out, caption = profilePlots(i, name, l.Measured)[0], windowsAlone(l)
		case p.lineFigure("depth", i):
			out, caption = profilePlots(i, name, l.Measured)[1], "Depth of the stored line"+lineOf(l)+" below sea level, deeper downwards."
		default:
			continue
		}
		if row.Invented {
			source += " The system is invented: a program drew it."
		}
		return p.printed(out, caption+source, from)
	}
	out := p.printed(p.fitPlot(), fitCaption(p)+" The interval is that of the line, not of one new system.", from)
	out.Print.Key = []KeyEntry{{Text: "other measurements", Point: &Point{Class: "soft", Size: 3.2}}, {Text: name, Point: &Point{Class: "ochre", Shape: "diamond", Size: 6}}}
	return out
}

func windowsAlone(l SystemLine) string {
	m := l.Measured
	return fmt.Sprintf("Sinuosity of %s of %s km along the stored line%s. Mean %s, 90th percentile %s, peak %s.",
		plural(len(m.Windows), "window", "windows"), numberText(m.WindowLengthM/1000, 2), lineOf(l), num2Fixed(m.MeanSinuosity), num2Fixed(m.P90Sinuosity), num2Fixed(m.PeakSinuosity))
}

func (p SystemPage) printed(plot Plot, caption string, from FigureSource) Plot {
	if from.Data != "" {
		caption += " " + from.Data + "."
	}
	plot.Print = Print{Caption: caption, Settings: from.settings("System")}
	return plot
}

// figureAddress is one figure of the system as an SVG file.
func (p SystemPage) figureAddress(panel string) string {
	q := url.Values{"panel": {panel}, "system": {p.Detail.Slug}}
	if r := p.Query.Get("release"); r != "" {
		q.Set("release", r)
	}
	return "/figures/system.svg?" + q.Encode()
}

// profileFiles are the windows and the depth of one line.
func (p SystemPage) profileFiles(line int) []namedFigure {
	add := func(name, text string) namedFigure {
		return namedFigure{text, templ.SafeURL(p.figureAddress(p.lineFigure(name, line))), p.Detail.Slug + "-" + name}
	}
	out := []namedFigure{add("windows", "Sinuosity along the channel")}
	if len(p.Lines[line].Measured.Profile) > 1 {
		out = append(out, add("depth", "Depth along the channel"))
	}
	return out
}

// chartAddress is the chart around the system, close enough for its line.
func (p SystemPage) chartAddress() string {
	v := ChartView{Name: "world", Lat: p.best().LatitudeDeg.V, Lon: wrapLongitude(p.best().LongitudeDeg.V), Zoom: 30}
	q := v.rounded().Values()
	if r := p.Query.Get("release"); r != "" {
		q.Set("release", r)
	}
	return "/chart?" + q.Encode()
}
