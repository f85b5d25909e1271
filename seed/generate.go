package seed

import (
	"fmt"
	"math"
	"math/rand/v2"

	"fathombend/catalogue"
)

// drawer draws one survey. Every system has its own random streams: one for
// what never changes and one for the scatter, so that adding a system or
// changing the law moves nothing else.
type drawer struct {
	Options
	law    Constants
	survey Survey

	system   int        // running number
	fixed    *rand.Rand // places, sizes, gaps
	scatter  *rand.Rand // u, v, w
	lineRand *rand.Rand // shapes of lines
}

const fixedSeed = 20240611 // any number: it chose the places and gaps that are shown

func (d *drawer) nextSystem() {
	d.system++
	k := uint64(d.system)
	d.fixed = rand.New(rand.NewPCG(fixedSeed, 3*k))
	d.scatter = rand.New(rand.NewPCG(d.Seed, 3*k+1))
	d.lineRand = rand.New(rand.NewPCG(d.Seed, 3*k+2))
}

// reach is one measured reach of a channel: the rows taken from it and the
// truth behind them, of which a record may lack parts.
type reach struct {
	rows  []catalogue.Row // the first one is what the line is drawn to match
	bends int
	width float64 // m
	wave  float64 // m
	slope float64 // m/m
	paper *paper
}

func (d *drawer) deposit(i int) {
	dep := &deposits[i]
	u := rand.New(rand.NewPCG(d.Seed, 1<<32+uint64(i))).NormFloat64() * BetweenDeposits
	for j, s := range dep.systems {
		d.nextSystem()
		v := u + d.scatter.NormFloat64()*BetweenSystems
		base := d.systemRow(dep, s)
		lat, lon, bearing := d.spread(dep, j)
		rs := d.reaches(dep, j, s, base)
		bearing = turnToPlace(rs, lat, lon, bearing, false)
		place(rs, lat, lon, bearing)
		for k := range rs {
			d.measure(&rs[k], v)
		}
		d.store(rs, s.pattern, lat, lon, bearing, dep.depth+60*float64(j))
	}
}

// spread places system j of a deposit about its middle, across the dip and
// alternately to either side, so that neighbours do not lie on one another.
func (d *drawer) spread(dep *deposit, j int) (lat, lon, bearing float64) {
	n := float64(len(dep.systems))
	across := (float64(j) - (n-1)/2) * (0.35 + 0.15*d.fixed.Float64()) // degrees of arc
	along := 0.35 * (d.fixed.Float64() - 0.5)
	if dep.systems[j].pattern == best {
		across, along = 0, 0
	}
	rad := dep.bearing * math.Pi / 180
	north := along*math.Cos(rad) - across*math.Sin(rad)
	east := along*math.Sin(rad) + across*math.Cos(rad)
	lat = dep.lat + north
	lon = dep.lon + east/math.Cos(lat*math.Pi/180)
	return lat, wrap(lon), dep.bearing + 12*d.fixed.NormFloat64()
}

func wrap(lon float64) float64 {
	switch {
	case lon > 180:
		return lon - 360
	case lon <= -180:
		return lon + 360
	}
	return lon
}

// systemRow holds what all rows of a system share.
func (d *drawer) systemRow(dep *deposit, s system) catalogue.Row {
	r := catalogue.Row{
		System: catalogue.Slug(s.name), SystemName: s.name, OtherNames: s.other, ParentDeposit: dep.name, Basin: dep.basin,
		Kind: "submarine", Setting: dep.setting, Margin: dep.margin, Burial: "seafloor", Activity: "active",
		Feeder: dep.feeder, FeederGeometry: dep.points, Grain: dep.grain, LargeRiver: dep.large,
		SlopeState: "present", SlopeKind: "valley", Stacking: "unknown", LateralAccretion: "unknown",
		StructuralDeflection: "unknown", Aggradation: pick(d.fixed, "aggrading", "stable", "incising", "unknown", "unknown"),
		Licence: "CC0", Invented: true, Notes: catalogue.InventedMark,
	}
	if dep.feeder == "glacial" || dep.feeder == "shelf" {
		r.Activity = pick(d.fixed, "relict", "relict", "unknown", "active")
	}
	switch dep.setting {
	case "fan", "rise", "deep_ocean":
		r.Confinement = pick(d.fixed, "levee_confined", "levee_confined", "levee_confined", "unknown")
	case "minibasin":
		r.Confinement = pick(d.fixed, "unconfined", "levee_confined", "confined")
	default:
		r.Confinement = pick(d.fixed, "confined", "levee_confined", "unknown")
	}
	if dep.margin == "active" || dep.margin == "transform" {
		r.StructuralDeflection = pick(d.fixed, "yes", "no", "unknown")
	}
	if c := dep.river; c != nil {
		r.CatchmentLatitudeDeg = catalogue.Num(round(c.lat+0.2*d.fixed.NormFloat64(), 1))
		if d.fixed.Float64() < 0.7 {
			r.CatchmentAreaKm2 = catalogue.Num(significant(c.area, 2))
		}
	}
	if dep.old != nil {
		d.age(&r, dep.old)
	}
	return r
}

// age fills the group "time" and what goes with burial.
func (d *drawer) age(r *catalogue.Row, o *deposition) {
	r.Burial, r.Activity = "buried", "relict"
	age := o.age + 0.3*(o.oldest-o.youngest)*(d.fixed.Float64()-0.5)
	r.AgeMa = catalogue.Num(significant(age, 3))
	r.AgeMinMa, r.AgeMaxMa = catalogue.Num(o.youngest), catalogue.Num(o.oldest)
	r.Unit, r.AgeBasis = o.unit, o.basis
	r.PalaeolatitudeDeg = catalogue.Num(round(o.lat+0.4*d.fixed.NormFloat64(), 1))
	r.PalaeolatitudeSEDeg = catalogue.Num(o.se)
	r.PalaeolatitudeMethod, r.SlopeState = o.method, o.slopeState
	switch o.method {
	case "pole", "rotation":
		r.PoleTable = "Invented poles for the demo"
	}
	r.NetToGross = catalogue.Num(round(0.15+0.6*d.fixed.Float64(), 2))
	r.Stacking = pick(d.fixed, "vertical", "lateral", "mixed", "unknown")
	r.LateralAccretion = pick(d.fixed, "yes", "no", "unknown")
}

// reaches draws the reaches of a system with their sizes; the rows of each
// still lack sinuosity.
func (d *drawer) reaches(dep *deposit, j int, s system, base catalogue.Row) []reach {
	first, other := &papers[dep.sources[0]], &papers[dep.sources[1]]
	width := dep.width * math.Exp(0.25*d.fixed.NormFloat64())
	ratio := 10.5 + 3*d.fixed.Float64() // wavelength over width: science of rivers, 10-14
	slope := dep.slope * math.Exp(0.30*d.fixed.NormFloat64())
	var names []string
	paper := first
	switch s.pattern {
	case reaches, trunk:
		names = []string{"upper", "middle", "lower"}
	case best:
		for i := 1; i <= 30; i++ {
			names = append(names, fmt.Sprintf("R%02d", i))
		}
	default:
		if j%2 == 1 && (s.pattern == single || s.pattern == crest || s.pattern == quoted) {
			paper = other
		}
		names = []string{pick(d.fixed, "", "", "middle", "mapped reach")}
	}
	rs := make([]reach, len(names))
	for i, name := range names {
		t := (float64(i) + 0.5) / float64(len(names)) // 0 upstream to 1 downstream
		if len(names) == 1 {
			t = 0.5
		}
		r := &rs[i]
		r.paper = paper
		r.width = width * (1.15 - 0.3*t) * math.Exp(0.08*d.fixed.NormFloat64())
		r.wave = r.width * ratio * math.Exp(0.04*d.fixed.NormFloat64())
		r.slope = slope * math.Exp(0.9*(0.5-t)) * math.Exp(0.1*d.fixed.NormFloat64())
		r.bends = 12 + 2*d.fixed.IntN(6)
		switch s.pattern {
		case reaches, trunk:
			r.bends = 8 + 2*d.fixed.IntN(3)
		case best:
			r.bends = 4
		}
		row := base
		row.Reach = name
		if d.fixed.Float64() < 0.2 {
			row.Grain = neighbour[row.Grain]
		}
		r.rows = d.rowsOf(s.pattern, i, row, r)
	}
	return rs
}

// neighbour is the next grain class: reaches of one channel differ.
var neighbour = map[string]string{"mud": "mud_sand", "mud_sand": "sand", "sand": "mud_sand", "gravel": "sand"}

// rowsOf lists the rows of one reach by the effort its system saw.
func (d *drawer) rowsOf(p pattern, i int, row catalogue.Row, r *reach) []catalogue.Row {
	by := func(k *paper, kind string) catalogue.Row {
		out := row
		d.method(&out, k, r)
		if kind != "" {
			out.SinuosityKind = kind
		}
		d.windows(&out, k, r)
		return out
	}
	rows := []catalogue.Row{by(r.paper, "")}
	switch {
	case p == peakMean:
		rows = []catalogue.Row{by(r.paper, "peak"), by(r.paper, "mean")}
	case p == quoted:
		rows = append(rows, by(&papers[census], ""))
	case p == crest:
		rows = append(rows, by(&papers[oldCrest], ""))
	case p == bends:
		rows = []catalogue.Row{by(&papers[bendwise], "reach")}
	case p == trunk && i == 1:
		rows = append(rows, by(&papers[census], "peak"), by(&papers[oldCrest], ""))
	case p == best && i == 14:
		rows = append(rows, by(&papers[census], ""))
	}
	return rows
}

// method writes how a paper measured.
func (d *drawer) method(r *catalogue.Row, k *paper, of *reach) {
	r.Source, r.SourceDOI, r.SourceLocator = k.citation, k.doi, pick(d.fixed, k.locators[0], k.locators[1], k.locators[2])
	r.SinuosityKind, r.MeasuredLine, r.ValleyLine = k.kind, k.line, k.valley
	r.Survey, r.Extraction, r.Grade, r.Contributor = k.survey, k.extraction, k.grade, k.contributor
	if k.pixel > 0 {
		r.PixelM = catalogue.Num(k.pixel)
	}
	if k.perWave > 0 {
		r.VertexSpacingM = catalogue.Num(significant(of.wave*1.2/k.perWave, 2))
	}
}

// windows writes window and count for the kinds that are taken from windows.
// The count is that of windows a quarter of their length apart on a reach of
// typical sinuosity.
func (d *drawer) windows(r *catalogue.Row, k *paper, of *reach) {
	switch r.SinuosityKind {
	case "peak", "p90", "mean":
	default:
		return
	}
	if k.grade == "quoted" {
		r.Windows = catalogue.Num(12) // the truth behind a count that the census does not give
		return
	}
	w := 20 * of.width
	if k.windowKm > 0 {
		w = 1000 * k.windowKm
	}
	length := 1.3 * of.wave * float64(of.bends) / 2
	r.WindowM = catalogue.Num(significant(w, 2))
	r.Windows = catalogue.Num(math.Max(1, math.Floor((length-w)/(w/4))+1))
}

func pick(r *rand.Rand, from ...string) string { return from[r.IntN(len(from))] }

// tens are the powers of ten that rounding needs.
var tens = [...]float64{1, 10, 100, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9}

// round rounds to n decimals, n from -9 to 9.
func round(x float64, n int) float64 {
	if n < 0 {
		return math.Round(x/tens[-n]) * tens[-n]
	}
	return math.Round(x*tens[n]) / tens[n]
}

// significant rounds to n significant digits.
func significant(x float64, n int) float64 {
	if x == 0 {
		return 0
	}
	return round(x, min(9, n-1-int(math.Floor(math.Log10(math.Abs(x))))))
}
