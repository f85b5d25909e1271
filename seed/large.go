package seed

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"

	"fathombend/catalogue"
	"fathombend/catalogue/land"
)

// Large draws a catalogue of n systems with three measurements each on the
// average, for load tests, and hands the rows over one at a time, a system's
// rows together. Nothing is kept, so memory does not grow with n. Equal
// arguments give equal rows. It has places, names, supply and sinuosity from
// the law as the demo has, deposits of one to five systems, one river in
// twenty systems and one ancient system in ten, but no lines. Rows come
// without measurement ids. An error of visit ends the drawing and is returned.
func Large(n int, law Law, visit func(catalogue.Row) error) error {
	c, err := ConstantsOf(law)
	if err != nil {
		return err
	}
	g := largeDrawer{drawer: drawer{law: c, Options: Options{Law: law}}, rows: rand.New(rand.NewPCG(fixedSeed, 7))}
	g.fixed, g.scatter = g.rows, g.rows
	for i := range n {
		if g.left == 0 {
			g.nextDeposit(i)
		}
		g.left--
		if err := g.one(i, visit); err != nil {
			return err
		}
	}
	return nil
}

// FillLarge stores a large catalogue in transactions of about 5,000 rows.
func FillLarge(ctx context.Context, s *catalogue.Store, n int, law Law) error {
	const batch = 5000
	var rows []catalogue.Row
	flush := func() error {
		err := s.InsertRows(ctx, rows, nil, 0, "Invented catalogue for load tests")
		rows = rows[:0]
		return err
	}
	err := Large(n, law, func(r catalogue.Row) error {
		rows = append(rows, r)
		if len(rows) < batch {
			return nil
		}
		return flush()
	})
	if err != nil {
		return err
	}
	return flush()
}

type largeDrawer struct {
	drawer
	rows *rand.Rand

	// The deposit at hand.
	left     int // systems still to come
	dep      deposit
	u        float64
	lat, lon float64
}

// somewhere draws a place in water or on land, uniform on the globe between 78
// S and 84 N.
func (g *largeDrawer) somewhere(onLand bool) (lat, lon float64) {
	for {
		lo, hi := math.Sin(-78*math.Pi/180), math.Sin(84*math.Pi/180)
		lat = math.Asin(lo+(hi-lo)*g.rows.Float64()) * 180 / math.Pi
		lon = 360*g.rows.Float64() - 180
		if land.Contains(lat, lon) == onLand {
			return lat, lon
		}
	}
}

func (g *largeDrawer) nextDeposit(i int) {
	r := g.rows
	g.left = 1 + r.IntN(5)
	g.lat, g.lon = g.somewhere(false)
	g.u = r.NormFloat64() * BetweenDeposits
	g.dep = deposit{
		name:    coin(i, 5) + " " + pick(r, "Fan", "Rise", "Apron", "Slope", "Complex"),
		basin:   coin(int(math.Floor((g.lat+90)/15))*24+int((g.lon+180)/15), 11) + " Basin",
		setting: pick(r, "fan", "slope", "rise", "trench", "foredeep", "minibasin", "deep_ocean"),
		margin:  pick(r, "passive", "passive", "active", "transform", "intraplate"),
		feeder:  pick(r, "river", "river", "shelf", "failure"), points: pick(r, "point", "multiple", "linear", "unknown"),
		grain: pick(r, "mud", "mud_sand", "mud_sand", "sand", "gravel"), large: pick(r, "yes", "no", "no", "unknown"),
		width: 700 * math.Exp(0.8*r.NormFloat64()), slope: 0.0045 * math.Exp(0.8*r.NormFloat64()), depth: 500 + 4000*r.Float64(),
	}
	if math.Abs(g.lat) > 50 && r.Float64() < 0.7 {
		g.dep.feeder = "glacial"
	}
	if r.Float64() < 0.1 {
		age := 5 + 300*r.Float64()
		paleo := math.Max(-85, math.Min(85, g.lat+30*r.NormFloat64()))
		g.dep.old = &deposition{age: age, youngest: round(0.97*age, 1), oldest: round(1.03*age, 1), basis: "biostratigraphy",
			lat: paleo, se: round(1+5*r.Float64(), 1), method: pick(r, "given", "inclination", "pole", "rotation"), slopeState: pick(r, "present", "restored")}
	}
}

// one hands over the rows of one system.
func (g *largeDrawer) one(i int, visit func(catalogue.Row) error) error {
	r := g.rows
	river := i%20 == 19
	row := g.systemRow(&g.dep, system{name: coin(i, 1) + " Channel"})
	lat, lon := g.lat, g.lon
	v := g.u + r.NormFloat64()*BetweenSystems
	if river {
		row = g.systemRow(&deposit{setting: "river_valley", margin: "unknown", feeder: "unknown", points: "unknown", grain: g.dep.grain, large: "unknown"}, system{name: coin(i, 1) + " River"})
		row.Kind, row.Confinement = "river", "unknown"
		lat, lon = g.somewhere(true)
	} else {
		for try := range 20 {
			if la, lo := travel(g.lat, g.lon, 360*r.Float64(), 60e3*r.Float64()); try < 19 && !land.Contains(la, lo) {
				lat, lon = la, lo
				break
			}
		}
	}
	width := g.dep.width * math.Exp(0.3*r.NormFloat64())
	if river {
		width = 30 + 400*r.Float64()
	}
	count := 1 + r.IntN(5)
	for k := range count {
		p := &papers[r.IntN(riverB)] // the last two are no measuring papers of the sea
		of := reach{bends: 8 + 2*r.IntN(8), width: width, wave: width * (10.5 + 3*r.Float64()), slope: g.dep.slope * math.Exp(0.3*r.NormFloat64()), paper: p}
		if river {
			of.slope = 0.0002 + 0.002*r.Float64()
		}
		out := row
		out.Reach = fmt.Sprintf("reach %d", k+1)
		g.method(&out, p, &of)
		// A source for some fifty systems, as in a compilation.
		out.Source, out.SourceDOI = fmt.Sprintf("Invented survey report %d. %s", i/50+1, p.citation), ""
		g.windows(&out, p, &of)
		la, lo := travel(lat, lon, 90, 2*width*float64(k))
		out.LatitudeDeg, out.LongitudeDeg = catalogue.Num(round(la, 4)), catalogue.Num(round(lo, 4))
		if river {
			g.setSinuosity(&out, RiverMean+RiverSigma*r.NormFloat64())
		} else {
			g.setSinuosity(&out, g.law.Excess(&out, CoriolisOf(&out, 0), of.slope)+v+r.NormFloat64()*BetweenReaches)
			out.WaterDepthM = catalogue.Num(round(g.dep.depth, -1))
		}
		g.fill(&out, &of)
		if err := visit(out); err != nil {
			return err
		}
	}
	return nil
}

var (
	onsets  = []string{"Qua", "Vel", "Tor", "Isk", "Mar", "Ond", "Zef", "Bru", "Kel", "Ypt", "Dra", "Fen", "Gal", "Hux", "Jor", "Lum", "Nar", "Pel", "Rus", "Sum"}
	middles = []string{"qua", "ve", "tho", "di", "mbra", "ko", "lle", "rri", "sha", "nu", "go", "ste", "vra", "xi", "dro", "mpe", "cto", "lyn", "fa", "zu"}
	codas   = []string{"quel", "rune", "mbel", "vand", "xor", "thrim", "lusk", "dross", "nathe", "voq", "zarn", "pelle", "gund", "mire", "skane", "trix", "lode", "brax", "nuse", "vark"}
)

// coin makes a name from a number; equal numbers of one family give equal
// names, different ones different names.
func coin(i, family int) string {
	k := (i + 3*family) % 20
	name := onsets[k] + middles[(i/20+family)%20] + codas[(i/400)%20]
	if i >= 8000 {
		name += fmt.Sprintf(" %d", i/8000+1)
	}
	return name
}
