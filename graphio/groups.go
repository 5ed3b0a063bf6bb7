package graphio

import "fmt"

// Groups labels samples: one row a sample, any number of named columns.
type Groups struct {
	columns []string
	rows    map[string][]string // by sample name
}

// NewGroups makes a table of labels. rows holds, by sample name, one label for
// each column.
func NewGroups(columns []string, rows map[string][]string) (*Groups, error) {
	for name, row := range rows {
		if len(row) != len(columns) {
			return nil, fmt.Errorf("sample %q has %d labels for %d columns", name, len(row), len(columns))
		}
	}
	return &Groups{columns: columns, rows: rows}, nil
}

// Columns names the columns in file order.
func (g *Groups) Columns() []string { return g.columns }

// Labels is the named column for the given samples, in their order; "" where a
// sample has no row. ok is false where there is no such column.
func (g *Groups) Labels(column string, samples []string) (labels []string, ok bool) {
	for c, name := range g.columns {
		if name != column {
			continue
		}
		labels = make([]string, len(samples))
		for i, s := range samples {
			if row := g.rows[s]; row != nil {
				labels[i] = row[c]
			}
		}
		return labels, true
	}
	return nil, false
}
