package seed

import (
	"math"

	"fathombend/catalogue"
)

// spoil makes a few records doubtful, each in a way that a check of the
// catalogue should notice. None is refused: they are what a real compilation
// holds until a curator has looked.
func (d *drawer) spoil() {
	spoil := func(system, column, what string, change func(r *catalogue.Row)) {
		for i := range d.survey.Rows {
			r := &d.survey.Rows[i]
			if r.SystemName == system {
				change(r)
				d.survey.Doubtful = append(d.survey.Doubtful, Doubt{Row: i, Column: column, What: what})
				d.survey.Expected[i] = math.NaN()
				return
			}
		}
	}
	spoil("Wexoril Middle Channel", "valley_slope", "a buried channel that dips the wrong way today", func(r *catalogue.Row) {
		r.ValleySlope, r.ChannelSlope, r.SlopeState = catalogue.Num(-0.0021), catalogue.Number{}, "present"
		note(r, "Tilted after burial; not restored.")
	})
	spoil("Okelluin Channel", "sinuosity", "a reach sinuosity above 4", func(r *catalogue.Row) {
		r.Sinuosity, r.SinuosityKind, r.ChannelSlope, r.SinuositySE = catalogue.Num(4.2), "reach", catalogue.Number{}, catalogue.Number{}
		r.RadiusM, r.AmplitudeM, r.Windows, r.WindowM = catalogue.Number{}, catalogue.Number{}, catalogue.Number{}, catalogue.Number{}
		note(r, "Read from a small figure.")
	})
	spoil("Mzambeluke Channel", "channel_depth_m", "width over depth far beyond 150", func(r *catalogue.Row) {
		r.ChannelWidthM, r.ChannelDepthM = catalogue.Num(9400), catalogue.Num(11)
		r.WavelengthM, r.RadiusM, r.AmplitudeM = catalogue.Number{}, catalogue.Number{}, catalogue.Number{}
		r.LeveeLeftM, r.LeveeRightM = catalogue.Number{}, catalogue.Number{}
	})
	spoil("Namquethe Channel", "vertex_spacing_m", "vertices too far apart for the bends", func(r *catalogue.Row) {
		r.WavelengthM, r.VertexSpacingM = catalogue.Num(8200), catalogue.Num(4000)
	})
	spoil("Penquabeth Channel", "channel_slope", "sinuosity and the two slopes disagree", func(r *catalogue.Row) {
		r.ValleySlope, r.ChannelSlope = catalogue.Num(0.0046), catalogue.Num(0.0021)
	})
	d.spoilCopy("Merrukai Channel")
	d.spoilAge("Xanthuvel Channel")
}

// spoilCopy adds a near-duplicate of the first row of a system: the same
// source, line, kind and sinuosity two kilometres away.
func (d *drawer) spoilCopy(system string) {
	for _, r := range d.survey.Rows {
		if r.SystemName != system {
			continue
		}
		r.LatitudeDeg.V = round(r.LatitudeDeg.V+0.018, 3)
		r.SourceLocator = "Table 3, last row"
		d.survey.Doubtful = append(d.survey.Doubtful, Doubt{Row: len(d.survey.Rows), Column: "sinuosity", What: "the same reach of the same source once more"})
		d.survey.Expected = append(d.survey.Expected, math.NaN())
		d.add(r)
		return
	}
}

// spoilAge takes the palaeolatitude from the row a census quotes, and gives it
// a slope in degrees. It is one row because a slope of 0.36 would decide every
// fit on slope by itself: as a row that fits at the time of deposition leave
// out, it shows what a check is for without spoiling the first page.
func (d *drawer) spoilAge(system string) {
	for i := range d.survey.Rows {
		r := &d.survey.Rows[i]
		if r.SystemName == system && r.Grade == "quoted" {
			r.PalaeolatitudeDeg, r.PalaeolatitudeSEDeg, r.PalaeolatitudeMethod, r.PoleTable = catalogue.Number{}, catalogue.Number{}, "", ""
			r.ValleySlope, r.ValleySlopeSE, r.ChannelSlope = catalogue.Num(0.36), catalogue.Number{}, catalogue.Number{}
			note(r, "Slope as printed in the source.")
			d.survey.Doubtful = append(d.survey.Doubtful,
				Doubt{Row: i, Column: "palaeolatitude_deg", What: "an age without a palaeolatitude"},
				Doubt{Row: i, Column: "valley_slope", What: "a slope in degrees in the m/m column"})
			return
		}
	}
}
