package graphio

import (
	"fmt"
	"math"
)

// A Sample is a named non-negative distribution of mass over the nodes of a
// network. Nodes is ascending, without repeats; Values holds the mass at each,
// above 0. A node not listed has no mass.
type Sample struct {
	Name    string
	Nodes   []int32
	Values  []float64
	Missing []int32 // nodes whose value was missing in the input, ascending
}

// Total is the sum of the sample's mass, added up in node order and right to
// the last place or so (compensated: Neumaier 1974): samples in proportion have
// the same shares but for that.
func (s Sample) Total() float64 {
	sum, lost := 0.0, 0.0
	for _, v := range s.Values {
		next := sum + v
		if sum >= v {
			lost += sum - next + v
		} else {
			lost += v - next + sum
		}
		sum = next
	}
	return sum + lost
}

// Counts reports whether every value is a whole number.
func (s Sample) Counts() bool {
	for _, v := range s.Values {
		if v != math.Trunc(v) {
			return false
		}
	}
	return true
}

// Share is the sample divided by its total: mass 1 in all. A sample without
// mass is returned as it is.
func (s Sample) Share() Sample {
	total := s.Total()
	if total == 0 {
		return s
	}
	share := s
	share.Values = make([]float64, len(s.Values))
	for i, v := range s.Values {
		share.Values[i] = v / total
	}
	return share
}

// Dense adds scale times the sample to dst, which has one entry a node.
func (s Sample) Dense(dst []float64, scale float64) {
	for i, v := range s.Nodes {
		dst[v] += float64(scale * s.Values[i])
	}
}

// Samples is a list of samples over the same network, with distinct names.
type Samples struct {
	list  []Sample
	index map[string]int
	order int
	path  string // of the file they were read from
}

// NewSamples checks and holds samples over a network of order nodes. Errors:
// Faults for names that are empty or stand twice, nodes out of order or range,
// and values that are not above 0 and finite. Samples without mass are
// allowed here. Cost: O(entries).
func NewSamples(order int, list []Sample) (*Samples, error) {
	s := &Samples{list: list, index: make(map[string]int, len(list)), order: order}
	var faults FaultList
	for i, sample := range list {
		if sample.Name == "" {
			faults.Add(Fault{Found: fmt.Sprintf("no name for sample number %d", i+1), Want: "a name for each sample"})
		}
		if _, twice := s.index[sample.Name]; twice {
			faults.Add(Fault{Found: fmt.Sprintf("sample %q twice", sample.Name), Want: "each sample once"})
		}
		s.index[sample.Name] = i
		if len(sample.Nodes) != len(sample.Values) {
			return nil, fmt.Errorf("sample %q has %d nodes and %d values", sample.Name, len(sample.Nodes), len(sample.Values))
		}
		last := int32(-1)
		for k, v := range sample.Nodes {
			if v <= last || int(v) >= order {
				faults.Add(Fault{Found: fmt.Sprintf("sample %q: node number %d after %d", sample.Name, v, last), Want: fmt.Sprintf("ascending nodes below %d", order)})
				break
			}
			last = v
			if !positive(sample.Values[k]) {
				faults.Add(Fault{Found: fmt.Sprintf("sample %q: mass %v at node number %d", sample.Name, sample.Values[k], v), Want: "finite masses above 0"})
			}
		}
	}
	if err := faults.Err(); err != nil {
		return nil, err
	}
	return s, nil
}

// Len is the number of samples.
func (s *Samples) Len() int { return len(s.list) }

// Order is the number of nodes of the network they lie on.
func (s *Samples) Order() int { return s.order }

// At is sample number i. Its slices are the collection's own: do not change
// them.
func (s *Samples) At(i int) Sample { return s.list[i] }

// Index is the number of the named sample, and whether there is one.
func (s *Samples) Index(name string) (i int, ok bool) {
	i, ok = s.index[name]
	return i, ok
}

// Names lists the samples' names in order.
func (s *Samples) Names() []string {
	names := make([]string, len(s.list))
	for i := range s.list {
		names[i] = s.list[i].Name
	}
	return names
}

// Shares is the same samples, each divided by its total. Errors: Faults that
// name every sample without mass.
func (s *Samples) Shares() (*Samples, error) {
	shares := &Samples{list: make([]Sample, len(s.list)), index: s.index, order: s.order, path: s.path}
	var faults FaultList
	for i := range s.list {
		if len(s.list[i].Nodes) == 0 {
			faults.Add(Fault{File: s.path, Found: fmt.Sprintf("sample %q has no mass", s.list[i].Name), Want: "some mass in every sample, or amounts (--mass amount)"})
		}
		shares.list[i] = s.list[i].Share()
	}
	return shares, faults.Err()
}

// Mean is the mean of samples over the same nodes, weighted: weights nil are
// equal; each sample counts by weight over the sum of all. Order is the number
// of nodes. Cost: O(order + entries).
func Mean(name string, order int, list []Sample, weights []float64) Sample {
	sum := make([]float64, order)
	whole := 0.0
	for i, s := range list {
		w := 1.0
		if weights != nil {
			w = weights[i]
		}
		if w > 0 {
			s.Dense(sum, w)
			whole += w
		}
	}
	mean := Sample{Name: name}
	for v, x := range sum {
		if x > 0 {
			mean.Nodes, mean.Values = append(mean.Nodes, int32(v)), append(mean.Values, x/whole)
		}
	}
	return mean
}
