package catalogue

import (
	"math"
	"strconv"
	"strings"
	"testing"
	"time"

	"github.com/google/go-cmp/cmp"
)

// Pieces put together are the whole, forwards and backwards, whatever their
// size.
func TestFeaturesInPieces(t *testing.T) {
	s := open(t)
	insert(t, s, many(13)...)
	for i := range 7 {
		if _, err := s.AddCentreline(ctx, Centreline{System: "invented-0000" + strconv.Itoa(i), Line: `{"type":"LineString","coordinates":[[10,1],[10.1,1.2]]}`}, 0, ""); err != nil {
			t.Fatal(err)
		}
	}
	freeze(t, s, "r")
	type ask func(FeatureQuery) (ids []int64, more bool, err error)
	features := func(f func(FeatureQuery) ([]Feature, bool, error)) ask {
		return func(q FeatureQuery) (ids []int64, more bool, err error) {
			out, more, err := f(q)
			for _, x := range out {
				ids = append(ids, x.Position)
			}
			return ids, more, err
		}
	}
	for name, c := range map[string]struct {
		ask  ask
		want int
	}{
		"measurements": {features(func(q FeatureQuery) ([]Feature, bool, error) { return s.MeasurementFeatures(ctx, q) }), 26},
		"systems":      {features(func(q FeatureQuery) ([]Feature, bool, error) { return s.SystemFeatures(ctx, q) }), 13},
		"lines": {func(q FeatureQuery) (ids []int64, more bool, err error) {
			out, more, err := s.LineFeatures(ctx, q)
			for _, x := range out {
				ids = append(ids, x.ID)
			}
			return ids, more, err
		}, 7},
	} {
		for _, release := range []string{"", "r"} {
			for _, limit := range []int{1, 4, 13, 100} {
				var all []int64
				var pages [][]int64
				q := FeatureQuery{Filter: Filter{Release: release}, Limit: limit}
				for {
					ids, more, err := c.ask(q)
					if err != nil {
						t.Fatal(name, err)
					}
					if len(ids) > limit {
						t.Fatalf("%s: %d of at most %d", name, len(ids), limit)
					}
					all = append(all, ids...)
					pages = append(pages, ids)
					if !more {
						break
					}
					q.After = ids[len(ids)-1]
				}
				if len(all) != c.want {
					t.Errorf("%s %q by %d: %d, want %d", name, release, limit, len(all), c.want)
				}
				for i := 1; i < len(all); i++ {
					if all[i] <= all[i-1] {
						t.Errorf("%s by %d: not in order: %v", name, limit, all)
					}
				}
				if len(pages) > 2 {
					last := len(pages) - 1
					back, more, err := c.ask(FeatureQuery{Filter: Filter{Release: release}, Limit: limit, Before: pages[last][0]})
					if err != nil || !cmp.Equal(back, pages[last-1]) || more != (last > 1) {
						t.Errorf("%s by %d backwards: %v %v, want %v (%v)", name, limit, back, more, pages[last-1], err)
					}
				}
			}
		}
	}
	n, systems, err := s.CountFeatures(ctx, FeatureQuery{})
	if err != nil || n != 26 || systems != 13 {
		t.Error(n, systems, err)
	}
}

func TestFeaturesInTime(t *testing.T) {
	s := open(t)
	day := func(d int) time.Time { return time.Date(2025, 3, d, 12, 0, 0, 0, time.UTC) }
	var rows []Row
	for d := range 3 {
		s.now = func() time.Time { return day(d + 1) }
		rows = append(rows, insert(t, s, row("S"+strconv.Itoa(d), 1, 2, 1.2))...)
	}
	s.now = func() time.Time { return day(9) }
	rows[0].Sinuosity = Num(1.9) // changed later: it is of day 9 now
	insert(t, s, rows[0])
	for _, c := range []struct {
		from, to time.Time
		want     int
	}{
		{time.Time{}, time.Time{}, 3}, {day(2), time.Time{}, 3}, {day(3), time.Time{}, 2}, {time.Time{}, day(2), 1}, {day(2), day(2), 1},
		{day(2).Add(time.Millisecond), day(3), 1}, {day(4), day(8), 0}, {day(9), day(9), 1},
	} {
		q := FeatureQuery{From: c.from, To: c.to, Limit: 10}
		got, _, err := s.MeasurementFeatures(ctx, q)
		if err != nil || len(got) != c.want {
			t.Errorf("%v to %v: %d, want %d (%v)", c.from, c.to, len(got), c.want, err)
		}
		if n, systems, err := s.CountFeatures(ctx, q); err != nil || n != c.want || systems != c.want {
			t.Errorf("%v to %v: counted %d and %d, want %d (%v)", c.from, c.to, n, systems, c.want, err)
		}
		for _, f := range got {
			if !c.from.IsZero() && f.Updated.Before(c.from) || !c.to.IsZero() && f.Updated.After(c.to) {
				t.Errorf("%v is not in %v to %v", f.Updated, c.from, c.to)
			}
		}
	}
	e, err := s.Extents(ctx, "")
	if err != nil || !e.From.Equal(day(2)) || !e.To.Equal(day(9)) || e.Count != 3 || e.BBox != (BBox{2, 1, 2, 1}) {
		t.Errorf("%+v %v", e, err)
	}
}

// The rows of EachSystem are the best of Systems.
func TestEachSystem(t *testing.T) {
	s := open(t)
	insert(t, s, many(20)...)
	freeze(t, s, "r")
	for _, f := range []Filter{{}, {Sort: "-sinuosity"}, {Choices: map[string][]string{"grade": {"quoted"}}}, {Release: "r", Sort: "system_name"}, {Release: "r", Text: "upper"}} {
		f.PerPage = MaxPerPage
		systems, total, err := s.Systems(ctx, f)
		if err != nil {
			t.Fatal(err)
		}
		want := map[string]Row{}
		for _, y := range systems {
			want[y.Slug] = y.Best()
		}
		got := map[string]Row{}
		var order []string
		if err := s.EachSystem(ctx, f, func(r Row) error { got[r.System] = r; order = append(order, r.System); return nil }); err != nil {
			t.Fatal(err)
		}
		if diff := cmp.Diff(want, got); diff != "" || len(order) != total {
			t.Errorf("%+v: %d of %d\n%.500s", f, len(order), total, diff)
		}
		if f.Sort != "" {
			for i, y := range systems {
				if order[i] != y.Slug {
					t.Errorf("%s: place %d is %s, want %s", f.Sort, i, order[i], y.Slug)
					break
				}
			}
		}
	}
}

// Worked by hand: a line is in a box when a point of it is.
func TestLineInBox(t *testing.T) {
	diagonal := `{"coordinates":[[0,0],[10,10]]}`
	jump := `{"coordinates":[[179,-5],[-179,5]]}`
	run := `{"coordinates":[[179,-5],[181,5]]}`
	for _, c := range []struct {
		line string
		box  BBox
		want bool
	}{
		{diagonal, BBox{4, 4, 6, 6}, true},
		{diagonal, BBox{4, 6.5, 5, 8}, false}, // beside the line though in its box
		{diagonal, BBox{10, 10, 12, 12}, true},
		{diagonal, BBox{-20, -20, 20, 20}, true},
		{diagonal, BBox{170, -90, -170, 90}, false},
		{diagonal, BBox{350 - 360, 0, 0, 0}, true},
		{jump, BBox{170, -90, -170, 90}, true}, {run, BBox{170, -90, -170, 90}, true},
		{jump, BBox{0, -90, 10, 90}, false}, {run, BBox{0, -90, 10, 90}, false}, // not the long way round
		{jump, BBox{-180, 2, -179, 6}, true}, {run, BBox{-180, 2, -179, 6}, true},
		{jump, BBox{-180, -6, -179.9, -2}, false}, {run, BBox{-180, -6, -179.9, -2}, false},
		{jump, BBox{179.9, -90, 180, 90}, true}, {run, BBox{179.9, -90, 180, 90}, true},
	} {
		if got := inBox(c.line, &c.box); got != c.want {
			t.Errorf("%s in %v: %v", c.line, c.box, got)
		}
	}
	if !inBox("not read", nil) || inBox(`{"coordinates":[]}`, &BBox{}) {
		t.Error("no box, no positions")
	}
}

// The box of lines selects through the index what it selects without it, as in
// a release.
func TestLineBoxIndex(t *testing.T) {
	s := open(t)
	insert(t, s, row("Line", 1, 2, 1.2))
	for _, l := range []string{"[[0,0],[10,10]]", "[[179,-5],[-179,5]]", "[[179,-5],[181,5]]", "[[-181,0],[-179,1]]", "[[350,3],[360,4]]", "[[-10,80,-4000],[12,89,-4100]]"} {
		if _, err := s.AddCentreline(ctx, Centreline{System: "line", Line: `{"type":"LineString","coordinates":` + l + `}`}, 0, ""); err != nil {
			t.Fatal(err)
		}
	}
	freeze(t, s, "r")
	found := 0
	for west := -180.0; west < 180; west += 15 {
		for _, width := range []float64{0, 10, 170, 350} {
			east := west + width
			if east > 180 {
				east -= 360
			}
			for _, lat := range [][2]float64{{-90, 90}, {0, 3.5}, {85, 90}} {
				q := FeatureQuery{Filter: Filter{BBox: &BBox{west, lat[0], east, lat[1]}}, Limit: 100}
				live, _, err := s.LineFeatures(ctx, q)
				if err != nil {
					t.Fatal(err)
				}
				n, err := s.CountLines(ctx, q)
				q.Release = "r"
				frozen, _, err2 := s.LineFeatures(ctx, q)
				if err != nil || err2 != nil || !cmp.Equal(live, frozen) || n != len(live) {
					t.Errorf("%v: %d by the index, %d counted, %d without (%v %v)", *q.BBox, len(live), n, len(frozen), err, err2)
				}
				found += len(live)
			}
		}
	}
	if found < 100 {
		t.Errorf("only %d found", found)
	}
}

func TestCutAtAntimeridian(t *testing.T) {
	type line = [][]float64
	for _, c := range []struct {
		name string
		in   line
		want []line
	}{
		{"apart", line{{1, 2, -3}, {4, 5, -6}}, []line{{{1, 2, -3}, {4, 5, -6}}}},
		{"jump", line{{179, 0, -10}, {-179, 2, -20}}, []line{{{179, 0, -10}, {180, 1, -15}}, {{-180, 1, -15}, {-179, 2, -20}}}},
		{"run past", line{{179, 0}, {181, 2}, {183, 2}}, []line{{{179, 0}, {180, 1}}, {{-180, 1}, {-179, 2}, {-177, 2}}}},
		{"westwards", line{{-179, 0}, {179, 2}}, []line{{{-179, 0}, {-180, 1}}, {{180, 1}, {179, 2}}}},
		{"and back", line{{179, 0}, {-179, 0}, {179, 0}}, []line{{{179, 0}, {180, 0}}, {{-180, 0}, {-179, 0}, {-180, 0}}, {{180, 0}, {179, 0}}}},
		{"a vertex on it", line{{179, 0}, {180, 1}, {-179, 2}}, []line{{{179, 0}, {180, 1}}, {{-180, 1}, {-179, 2}}}},
		{"both names of it", line{{179, 0}, {180, 1}, {-180, 1}, {-179, 2}}, []line{{{179, 0}, {180, 1}}, {{-180, 1}, {-179, 2}}}},
	} {
		got := CutAtAntimeridian(c.in)
		var want [][][]float64
		want = append(want, c.want...)
		if diff := cmp.Diff(want, got, cmp.Comparer(func(a, b float64) bool { return math.Abs(a-b) < 1e-12 })); diff != "" {
			t.Errorf("%s: %s", c.name, diff)
		}
	}
}

func TestDifference(t *testing.T) {
	s := open(t)
	rows := insert(t, s, many(5)...)
	freeze(t, s, "a")
	rows[3].Sinuosity, rows[3].Notes = Num(2.25), "Corrected"
	insert(t, s, rows[3])
	insert(t, s, row("New One", 5, 6, 1.4))
	if _, err := s.AddCentreline(ctx, Centreline{System: "new-one", Line: `{"type":"LineString","coordinates":[[10,1],[10.1,1.2]]}`}, 0, ""); err != nil {
		t.Fatal(err)
	}
	freeze(t, s, "b")
	collect := func(a, b string) ([]Change, *Difference) {
		t.Helper()
		var out []Change
		d, err := s.EachDifference(ctx, a, b, func(c Change) error { out = append(out, c); return nil })
		if err != nil {
			t.Fatal(err)
		}
		return out, d
	}
	forth, d := collect("a", "b")
	if len(forth) != 3 || d.Added != 1 || d.Removed != 0 || d.Changed != 1 || d.LinesAdded != 1 || d.LinesRemoved != 0 ||
		!cmp.Equal(d.SystemsAdded, []string{"new-one"}) || d.MeasurementsBefore != 10 || d.MeasurementsAfter != 11 || d.SystemsBefore != 5 || d.SystemsAfter != 6 {
		t.Fatalf("%+v\n%+v", d, forth)
	}
	want := []FieldChange{{"sinuosity", "1.1", "2.25"}, {"notes", "", "Corrected"}}
	for _, c := range forth {
		if c.What == "changed" {
			want[0].Before = c.Fields[0].Before // drawn by many
			if diff := cmp.Diff(want, c.Fields); diff != "" || c.Measurement != rows[3].Measurement {
				t.Error(diff)
			}
		}
		if c.Line && (c.System != "new-one" || !strings.HasPrefix(c.Fields[0].After, "line ")) {
			t.Errorf("line: %+v", c)
		}
	}
	// The present catalogue is that of b.
	if now, _ := collect("a", Present); !cmp.Equal(now, forth) {
		t.Errorf("to the present: %+v", now)
	}
	if none, d := collect("b", Present); len(none) != 0 || d.Changed != 0 {
		t.Errorf("nothing changed since: %+v", none)
	}
	back, d := collect("b", "a")
	if len(back) != 3 || d.Removed != 1 || d.LinesRemoved != 1 || !cmp.Equal(d.SystemsRemoved, []string{"new-one"}) {
		t.Errorf("back: %+v", back)
	}
	if _, err := s.EachDifference(ctx, "a", "none", nil); CodeOf(err) != Invalid {
		t.Error(err)
	}
}
