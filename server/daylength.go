package main

import (
	"errors"
	"math"

	"fathombend/stats/earth"
	"fathombend/stats/expectation"
	"fathombend/views"
)

// dayCurves samples the day-length histories that need no typed value, with
// their spread, from today past the age of r, and the observed points over
// them.
func dayCurves(r *expectation.Result) (views.DayFigure, error) {
	const atLeastMa, samples = 700.0, 120
	to := atLeastMa
	if a := r.Age.Value + 2*math.Max(r.Age.SE, 0); a*1.1 > to {
		to = math.Min(a*1.1, 4000)
	}
	f := views.DayFigure{ToMa: to}
	for _, h := range earth.Histories() {
		if h.NeedsRate || h.Name == earth.Given {
			continue
		}
		c := views.DayCurve{Name: h.Name, Title: h.Title, Source: h.Source}
		for i := range samples + 1 {
			age := to * float64(i) / samples
			d, err := earth.DayLengthAt(age, earth.HistoryOptions{History: h.Name})
			var limit *earth.InputError
			if errors.As(err, &limit) {
				break // the history does not reach further back
			}
			if err != nil {
				return f, err
			}
			c.Age = append(c.Age, age)
			c.Value, c.Low, c.High = append(c.Value, float64(d.Value)), append(c.Low, float64(d.Low)), append(c.High, float64(d.High))
		}
		f.Curves = append(f.Curves, c)
	}
	for _, o := range earth.Observations() {
		if o.AgeMa <= to {
			f.Observed = append(f.Observed, o)
		}
	}
	return f, nil
}
