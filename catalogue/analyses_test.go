package catalogue

import (
	"reflect"
	"strings"
	"testing"
)

func TestFreezeAnalysis(t *testing.T) {
	s := open(t)
	rows := many(3)
	rows[0].ValleySlope, rows[0].WindowSinuosities = Num(0.1+0.2), []float64{1.1, 1.3000000000000003}
	digest := strings.Repeat("0f", 32)
	name, err := s.FreezeAnalysis(ctx, Analysis{Title: "Slope against Latitude, 2026", Why: "figure 3", Question: "model=linear%3Acoriolis&seed=1", Rows: rows, Digest: digest, Program: "0.1.0", Revision: 7}, 0)
	if err != nil {
		t.Fatal(err)
	}
	if name != "slope-against-latitude-2026" {
		t.Errorf("name %q", name)
	}
	a, err := s.Analysis(ctx, name)
	if err != nil {
		t.Fatal(err)
	}
	if !reflect.DeepEqual(a.Rows, rows) {
		t.Error("the rows came back changed")
	}
	if a.Digest != digest || a.Revision != 7 || a.RowCount != len(rows) || a.Why != "figure 3" || a.At.IsZero() || a.By != "" {
		t.Errorf("came back as %+v", *a)
	}
	list, err := s.Analyses(ctx)
	if err != nil || len(list) != 1 || list[0].Rows != nil || list[0].Title != "Slope against Latitude, 2026" {
		t.Errorf("list %+v, %v", list, err)
	}
	for _, c := range []struct {
		a    Analysis
		code Code
	}{
		{Analysis{Title: "slope against latitude 2026", Digest: digest}, Conflict},
		{Analysis{Title: " ", Digest: digest}, Invalid},
		{Analysis{Title: strings.Repeat("long ", 60), Digest: digest}, Invalid},
		{Analysis{Title: "noted", Why: strings.Repeat("x", 3000), Digest: digest}, Invalid},
	} {
		if _, err := s.FreezeAnalysis(ctx, c.a, 0); CodeOf(err) != c.code {
			t.Errorf("%.20q: %v, want %s", c.a.Title, err, c.code)
		}
	}
	if _, err := s.Analysis(ctx, "none"); CodeOf(err) != NotFound {
		t.Errorf("an analysis that is not there: %v", err)
	}
	if _, err := s.w.ExecContext(ctx, `UPDATE analyses SET digest = ?`, strings.Repeat("aa", 32)); err == nil {
		t.Error("a frozen analysis was changed")
	}
	if _, err := s.w.ExecContext(ctx, `DELETE FROM analyses`); err == nil {
		t.Error("a frozen analysis was deleted")
	}
}
