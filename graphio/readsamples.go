package graphio

import (
	"bytes"
	"fmt"
)

// ReadSamples reads samples over the nodes of a network, from whichever of
// these the file is, plain or compressed by gzip or zstd:
//
//   - long: a table with columns sample, node and value, a row for each value;
//     what has no row is no mass
//   - wide: a table whose first column is node, and each other column a sample;
//     a node without a row has no mass, with a warning
//   - Matrix Market or NumPy .npy, with files that name rows and columns
//
// Samples come in the order of their first appearance. A sample without mass is
// not refused here, see Samples.Shares.
//
// Errors: *Faults. Cost: O(bytes); memory 36 bytes an entry while reading and
// 12 after.
func ReadSamples(path string, net *Network, opt SampleOptions) (*Samples, *Source, error) {
	if err := opt.check(); err != nil {
		return nil, nil, err
	}
	in, err := openInput(path, anySamples, opt.MaxExpanded)
	if err != nil {
		return nil, nil, err
	}
	defer in.close()
	r := &sampleReader{opt: opt, net: net, source: &Source{}}
	list, err := r.read(in)
	if err != nil {
		return nil, nil, err
	}
	file, err := in.finish()
	if err != nil {
		return nil, nil, err
	}
	r.source.Files = append([]InputFile{file}, r.source.Files...)
	r.source.Rows = len(r.entries.value)
	r.missingWarning(path, list)
	samples, err := NewSamples(net.Order(), list)
	if err != nil {
		return nil, nil, err
	}
	samples.path = path
	return samples, r.source, nil
}

func (r *sampleReader) read(in *input) ([]Sample, error) {
	const market, mark = "%%MatrixMarket", "\xef\xbb\xbf" // some programs put a byte order mark first
	head, err := in.peek(len(mark + market))
	if err != nil {
		return nil, in.readFault(err, 0)
	}
	named := r.opt.RowNames != "" || r.opt.ColumnNames != ""
	switch {
	case bytes.HasPrefix(bytes.TrimPrefix(head, []byte(mark)), []byte(market)):
		return r.readMatrixMarket(in)
	case bytes.HasPrefix(head, []byte("\x93NUMPY")):
		return r.readNPY(in)
	case named:
		return nil, oneFault(Fault{File: in.path, Found: "files that name rows or columns, for a file that is neither Matrix Market nor NumPy", Want: "no such files for a table, which names its own"})
	}
	t, err := newTable(in, anySamples, &r.faults)
	if err != nil {
		return nil, err
	}
	c := t.columns()
	switch {
	case c.has("sample", "node", "value"):
		return r.readLong(t, c)
	case lower(t.header[0]) == "node" && len(t.header) > 1 && recognise(t.header, c) == wideFile:
		return r.readWide(t)
	}
	return nil, t.wrongHeader("")
}

// readLong reads a row for each value.
func (r *sampleReader) readLong(t *table, c columns) ([]Sample, error) {
	sample, node, value := c["sample"], c["node"], c["value"]
	if err := t.once(c, sample, node, value); err != nil {
		return nil, err
	}
	names := newNameTable(0)
	var lines lineIndex
	last := int32(-1)
	for t.row() {
		if !t.sameWidth() {
			continue
		}
		if name := t.fields[sample]; last < 0 || names.names[last] != string(name) {
			v, hash := names.find(name)
			if v < 0 {
				if found, want := nameFault(name, "sample"); found != "" {
					t.faults.Add(t.fault(sample, found, want))
					continue
				}
				v = names.add(name, hash)
			}
			last = v
		}
		v, okNode := r.nodeAt(t, node)
		x, okMass := r.field(t, value)
		if okNode && okMass {
			r.add(last, v, x)
			lines.add(t.line)
		}
	}
	if err := t.err(); err != nil {
		return nil, err
	}
	if len(r.value) == 0 && r.faults.total == 0 {
		r.faults.Add(Fault{File: t.in.path, Found: "a header and no values", Want: "a row for each value"})
	}
	list := r.collect(names.names, func(first, again int) {
		r.faults.Add(Fault{
			File: t.in.path, Line: lines.at(again), Column: node + 1,
			Found: fmt.Sprintf("sample %q at node %q again, as on line %d", names.names[r.sample[again]], r.net.Name(int(r.node[again])), lines.at(first)),
			Want:  "one value for each sample and node",
		})
	})
	return list, r.faults.Err()
}

// readWide reads a row for each node.
func (r *sampleReader) readWide(t *table) ([]Sample, error) {
	names, err := r.wideNames(t)
	if err != nil {
		return nil, err
	}
	seen := make([]int, r.net.Order()) // line of each node
	rows := 0
	for t.row() {
		if !t.sameWidth() {
			continue
		}
		v, ok := r.nodeAt(t, 0)
		if ok && seen[v] > 0 {
			t.faults.Add(t.fault(0, fmt.Sprintf("node %s again, as on line %d", show(t.fields[0]), seen[v]), "each node once"))
			ok = false
		}
		if ok {
			seen[v] = t.line
			rows++
		}
		for s := range names {
			if x, good := r.field(t, s+1); ok && good && x != 0 {
				r.add(int32(s), v, x)
			}
		}
	}
	if err := t.err(); err != nil {
		return nil, err
	}
	if rows == 0 && r.faults.total == 0 {
		r.faults.Add(Fault{File: t.in.path, Found: "a header and no nodes", Want: "a row for each node"})
	}
	if err := r.faults.Err(); err != nil {
		return nil, err
	}
	if absent := r.net.Order() - rows; absent > 0 {
		r.source.warn("%s: %d of the %d nodes of the network have no row; they have no mass", t.in.path, absent, r.net.Order())
	}
	return r.collect(names, nil), nil // rows differ in node, so none stands twice
}

// wideNames checks the sample names of a wide header.
func (r *sampleReader) wideNames(t *table) ([]string, error) {
	names := t.header[1:]
	var faults FaultList
	first := newNameTable(len(names))
	for i, name := range names {
		if found, want := nameFault([]byte(name), "sample"); found != "" {
			faults.Add(t.fault(i+1, found, want))
			continue
		}
		v, hash := first.find([]byte(name))
		if v >= 0 {
			faults.Add(t.fault(i+1, fmt.Sprintf("sample %q again", name), "each sample once"))
			continue
		}
		first.add([]byte(name), hash)
	}
	return names, faults.Err()
}
