package resistor

import (
	"cmp"
	"math/rand/v2"
	"slices"
	"sort"

	"gonum.org/v1/gonum/floats"
)

// A factor is an approximate L D Lᵀ of a Laplacian: column i belongs to the
// i-th node eliminated and holds weight_ij/Σweight for its neighbours j then,
// all of them later. inverse is 1/Σweight, 0 for the last node of a component.
type factor struct {
	order   []int32 // node eliminated i-th
	place   []int32 // of each node in order
	start   []int
	row     []int32 // places
	value   []float64
	inverse []float64
	// Up to place cut elimination is exact; what is left then is the core, a
	// network of its own, whose elimination is sampled. cut is the number of
	// nodes where all are eliminated exactly.
	cut  int
	core edges // by places from the cut on
}

// edges lists edges by their ends, nodes or places.
type edges struct {
	from, to []int32
	weight   []float64
}

func (f *factor) exact() bool { return f.cut == len(f.order) }

const (
	// whole is the number of neighbours up to which elimination is exact where
	// it cannot be exact throughout.
	whole = 24
	// effort is how many new edges an exact elimination may make for each node
	// and edge, most in all, and densest how many nodes may be left when it
	// stops, or when all of them are about to be neighbours, to be eliminated
	// as a full matrix. Road networks of a hundred thousand nodes stay within;
	// past it, a solve takes five to ten steps on the core.
	effort  = 300
	most    = 45_000_000
	densest = 1400
)

// half is one end of an edge, as the other end keeps it.
type half struct {
	to     int32
	weight float64
}

// eliminator is a network being eliminated.
type eliminator struct {
	half  [][]half // may list a neighbour twice, and nodes that are gone
	kept  []int    // length of half when it was last swept
	live  []int    // entries of half whose node is left
	gone  []bool
	queue *queue
	at    []int32 // place + 1 of a neighbour in the list being swept
	rng   *rand.Rand
	f     *factor

	whole int // neighbours up to which elimination is exact
	spent int // edges made
}

// eliminate factors the Laplacian of the edges between n nodes. The same edges
// give the same factor. It is exact if that takes no more than effort.
// Cost: about O(edges log edges) where degrees are small.
func eliminate(n int, from, to []int32, weight []float64) *factor {
	if effort*(n+len(from)) <= 2*most { // else it would hardly come to an end
		if f := eliminateUpTo(n, n, from, to, weight); f != nil {
			return f
		}
	}
	return eliminateUpTo(whole, n, from, to, weight)
}

// eliminateUpTo is exact at nodes of up to whole neighbours; nil where all are
// and that takes more than effort.
func eliminateUpTo(whole, n int, from, to []int32, weight []float64) *factor {
	e := &eliminator{half: make([][]half, n), kept: make([]int, n), live: make([]int, n), gone: make([]bool, n), queue: newQueue(n), at: make([]int32, n), whole: whole}
	e.rng = rand.New(rand.NewPCG(7, 8)) // fixed: the factor is part of the method
	e.f = &factor{order: make([]int32, 0, n), place: make([]int32, n), start: make([]int, 1, n+1)}
	e.link(from, to, weight)
	for v := n - 1; v >= 0; v-- {
		e.queue.set(int32(v), len(e.half[v]))
	}
	for v := e.queue.next(); v != none; v = e.queue.next() {
		degree := e.remove(v)
		if whole < n {
			continue
		}
		left, late := n-len(e.f.order), e.spent > min(most, effort*(n+len(from)))
		if late && left > densest {
			return nil
		}
		if late || left <= densest && 2*degree > left {
			e.dense()
			break
		}
	}
	if e.f.cut == 0 {
		e.f.cut = n
	}
	for k, v := range e.f.row {
		e.f.row[k] = e.f.place[v]
	}
	for _, ends := range [][]int32{e.f.core.from, e.f.core.to} {
		for k, v := range ends {
			ends[k] = e.f.place[v] - int32(e.f.cut)
		}
	}
	e.f.postorder()
	return e.f
}

func (e *eliminator) link(from, to []int32, weight []float64) {
	degree := make([]int, len(e.half))
	for k := range from {
		degree[from[k]]++
		degree[to[k]]++
	}
	store := make([]half, 2*len(from))
	for v, d := range degree {
		e.half[v], store, e.kept[v], e.live[v] = store[:0:d], store[d:], d, d
	}
	for k, w := range weight {
		u, v := from[k], to[k]
		e.half[u], e.half[v] = append(e.half[u], half{v, w}), append(e.half[v], half{u, w})
	}
}

// sweep drops from the list of v the nodes that are gone, and lists each
// neighbour once, in the order they were first listed.
func (e *eliminator) sweep(v int32) []half {
	list, end := e.half[v], 0
	for _, h := range list {
		if e.gone[h.to] {
			continue
		}
		if k := e.at[h.to]; k > 0 {
			list[k-1].weight += h.weight
			continue
		}
		list[end] = h
		end++
		e.at[h.to] = int32(end)
	}
	list = list[:end]
	for _, h := range list {
		e.at[h.to] = 0
	}
	e.half[v], e.kept[v], e.live[v] = list, end, end
	return list
}

// remove eliminates v: its column, and edges between its neighbours, of which it
// returns the number.
func (e *eliminator) remove(v int32) (degree int) {
	list := e.sweep(v)
	e.gone[v] = true
	f := e.f
	f.place[v] = int32(len(f.order))
	f.order = append(f.order, v)
	sum := 0.0
	for _, h := range list {
		sum += h.weight
	}
	for _, h := range list {
		f.row, f.value = append(f.row, h.to), append(f.value, h.weight/sum)
		e.live[h.to]--
	}
	f.start = append(f.start, len(f.row))
	if len(list) == 0 {
		f.inverse = append(f.inverse, 0)
		return 0
	}
	f.inverse = append(f.inverse, 1/sum)
	if len(list) <= e.whole {
		e.spent += len(list) * len(list) / 2
		e.clique(list, sum)
	} else {
		if f.cut == 0 {
			e.keepCore(v, list)
		}
		e.sample(list, sum)
	}
	for _, h := range list {
		// Short lists are kept exact, long ones swept as they double.
		if l := len(e.half[h.to]); l <= 64 || l > 2*e.kept[h.to] {
			e.sweep(h.to)
		}
		e.queue.set(h.to, e.live[h.to])
	}
	e.half[v] = nil
	return len(list)
}

func (e *eliminator) join(u, v int32, w float64) {
	e.half[u], e.half[v] = append(e.half[u], half{v, w}), append(e.half[v], half{u, w})
	e.live[u]++
	e.live[v]++
}

// keepCore takes down what is left when v, the first node to be sampled, is
// about to go.
func (e *eliminator) keepCore(v int32, list []half) {
	f := e.f
	f.cut = len(f.order) - 1
	add := func(u int32, h half) {
		f.core.from, f.core.to, f.core.weight = append(f.core.from, u), append(f.core.to, h.to), append(f.core.weight, h.weight)
	}
	for _, h := range list {
		add(v, h)
	}
	for u := range e.half {
		if e.gone[u] {
			continue
		}
		for _, h := range e.half[u] {
			if int(h.to) > u && !e.gone[h.to] {
				add(int32(u), h)
			}
		}
	}
}

// clique joins all neighbours: between i and j goes weight_i weight_j/Σweight.
func (e *eliminator) clique(list []half, sum float64) {
	for i, a := range list {
		for _, b := range list[i+1:] {
			e.join(a.to, b.to, a.weight*b.weight/sum)
		}
	}
}

// sample joins each neighbour, by rising weight, to one of those of larger
// weight, chosen in proportion to it, such that the mean is the clique (Kyng &
// Sachdeva 2016, CliqueSample, in the form of Gao, Kyng & Spielman 2023).
func (e *eliminator) sample(list []half, sum float64) {
	slices.SortFunc(list, func(a, b half) int {
		return cmp.Or(cmp.Compare(a.weight, b.weight), cmp.Compare(a.to, b.to))
	})
	upTo := make([]float64, len(list))
	total := 0.0
	for i, h := range list {
		total += h.weight
		upTo[i] = total
	}
	for i, a := range list[:len(list)-1] {
		above := total - upTo[i]
		x := upTo[i] + e.rng.Float64()*above
		k := i + 1 + sort.SearchFloat64s(upTo[i+1:len(list)-1], x)
		e.join(a.to, list[k].to, a.weight*above/sum)
	}
}

// dense eliminates the nodes that are left, as a full matrix.
func (e *eliminator) dense() {
	var left []int32
	for v := e.queue.next(); v != none; v = e.queue.next() {
		left = append(left, v)
		e.at[v] = int32(len(left))
	}
	n, f := len(left), e.f
	a := make([]float64, n*n)
	for i, v := range left {
		for _, h := range e.half[v] {
			if !e.gone[h.to] {
				a[i*n+int(e.at[h.to])-1] += h.weight
			}
		}
	}
	for i, v := range left {
		f.place[v] = int32(len(f.order))
		f.order = append(f.order, v)
		row := a[i*n : (i+1)*n]
		sum := floats.Sum(row[i+1:])
		inverse := 0.0
		if sum > 0 {
			inverse = 1 / sum
		}
		for j := i + 1; j < n; j++ {
			if w := row[j]; w > 0 {
				l := w / sum
				f.row, f.value = append(f.row, left[j]), append(f.value, l)
				floats.AddScaled(a[j*n+j+1:(j+1)*n], l, row[j+1:])
			}
		}
		f.inverse, f.start = append(f.inverse, inverse), append(f.start, len(f.row))
	}
}

// inner is the factor of the core by itself.
func (f *factor) inner() *factor {
	n, from := len(f.order)-f.cut, f.start[f.cut]
	in := &factor{start: make([]int, n+1), row: make([]int32, len(f.row)-from), value: f.value[from:], inverse: f.inverse[f.cut:]}
	for i := range in.start {
		in.start[i] = f.start[f.cut+i] - from
	}
	for k, i := range f.row[from:] {
		in.row[k] = i - int32(f.cut)
	}
	return in
}
