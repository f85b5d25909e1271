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
