package seed

import (
	"fmt"
	"math"

	"fathombend/catalogue"
	"fathombend/stats/earth"
)

// Law is one of the laws the demo can be drawn from.
type Law string

// The laws, as `serve -demo-law` names them.
const (
	Coriolis Law = "coriolis" // f acts, supply and slope do not
	Supply   Law = "supply"   // feeder, grain and slope act, f does not
	Both     Law = "both"     // both act, and they are confounded: the default
	None     Law = "none"     // nothing acts: scatter only
)

// Laws lists them in the order they are shown.
var Laws = []Law{Both, Coriolis, Supply, None}

// Constants is a law written out. The excess sinuosity of a submarine row is
//
//	ln(P - 1) = Intercept + PerCoriolis |f|
//	          + Supply (FeederTerm + GrainTerm + SlopePerDecade log10(S_v/SlopeAt))
//	          + KindTerm + LineTerm + u_deposit + v_system + w_reach
//
// with |f| = 2 omega(age) |sin latitude| in 1e-4 s-1 at the time of deposition,
// and u, v, w independent normal with the standard deviations below. Rows of
// one reach by one source share w. The numbers are chosen to look like nature,
// not measured: they are the truth of an invented ocean.
type Constants struct {
	Intercept   float64 // ln(P - 1) of a mean on a centreline at f = 0, shelf-fed mud and sand, slope SlopeAt
	PerCoriolis float64 // per 1e-4 s-1
	Supply      float64 // weight of the three supply terms, 0 to 1
}

// The scatter and the terms that all laws share, in units of ln(P - 1).
const (
	BetweenDeposits = 0.30 // sigma of u
	BetweenSystems  = 0.20 // sigma of v
	BetweenReaches  = 0.21 // sigma of w; with v it makes the 0.29 of a new system in a known deposit

	// BetweenWindows is the sigma of the windows along one channel: what makes
	// a peak grow with the number of windows it is the peak of.
	BetweenWindows = 0.30

	SlopeAt        = 0.005 // m/m
	SlopePerDecade = -0.50 // per factor of ten in valley slope

	RiverMean  = -0.75 // ln(P - 1) of an invented river, whatever its latitude
	RiverSigma = 0.45
)

// FeederTerm and GrainTerm are the supply terms by the choice of the column;
// a choice that is not listed has 0.
var (
	FeederTerm = map[string]float64{"river": 0.25, "glacial": -0.80, "volcanic": -0.40, "failure": -0.30}
	GrainTerm  = map[string]float64{"mud": 0.25, "sand": -0.30, "gravel": -0.60}
)

// LineTerm says how much straighter one line reads than another on the same
// channel.
var LineTerm = map[string]float64{"thalweg": 0.05, "levee_crest": -0.55, "unknown": -0.10}

// ConstantsOf returns the constants of a law. An unknown law is an error
// naming the four.
func ConstantsOf(law Law) (Constants, error) {
	switch law {
	case Coriolis:
		return Constants{Intercept: -0.55, PerCoriolis: -1.30}, nil
	case Supply:
		return Constants{Intercept: -1.15, Supply: 1}, nil
	case Both:
		return Constants{Intercept: -0.80, PerCoriolis: -0.85, Supply: 0.5}, nil
	case None:
		return Constants{Intercept: -1.20}, nil
	}
	return Constants{}, &catalogue.Error{Code: catalogue.Invalid, Field: "demo-law",
		Message: fmt.Sprintf("There is no law %q for the demo.", string(law)), Expected: "coriolis, supply, both or none"}
}

// KindTerm is what a kind of sinuosity adds to that of the mean: a p90 and a
// peak lie above it by order statistics of windows with sigma BetweenWindows.
// windows is the count of overlapping windows (a quarter of the window apart);
// one in four of them is taken as independent.
func KindTerm(kind string, windows int) float64 {
	switch kind {
	case "p90":
		return 1.2816 * BetweenWindows // 90 % point of the normal distribution
	case "peak":
		return expectedMax((windows+3)/4) * BetweenWindows
	case "unknown":
		return 0.20
	}
	return 0
}

// expectedMax approximates the expected largest of n standard normal values
// (Blom 1958: the quantile at (n - 0.375)/(n + 0.25)).
func expectedMax(n int) float64 {
	if n < 2 {
		return 0
	}
	p := (float64(n) - 0.375) / (float64(n) + 0.25)
	return math.Sqrt2 * math.Erfinv(2*p-1)
}

// CoriolisOf is the |f| of a row in 1e-4 s-1 at the time of deposition: rows
// older than 5 Ma use their palaeolatitude and the rotation of their time.
// truth is the latitude to use when the record of an old row leaves its
// palaeolatitude out.
func CoriolisOf(r *catalogue.Row, truth float64) float64 {
	lat, omega := r.LatitudeDeg.V, earth.Omega
	if r.AgeMa.Valid && r.AgeMa.V > 5 {
		lat = truth
		if r.PalaeolatitudeDeg.Valid {
			lat = r.PalaeolatitudeDeg.V
		}
		if o, err := earth.OmegaAt(r.AgeMa.V); err == nil {
			omega = o
		}
	}
	return math.Abs(earth.Coriolis(omega, lat)) * 1e4
}

// Excess is the expected ln(P - 1) of a submarine row with coriolis in 1e-4 s-1
// and the valley slope of the reach in m/m (the true one: a record may lack
// it).
func (c Constants) Excess(r *catalogue.Row, coriolis, slope float64) float64 {
	supply := FeederTerm[r.Feeder] + GrainTerm[r.Grain] + SlopePerDecade*math.Log10(slope/SlopeAt)
	return c.Intercept + c.PerCoriolis*coriolis + c.Supply*supply + LineTerm[r.MeasuredLine] + KindTerm(r.SinuosityKind, int(r.Windows.V))
}
