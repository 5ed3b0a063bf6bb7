package diffusion

import (
	"math"
	"math/rand/v2"
)

// Options says how a Cascade is laid out.
type Options struct {
	// Full keeps every time on the network itself: the reference, whose cost
	// grows with the square root of the longest time and whose memory with the
	// number of scales.
	Full bool
	// Width is how many values a sample should take at most, in multiples of
	// the number of nodes; 0 stands for 2.5. Networks with many components may
	// need more. With Full it has no effect.
	Width float64
	// Tolerance of the truncation of each Chebyshev series; 0 stands for 1e-6,
	// about what float32 holds.
	Tolerance float64
}

// A Schedule is what was chosen for a network, for the record.
type Schedule struct {
	T0        float64   `json:"t0"`        // 1/Top: the fastest mode has fallen to 1/e
	Times     []float64 `json:"times"`     // t_k = T0 2^k, in mean steps of the walk
	Gap       float64   `json:"gap"`       // smallest eigenvalue of L above 0, estimated
	Top       float64   `json:"top"`       // largest eigenvalue of L, estimated
	Levels    []int     `json:"levels"`    // nodes on each level of the hierarchy
	Level     []int     `json:"level"`     // level of each scale
	Loss      float64   `json:"loss"`      // share of the norm a scale may lose by moving up a level
	Width     int       `json:"width"`     // values a sample takes in all
	Tolerance float64   `json:"tolerance"` // of the truncation of each series
	Full      bool      `json:"full"`      // every scale on the network itself
}

// Scales is the number of scales: what the first time smooths away, one for
// each pair of neighbouring times, and what the last time leaves.
func (s *Schedule) Scales() int { return len(s.Times) + 1 }

const (
	mixed     = 3  // the last time lets the slowest mode fall below e^-mixed
	mostTimes = 40 // dyadic times at most: 2^40 steps
)

// dyadic sets t_0 by the fastest mode and adds times up to mixing.
func (s *Schedule) dyadic() {
	s.T0 = 1
	if s.Top > 0 {
		s.T0 = 1 / s.Top
	}
	for t := s.T0; ; t *= 2 {
		s.Times = append(s.Times, t)
		if len(s.Times) > 1 && (s.Gap <= 0 || t*s.Gap >= mixed) || len(s.Times) == mostTimes {
			return
		}
	}
}

// losses are tried in turn until the scales fit the width asked for.
var losses = []float64{0.02, 0.05, 0.1, 0.15, 0.2, 0.25, 0.3, 0.35, 0.4, 0.5, 0.6, 1}

// layOut chooses the level of each scale. A scale moves up a level where that
// costs its L1 norm no more than loss, judged on pairs of point masses sent
// through the cascade; scale k lies on level k at most, that is on about
// nodes/2^k aggregates. The last loss allows every move, and stands even where
// it does not fit.
func (c *Cascade) layOut(width float64) {
	s := &c.Schedule
	for _, s.Loss = range losses {
		if c.chooseLevels(int(width * float64(c.Order()))) {
			return
		}
	}
}

// chooseLevels reports whether the scales fit the width. It gives up on the
// way where they do not, unless nothing is left to try.
func (c *Cascade) chooseLevels(width int) (fits bool) {
	s := &c.Schedule
	y, level := c.advance(c.pairs(), 0, s.Times[0]), 0
	s.Level, s.Width = append(s.Level[:0], 0), c.Order()
	for k := 1; k < len(s.Times); k++ {
		t := s.Times[k] - s.Times[k-1]
		z := c.advance(y, level, t)
		whole := differences(y, z)
		for level+1 < min(k+1, c.h.Levels()) {
			up := restricted(c.h, y, level, level+1)
			upZ := c.advance(up, level+1, t)
			if kept(differences(up, upZ), whole) < 1-s.Loss {
				break
			}
			y, z, level = up, upZ, level+1
		}
		s.Level, s.Width = append(s.Level, level), s.Width+len(y)/lanes
		if s.Width > width && s.Loss < 1 {
			return false
		}
		y = z
	}
	s.Level, s.Width = append(s.Level, level), s.Width+len(y)/lanes
	return s.Width <= width
}

func restricted(h *Hierarchy, x []float32, from, to int) []float32 {
	dst := make([]float32, h.walks[to].Order()*lanes)
	restrict(h, dst, x, lanes, from, to)
	return dst
}

// pairs is a panel of differences of point masses: half of them on the ends of
// a random link, half on random nodes of one component.
func (c *Cascade) pairs() []float32 {
	w := c.h.walks[0]
	rng := rand.New(rand.NewPCG(5, 6))
	x := make([]float32, w.Order()*lanes)
	linked := w.weight.NNZ()
	if linked == 0 {
		return x
	}
	for l := range lanes {
		k := rng.IntN(linked)
		v := w.weight.col[k]
		u := w.weight.col[w.weight.start[v]]
		for range l % 2 * 64 { // walk away from the link
			row := w.weight.col[w.weight.start[u]:w.weight.start[u+1]]
			u = row[rng.IntN(len(row))]
		}
		x[int(v)*lanes+l]++
		x[int(u)*lanes+l]--
	}
	return x
}

func (c *Cascade) advance(x []float32, level int, t float64) []float32 {
	block := func() []float32 { return make([]float32, len(x)) }
	acc := block()
	c.steps[level].heat([][]float32{acc}, x, lanes, []float64{t}, c.Schedule.Tolerance, [2][]float32{block(), block()})
	return acc
}

// differences is the L1 norm of each column of a - b.
func differences(a, b []float32) (norm [lanes]float64) {
	for i := range a {
		norm[i%lanes] += math.Abs(float64(a[i]) - float64(b[i]))
	}
	return norm
}

// kept is the mean share of the norms that is left.
func kept(now, before [lanes]float64) float64 {
	share, count := 0.0, 0.0
	for l, b := range before {
		if b > 1e-6 {
			share, count = share+now[l]/b, count+1
		}
	}
	if count == 0 {
		return 1
	}
	return share / count
}
