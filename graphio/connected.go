package graphio

import (
	"cmp"
	"fmt"
	"math"
	"slices"
	"strings"

	"gonum.org/v1/gonum/spatial/kdtree"
)

// CheckConnected checks that mass can get from any sample to any other: that
// each component of the network, directions left aside, holds the same share
// of every sample. Mass of all samples in one component is the usual case.
//
// Errors: *Faults that name each sample with mass apart from where most mass
// is, and the ways out. Cost: O(nodes + edges + entries).
func CheckConnected(net *Network, samples *Samples) error {
	label, count := net.Components()
	if count <= 1 {
		return nil
	}
	shares := make([]map[int32]float64, samples.Len()) // by component
	whole := make([]float64, count)
	for i := range shares {
		shares[i] = componentShares(samples.At(i), label)
		for c, x := range shares[i] {
			whole[c] += x
		}
	}
	main := 0
	for c, x := range whole {
		if x > whole[main] {
			main = c
		}
	}
	if sameShares(shares) {
		return nil
	}
	var faults FaultList
	for i := range shares {
		s := samples.At(i)
		apart, at := 0.0, int32(-1)
		for k, v := range s.Nodes {
			if label[v] != int32(main) {
				apart += s.Values[k]
				if at < 0 {
					at = v
				}
			}
		}
		if at < 0 {
			continue
		}
		faults.Add(Fault{
			Found: fmt.Sprintf("sample %q has %.3g %% of its mass in other parts of the network than most mass is, first at node %q (the network is in %d parts)",
				s.Name, 100*apart/s.Total(), net.Name(int(at)), count),
			Want: "a connected network: join its parts with --bridge LENGTH, or let mass be created and removed with --mass amount --unmatched COST",
		})
	}
	return faults.Err()
}

func componentShares(s Sample, label []int32) map[int32]float64 {
	shares := make(map[int32]float64)
	total := s.Total()
	for k, v := range s.Nodes {
		shares[label[v]] += s.Values[k] / total
	}
	return shares
}

// sameShares reports whether all samples with mass have the same shares, up to
// rounding.
func sameShares(shares []map[int32]float64) bool {
	var first map[int32]float64
	for _, s := range shares {
		if len(s) == 0 {
			continue
		}
		if first == nil {
			first = s
		}
		if len(s) != len(first) {
			return false
		}
		for c, x := range s {
			if math.Abs(x-first[c]) > 1e-12 {
				return false
			}
		}
	}
	return true
}

// bridge joins each further component to the largest by one edge, which runs
// both ways, and says so in a warning. With coordinates the edge joins the pair
// of nodes that lie nearest to each other; without, the first node of each.
// Cost: O(nodes log² nodes).
func bridge(n *Network, length float64, source *Source) {
	label, count := n.Components()
	if count <= 1 {
		return
	}
	largest := largestComponent(label, count)
	pairs := firstPairs(label, count, largest)
	if n.x != nil {
		pairs = nearestPairs(n, label, count, largest)
	}
	const most = 10
	var list []string
	for c, p := range pairs {
		if c == largest {
			continue
		}
		n.edges = append(n.edges, Edge{From: p[0], To: p[1], Length: length, Weight: 1 / length})
		if len(list) < most {
			list = append(list, fmt.Sprintf("%q to %q", n.Name(int(p[0])), n.Name(int(p[1]))))
		}
	}
	n.connect()
	more := ""
	if count-1 > most {
		more = fmt.Sprintf(" and %d more", count-1-most)
	}
	source.warn("the network is in %d parts; added %d edges of length %v to join them: %s%s", count, count-1, length, strings.Join(list, ", "), more)
}

func largestComponent(label []int32, count int) int {
	size := make([]int, count)
	for _, c := range label {
		size[c]++
	}
	largest := 0
	for c, s := range size {
		if s > size[largest] {
			largest = c
		}
	}
	return largest
}

// firstPairs is, by component, the first node of the largest and its own.
func firstPairs(label []int32, count, largest int) [][2]int32 {
	first := make([]int32, count)
	for v := len(label) - 1; v >= 0; v-- {
		first[label[v]] = int32(v)
	}
	pairs := make([][2]int32, count)
	for c := range pairs {
		pairs[c] = [2]int32{first[largest], first[c]}
	}
	return pairs
}

// nearestPairs is, by component, the node of the largest and its own that lie
// nearest to each other. Degrees are compared on the unit sphere, by chords.
func nearestPairs(n *Network, label []int32, count, largest int) [][2]int32 {
	var members spots
	for v, c := range label {
		if c == int32(largest) {
			members = append(members, n.spot(v))
		}
	}
	tree := kdtree.New(members, false)
	pairs := make([][2]int32, count)
	best := make([]float64, count)
	for c := range best {
		best[c] = math.Inf(1)
	}
	for v, c := range label {
		if c == int32(largest) {
			continue
		}
		if near, gap := tree.Nearest(n.spot(v)); gap < best[c] {
			best[c] = gap
			pairs[c] = [2]int32{near.(spot).node, int32(v)}
		}
	}
	return pairs
}

// spot is a node's place in the plane or on the unit sphere.
type spot struct {
	kdtree.Point
	node int32
}

func (n *Network) spot(v int) spot {
	if !n.geographic {
		return spot{kdtree.Point{n.x[v], n.y[v]}, int32(v)}
	}
	sinLon, cosLon := math.Sincos(n.x[v] * math.Pi / 180)
	sinLat, cosLat := math.Sincos(n.y[v] * math.Pi / 180)
	return spot{kdtree.Point{cosLat * cosLon, cosLat * sinLon, sinLat}, int32(v)}
}

func (s spot) Compare(c kdtree.Comparable, d kdtree.Dim) float64 {
	return s.Point[d] - c.(spot).Point[d]
}

func (s spot) Distance(c kdtree.Comparable) float64 {
	sum := 0.0
	for d, x := range s.Point {
		gap := x - c.(spot).Point[d]
		sum += float64(gap * gap)
	}
	return sum
}

type spots []spot

func (s spots) Index(i int) kdtree.Comparable         { return s[i] }
func (s spots) Len() int                              { return len(s) }
func (s spots) Slice(start, end int) kdtree.Interface { return s[start:end] }

// Pivot sorts, where the library's own medians would make the tree, and so the
// choice between equal gaps, depend on chance.
func (s spots) Pivot(d kdtree.Dim) int {
	slices.SortFunc(s, func(a, b spot) int {
		return cmp.Or(cmp.Compare(a.Point[d], b.Point[d]), cmp.Compare(a.node, b.node))
	})
	return len(s) / 2
}
