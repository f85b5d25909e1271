package seed

import (
	"fmt"
	"math"

	"fathombend/catalogue"
	"fathombend/catalogue/planform"
)

// largestDrawn is where a drawn sinuosity is cut off: above it a reach is
// doubtful, and the doubtful ones are made on purpose.
const largestDrawn = 3.8

// measure draws the sinuosity of every row of a reach from the law, v being
// the scatter of its deposit and system, and fills sizes and slopes with the
// gaps of a real compilation.
func (d *drawer) measure(r *reach, v float64) {
	w := d.scatter.NormFloat64() * BetweenReaches
	for k := range r.rows {
		row := &r.rows[k]
		x := d.law.Excess(row, CoriolisOf(row, row.PalaeolatitudeDeg.V), r.slope)
		d.survey.Expected = append(d.survey.Expected, x)
		x += v + w
		if row.Grade == "quoted" { // somebody else's reach or reading
			x += 0.12 * d.scatter.NormFloat64()
			d.survey.Expected[len(d.survey.Expected)-1] = math.NaN()
		}
		d.setSinuosity(row, x)
		d.fill(row, r)
	}
}

// setSinuosity writes 1 + exp(x) with the decimals a paper would give.
func (d *drawer) setSinuosity(row *catalogue.Row, x float64) {
	p := min(1+math.Exp(x), largestDrawn)
	n := 2
	if p < 1.1 {
		n = 3
	}
	if row.Grade == "quoted" && p > 1.15 {
		n = 1
	}
	row.Sinuosity = catalogue.Num(max(round(p, n), 1.002))
}

// fill writes sizes, slopes and their gaps.
func (d *drawer) fill(row *catalogue.Row, r *reach) {
	has := func(share float64) bool { return d.fixed.Float64() < share }
	full := 1.0
	switch row.Grade {
	case "traced":
		full = 0.75
	case "quoted":
		full = 0.25
	}
	p := row.Sinuosity.V
	if has(0.9 * full) {
		row.ValleySlope = catalogue.Num(significant(r.slope*math.Exp(0.04*d.fixed.NormFloat64()), 2))
		switch {
		case row.Grade != "quoted" && row.Burial == "seafloor" && has(0.35):
			row.ValleySlopeSE = catalogue.Num(significant(0.06*r.slope, 1))
		case row.Grade == "traced" && has(0.5):
			row.SlopeSource, row.SlopeKind = papers[slopes].citation, "regional"
		}
		if has(0.3) {
			row.ChannelSlope = catalogue.Num(significant(row.ValleySlope.V/p, 2))
		}
	} else {
		row.SlopeKind = "unknown"
	}
	depth := r.width / (28 * math.Exp(0.35*d.fixed.NormFloat64()))
	depth = max(r.width/85, min(r.width/10, depth))
	hasWidth := has(0.9 * full)
	if hasWidth {
		row.ChannelWidthM = catalogue.Num(significant(r.width, 2))
		if has(0.75) {
			row.ChannelDepthM = catalogue.Num(significant(depth, 2))
		}
	}
	if has(0.7 * full) {
		row.WavelengthM = catalogue.Num(significant(r.wave*math.Exp(0.05*d.fixed.NormFloat64()), 2))
	}
	d.bendSizes(row, r, has(0.5*full), has(0.4*full))
	if row.Confinement == "levee_confined" && row.Survey == "multibeam" && row.ChannelDepthM.Valid && has(0.7) {
		d.levees(row, depth, r.width)
	}
	if row.Survey == "seismic_3d" && row.Burial == "seafloor" {
		row.NetToGross = catalogue.Num(round(0.2+0.5*d.fixed.Float64(), 2))
	}
	if row.Grade != "quoted" && row.Grade != "traced" {
		if k := paperOf(row); k.se > 0 && has(0.8) {
			row.SinuositySE = catalogue.Num(max(0.001, significant(k.se*(p-1), 1)))
		}
	}
	if row.Grade == "quoted" || row.Grade == "traced" && has(0.5) {
		row.Windows = catalogue.Number{} // the source does not say
	}
	if row.Grade == "quoted" {
		row.WindowM = catalogue.Number{}
	}
}

func paperOf(row *catalogue.Row) *paper {
	for i := range papers {
		if papers[i].citation == row.Source {
			return &papers[i]
		}
	}
	return &papers[census]
}

// bendSizes writes radius and amplitude of the sine-generated curve with the
// row's sinuosity: R_min = lambda/(2 pi omega J0(omega)), and the amplitude
// from apex to axis, drawn numerically. Nearly straight reaches have neither.
func (d *drawer) bendSizes(row *catalogue.Row, r *reach, radius, amplitude bool) {
	p := row.Sinuosity.V
	if p < 1.04 {
		return
	}
	omega := planform.OmegaOf(min(p, 3))
	if radius {
		// The mean of the bends is gentler than the apex of the ideal curve.
		rad := r.wave / (2 * math.Pi * omega * math.J0(omega)) * 1.15 * math.Exp(0.12*d.fixed.NormFloat64())
		row.RadiusM = catalogue.Num(significant(min(max(rad, 1.2*r.width), 18*r.width), 2))
	}
	if amplitude {
		y := 0.0
		for _, q := range planform.SineGeneratedLine(omega, r.wave/math.J0(omega), 1, 24) {
			y = max(y, math.Abs(q.Y))
		}
		row.AmplitudeM = catalogue.Num(significant(y*math.Exp(0.08*d.fixed.NormFloat64()), 2))
	}
}

// levees gives the two heights above the channel floor: the flow runs higher
// on the right bank north of the equator by f U W/g' (geostrophic balance, with
// U = 1.5 m/s and g' = 0.1 m/s2 here), which the levees keep.
func (d *drawer) levees(row *catalogue.Row, depth, width float64) {
	f := 1.458423e-4 * math.Sin(row.LatitudeDeg.V*math.Pi/180)
	tilt := f*1.5*width/0.1 + 0.03*depth*d.fixed.NormFloat64()
	tilt = max(-0.4*depth, min(0.4*depth, tilt))
	row.LeveeLeftM = catalogue.Num(max(1, round(depth-tilt/2, 0)))
	row.LeveeRightM = catalogue.Num(max(1, round(depth+tilt/2, 0)))
}

// note adds a sentence after the invented mark.
func note(row *catalogue.Row, format string, a ...any) {
	row.Notes += " " + fmt.Sprintf(format, a...)
}
