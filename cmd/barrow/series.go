package main

import (
	"bufio"
	"fmt"
	"io"
	"math"

	"example.org/barrow/dual/inference"
	"example.org/barrow/dual/pairwise"
)

// seriesFlags are those of barrow series alone.
type seriesFlags struct {
	reference           string
	least, permutations int
	level               float64
}

// series follows samples in their order.
func (s *session) series(args []string) error {
	set := newSettings(s.command)
	set.input()
	set.comparison("multiscale")
	set.flags.StringVar(&set.calibrate, "calibrate", "auto", "")
	set.flags.StringVar(&set.test.distances, "distances", "", "")
	var f seriesFlags
	set.flags.StringVar(&f.reference, "reference", "", "")
	set.flags.IntVar(&f.least, "least", 5, "")
	set.flags.IntVar(&f.permutations, "permutations", 199, "")
	set.flags.Float64Var(&f.level, "level", 0.05, "")
	set.flags.Uint64Var(&set.seed, "seed", 1, "")
	set.running()
	set.results("series")
	j, err := s.open(set, args, flagsOnly)
	if j == nil || err != nil {
		return err
	}
	defer j.f.discard()
	c := &course{seriesFlags: f, matrix: j.d.distances, reference: -1}
	if c.matrix == nil {
		if c.matrix, err = s.distances(set, j.d, j.rec); err != nil {
			return err
		}
	}
	if f.reference != "" {
		for i, name := range c.matrix.Names {
			if name == f.reference {
				c.reference = i
			}
		}
		if c.reference < 0 {
			return usageError{fmt.Sprintf("--reference %q, which is no sample%s", f.reference, didYouMean(f.reference, c.matrix.Names))}
		}
	}
	err = s.phases.Time("test", func() error {
		c.breaks, err = inference.Breaks(s.ctx, c.matrix, f.least, inference.Options{Permutations: f.permutations, Level: f.level, Seed: set.seed})
		return err
	})
	if err != nil {
		return err
	}
	return j.finish(c.write, c.summary)
}

// A course is a series of samples and where it breaks.
type course struct {
	seriesFlags
	matrix    *pairwise.Matrix
	reference int // −1 where there is none
	breaks    []inference.Break
}

func (c *course) write(f *folder) error {
	names := quoted(c.matrix.Names)
	err := f.write("series.csv", func(w *bufio.Writer) error {
		r := &row{w: w}
		if err := r.text("sample,to_next,from_first,from_reference,path").end(); err != nil {
			return err
		}
		path := 0.0
		for i, name := range names {
			next, reference := math.NaN(), math.NaN()
			if i+1 < len(names) {
				next = c.matrix.At(i, i+1)
			}
			if c.reference >= 0 {
				reference = c.matrix.At(c.reference, i)
			}
			if err := r.text(name).number(next).number(c.matrix.At(0, i)).number(reference).number(path).end(); err != nil {
				return err
			}
			path += next
		}
		return nil
	})
	if err != nil {
		return err
	}
	return f.write("breaks.csv", func(w *bufio.Writer) error {
		r := &row{w: w}
		if err := r.text("before,after,statistic,p,p_error").end(); err != nil {
			return err
		}
		for _, b := range c.breaks {
			if err := r.text(names[b.At-1]).text(names[b.At]).number(b.Statistic).number(b.P).number(b.Error).end(); err != nil {
				return err
			}
		}
		return nil
	})
}

func (c *course) summary(w io.Writer) {
	n := len(c.matrix.Names)
	path, largest := 0.0, 0
	for i := range n - 1 {
		path += c.matrix.At(i, i+1)
		if c.matrix.At(i, i+1) > c.matrix.At(largest, largest+1) {
			largest = i
		}
	}
	names := c.matrix.Names
	fmt.Fprintf(w, "series    %s, from %s to %s\n", several(n, "sample"), names[0], names[n-1])
	fmt.Fprintf(w, "path      %s in all, %s a step; the last lies %s from the first\n", human(path), human(path/float64(n-1)), human(c.matrix.At(0, n-1)))
	fmt.Fprintf(w, "step      the largest is %s, from %s to %s\n", human(c.matrix.At(largest, largest+1)), names[largest], names[largest+1])
	if len(c.breaks) == 0 {
		fmt.Fprintf(w, "breaks    none at %s\n", percent(c.level))
	}
	for _, b := range c.breaks {
		fmt.Fprintf(w, "break     between %s and %s, P = %s (%s permutations)\n", names[b.At-1], names[b.At], human(b.P), count(b.Permutations))
	}
	if len(c.breaks) > 0 {
		fmt.Fprintln(w, "caution   where samples remember those before them, P is too small: a daily round alone makes breaks")
	}
}
