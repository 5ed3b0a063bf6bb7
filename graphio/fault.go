package graphio

import (
	"fmt"
	"strings"
)

// A Fault is one thing wrong with an input, where it is, and what would do.
type Fault struct {
	File         string
	Line, Column int    // 1-based; 0 where unknown
	Found, Want  string // "mass -3", "a mass of 0 or more"
}

// Error is "file, line L, column C: found; want …".
func (f Fault) Error() string {
	var b strings.Builder
	if f.File != "" {
		b.WriteString(f.File)
		if f.Line > 0 {
			fmt.Fprintf(&b, ", line %d", f.Line)
		}
		if f.Column > 0 {
			fmt.Fprintf(&b, ", column %d", f.Column)
		}
		b.WriteString(": ")
	}
	b.WriteString(f.Found)
	if f.Want != "" {
		b.WriteString("; want ")
		b.WriteString(f.Want)
	}
	return b.String()
}

// Faults is everything found wrong with the input, as an error. At most
// MaxFaults are kept; Total counts them all.
type Faults struct {
	Kept  []Fault
	Total int
}

// MaxFaults is how many faults are kept: about a screenful.
const MaxFaults = 20

// Error has a line for each fault kept, and one that counts the rest.
func (e *Faults) Error() string {
	var b strings.Builder
	for i, f := range e.Kept {
		if i > 0 {
			b.WriteByte('\n')
		}
		b.WriteString(f.Error())
	}
	if more := e.Total - len(e.Kept); more > 0 {
		fmt.Fprintf(&b, "\nand %d more like these", more)
	}
	return b.String()
}

// A FaultList collects faults; the zero value is ready to use.
type FaultList struct {
	kept  []Fault
	total int
}

// Add keeps a fault, or only counts it once MaxFaults are kept.
func (l *FaultList) Add(f Fault) {
	l.total++
	if len(l.kept) < MaxFaults {
		l.kept = append(l.kept, f)
	}
}

// Full reports whether a further fault would only be counted.
func (l *FaultList) Full() bool { return len(l.kept) >= MaxFaults }

// Err is nil where nothing was added, otherwise a *Faults.
func (l *FaultList) Err() error {
	if l.total == 0 {
		return nil
	}
	return &Faults{Kept: l.kept, Total: l.total}
}
