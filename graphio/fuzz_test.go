package graphio_test

import (
	"bytes"
	"errors"
	"io"
	"os"
	"path/filepath"
	"testing"

	"example.org/barrow/graphio"
)

// Whatever a file holds, a reader ends with faults or with what can be written
// and read again as it is. Memory stays bounded: a mebibyte of input may expand
// to sixteen.
const fuzzLimit = 16 << 20

// fuzzFile puts input into a file, which readers take.
func fuzzFile(t *testing.T, name string, data []byte) string {
	path := filepath.Join(t.TempDir(), name)
	if err := os.WriteFile(path, data, 0o644); err != nil {
		t.Fatal(err)
	}
	return path
}

func mustBeFaults(t *testing.T, err error) {
	t.Helper()
	var f *graphio.Faults
	if !errors.As(err, &f) {
		t.Fatalf("error %v (%T) is no list of faults", err, err)
	}
	if f.Total < len(f.Kept) || len(f.Kept) == 0 {
		t.Fatalf("%d faults, %d of them kept", f.Total, len(f.Kept))
	}
	for _, fault := range f.Kept {
		if fault.Found == "" || fault.Want == "" {
			t.Fatalf("%+v does not say what is wrong and what would do", fault)
		}
	}
}

func rendered(t *testing.T, write func(io.Writer) error) []byte {
	var b bytes.Buffer
	if err := write(&b); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

func FuzzReadNetwork(f *testing.F) {
	for _, seed := range []string{
		"from,to,length\na,b,1\nb,c,2.5\n", "from;to;weight\na;b;0,5\n", "from\tto\tlength\toneway\n\"a\"\"\"\tb\t1e-3\tyes\n",
		"\xef\xbb\xbffrom,to,length,weight\r\na,b,1,2\r\nb,a,1,2\r\n", "from,to,length\n\"a\nb\",c,1\n", "from|to\n", "\x1f\x8b\x08", "\x28\xb5\x2f\xfd", "{}",
		gzipped(f, "from,to,length\na,b,1\n"), zstded(f, "from,to,length\na,b,1\n"),
	} {
		f.Add([]byte(seed), false, uint8(0))
		f.Add([]byte(seed), true, uint8(1))
	}
	f.Fuzz(func(t *testing.T, data []byte, directed bool, from uint8) {
		opt := graphio.NetworkOptions{Directed: directed, MaxExpanded: fuzzLimit, LengthFrom: []string{"", "inverse", "neglog"}[from%3]}
		net, _, err := graphio.ReadNetwork(fuzzFile(t, "e.csv", data), "", opt)
		if err != nil {
			mustBeFaults(t, err)
			return
		}
		text := rendered(t, func(w io.Writer) error { return graphio.WriteNetwork(w, net) })
		again, _, err := graphio.ReadNetwork(fuzzFile(t, "again.csv", text), "", graphio.NetworkOptions{Directed: net.Directed()})
		if err != nil {
			t.Fatalf("%q\nwas read and written as\n%q\nand then: %v", data, text, err)
		}
		if listed(net) != listed(again) {
			t.Fatalf("%s\nwas written and read as\n%s", listed(net), listed(again))
		}
	})
}

func FuzzReadNodes(f *testing.F) {
	edges := filepath.Join(f.TempDir(), "edges.csv")
	if err := os.WriteFile(edges, []byte("from,to,length\na,b,1\n"), 0o644); err != nil {
		f.Fatal(err)
	}
	for _, seed := range []string{"node\na\nb\n", "node,x,y,district\na,1,2,Quay\nb,-1e3,.5,\n", "node,lon,lat\na,180,-90\nb,0,0\n", "node;x;y\na;1,5;2\n"} {
		f.Add([]byte(seed))
	}
	f.Fuzz(func(t *testing.T, data []byte) {
		net, _, err := graphio.ReadNetwork(edges, fuzzFile(t, "n.csv", data), graphio.NetworkOptions{MaxExpanded: fuzzLimit})
		if err != nil {
			mustBeFaults(t, err)
			return
		}
		text := rendered(t, func(w io.Writer) error { return graphio.WriteNodes(w, net) })
		again, _, err := graphio.ReadNetwork(edges, fuzzFile(t, "again.csv", text), graphio.NetworkOptions{})
		if err != nil {
			t.Fatalf("%q\nwas read and written as\n%q\nand then: %v", data, text, err)
		}
		if listed(net) != listed(again) {
			t.Fatalf("%s\nwas written and read as\n%s", listed(net), listed(again))
		}
	})
}

// fuzzSamples reads data as samples on a path of three nodes, and what comes
// of it again.
func fuzzSamples(t *testing.T, name string, data []byte, opt graphio.SampleOptions) {
	net := path3(t)
	opt.MaxExpanded = fuzzLimit
	samples, _, err := graphio.ReadSamples(fuzzFile(t, name, data), net, opt)
	if err != nil {
		mustBeFaults(t, err)
		return
	}
	text := rendered(t, func(w io.Writer) error { return graphio.WriteSamples(w, net, samples) })
	again, _, err := graphio.ReadSamples(fuzzFile(t, "again.csv", text), net, graphio.SampleOptions{})
	want := withoutEmpty(net, dropMissing(t, samples))
	if want == "" { // no values at all are refused
		return
	}
	if err != nil {
		t.Fatalf("%q\nwas read and written as\n%q\nand then: %v", data, text, err)
	}
	if got := spread(net, again); got != want {
		t.Fatalf("%s\nwas written and read as\n%s", want, got)
	}
}

func dropMissing(t *testing.T, samples *graphio.Samples) *graphio.Samples {
	var list []graphio.Sample
	for i := range samples.Len() {
		s := samples.At(i)
		s.Missing = nil
		list = append(list, s)
	}
	dropped, err := graphio.NewSamples(samples.Order(), list)
	if err != nil {
		t.Fatal(err)
	}
	return dropped
}

func FuzzReadSamples(f *testing.F) {
	for _, seed := range []string{
		"sample,node,value\nx,a,3\nx,c,0.5\ny,b,1\n", "node,s,t\na,3,0\nb,,NaN\n", "sample;node;value\nx;a;1e308\n", "node,\"s,\"\"\"\na,1\n",
		"sample,node,value\n\"x\ny\",a,1\n", gzipped(f, "sample,node,value\nx,a,3\n"),
	} {
		f.Add([]byte(seed), true)
		f.Add([]byte(seed), false)
	}
	f.Fuzz(func(t *testing.T, data []byte, zero bool) {
		opt := graphio.SampleOptions{}
		if zero {
			opt.Missing = "zero"
		}
		fuzzSamples(t, "s.csv", data, opt)
	})
}

func axisFiles(f *testing.F) graphio.SampleOptions {
	dir := f.TempDir()
	opt := graphio.SampleOptions{RowNames: filepath.Join(dir, "nodes.txt"), ColumnNames: filepath.Join(dir, "names.txt"), Missing: "zero"}
	if err := errors.Join(os.WriteFile(opt.RowNames, []byte("node\na\nb\nc\n"), 0o644), os.WriteFile(opt.ColumnNames, []byte("sample\nx\ny\n"), 0o644)); err != nil {
		f.Fatal(err)
	}
	return opt
}

func FuzzMatrixMarket(f *testing.F) {
	opt := axisFiles(f)
	for _, seed := range []string{
		"%%MatrixMarket matrix coordinate real general\n% x\n3 2 2\n1 1 3\n3 2 5e-1\n", "%%MatrixMarket matrix array integer general\n3 2\n1\n2\n3\n4\n5\n6\n",
		"%%MatrixMarket matrix coordinate pattern general\n3 2 1\n2 2\n", "%%MatrixMarket matrix coordinate real general\n999999999 999999999 1\n1 1 1\n",
	} {
		f.Add([]byte(seed))
	}
	f.Fuzz(func(t *testing.T, data []byte) {
		if !bytes.HasPrefix(data, []byte("%%MatrixMarket")) {
			data = append([]byte("%%MatrixMarket"), data...)
		}
		fuzzSamples(t, "m.mtx", data, opt)
	})
}

func FuzzNPY(f *testing.F) {
	opt := axisFiles(f)
	for _, kind := range []string{"<f8", ">f4", "|u1", "<i2", "|O"} {
		f.Add([]byte(npyText("{'descr': '"+kind+"', 'fortran_order': True, 'shape': (3, 2), }") + string(make([]byte, 48))))
	}
	f.Add([]byte("\x93NUMPY\x02\x00\xff\xff\xff\xff{'descr'"))
	f.Fuzz(func(t *testing.T, data []byte) {
		if !bytes.HasPrefix(data, []byte("\x93NUMPY")) {
			data = append([]byte("\x93NUMPY"), data...)
		}
		fuzzSamples(t, "a.npy", data, opt)
	})
}

func FuzzGroups(f *testing.F) {
	net := path3(f)
	samples, err := graphio.NewSamples(net.Order(), []graphio.Sample{{Name: "x"}, {Name: "y"}, {Name: `q"`}})
	if err != nil {
		f.Fatal(err)
	}
	for _, seed := range []string{"sample,day\nx,mon\ny,tue\n", "day;sample\n\"a;b\";x\n", "sample,a,a\nx,1,2\n", "sample,\"\n\"\n\"q\"\"\",é\n"} {
		f.Add([]byte(seed))
	}
	f.Fuzz(func(t *testing.T, data []byte) {
		groups, _, err := graphio.ReadGroups(fuzzFile(t, "g.csv", data), samples)
		if err != nil {
			mustBeFaults(t, err)
			return
		}
		text := rendered(t, func(w io.Writer) error { return graphio.WriteGroups(w, groups, samples.Names()) })
		again, _, err := graphio.ReadGroups(fuzzFile(t, "again.csv", text), samples)
		if err != nil {
			t.Fatalf("%q\nwas read and written as\n%q\nand then: %v", data, text, err)
		}
		for _, c := range groups.Columns() {
			was, _ := groups.Labels(c, samples.Names())
			is, ok := again.Labels(c, samples.Names())
			for i := range was {
				if !ok || was[i] != is[i] {
					t.Fatalf("column %q: wrote %q, read %q", c, was, is)
				}
			}
		}
	})
}
