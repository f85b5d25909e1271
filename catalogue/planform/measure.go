package planform

import "math"

// Limits of what is read and measured.
const (
	MaxBytes    = 64 << 20
	MaxVertices = 1_000_000
)

// Length is the length of a line along its vertices in metres: geodesic on
// WGS84, or plane where the line has no place.
func Length(line Line) (float64, error) {
	total := 0.0
	v := line.Vertices
	if line.Plane {
		for i := 1; i < len(v); i++ {
			total += math.Hypot(v[i].Lon-v[i-1].Lon, v[i].Lat-v[i-1].Lat)
		}
		return total, nil
	}
	var p spot
	for i := range v {
		q := spotOf(v[i].Lat, v[i].Lon)
		if i > 0 {
			d := between(p, q)
			if math.IsNaN(d) {
				return math.NaN(), ErrNotConverged
			}
			total += d
		}
		p = q
	}
	return total, nil
}

// Chord is the distance between the first and the last vertex in metres.
func Chord(line Line) (float64, error) {
	v := line.Vertices
	if len(v) < 2 {
		return 0, nil
	}
	return Length(Line{Plane: line.Plane, Vertices: []Vertex{v[0], v[len(v)-1]}})
}

// Measure gives the planform of one line under the settings.
func Measure(line Line, s Settings) (*Measured, error) {
	length, err := Length(line)
	if err != nil {
		return nil, err
	}
	chord, err := Chord(line)
	if err != nil {
		return nil, err
	}
	p := length / chord
	return &Measured{Name: line.Name, Vertices: len(line.Vertices), ChannelLengthM: length, ChordM: chord,
		ValleyLengthM: ValleyLengths{EndToEnd: chord, Inflections: chord}, ReachSinuosity: p, MeanSinuosity: p,
		P90Sinuosity: p, PeakSinuosity: p, Settings: s}, nil
}
