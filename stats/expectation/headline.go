package expectation

import (
	"fmt"
	"math"
	"slices"

	"fathombend/stats/earth"
)

// frameOf fills in where and when, and what is expected.
func (f *Fits) frameOf(t *Target, p *place, d *draws) *Result {
	res := &Result{
		Palaeolatitude: Palaeolatitude{Value: p.lat.Value, SE: p.lat.SE, Interval: [2]float64{p.lat.Low, p.lat.High}, Method: p.lat.Method, Text: p.lat.Text},
		Age:            ValueSE{p.age.Value, p.age.SE},
		DayLength:      DayLength{float64(p.day.Value), float64(p.day.Low), float64(p.day.High), p.day.History},
		RotationRatio:  p.ratio,
		Coriolis:       math.Abs(earth.Coriolis(earth.Omega*p.ratio, p.lat.Value)),
		Response:       f.frame.response, MeasuredLine: f.frame.line,
		ResponseText: responseText(f.frame.response, f.frame.line),
		Rows:         len(f.frame.obs), Clusters: len(f.frame.clusters), InventedRows: f.frame.invented, PrivateRows: f.frame.private,
		ClimateState: stateNames[d.point.state],
		Notes:        slices.Concat(p.notes, f.notes(t, p, d)), Cautions: Cautions(),
		Settings: map[string]any{
			"seed": t.Seed, "draws": t.Draws, "fit_seed": f.options.Seed, "resamples": resamples, "cluster": f.options.Cluster,
			"class_limits": f.options.ClassLimits, "day": orDefault(t.Day), "solar_tide": t.SolarTide,
			"scale": "ln_excess", "rotation_of_rows": earth.TidalHistory, "common_rows_for_weights": f.common, "spread_alpha": f.alpha,
		},
	}
	if !slices.Equal(f.frame.climate, earth.ClimateStates()) {
		res.Settings["climate_table"] = f.frame.climate
	}
	sorted := slices.Clone(d.f)
	sortPositive(sorted, nil)
	res.CoriolisLow, res.CoriolisHigh = quantileOf(sorted, 0.025), quantileOf(sorted, 0.975)
	if eq, ok := earth.EquivalentModernLatitude(p.ratio, p.lat.Value); ok {
		res.EquivalentModernLatitude = &eq
	}
	res.EquivalentSentence = equivalentSentence(p, res)
	res.RotationEffect = rotationEffect(p, res)
	res.RotationChoices = rotationChoices(p)
	res.RotationSpread = rotationSpread(res.RotationChoices)
	return res
}

func responseText(response, line string) string {
	what := map[string]string{
		"peak": "peak sinuosity", "p90": "90th percentile of window sinuosity", "mean": "mean sinuosity", "bend": "bend sinuosity", "reach": "reach sinuosity",
		"standardised_peak": fmt.Sprintf("standardised peak sinuosity (expected largest of %d windows)", standardK),
		"any":               "sinuosity of any kind (peak, mean, bend and reach together)", "unknown": "sinuosity of unstated kind",
	}[response]
	if what == "" {
		what = response + " sinuosity"
	}
	if line == "all" {
		return what + " along any measured line"
	}
	return what + " along the " + map[string]string{"thalweg": "thalweg", "centreline": "centreline", "levee_crest": "levee crest", "unknown": "line that is not stated"}[line]
}

func hemisphere(lat float64) string {
	switch {
	case lat > 0:
		return fmt.Sprintf("%.1f degrees north", lat)
	case lat < 0:
		return fmt.Sprintf("%.1f degrees south", -lat)
	}
	return "the equator"
}

func equivalentSentence(p *place, res *Result) string {
	if res.EquivalentModernLatitude != nil {
		return fmt.Sprintf("The same Coriolis parameter is found today at %s.", hemisphere(*res.EquivalentModernLatitude))
	}
	polar := 2 * earth.Omega
	return fmt.Sprintf("No latitude of today has this Coriolis parameter: at %s under this rotation it exceeds today's polar value by %.1f %%. Poleward of %.2f degrees there is no equivalent modern latitude, and any modern calibration is an extrapolation.",
		hemisphere(p.lat.Value), 100*(res.Coriolis/polar-1), earth.NoEquivalentPoleward(p.ratio))
}

// rotationEffect compares the shift in equivalent latitude with the standard
// error of the palaeolatitude.
func rotationEffect(p *place, res *Result) string {
	change := 100 * (p.ratio - 1)
	if math.Abs(change) < 0.005 {
		return "The rotation rate is that of today: it changes nothing here."
	}
	head := fmt.Sprintf("The rotation rate (%.3f of today's) changes f by %+.1f %%", p.ratio, change)
	if res.EquivalentModernLatitude == nil {
		return head + ", beyond what any latitude has today."
	}
	shift := math.Abs(*res.EquivalentModernLatitude - p.lat.Value)
	head += fmt.Sprintf(", as %.2f degrees of latitude would", shift)
	switch {
	case p.lat.SE == 0:
		return head + ". No error of the palaeolatitude was given to compare it with; most palaeolatitudes are known less well than that."
	case shift < p.lat.SE:
		return head + fmt.Sprintf(": below the error of the palaeolatitude (one standard error %.2f degrees).", p.lat.SE)
	case shift < 1.96*p.lat.SE:
		return head + fmt.Sprintf(": within the 95 %% limits of the palaeolatitude, above its standard error (%.2f degrees).", p.lat.SE)
	}
	return head + fmt.Sprintf(": above the error of the palaeolatitude (one standard error %.2f degrees).", p.lat.SE)
}

// notes says what was assumed.
func (f *Fits) notes(t *Target, p *place, d *draws) []string {
	out := slices.Clone(f.frame.notes)
	if p.lat.SE > 0 && math.Abs(p.lat.Value) < 1.96*p.lat.SE {
		out = append(out, "The error of the palaeolatitude reaches across the equator: |f| is folded there, and the point value is not the middle of its draws.")
	}
	if len(f.frame.obs) > 0 {
		if d.moves.slope {
			out = append(out, "No slope was given: it is drawn from the chosen rows.")
		}
		if d.moves.supply {
			out = append(out, "What is not given of feeder, grain and large river is drawn from the chosen rows.")
		}
		out = append(out, "The limits are for one new system, each deposit of the rows counted alike; p90 means that 90 % of outcomes lie below it.",
			"Base rates count each deposit alike.")
	}
	if f.frame.ones > 0 {
		out = append(out, fmt.Sprintf("P = 1 has no ln(P - 1): it is expected with the chance it has in the rows (%.1f %%), and the explanations are scored by the continuous ranked probability score.", 100*f.frame.ones))
	}
	for _, why := range sortedReasons(f.frame.dropped) {
		out = append(out, fmt.Sprintf("%s left out: %s.", plural(f.frame.dropped[why], "row", "rows"), why))
	}
	if f.frame.response == "any" {
		out = append(out, "Peak, mean, bend and reach sinuosities differ by definition; keep to one kind where the rows allow it.")
	}
	for _, ft := range f.fits {
		if ft.degenerate > 0 {
			out = append(out, fmt.Sprintf("%s: %d of %d resamples could not be fitted and are left out.", ft.name, ft.degenerate, resamples))
		}
	}
	if f.common > 0 && f.common < len(f.frame.obs) {
		out = append(out, fmt.Sprintf("The weights rest on %s that every explanation can be scored on.", plural(f.common, "row", "rows")))
	}
	if f.common == 0 && len(d.mix.draws) > 0 {
		out = append(out, "No row can be scored under every explanation: the weights are equal.")
	}
	return out
}

func sortedReasons(m map[string]int) []string {
	var out []string
	for k := range m {
		out = append(out, k)
	}
	slices.Sort(out)
	return out
}

// observed places a measured sinuosity in the combined expectation.
func (f *Fits) observed(t *Target, d *draws, res *Result) {
	if !given(t.ObservedSinuosity) {
		return
	}
	o := &Observed{Sinuosity: t.ObservedSinuosity, Percentile: math.NaN()}
	if len(d.mix.draws) > 0 {
		o.Percentile = 100 * d.mix.below(t.ObservedSinuosity)
		o.Text = fmt.Sprintf("The measured sinuosity of %.3g lies at the %s percentile of what is expected. ", t.ObservedSinuosity, ordinal(o.Percentile))
		if o.Percentile < 2.5 || o.Percentile > 97.5 {
			o.Text += "That is outside the 95 % limits: check what was measured (line, window, kind) before looking for another cause. "
		}
	}
	o.Text += "Where there is an image, use the image: a measured planform says more about this system than any expectation."
	res.Observed = o
}

func ordinal(p float64) string {
	n := int(math.Round(p))
	if p > 0 && p < 1 {
		return "below the 1st"
	}
	if p > 99 && p < 100 {
		return "above the 99th"
	}
	suffix := "th"
	if n%100 < 11 || n%100 > 13 {
		switch n % 10 {
		case 1:
			suffix = "st"
		case 2:
			suffix = "nd"
		case 3:
			suffix = "rd"
		}
	}
	return fmt.Sprintf("%d%s", n, suffix)
}

// Cautions stand beside every expectation, on pages and in exports.
func Cautions() []string {
	return []string{
		"This is a first-order regional expectation from a small, biased compilation; publication favours sinuous channels.",
		"By itself it is no basis for siting a well, a cable or a structure, nor for a hazard assessment. Seismic, core and engineering survey by qualified people, and the rules of the place, decide.",
		"Sea-floor flows break cables and moorings, and slope failure can raise tsunami: those need licensed practice.",
		"From latitude to sinuosity and from sinuosity to facies are two weak links: read every likelihood beside its base rate.",
		"For Phanerozoic systems the rotation rate was 1 to about 1.16 times today's: its effect is below the error of most palaeolatitudes.",
	}
}
