package inference

import (
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"

	"gonum.org/v1/gonum/stat"

	"example.org/barrow/dual/pairwise"
)

// A Linkage says how far apart two clusters are.
type Linkage int

const (
	Average  Linkage = iota // mean distance between them
	Complete                // largest
	Single                  // smallest
	// Ward is the root of twice the growth of the sum of squares when they are
	// joined, on squared distances: the distance itself for two samples (Ward
	// 1963; Murtagh & Legendre 2014, their form D2).
	Ward
)

// A Merge joins two clusters: numbers below the number of samples are samples,
// the others the merges before, in order. A is the smaller number.
type Merge struct {
	A, B   int
	Height float64
	Size   int
}

// A Tree is a hierarchy of clusters, merges by rising height.
type Tree struct {
	Names  []string
	Merges []Merge
}

// Cluster builds a hierarchy by joining nearest clusters, along chains of
// nearest neighbours (Benzécri 1982; Murtagh 1983), with distances updated as
// Lance & Williams 1967. Of equal distances the one found first joins first.
//
// Errors: ErrMatrix, ErrDesign, ErrOption. Cost: O(n²), memory of n²/2 numbers.
func Cluster(d *pairwise.Matrix, linkage Linkage) (*Tree, error) {
	if err := checkMatrix(d, 2); err != nil {
		return nil, err
	}
	if linkage < Average || linkage > Ward {
		return nil, fmt.Errorf("%w: no linkage number %d", ErrOption, linkage)
	}
	n := len(d.Names)
	c := &chain{d: &pairwise.Matrix{Names: d.Names, Value: slices.Clone(d.Value)}, size: make([]int, n), linkage: linkage}
	for i := range n {
		c.size[i] = 1
	}
	if linkage == Ward {
		for k, v := range c.d.Value {
			c.d.Value[k] = float64(v * v)
		}
	}
	merges := c.run()
	if linkage == Ward {
		for k := range merges {
			merges[k].Height = math.Sqrt(max(merges[k].Height, 0))
		}
	}
	return &Tree{Names: d.Names, Merges: numbered(merges, n)}, nil
}

// A chain holds the distances of the clusters that remain, each standing at
// one of its samples; size 0 is no longer there.
type chain struct {
	d       *pairwise.Matrix
	size    []int
	linkage Linkage
}

// run joins clusters that are each other's nearest, in the order found.
func (c *chain) run() []Merge {
	n := len(c.size)
	var path []int
	var merges []Merge
	start := 0
	for len(merges) < n-1 {
		if len(path) == 0 {
			for c.size[start] == 0 {
				start++
			}
			path = append(path, start)
		}
		tip := path[len(path)-1]
		near, least := -1, math.Inf(1)
		if len(path) > 1 { // the one before wins ties, so that chains end
			near = path[len(path)-2]
			least = c.d.At(tip, near)
		}
		for j, size := range c.size {
			if size == 0 || j == tip {
				continue
			}
			if v := c.d.At(tip, j); v < least {
				near, least = j, v
			}
		}
		if len(path) > 1 && near == path[len(path)-2] {
			path = path[:len(path)-2]
			merges = append(merges, Merge{A: near, B: tip, Height: least})
			c.join(near, tip, least)
			continue
		}
		path = append(path, near)
	}
	return merges
}

// join puts cluster b into a.
func (c *chain) join(a, b int, apart float64) {
	x, y := float64(c.size[a]), float64(c.size[b])
	for j, size := range c.size {
		if size == 0 || j == a || j == b {
			continue
		}
		u, v := c.d.At(a, j), c.d.At(b, j)
		z := float64(size)
		var w float64
		switch c.linkage {
		case Average:
			w = (x*u + y*v) / (x + y)
		case Complete:
			w = max(u, v)
		case Single:
			w = min(u, v)
		case Ward:
			w = ((x+z)*u + (y+z)*v - z*apart) / (x + y + z)
		}
		c.d.Value[c.d.Index(a, j)] = w
	}
	c.size[a] += c.size[b]
	c.size[b] = 0
}

// numbered orders merges by height and names clusters by the merge that made
// them. Chains find merges out of order, but a cluster always before those it
// becomes part of, and sorting keeps that as heights do not fall.
func numbered(merges []Merge, n int) []Merge {
	slices.SortStableFunc(merges, func(a, b Merge) int {
		switch {
		case a.Height < b.Height:
			return -1
		case a.Height > b.Height:
			return 1
		}
		return 0
	})
	parent := make([]int, n)
	id, size := make([]int, n), make([]int, n)
	for i := range n {
		parent[i], id[i], size[i] = i, i, 1
	}
	root := func(i int) int {
		for parent[i] != i {
			parent[i] = parent[parent[i]]
			i = parent[i]
		}
		return i
	}
	for k := range merges {
		m := &merges[k]
		a, b := root(m.A), root(m.B)
		m.A, m.B = min(id[a], id[b]), max(id[a], id[b])
		m.Size = size[a] + size[b]
		parent[b] = a
		id[a], size[a] = n+k, m.Size
	}
	return merges
}

// Cut is the cluster of each sample when count clusters are left, numbered from
// 0 in the order of their first samples. count must lie between 1 and the
// number of samples.
func (t *Tree) Cut(count int) ([]int, error) {
	n := len(t.Names)
	if count < 1 || count > n {
		return nil, fmt.Errorf("%w: %d clusters of %d samples", ErrOption, count, n)
	}
	top := make([]int, n+len(t.Merges))
	for k := range top {
		top[k] = k
	}
	for k := n - count - 1; k >= 0; k-- {
		m := t.Merges[k]
		top[m.A], top[m.B] = top[n+k], top[n+k]
	}
	label := make([]int, n)
	seen := map[int]int{}
	for i := range n {
		k, known := seen[top[i]]
		if !known {
			k = len(seen)
			seen[top[i]] = k
		}
		label[i] = k
	}
	return label, nil
}

// Cophenetic is, for each pair of samples, the height at which they are joined.
// Cost: O(n²).
func (t *Tree) Cophenetic() *pairwise.Matrix {
	n := len(t.Names)
	m := &pairwise.Matrix{Names: t.Names, Value: make([]float64, n*(n-1)/2)}
	members := make([][]int, n+len(t.Merges))
	for i := range n {
		members[i] = []int{i}
	}
	for k, g := range t.Merges {
		for _, i := range members[g.A] {
			for _, j := range members[g.B] {
				m.Value[m.Index(i, j)] = g.Height
			}
		}
		members[n+k] = append(members[g.A], members[g.B]...)
		members[g.A], members[g.B] = nil, nil
	}
	return m
}

// CopheneticCorrelation is Pearson's correlation of the distances with the
// heights at which the tree joins the pairs (Sokal & Rohlf 1962).
func (t *Tree) CopheneticCorrelation(d *pairwise.Matrix) float64 {
	return stat.Correlation(d.Value, t.Cophenetic().Value, nil)
}

// Newick writes the tree in Newick form, each branch as long as its height above
// the one below, halved so that two samples lie as far apart along the tree as
// the height that joins them.
func (t *Tree) Newick() string {
	n := len(t.Names)
	text := make([]string, n+len(t.Merges))
	height := make([]float64, len(text))
	for i, name := range t.Names {
		text[i] = newickName(name)
	}
	for k, m := range t.Merges {
		height[n+k] = m.Height
		side := func(x int) string {
			return text[x] + ":" + strconv.FormatFloat((m.Height-height[x])/2, 'g', -1, 64)
		}
		text[n+k] = "(" + side(m.A) + "," + side(m.B) + ")"
		text[m.A], text[m.B] = "", ""
	}
	return text[len(text)-1] + ";"
}

// newickName quotes a name that holds what Newick gives a meaning.
func newickName(name string) string {
	if name != "" && !strings.ContainsAny(name, " \t\n()[]{}/\\,;:=*'\"`+-<>_") {
		return name
	}
	return "'" + strings.ReplaceAll(name, "'", "''") + "'"
}
