package pairwise

import (
	"context"
	"fmt"
	"slices"

	"example.org/barrow/exact"
	"example.org/barrow/graphio"
)

// Exact solves every pair to proof; on one-way networks both orders. Each
// result is verified, and Lower and Upper are its proved bounds.
//
// Errors: samples that cannot be moved onto each other, see graphio.Faults and
// package exact; ErrCertificate of package exact; *MemoryError; the context's.
// Cost: a solve a pair, of which most start from the tree of the pair before.
func Exact(ctx context.Context, net *graphio.Network, samples *graphio.Samples, opt Options) (*Result, error) {
	compared, err := transported(net, samples, opt)
	if err != nil {
		return nil, err
	}
	n := samples.Len()
	if err := opt.afford(matrixPart(n, net.Directed(), true), solverPart(net, opt.threads())); err != nil {
		return nil, err
	}
	m := newMatrix(samples.Names(), net.Directed(), true)
	err = opt.Phases.Time("exact", func() error {
		return m.solveAll(ctx, net, compared, m.unknown(opt.Known), opt)
	})
	if err != nil {
		return nil, err
	}
	return &Result{Matrix: m}, nil
}

// unknown lists the pairs that no earlier run has solved, and sets those that
// one has.
func (m *Matrix) unknown(known []Known) []pair {
	have := make(map[int]bool, len(known))
	for _, k := range known {
		if k.tight() {
			at := m.Index(k.I, k.J)
			m.Value[at], m.Lower[at], m.Upper[at] = k.Upper, k.Lower, k.Upper
			have[at] = true
		}
	}
	list := allPairs(len(m.Names), m.Directed)
	if len(have) > 0 {
		list = slices.DeleteFunc(list, func(p pair) bool { return have[m.Index(p.i, p.j)] })
	}
	return list
}

// solveAll solves pairs part by part, so that a journal can keep each.
func (m *Matrix) solveAll(ctx context.Context, net *graphio.Network, compared *graphio.Samples, pairs []pair, opt Options) error {
	run := runLength(len(pairs))
	report := opt.stage("exact")
	for begin := 0; begin < len(pairs); begin += 16 * run {
		part := pairs[begin:min(len(pairs), begin+16*run)]
		list := opt.Journal.replay(part)
		if list == nil {
			list = make([]outcome, len(part))
			progress := func(done int) { report(begin+done, len(pairs)) }
			err := solvePairs(ctx, net, compared, part, run, opt, progress, func(k int, r *exact.Result) {
				list[k] = outcome{pair: part[k], lower: r.Lower, upper: r.Upper}
			})
			if err == nil {
				err = opt.Journal.append(list)
			}
			if err != nil {
				return err
			}
		}
		for _, o := range list {
			at := m.Index(o.i, o.j)
			m.Value[at], m.Lower[at], m.Upper[at] = o.upper, o.lower, o.upper
		}
	}
	return nil
}

// runLength is how many pairs a solver does before it starts anew.
func runLength(pairs int) int { return min(32, max(1, pairs/64)) }

// allPairs lists pairs row by row: neighbours share a sample, which is what
// makes a solver's last tree a good start.
func allPairs(n int, directed bool) []pair {
	var list []pair
	for i := range n {
		for j := range n {
			if i < j || directed && i != j {
				list = append(list, pair{i, j})
			}
		}
	}
	return list
}

// solvePairs solves pairs in runs, each by a solver that has forgotten its tree: the last
// digit of a distance may depend on the tree a solve starts from, and runs do
// not depend on the number of threads. take gets each result, from any
// goroutine.
func solvePairs(ctx context.Context, net *graphio.Network, compared *graphio.Samples, pairs []pair, run int, opt Options, report func(done int), take func(k int, r *exact.Result)) error {
	runs := (len(pairs) + run - 1) / run
	return work(ctx, opt.threads(), runs, func(done, _ int) { report(min(done*run, len(pairs))) }, func() func(int) error {
		solver, err := exact.NewSolver(net, exact.Options{Unmatched: opt.Unmatched})
		return func(task int) error {
			if err != nil {
				return err
			}
			solver.Reset()
			for k := task * run; k < min(len(pairs), (task+1)*run); k++ {
				r, err := solvePair(ctx, solver, compared, pairs[k])
				if err != nil {
					return err
				}
				take(k, r)
			}
			return nil
		}
	})
}

func solvePair(ctx context.Context, solver *exact.Solver, compared *graphio.Samples, at pair) (*exact.Result, error) {
	p, q := compared.At(at.i), compared.At(at.j)
	r, err := solver.Solve(ctx, p, q) // its errors name the samples
	if err != nil {
		return nil, err
	}
	if err := r.Verify(); err != nil {
		return nil, fmt.Errorf("from %q to %q: %w", p.Name, q.Name, err)
	}
	return r, nil
}
