package views

import (
	"math/rand/v2"
	"testing"
)

// manySystems are n systems spread over the oceans, for speed only.
func manySystems(n int) ChartPage {
	r := rand.New(rand.NewPCG(7, 8))
	p := ChartPage{View: NewChartView("world"), Colouring: ChartColouring{Steps: []ChartStep{{Class: "r1"}}}}
	for range n {
		p.Items = append(p.Items, ChartItem{MeridianItem: MeridianItem{Slug: "s", Name: "S", P: 1 + r.Float64(), Kind: "submarine"}, Lat: 140*r.Float64() - 70, Lon: 360*r.Float64() - 180})
	}
	return p
}

func BenchmarkChart2000(b *testing.B) {
	p := manySystems(2000)
	for b.Loop() {
		p.draw(p.canvas(false))
	}
}

func BenchmarkFigure(b *testing.B) {
	for _, kind := range FigureKinds {
		b.Run(kind, func(b *testing.B) {
			for b.Loop() {
				if _, err := examplePlot().File(kind, "single"); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
