package planform

import (
	"context"
	"database/sql"
	"encoding/binary"
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"time"

	_ "modernc.org/sqlite" // GeoPackage is SQLite
)

// A GeoPackage comes from a stranger: it is opened read-only from a copy, only
// real tables are read (a view could hold a query that never ends), and all of
// it within geoPackageTime.
const (
	geoPackageTime = 30 * time.Second
	maxFeatures    = 100_000
)

// geoPackage reads the lines of every feature table (OGC 12-128r18).
func (c *collector) geoPackage(data []byte) error {
	dir, err := os.MkdirTemp("", "geopackage")
	if err != nil {
		return err
	}
	defer os.RemoveAll(dir)
	path := filepath.Join(dir, "lines.gpkg")
	if err := os.WriteFile(path, data, 0o600); err != nil {
		return err
	}
	db, err := sql.Open("sqlite", "file:"+path+"?mode=ro&immutable=1&_pragma=query_only(1)&_pragma=trusted_schema(0)&_pragma=cell_size_check(1)")
	if err != nil {
		return errGeoPackage
	}
	defer db.Close()
	ctx, cancel := context.WithTimeout(context.Background(), geoPackageTime)
	defer cancel()
	tables, err := lineTables(ctx, db)
	if err != nil {
		return errGeoPackage
	}
	for _, t := range tables {
		if err := c.features(ctx, db, t, len(tables) > 1); err != nil {
			var in *InputError
			if errors.As(err, &in) {
				return in
			}
			if ctx.Err() != nil {
				return &InputError{"body", "the GeoPackage takes too long to read; export its lines as GeoJSON"}
			}
			return errGeoPackage
		}
	}
	return nil
}

var errGeoPackage = &InputError{"body", "the file is SQLite but no readable GeoPackage; export the line again, or as GeoJSON"}

type lineTable struct {
	table, column, name string
	srs                 int
}

// lineTables are the feature tables of the package that are tables.
func lineTables(ctx context.Context, db *sql.DB) ([]lineTable, error) {
	rows, err := db.QueryContext(ctx, `SELECT g.table_name, g.column_name, g.srs_id FROM gpkg_geometry_columns g
		JOIN sqlite_master m ON m.name = g.table_name AND m.type = 'table' AND m.sql NOT LIKE 'CREATE VIRTUAL%' ORDER BY g.table_name LIMIT 1000`)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	var out []lineTable
	for rows.Next() {
		var t lineTable
		if err := rows.Scan(&t.table, &t.column, &t.srs); err != nil {
			return nil, err
		}
		out = append(out, t)
	}
	if err := rows.Err(); err != nil {
		return nil, err
	}
	for i := range out {
		if out[i].name, err = nameColumn(ctx, db, out[i].table); err != nil {
			return nil, err
		}
	}
	return out, nil
}

func nameColumn(ctx context.Context, db *sql.DB, table string) (string, error) {
	rows, err := db.QueryContext(ctx, "SELECT name FROM pragma_table_info(?)", table)
	if err != nil {
		return "", err
	}
	defer rows.Close()
	var names []string
	for rows.Next() {
		var n string
		if err := rows.Scan(&n); err != nil {
			return "", err
		}
		names = append(names, n)
	}
	for _, want := range []string{"name", "title", "line", "reach", "channel"} {
		for _, n := range names {
			if strings.EqualFold(n, want) {
				return n, rows.Err()
			}
		}
	}
	return "", rows.Err()
}

func quoteName(s string) string { return `"` + strings.ReplaceAll(s, `"`, `""`) + `"` }

// features reads the lines of one table.
func (c *collector) features(ctx context.Context, db *sql.DB, t lineTable, several bool) error {
	code, err := srsCode(t.srs)
	if err != nil && c.s.EPSG == "" {
		return err
	}
	if c.fromFile != "" && code != c.fromFile && c.s.EPSG == "" {
		return &InputError{"epsg", "the layers of the GeoPackage have different coordinate systems; give one layer, or say with epsg what all of them are"}
	}
	c.fromFile = code
	name := "NULL"
	if t.name != "" {
		name = "CAST(" + quoteName(t.name) + " AS TEXT)"
	}
	rows, err := db.QueryContext(ctx, "SELECT rowid, "+name+", "+quoteName(t.column)+" FROM "+quoteName(t.table)+fmt.Sprintf(" LIMIT %d", maxFeatures))
	if err != nil {
		return err
	}
	defer rows.Close()
	for rows.Next() {
		var id int64
		var label sql.NullString
		var blob []byte
		if err := rows.Scan(&id, &label, &blob); err != nil {
			return err
		}
		if !label.Valid || label.String == "" {
			label.String = fmt.Sprintf("feature %d", id)
			if several {
				label.String = fmt.Sprintf("%s %d", t.table, id)
			}
		}
		if blob == nil {
			c.refuse(label.String, "it has no geometry")
			continue
		}
		if err := c.geometryBlob(label.String, blob); err != nil {
			return err
		}
	}
	return rows.Err()
}

// srsCode turns the reference system of a layer into a setting of epsg. 0 and
// -1 are the undefined geographic and plane systems of GeoPackage.
func srsCode(srs int) (string, error) {
	switch srs {
	case 0:
		return "4326", nil
	case -1:
		return "plane", nil
	}
	code := fmt.Sprint(srs)
	if _, err := parseEPSG(code); err != nil {
		return code, &InputError{"epsg", fmt.Sprintf("a layer of the GeoPackage is in coordinate system %d, which is not known here; give epsg to say what it is, or export it in degrees (4326)", srs)}
	}
	return code, nil
}

// geometryBlob reads a GeoPackage geometry: a header with an optional envelope,
// then well-known binary.
func (c *collector) geometryBlob(name string, b []byte) error {
	if len(b) < 8 || b[0] != 'G' || b[1] != 'P' {
		c.refuse(name, "its geometry is not that of a GeoPackage")
		return nil
	}
	flags := b[3]
	envelope := []int{0, 32, 48, 48, 64, 0, 0, 0}[flags>>1&7]
	if flags&0x10 != 0 {
		c.refuse(name, "its geometry is empty")
		return nil
	}
	if len(b) < 8+envelope {
		c.refuse(name, "its geometry is cut short")
		return nil
	}
	w := &wkbReader{b: b[8+envelope:], name: name}
	err := w.geometry(c, 0)
	if errors.Is(err, errCut) {
		c.refuse(name, "its geometry is cut short")
		return nil
	}
	return err
}

var errCut = errors.New("well-known binary is cut short")

// wkbReader walks well-known binary, ISO (type + 1000 for Z, 2000 for M) or with
// the flags some databases set.
type wkbReader struct {
	b    []byte
	i    int
	name string
}

func (w *wkbReader) geometry(c *collector, depth int) error {
	if depth > 8 || len(w.b)-w.i < 5 {
		return errCut
	}
	var order binary.ByteOrder = binary.BigEndian
	if w.b[w.i] == 1 {
		order = binary.LittleEndian
	}
	kind := order.Uint32(w.b[w.i+1:])
	w.i += 5
	hasZ, hasM := kind&0x80000000 != 0, kind&0x40000000 != 0
	if kind&0x20000000 != 0 {
		w.i += 4
	}
	kind &= 0x0fffffff
	hasZ = hasZ || kind/1000 == 1 || kind/1000 == 3
	hasM = hasM || kind/1000 == 2 || kind/1000 == 3
	switch kind % 1000 {
	case 2:
		return w.line(c, order, hasZ, hasM)
	case 5, 7:
		n, err := w.count(order, 5)
		if err != nil {
			return err
		}
		for range n {
			if err := w.geometry(c, depth+1); err != nil {
				return err
			}
		}
		return nil
	}
	names := map[uint32]string{1: "Point", 3: "Polygon", 4: "MultiPoint", 6: "MultiPolygon"}
	if depth > 0 { // a member that is no line has a length not known here
		c.refuse(w.name, "it mixes lines with other geometries; give it as lines only")
		return errMixed
	}
	c.skipped[orElse(names[kind%1000], "curve")]++
	return nil
}

var errMixed = &InputError{"body", "a geometry of the GeoPackage mixes lines with other kinds; export the lines by themselves"}

// count reads the number of members, which must fit into what is left.
func (w *wkbReader) count(order binary.ByteOrder, size int) (int, error) {
	if w.i < 0 || len(w.b)-w.i < 4 {
		return 0, errCut
	}
	n := int64(order.Uint32(w.b[w.i:]))
	w.i += 4
	if n*int64(size) > int64(len(w.b)-w.i) {
		return 0, errCut
	}
	return int(n), nil
}

func (w *wkbReader) line(c *collector, order binary.ByteOrder, hasZ, hasM bool) error {
	size := 16
	if hasZ {
		size += 8
	}
	if hasM {
		size += 8
	}
	n, err := w.count(order, size)
	if err != nil {
		return err
	}
	if err := c.grow(n); err != nil {
		return err
	}
	at := func(k int) float64 { return math.Float64frombits(order.Uint64(w.b[w.i+8*k:])) }
	v := make([]Vertex, n)
	for i := range v {
		v[i] = Vertex{at(0), at(1), math.NaN(), math.NaN()}
		if hasZ {
			v[i].Depth = at(2)
		}
		w.i += size
	}
	if n == 0 {
		c.refuse(w.name, "it has no vertices")
		return nil
	}
	c.add(Line{Name: w.name, Role: roleOf(w.name), Vertices: slices.Clip(v)})
	return nil
}
