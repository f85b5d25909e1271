package catalogue

import (
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"net/url"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

func freeze(t testing.TB, s *Store, name string) *Release {
	t.Helper()
	r, err := s.Freeze(ctx, NewRelease{Name: name, Notes: "Notes of " + name, Program: "test"})
	if err != nil {
		t.Fatal(err)
	}
	return r
}

func csvOf(t testing.TB, s *Store, f Filter) string {
	t.Helper()
	var b bytes.Buffer
	if _, err := s.Export(ctx, &b, f); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

// everything is what the store answers to one filter.
type everything struct {
	CSV        string
	Systems    []System
	Total      int
	Page       []Row
	PageTotal  int
	Facets     []Facet
	Dimensions []Dimension
}

func askAll(t testing.TB, s *Store, f Filter) (e everything) {
	t.Helper()
	var err error
	e.CSV = csvOf(t, s, f)
	if e.Systems, e.Total, err = s.Systems(ctx, f); err != nil {
		t.Fatal(err)
	}
	if e.Page, e.PageTotal, err = s.RowsPage(ctx, f); err != nil {
		t.Fatal(err)
	}
	if e.Facets, err = s.Facets(ctx, f); err != nil {
		t.Fatal(err)
	}
	if e.Dimensions, err = s.DimensionQuantiles(ctx, f); err != nil {
		t.Fatal(err)
	}
	return e
}

var releaseQueries = []string{
	"", "q=invented+00007", "q=upper", "q=nothing-of-that-name", "kind=submarine&setting=fan&setting=slope", "feeder=river", "grade=surveyed",
	"parent_deposit=Deposit+0003", "source=Invented+Survey+Reports+1%3A1+%282020%29", "lat_min=-20&lat_max=30", "abs_lat_min=40", "slope_max=0.003",
	"sinuosity_min=1.5&sort=-sinuosity", "width_min=120", "age_max=1", "bbox=170,-80,-170,80", "bbox=-180,-90,0,0", "bbox=10,-30,60,30", "sort=grade", "sort=-system_name&per_page=7&page=3",
}

// A release answers every question as the catalogue did on that day, whatever
// became of the catalogue afterwards.
func TestReleaseAnswersAsOnItsDay(t *testing.T) {
	s := open(t)
	insert(t, s, many(40)...)
	line := Centreline{System: "invented-00003", Line: `{"type":"LineString","coordinates":[[10,1,-2000],[10.1,1.2,-2100],[10.3,1.1,-2200]]}`, Sinuosities: []float64{1.1, 1.4}}
	rows, err := s.Rows(ctx, Filter{})
	if err != nil {
		t.Fatal(err)
	}
	own := line
	own.System, own.Measurement = "", rows[10].Measurement
	for _, l := range []Centreline{line, own} {
		if _, err := s.AddCentreline(ctx, l, 0, "test"); err != nil {
			t.Fatal(err)
		}
	}
	before := map[string]everything{}
	filters := map[string]Filter{}
	for _, q := range releaseQueries {
		v, _ := url.ParseQuery(q)
		f, err := ParseFilter(v)
		if err != nil {
			t.Fatal(q, err)
		}
		filters[q], before[q] = f, askAll(t, s, f)
	}
	detail, err := s.System(ctx, "invented-00003")
	if err != nil {
		t.Fatal(err)
	}
	r := freeze(t, s, "2025.1")
	sum := sha256.Sum256([]byte(before[""].CSV))
	if r.Checksum != hex.EncodeToString(sum[:]) || r.Bytes != int64(len(before[""].CSV)) {
		t.Errorf("checksum %s of %d bytes is not that of the CSV (%d bytes)", r.Checksum, r.Bytes, len(before[""].CSV))
	}
	if r.Systems != 40 || r.Measurements != 80 || r.Sources != 1 || r.Centrelines != 2 || r.Licence != "CC-BY-4.0" {
		t.Errorf("counts: %+v", r)
	}

	// Change every row and every system, and add more.
	for i := range rows {
		rows[i].Sinuosity = Num(rows[i].Sinuosity.V + 0.5)
		rows[i].SystemName, rows[i].ParentDeposit = "Renamed "+rows[i].SystemName, "Other deposit"
		rows[i].Source, rows[i].LatitudeDeg, rows[i].Grade = "Another source", Num(3), "quoted"
	}
	insert(t, s, rows...)
	insert(t, s, row("Later", 12, 13, 2))
	if _, err := s.AddCentreline(ctx, line, 0, "another"); err != nil {
		t.Fatal(err)
	}
	for _, q := range releaseQueries {
		f := filters[q]
		f.Release = "2025.1"
		if diff := cmp.Diff(before[q], askAll(t, s, f)); diff != "" {
			t.Errorf("%q changed (-before +release):\n%.1500s", q, diff)
		}
		f.Release = ""
		if now := askAll(t, s, f); q != "q=nothing-of-that-name" && cmp.Equal(before[q], now) {
			t.Errorf("%q: the catalogue did not change; the test shows nothing", q)
		}
	}
	then, err := s.SystemAt(ctx, "invented-00003", "2025.1")
	if err != nil {
		t.Fatal(err)
	}
	if diff := cmp.Diff(detail, then, cmp.AllowUnexported(Row{})); diff != "" {
		t.Errorf("the system changed:\n%s", diff)
	}
	if _, err := s.SystemAt(ctx, "later", "2025.1"); CodeOf(err) != NotFound || !strings.Contains(err.Error(), "2025.1") {
		t.Errorf("a later system: %v", err)
	}
	if ok, err := s.VerifyRelease(ctx, "2025.1"); !ok || err != nil {
		t.Error(ok, err)
	}
}

// A record that did not change is kept once, however many releases hold it.
func TestReleasesShareWhatDidNotChange(t *testing.T) {
	s := open(t)
	rows := insert(t, s, many(10)...)
	freeze(t, s, "a")
	rows[4].Sinuosity = Num(2.9)
	insert(t, s, rows[4])
	freeze(t, s, "b")
	freeze(t, s, "c")
	count := func(q string) (n int) {
		if err := s.r.QueryRowContext(ctx, q).Scan(&n); err != nil {
			t.Fatal(err)
		}
		return n
	}
	for q, want := range map[string]int{
		`SELECT count(*) FROM frozen_measurements`: 21, `SELECT count(*) FROM frozen_systems`: 10, `SELECT count(*) FROM frozen_sources`: 1,
		`SELECT count(*) FROM release_measurements`: 60, `SELECT count(*) FROM frozen_search WHERE frozen_search MATCH 'invented'`: 21,
	} {
		if got := count(q); got != want {
			t.Errorf("%s: %d, want %d", q, got, want)
		}
	}
	list, err := s.Releases(ctx)
	if err != nil || len(list) != 3 || list[0].Name != "c" || list[0].Checksum != list[1].Checksum || list[1].Checksum == list[2].Checksum {
		t.Errorf("%v %+v", err, list)
	}
}

// The schema itself keeps a release as it is.
func TestReleaseIsImmutable(t *testing.T) {
	s := open(t)
	rows := insert(t, s, many(3)...)
	if _, err := s.AddCentreline(ctx, Centreline{Measurement: rows[0].Measurement, Line: `{"type":"LineString","coordinates":[[10,1],[10.1,1.2]]}`}, 0, ""); err != nil {
		t.Fatal(err)
	}
	freeze(t, s, "a")
	if err := s.SetReleaseDOI(ctx, "a", "10.5555/one", 0); err != nil {
		t.Fatal(err)
	}
	for _, table := range []string{"releases", "release_dois", "release_sources", "release_systems", "release_measurements", "release_centrelines", "frozen_sources", "frozen_systems", "frozen_measurements", "frozen_centrelines", "catalogue_identity"} {
		var n int
		if err := s.r.QueryRowContext(ctx, "SELECT count(*) FROM "+table).Scan(&n); err != nil || n == 0 {
			t.Fatal(table, n, err)
		}
		column := map[string]string{"releases": "notes", "release_dois": "doi", "frozen_sources": "citation", "frozen_systems": "basin", "frozen_measurements": "notes", "frozen_centrelines": "line", "catalogue_identity": "uuid"}[table]
		if column == "" {
			column = "version"
		}
		for _, q := range []string{"UPDATE " + table + " SET " + column + " = " + column, "DELETE FROM " + table} {
			if _, err := s.w.ExecContext(ctx, q); err == nil {
				t.Errorf("%s went through", q)
			}
		}
	}
	for _, q := range []string{
		`INSERT INTO release_measurements SELECT release_id, 999, version, system_id FROM release_measurements LIMIT 1`,
		`INSERT INTO release_systems SELECT release_id, 999, version FROM release_systems LIMIT 1`,
		`INSERT INTO release_sources SELECT release_id, 999, version FROM release_sources LIMIT 1`,
		`INSERT INTO release_centrelines SELECT release_id, 999, version, system_id, NULL FROM release_centrelines LIMIT 1`,
		`INSERT INTO release_systems SELECT 77, id, version FROM release_systems`, // no such release
	} {
		if _, err := s.w.ExecContext(ctx, q); err == nil {
			t.Errorf("%s went through", q)
		}
	}
	if faults, err := s.Integrity(ctx); err != nil || len(faults) > 0 {
		t.Error(faults, err)
	}
}

func TestReleaseRefuses(t *testing.T) {
	s := open(t)
	if _, err := s.Freeze(ctx, NewRelease{Name: "empty"}); CodeOf(err) != Invalid || !strings.Contains(err.Error(), "nothing to release") {
		t.Errorf("an empty catalogue: %v", err)
	}
	r := row("One", 1, 2, 1.2)
	r.Licence = "CC BY 4.0"
	cc0 := row("Two", 1, 2, 1.2)
	cc0.Licence = "CC0"
	insert(t, s, r, cc0)
	for _, c := range []struct {
		n     NewRelease
		code  Code
		field string
	}{
		{NewRelease{Name: ""}, Invalid, "name"},
		{NewRelease{Name: "a b"}, Invalid, "name"},
		{NewRelease{Name: "../x"}, Invalid, "name"},
		{NewRelease{Name: ".hidden"}, Invalid, "name"},
		{NewRelease{Name: "Present"}, Invalid, "name"},
		{NewRelease{Name: "2025.zip"}, Invalid, "name"},
		{NewRelease{Name: strings.Repeat("x", 65)}, Invalid, "name"},
		{NewRelease{Name: "x", Title: strings.Repeat("x", 201)}, Invalid, "title"},
		{NewRelease{Name: "x", Notes: strings.Repeat("x", 20001)}, Invalid, "notes"},
		{NewRelease{Name: "x", Notes: "\xff"}, Invalid, "notes"},
		{NewRelease{Name: "x", DOI: "11.1/2"}, Invalid, "doi"},
		{NewRelease{Name: "x", DOI: "10.12"}, Invalid, "doi"},
		{NewRelease{Name: "x", Licence: "MIT"}, Invalid, "licence"},
		{NewRelease{Name: "x", Licence: "CC0-1.0"}, Invalid, "licence"}, // one row is CC BY
	} {
		_, err := s.Freeze(ctx, c.n)
		e, _ := err.(*Error)
		if e == nil || e.Code != c.code || e.Field != c.field {
			t.Errorf("%+.60v: %v", c.n, err)
		}
	}
	if list, err := s.Releases(ctx); err != nil || len(list) != 0 {
		t.Fatal(list, err)
	}
	if _, _, err := s.Systems(ctx, Filter{Release: "x"}); CodeOf(err) != Invalid || !strings.Contains(err.Error(), "no release has been made yet") {
		t.Error(err)
	}
	got, err := s.Freeze(ctx, NewRelease{Name: "V1", DOI: "https://doi.org/10.5555/x.1", Title: "A title"})
	if err != nil || got.DOI != "10.5555/x.1" || got.Title != "A title" {
		t.Fatal(got, err)
	}
	if _, err := s.Freeze(ctx, NewRelease{Name: "v1"}); CodeOf(err) != Conflict {
		t.Errorf("the same name: %v", err)
	}
	if err := s.SetReleaseDOI(ctx, "V1", "10.5555/x.2", 0); CodeOf(err) != Conflict {
		t.Errorf("a second DOI: %v", err)
	}
	for _, f := range []func(Filter) error{
		func(f Filter) error { _, err := s.Rows(ctx, f); return err },
		func(f Filter) error { _, _, err := s.RowsPage(ctx, f); return err },
		func(f Filter) error { _, _, err := s.Systems(ctx, f); return err },
		func(f Filter) error { _, err := s.Facets(ctx, f); return err },
		func(f Filter) error { _, err := s.DimensionQuantiles(ctx, f); return err },
		func(f Filter) error { _, err := s.SystemAt(ctx, "one", f.Release); return err },
	} {
		e, _ := f(Filter{Release: "none"}).(*Error)
		if e == nil || e.Code != Invalid || e.Field != "release" || !strings.Contains(e.Expected, "V1") {
			t.Errorf("an unknown release: %v", e)
		}
		if err := f(Filter{Release: "v1"}); err != nil { // letters of either case, as names are
			t.Error(err)
		}
	}
}

func TestReleaseAuthors(t *testing.T) {
	s := open(t)
	if _, err := s.AddAccount(ctx, "ann", "A. Author", "contributor", "a long password"); err != nil {
		t.Fatal(err)
	}
	if _, err := s.w.ExecContext(ctx, `UPDATE accounts SET orcid = '0000-0002-1825-0097'`); err != nil {
		t.Fatal(err)
	}
	var rows []Row
	for i, who := range []string{"A. Author", "A. Author", "B. Author", "", "C. Author", "C. Author"} {
		r := row("S"+string(rune('A'+i)), 1, 2, 1.2)
		r.Contributor, r.Licence = who, "CC0"
		rows = append(rows, r)
	}
	insert(t, s, rows...)
	r := freeze(t, s, "a")
	want := []Author{{"A. Author", "0000-0002-1825-0097", 2}, {"C. Author", "", 2}, {"B. Author", "", 1}}
	if diff := cmp.Diff(want, r.Authors); diff != "" {
		t.Error(diff)
	}
	if r.Licence != "CC0-1.0" {
		t.Errorf("licence %s", r.Licence)
	}
}

// Everything a record holds is frozen: a new column of the catalogue needs one
// in the frozen tables.
func TestFrozenTablesHoldAllColumns(t *testing.T) {
	s := open(t)
	for _, table := range []string{"systems", "measurements", "sources", "centrelines"} {
		frozen := map[string]bool{"system_id": true, "measurement_id": true} // in the list of members
		for _, c := range tableColumns(t, s, "frozen_"+table) {
			frozen[c] = true
		}
		for _, c := range tableColumns(t, s, table) {
			if !frozen[c] {
				t.Errorf("frozen_%s has no column %s", table, c)
			}
		}
	}
}

func tableColumns(t *testing.T, s *Store, table string) (out []string) {
	rows, err := s.r.QueryContext(ctx, `SELECT name FROM pragma_table_xinfo(?)`, table)
	if err != nil {
		t.Fatal(err)
	}
	defer rows.Close()
	for rows.Next() {
		var c string
		if err := rows.Scan(&c); err != nil {
			t.Fatal(err)
		}
		out = append(out, c)
	}
	return out
}

func TestReleaseDOI(t *testing.T) {
	for in, want := range map[string]string{
		"": "", "10.5281/zenodo.1234567": "10.5281/zenodo.1234567", " https://doi.org/10.1130/G32295.1 ": "10.1130/G32295.1", "DOI: 10.1000/x(y)z": "10.1000/x(y)z",
		"10.1/x": "!", "10.5281/": "!", "zenodo": "!", "10.5281/a b": "!", `10.5281/a"b`: "!", "10.5281/<x>": "!",
	} {
		got, err := releaseDOI(in)
		if err != nil {
			got = "!"
		}
		if got != want {
			t.Errorf("%q: %q, want %q", in, got, want)
		}
	}
}
