package graphiotest

import "example.org/barrow/graphio"

// A ParkMiller is the "minimal standard" random number generator of Park and
// Miller 1988, s ← 16807·s mod 2³¹−1; its value is the last s, at first the seed.
type ParkMiller uint64

// Next advances the generator.
func (s *ParkMiller) Next() uint64 {
	*s = *s * 16807 % 2147483647
	return uint64(*s)
}

// An Instance is a network with whole lengths and two samples of whole masses
// A and B, with equal totals, that any program can make again from the seed.
// W is the distance from A to B of the raw masses.
type Instance struct {
	Name             string
	Net              *graphio.Network
	A, B             graphio.Sample
	Lengths, Mass, W float64 // sum of lengths, total of A, distance
}

// Instances is the table of instances whose distance is known.
//
// Lengths, Mass and W come from LEMON 1.3.1, its NetworkSimplex and CostScaling
// agreeing; W of the tree also from the closed form Σ length·|mass below|.
func Instances() []Instance {
	list := []Instance{
		IntegerGrid(20, 20, 1), IntegerGrid(100, 100, 7), IntegerGrid(200, 200, 3),
		IntegerOneWayGrid(20, 20, 1), IntegerTree(1000, 1), IntegerCycle(500, 1),
	}
	known := []Instance{
		{Name: "grid 20x20, seed 1", Lengths: 36609, Mass: 207215, W: 5873971},
		{Name: "grid 100x100, seed 7", Lengths: 992213, Mass: 4980690, W: 150487186},
		{Name: "grid 200x200, seed 3", Lengths: 4034035, Mass: 19984032, W: 653762735},
		{Name: "one-way grid 20x20, seed 1", Lengths: 75291, Mass: 205213, W: 6693534},
		{Name: "tree 1000, seed 1", Lengths: 25050, Mass: 515743, W: 16740004},
		{Name: "cycle 500, seed 1", Lengths: 12360, Mass: 259572, W: 23099933},
	}
	for i, k := range known {
		list[i].Name, list[i].Lengths, list[i].Mass, list[i].W = k.Name, k.Lengths, k.Mass, k.W
	}
	return list
}

// IntegerGrid has node r·columns+c; for the nodes in order, right edge then
// down edge, the length is 1 + s mod 100.
func IntegerGrid(rows, columns int, seed uint64) Instance {
	s := ParkMiller(seed)
	return supplied(grid(rows, columns, func() float64 { return 1 + float64(s.Next()%100) }), &s)
}

// IntegerOneWayGrid is IntegerGrid with two one-way edges for each edge; the
// length of the way back is drawn straight after that of the way there.
func IntegerOneWayGrid(rows, columns int, seed uint64) Instance {
	s := ParkMiller(seed)
	return supplied(eachWay(rows, columns, func() float64 { return 1 + float64(s.Next()%100) }), &s)
}

// IntegerTree joins each node i > 0 to node s mod i by length 1 + s mod 50.
func IntegerTree(n int, seed uint64) Instance {
	s := ParkMiller(seed)
	var edges []graphio.Edge
	for i := 1; i < n; i++ {
		parent := int(s.Next() % uint64(i))
		edges = append(edges, edge(parent, i, 1+float64(s.Next()%50)))
	}
	return supplied(network(numbered(n), edges), &s)
}

// IntegerCycle joins each node i to i+1 mod n by length 1 + s mod 50.
func IntegerCycle(n int, seed uint64) Instance {
	s := ParkMiller(seed)
	return supplied(ring(n, false, func() float64 { return 1 + float64(s.Next()%50) }), &s)
}

// supplied draws a and b below 1000 for each node in turn, and evens out the
// totals at the first node of b or the last of a.
func supplied(net *graphio.Network, s *ParkMiller) Instance {
	n := net.Order()
	a, b := make([]float64, n), make([]float64, n)
	gap := 0.0
	for v := range n {
		a[v] = float64(s.Next() % 1000)
		b[v] = float64(s.Next() % 1000)
		gap += a[v] - b[v]
	}
	if gap > 0 {
		b[0] += gap
	} else {
		a[n-1] -= gap
	}
	return Instance{Net: net, A: dense("a", a), B: dense("b", b)}
}
