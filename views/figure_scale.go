package views

import (
	"math"
	"strconv"
	"strings"
)

// scale maps data to page units.
type scale struct {
	lo, hi   float64 // data, lo < hi
	from, to float64 // page, of lo and hi
	log      bool
}

func (s scale) at(v float64) float64 {
	lo, hi := s.lo, s.hi
	if s.log {
		lo, hi, v = math.Log10(lo), math.Log10(hi), math.Log10(v)
	}
	return s.from + (v-lo)/(hi-lo)*(s.to-s.from)
}

func (s scale) holds(v float64) bool {
	const slack = 1e-9
	return drawable(v, s.log) && v >= s.lo-slack*math.Abs(s.lo) && v <= s.hi+slack*math.Abs(s.hi)
}

// newScale takes the range of the axis, or of the data with a margin.
func newScale(a Axis, data span, from, to float64) scale {
	s := scale{from: from, to: to, log: a.Log}
	if a.Reverse {
		s.from, s.to = to, from
	}
	if a.Min < a.Max && (!a.Log || a.Min > 0) {
		s.lo, s.hi = a.Min, a.Max
		return s
	}
	lo, hi := data.lo, data.hi
	if !data.ok {
		lo, hi = 1, 2
	}
	// Beyond these no range can be formed in a double; nothing in nature is.
	lo, hi = min(max(lo, -1e150), 1e150), min(max(hi, -1e150), 1e150)
	if a.Log {
		lo, hi = max(lo, 1e-150), max(hi, 1e-150)
	}
	if a.Zero && !a.Log {
		lo, hi = min(lo, 0), max(hi, 0)
	}
	if a.Log {
		margin := 0.04 * math.Log10(hi/lo)
		if hi/lo < 1.01 {
			margin = 0.3
		}
		s.lo, s.hi = lo*math.Pow(10, -margin), hi*math.Pow(10, margin)
		return s
	}
	margin := 0.04 * (hi - lo)
	if hi-lo <= 1e-12*max(math.Abs(hi), math.Abs(lo), 1e-300) {
		margin = max(0.5*math.Abs(hi), 0.5)
	}
	s.lo, s.hi = lo-margin, hi+margin
	if a.Zero && lo == 0 {
		s.lo = 0
	}
	if a.Zero && hi == 0 {
		s.hi = 0
	}
	return s
}

// ticks returns about n round values inside the scale.
func (s scale) ticks(a Axis, n int) []float64 {
	var out []float64
	if a.Ticks != nil {
		for _, t := range a.Ticks {
			if s.holds(t) {
				out = append(out, t)
			}
		}
		return out
	}
	if s.log {
		return logTicks(s.lo, s.hi, n)
	}
	step := niceStep((s.hi - s.lo) / float64(n))
	for i := math.Ceil(s.lo/step - 1e-9); i <= s.hi/step+1e-9 && len(out) < 50; i++ {
		v := i * step
		if math.Abs(v) < step*1e-9 {
			v = 0
		}
		out = append(out, v)
	}
	return out
}

// niceStep rounds up to 1, 2, 2.5 or 5 times a power of ten.
func niceStep(raw float64) float64 {
	if !(raw > 0) || math.IsInf(raw, 0) {
		return 1
	}
	mag := math.Pow(10, math.Floor(math.Log10(raw)))
	for _, m := range []float64{1, 2, 2.5, 5} {
		if raw <= m*mag*(1+1e-9) {
			return m * mag
		}
	}
	return 10 * mag
}

// logTicks returns powers of ten, with 2 and 5 times them where there is room.
func logTicks(lo, hi float64, n int) []float64 {
	for _, steps := range [][]float64{{1, 2, 5}, {1, 3}, {1}} {
		var out []float64
		for e := math.Floor(math.Log10(lo)); e <= math.Ceil(math.Log10(hi)); e++ {
			for _, m := range steps {
				// Written out and read back, so that 0.002 is 0.002.
				v, _ := strconv.ParseFloat(strconv.FormatFloat(m, 'f', 0, 64)+"e"+strconv.Itoa(int(e)), 64)
				if v >= lo && v <= hi {
					out = append(out, v)
				}
			}
		}
		if len(out) <= n+1 {
			if len(out) < 2 {
				return []float64{lo, hi}
			}
			return out
		}
	}
	var out []float64
	span := math.Ceil((math.Log10(hi) - math.Log10(lo)) / float64(n))
	for e := math.Ceil(math.Log10(lo)); e <= math.Log10(hi); e += span {
		out = append(out, math.Pow(10, e))
	}
	return out
}

// tickTexts letters the ticks alike: as many decimals as tell them apart.
func tickTexts(a Axis, ticks []float64) []string {
	out := make([]string, len(ticks))
	for d := range 9 {
		same := true
		for i, t := range ticks {
			out[i] = tickText(a, t, d)
			same = same && math.Abs(t-roundTo(t, d)) <= 1e-6*math.Abs(t)
		}
		if same || a.Format != nil {
			break
		}
	}
	return out
}

func roundTo(v float64, decimals int) float64 {
	m := math.Pow(10, float64(decimals))
	return math.Round(v*m) / m
}

func tickText(a Axis, v float64, decimals int) string {
	if a.Format != nil {
		return a.Format(v)
	}
	if a.Log {
		return trueMinus(strconv.FormatFloat(roundSignificant(v, 2), 'f', -1, 64))
	}
	return trueMinus(strconv.FormatFloat(v, 'f', decimals, 64))
}

func roundSignificant(v float64, digits int) float64 {
	r, _ := strconv.ParseFloat(strconv.FormatFloat(v, 'g', digits, 64), 64)
	return r
}

func trueMinus(s string) string { return strings.Replace(s, "-", "\u2212", 1) }

// FormatLatitude letters an axis of signed latitudes: 15° N, 0°, 15° S.
func FormatLatitude(v float64) string {
	s := strconv.FormatFloat(math.Abs(v), 'f', -1, 64) + "°"
	switch {
	case v > 0:
		return s + " N"
	case v < 0:
		return s + " S"
	}
	return s
}

// FormatDegrees letters an axis of angles: 15°.
func FormatDegrees(v float64) string {
	return trueMinus(strconv.FormatFloat(v, 'f', -1, 64)) + "°"
}
