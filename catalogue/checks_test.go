package catalogue

import (
	"math"
	"strings"
	"testing"
)

func keys(findings []Finding) string {
	var out []string
	for _, f := range findings {
		k := f.Key
		if f.Hard {
			k = "!" + k
		}
		out = append(out, k)
	}
	return strings.Join(out, " ")
}

func TestCheckRow(t *testing.T) {
	land := func(lat, lon float64) bool { return lat > 80 }
	for name, c := range map[string]struct {
		set  string // column=text, separated by semicolons
		want string
	}{
		"plain":                   {"", ""},
		"required":                {"source=;sinuosity=", "!sinuosity_required !source_required"},
		"steep":                   {"valley_slope=3", "valley_slope_range"},
		"at the limits":           {"valley_slope=0.1;channel_slope=0.1", "slopes_disagree"},
		"faint":                   {"valley_slope=0.00009", "valley_slope_range"},
		"flat":                    {"valley_slope=0", "valley_slope_not_positive"},
		"uphill":                  {"channel_slope=-0.01", "channel_slope_not_positive"},
		"slopes agree":            {"valley_slope=0.015;channel_slope=0.01", ""},
		"slopes within 20 %":      {"valley_slope=0.0125;channel_slope=0.01", ""},
		"slopes beyond 20 %":      {"valley_slope=0.0119;channel_slope=0.01", "slopes_disagree"},
		"reach above 4":           {"sinuosity=4.1;sinuosity_kind=reach", "sinuosity_reach_high"},
		"peak above 4":            {"sinuosity=4.1", ""},
		"peak above 10":           {"sinuosity=11", "sinuosity_high"},
		"wide":                    {"channel_width_m=1510;channel_depth_m=10", "width_depth"},
		"narrow":                  {"channel_width_m=49;channel_depth_m=10", "width_depth"},
		"usual":                   {"channel_width_m=400;channel_depth_m=10;radius_m=800;wavelength_m=4000", ""},
		"tight":                   {"channel_width_m=400;radius_m=399", "radius_width"},
		"open bend":               {"channel_width_m=400;radius_m=8001", "radius_width"},
		"short waves":             {"channel_width_m=400;wavelength_m=1199", "wavelength_width"},
		"long waves":              {"channel_width_m=400;wavelength_m=16001", "wavelength_width"},
		"coarse":                  {"vertex_spacing_m=501;wavelength_m=2000", "spacing_coarse"},
		"coarse remeasured":       {"vertex_spacing_m=501;wavelength_m=2000;grade=remeasured", "spacing_coarse grade_remeasured"},
		"fine":                    {"vertex_spacing_m=500;wavelength_m=2000;grade=remeasured", ""},
		"old without latitude":    {"age_ma=0.01", "age_without_palaeolatitude"},
		"old with latitude":       {"age_ma=70;palaeolatitude_deg=30", ""},
		"ages out of order":       {"age_ma=70;age_min_ma=71;palaeolatitude_deg=30", "ages_out_of_order"},
		"doi":                     {"source_doi=doi 10.1130", "doi_syntax"},
		"good doi":                {"source_doi=10.1130/G32295.1", ""},
		"on land":                 {"latitude_deg=85", "on_land"},
		"river on land":           {"latitude_deg=85;kind=river", ""},
		"outcrop on land":         {"latitude_deg=85;burial=outcrop", ""},
		"south in the north":      {"basin=Invented part of the North Atlantic;longitude_deg=-30;latitude_deg=-40", "basin_mismatch"},
		"in the north":            {"basin=North Atlantic;longitude_deg=-30", ""},
		"Pacific across the line": {"basin=North Pacific;longitude_deg=170", ""},
		"Pacific at 200 east":     {"basin=North Pacific;longitude_deg=200", ""},
		"invented basin":          {"basin=Gulf of Thought;longitude_deg=170", ""},
		"reach below its chord":   {"start_latitude_deg=0;start_longitude_deg=0;end_latitude_deg=1;end_longitude_deg=0;reach_length_m=50000", "reach_below_chord"},
		"reach in order":          {"start_latitude_deg=0;start_longitude_deg=0;end_latitude_deg=1;end_longitude_deg=0;reach_length_m=150000", ""},
		"levee":                   {"levee_left_m=-3", "levee_left_m_negative"},
	} {
		r := row("Check", 10, 20, 1.5)
		for _, pair := range strings.Split(c.set, ";") {
			if column, text, ok := strings.Cut(pair, "="); ok {
				r = edit(r, column, text)
			}
		}
		r.Normalise()
		found := CheckRow(&r, land)
		if got := keys(found); got != c.want {
			t.Errorf("%s: %q, want %q", name, got, c.want)
		}
		for _, f := range found {
			if f.Message == "" || f.Expected == "" || f.Column == "" || strings.Contains(f.Message, "!") {
				t.Errorf("%s: not a sentence that says what to do: %+v", name, f)
			}
		}
	}
}

func TestFlippedSignsAreNamed(t *testing.T) {
	for want, place := range map[string][2]float64{
		"sign of the longitude flipped": {40, 50}, "sign of the latitude flipped": {-40, -50}, "both signs": {-40, 50}, "swapped": {-85, 40},
	} {
		r := row("Flip", place[0], place[1], 1.5)
		r.Basin = "North Atlantic"
		f := checkBasin(&r)
		if len(f) != 1 || !strings.Contains(f[0].Message, want) {
			t.Errorf("%s: %+v", want, f)
		}
	}
}

func TestCheckBesideTheCatalogue(t *testing.T) {
	s := open(t)
	a := row("Beside", 10, 20, 1.5)
	a.Feeder, a.Reach = "river", "upper"
	rows := insert(t, s, a)
	for name, c := range map[string]struct{ set, want string }{
		"the same again":       {"", "near_duplicate"},
		"4 km away":            {"latitude_deg=10.036", "near_duplicate"},
		"6 km away":            {"latitude_deg=10.054", ""},
		"another reach":        {"reach=lower", ""},
		"another line":         {"measured_line=centreline", ""},
		"another sinuosity":    {"sinuosity=1.51", ""},
		"another source":       {"source=Other", ""},
		"another feeder":       {"feeder=shelf;reach=lower", "changes_system_feeder"},
		"says no feeder":       {"feeder=unknown;reach=lower", ""},
		"another deposit":      {"parent_deposit=Fan;reach=lower", "changes_system_parent_deposit"},
		"the row itself":       {"measurement=" + rows[0].Measurement, ""},
		"across the far line":  {"longitude_deg=20.04", "near_duplicate"},
		"impossible":           {"latitude_deg=", "!latitude_deg_required"},
		"a system of its own":  {"system_name=Else;feeder=shelf;reach=lower", ""},
		"its name in capitals": {"system_name=BESIDE;reach=lower;feeder=unknown", ""},
	} {
		r := a
		for _, pair := range strings.Split(c.set, ";") {
			if column, text, ok := strings.Cut(pair, "="); ok {
				r = edit(r, column, text)
			}
		}
		r.System = ""
		found, err := s.Check(ctx, r)
		if got := keys(found); err != nil || got != c.want {
			t.Errorf("%s: %q, want %q, %v", name, got, c.want, err)
		}
	}
}

func TestDistance(t *testing.T) {
	// A degree of a great circle on the mean sphere: 6371008.8 pi/180 = 111195.08 m.
	if d := distanceM(0, 179.5, 0, -179.5); math.Abs(d-111195.08) > 0.01 {
		t.Error(d)
	}
	if d := distanceM(90, 0, -90, 0); math.IsNaN(d) || math.Abs(d-math.Pi*earthRadiusM) > 1 {
		t.Error(d)
	}
}
