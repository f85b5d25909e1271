package stats

import (
	"fmt"
	"math"
	"slices"
	"strings"
)

// Limits of a Request, as the contract gives them.
const (
	MinResamples, MaxResamples       = 99, 100_000
	MinPermutations, MaxPermutations = 99, 99_999
	maxModels                        = 12
	maxJoint                         = 6
	maxWindows                       = 1000
)

// Choices of the parameters that take one of a few words, in the order they
// are listed to users.
var (
	Responses     = []string{"any", "peak", "p90", "mean", "bend", "reach", "standardised_peak"}
	MeasuredLines = []string{"all", "thalweg", "centreline", "levee_crest", "unknown"}
	Scales        = []string{"raw", "ln", "ln_excess"}
	Clusterings   = []string{"parent_deposit", "system", "source", "basin", "none"}
	IntervalKinds = []string{"studentised", "cr2", "bca", "percentile"}
	Times         = []string{"of_deposition", "present"}
	Picks         = []string{"all", "best"}
	// RecomputedResponses are the responses a centreline measured again gives.
	RecomputedResponses = []string{"peak", "p90", "mean", "reach", "standardised_peak"}
)

// setsOwnScale tells the forms whose name fixes the response scale.
func setsOwnScale(form string) bool {
	return form == "exponential" || form == "power" || form == "floor_decay"
}

// Validate refuses a request that cannot be answered, naming the parameter and
// what was expected. The error is an *InputError.
func (r Request) Validate() error {
	for _, c := range []struct {
		parameter, value string
		choices          []string
	}{
		{"response", r.Response, Responses}, {"measured_line", r.MeasuredLine, MeasuredLines},
		{"scale", r.Scale, Scales}, {"cluster", r.Cluster, Clusterings},
		{"interval", r.Interval, IntervalKinds}, {"time", r.Time, Times}, {"pick", r.Pick, Picks},
		{"group", r.Group, []string{"", "kind"}},
	} {
		if !slices.Contains(c.choices, c.value) {
			return refuse(c.parameter, "%q is not one of its values. Expected one of: %s", c.value, strings.TrimPrefix(strings.Join(c.choices, ", "), ", "))
		}
	}
	if r.Recomputed != "" && !slices.Contains(RecomputedResponses, r.Response) {
		return refuse("response", "%q cannot be taken from a recomputation. Expected one of: %s", r.Response, strings.Join(RecomputedResponses, ", "))
	}
	if err := r.validateNumbers(); err != nil {
		return err
	}
	if err := r.validateModels(); err != nil {
		return err
	}
	return r.validateJoint()
}

func (r Request) validateNumbers() error {
	switch {
	case r.K < 1 || r.K > maxWindows:
		return refuse("k", "%d windows is not allowed. Expected a whole number from 1 to %d", r.K, maxWindows)
	case !(r.Level >= 0.5 && r.Level <= 0.999):
		return refuse("level", "%v is not allowed. Expected a number from 0.5 to 0.999, such as 0.95", r.Level)
	case r.Resamples < MinResamples || r.Resamples > MaxResamples:
		return refuse("resamples", "%d is not allowed. Expected a whole number from %d to %d", r.Resamples, MinResamples, MaxResamples)
	case r.Permutations < MinPermutations || r.Permutations > MaxPermutations:
		return refuse("permutations", "%d is not allowed. Expected a whole number from %d to %d", r.Permutations, MinPermutations, MaxPermutations)
	case !(r.ThinStraight >= 0 && r.ThinStraight <= 0.9):
		return refuse("thin_straight", "%v is not allowed. Expected a fraction from 0 to 0.9", r.ThinStraight)
	case !(r.ThinSinuous >= 0 && r.ThinSinuous <= 0.9):
		return refuse("thin_sinuous", "%v is not allowed. Expected a fraction from 0 to 0.9", r.ThinSinuous)
	}
	return nil
}

func (r Request) validateModels() error {
	if len(r.Models) == 0 && len(r.Joint) == 0 {
		return refuse("model", "no model is asked for. Expected FORM:PREDICTOR, such as linear:abs_latitude")
	}
	if len(r.Models) > maxModels {
		return refuse("model", "%d models are asked for. Expected at most %d", len(r.Models), maxModels)
	}
	for i, m := range r.Models {
		if !slices.Contains(Forms, m.Form) {
			return refuse("model", "%q is not a form. Expected one of: %s", m.Form, strings.Join(Forms, ", "))
		}
		if !slices.Contains(Predictors, m.Predictor) {
			return refuse("model", "%q is not a predictor. Expected one of: %s", m.Predictor, strings.Join(Predictors, ", "))
		}
		if slices.Contains(r.Models[:i], m) {
			return refuse("model", "%s is asked for twice. Expected once", m)
		}
		if setsOwnScale(m.Form) && r.Scale != "raw" {
			return refuse("scale", "%s cannot be combined with %s, which sets its own response scale. Use P itself (scale=raw), or another form", r.Scale, m.Form)
		}
		if m.Predictor == "log10_slope" && (m.Form == "logarithmic" || m.Form == "power") {
			return refuse("model", "%s takes the logarithm of a logarithm. Use %s:valley_slope", m, m.Form)
		}
	}
	return nil
}

func (r Request) validateJoint() error {
	if len(r.Joint) > maxJoint {
		return refuse("joint", "%d members are asked for. Expected at most %d: more cannot be told apart", len(r.Joint), maxJoint)
	}
	for i, name := range r.Joint {
		if !slices.Contains(Predictors, name) && !slices.Contains(Categories, name) {
			return refuse("joint", "%q is neither a predictor nor a category. Expected some of: %s, %s", name, strings.Join(Predictors, ", "), strings.Join(Categories, ", "))
		}
		if slices.Contains(r.Joint[:i], name) {
			return refuse("joint", "%s is named twice. Expected once", name)
		}
	}
	if r.Interaction == [2]string{} {
		return nil
	}
	for _, name := range r.Interaction {
		if !slices.Contains(r.Joint, name) {
			return refuse("interaction", "%q is not a member of joint. Expected a pair of its members, such as valley_slope,abs_latitude", name)
		}
	}
	if r.Interaction[0] == r.Interaction[1] {
		return refuse("interaction", "%s is named twice. Expected two different members of joint", r.Interaction[0])
	}
	return nil
}

func refuse(parameter, format string, args ...any) error {
	return &InputError{Parameter: parameter, Message: fmt.Sprintf(format, args...)}
}

// settings is every request parameter under its name in the address, so that a
// stored answer can be asked again.
func (r Request) settings() map[string]any {
	models := make([]string, len(r.Models))
	for i, m := range r.Models {
		models[i] = m.String()
	}
	yes := map[bool]string{true: "yes", false: "no"}
	interaction := ""
	if r.Interaction[0] != "" {
		interaction = r.Interaction[0] + "," + r.Interaction[1]
	}
	out := map[string]any{
		"model": models, "joint": strings.Join(r.Joint, ","), "interaction": interaction, "group": r.Group,
		"response": r.Response, "measured_line": r.MeasuredLine, "scale": r.Scale, "k": r.K,
		"cluster": r.Cluster, "interval": r.Interval, "level": r.Level,
		"resamples": r.Resamples, "permutations": r.Permutations, "seed": r.Seed,
		"time": r.Time, "pick": r.Pick, "measurement_error": yes[r.MeasurementError],
		"thin_straight": r.ThinStraight, "thin_sinuous": r.ThinSinuous,
	}
	if r.Recomputed != "" {
		out["recomputed"] = r.Recomputed
	}
	return out
}

func finite(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }
