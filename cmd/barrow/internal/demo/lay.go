package demo

import (
	"fmt"
	"math"
	"math/rand/v2"

	"example.org/barrow/graphio"
)

// lay puts down junctions on a shaken grid, leaves out the water, and joins
// neighbours by streets of which one in five is missing.
func lay(seed uint64) *streets {
	r := chance(seed, streetStream)
	g := shakenGrid(r)
	links := g.links(r)
	g.keepLargest(links)
	return g.streets(links)
}

// A grid holds the places of junctions by row and column; bank 0 is no junction.
type grid struct {
	x, y [rows * columns]float64
	bank [rows * columns]int
}

func shakenGrid(r *rand.Rand) *grid {
	g := &grid{}
	for i := range g.x {
		shake := func() float64 { return float64((r.Float64() - 0.5) * (0.55 * spacing)) }
		g.x[i] = tenth((float64(i%columns)+0.5)*spacing + shake())
		g.y[i] = tenth((float64(i/columns)+0.5)*spacing + shake())
		g.bank[i] = bank(g.x[i], g.y[i])
	}
	return g
}

// links are the streets: four in five of those between neighbours on a bank,
// the others where without them a junction could not be reached, and a few
// diagonals.
func (g *grid) links(r *rand.Rand) [][2]int {
	var kept, spare [][2]int
	for i := range g.x {
		right, up := i%columns+1 < columns, i/columns+1 < rows
		for _, n := range []struct {
			to   int
			is   bool
			keep float64
		}{{i + 1, right, 0.8}, {i + columns, up, 0.8}, {i + columns + 1, right && up, 0.06}} {
			draw := r.Float64()
			if !n.is || g.bank[i] == 0 || g.bank[i] != g.bank[n.to] ||
				bank((g.x[i]+g.x[n.to])/2, (g.y[i]+g.y[n.to])/2) == 0 {
				continue
			}
			if link := [2]int{i, n.to}; draw < n.keep {
				kept = append(kept, link)
			} else if n.keep > 0.5 {
				spare = append(spare, link)
			}
		}
	}
	parts := newParts(len(g.x))
	for _, l := range kept {
		parts.join(l[0], l[1])
	}
	for _, l := range spare {
		if parts.join(l[0], l[1]) {
			kept = append(kept, l)
		}
	}
	return kept
}

// keepLargest takes away junctions cut off from the largest part of their bank.
func (g *grid) keepLargest(links [][2]int) {
	parts := newParts(len(g.x))
	for _, l := range links {
		parts.join(l[0], l[1])
	}
	size := make([]int, len(g.x))
	for i := range g.x {
		size[parts.root(i)]++
	}
	largest := map[int]int{}
	for i, b := range g.bank {
		p := parts.root(i)
		if best, found := largest[b]; b != 0 && (!found || size[p] > size[best]) {
			largest[b] = p
		}
	}
	for i, b := range g.bank {
		if b != 0 && parts.root(i) != largest[b] {
			g.bank[i] = 0
		}
	}
}

// streets names what is left and adds the bridges.
func (g *grid) streets(links [][2]int) *streets {
	s := &streets{}
	node := make([]int, len(g.x))
	number := make([]int, len(quarters))
	for i := range g.x {
		if g.bank[i] == 0 {
			continue
		}
		q := quarterOf(g.x[i], g.y[i])
		number[q]++
		node[i] = s.add(fmt.Sprintf("%s-%03d", quarters[q].code, number[q]), quarters[q].name, g.x[i], g.y[i])
	}
	for _, l := range links {
		if g.bank[l[0]] != 0 {
			s.join(node[l[0]], node[l[1]], 1.06) // streets bend a little
		}
	}
	for _, b := range []struct {
		name, code string
		x          float64
	}{{"Heron Bridge", "heron-bridge", 900}, {"Market Bridge", "market-bridge", 2420}, {"Tar Bridge", "tar-bridge", 3650}} {
		s.bridge(b.name, b.code, b.x)
	}
	return s
}

func (s *streets) add(name, district string, x, y float64) int {
	s.names = append(s.names, name)
	s.district = append(s.district, district)
	s.x, s.y = append(s.x, x), append(s.y, y)
	return len(s.names) - 1
}

func (s *streets) join(u, v int, bend float64) {
	length := tenth(float64(bend * apart(s.x[u], s.y[u], s.x[v], s.y[v])))
	s.edges = append(s.edges, graphio.Edge{From: int32(u), To: int32(v), Length: length})
}

// bridge crosses the water near x, between the nearest junctions on the banks.
func (s *streets) bridge(name, code string, x float64) {
	y := waterMiddle(x)
	ends := map[int]int{}
	for side := -1; side <= 1; side += 2 {
		least := math.Inf(1)
		for v := range s.names {
			if d := apart(s.x[v], s.y[v], x, y); bank(s.x[v], s.y[v]) == side && d < least {
				ends[side], least = v, d
			}
		}
	}
	b := Bridge{Name: name, North: ends[1], South: ends[-1]}
	b.Mid = s.add(code, s.district[b.North], tenth((s.x[b.North]+s.x[b.South])/2), tenth((s.y[b.North]+s.y[b.South])/2))
	s.join(b.North, b.Mid, 1)
	s.join(b.Mid, b.South, 1)
	s.bridges = append(s.bridges, b)
}

// parts are the connected parts of the junctions: a forest whose roots name
// them (Tarjan 1975, with paths halved).
type parts []int

func newParts(n int) parts {
	p := make(parts, n)
	for i := range p {
		p[i] = i
	}
	return p
}

func (p parts) root(i int) int {
	for p[i] != i {
		p[i] = p[p[i]]
		i = p[i]
	}
	return i
}

// join reports whether the two were apart.
func (p parts) join(i, j int) bool {
	a, b := p.root(i), p.root(j)
	p[max(a, b)] = min(a, b)
	return a != b
}
