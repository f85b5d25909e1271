package planform

import (
	"encoding/json"
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"
)

// jsonDepth bounds how deep a file may nest, so that no file exhausts the
// stack.
const jsonDepth = 200

// geoObject is what matters of a GeoJSON object.
type geoObject struct {
	typ        string
	coords     [][]Vertex // one a line
	level      int        // nesting of the coordinates: 2 a line, 3 several
	geometry   *geoObject
	members    []*geoObject // of a collection
	properties map[string]any
	crs        string
	id         string
}

// geoJSON reads RFC 7946 GeoJSON: a geometry, a Feature, a FeatureCollection,
// or several of them one after the other (newline-delimited, RFC 8142).
func (c *collector) geoJSON(text []byte) error {
	sc := &scanner{b: text}
	for {
		sc.space()
		for sc.peek() == 0x1e {
			sc.i++
			sc.space()
		}
		if sc.i >= len(sc.b) {
			return nil
		}
		o, err := sc.object(c, 0)
		if err != nil {
			return err
		}
		c.take(o, o.name(), o.properties)
	}
}

// object reads a GeoJSON object.
func (sc *scanner) object(c *collector, depth int) (*geoObject, error) {
	if depth > jsonDepth {
		return nil, &InputError{"body", fmt.Sprintf("the JSON nests deeper than %d levels; expected GeoJSON", jsonDepth)}
	}
	o := &geoObject{}
	return o, sc.list('{', '}', func() error {
		key, err := sc.text()
		if err != nil {
			return err
		}
		if err := sc.eat(':', "':'"); err != nil {
			return err
		}
		return sc.member(c, o, key, depth)
	})
}

func (sc *scanner) member(c *collector, o *geoObject, key string, depth int) (err error) {
	sc.space()
	next := sc.peek()
	switch {
	case key == "type" && next == '"':
		o.typ, err = sc.text()
	case key == "coordinates" && next == '[':
		o.level, err = sc.positions(c, o, 1)
	case key == "geometry" && next == '{':
		o.geometry, err = sc.object(c, depth+1)
	case (key == "features" || key == "geometries") && next == '[':
		err = sc.list('[', ']', func() error {
			sc.space()
			if sc.peek() != '{' {
				return sc.bad("an object")
			}
			m, err := sc.object(c, depth+1)
			o.members = append(o.members, m)
			return err
		})
	case key == "properties" && next == '{':
		err = sc.decode(&o.properties, depth)
	case key == "crs" && next == '{':
		var named struct {
			Properties struct{ Name string }
		}
		if err = sc.decode(&named, depth); err == nil {
			o.crs = named.Properties.Name
		}
	case key == "id":
		var b []byte
		if b, err = sc.raw(depth); err == nil {
			o.id = strings.Trim(string(b), `"`)
		}
	default:
		_, err = sc.raw(depth)
	}
	return err
}

func (sc *scanner) decode(into any, depth int) error {
	b, err := sc.raw(depth)
	if err != nil {
		return err
	}
	if json.Unmarshal(b, into) != nil {
		return sc.bad("valid JSON")
	}
	return nil
}

// positions reads nested arrays of numbers. Level 1 is a position by itself, 2
// a line, 3 and more several; every innermost list of positions becomes one
// line.
func (sc *scanner) positions(c *collector, o *geoObject, level int) (deepest int, err error) {
	if level > 6 {
		return level, sc.bad("coordinates nested as in a LineString or MultiLineString")
	}
	deepest = level
	var line []Vertex
	var number [3]float64
	n := 0
	err = sc.list('[', ']', func() error {
		sc.space()
		if sc.peek() != '[' {
			v, err := sc.number()
			if n < 3 {
				number[n] = v
			}
			n++
			return err
		}
		if n > 0 {
			return sc.bad("a number")
		}
		if p, ok, err := sc.position(); err != nil {
			return err
		} else if ok {
			deepest = max(deepest, level+1)
			line = append(line, p)
			return c.grow(1)
		}
		d, err := sc.positions(c, o, level+1)
		deepest = max(deepest, d)
		return err
	})
	if err == nil && line != nil {
		o.coords = append(o.coords, slices.Clip(line))
	}
	return deepest, err
}

// position reads an array of numbers; not ok, and nothing read, when the array
// holds arrays. Numbers after the third are left out.
func (sc *scanner) position() (p Vertex, ok bool, err error) {
	start := sc.i
	sc.i++
	sc.space()
	if sc.peek() == '[' || sc.peek() == ']' {
		sc.i = start
		return p, false, nil
	}
	v := [3]float64{math.NaN(), math.NaN(), math.NaN()}
	for n := 0; ; n++ {
		sc.space()
		x, err := sc.number()
		if err != nil {
			return p, false, err
		}
		if n < 3 {
			v[n] = x
		}
		sc.space()
		switch sc.peek() {
		case ',':
			sc.i++
		case ']':
			sc.i++
			if n < 1 {
				return p, false, sc.bad("two or three numbers in a position")
			}
			return Vertex{v[0], v[1], v[2], math.NaN()}, true, nil
		default:
			return p, false, sc.bad("',' or ']'")
		}
	}
}

// take adds the lines of an object; name and properties come from the feature
// around it.
func (c *collector) take(o *geoObject, name string, properties map[string]any) {
	if o.crs != "" {
		c.fromFile = o.crs
	}
	switch o.typ {
	case "FeatureCollection", "GeometryCollection":
		for _, m := range o.members {
			if o.typ == "FeatureCollection" {
				name, properties = m.name(), m.properties
			}
			c.take(m, name, properties)
		}
	case "Feature":
		if o.geometry == nil {
			c.refuse(orElse(name, "a feature"), "it has no geometry")
			return
		}
		c.take(o.geometry, name, properties)
	case "LineString", "MultiLineString":
		if want := map[string]int{"LineString": 2, "MultiLineString": 3}[o.typ]; len(o.coords) > 0 && o.level != want {
			c.refuse(orElse(name, "a "+o.typ), fmt.Sprintf("its coordinates are nested %d deep; expected %d for a %s", o.level, want, o.typ))
			return
		}
		if len(o.coords) == 0 {
			c.refuse(orElse(name, "a "+o.typ), "it has no vertices")
		}
		for _, v := range o.coords {
			c.add(lineWith(name, v, properties))
		}
	case "":
		c.refuse(orElse(name, "an object"), "it has no type; expected Feature, FeatureCollection, LineString or MultiLineString")
	default:
		c.skipped[clip(o.typ)]++
	}
}

func (o *geoObject) name() string {
	for _, key := range []string{"name", "Name", "NAME", "title", "line", "reach", "channel", "id", "fid"} {
		switch v := o.properties[key].(type) {
		case string:
			if v != "" {
				return v
			}
		case float64:
			return strconv.FormatFloat(v, 'f', -1, 64)
		}
	}
	return o.id
}

// lineWith makes a line of vertices with what the properties say of it.
func lineWith(name string, v []Vertex, properties map[string]any) Line {
	l := Line{Name: name, Vertices: v, Role: roleOf(name)}
	for _, key := range []string{"role", "bank", "side"} {
		if s, ok := properties[key].(string); ok {
			if r := roleOf(s); r != "" {
				l.Role = r
			}
		}
	}
	for _, key := range []string{"width_m", "channel_width_m", "width"} {
		if w, ok := properties[key].(float64); ok && w > 0 {
			for i := range l.Vertices {
				l.Vertices[i].Width = w
			}
			l.Notes = append(l.Notes, fmt.Sprintf("Channel width %g m taken from the property %s.", w, key))
			break
		}
	}
	return l
}

func orElse(s, other string) string {
	if s == "" {
		return other
	}
	return s
}

func sortedKeys(m map[string]int) []string {
	keys := make([]string, 0, len(m))
	for k := range m {
		keys = append(keys, k)
	}
	slices.Sort(keys)
	return keys
}
