package expectation

import (
	"strconv"
	"strings"

	"fathombend/stats/earth"
)

// unused says, in words, what was typed of where and when and has no part in
// the answer, and why: an input that is silently left out looks as if it
// counted.
func (t *Target) unused(way string) []string {
	var out []string
	if names := t.unusedPlace(way); len(names) > 0 {
		out = append(out, "Not used: "+listed(names)+", because the palaeolatitude is "+map[string]string{
			wayGiven: "given itself", wayInclination: "taken from the inclination", wayPlate: "taken from the plate",
			wayPole: "taken from the pole", wayRotation: "taken from the rotation"}[way]+".")
	}
	day := orDefault(t.Day)
	if given(t.RotationPeriodH) {
		if day != earth.TidalHistory {
			out = append(out, "Not used: the choice of day length, because a rotation period was typed.")
		}
		day = earth.Given
	}
	if t.SolarTide != "" && t.SolarTide != earth.TideMiddle && day != earth.TidalHistory && day != earth.Locked {
		out = append(out, "Not used: the tide of the Sun, which belongs to the tidal-evolution history and not to "+dayName(day)+".")
	}
	if given(t.RateMsPerCentury) && day != earth.ConstantRate {
		out = append(out, "Not used: the rate in milliseconds per century, which belongs to a constant rate and not to "+dayName(day)+".")
	}
	if given(t.AgeSE) && t.Unit != "" {
		out = append(out, "Not used: the error of the age, because the unit gives its own interval.")
	} else if given(t.AgeSE) && !given(t.Age) {
		out = append(out, "Not used: the error of the age, because no age was given.")
	}
	return out
}

// unusedPlace names what was typed for another way to the palaeolatitude.
func (t *Target) unusedPlace(way string) []string {
	var out []string
	add := func(typed bool, name string, ways ...string) {
		for _, w := range ways {
			if w == way {
				return
			}
		}
		if typed {
			out = append(out, name)
		}
	}
	add(given(t.PalaeolatitudeSE), "the standard error of the palaeolatitude", wayGiven)
	add(given(t.Flattening), "the flattening", wayInclination)
	add(given(t.A95), "the A95", wayInclination, wayPole)
	add(given(t.SiteLat) || given(t.SiteLon), "the site", wayPlate, wayPole, wayRotation)
	add(t.PoleTable != "" || t.UserPoles != nil, "the pole table", wayPlate)
	add(given(t.EulerError), "the error of the rotation", wayRotation)
	add(t.EulerFrame != "", "the frame of the rotation", wayRotation)
	return out
}

func dayName(day string) string {
	for _, h := range earth.Histories() {
		if h.Name == day {
			if day == earth.Given {
				return "a day that is given"
			}
			return "the " + h.Title
		}
	}
	return day
}

// listed writes "a, b and c".
func listed(items []string) string {
	if n := len(items); n > 1 {
		return strings.Join(items[:n-1], ", ") + " and " + items[n-1]
	}
	return strings.Join(items, "")
}

// plural writes a count with its noun.
func plural(n int, one, many string) string {
	if n == 1 {
		return "1 " + one
	}
	return strconv.Itoa(n) + " " + many
}
