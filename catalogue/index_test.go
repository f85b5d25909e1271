package catalogue

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"
)

// TestIndexSaysWhatSQLSays draws filters and compares the page, the total, the
// quantiles and the facets, which come from the index in memory, with what
// Rows, which asks SQL, gives for the same filter.
func TestIndexSaysWhatSQLSays(t *testing.T) {
	s := open(t)
	rng := rand.New(rand.NewPCG(8, 1))
	rows := many(120)
	for i := range rows {
		r := &rows[i]
		r.LatitudeDeg, r.LongitudeDeg = Num(math.Round(180*rng.Float64()-90)), Num(math.Round(540*rng.Float64()-180))
		if i%17 == 0 {
			r.LongitudeDeg = Num([]float64{180, -180}[i%2])
		}
		r.Grade = []string{"remeasured", "surveyed", "traced", "quoted"}[rng.IntN(4)]
		r.ValleySlope, r.AgeMa = Number{}, Number{}
		if rng.IntN(3) > 0 {
			r.ValleySlope = Num(math.Round(1000*rng.Float64()) / 1e5)
		}
		if rng.IntN(3) == 0 {
			r.AgeMa = Num(float64(rng.IntN(80)))
		}
		r.Reach = []string{"", "upper", "Upper", "lower"}[rng.IntN(4)]
	}
	if err := s.InsertRows(ctx, rows, nil, 0, "test"); err != nil {
		t.Fatal(err)
	}
	sorts := []string{"", "system", "-system", "valley_slope", "-valley_slope", "grade", "-grade", "reach", "-reach", "age_ma", "-sinuosity", "source"}
	passing := 0
	for n := range 150 {
		f := drawnFilter(rng)
		f.Sort = sorts[rng.IntN(len(sorts))]
		passing += compareWithRows(t, s, f, n)
	}
	if passing < 500 {
		t.Errorf("only %d systems passed any filter: the filters drawn are too narrow to tell", passing)
	}
}

func drawnFilter(rng *rand.Rand) Filter {
	f := Filter{Choices: map[string][]string{}}
	some := func() bool { return rng.IntN(4) == 0 }
	if some() {
		f.Choices["grade"] = []string{"surveyed", "quoted"}[:1+rng.IntN(2)]
	}
	if some() {
		f.Choices["feeder"] = []string{"river"}
	}
	if some() {
		f.LatMin, f.LatMax = Num(float64(rng.IntN(90)-90)), Num(float64(rng.IntN(90)))
	}
	if some() {
		f.AbsLatMin = Num(float64(rng.IntN(60)))
	}
	if some() {
		f.SlopeMax = Num(0.005)
	}
	if some() {
		f.AgeMin, f.AgeMax = Num(0), Num(float64(rng.IntN(80)))
	}
	if some() {
		f.Text = []string{"invented", "invented 0001", "nothing like it", "upper", "!"}[rng.IntN(5)]
	}
	if some() {
		f.BBox = []*BBox{{170, -90, -170, 90}, {-180, -60, -90, 60}, {0, 0, 180, 90}, {-180, -90, 180, 90}}[rng.IntN(4)]
	}
	return f
}

// compareWithRows returns how many systems pass the filter.
func compareWithRows(t *testing.T, s *Store, f Filter, n int) int {
	t.Helper()
	rows, err := s.Rows(ctx, Filter{Text: f.Text, Choices: f.Choices, LatMin: f.LatMin, LatMax: f.LatMax, AbsLatMin: f.AbsLatMin, SlopeMax: f.SlopeMax, AgeMin: f.AgeMin, AgeMax: f.AgeMax, BBox: f.BBox})
	if err != nil {
		t.Fatal(err)
	}
	rank := map[string]int{"remeasured": 0, "surveyed": 1, "traced": 2, "quoted": 3}
	best := map[string]Row{}
	for _, r := range rows { // oldest first
		if b, ok := best[r.System]; !ok || rank[r.Grade] <= rank[b.Grade] {
			best[r.System] = r
		}
	}
	want := []string{}
	order := f
	if order.Sort == "" {
		order.Sort = "system"
	}
	all, err := s.Rows(ctx, order) // sorted by SQL
	if err != nil {
		t.Fatal(err)
	}
	for _, r := range all {
		if best[r.System].Measurement == r.Measurement {
			want = append(want, r.System)
		}
	}
	f.PerPage = 7
	var got []string
	measurements := 0
	for f.Page = 1; ; f.Page++ {
		page, total, err := s.Systems(ctx, f)
		if err != nil || total != len(want) {
			t.Fatalf("filter %d, %+v: total %d (%v), want %d", n, f, total, err, len(want))
		}
		for _, y := range page {
			got = append(got, y.Slug)
			measurements += len(y.Measurements)
			if b := y.Best(); b.Measurement != best[y.Slug].Measurement {
				t.Errorf("filter %d: %s stands for %s, want %s", n, b.Measurement, y.Slug, best[y.Slug].Measurement)
			}
		}
		if len(page) < f.PerPage {
			break
		}
	}
	if !slices.Equal(got, want) || measurements != len(rows) {
		t.Errorf("filter %d, %+v:\n%v with %d measurements, want\n%v with %d", n, f, got, measurements, want, len(rows))
	}
	dims, err := s.DimensionQuantiles(ctx, f)
	if err != nil {
		t.Fatal(err)
	}
	var widths []float64
	for _, r := range rows {
		if r.ChannelWidthM.Valid {
			widths = append(widths, r.ChannelWidthM.V)
		}
	}
	slices.Sort(widths)
	if dims[0].N != len(widths) || dims[0].P25 != quantile(widths, 0.25) {
		t.Errorf("filter %d: %d widths, first quartile %v; want %d, %v", n, dims[0].N, dims[0].P25, len(widths), quantile(widths, 0.25))
	}
	compareFacet(t, s, f, n)
	return len(want)
}

// compareFacet counts the systems by grade under all of the filter but its
// grades.
func compareFacet(t *testing.T, s *Store, f Filter, n int) {
	t.Helper()
	without := f
	without.Sort, without.Choices = "", map[string][]string{"feeder": f.Choices["feeder"]}
	rows, err := s.Rows(ctx, without)
	if err != nil {
		t.Fatal(err)
	}
	systems := map[string]map[string]bool{}
	for _, r := range rows {
		if systems[r.Grade] == nil {
			systems[r.Grade] = map[string]bool{}
		}
		systems[r.Grade][r.System] = true
	}
	facets, err := s.Facets(ctx, f)
	if err != nil {
		t.Fatal(err)
	}
	for _, facet := range facets {
		if facet.Column != "grade" {
			continue
		}
		got := map[string]int{}
		for _, v := range facet.Values {
			got[v.Value] = v.Count
		}
		for _, g := range []string{"remeasured", "surveyed", "traced", "quoted"} {
			if got[g] != len(systems[g]) {
				t.Errorf("filter %d: %d systems with grade %s, want %d (%s)", n, got[g], g, len(systems[g]), fmt.Sprintf("%+v", f))
			}
		}
	}
}
