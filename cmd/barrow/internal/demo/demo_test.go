package demo

import (
	"crypto/sha256"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"example.org/barrow/graphio"
)

// Golden: made by this package, to notice when a seed stops giving the same town.
const golden = "f5531b28a85c0cd300a04b66a4ccc0a1e514e4abc34d962df18ff37a7257df33"

func TestSameSeedSameBytes(t *testing.T) {
	sum := func(seed uint64) string {
		h := sha256.New()
		for _, f := range New(seed).Files() {
			fmt.Fprintf(h, "%s %d\n", f.Name, len(f.Data))
			h.Write(f.Data)
		}
		return fmt.Sprintf("%x", h.Sum(nil))
	}
	if got := sum(1); got != golden {
		t.Errorf("seed 1 gives %s, recorded is %s", got, golden)
	}
	if sum(2) == golden {
		t.Error("seed 2 gives the town of seed 1")
	}
}

func TestTownIsAsDescribed(t *testing.T) {
	for seed := uint64(1); seed <= 4; seed++ {
		town := New(seed)
		if n := town.Net.Order(); n < 1900 || n > 2300 {
			t.Errorf("seed %d: %d junctions, want some two thousand", seed, n)
		}
		if _, parts := town.Net.Components(); parts != 1 {
			t.Errorf("seed %d: the town is in %d parts", seed, parts)
		}
		if town.Samples.Len() != 14*24 || len(town.Labels) != 14*24 || len(town.Bridges) != 3 {
			t.Errorf("seed %d: %d samples, %d labels, %d bridges", seed, town.Samples.Len(), len(town.Labels), len(town.Bridges))
		}
		town.checkCrossings(t, seed)
		for b := range town.Bridges {
			one, two := town.crossed(b, 0), town.crossed(b, 7)
			if closed := b == town.Closed; closed != (two.bridge == 0) || one.bridge == 0 || !closed && two.bridge < 1.2*one.bridge {
				t.Errorf("seed %d: %v vehicles on %s, then %v", seed, one.bridge, town.Bridges[b].Name, two.bridge)
			}
		}
	}
}

// checkCrossings checks that nothing but the bridges joins the banks, all three
// of them with the closed one.
func (town *Town) checkCrossings(t *testing.T, seed uint64) {
	x, y, _ := town.Net.Places()
	mids := map[int]int{}
	for _, e := range town.Net.EdgeList() {
		u, v := int(e.From), int(e.To)
		for _, b := range town.Bridges {
			if u == b.Mid || v == b.Mid {
				mids[b.Mid]++
				u, v = -1, -1
			}
		}
		if u >= 0 && bank(x[u], y[u])*bank(x[v], y[v]) != 1 {
			t.Errorf("seed %d: street from %s to %s crosses the water", seed, town.Net.Name(u), town.Net.Name(v))
		}
	}
	for _, b := range town.Bridges {
		if mids[b.Mid] != 2 {
			t.Errorf("seed %d: %d edges at %s, want 2", seed, mids[b.Mid], b.Name)
		}
	}
}

func TestFilesReadBack(t *testing.T) {
	town := New(3)
	dir := t.TempDir()
	for _, f := range town.Files() {
		if err := os.WriteFile(filepath.Join(dir, f.Name), f.Data, 0o644); err != nil {
			t.Fatal(err)
		}
	}
	net, _, err := graphio.ReadNetwork(filepath.Join(dir, "edges.csv"), filepath.Join(dir, "nodes.csv"), graphio.NetworkOptions{})
	if err != nil {
		t.Fatal(err)
	}
	samples, _, err := graphio.ReadSamples(filepath.Join(dir, "samples.csv"), net, graphio.SampleOptions{})
	if err != nil {
		t.Fatal(err)
	}
	groups, _, err := graphio.ReadGroups(filepath.Join(dir, "groups.csv"), samples)
	if err != nil {
		t.Fatal(err)
	}
	if net.Order() != town.Net.Order() || net.Size() != town.Net.Size() || samples.Len() != town.Samples.Len() {
		t.Fatalf("%d nodes, %d edges, %d samples read back", net.Order(), net.Size(), samples.Len())
	}
	for i, e := range net.EdgeList() {
		if e != town.Net.EdgeList()[i] {
			t.Fatalf("edge %d read back as %+v, was %+v", i, e, town.Net.EdgeList()[i])
		}
	}
	for i := range samples.Len() {
		if got, want := samples.At(i), town.Samples.At(i); got.Name != want.Name || got.Total() != want.Total() || !got.Counts() {
			t.Fatalf("sample %d read back as %s with %v, was %s with %v", i, got.Name, got.Total(), want.Name, want.Total())
		}
	}
	bridge, ok := groups.Labels("bridge", samples.Names())
	if !ok || bridge[0] != "open" || bridge[335] != "closed" {
		t.Errorf("bridge was %s at first and %s at last", bridge[0], bridge[335])
	}
}

// A Poisson number has equal mean and variance (textbook); four standard errors
// of 20,000 draws are allowed.
func TestPoisson(t *testing.T) {
	const draws = 20000
	r := chance(1, 99)
	for _, mean := range []float64{0, 0.3, 4, 20, 63} {
		sum, square := 0.0, 0.0
		for range draws {
			n := float64(poisson(r, mean))
			sum += n
			square += n * n
		}
		got := sum / draws
		variance := square/draws - got*got
		if math.Abs(got-mean) > 4*math.Sqrt(mean/draws) {
			t.Errorf("mean %v drawn as %v", mean, got)
		}
		if math.Abs(variance-mean) > 4*math.Sqrt((mean+2*mean*mean)/draws) {
			t.Errorf("variance %v drawn as %v", mean, variance)
		}
	}
}

func TestFallIsTheExponential(t *testing.T) {
	for x := 0.0; x <= 20; x += 0.01 {
		if got, want := fall(x), math.Exp(-x); math.Abs(got-want) > 1e-12*want {
			t.Fatalf("exp(-%v) is %v, want %v", x, got, want)
		}
	}
}

// The reading follows the numbers: closing a bridge that changes nothing is not
// said to have done something.
func TestReadingFollowsTheNumbers(t *testing.T) {
	town := New(1)
	text := town.Read(func(i, j int) float64 {
		if (i < 168) != (j < 168) {
			return 300
		}
		return 100
	}, 250)
	for _, want := range []string{"300 m apart across them", "100 m apart on two days of one week", "3.0 times", "are 250 m apart"} {
		if !strings.Contains(unwrap(text), want) {
			t.Errorf("no %q in\n%s", want, text)
		}
	}
	text = town.Read(func(i, j int) float64 { return 100 }, 100)
	if !strings.Contains(unwrap(text), "no more than chance") {
		t.Errorf("no chance in\n%s", text)
	}
}

func unwrap(text string) string { return strings.Join(strings.Fields(text), " ") }
