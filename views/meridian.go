package views

import (
	"math"
	"slices"
	"strconv"
	"sync"

	"github.com/a-h/templ"

	"fathombend/catalogue"
)

// MeridianPage is everything the opening page shows.
type MeridianPage struct {
	Page
	Filter   catalogue.Filter
	Facets   []catalogue.Facet
	Items    []MeridianItem // the systems under the filter, of very many a share of each latitude
	Passing  int            // systems under the filter
	Layouts  *MeridianLayouts
	Total    int    // systems in the catalogue
	Folded   bool   // latitudes folded onto |latitude|
	Colour   string // slope, feeder, grade, age
	Headline string // the answer, or why there is none
	Working  bool   // the answer is still being computed
	Rows     int    // measurements behind the headline
	Clusters int
	// What the expectations were fitted on.
	ExpectedRows, ExpectedFrom int

	Expected []MeridianExpected // at 0, 15 ... 75 degrees
	Response string             // which sinuosity is expected, in words

	FigureHref   string         // the drawing as a file
	plain        bool           // drawn as a file: no links
	Spin         []MeridianSpin // one palaeolatitude at several ages, under the Coriolis explanation alone
	SpinLatitude float64
}

// analysisHref is the address of the analysis behind the headline: the same
// rows, and sinuosity as it stands.
func (m MeridianPage) analysisHref() templ.SafeURL {
	q := m.Filter.Values()
	for _, name := range []string{"sort", "page", "per_page"} {
		q.Del(name)
	}
	q.Set("scale", "raw")
	return templ.SafeURL("/regression?" + q.Encode())
}

// MeridianDrawn is about how many systems are drawn: more ribbons than that are
// neither told apart nor quick to load.
const MeridianDrawn = 1200

// MeridianSpin is the expectation at the rotation rate of one age.
type MeridianSpin struct {
	AgeMa, DayH, Ratio float64
	MeridianExpected
}

// MeridianItem is one system: its best measurement, at the latitude it was
// made at.
type MeridianItem struct {
	Slug, Name string
	P          float64 // sinuosity
	PKind      string
	Line       string
	Latitude   float64 // signed degrees; the palaeolatitude of an ancient system
	Ancient    bool    // older than 5 Ma
	Restored   bool    // Latitude is a palaeolatitude
	AgeMa      float64 // NaN = today's sea floor, or unknown
	Slope      float64 // m/m, NaN unknown
	WidthM     float64 // NaN unknown
	Kind       string
	Feeder     string
	Grade      string
}

// MeridianExpected is the expectation for one new system at a latitude.
type MeridianExpected struct {
	AbsLatitude   float64 // degrees
	P10, P50, P90 float64
	Why           string // why there is none, "" when there is one
}

// MeridianColours are what colour can carry.
var MeridianColours = []string{"slope", "feeder", "grade", "age"}

// Geometry of the meridian in page units.
const (
	meridianW     = 1180.0
	meridianLeft  = 74.0 // axis letters
	meridianRight = 216.0
	meridianTop   = 26.0
	meridianFoot  = 14.0
	unfoldedPer   = 7.4  // page units a degree
	foldedPer     = 10.5 // page units a degree
	letterRoom    = 8.0  // right of a ribbon, for the letter that repeats a colour
	maxShift      = 3.0  // degrees a ribbon may be moved off its latitude to stay on the page
)

// ribbonLengths are the axis lengths tried, longest first: the first with
// which every system finds a place is taken.
var ribbonLengths = []float64{104, 94, 84, 74, 66, 58, 50, 43, 37, 31, 26, 22}

// placed is one ribbon with its place on the page.
type placed struct {
	MeridianItem
	x, y   float64 // page, of the start of its axis
	shift  float64 // page units it was moved off its latitude
	ribbon Shape
}

// meridianLayout is the geometry of one drawing.
type meridianLayout struct {
	width       float64
	left        float64 // room for the letters of the axis
	expectAxis  float64 // length of an expected ribbon's axis
	axis        float64 // length of a ribbon's axis
	lo, hi      float64 // degrees of the vertical axis
	per         float64 // page units a degree
	folded      bool
	height      float64
	ribbons     []placed
	leftOut     int // systems that found no place at the smallest size
	shifted     int
	farthest    float64 // degrees, the largest shift
	ribbonsEdge float64
}

func (m meridianLayout) y(lat float64) float64 { return meridianTop + (m.hi-lat)*m.per }

// MeridianLayouts keeps the drawings of one set of systems, unfolded and folded,
// each made when first asked for. Safe for concurrent use.
type MeridianLayouts struct {
	items []MeridianItem
	once  [2]sync.Once
	held  [2]meridianLayout
}

// NewMeridianLayouts of items, which must not change afterwards.
func NewMeridianLayouts(items []MeridianItem) *MeridianLayouts { return &MeridianLayouts{items: items} }

func (l *MeridianLayouts) layout(folded bool) meridianLayout {
	k := 0
	if folded {
		k = 1
	}
	l.once[k].Do(func() { l.held[k] = layoutMeridian(l.items, folded) })
	return l.held[k]
}

// layoutMeridian places every ribbon at its latitude and slides it right until
// it touches no other. A latitude with no room left on the page moves a ribbon
// up or down by at most maxShift; if that is not enough all ribbons are drawn
// smaller; at the smallest size the lowest-graded are left out, and counted.
func layoutMeridian(items []MeridianItem, folded bool) meridianLayout {
	m := meridianLayout{folded: folded, per: unfoldedPer, width: meridianW, left: meridianLeft, expectAxis: 92, ribbonsEdge: meridianW - meridianRight}
	if folded {
		m.per = foldedPer
	}
	return m.filled(items)
}

// filled lays items out on an empty layout.
func (m meridianLayout) filled(items []MeridianItem) meridianLayout {
	folded := m.folded
	m.lo, m.hi = meridianRange(items, folded)
	m.height = m.y(m.lo) + meridianFoot
	items = slices.Clone(items)
	slices.SortStableFunc(items, func(a, b MeridianItem) int {
		if d := compareFloat(m.lat(b), m.lat(a)); d != 0 {
			return d
		}
		return compareFloat(a.P, b.P)
	})
	for _, m.axis = range ribbonLengths {
		if m.place(items) == 0 {
			return m
		}
	}
	// Still too many: the best-graded go first, and the rest is counted.
	slices.SortStableFunc(items, func(a, b MeridianItem) int { return gradeRank(a.Grade) - gradeRank(b.Grade) })
	m.leftOut = m.place(items)
	slices.SortStableFunc(m.ribbons, func(a, b placed) int { return compareFloat(a.y, b.y) })
	return m
}

func (m meridianLayout) lat(i MeridianItem) float64 {
	if m.folded {
		return math.Abs(i.Latitude)
	}
	return i.Latitude
}

// meridianRange is the vertical axis: whole fives around the systems with room
// for a ribbon, at least from the equator to 60 degrees.
func meridianRange(items []MeridianItem, folded bool) (lo, hi float64) {
	lo, hi = -30, 60
	for _, i := range items {
		lo, hi = min(lo, i.Latitude), max(hi, i.Latitude)
	}
	if folded {
		return -5, min(90, math.Ceil((max(hi, -lo)+2)/5)*5)
	}
	return max(-90, math.Floor((lo-2)/5)*5), min(90, math.Ceil((hi+2)/5)*5)
}

// place tries one ribbon length and returns how many found no place.
func (m *meridianLayout) place(items []MeridianItem) (without int) {
	m.ribbons, m.shifted, m.farthest = m.ribbons[:0], 0, 0
	g := newCrowd(m.height)
	pad := m.axis * 0.07
	for _, it := range items {
		r := RibbonShape(it.P, m.axis)
		half := max(r.Half, 2) + pad
		y0 := m.y(m.lat(it))
		best, bestShift := math.Inf(1), 0.0
		for _, s := range shifts(maxShift*m.per, m.axis) {
			if y0+s-half < 0 || y0+s+half > m.height {
				continue
			}
			x := g.free(m.left-r.Left+4, y0+s-half, y0+s+half, r.Left, r.Right, pad)
			if x+r.Right <= m.ribbonsEdge-8 {
				best, bestShift = x, s
				break
			}
		}
		if math.IsInf(best, 1) {
			without++
			continue
		}
		if bestShift != 0 {
			m.shifted++
			m.farthest = max(m.farthest, math.Abs(bestShift)/m.per)
		}
		y := y0 + bestShift
		g.take(best+r.Left-pad, best+r.Right+pad+letterRoom, y-half, y+half)
		m.ribbons = append(m.ribbons, placed{MeridianItem: it, x: best, y: y, shift: bestShift, ribbon: r})
	}
	return without
}

// shifts are the offsets tried, nearest first.
func shifts(limit, axis float64) []float64 {
	out := []float64{0}
	step := max(axis/16, 2)
	for s := step; s <= limit; s += step {
		out = append(out, -s, s)
	}
	return out
}

// crowd knows what is taken, by rows of the page.
type crowd struct {
	rows [][][4]float64
}

const crowdRow = 16.0

// hair is far less than can be seen and far more than rounding, page units.
const hair = 1e-6

func newCrowd(height float64) *crowd {
	return &crowd{rows: make([][][4]float64, int(height/crowdRow)+2)}
}

func (g *crowd) span(y0, y1 float64) (int, int) {
	last := len(g.rows) - 1
	return min(max(int(y0/crowdRow), 0), last), min(max(int(y1/crowdRow), 0), last)
}

func (g *crowd) take(x0, x1, y0, y1 float64) {
	a, b := g.span(y0, y1)
	for i := a; i <= b; i++ {
		g.rows[i] = append(g.rows[i], [4]float64{x0, x1, y0, y1})
	}
}

// free is the leftmost start at or right of x where the span from left to
// right of it is free between y0 and y1. Touching within a hair is free:
// x moved to the end of a span must not be found inside it again by rounding,
// which would never end.
func (g *crowd) free(x, y0, y1, left, right, pad float64) float64 {
	a, b := g.span(y0, y1)
	for moved := true; moved; {
		moved = false
		for i := a; i <= b; i++ {
			for _, t := range g.rows[i] {
				if t[2] < y1 && t[3] > y0 && t[0] < x+right+pad && t[1] > x+left-pad+hair {
					x, moved = t[1]-left+pad, true
				}
			}
		}
	}
	return x
}

func gradeRank(g string) int {
	return slices.Index([]string{"remeasured", "surveyed", "traced", "quoted"}, g)
}

func compareFloat(a, b float64) int {
	switch {
	case a < b:
		return -1
	case a > b:
		return 1
	}
	return 0
}

// hungAt is 12.4° S.
func hungAt(v float64) string {
	return FormatLatitude(math.Round(v*10) / 10)
}

// title names a system and gives its values.
func (i MeridianItem) title() string {
	s := i.Name + ", sinuosity " + strconv.FormatFloat(i.P, 'f', 2, 64) + " (" + ChoiceLabel(i.PKind) + ")"
	where := hungAt(i.Latitude)
	if i.Restored {
		where = "palaeolatitude " + where
	} else if i.Ancient {
		where = "today at " + where + ", no palaeolatitude"
	}
	s += ", " + where
	if !math.IsNaN(i.AgeMa) && i.AgeMa > 0 {
		s += ", " + strconv.FormatFloat(i.AgeMa, 'g', 4, 64) + " Ma"
	}
	if i.Slope > 0 {
		s += ", valley slope " + strconv.FormatFloat(roundSignificant(i.Slope, 2), 'f', -1, 64)
	}
	return s + ", " + i.Grade
}
