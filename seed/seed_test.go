package seed

import (
	"context"
	"encoding/json"
	"math"
	"path/filepath"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/google/go-cmp/cmp/cmpopts"

	"fathombend/catalogue"
	"fathombend/catalogue/land"
	"fathombend/catalogue/planform"
)

func generate(t testing.TB, law Law) Survey {
	t.Helper()
	s, err := Generate(law)
	if err != nil {
		t.Fatal(err)
	}
	if len(s.Expected) != len(s.Rows) {
		t.Fatalf("%d expectations for %d rows", len(s.Expected), len(s.Rows))
	}
	return s
}

func TestEqualLawsGiveEqualSurveys(t *testing.T) {
	for _, law := range Laws {
		if d := cmp.Diff(generate(t, law), generate(t, law), cmpopts.EquateNaNs()); d != "" {
			t.Errorf("%s: two surveys differ:\n%s", law, d)
		}
	}
}

// The laws change sinuosity and what follows from it; places, supply, method
// and gaps stay, so that switching the law answers one question only.
func TestLawsShareTheirPlaces(t *testing.T) {
	a, b := generate(t, Coriolis), generate(t, None)
	if len(a.Rows) != len(b.Rows) {
		t.Fatalf("%d and %d rows", len(a.Rows), len(b.Rows))
	}
	for i := range a.Rows {
		x, y := a.Rows[i], b.Rows[i]
		if x.SystemName != y.SystemName || x.Feeder != y.Feeder || x.Grain != y.Grain || x.SinuosityKind != y.SinuosityKind || x.Source != y.Source {
			t.Errorf("row %d: %s by %s and %s by %s", i, x.SystemName, x.Source, y.SystemName, y.Source)
		}
		if math.Abs(x.LatitudeDeg.V-y.LatitudeDeg.V) > 0.25 {
			t.Errorf("row %d, %s: latitude %g and %g", i, x.SystemName, x.LatitudeDeg.V, y.LatitudeDeg.V)
		}
	}
}

func TestUnknownLawIsRefused(t *testing.T) {
	_, err := Generate("gravity")
	if catalogue.CodeOf(err) != catalogue.Invalid || !strings.Contains(err.Error(), "supply") {
		t.Errorf("error %v, want one that lists the laws", err)
	}
}

func TestContents(t *testing.T) {
	s := generate(t, Both)
	kinds, rowsOf := map[string]map[string]bool{}, map[string]int{}
	parents, ancient, bands := map[string]bool{}, map[string]bool{}, map[int]bool{}
	ids := map[string]bool{}
	given := map[string]int{} // rows with a value, of the submarine ones
	submarine := 0
	for _, r := range s.Rows {
		if kinds[r.Kind] == nil {
			kinds[r.Kind] = map[string]bool{}
		}
		kinds[r.Kind][r.System] = true
		rowsOf[r.SystemName]++
		if ids[r.Measurement] {
			t.Errorf("measurement %s twice", r.Measurement)
		}
		ids[r.Measurement] = true
		if !strings.HasPrefix(r.Notes, catalogue.InventedMark) || !r.Invented {
			t.Errorf("%s: notes %q do not start with the invented mark", r.SystemName, r.Notes)
		}
		if r.SourceDOI != "" && !strings.HasPrefix(r.SourceDOI, "10.5555/") {
			t.Errorf("%s: DOI %q is not of the test prefix", r.SystemName, r.SourceDOI)
		}
		if r.Contributor == "" || r.Licence != "CC0" {
			t.Errorf("%s: contributor %q, licence %q", r.SystemName, r.Contributor, r.Licence)
		}
		if r.Kind != "submarine" {
			continue
		}
		submarine++
		for name, n := range map[string]catalogue.Number{"slope": r.ValleySlope, "width": r.ChannelWidthM, "depth": r.ChannelDepthM, "radius": r.RadiusM, "levee": r.LeveeLeftM, "se": r.SinuositySE} {
			if n.Valid {
				given[name]++
			}
		}
		if r.ParentDeposit == "" {
			parents["alone: "+r.System] = true
		} else {
			parents[r.ParentDeposit] = true
		}
		bands[int(math.Floor(r.LatitudeDeg.V/15))] = true
		if r.AgeMa.Valid && r.PalaeolatitudeDeg.Valid && r.PalaeolatitudeSEDeg.V > 0 && r.PalaeolatitudeMethod != "" && r.Unit != "" && r.Burial == "buried" {
			ancient[r.System] = true
		}
	}
	for _, c := range []struct {
		what      string
		got, want int
	}{
		{"submarine systems", len(kinds["submarine"]), 70},
		{"rivers", len(kinds["river"]), 12},
		{"parent deposits", len(parents), 30},
		{"ancient systems with age and palaeolatitude", len(ancient), 10},
		{"rows of the well measured system", rowsOf["Orquathe Main Channel"], 32},
	} {
		if c.got != c.want {
			t.Errorf("%d %s, want %d", c.got, c.what, c.want)
		}
	}
	// From 75 S to 90 N there are eleven bands of 15 degrees; the demo leaves
	// out 75-60 S at most twice.
	if len(bands) < 9 {
		t.Errorf("systems in %d bands of 15 degrees of latitude, want at least 9", len(bands))
	}
	for name, n := range given {
		if share := float64(n) / float64(submarine); share == 1 || share < 0.05 {
			t.Errorf("%s is given in %.0f %% of the rows: real data have gaps, and values", name, 100*share)
		}
	}
}

// Every submarine place and line lies in water and every river on land, by the
// outline the catalogue's own check uses.
func TestPlaces(t *testing.T) {
	for _, law := range Laws {
		s := generate(t, law)
		river := map[string]bool{}
		for _, r := range s.Rows {
			river[r.System] = r.Kind == "river"
			if land.Contains(r.LatitudeDeg.V, r.LongitudeDeg.V) != river[r.System] {
				t.Errorf("%s: %s at %g, %g", law, r.SystemName, r.LatitudeDeg.V, r.LongitudeDeg.V)
			}
		}
		for _, c := range s.Centrelines {
			for _, v := range vertices(t, c) {
				if land.Contains(v.Lat, v.Lon) != river[c.System] {
					t.Errorf("%s: the line of %s passes %g, %g", law, c.System, v.Lat, v.Lon)
					break
				}
				if (v.Depth > 0) == river[c.System] {
					t.Errorf("%s: the line of %s lies %g m deep", law, c.System, v.Depth)
					break
				}
			}
		}
	}
}

func vertices(t testing.TB, c catalogue.Centreline) []planform.Vertex {
	t.Helper()
	var g struct{ Coordinates [][3]float64 }
	if err := json.Unmarshal([]byte(c.Line), &g); err != nil {
		t.Fatal(err)
	}
	out := make([]planform.Vertex, len(g.Coordinates))
	for i, p := range g.Coordinates {
		out[i] = planform.Vertex{Lon: p[0], Lat: p[1], Depth: -p[2], Width: math.NaN()}
	}
	return out
}

// Measured by the program itself, each line gives back its record: sinuosity
// of the recorded kind within 3 % (smoothing and rounding of the record), and
// the valley slope within the 4 % (one sigma) that records scatter by.
func TestLinesGiveBackTheirRecords(t *testing.T) {
	s, err := Draw(Options{Law: Both, Seed: DefaultSeed, Centrelines: true, Clean: true})
	if err != nil {
		t.Fatal(err)
	}
	rows := map[string]catalogue.Row{}
	systems := map[string]bool{}
	for _, r := range s.Rows {
		rows[r.Measurement], systems[r.System] = r, true
	}
	for _, c := range s.Centrelines {
		r, ok := rows[c.Measurement]
		if !ok || r.System != c.System {
			t.Fatalf("a line of %q of %q", c.Measurement, c.System)
		}
		delete(systems, c.System)
		var set planform.Settings
		if err := json.Unmarshal([]byte(c.Settings), &set); err != nil {
			t.Fatal(err)
		}
		m, err := planform.Measure(planform.Line{Vertices: vertices(t, c)}, set)
		if err != nil {
			t.Errorf("%s: %v", c.System, err)
			continue
		}
		got := map[string]float64{"reach": m.ReachSinuosity, "mean": m.MeanSinuosity, "p90": m.P90Sinuosity, "peak": m.PeakSinuosity}[r.SinuosityKind]
		if math.Abs(got/r.Sinuosity.V-1) > 0.03 {
			t.Errorf("%s %s: the line's %s is %.3f, the record's %.3f", r.SystemName, r.Reach, r.SinuosityKind, got, r.Sinuosity.V)
		}
		if m.ValleySlope == nil {
			t.Errorf("%s: the line has no slope", r.SystemName)
		} else if r.ValleySlope.Valid && math.Abs(*m.ValleySlope/r.ValleySlope.V-1) > 0.16 {
			t.Errorf("%s: the line falls by %.5f, the record says %.5f", r.SystemName, *m.ValleySlope, r.ValleySlope.V)
		}
		if n := len(m.Windows); r.Windows.Valid && int(r.Windows.V) != n || len(c.Sinuosities) != n {
			t.Errorf("%s %s: the record counts %v windows, the line has %d and stores %d", r.SystemName, r.Reach, r.Windows, n, len(c.Sinuosities))
		}
		if len(c.Sinuosities) < 1 || len(vertices(t, c)) > 1000 {
			t.Errorf("%s: %d windows, %d vertices", r.SystemName, len(c.Sinuosities), len(vertices(t, c)))
		}
	}
	if len(systems) > 0 {
		t.Errorf("systems without a line: %v", systems)
	}
}

func open(t testing.TB) *catalogue.Store {
	t.Helper()
	s, err := catalogue.Open(context.Background(), filepath.Join(t.TempDir(), "demo.db"), catalogue.Options{})
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { s.Close() })
	return s
}

func TestFillAStore(t *testing.T) {
	for _, law := range Laws {
		s := open(t)
		if err := Fill(context.Background(), s, law); err != nil {
			t.Fatalf("%s: %v", law, err)
		}
		got, err := s.Rows(context.Background(), catalogue.Filter{})
		if err != nil {
			t.Fatal(err)
		}
		want := map[string]catalogue.Row{}
		for _, r := range generate(t, law).Rows {
			want[r.Measurement] = r
		}
		if len(got) != len(want) {
			t.Fatalf("%s: %d rows stored of %d", law, len(got), len(want))
		}
		for _, r := range got {
			w := want[r.Measurement]
			r.WindowSinuosities = nil
			if d := cmp.Diff(w, r); d != "" {
				t.Fatalf("%s: %s changed on its way (-drawn +stored):\n%s", law, r.SystemName, d)
			}
		}
		n, err := s.Invented(context.Background())
		if err != nil || n != len(want) {
			t.Errorf("%s: %d invented rows of %d (%v)", law, n, len(want), err)
		}
	}
}

func BenchmarkGenerate(b *testing.B) {
	for b.Loop() {
		if _, err := Generate(Both); err != nil {
			b.Fatal(err)
		}
	}
}

// BenchmarkFill is the demo's share of a start: draw and store.
func BenchmarkFill(b *testing.B) {
	for b.Loop() {
		b.StopTimer()
		s := open(b)
		b.StartTimer()
		if err := Fill(context.Background(), s, Both); err != nil {
			b.Fatal(err)
		}
	}
}
