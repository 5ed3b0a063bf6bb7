package inference

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"strconv"
)

// A Scheme says which samples may be exchanged when there is no effect. The
// zero value exchanges all freely.
//
//   - Blocks (a label a sample): exchange within a block only. Pairs, such as
//     before and after, are blocks of two: every exchange is a choice of pairs to
//     swap, the sign flips of Fisher 1935.
//   - Plots (a label a sample): samples of a plot stay together and in order, and
//     whole plots of the same size are exchanged; for factors that were given to
//     plots as a whole (nested designs) and for series cut into stretches
//     longer than their memory.
//   - Shift: no shuffling; samples, or plots, are rotated in the order they stand
//     in, each block by an amount of its own, or all blocks by the same where
//     Together is set. For stationary series of which the end may be joined to
//     the beginning.
//
// A rearrangement must leave the joint distribution as it is when there is no
// effect; then P keeps its level exactly (Anderson & ter Braak 2003). Shifts of
// a series with a trend do not.
type Scheme struct {
	Blocks, Plots   []string
	Shift, Together bool
}

// An arranger draws and enumerates the rearrangements of a scheme. An
// arrangement gives for each sample the one whose labels it gets.
type arranger struct {
	n        int
	sets     []exchange
	shift    bool
	together bool
	total    float64 // distinct arrangements; +Inf where float64 cannot hold it
}

// An exchange is a set of units that may take each other's place.
type exchange struct {
	units [][]int32 // the samples of each unit
	kinds []int     // units of one kind are told apart by no statistic
	count []int     // units of each kind
	total float64
}

// arrange lays out the scheme for n samples; samples of the same class are told
// apart by no statistic, and classes nil means that all are.
func (s Scheme) arrange(n int, classes []int32) (*arranger, error) {
	sets, err := s.sets(n)
	if err != nil {
		return nil, err
	}
	a := &arranger{n: n, sets: sets, shift: s.Shift, together: s.Together, total: 1}
	for k := range a.sets {
		e := &a.sets[k]
		e.classify(classes)
		switch {
		case s.Shift && s.Together:
			if len(e.units) != len(a.sets[0].units) {
				return nil, fmt.Errorf("%w: blocks of %d and %d cannot be shifted together; want blocks of equal length", ErrDesign, len(a.sets[0].units), len(e.units))
			}
			a.total = float64(len(e.units))
		case s.Shift:
			a.total *= float64(len(e.units))
		default:
			a.total *= e.total
		}
	}
	if a.total <= 1 || s.Shift && a.still() {
		return nil, fmt.Errorf("%w: the restrictions allow no rearrangement that changes anything; is the factor the same within each block (confounded with it), or different within plots?", ErrDesign)
	}
	return a, nil
}

// still reports whether no shift changes any unit's kind.
func (a *arranger) still() bool {
	for _, e := range a.sets {
		if len(e.count) > 1 {
			return false
		}
	}
	return true
}

// sets groups units by block and, where units are shuffled, by size.
func (s Scheme) sets(n int) ([]exchange, error) {
	for _, c := range []struct {
		name   string
		labels []string
	}{{"blocks", s.Blocks}, {"plots", s.Plots}} {
		if c.labels != nil && len(c.labels) != n {
			return nil, fmt.Errorf("%w: %d labels of %s for %d samples", ErrDesign, len(c.labels), c.name, n)
		}
	}
	var blocks, plots index
	var units [][]int32
	var block []int
	for i := range n {
		b, u := 0, i
		if s.Blocks != nil {
			b = blocks.of(s.Blocks[i])
		}
		if s.Plots != nil {
			u = plots.of(s.Plots[i])
		}
		if u == len(units) {
			units, block = append(units, nil), append(block, b)
		}
		if block[u] != b {
			return nil, fmt.Errorf("%w: plot %q lies in two blocks; want each plot in one", ErrDesign, s.Plots[i])
		}
		units[u] = append(units[u], int32(i))
	}
	var where index
	var sets []exchange
	for u, samples := range units {
		key := strconv.Itoa(block[u])
		if !s.Shift {
			key += " " + strconv.Itoa(len(samples))
		}
		k := where.of(key)
		if k == len(sets) {
			sets = append(sets, exchange{})
		}
		if e := &sets[k]; len(e.units) > 0 && len(e.units[0]) != len(samples) {
			return nil, fmt.Errorf("%w: plots of %d and %d samples cannot be shifted; want plots of equal size", ErrDesign, len(e.units[0]), len(samples))
		}
		sets[k].units = append(sets[k].units, samples)
	}
	return sets, nil
}

// An index numbers labels in the order they first appear.
type index map[string]int

func (x *index) of(label string) int {
	if *x == nil {
		*x = index{}
	}
	k, seen := (*x)[label]
	if !seen {
		k = len(*x)
		(*x)[label] = k
	}
	return k
}

// classify finds the units that look the same and counts their orders.
func (e *exchange) classify(classes []int32) {
	var kinds index
	e.kinds = make([]int, len(e.units))
	for u, samples := range e.units {
		key := strconv.Itoa(u)
		if classes != nil {
			key = ""
			for _, i := range samples {
				key += strconv.Itoa(int(classes[i])) + " "
			}
		}
		e.kinds[u] = kinds.of(key)
	}
	e.count = make([]int, len(kinds))
	for _, k := range e.kinds {
		e.count[k]++
	}
	e.total = orders(e.count)
}

// orders is the number of distinct orders of things of which count[k] are alike.
func orders(count []int) float64 {
	total, placed := 1.0, 0
	for _, c := range count {
		for k := 1; k <= c; k++ {
			placed++
			total = math.Round(total * float64(placed) / float64(k)) // a binomial at each step
			if total > 1<<53 {
				return math.Inf(1)
			}
		}
	}
	return total
}

// mix spreads the bits of x (Steele, Lea & Flood 2014, the finisher of
// SplitMix), so that neighbouring numbers start streams that are unlike.
func mix(x uint64) uint64 {
	x += 0x9e3779b97f4a7c15
	x = (x ^ x>>30) * 0xbf58476d1ce4e5b9
	x = (x ^ x>>27) * 0x94d049bb133111eb
	return x ^ x>>31
}

// stream is the random stream number k of a seed.
func stream(seed, k uint64) *rand.Rand { return rand.New(rand.NewPCG(mix(seed), mix(k))) }

// random sets dst to arrangement number k of the seed.
func (a *arranger) random(dst []int32, seed, k uint64) {
	rng := stream(seed, k)
	turn := -1
	for _, e := range a.sets {
		if a.shift {
			if turn < 0 || !a.together {
				turn = rng.IntN(len(e.units))
			}
			e.rotate(dst, turn)
			continue
		}
		for u, from := range rng.Perm(len(e.units)) {
			e.place(dst, u, from)
		}
	}
}

// nth sets dst to number k of all distinct arrangements.
func (a *arranger) nth(dst []int32, k uint64) {
	turn := k
	for _, e := range a.sets {
		if a.shift {
			n := uint64(len(e.units))
			e.rotate(dst, int(turn%n))
			if !a.together {
				turn /= n
			}
			continue
		}
		e.nth(dst, k%uint64(e.total))
		k /= uint64(e.total)
	}
}

func (e *exchange) rotate(dst []int32, turn int) {
	for u := range e.units {
		e.place(dst, u, (u+turn)%len(e.units))
	}
}

// place gives the samples of unit u the labels of unit from.
func (e *exchange) place(dst []int32, u, from int) {
	for k, i := range e.units[u] {
		dst[i] = e.units[from][k]
	}
}

// nth is order number k of the kinds in lexicographic order, units of a kind
// keeping theirs.
func (e *exchange) nth(dst []int32, k uint64) {
	left := slices.Clone(e.count)
	taken := make([]int, len(left)) // units of the kind used up
	members := make([][]int, len(left))
	for u, kind := range e.kinds {
		members[kind] = append(members[kind], u)
	}
	total := uint64(e.total)
	for u := range e.units {
		rest := uint64(len(e.units) - u)
		for kind, c := range left {
			if c == 0 {
				continue
			}
			// orders of the rest that begin with this kind
			begin := total * uint64(c) / rest
			if k >= begin {
				k -= begin
				continue
			}
			e.place(dst, u, members[kind][taken[kind]])
			taken[kind]++
			left[kind]--
			total = begin
			break
		}
	}
}
