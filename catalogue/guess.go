package catalogue

import (
	"regexp"
	"slices"
	"strings"

	"golang.org/x/text/runes"
	"golang.org/x/text/transform"
	"golang.org/x/text/unicode/norm"
	stdunicode "unicode"
)

// Guess is what a column of a file is taken for.
type Guess struct {
	Name string // of the cell it is read as, "" = nothing fits
	Sure bool   // the header is that name itself
}

// synonyms are names that authors give to columns, folded as by foldHeader.
// The unit comes from the header, or is that of the catalogue.
var synonyms = map[string][]string{
	"measurement":            {"measurement id", "id", "record id", "row id"},
	"system":                 {"slug", "system id", "system slug"},
	"system_name":            {"system", "name", "channel", "channel name", "channel system", "system name", "channel id"},
	"other_names":            {"other names", "synonyms", "aliases", "also known as"},
	"parent_deposit":         {"fan", "deposit", "parent", "parent deposit", "fan name", "host fan", "parent fan", "drift"},
	"basin":                  {"ocean", "sea", "basin name", "region", "ocean basin", "area"},
	"kind":                   {"type", "channel type", "environment"},
	"setting":                {"physiographic setting", "setting", "physiography"},
	"margin":                 {"margin type", "tectonic setting", "tectonic margin", "margin"},
	"feeder":                 {"feeder type", "feeder", "sediment supply", "supply"},
	"grain":                  {"grain size", "grain", "calibre", "sediment", "grain class", "dominant grain size"},
	"catchment_area_km2":     {"catchment area", "drainage area", "catchment", "drainage basin area", "river catchment area"},
	"catchment_latitude_deg": {"catchment latitude", "catchment lat"},
	"latitude_deg":           {"lat", "latitude", "y", "lat n", "latitude n", "latitude north", "decimal latitude", "present latitude"},
	"longitude_deg":          {"lon", "long", "lng", "longitude", "x", "lon e", "longitude e", "longitude east", "decimal longitude", "present longitude"},
	"start_latitude_deg":     {"start lat", "start latitude", "upstream latitude", "lat start"},
	"start_longitude_deg":    {"start lon", "start longitude", "start long", "upstream longitude", "lon start"},
	"end_latitude_deg":       {"end lat", "end latitude", "downstream latitude", "lat end"},
	"end_longitude_deg":      {"end lon", "end longitude", "end long", "downstream longitude", "lon end"},
	"water_depth_m":          {"water depth", "depth below sea level", "bathymetry", "wd"},
	"age_ma":                 {"age", "mean age", "numerical age"},
	"age_min_ma":             {"min age", "minimum age", "age min", "youngest age", "top age"},
	"age_max_ma":             {"max age", "maximum age", "age max", "oldest age", "base age"},
	"unit":                   {"stage", "epoch", "chronostratigraphic unit", "age unit", "period"},
	"palaeolatitude_deg":     {"palaeolatitude", "paleolatitude", "palaeolat", "paleolat", "palaeo latitude", "paleo latitude"},
	"palaeolatitude_se_deg":  {"palaeolatitude error", "paleolatitude error", "palaeolatitude se", "paleolatitude se"},
	"plate":                  {"plate id", "plate name"},
	"reach":                  {"reach name", "segment", "reach id"},
	"measured_line":          {"line", "line measured", "traced line", "measured along"},
	"valley_line":            {"valley length taken", "valley measure", "valley"},
	"sinuosity":              {"sin", "si", "p", "sinuosity index", "peak sinuosity", "channel sinuosity", "max sinuosity", "maximum sinuosity", "mean sinuosity"},
	"sinuosity_kind":         {"sinuosity type", "kind of sinuosity", "statistic", "sinuosity statistic"},
	"sinuosity_se":           {"sinuosity error", "sinuosity se", "se sinuosity", "sinuosity standard error"},
	"window_m":               {"window", "window length", "window size"},
	"windows":                {"number of windows", "n windows", "n"},
	"wavelength_m":           {"wavelength", "meander wavelength", "lambda", "bend wavelength"},
	"amplitude_m":            {"amplitude", "meander amplitude", "bend amplitude"},
	"radius_m":               {"radius", "radius of curvature", "bend radius", "r"},
	"reach_length_m":         {"reach length", "channel length", "length", "along channel length"},
	"valley_slope":           {"slope", "valley gradient", "gradient", "valley slope", "axial slope", "s", "sv", "sea floor slope", "seafloor slope", "regional slope"},
	"valley_slope_se":        {"slope error", "slope se", "valley slope error"},
	"channel_slope":          {"channel gradient", "channel slope", "thalweg slope", "thalweg gradient", "sc"},
	"channel_width_m":        {"width", "channel width", "w", "bankfull width", "crest to crest width", "levee crest width"},
	"channel_depth_m":        {"depth", "channel depth", "d", "h", "bankfull depth", "relief", "channel relief", "incision"},
	"levee_left_m":           {"left levee", "left levee height", "levee height left"},
	"levee_right_m":          {"right levee", "right levee height", "levee height right"},
	"net_to_gross":           {"net gross", "n g", "ng", "sand fraction"},
	"survey":                 {"method", "data type", "imaging", "data", "survey type", "instrument"},
	"extraction":             {"extracted from", "taken from"},
	"pixel_m":                {"pixel", "resolution", "grid size", "cell size", "bin size", "pixel size"},
	"grade":                  {"quality", "quality grade", "data quality"},
	"source":                 {"reference", "ref", "citation", "publication", "paper", "references", "data source", "authors", "author"},
	"source_doi":             {"doi", "reference doi", "source doi"},
	"source_locator":         {"page", "figure", "table", "locator", "page or figure"},
	"slope_source":           {"slope reference", "source of slope"},
	"size_source":            {"size reference", "source of size", "width reference"},
	"contributor":            {"compiler", "compiled by", "contributed by"},
	"licence":                {"license", "rights"},
	"notes":                  {"note", "comment", "comments", "remarks", "remark"},
}

// unitWords are units as headers write them, and the ending of the cell that
// takes them.
var unitWords = map[string]string{
	"deg": "_deg", "degree": "_deg", "degrees": "_deg", "°": "_deg", "permille": "_permille", "per mille": "_permille", "‰": "_permille", "per mil": "_permille", "permil": "_permille", "m/km": "_permille",
	"%": "_percent", "percent": "_percent", "per cent": "_percent", "1:n": "_ratio", "ratio": "_ratio", "1 in": "_ratio",
	"km": "_km", "kilometres": "_km", "kilometers": "_km", "ft": "_ft", "feet": "_ft", "foot": "_ft", "ka": "_ka", "kyr": "_ka", "kyr bp": "_ka", "m": "", "metres": "", "meters": "", "ma": "", "myr": "", "m/m": "", "km2": "", "km²": "", "-": "",
}

var (
	unitInHeader  = regexp.MustCompile(`^(.*?)\s*[\[(]\s*([^\])]+?)\s*[\])]\s*$`)
	unitAfterName = regexp.MustCompile(`^(.*?)[,/ _]\s*(deg|degrees|permille|‰|%|km|m|ft|feet|ma|ka|m/m|m/km)$`)
	notLetters    = regexp.MustCompile(`[^\pL\pN²]+`)
)

// foldHeader writes a header in small letters without accents, signs and
// underscores, so that "Slope_Error" is "slope error".
func foldHeader(text string) string {
	strip := transform.Chain(norm.NFD, runes.Remove(runes.In(stdunicode.Mn)), norm.NFC)
	if t, _, err := transform.String(strip, text); err == nil {
		text = t
	}
	return strings.TrimSpace(notLetters.ReplaceAllString(strings.ToLower(text), " "))
}

var foldedNames = buildFoldedNames()

// buildFoldedNames maps every folded name and synonym to its cell; the names
// themselves win over synonyms.
func buildFoldedNames() map[string]string {
	m := map[string]string{}
	for column, list := range synonyms {
		for _, s := range list {
			m[s] = column
		}
	}
	for _, c := range Columns {
		base := c.Name
		for _, unit := range []string{"_deg", "_m", "_ma", "_km2"} {
			base = strings.TrimSuffix(base, unit)
		}
		if _, taken := m[foldHeader(base)]; !taken {
			m[foldHeader(base)] = c.Name
		}
	}
	for name := range conversions {
		m[foldHeader(name)] = name
	}
	for _, c := range Columns {
		m[foldHeader(c.Name)] = c.Name
	}
	return m
}

// guessOne says what one header is taken for.
func guessOne(header string) Guess {
	clean := strings.ToLower(CleanText(header))
	if plan := planCell(clean); plan.column != nil {
		return Guess{clean, true}
	}
	for _, shape := range []*regexp.Regexp{unitInHeader, unitAfterName} {
		m := shape.FindStringSubmatch(clean)
		if m == nil {
			continue
		}
		name, ok := foldedNames[foldHeader(m[1])]
		ending, known := unitWords[strings.TrimSpace(m[2])]
		if ok && known {
			return Guess{withEnding(name, ending), false}
		}
		if ok && !known {
			return Guess{name, false}
		}
	}
	return Guess{foldedNames[foldHeader(clean)], false}
}

// withEnding is the cell of a column in another unit, the column itself where
// there is none.
func withEnding(name, ending string) string {
	if ending == "" {
		return name
	}
	for _, base := range []string{name, strings.TrimSuffix(name, "_m"), strings.TrimSuffix(name, "_ma")} {
		if conv, ok := conversions[base+ending]; ok && conv.column == name {
			return base + ending
		}
	}
	return name
}

// GuessColumns says what the columns of a header are taken for. No name is
// given out twice: the surest, then the first, has it.
func GuessColumns(header []string) []Guess {
	out := make([]Guess, len(header))
	taken := map[string]bool{}
	for _, sure := range []bool{true, false} {
		for i, h := range header {
			g := guessOne(h)
			if g.Name == "" || g.Sure != sure {
				continue
			}
			column := planCell(g.Name).column.Name
			if !taken[column] {
				taken[column] = true
				out[i] = g
			}
		}
	}
	return out
}

// ColumnOf is the column that a name is read as, "" if there is none.
func ColumnOf(name string) string {
	if c := planCell(name).column; c != nil {
		return c.Name
	}
	return ""
}

// Readable lists the names a column of a file can be read as, in the order of
// the table: each column with its other units.
func Readable() []CellUnit {
	var out []CellUnit
	for _, c := range Columns {
		out = append(out, c.CellUnits()...)
	}
	return slices.Clip(out)
}
