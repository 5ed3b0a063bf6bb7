package main

import (
	"context"
	"errors"
	"fmt"
	"math"
	"math/big"
	"os"
	"os/exec"
	"strconv"
	"strings"
	"time"

	"example.org/barrow/benchmarks/internal/peak"
	"example.org/barrow/exact"
	"example.org/barrow/graphio"
)

// A run is what one solver did with one instance, in a process of its own.
type run struct {
	optimum string  // a whole number
	seconds float64 // from a network in memory to the optimum
	grown   int64   // bytes the process grew by meanwhile
	pivots  int     // of barrow
	late    bool    // it was stopped at the time limit
}

// solveFile is the process that solves an instance with barrow and prints the
// run as lemon/lemon.cc does, with the number of pivots after it: NewSolver and
// Solve with its certificate are timed, Verify is not.
func solveFile(path string) error {
	net, p, q, err := readInstance(path)
	if err != nil {
		return err
	}
	mark := peak.Start()
	var first *exact.Result
	var grown int64
	var times []float64
	for begin := time.Now(); len(times) == 0 || time.Since(begin) < time.Second/5; {
		start := time.Now()
		solver, err := exact.NewSolver(net, exact.Options{})
		if err != nil {
			return err
		}
		r, err := solver.Solve(context.Background(), p, q)
		took := time.Since(start)
		if err != nil {
			return err
		}
		if first == nil {
			first = r
			_, grown = mark.Bytes()
			if took < time.Second/10 {
				continue // a warm-up
			}
		}
		times = append(times, took.Seconds())
	}
	if err := first.Verify(); err != nil {
		return err
	}
	fmt.Printf("%v %.6f %d %d\n", cost(net, first.Flow), middle(times), grown>>10, first.Pivots)
	return nil
}

// cost adds a flow up exactly: lengths and flows are whole numbers below 2^53,
// their products need not be.
func cost(net *graphio.Network, flow []float64) *big.Int {
	sum, product := new(big.Int), new(big.Int)
	for i, e := range net.EdgeList() {
		f := big.NewInt(int64(math.Abs(flow[i])))
		sum.Add(sum, product.Mul(f, big.NewInt(int64(e.Length))))
	}
	return sum
}

// solveBy runs the command on an instance, for limit at most.
func solveBy(limit time.Duration, command ...string) (run, error) {
	ctx, cancel := context.WithTimeout(context.Background(), limit)
	defer cancel()
	cmd := exec.CommandContext(ctx, command[0], command[1:]...)
	cmd.Stderr = os.Stderr
	out, err := cmd.Output()
	if errors.Is(ctx.Err(), context.DeadlineExceeded) {
		return run{late: true, seconds: limit.Seconds()}, nil
	}
	if err != nil {
		return run{}, fmt.Errorf("%s: %w", strings.Join(command, " "), err)
	}
	var r run
	var kib int64
	fields := strings.Fields(string(out))
	if len(fields) < 3 {
		return run{}, fmt.Errorf("%s: printed %q", strings.Join(command, " "), out)
	}
	if len(fields) > 3 {
		r.pivots, err = strconv.Atoi(fields[3])
	}
	_, scan := fmt.Sscan(strings.Join(fields[:3], " "), &r.optimum, &r.seconds, &kib)
	r.grown = kib << 10
	return r, errors.Join(err, scan)
}

// buildLemon compiles the driver into a folder. Without compiler or library
// there is no LEMON, and the reason.
func buildLemon(source, folder string) (path string, err error) {
	path = folder + "/lemon"
	out, err := exec.Command("g++", "-O3", "-march=native", "-w", "-o", path, source).CombinedOutput()
	if err != nil {
		return "", fmt.Errorf("LEMON is left out: %w\n%s", err, firstLines(string(out), 3))
	}
	return path, nil
}

func firstLines(s string, n int) string {
	lines := strings.SplitAfterN(s, "\n", n+1)
	return strings.Join(lines[:min(n, len(lines))], "")
}
