package pairwise

import (
	"errors"
	"fmt"
	"math"

	"example.org/barrow/dual"
	"example.org/barrow/graphio"
)

// Options says what is compared, and how. The zero value compares amounts of
// equal total, uncalibrated, on all processors.
type Options struct {
	// Shares compares the samples divided by their totals. Otherwise their
	// amounts are compared, whose totals must then be equal unless Unmatched
	// is set.
	Shares bool
	// Unmatched > 0 is the cost of creating or removing a unit of mass, in the
	// unit of length. Variation and Kernel have no use for it.
	Unmatched float64
	// Calibrate is how many random pairs Multiscale solves exactly to find its
	// weights and its error: 0 none, below 0 as many as DefaultPairs says.
	Calibrate int
	// Unbiased asks Kernel for the unbiased MMD² of counts instead of the root of
	// the biased one.
	Unbiased bool
	// Stored is a calibration of an earlier run, which Multiscale uses instead
	// of one of its own.
	Stored *Model
	// KeepVectors asks for Result.Vectors; close them.
	KeepVectors bool
	// Hold says where the vectors of the samples are kept: "memory", "disk", or,
	// empty, in memory where they fit Memory. The result does not depend on it.
	Hold string
	// Scratch is the folder for vectors on disk; empty is the system's.
	Scratch string
	// Seed of the choice of those pairs.
	Seed uint64
	// Threads is how many goroutines work; 0 is the number of processors. The
	// result does not depend on it.
	Threads int
	// Memory, if above 0, is how many bytes the whole process may take. A job
	// that needs more is refused before it starts, with a *MemoryError.
	Memory uint64
	// Progress, if set, is told how much of a stage is done, by one goroutine
	// at a time. The stages are named as phases are.
	Progress func(stage string, done, total int)
	// Known are pairs bounded by an earlier run on the same network and samples:
	// Exact leaves those out that it solved, Certified and Rank begin with them.
	Known []Known
	// Journal, if set, keeps what Certified solves.
	Journal *Journal
	// Phases, if set, takes down the time and memory of each phase.
	Phases *Phases
}

// Known is what an earlier run proved of the pair I, J.
type Known struct {
	I, J         int
	Lower, Upper float64
}

// tight reports whether the bounds are those of a solve to the end.
func (k Known) tight() bool { return k.Upper-k.Lower <= 1e-8*k.Upper }

// A Result is a matrix and how it came about.
type Result struct {
	Matrix *Matrix
	// Diffusion is the times and levels chosen; nil where none are used.
	Diffusion *dual.Description
	// Calibration is nil where there was none: the distances of Multiscale then
	// have no unit.
	Calibration *Calibration
	// Model is what further samples can be embedded by: that of Calibration, or
	// the stored one.
	Model *Model
	// Width is the length of a sample's vector, 0 where there is none, and
	// OnDisk whether the vectors did not fit memory.
	Width  int
	OnDisk bool
	// Certificate is that of Certified, else nil.
	Certificate *Certificate
	// Vectors holds them, if Options.KeepVectors asked for it.
	Vectors *Vectors
}

// ErrMethod: a method was asked for what it cannot do.
var ErrMethod = errors.New("not for this method")

// transported checks and prepares samples for methods that move mass: the
// samples to compare, in one unit.
func transported(net *graphio.Network, samples *graphio.Samples, opt Options) (*graphio.Samples, error) {
	if err := fitting(net, samples); err != nil {
		return nil, err
	}
	if math.IsNaN(opt.Unmatched) || math.IsInf(opt.Unmatched, 0) || opt.Unmatched < 0 {
		return nil, fmt.Errorf("a cost of unmatched mass of %v; want a finite number of 0 or more", opt.Unmatched)
	}
	compared, err := asCompared(samples, opt)
	if err != nil {
		return nil, err
	}
	if opt.Unmatched > 0 {
		return compared, nil
	}
	if !opt.Shares {
		if err := equalTotals(samples); err != nil {
			return nil, err
		}
	}
	return compared, graphio.CheckConnected(net, samples)
}

func fitting(net *graphio.Network, samples *graphio.Samples) error {
	if samples.Order() != net.Order() {
		return fmt.Errorf("samples over %d nodes for a network of %d; want samples read with this network", samples.Order(), net.Order())
	}
	return nil
}

func asCompared(samples *graphio.Samples, opt Options) (*graphio.Samples, error) {
	if opt.Shares {
		return samples.Shares()
	}
	return samples, nil
}

// equalTotals refuses amounts of different totals: their mass cannot be moved
// onto each other. Rounding in the inputs is let pass as the solver does.
func equalTotals(samples *graphio.Samples) error {
	if samples.Len() == 0 {
		return nil
	}
	var faults graphio.FaultList
	first := samples.At(0)
	for i := 1; i < samples.Len(); i++ {
		s := samples.At(i)
		if a, b := first.Total(), s.Total(); math.Abs(a-b) > 1e-9*max(a, b) {
			faults.Add(graphio.Fault{
				Found: fmt.Sprintf("sample %q with a total of %v, where %q has %v", s.Name, b, first.Name, a),
				Want:  "equal totals to compare amounts; or --unmatched COST, which lets mass be created and removed, or --mass share",
			})
		}
	}
	return faults.Err()
}

func (opt Options) stage(name string) func(done, total int) {
	if opt.Progress == nil {
		return func(done, total int) {}
	}
	return func(done, total int) { opt.Progress(name, done, total) }
}
