package exact

import (
	"cmp"
	"math"
	"slices"

	"example.org/barrow/graphio"
)

// A Movement is mass that a result's flow takes from one node to another.
type Movement struct {
	From, To int32 // nodes; Outside for mass created or removed
	Mass     float64
	Length   float64 // of the way along the flow, the cost of creating or removing included
}

// Outside is where created mass comes from and removed mass goes.
const Outside = -1

// Movements takes the flow apart into movements from where p exceeds q to where
// q exceeds p. A flow can be taken apart in more ways than one where streams
// meet: here what comes first to a node goes on first, nodes in the order of
// the flow. Masses times lengths add up to Upper, but for rounding. Mass that
// stays at its node is no movement.
//
// The parts are ordered by From and To, and those of one pair of nodes and
// Length are one. Cost: O(movements × edges on their ways).
func (r *Result) Movements() []Movement {
	s := newStream(r)
	var list []Movement
	for _, v := range s.order() {
		list = s.pass(v, list)
	}
	slices.SortFunc(list, func(a, b Movement) int {
		return cmp.Or(cmp.Compare(a.From, b.From), cmp.Compare(a.To, b.To), cmp.Compare(a.Length, b.Length))
	})
	merged := list[:0]
	for _, m := range list {
		if k := len(merged) - 1; k >= 0 && merged[k].From == m.From && merged[k].To == m.To && merged[k].Length == m.Length {
			merged[k].Mass += m.Mass
			continue
		}
		merged = append(merged, m)
	}
	return merged
}

// Stayed is the mass of p that is at its node in q, too.
func (r *Result) Stayed() float64 {
	perP, perQ := r.units()
	at := map[int32]float64{}
	for i, v := range r.p.Nodes {
		at[v] = r.p.Values[i] / perP
	}
	stayed := 0.0
	for i, v := range r.q.Nodes {
		stayed += min(at[v], r.q.Values[i]/perQ)
	}
	return stayed
}

// stream is a flow as arcs that carry parcels from node to node.
type stream struct {
	r      *Result
	list   []graphio.Edge
	out    [][]int32 // edges with flow out of each node
	in     []int32   // how many lead in
	excess []float64 // p − q
	parcel [][]Movement
	least  float64 // mass below which there is only rounding
}

func newStream(r *Result) *stream {
	n := r.net.Order()
	s := &stream{r: r, list: r.net.EdgeList(), out: make([][]int32, n), in: make([]int32, n), excess: make([]float64, n), parcel: make([][]Movement, n)}
	perP, perQ := r.units()
	total := 0.0
	for i, v := range r.p.Nodes {
		s.excess[v] += r.p.Values[i] / perP
		total += r.p.Values[i] / perP
	}
	for i, v := range r.q.Nodes {
		s.excess[v] -= r.q.Values[i] / perQ
	}
	s.least = 1e-15 * total
	for i, f := range r.Flow {
		if math.Abs(f) > s.least {
			from, to := s.ends(int32(i))
			s.out[from] = append(s.out[from], int32(i))
			s.in[to]++
		}
	}
	return s
}

// ends are the nodes that an edge's flow leads from and to.
func (s *stream) ends(i int32) (from, to int32) {
	e := s.list[i]
	if s.r.Flow[i] < 0 {
		return e.To, e.From
	}
	return e.From, e.To
}

// order lists the nodes so that flow leads from earlier to later ones: the edges
// of a result's flow close no cycle.
func (s *stream) order() []int32 {
	var order []int32
	left := slices.Clone(s.in)
	for v := range left {
		if left[v] == 0 {
			order = append(order, int32(v))
		}
	}
	for k := 0; k < len(order); k++ {
		for _, i := range s.out[order[k]] {
			_, to := s.ends(i)
			if left[to]--; left[to] == 0 {
				order = append(order, to)
			}
		}
	}
	return order
}

// pass hands on what has come to a node, and what begins there: first to what
// the node lacks, then to what is removed, then to its edges. The last taker
// gets all that is left, so that rounding does not pile up.
func (s *stream) pass(v int32, list []Movement) []Movement {
	parcels := s.parcel[v]
	s.parcel[v] = nil
	outside := 0.0 // removed above 0, created below
	if u := s.r.Unmatched; u != nil {
		outside = u[v]
	}
	if outside < -s.least {
		parcels = append(parcels, Movement{From: Outside, Mass: -outside, Length: s.r.opt.Unmatched})
	}
	if s.excess[v] > s.least {
		parcels = append(parcels, Movement{From: v, Mass: s.excess[v]})
	}
	takers := len(s.out[v])
	if s.excess[v] < -s.least {
		for _, m := range take(&parcels, -s.excess[v], takers == 0 && outside <= s.least) {
			m.To = v
			list = append(list, m)
		}
	}
	if outside > s.least {
		for _, m := range take(&parcels, outside, takers == 0) {
			m.To = Outside
			m.Length += s.r.opt.Unmatched
			list = append(list, m)
		}
	}
	for k, i := range s.out[v] {
		_, to := s.ends(i)
		for _, m := range take(&parcels, math.Abs(s.r.Flow[i]), k == takers-1) {
			m.Length += s.list[i].Length
			s.parcel[to] = append(s.parcel[to], m)
		}
	}
	return list
}

// take splits so much mass off the front of the parcels, or takes all of them.
func take(parcels *[]Movement, mass float64, all bool) []Movement {
	p := *parcels
	if all {
		*parcels = nil
		return p
	}
	var taken []Movement
	for len(p) > 0 && mass > 0 {
		m := p[0]
		if m.Mass > mass {
			p[0].Mass -= mass
			m.Mass = mass
		} else {
			p = p[1:]
		}
		mass -= m.Mass
		taken = append(taken, m)
	}
	*parcels = p
	return taken
}

// A Corridor is a path of edges that much of the flow follows.
type Corridor struct {
	Nodes  []int32 // in the direction of the flow
	Length float64
	Mass   float64 // mean along the path
	Cost   float64 // mass times length of all edges on it
}

// Corridors finds the heaviest paths of a flow, at most count: each begins at
// the edge with most mass that is on no path yet and goes on both ways along the
// heaviest edge while that carries at least half as much. No edge is on two.
// Cost: O(edges log edges).
func (r *Result) Corridors(count int) []Corridor {
	s := newStream(r)
	into := make([][]int32, len(s.out))
	var heavy []int32
	for v := range s.out {
		for _, i := range s.out[v] {
			_, to := s.ends(i)
			into[to] = append(into[to], i)
			heavy = append(heavy, i)
		}
	}
	mass := func(i int32) float64 { return math.Abs(r.Flow[i]) }
	slices.SortFunc(heavy, func(a, b int32) int { return cmp.Or(cmp.Compare(mass(b), mass(a)), cmp.Compare(a, b)) })
	used := make([]bool, len(r.Flow))
	next := func(edges []int32, least float64) int32 {
		best := int32(noEdge)
		for _, i := range edges {
			if !used[i] && mass(i) >= least && (best == noEdge || mass(i) > mass(best)) {
				best = i
			}
		}
		return best
	}
	var list []Corridor
	for _, first := range heavy {
		if len(list) == count {
			break
		}
		if used[first] {
			continue
		}
		used[first] = true
		path := []int32{first}
		for {
			_, end := s.ends(path[len(path)-1])
			i := next(s.out[end], mass(first)/2)
			if i == noEdge {
				break
			}
			used[i] = true
			path = append(path, i)
		}
		for {
			begin, _ := s.ends(path[0])
			i := next(into[begin], mass(first)/2)
			if i == noEdge {
				break
			}
			used[i] = true
			path = slices.Insert(path, 0, i)
		}
		list = append(list, s.corridor(path))
	}
	return list
}

func (s *stream) corridor(path []int32) Corridor {
	var c Corridor
	for _, i := range path {
		from, to := s.ends(i)
		if c.Nodes == nil {
			c.Nodes = append(c.Nodes, from)
		}
		c.Nodes = append(c.Nodes, to)
		length := s.list[i].Length
		c.Length += length
		c.Cost += float64(length * math.Abs(s.r.Flow[i]))
	}
	c.Mass = c.Cost / c.Length
	return c
}

// A Transfer is all that moves from one district to another.
type Transfer struct {
	From, To   string
	Mass, Cost float64
}

// Between sums movements by the district of their ends, one label a node; mass
// created or removed has the label outside. Districts stand in the order of
// their labels. The costs add up to those of the movements.
func Between(list []Movement, district []string, outside string) []Transfer {
	name := func(v int32) string {
		if v == Outside {
			return outside
		}
		return district[v]
	}
	at := map[[2]string]int{}
	var sums []Transfer
	for _, m := range list {
		key := [2]string{name(m.From), name(m.To)}
		k, known := at[key]
		if !known {
			k = len(sums)
			at[key] = k
			sums = append(sums, Transfer{From: key[0], To: key[1]})
		}
		sums[k].Mass += m.Mass
		sums[k].Cost += float64(m.Mass * m.Length)
	}
	slices.SortFunc(sums, func(a, b Transfer) int { return cmp.Or(cmp.Compare(a.From, b.From), cmp.Compare(a.To, b.To)) })
	return sums
}

// Travelled is the length that a share of the moved mass goes at most: 0.5 for
// the median, 0.9 for all but a tenth. 0 where nothing moves.
func Travelled(list []Movement, share float64) float64 {
	sorted := slices.Clone(list)
	slices.SortFunc(sorted, func(a, b Movement) int { return cmp.Compare(a.Length, b.Length) })
	total := 0.0
	for _, m := range sorted {
		total += m.Mass
	}
	sum := 0.0
	for _, m := range sorted {
		if sum += m.Mass; sum >= share*total*(1-1e-12) {
			return m.Length
		}
	}
	return 0
}
