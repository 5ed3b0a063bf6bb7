package inference

import (
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"

	"gonum.org/v1/gonum/mat"
)

// A Design is a linear model of samples: terms are names of variables, or
// several joined by ":" for their interaction.
type Design struct {
	Variables []Variable
	// Given are fitted first and not tested: covariates, blocks.
	Given []string
	// Terms are fitted and tested in this order (sequential sums of squares).
	Terms []string
}

// columns is a design laid out: q is an orthonormal basis of its columns,
// samples × rank, the constant first; term t has columns [end[t-1], end[t]).
type columns struct {
	q     *mat.Dense
	names []string
	end   []int // by term, Given first; columns of the constant: [0, 1)
	given int   // how many terms are not tested
	code  []int32
	cells int // samples of the same cell have the same row
}

// columns builds the basis term by term, by QR decompositions.
func (d Design) columns(n int) (*columns, error) {
	if len(d.Terms) == 0 {
		return nil, fmt.Errorf("%w: no term to test; want one or more of the variables", ErrDesign)
	}
	c := &columns{given: len(d.Given)}
	one := make([]float64, n)
	for i := range one {
		one[i] = 1
	}
	kept := [][]float64{one}
	for _, term := range slices.Concat(d.Given, d.Terms) {
		if slices.Contains(c.names, term) {
			return nil, fmt.Errorf("%w: term %q twice", ErrDesign, term)
		}
		add, err := d.term(term, n)
		if err != nil {
			return nil, err
		}
		before := len(kept)
		if kept, err = independent(kept, add, n); err != nil {
			return nil, fmt.Errorf("%w: at term %q the model has as many columns as there are samples (%d), which leaves no residual to compare with; want fewer terms or more samples", ErrDesign, term, n)
		}
		if len(kept) == before {
			return nil, fmt.Errorf("%w: term %q is confounded with the terms before it: they tell the same samples apart", ErrDesign, term)
		}
		c.names = append(c.names, term)
		c.end = append(c.end, len(kept))
	}
	if n-len(kept) < 1 {
		return nil, fmt.Errorf("%w: the model has as many columns as there are samples (%d), which leaves no residual to compare with; want fewer terms or more samples", ErrDesign, n)
	}
	c.q, _ = orthonormal(kept, n)
	c.code, c.cells = cellsOf(kept, n)
	return c, nil
}

func (d Design) variable(name string) (Variable, error) {
	var names []string
	for _, v := range d.Variables {
		if v.Name == name {
			return v, nil
		}
		names = append(names, v.Name)
	}
	return Variable{}, fmt.Errorf("%w: no variable %q; there are %q", ErrDesign, name, names)
}

// term is the columns of a variable, or products of those of several.
func (d Design) term(term string, n int) ([][]float64, error) {
	var product [][]float64
	for _, name := range strings.Split(term, ":") {
		v, err := d.variable(name)
		if err != nil {
			return nil, err
		}
		own, err := v.columns(n)
		if err != nil {
			return nil, err
		}
		if product == nil {
			product = own
			continue
		}
		var next [][]float64
		for _, a := range product {
			for _, b := range own {
				x := make([]float64, n)
				for i := range x {
					x[i] = a[i] * b[i]
				}
				next = append(next, x)
			}
		}
		product = next
	}
	return product, nil
}

// columns codes a factor by the difference of each level from the last, and
// brings a covariate to mean 0 and variance 1.
func (v Variable) columns(n int) ([][]float64, error) {
	if v.Numbers != nil {
		if len(v.Numbers) != n {
			return nil, fmt.Errorf("%w: %q has %d numbers for %d samples", ErrDesign, v.Name, len(v.Numbers), n)
		}
		mean, square := 0.0, 0.0
		for i, x := range v.Numbers {
			if math.IsNaN(x) || math.IsInf(x, 0) {
				return nil, fmt.Errorf("%w: %v for sample number %d in %q; want a finite number", ErrDesign, x, i+1, v.Name)
			}
			mean += x / float64(n)
		}
		x := make([]float64, n)
		for i := range x {
			x[i] = v.Numbers[i] - mean
			square += float64(x[i] * x[i])
		}
		if square == 0 {
			return nil, fmt.Errorf("%w: %q has the same number for all samples", ErrDesign, v.Name)
		}
		for i := range x {
			x[i] /= math.Sqrt(square / float64(n))
		}
		return [][]float64{x}, nil
	}
	g, err := v.grouping(n)
	if err != nil {
		return nil, err
	}
	last := int32(len(g.names) - 1)
	columns := make([][]float64, last)
	for c := range columns {
		columns[c] = make([]float64, n)
		for i, code := range g.code {
			switch code {
			case int32(c):
				columns[c][i] = 1
			case last:
				columns[c][i] = -1
			}
		}
	}
	return columns, nil
}

// independent adds the columns that are not spanned by those kept. An error
// says that they span everything.
func independent(kept, add [][]float64, n int) ([][]float64, error) {
	const tolerance = 1e-9 // of the column's length; columns are of order 1
	for len(add) > 0 {
		room := n - len(kept)
		if room == 0 {
			return kept, ErrDesign
		}
		try := add[:min(room, len(add))]
		_, diagonal := orthonormal(append(slices.Clone(kept), try...), n)
		dropped := -1
		for k := range try {
			if diagonal[len(kept)+k] <= tolerance*math.Sqrt(float64(n)) {
				dropped = k
				break
			}
		}
		if dropped < 0 {
			kept, add = append(kept, try...), add[len(try):]
			continue
		}
		kept, add = append(kept, try[:dropped]...), add[dropped+1:]
	}
	return kept, nil
}

// orthonormal is the thin Q of the columns, and the size of R's diagonal.
func orthonormal(columns [][]float64, n int) (q *mat.Dense, diagonal []float64) {
	x := mat.NewDense(n, len(columns), nil)
	for c, column := range columns {
		x.SetCol(c, column)
	}
	var qr mat.QR
	qr.Factorize(x)
	var full, r mat.Dense
	qr.QTo(&full)
	qr.RTo(&r)
	for c := range columns {
		diagonal = append(diagonal, math.Abs(r.At(c, c)))
	}
	return mat.DenseCopyOf(full.Slice(0, n, 0, len(columns))), diagonal
}

// cellsOf numbers the distinct rows of the columns.
func cellsOf(columns [][]float64, n int) (code []int32, cells int) {
	var rows index
	for i := range n {
		var key []byte
		for _, column := range columns {
			key = append(strconv.AppendFloat(key, column[i], 'g', -1, 64), ' ')
		}
		code = append(code, int32(rows.of(string(key))))
	}
	return code, len(rows)
}
