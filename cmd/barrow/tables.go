package main

import (
	"bufio"
	"encoding/csv"
	"math"
	"strings"

	"example.org/barrow/dual/pairwise"
	"example.org/barrow/exact"
	"example.org/barrow/graphio"
)

// quoted are names as fields of a table with commas.
func quoted(names []string) []string {
	list := make([]string, len(names))
	for i, name := range names {
		var b strings.Builder
		w := csv.NewWriter(&b)
		w.Write([]string{name}) // a strings.Builder does not fail
		w.Flush()
		list[i] = strings.TrimSuffix(b.String(), "\n")
	}
	return list
}

// A row is a line of a table being put together.
type row struct {
	w    *bufio.Writer
	line []byte
}

func (r *row) text(field string) *row {
	if len(r.line) > 0 {
		r.line = append(r.line, ',')
	}
	r.line = append(r.line, field...)
	return r
}

// number adds a number; one that is not known is left empty.
func (r *row) number(x float64) *row {
	r.line = append(r.line, ',')
	if !math.IsNaN(x) {
		r.line = exactly(r.line, x)
	}
	return r
}

func (r *row) end() error {
	_, err := r.w.Write(append(r.line, '\n'))
	r.line = r.line[:0]
	return err
}

// writeMatrix writes matrix.csv: from the row's sample to the column's.
func writeMatrix(w *bufio.Writer, m *pairwise.Matrix) error {
	names := quoted(m.Names)
	r := &row{w: w}
	r.text("sample")
	for _, name := range names {
		r.text(name)
	}
	if err := r.end(); err != nil {
		return err
	}
	for i, name := range names {
		r.text(name)
		for j := range names {
			r.number(m.At(i, j))
		}
		if err := r.end(); err != nil {
			return err
		}
	}
	return nil
}

// writePairs writes pairs.csv, each pair in both orders where the network is
// one-way, and what is noise of it where that is known.
func writePairs(w *bufio.Writer, m *pairwise.Matrix, method string, both bool, noise *noiseResult) error {
	names := quoted(m.Names)
	r := &row{w: w}
	r.text("a,b,distance,lower,upper,method")
	if noise != nil {
		r.text("floor,excess,p")
	}
	if err := r.end(); err != nil {
		return err
	}
	for i := range names {
		for j := range names {
			if i == j || j < i && !both {
				continue
			}
			lower, upper, _ := m.Bounds(i, j)
			r.text(names[i]).text(names[j]).number(m.At(i, j)).number(lower).number(upper).text(method)
			if noise != nil {
				k := noise.Distance.Index(min(i, j), max(i, j))
				floor := noise.Floor.Value[k]
				r.number(floor).number(m.At(i, j) - floor).number(noise.P[k])
			}
			if err := r.end(); err != nil {
				return err
			}
		}
	}
	return nil
}

// writeCalibration writes calibration.csv: what the estimates were checked on.
func writeCalibration(w *bufio.Writer, names []string, c *pairwise.Calibration) error {
	names = quoted(names)
	r := &row{w: w}
	if err := r.text("a,b,exact,estimate,use").end(); err != nil {
		return err
	}
	for _, p := range c.Pairs {
		use := "fit"
		if p.HeldOut {
			use = "held-out"
		}
		if err := r.text(names[p.I]).text(names[p.J]).number(p.Exact).number(p.Estimate).text(use).end(); err != nil {
			return err
		}
	}
	return nil
}

// writeFlows writes flows.csv: the edges along which mass moves, in the order
// of the edges file; a flow below 0 runs from to to from.
func writeFlows(w *bufio.Writer, net *graphio.Network, flow []float64) error {
	r := &row{w: w}
	if err := r.text("from,to,flow,cost").end(); err != nil {
		return err
	}
	for i, e := range net.EdgeList() {
		if flow[i] == 0 {
			continue
		}
		ends := quoted([]string{net.Name(int(e.From)), net.Name(int(e.To))})
		if err := r.text(ends[0]).text(ends[1]).number(flow[i]).number(e.Length * math.Abs(flow[i])).end(); err != nil {
			return err
		}
	}
	return nil
}

// writeNodes writes a value a node under a header; skip leaves zeros out.
func writeNodes(w *bufio.Writer, net *graphio.Network, header string, value []float64, skip bool) error {
	r := &row{w: w}
	if err := r.text(header).end(); err != nil {
		return err
	}
	for v, x := range value {
		if skip && x == 0 {
			continue
		}
		if err := r.text(quoted([]string{net.Name(v)})[0]).number(x).end(); err != nil {
			return err
		}
	}
	return nil
}

// writeProof writes what proves one comparison.
func (f *folder) writeProof(net *graphio.Network, r *exact.Result) error {
	err := f.write("flows.csv", func(w *bufio.Writer) error { return writeFlows(w, net, r.Flow) })
	if err == nil {
		err = f.writePotential(net, r.Potential)
	}
	if err == nil && r.Unmatched != nil {
		err = f.write("unmatched.csv", func(w *bufio.Writer) error {
			return writeNodes(w, net, "node,removed", r.Unmatched, true)
		})
	}
	return err
}

func (f *folder) writePotential(net *graphio.Network, potential []float64) error {
	return f.write("potentials.csv", func(w *bufio.Writer) error {
		return writeNodes(w, net, "node,potential", potential, false)
	})
}

// table writes pairs.csv for one comparison.
func (c *comparison) table(method string) func(w *bufio.Writer) error {
	return func(w *bufio.Writer) error {
		r := &row{w: w}
		if err := r.text("a,b,distance,lower,upper,method").end(); err != nil {
			return err
		}
		names := quoted([]string{c.from, c.to})
		lower := c.lower
		if method == "multiscale" {
			lower = math.NaN() // of the transport distance, which the estimate is not
		}
		return r.text(names[0]).text(names[1]).number(c.distance).number(lower).number(c.upper).text(method).end()
	}
}
