package planform

import (
	"fmt"
	"math"
)

const (
	omegaEarth = 7.292115e-5 // rad/s, WGS84
	gravity    = 9.81        // m/s2
	// submerged is (2650 - 1027)/1027, quartz in sea water.
	submerged = 1.58
	// Volume concentration of the flow: log-uniform between these (Sci. Adv.
	// 3:e1700200 (2017); Nat. Commun. 9:2616 (2018)).
	leastC, greatestC = 2e-4, 5e-2
	// A pattern is named when chance alone would give it less often.
	patternChance = 0.05
)

// levees reads the pattern of the levee heights: one side higher in every bend,
// as where the rotation of the Earth tilts the flow, or the outer side higher,
// as where the bends do.
func (m *Measured) levees(r *samples, line Line) {
	if r.t.left == nil {
		return
	}
	diff, n := 0.0, 0
	var rel []float64
	for i := range r.t.left {
		d := r.t.right[i] - r.t.left[i]
		if finite(d) {
			diff, n = diff+d, n+1
		}
		rel = append(rel, d)
	}
	if n == 0 {
		return
	}
	diff /= float64(n)
	var right, outer, total int
	for _, b := range m.Bends {
		d, ok := meanBetween(r, rel, b)
		if !ok || d == 0 {
			continue
		}
		total++
		if d > 0 {
			right++
		}
		if (d > 0) == (b.Side == "left") { // the outer bank of a left bend is the right one
			outer++
		}
	}
	m.Levees = pattern(total, right, outer, diff)
	m.leveeSpeed(r, math.Abs(diff))
}

// meanBetween is the mean of right minus left levee height over a bend, m.
func meanBetween(r *samples, rel []float64, b Bend) (float64, bool) {
	from, to := r.place(b.FromM)*r.step, r.place(b.ToM)*r.step
	i, _ := r.t.segment(from)
	sum, n := 0.0, 0
	for ; i < len(rel) && r.t.s[i] <= to; i++ {
		if r.t.s[i] >= from && finite(rel[i]) {
			sum, n = sum+rel[i], n+1
		}
	}
	return sum / float64(max(n, 1)), n > 0
}

// pattern names what the bends show. Each count is set against a fair coin,
// both sides (exact binomial test).
func pattern(total, right, outer int, diff float64) *Levees {
	l := &Levees{Pattern: "undecided", Side: "right"}
	if diff < 0 {
		l.Side = "left"
	}
	same := max(right, total-right)
	pSame, pOuter := coin(total, right), coin(total, outer)
	switch {
	case pSame < patternChance && pSame <= pOuter && (right*2 > total) == (diff > 0):
		l.Pattern = "same_side"
		l.Text = fmt.Sprintf("The %s levee is the higher one in %d of %s (chance alone: %.2g), by %.3g m on average: the same side along the reach.", l.Side, same, count(total, "bend", "bends"), pSame, math.Abs(diff))
	case pOuter < patternChance && outer*2 > total:
		l.Pattern = "alternating"
		l.Text = fmt.Sprintf("The outer levee is the higher one in %d of %s (chance alone: %.2g): the higher side alternates with the bends.", outer, count(total, "bend", "bends"), pOuter)
	case pOuter < patternChance:
		l.Text = fmt.Sprintf("The inner levee is the higher one in %d of %s (chance alone: %.2g), which neither pattern expects; check that left and right are looking downstream.", total-outer, count(total, "bend", "bends"), pOuter)
	default:
		l.Text = fmt.Sprintf("Neither pattern stands out in %s: the right levee is higher in %d, the outer one in %d. Six bends or more that agree are needed.", count(total, "bend", "bends"), right, outer)
	}
	return l
}

// coin is the two-sided probability of a count as far from half of n as this.
func coin(n, k int) float64 {
	k = max(k, n-k)
	logHalf := float64(n) * math.Log(0.5)
	sum := 0.0
	for i := k; i <= n; i++ {
		a, _ := math.Lgamma(float64(n + 1))
		b, _ := math.Lgamma(float64(i + 1))
		c, _ := math.Lgamma(float64(n - i + 1))
		sum += math.Exp(a - b - c + logHalf)
	}
	return min(1, 2*sum)
}

// leveeSpeed estimates the speed with which the balance of a straight reach,
// U = g' dh / (|f| W), would hold up the mean difference of the levees. g' = g R
// C with the concentration C log-uniform, so the range spans its middle 95 %:
// about a factor of 14 either way. The balance is that of Komar 1969,
// J. Geophys. Res. 74:4544, doi 10.1029/JC074i018p04544; it takes the levee
// crests for the tilt of the interface.
func (m *Measured) leveeSpeed(r *samples, dh float64) {
	l, w := m.Levees, m.Settings.WidthM
	switch {
	case l.Pattern != "same_side":
		return
	case m.Place == nil:
		l.Text += " No speed is estimated: a line in plane metres has no latitude."
		return
	case w == 0:
		l.Text += " No speed is estimated: give the channel width."
		return
	}
	lat := m.Place.MiddleLat
	f := 2 * omegaEarth * math.Abs(math.Sin(lat*degree))
	expected := "right"
	if lat < 0 {
		expected = "left"
	}
	if l.Side != expected {
		l.Text += fmt.Sprintf(" In this hemisphere rotation would raise the %s one, so no speed is estimated.", expected)
		return
	}
	if math.Abs(lat) < 1 {
		l.Text += " No speed is estimated within 1 degree of the equator, where rotation tilts nothing."
		return
	}
	var u [3]float64
	for i, q := range []float64{0.025, 0.5, 0.975} {
		c := leastC * math.Pow(greatestC/leastC, q)
		u[i] = gravity * submerged * c * dh / (f * w)
	}
	l.SpeedMS = &u
	l.Text += fmt.Sprintf(" If rotation alone held that difference up over the width of %s, the flow ran at about %.2g m/s (%.2g to %.2g for concentrations of 0.02 to 5 %% by volume); an estimate, and an Ekman layer fits experiments better.", km(w), u[1], u[0], u[2])
}
