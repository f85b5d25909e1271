package views

import (
	"math"
	"strconv"
)

// pathPiece is one run of straight lines.
type pathPiece struct {
	points [][2]float64
	closed bool
}

// curvePieces are the straight lines that stand for one cubic curve: the pieces
// of a ribbon turn by less than 65 degrees, so that 12 are not seen in print.
const curvePieces = 12

// pathArguments are the numbers each path command takes.
var pathArguments = map[byte]int{'M': 2, 'm': 2, 'L': 2, 'l': 2, 'H': 1, 'h': 1, 'V': 1, 'v': 1, 'C': 6, 'c': 6, 'S': 4, 's': 4}

// pathReader follows path data with a pen.
type pathReader struct {
	out    []pathPiece
	x, y   float64
	hx, hy float64 // second handle of the last curve
	curved bool
}

// pathPieces reads the path data that the figures write: M L H V C S and their
// relatives, and z.
func pathPieces(d string) []pathPiece {
	var r pathReader
	var cmd byte
	var args []float64
	for i := 0; i < len(d); {
		ch := d[i]
		switch {
		case ch == ' ' || ch == ',' || ch == '\n':
			i++
		case ch == 'z' || ch == 'Z':
			r.close()
			args = args[:0]
			i++
		case ch >= 'A' && ch <= 'z':
			cmd, args = ch, args[:0]
			i++
		default:
			j := i + 1
			dot := ch == '.'
			for j < len(d) && (d[j] >= '0' && d[j] <= '9' || d[j] == '.' && !dot) {
				dot = dot || d[j] == '.'
				j++
			}
			if v, err := strconv.ParseFloat(d[i:j], 64); err == nil {
				args = append(args, v)
			}
			i = j
			if n := pathArguments[cmd]; n > 0 && len(args) == n {
				r.step(cmd, args)
				args = args[:0]
				// Further pairs after a move are lines.
				switch cmd {
				case 'M':
					cmd = 'L'
				case 'm':
					cmd = 'l'
				}
			}
		}
	}
	return r.out
}

func (r *pathReader) close() {
	if n := len(r.out); n > 0 && len(r.out[n-1].points) > 0 {
		r.out[n-1].closed = true
		r.x, r.y = r.out[n-1].points[0][0], r.out[n-1].points[0][1]
	}
}

func (r *pathReader) to(x, y float64) {
	r.x, r.y = x, y
	if len(r.out) == 0 || r.out[len(r.out)-1].closed {
		r.out = append(r.out, pathPiece{})
	}
	p := &r.out[len(r.out)-1]
	p.points = append(p.points, [2]float64{x, y})
}

func (r *pathReader) step(cmd byte, a []float64) {
	bx, by := 0.0, 0.0 // small letters count from the pen
	if cmd >= 'a' {
		bx, by = r.x, r.y
	}
	switch cmd {
	case 'M', 'm':
		r.out = append(r.out, pathPiece{})
		r.to(bx+a[0], by+a[1])
	case 'L', 'l':
		r.to(bx+a[0], by+a[1])
	case 'H', 'h':
		r.to(bx+a[0], r.y)
	case 'V', 'v':
		r.to(r.x, by+a[0])
	case 'C', 'c':
		r.curve(bx+a[0], by+a[1], bx+a[2], by+a[3], bx+a[4], by+a[5])
		return
	case 'S', 's':
		hx, hy := r.x, r.y
		if r.curved { // the handle before, turned about the pen
			hx, hy = 2*r.x-r.hx, 2*r.y-r.hy
		}
		r.curve(hx, hy, bx+a[0], by+a[1], bx+a[2], by+a[3])
		return
	}
	r.curved = false
}

func (r *pathReader) curve(x1, y1, x2, y2, x3, y3 float64) {
	x0, y0 := r.x, r.y
	for k := 1; k <= curvePieces; k++ {
		t := float64(k) / curvePieces
		u := 1 - t
		r.to(u*u*u*x0+3*u*u*t*x1+3*u*t*t*x2+t*t*t*x3, u*u*u*y0+3*u*u*t*y1+3*u*t*t*y2+t*t*t*y3)
	}
	r.hx, r.hy, r.curved = x2, y2, true
}

// affine is x' = a x + c y + e, y' = b x + d y + f.
type affine struct{ a, b, c, d, e, f float64 }

var sameAffine = affine{a: 1, d: 1}

// then applies m first, then n.
func (m affine) then(n affine) affine {
	return affine{
		n.a*m.a + n.c*m.b, n.b*m.a + n.d*m.b,
		n.a*m.c + n.c*m.d, n.b*m.c + n.d*m.d,
		n.a*m.e + n.c*m.f + n.e, n.b*m.e + n.d*m.f + n.f,
	}
}

func (m affine) at(x, y float64) (float64, float64) {
	return m.a*x + m.c*y + m.e, m.b*x + m.d*y + m.f
}

// scale is the mean stretch.
func (m affine) scale() float64 { return math.Sqrt(math.Abs(m.a*m.d - m.b*m.c)) }
