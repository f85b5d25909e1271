package stats

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// inventedRows draws systems about a decay in f, with scatter between deposits
// and within; sizes of deposits are unequal, as in a real catalogue.
func inventedRows(seed uint64, n, deposits int) []Row {
	rng := rand.New(rand.NewPCG(seed, 77))
	rows := make([]Row, n)
	lat, slope, shift := make([]float64, deposits), make([]float64, deposits), make([]float64, deposits)
	for d := range deposits {
		lat[d] = 75 * rng.Float64()
		slope[d] = math.Exp(-5.5 + 0.9*rng.NormFloat64())
		shift[d] = 0.25 * rng.NormFloat64()
	}
	for i := range rows {
		d := i
		if i >= deposits {
			d = int(float64(deposits) * rng.Float64() * rng.Float64())
		}
		r := EmptyRow()
		r.ID, r.System, r.ParentDeposit = fmt.Sprintf("m%d", i), fmt.Sprintf("s%d", i), fmt.Sprintf("D%d", d)
		r.SystemName, r.Kind, r.SinuosityKind, r.MeasuredLine, r.Order = r.System, "submarine", "peak", "thalweg", i
		r.LatitudeDeg = math.Min(89, lat[d]+rng.NormFloat64())
		r.ValleySlope = slope[d] * math.Exp(0.3*rng.NormFloat64())
		r.ChannelWidthM = math.Exp(7 + 0.5*rng.NormFloat64())
		f := 1.4584 * math.Abs(math.Sin(r.LatitudeDeg*math.Pi/180))
		r.Sinuosity = 1 + 1.6*math.Exp(-1.2*f+shift[d]+0.25*rng.NormFloat64())
		rows[i] = r
	}
	return rows
}

// BenchmarkThreeModels is the page of the demo: three models, 9,999 resamples
// of about 30 deposits, every interval kind, tests capped, one core.
func BenchmarkThreeModels(b *testing.B) {
	rows := inventedRows(1, 80, 30)
	for _, permutations := range []int{MinPermutations, 1999} {
		for name, models := range map[string][]ModelSpec{
			"lines": {{"linear", "valley_slope"}, {"linear", "abs_latitude"}, {"linear", "coriolis"}},
			"decay": {{"linear", "valley_slope"}, {"linear", "abs_latitude"}, {"floor_decay", "coriolis"}},
			"power": {{"power", "valley_slope"}, {"exponential", "abs_latitude"}, {"linear", "coriolis"}},
		} {
			b.Run(fmt.Sprintf("%s/permutations=%d", name, permutations), func(b *testing.B) {
				req := DefaultRequest()
				req.Models, req.Permutations = models, permutations
				b.ReportAllocs()
				for b.Loop() {
					analyse(b, rows, req)
				}
			})
		}
	}
}

// BenchmarkLarge is 100,000 rows in 2,000 clusters: fits and intervals of three
// straight lines, tests capped.
func BenchmarkLarge(b *testing.B) {
	rows := inventedRows(2, 100_000, 2000)
	for i := range rows {
		rows[i].System = rows[i].ParentDeposit
	}
	req := DefaultRequest()
	req.Permutations = MinPermutations
	for b.Loop() {
		analyse(b, rows, req)
	}
}

// sixtyRows are the 48 reference rows and the first 12 again, as in
// bench/against_r.R, each row a group of its own.
func sixtyRows(b *testing.B) *table {
	rows := referenceRows(b)
	req := DefaultRequest()
	t := newTable(consider(append(rows, rows[:12]...), &req), &req, "")
	t.cluster = singles(t.n())
	return t
}

// BenchmarkAgainstR is the work of bench/against_r.R: 10,000 row resamples of
// three straight lines, nine statistics, with all nine BCa intervals.
func BenchmarkAgainstR(b *testing.B) {
	t := sixtyRows(b)
	var slope Interval
	for b.Loop() {
		var jobs []job
		var models []*fitted
		for _, p := range []string{"valley_slope", "abs_latitude", "coriolis"} {
			f := fitPlan(t, newPlan(t, ModelSpec{"linear", p}, "raw"))
			models, jobs = append(models, f), append(jobs, job{est: f.cluster})
		}
		r, err := bootstrap(b.Context(), t.n(), 10_000, 1, 1, jobs, nil)
		if err != nil {
			b.Fatal(err)
		}
		for e, f := range models {
			jack := jackknife(f.cluster, t.n())
			for k, own := range []float64{f.coef[0], f.coef[1], f.r2} {
				v := r.column(e, k)
				sortFloats(v)
				if i := bcaInterval(v, own, columnOf(jack, k), 0.95); e == 1 && k == 1 {
					slope = i
				}
			}
		}
	}
	b.ReportMetric(slope[0], "low")
	b.ReportMetric(slope[1], "high")
}

// BenchmarkOneStatistic is 10,000 row resamples of one slope with its percentile
// interval, for the comparison with numpy.
func BenchmarkOneStatistic(b *testing.B) {
	t := sixtyRows(b)
	for b.Loop() {
		f := fitPlan(t, newPlan(t, ModelSpec{"linear", "abs_latitude"}, "raw"))
		r, err := bootstrap(b.Context(), t.n(), 10_000, 1, 1, []job{{est: f.cluster}}, nil)
		if err != nil {
			b.Fatal(err)
		}
		v := r.column(0, 1)
		sortFloats(v)
		percentileInterval(v, 0.95)
	}
}

// BenchmarkManyClusters is 100,000 rows, each a cluster of its own.
func BenchmarkManyClusters(b *testing.B) {
	rows := inventedRows(2, 100_000, 2000)
	req := DefaultRequest()
	req.Permutations, req.Cluster = MinPermutations, "none"
	for b.Loop() {
		analyse(b, rows, req)
	}
}
