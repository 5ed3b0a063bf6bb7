package main

import (
	"os"
	"path/filepath"
	"testing"

	"example.org/barrow/exact"
	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
)

// An instance comes back from its file with the supplies it was written with,
// and its distance is that of the samples it was rounded from: to 1e-3, what a
// unit of mass of a thousandth of a node's share and lengths to the centimetre
// leave.
func TestInstance(t *testing.T) {
	net := graphiotest.Road(500, 1)
	p, q := graphiotest.Smooth(net, 1), graphiotest.Smooth(net, 2)
	in := newInstance("road", "smooth", net, p, q)
	path := filepath.Join(t.TempDir(), "instance.txt")
	file, err := os.Create(path)
	if err != nil {
		t.Fatal(err)
	}
	if err := in.write(file); err != nil {
		t.Fatal(err)
	}
	if err := file.Close(); err != nil {
		t.Fatal(err)
	}
	back, supply, demand, err := readInstance(path)
	if err != nil {
		t.Fatal(err)
	}
	got := make([]float64, back.Order())
	supply.Dense(got, 1)
	demand.Dense(got, -1)
	for v, b := range in.supply {
		if got[v] != float64(b) {
			t.Fatalf("supply %v at node %d, want %d", got[v], v, b)
		}
	}
	whole, err := exact.Solve(back, supply, demand, exact.Options{})
	if err != nil {
		t.Fatal(err)
	}
	want, err := exact.Solve(net, p, q, exact.Options{Shares: true})
	if err != nil {
		t.Fatal(err)
	}
	d := whole.Distance() / (massPerNode * 500) / 100 // masses, and centimetres
	if d < want.Distance()*(1-1e-3) || d > want.Distance()*(1+1e-3) {
		t.Errorf("distance %v after rounding, %v before", d, want.Distance())
	}
}

// Whole parts add up to the total and are within one of the exact ones.
func TestApportion(t *testing.T) {
	s := graphio.Sample{Nodes: []int32{0, 1, 2}, Values: []float64{1, 1, 1}}
	if got := apportion(s, 100); got[0] != 34 || got[1] != 33 || got[2] != 33 {
		t.Errorf("a hundred in three is %v, want 34 33 33", got)
	}
}
