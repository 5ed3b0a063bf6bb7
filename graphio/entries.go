package graphio

import (
	"cmp"
	"fmt"
	"math"
	"slices"
)

// SampleOptions say how files become samples.
type SampleOptions struct {
	// Missing says what to do with a value that is empty, NaN, NA or null: ""
	// refuses it, "zero" takes it as no mass and notes the node in
	// Sample.Missing.
	Missing string
	// RowNames and ColumnNames are files that name the rows and columns of a
	// Matrix Market or NumPy file: a name a line, or a table with a column node
	// or sample.
	RowNames, ColumnNames string
	// MaxExpanded is how many bytes a compressed file may expand to; 0 is 64 GiB.
	MaxExpanded int64
}

func (opt SampleOptions) check() error {
	switch opt.Missing {
	case "", "zero":
		return nil
	case "drop", "smooth":
		return oneFault(Fault{Found: fmt.Sprintf("--missing %s, which this version does not offer", opt.Missing), Want: "--missing zero, or a table without missing values"})
	}
	return oneFault(Fault{Found: fmt.Sprintf("--missing %q", opt.Missing), Want: "--missing zero, or a table without missing values"})
}

// entries collects samples value by value, in any order; collect sorts them.
// Memory: 16 bytes an entry, and 20 more while sorting.
type entries struct {
	sample []int32
	node   []int32
	value  []float64 // NaN where missing
}

func (e *entries) add(sample, node int32, value float64) {
	e.sample = append(e.sample, sample)
	e.node = append(e.node, node)
	e.value = append(e.value, value)
}

// collect makes samples of the entries, in the order of names. twice is called
// for each entry that repeats another. Cost: O(entries) where each sample's
// nodes come in order, otherwise O(entries log entries).
func (e *entries) collect(names []string, twice func(first, again int)) []Sample {
	start := make([]int, len(names)+1)
	for _, s := range e.sample {
		start[s+1]++
	}
	for s := range names {
		start[s+1] += start[s]
	}
	order := make([]int, len(e.sample))
	next := slices.Clone(start[:len(names)])
	for i, s := range e.sample {
		order[next[s]] = i
		next[s]++
	}
	list := make([]Sample, len(names))
	for s, name := range names {
		mine := order[start[s]:start[s+1]]
		byNode := func(i, j int) int { return cmp.Or(cmp.Compare(e.node[i], e.node[j]), cmp.Compare(i, j)) }
		if !slices.IsSortedFunc(mine, byNode) {
			slices.SortFunc(mine, byNode)
		}
		list[s] = e.one(name, mine, twice)
	}
	return list
}

// one makes a sample of entries in node order.
func (e *entries) one(name string, order []int, twice func(first, again int)) Sample {
	mass := 0
	for _, i := range order {
		if e.value[i] > 0 {
			mass++
		}
	}
	s := Sample{Name: name, Nodes: make([]int32, 0, mass), Values: make([]float64, 0, mass)}
	first := -1 // of the entries at the node before
	for _, i := range order {
		if first >= 0 && e.node[first] == e.node[i] {
			twice(first, i)
			continue
		}
		first = i
		switch x := e.value[i]; {
		case math.IsNaN(x):
			s.Missing = append(s.Missing, e.node[i])
		case x > 0:
			s.Nodes = append(s.Nodes, e.node[i])
			s.Values = append(s.Values, x)
		}
	}
	return s
}

// A sampleReader turns a file into samples.
type sampleReader struct {
	opt    SampleOptions
	net    *Network
	source *Source
	faults FaultList
	spell  speller
	next   int32 // the node that a row is likely to be of
	entries
}

// mass checks a value that was read as x; ok is false where it is a fault, and
// found and want then say why. NaN is a missing value.
func (r *sampleReader) mass(x float64, kind numeral) (v float64, found, want string) {
	const good = "a finite mass of 0 or more"
	switch {
	case kind == missing || kind == aNumber && math.IsNaN(x):
		if r.opt.Missing == "zero" {
			return math.NaN(), "", ""
		}
		return 0, "a missing value", good + "; missing is not zero unless --missing zero says so"
	case kind == noNumber:
		return 0, "a mass that is not a number:", good
	case x < 0:
		return 0, "a negative mass", good
	case !finite(x):
		return 0, "a mass that is not finite", good
	}
	return x, "", ""
}

// field reads the mass of a field.
func (r *sampleReader) field(t *table, column int) (float64, bool) {
	x, kind := parseNumber(t.fields[column])
	if kind == aNumber && x >= 0 && x <= math.MaxFloat64 {
		return x, true
	}
	v, found, want := r.mass(x, kind)
	if found == "" {
		return v, true
	}
	if kind == noNumber {
		want = numberHint(t.fields[column], want)
	}
	if len(t.fields[column]) > 0 {
		found += " " + show(t.fields[column])
	}
	t.faults.Add(t.fault(column, found, want))
	return 0, false
}

// nodeAt finds the node of a field. Rows mostly follow the network's own order,
// so the nodes after the last are tried before the table of names, which costs
// a miss of the cache or two.
func (r *sampleReader) nodeAt(t *table, column int) (int32, bool) {
	name := t.fields[column]
	names := r.net.names.names
	const ahead = 4
	for v := r.next; v < min(r.next+ahead, int32(len(names))); v++ {
		if names[v] == string(name) {
			r.next = v + 1
			return v, true
		}
	}
	v, _ := r.net.names.find(name)
	if v >= 0 {
		r.next = v + 1
		return v, true
	}
	found, want := nameFault(name, "node")
	if found == "" {
		found, want = r.unknown(name)
	}
	t.faults.Add(t.fault(column, found, want))
	return 0, false
}

func (r *sampleReader) unknown(name []byte) (found, want string) {
	r.spell.names = func() []string { return r.net.names.names }
	return fmt.Sprintf("node %s, which is not in the network%s", show(name), r.spell.hint(name)), "a node of the network"
}

// missingWarning counts values taken as zero.
func (r *sampleReader) missingWarning(path string, list []Sample) {
	values, samples := 0, 0
	for _, s := range list {
		values += len(s.Missing)
		if len(s.Missing) > 0 {
			samples++
		}
	}
	if values > 0 {
		r.source.warn("%s: %d missing values in %d samples are taken as no mass (--missing zero)", path, values, samples)
	}
}
