package expectation

import (
	"math/rand/v2"
	"slices"
	"sync"
)

// chance is what one draw takes from its stream, in this order.
type chance struct {
	set, res, one float64 // uniform: parameter set, residual, is P = 1
	donor         float64 // uniform: the row that stands in for what is not given
	where         deviates
}

// deviates are the standard normal and uniform numbers of one place.
type deviates struct{ age, day, lat, uAge float64 }

func deviatesFrom(rng *rand.Rand) deviates {
	return deviates{rng.NormFloat64(), rng.NormFloat64(), rng.NormFloat64(), rng.Float64()}
}

// chancesOf are the draws of a seed; draw j comes from its own stream
// PCG(seed, j), so no number depends on who asks for it.
func chancesOf(seed uint64, n int) []chance {
	out := make([]chance, n)
	var pcg rand.PCG
	rng := rand.New(&pcg)
	for j := range out {
		pcg.Seed(seed, uint64(j))
		out[j] = chance{rng.Float64(), rng.Float64(), rng.Float64(), rng.Float64(), deviatesFrom(rng)}
	}
	return out
}

// Bounds of what is kept for the targets to come: those of a batch mostly share
// a seed, a number of draws and what they leave open.
const (
	mostStreams = 4
	longestKept = 20_000 // draws
	mostDonors  = 64
)

// memory keeps the draws of the seeds asked for last, and the donors by what a
// target leaves open. The zero value is ready.
type memory struct {
	mu      sync.Mutex
	streams []stream // newest use last
	donors  map[openness]*donors
}

type stream struct {
	seed    uint64
	chances []chance
}

// openness is what decides which rows may stand in for what a target leaves
// open.
type openness struct {
	level     [len(factors)]int16
	withSlope bool
}

// chances returns chancesOf, from memory if it can.
func (m *memory) chances(seed uint64, n int) []chance {
	if n > longestKept {
		return chancesOf(seed, n)
	}
	m.mu.Lock()
	defer m.mu.Unlock()
	for i, s := range m.streams {
		if s.seed == seed && len(s.chances) >= n {
			m.streams = append(slices.Delete(m.streams, i, i+1), s)
			return s.chances[:n]
		}
	}
	s := stream{seed, chancesOf(seed, n)}
	if m.streams = append(m.streams, s); len(m.streams) > mostStreams {
		m.streams = slices.Delete(m.streams, 0, 1)
	}
	return s.chances
}

// donorsOf returns find() for one openness, from memory if it can.
func (m *memory) donorsOf(key openness, find func() donors) *donors {
	m.mu.Lock()
	defer m.mu.Unlock()
	if d := m.donors[key]; d != nil {
		return d
	}
	d := find()
	d.index()
	if m.donors == nil || len(m.donors) >= mostDonors {
		m.donors = map[openness]*donors{}
	}
	m.donors[key] = &d
	return &d
}
