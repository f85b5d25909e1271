package catalogue

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
	"regexp"
	"slices"
	"strconv"
)

// CheckRow returns what is impossible (Hard) or odd in a row by itself. onLand
// may be nil. Limits without a source are common practice.
func CheckRow(r *Row, onLand func(lat, lon float64) bool) []Finding {
	var out []Finding
	for i := range Columns {
		if f, bad := hardFinding(&Columns[i], r); bad {
			out = append(out, f)
		}
	}
	if len(out) > 0 {
		return out
	}
	return softFindings(r, onLand)
}

// softFindings are what is odd in a row, whose cells may be missing.
func softFindings(r *Row, onLand func(lat, lon float64) bool) []Finding {
	var out []Finding
	for _, check := range []func(*Row) []Finding{checkSlope, checkSinuosity, checkSize, checkPlanform, checkTime, checkProvenance} {
		out = append(out, check(r)...)
	}
	if !r.LatitudeDeg.Valid || !r.LongitudeDeg.Valid {
		return out
	}
	out = append(out, checkBasin(r)...)
	if onLand != nil && r.Kind == "submarine" && r.Burial != "outcrop" && onLand(r.LatitudeDeg.V, r.LongitudeDeg.V) {
		out = append(out, warn("latitude_deg", "on_land", fmt.Sprintf("the place %s, %s is on land: is a sign missing, or are latitude and longitude swapped?", shortNumber(r.LatitudeDeg.V), shortNumber(r.LongitudeDeg.V)),
			"a place in water for a submarine channel that is not in outcrop"))
	}
	return out
}

func warn(column, key, message, expected string) Finding {
	return Finding{Column: column, Key: key, Message: message, Expected: expected}
}

// hardFinding applies the limits every stored cell obeys.
func hardFinding(c *Column, r *Row) (Finding, bool) {
	var e *Error
	key := c.Name + "_allowed"
	if c.num != nil {
		n := c.num(r)
		switch {
		case n.Valid:
			e = c.checkNumber(n.V)
		case c.Required:
			e, key = c.refuse("it is required"), c.Name+"_required"
		}
	} else {
		v := *c.text(r)
		e = c.checkText(v)
		if v == "" && c.Required {
			e, key = c.refuse("it is required"), c.Name+"_required"
		}
	}
	if e == nil {
		return Finding{}, false
	}
	return Finding{Column: c.Name, Key: key, Message: e.Message, Expected: e.Expected, Hard: true}, true
}

// unsaid finds required choices that are blank, before Normalise gives them
// their default: not known is to be said.
func unsaid(r *Row) []Finding {
	var out []Finding
	for i := range Columns {
		if c := &Columns[i]; c.Required && c.Kind == KindChoice && CleanText(*c.text(r)) == "" {
			e := c.refuse("it is required; write unknown when it is not known")
			out = append(out, Finding{Column: c.Name, Key: c.Name + "_required", Message: e.Message, Expected: e.Expected, Hard: true})
		}
	}
	return out
}

// hardError turns the first hard finding into an error.
func hardError(findings []Finding) error {
	for _, f := range findings {
		if f.Hard {
			return &Error{Code: Invalid, Field: f.Column, Message: f.Message, Expected: f.Expected, Cause: Findings(findings)}
		}
	}
	return nil
}

// Slopes of submarine valleys outside these are rare enough to ask about.
const slopeLow, slopeHigh = 1e-4, 0.1

func checkSlope(r *Row) []Finding {
	var out []Finding
	for _, name := range []string{"valley_slope", "channel_slope"} {
		c, _ := ColumnByName(name)
		n := c.Number(r)
		if !n.Valid {
			continue
		}
		v, shown := n.V, shortNumber(n.V)
		const expected = "m/m, usually 0.0001 to 0.1; degrees and per mille have columns of their own"
		switch {
		case v <= 0:
			out = append(out, warn(name, name+"_not_positive", "slope "+shown+" in the m/m column does not fall downstream; the row stays out of slope fits. A tilted buried channel can dip the wrong way today: say so in slope_state", expected))
		case v > slopeHigh:
			out = append(out, warn(name, name+"_range", fmt.Sprintf("slope %s in the m/m column: is it degrees? (%s degrees is %.3g m/m, %s per mille is %.3g m/m)", shown, shown, degreesToSlope(v), shown, v/1000), expected))
		case v < slopeLow:
			out = append(out, warn(name, name+"_range", "slope "+shown+" in the m/m column is very small: is a factor of 1000 lost?", expected))
		}
	}
	return out
}

func checkSinuosity(r *Row) []Finding {
	var out []Finding
	p := r.Sinuosity.V
	if !r.Sinuosity.Valid {
		return nil
	}
	if r.SinuosityKind == "reach" && p > 4 {
		out = append(out, warn("sinuosity", "sinuosity_reach_high", "a reach sinuosity of "+shortNumber(p)+" is very high: is it a peak or one bend?", "at most about 4 for a whole reach"))
	} else if p > 10 {
		out = append(out, warn("sinuosity", "sinuosity_high", "sinuosity "+shortNumber(p)+" is very high: does the window end near a neck cut-off, or is it a length?", "channel length over valley length, rarely above 5"))
	}
	if r.ValleySlope.Valid && r.ChannelSlope.Valid && r.ChannelSlope.V != 0 {
		ratio := r.ValleySlope.V / r.ChannelSlope.V
		if d := (p - ratio) / p; d > 0.2 || d < -0.2 {
			out = append(out, warn("channel_slope", "slopes_disagree", fmt.Sprintf("valley slope over channel slope is %.3g, but that ratio is the sinuosity, given as %s", ratio, shortNumber(p)), "slopes over the same reach as the sinuosity, within 20 %"))
		}
	}
	return out
}

// ratioCheck asks about a ratio of two lengths outside its usual range.
func ratioCheck(out []Finding, a, b Number, lo, hi float64, column, key, what, source string) []Finding {
	if !a.Valid || !b.Valid {
		return out
	}
	if x := a.V / b.V; x < lo || x > hi {
		out = append(out, warn(column, key, fmt.Sprintf("%s is %.3g: check both and their units", what, x), fmt.Sprintf("usually %s to %s%s", shortNumber(lo), shortNumber(hi), source)))
	}
	return out
}

func checkSize(r *Row) []Finding {
	out := ratioCheck(nil, r.ChannelWidthM, r.ChannelDepthM, 5, 150, "channel_depth_m", "width_depth", "width over depth", " (about 10 to 100 in Geosphere 14:2171 (2018))")
	out = ratioCheck(out, r.RadiusM, r.ChannelWidthM, 1, 20, "radius_m", "radius_width", "bend radius over width", "")
	out = ratioCheck(out, r.WavelengthM, r.ChannelWidthM, 3, 40, "wavelength_m", "wavelength_width", "wavelength over width", "")
	for _, l := range []struct {
		name string
		v    Number
	}{{"levee_left_m", r.LeveeLeftM}, {"levee_right_m", r.LeveeRightM}} {
		if l.v.Valid && l.v.V < 0 {
			out = append(out, warn(l.name, l.name+"_negative", "the levee is below the channel floor", "height above the channel floor, m"))
		}
	}
	return out
}

func checkPlanform(r *Row) []Finding {
	var out []Finding
	if r.VertexSpacingM.Valid && r.WavelengthM.Valid && r.VertexSpacingM.V > r.WavelengthM.V/4 {
		out = append(out, warn("vertex_spacing_m", "spacing_coarse", "the vertices are further apart than a quarter wavelength: the bends are cut and the line reads straighter than it is", "at most "+shortNumber(r.WavelengthM.V/4)+" m for this wavelength"))
		if r.Grade == "remeasured" {
			out = append(out, warn("grade", "grade_remeasured", "the grade remeasured is for lines with vertices closer than a quarter wavelength", "surveyed or traced, or a finer line"))
		}
	}
	if ends := []Number{r.StartLatitudeDeg, r.StartLongitudeDeg, r.EndLatitudeDeg, r.EndLongitudeDeg}; allGiven(ends) && r.ReachLengthM.Valid {
		// One per cent for the sphere, and rounding of the ends.
		chord := distanceM(ends[0].V, ends[1].V, ends[2].V, ends[3].V)
		if r.ReachLengthM.V < 0.99*chord-500 {
			out = append(out, warn("reach_length_m", "reach_below_chord", fmt.Sprintf("the reach is %s m long but its ends are %.0f m apart", shortNumber(r.ReachLengthM.V), chord), "a length along the channel, in metres"))
		}
	}
	return out
}

func allGiven(ns []Number) bool {
	for _, n := range ns {
		if !n.Valid {
			return false
		}
	}
	return true
}

func checkTime(r *Row) []Finding {
	var out []Finding
	if r.AgeMa.Valid && r.AgeMa.V > 0 && !r.PalaeolatitudeDeg.Valid {
		out = append(out, warn("palaeolatitude_deg", "age_without_palaeolatitude", "an age is given without a palaeolatitude; the row stays out of fits at the time of deposition when it is older than 5 Ma", "the latitude at the time of deposition with its error"))
	}
	lo, mid, hi := r.AgeMinMa, r.AgeMa, r.AgeMaxMa
	if (lo.Valid && hi.Valid && lo.V > hi.V) || (lo.Valid && mid.Valid && lo.V > mid.V) || (mid.Valid && hi.Valid && mid.V > hi.V) {
		out = append(out, warn("age_ma", "ages_out_of_order", "the ages are out of order", "age_min_ma at most age_ma at most age_max_ma"))
	}
	return out
}

var doiPattern = regexp.MustCompile(`^10\.[0-9]{4,9}(\.[0-9]+)*/[^\s]+$`)

func checkProvenance(r *Row) []Finding {
	if r.SourceDOI != "" && !doiPattern.MatchString(r.SourceDOI) {
		return []Finding{warn("source_doi", "doi_syntax", fmt.Sprintf("%q does not read like a DOI", Clip(r.SourceDOI)), "10., a registrant number, a slash and a suffix, as 10.1130/G32295.1")}
	}
	return nil
}

// Check returns everything odd or impossible about a row, also beside the
// accepted rows: near-duplicates, and what it would change of its whole system.
func (s *Store) Check(ctx context.Context, row Row) ([]Finding, error) {
	var out []Finding
	err := s.read(ctx, func(tx *sql.Tx) (err error) {
		out, err = s.check(ctx, tx, row)
		return err
	})
	return out, err
}

func (s *Store) check(ctx context.Context, tx *sql.Tx, row Row) ([]Finding, error) {
	a := s.applier(tx, 0, "")
	a.all = true
	ex, err := a.examine(ctx, &row)
	return ex.findings, err
}

// besides finds what is odd about a row beside what is impossible, so that a
// person learns all of it at once.
func besides(r *Row, onLand func(lat, lon float64) bool, hard []Finding) []Finding {
	var out []Finding
	for _, f := range softFindings(r, onLand) {
		if !slices.ContainsFunc(hard, func(h Finding) bool { return h.Column == f.Column }) {
			out = append(out, f)
		}
	}
	return out
}

// checkUnit asks whether the unit is one of the chart, and the age within it.
func (a *applier) checkUnit(r *Row) []Finding {
	if r.Unit == "" || a.s.unit == nil {
		return nil
	}
	top, base, problem := a.s.unit(r.Unit)
	if problem != "" {
		return []Finding{warn("unit", "unit_unknown", problem, "one unit of the chart, spelt as there")}
	}
	// Two per cent, for charts of other years.
	if r.AgeMa.Valid && (r.AgeMa.V < 0.98*top || r.AgeMa.V > 1.02*base) {
		return []Finding{warn("unit", "age_outside_unit", fmt.Sprintf("the age, %s Ma, is not within %s", shortNumber(r.AgeMa.V), r.Unit), fmt.Sprintf("%s to %s Ma for this unit", shortNumber(top), shortNumber(base)))}
	}
	return nil
}

// checkCitation asks for one wording of a source: a DOI that is cited with
// other words counts as two sources.
func (a *applier) checkCitation(ctx context.Context, ex *examined, r *Row) ([]Finding, error) {
	if r.SourceDOI == "" || ex.current != nil && ex.current.Source == r.Source && ex.current.SourceDOI == r.SourceDOI {
		return nil, nil
	}
	st, err := a.prepared(ctx, `SELECT c.citation FROM sources c WHERE c.doi = ? COLLATE NOCASE ORDER BY c.citation = ? DESC, (SELECT count(*) FROM measurements m WHERE m.source_id = c.id) DESC, c.id LIMIT 1`)
	if err != nil {
		return nil, err
	}
	var known string
	err = st.QueryRowContext(ctx, r.SourceDOI, r.Source).Scan(&known)
	if errors.Is(err, sql.ErrNoRows) || err == nil && known == r.Source {
		return nil, nil
	}
	return []Finding{warn("source", "doi_cited_otherwise", "the catalogue has this DOI already, cited as "+strconv.Quote(Clip(known))+": cited in other words it counts as another source", "the same words: "+known)}, err
}

// CitationOf returns how the catalogue cites a DOI, "" when it does not, with
// the measurements that rest on it.
func (s *Store) CitationOf(ctx context.Context, doi string) (citation string, measurements int, err error) {
	if doi == "" {
		return "", 0, nil
	}
	err = s.r.QueryRowContext(ctx, `SELECT c.citation, (SELECT count(*) FROM measurements m WHERE m.source_id = c.id) AS n FROM sources c WHERE c.doi = ? COLLATE NOCASE ORDER BY n DESC, c.id LIMIT 1`, doi).Scan(&citation, &measurements)
	if errors.Is(err, sql.ErrNoRows) {
		return "", 0, nil
	}
	return citation, measurements, fault("citation", err)
}

func systemChangeFinding(c *Column, system, row *Row) Finding {
	return warn(c.Name, "changes_system_"+c.Name, fmt.Sprintf("%s belongs to the whole system: this row changes it from %q to %q for all measurements of %s", c.Name, Clip(c.Get(system)), Clip(c.Get(row)), system.System),
		"the system's own value, unless the system is to change")
}
