package catalogue

import (
	"math"
	"strings"
	"testing"
)

// The columns and choices of the measurement table, copied from the contract.
const contractColumns = `measurement system system_name other_names parent_deposit basin
kind setting margin burial activity confinement aggradation structural_deflection
feeder feeder_geometry grain large_river catchment_area_km2 catchment_latitude_deg
latitude_deg longitude_deg start_latitude_deg start_longitude_deg end_latitude_deg end_longitude_deg water_depth_m
age_ma age_min_ma age_max_ma unit age_basis palaeolatitude_deg palaeolatitude_se_deg palaeolatitude_method plate pole_table
reach measured_line valley_line sinuosity sinuosity_kind sinuosity_se window_m windows vertex_spacing_m wavelength_m amplitude_m radius_m reach_length_m
valley_slope valley_slope_se slope_kind slope_state channel_slope channel_width_m channel_depth_m levee_left_m levee_right_m
net_to_gross stacking lateral_accretion
survey extraction pixel_m grade
source source_doi source_locator slope_source size_source contributor licence notes`

const contractChoices = `kind submarine, river, lacustrine
setting fan, slope, rise, trench, foredeep, minibasin, deep_ocean, non_margin, river_valley, unknown
margin passive, active, transform, intraplate, unknown
burial seafloor, buried, outcrop
activity active, relict, unknown
confinement confined, levee_confined, unconfined, unknown
aggradation aggrading, stable, incising, unknown
structural_deflection yes, no, unknown
feeder river, shelf, glacial, volcanic, failure, unknown
feeder_geometry point, multiple, linear, unknown
grain mud, mud_sand, sand, gravel, unknown
large_river yes, no, unknown
palaeolatitude_method given, inclination, pole, rotation
measured_line thalweg, centreline, levee_crest, unknown
valley_line end_to_end, inflections, axis, unknown
sinuosity_kind peak, p90, mean, bend, reach, unknown
slope_kind valley, regional, unknown
slope_state present, restored
stacking vertical, lateral, mixed, unknown
lateral_accretion yes, no, unknown
survey multibeam, sidescan, seismic_3d, seismic_2d, sub_bottom, satellite, dem, outcrop, unknown
extraction centreline, grid, figure, table, unknown
grade remeasured, surveyed, traced, quoted`

func TestColumnsAreTheContracts(t *testing.T) {
	if got, want := strings.Join(ColumnNames(), " "), strings.Join(strings.Fields(contractColumns), " "); got != want {
		t.Errorf("columns\n got %s\nwant %s", got, want)
	}
	choices := map[string]string{}
	for _, line := range strings.Split(contractChoices, "\n") {
		name, list, _ := strings.Cut(line, " ")
		choices[name] = list
	}
	required := "system_name latitude_deg longitude_deg sinuosity sinuosity_kind measured_line source"
	for _, c := range Columns {
		if got := strings.Join(c.Choices, ", "); got != choices[c.Name] {
			t.Errorf("%s: choices %s, want %s", c.Name, got, choices[c.Name])
		}
		in := strings.Contains(" "+required+" ", " "+c.Name+" ")
		if c.Required != in {
			t.Errorf("%s: required = %v", c.Name, c.Required)
		}
		if c.Help == "" || !strings.HasSuffix(c.Help, ".") || strings.Contains(c.Help, "\n") {
			t.Errorf("%s: help %q is not one sentence on one line", c.Name, c.Help)
		}
		if c.Group == "" || c.Table == "" || (c.num == nil) == (c.text == nil) {
			t.Errorf("%s is not complete: %+v", c.Name, c)
		}
	}
}

// Every column has its own field of Row.
func TestColumnsReachTheirOwnField(t *testing.T) {
	var r Row
	for i, c := range Columns {
		if c.num != nil {
			*c.num(&r) = Num(float64(i))
		} else {
			*c.text(&r) = c.Name
		}
	}
	for i, c := range Columns {
		if c.num != nil && c.num(&r).V != float64(i) || c.text != nil && *c.text(&r) != c.Name {
			t.Errorf("%s shares a field", c.Name)
		}
	}
}

func TestColumnSet(t *testing.T) {
	for _, c := range []struct{ column, text, want, refused string }{
		{"sinuosity", " 1.5 ", "1.5", ""},
		{"sinuosity", "0.9", "", "below 1"},
		{"sinuosity", "1,25", "", "decimal comma"},
		{"sinuosity", "NaN", "", "finite"},
		{"sinuosity", "1e400", "", "not a number"},
		{"sinuosity", "0x1p3", "", "not a number"},
		{"sinuosity", "1_0", "", "not a number"},
		{"latitude_deg", "91", "", "outside"},
		{"latitude_deg", "-90", "-90", ""},
		{"longitude_deg", "360", "360", ""},
		{"longitude_deg", "-181", "", "outside"},
		{"water_depth_m", "-0", "0", ""},
		{"channel_width_m", "0", "", "outside"},
		{"windows", "2.5", "", "whole"},
		{"age_ma", "-1", "", "outside"},
		{"age_ma", "70000000", "", "outside"},
		{"feeder", "brook", "", "not one of the choices"},
		{"feeder", "river", "river", ""},
		{"notes", "a\r\nb\rc ", "a\nb\nc", ""},
		{"notes", "bell \a", "", "control character"},
		{"notes", "caf\xe9", "", "UTF-8"},
		{"notes", "שלום 🌊", "שלום 🌊", ""},
		{"reach", strings.Repeat("x", 201), "", "201 characters"},
		{"measurement", "m 1", "", "not a measurement id"},
	} {
		col, _ := ColumnByName(c.column)
		r := row("X", 1, 2, 1.5)
		before := r
		err := col.Set(&r, c.text)
		switch {
		case c.refused == "" && (err != nil || col.Get(&r) != c.want):
			t.Errorf("%s %q: %q %v", c.column, c.text, col.Get(&r), err)
		case c.refused != "" && (err == nil || !strings.Contains(err.Message, c.refused) || err.Field != c.column || err.Expected == ""):
			t.Errorf("%s %q: %v, want %q", c.column, c.text, err, c.refused)
		case c.refused != "" && len(Diff(&before, &r)) > 0:
			t.Errorf("%s %q was refused and changed the row", c.column, c.text)
		}
	}
}

func TestSlug(t *testing.T) {
	for name, want := range map[string]string{
		"Ørsted–Böhm  Channel (2)": "orsted-bohm-channel-2", "  ": "system", "深海": "system", "A'B's": "abs", "-x-": "x", "Straße": "strasse",
		strings.Repeat("long ", 40): "long-long-long-long-long-long-long-long-long-long-long-long-long-long",
	} {
		if got := Slug(name); got != want {
			t.Errorf("%q: %q, want %q", name, got, want)
		}
	}
}

func TestNeutraliseIsReversible(t *testing.T) {
	for _, s := range []string{"", "plain", "=1+1", "+x", "-12", "@a", "\tx", "\rx", "'=1", "''=1", "'plain", "'", "it's", "a=b", "'''@"} {
		n := Neutralise(s)
		if Plain(n) != s {
			t.Errorf("%q -> %q -> %q", s, n, Plain(n))
		}
		if n != "" && strings.ContainsRune("=+-@\t\r", rune(n[0])) {
			t.Errorf("%q would run", n)
		}
	}
}

func TestNormalLongitude(t *testing.T) {
	for lon, want := range map[float64]float64{-180: -180, 180: 180, 200: -160, 360: 0, 0: 0} {
		if got := NormalLongitude(lon); got != want {
			t.Errorf("%v: %v", lon, got)
		}
	}
	if math.Signbit(NewRow().LatitudeDeg.V) {
		t.Error("a number not given is 0")
	}
}
