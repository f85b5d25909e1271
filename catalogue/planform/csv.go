package planform

import (
	"bytes"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"slices"
	"strconv"
	"strings"
)

// Columns a table may have, by the header names they are known by: lower case,
// letters and digits only, units taken off.
var csvNames = map[string][]string{
	"lon":         {"lon", "long", "longitude", "lng", "x", "easting", "east", "xcoord", "utme", "utmx"},
	"lat":         {"lat", "latitude", "y", "northing", "north", "ycoord", "utmn", "utmy"},
	"depth":       {"depth", "waterdepth"},
	"elevation":   {"elevation", "elev", "z", "alt", "altitude", "ele", "height"},
	"time":        {"twt", "time", "twowaytime"},
	"width":       {"width", "channelwidth", "w"},
	"line":        {"line", "name", "id", "reach", "channel", "segment", "system", "track", "lineid", "linename"},
	"seq":         {"seq", "sequence", "order", "vertex", "point", "number", "no"},
	"bank":        {"bank", "side", "role"},
	"levee_left":  {"leveeleft", "leftlevee"},
	"levee_right": {"leveeright", "rightlevee"},
	"left_lon":    {"leftlon", "leftlongitude", "leftx", "lefteasting", "lonleft", "xleft"},
	"left_lat":    {"leftlat", "leftlatitude", "lefty", "leftnorthing", "latleft", "yleft"},
	"right_lon":   {"rightlon", "rightlongitude", "rightx", "righteasting", "lonright", "xright"},
	"right_lat":   {"rightlat", "rightlatitude", "righty", "rightnorthing", "latright", "yright"},
}

// table reads a CSV into lines.
type table struct {
	c       *collector
	col     map[string]int // column of each name
	scale   map[string]float64
	used    []string // what was taken for what, for the note
	decimal bool     // decimal commas were met
	byName  map[string]int
	lines   []Line
	broken  []string // reason the line is refused, "" if none
	seq     [][]float64
}

// csv reads a table of vertices, one a row: columns are known by their header
// or, without one, are longitude, latitude and perhaps a third coordinate. Rows
// belong together by a line column; comma, semicolon, tab and blanks separate.
func (c *collector) csv(data []byte) error {
	rows, sep, err := csvRows(data)
	if err != nil {
		return err
	}
	first, _, err := rows()
	if errors.Is(err, io.EOF) {
		return &InputError{"body", "the file holds no row"}
	}
	if err != nil {
		return err
	}
	t := &table{c: c, col: map[string]int{}, scale: map[string]float64{}, byName: map[string]int{}}
	pending, err := t.header(first, sep)
	if err != nil {
		return err
	}
	number := 1
	if pending {
		if err := t.row(first, number); err != nil {
			return err
		}
	}
	for {
		fields, line, err := rows()
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil {
			return err
		}
		if err := t.row(fields, line); err != nil {
			return err
		}
	}
	t.finish()
	return nil
}

// csvRows gives the rows of a table one by one with their line numbers. The
// slice is used again.
func csvRows(data []byte) (next func() ([]string, int, error), sep rune, err error) {
	head := firstRow(data)
	for _, s := range ";\t," {
		if bytes.ContainsRune(head, s) {
			sep = s
			break
		}
	}
	if sep == 0 {
		return blankRows(data), ' ', nil
	}
	r := csv.NewReader(bytes.NewReader(data))
	r.Comma, r.FieldsPerRecord, r.ReuseRecord, r.LazyQuotes, r.TrimLeadingSpace = sep, -1, true, true, sep != '\t'
	r.Comment = '#'
	last := 0
	return func() ([]string, int, error) {
		f, err := r.Read()
		if err != nil && !errors.Is(err, io.EOF) {
			return nil, 0, &InputError{"body", "the table is broken after row " + strconv.Itoa(last) + "; export it again as plain CSV"}
		}
		if err != nil {
			return nil, 0, err
		}
		last, _ = r.FieldPos(0)
		return f, last, nil
	}, sep, nil
}

// firstRow is the first row that is no comment.
func firstRow(data []byte) []byte {
	for len(data) > 0 {
		row := data
		if i := bytes.IndexByte(data, '\n'); i >= 0 {
			row, data = data[:i], data[i+1:]
		} else {
			data = nil
		}
		if row = bytes.TrimSpace(row); len(row) > 0 && row[0] != '#' {
			return row
		}
	}
	return nil
}

// blankRows splits at blanks, as in a bare list of coordinates.
func blankRows(data []byte) func() ([]string, int, error) {
	line := 0
	return func() ([]string, int, error) {
		for len(data) > 0 {
			row := data
			if i := bytes.IndexByte(data, '\n'); i >= 0 {
				row, data = data[:i], data[i+1:]
			} else {
				data = nil
			}
			line++
			if f := strings.Fields(string(row)); len(f) > 0 && !strings.HasPrefix(f[0], "#") {
				return f, line, nil
			}
		}
		return nil, line, io.EOF
	}
}

// header finds the columns; pending says that the first row is data.
func (t *table) header(first []string, sep rune) (pending bool, err error) {
	numbers := len(first) >= 2
	for _, f := range first {
		if _, err := strconv.ParseFloat(strings.Replace(strings.TrimSpace(f), ",", ".", 1), 64); err != nil {
			numbers = false
		}
	}
	if numbers {
		t.col["lon"], t.col["lat"] = 0, 1
		t.used = append(t.used, "longitude or easting from column 1, latitude or northing from column 2")
		if len(first) > 2 {
			t.col["elevation"] = 2
			t.used = append(t.used, "the third coordinate from column 3")
		}
		return true, nil
	}
	for i, f := range first {
		t.match(i, strings.TrimSpace(f))
	}
	_, lon := t.col["lon"]
	_, lat := t.col["lat"]
	banks := t.has("left_lon", "left_lat", "right_lon", "right_lat")
	if (!lon || !lat) && !banks {
		names := make([]string, 0, len(first))
		for _, f := range first[:min(len(first), 12)] {
			names = append(names, strconv.Quote(clip(f)))
		}
		hint := ""
		if sep == ' ' && len(first) == 1 {
			hint = " (is the separator a comma, a semicolon or a tab?)"
		}
		return false, &InputError{"body", fmt.Sprintf("no columns of longitude and latitude were found among %s%s; expected a header with lon and lat (or easting and northing), and perhaps depth, elevation or twt, width, line", strings.Join(names, ", "), hint)}
	}
	t.setZ()
	return false, nil
}

// match files column i under the name its header is known by. A unit at its end
// may scale it.
func (t *table) match(i int, header string) {
	key := strings.Map(func(r rune) rune {
		switch {
		case r >= 'a' && r <= 'z', r >= '0' && r <= '9':
			return r
		case r >= 'A' && r <= 'Z':
			return r + 'a' - 'A'
		case r == '_' || r == ' ' || r == '(' || r == '[':
			return '_'
		}
		return -1
	}, header)
	parts := strings.FieldsFunc(key, func(r rune) bool { return r == '_' })
	scale := 1.0
	if n := len(parts); n > 1 {
		switch parts[n-1] {
		case "deg", "dd", "degrees", "m", "metres", "meters", "ms", "s", "msec", "wgs84":
			parts = parts[:n-1]
		case "km":
			parts, scale = parts[:n-1], 1000
		}
	}
	key = strings.Join(parts, "")
	for _, name := range sortedNames {
		if _, taken := t.col[name]; taken || !slices.Contains(csvNames[name], key) {
			continue
		}
		t.col[name] = i
		if scale != 1 && (name == "depth" || name == "elevation" || name == "width") {
			t.scale[name] = scale
			header += ", turned from km into m"
		}
		t.used = append(t.used, fmt.Sprintf("%s from %q", strings.ReplaceAll(name, "_", " "), clip(header)))
		return
	}
}

var sortedNames = func() []string {
	names := make([]string, 0, len(csvNames))
	for n := range csvNames {
		names = append(names, n)
	}
	slices.Sort(names)
	return names
}()

func (t *table) has(names ...string) bool {
	for _, n := range names {
		if _, ok := t.col[n]; !ok {
			return false
		}
	}
	return true
}

// setZ keeps the best of the columns that could be the third coordinate, and
// what it is.
func (t *table) setZ() {
	for _, z := range []string{"depth", "elevation", "time"} {
		if i, ok := t.col[z]; ok {
			t.c.z = z
			scale := t.scale[z]
			delete(t.scale, z)
			for _, other := range []string{"depth", "elevation", "time"} {
				delete(t.col, other)
			}
			t.col["elevation"] = i // the place the row reader looks at
			if scale != 0 {
				t.scale["elevation"] = scale
			}
			return
		}
	}
}
