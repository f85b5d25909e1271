package views

import (
	"math"
	"slices"
	"strings"

	"fathombend/catalogue"
)

// ChartColours are what the colour of a mark on the chart can carry: numbers
// and choices of the measurement table.
var ChartColours = []string{"slope", "sinuosity", "width", "depth", "age", "feeder", "setting", "margin", "grain", "confinement", "activity", "burial", "kind", "survey", "grade"}

// chartScale is a number as six classes with five limits; the limits are a
// choice of this project for drawing only.
type chartScale struct {
	column, title string
	limits        []float64
}

var chartScales = map[string]chartScale{
	"slope":     {"valley_slope", "Valley slope (m/m)", []float64{0.001, 0.002, 0.004, 0.008, 0.016}},
	"sinuosity": {"sinuosity", "Sinuosity", []float64{1.1, 1.3, 1.6, 2, 2.6}},
	"width":     {"channel_width_m", "Channel width (m)", []float64{100, 300, 600, 1000, 3000}},
	"depth":     {"water_depth_m", "Water depth (m)", []float64{500, 1000, 2000, 3000, 4500}},
	"age":       {"age_ma", "Age (Ma)", []float64{presentLimitMa, 23, 66, 145, 252}},
}

// presentLimitMa: older is ancient, as in the fits.
const presentLimitMa = 5.0

// ChartStep is one class of the key. Letter tells apart what colour alone
// would not: it stands in the mark.
type ChartStep struct {
	Class  string `json:"class"` // r0..r6
	Letter string `json:"letter"`
	Text   string `json:"text"`
	Count  int    `json:"systems"`
}

// ChartColouring is the key, and for each row the class it falls into.
type ChartColouring struct {
	Name  string
	Title string
	Steps []ChartStep
	Of    []int
}

// NewChartColouring classes the rows by one of ChartColours. The last step is
// "not known".
func NewChartColouring(name string, rows []catalogue.Row) ChartColouring {
	c := ChartColouring{Name: name}
	if s, ok := chartScales[name]; ok {
		c.byNumber(s, rows)
	} else {
		c.byChoice(name, rows)
	}
	for _, k := range c.Of {
		c.Steps[k].Count++
	}
	return c
}

func (c *ChartColouring) byNumber(s chartScale, rows []catalogue.Row) {
	c.Title = s.title
	col, _ := catalogue.ColumnByName(s.column)
	n := len(s.limits)
	for i := range n + 1 {
		text := ""
		switch {
		case i == 0 && s.column == "age_ma":
			text = "to 5, or today's sea floor"
		case i == 0:
			text = "under " + floatText(s.limits[0])
		case i == n:
			text = "over " + floatText(s.limits[n-1])
		default:
			text = floatText(s.limits[i-1]) + "–" + floatText(s.limits[i])
		}
		c.Steps = append(c.Steps, ChartStep{Class: "r" + string(rune('1'+i)), Text: text})
	}
	c.Steps = append(c.Steps, ChartStep{Class: "r0", Text: "not known"})
	for i := range rows {
		v := col.Number(&rows[i])
		switch {
		case v.Valid && !math.IsNaN(v.V):
			k, found := slices.BinarySearch(s.limits, v.V)
			if found {
				k++
			}
			c.Of = append(c.Of, k)
		case s.column == "age_ma" && rows[i].Burial == "seafloor":
			c.Of = append(c.Of, 0)
		default:
			c.Of = append(c.Of, n+1)
		}
	}
}

// choiceRamp spreads the choices over the one hue, far apart first.
var choiceRamp = []string{"r6", "r1", "r4", "r2", "r5", "r3"}

func (c *ChartColouring) byChoice(name string, rows []catalogue.Row) {
	c.Title = ColumnLabel(name)
	col, _ := catalogue.ColumnByName(name)
	used := map[string]bool{}
	for i := range rows {
		used[col.Get(&rows[i])] = true
	}
	place := map[string]int{}
	letters := map[string]bool{}
	for _, v := range col.Choices {
		if !used[v] || v == "unknown" {
			continue
		}
		place[v] = len(c.Steps)
		c.Steps = append(c.Steps, ChartStep{Class: choiceRamp[len(c.Steps)%len(choiceRamp)], Letter: freeLetter(v, letters), Text: ChoiceLabel(v)})
	}
	last := len(c.Steps)
	c.Steps = append(c.Steps, ChartStep{Class: "r0", Text: "not known"})
	for i := range rows {
		k, ok := place[col.Get(&rows[i])]
		if !ok {
			k = last
		}
		c.Of = append(c.Of, k)
	}
}

// freeLetter is the first letter of a word that no other word has taken.
func freeLetter(word string, taken map[string]bool) string {
	for _, r := range strings.ToUpper(strings.ReplaceAll(word, "_", "")) + "ABCDEFGHIJKLMNOPQRSTUVWXYZ" {
		if s := string(r); !taken[s] {
			taken[s] = true
			return s
		}
	}
	return ""
}

// chartColourName is a colouring as people read it.
func chartColourName(name string) string {
	if s, ok := chartScales[name]; ok {
		t, _, _ := strings.Cut(s.title, " (")
		return strings.ToLower(t)
	}
	return strings.ToLower(ColumnLabel(name))
}
