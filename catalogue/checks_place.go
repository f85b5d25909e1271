package catalogue

import (
	"context"
	"fmt"
	"math"
	"strings"
)

// degreesToSlope returns the tangent of a slope angle in degrees.
func degreesToSlope(deg float64) float64 { return math.Tan(deg * math.Pi / 180) }

// earthRadiusM is the mean radius of the Earth, m (IUGG, from memory); good
// enough to ask whether two places are the same.
const earthRadiusM = 6371008.8

// distanceM is the great-circle distance of two places on a sphere, m, by the
// haversine formula.
func distanceM(lat1, lon1, lat2, lon2 float64) float64 {
	const rad = math.Pi / 180
	sinLat, sinLon := math.Sin((lat2-lat1)*rad/2), math.Sin((lon2-lon1)*rad/2)
	h := sinLat*sinLat + math.Cos(lat1*rad)*math.Cos(lat2*rad)*sinLon*sinLon
	return 2 * earthRadiusM * math.Asin(math.Sqrt(math.Min(1, h)))
}

// ocean is a box that holds all of a named water, degrees, generously drawn.
type ocean struct {
	words      []string // all must be in the name of the basin
	west, east float64  // west above east crosses the antimeridian
	south      float64
	north      float64
}

// oceans from a general atlas; from memory, rounded outwards. The first that
// fits a name decides, so the narrower names come first.
var oceans = []ocean{
	{[]string{"north", "atlantic"}, -100, 20, 0, 80},
	{[]string{"south", "atlantic"}, -75, 25, -65, 5},
	{[]string{"north", "pacific"}, 100, -75, 0, 68},
	{[]string{"south", "pacific"}, 135, -65, -75, 5},
	{[]string{"gulf of mexico"}, -99, -79, 17, 32},
	{[]string{"caribbean"}, -90, -58, 7, 24},
	{[]string{"mediterranean"}, -7, 37, 29, 47},
	{[]string{"black sea"}, 26, 43, 39, 48},
	{[]string{"red sea"}, 31, 45, 11, 31},
	{[]string{"bay of bengal"}, 76, 100, 0, 24},
	{[]string{"arabian sea"}, 48, 80, 0, 27},
	{[]string{"tasman"}, 144, 176, -52, -28},
	{[]string{"bering"}, 160, -155, 50, 68},
	{[]string{"labrador"}, -68, -40, 50, 68},
	{[]string{"norwegian sea"}, -15, 25, 60, 76},
	{[]string{"arctic"}, -180, 180, 60, 90},
	{[]string{"southern ocean"}, -180, 180, -90, -35},
	{[]string{"weddell"}, -70, 5, -85, -58},
	{[]string{"atlantic"}, -100, 25, -65, 80},
	{[]string{"pacific"}, 95, -65, -75, 68},
	{[]string{"indian ocean"}, 18, 148, -68, 32},
}

func (o ocean) holds(lat, lon float64) bool {
	lon = NormalLongitude(lon)
	in := lon >= o.west && lon <= o.east
	if o.west > o.east {
		in = lon >= o.west || lon <= o.east
	}
	return in && lat >= o.south && lat <= o.north
}

// checkBasin asks whether a sign is flipped when the place lies outside the
// water the basin is named after. Places moved by plates since, that is rows
// with an age, are where they are today, so they are checked too.
func checkBasin(r *Row) []Finding {
	o, ok := oceanOf(r.Basin)
	if !ok || r.Burial == "outcrop" || r.Kind != "submarine" {
		return nil
	}
	lat, lon := r.LatitudeDeg.V, r.LongitudeDeg.V
	if o.holds(lat, lon) {
		return nil
	}
	column, hint := "latitude_deg", "check the place and the basin"
	switch {
	case o.holds(lat, -NormalLongitude(lon)):
		column, hint = "longitude_deg", "is the sign of the longitude flipped (west is negative)?"
	case o.holds(-lat, lon):
		hint = "is the sign of the latitude flipped (south is negative)?"
	case o.holds(-lat, -NormalLongitude(lon)):
		hint = "are both signs flipped (south and west are negative)?"
	case math.Abs(NormalLongitude(lon)) <= 90 && o.holds(NormalLongitude(lon), lat):
		hint = "are latitude and longitude swapped?"
	}
	return []Finding{warn(column, "basin_mismatch", fmt.Sprintf("the place %s, %s is not in the basin named, %q: %s", shortNumber(lat), shortNumber(lon), Clip(r.Basin), hint),
		fmt.Sprintf("latitude %s to %s, longitude %s to %s", shortNumber(o.south), shortNumber(o.north), shortNumber(o.west), shortNumber(o.east)))}
}

func oceanOf(basin string) (ocean, bool) {
	name := strings.ToLower(basin)
	for _, o := range oceans {
		all := true
		for _, w := range o.words {
			all = all && strings.Contains(name, w)
		}
		if all {
			return o, true
		}
	}
	return ocean{}, false
}

// nearM is how close two rows are when they may be one.
const nearM = 5000

// neighbour is an accepted row that may be the same as another.
type neighbour struct {
	id          int64
	measurement string
	system      string
}

// neighbours finds accepted rows of the same source, line and reach name
// within 5 km and with the same sinuosity, other than the row itself.
func (a *applier) neighbours(ctx context.Context, r *Row) ([]neighbour, error) {
	const degree = earthRadiusM * math.Pi / 180
	st, err := a.prepared(ctx, `SELECT m.id, m.measurement, s.slug, m.latitude_deg, m.longitude_deg FROM measurements m INDEXED BY measurements_near JOIN systems s ON s.id = m.system_id
		WHERE m.source_id IN (SELECT id FROM sources WHERE citation = ?) AND m.sinuosity = ? AND m.latitude_deg BETWEEN ? AND ?
		AND m.measured_line = ? AND m.reach = ? AND m.measurement <> ? ORDER BY m.id`)
	if err != nil {
		return nil, err
	}
	rows, err := st.QueryContext(ctx, r.Source, r.Sinuosity.V, r.LatitudeDeg.V-nearM/degree, r.LatitudeDeg.V+nearM/degree, r.MeasuredLine, r.Reach, r.Measurement)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	var out []neighbour
	for rows.Next() {
		var n neighbour
		var lat, lon float64
		if err := rows.Scan(&n.id, &n.measurement, &n.system, &lat, &lon); err != nil {
			return nil, err
		}
		if distanceM(r.LatitudeDeg.V, r.LongitudeDeg.V, lat, lon) <= nearM {
			out = append(out, n)
		}
	}
	return out, rows.Err()
}

// twin finds among the neighbours one that is equal in all a new row says.
func (a *applier) twin(ctx context.Context, p *Row, near []neighbour) (string, error) {
	for _, n := range near {
		if n.system != p.System {
			continue
		}
		other, _, err := a.oneRow(ctx, "m.id", n.id)
		if err != nil {
			return "", err
		}
		if other != nil && sameContent(p, other) {
			return n.measurement, nil
		}
	}
	return "", nil
}

// sameContent compares a new row with a stored one but for its id, and for the
// credit line a contribution is given when it says none.
func sameContent(p, stored *Row) bool {
	for i := range Columns {
		c := &Columns[i]
		if c.Name == "measurement" || (c.Name == "contributor" && p.Contributor == "") {
			continue
		}
		if !c.same(p, stored) {
			return false
		}
	}
	return true
}

func nearDuplicate(n neighbour) Finding {
	return warn("measurement", "near_duplicate", fmt.Sprintf("%s of %s has the same source, line, reach name and sinuosity within 5 km: is it the same measurement?", n.measurement, n.system),
		"its id in the column measurement if it is, or another reach name if it is not")
}
