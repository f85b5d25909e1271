package planform

import (
	"bytes"
	"encoding/xml"
	"errors"
	"fmt"
	"io"
	"math"
	"slices"
	"strconv"
	"strings"
)

const xmlDepth = 200

// xml reads KML or GPX. Entities are never expanded: a document that declares
// any is refused, so no small file can become a large one.
func (c *collector) xml(text []byte) error {
	d := xml.NewDecoder(bytes.NewReader(text))
	d.CharsetReader = latin1
	depth := 0
	var reader interface {
		start(xml.StartElement) error
		end(string)
		chars([]byte) error
	}
	for {
		tok, err := d.RawToken()
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil {
			return badXML(d, err)
		}
		switch e := tok.(type) {
		case xml.Directive:
			return &InputError{"body", "the XML declares a document type or entities, which are not read; take the <!DOCTYPE ...> out, or export the line again"}
		case xml.StartElement:
			if depth++; depth > xmlDepth {
				return &InputError{"body", fmt.Sprintf("the XML nests deeper than %d levels; expected KML or GPX", xmlDepth)}
			}
			if reader == nil {
				switch e.Name.Local {
				case "kml":
					c.format = "KML"
					reader = &kmlReader{c: c}
				case "gpx":
					c.format = "GPX"
					reader = &gpxReader{c: c}
				case "html":
					return &InputError{"body", "the file is a web page, not KML or GPX; download the file itself"}
				default:
					return &InputError{"body", fmt.Sprintf("the XML is <%s>; expected <kml> or <gpx>", clip(e.Name.Local))}
				}
			}
			if err := reader.start(e); err != nil {
				return err
			}
		case xml.EndElement:
			depth--
			if reader != nil {
				reader.end(e.Name.Local)
			}
		case xml.CharData:
			if reader != nil {
				if err := reader.chars(e); err != nil {
					return err
				}
			}
		}
	}
	if depth != 0 || reader == nil {
		return &InputError{"body", "the XML ends too early; send the file again"}
	}
	return nil
}

func badXML(d *xml.Decoder, err error) error {
	line, _ := d.InputPos()
	if strings.Contains(err.Error(), "entity") {
		return &InputError{"body", fmt.Sprintf("line %d of the XML uses an entity that is not one of XML's own five; replace it by the character it stands for", line)}
	}
	if strings.Contains(err.Error(), "encoding") || strings.Contains(err.Error(), "UTF-8") {
		return &InputError{"body", fmt.Sprintf("the XML is not UTF-8 near line %d; save it as UTF-8", line)}
	}
	return &InputError{"body", fmt.Sprintf("the XML is broken near line %d; export the line again", line)}
}

// latin1 reads the one other encoding that is common in such files; the names
// of lines are all it matters for.
func latin1(charset string, in io.Reader) (io.Reader, error) {
	switch strings.ToLower(charset) {
	case "utf-8", "utf8", "us-ascii", "ascii":
		return in, nil
	case "iso-8859-1", "latin1", "windows-1252":
		b, err := io.ReadAll(in)
		out := make([]byte, 0, len(b)+len(b)/8)
		for _, x := range b {
			out = append(out, string(rune(x))...)
		}
		return bytes.NewReader(out), err
	}
	return nil, errors.New("encoding not known")
}

// kmlReader reads LineStrings and gx:Tracks of KML 2.2/2.3 (OGC 12-007r2). The
// name is that of the placemark.
type kmlReader struct {
	c      *collector
	stack  []string
	name   string
	first  int // first line of the current placemark
	line   []Vertex
	inLine bool
}

func (k *kmlReader) start(e xml.StartElement) error {
	name := e.Name.Local
	k.stack = append(k.stack, name)
	switch name {
	case "Placemark":
		k.name, k.first = "", len(k.c.lines)
	case "LineString", "Track":
		k.inLine, k.line = true, nil
	case "Point", "Polygon", "Model":
		k.c.skipped[name]++
	}
	return nil
}

func (k *kmlReader) end(name string) {
	if n := len(k.stack); n > 0 {
		k.stack = k.stack[:n-1]
	}
	switch {
	case (name == "LineString" || name == "Track") && k.inLine:
		k.inLine = false
		if len(k.line) == 0 {
			k.c.refuse(orElse(k.name, "a "+name), "it has no coordinates")
			return
		}
		k.c.add(Line{Name: k.name, Role: roleOf(k.name), Vertices: slices.Clip(k.line)})
		k.line = nil
	case name == "Placemark":
		// The name may come after the geometry.
		for i := k.first; i < len(k.c.lines); i++ {
			k.c.lines[i].Name, k.c.lines[i].Role = k.name, roleOf(k.name)
		}
		k.name = ""
	}
}

func (k *kmlReader) chars(b []byte) error {
	n := len(k.stack)
	if n < 2 {
		return nil
	}
	switch in, parent := k.stack[n-1], k.stack[n-2]; {
	case in == "name" && parent == "Placemark":
		k.name += string(b)
	case in == "coordinates" && k.inLine && parent == "LineString":
		return k.tuples(b, ',')
	case in == "coord" && k.inLine:
		return k.tuples(b, ' ')
	}
	return nil
}

// tuples reads "lon,lat[,alt]" separated by white space, or one "lon lat alt" of
// a gx:Track.
func (k *kmlReader) tuples(b []byte, sep byte) error {
	v := [3]float64{math.NaN(), math.NaN(), math.NaN()}
	n := 0
	flush := func() error {
		if n == 0 {
			return nil
		}
		if n == 1 {
			return &InputError{"body", fmt.Sprintf("coordinate tuple %d of a line of the KML has one number; expected longitude,latitude or longitude,latitude,altitude", len(k.line)+1)}
		}
		k.line = append(k.line, Vertex{v[0], v[1], v[2], math.NaN()})
		v = [3]float64{math.NaN(), math.NaN(), math.NaN()}
		n = 0
		return k.c.grow(1)
	}
	for i := 0; i < len(b); {
		if isSpace(b[i]) {
			i++
			continue
		}
		start := i
		for i < len(b) && !isSpace(b[i]) && b[i] != ',' {
			i++
		}
		x, err := strconv.ParseFloat(string(b[start:i]), 64)
		if err != nil {
			return &InputError{"body", fmt.Sprintf("coordinate tuple %d of a line of the KML holds %q; expected numbers as longitude,latitude or longitude,latitude,altitude", len(k.line)+1, clip(string(b[start:i])))}
		}
		if n < 3 {
			v[n] = x
		}
		n++
		// A comma, with or without spaces about it, means that the tuple goes on.
		j := i
		for j < len(b) && isSpace(b[j]) {
			j++
		}
		if j < len(b) && b[j] == ',' {
			i = j + 1
			continue
		}
		if sep == ',' || j >= len(b) {
			if err := flush(); err != nil {
				return err
			}
		}
	}
	return flush()
}

func isSpace(b byte) bool { return b == ' ' || b == '\n' || b == '\r' || b == '\t' }

// gpxReader reads track segments and routes of GPX 1.1; each segment is a line
// of its own.
type gpxReader struct {
	c     *collector
	stack []string
	name  string
	kind  string // trkpt or rtept while in one
	line  []Vertex
	ele   []byte
}

func (g *gpxReader) start(e xml.StartElement) error {
	name := e.Name.Local
	g.stack = append(g.stack, name)
	switch name {
	case "trk", "rte":
		g.name, g.line = "", nil
	case "trkseg":
		g.line = nil
	case "wpt":
		g.c.skipped["waypoint"]++
	case "trkpt", "rtept":
		g.kind, g.ele = name, g.ele[:0]
		v := Vertex{math.NaN(), math.NaN(), math.NaN(), math.NaN()}
		for _, a := range e.Attr {
			to := &v.Lon
			switch a.Name.Local {
			case "lat":
				to = &v.Lat
			case "lon":
			default:
				continue
			}
			x, err := strconv.ParseFloat(strings.TrimSpace(a.Value), 64)
			if err != nil {
				return &InputError{"body", fmt.Sprintf("point %d of a GPX line has %s %q; expected degrees", len(g.line)+1, a.Name.Local, clip(a.Value))}
			}
			*to = x
		}
		g.line = append(g.line, v)
		return g.c.grow(1)
	}
	return nil
}

func (g *gpxReader) end(name string) {
	if n := len(g.stack); n > 0 {
		g.stack = g.stack[:n-1]
	}
	switch name {
	case "trkpt", "rtept":
		if x, err := strconv.ParseFloat(strings.TrimSpace(string(g.ele)), 64); err == nil && len(g.line) > 0 {
			g.line[len(g.line)-1].Depth = x
		}
		g.kind = ""
	case "trkseg", "rte":
		if len(g.line) > 0 {
			g.c.add(Line{Name: g.name, Role: roleOf(g.name), Vertices: slices.Clip(g.line)})
		} else {
			g.c.refuse(orElse(g.name, "a track or route"), "it has no points")
		}
		g.line = nil
	}
}

func (g *gpxReader) chars(b []byte) error {
	n := len(g.stack)
	if n < 2 {
		return nil
	}
	switch in, parent := g.stack[n-1], g.stack[n-2]; {
	case in == "ele" && g.kind != "":
		g.ele = append(g.ele, b...)
	case in == "name" && (parent == "trk" || parent == "rte"):
		g.name += string(b)
	}
	return nil
}
