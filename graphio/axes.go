package graphio

import (
	"fmt"
	"slices"
	"strings"
)

// axes say what the rows and columns of a matrix of samples stand for: one of
// them nodes of the network, the other samples.
type axes struct {
	node      []int32  // of the network, by row or column
	samples   []string // by column or row
	nodesDown bool     // rows are nodes
}

// An axisFile names the rows or the columns of a matrix.
type axisFile struct {
	path  string
	kind  string // "node", "sample", or "" where the file does not say
	names []string
	line  []int
}

// readAxes reads the files that name rows and columns, tells which is which,
// and checks their number against the matrix, before anything of its declared
// size is allocated.
func (r *sampleReader) readAxes(path string, rows, columns int64) (*axes, error) {
	if r.opt.RowNames == "" || r.opt.ColumnNames == "" {
		return nil, oneFault(Fault{File: path, Found: "a matrix without names", Want: "a file that names its rows and one that names its columns (--rows FILE --columns FILE): a name a line, or a table with a column node or sample"})
	}
	down, err := r.readAxis(r.opt.RowNames, "rows", rows)
	if err != nil {
		return nil, err
	}
	across, err := r.readAxis(r.opt.ColumnNames, "columns", columns)
	if err != nil {
		return nil, err
	}
	switch {
	case down.kind == "" && across.kind != "":
		down.kind = otherKind(across.kind)
	case across.kind == "" && down.kind != "":
		across.kind = otherKind(down.kind)
	case down.kind == "" && across.kind == "":
		known, knownAcross := r.known(down), r.known(across)
		if known == knownAcross {
			return nil, oneFault(Fault{File: down.path, Found: "names that leave open whether rows or columns are nodes", Want: "a first line node or sample in one of the two files of names"})
		}
		down.kind, across.kind = "sample", "node"
		if known {
			down.kind, across.kind = "node", "sample"
		}
	}
	if down.kind == across.kind {
		return nil, oneFault(Fault{File: across.path, Found: fmt.Sprintf("names of %ss for the columns, as %s has for the rows", across.kind, down.path), Want: "nodes along one side and samples along the other"})
	}
	a := &axes{nodesDown: down.kind == "node"}
	nodes, samples := across, down
	if a.nodesDown {
		nodes, samples = down, across
	}
	a.samples = samples.names
	a.node, err = r.axisNodes(nodes)
	if err != nil {
		return nil, err
	}
	return a, samples.distinct()
}

func otherKind(kind string) string {
	if kind == "node" {
		return "sample"
	}
	return "node"
}

// readAxis reads a list of names, or the column node or sample of a table.
func (r *sampleReader) readAxis(path, side string, want int64) (*axisFile, error) {
	in, err := openInput(path, "names of "+side+", a name a line", r.opt.MaxExpanded)
	if err != nil {
		return nil, err
	}
	defer in.close()
	var faults FaultList
	t, err := newTable(in, "names of "+side+", a name a line", &faults)
	if err != nil {
		return nil, err
	}
	a := &axisFile{path: path}
	column := 0
	c := t.columns()
	switch {
	case c.has("node") && !c.has("sample"):
		a.kind, column = "node", c.at("node")
	case c.has("sample"):
		a.kind, column = "sample", c.at("sample")
	case len(t.header) == 1:
		a.names, a.line = append(a.names, t.header[0]), append(a.line, t.line)
	default:
		return nil, t.wrongHeader("")
	}
	for t.row() {
		if !t.sameWidth() {
			continue
		}
		if int64(len(a.names)) == want {
			return nil, oneFault(Fault{File: path, Line: t.line, Found: fmt.Sprintf("more than %d names", want), Want: fmt.Sprintf("a name for each of the %d %s of the matrix", want, side)})
		}
		a.names = append(a.names, string(t.fields[column]))
		a.line = append(a.line, t.line)
	}
	if err := t.err(); err != nil {
		return nil, err
	}
	if err := faults.Err(); err != nil {
		return nil, err
	}
	if got := int64(len(a.names)); got != want {
		return nil, oneFault(Fault{File: path, Found: fmt.Sprintf("%d names", got), Want: fmt.Sprintf("a name for each of the %d %s of the matrix", want, side)})
	}
	file, err := in.finish()
	if err != nil {
		return nil, err
	}
	r.source.Files = append(r.source.Files, file)
	return a, nil
}

// known reports whether every name is a node of the network.
func (r *sampleReader) known(a *axisFile) bool {
	return !slices.ContainsFunc(a.names, func(name string) bool { return r.net.names.findString(name) < 0 })
}

func (r *sampleReader) axisNodes(a *axisFile) ([]int32, error) {
	var faults FaultList
	nodes := make([]int32, len(a.names))
	first := make(map[int32]int)
	for i, name := range a.names {
		v := r.net.names.findString(name)
		nodes[i] = v
		if v < 0 {
			found, want := nameFault([]byte(name), "node")
			if found == "" {
				found, want = r.unknown([]byte(name))
			}
			faults.Add(Fault{File: a.path, Line: a.line[i], Found: found, Want: want})
			continue
		}
		if k, twice := first[v]; twice {
			faults.Add(Fault{File: a.path, Line: a.line[i], Found: fmt.Sprintf("node %q again, as on line %d", name, a.line[k]), Want: "each node once"})
		}
		first[v] = i
	}
	return nodes, faults.Err()
}

// distinct checks names of samples.
func (a *axisFile) distinct() error {
	var faults FaultList
	first := make(map[string]int)
	for i, name := range a.names {
		if found, want := nameFault([]byte(name), "sample"); found != "" {
			faults.Add(Fault{File: a.path, Line: a.line[i], Found: found, Want: want})
		} else if k, twice := first[name]; twice {
			faults.Add(Fault{File: a.path, Line: a.line[i], Found: fmt.Sprintf("sample %q again, as on line %d", name, a.line[k]), Want: "each sample once"})
		} else {
			first[name] = i
		}
	}
	return faults.Err()
}

// addAt adds the value in row i and column j, 0-based.
func (r *sampleReader) addAt(a *axes, i, j int64, x float64) {
	if !a.nodesDown {
		i, j = j, i
	}
	r.add(int32(j), a.node[i], x)
}

// place says where in a matrix something is, 1-based.
func (a *axes) place(i, j int64) string {
	if !a.nodesDown {
		return fmt.Sprintf("in row %d, column %d", i+1, j+1)
	}
	return fmt.Sprintf("in row %d, column %d (sample %q)", i+1, j+1, strings.ToValidUTF8(a.samples[j], "…"))
}
