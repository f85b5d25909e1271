package stats

import (
	"fmt"
	"math"
	"math/rand/v2"
	"reflect"
	"strings"
	"testing"
)

// lawModels is one request over every form.
func lawRequest() Request {
	req := DefaultRequest()
	req.Models = nil
	for _, form := range Forms {
		req.Models = append(req.Models, ModelSpec{form, "abs_latitude"})
	}
	req.Resamples, req.Permutations = 299, 99
	return req
}

// near compares everything that a law says must not change.
func near(t *testing.T, what string, a, b, tolerance float64) {
	t.Helper()
	if math.IsNaN(a) && math.IsNaN(b) {
		return
	}
	if !(math.Abs(a-b) <= tolerance*math.Max(1e-6, math.Max(math.Abs(a), math.Abs(b)))) {
		t.Errorf("%s: %.12g against %.12g", what, a, b)
	}
}

// The answer does not depend on the number of cores: not in one bit.
func TestWorkersChangeNothing(t *testing.T) {
	rows := inventedRows(3, 60, 20)
	req := lawRequest()
	req.Joint, req.Interaction = []string{"valley_slope", "abs_latitude"}, [2]string{"valley_slope", "abs_latitude"}
	var want string
	for _, workers := range []int{1, 2, 16} {
		req.Workers = workers
		a := analyse(t, rows, req)
		a.Used = nil
		got := fmt.Sprintf("%+v", *a)
		for _, m := range a.Models {
			for _, c := range m.Coefficients {
				got += fmt.Sprint(c.CR2, c.Intervals)
			}
		}
		if want == "" {
			want = got
		}
		// %+v prints pointers: compare without them.
		if scrub(got) != scrub(want) {
			t.Fatalf("%d workers give another answer", workers)
		}
	}
}

func scrub(s string) string {
	for {
		i := strings.Index(s, "0x")
		if i < 0 {
			return s
		}
		j := i + 2
		for j < len(s) && strings.ContainsRune("0123456789abcdefx", rune(s[j])) {
			j++
		}
		s = s[:i] + s[j:]
	}
}

// Neither the order of the rows nor the names of the clusters matter.
func TestRowOrderAndLabels(t *testing.T) {
	rows := inventedRows(3, 60, 20)
	req := lawRequest()
	a := analyse(t, rows, req)
	shuffled := append([]Row(nil), rows...)
	rand.New(rand.NewPCG(9, 9)).Shuffle(len(shuffled), func(i, j int) { shuffled[i], shuffled[j] = shuffled[j], shuffled[i] })
	renamed := append([]Row(nil), rows...)
	for i := range renamed {
		renamed[i].ParentDeposit = "Z" + fmt.Sprintf("%x", len(renamed[i].ParentDeposit)) + renamed[i].ParentDeposit
	}
	for what, other := range map[string][]Row{"shuffled rows": shuffled, "renamed clusters": renamed} {
		b := analyse(t, other, req)
		compareModels(t, what, a, b, 1, 0)
	}
}

// Nor does the order in which models are asked for, where rows share a response
// and so are told apart by their predictors.
func TestModelOrderChangesNothing(t *testing.T) {
	rows := inventedRows(3, 60, 20)
	for i := range rows {
		rows[i].Sinuosity = 1.1 + math.Round(10*rows[i].Sinuosity)/10
	}
	req := lawRequest()
	req.Models = []ModelSpec{{"linear", "valley_slope"}, {"linear", "coriolis"}}
	a := analyse(t, rows, req)
	req.Models = []ModelSpec{{"linear", "coriolis"}, {"linear", "valley_slope"}}
	b := analyse(t, rows, req)
	b.Models[0], b.Models[1] = b.Models[1], b.Models[0]
	compareModels(t, "models turned round", a, b, 1, 0)
}

// compareModels wants b to be a with the predictor multiplied by scale, to a
// tolerance; 0 means equal bits.
func compareModels(t *testing.T, what string, a, b *Analysis, scale, tolerance float64) {
	t.Helper()
	same := func(name string, x, y float64) {
		t.Helper()
		if tolerance == 0 && !(x == y || math.IsNaN(x) && math.IsNaN(y)) {
			t.Errorf("%s, %s: %v against %v", what, name, x, y)
		}
		near(t, what+", "+name, x, y, math.Max(tolerance, 1e-15))
	}
	for i, m := range a.Models {
		n := b.Models[i]
		if m.Failure != n.Failure {
			t.Errorf("%s, %s: failure %q against %q", what, m.Model, m.Failure, n.Failure)
			continue
		}
		same(m.Model+" R2", m.RSquared, n.RSquared)
		same(m.Model+" p", m.PermutationP, n.PermutationP)
		same(m.Model+" out-of-sample R2", m.OutOfSampleR2, n.OutOfSampleR2)
		same(m.Model+" Kendall", m.Kendall, n.Kendall)
		for e := range 2 {
			same(m.Model+" R2 interval", m.RSquaredInterval[e], n.RSquaredInterval[e])
		}
		for j, c := range m.Coefficients {
			d := n.Coefficients[j]
			s := 1.0
			if j > 0 {
				s = scale
			}
			same(m.Model+" "+c.Name, c.Estimate, d.Estimate*s)
			for kind, iv := range c.Intervals {
				for e := range 2 {
					same(m.Model+" "+c.Name+" "+kind, iv[e], d.Intervals[kind][e]*s)
				}
			}
			if c.CR2 != nil {
				same(m.Model+" "+c.Name+" CR2 df", c.CR2.DF, d.CR2.DF)
			}
		}
	}
}

// A predictor in another unit changes its coefficient by that unit and nothing
// else: slopes in m/m against slopes ten times as steep.
func TestScalingLaw(t *testing.T) {
	rows := inventedRows(4, 60, 20)
	steep := append([]Row(nil), rows...)
	for i := range steep {
		steep[i].ValleySlope *= 10
	}
	req := lawRequest()
	req.Models = nil
	for _, form := range []string{"linear", "exponential", "floor_decay", "quantile_50", "theil_sen"} {
		req.Models = append(req.Models, ModelSpec{form, "valley_slope"})
	}
	compareModels(t, "slopes times ten", analyse(t, rows, req), analyse(t, steep, req), 10, 1e-5)
}

// Adding a constant to every sinuosity moves the intercept and nothing else.
func TestTranslationLaw(t *testing.T) {
	rows := inventedRows(4, 60, 20)
	moved := append([]Row(nil), rows...)
	for i := range moved {
		moved[i].Sinuosity += 3
	}
	req := lawRequest()
	req.Models = []ModelSpec{{"linear", "abs_latitude"}, {"linear", "valley_slope"}, {"theil_sen", "abs_latitude"}, {"quantile_90", "abs_latitude"}}
	a, b := analyse(t, rows, req), analyse(t, moved, req)
	for i, m := range a.Models {
		n := b.Models[i]
		near(t, m.Model+" intercept", m.Coefficients[0].Estimate+3, n.Coefficients[0].Estimate, 1e-9)
		near(t, m.Model+" slope", m.Coefficients[1].Estimate, n.Coefficients[1].Estimate, 1e-8)
		near(t, m.Model+" R2", m.RSquared, n.RSquared, 1e-8)
		for kind, iv := range m.Coefficients[1].Intervals {
			near(t, m.Model+" "+kind, iv[0], n.Coefficients[1].Intervals[kind][0], 1e-7)
			near(t, m.Model+" "+kind, iv[1], n.Coefficients[1].Intervals[kind][1], 1e-7)
		}
	}
}

// With every row a cluster of its own, whole clusters and rows are one thing,
// and CR2 is the HC2 error.
func TestSingleRowClusters(t *testing.T) {
	rows := inventedRows(5, 40, 40)
	req := lawRequest()
	req.Models = []ModelSpec{{"linear", "abs_latitude"}}
	a := analyse(t, rows, req)
	req.Cluster = "none"
	b := analyse(t, rows, req)
	compareModels(t, "cluster=none", a, b, 1, 0)
	m := a.Models[0]
	f, err := FitLinear([][]float64{columnFrom(a, "abs_latitude")}, responses(a))
	if err != nil {
		t.Fatal(err)
	}
	// HC2 of the slope: sum (u_i e_i)^2/(1-h_i) / Q^2 (MacKinnon & White, J.
	// Econom. 29:305 (1985)).
	x := columnFrom(a, "abs_latitude")
	mean, length := centreScale(x)
	v := 0.0
	for i, e := range f.Residual {
		u := (x[i] - mean) / (length * length)
		v += u * u * e * e / (1 - f.Hat[i])
	}
	needDigits(t, "CR2 of single rows", m.Coefficients[1].CR2.SE, math.Sqrt(v), 9)
	if m.Coefficients[1].Intervals["row_bootstrap"] != (Interval{}) {
		t.Error("a row bootstrap beside rows that are clusters says nothing new")
	}
}

func columnFrom(a *Analysis, p string) []float64 {
	var out []float64
	for _, u := range a.Used {
		if u.Kept {
			out = append(out, u.PredictorOf[p])
		}
	}
	return out
}

func responses(a *Analysis) []float64 {
	var out []float64
	for _, u := range a.Used {
		if u.Kept {
			out = append(out, u.Response)
		}
	}
	return out
}

// The seed is the only chance in it: the same request twice is the same answer,
// another seed another.
func TestSeed(t *testing.T) {
	rows := inventedRows(3, 60, 20)
	req := lawRequest()
	a, b := analyse(t, rows, req), analyse(t, rows, req)
	if !reflect.DeepEqual(a.Models[0].Coefficients[1].Interval, b.Models[0].Coefficients[1].Interval) {
		t.Error("the same seed gives two answers")
	}
	req.Seed = 2
	c := analyse(t, rows, req)
	if a.Models[0].Coefficients[1].Interval == c.Models[0].Coefficients[1].Interval {
		t.Error("another seed gives the same interval")
	}
}
