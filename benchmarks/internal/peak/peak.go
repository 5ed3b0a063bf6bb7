// Package peak measures how much memory a stretch of work takes at its
// highest, as Linux counts it: the resident set of the whole process.
package peak

import (
	"bufio"
	"fmt"
	"os"
	"runtime/debug"
	"strings"
)

// A Mark is where a stretch of work begins.
type Mark struct {
	before int64
}

// Start hands unused memory back to the system, so that what the work needs
// is seen, and begins a stretch. Only one can run at a time.
func Start() Mark {
	debug.FreeOSMemory()
	// Lets the peak start again from the memory in use now; where that cannot
	// be, peaks are of the process so far.
	_ = os.WriteFile("/proc/self/clear_refs", []byte("5"), 0)
	return Mark{before: read("VmRSS:")}
}

// Bytes is the highest use of the process since the start, and how much that
// is above the use at the start. Both are 0 on other systems than Linux.
func (m Mark) Bytes() (peak, grown int64) {
	peak = read("VmHWM:")
	return peak, peak - m.before
}

// read is one line of the process's memory record, in bytes.
func read(field string) int64 {
	file, err := os.Open("/proc/self/status")
	if err != nil {
		return 0
	}
	defer file.Close()
	for lines := bufio.NewScanner(file); lines.Scan(); {
		if rest, ok := strings.CutPrefix(lines.Text(), field); ok {
			kib := int64(0)
			if _, err := fmt.Sscan(rest, &kib); err != nil {
				return 0
			}
			return kib << 10
		}
	}
	return 0
}
