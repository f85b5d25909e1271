package views

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"fathombend/catalogue"
	"fathombend/catalogue/planform"
	"fathombend/stats"
)

// SystemPage is the page of one system.
type SystemPage struct {
	Page
	Detail *catalogue.Detail
	Item   MeridianItem
	Lines  []SystemLine
	Doubts []Doubt

	Land       [][][2]float64 // rings of longitude and latitude, degrees, for the locator
	LandCredit string

	Fit                  *stats.Model // sinuosity on the Coriolis parameter, all submarine systems; nil = none
	FitRows, FitClusters int
	FitWhy               string // why there is no fit, or why it does not concern this system
	Used                 []stats.UsedRow
	NearF, NearLatitude  []Neighbour
}

// SystemLine is a stored centreline measured for its figures.
type SystemLine struct {
	Measurement string
	Measured    *planform.Measured // nil = Why says why not
	Why         string
}

// Neighbour is a system near in one predictor: At is its value there.
type Neighbour struct {
	Slug, Name string
	At, P      float64
	Distance   float64
}

func (p SystemPage) best() catalogue.Row { return p.Detail.Best() }

// sentence opens the page.
func (p SystemPage) sentence() string {
	r := p.best()
	s := "Sinuosity " + num2Fixed(sinuosityOf(r)) + ", " + kindOfValue(r) + ", on the " + lineOfValue(r)
	if p.Item.Restored {
		s += ", made at palaeolatitude " + hungAt(p.Item.Latitude)
	} else {
		s += ", at " + hungAt(p.Item.Latitude)
	}
	if r.ValleySlope.Valid && r.ValleySlope.V > 0 {
		s += fmt.Sprintf(", on a valley slope of %s (1 : %.0f)", cell(r.ValleySlope, 2), 1/r.ValleySlope.V)
	}
	return s + "."
}

func kindOfValue(r catalogue.Row) string {
	switch r.SinuosityKind {
	case "peak":
		if r.Windows.Valid {
			return fmt.Sprintf("the peak of %.0f windows", r.Windows.V)
		}
		return "a peak"
	case "p90":
		return "the 90th percentile of the windows"
	case "mean":
		return "the mean of the windows"
	case "bend":
		return "of one bend"
	case "reach":
		return "of the whole reach"
	}
	return "of unknown kind"
}

func lineOfValue(r catalogue.Row) string {
	if r.MeasuredLine == "unknown" || r.MeasuredLine == "" {
		return "unknown line"
	}
	return ChoiceLabel(r.MeasuredLine)
}

// placement says where the system falls against the line.
func (p SystemPage) placement() string {
	if p.Fit == nil || p.Item.Kind != "submarine" {
		return p.FitWhy
	}
	for _, u := range p.Used {
		if u.System != p.Detail.Slug || u.ID != p.best().Measurement {
			continue
		}
		if !u.Kept {
			return "Its measurement is left out of the fit: " + u.WhyDropped + "."
		}
		pred, res := u.PredictedOf[p.Fit.Model], u.ResidualOf[p.Fit.Model]
		side := "above"
		if res < 0 {
			side = "below"
		}
		return fmt.Sprintf("At its Coriolis parameter of %s × 10⁻⁴ s⁻¹ the line through all submarine systems gives %s; it was measured at %s, which is %s %s the line.",
			num2Fixed(u.PredictorOf["coriolis"]), num2Fixed(pred), num2Fixed(u.Response), num2Fixed(math.Abs(res)), side)
	}
	return "Its measurement is not among the rows of the fit."
}

func (p SystemPage) curates() bool {
	return p.Page.User != nil && (p.Page.User.Role == "curator" || p.Page.User.Role == "keeper")
}

type fact struct{ name, value string }

// whatItIs are the facts of the system as a whole and its setting.
func (p SystemPage) whatItIs() []fact {
	r := p.best()
	return facts([]string{"parent_deposit", "basin", "other_names", "kind", "setting", "margin", "burial", "activity", "confinement", "aggradation",
		"structural_deflection", "feeder", "feeder_geometry", "grain", "large_river", "catchment_area_km2"}, &r)
}

func (p SystemPage) whereAndWhen() []fact {
	r := p.best()
	return facts([]string{"latitude_deg", "longitude_deg", "water_depth_m", "age_ma", "age_min_ma", "age_max_ma", "unit", "age_basis",
		"palaeolatitude_deg", "palaeolatitude_se_deg", "palaeolatitude_method", "plate", "pole_table"}, &r)
}

func (p SystemPage) sizes() []fact {
	r := p.best()
	out := facts([]string{"valley_slope", "valley_slope_se", "slope_kind", "slope_state", "channel_slope", "channel_width_m", "channel_depth_m",
		"wavelength_m", "amplitude_m", "radius_m", "reach_length_m", "levee_left_m", "levee_right_m", "net_to_gross", "stacking", "lateral_accretion"}, &r)
	return out
}

// facts lists the columns that hold something, with their units.
func facts(columns []string, r *catalogue.Row) []fact {
	var out []fact
	for _, name := range columns {
		col, ok := catalogue.ColumnByName(name)
		if !ok {
			continue
		}
		v := col.Get(r)
		if v == "" || v == "unknown" {
			continue
		}
		switch {
		case name == "latitude_deg" || name == "palaeolatitude_deg":
			v = FormatLatitude(math.Round(col.Number(r).V*1000) / 1000)
		case name == "longitude_deg":
			v = formatLongitude(col.Number(r).V)
		case col.Numeric():
			v = cell(col.Number(r), 4)
			if col.Unit != "" {
				v += " " + unitSign(col.Unit)
			}
		case col.Kind == catalogue.KindChoice:
			v = ChoiceLabel(v)
		}
		out = append(out, fact{factLabel(name), v})
	}
	return out
}

func formatLongitude(v float64) string {
	v = math.Round(catalogue.NormalLongitude(v)*1000) / 1000
	s := strconv.FormatFloat(math.Abs(v), 'f', -1, 64) + "°"
	switch {
	case v > 0:
		return s + " E"
	case v < 0:
		return s + " W"
	}
	return s
}

func unitSign(u string) string {
	return map[string]string{"degrees": "°", "km2": "km²"}[u] + strings.TrimSuffix(strings.TrimSuffix(u, "degrees"), "km2")
}

func factLabel(name string) string {
	if s, ok := columnLabels[name]; ok {
		return s
	}
	for _, suffix := range []string{"_deg", "_km2", "_ma", "_m"} {
		name = strings.TrimSuffix(name, suffix)
	}
	name = strings.ReplaceAll(name, "_", " ")
	name = strings.Replace(strings.Replace(name, " se", ", standard error", 1), "palaeolatitude", "palaeolatitude", 1)
	return strings.ToUpper(name[:1]) + name[1:]
}

// sourceOf is the address of a source on this page.
func sourceID(i int) string { return "source-" + strconv.Itoa(i+1) }

// sourceNumber finds the source of a row in the list of sources, from 1; 0 if
// it is not there.
func (p SystemPage) sourceNumber(r catalogue.Row) int {
	for i, s := range p.Detail.Sources {
		if s.Citation == r.Source && s.DOI == r.SourceDOI {
			return i + 1
		}
	}
	return 0
}
