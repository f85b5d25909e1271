package planform

// direction decides whether the line is turned round: as asked, else down the
// slope that the depths show, else as given. The sentences say why.
func direction(line Line, s Settings) (reversed bool, why []string) {
	switch s.Direction {
	case "as_given":
		return false, nil
	case "reversed":
		return true, nil
	}
	if line.HasTime {
		return false, []string{"Direction taken as given: two-way time is not depth, so it does not say which end is deeper. Use direction=reversed if the line runs up the slope."}
	}
	// The trend against the number of the vertex is enough for a sign.
	d := &depths{}
	for i, p := range line.Vertices {
		if finite(p.Depth) {
			d.s, d.z = append(d.s, float64(i)), append(d.z, p.Depth)
		}
	}
	switch d.falls() {
	case 1:
		return false, []string{"Direction: the line deepens as given, so its first vertex is upstream."}
	case -1:
		return true, []string{"Direction: the line shoals as given, so it was turned round; its last vertex is upstream. Use direction=as_given to keep the order."}
	}
	return false, []string{"Direction taken as given: there are no depths to tell by. Use direction=reversed if the line runs up the slope."}
}
