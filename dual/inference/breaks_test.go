package inference_test

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"example.org/barrow/dual/inference"
	"example.org/barrow/dual/pairwise"
)

// line is the matrix of points on a line.
func line(points []float64) *pairwise.Matrix {
	m := &pairwise.Matrix{}
	for i, x := range points {
		m.Names = append(m.Names, fmt.Sprint(i))
		for _, y := range points[i+1:] {
			m.Value = append(m.Value, math.Abs(x-y))
		}
	}
	return m
}

// Steps in a series of noise are found where they are; and by hand: of 0, 0, 1, 1
// the division in the middle has 2·2/4 (2·1 − 0 − 0) = 2.
func TestBreaks(t *testing.T) {
	found, err := inference.Breaks(ctx, line([]float64{0, 0, 1, 1}), 2, inference.Options{Permutations: 99, Level: 1})
	if err != nil {
		t.Fatal(err)
	}
	if len(found) != 1 || found[0].At != 2 || found[0].Statistic != 2 {
		t.Fatalf("%+v", found)
	}
	r := rand.New(rand.NewPCG(3, 4))
	var points []float64
	for k := range 90 {
		points = append(points, []float64{0, 6, -3}[k/30]+r.NormFloat64())
	}
	found, err = inference.Breaks(ctx, line(points), 5, inference.Options{Permutations: 199, Seed: 1})
	if err != nil {
		t.Fatal(err)
	}
	var at []int
	for _, b := range found {
		at = append(at, b.At)
	}
	if !slices.Equal(at, []int{30, 60}) {
		t.Errorf("breaks at %v, want 30 and 60", at)
	}
}

// A series without a break is called at most about as often as the level, and
// the statistic is that of the energy distance summed up plainly.
func TestBreaksAreSilent(t *testing.T) {
	called := 0
	const sets = 150
	for seed := range uint64(sets) {
		r := rand.New(rand.NewPCG(seed, 9))
		var points []float64
		for range 30 {
			points = append(points, r.NormFloat64())
		}
		found, err := inference.Breaks(ctx, line(points), 3, inference.Options{Permutations: 99, Seed: seed})
		if err != nil {
			t.Fatal(err)
		}
		if len(found) > 0 {
			called++
		}
	}
	if low, high := limits(sets, 0.05); called < low || called > high {
		t.Errorf("called in %d of %d series without a break, want %d to %d", called, sets, low, high)
	}
}
