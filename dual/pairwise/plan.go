package pairwise

import (
	"fmt"
	"runtime"
	"strings"

	"example.org/barrow/graphio"
)

// A MemoryError refuses a job that would take more memory than it may.
type MemoryError struct {
	Limit uint64
	Parts []MemoryPart // what the need is made of
}

// A MemoryPart is the need of one thing, in bytes.
type MemoryPart struct {
	Name  string
	Bytes uint64
}

// Need is the sum over the parts.
func (e *MemoryError) Need() uint64 {
	sum := uint64(0)
	for _, p := range e.Parts {
		sum += p.Bytes
	}
	return sum
}

// Error says what needs how much, and what to do.
func (e *MemoryError) Error() string {
	list := make([]string, len(e.Parts))
	for i, p := range e.Parts {
		list[i] = fmt.Sprintf("%s %s", p.Name, gibibytes(p.Bytes))
	}
	return fmt.Sprintf("this job needs about %s of memory (%s), and may take %s; want a larger --memory, fewer samples or a smaller network",
		gibibytes(e.Need()), strings.Join(list, ", "), gibibytes(e.Limit))
}

func gibibytes(n uint64) string {
	const mebi, gibi = 1 << 20, 1 << 30
	if n < gibi {
		return fmt.Sprintf("%.3g MiB", float64(n)/mebi)
	}
	return fmt.Sprintf("%.3g GiB", float64(n)/gibi)
}

// afford refuses a job whose parts, on top of what the process holds already,
// pass the limit.
func (opt Options) afford(parts ...MemoryPart) error {
	if opt.Memory == 0 {
		return nil
	}
	e := &MemoryError{opt.Memory, append([]MemoryPart{{"network and samples", inUse()}}, parts...)}
	if e.Need() > e.Limit {
		return e
	}
	return nil
}

// inUse is the memory of what is alive.
func inUse() uint64 {
	runtime.GC()
	var m runtime.MemStats
	runtime.ReadMemStats(&m)
	return m.HeapAlloc
}

func matrixPart(samples int, directed, bounds bool) MemoryPart {
	n := uint64(samples)
	pairs := n * (n - min(n, 1)) / 2
	if directed {
		pairs = n * n
	}
	arrays := uint64(1)
	if bounds {
		arrays = 3
	}
	return MemoryPart{"distances", 8 * (arrays + 1) * pairs} // one more to sort them
}

// solverPart is what the exact solvers of all threads take: see package exact.
func solverPart(net *graphio.Network, threads int) MemoryPart {
	n, m := uint64(net.Order()), uint64(net.Size())
	return MemoryPart{"solvers", uint64(threads) * (64*n + 40*m)}
}

// vectorPart is what the vectors of all samples take, at width values each and
// room for the panels of all threads: see package dual.
func vectorPart(net *graphio.Network, samples, width, threads int) MemoryPart {
	return MemoryPart{"vectors", 4*uint64(samples)*uint64(width) + uint64(threads)*64*6*uint64(net.Order())}
}

// termPart is what it takes to make vectors, beside the vectors: layout, factor
// and room for the panels of all threads. See packages dual and resistor.
func termPart(net *graphio.Network, threads int) MemoryPart {
	n, m := uint64(net.Order()), uint64(net.Size())
	return MemoryPart{"making vectors", 400*n + 150*m + uint64(threads)*(64*6*n+320*n+32*m)}
}

// room is what is left for vectors beside the parts given.
func (opt Options) room(parts ...MemoryPart) uint64 {
	if opt.Memory == 0 {
		return 1 << 62
	}
	e := &MemoryError{opt.Memory, append([]MemoryPart{{"network and samples", inUse()}}, parts...)}
	return opt.Memory - min(opt.Memory, e.Need())
}

func (opt Options) threads() int {
	if opt.Threads > 0 {
		return opt.Threads
	}
	return runtime.GOMAXPROCS(0)
}
