package main

import (
	"net/url"
	"slices"
	"strconv"
	"strings"

	"fathombend/catalogue"
	"fathombend/stats"
)

// regressionParameters are the parameters of a regression beside the filter,
// in the order they are listed to users and stand in an address.
var regressionParameters = []string{
	"model", "joint", "interaction", "group", "response", "measured_line", "scale", "k", "cluster", "interval", "level",
	"resamples", "permutations", "seed", "time", "pick", "measurement_error", "thin_straight", "thin_sinuous", "recomputed",
}

var yesNo = []string{"no", "yes"}

const (
	maxModels = 12
	// maxSeed is the largest whole number that JSON readers keep exactly.
	maxSeed = 1<<53 - 1
)

// once refuses a parameter given twice: which of the two was meant cannot be
// known. Parameters named in several may repeat.
func once(q url.Values, several ...string) error {
	names := make([]string, 0, len(q))
	for name := range q {
		names = append(names, name)
	}
	slices.Sort(names)
	for _, name := range names {
		if len(q[name]) > 1 && !slices.Contains(several, name) {
			return &badInput{name, "given " + strconv.Itoa(len(q[name])) + " times. Expected once"}
		}
	}
	return nil
}

// regressionRequest reads the regression parameters of q; what is not given is
// the contract's default. It does not look at the filter.
func regressionRequest(q url.Values) (stats.Request, error) {
	r := stats.DefaultRequest()
	only := url.Values{}
	for _, name := range regressionParameters {
		if v, ok := q[name]; ok {
			only[name] = v
		}
	}
	if err := once(only, "model", "joint", "interaction"); err != nil {
		return r, err
	}
	if err := readModels(q, &r); err != nil {
		return r, err
	}
	if err := readRegressionChoices(q, &r); err != nil {
		return r, err
	}
	r.Recomputed = strings.TrimSpace(q.Get("recomputed"))
	return r, readRegressionNumbers(q, &r)
}

// readModels reads model, joint and interaction. Asking for a joint model
// alone leaves out the three straight lines asked for when nothing is said.
func readModels(q url.Values, r *stats.Request) error {
	var models []stats.ModelSpec
	for _, v := range q["model"] {
		if v = strings.TrimSpace(v); v == "" {
			continue
		}
		form, predictor, _ := strings.Cut(v, ":")
		if !slices.Contains(stats.Forms, form) || !slices.Contains(stats.Predictors, predictor) {
			return &badInput{"model", strconv.Quote(clip(v)) + " is no model. Expected FORM:PREDICTOR. Forms: " + strings.Join(stats.Forms, ", ") +
				". Predictors: " + strings.Join(stats.Predictors, ", ")}
		}
		if m := (stats.ModelSpec{Form: form, Predictor: predictor}); !slices.Contains(models, m) {
			models = append(models, m)
		}
	}
	if len(models) > maxModels {
		return &badInput{"model", strconv.Itoa(len(models)) + " models are asked for. Expected at most " + strconv.Itoa(maxModels) + " in one question"}
	}
	r.Joint = commaList(q["joint"])
	pair := commaList(q["interaction"])
	switch {
	case len(pair) == 0:
	case len(pair) != 2:
		return &badInput{"interaction", "expected a pair of the members of joint, as in interaction=valley_slope,abs_latitude"}
	case !slices.Contains(r.Joint, pair[0]) || !slices.Contains(r.Joint, pair[1]):
		return &badInput{"interaction", strings.Join(pair, ",") + " is not a pair of the members of joint. Expected two of: " + strings.Join(r.Joint, ", ")}
	default:
		r.Interaction = [2]string(pair)
	}
	if len(models) > 0 || len(r.Joint) > 0 {
		r.Models = models
	}
	return nil
}

// commaList joins repeated values and comma lists into one list without
// repeats.
func commaList(values []string) []string {
	var out []string
	for _, v := range values {
		for part := range strings.SplitSeq(v, ",") {
			if part = strings.TrimSpace(part); part != "" && !slices.Contains(out, part) {
				out = append(out, part)
			}
		}
	}
	return out
}

func readRegressionChoices(q url.Values, r *stats.Request) error {
	measurementError := "no"
	for _, c := range []struct {
		name    string
		to      *string
		choices []string
	}{
		{"group", &r.Group, []string{"kind"}},
		{"response", &r.Response, stats.Responses},
		{"measured_line", &r.MeasuredLine, stats.MeasuredLines},
		{"scale", &r.Scale, stats.Scales},
		{"cluster", &r.Cluster, stats.Clusterings},
		{"interval", &r.Interval, stats.IntervalKinds},
		{"time", &r.Time, stats.Times},
		{"pick", &r.Pick, stats.Picks},
		{"measurement_error", &measurementError, yesNo},
	} {
		v, err := oneOf(q, c.name, *c.to, c.choices)
		if err != nil {
			return err
		}
		*c.to = v
	}
	r.MeasurementError = measurementError == "yes"
	return nil
}

func readRegressionNumbers(q url.Values, r *stats.Request) error {
	seed := 0
	for _, c := range []struct {
		name     string
		to       *int
		def      int
		low, top int
	}{
		{"k", &r.K, r.K, 1, 1000},
		{"resamples", &r.Resamples, r.Resamples, stats.MinResamples, stats.MaxResamples},
		{"permutations", &r.Permutations, r.Permutations, stats.MinPermutations, stats.MaxPermutations},
		{"seed", &seed, int(r.Seed), 0, maxSeed},
	} {
		v, err := whole(q, c.name, c.def, c.low, c.top)
		if err != nil {
			return err
		}
		*c.to = v
	}
	r.Seed = uint64(seed)
	for _, c := range []struct {
		name     string
		to       *float64
		low, top float64
	}{
		{"level", &r.Level, 0.5, 0.999},
		{"thin_straight", &r.ThinStraight, 0, 0.9},
		{"thin_sinuous", &r.ThinSinuous, 0, 0.9},
	} {
		v, err := number(q, c.name, *c.to, c.low, c.top)
		if err != nil {
			return err
		}
		*c.to = v
	}
	return nil
}

// regressionValues is the way back: the address that asks r. The models, the
// settings that a reader looks for first and the seed always stand in it;
// others only where they differ from the contract's defaults.
func regressionValues(r stats.Request) url.Values {
	q := url.Values{}
	for _, m := range r.Models {
		q.Add("model", m.String())
	}
	set := func(name, v, def string) {
		if v != def {
			q.Set(name, v)
		}
	}
	def := stats.DefaultRequest()
	set("joint", strings.Join(r.Joint, ","), "")
	if r.Interaction[0] != "" {
		q.Set("interaction", strings.Join(r.Interaction[:], ","))
	}
	set("group", r.Group, "")
	q.Set("response", r.Response)
	set("measured_line", r.MeasuredLine, def.MeasuredLine)
	q.Set("scale", r.Scale)
	set("k", strconv.Itoa(r.K), strconv.Itoa(def.K))
	q.Set("cluster", r.Cluster)
	set("interval", r.Interval, def.Interval)
	set("level", short(r.Level), short(def.Level))
	q.Set("resamples", strconv.Itoa(r.Resamples))
	set("permutations", strconv.Itoa(r.Permutations), strconv.Itoa(def.Permutations))
	q.Set("seed", strconv.FormatUint(r.Seed, 10))
	set("time", r.Time, def.Time)
	set("pick", r.Pick, def.Pick)
	if r.MeasurementError {
		q.Set("measurement_error", "yes")
	}
	set("thin_straight", short(r.ThinStraight), "0")
	set("thin_sinuous", short(r.ThinSinuous), "0")
	set("recomputed", r.Recomputed, "")
	return q
}

// regressionQuestion reads a whole regression address: filter and request,
// refusing what does not belong there.
func regressionQuestion(q url.Values) (catalogue.Filter, stats.Request, error) {
	if err := allow(q, regressionParameters, catalogue.FilterParameters); err != nil {
		return catalogue.Filter{}, stats.Request{}, err
	}
	f, err := filterOf(q)
	if err != nil {
		return f, stats.Request{}, err
	}
	req, err := regressionRequest(q)
	return f, req, err
}

// withValues returns the union of query values; a name in a later one wins.
func withValues(all ...url.Values) url.Values {
	out := url.Values{}
	for _, q := range all {
		for name, v := range q {
			out[name] = slices.Clone(v)
		}
	}
	return out
}

// hasEmpty says whether q holds a parameter with nothing in it, as an
// untouched form field leaves it.
func hasEmpty(q url.Values) bool {
	for _, v := range q {
		if slices.Contains(v, "") {
			return true
		}
	}
	return false
}
