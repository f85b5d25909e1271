package stats

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
)

// Separation is how many new systems poleward of a latitude would tell two
// explanations apart with 80 % power, whichever of them is true.
type Separation struct {
	A          string  `json:"a"`
	B          string  `json:"b"`
	Poleward   float64 `json:"poleward"`
	IfA        int     `json:"if_a"` // systems needed when a is true
	IfB        int     `json:"if_b"`
	MoreThan   bool    `json:"more_than"`    // not even the larger of the two is enough
	PowerNow   float64 `json:"power_now"`    // with no new system, the smaller of the two
	PowerAtMax float64 `json:"power_at_max"` // with maxNewSystems, the smaller of the two
	Text       string  `json:"text"`
}

const (
	maxNewSystems    = 1024
	separationDraws  = 200
	separationPower  = 0.8
	highestLatitude  = 80 // degrees: where margins with channels end
	separationStream = 0x9e6c63d0876a9a47
)

// separate simulates catalogues from each of two fitted explanations: the rows
// that are there keep their places, n new systems stand poleward of the latitude
// (their latitude uniform up to 80 degrees, everything else drawn from the
// rows, so that supply and latitude are unlinked among them), and both
// explanations are refitted. They are told apart when the mean difference of
// their log scores over clusters is beyond two of its standard errors in favour
// of the true one (Vuong, Econometrica 57:307 (1989), doi 10.2307/1912557, with
// clusters for rows).
func separate(ctx context.Context, rows []Row, req Request, o NextOptions) (Separation, error) {
	s := Separation{A: o.Explanations[0], B: o.Explanations[1], Poleward: o.Poleward, PowerNow: nan, PowerAtMax: nan}
	req.Models, req.Joint = []ModelSpec{{"linear", "abs_latitude"}}, []string{s.A, s.B}
	used := consider(rows, &req)
	t := newTable(used, &req, "")
	sim := &separator{t: t, req: &req, poleward: o.Poleward}
	for _, name := range o.Explanations {
		f := fitPlan(t, newJointPlan(t, []string{name}, [2]string{}, req.Scale))
		if f.failure != "" {
			s.Text = "How many systems would separate " + nameOf(s.A) + " and " + nameOf(s.B) + " cannot be said: " + f.failure
			return s, nil
		}
		sim.rivals = append(sim.rivals, f)
	}
	sim.scatter()
	now, need, enough := 1.0, [2]int{}, true
	s.PowerAtMax = 1
	for truth := range 2 {
		p, err := sim.power(ctx, truth, 0)
		if err != nil {
			return s, err
		}
		now = math.Min(now, p)
		n, found := 0, p >= separationPower
		if !found {
			last := 0.0
			n, found, err = firstTrue(func(n int) (bool, error) {
				p, err := sim.power(ctx, truth, n)
				last = p
				return p >= separationPower, err
			}, maxNewSystems)
			if err != nil {
				return s, err
			}
			if !found {
				s.PowerAtMax = math.Min(s.PowerAtMax, last)
			}
		}
		need[truth] = n
		enough = enough && found
	}
	s.PowerNow, s.IfA, s.IfB, s.MoreThan = now, need[0], need[1], !enough
	s.sentence()
	return s, nil
}

func (s *Separation) sentence() {
	a, b := nameOf(s.A), nameOf(s.B)
	switch {
	case s.MoreThan:
		s.Text = fmt.Sprintf("More than %d new systems poleward of %s degrees would be needed to tell %s from %s with 80 %% power: such systems do not separate them.", maxNewSystems, number(s.Poleward), a, b)
	case s.IfA == 0 && s.IfB == 0:
		s.Text = fmt.Sprintf("The rows that are there tell %s from %s with at least 80 %% power.", a, b)
	default:
		s.Text = fmt.Sprintf("To tell %s from %s with 80 %% power takes %s poleward of %s degrees if %s is true, %d if %s is (power now %s).",
			a, b, plural(s.IfA, "new system", "new systems"), number(s.Poleward), a, s.IfB, b, percent(s.PowerNow))
	}
}

// separator simulates catalogues.
type separator struct {
	t               *table
	req             *Request
	poleward        float64
	rivals          []*fitted
	between, within [2]float64 // standard deviations of the residuals
}

// scatter splits each rival's residual variance into clusters and rows, by the
// method of moments of one-way analysis of variance (unequal sizes: Searle,
// Casella & McCulloch, Variance Components (1992), ch. 3).
func (s *separator) scatter() {
	g := &s.t.cluster
	n, k := float64(s.t.n()), float64(g.count())
	for r, f := range s.rivals {
		var ssw, ssb, sizes float64
		for c := range g.count() {
			m := g.members(c)
			mean := 0.0
			for _, i := range m {
				mean += f.resid[i] / float64(len(m))
			}
			for _, i := range m {
				ssw += (f.resid[i] - mean) * (f.resid[i] - mean)
			}
			ssb += float64(len(m)) * mean * mean
			sizes += float64(len(m) * len(m))
		}
		within := 0.0
		if n > k {
			within = ssw / (n - k)
		}
		n0 := (n - sizes/n) / math.Max(1, k-1)
		s.between[r] = math.Sqrt(math.Max(0, (ssb/math.Max(1, k-1)-within)/n0))
		s.within[r] = math.Sqrt(within)
	}
}

// power is the share of simulated catalogues, drawn from rival truth, that tell
// it from the other.
func (s *separator) power(ctx context.Context, truth, n int) (float64, error) {
	hits := make([]bool, separationDraws)
	err := inBlocks(ctx, separationDraws, s.req.Workers, nil, func() func(int) {
		return func(i int) {
			hits[i] = s.once(truth, n, rand.New(rand.NewPCG(s.req.Seed^separationStream, uint64(truth*separationDraws+i))))
		}
	})
	c := 0
	for _, h := range hits {
		if h {
			c++
		}
	}
	return float64(c) / separationDraws, err
}

// once draws one catalogue and asks whether it favours the truth clearly.
func (s *separator) once(truth, n int, rng *rand.Rand) bool {
	rows, g := s.t.n(), s.t.cluster.count()
	cols := [2][][]float64{}
	pick, lat := make([]int, n), make([]float64, n)
	for i := range n {
		pick[i] = rng.IntN(rows)
		lat[i] = s.poleward + (highestLatitude-s.poleward)*rng.Float64()
	}
	for r, f := range s.rivals {
		for _, c := range f.cols {
			x := append([]float64(nil), c...)
			for i := range n {
				v := c[pick[i]]
				if isLatitude(f.predictor) {
					row := EmptyRow()
					row.LatitudeDeg = lat[i]
					v = predictorOf(&row, f.predictor, "present").value
				}
				x = append(x, v)
			}
			cols[r] = append(cols[r], x)
		}
	}
	z, effect := make([]float64, rows+n), make([]float64, g+n)
	for c := range effect {
		effect[c] = s.between[truth] * rng.NormFloat64()
	}
	cluster := func(i int) int {
		if i < rows {
			return s.t.cluster.of[i]
		}
		return g + i - rows
	}
	for i := range z {
		z[i] = s.rivals[truth].coef[0] + effect[cluster(i)] + s.within[truth]*rng.NormFloat64()
		for j, c := range cols[truth] {
			z[i] += s.rivals[truth].coef[j+1] * c[i]
		}
	}
	return s.favours(truth, cols, z, cluster, g+n)
}

// favours compares the log scores of both rivals, cluster by cluster.
func (s *separator) favours(truth int, cols [2][][]float64, z []float64, cluster func(int) int, clusters int) bool {
	d := make([]float64, clusters)
	for r := range 2 {
		f, err := FitLinear(cols[r], z)
		if err != nil {
			return false
		}
		sign := -1.0
		if r == truth {
			sign = 1
		}
		v := f.RSS / float64(f.N)
		for i, e := range f.Residual {
			d[cluster(i)] += sign * (-math.Log(v)/2 - e*e/(2*v))
		}
	}
	sum, square := 0.0, 0.0
	for _, x := range d {
		sum += x
	}
	mean := sum / float64(clusters)
	for _, x := range d {
		square += (x - mean) * (x - mean)
	}
	return sum > 1.96*math.Sqrt(square) && !slices.ContainsFunc(d, math.IsNaN)
}
