package views

import (
	"fmt"
	"math"
	"net/url"
	"slices"
	"strconv"
	"strings"

	"fathombend/catalogue"
)

// ChartPage is the map of the systems under a filter.
type ChartPage struct {
	Page
	Filter    catalogue.Filter
	Facets    []catalogue.Facet
	View      ChartView
	Items     []ChartItem // every system under the filter that has a place
	Colouring ChartColouring
	Lines     []ChartLine // stored centrelines in the view, when it is close
	LinesMore int         // lines in the view that are not among them
	FullQuery url.Values  // the view's settings with the filter, without paging
	Answers   string      // /chart.json with the filter and the colouring
	LinesAt   string      // /chart/lines.json with the filter
	FineAt    string      // the finer outline
	Release   string
}

// ChartItem is one system where its best measurement was made, today.
type ChartItem struct {
	MeridianItem         // Latitude may be that of deposition; Lat is today's
	Lat, Lon     float64 // WGS84, degrees
	Step         int     // class of its colour
	Line         bool    // a centreline is stored
	Invented     bool
	Private      bool // only some people see it
	Coarse       bool // its place is rounded
}

// ChartLine is a stored centreline, thinned: longitude and latitude.
type ChartLine struct {
	Slug, Measurement string
	Points            [][2]float64
}

// chartSVGLimit is the most systems drawn one by one without scripts: more are
// gathered.
const chartSVGLimit = 600

// chartListLimit is the most systems in the list beside the map.
const chartListLimit = 500

// question is the page's heading.
func (p ChartPage) question() string { return "Where are the channels?" }

// highLatitude is the limit of practice poleward of which the field argues.
const highLatitude = 50.0

// sentence is what the map answers.
func (p ChartPage) sentence() string {
	if len(p.Items) == 0 {
		if len(activeFilters(p.Page, p.Filter)) == 0 {
			return "No channel stands on the map yet."
		}
		return "No system passes this filter."
	}
	high, sloped := 0, 0
	for _, i := range p.Items {
		if math.Abs(i.Lat) >= highLatitude && i.Kind == "submarine" {
			high++
			if i.Slope > 0 {
				sloped++
			}
		}
	}
	s := plural(len(p.Items), "system is", "systems are") + " on the chart"
	if high == 0 {
		return s + "; none of them is a submarine one poleward of 50 degrees, where the argument is decided."
	}
	return s + "; " + plural(high, "submarine one lies", "submarine ones lie") + " poleward of 50 degrees, where the argument is decided, " +
		strconv.Itoa(sloped) + " of them with a valley slope."
}

// inView counts the systems the frame shows.
func (p ChartPage) inView() int {
	pr := newChartProjection(p.View, chartW, chartH)
	n := 0
	for _, i := range p.Items {
		if _, _, shown := pr.at(i.Lat, i.Lon); shown {
			n++
		}
	}
	return n
}

// address is this page with another view.
func (p ChartPage) address(v ChartView) string {
	q := url.Values{}
	for k, list := range p.FullQuery {
		q[k] = list
	}
	for k, val := range v.Values() {
		q[k] = val
	}
	if len(q) == 0 {
		return "/chart"
	}
	return "/chart?" + q.Encode()
}

// Values are the view as parameters; the whole world needs none.
func (v ChartView) Values() url.Values {
	q := url.Values{}
	if v.Name != "world" {
		q.Set("view", v.Name)
	}
	if !v.IsWhole() {
		q.Set("at", v.centreText())
		q.Set("zoom", strconv.FormatFloat(v.Zoom, 'f', -1, 64))
	}
	return q
}

// centreText is latitude,longitude.
func (v ChartView) centreText() string {
	return strconv.FormatFloat(v.Lat, 'f', -1, 64) + "," + strconv.FormatFloat(v.Lon, 'f', -1, 64)
}

// chartStep is one of the links that move the view without scripts.
type chartStep struct {
	Key, Text, Label string
	To               ChartView
}

func (p ChartPage) steps() []chartStep {
	pr := newChartProjection(p.View, chartW, chartH)
	const by = 0.3
	return []chartStep{
		{"in", "+", "Zoom in", pr.moved(0, 0, 2)},
		{"out", "−", "Zoom out", pr.moved(0, 0, 0.5)},
		{"west", "←", "Move left", pr.moved(-by, 0, 1)},
		{"north", "↑", "Move up", pr.moved(0, by, 1)},
		{"south", "↓", "Move down", pr.moved(0, -by, 1)},
		{"east", "→", "Move right", pr.moved(by, 0, 1)},
		{"whole", "Whole map", "Show the whole map", NewChartView(p.View.Name)},
	}
}

// title names a system and gives its values.
func (i ChartItem) title(step ChartStep) string {
	s := i.Name + ", sinuosity " + num2Fixed(i.P) + " (" + ChoiceLabel(i.PKind) + "), " + placeText(i.Lat, i.Lon)
	if i.Kind != "submarine" {
		s += ", " + i.Kind
	}
	if i.Ancient {
		s += ", " + tidyText(i.AgeMa, 4) + " Ma"
		if i.Restored {
			s += ", palaeolatitude " + hungAt(i.Latitude)
		}
	}
	if i.Slope > 0 {
		s += ", valley slope " + tidyText(i.Slope, 2)
	}
	if i.Invented {
		s += ", invented"
	}
	if i.Private {
		s += ", private"
	}
	if i.Coarse {
		s += ", place rounded to 1 degree"
	}
	return s
}

func placeText(lat, lon float64) string {
	return hungAt(lat) + " " + strings.NewReplacer("N", "E", "S", "W").Replace(hungAt(wrapLongitude(lon)))
}

// shape tells what a system is without colour: rivers are hollow triangles in
// ochre, ancient systems diamonds, lakes squares.
func (i ChartItem) shape() (shape, class string) {
	switch {
	case i.Kind == "river":
		return "triangle", "ochre hollow"
	case i.Kind == "lacustrine":
		return "square", ""
	case i.Ancient:
		return "diamond", ""
	}
	return "circle", ""
}

func (p ChartPage) hasKind(kind string) bool {
	for _, i := range p.Items {
		if i.Kind == kind {
			return true
		}
	}
	return false
}

func (p ChartPage) hasAncient() bool {
	for _, i := range p.Items {
		if i.Ancient && i.Kind != "river" {
			return true
		}
	}
	return false
}

// Names of the projections in force, by view; "near" is the world when close.
var chartProjections = map[string]string{
	"world": "Equal Earth projection",
	"near":  "Lambert's azimuthal equal-area projection about the centre of the view",
	"north": "Lambert's azimuthal equal-area projection about the North Pole, to 30° N; dashed: 50°",
	"south": "Lambert's azimuthal equal-area projection about the South Pole, to 30° S; dashed: 50°",
}

func (p ChartPage) projectionText() string {
	if p.View.Name == "world" && p.View.azimuthal() {
		return chartProjections["near"]
	}
	return chartProjections[p.View.Name]
}

// captionStart and captionEnd stand before and after the projection, which
// changes as the map moves.
func (p ChartPage) captionStart() string {
	s := plural(len(p.Items), "channel system", "channel systems") + ", each where its best-graded measurement was made, today"
	if p.hasAncient() {
		s += " (ancient ones too; their palaeolatitude is on the meridian)"
	}
	return s + "."
}

// gathered says that the drawing without scripts gathers, where it does.
func (p ChartPage) gathered() string {
	if n := p.inView(); n > chartSVGLimit {
		return fmt.Sprintf(" Without scripts the %d systems in view are gathered, with their number; move closer to see each.", n)
	}
	return ""
}

func (p ChartPage) captionEnd() string {
	s := "Equal areas on the Earth are equal here."
	if p.Release != "" {
		s += " Release " + p.Release + "."
	}
	if k := p.inventedItems(); k > 0 {
		s += " " + plural(k, "system is", "systems are") + " invented."
	}
	k := 0
	for _, i := range p.Items {
		if i.Private {
			k++
		}
	}
	if k > 0 {
		s += " " + plural(k, "system is", "systems are") + " private."
	}
	return s
}

// caption could go to print.
func (p ChartPage) caption() string {
	return p.captionStart() + " " + p.projectionText() + ". " + p.captionEnd()
}

func (p ChartPage) inventedItems() int {
	k := 0
	for _, i := range p.Items {
		if i.Invented {
			k++
		}
	}
	return k
}

var chartViews = []struct{ name, value, text string }{
	{"world", "", "world"}, {"north", "north", "north polar"}, {"south", "south", "south polar"},
}

// The default of a control has no value, so that addresses stay short.
func chartColourValue(c string) string {
	if c == ChartColours[0] {
		return ""
	}
	return c
}

func chartAtValue(v ChartView) string {
	if v.IsWhole() {
		return ""
	}
	return v.centreText()
}

func chartZoomValue(v ChartView) string {
	if v.IsWhole() {
		return ""
	}
	return floatText(v.Zoom)
}

func tableOf(f catalogue.Filter, suffix string) string {
	return withFilter("/systems"+suffix, f)
}

func meridianOf(f catalogue.Filter) string { return withFilter("/", f) }

func withFilter(path string, f catalogue.Filter) string {
	q := f.Values()
	for _, k := range []string{"page", "per_page", "sort"} {
		q.Del(k)
	}
	if len(q) == 0 {
		return path
	}
	return path + "?" + q.Encode()
}

func (p ChartPage) figureAddress() string {
	return strings.Replace(p.address(p.View), "/chart", "/figures/chart.svg", 1)
}

// listed are the systems of the list, north to south.
func (p ChartPage) listed() []ChartItem {
	out := slices.Clone(p.Items)
	slices.SortStableFunc(out, func(a, b ChartItem) int { return compareFloat(b.Lat, a.Lat) })
	return out[:min(len(out), chartListLimit)]
}

func (p ChartPage) listSentence() string {
	if len(p.Items) > chartListLimit {
		return fmt.Sprintf("The %d northernmost of %d.", chartListLimit, len(p.Items))
	}
	return fmt.Sprintf("%d of %d in the view.", p.inView(), len(p.Items))
}

// listWords say what the mark says by shape and colour.
func (i ChartItem) listWords(c ChartColouring) string {
	var words []string
	if i.Kind != "submarine" {
		words = append(words, i.Kind)
	}
	if i.Ancient {
		words = append(words, tidyText(i.AgeMa, 4)+" Ma")
	}
	if s := c.Steps[i.Step]; s.Letter != "" && s.Text != i.Kind {
		words = append(words, strings.ToLower(c.Title)+" "+s.Text)
	}
	if len(words) == 0 {
		return ""
	}
	return ", " + strings.Join(words, ", ")
}

// LinesWanted is the box whose centrelines the view can show, and whether it
// is close enough for any.
func (p ChartPage) LinesWanted() (catalogue.BBox, bool) {
	if !p.View.azimuthal() || p.View.Zoom < chartNear || len(p.Items) == 0 {
		return catalogue.BBox{}, false
	}
	b := newChartProjection(p.View, chartW, chartH).bounds()
	box := catalogue.BBox{West: -180, South: max(b.South, -90), East: 180, North: min(b.North, 90)}
	if b.Span < 360 {
		box.West, box.East = wrapLongitude(b.Lon0), wrapLongitude(b.Lon0+b.Span)
	}
	return box, true
}
