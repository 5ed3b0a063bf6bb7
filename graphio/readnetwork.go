package graphio

import (
	"bytes"
	"fmt"
	"math"
)

// NetworkOptions say how files become a network.
type NetworkOptions struct {
	// Directed makes edges one-way: those whose oneway column says so, or all
	// where there is no such column. Otherwise every edge runs both ways.
	Directed bool
	// LengthFrom derives lengths from weights: "inverse" is 1/weight, "neglog"
	// is -ln(weight) for weights between 0 and 1. "" reads the length column.
	LengthFrom string
	// Bridge > 0 joins the components of the network by edges of this length.
	Bridge float64
	// MaxExpanded is how many bytes a compressed file may expand to; 0 is 64 GiB.
	MaxExpanded int64
}

// ReadNetwork reads a network from an edges file and, unless nodesPath is "",
// a nodes file. Both are comma, tab or semicolon separated with a header, plain
// or compressed by gzip or zstd; columns may stand in any order, and others
// than these are left aside.
//
// Edges have columns from and to, and length or weight or both: length > 0 in
// any unit, weight > 0 the affinity. Without weight it is 1/length; weight
// alone needs LengthFrom. oneway holds yes or no, true or false, 1 or 0. In a
// network without directions a row that repeats an edge from its other end
// with the same length and weight is counted once, with a warning.
//
// Nodes have a column node, and x and y or lon and lat (degrees), and district,
// if they are known. Without a nodes file the nodes are those the edges name,
// in order of appearance; with one they are its rows, in its order, and the
// edges may name no other.
//
// Errors: *Faults. Cost: O(bytes), a few times that of splitting the rows.
func ReadNetwork(edgesPath, nodesPath string, opt NetworkOptions) (*Network, *Source, error) {
	if err := opt.check(); err != nil {
		return nil, nil, err
	}
	r := &edgeReader{opt: opt, source: &Source{}, net: &Network{}}
	if nodesPath != "" {
		t, err := openTable(nodesPath, nodesFile, opt.MaxExpanded, &r.faults)
		if err != nil {
			return nil, nil, err
		}
		defer t.in.close()
		if err := r.readNodes(t); err != nil {
			return nil, nil, err
		}
	}
	t, err := openTable(edgesPath, edgesFile, opt.MaxExpanded, &r.faults)
	if err != nil {
		return nil, nil, err
	}
	defer t.in.close()
	if err := r.readEdges(t); err != nil {
		return nil, nil, err
	}
	if opt.Bridge > 0 {
		bridge(r.net, opt.Bridge, r.source)
	}
	return r.net, r.source, nil
}

func (opt NetworkOptions) check() error {
	switch opt.LengthFrom {
	case "", "inverse", "neglog":
	default:
		return oneFault(Fault{Found: fmt.Sprintf("lengths from %q", opt.LengthFrom), Want: "--length-from inverse (1/weight) or neglog (-ln weight)"})
	}
	if opt.Bridge != 0 && !positive(opt.Bridge) {
		return oneFault(Fault{Found: fmt.Sprintf("a bridge of length %v", opt.Bridge), Want: "--bridge with a finite length above 0"})
	}
	return nil
}

// An edgeReader turns rows into a network.
type edgeReader struct {
	opt    NetworkOptions
	source *Source
	faults FaultList
	net    *Network

	names *nameTable
	known string // the nodes file, "" where edges may name new nodes
	spell speller
	lines lineIndex
	at    struct{ from, to, length, weight, oneway int }
}

func (r *edgeReader) readEdges(t *table) error {
	if err := r.edgeColumns(t); err != nil {
		return err
	}
	if r.names == nil {
		r.names = newNameTable(0)
	}
	if n := t.expectedRows(); n > 0 {
		r.net.edges = make([]Edge, 0, n)
	}
	oneWays := 0
	for t.row() {
		if e, ok := r.edge(t); ok {
			if e.OneWay && !r.opt.Directed {
				e.OneWay = false
				oneWays++
			}
			r.net.edges = append(r.net.edges, e)
			r.lines.add(t.line)
		}
	}
	if err := t.err(); err != nil {
		return err
	}
	if len(r.net.edges) == 0 && r.faults.total == 0 {
		r.faults.Add(Fault{File: t.in.path, Found: "a header and no edges", Want: "a row for each edge"})
	}
	if oneWays > 0 {
		r.source.warn("%s: %d edges are one-way; their directions are left aside (--directed honours them)", t.in.path, oneWays)
	}
	if err := r.finish(t); err != nil {
		return err
	}
	file, err := t.in.finish()
	r.source.Files = append(r.source.Files, file)
	r.source.Rows = len(r.net.edges)
	return err
}

// edgeColumns finds the columns of an edges file.
func (r *edgeReader) edgeColumns(t *table) error {
	c := t.columns()
	if !c.has("from", "to") || c.has("flow") && !c.has("length") {
		return t.wrongHeader("")
	}
	r.at.from, r.at.to = c.at("from"), c.at("to")
	r.at.length, r.at.weight, r.at.oneway = c.at("length"), c.at("weight"), c.at("oneway")
	switch {
	case r.opt.LengthFrom != "" && r.at.weight < 0:
		return t.wrongHeader("a column weight to take lengths from (--length-from)")
	case r.opt.LengthFrom != "" && r.at.length >= 0:
		r.source.warn("%s: lengths are taken from the weights (--length-from %s); the column length is left aside", t.in.path, r.opt.LengthFrom)
		r.at.length = -1
	case r.opt.LengthFrom == "" && r.at.length < 0 && r.at.weight >= 0:
		return oneFault(Fault{
			File: t.in.path, Line: t.line, Found: fmt.Sprintf("columns %s: weights without lengths", t.headerList()),
			Want: "a column length, or --length-from inverse (1/weight) or neglog (-ln weight)",
		})
	case r.opt.LengthFrom == "" && r.at.length < 0:
		return t.wrongHeader("a column length")
	}
	return t.once(c, r.at.from, r.at.to, r.at.length, r.at.weight, r.at.oneway)
}

// edge reads a row; false where it has a fault.
func (r *edgeReader) edge(t *table) (e Edge, ok bool) {
	if !t.sameWidth() {
		return e, false
	}
	from, to := t.fields[r.at.from], t.fields[r.at.to]
	var okFrom, okTo bool
	if k := len(r.net.edges) - 1; k >= 0 && r.names.names[r.net.edges[k].From] == string(from) {
		e.From, okFrom = r.net.edges[k].From, true // tables are often sorted by from
	} else {
		e.From, okFrom = r.node(t, r.at.from, from)
	}
	e.To, okTo = r.node(t, r.at.to, to)
	ok = okFrom && okTo
	if ok && e.From == e.To {
		t.faults.Add(t.fault(r.at.to, fmt.Sprintf("an edge from node %s to itself", show(to)), "two different ends, or no such row"))
		ok = false
	}
	return e, r.measures(t, &e) && ok
}

// measures reads length, weight and direction.
func (r *edgeReader) measures(t *table, e *Edge) (ok bool) {
	ok = true
	if r.at.weight >= 0 {
		e.Weight, ok = t.positive(r.at.weight, "weight")
	}
	switch {
	case r.at.length >= 0:
		var good bool
		e.Length, good = t.positive(r.at.length, "length")
		if r.at.weight < 0 {
			e.Weight = 1 / e.Length
			if good && !positive(e.Weight) {
				t.faults.Add(t.fault(r.at.length, "length "+show(t.fields[r.at.length])+", whose weight 1/length is not finite and above 0", "a length between 1e-307 and 1e307, or a column weight"))
				good = false
			}
		}
		ok = ok && good
	case ok:
		ok = r.lengthFromWeight(t, e)
	}
	if r.at.oneway >= 0 {
		way, good := parseYesNo(t.fields[r.at.oneway])
		if !good {
			t.faults.Add(t.fault(r.at.oneway, "oneway "+show(t.fields[r.at.oneway]), "yes or no (or true or false, 1 or 0)"))
		}
		e.OneWay = way
		ok = ok && good
	} else {
		e.OneWay = r.opt.Directed
	}
	return ok
}

func (r *edgeReader) lengthFromWeight(t *table, e *Edge) bool {
	want := "a weight whose inverse is finite and above 0"
	if r.opt.LengthFrom == "inverse" {
		e.Length = 1 / e.Weight
	} else {
		e.Length = -math.Log(e.Weight)
		want = "a weight above 0 and below 1, for --length-from neglog"
	}
	if !positive(e.Length) {
		t.faults.Add(t.fault(r.at.weight, "weight "+show(t.fields[r.at.weight]), want))
		return false
	}
	return true
}

func parseYesNo(b []byte) (yes, ok bool) {
	switch lower(string(b)) {
	case "yes", "true", "1", "y", "t":
		return true, true
	case "no", "false", "0", "n", "f":
		return false, true
	}
	return false, false
}

// positive reads a finite number above 0.
func (t *table) positive(column int, what string) (float64, bool) {
	x, kind := parseNumber(t.fields[column])
	if kind == aNumber && positive(x) {
		return x, true
	}
	want := "a finite number above 0"
	if kind == noNumber {
		want = numberHint(t.fields[column], want)
	}
	found := what + " " + show(t.fields[column])
	if kind == missing && len(t.fields[column]) == 0 {
		found = "no " + what
	}
	t.faults.Add(t.fault(column, found, want))
	return 0, false
}

// numberHint adds what is likely wrong with text that should be a number.
func numberHint(b []byte, want string) string {
	if point := bytes.Replace(b, []byte{','}, []byte{'.'}, 1); len(point) == len(b) && bytes.IndexByte(b, ',') >= 0 {
		if _, kind := parseNumber(point); kind == aNumber {
			return want + ", with a point for decimals and nothing between thousands"
		}
	}
	return want + ", like 12.5 or 1e-3"
}

// node numbers the node of a field; false where it has a fault.
func (r *edgeReader) node(t *table, column int, name []byte) (int32, bool) {
	v, hash := r.names.find(name)
	if v >= 0 {
		return v, true
	}
	if found, want := nameFault(name, "node"); found != "" {
		t.faults.Add(t.fault(column, found, want))
		return 0, false
	}
	if r.known != "" {
		t.faults.Add(t.fault(column, fmt.Sprintf("node %s, which is not in %s%s", show(name), r.known, r.spell.hint(name)), "a node of "+r.known))
		return 0, false
	}
	return r.names.add(name, hash), true
}

// finish connects the network and looks for edges that stand twice.
func (r *edgeReader) finish(t *table) error {
	n := r.net
	n.names = r.names
	if n.Order() > math.MaxInt32 || len(n.edges) > math.MaxInt32 {
		return fmt.Errorf("a network of %d nodes and %d edges is past the limit of 2^31-1 of each", n.Order(), len(n.edges))
	}
	n.connect()
	if twice := n.duplicates(); len(twice) > 0 {
		r.mergeOpposite(t, twice)
	}
	return r.faults.Err()
}

// mergeOpposite leaves out edges that repeat another from its other end in a
// network without directions; other repeats are faults.
func (r *edgeReader) mergeOpposite(t *table, twice []duplicate) {
	n := r.net
	drop := make(map[int32]bool)
	for _, d := range twice {
		e, f := n.edges[d.first], n.edges[d.again]
		opposite := e.From == f.To
		if opposite && !r.opt.Directed && e.Length == f.Length && e.Weight == f.Weight {
			drop[d.again] = true
			continue
		}
		fault := Fault{File: t.in.path, Line: r.lines.at(int(d.again)), Column: r.at.from + 1, Want: "each edge once"}
		fault.Found = fmt.Sprintf("edge from %q to %q again, as on line %d", n.Name(int(f.From)), n.Name(int(f.To)), r.lines.at(int(d.first)))
		if opposite {
			fault.Found = fmt.Sprintf("edge from %q to %q again, in the other direction on line %d", n.Name(int(f.From)), n.Name(int(f.To)), r.lines.at(int(d.first)))
			if !r.opt.Directed {
				fault.Want = "each edge once, or the same length and weight both ways, or --directed if rows are one-way"
			}
		}
		r.faults.Add(fault)
	}
	if len(drop) == 0 || r.faults.total > 0 {
		return
	}
	kept := n.edges[:0]
	for i, e := range n.edges {
		if !drop[int32(i)] {
			kept = append(kept, e)
		}
	}
	n.edges = kept
	n.connect()
	r.source.warn("%s: %d rows repeat an edge in the other direction with the same length; each edge is counted once", t.in.path, len(drop))
}
