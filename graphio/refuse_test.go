package graphio_test

import (
	"os"
	"path/filepath"
	"strings"
	"testing"

	"example.org/barrow/graphio"
)

// A refusal is a file that a reader must refuse, where it must say the fault
// is, and words that its message must have.
type refusal struct {
	name, text   string
	line, column int
	words        []string
}

// check compares what a reader said with what it should.
func (c refusal) check(t *testing.T, err error, path string) {
	t.Helper()
	if err == nil {
		t.Errorf("%s: accepted", c.name)
		return
	}
	f := faults(t, c.name, err)
	if first := f.Kept[0]; first.File != path || first.Line != c.line || first.Column != c.column {
		t.Errorf("%s: at %s, line %d, column %d; want line %d, column %d", c.name, first.File, first.Line, first.Column, c.line, c.column)
	}
	for _, w := range append(c.words, "; want ") {
		if !strings.Contains(err.Error(), w) {
			t.Errorf("%s: %v lacks %q", c.name, err, w)
		}
	}
}

func TestRefusedEdges(t *testing.T) {
	const ok = "from,to,length\na,b,1\n"
	for _, c := range []refusal{
		{"empty file", "", 0, 0, []string{"no header, no rows"}},
		{"only blank lines", "\n \n\n", 0, 0, []string{"no header, no rows"}},
		{"header only", "from,to,length\n", 0, 0, []string{"a header and no edges"}},
		{"bars", "from|to|length\na|b|1\n", 1, 0, []string{"separated by bars (|)", "commas, tabs or semicolons"}},
		{"spaces", "from to length\na b 1\n", 1, 0, []string{"separated by spaces"}},
		{"no header", "a,b,1\nb,c,2\n", 1, 0, []string{"no header: the first row is a,b,1"}},
		{"no length", "from,to\na,b\n", 1, 0, []string{"a column length"}},
		{"weights alone", "from,to,weight\na,b,2\n", 1, 0, []string{"--length-from inverse"}},
		{"a column twice", "from,to,length,length\na,b,1,2\n", 1, 4, []string{`a second column "length"`}},
		{"samples", "sample,node,value\nx,a,1\n", 1, 0, []string{"this looks like a samples file"}},
		{"flows", "from,to,flow,cost\na,b,1,1\n", 1, 0, []string{"a table of flows"}},
		{"zero length", "from,to,length\na,b,0\n", 2, 3, []string{`length "0"`, "a finite number above 0"}},
		{"negative length", ok + "b,c,-2.5\n", 3, 3, []string{`length "-2.5"`}},
		{"no number", ok + "b,c,far\n", 3, 3, []string{`length "far"`, "like 12.5"}},
		{"decimal comma", "from;to;length\na;b;1,5\n", 2, 3, []string{"with a point for decimals"}},
		{"infinite", ok + "b,c,Inf\n", 3, 3, []string{`length "Inf"`}},
		{"past the range", ok + "b,c,1e999\n", 3, 3, []string{`length "1e999"`}},
		{"hexadecimal", ok + "b,c,0x10\n", 3, 3, []string{`length "0x10"`}},
		{"underscores", ok + "b,c,1_000\n", 3, 3, []string{`length "1_000"`}},
		{"missing", ok + "b,c,NaN\n", 3, 3, []string{`length "NaN"`}},
		{"empty", ok + "b,c,\n", 3, 3, []string{"no length"}},
		{"a length without weight", ok + "b,c,1e-320\n", 3, 3, []string{"whose weight 1/length is not finite"}},
		{"negative weight", "from,to,length,weight\na,b,1,-1\n", 2, 4, []string{`weight "-1"`}},
		{"self-loop", ok + "c,c,1\n", 3, 2, []string{`an edge from node "c" to itself`}},
		{"twice", ok + "b,c,1\na,b,2\n", 4, 1, []string{`edge from "a" to "b" again, as on line 2`}},
		{"twice, other way", ok + "b,a,2\n", 3, 1, []string{"in the other direction on line 2", "--directed"}},
		{"no name", ok + ",c,1\n", 3, 1, []string{"node"}},
		{"fewer fields", ok + "b,c\n", 3, 0, []string{"2 fields", "3, as in the header, separated by commas"}},
		{"more fields", ok + "b,c,1,2\n", 3, 3, []string{"4 fields"}},
		{"oneway", "from,to,length,oneway\na,b,1,perhaps\n", 2, 4, []string{`oneway "perhaps"`, "yes or no"}},
		{"open quote", ok + "\"b,c,1\n", 3, 1, []string{"a quote that is never closed"}},
		{"text after quote", ok + "\"b\"x,c,1\n", 3, 1, []string{"text after a closing quote"}},
		{"quote inside", ok + "b\"x,c,1\n", 3, 1, []string{"a quote inside"}},
		{"old line ends", "from,to,length\ra,b,1\rb,c,1\r", 1, 1, []string{"carriage returns"}},
		{"Latin-1 name", ok + "Caf\xe9,b,1\n", 3, 1, []string{"UTF-8"}},
		{"Latin-1 header", "from,to,length,stra\xdfe\na,b,1,x\n", 1, 4, []string{"UTF-8"}},
		{"UTF-16", "\xff\xfef\x00r\x00o\x00m\x00", 0, 0, []string{"UTF-16"}},
		{"spreadsheet", "PK\x03\x04rest", 0, 0, []string{"a zip archive (a spreadsheet?)"}},
		{"JSON", "{\"from\": 1}\n", 0, 0, []string{"JSON"}},
		{"page", "<html>\n", 0, 0, []string{"a page or document with tags"}},
		{"binary", "from\x00to", 0, 0, []string{"binary data"}},
		{"market", "%%MatrixMarket matrix coordinate real general\n", 0, 0, []string{"a Matrix Market file"}},
		{"packed twice", gzipped(t, gzipped(t, ok)), 0, 0, []string{"gzip data inside compressed data"}},
	} {
		path := put(t, "edges.csv", c.text)
		_, _, err := graphio.ReadNetwork(path, "", graphio.NetworkOptions{})
		c.check(t, err, path)
	}
	for name, packed := range map[string]string{"gzip": gzipped(t, ok), "zstd": zstded(t, ok)} {
		_, _, err := graphio.ReadNetwork(put(t, "cut.csv", packed[:len(packed)-5]), "", graphio.NetworkOptions{})
		if err == nil || !strings.Contains(err.Error(), name+" data that ends early; want the whole file") {
			t.Errorf("cut %s: error %v", name, err)
		}
		damaged := []byte(packed)
		damaged[len(damaged)/2] ^= 0x55
		if net, _, err := graphio.ReadNetwork(put(t, "bad.csv", string(damaged)), "", graphio.NetworkOptions{}); err == nil {
			t.Errorf("damaged %s: read as %s", name, listed(net))
		}
	}
	folder := t.TempDir()
	_, _, err := graphio.ReadNetwork(folder, "", graphio.NetworkOptions{})
	refusal{"folder", "", 0, 0, []string{"a directory"}}.check(t, err, folder)
	absent := filepath.Join(folder, "absent.csv")
	_, _, err = graphio.ReadNetwork(absent, "", graphio.NetworkOptions{})
	refusal{"no file", "", 0, 0, []string{"no such file"}}.check(t, err, absent)
	for _, c := range []struct {
		text string
		opt  graphio.NetworkOptions
		word string
	}{
		{"from,to,weight\na,b,1\n", graphio.NetworkOptions{LengthFrom: "neglog"}, "below 1"},
		{"from,to,weight\na,b,1e-320\n", graphio.NetworkOptions{LengthFrom: "inverse"}, "whose inverse is finite"},
		{ok, graphio.NetworkOptions{LengthFrom: "inverse"}, "a column weight"},
		{ok, graphio.NetworkOptions{LengthFrom: "log"}, "inverse (1/weight) or neglog"},
		{ok, graphio.NetworkOptions{Bridge: -1}, "--bridge with a finite length above 0"},
	} {
		if _, _, err := graphio.ReadNetwork(put(t, "e.csv", c.text), "", c.opt); err == nil || !strings.Contains(err.Error(), c.word) {
			t.Errorf("%+v: error %v, want one with %q", c.opt, err, c.word)
		}
	}
}

func TestRefusedNodes(t *testing.T) {
	edges := put(t, "edges.csv", "from,to,length\na,b,1\n")
	for _, c := range []refusal{
		{"samples", "sample,node,value\nx,a,1\n", 1, 0, []string{"this looks like a samples file"}},
		{"twice", "node\na\nb\na\n", 4, 1, []string{`"a" again, as on line 2`}},
		{"x alone", "node,x\na,1\nb,2\n", 1, 0, []string{"y"}},
		{"no number", "node,x,y\na,1,2\nb,1,east\n", 3, 3, []string{`"east"`}},
		{"off the globe", "node,lon,lat\na,1,2\nb,1,91\n", 3, 3, []string{`"91"`, "90"}},
		{"x twice", "node,x,y,X\na,1,2,3\n", 1, 4, []string{`a second column "X"`}},
		{"no nodes", "node\n", 0, 0, []string{"no nodes"}},
	} {
		path := put(t, "nodes.csv", c.text)
		_, _, err := graphio.ReadNetwork(edges, path, graphio.NetworkOptions{})
		c.check(t, err, path)
	}
	// An edge may only name the nodes of the nodes file.
	_, _, err := graphio.ReadNetwork(edges, put(t, "nodes.csv", "node\na\nB\n"), graphio.NetworkOptions{})
	refusal{"unknown", "", 2, 2, []string{`node "b", which is not in`, `did you mean "B"`}}.check(t, err, edges)
}

func TestRefusedSamples(t *testing.T) {
	net := path3(t)
	for _, c := range []refusal{
		{"header only", "sample,node,value\n", 0, 0, []string{"a header and no values"}},
		{"edges", "from,to,length\na,b,1\n", 1, 0, []string{"this looks like an edges file"}},
		{"a column twice", "sample,node,value,value\nx,a,1,2\n", 1, 4, []string{`a second column "value"`}},
		{"negative", "sample,node,value\nx,a,-3\n", 2, 3, []string{"-3", "0 or more"}},
		{"infinite", "sample,node,value\nx,a,1e400\n", 2, 3, []string{"1e400"}},
		{"no number", "sample,node,value\nx,a,many\n", 2, 3, []string{"many"}},
		{"unknown node", "sample,node,value\nx,A,3\n", 2, 2, []string{`node "A"`, `did you mean "a"`}},
		{"twice", "sample,node,value\nx,a,3\ny,a,3\nx,a,4\n", 4, 2, []string{`sample "x" at node "a" again, as on line 2`}},
		{"no name", "sample,node,value\n,a,3\n", 2, 1, []string{"sample"}},
		{"wide, node twice", "node,s\na,1\na,2\n", 3, 1, []string{`node "a" again, as on line 2`}},
		{"wide, sample twice", "node,s,t,s\na,1,2,3\n", 1, 4, []string{`sample "s" again`}},
		{"wide, no rows", "node,s\n", 0, 0, []string{"a header and no nodes"}},
		{"wide, negative", "node,s,t\na,1,2\nb,1,-2\n", 3, 3, []string{"-2"}},
		{"wide, unknown node", "node,s\nd,1\n", 2, 1, []string{`node "d"`}},
		{"matrix without names", "%%MatrixMarket matrix coordinate real general\n3 2 0\n", 0, 0, []string{"--rows FILE --columns FILE"}},
	} {
		path := put(t, "samples.csv", c.text)
		_, _, err := graphio.ReadSamples(path, net, graphio.SampleOptions{})
		c.check(t, err, path)
	}
	for _, missing := range []string{"average"} {
		if _, _, err := graphio.ReadSamples("-", net, graphio.SampleOptions{Missing: missing}); err == nil || !strings.Contains(err.Error(), "--missing") {
			t.Errorf("--missing %s: error %v", missing, err)
		}
	}
}

func TestRefusedMatrices(t *testing.T) {
	net := path3(t)
	nodes, names := put(t, "nodes.txt", "node\na\nb\nc\n"), put(t, "names.txt", "sample\nx\ny\n")
	opt := graphio.SampleOptions{RowNames: nodes, ColumnNames: names}
	const head = "%%MatrixMarket matrix coordinate real general\n"
	for _, c := range []refusal{
		{"banner", "%%MatrixMarket vector coordinate real general\n", 1, 0, []string{"first line"}},
		{"complex", "%%MatrixMarket matrix coordinate complex general\n3 2 0\n", 1, 0, []string{`values "complex"`}},
		{"skew", "%%MatrixMarket matrix coordinate real skew-symmetric\n3 2 0\n", 1, 0, []string{`symmetry "skew-symmetric"`}},
		{"pattern array", "%%MatrixMarket matrix array pattern general\n3 2\n", 1, 0, []string{"an array of a pattern"}},
		{"size", head + "3 2\n", 2, 0, []string{"size line", "rows, columns and entries"}},
		{"negative size", head + "3 -2 1\n", 2, 0, []string{"size line"}},
		{"no size", head + "% nothing\n", 2, 0, []string{"the end of the file"}},
		{"not square", "%%MatrixMarket matrix coordinate real symmetric\n3 2 0\n", 2, 0, []string{"as many rows as columns"}},
		{"row 0", head + "3 2 1\n0 1 5\n", 3, 0, []string{`row "0"`, "from 1 to 3"}},
		{"row past the end", head + "3 2 1\n4 1 5\n", 3, 0, []string{`row "4"`}},
		{"fewer entries", head + "3 2 2\n1 1 5\n", 3, 0, []string{"after 1 entries"}},
		{"more entries", head + "3 2 1\n1 1 5\n2 1 5\n", 4, 0, []string{"more entries"}},
		{"twice", head + "3 2 2\n1 1 5\n1 1 6\n", 0, 0, []string{"two entries"}},
		{"negative", head + "3 2 1\n1 1 -5\n", 3, 0, []string{"-5"}},
		{"not whole", "%%MatrixMarket matrix coordinate integer general\n3 2 1\n1 1 1.5\n", 3, 0, []string{`not whole: "1.5"`}},
		{"not the first word", "%%MatrixMarkets matrix coordinate real general\n", 1, 0, []string{"first line"}},
		{"words", head + "3 2 1\n1 1\n", 3, 0, []string{"3 numbers"}},
		{"absurd size", "%%MatrixMarket matrix array real general\n3 2\n1\n", 3, 0, []string{"the end of the file"}},
		{"long line", head + "3 2 1\n" + strings.Repeat(" ", 1<<17) + "\n", 2, 0, []string{"a line of more than"}},
	} {
		path := put(t, "m.mtx", c.text)
		_, _, err := graphio.ReadSamples(path, net, opt)
		c.check(t, err, path)
	}
	// Sizes that do not match the names are refused before anything is made of
	// that size.
	huge := put(t, "huge.mtx", head+"4000000000000 2 1\n1 1 1\n")
	_, _, err := graphio.ReadSamples(huge, net, opt)
	refusal{"absurd rows", "", 0, 0, []string{"3 names", "4000000000000 rows"}}.check(t, err, nodes)
	for name, text := range map[string]string{
		"cut header":   "\x93NUMPY\x01\x00\x76\x00{'descr'",
		"huge header":  "\x93NUMPY\x02\x00\xff\xff\xff\x7f{'descr'",
		"no type":      npyText("{'fortran_order': False, 'shape': (3, 2), }"),
		"objects":      npyText("{'descr': '|O', 'fortran_order': False, 'shape': (3, 2), }"),
		"one dim":      npyText("{'descr': '<f8', 'fortran_order': False, 'shape': (3,), }"),
		"three dims":   npyText("{'descr': '<f8', 'fortran_order': False, 'shape': (3, 2, 1), }"),
		"absurd shape": npyText("{'descr': '<f8', 'fortran_order': False, 'shape': (9000000000000000000, 2), }"),
		"no data":      npyText("{'descr': '<f8', 'fortran_order': False, 'shape': (3, 2), }"),
		"more data":    npyText("{'descr': '|u1', 'fortran_order': False, 'shape': (3, 2), }") + "1234567",
		"negative":     npyText("{'descr': '|i1', 'fortran_order': False, 'shape': (3, 2), }") + "12345\xff",
		"nan":          npyText("{'descr': '<f4', 'fortran_order': False, 'shape': (3, 2), }") + strings.Repeat("\x00\x00\xc0\x7f", 6),
	} {
		if _, _, err := graphio.ReadSamples(put(t, "a.npy", text), net, opt); err == nil {
			t.Errorf("%s: accepted", name)
		} else {
			faults(t, name, err)
		}
	}
	// What is cut within a compressed file is said to be cut, in every form.
	array := npyText("{'descr': '|u1', 'fortran_order': False, 'shape': (3, 2), }") + "\x01\x00\x02\x00\x00\x03"
	for form, text := range map[string]string{"market": head + "3 2 1\n1 1 5\n", "npy": array} {
		for packing, packed := range map[string]string{"gzip": gzipped(t, text), "zstd": zstded(t, text)} {
			_, _, err := graphio.ReadSamples(put(t, "cut", packed[:len(packed)-5]), net, opt)
			if err == nil || !strings.Contains(err.Error(), packing+" data that ends early; want the whole file") {
				t.Errorf("cut %s, %s: error %v", form, packing, err)
			}
		}
	}
	for _, c := range []struct{ name, rows, columns, word string }{
		{"both nodes", nodes, put(t, "n2.txt", "node\na\nb\n"), "names of nodes for the columns"},
		{"too many", put(t, "n4.txt", "node\na\nb\nc\nd\n"), names, "more than 3 names"},
		{"unknown node", put(t, "nd.txt", "node\na\nb\nd\n"), names, `node "d"`},
		{"node twice", put(t, "na.txt", "node\na\nb\na\n"), names, `node "a" again, as on line 2`},
		{"sample twice", nodes, put(t, "s2.txt", "sample\nx\nx\n"), `sample "x" again, as on line 2`},
		{"neither", put(t, "p.txt", "p\nq\nr\n"), put(t, "q.txt", "p\nq\n"), "leave open whether rows or columns are nodes"},
		{"no file", "absent.txt", names, "no such file"},
	} {
		path := put(t, "m.mtx", head+"3 2 1\n1 1 1\n")
		if _, _, err := graphio.ReadSamples(path, net, graphio.SampleOptions{RowNames: c.rows, ColumnNames: c.columns}); err == nil || !strings.Contains(err.Error(), c.word) {
			t.Errorf("%s: error %v, want one with %q", c.name, err, c.word)
		}
	}
}

func npyText(header string) string {
	return "\x93NUMPY\x01\x00\x76\x00" + header + strings.Repeat(" ", 117-len(header)) + "\n"
}

func TestRefusedGroups(t *testing.T) {
	samples, _, err := graphio.ReadSamples(put(t, "s.csv", "sample,node,value\nx,a,1\ny,b,1\n"), path3(t), graphio.SampleOptions{})
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []refusal{
		{"no factor", "sample\nx\n", 1, 0, []string{"a groups file"}},
		{"samples", "sample,node,value\nx,a,1\n", 1, 0, []string{"this looks like a samples file"}},
		{"unknown", "sample,day\nz,mon\n", 2, 1, []string{`sample "z", which is not among the samples`}},
		{"twice", "sample,day\nx,mon\nx,tue\n", 3, 1, []string{`sample "x" again, as on line 2`}},
		{"column twice", "sample,day,day\nx,mon,tue\n", 1, 3, []string{`column "day"`}},
	} {
		path := put(t, "g.csv", c.text)
		_, _, err := graphio.ReadGroups(path, samples)
		c.check(t, err, path)
	}
}

// All faults are counted, and a screenful of them listed.
func TestFaultsAreCollected(t *testing.T) {
	_, _, err := graphio.ReadNetwork(put(t, "e.csv", "from,to,length\n"+strings.Repeat("a,b,-1\n", 300)), "", graphio.NetworkOptions{})
	f := faults(t, "many", err)
	if f.Total < 300 || len(f.Kept) != graphio.MaxFaults || f.Kept[7].Line != 9 {
		t.Errorf("%d faults, %d kept, the eighth on line %d", f.Total, len(f.Kept), f.Kept[7].Line)
	}
	if !strings.Contains(err.Error(), "more like these") {
		t.Errorf("error %v", err)
	}
}

// Compressed data may not expand past a limit, whatever they declare.
func TestExpansionIsBounded(t *testing.T) {
	text := "from,to,length\n" + strings.Repeat("a,b,1\n", 1<<20)
	for name, packed := range map[string]string{"gzip": gzipped(t, text), "zstd": zstded(t, text)} {
		path := put(t, "e.csv", packed)
		_, _, err := graphio.ReadNetwork(path, "", graphio.NetworkOptions{MaxExpanded: 1 << 20})
		if err == nil || !strings.Contains(err.Error(), "expand") {
			t.Errorf("%s: error %v", name, err)
		}
		if info, _ := os.Stat(path); info.Size() > 1<<16 {
			t.Errorf("%s: %d bytes on disk are no bomb", name, info.Size())
		}
	}
	// A row without end may not fill memory either.
	path := put(t, "long.csv", "from,to,length\n"+strings.Repeat("x", 17<<20))
	_, _, err := graphio.ReadNetwork(path, "", graphio.NetworkOptions{})
	refusal{"long row", "", 2, 0, []string{"a row longer than 16 MiB"}}.check(t, err, path)
}
