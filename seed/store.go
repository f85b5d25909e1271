package seed

import (
	"fmt"
	"math"

	"fathombend/catalogue"
)

// store draws the line of a system, reads off it what is read off a line, and
// adds rows and lines to the survey.
func (d *drawer) store(rs []reach, p pattern, lat, lon, bearing, depth float64) {
	if !d.Centrelines {
		for i := range rs {
			for k := range rs[i].rows {
				r := &rs[i].rows[k]
				r.LatitudeDeg.V, r.LongitudeDeg.V = round(r.LatitudeDeg.V, 3), round(r.LongitudeDeg.V, 3)
				d.add(*r)
			}
		}
		return
	}
	c := d.draw(rs, lat, lon, bearing, depth)
	for i := range rs {
		d.locate(&rs[i], c.shapes[i], c.spots[i])
		for k := range rs[i].rows {
			row := &rs[i].rows[k]
			if k > 0 || p == best {
				d.add(*row)
				continue
			}
			line := centreline(row, c.shapes[i], c.spots[i], rs[i].width)
			// The law took the windows of a reach of typical length; the record
			// counts those of the line that was drawn.
			if row.Windows.Valid {
				row.Windows = catalogue.Num(float64(len(line.Sinuosities)))
			}
			line.Measurement = d.add(*row)
			d.survey.Centrelines = append(d.survey.Centrelines, line)
		}
	}
	switch p {
	case bends:
		d.addBends(&rs[0], c.shapes[0], c.spots[0])
	case best:
		d.addWhole(rs, c)
	}
}

// add numbers a row and appends it.
func (d *drawer) add(r catalogue.Row) string {
	r.Measurement = fmt.Sprintf("m%06d", len(d.survey.Rows)+1)
	d.survey.Rows = append(d.survey.Rows, r)
	return r.Measurement
}

// locate writes the places of a reach, as precisely as each source would.
func (d *drawer) locate(r *reach, s shape, part []spot) {
	n := len(part) - 1
	mid, first, last := part[n/2], part[0], part[n]
	length := 0.0
	for i := range n {
		length += math.Hypot(s.x[i+1]-s.x[i], s.y[i+1]-s.y[i])
	}
	ends, long := d.fixed.Float64() < 0.6, d.fixed.Float64() < 0.8
	for k := range r.rows {
		row := &r.rows[k]
		digits := 3
		if row.Extraction == "figure" {
			digits = 2
		}
		if row.Grade == "quoted" {
			digits = 1
		}
		row.LatitudeDeg, row.LongitudeDeg = catalogue.Num(round(mid.lat, digits)), catalogue.Num(round(mid.lon, digits))
		if row.Grade == "quoted" {
			continue
		}
		row.WaterDepthM = depthOf(row, mid.depth)
		if ends {
			row.StartLatitudeDeg, row.StartLongitudeDeg = catalogue.Num(round(first.lat, digits)), catalogue.Num(round(first.lon, digits))
			row.EndLatitudeDeg, row.EndLongitudeDeg = catalogue.Num(round(last.lat, digits)), catalogue.Num(round(last.lon, digits))
		}
		if long {
			row.ReachLengthM = catalogue.Num(significant(length, 3))
		}
	}
}

// depthOf is the water depth over a reach; a buried channel lies under it, so
// that the depth of its line says nothing about the water.
func depthOf(row *catalogue.Row, depth float64) catalogue.Number {
	if row.Kind != "submarine" {
		return catalogue.Number{}
	}
	return catalogue.Num(round(depth, -1))
}

// addBends adds four bends read off the drawn line of a reach.
func (d *drawer) addBends(r *reach, s shape, part []spot) {
	all := s.bendsOf()
	if len(all) < 4 {
		return
	}
	from := (len(all) - 4) / 2
	for i, b := range all[from : from+4] {
		row := r.rows[0]
		row.Reach, row.SinuosityKind, row.ValleyLine = fmt.Sprintf("bend %d", from+i+1), "bend", "inflections"
		row.Sinuosity = catalogue.Num(max(1.002, round(b.sinuosity, 3)))
		row.SinuositySE, row.WindowM, row.Windows, row.RadiusM = catalogue.Number{}, catalogue.Number{}, catalogue.Number{}, catalogue.Number{}
		row.LatitudeDeg, row.LongitudeDeg = catalogue.Num(round(part[b.at].lat, 3)), catalogue.Num(round(part[b.at].lon, 3))
		row.StartLatitudeDeg, row.StartLongitudeDeg, row.EndLatitudeDeg, row.EndLongitudeDeg = catalogue.Number{}, catalogue.Number{}, catalogue.Number{}, catalogue.Number{}
		row.WavelengthM, row.AmplitudeM = catalogue.Num(significant(2*b.chord, 3)), catalogue.Num(significant(b.amplitude, 2))
		row.ReachLengthM = catalogue.Num(significant(b.chord*b.sinuosity, 3))
		row.ChannelSlope, row.ValleySlopeSE = catalogue.Number{}, catalogue.Number{}
		d.add(row)
		d.survey.Expected = append(d.survey.Expected, math.NaN())
	}
}

// addWhole adds the peak of the whole well measured channel, read off its line.
func (d *drawer) addWhole(rs []reach, c course) {
	mid := &rs[len(rs)/2]
	row := mid.rows[0]
	var whole shape
	whole.x, whole.y = c.flat()
	var spots []spot
	width := 0.0
	for i, part := range c.spots {
		if i > 0 {
			part = part[1:]
		}
		spots = append(spots, part...)
		width += rs[i].width / float64(len(rs))
	}
	row.Reach, row.SinuosityKind = "whole channel", "peak"
	row.WindowM = catalogue.Num(significant(20*width, 2))
	row.Windows = catalogue.Num(float64(len(whole.windows(row.WindowM.V))))
	row.Sinuosity = catalogue.Num(round(whole.sinuosity(target{kind: "peak", window: row.WindowM.V}), 2))
	row.SinuositySE = catalogue.Num(0.02)
	first, last := spots[0], spots[len(spots)-1]
	row.StartLatitudeDeg, row.StartLongitudeDeg = catalogue.Num(round(first.lat, 3)), catalogue.Num(round(first.lon, 3))
	row.EndLatitudeDeg, row.EndLongitudeDeg = catalogue.Num(round(last.lat, 3)), catalogue.Num(round(last.lon, 3))
	length := 0.0
	for i := 1; i < len(whole.x); i++ {
		length += math.Hypot(whole.x[i]-whole.x[i-1], whole.y[i]-whole.y[i-1])
	}
	row.ReachLengthM = catalogue.Num(significant(length, 3))
	n := len(whole.x) - 1
	slope := (last.depth - first.depth) / math.Hypot(whole.x[n], whole.y[n])
	row.ValleySlope = catalogue.Num(significant(slope, 2))
	row.ValleySlopeSE, row.ChannelSlope, row.RadiusM, row.AmplitudeM = catalogue.Number{}, catalogue.Number{}, catalogue.Number{}, catalogue.Number{}
	row.WavelengthM = catalogue.Num(significant(2*length/float64(4*len(rs))/1.4, 2))
	row.ChannelWidthM, row.ChannelDepthM = catalogue.Num(significant(width, 2)), catalogue.Number{}
	row.LeveeLeftM, row.LeveeRightM = catalogue.Number{}, catalogue.Number{}
	row.Measurement = d.add(row)
	d.survey.Expected = append(d.survey.Expected, math.NaN())
	d.survey.Centrelines = append(d.survey.Centrelines, centreline(&row, whole, spots, width))
}
