package stats

import (
	"context"
	"math"
	"testing"
)

func analyse(t testing.TB, rows []Row, req Request) *Analysis {
	t.Helper()
	a, err := Analyse(context.Background(), rows, req, nil)
	if err != nil {
		t.Fatal(err)
	}
	return a
}

func modelOf(t testing.TB, a *Analysis, label string) *Model {
	t.Helper()
	for i := range a.Models {
		if a.Models[i].Model == label {
			return &a.Models[i]
		}
	}
	t.Fatalf("no model %s", label)
	return nil
}

// The whole answer on the reference rows, against R (testdata/reference.R).
func TestAnalyseReference(t *testing.T) {
	req := DefaultRequest()
	req.Models = []ModelSpec{{"linear", "valley_slope"}, {"linear", "abs_latitude"}, {"floor_decay", "coriolis"}}
	req.Joint = []string{"valley_slope", "abs_latitude", "feeder"}
	a := analyse(t, referenceRows(t), req)
	if a.Rows != 48 || a.Clusters != 18 || a.InventedRows != 48 || len(a.Dropped) != 0 {
		t.Errorf("%d rows, %d clusters, %d invented, dropped %v", a.Rows, a.Clusters, a.InventedRows, a.Dropped)
	}
	for label, key := range map[string]string{"linear:valley_slope": "linear_slope", "linear:abs_latitude": "linear_absl", "joint:valley_slope+abs_latitude+feeder": "joint_with_feeder"} {
		want, m := referenceValue[rFit](t, key), modelOf(t, a, label)
		for j, c := range m.Coefficients {
			needDigits(t, label+" coefficient", c.Estimate, want.Coef[j], 8)
			needDigits(t, label+" standard error", c.StandardError, want.SE[j], 8)
		}
		needDigits(t, label+" R2", m.RSquared, want.R2, 8)
		needDigits(t, label+" AICc", m.AICc, want.AICc, 8)
	}
	m := modelOf(t, a, "floor_decay:coriolis")
	want := referenceValue[struct {
		Coef, SE []float64
		RSS, R2  float64
	}](t, "floor_decay_f_1e4")
	for j, c := range m.Coefficients {
		needDigits(t, "floor decay coefficient", c.Estimate, want.Coef[j], 6)
		needDigits(t, "floor decay standard error", c.StandardError, want.SE[j], 6)
	}
	needDigits(t, "floor decay R2", m.RSquared, want.R2, 8)
	lat := modelOf(t, a, "linear:abs_latitude")
	needDigits(t, "Kendall", lat.Kendall, referenceValue[float64](t, "kendall_absl"), 10)
	needDigits(t, "Spearman", lat.Spearman, referenceValue[float64](t, "spearman_absl"), 10)
	for k, v := range referenceValue[map[string]float64](t, "lmg") {
		for _, s := range a.Shares {
			if s.Predictor == k || k == "absl" && s.Predictor == "abs_latitude" {
				needDigits(t, "share of "+k, s.Share, v, 8)
				if !(s.Interval[0] <= s.Share && s.Share <= s.Interval[1]) {
					t.Errorf("share of %s %v outside its interval %v", k, s.Share, s.Interval)
				}
			}
		}
	}
	sum := 0.0
	for _, s := range a.Shares {
		sum += s.Share
	}
	needDigits(t, "sum of the shares", sum, modelOf(t, a, "joint:valley_slope+abs_latitude+feeder").RSquared, 10)
	if math.Abs(lat.RSquared-0.655) > 0.001 {
		t.Error(lat.RSquared)
	}
}
