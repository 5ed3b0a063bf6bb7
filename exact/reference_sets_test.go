package exact

import (
	"encoding/csv"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"testing"

	"example.org/barrow/graphio"
)

// Sets of this many nodes and more belong to measurements, not to tests; sets
// of up to smallSet nodes are also solved here by gonum's simplex.
const (
	largeSet = 10000
	smallSet = 120
)

type setPair struct {
	set, a, b string
	directed  bool
	want      float64
	method    string
}

// setPairs reads testdata/reference_distances.csv: distances of shares on real
// sets, by HiGHS and LEMON (the command is in testdata/README.md).
func setPairs(t *testing.T) []setPair {
	t.Helper()
	file, err := os.Open("../testdata/reference_distances.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	rows, err := csv.NewReader(file).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var list []setPair
	for _, row := range rows[1:] {
		want, err := strconv.ParseFloat(row[4], 64)
		if err != nil {
			t.Fatal(err)
		}
		list = append(list, setPair{row[0], row[1], row[2], row[3] == "true", want, row[5]})
	}
	if len(list) < 70 {
		t.Fatalf("only %d reference distances", len(list))
	}
	return list
}

// Distances on real sets agree with independent linear programs to 1e-10. The
// sets lie beside the repository or are left out.
func TestRealSets(t *testing.T) {
	bySet, order := make(map[string][]setPair), []string(nil)
	for _, p := range setPairs(t) {
		if len(bySet[p.set]) == 0 {
			order = append(order, p.set)
		}
		bySet[p.set] = append(bySet[p.set], p)
	}
	for _, set := range order {
		folder := filepath.Join("..", "..", "shared", "data", set)
		if _, err := os.Stat(folder); err != nil {
			t.Logf("left out: set %s is not there", set)
			continue
		}
		t.Run(set, func(t *testing.T) { solveSet(t, folder, bySet[set]) })
	}
}

func solveSet(t *testing.T, folder string, pairs []setPair) {
	net, _, err := graphio.ReadNetwork(filepath.Join(folder, "edges.csv"), filepath.Join(folder, "nodes.csv"), graphio.NetworkOptions{Directed: pairs[0].directed})
	if err != nil {
		t.Fatal(err)
	}
	if net.Order() >= largeSet {
		t.Logf("left to benchmarks: %d nodes", net.Order())
		return
	}
	samples, _, err := graphio.ReadSamples(filepath.Join(folder, "samples.csv"), net, graphio.SampleOptions{})
	if err != nil {
		t.Fatal(err)
	}
	solver, err := NewSolver(net, Options{Shares: true})
	if err != nil {
		t.Fatal(err)
	}
	for _, pair := range pairs {
		i, okA := samples.Index(pair.a)
		j, okB := samples.Index(pair.b)
		if !okA || !okB {
			t.Fatalf("no sample %q or %q", pair.a, pair.b)
		}
		p, q := samples.At(i), samples.At(j)
		r, err := solver.Solve(t.Context(), p, q)
		if err != nil {
			t.Fatal(err)
		}
		if err := r.Verify(); err != nil {
			t.Error(err)
		}
		if d := r.Distance(); !(math.Abs(d-pair.want) <= 1e-10*pair.want) {
			t.Errorf("from %s to %s: %v, want %v (%s)", pair.a, pair.b, d, pair.want, pair.method)
		}
		if net.Order() <= smallSet {
			if want := linearProgram(t, net, p.Share(), q.Share(), 0); !(math.Abs(r.Distance()-want) <= 1e-8*want) {
				t.Errorf("from %s to %s: %v, want %v (gonum's simplex)", pair.a, pair.b, r.Distance(), want)
			}
		}
	}
}
