package views

import (
	"image/color"
	"strconv"
	"strings"
)

// cssRule is one rule of standaloneStyle: an element name or a list of classes
// that must all be there.
type cssRule struct {
	element string
	classes []string
	set     map[string]string
}

// parseCSS reads the flat style sheet of stand-alone figures: rules of element
// or class selectors, no nesting, no combinators.
func parseCSS(sheet string) []cssRule {
	var out []cssRule
	for _, block := range strings.Split(sheet, "}") {
		selectors, body, ok := strings.Cut(block, "{")
		if !ok {
			continue
		}
		set := map[string]string{}
		for _, d := range strings.Split(body, ";") {
			if name, value, ok := strings.Cut(d, ":"); ok {
				set[strings.TrimSpace(name)] = strings.TrimSpace(value)
			}
		}
		if f := strings.Fields(set["font"]); len(f) > 0 {
			set["font-size"] = f[0]
		}
		for _, s := range strings.Split(selectors, ",") {
			parts := strings.Split(strings.TrimSpace(s), ".")
			out = append(out, cssRule{parts[0], parts[1:], set})
		}
	}
	return out
}

// style is what holds for one element.
type style map[string]string

// style collects the rules that match, the more classes the stronger, then the
// later.
func (b *brush) style(element string, a attrs) style {
	out := style{"fill": "#000"}
	have := strings.Fields(a["class"])
	for weight := 0; weight <= 3; weight++ {
		for _, r := range b.rules {
			if len(r.classes) != weight || r.element != "" && r.element != element || !containsAll(have, r.classes) {
				continue
			}
			for k, v := range r.set {
				out[k] = v
			}
		}
	}
	return out
}

func containsAll(have, want []string) bool {
	for _, w := range want {
		if !holds(have, w) {
			return false
		}
	}
	return true
}

func (s style) num(name string, def float64) float64 {
	v, err := strconv.ParseFloat(strings.TrimSuffix(s[name], "px"), 64)
	if err != nil {
		return def
	}
	return v
}

// colour is the colour of a fill or stroke, blended with the white ground by
// its opacity, so that a file needs no transparency.
func (s style) colour(name string) (color.Color, bool) {
	c, ok := hexColour(s[name])
	if !ok {
		return nil, false
	}
	o := s.num(name+"-opacity", 1)
	mix := func(v uint8) uint8 { return uint8(255 - (255-float64(v))*o + 0.5) }
	return color.RGBA{mix(c.R), mix(c.G), mix(c.B), 255}, true
}

// pathPiece is one run of straight lines.
type pathPiece struct {
	points [][2]float64
	closed bool
}

// pathPieces reads the path data that Plot writes: M L H V h v l m z.
func pathPieces(d string) []pathPiece {
	var out []pathPiece
	var x, y float64
	var cmd byte
	args := []float64{}
	start := func() { out = append(out, pathPiece{}) }
	add := func() {
		if len(out) == 0 {
			start()
		}
		p := &out[len(out)-1]
		p.points = append(p.points, [2]float64{x, y})
	}
	step := func() {
		need := map[byte]int{'M': 2, 'm': 2, 'L': 2, 'l': 2, 'H': 1, 'h': 1, 'V': 1, 'v': 1}[cmd]
		for need > 0 && len(args) >= need {
			switch cmd {
			case 'M', 'm':
				if cmd == 'm' {
					x, y = x+args[0], y+args[1]
				} else {
					x, y = args[0], args[1]
				}
				start()
				cmd = map[byte]byte{'M': 'L', 'm': 'l'}[cmd] // further pairs are lines
			case 'L':
				x, y = args[0], args[1]
			case 'l':
				x, y = x+args[0], y+args[1]
			case 'H':
				x = args[0]
			case 'h':
				x += args[0]
			case 'V':
				y = args[0]
			case 'v':
				y += args[0]
			}
			add()
			args = args[need:]
		}
	}
	for i := 0; i < len(d); {
		ch := d[i]
		switch {
		case ch == ' ' || ch == ',':
			i++
		case ch == 'z' || ch == 'Z':
			step()
			if n := len(out); n > 0 && len(out[n-1].points) > 0 {
				out[n-1].closed = true
				x, y = out[n-1].points[0][0], out[n-1].points[0][1]
			}
			i++
		case ch >= 'A' && ch <= 'z':
			step()
			cmd, args = ch, args[:0]
			i++
		default:
			j := i + 1
			dot := ch == '.'
			for j < len(d) && (d[j] >= '0' && d[j] <= '9' || d[j] == '.' && !dot) {
				dot = dot || d[j] == '.'
				j++
			}
			v, err := strconv.ParseFloat(d[i:j], 64)
			if err == nil {
				args = append(args, v)
			}
			i = j
		}
	}
	step()
	return out
}
