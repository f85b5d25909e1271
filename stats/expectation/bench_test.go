package expectation

import (
	"context"
	"testing"
)

// One target with 4,000 draws over all explanations, fits warm.
func BenchmarkExpect(b *testing.B) {
	f := mustFit(b, plainLaw.draw(3), Options{})
	q := latitude(-40, 4)
	q.Age, q.AgeSE = 70, 3
	b.ReportAllocs()
	for b.Loop() {
		mustExpect(b, f, q)
	}
}

// The fits of about 90 rows in 30 deposits, with their coverage.
func BenchmarkFit(b *testing.B) {
	rows := plainLaw.draw(3)
	b.ReportAllocs()
	for b.Loop() {
		if _, err := Fit(context.Background(), rows, Options{}); err != nil {
			b.Fatal(err)
		}
	}
}

// 100 of many targets on all cores: 10,000 take a hundred times as long.
func BenchmarkExpectMany100(b *testing.B) {
	f := mustFit(b, plainLaw.draw(3), Options{})
	targets := make([]Target, 100)
	for i := range targets {
		targets[i] = latitude(float64(i)*0.8, 3)
		targets[i].Age, targets[i].AgeSE = 70, 3
	}
	for b.Loop() {
		for _, a := range f.ExpectMany(context.Background(), targets, 0, nil) {
			if a.Err != nil {
				b.Fatal(a.Err)
			}
		}
	}
}

// 100 targets of a file, as /expectation.csv answers them, one core.
func BenchmarkExpectCombined100(b *testing.B) {
	f := mustFit(b, plainLaw.draw(3), Options{})
	b.ReportAllocs()
	for b.Loop() {
		for i := range 100 {
			q := latitude(float64(i)*0.8, 3)
			q.Age, q.AgeSE = 70, 3
			if _, err := f.ExpectCombined(context.Background(), q); err != nil {
				b.Fatal(err)
			}
		}
	}
}

func BenchmarkThroughTime(b *testing.B) {
	f := mustFit(b, plainLaw.draw(3), Options{})
	q := NewTarget()
	q.SiteLat, q.SiteLon, q.Plate = 15, 75, "India"
	for b.Loop() {
		if _, err := f.ThroughTime(context.Background(), q, nil); err != nil {
			b.Fatal(err)
		}
	}
}

func BenchmarkDeepTime(b *testing.B) {
	rows := plainLaw.draw(3)
	for b.Loop() {
		if _, err := DeepTime(context.Background(), rows, Options{}); err != nil {
			b.Fatal(err)
		}
	}
}

// A catalogue of 2,000 rows in 700 deposits, of which MostDeposits are fitted on.
func BenchmarkFitLarge(b *testing.B) {
	l := plainLaw
	l.deposits = 700
	rows := l.draw(3)
	for b.Loop() {
		mustFit(b, rows, Options{})
	}
}
