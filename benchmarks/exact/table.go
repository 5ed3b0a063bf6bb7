package main

import (
	"fmt"
	"slices"
	"strings"
)

func printHeader() {
	fmt.Println("| network | nodes | edges | samples | barrow, s | pivots a node | MiB | network simplex : barrow | MiB | cost scaling : barrow | MiB |")
	fmt.Println("|---|--:|--:|---|--:|--:|--:|--:|--:|--:|--:|")
}

// printRow prints what the solvers did: barrow's runs first, then LEMON's
// network simplex and cost scaling.
func printRow(in instance, runs [][]run) {
	own := runs[0]
	row := []string{
		in.family, fmt.Sprint(in.nodes), fmt.Sprint(len(in.edge)), in.samples,
		fmt.Sprintf("%.3g", middleOf(own, func(r run) float64 { return r.seconds })),
		fmt.Sprintf("%.2f", float64(own[0].pivots)/float64(in.nodes)),
		mebibytes(own),
	}
	for k := 1; k <= 2; k++ {
		if k >= len(runs) {
			row = append(row, "", "")
			continue
		}
		row = append(row, ratio(runs[k], own), mebibytes(runs[k]))
	}
	fmt.Printf("| %s |\n", strings.Join(row, " | "))
}

func middleOf(runs []run, of func(run) float64) float64 {
	list := make([]float64, len(runs))
	for i, r := range runs {
		list[i] = of(r)
	}
	return middle(list)
}

func middle(list []float64) float64 {
	slices.Sort(list)
	return list[len(list)/2]
}

func mebibytes(runs []run) string {
	if runs[0].late {
		return ""
	}
	return fmt.Sprintf("%.1f", middleOf(runs, func(r run) float64 { return float64(r.grown) / (1 << 20) }))
}

// ratio is the other's time to barrow's, run by run: the median, and the least
// and greatest where there are several.
func ratio(other, own []run) string {
	list := make([]float64, len(other))
	for i, r := range other {
		list[i] = r.seconds / own[i].seconds
	}
	slices.Sort(list)
	switch {
	case other[0].late:
		return fmt.Sprintf("> %.3g (stopped)", list[0])
	case len(list) == 1:
		return fmt.Sprintf("%.3g (one run)", list[0])
	}
	return fmt.Sprintf("**%.3g** (%.3g–%.3g)", list[len(list)/2], list[0], list[len(list)-1])
}
