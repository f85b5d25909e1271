package catalogue

import (
	"bytes"
	"fmt"
	"io"
	"path/filepath"
	"testing"
)

func benchStore(b *testing.B, systems int) *Store {
	b.Helper()
	s, err := Open(ctx, filepath.Join(b.TempDir(), "bench.db"), Options{Throwaway: true})
	if err != nil {
		b.Fatal(err)
	}
	b.Cleanup(func() { s.Close() })
	if err := s.InsertRows(ctx, many(systems), nil, 0, "bench"); err != nil {
		b.Fatal(err)
	}
	b.ResetTimer()
	return s
}

// BenchmarkCatalogue reads catalogues of 100 and 10,000 systems, with two
// measurements each.
func BenchmarkCatalogue(b *testing.B) {
	filters := []struct {
		name string
		f    Filter
	}{
		{"all", Filter{}},
		{"choice", Filter{Choices: map[string][]string{"feeder": {"river"}, "setting": {"fan", "slope"}}, SinuosityMin: Num(1.5)}},
		{"text", Filter{Text: "invented 0000"}},
		{"bbox", Filter{BBox: &BBox{170, -30, -170, 30}}},
		{"sorted", Filter{Sort: "-valley_slope", Page: 2}},
	}
	for _, n := range []int{100, 10000} {
		s := benchStore(b, n)
		for _, c := range filters {
			b.Run(fmt.Sprintf("Systems/%d/%s", n, c.name), func(b *testing.B) {
				for b.Loop() {
					if _, _, err := s.Systems(ctx, c.f); err != nil {
						b.Fatal(err)
					}
				}
			})
		}
		for _, c := range filters[:2] {
			b.Run(fmt.Sprintf("Rows/%d/%s", n, c.name), func(b *testing.B) {
				for b.Loop() {
					if _, err := s.Rows(ctx, c.f); err != nil {
						b.Fatal(err)
					}
				}
			})
			b.Run(fmt.Sprintf("Facets/%d/%s", n, c.name), func(b *testing.B) {
				for b.Loop() {
					if _, err := s.Facets(ctx, c.f); err != nil {
						b.Fatal(err)
					}
				}
			})
		}
		b.Run(fmt.Sprintf("System/%d", n), func(b *testing.B) {
			for b.Loop() {
				if _, err := s.System(ctx, "invented-00050"); err != nil {
					b.Fatal(err)
				}
			}
		})
		b.Run(fmt.Sprintf("Export/%d", n), func(b *testing.B) {
			for b.Loop() {
				if _, err := s.Export(ctx, io.Discard, Filter{}); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}

// BenchmarkImport reads a file of 10,000 systems into a new catalogue.
func BenchmarkImport(b *testing.B) {
	var file bytes.Buffer
	if _, err := benchStore(b, 10000).Export(ctx, &file, Filter{}); err != nil {
		b.Fatal(err)
	}
	for _, publish := range []bool{true, false} {
		b.Run(fmt.Sprintf("publish=%v", publish), func(b *testing.B) {
			for b.Loop() {
				s := benchStore(b, 0)
				if rep, err := s.Import(ctx, bytes.NewReader(file.Bytes()), ImportOptions{Publish: publish}); err != nil || !rep.Stored {
					b.Fatal(rep, err)
				}
			}
		})
	}
}

// BenchmarkStart is what a first start costs: a new file with about 100
// systems in it.
func BenchmarkStart(b *testing.B) {
	for _, throwaway := range []bool{true, false} {
		b.Run(fmt.Sprintf("throwaway=%v", throwaway), func(b *testing.B) {
			for b.Loop() {
				s, err := Open(ctx, filepath.Join(b.TempDir(), "start.db"), Options{Throwaway: throwaway})
				if err != nil {
					b.Fatal(err)
				}
				if err := s.InsertRows(ctx, many(100), nil, 0, "bench"); err != nil {
					b.Fatal(err)
				}
				s.Close()
			}
		})
	}
}
