package planform

import (
	"bytes"
	"compress/gzip"
	"errors"
	"fmt"
	"io"
	"math"
	"strings"
	"unicode/utf8"
)

// collector gathers the lines of one file.
type collector struct {
	s        Settings
	crs      crs
	fromFile string // coordinate system the file itself names, "" if none
	format   string
	z        string // what a third coordinate is unless told otherwise
	lines    []Line
	refused  []Refused
	vertices int
	skipped  map[string]int // geometries that are no lines, by kind
}

// Read finds the lines of a file: GeoJSON, KML, GPX, WKT, CSV or GeoPackage,
// known by its content (content type and name only break ties), optionally
// gzipped. Lines that cannot be used are refused with the reason. The
// coordinates come back as degrees on WGS84, or as plane metres; depths are
// metres down. The error, an *InputError, means that nothing could be read.
func Read(data []byte, contentType, name string, s Settings) ([]Line, []Refused, error) {
	if err := s.Check(); err != nil {
		return nil, nil, err
	}
	if len(data) > MaxBytes {
		return nil, nil, &InputError{"body", fmt.Sprintf("the file has %d MB; at most %d MB are read. Split it, or thin its vertices", len(data)>>20, MaxBytes>>20)}
	}
	data, err := plainBytes(data)
	if err != nil {
		return nil, nil, err
	}
	c := &collector{s: s, z: "elevation", skipped: map[string]int{}}
	if err := c.parse(data, contentType, name); err != nil {
		return nil, nil, err
	}
	if err := c.finish(); err != nil {
		return nil, nil, err
	}
	return c.lines, c.refused, nil
}

// plainBytes unpacks gzip, takes off a byte order mark and refuses what is no
// text and no GeoPackage.
func plainBytes(data []byte) ([]byte, error) {
	if bytes.HasPrefix(data, []byte{0x1f, 0x8b}) {
		z, err := gzip.NewReader(bytes.NewReader(data))
		if err != nil {
			return nil, &InputError{"body", "the file is gzipped but damaged; send it again or unpacked"}
		}
		data, err = io.ReadAll(io.LimitReader(z, MaxBytes+1))
		if err != nil {
			return nil, &InputError{"body", "the file is gzipped but damaged; send it again or unpacked"}
		}
		if len(data) > MaxBytes {
			return nil, &InputError{"body", fmt.Sprintf("unpacked, the file has more than %d MB; split it, or thin its vertices", MaxBytes>>20)}
		}
	}
	data = bytes.TrimPrefix(data, []byte("\xef\xbb\xbf"))
	switch {
	case len(bytes.TrimSpace(data)) == 0:
		return nil, &InputError{"body", "the file is empty; expected a line as GeoJSON, KML, GPX, CSV, WKT or GeoPackage"}
	case isSQLite(data):
		return data, nil
	case bytes.HasPrefix(data, []byte("PK\x03\x04")) || bytes.HasPrefix(data, []byte("PK\x05\x06")):
		return nil, &InputError{"body", "the file is a zip archive, whatever its name says (a .kmz, a zipped shapefile, a spreadsheet?); unpack it and give the .kml, or export the line as GeoJSON or CSV"}
	case bytes.HasPrefix(data, []byte{0, 0, 0x27, 0x0a}):
		return nil, &InputError{"body", "the file is a shapefile; export the line as GeoJSON, GeoPackage or CSV"}
	case bytes.HasPrefix(data, []byte{0xff, 0xfe}) || bytes.HasPrefix(data, []byte{0xfe, 0xff}):
		return nil, &InputError{"body", "the text is UTF-16; save it as UTF-8"}
	case bytes.IndexByte(data[:min(len(data), 4096)], 0) >= 0:
		return nil, &InputError{"body", "the file is binary and not a GeoPackage; expected GeoJSON, KML, GPX, CSV, WKT or GeoPackage"}
	}
	return data, nil
}

func isSQLite(data []byte) bool { return bytes.HasPrefix(data, []byte("SQLite format 3\x00")) }

// parse sends the file to the reader of its format.
func (c *collector) parse(data []byte, contentType, name string) error {
	if isSQLite(data) {
		c.format = "GeoPackage"
		return c.geoPackage(data)
	}
	text := bytes.TrimSpace(data)
	switch first := text[0]; {
	case first == '{' || first == 0x1e:
		c.format = "GeoJSON"
		return c.geoJSON(text)
	case first == '[':
		return &InputError{"body", "the file is a JSON array, not GeoJSON; expected an object with a type, as {\"type\":\"LineString\",\"coordinates\":[...]}"}
	case first == '<':
		return c.xml(text)
	case isWKT(text):
		c.format = "WKT"
		return c.wkt(text)
	case strings.Contains(contentType, "json") || strings.HasSuffix(strings.ToLower(name), "json"):
		return &InputError{"body", "the file says it is JSON but does not start with an object; expected GeoJSON"}
	case strings.Contains(contentType, "xml") || strings.HasSuffix(strings.ToLower(name), ".kml") || strings.HasSuffix(strings.ToLower(name), ".gpx"):
		return &InputError{"body", "the file says it is KML or GPX but holds no XML; export it again"}
	}
	c.format = "CSV"
	return c.csv(data)
}

// errFull stops a reader when the file holds too many vertices.
var errFull = &InputError{"body", fmt.Sprintf("the file holds more than %d vertices; split it, or thin its vertices", MaxVertices)}

// grow counts vertices as they are read.
func (c *collector) grow(n int) error {
	c.vertices += n
	if c.vertices > MaxVertices {
		return errFull
	}
	return nil
}

// add takes a line as the file gives it: X and Y in Lon and Lat, the third
// coordinate in Depth.
func (c *collector) add(line Line) {
	line.Name = strings.TrimSpace(line.Name)
	if !utf8.ValidString(line.Name) {
		line.Name = strings.ToValidUTF8(line.Name, "?")
	}
	if r := []rune(line.Name); len(r) > 200 {
		line.Name = string(r[:200])
	}
	c.lines = append(c.lines, line)
}

func (c *collector) refuse(line, reason string) {
	c.refused = append(c.refused, Refused{line, reason})
}

// finish turns what was read into lines to measure.
func (c *collector) finish() error {
	for _, kind := range sortedKeys(c.skipped) {
		n := c.skipped[kind]
		c.refuse(count(n, kind, kind+"s"), "not a line; only LineString and MultiLineString are measured")
	}
	if n := len(c.lines) + len(c.refused); n > MaxLines {
		return &InputError{"body", fmt.Sprintf("the file holds %d lines; at most %d are measured at once. Split it", n, MaxLines)}
	}
	if len(c.lines) == 0 && len(c.refused) == 0 {
		return &InputError{"body", "the " + c.format + " file holds no line; expected a LineString (GeoJSON, KML, WKT, GeoPackage), a track or route (GPX), or columns of longitude and latitude (CSV)"}
	}
	if err := c.setCRS(); err != nil {
		return err
	}
	c.name()
	kept := c.lines[:0]
	for i := range c.lines {
		line := c.lines[i]
		if err := c.place(&line); err != nil {
			var in *InputError
			if errors.As(err, &in) && in.Parameter == "epsg" {
				return in
			}
			c.refuse(line.Name, sentence(err))
			continue
		}
		c.interpretZ(&line)
		kept = append(kept, line)
	}
	c.lines = kept
	c.pairBanks()
	c.giveAxes()
	return nil
}

// setCRS takes the coordinate system asked for, else the one the file names.
func (c *collector) setCRS() error {
	code := c.s.EPSG
	if code == "" {
		code = c.fromFile
	}
	got, err := parseEPSG(code)
	if err != nil && c.s.EPSG == "" {
		return &InputError{"epsg", fmt.Sprintf("the file says its coordinates are %q, which is not known here. Give epsg=4326 (degrees), a UTM zone (epsg=32631 for zone 31 north) or epsg=plane to say what they are", clip(c.fromFile))}
	}
	c.crs = got
	return err
}

// name numbers lines without a name.
func (c *collector) name() {
	seen := map[string]int{}
	for i := range c.lines {
		l := &c.lines[i]
		if l.Name == "" {
			l.Name = fmt.Sprintf("line %d", i+1)
		}
		seen[l.Name+"\x00"+l.Role]++
		if n := seen[l.Name+"\x00"+l.Role]; n > 1 {
			l.Name = fmt.Sprintf("%s (%d)", l.Name, n)
		}
	}
}

// place turns coordinates into degrees, or marks the line as plane.
func (c *collector) place(line *Line) error {
	switch {
	case c.crs.plane:
		line.Plane = true
		line.Notes = append(line.Notes, "Coordinates are plane metres with no place.")
	case c.crs.zone > 0:
		if err := c.crs.toDegrees(line); err != nil {
			return err
		}
		half := "north"
		if c.crs.south {
			half = "south"
		}
		line.Notes = append(line.Notes, strings.TrimSpace(fmt.Sprintf("Coordinates were turned from UTM zone %d %s into degrees. %s", c.crs.zone, half, c.crs.note)))
	}
	return checkMetres(line)
}

// checkMetres asks what coordinates are that cannot be degrees.
func checkMetres(line *Line) error {
	if line.Plane {
		return nil
	}
	for i, p := range line.Vertices {
		if finite(p.Lon) && finite(p.Lat) && (math.Abs(p.Lon) > 360 || math.Abs(p.Lat) > 360) {
			return errMetres(i, p)
		}
	}
	return nil
}

// interpretZ turns the third coordinate into a depth, and says what it was
// taken for.
func (c *collector) interpretZ(line *Line) {
	z := c.s.Z
	if z == "" {
		z = c.z
	}
	n, zeros, positive := 0, 0, 0
	for _, v := range line.Vertices {
		if finite(v.Depth) {
			n++
			if v.Depth == 0 {
				zeros++
			} else if v.Depth > 0 {
				positive++
			}
		}
	}
	if n == 0 {
		return
	}
	if zeros == n {
		for i := range line.Vertices {
			line.Vertices[i].Depth = math.NaN()
		}
		line.Notes = append(line.Notes, "The third coordinate is 0 everywhere and was left out.")
		return
	}
	line.Z = z
	switch {
	case z == "depth" && positive == 0 && c.s.Z == "":
		line.Z = "elevation"
		line.Notes = append(line.Notes, "The depths are all negative, so they were read as elevations (metres, up positive). Give z=depth to read them as depths all the same.")
	case c.s.Z != "":
	case z == "elevation" && positive == n-zeros:
		line.Notes = append(line.Notes, "The third coordinate was read as elevation (metres, up positive), and all of it lies above sea level. Give z=depth or z=time if it is depth or two-way time.")
	case z == "time":
		line.Notes = append(line.Notes, "The third coordinate was read as two-way time. Give z=depth or z=elevation if it is metres.")
	default:
		line.Notes = append(line.Notes, fmt.Sprintf("The third coordinate was read as %s (metres, %s positive). Give z= to change it.", line.Z, map[string]string{"depth": "down", "elevation": "up"}[line.Z]))
	}
	for i := range line.Vertices {
		v := &line.Vertices[i]
		switch line.Z {
		case "elevation":
			v.Depth = -v.Depth
		case "time":
			v.Depth = math.NaN()
		}
		if v.Depth == 0 {
			v.Depth = 0 // no negative zero
		}
	}
	line.HasTime = line.Z == "time"
}

// roleOf reads what a line is from a name or a property.
func roleOf(word string) string {
	switch w := strings.Join(strings.FieldsFunc(strings.ToLower(word), func(r rune) bool { return r < 'a' || r > 'z' }), " "); w {
	case "left bank", "bank left", "left":
		return "left_bank"
	case "right bank", "bank right", "right":
		return "right_bank"
	case "axis", "valley axis":
		return "axis"
	default:
		switch {
		case strings.HasSuffix(w, " left bank"):
			return "left_bank"
		case strings.HasSuffix(w, " right bank"):
			return "right_bank"
		case strings.HasSuffix(w, " valley axis"):
			return "axis"
		}
	}
	return ""
}

// sentence is what an error says to a person.
func sentence(err error) string {
	var in *InputError
	if errors.As(err, &in) {
		if in.Parameter == "line" || in.Parameter == "body" {
			return in.Message
		}
		return in.Parameter + ": " + in.Message
	}
	return err.Error()
}

// MeasureFile reads a file and measures every line in it. The error means that
// nothing could be read; a file none of whose lines could be measured gives a
// report with only refusals. With Lines "levels" successive pairs of lines are
// also compared as the older and the younger level of one channel.
func MeasureFile(data []byte, contentType, name string, s Settings) (*Report, error) {
	lines, refused, err := Read(data, contentType, name, s)
	if err != nil {
		return nil, err
	}
	r := &Report{Lines: []Measured{}, Refused: refused}
	if r.Refused == nil {
		r.Refused = []Refused{}
	}
	points := 0
	for i := range lines {
		if points > filePoints {
			r.Refused = append(r.Refused, Refused{lines[i].Name, fmt.Sprintf("the lines before it took %d points at this spacing_m, which is as many as one file may; give a larger one, or split the file", points)})
			continue
		}
		m, err := Measure(lines[i], s)
		if err != nil {
			r.Refused = append(r.Refused, Refused{lines[i].Name, sentence(err)})
			continue
		}
		m.Settings.EPSG, m.Settings.Lines, m.Given = s.EPSG, s.Lines, &lines[i]
		points += len(m.Plan)
		r.Lines = append(r.Lines, *m)
	}
	if s.Lines == "levels" {
		r.compare(lines, s)
	}
	return r, nil
}

func (r *Report) compare(lines []Line, s Settings) {
	for i := 0; i+1 < len(lines); i += 2 {
		m, err := CompareLevels(lines[i], lines[i+1], s)
		if err != nil {
			r.Refused = append(r.Refused, Refused{lines[i].Name + " and " + lines[i+1].Name, sentence(err)})
			continue
		}
		r.Movements = append(r.Movements, *m)
	}
	if len(lines)%2 == 1 {
		r.Refused = append(r.Refused, Refused{lines[len(lines)-1].Name, "it has no second level to be compared with; lines=levels takes pairs, the older first. It was measured by itself"})
	}
}
