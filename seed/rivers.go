package seed

import (
	"math"

	"fathombend/catalogue"
)

// river draws one system of the control group: its sinuosity knows nothing of
// latitude, supply or slope, under every law.
func (d *drawer) river(i int) {
	p := &rivers[i]
	d.nextSystem()
	base := catalogue.Row{
		System: catalogue.Slug(p.name), SystemName: p.name, Basin: p.basin, Kind: "river", Setting: "river_valley", Margin: p.margin,
		Burial: "seafloor", Activity: "active", Confinement: "unknown", Aggradation: "unknown", StructuralDeflection: "unknown",
		Feeder: "unknown", FeederGeometry: "unknown", Grain: p.grain, LargeRiver: "unknown",
		SlopeState: "present", SlopeKind: "valley", Stacking: "unknown", LateralAccretion: "unknown",
		Licence: "CC0", Invented: true, Notes: catalogue.InventedMark,
	}
	k := &papers[riverA]
	if i%3 == 2 {
		k = &papers[riverB]
	}
	r := reach{paper: k, bends: 16 + 2*d.fixed.IntN(5), width: p.width, wave: p.width * (10.5 + 3*d.fixed.Float64()), slope: p.slope}
	r.rows = d.rowsOf(p.pattern, 0, base, &r)
	rs := []reach{r}
	bearing := turnToPlace(rs, p.lat, p.lon, p.bearing, true)
	place(rs, p.lat, p.lon, bearing)
	x := RiverMean + RiverSigma*d.scatter.NormFloat64()
	for n := range rs[0].rows {
		row := &rs[0].rows[n]
		d.setSinuosity(row, x+KindTerm(row.SinuosityKind, int(row.Windows.V)))
		d.fill(row, &rs[0])
		d.survey.Expected = append(d.survey.Expected, math.NaN())
	}
	// Rivers run some way above the sea: depth counts down.
	d.store(rs, p.pattern, p.lat, p.lon, bearing, -60-900*math.Abs(math.Sin(p.lon)))
}
