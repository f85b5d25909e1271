package seed

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/stat"

	"fathombend/catalogue"
)

// A row worked by hand from the formula above Constants: 30 degrees north today,
// f = 2 x 7.292115e-5 x 0.5 = 0.7292115e-4 s-1.
func TestExcessByHand(t *testing.T) {
	r := catalogue.Row{Kind: "submarine", Feeder: "glacial", Grain: "mud", MeasuredLine: "levee_crest", SinuosityKind: "mean", LatitudeDeg: catalogue.Num(30)}
	f := CoriolisOf(&r, 0)
	if math.Abs(f-0.7292115) > 1e-9 {
		t.Errorf("f = %.9f, want 0.7292115", f)
	}
	c := Constants{Intercept: -1, PerCoriolis: -2, Supply: 0.5}
	// -1 - 2 x 0.7292115 + 0.5 (-0.80 + 0.25 + SlopePerDecade x 1) - 0.55
	want := -1 - 1.458423 + 0.5*(-0.55+SlopePerDecade) - 0.55
	if got := c.Excess(&r, f, 10*SlopeAt); math.Abs(got-want) > 1e-12 {
		t.Errorf("excess %.9f, want %.9f", got, want)
	}
	// An old row uses its palaeolatitude and a faster Earth: more than 2 and
	// less than 6 % faster at 150 Ma whatever the history.
	r.AgeMa, r.PalaeolatitudeDeg = catalogue.Num(150), catalogue.Num(-30)
	if old := CoriolisOf(&r, 0); old < 1.02*f || old > 1.06*f {
		t.Errorf("f at 150 Ma = %.4f, today %.4f", old, f)
	}
}

// Expected largest of n standard normal values: 1.1630 for 5, 1.5388 for 10,
// 2.0428 for 30 (Harter 1961, Biometrika 48:151, doi 10.1093/biomet/48.1-2.151;
// from memory). Blom's approximation is good to 1 %.
func TestPeakGrowsWithWindows(t *testing.T) {
	for n, want := range map[int]float64{1: 0, 5: 1.1630, 10: 1.5388, 30: 2.0428} {
		if got := expectedMax(n); math.Abs(got-want) > 0.02 {
			t.Errorf("expected largest of %d: %.4f, want %.4f", n, got, want)
		}
	}
	if KindTerm("peak", 60) <= KindTerm("peak", 12) || KindTerm("mean", 60) != 0 {
		t.Error("a peak of more windows must be larger, and a mean must not")
	}
}

// The scatter that was drawn is the scatter that is written down, and the terms
// are recovered: over many seeds, ln(P - 1) less its expectation has mean 0 and
// the variance of deposit, system and reach together.
func TestScatterIsAsWritten(t *testing.T) {
	var residuals, deposits []float64
	for seed := uint64(100); seed < 160; seed++ {
		s, err := Draw(Options{Law: Both, Seed: seed, Clean: true})
		if err != nil {
			t.Fatal(err)
		}
		byDeposit := map[string][]float64{}
		for i, r := range s.Rows {
			// Below 1.1 the rounding of the record is no longer small beside
			// the scatter; the best system would count thirty times.
			if math.IsNaN(s.Expected[i]) || r.SystemName == "Orquathe Main Channel" {
				continue
			}
			e := math.Log(r.Sinuosity.V-1) - s.Expected[i]
			residuals = append(residuals, e)
			if r.ParentDeposit != "" {
				byDeposit[r.ParentDeposit] = append(byDeposit[r.ParentDeposit], e)
			}
		}
		for _, e := range byDeposit {
			deposits = append(deposits, stat.Mean(e, nil))
		}
	}
	want := math.Sqrt(BetweenDeposits*BetweenDeposits + BetweenSystems*BetweenSystems + BetweenReaches*BetweenReaches)
	mean, sd := stat.MeanStdDev(residuals, nil)
	// 60 seeds of 30 deposits: standard error of the mean about
	// 0.3/sqrt(1800) = 0.007, of the sd about as much; three of them.
	if math.Abs(mean) > 0.021 || math.Abs(sd-want) > 0.021 {
		t.Errorf("residuals have mean %.4f and sd %.4f, want 0 and %.4f", mean, sd, want)
	}
	// The mean of a deposit scatters by at least what is between deposits.
	if sd := stat.StdDev(deposits, nil); sd < BetweenDeposits || sd > want {
		t.Errorf("means of deposits have sd %.3f, want between %.2f and %.2f", sd, BetweenDeposits, want)
	}
}

// slopeOnCoriolis is the least squares slope of ln(P - 1) on f (1e-4 s-1) over
// the reaches that were drawn from the law, and R2.
func slopeOnCoriolis(s Survey) (slope, r2 float64) {
	var x, y []float64
	for i, r := range s.Rows {
		if r.Kind == "submarine" && !math.IsNaN(s.Expected[i]) {
			x = append(x, CoriolisOf(&r, r.PalaeolatitudeDeg.V))
			y = append(y, math.Log(r.Sinuosity.V-1)-LineTerm[r.MeasuredLine]-KindTerm(r.SinuosityKind, int(r.Windows.V)))
		}
	}
	_, slope = stat.LinearRegression(x, y, nil, false)
	c := stat.Correlation(x, y, nil)
	return slope, c * c
}

// What a regression can find out: under coriolis the slope is that of the law;
// under none it is zero; under supply it is not zero although f does nothing,
// because feeders follow latitude. That confounding is what the demo is for.
func TestLawsAreDistinguishable(t *testing.T) {
	const seeds = 100
	mean := map[Law]float64{}
	for _, law := range Laws {
		for seed := uint64(1000); seed < 1000+seeds; seed++ {
			s, err := Draw(Options{Law: law, Seed: seed, Clean: true})
			if err != nil {
				t.Fatal(err)
			}
			// Rows whose source leaves its windows out would carry an unknown
			// term; they are few and spread over all latitudes.
			b, _ := slopeOnCoriolis(s)
			mean[law] += b / seeds
		}
	}
	truth, _ := ConstantsOf(Coriolis)
	// One survey's slope scatters by about 0.2 over seeds (deposits are few),
	// the mean of 100 by 0.02; windows left out and rounding add a little.
	if math.Abs(mean[Coriolis]-truth.PerCoriolis) > 0.10 {
		t.Errorf("coriolis: slope %.3f, the law says %.3f", mean[Coriolis], truth.PerCoriolis)
	}
	if math.Abs(mean[None]) > 0.10 {
		t.Errorf("none: slope %.3f, want about 0", mean[None])
	}
	if mean[Supply] > -0.4 {
		t.Errorf("supply: slope %.3f; feeders that follow latitude should look like an effect of f", mean[Supply])
	}
	if mean[Both] > -0.85-0.1 {
		t.Errorf("both: slope %.3f, want steeper than f alone makes it", mean[Both])
	}
}

// The survey that is shown tells the story of its law.
func TestTheDemoShowsItsLaw(t *testing.T) {
	for law, want := range map[Law][2]float64{Coriolis: {0.4, 0.85}, Both: {0.4, 0.85}, Supply: {0.15, 0.7}, None: {0, 0.08}} {
		if _, r2 := slopeOnCoriolis(generate(t, law)); r2 < want[0] || r2 > want[1] {
			t.Errorf("%s: R2 of ln(P - 1) on f is %.2f, want %.2f to %.2f", law, r2, want[0], want[1])
		}
	}
}
