package seed

import (
	"context"
	"errors"
	"fmt"
	"strings"
	"testing"

	"fathombend/catalogue"
	"fathombend/catalogue/land"
)

func TestLarge(t *testing.T) {
	const n = 20_000
	systems, deposits, slugs := map[string]int{}, map[string]int{}, map[string]string{}
	rows, rivers, ancient := 0, 0, 0
	var first []catalogue.Row
	err := Large(n, Both, func(r catalogue.Row) error {
		rows++
		if rows <= 50 {
			first = append(first, r)
		}
		systems[r.SystemName]++
		deposits[r.ParentDeposit]++
		if was, ok := slugs[r.System]; ok && was != r.SystemName {
			return fmt.Errorf("slug %s for %s and %s", r.System, was, r.SystemName)
		}
		slugs[r.System] = r.SystemName
		if r.Kind == "river" {
			rivers++
		}
		if r.AgeMa.Valid {
			ancient++
		}
		if land.Contains(r.LatitudeDeg.V, r.LongitudeDeg.V) != (r.Kind == "river") && r.Reach == "reach 1" {
			return fmt.Errorf("%s (%s) at %g, %g", r.SystemName, r.Kind, r.LatitudeDeg.V, r.LongitudeDeg.V)
		}
		if !strings.HasPrefix(r.Notes, catalogue.InventedMark) {
			return fmt.Errorf("%s: notes %q", r.SystemName, r.Notes)
		}
		for _, f := range catalogue.CheckRow(&r, nil) {
			if f.Hard {
				return fmt.Errorf("%s: %s %s", r.SystemName, f.Column, f.Message)
			}
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	if len(systems) != n || rows < 28*n/10 || rows > 32*n/10 {
		t.Errorf("%d systems and %d rows, want %d and about three times that", len(systems), rows, n)
	}
	if rivers == 0 || ancient == 0 || len(deposits) < n/5 {
		t.Errorf("%d river rows, %d ancient rows, %d deposits", rivers, ancient, len(deposits))
	}
	k := 0
	if err := Large(n, Both, func(r catalogue.Row) error {
		if k < len(first) && r.Sinuosity != first[k].Sinuosity {
			return fmt.Errorf("row %d differs the second time", k)
		}
		k++
		return nil
	}); err != nil {
		t.Error(err)
	}
}

func TestLargeStopsAtAnError(t *testing.T) {
	stop, rows := errors.New("stop"), 0
	err := Large(1000, None, func(catalogue.Row) error {
		rows++
		if rows == 7 {
			return stop
		}
		return nil
	})
	if !errors.Is(err, stop) || rows != 7 {
		t.Errorf("stopped with %v after %d rows, want the error of row 7", err, rows)
	}
}

func TestFillLarge(t *testing.T) {
	s := open(t)
	if err := FillLarge(context.Background(), s, 500, Coriolis); err != nil {
		t.Fatal(err)
	}
	_, total, err := s.Systems(context.Background(), catalogue.Filter{})
	if err != nil || total != 500 {
		t.Errorf("%d systems stored (%v), want 500", total, err)
	}
}

func BenchmarkLarge(b *testing.B) {
	for b.Loop() {
		rows := 0
		if err := Large(10_000, Both, func(catalogue.Row) error { rows++; return nil }); err != nil {
			b.Fatal(err)
		}
		b.ReportMetric(float64(rows), "rows/op")
	}
}
