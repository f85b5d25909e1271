package earth

import (
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"
)

// Age is an age in Ma with one standard error.
type Age struct {
	Value, SE float64
	// Low and High are the ends of the interval: of the unit, or value -+ 1.96 SE.
	Low, High float64
	Unit      string // the unit it came from, or ""
	Text      string
}

// oldest is the age of the Earth in Ma as the chart prints its base.
const oldest = 4567

// AgeOf returns an age from a number in Ma and its standard error; NaN se is
// taken as 0.
func AgeOf(ma, se float64) (Age, error) {
	switch {
	case math.IsNaN(ma) || math.IsInf(ma, 0) || ma < 0:
		return Age{}, &InputError{"age", "the age is negative or no number. Expected 0 or more, in Ma (millions of years before present)"}
	case ma > oldest:
		return Age{}, &InputError{"age", fmt.Sprintf("%s is older than the Earth (%d Ma). Ages are in Ma, not in years: for %s years type %s", plain(ma), oldest, plain(ma), plain(ma/1e6))}
	}
	if math.IsNaN(se) {
		se = 0
	}
	if se < 0 || math.IsInf(se, 0) {
		return Age{}, &InputError{"age_se", "the standard error of the age is negative. Expected 0 or more, in Ma"}
	}
	return Age{Value: ma, SE: se, Low: math.Max(0, ma-1.96*se), High: ma + 1.96*se,
		Text: plain(ma) + " Ma"}, nil
}

// AgeOfUnit returns the middle of a unit; its standard error is that of an
// age anywhere in the unit with equal chance, width/sqrt(12), joined with the
// errors of its boundaries (taken as standard errors).
func AgeOfUnit(u Unit) Age {
	w := u.BaseMa - u.TopMa
	be, te := zeroIfNaN(u.BaseErrMa)/2, zeroIfNaN(u.TopErrMa)/2
	return Age{
		Value: (u.BaseMa + u.TopMa) / 2, SE: math.Sqrt(w*w/12 + be*be + te*te),
		Low: u.TopMa, High: u.BaseMa, Unit: u.Name,
		Text: fmt.Sprintf("%s, %s to %s Ma (chart v2024-12)", u.Name, plain(u.BaseMa), plain(u.TopMa)),
	}
}

// ParseAge reads "70", "70 Ma", "70 +- 3", "70±3 Ma", "12 ka" or the name of
// a unit of the chronostratigraphic chart.
func ParseAge(text string) (Age, error) {
	t := strings.TrimSpace(text)
	if t == "" {
		return Age{}, &InputError{"age", "expected a number in Ma, for example 70 or 70 +- 3, or a unit such as Maastrichtian"}
	}
	if t[0] != '-' && t[0] != '.' && (t[0] < '0' || t[0] > '9') {
		u, err := UnitNamed(t)
		if err != nil {
			return Age{}, err
		}
		return AgeOfUnit(u), nil
	}
	scale := 1.0
	low := strings.ToLower(t)
	for suffix, s := range map[string]float64{"ma": 1, "ka": 1e-3, "ga": 1e3} {
		if strings.HasSuffix(low, suffix) {
			scale, t = s, strings.TrimSpace(t[:len(t)-2])
			break
		}
	}
	number, errText, _ := strings.Cut(strings.NewReplacer("+/-", "±", "+-", "±").Replace(t), "±")
	v, err := strconv.ParseFloat(strings.TrimSpace(number), 64)
	se := 0.0
	if err == nil && strings.TrimSpace(errText) != "" {
		se, err = strconv.ParseFloat(strings.TrimSpace(errText), 64)
	}
	if err != nil {
		return Age{}, &InputError{"age", fmt.Sprintf("%q is no age. Expected a number in Ma, for example 70 or 70 +- 3, or a unit such as Maastrichtian", clip(text))}
	}
	return AgeOf(v*scale, se*scale)
}

// Unit is one unit of the International Chronostratigraphic Chart v2024-12.
type Unit struct {
	Name, AltName, Rank, Parent string
	BaseMa, BaseErrMa           float64 // error NaN where the chart gives none
	TopMa, TopErrMa             float64
	BaseUncertain, TopUncertain bool // the chart prints ~
	BoundaryType                string
	Color                       string // the chart's colour, #RRGGBB
}

var chart = table("ics.csv", func(rows []record) []Unit {
	var out []Unit
	for _, r := range rows {
		out = append(out, Unit{
			Name: r.text("name"), AltName: r.text("alt_name"), Rank: r.text("rank"), Parent: r.text("parent"),
			BaseMa: r.number("base_ma"), BaseErrMa: r.number("base_err_ma"), BaseUncertain: r.text("base_uncertain") == "1",
			TopMa: r.number("top_ma"), TopErrMa: r.number("top_err_ma"), TopUncertain: r.text("top_uncertain") == "1",
			BoundaryType: r.text("boundary_type"), Color: r.text("color_hex"),
		})
	}
	return out
})

// Units returns all units, largest rank first.
func Units() []Unit { return append([]Unit(nil), chart()...) }

// UnitNamed finds a unit by name. Early/Late and Lower/Upper are both known,
// and -aeo- spellings; an unknown name is an *InputError that offers up to
// three that are near: one contains the other, or at most one letter in three
// differs.
func UnitNamed(name string) (Unit, error) {
	key := unitKey(name)
	if len(key) > 100 {
		key = key[:100]
	}
	type near struct {
		name string
		d    int
	}
	var best []near
	for _, u := range chart() {
		d, isNear := len(key), false
		for _, n := range []string{u.Name, u.AltName} {
			if n == "" {
				continue
			}
			k := unitKey(n)
			if k == key {
				return u, nil
			}
			d = min(d, Distance(key, k))
			isNear = isNear || 3*d <= len(key) || len(key) > 3 && (strings.Contains(k, key) || strings.Contains(key, k))
		}
		if isNear {
			best = append(best, near{u.Name, d})
		}
	}
	slices.SortStableFunc(best, func(a, b near) int { return a.d - b.d })
	what := fmt.Sprintf("%q is no unit of the chronostratigraphic chart (v2024-12)", clip(name))
	if len(best) == 0 {
		return Unit{}, &InputError{"unit", what + ", nor near one. Expected an English name on it, such as Maastrichtian or Upper Cretaceous; the field lists them all"}
	}
	var names []string
	for _, b := range best[:min(3, len(best))] {
		names = append(names, b.name)
	}
	return Unit{}, &InputError{"unit", what + ". Nearest: " + strings.Join(names, ", ")}
}

// unitKey folds the spellings of one unit to one key.
func unitKey(s string) string {
	s = strings.ToLower(strings.Join(strings.Fields(s), " "))
	for _, r := range [][2]string{{"early ", "lower "}, {"late ", "upper "}, {"mid ", "middle "}} {
		if rest, ok := strings.CutPrefix(s, r[0]); ok {
			s = r[1] + rest
		}
	}
	return strings.ReplaceAll(s, "ae", "e")
}

// Distance is the Levenshtein distance in bytes: how many letters to change,
// add or leave out.
func Distance(a, b string) int {
	row := make([]int, len(b)+1)
	for j := range row {
		row[j] = j
	}
	for i := range len(a) {
		diag := row[0]
		row[0] = i + 1
		for j := range len(b) {
			cost := diag
			if a[i] != b[j] {
				cost++
			}
			diag = row[j+1]
			row[j+1] = min(cost, row[j+1]+1, row[j]+1)
		}
	}
	return row[len(b)]
}

func plain(x float64) string {
	if x != 0 && math.Abs(x) < 1e-4 {
		return strconv.FormatFloat(x, 'g', 3, 64)
	}
	return strconv.FormatFloat(x, 'f', -1, 64)
}

func zeroIfNaN(x float64) float64 {
	if math.IsNaN(x) {
		return 0
	}
	return x
}

// clip keeps what is echoed back in a message short.
func clip(s string) string {
	if r := []rune(s); len(r) > 60 {
		return string(r[:60]) + "..."
	}
	return s
}
