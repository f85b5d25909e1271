package stats

import (
	"context"
	"errors"
	"fmt"
	"math"
	"reflect"
	"strings"
	"testing"
	"time"
)

// noBadNumbers walks an answer: sentences hold no NaN, Inf or %!; intervals are
// in order.
func noBadNumbers(t *testing.T, a *Analysis) {
	t.Helper()
	texts := append([]string{a.Headline, a.MethodsText}, a.Warnings...)
	texts = append(texts, a.Separability...)
	for _, m := range a.Models {
		texts = append(texts, m.Failure)
		for _, c := range m.Coefficients {
			for kind, i := range c.Intervals {
				if i[0] > i[1] {
					t.Errorf("%s %s %s: interval %v is upside down", m.Model, c.Name, kind, i)
				}
			}
		}
		if m.RSquared > 1+1e-12 {
			t.Errorf("%s: R2 %v", m.Model, m.RSquared)
		}
	}
	for _, s := range texts {
		for _, bad := range []string{"NaN", "Inf", "%!", "explain", "cause"} {
			if strings.Contains(s, bad) && !strings.Contains(s, "because") {
				t.Errorf("a sentence holds %q: %s", bad, s)
			}
		}
	}
	if a.Headline == "" {
		t.Error("no headline")
	}
}

func allForms(scale string) Request {
	req := lawRequest()
	req.Scale = scale
	if scale != "raw" {
		req.Models = []ModelSpec{{"linear", "abs_latitude"}, {"broken_line", "abs_latitude"}, {"quantile_10", "abs_latitude"}, {"theil_sen", "abs_latitude"}}
	}
	req.Models = append(req.Models[:len(req.Models):len(req.Models)], ModelSpec{"linear", "valley_slope"})
	return req
}

func TestAwkwardRows(t *testing.T) {
	base := inventedRows(6, 30, 10)
	change := func(f func(i int, r *Row)) []Row {
		out := append([]Row(nil), base...)
		for i := range out {
			f(i, &out[i])
		}
		return out
	}
	cases := map[string]struct {
		rows []Row
		want string // in the failure or headline
	}{
		"nothing at all":      {nil, "There is no row to fit"},
		"all missing":         {change(func(_ int, r *Row) { *r = EmptyRow() }), "No rows are left"},
		"constant response":   {change(func(_ int, r *Row) { r.Sinuosity = 1.5 }), "Every sinuosity is 1.5"},
		"all sinuosities 1":   {change(func(_ int, r *Row) { r.Sinuosity = 1 }), "Every sinuosity is 1 "},
		"constant predictor":  {change(func(_ int, r *Row) { r.LatitudeDeg = 30 }), "is the same in all 30 rows"},
		"one cluster":         {change(func(_ int, r *Row) { r.ParentDeposit = "only" }), "come from one deposit"},
		"two clusters":        {change(func(i int, r *Row) { r.ParentDeposit = []string{"a", "b"}[i%2] }), ""},
		"rows = coefficients": {base[:2], "too few"},
		"three rows":          {base[:3], "too few"},
		"four rows":           {base[:4], ""},
		"five rows":           {base[:5], ""},
		"two latitudes":       {change(func(i int, r *Row) { r.LatitudeDeg = float64(10 + 30*(i%2)) }), ""},
		"a perfect line":      {change(func(_ int, r *Row) { r.Sinuosity = 3 - 0.02*r.LatitudeDeg }), ""},
		"one far point": {change(func(i int, r *Row) {
			r.Sinuosity = 1.2
			if i == 3 {
				r.Sinuosity = 1e6
			}
		}), ""},
		"infinite": {change(func(i int, r *Row) {
			if i < 3 {
				r.Sinuosity = math.Inf(1)
			}
		}), ""},
		"huge and tiny": {change(func(i int, r *Row) {
			r.Sinuosity = 1 + math.Pow(10, float64(i%9-4))
			r.ValleySlope = math.Pow(10, -float64(i))
		}), ""},
		"same cluster names": {change(func(_ int, r *Row) { r.ParentDeposit = ""; r.System = "s" }), ""},
		"the equator": {change(func(i int, r *Row) {
			if i < 5 {
				r.LatitudeDeg = 0
			}
		}), ""},
	}
	for name, c := range cases {
		for _, scale := range Scales {
			t.Run(name+"/"+scale, func(t *testing.T) {
				a := analyse(t, c.rows, allForms(scale))
				noBadNumbers(t, a)
				text := a.Headline
				for _, m := range a.Models {
					text += " " + m.Failure
				}
				if scale == "raw" && !strings.Contains(text, c.want) {
					t.Errorf("no sentence has %q in: %s", c.want, text)
				}
			})
		}
	}
}

func TestJointTrouble(t *testing.T) {
	rows := inventedRows(6, 30, 10)
	for i := range rows {
		rows[i].Categories = map[string]string{"feeder": []string{"river", "shelf"}[i%2], "grain": "mud", "margin": "passive"}
	}
	rows[7].Categories = map[string]string{"feeder": "glacial", "grain": "mud", "margin": "passive"}
	rows[8].Categories = map[string]string{"feeder": "unknown", "grain": "mud"}
	req := lawRequest()
	req.Models = []ModelSpec{{"linear", "abs_latitude"}}
	req.Joint = []string{"abs_latitude", "feeder"}
	a := analyse(t, rows, req)
	noBadNumbers(t, a)
	if a.Rows != 29 || len(a.Dropped) != 1 || a.Dropped[0].Reason != "feeder unknown" {
		t.Errorf("%d rows, dropped %v", a.Rows, a.Dropped)
	}
	m := modelOf(t, a, "joint:abs_latitude+feeder")
	if m.DegenerateResamples == 0 || !strings.Contains(strings.Join(a.Warnings, "\n"), "feeder = glacial has one row") {
		t.Errorf("a category with one row: %d degenerate resamples, warnings %v", m.DegenerateResamples, a.Warnings)
	}
	if got := m.Coefficients[2].Name + " " + m.Coefficients[3].Name; got != "feeder=river feeder=shelf" {
		t.Errorf("levels %s: want the alphabetically first, glacial, as the baseline", got)
	}
	req.Joint = []string{"abs_latitude", "grain"}
	if f := modelOf(t, analyse(t, rows, req), "joint:abs_latitude+grain").Failure; !strings.Contains(f, "nothing to compare") {
		t.Errorf("one level: %q", f)
	}
	for i := range rows {
		rows[i].ChannelWidthM = 100 * math.Abs(rows[i].LatitudeDeg)
	}
	req.Joint = []string{"abs_latitude", "channel_width"}
	a = analyse(t, rows, req)
	noBadNumbers(t, a)
	if f := modelOf(t, a, "joint:abs_latitude+channel_width").Failure; !strings.Contains(f, "combination") {
		t.Errorf("collinear columns: %q", f)
	}
}

// Every limit of the contract is named in its refusal.
func TestRefusals(t *testing.T) {
	for _, c := range []struct {
		change func(r *Request)
		param  string
		words  string
	}{
		{func(r *Request) { r.Resamples = 1_000_000 }, "resamples", "100000"},
		{func(r *Request) { r.Resamples = 98 }, "resamples", "99"},
		{func(r *Request) { r.Permutations = 100_000 }, "permutations", "99999"},
		{func(r *Request) { r.Models[0].Form = "cubic" }, "model", "floor_decay"},
		{func(r *Request) { r.Models[0].Predictor = "mood" }, "model", "abs_latitude"},
		{func(r *Request) { r.Models = append(r.Models, r.Models[0]) }, "model", "twice"},
		{func(r *Request) { r.Models = nil }, "model", "FORM:PREDICTOR"},
		{func(r *Request) { r.Models[0].Form = "power"; r.Scale = "ln" }, "scale", "raw"},
		{func(r *Request) { r.Scale = "log" }, "scale", "ln_excess"},
		{func(r *Request) { r.Cluster = "sea" }, "cluster", "parent_deposit"},
		{func(r *Request) { r.Interval = "wald" }, "interval", "studentised"},
		{func(r *Request) { r.Level = 95 }, "level", "0.95"},
		{func(r *Request) { r.Level = math.NaN() }, "level", "0.95"},
		{func(r *Request) { r.Time = "past" }, "time", "of_deposition"},
		{func(r *Request) { r.Pick = "worst" }, "pick", "best"},
		{func(r *Request) { r.Response = "max" }, "response", "standardised_peak"},
		{func(r *Request) { r.MeasuredLine = "bank" }, "measured_line", "thalweg"},
		{func(r *Request) { r.K = 0 }, "k", "from 1"},
		{func(r *Request) { r.Group = "basin" }, "group", "kind"},
		{func(r *Request) { r.Joint = []string{"weather"} }, "joint", "feeder"},
		{func(r *Request) { r.Joint = []string{"feeder", "feeder"} }, "joint", "twice"},
		{func(r *Request) { r.Interaction = [2]string{"feeder", "abs_latitude"} }, "interaction", "joint"},
		{func(r *Request) { r.ThinStraight = 1 }, "thin_straight", "0.9"},
		{func(r *Request) { r.ThinSinuous = -1 }, "thin_sinuous", "0.9"},
	} {
		req := DefaultRequest()
		req.Models = append([]ModelSpec(nil), req.Models...)
		c.change(&req)
		_, err := Analyse(context.Background(), referenceRows(t), req, nil)
		var in *InputError
		if !errors.As(err, &in) || in.Parameter != c.param || !strings.Contains(in.Message, c.words) {
			t.Errorf("want a refusal of %s that says %q, got %v", c.param, c.words, err)
		}
	}
}

func TestDropRules(t *testing.T) {
	rows := inventedRows(7, 30, 15)
	rows[0].ValleySlope = -0.001
	rows[1].ValleySlope = math.NaN()
	rows[2].AgeMa = 60
	rows[3].AgeMa, rows[3].PalaeolatitudeDeg = 60, -20
	rows[4].Sinuosity = 1
	rows[5].SinuosityKind = "mean"
	rows[6].LatitudeDeg = 0
	req := DefaultRequest()
	req.Models = []ModelSpec{{"linear", "valley_slope"}, {"inverse", "coriolis"}}
	req.Scale, req.Response, req.Resamples = "ln_excess", "peak", 99
	a := analyse(t, rows, req)
	want := map[string]int{"valley slope of zero or below, kept out of slope fits": 1, "no valley slope": 1,
		"older than 5 Ma without a palaeolatitude": 1, "sinuosity of 1 has no ln(P - 1)": 1,
		"sinuosity of another kind than peak": 1, "on the equator f = 0 and 1/f has no value": 1}
	got := map[string]int{}
	for _, d := range a.Dropped {
		got[d.Reason] = d.Rows
	}
	if !reflect.DeepEqual(got, want) || a.Rows != 24 {
		t.Errorf("%d rows, dropped %v", a.Rows, got)
	}
	// 60 Ma at 20 S: the day was shorter, so |f| is a little above today's
	// 4.988e-5 (science notes, table of f) and below 2 % more.
	f := a.Used[3].PredictorOf["coriolis"]
	if !(f > 0.4988*1.005 && f < 0.4988*1.02) {
		t.Errorf("|f| at 60 Ma and 20 S = %v e-4", f)
	}
	req.Time = "present"
	a = analyse(t, rows, req)
	near(t, "|f| at the present latitude", a.Used[3].PredictorOf["coriolis"], 1.458423*math.Sin(rows[3].LatitudeDeg*math.Pi/180), 1e-6)
}

func TestPickBest(t *testing.T) {
	rows := inventedRows(8, 40, 12)
	for i := range rows {
		rows[i].System = fmt.Sprintf("s%d", i/2)
		rows[i].Grade = []string{"quoted", "surveyed"}[i%2]
	}
	rows[0].Grade = "surveyed" // equal grades: the newer, row 1, is used
	req := DefaultRequest()
	req.Pick, req.Resamples = "best", 99
	a := analyse(t, rows, req)
	for i, u := range a.Used {
		if u.Kept != (i%2 == 1) {
			t.Errorf("row %d kept = %v", i, u.Kept)
		}
	}
}

// Expected maximum of k of n, by brute force over all subsets.
func TestStandardisedPeak(t *testing.T) {
	w := []float64{1.3, 1.1, 2.4, 1.7, 1.2, 1.9}
	for k := 1; k <= len(w); k++ {
		sum, n := 0.0, 0.0
		for set := range 1 << len(w) {
			c, m := 0, 0.0
			for i, v := range w {
				if set>>i&1 == 1 {
					c++
					m = math.Max(m, v)
				}
			}
			if c == k {
				sum += m
				n++
			}
		}
		needDigits(t, fmt.Sprintf("k = %d", k), standardisedPeak(w, k), sum/n, 12)
	}
}

func TestCancel(t *testing.T) {
	ctx, cancel := context.WithTimeout(context.Background(), time.Millisecond)
	defer cancel()
	req := DefaultRequest()
	req.Resamples = MaxResamples
	if _, err := Analyse(ctx, inventedRows(9, 2000, 400), req, nil); !errors.Is(err, context.DeadlineExceeded) {
		t.Errorf("cancelled: %v", err)
	}
}

func TestProgress(t *testing.T) {
	last := 0.0
	_, err := Analyse(context.Background(), inventedRows(9, 80, 30), DefaultRequest(), func(p float64) { last = math.Max(last, p) })
	if err != nil || last < 0.99 {
		t.Errorf("progress ended at %v, %v", last, err)
	}
}
