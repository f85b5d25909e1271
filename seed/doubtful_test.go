package seed

import (
	"context"
	"testing"

	"fathombend/catalogue"
)

// Every spoilt record is caught by a check, at the column it was spoilt in, and
// the rest of the demo warns of nothing: a demo full of warnings would teach
// people to pass them over.
func TestDoubtfulRecordsAreCaught(t *testing.T) {
	ctx := context.Background()
	for _, law := range Laws {
		survey := generate(t, law)
		s := open(t)
		if err := s.InsertRows(ctx, survey.Rows, survey.Centrelines, 0, Why); err != nil {
			t.Fatal(err)
		}
		if len(survey.Doubtful) < 6 {
			t.Fatalf("%s: only %d doubts", law, len(survey.Doubtful))
		}
		type cell struct {
			row    int
			column string
		}
		want := map[cell]string{}
		for _, d := range survey.Doubtful {
			want[cell{d.Row, d.Column}] = d.What
		}
		duplicates := 0
		for i, r := range survey.Rows {
			found, err := s.Check(ctx, r)
			if err != nil {
				t.Fatal(err)
			}
			for _, f := range found {
				_, meant := want[cell{i, f.Column}]
				switch {
				case f.Hard:
					t.Errorf("%s: %s is refused: %s %s", law, r.SystemName, f.Column, f.Message)
				case f.Key == "near_duplicate": // of the copy, or of what it copies
					duplicates++
					delete(want, cell{i, "sinuosity"})
				case meant:
					delete(want, cell{i, f.Column})
				default:
					t.Errorf("%s: %s %s (%s): unexpected warning at %s: %s", law, r.SystemName, r.Reach, r.Measurement, f.Column, f.Message)
				}
			}
		}
		for c, what := range want {
			t.Errorf("%s: %s: nothing noticed at %s: %s", law, survey.Rows[c.row].SystemName, c.column, what)
		}
		if duplicates != 2 {
			t.Errorf("%s: %d rows look like a duplicate, want the copy and what it copies", law, duplicates)
		}
	}
}

// A clean survey has none of them.
func TestCleanSurveyHasNoDoubts(t *testing.T) {
	s, err := Draw(Options{Law: Both, Seed: DefaultSeed, Centrelines: true, Clean: true})
	if err != nil {
		t.Fatal(err)
	}
	for _, r := range s.Rows {
		for _, f := range catalogue.CheckRow(&r, nil) {
			t.Errorf("%s: %s %s", r.SystemName, f.Column, f.Message)
		}
	}
}
