package expectation

import (
	"context"
	"fmt"
	"math/rand/v2"
	"sort"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/google/go-cmp/cmp/cmpopts"

	"fathombend/stats"
)

// TestExpectCombined: a target of a file gets the digits that its page shows.
func TestExpectCombined(t *testing.T) {
	rows := plainLaw.draw(3)
	rows[0].Sinuosity = 1 // so that P = 1 has a share
	f := mustFit(t, rows, Options{})
	for i, change := range []func(*Target){
		func(*Target) {},
		func(q *Target) { q.TargetSlope, q.TargetFeeder, q.ObservedSinuosity = 0.004, "river", 1.6 },
		func(q *Target) { q.Age, q.AgeSE, q.Seed, q.Draws = 300, 20, 9, 777 },
		func(q *Target) { q.Seed, q.Draws = 9, 5000 }, // after fewer of the same seed
		func(q *Target) { q.TargetGrain = "gravel" },  // which no row has
	} {
		q := latitude(-40, 4)
		change(&q)
		whole := mustExpect(t, f, q)
		part, err := f.ExpectCombined(context.Background(), q)
		if err != nil {
			t.Fatal(err)
		}
		whole.Combined.Jackknife, whole.Combined.Parts = nil, nil
		whole.Explanations, whole.Regime, whole.Tendencies = nil, Regime{}, nil
		whole.NearestSystems, whole.Dimensions, whole.Sensitivity = nil, nil, nil
		if a, b := fmt.Sprintf("%+v", *whole.Combined.Sinuosity), fmt.Sprintf("%+v", *part.Combined.Sinuosity); a != b {
			t.Errorf("target %d: %s alone, %s in a file", i, a, b)
		}
		whole.Combined.Sinuosity, part.Combined.Sinuosity = nil, nil
		if diff := cmp.Diff(whole, part, cmpopts.EquateNaNs()); diff != "" {
			t.Errorf("target %d differs:\n%s", i, diff)
		}
	}
}

// TestDonorsPick: the guide finds what a search of the cumulative weights finds.
func TestDonorsPick(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 5))
	for _, n := range []int{1, 2, 7, 300} {
		d := donors{}
		var sum float64
		for i := range n {
			sum += rng.Float64() * rng.Float64()
			d.rows, d.total = append(d.rows, i), append(d.total, sum)
		}
		d.index()
		for range 2000 {
			u := rng.Float64()
			want := min(sort.SearchFloat64s(d.total, u*sum), n-1)
			if got := d.pick(u); got != want {
				t.Fatalf("%d rows, share %v: row %d, a search finds %d", n, u, got, want)
			}
		}
	}
}

// TestFitThins: of more deposits than are fitted on, whole ones are kept, which
// do not depend on the order of the rows, and the result says so.
func TestFitThins(t *testing.T) {
	l := plainLaw
	l.deposits = MostDeposits + 100
	rows := l.draw(11)
	f := mustFit(t, rows, Options{})
	if n := len(f.frame.clusters); n != MostDeposits {
		t.Fatalf("%d deposits, want %d", n, MostDeposits)
	}
	inRows := map[string]int{}
	for _, r := range rows {
		inRows[r.ParentDeposit]++
	}
	for c, name := range f.frame.clusters {
		if n := f.frame.start[c+1] - f.frame.start[c]; n != inRows[name] {
			t.Errorf("%s has %d of its %d rows", name, n, inRows[name])
		}
	}
	res := mustExpect(t, f, latitude(30, 2))
	if res.Rows != len(f.frame.obs) || res.InventedRows != res.Rows || res.Clusters != MostDeposits {
		t.Errorf("%d rows, %d invented, %d deposits", res.Rows, res.InventedRows, res.Clusters)
	}
	if want := fmt.Sprintf("in %d whole deposits drawn at random (seed 1) from %d rows in %d:", MostDeposits, len(rows), l.deposits); !strings.Contains(strings.Join(res.Notes, " "), want) {
		t.Errorf("the notes lack %q: %v", want, res.Notes)
	}
	back := append([]stats.Row(nil), rows...)
	rand.New(rand.NewPCG(1, 2)).Shuffle(len(back), func(i, j int) { back[i], back[j] = back[j], back[i] })
	again := mustExpect(t, mustFit(t, back, Options{}), latitude(30, 2))
	if *again.Combined.Sinuosity != *res.Combined.Sinuosity {
		t.Errorf("rows in another order: %+v, %+v", *again.Combined.Sinuosity, *res.Combined.Sinuosity)
	}
}
