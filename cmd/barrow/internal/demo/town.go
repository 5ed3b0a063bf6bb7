package demo

import (
	"fmt"
	"math"
	"math/rand/v2"

	"example.org/barrow/graphio"
)

// The streams of chance, so that a change to one part leaves the others alone.
const (
	streetStream = iota + 1
	placeStream
	routeStream
	countStream
)

func chance(seed, stream uint64) *rand.Rand { return rand.New(rand.NewPCG(seed, stream)) }

// A Town is the invented place with its counts.
type Town struct {
	Name    string
	Net     *graphio.Network
	Samples *graphio.Samples
	Labels  []Label // of each sample
	Bridges []Bridge
	Closed  int // index of the bridge closed in the second week
}

// A Bridge crosses the water by two edges that meet at its middle node.
type Bridge struct {
	Name              string
	North, Mid, South int // nodes
}

// A Label is when a sample was counted.
type Label struct {
	Day     int    // 1 to 14
	Weekday string // mon to sun
	Hour    int    // 0 to 23, the hour that begins then
	Week    int    // 1 or 2
	Open    bool   // whether all bridges were open
}

// Sizes of the town, in metres.
const (
	wide    = 4830
	tall    = 3640
	spacing = 86
	columns = wide / spacing
	rows    = tall / spacing
)

// New invents the town of a seed.
func New(seed uint64) *Town {
	t := &Town{Name: "Marrowick", Closed: 1}
	streets := lay(seed)
	t.Bridges = streets.bridges
	t.Net = streets.network(nil)
	t.count(seed, streets)
	return t
}

// streets is the network while it is laid out.
type streets struct {
	names, district []string
	x, y            []float64
	edges           []graphio.Edge
	bridges         []Bridge
}

// network makes the network, with lengths multiplied by stretch if not nil.
func (s *streets) network(stretch []float64) *graphio.Network {
	edges := append([]graphio.Edge(nil), s.edges...)
	for i := range edges {
		if stretch != nil {
			edges[i].Length *= stretch[i]
		}
		edges[i].Weight = 1 / edges[i].Length
	}
	net, err := graphio.NewNetwork(append([]string(nil), s.names...), edges)
	if err != nil {
		panic(fmt.Sprintf("demo: %v", err)) // the layout has no faults by construction
	}
	if err := net.SetPlaces(s.x, s.y, false); err != nil {
		panic(fmt.Sprintf("demo: %v", err))
	}
	if err := net.SetDistricts(s.district); err != nil {
		panic(fmt.Sprintf("demo: %v", err))
	}
	return net
}

// The water runs from the west and widens into a harbour in the east.
func waterMiddle(x float64) float64 {
	u := x/(wide/2) - 1
	return tall/2 + float64(420*float64(u*(1-float64(u*u))))
}

func waterHalf(x float64) float64 {
	u := x / wide
	return 95 + float64(230*float64(u*float64(u*u)))
}

// bank is +1 north of the water, -1 south of it and 0 in it.
func bank(x, y float64) int {
	switch off := y - waterMiddle(x); {
	case off > waterHalf(x):
		return 1
	case off < -waterHalf(x):
		return -1
	}
	return 0
}

// A quarter is a district: where its middle is, and what draws traffic there.
type quarter struct {
	name, code                      string
	x, y                            float64
	homes, offices, market, leisure float64
	harbour                         float64
}

var quarters = []quarter{
	{name: "Lantern Hill", code: "lantern", x: 900, y: 3200, homes: 9, offices: 1, leisure: 1},
	{name: "Staithe End", code: "staithe", x: 900, y: 2300, homes: 5, offices: 3, leisure: 2},
	{name: "Netloft", code: "netloft", x: 2450, y: 2650, homes: 4, offices: 10, market: 8, leisure: 5},
	{name: "Tarrow Quay", code: "tarrow", x: 4050, y: 2850, homes: 2, offices: 4, harbour: 10, leisure: 1},
	{name: "Orchard Rise", code: "orchard", x: 800, y: 600, homes: 8, offices: 1, leisure: 1},
	{name: "Cooperfield", code: "cooper", x: 2400, y: 1250, homes: 6, offices: 4, market: 2, leisure: 2},
	{name: "Windrow", code: "windrow", x: 2700, y: 400, homes: 9, offices: 2, leisure: 1},
	{name: "Saltmere", code: "saltmere", x: 4150, y: 700, homes: 5, offices: 1, leisure: 8},
}

// quarterOf is the nearest quarter on the same bank.
func quarterOf(x, y float64) int {
	best, least := -1, math.Inf(1)
	side := bank(x, y)
	for q, c := range quarters {
		if d := apart(x, y, c.x, c.y); bank(c.x, c.y) == side && d < least {
			best, least = q, d
		}
	}
	return best
}

func apart(x1, y1, x2, y2 float64) float64 {
	dx, dy := x1-x2, y1-y2
	return math.Sqrt(float64(dx*dx) + float64(dy*dy))
}

// tenth rounds to a decimetre, which also takes off what processors differ in.
func tenth(x float64) float64 { return math.Round(x*10) / 10 }
