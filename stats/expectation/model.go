package expectation

import (
	"cmp"
	"math"
	"slices"

	"fathombend/stats/earth"
)

// The names of the explanations, in the order they are shown.
const (
	nameCoriolis = "coriolis"
	nameLatitude = "latitude"
	nameClimate  = "climate"
	nameSlope    = "slope"
	nameSupply   = "supply"
	nameAll      = "all"
	nameNone     = "none"
)

// model is one explanation: which columns it looks at. Columns are an
// intercept, then plain columns (centred), then category columns, which are
// shrunk towards no departure as if ridge further deposits without one had
// been seen; so a level seen in one deposit says little, and a level never
// seen says nothing.
type model struct {
	name, text string
	weighted   bool // takes part in the combined expectation
	modernOnly bool
	plain      []column
	climate    bool // category columns for the climate states
	supply     bool // category columns for feeder, grain, large river
}

// ridge is the number of deposits a level's departure is shrunk by.
const ridge = 2

type column struct {
	name string
	of   func(*inputs) float64 // NaN = not known
	// faded columns are 0 (their mean) outside icehouse times.
	faded bool
}

// fUnit turns ratio*|sin lat| into |f| in 1e-4 s-1: 2 Omega0 * 1e4.
const fUnit = 2 * 7.292115e-5 * 1e4

var (
	columnF     = column{name: "|f|, 1e-4 s-1", of: func(in *inputs) float64 { return fUnit * in.ratio * in.sin }}
	columnSin   = column{name: "sin |latitude|", of: func(in *inputs) float64 { return in.sin }}
	columnIce   = column{name: "sin |latitude| in icehouse times", of: func(in *inputs) float64 { return in.sin }, faded: true}
	columnSlope = column{name: "log10 valley slope", of: func(in *inputs) float64 { return in.logSlope }}
)

// state is a climate state; the zero value is "not known".
type state int8

const (
	icehouse state = iota + 1
	greenhouse
	coolGreenhouse
)

var stateNames = map[state]string{icehouse: "icehouse", greenhouse: "greenhouse", coolGreenhouse: "cool greenhouse"}

// stateAt looks an age in Ma up in a table of climate states.
func stateAt(table earth.ClimateTable, ageMa float64) state {
	s, _ := table.At(ageMa)
	return stateNamed(s.State)
}

func stateNamed(name string) state {
	for s, n := range stateNames {
		if n == name {
			return s
		}
	}
	return 0
}

// CheckClimate refuses a table whose states the explanations do not know, or
// whose intervals overlap: an age has one state.
func CheckClimate(table earth.ClimateTable) error {
	sorted := slices.Clone(table)
	slices.SortFunc(sorted, func(a, b earth.ClimateState) int { return cmp.Compare(a.TopMa, b.TopMa) })
	for i, c := range sorted {
		switch {
		case stateNamed(c.State) == 0:
			return refuse("climate_table", "%q of %q is not a climate state: expected icehouse, greenhouse or cool greenhouse", c.State, c.Name)
		case !(c.TopMa >= 0 && c.BaseMa > c.TopMa && c.BaseMa <= oldestMa):
			return refuse("climate_table", "%q runs from %g to %g Ma: expected base_ma above top_ma, both from 0 to %d", c.Name, c.BaseMa, c.TopMa, oldestMa)
		case i > 0 && c.TopMa < sorted[i-1].BaseMa:
			return refuse("climate_table", "%q and %q overlap: expected one climate state for each age", sorted[i-1].Name, c.Name)
		}
	}
	if len(sorted) > 0 && sorted[0].TopMa > 0 {
		return refuse("climate_table", "it starts at %g Ma: expected an interval that reaches 0 Ma, since most rows are of today", sorted[0].TopMa)
	}
	return nil
}

// oldestMa is the age of the Earth, rounded up.
const oldestMa = 4600

// warmStates have category columns; icehouse is the baseline.
var warmStates = [...]state{greenhouse, coolGreenhouse}

// models lists the rival explanations.
func models() []model {
	return []model{
		{name: nameCoriolis, weighted: true, plain: []column{columnF},
			text: "Planform goes with the Coriolis parameter at the time: ln(P - 1) is a straight line in |f|, with the rotation rate of each row's age."},
		{name: nameLatitude, modernOnly: true, plain: []column{columnSin},
			text: "Planform goes with latitude itself, whatever the spin: ln(P - 1) is a straight line in sin|latitude| on modern rows. On these it is the same explanation as the Coriolis parameter, so the two share one weight, written beside coriolis."},
		{name: nameClimate, weighted: true, plain: []column{columnIce}, climate: true,
			text: "Planform goes with climate state: the pattern with latitude belongs to icehouse times, when ice feeds the high latitudes, and fades to the mean in a greenhouse."},
		{name: nameSlope, weighted: true, plain: []column{columnSlope},
			text: "Planform goes with valley slope: ln(P - 1) is a straight line in log10 of the slope."},
		{name: nameSupply, weighted: true, supply: true,
			text: "Planform goes with supply: feeder, grain and a large river, each level's departure from the mean shrunk as if two further deposits without one had been seen."},
		{name: nameAll, weighted: true, plain: []column{columnF, columnSlope}, climate: true, supply: true,
			text: "Coriolis parameter, slope, supply and climate state all together."},
		{name: nameNone, weighted: true,
			text: "Planform goes with none of these: the spread of the chosen rows as it is."},
	}
}

// design turns inputs into the columns of one model, for the rows of a frame.
type design struct {
	model
	centre []float64 // of plain columns
	names  []string
	factor [len(factors)]int // first column of each factor
	warm   int               // first column of the climate states
	p      int
	fixed  int // columns before the category columns, intercept included
}

func newDesign(m model, f *frame) *design {
	d := &design{model: m, names: []string{"intercept"}, centre: make([]float64, len(m.plain))}
	for k, c := range m.plain {
		var sum, w float64
		for i := range f.obs {
			if v := c.of(&f.obs[i].inputs); !math.IsNaN(v) && d.uses(&f.obs[i]) {
				sum, w = sum+v*f.obs[i].weight, w+f.obs[i].weight
			}
		}
		if w > 0 {
			d.centre[k] = sum / w
		}
		d.names = append(d.names, c.name)
	}
	d.fixed = len(d.names)
	if m.supply {
		for k, name := range factors {
			d.factor[k] = len(d.names)
			for _, level := range f.levels[k] {
				d.names = append(d.names, name+" "+level)
			}
		}
	}
	if m.climate {
		d.warm = len(d.names)
		for _, s := range warmStates {
			d.names = append(d.names, stateNames[s])
		}
	}
	d.p = len(d.names)
	return d
}

func (d *design) uses(ob *observation) bool { return ob.modern || !d.modernOnly }

// columns fills x with the columns of in; false when a plain column is not
// known.
func (d *design) columns(in *inputs, x []float64) bool {
	clear(x)
	x[0] = 1
	for k, c := range d.plain {
		v := c.of(in) - d.centre[k]
		if math.IsNaN(v) {
			return false
		}
		if c.faded && in.state != icehouse {
			v = 0
		}
		x[1+k] = v
	}
	if d.supply {
		for k := range factors {
			if l := in.level[k]; l >= 0 {
				x[d.factor[k]+int(l)] = 1
			}
		}
	}
	if d.climate {
		for k, s := range warmStates {
			if in.state == s {
				x[d.warm+k] = 1
			}
		}
	}
	return true
}

// value is the fitted ln(P - 1) of in under parameters beta, with unknown
// plain columns at their mean.
func (d *design) value(in *inputs, beta []float64) float64 {
	v := beta[0]
	for k, c := range d.plain {
		if c.faded && in.state != icehouse {
			continue
		}
		if x := c.of(in) - d.centre[k]; !math.IsNaN(x) {
			v += x * beta[1+k]
		}
	}
	if d.supply {
		for k := range factors {
			if l := in.level[k]; l >= 0 {
				v += beta[d.factor[k]+int(l)]
			}
		}
	}
	if d.climate {
		for k, s := range warmStates {
			if in.state == s {
				v += beta[d.warm+k]
			}
		}
	}
	return v
}

// Explanations lists the rival explanations by name and sentence, for the
// methods page.
func Explanations() []Explanation {
	var out []Explanation
	for _, m := range models() {
		out = append(out, Explanation{Name: m.name, Text: m.text})
	}
	return out
}
