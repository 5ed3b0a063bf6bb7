package graphio

import (
	"bufio"
	"encoding/binary"
	"fmt"
	"io"
	"math"
	"strings"
)

// A TableWriter writes a comma-separated table field by field. Text is quoted
// where RFC 4180 asks for it; numbers are the shortest decimals that read back
// as the same float64, and a NaN is an empty field. Errors show in Flush.
type TableWriter struct {
	to    *bufio.Writer
	begun bool
	buf   []byte
}

// NewTableWriter writes a table with the given header.
func NewTableWriter(w io.Writer, header ...string) *TableWriter {
	t := &TableWriter{to: bufio.NewWriterSize(w, 1<<16)}
	for _, h := range header {
		t.Text(h)
	}
	t.End()
	return t
}

// Text adds a field of text.
func (t *TableWriter) Text(s string) *TableWriter {
	t.separate()
	if !strings.ContainsAny(s, ",\"\r\n\t;") && s == strings.TrimSpace(s) {
		t.to.WriteString(s)
		return t
	}
	t.to.WriteByte('"')
	t.to.WriteString(strings.ReplaceAll(s, `"`, `""`))
	t.to.WriteByte('"')
	return t
}

// Number adds a field with a number.
func (t *TableWriter) Number(x float64) *TableWriter {
	t.separate()
	if !math.IsNaN(x) {
		t.buf = formatNumber(t.buf[:0], x)
		t.to.Write(t.buf)
	}
	return t
}

func (t *TableWriter) separate() {
	if t.begun {
		t.to.WriteByte(',')
	}
	t.begun = true
}

// End ends the row.
func (t *TableWriter) End() {
	t.to.WriteByte('\n')
	t.begun = false
}

// Flush writes what is left and returns the first error of all.
func (t *TableWriter) Flush() error { return t.to.Flush() }

// WriteNetwork writes the edges: from,to,length,weight, and oneway (1 or 0)
// where some edge is.
func WriteNetwork(w io.Writer, net *Network) error {
	header := []string{"from", "to", "length", "weight"}
	if net.Directed() {
		header = append(header, "oneway")
	}
	t := NewTableWriter(w, header...)
	for _, e := range net.EdgeList() {
		t.Text(net.Name(int(e.From))).Text(net.Name(int(e.To))).Number(e.Length).Number(e.Weight)
		if net.Directed() {
			oneWay := 0.0
			if e.OneWay {
				oneWay = 1
			}
			t.Number(oneWay)
		}
		t.End()
	}
	return t.Flush()
}

// WriteNodes writes the nodes, with coordinates and districts where the network
// has them.
func WriteNodes(w io.Writer, net *Network) error {
	header := []string{"node"}
	x, y, geographic := net.Places()
	switch {
	case x != nil && geographic:
		header = append(header, "lon", "lat")
	case x != nil:
		header = append(header, "x", "y")
	}
	districts := net.Districts()
	if districts != nil {
		header = append(header, "district")
	}
	t := NewTableWriter(w, header...)
	for v := range net.Order() {
		t.Text(net.Name(v))
		if x != nil {
			t.Number(x[v]).Number(y[v])
		}
		if districts != nil {
			t.Text(districts[v])
		}
		t.End()
	}
	return t.Flush()
}

// WriteSamples writes samples in long form: a row for each value. Samples
// without mass do not show there.
func WriteSamples(w io.Writer, net *Network, samples *Samples) error {
	t := NewTableWriter(w, "sample", "node", "value")
	for i := range samples.Len() {
		s := samples.At(i)
		for k, v := range s.Nodes {
			t.Text(s.Name).Text(net.Name(int(v))).Number(s.Values[k]).End()
		}
	}
	return t.Flush()
}

// WriteWide writes samples in wide form: a row for each node, a column for each
// sample. Memory: the values as a dense table, one row at a time.
func WriteWide(w io.Writer, net *Network, samples *Samples) error {
	t := NewTableWriter(w, append([]string{"node"}, samples.Names()...)...)
	next := make([]int, samples.Len()) // entry of each sample not yet written
	for v := range net.Order() {
		t.Text(net.Name(v))
		for i := range next {
			s, x := samples.At(i), 0.0
			if k := next[i]; k < len(s.Nodes) && int(s.Nodes[k]) == v {
				x = s.Values[k]
				next[i]++
			}
			t.Number(x)
		}
		t.End()
	}
	return t.Flush()
}

// WriteMatrixMarket writes samples as a sparse matrix of nodes × samples in
// Matrix Market coordinate form. Its rows are the network's nodes and its
// columns the samples, in order.
func WriteMatrixMarket(w io.Writer, net *Network, samples *Samples) error {
	entries := 0
	for i := range samples.Len() {
		entries += len(samples.At(i).Nodes)
	}
	to := bufio.NewWriterSize(w, 1<<16)
	fmt.Fprintf(to, "%%%%MatrixMarket matrix coordinate real general\n%% nodes × samples\n%d %d %d\n", net.Order(), samples.Len(), entries)
	var line []byte
	for i := range samples.Len() {
		s := samples.At(i)
		for k, v := range s.Nodes {
			line = fmt.Appendf(line[:0], "%d %d ", v+1, i+1)
			line = append(formatNumber(line, s.Values[k]), '\n')
			to.Write(line)
		}
	}
	return to.Flush()
}

// WriteNPY writes samples as a NumPy array of float64, nodes × samples.
func WriteNPY(w io.Writer, net *Network, samples *Samples) error {
	to := bufio.NewWriterSize(w, 1<<16)
	to.Write(npyHeader("<f8", net.Order(), samples.Len()))
	next := make([]int, samples.Len())
	var raw [8]byte
	for v := range net.Order() {
		for i := range next {
			s, x := samples.At(i), 0.0
			if k := next[i]; k < len(s.Nodes) && int(s.Nodes[k]) == v {
				x = s.Values[k]
				next[i]++
			}
			binary.LittleEndian.PutUint64(raw[:], math.Float64bits(x))
			to.Write(raw[:])
		}
	}
	return to.Flush()
}

// npyHeader is that of a .npy file, version 1.0: padded so that the data begin
// at a multiple of 64 bytes. Here and not from the library, which writes whole
// arrays only.
func npyHeader(kind string, rows, columns int) []byte {
	text := fmt.Sprintf("{'descr': '%s', 'fortran_order': False, 'shape': (%d, %d), }", kind, rows, columns)
	size := (10+len(text)+1+63)/64*64 - 10
	head := append([]byte("\x93NUMPY\x01\x00"), byte(size), byte(size>>8))
	head = append(head, text...)
	for len(head) < size+9 {
		head = append(head, ' ')
	}
	return append(head, '\n')
}

// WriteGroups writes labels: a row for each of the named samples.
func WriteGroups(w io.Writer, groups *Groups, samples []string) error {
	t := NewTableWriter(w, append([]string{"sample"}, groups.Columns()...)...)
	for i, name := range samples {
		t.Text(name)
		for _, c := range groups.Columns() {
			labels, _ := groups.Labels(c, samples[i:i+1])
			t.Text(labels[0])
		}
		t.End()
	}
	return t.Flush()
}
