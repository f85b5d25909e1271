package planform

import (
	"container/heap"
	"math"
)

// minTurn is the least angle, radians, by which a bend must turn between its
// inflections: 5 degrees, the turn of a sine-generated curve of sinuosity
// 1.0005. Convention; it keeps rounding and straight reaches from counting as
// bends.
const minTurn = 5 * degree

// stretch is a part of the line that turns to one side.
type stretch struct {
	from, to   float64 // u
	turn       float64 // radians, left positive
	prev, next int
	place      int // in the heap; -1 when merged away
}

// inflections are the places where the smoothed curvature changes side, after
// stretches that turn by less than minTurn or are shorter than minArc metres
// have been merged with their neighbours, smallest turn first. Nothing within
// half a filter of an end is trusted.
func (r *samples) inflections(c *curve, points int, minArc float64) []float64 {
	all := r.stretches(c, points/2)
	h := &smallest{all: all}
	for i := range all {
		if r.minor(&all[i], minArc) {
			all[i].place = len(h.order)
			h.order = append(h.order, i)
		}
	}
	heap.Init(h)
	for h.Len() > 0 {
		i := heap.Pop(h).(int)
		r.absorb(h, i, minArc)
	}
	var out []float64
	for i := range all {
		if all[i].place != gone && all[i].next >= 0 {
			out = append(out, all[i].to)
		}
	}
	return out
}

// minor says whether a stretch is too small to be a bend. A stretch at an end
// of the line is part of a bend of unknown size, and stays.
func (r *samples) minor(s *stretch, minArc float64) bool {
	if s.prev < 0 || s.next < 0 {
		return false
	}
	return math.Abs(s.turn) < minTurn || r.arc(s.to)-r.arc(s.from) < minArc
}

// stretches cuts the line at every change of sign of the curvature.
func (r *samples) stretches(c *curve, margin int) []stretch {
	margin = max(margin, 1)
	all := []stretch{{from: 0, prev: -1, next: -1, place: -1}}
	cur := &all[0]
	last, at := 0.0, 0 // latest curvature that is not 0, and its sample
	for i := 0; i <= r.n; i++ {
		k := c.kappa[i]
		if k != 0 && last*k < 0 && i > margin && i <= r.n-margin {
			// Across a run without curvature the middle is taken, so that the
			// reversed line has the same inflections.
			u := float64(at+i) / 2
			if at == i-1 {
				u = float64(at) + last/(last-k)
			}
			cur.to = u
			cur.next = len(all)
			all = append(all, stretch{from: u, prev: len(all) - 1, next: -1, place: -1})
			cur = &all[len(all)-1]
		}
		if k != 0 && i >= margin {
			last, at = k, i
		}
		cur.turn += k * r.step
	}
	cur.to = float64(r.n)
	return all
}

const gone = -2 // place of a stretch that has been merged into another

// absorb merges stretch i with its neighbours, which turn the same way as each
// other, and files the result again if it is still minor.
func (r *samples) absorb(h *smallest, i int, minArc float64) {
	s := &h.all[i]
	for _, j := range []int{s.prev, s.next} {
		if j < 0 {
			continue
		}
		o := &h.all[j]
		if o.place >= 0 {
			heap.Remove(h, o.place)
		}
		s.from, s.to = math.Min(s.from, o.from), math.Max(s.to, o.to)
		s.turn += o.turn
		o.place = gone
		if j == s.prev {
			s.prev = o.prev
			if s.prev >= 0 {
				h.all[s.prev].next = i
			}
		} else {
			s.next = o.next
			if s.next >= 0 {
				h.all[s.next].prev = i
			}
		}
	}
	s.place = -1
	if r.minor(s, minArc) {
		heap.Push(h, i)
	}
}

// smallest is a heap of the minor stretches by how little they turn.
type smallest struct {
	all   []stretch
	order []int
}

func (h *smallest) Len() int { return len(h.order) }
func (h *smallest) Less(a, b int) bool {
	return math.Abs(h.all[h.order[a]].turn) < math.Abs(h.all[h.order[b]].turn)
}
func (h *smallest) Swap(a, b int) {
	h.order[a], h.order[b] = h.order[b], h.order[a]
	h.all[h.order[a]].place, h.all[h.order[b]].place = a, b
}
func (h *smallest) Push(x any) {
	i := x.(int)
	h.all[i].place = len(h.order)
	h.order = append(h.order, i)
}
func (h *smallest) Pop() any {
	i := h.order[len(h.order)-1]
	h.order = h.order[:len(h.order)-1]
	h.all[i].place = -1
	return i
}
