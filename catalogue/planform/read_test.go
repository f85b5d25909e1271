package planform

import (
	"bytes"
	"compress/gzip"
	"database/sql"
	"encoding/binary"
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// A short channel every format is written from: five vertices with elevation.
var short = [][3]float64{{12.5, -6.25, -1500}, {12.51, -6.26, -1510}, {12.52, -6.255, -1525.5}, {12.53, -6.27, -1530}, {12.545, -6.28, -1542}}

func shortAs(format string) string {
	var b strings.Builder
	for i, p := range short {
		if i > 0 {
			b.WriteString(map[string]string{"json": ",", "kml": " ", "wkt": ", ", "gpx": "", "csv": ""}[format])
		}
		switch format {
		case "json":
			fmt.Fprintf(&b, "[%v, %v,%v]", p[0], p[1], p[2])
		case "kml":
			fmt.Fprintf(&b, "%v,%v,%v", p[0], p[1], p[2])
		case "wkt":
			fmt.Fprintf(&b, "%v %v %v", p[0], p[1], p[2])
		case "gpx":
			fmt.Fprintf(&b, `<trkpt lat="%v" lon="%v"><ele>%v</ele></trkpt>`, p[1], p[0], p[2])
		case "csv":
			fmt.Fprintf(&b, "%v,%v,%v\n", p[0], p[1], -p[2])
		}
	}
	return b.String()
}

func checkShort(t *testing.T, what string, l Line) {
	t.Helper()
	if len(l.Vertices) != len(short) {
		t.Fatalf("%s: %d vertices", what, len(l.Vertices))
	}
	for i, p := range short {
		v := l.Vertices[i]
		if v.Lon != p[0] || v.Lat != p[1] || v.Depth != -p[2] {
			t.Errorf("%s: vertex %d is %+v, expected %v", what, i, v, p)
		}
	}
}

func kmlOf(placemarks string) string {
	return `<?xml version="1.0" encoding="UTF-8"?><kml xmlns="http://www.opengis.net/kml/2.2"><Document>` + placemarks + `</Document></kml>`
}

// The same line in every format reads as the same vertices and depths.
func TestReadFormats(t *testing.T) {
	for what, c := range map[string]struct {
		text  string
		names string
	}{
		"bare geometry":   {`{"type":"LineString","coordinates":[` + shortAs("json") + `]}`, "line 1"},
		"key order":       {"\xef\xbb\xbf" + `{"coordinates":[` + shortAs("json") + `],"bbox":[1,2,3,4],"type":"LineString"}`, "line 1"},
		"feature":         {`{"type":"Feature","id":7,"properties":{"name":"upper"},"geometry":{"type":"LineString","coordinates":[` + shortAs("json") + `]}}`, "upper"},
		"collection":      {`{"type":"FeatureCollection","features":[{"type":"Feature","geometry":{"type":"MultiLineString","coordinates":[[` + shortAs("json") + `],[` + shortAs("json") + `]]},"properties":{"name":"both","tags":{"a":[1,"]"]}}}]}`, "both|both (2)"},
		"lines of JSON":   {`{"type":"LineString","coordinates":[` + shortAs("json") + "]}\n" + `{"type":"LineString","coordinates":[` + shortAs("json") + "]}\n", "line 1|line 2"},
		"geometries":      {`{"type":"GeometryCollection","geometries":[{"type":"LineString","coordinates":[` + shortAs("json") + `]}]}`, "line 1"},
		"kml":             {kmlOf(`<Placemark><name>thalweg</name><LineString><coordinates>` + shortAs("kml") + `</coordinates></LineString></Placemark>`), "thalweg"},
		"kml name last":   {kmlOf(`<Placemark><MultiGeometry><LineString><coordinates>` + shortAs("kml") + `</coordinates></LineString></MultiGeometry><name>late &amp; so</name></Placemark>`), "late & so"},
		"kml loose":       {kmlOf(`<Folder><name>folder</name><Placemark><LineString><coordinates>` + strings.ReplaceAll(shortAs("kml"), ",", " , ") + `</coordinates></LineString></Placemark></Folder>`), "line 1"},
		"kml track":       {kmlOf(`<Placemark><name>gx</name><gx:Track xmlns:gx="http://www.google.com/kml/ext/2.2"><gx:coord>` + strings.ReplaceAll(strings.ReplaceAll(shortAs("kml"), " ", "</gx:coord><gx:coord>"), ",", " ") + `</gx:coord></gx:Track></Placemark>`), "gx"},
		"gpx track":       {`<gpx version="1.1"><trk><name>t</name><trkseg>` + shortAs("gpx") + `</trkseg><trkseg>` + shortAs("gpx") + `</trkseg></trk></gpx>`, "t|t (2)"},
		"gpx route":       {`<gpx><rte><name>r</name>` + strings.ReplaceAll(shortAs("gpx"), "trkpt", "rtept") + `</rte></gpx>`, "r"},
		"wkt":             {"LINESTRING Z (" + shortAs("wkt") + ")", "line 1"},
		"wkt multi":       {"SRID=4326;multilinestringz((" + shortAs("wkt") + "),(" + shortAs("wkt") + "))", "line 1|line 2"},
		"wkt two":         {"LINESTRING(" + shortAs("wkt") + ")\nLINESTRING(" + shortAs("wkt") + ")\n", "line 1|line 2"},
		"csv":             {"lon,lat,depth_m\n" + shortAs("csv"), "line 1"},
		"csv crlf, bom":   {"\xef\xbb\xbfLongitude (deg),Latitude (deg),Water depth (m)\r\n" + strings.ReplaceAll(shortAs("csv"), "\n", "\r\n"), "line 1"},
		"csv semicolons":  {"Lon;Lat;Depth\n" + strings.ReplaceAll(strings.ReplaceAll(shortAs("csv"), ",", ";"), ".", ","), "line 1"},
		"csv tabs":        {"x\ty\televation\n" + strings.ReplaceAll(strings.ReplaceAll(shortAs("csv"), ",1", "\t-1"), ",", "\t"), "line 1"},
		"csv no header":   {strings.ReplaceAll(shortAs("csv"), ",1", ",-1"), "line 1"},
		"blanks":          {strings.ReplaceAll(strings.ReplaceAll(shortAs("csv"), ",1", "   -1"), ",", " "), "line 1"},
		"negative depths": {"lon,lat,depth\n" + strings.ReplaceAll(shortAs("csv"), ",1", ",-1"), "line 1"},
		"comment":         {"# exported\nlon,lat,depth\n" + shortAs("csv"), "line 1"},
	} {
		lines, refused, err := Read([]byte(c.text), "", "", Settings{})
		if err != nil || len(refused) > 0 {
			t.Errorf("%s: %v %v", what, err, refused)
			continue
		}
		var names []string
		for _, l := range lines {
			checkShort(t, what, l)
			names = append(names, l.Name)
		}
		if strings.Join(names, "|") != c.names {
			t.Errorf("%s: names %q, expected %q", what, names, c.names)
		}
	}
}

// geoPackage writes a GeoPackage of lines with a real SQLite file.
func geoPackage(t testing.TB, srs int, extra string, blobs ...[]byte) []byte {
	t.Helper()
	path := filepath.Join(t.TempDir(), "a.gpkg")
	db, err := sql.Open("sqlite", path)
	if err != nil {
		t.Fatal(err)
	}
	defer db.Close()
	for _, q := range []string{
		`CREATE TABLE gpkg_geometry_columns (table_name TEXT, column_name TEXT, geometry_type_name TEXT, srs_id INTEGER, z TINYINT, m TINYINT)`,
		`CREATE TABLE "my lines" (fid INTEGER PRIMARY KEY, geom BLOB, "Name" TEXT)`,
		fmt.Sprintf(`INSERT INTO gpkg_geometry_columns VALUES ('my lines', 'geom', 'LINESTRING', %d, 1, 0)`, srs), extra,
	} {
		if _, err := db.Exec(q); err != nil {
			t.Fatal(q, err)
		}
	}
	for i, b := range blobs {
		if _, err := db.Exec(`INSERT INTO "my lines" VALUES (?, ?, ?)`, i+1, b, fmt.Sprintf("gp %d", i+1)); err != nil {
			t.Fatal(err)
		}
	}
	db.Close()
	data, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	return data
}

// gpBlob is a GeoPackage geometry of the points: header, envelope, LineString Z.
func gpBlob(points [][3]float64, order binary.AppendByteOrder, multi bool) []byte {
	b := []byte{'G', 'P', 0, 0x02, 0, 0, 0, 0} // envelope of 32 bytes
	b = append(b, make([]byte, 32)...)
	mark := byte(0)
	if order == binary.AppendByteOrder(binary.LittleEndian) {
		mark = 1
	}
	if multi {
		b = append(b, mark)
		b = order.AppendUint32(b, 1005)
		b = order.AppendUint32(b, 1)
	}
	b = append(b, mark)
	b = order.AppendUint32(b, 1002)
	b = order.AppendUint32(b, uint32(len(points)))
	for _, p := range points {
		for _, x := range p {
			b = order.AppendUint64(b, math.Float64bits(x))
		}
	}
	return b
}

func TestReadGeoPackage(t *testing.T) {
	data := geoPackage(t, 4326, "SELECT 1", gpBlob(short, binary.LittleEndian, false), gpBlob(short, binary.BigEndian, true), []byte("GP\x00\x00"), gpBlob(short, binary.LittleEndian, false)[:70])
	lines, refused, err := Read(data, "", "", Settings{})
	if err != nil || len(lines) != 2 || len(refused) != 2 {
		t.Fatalf("%v, %d lines, refused %v", err, len(lines), refused)
	}
	for _, l := range lines {
		checkShort(t, "GeoPackage", l)
	}
	if lines[1].Name != "gp 2" || !strings.Contains(refused[1].Reason, "cut short") {
		t.Errorf("%q %v", lines[1].Name, refused)
	}
	// In UTM, named by the package itself.
	var utm [][3]float64
	for _, p := range short {
		e, n := UTM(p[1], p[0], 33, true)
		utm = append(utm, [3]float64{e, n, p[2]})
	}
	lines, _, err = Read(geoPackage(t, 32733, "SELECT 1", gpBlob(utm, binary.LittleEndian, false)), "", "", Settings{})
	if err != nil || len(lines) != 1 || math.Abs(lines[0].Vertices[2].Lat-short[2][1]) > 1e-9 {
		t.Fatalf("UTM: %v %v", err, lines)
	}
	if _, _, err := Read(geoPackage(t, 3857, "SELECT 1", gpBlob(utm, binary.LittleEndian, false)), "", "", Settings{}); err == nil || !strings.Contains(err.Error(), "3857") {
		t.Errorf("unknown system: %v", err)
	}
	// A view that would run for ever is not read.
	endless := `CREATE VIEW endless AS WITH RECURSIVE r(i) AS (SELECT 1 UNION ALL SELECT i + 1 FROM r) SELECT i AS fid, NULL AS geom, 'x' AS Name FROM r`
	data = geoPackage(t, 4326, endless+`; INSERT INTO gpkg_geometry_columns VALUES ('endless', 'geom', 'LINESTRING', 4326, 0, 0)`, gpBlob(short, binary.LittleEndian, false))
	if lines, _, err := Read(data, "", "", Settings{}); err != nil || len(lines) != 1 {
		t.Errorf("endless view: %v, %d lines", err, len(lines))
	}
	for _, cut := range []int{20, 100, 4000} {
		if _, _, err := Read(data[:min(cut, len(data))], "", "", Settings{}); err == nil || !strings.Contains(err.Error(), "GeoPackage") {
			t.Errorf("cut to %d bytes: %v", cut, err)
		}
	}
}

// Files that cannot be read: each a sentence that says what was met.
func TestReadRefusesFiles(t *testing.T) {
	var zipped bytes.Buffer
	z := gzip.NewWriter(&zipped)
	z.Write(make([]byte, MaxBytes+10))
	z.Close()
	bomb := `<?xml version="1.0"?><!DOCTYPE kml [<!ENTITY a "aaaa"><!ENTITY b "&a;&a;&a;&a;">]><kml>&b;</kml>`
	for what, c := range map[string]struct{ text, want string }{
		"empty":            {"  \n ", "empty"},
		"xml bomb":         {bomb, "DOCTYPE"},
		"entity":           {`<kml><Placemark><name>&b;</name></Placemark></kml>`, "entity"},
		"zip":              {"PK\x03\x04rest", "zip archive"},
		"gzip bomb":        {zipped.String(), "unpacked"},
		"broken gzip":      {"\x1f\x8b\x08rest", "damaged"},
		"shapefile":        {"\x00\x00\x27\x0a", "shapefile"},
		"utf-16":           {"\xff\xfe<\x00k\x00", "UTF-16"},
		"binary":           {"\x01\x02\x00\x03", "binary"},
		"web page":         {"<!-- x --><html><body>", "web page"},
		"other xml":        {"<svg></svg>", "<svg>"},
		"xml cut":          {"<kml><Document>", "ends too early"},
		"xml broken":       {"<kml><a b=></kml>", "broken"},
		"kml words":        {kmlOf("<Placemark><LineString><coordinates>a,b c,d</coordinates></LineString></Placemark>"), "holds \"a\""},
		"kml single":       {kmlOf("<Placemark><LineString><coordinates>1 2 3</coordinates></LineString></Placemark>"), "one number"},
		"gpx words":        {`<gpx><trk><trkseg><trkpt lat="x" lon="1"/></trkseg></trk></gpx>`, `lat "x"`},
		"json cut":         {`{"type":"LineString","coordinates":[[1,2],[3`, "broken at its end"},
		"json words":       {`{"type":"LineString","coordinates":[[1,"2"]]}`, "expected a number"},
		"json array":       {`[[1,2],[3,4]]`, "JSON array"},
		"json deep":        {`{"a":` + strings.Repeat("[", 1000) + strings.Repeat("]", 1000) + `}`, "deeper than"},
		"json deep coords": {`{"coordinates":` + strings.Repeat("[", 1000) + strings.Repeat("]", 1000) + `}`, "nested as in"},
		"objects deep":     {strings.Repeat(`{"geometry":`, 1000) + "1" + strings.Repeat("}", 1000), "deeper than"},
		"no line":          {`{"type":"FeatureCollection","features":[]}`, "holds no line"},
		"crs":              {`{"type":"LineString","crs":{"type":"name","properties":{"name":"EPSG:3857"}},"coordinates":[[1,2],[3,4]]}`, "3857"},
		"metres":           {`{"type":"LineString","coordinates":[[500000,4200000],[500100,4200300]]}`, "epsg=plane"},
		"wkt words":        {"LINESTRING (a b, c d)", "expected a number"},
		"wkt cut":          {"LINESTRING (1 2, 3 4", "','"},
		"wkt one number":   {"LINESTRING (1, 2)", "two or three numbers"},
		"csv header":       {"a,b\n1,2\n", "no columns of longitude"},
		"prose":            {"Dear sirs", "no columns of longitude"},
		"kml without xml":  {"", "empty"},
	} {
		lines, refused, err := Read([]byte(c.text), "", "", Settings{})
		var in *InputError
		if !errors.As(err, &in) || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%s: %v %v %v; expected an InputError with %q", what, lines, refused, err, c.want)
		}
	}
	if _, _, err := Read(make([]byte, MaxBytes+1), "", "", Settings{}); err == nil || !strings.Contains(err.Error(), "at most 64 MB") {
		t.Errorf("too large: %v", err)
	}
	many := "lon,lat\n" + strings.Repeat("1,2\n", MaxVertices+1)
	if _, _, err := Read([]byte(many), "", "", Settings{}); err == nil || !strings.Contains(err.Error(), "1000000 vertices") {
		t.Errorf("too many: %v", err)
	}
}

// Bad lines are listed with the reason; the good ones beside them are measured.
func TestReadRefusesLines(t *testing.T) {
	text := "line,lon,lat\ngood,0,0\ngood,1,1\ngood,2,0\nwords,12°30'E,4\nwords,13,5\nhole,1,\nhole,2,3\nnan,NaN,4\nnan,1,2\n" +
		"swapped,10,120\nswapped,11,121\none,5,5\n"
	r, err := MeasureFile([]byte(text), "text/csv", "x.csv", Settings{})
	if err != nil || len(r.Lines) != 1 || r.Lines[0].Name != "good" {
		t.Fatalf("%v %+v", err, r)
	}
	want := map[string]string{"words": "decimal degrees", "hole": "row 7: lat is missing", "nan": "row 9: lon is missing or not a finite", "swapped": "swapped", "one": "1 vertex"}
	if len(r.Refused) != len(want) {
		t.Errorf("refused %v", r.Refused)
	}
	for _, f := range r.Refused {
		if !strings.Contains(f.Reason, want[f.Line]) || want[f.Line] == "" {
			t.Errorf("%s: %q, expected %q", f.Line, f.Reason, want[f.Line])
		}
	}
	r, err = MeasureFile([]byte(`{"type":"FeatureCollection","features":[{"type":"Feature","properties":{"name":"p"},"geometry":{"type":"Point","coordinates":[1,2]}},
		{"type":"Feature","properties":{"name":"empty"},"geometry":null},{"type":"Feature","properties":{},"geometry":{"type":"LineString","coordinates":[]}}]}`), "", "", Settings{})
	if err != nil || len(r.Lines) != 0 || len(r.Refused) != 3 {
		t.Errorf("%v %+v", err, r)
	}
}

// The rivers file as it is: 106 measured, 8 refused as closed.
func TestRiversFile(t *testing.T) {
	data, err := os.ReadFile("testdata/rivers_wdb2.csv.gz")
	if err != nil {
		t.Fatal(err)
	}
	r, err := MeasureFile(data, "", "rivers_wdb2.csv.gz", Settings{})
	if err != nil || len(r.Lines) != 106 || len(r.Refused) != 8 {
		t.Fatalf("%v: %d measured, %d refused", err, len(r.Lines), len(r.Refused))
	}
	for _, f := range r.Refused {
		if !strings.Contains(f.Reason, "closed") {
			t.Errorf("%v", f)
		}
	}
}

// The third coordinate: guessed, said, and changed by the setting.
func TestThirdCoordinate(t *testing.T) {
	csv := func(header string) string { return "lon,lat," + header + "\n0,0,1000\n0.1,0.02,1010\n0.2,0,1030\n" }
	for _, c := range []struct {
		text, z string
		kind    string
		depth   float64 // of the first vertex
		note    string
	}{
		{csv("depth"), "", "depth", 1000, "read as depth"},
		{csv("elevation"), "", "elevation", -1000, "above sea level"},
		{csv("elevation"), "depth", "depth", 1000, ""},
		{csv("twt_ms"), "", "time", math.NaN(), "two-way time"},
		{csv("depth"), "time", "time", math.NaN(), ""},
		{csv("depth_km"), "", "depth", 1e6, "turned from km"},
		{"lon,lat,z\n0,0,0\n1,1,0\n", "", "", math.NaN(), "0 everywhere"},
		{`{"type":"LineString","coordinates":[[0,0,-5],[1,1,-6]]}`, "", "elevation", 5, "read as elevation"},
		{`{"type":"LineString","coordinates":[[0,0,null],[1,1,-6]]}`, "", "elevation", math.NaN(), "read as elevation"},
	} {
		lines, _, err := Read([]byte(c.text), "", "", Settings{Z: c.z})
		if err != nil || len(lines) != 1 {
			t.Errorf("%q: %v", c.text, err)
			continue
		}
		l := lines[0]
		if d := l.Vertices[0].Depth; l.Z != c.kind || d != c.depth && !(math.IsNaN(d) && math.IsNaN(c.depth)) || l.HasTime != (c.kind == "time") {
			t.Errorf("%q z=%q: %s, depth %v; expected %s, %v", c.text, c.z, l.Z, d, c.kind, c.depth)
		}
		if !strings.Contains(strings.Join(l.Notes, " "), c.note) {
			t.Errorf("%q z=%q: notes %v do not say %q", c.text, c.z, l.Notes, c.note)
		}
	}
}

// UTM metres, plane metres, and the sequence and width columns.
func TestReadColumns(t *testing.T) {
	text := "Easting;Northing;width_m;seq\n500000;4200000;250;2\n500900;4200400;350;3\n499000;4199900;300;1\n"
	lines, _, err := Read([]byte(text), "", "", Settings{EPSG: "32631"})
	if err != nil {
		t.Fatal(err)
	}
	l := lines[0]
	if l.Plane || math.Abs(l.Vertices[1].Lon-3) > 1e-12 || l.Vertices[0].Width != 300 || !strings.Contains(strings.Join(l.Notes, " "), "sequence") {
		t.Errorf("%+v", l)
	}
	lines, _, err = Read([]byte(text), "", "", Settings{EPSG: "plane"})
	if err != nil || !lines[0].Plane || lines[0].Vertices[1].Lon != 500000 {
		t.Errorf("plane: %v %+v", err, lines)
	}
	m := mustMeasure(t, lines[0], Settings{})
	if m.Settings.WidthM != 300 || m.Place != nil || m.Settings.WindowWidths != DefaultWindowWidths {
		t.Errorf("%+v", m.Settings)
	}
	if _, refused, err := Read([]byte("lon,lat\n1,2\n2,3\n"), "", "", Settings{EPSG: "32631"}); err == nil || !strings.Contains(err.Error(), "look like degrees") {
		t.Errorf("degrees called UTM: %v %v", refused, err)
	}
}

// One file cannot ask for more than its share: too many lines, or a spacing
// that would take too many points for all of them.
func TestFileLimits(t *testing.T) {
	if _, _, err := Read([]byte(strings.Repeat("LINESTRING(0 0,1 1);", MaxLines+1)), "", "", Settings{}); err == nil || !strings.Contains(err.Error(), "at most 20000") {
		t.Errorf("many lines: %v", err)
	}
	r, err := MeasureFile([]byte(strings.Repeat("LINESTRING(0 0,1000000 0);", 5)), "", "", Settings{EPSG: "plane", SpacingM: 0.6})
	if err != nil || len(r.Lines) != 3 || len(r.Refused) != 2 || !strings.Contains(r.Refused[0].Reason, "larger one") {
		t.Errorf("many points: %v, %d measured, refused %v", err, len(r.Lines), r.Refused)
	}
}
