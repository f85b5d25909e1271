package earth

import (
	"fmt"
	"io"
	"math"
	"slices"
	"strings"
)

// PoleTable is an apparent polar wander path by plate: north poles by age.
type PoleTable struct {
	Name   string // short name, as the query gives it
	Title  string
	Source string
	paths  map[string][]datedPole
	plates []string // in the order of the table
}

type datedPole struct {
	age float64
	Pole
}

// The built-in tables by name.
const (
	Vaes2023          = "vaes2023"
	BesseCourtillot02 = "besse_courtillot2002"
)

var vaes = table("apwp_vaes2023.csv", func(rows []record) *PoleTable {
	t := &PoleTable{Name: Vaes2023, Title: "global path, 0-320 Ma",
		Source: "Vaes et al., Earth-Sci. Rev. 245:104547 (2023), doi 10.1016/j.earscirev.2023.104547"}
	for _, r := range rows {
		// the mean age of the window's data, not its label
		t.add(r.text("plate"), datedPole{r.number("mean_age_ma"), Pole{r.number("pole_lat_n"), r.number("pole_lon_n"), r.number("p95_deg")}})
	}
	return t.ready()
})

var besseNames = map[string]string{"AF": "Africa", "ANT": "Antarctica", "AU": "Australia", "EU": "Europe", "GL": "Greenland", "IN": "India", "NA": "North America", "SA": "South America"}

var besse = table("apwp_besse_courtillot2002.csv", func(rows []record) *PoleTable {
	t := &PoleTable{Name: BesseCourtillot02, Title: "synthetic path, 0-190 Ma",
		Source: "Besse & Courtillot, J. Geophys. Res. 107(B11):2300 (2002), doi 10.1029/2000JB000050"}
	for _, r := range rows {
		t.add(besseNames[r.text("plate")], datedPole{r.number("age_ma"), Pole{r.number("pole_lat_n"), r.number("pole_lon_n"), math.NaN()}})
	}
	return t.ready()
})

// PoleTables returns the built-in tables, the default first.
func PoleTables() []*PoleTable { return []*PoleTable{vaes(), besse()} }

func (t *PoleTable) add(plate string, p datedPole) {
	if t.paths == nil {
		t.paths = map[string][]datedPole{}
	}
	if _, ok := t.paths[plate]; !ok {
		t.plates = append(t.plates, plate)
	}
	t.paths[plate] = append(t.paths[plate], p)
}

// ready sorts every path and starts it at the spin axis: at 0 Ma the pole is
// the geographic one by definition.
func (t *PoleTable) ready() *PoleTable {
	for plate, path := range t.paths {
		slices.SortStableFunc(path, func(a, b datedPole) int {
			switch {
			case a.age < b.age:
				return -1
			case a.age > b.age:
				return 1
			}
			return 0
		})
		if path[0].age > 0 {
			path = append([]datedPole{{0, Pole{90, 0, path[0].A95}}}, path...)
		}
		t.paths[plate] = path
	}
	return t
}

// Plates returns the plates of the table.
func (t *PoleTable) Plates() []string { return slices.Clone(t.plates) }

// Reach returns the ages a plate's path spans, in Ma.
func (t *PoleTable) Reach(plate string) (from, to float64, ok bool) {
	name, ok := t.find(plate)
	if !ok {
		return 0, 0, false
	}
	path := t.paths[name]
	return path[0].age, path[len(path)-1].age, true
}

// find knows a plate by name in any case, by the table's two-letter code, and
// by a name that only one plate holds ("Africa" for "Southern Africa").
func (t *PoleTable) find(plate string) (string, bool) {
	key := strings.ToLower(strings.TrimSpace(plate))
	if code, ok := besseNames[strings.ToUpper(key)]; ok {
		key = strings.ToLower(code)
	}
	if key == "" {
		return "", false
	}
	var holding []string
	for _, p := range t.plates {
		l := strings.ToLower(p)
		if l == key {
			return p, true
		}
		if strings.Contains(l, key) {
			holding = append(holding, p)
		}
	}
	if key == "europe" && slices.Contains(t.plates, "Eurasia (stable Europe)") {
		return "Eurasia (stable Europe)", true
	}
	if len(holding) == 1 {
		return holding[0], true
	}
	return "", false
}

// Pole returns a plate's north pole at an age in Ma, along the great circle
// between the neighbouring poles of the table. An unknown plate or an age the
// path does not reach is an *InputError that says what the table has.
func (t *PoleTable) Pole(plate string, ageMa float64) (Pole, error) {
	name, ok := t.find(plate)
	if !ok {
		return Pole{}, &InputError{"plate", fmt.Sprintf("%q is no plate of the table %s. It has: %s", clip(plate), t.Name, strings.Join(t.plates, ", "))}
	}
	path := t.paths[name]
	first, last := path[0].age, path[len(path)-1].age
	if math.IsNaN(ageMa) || ageMa < first || ageMa > last {
		return Pole{}, &InputError{"plate", fmt.Sprintf("the table %s has %s from %s to %s Ma and no pole for %s Ma. Type a pole, or choose another plate or table%s", t.Name, name, plain(first), plain(last), plain(ageMa), t.others(ageMa))}
	}
	i, _ := slices.BinarySearchFunc(path, ageMa, func(p datedPole, a float64) int {
		switch {
		case p.age < a:
			return -1
		case p.age > a:
			return 1
		}
		return 0
	})
	if path[i].age == ageMa {
		return path[i].Pole, nil
	}
	a, b := path[i-1], path[i]
	u := (ageMa - a.age) / (b.age - a.age)
	lat, lon := alongArc(a.Lat, a.Lon, b.Lat, b.Lon, u)
	return Pole{lat, lon, a.A95 + u*(b.A95-a.A95)}, nil
}

func (t *PoleTable) others(ageMa float64) string {
	var have []string
	for _, p := range t.plates {
		if path := t.paths[p]; ageMa >= path[0].age && ageMa <= path[len(path)-1].age {
			have = append(have, p)
		}
	}
	if len(have) == 0 {
		return ""
	}
	return " (this one reaches that age for " + strings.Join(have, ", ") + ")"
}

// PoleTableNamed finds a built-in table. With name "" the first table that has
// the plate at that age is taken, or else the default.
func PoleTableNamed(name, plate string, ageMa float64) (*PoleTable, error) {
	for _, t := range PoleTables() {
		if name == t.Name {
			return t, nil
		}
		if from, to, ok := t.Reach(plate); name == "" && ok && ageMa >= from && ageMa <= to {
			return t, nil
		}
	}
	if name == "" {
		for _, t := range PoleTables() {
			if _, _, ok := t.Reach(plate); ok {
				return t, nil
			}
		}
		return vaes(), nil
	}
	return nil, &InputError{"pole_table", fmt.Sprintf("%q is no pole table. Expected one of: %s, %s", clip(name), Vaes2023, BesseCourtillot02)}
}

// ParsePoleTable reads a user's table with the columns plate, age_ma, pole_lat
// and pole_lon (north poles, degrees) and, if wanted, a95. Every bad line is
// in the error, with its number and what was expected.
func ParsePoleTable(name string, in io.Reader) (*PoleTable, error) {
	bad := func(s string) (*PoleTable, error) { return nil, &InputError{"pole_table", s} }
	rows, err := readRecords(in)
	if err != nil {
		return bad("the table could not be read: expected comma-separated text with the header plate,age_ma,pole_lat,pole_lon,a95")
	}
	if len(rows) == 0 {
		return bad("the table has no rows below its header. Expected plate,age_ma,pole_lat,pole_lon and, if known, a95")
	}
	for _, c := range []string{"plate", "age_ma", "pole_lat", "pole_lon"} {
		if _, ok := rows[0][c]; !ok {
			return bad("the column " + c + " is missing: expected plate,age_ma,pole_lat,pole_lon and, if known, a95")
		}
	}
	t := &PoleTable{Name: name, Title: "a table of your own", Source: "a table of the user's own"}
	var faults []string
	seen := map[string]bool{}
	for i, r := range rows {
		p := datedPole{r.number("age_ma"), Pole{r.number("pole_lat"), r.number("pole_lon"), r.number("a95")}}
		key := strings.ToLower(r.text("plate")) + "|" + plain(p.age)
		switch {
		case r.text("plate") == "":
			faults = append(faults, fmt.Sprintf("row %d: plate is empty", i+1))
		case !(p.age >= 0 && p.age <= oldest):
			faults = append(faults, fmt.Sprintf("row %d: age_ma %q: expected 0 to %d Ma", i+1, clip(r.text("age_ma")), oldest))
		case !(p.Lat >= -90 && p.Lat <= 90):
			faults = append(faults, fmt.Sprintf("row %d: pole_lat %q: expected -90 to 90 degrees", i+1, clip(r.text("pole_lat"))))
		case !(p.Lon >= -180 && p.Lon <= 360):
			faults = append(faults, fmt.Sprintf("row %d: pole_lon %q: expected -180 to 360 degrees", i+1, clip(r.text("pole_lon"))))
		case r.text("a95") != "" && !(p.A95 >= 0 && p.A95 <= 90):
			faults = append(faults, fmt.Sprintf("row %d: a95 %q: expected 0 to 90 degrees, or nothing", i+1, clip(r.text("a95"))))
		case p.age <= 20 && p.Lat < -60:
			faults = append(faults, fmt.Sprintf("row %d: a pole at %s degrees %s Ma ago is a south pole: expected the north pole (latitude with its sign changed, longitude plus 180)", i+1, plain(p.Lat), plain(p.age)))
		case seen[key]:
			faults = append(faults, fmt.Sprintf("row %d: a second pole of %s at %s Ma", i+1, clip(r.text("plate")), plain(p.age)))
		default:
			seen[key] = true
			t.add(r.text("plate"), p)
		}
	}
	if len(faults) > 0 {
		return bad(strings.Join(faults, "; "))
	}
	return t.ready(), nil
}
