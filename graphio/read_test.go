package graphio_test

import (
	"bytes"
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"github.com/klauspost/compress/gzip"
	"github.com/klauspost/compress/zstd"

	"example.org/barrow/graphio"
)

// put writes a file into a folder of the test's own and returns its path.
func put(t testing.TB, name string, text string) string {
	t.Helper()
	path := filepath.Join(t.TempDir(), name)
	if err := os.WriteFile(path, []byte(text), 0o644); err != nil {
		t.Fatal(err)
	}
	return path
}

func gzipped(t testing.TB, text string) string {
	t.Helper()
	var b bytes.Buffer
	w := gzip.NewWriter(&b)
	w.Write([]byte(text))
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

func zstded(t testing.TB, text string) string {
	t.Helper()
	w, err := zstd.NewWriter(nil)
	if err != nil {
		t.Fatal(err)
	}
	return string(w.EncodeAll([]byte(text), nil))
}

// listed is a network in a line: its nodes, then its edges.
func listed(net *graphio.Network) string {
	var b strings.Builder
	for v := range net.Order() {
		fmt.Fprintf(&b, "%s ", net.Name(v))
	}
	for _, e := range net.EdgeList() {
		arrow := "-"
		if e.OneWay {
			arrow = ">"
		}
		fmt.Fprintf(&b, "| %s%s%s %v %v ", net.Name(int(e.From)), arrow, net.Name(int(e.To)), e.Length, e.Weight)
	}
	return strings.TrimSpace(b.String())
}

// What a file holds does not depend on its delimiter, line ends, quotes, order
// of columns, capitals, spaces, byte order mark or compression.
func TestReadNetworkForms(t *testing.T) {
	const want = "a b c | a-b 2 0.5 | b-c 0.25 4"
	for name, text := range map[string]string{
		"comma":            "from,to,length\na,b,2\nb,c,0.25\n",
		"tab":              "from\tto\tlength\na\tb\t2\nb\tc\t0.25\n",
		"semicolon":        "from;to;length\na;b;2\nb;c;.25\n",
		"line ends":        "from,to,length\r\na,b,2\r\nb,c,0.25\r\n",
		"no last line end": "from,to,length\na,b,2\nb,c,0.25",
		"blank lines":      "\n\nfrom,to,length\n\na,b,2\n   \nb,c,0.25\n\n",
		"quotes":           "\"from\",\"to\",\"length\"\n\"a\",\"b\",\"2\"\nb,\"c\", 2.5e-1 \n",
		"order":            "length,note,to,from\n2,\"x, y\",b,a\n0.25,,c,b\n",
		"capitals":         "From,TO,Length\na,b,2\nb,c,+0.25\n",
		"mark":             "\xef\xbb\xbffrom,to,length\na,b,2\nb,c,25E-2\n",
		"weights too":      "from,to,length,weight\na,b,2,0.5\nb,c,0.25,4\n",
	} {
		for packing, pack := range map[string]func(testing.TB, string) string{"plain": func(_ testing.TB, s string) string { return s }, "gzip": gzipped, "zstd": zstded} {
			net, source, err := graphio.ReadNetwork(put(t, "edges.csv", pack(t, text)), "", graphio.NetworkOptions{})
			if err != nil {
				t.Errorf("%s, %s: %v", name, packing, err)
				continue
			}
			if got := listed(net); got != want {
				t.Errorf("%s, %s: got %s, want %s", name, packing, got, want)
			}
			if len(source.Warnings) > 0 || source.Rows != 2 || len(source.Files) != 1 {
				t.Errorf("%s, %s: source %+v", name, packing, source)
			}
		}
	}
}

func TestReadNetworkOptions(t *testing.T) {
	for _, c := range []struct {
		name, edges, nodes string
		opt                graphio.NetworkOptions
		want, warning      string
	}{
		{"inverse", "from,to,weight\na,b,4\n", "", graphio.NetworkOptions{LengthFrom: "inverse"}, "a b | a-b 0.25 4", ""},
		{"neglog", "from,to,weight\na,b,0.5\n", "", graphio.NetworkOptions{LengthFrom: "neglog"}, "a b | a-b " + fmt.Sprint(math.Ln2) + " 0.5", ""},
		{"lengths aside", "from,to,length,weight\na,b,9,4\n", "", graphio.NetworkOptions{LengthFrom: "inverse"}, "a b | a-b 0.25 4", "length is left aside"},
		{"one-way", "from,to,length\na,b,2\n", "", graphio.NetworkOptions{Directed: true}, "a b | a>b 2 0.5", ""},
		{"some one-way", "from,to,length,oneway\na,b,2,yes\nb,c,1,no\nc,d,1,TRUE\nd,e,1,0\n", "", graphio.NetworkOptions{Directed: true}, "a b c d e | a>b 2 0.5 | b-c 1 1 | c>d 1 1 | d-e 1 1", ""},
		{"directions aside", "from,to,length,oneway\na,b,2,1\n", "", graphio.NetworkOptions{}, "a b | a-b 2 0.5", "1 edges are one-way; their directions are left aside"},
		{"both ways listed", "from,to,length\na,b,2\nb,a,2\n", "", graphio.NetworkOptions{}, "a b | a-b 2 0.5", "1 rows repeat an edge in the other direction"},
		{"both ways differ", "from,to,length\na,b,2\nb,a,4\n", "", graphio.NetworkOptions{Directed: true}, "a b | a>b 2 0.5 | b>a 4 0.25", ""},
		{"nodes first", "from,to,length\na,b,2\n", "node\nz\nb\na\n", graphio.NetworkOptions{}, "z b a | a-b 2 0.5", ""},
		{"bridge", "from,to,length\na,b,2\nc,d,1\n", "", graphio.NetworkOptions{Bridge: 8}, "a b c d | a-b 2 0.5 | c-d 1 1 | a-c 8 0.125", "added 1 edges of length 8"},
		{"bridge by place", "from,to,length\na,b,2\nc,d,1\n", "node,x,y\na,0,0\nb,2,0\nc,9,0\nd,3,0\n", graphio.NetworkOptions{Bridge: 8}, "a b c d | a-b 2 0.5 | c-d 1 1 | b-d 8 0.125", `"b" to "d"`},
		// Across the date line Fiji's 179 east is next to 179 west.
		{"bridge on the globe", "from,to,length\na,b,2\nc,d,1\n", "node,lon,lat\na,0,0\nb,179,-17\nc,20,0\nd,-179,-17\n", graphio.NetworkOptions{Bridge: 8}, "a b c d | a-b 2 0.5 | c-d 1 1 | b-d 8 0.125", `"b" to "d"`},
	} {
		nodes := ""
		if c.nodes != "" {
			nodes = put(t, "nodes.csv", c.nodes)
		}
		net, source, err := graphio.ReadNetwork(put(t, "edges.csv", c.edges), nodes, c.opt)
		if err != nil {
			t.Errorf("%s: %v", c.name, err)
			continue
		}
		if got := listed(net); got != c.want {
			t.Errorf("%s: got %s, want %s", c.name, got, c.want)
		}
		if said := strings.Join(source.Warnings, "\n"); (c.warning == "") != (said == "") || !strings.Contains(said, c.warning) {
			t.Errorf("%s: warnings %q, want %q", c.name, said, c.warning)
		}
	}
}

func TestReadNodes(t *testing.T) {
	edges := put(t, "edges.csv", "from,to,length\na,b,2\n")
	net, _, err := graphio.ReadNetwork(edges, put(t, "nodes.csv", "district,y,x,node,colour\nQuay,2,1,a,red\n\"Mill, old\",-4e1,3,b,\n"), graphio.NetworkOptions{})
	if err != nil {
		t.Fatal(err)
	}
	x, y, geographic := net.Places()
	if !slices.Equal(x, []float64{1, 3}) || !slices.Equal(y, []float64{2, -40}) || geographic {
		t.Errorf("places %v %v %v", x, y, geographic)
	}
	if d := net.Districts(); !slices.Equal(d, []string{"Quay", "Mill, old"}) {
		t.Errorf("districts %q", d)
	}
	net, _, err = graphio.ReadNetwork(edges, put(t, "nodes.csv", "node,lon,lat\na,-180,90\nb,12.5,-33\n"), graphio.NetworkOptions{})
	if err != nil {
		t.Fatal(err)
	}
	if x, y, geographic := net.Places(); !geographic || x[0] != -180 || y[1] != -33 || net.Districts() != nil {
		t.Errorf("places %v %v %v, districts %v", x, y, geographic, net.Districts())
	}
}

// spread is samples in a line: "name: node=value …; …".
func spread(net *graphio.Network, samples *graphio.Samples) string {
	var list []string
	for i := range samples.Len() {
		s := samples.At(i)
		text := s.Name + ":"
		for k, v := range s.Nodes {
			text += fmt.Sprintf(" %s=%v", net.Name(int(v)), s.Values[k])
		}
		for _, v := range s.Missing {
			text += fmt.Sprintf(" %s?", net.Name(int(v)))
		}
		list = append(list, text)
	}
	return strings.Join(list, "; ")
}

func path3(t testing.TB) *graphio.Network {
	t.Helper()
	net, err := graphio.NewNetwork([]string{"a", "b", "c"}, []graphio.Edge{{From: 0, To: 1, Length: 1, Weight: 1}, {From: 1, To: 2, Length: 2, Weight: 0.5}})
	if err != nil {
		t.Fatal(err)
	}
	return net
}

func TestReadSamplesForms(t *testing.T) {
	net := path3(t)
	nodes, names := put(t, "nodes.txt", "node\na\nb\nc\n"), put(t, "names.txt", "sample\ns\nt\n")
	bareNodes, bareNames := put(t, "nodes2.txt", "a\nb\nc\n"), put(t, "names2.txt", "s\nt\n")
	matrix := graphio.SampleOptions{RowNames: nodes, ColumnNames: names}
	turned := graphio.SampleOptions{RowNames: names, ColumnNames: nodes}
	const want = "s: a=3 c=0.5; t: b=1"
	// The .npy arrays below were written by NumPy:
	//   python3 -c 'import numpy as n,io,sys; b=io.BytesIO(); n.save(b, n.array([[3,0],[0,1],[.5,0]], "<f8")); sys.stdout.write(repr(b.getvalue()))'
	// with "<f4", and with order="F" or .T for the others.
	head := func(kind, fortran, shape string) string {
		text := fmt.Sprintf("{'descr': '%s', 'fortran_order': %s, 'shape': %s, }", kind, fortran, shape)
		text += strings.Repeat(" ", 117-len(text)) + "\n"
		return "\x93NUMPY\x01\x00\x76\x00" + text
	}
	f8 := map[float64]string{3: "\x00\x00\x00\x00\x00\x00\x08@", 0: "\x00\x00\x00\x00\x00\x00\x00\x00", 1: "\x00\x00\x00\x00\x00\x00\xf0?", 0.5: "\x00\x00\x00\x00\x00\x00\xe0?"}
	array := f8[3] + f8[0] + f8[0] + f8[1] + f8[0.5] + f8[0]
	columns := f8[3] + f8[0] + f8[0.5] + f8[0] + f8[1] + f8[0]
	for _, c := range []struct {
		name, text string
		opt        graphio.SampleOptions
	}{
		{"long", "sample,node,value\ns,a,3\ns,c,0.5\nt,b,1\n", graphio.SampleOptions{}},
		{"long, any order", "value\tsample\tnode\tnote\n.5\ts\tc\t\n3\ts\ta\t-\n1\tt\tb\t\n", graphio.SampleOptions{}},
		{"long, zeros", "sample,node,value\ns,a,3\ns,b,0\ns,c,0.5\nt,b,1\nt,c,-0\n", graphio.SampleOptions{}},
		{"long, mark and line ends", "\xef\xbb\xbfsample,node,value\r\ns,a,3\r\ns,c,0.5\r\nt,b,1\r\n", graphio.SampleOptions{}},
		{"wide, mark and line ends", "\xef\xbb\xbfnode,s,t\r\na,3,0\r\nb,0,1\r\nc,0.5,0\r\n", graphio.SampleOptions{}},
		{"wide", "node,s,t\na,3,0\nb,0,1\nc,0.5,0\n", graphio.SampleOptions{}},
		{"wide, any order", "node;s;t\nc;0.5;0\na;3;0\nb;0;1\n", graphio.SampleOptions{}},
		{"market real", "%%MatrixMarket matrix coordinate real general\n% a comment\n\n3 2 3\n1 1 3\n3 1 5e-1\n2 2 1.0\n", matrix},
		{"market turned", "%%MatrixMarket matrix coordinate real general\n2 3 3\n1 1 3\n1 3 0.5\n2 2 1\n", turned},
		{"market, mark and line ends", "\xef\xbb\xbf%%MatrixMarket matrix coordinate real general\r\n3 2 3\r\n1 1 3\r\n3 1 0.5\r\n2 2 1\r\n", matrix},
		{"market capitals", "%%MatrixMarket MATRIX Coordinate Real General\n3 2 3\n1 1 3\n3 1 0.5\n2 2 1\n", matrix},
		{"market array", "%%MatrixMarket matrix array real general\n3 2\n3\n0\n0.5\n0\n1\n0\n", matrix},
		{"market, names without header", "%%MatrixMarket matrix coordinate real general\n3 2 3\n1 1 3\n3 1 0.5\n2 2 1\n", graphio.SampleOptions{RowNames: bareNodes, ColumnNames: bareNames}},
		{"npy", head("<f8", "False", "(3, 2)") + array, matrix},
		{"npy Fortran", head("<f8", "True", "(3, 2)") + columns, matrix},
		{"npy turned", head("<f8", "False", "(2, 3)") + columns, turned},
		{"npy f4", head("<f4", "False", "(3, 2)") + "\x00\x00@@\x00\x00\x00\x00\x00\x00\x00\x00\x00\x00\x80?\x00\x00\x00?\x00\x00\x00\x00", matrix},
	} {
		for packing, pack := range map[string]func(testing.TB, string) string{"plain": func(_ testing.TB, s string) string { return s }, "gzip": gzipped, "zstd": zstded} {
			samples, _, err := graphio.ReadSamples(put(t, "samples", pack(t, c.text)), net, c.opt)
			if err != nil {
				t.Errorf("%s, %s: %v", c.name, packing, err)
				continue
			}
			if got := spread(net, samples); got != want {
				t.Errorf("%s, %s: got %s, want %s", c.name, packing, got, want)
			}
		}
	}
	whole := map[string]string{ // 3 and 1 as each kind of whole number
		"<i1": "\x03\x00\x00\x01\x00\x00", "|u1": "\x03\x00\x00\x01\x00\x00",
		"<i2": "\x03\x00\x00\x00\x00\x00\x01\x00\x00\x00\x00\x00", "<u2": "\x03\x00\x00\x00\x00\x00\x01\x00\x00\x00\x00\x00",
		"<i4": "\x03\x00\x00\x00\x00\x00\x00\x00\x00\x00\x00\x00\x01\x00\x00\x00\x00\x00\x00\x00\x00\x00\x00\x00",
		"<i8": "\x03" + strings.Repeat("\x00", 23) + "\x01" + strings.Repeat("\x00", 23),
	}
	for kind, data := range whole {
		samples, _, err := graphio.ReadSamples(put(t, "whole.npy", head(kind, "False", "(3, 2)")+data), net, matrix)
		if err != nil {
			t.Errorf("%s: %v", kind, err)
		} else if got := spread(net, samples); got != "s: a=3; t: b=1" {
			t.Errorf("%s: got %s", kind, got)
		}
	}
}

// The forms of the Matrix Market definition beyond coordinates of reals
// (Boisvert, Pozo & Remington 1996): symmetric matrices store the part on and
// below the diagonal, a pattern stands for ones.
func TestMatrixMarketKinds(t *testing.T) {
	net := path3(t)
	opt := graphio.SampleOptions{RowNames: put(t, "nodes.txt", "node\na\nb\nc\n"), ColumnNames: put(t, "names.txt", "sample\nx\ny\nz\n")}
	for _, c := range []struct{ name, text, want string }{
		{"integer", "%%MatrixMarket matrix coordinate integer general\n3 3 2\n1 1 7\n2 3 4\n", "x: a=7; y:; z: b=4"},
		{"pattern", "%%MatrixMarket matrix coordinate pattern general\n3 3 2\n1 1\n2 3\n", "x: a=1; y:; z: b=1"},
		{"symmetric", "%%MatrixMarket matrix coordinate real symmetric\n3 3 3\n1 1 2\n2 1 5\n3 3 1\n", "x: a=2 b=5; y: a=5; z: c=1"},
		{"symmetric pattern", "%%MatrixMarket matrix coordinate pattern symmetric\n3 3 1\n3 1\n", "x: c=1; y:; z: a=1"},
		{"symmetric array", "%%MatrixMarket matrix array real symmetric\n3 3\n1\n2\n3\n4\n5\n6\n", "x: a=1 b=2 c=3; y: a=2 b=4 c=5; z: a=3 b=5 c=6"},
	} {
		samples, _, err := graphio.ReadSamples(put(t, "m.mtx", c.text), net, opt)
		if err != nil {
			t.Errorf("%s: %v", c.name, err)
		} else if got := spread(net, samples); got != c.want {
			t.Errorf("%s: got %s, want %s", c.name, got, c.want)
		}
	}
}

func TestMissingIsNotZero(t *testing.T) {
	net := path3(t)
	for _, word := range []string{"", "NaN", "NA", "n/a", "null"} {
		path := put(t, "s.csv", "sample,node,value\nx,a,1\nx,b,"+word+"\n")
		if _, _, err := graphio.ReadSamples(path, net, graphio.SampleOptions{}); err == nil || !strings.Contains(err.Error(), "--missing") {
			t.Errorf("%q: error %v", word, err)
		}
		samples, source, err := graphio.ReadSamples(path, net, graphio.SampleOptions{Missing: "zero"})
		if err != nil {
			t.Fatalf("%q: %v", word, err)
		}
		if got := spread(net, samples); got != "x: a=1 b?" || len(source.Warnings) != 1 {
			t.Errorf("%q: got %s, warnings %q", word, got, source.Warnings)
		}
	}
}

func TestReadGroups(t *testing.T) {
	net := path3(t)
	samples, _, err := graphio.ReadSamples(put(t, "s.csv", "sample,node,value\nx,a,1\ny,b,1\nz,c,1\n"), net, graphio.SampleOptions{})
	if err != nil {
		t.Fatal(err)
	}
	groups, source, err := graphio.ReadGroups(put(t, "g.tsv", "day\tsample\tbatch\nmon\ty\t1\ntue\tx\t2\n"), samples)
	if err != nil {
		t.Fatal(err)
	}
	days, ok := groups.Labels("day", samples.Names())
	if !ok || !slices.Equal(days, []string{"tue", "mon", ""}) || !slices.Equal(groups.Columns(), []string{"day", "batch"}) {
		t.Errorf("days %q, columns %q", days, groups.Columns())
	}
	if len(source.Warnings) != 1 || !strings.Contains(source.Warnings[0], "1 of the 3 samples have no row") {
		t.Errorf("warnings %q", source.Warnings)
	}
	if _, ok := groups.Labels("night", nil); ok {
		t.Error("a column that is not there has labels")
	}
}

// The checksum is of the bytes on disk, packed or not: printf 'from,to,length\na,b,1\n' | sha256sum
func TestChecksum(t *testing.T) {
	const text = "from,to,length\na,b,1\n"
	path := put(t, "e.csv", text)
	_, source, err := graphio.ReadNetwork(path, "", graphio.NetworkOptions{})
	if err != nil {
		t.Fatal(err)
	}
	const want = "f961a23309777a2a552e531cb81a7ff026e79468ce1dba12a0bb7801e1eee369"
	if f := source.Files[0]; f.SHA256 != want || f.Bytes != int64(len(text)) || f.Path != path {
		t.Errorf("got %+v, want %s of %d bytes", f, want, len(text))
	}
}

// faults is the faults of an error, which must have some.
func faults(t testing.TB, name string, err error) *graphio.Faults {
	t.Helper()
	var f *graphio.Faults
	if !errors.As(err, &f) {
		t.Fatalf("%s: error %v (%T), want faults", name, err, err)
	}
	return f
}
