package main

import (
	"context"
	"fmt"
	"math"
	"runtime"
	"slices"
	"time"

	"fathombend/catalogue"
	"fathombend/stats"
	"fathombend/stats/earth"
	"fathombend/views"
)

// statsRows turns catalogue rows into what a regression sees. climate gives the
// climate state at the age of a row, which is 0 Ma where none is given; a nil
// table gives none.
func statsRows(rows []catalogue.Row, climate earth.ClimateTable) []stats.Row {
	out := make([]stats.Row, len(rows))
	c := newConverter(climate)
	for i := range rows {
		out[i] = c.row(&rows[i], i)
	}
	return out
}

// statsRowsOf reads the rows under a filter as a regression sees them, one at a
// time: a row of the catalogue is several times as large.
func (a *App) statsRowsOf(ctx context.Context, f catalogue.Filter, climate earth.ClimateTable) ([]stats.Row, error) {
	var out []stats.Row
	c := newConverter(climate)
	err := a.store.EachRow(ctx, f, func(r catalogue.Row) error {
		out = append(out, c.row(&r, len(out)))
		return nil
	})
	return slices.Clip(out), err
}

// converter makes rows of a regression, with one copy of what many rows share.
// The maps of categories are shared too: nothing changes them.
type converter struct {
	climate    earth.ClimateTable
	texts      map[string]string
	categories map[[len(categoryNames)]string]map[string]string
}

func newConverter(climate earth.ClimateTable) *converter {
	return &converter{climate, map[string]string{}, map[[len(categoryNames)]string]map[string]string{}}
}

var categoryNames = [...]string{"feeder", "grain", "margin", "setting", "activity", "burial", "confinement", "aggradation", "large_river",
	"stacking", "lateral_accretion", "survey", "extraction", "climate_state"}

func (c *converter) text(s string) string {
	have, ok := c.texts[s]
	if !ok {
		c.texts[s], have = s, s
	}
	return have
}

func (c *converter) categoriesOf(r *catalogue.Row) map[string]string {
	key := [len(categoryNames)]string{r.Feeder, r.Grain, r.Margin, r.Setting, r.Activity, r.Burial, r.Confinement, r.Aggradation, r.LargeRiver,
		r.Stacking, r.LateralAccretion, r.Survey, r.Extraction, climateState(c.climate, r.AgeMa)}
	have := c.categories[key]
	if have == nil {
		have = make(map[string]string, len(key))
		for i, v := range key {
			have[categoryNames[i]] = c.text(v)
			key[i] = have[categoryNames[i]]
		}
		c.categories[key] = have
	}
	return have
}

func (c *converter) row(r *catalogue.Row, order int) stats.Row {
	return stats.Row{
		ID: r.Measurement, System: c.text(r.System), SystemName: c.text(r.SystemName),
		ParentDeposit: c.text(r.ParentDeposit), Source: c.text(r.Source), Basin: c.text(r.Basin),
		Kind: c.text(r.Kind), Invented: r.Invented, Private: r.Private, SinuosityKind: c.text(r.SinuosityKind),
		MeasuredLine: c.text(r.MeasuredLine), Grade: c.text(r.Grade), Order: order,
		Sinuosity: num(r.Sinuosity), SinuositySE: num(r.SinuositySE), Windows: r.WindowSinuosities,
		LatitudeDeg: num(r.LatitudeDeg), LongitudeDeg: num(r.LongitudeDeg), AgeMa: num(r.AgeMa),
		PalaeolatitudeDeg: num(r.PalaeolatitudeDeg), PalaeolatitudeSEDeg: num(r.PalaeolatitudeSEDeg),
		ValleySlope: num(r.ValleySlope), ValleySlopeSE: num(r.ValleySlopeSE), SlopeState: c.text(r.SlopeState),
		ChannelWidthM: num(r.ChannelWidthM), ChannelDepthM: num(r.ChannelDepthM),
		WavelengthM: num(r.WavelengthM), AmplitudeM: num(r.AmplitudeM), RadiusM: num(r.RadiusM),
		NetToGross: num(r.NetToGross),
		Categories: c.categoriesOf(r),
	}
}

// climateState is "" where the table has none for the age.
func climateState(climate earth.ClimateTable, age catalogue.Number) string {
	s, _ := climate.At(age.V) // an age that is not given is 0: today's sea floor
	return s.State
}

func num(n catalogue.Number) float64 {
	if !n.Valid {
		return math.NaN()
	}
	return n.V
}

// fitFilter is the filter a fit uses: submarine systems unless told otherwise,
// and never a page of them.
func fitFilter(f catalogue.Filter, group string) catalogue.Filter {
	f.Page, f.PerPage, f.Sort = 0, 0, ""
	if len(f.Choices["kind"]) == 0 && group != "kind" {
		c := map[string][]string{"kind": {"submarine"}}
		for k, v := range f.Choices {
			c[k] = v
		}
		f.Choices = c
	}
	return f
}

// analysisKey names the answer to a question on this catalogue revision.
func (a *App) analysisKey(ctx context.Context, f catalogue.Filter, req stats.Request) (string, error) {
	rev, err := a.store.Revision(ctx)
	if err != nil {
		return "", err
	}
	req.Workers, req.Chosen = 0, views.FilterWords(regressionFilter(f))
	// The view is part of it here too: the key also names the work on its way.
	return fmt.Sprintf("%sregression|%d|%s|%+v", catalogue.ViewKey(ctx), rev, fitFilter(f, req.Group).Values().Encode(), req), nil
}

// analyse answers a regression question from the cache of this catalogue
// revision, or computes it.
func (a *App) analyse(ctx context.Context, f catalogue.Filter, req stats.Request) (*stats.Analysis, error) {
	key, err := a.analysisKey(ctx, f, req)
	if err != nil {
		return nil, err
	}
	req.Chosen = views.FilterWords(regressionFilter(f))
	f = fitFilter(f, req.Group)
	req.Workers = runtime.GOMAXPROCS(0)
	v, err := a.fits.do(ctx, key, func(ctx context.Context) (any, error) {
		ctx, j := a.jobs.start(ctx, key)
		defer a.jobs.end(key, j)
		leave, err := a.enter(ctx)
		if err != nil {
			return nil, err
		}
		defer leave()
		chosen, err := a.settingsFor(ctx, f.Release)
		if err != nil {
			return nil, err
		}
		rows, err := a.analysedRows(ctx, f, &req, chosen.Climate)
		if err != nil {
			return nil, err
		}
		defer a.metrics.fitted("regression", time.Now())
		analysis, err := stats.Analyse(ctx, rows, req, j.progress)
		if err != nil {
			return nil, err
		}
		return analysis, a.nameRelease(ctx, f.Release, analysis)
	})
	if err != nil {
		return nil, err
	}
	return v.(*stats.Analysis), nil
}

// analysedRows are the rows of a fit; see fitRows.
func (a *App) analysedRows(ctx context.Context, f catalogue.Filter, req *stats.Request, climate earth.ClimateTable) ([]stats.Row, error) {
	if req.Recomputed == "" {
		return a.statsRowsOf(ctx, f, climate)
	}
	rows, err := a.fitRows(ctx, f, req)
	if err != nil {
		return nil, err
	}
	return statsRows(rows, climate), nil
}
