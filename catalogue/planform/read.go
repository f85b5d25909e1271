package planform

// Read finds the lines of a file. It is known by its content type, its name
// and its content, in that order of trust.
func Read(data []byte, contentType, name string, s Settings) ([]Line, []Refused, error) {
	return nil, nil, &InputError{"body", "the file is none of the formats read here"}
}

// MeasureFile reads a file and measures every line in it.
func MeasureFile(data []byte, contentType, name string, s Settings) (*Report, error) {
	lines, refused, err := Read(data, contentType, name, s)
	if err != nil {
		return nil, err
	}
	r := &Report{Lines: []Measured{}, Refused: refused}
	for _, l := range lines {
		m, err := Measure(l, s)
		if err != nil {
			r.Refused = append(r.Refused, Refused{l.Name, err.Error()})
			continue
		}
		r.Lines = append(r.Lines, *m)
	}
	return r, nil
}
