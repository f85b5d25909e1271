package planform
import ("testing";"fmt")
func TestLook(t *testing.T) {
	for _, deg := range []float64{20,30, 60, 90, 110} {
		l := planeLine(SineGeneratedLine(deg*degree, 120000, 12, 200))
		m := mustMeasure(t, l, Settings{})
		fmt.Printf("%v true %.4f reach %.4f mean %.4f p90 %.4f peak %.4f std %+v bends %d win %d inflV %.4f sens %v %v\n", deg, SinuosityOf(deg*degree), m.ReachSinuosity, m.MeanSinuosity, m.P90Sinuosity, m.PeakSinuosity, m.StandardisedPeak, len(m.Bends), len(m.Windows), m.ChannelLengthM/m.ValleyLengthM.Inflections, m.Sensitivity, m.SensitivityMean)
		fmt.Printf("  %+v\n  lam/R %.3f true %.3f  stable %v\n %q\n", m.Bends[5], m.Bends[5].WavelengthM/m.Bends[5].RadiusM, 2*3.14159*deg*degree/SinuosityOf(deg*degree), *m.StableSpacingM, m.Warnings)
		g := mustMeasure(t, onGlobe(l, -23, 179.9), Settings{})
		fmt.Printf("   globe reach %.6f mean %.6f bends %d\n", g.ReachSinuosity, g.MeanSinuosity, len(g.Bends))
	}
	for _, l := range rivers(t) {
		m, err := Measure(l, Settings{})
		if err != nil { fmt.Println(l.Name, err); continue }
		st := -1.0
		if m.StableSpacingM != nil { st = *m.StableSpacingM }
		fmt.Printf("%s n %d reach %.3f mean %.3f peak %.3f bends %d win %d whole %v sens %.2f-%.2f coarse %v stable %.0f sp %.0f %d r0 %.4f\n", l.Name, m.Vertices, m.ReachSinuosity, m.MeanSinuosity, m.PeakSinuosity, len(m.Bends), len(m.Windows), m.WholeReach, m.Sensitivity.Low, m.Sensitivity.High, m.Coarse, st, m.MedianSpacingM, len(m.Warnings), m.Ruler[0].LengthM/m.ChannelLengthM)
	}
}
