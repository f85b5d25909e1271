package catalogue

import (
	"strings"
	"testing"
)

const straightLine = `{"type":"LineString","coordinates":[[1,10],[1,10.1],[1,10.2]]}`

// lined is a catalogue of three systems: one with a line of its only
// measurement's system, one with a line of one of two measurements, and one
// whose line cannot be told to belong to either.
func lined(t *testing.T) (*Store, []Row) {
	s := open(t)
	rows := insert(t, s, row("Alone", 10, 1, 1.4), row("Pair", 20, 1, 1.5), row("Pair", 21, 1, 1.6), row("Vague", 30, 1, 1.7), row("Vague", 31, 1, 1.8))
	for _, c := range []Centreline{
		{System: rows[0].System, Line: straightLine, Sinuosities: []float64{1.1, 1.2}},
		{Measurement: rows[2].Measurement, Line: straightLine, Settings: `{"k":5}`},
		{System: rows[3].System, Line: straightLine},
	} {
		if _, err := s.AddCentreline(ctx, c, 0, "test"); err != nil {
			t.Fatal(err)
		}
	}
	return s, rows
}

func TestRecomputationRunsStopsAndGoesOn(t *testing.T) {
	s, rows := lined(t)
	name, err := s.StartRecomputation(ctx, Recomputation{Title: "Windows of 5 km", Settings: `{"window_m":5000}`, Program: "0.1.0"}, 0)
	if err != nil || name != "windows-of-5-km" {
		t.Fatal(name, err)
	}
	todo, err := s.LinesToMeasure(ctx, name, 0, 10)
	if err != nil || len(todo) != 3 {
		t.Fatalf("%d lines, %v", len(todo), err)
	}
	for i, want := range []string{rows[0].Measurement, rows[2].Measurement, ""} {
		if todo[i].Measured != want {
			t.Errorf("line %d stands for %q, want %q", i, todo[i].Measured, want)
		}
	}
	if !todo[0].Recorded.Valid || todo[0].Recorded.V != 1.4 || todo[0].RecordedKind != "peak" || len(todo[0].Sinuosities) != 2 {
		t.Errorf("first line %+v", todo[0])
	}
	gave := func(i int, peak float64) RecomputedLine {
		return RecomputedLine{Line: todo[i].ID, System: todo[i].System, Measurement: todo[i].Measured, Recorded: todo[i].Recorded, RecordedKind: todo[i].RecordedKind,
			New: Levels{Reach: Num(1.05), Mean: Num(1.1), Peak: Num(peak)}, Sinuosities: []float64{1.1, peak}, Settings: `{}`}
	}
	state, err := s.KeepRecomputed(ctx, name, []RecomputedLine{gave(0, 1.3)})
	if state != "running" || err != nil {
		t.Fatal(state, err)
	}

	// Not usable before it is done; a line that came later is not part of it.
	if _, err := s.RecomputedByMeasurement(ctx, name); CodeOf(err) != Conflict {
		t.Errorf("used half-way: %v", err)
	}
	if _, err := s.AddCentreline(ctx, Centreline{System: rows[0].System, Line: straightLine}, 0, "later"); err != nil {
		t.Fatal(err)
	}
	if err := s.CancelRecomputation(ctx, name); err != nil {
		t.Fatal(err)
	}
	if state, err := s.KeepRecomputed(ctx, name, []RecomputedLine{gave(1, 1.4)}); state != "cancelled" || err != nil {
		t.Fatal(state, err)
	}
	r, err := s.Recomputation(ctx, name)
	if err != nil || r.Reached != 1 || r.Lines != 3 || r.State != "cancelled" || r.Ended.IsZero() {
		t.Fatalf("%+v, %v", r, err)
	}
	if err := s.ResumeRecomputation(ctx, name); err != nil {
		t.Fatal(err)
	}
	if todo, err := s.LinesToMeasure(ctx, name, 0, 10); err != nil || len(todo) != 2 {
		t.Fatalf("%d lines left, %v", len(todo), err)
	}
	refused := RecomputedLine{Line: todo[2].ID, System: todo[2].System, Settings: `{}`, Remark: "no two different vertices"}
	// The first line again, as a second program might send it: left as it is.
	if state, err = s.KeepRecomputed(ctx, name, []RecomputedLine{gave(0, 9), gave(1, 1.4), refused}); state != "done" || err != nil {
		t.Fatal(state, err)
	}
	by, err := s.RecomputedByMeasurement(ctx, name)
	if err != nil || len(by) != 2 || by[rows[0].Measurement].New.Peak.V != 1.3 || by[rows[2].Measurement].Sinuosities[1] != 1.4 {
		t.Fatalf("%+v, %v", by, err)
	}
	lines, err := s.RecomputedLines(ctx, name)
	if err != nil || len(lines) != 3 || lines[0].SystemName != "Alone" || lines[2].Remark == "" || lines[2].New.Reach.Valid {
		t.Fatalf("%+v, %v", lines, err)
	}
}

func TestRecomputationStays(t *testing.T) {
	s, _ := lined(t)
	name, err := s.StartRecomputation(ctx, Recomputation{Title: "One", Settings: `{}`, Program: "0.1.0"}, 0)
	if err != nil {
		t.Fatal(err)
	}
	if err := s.DiscardRecomputation(ctx, name); CodeOf(err) != Conflict {
		t.Errorf("a running one was discarded: %v", err)
	}
	todo, _ := s.LinesToMeasure(ctx, name, 0, 10)
	var all []RecomputedLine
	for _, l := range todo {
		all = append(all, RecomputedLine{Line: l.ID, System: l.System, Settings: `{}`, New: Levels{Reach: Num(1.2)}})
	}
	if state, err := s.KeepRecomputed(ctx, name, all); state != "done" || err != nil {
		t.Fatal(state, err)
	}
	for _, q := range []string{`UPDATE recomputations SET state = 'running'`, `UPDATE recomputations SET settings = '{"k":9}'`, `DELETE FROM recomputations`,
		`UPDATE recomputed_values SET new_reach = 1`, `DELETE FROM recomputed_values`} {
		if _, err := s.w.ExecContext(ctx, q); err == nil {
			t.Errorf("%s was done to a finished recomputation", q)
		}
	}
	for what, err := range map[string]error{"cancelled": s.CancelRecomputation(ctx, name), "resumed": s.ResumeRecomputation(ctx, name), "discarded": s.DiscardRecomputation(ctx, name)} {
		if CodeOf(err) != Conflict {
			t.Errorf("a finished one was %s: %v", what, err)
		}
	}
	for _, c := range []struct {
		title, why string
		code       Code
	}{{"one", "", Conflict}, {"  ", "", Invalid}, {strings.Repeat("long ", 50), "", Invalid}, {"two", strings.Repeat("x", 3000), Invalid}} {
		if _, err := s.StartRecomputation(ctx, Recomputation{Title: c.title, Why: c.why, Settings: `{}`}, 0); CodeOf(err) != c.code {
			t.Errorf("%.20q: %v, want %s", c.title, err, c.code)
		}
	}
	if _, err := open(t).StartRecomputation(ctx, Recomputation{Title: "Nothing", Settings: `{}`}, 0); CodeOf(err) != Invalid {
		t.Errorf("a catalogue without lines: %v", err)
	}
	second, err := s.StartRecomputation(ctx, Recomputation{Title: "Two", Settings: `{}`, Program: "0.1.0"}, 0)
	if err != nil {
		t.Fatal(err)
	}
	if err := s.CancelRecomputation(ctx, second); err != nil {
		t.Fatal(err)
	}
	if err := s.DiscardRecomputation(ctx, second); err != nil {
		t.Fatal(err)
	}
	if _, err := s.Recomputation(ctx, second); CodeOf(err) != NotFound {
		t.Errorf("the discarded one is there: %v", err)
	}
}
