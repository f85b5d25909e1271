package stats

import (
	"encoding/csv"
	"encoding/json"
	"math"
	"os"
	"strconv"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// referenceRows reads testdata/reference_rows.csv (48 invented rows in 18
// parent deposits).
func referenceRows(t testing.TB) []Row {
	t.Helper()
	f, err := os.Open("testdata/reference_rows.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rec, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var rows []Row
	for i, r := range rec[1:] {
		num := func(k int) float64 {
			v, err := strconv.ParseFloat(r[k], 64)
			if err != nil {
				t.Fatal(err)
			}
			return v
		}
		row := EmptyRow()
		row.ID, row.System, row.SystemName, row.ParentDeposit, row.Order = "r"+r[0], "s"+r[0], "System "+r[0], r[1], i
		row.Kind, row.SinuosityKind, row.MeasuredLine, row.Grade, row.Invented = "submarine", "peak", "thalweg", "quoted", true
		row.LatitudeDeg, row.ValleySlope, row.Sinuosity = num(2), num(3), num(5)
		row.Categories = map[string]string{"feeder": r[4]}
		rows = append(rows, row)
	}
	if len(rows) != 48 {
		t.Fatalf("%d reference rows", len(rows))
	}
	return rows
}

func referenceTable(t testing.TB, cluster string) *table {
	t.Helper()
	req := DefaultRequest()
	req.Cluster = cluster
	req.Joint = []string{"valley_slope", "abs_latitude", "feeder"}
	req.Models = append(req.Models, ModelSpec{"linear", "sin_abs_latitude"})
	return newTable(consider(referenceRows(t), &req), &req, "")
}

// reference is testdata/reference_r.json: R 4.2.2.
func reference(t testing.TB) map[string]json.RawMessage {
	t.Helper()
	b, err := os.ReadFile("testdata/reference_r.json")
	if err != nil {
		t.Fatal(err)
	}
	var out map[string]json.RawMessage
	if err := json.Unmarshal(b, &out); err != nil {
		t.Fatal(err)
	}
	return out
}

func referenceValue[T any](t testing.TB, key string) T {
	t.Helper()
	var v T
	if err := json.Unmarshal(reference(t)[key], &v); err != nil {
		t.Fatalf("%s: %v", key, err)
	}
	return v
}

// bruteCR2 follows Pustejovsky & Tipton (2018), equations 5 and 10, with whole
// matrices: V = sum_g (a_g'e_g)^2, a_g = A_g X_g M c, A_g = (I - H_gg)^-1/2;
// df = tr(P'P)^2/tr((P'P)^2), p_g = (I - H)_g' a_g.
func bruteCR2(p *plan, of []int, fit *LinearFit, coef int) (se, df float64) {
	n, k := len(p.z), len(p.cols)+1
	x := mat.NewDense(n, k, nil)
	for i := range n {
		x.Set(i, 0, 1)
		for j, c := range p.cols {
			x.Set(i, j+1, c[i])
		}
	}
	var xx, m, h, mx mat.Dense
	xx.Mul(x.T(), x)
	if err := m.Inverse(&xx); err != nil {
		panic(err)
	}
	mx.Mul(x, &m)
	h.Mul(&mx, x.T())
	groups := 0
	for _, g := range of {
		groups = max(groups, g+1)
	}
	pm := mat.NewDense(n, groups, nil)
	v := 0.0
	for g := range groups {
		var rows []int
		for i, o := range of {
			if o == g {
				rows = append(rows, i)
			}
		}
		r := len(rows)
		s := mat.NewSymDense(r, nil)
		for a := range r {
			for b := a; b < r; b++ {
				d := -h.At(rows[a], rows[b])
				if a == b {
					d++
				}
				s.SetSym(a, b, d)
			}
		}
		var eig mat.EigenSym
		if !eig.Factorize(s, true) {
			panic("eigenvalues")
		}
		var u mat.Dense
		eig.VectorsTo(&u)
		a := make([]float64, r)
		for j, l := range eig.Values(nil) {
			w := 0.0
			for i := range r {
				w += u.At(i, j) * mx.At(rows[i], coef)
			}
			for i := range r {
				a[i] += u.At(i, j) * w / math.Sqrt(l)
			}
		}
		ae := 0.0
		for i := range r {
			ae += a[i] * fit.Residual[rows[i]]
			for b := range n {
				d := -h.At(rows[i], b)
				if rows[i] == b {
					d++
				}
				pm.Set(b, g, pm.At(b, g)+d*a[i])
			}
		}
		v += ae * ae
	}
	var pp mat.Dense
	pp.Mul(pm.T(), pm)
	tr, sq := 0.0, 0.0
	for a := range groups {
		tr += pp.At(a, a)
		for b := range groups {
			sq += pp.At(a, b) * pp.At(a, b)
		}
	}
	return math.Sqrt(v), tr * tr / sq
}

// rFit is one fit of reference_r.json.
type rFit struct {
	Coef, SE             []float64
	R2, Sigma, AICc, BIC float64
	PRESS                float64
	MaxCook              float64 `json:"max_cook"`
	R2Sinuosity          float64 `json:"r2_sinuosity"`
}

// lm() and nls() of R 4.2.2 on the reference rows (reference.R).
func TestReferenceFits(t *testing.T) {
	tab := referenceTable(t, "parent_deposit")
	for key, m := range map[string]ModelSpec{
		"linear_slope": {"linear", "valley_slope"}, "linear_absl": {"linear", "abs_latitude"}, "linear_f_1e4": {"linear", "coriolis"},
		"exponential_slope": {"exponential", "valley_slope"}, "power_slope": {"power", "valley_slope"},
		"logarithmic_slope": {"logarithmic", "valley_slope"}, "inverse_f_1e4": {"inverse", "coriolis"},
	} {
		checkReferenceFit(t, key, newPlan(tab, m, "raw"))
	}
	checkReferenceFit(t, "joint_slope_absl", newJointPlan(tab, []string{"valley_slope", "abs_latitude"}, [2]string{}, "raw"))
	checkReferenceFit(t, "joint_with_feeder", newJointPlan(tab, []string{"valley_slope", "abs_latitude", "feeder"}, [2]string{}, "raw"))
}

func checkReferenceFit(t *testing.T, key string, p *plan) {
	t.Helper()
	want := referenceValue[rFit](t, key)
	f, err := FitLinear(p.cols, p.z)
	if err != nil {
		t.Fatal(err)
	}
	const d = 8
	for j := range want.Coef {
		needDigits(t, key+" coefficient", f.Coef[j], want.Coef[j], d)
		needDigits(t, key+" standard error", f.SE[j], want.SE[j], d)
	}
	needDigits(t, key+" R2", f.R2, want.R2, d)
	needDigits(t, key+" sigma", f.Sigma, want.Sigma, d)
	needDigits(t, key+" AICc", f.AICc(), want.AICc, d)
	needDigits(t, key+" BIC", f.BIC(), want.BIC, d)
	needDigits(t, key+" PRESS", f.PRESS(), want.PRESS, d)
	cook := 0.0
	for _, c := range f.Cook() {
		cook = math.Max(cook, c)
	}
	needDigits(t, key+" largest Cook's distance", cook, want.MaxCook, d)
	needDigits(t, key+" R2 in sinuosity units", backR2(p, f.Fitted), want.R2Sinuosity, d)
}
