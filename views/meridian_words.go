package views

import (
	"fmt"
	"net/url"
	"strconv"
)

// colourName is what colour carries, in words.
func colourName(c string) string {
	return map[string]string{"slope": "valley slope", "feeder": "feeder", "grade": "grade of the record", "age": "age"}[c]
}

func usesStep(m MeridianPage, s colourClass) bool {
	for _, i := range m.Items {
		if i.Kind != "river" && colourOf(m.Colour, i).Class == s.Class {
			return true
		}
	}
	return false
}

func hasAncient(m MeridianPage) bool {
	for _, i := range m.Items {
		if i.Ancient {
			return true
		}
	}
	return false
}

func hasRiver(m MeridianPage) bool {
	for _, i := range m.Items {
		if i.Kind == "river" {
			return true
		}
	}
	return false
}

// meridianCaption could go to print.
func meridianCaption(m MeridianPage) string {
	s := fmt.Sprintf("%s of %s in the catalogue, each as a sine-generated curve of its own sinuosity over one fixed length: 1.05 is nearly straight, 2.1 crosses at right angles, 3 folds back. ",
		plural(m.Passing, "system", "systems"), strconv.Itoa(m.Total))
	if len(m.Items) < m.Passing {
		s += fmt.Sprintf("%d of them are drawn: the same share of every five degrees of latitude, the best-graded first. The answer rests on all of them. ", len(m.Items))
	}
	s += "A sinuosity past 5 is drawn at 5 with a double tick. "
	if len(m.Expected) > 0 {
		s += "Expected: " + m.Response + " of one new submarine system, median and the limits that hold 80 % of new systems"
		if m.ExpectedRows > 0 {
			s += fmt.Sprintf(", from %s in %s", plural(m.ExpectedRows, "measurement", "measurements"), plural(m.ExpectedFrom, "deposit", "deposits"))
		}
		s += "; drawn only where there are systems to expect from. "
	}
	if m.InventedRows > 0 {
		s += "Invented data."
	}
	return s
}

// workingWords stand where the answer of a large catalogue will.
func (m MeridianPage) workingWords() string {
	return fmt.Sprintf("The answer from %s is being computed: they are many, and every deposit is resampled. This page asks again by itself and shows it, with what to expect at each latitude, when it is there.", plural(m.Passing, "system", "systems"))
}

func plural(n int, one, many string) string {
	if n == 1 {
		return "1 " + one
	}
	return strconv.Itoa(n) + " " + many
}

// tableAddress is the table of the systems shown, with a data suffix.
func tableAddress(m MeridianPage, suffix string) string {
	f := m.Filter
	f.Page, f.PerPage = 0, 0
	if q := f.Values().Encode(); q != "" {
		return "/systems" + suffix + "?" + q
	}
	return "/systems" + suffix
}

func bandTable(m MeridianPage, b meridianBand) string {
	q := m.Filter.Values()
	if q == nil {
		q = url.Values{}
	}
	q.Set("abs_lat_min", strconv.FormatFloat(b.From, 'f', 0, 64))
	q.Set("abs_lat_max", strconv.FormatFloat(b.From+10, 'f', 0, 64))
	return "/systems?" + q.Encode()
}

// smallRibbon is a ribbon of a row of the narrow page.
func (m MeridianPage) smallRibbon(i MeridianItem) string {
	step := colourOf(m.Colour, i)
	class := step.Class + " " + WidthClass(i.WidthM)
	if i.Kind == "river" {
		class = "river " + WidthClass(i.WidthM)
	}
	s := RibbonShape(i.P, defsAxis)
	half := max(s.Half, 14) + 6
	box := fmt.Sprintf(`viewBox="%s %s %s %s"`, num2(min(s.Left, 0)-6), num2(-half), num2(s.Right-min(s.Left, 0)+12), num2(2*half))
	out := `<svg class="row-ribbon" ` + box + ` aria-hidden="true" focusable="false">`
	use := `<use href="#` + ribbonID(i.P) + `" class="`
	if i.Ancient {
		out += use + "ribbon twin " + class + `"/>` + use + `gap"/>`
	} else {
		out += use + "ribbon " + class + `"/>`
	}
	out += gradeMark(i.Grade, 0, 0, 5)
	if step.Letter != "" && i.Kind != "river" {
		out += `<text class="letter" x="104" y="-12">` + step.Letter + `</text>`
	}
	return out + "</svg>"
}

func smallExpected(e MeridianExpected) string {
	s := RibbonShape(e.P90, defsAxis)
	half := max(s.Half, 14) + 6
	return fmt.Sprintf(`<svg class="row-ribbon expected" viewBox="%s %s %s %s" aria-hidden="true" focusable="false"><path class="between" d="%s"/><use class="limit" href="#%s"/><use class="limit" href="#%s"/><use class="middle" href="#%s"/></svg>`,
		num2(min(s.Left, 0)-6), num2(-half), num2(s.Right-min(s.Left, 0)+12), num2(2*half), ribbonBetween(e.P10, e.P90), ribbonID(e.P90), ribbonID(e.P10), ribbonID(e.P50))
}

func spinAge(ma float64) string {
	if ma == 0 {
		return "today"
	}
	return strconv.FormatFloat(ma, 'f', -1, 64) + " Ma"
}

// spinSentence compares the oldest with today.
func spinSentence(m MeridianPage) string {
	now, then := m.Spin[0], m.Spin[len(m.Spin)-1]
	s := fmt.Sprintf("Were the Coriolis parameter the whole story, %s of a channel at %s would be expected at %s today and at %s under the spin of %s; the limits of one new system today are %s and %s",
		m.Response, FormatDegrees(m.SpinLatitude), num2Fixed(now.P50), num2Fixed(then.P50), spinAge(then.AgeMa), num2Fixed(now.P10), num2Fixed(now.P90))
	if then.P50 > now.P10 && then.P50 < now.P90 {
		return s + ", and hold it."
	}
	return s + "."
}

// spinFrom says what the inset has in common with the expectations of the
// drawing, and why its numbers differ from theirs.
func spinFrom(m MeridianPage) string {
	s := fmt.Sprintf("One explanation alone, fitted to the same %s in %s.",
		plural(m.ExpectedRows, "measurement", "measurements"), plural(m.ExpectedFrom, "deposit", "deposits"))
	for _, e := range m.Expected {
		if e.AbsLatitude == m.SpinLatitude && e.Why == "" {
			s += fmt.Sprintf(" The expectations drawn above weigh it against its rivals and so give %s at %s.", num2Fixed(e.P50), FormatDegrees(m.SpinLatitude))
		}
	}
	return s
}
