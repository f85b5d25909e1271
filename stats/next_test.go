package stats

import (
	"context"
	"errors"
	"math"
	"strings"
	"testing"
)

func nextRows() []Row {
	rows := inventedRows(11, 70, 30)
	for i := range rows {
		f := "shelf"
		if rows[i].LatitudeDeg > 45 {
			f = "glacial"
		} else if i%3 == 0 {
			f = "river"
		}
		rows[i].LongitudeDeg = float64(i*37%360 - 180)
		rows[i].Categories = map[string]string{"feeder": f}
	}
	return rows
}

func TestNext(t *testing.T) {
	a, err := Next(context.Background(), nextRows(), DefaultRequest(), NextOptions{Poleward: 50})
	if err != nil {
		t.Fatal(err)
	}
	if a.Scale != "ln_excess" || !a.Interval.known() || len(a.Cells) != 32 {
		t.Fatalf("scale %s, interval %v, %d cells", a.Scale, a.Interval, len(a.Cells))
	}
	systems, boxes := 0, 0
	for _, b := range a.Bands {
		systems += b.Systems
	}
	for _, b := range a.Boxes {
		boxes += b.Systems
	}
	if systems != 70 || boxes != 70 {
		t.Errorf("%d systems in the bands, %d in the boxes, of 70", systems, boxes)
	}
	// A system at an end of the latitudes has more leverage on their slope than
	// one in the middle.
	at := func(lat float64) float64 {
		sum := 0.0
		for _, c := range a.Cells {
			if c.LatitudeFrom == lat {
				sum += c.Narrowing / 4
			}
		}
		return sum
	}
	if !(at(70) > at(30)) && !(at(0) > at(30)) {
		t.Errorf("narrowing %.4f at 0, %.4f at 30, %.4f at 70 degrees", at(0), at(30), at(70))
	}
	if len(a.Text) < 2 || a.Separation.Text == "" {
		t.Errorf("sentences %v", a.Text)
	}
}

// The narrowing agrees with refitting the whole catalogue with the new row in
// it: the same interval, to rounding.
func TestNextRefitIsARefit(t *testing.T) {
	rows := nextRows()
	req := DefaultRequest()
	req.Joint = []string{"abs_latitude", "log10_slope"}
	tab := newTable(consider(rows, &req), &req, "")
	f := fitPlan(tab, newJointPlan(tab, req.Joint, [2]string{}, "ln_excess"))
	m := momentsOf(f.cluster)
	got := m.refit(m.responseTerms(), [2]float64{65, -2}, 0.3, 0.95)
	r := EmptyRow()
	r.ID, r.System, r.ParentDeposit, r.LatitudeDeg, r.ValleySlope, r.Sinuosity = "x", "x", "x", 65, 0.01, 1+math.Exp(0.3)
	bigger := newTable(consider(append(rows, r), &req), &req, "")
	g := fitPlan(bigger, newJointPlan(bigger, req.Joint, [2]string{}, "ln_excess"))
	ro := g.robust(g.cluster)
	con, unit := ro.contrast(1)
	se, df := ro.terms.cr2(con)
	want := cr2Interval(g.coef[1], se*unit, df, 0.95)
	// refit keeps the old centre; the interval of a slope does not depend on it.
	near(t, "width", got.width(), want.width(), 1e-8)
}

// On rows of today f and sin|latitude| are one number: nothing separates them.
func TestNothingSeparatesOneExplanation(t *testing.T) {
	a, err := Next(context.Background(), nextRows(), DefaultRequest(), NextOptions{Explanations: [2]string{"coriolis", "sin_abs_latitude"}, Poleward: 50})
	if err != nil {
		t.Fatal(err)
	}
	if !a.Separation.MoreThan || !strings.Contains(a.Separation.Text, "do not separate") {
		t.Errorf("%+v", a.Separation)
	}
}

func TestNextRefusals(t *testing.T) {
	for _, o := range []NextOptions{{Term: "feeder"}, {Term: "abs_latitude", Beside: "coriolis"}, {Poleward: 90}, {Poleward: math.NaN()}, {Draws: 1}, {Explanations: [2]string{"x", "y"}}, {Explanations: [2]string{"coriolis", "coriolis"}}} {
		var in *InputError
		if _, err := Next(context.Background(), nextRows(), DefaultRequest(), o); !errors.As(err, &in) {
			t.Errorf("%+v: %v", o, err)
		}
	}
	a, err := Next(context.Background(), nil, DefaultRequest(), NextOptions{})
	if err != nil || len(a.Text) != 1 {
		t.Errorf("no rows: %v %v", a, err)
	}
}
