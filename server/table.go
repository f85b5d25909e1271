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
	for i, r := range rows {
		out[i] = stats.Row{
			ID: r.Measurement, System: r.System, SystemName: r.SystemName,
			ParentDeposit: r.ParentDeposit, Source: r.Source, Basin: r.Basin,
			Kind: r.Kind, Invented: r.Invented, Private: r.Private, SinuosityKind: r.SinuosityKind,
			MeasuredLine: r.MeasuredLine, Grade: r.Grade, Order: i,
			Sinuosity: num(r.Sinuosity), SinuositySE: num(r.SinuositySE), Windows: r.WindowSinuosities,
			LatitudeDeg: num(r.LatitudeDeg), LongitudeDeg: num(r.LongitudeDeg), AgeMa: num(r.AgeMa),
			PalaeolatitudeDeg: num(r.PalaeolatitudeDeg), PalaeolatitudeSEDeg: num(r.PalaeolatitudeSEDeg),
			ValleySlope: num(r.ValleySlope), ValleySlopeSE: num(r.ValleySlopeSE), SlopeState: r.SlopeState,
			ChannelWidthM: num(r.ChannelWidthM), ChannelDepthM: num(r.ChannelDepthM),
			WavelengthM: num(r.WavelengthM), AmplitudeM: num(r.AmplitudeM), RadiusM: num(r.RadiusM),
			NetToGross: num(r.NetToGross),
			Categories: map[string]string{
				"feeder": r.Feeder, "grain": r.Grain, "margin": r.Margin, "setting": r.Setting,
				"activity": r.Activity, "burial": r.Burial, "confinement": r.Confinement,
				"aggradation": r.Aggradation, "large_river": r.LargeRiver, "stacking": r.Stacking,
				"lateral_accretion": r.LateralAccretion, "survey": r.Survey, "extraction": r.Extraction,
				"climate_state": climateState(climate, r.AgeMa),
			},
		}
	}
	return out
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
		rows, err := a.fitRows(ctx, f, &req)
		if err != nil {
			return nil, err
		}
		chosen, err := a.settingsFor(ctx, f.Release)
		if err != nil {
			return nil, err
		}
		ctx, j := a.jobs.start(ctx, key)
		defer a.jobs.end(key, j)
		defer a.metrics.fitted("regression", time.Now())
		analysis, err := stats.Analyse(ctx, slices.Clip(statsRows(rows, chosen.Climate)), req, j.progress)
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
