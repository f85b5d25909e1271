package stats

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// randomRow draws a row with gaps, ties, extremes and impossible values.
func randomRow(rng *rand.Rand, i int) Row {
	r := EmptyRow()
	some := func(values ...float64) float64 { return values[rng.IntN(len(values))] }
	word := func(values ...string) string { return values[rng.IntN(len(values))] }
	r.ID, r.System, r.SystemName = fmt.Sprint("m", i), word("a", "b", "c", fmt.Sprint("s", i)), word("", "A")
	r.ParentDeposit, r.Source, r.Basin = word("", "P", "Q", "R", fmt.Sprint("d", i%7)), word("", "x", "y"), word("", "North")
	r.Kind, r.SinuosityKind, r.MeasuredLine = word("submarine", "submarine", "river"), word("peak", "mean", "", "unknown"), word("thalweg", "", "centreline")
	r.Grade, r.Order = word("", "quoted", "remeasured"), rng.IntN(5)
	if i%8 < 6 { // most rows are in order, or hardly any would be left
		r.Sinuosity, r.LatitudeDeg, r.ValleySlope = some(1.1, 1.5, 1+rng.ExpFloat64(), 1+rng.ExpFloat64()), some(10, 160*rng.Float64()-80, 160*rng.Float64()-80), some(0.002, rng.Float64()/50)
		r.ChannelWidthM, r.ChannelDepthM = 100+900*rng.Float64(), 10+90*rng.Float64()
		r.SinuositySE, r.ValleySlopeSE = some(math.NaN(), 0.2), some(math.NaN(), 0.001)
		r.Categories = map[string]string{"feeder": word("river", "shelf", "glacial"), "grain": word("mud", "sand"), "large_river": word("yes", "no")}
		return r
	}
	r.Sinuosity = some(1, 1, 1.2, 1.2, 1+rng.ExpFloat64(), 1+rng.ExpFloat64(), math.NaN(), 0.5, 1e9, 1+1e-15)
	r.SinuositySE = some(math.NaN(), 0.1, 0, -1)
	r.LatitudeDeg = some(0, 0, 30, 30, 90, -90, 180*rng.Float64()-90, 180*rng.Float64()-90, math.NaN(), 400)
	r.AgeMa, r.PalaeolatitudeDeg, r.PalaeolatitudeSEDeg = some(math.NaN(), 0, 60, 3000, -5), some(math.NaN(), 40, -95), some(math.NaN(), 5)
	r.ValleySlope, r.ValleySlopeSE = some(math.NaN(), 0.001, 0.001, 0, -1, 1e-300, rng.Float64()/50, rng.Float64()/50), some(math.NaN(), 0.001)
	r.ChannelWidthM, r.ChannelDepthM = some(math.NaN(), 500, 2000*rng.Float64(), 0), some(math.NaN(), 50)
	for range rng.IntN(8) {
		r.Windows = append(r.Windows, 1+rng.Float64())
	}
	if rng.IntN(4) > 0 {
		r.Categories = map[string]string{"feeder": word("river", "shelf", "glacial", "unknown"), "grain": word("mud", "sand", ""), "large_river": word("yes", "no")}
	}
	return r
}

func randomRequest(rng *rand.Rand) Request {
	req := DefaultRequest()
	pick := func(values []string) string { return values[rng.IntN(len(values))] }
	req.Response, req.MeasuredLine, req.Scale = pick(Responses), pick(MeasuredLines[:2]), pick(Scales)
	req.Cluster, req.Interval, req.Time, req.Pick = pick(Clusterings), pick(IntervalKinds), pick(Times), pick(Picks)
	req.K, req.Resamples, req.Permutations, req.Seed = 1+rng.IntN(4), 99, 99, rng.Uint64()
	req.Level = []float64{0.5, 0.95, 0.999}[rng.IntN(3)]
	req.MeasurementError = rng.IntN(3) == 0
	req.ThinStraight, req.ThinSinuous = []float64{0, 0.9}[rng.IntN(2)], []float64{0, 0.2}[rng.IntN(2)]
	if rng.IntN(3) == 0 {
		req.Group = "kind"
	}
	req.Models = nil
	for range 1 + rng.IntN(4) {
		m := ModelSpec{pick(Forms), pick(Predictors)}
		try := req
		try.Models = append(append([]ModelSpec(nil), req.Models...), m)
		if try.Validate() == nil {
			req.Models = try.Models
		}
	}
	if rng.IntN(2) == 0 || len(req.Models) == 0 {
		req.Joint = []string{"abs_latitude", "feeder", "valley_slope", "large_river"}[:1+rng.IntN(4)]
		if len(req.Joint) > 1 && rng.IntN(2) == 0 {
			req.Interaction = [2]string{req.Joint[0], req.Joint[1]}
		}
	}
	return req
}

// No rows and no request make a panic, a NaN in a sentence or an interval upside
// down; an error is a refusal.
func TestRandomQuestions(t *testing.T) {
	n := 400
	if *slow {
		n = 20_000
	}
	fitted := 0
	for i := range uint64(n) {
		rng := rand.New(rand.NewPCG(i, 55))
		var rows []Row
		for k := range rng.IntN(70) {
			rows = append(rows, randomRow(rng, k))
		}
		req := randomRequest(rng)
		t.Run(fmt.Sprint(i), func(t *testing.T) {
			a, err := Analyse(context.Background(), rows, req, nil)
			if err != nil {
				t.Fatalf("%+v: %v", req, err)
			}
			noBadNumbers(t, a)
			if kept := a.Rows; kept > len(rows) || len(a.Used) != len(rows) {
				t.Errorf("%d rows kept, %d reported, of %d", kept, len(a.Used), len(rows))
			}
			for _, m := range a.Models {
				if m.Failure == "" {
					fitted++
				}
			}
			dropped := 0
			for _, d := range a.Dropped {
				dropped += d.Rows
			}
			if a.Rows+dropped != len(rows) {
				t.Errorf("%d rows kept and %d dropped of %d", a.Rows, dropped, len(rows))
			}
		})
	}
	if fitted < n/2 {
		t.Errorf("only %d models were fitted in %d questions", fitted, n)
	}
}
