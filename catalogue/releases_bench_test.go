package catalogue

import (
	"fmt"
	"io"
	"testing"
)

// BenchmarkRelease freezes a catalogue and asks the release what
// BenchmarkCatalogue asks the catalogue itself.
func BenchmarkRelease(b *testing.B) {
	const n = 10000
	s := benchStore(b, n)
	freezes := 0
	b.Run(fmt.Sprintf("Freeze/%d", n), func(b *testing.B) {
		for b.Loop() {
			freezes++
			freeze(b, s, fmt.Sprintf("r%d", freezes))
		}
	})
	for _, c := range []struct {
		name string
		f    Filter
	}{
		{"all", Filter{}},
		{"choice", Filter{Choices: map[string][]string{"feeder": {"river"}, "setting": {"fan", "slope"}}, SinuosityMin: Num(1.5)}},
		{"text", Filter{Text: "invented 0000"}},
		{"bbox", Filter{BBox: &BBox{170, -30, -170, 30}}},
		{"sorted", Filter{Sort: "-valley_slope", Page: 2}},
	} {
		for _, release := range []string{"", "r1"} {
			c.f.Release = release
			name := c.name + "/live"
			if release != "" {
				name = c.name + "/release"
			}
			b.Run("Systems/"+name, func(b *testing.B) {
				for b.Loop() {
					if _, _, err := s.Systems(ctx, c.f); err != nil {
						b.Fatal(err)
					}
				}
			})
			b.Run("Facets/"+name, func(b *testing.B) {
				for b.Loop() {
					if _, err := s.Facets(ctx, c.f); err != nil {
						b.Fatal(err)
					}
				}
			})
			b.Run("Export/"+name, func(b *testing.B) {
				for b.Loop() {
					if _, err := s.Export(ctx, io.Discard, c.f); err != nil {
						b.Fatal(err)
					}
				}
			})
		}
	}
	b.Run("System/release", func(b *testing.B) {
		for b.Loop() {
			if _, err := s.SystemAt(ctx, "invented-00050", "r1"); err != nil {
				b.Fatal(err)
			}
		}
	})
}
