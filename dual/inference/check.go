package inference

import (
	"errors"
	"fmt"
	"math"

	"example.org/barrow/dual/pairwise"
	"example.org/barrow/graphio"
)

var (
	// ErrDesign: the samples, labels or restrictions leave nothing to test.
	ErrDesign = errors.New("not a design that can be tested")
	// ErrFew: no arrangement could give a P at the level asked for.
	ErrFew = errors.New("too few rearrangements for the level")
	// ErrMatrix: the matrix is not one of symmetric distances.
	ErrMatrix = errors.New("not a matrix of symmetric distances")
	// ErrOption: a parameter out of its range.
	ErrOption = errors.New("parameter out of range")
)

// checkMatrix refuses what is not a symmetric matrix of finite distances, not
// all of them 0, between at least least samples.
func checkMatrix(d *pairwise.Matrix, least int) error {
	n := len(d.Names)
	if n < least {
		return fmt.Errorf("%w: %d samples; want %d or more", ErrDesign, n, least)
	}
	if d.Directed {
		return fmt.Errorf("%w: distances of a one-way network differ by direction; want a symmetric matrix, such as the mean of both directions", ErrMatrix)
	}
	if len(d.Value) != n*(n-1)/2 {
		return fmt.Errorf("%w: %d values for %d samples; want %d", ErrMatrix, len(d.Value), n, n*(n-1)/2)
	}
	most := 0.0
	at := 0
	for i := range n {
		for j := i + 1; j < n; j++ {
			v := d.Value[at]
			if !(v >= 0) || math.IsInf(v, 1) {
				return fmt.Errorf("%w: %v between %q and %q; want finite numbers of 0 or more", ErrMatrix, v, d.Names[i], d.Names[j])
			}
			most = max(most, v)
			at++
		}
	}
	if most == 0 {
		return fmt.Errorf("%w: every distance is 0, so nothing differs", ErrDesign)
	}
	return nil
}

// A Variable is a column of a design, one entry a sample: labels, or numbers
// where it is a covariate.
type Variable struct {
	Name    string
	Labels  []string
	Numbers []float64
}

// Column takes a variable from a table of groups, for samples in the order
// given. Errors: no such column; samples without a label.
func Column(groups *graphio.Groups, column string, samples []string) (Variable, error) {
	labels, ok := groups.Labels(column, samples)
	if !ok {
		return Variable{}, fmt.Errorf("%w: no column %q; the groups have %q", ErrDesign, column, groups.Columns())
	}
	v := Variable{Name: column, Labels: labels}
	_, _, err := v.levels(len(samples))
	return v, err
}

// levels codes the labels 0, 1, … in the order they first appear.
func (v Variable) levels(n int) (code []int32, names []string, err error) {
	if len(v.Labels) != n {
		return nil, nil, fmt.Errorf("%w: %q has %d labels for %d samples", ErrDesign, v.Name, len(v.Labels), n)
	}
	index := map[string]int32{}
	code = make([]int32, n)
	for i, label := range v.Labels {
		if label == "" {
			return nil, nil, fmt.Errorf("%w: sample number %d has no label in %q; want a label for each, or leave the sample out", ErrDesign, i+1, v.Name)
		}
		c, seen := index[label]
		if !seen {
			c = int32(len(names))
			index[label] = c
			names = append(names, label)
		}
		code[i] = c
	}
	return code, names, nil
}

// grouping is a factor whose groups all have two samples or more.
type grouping struct {
	code  []int32
	names []string
	size  []int
}

func (v Variable) grouping(n int) (*grouping, error) {
	code, names, err := v.levels(n)
	if err != nil {
		return nil, err
	}
	if len(names) < 2 {
		return nil, fmt.Errorf("%w: all samples have the same label in %q; want two groups or more", ErrDesign, v.Name)
	}
	g := &grouping{code: code, names: names, size: make([]int, len(names))}
	for _, c := range code {
		g.size[c]++
	}
	for c, size := range g.size {
		if size < 2 {
			return nil, fmt.Errorf("%w: group %q of %q has one sample, which says nothing of its spread; want two or more, or leave it out", ErrDesign, names[c], v.Name)
		}
	}
	return g, nil
}
