package main

import (
	"bufio"
	"context"
	"fmt"
	"io"
	"math"
	"runtime/debug"
	"slices"
	"time"

	"example.org/barrow/dual/pairwise"
	"example.org/barrow/graphio"
)

// matrix compares all samples with each other.
func (s *session) matrix(args []string) error {
	d, r, err := s.makeMatrix(args)
	if err == nil && r != nil {
		s.offerExact(d, r)
	}
	return err
}

// makeMatrix is matrix, with its result for a caller that goes on.
func (s *session) makeMatrix(args []string) (*data, *pairwise.Result, error) {
	set := newSettings(s.command)
	set.input()
	set.comparison("multiscale")
	set.flags.StringVar(&set.calibrate, "calibrate", "auto", "")
	set.flags.StringVar(&set.stored, "calibration", "", "")
	set.flags.BoolVar(&set.vectors, "vectors", false, "")
	set.flags.BoolVar(&set.unbiased, "unbiased", false, "")
	set.flags.StringVar(&set.hold, "hold", "auto", "")
	set.goals()
	set.flags.StringVar(&set.from, "add", "", "")
	set.flags.BoolVar(&set.noisy, "noise", false, "")
	set.flags.IntVar(&set.noise.draws, "draws", 199, "")
	set.flags.StringVar(&set.noise.dispersion, "dispersion", "1", "")
	set.flags.Uint64Var(&set.seed, "seed", 1, "")
	set.running()
	set.results("results")
	rest, err := set.parse(args)
	if err != nil {
		return nil, nil, err
	}
	recorded, rest, err := s.settle(set, rest)
	if err != nil {
		return nil, nil, err
	}
	if set.from != "" && set.noisy {
		return nil, nil, usageError{"--noise with --add; want the one or the other"}
	}
	if len(rest) > 0 {
		return nil, nil, usageError{fmt.Sprintf("%q, where only flags are taken; barrow pair A B compares two samples", rest[0])}
	}
	if err := set.goal.check(set); err != nil {
		return nil, nil, err
	}
	if set.noisy {
		if err := set.noise.check(set); err != nil {
			return nil, nil, err
		}
	}
	s.progress.progressTo(s.stderr)
	d, err := s.load(set)
	if err != nil {
		return nil, nil, err
	}
	if d.samples.Len() < 2 && !(set.vectors && set.stored != "" && d.samples.Len() == 1) { // one more vector is welcome
		return nil, nil, oneFault(set.samples, several(d.samples.Len(), "sample"), "two samples or more to compare")
	}
	r, err := s.measure(set, d, recorded)
	return d, r, err
}

// settle fills in a recorded run where one is repeated, and checks all values.
func (s *session) settle(set *settings, rest []string) (*record, []string, error) {
	var recorded *record
	if set.replay != "" {
		var err error
		if recorded, err = s.replay(set, rest); err != nil {
			return nil, nil, err
		}
		rest = recorded.Arguments
		if !set.flags.Changed("out") {
			set.out = "" // repeat, compare, keep nothing
		}
	}
	if set.from != "" {
		var err error
		if set.earlier, err = buildOn(set, set.from); err != nil {
			return nil, nil, err
		}
	}
	return recorded, rest, set.check()
}

// measure makes the matrix of loaded samples and writes it; nil where the
// folder holds it already.
func (s *session) measure(set *settings, d *data, recorded *record) (*pairwise.Result, error) {
	if recorded != nil {
		if err := recorded.sameFiles(d.inputs); err != nil {
			return nil, err
		}
	}
	rec := s.newRecord(set, nil, d)
	f, same, err := openFolder(set.out, set.replace, rec)
	defer f.discard()
	if same || err != nil {
		return nil, s.already(set, err)
	}
	opt, err := s.options(set)
	if err != nil {
		return nil, err
	}
	if opt.Memory > 0 {
		debug.SetMemoryLimit(int64(opt.Memory)) // collect garbage harder as it comes near
	}
	opt.Stored, opt.Known = d.model, d.known
	if opt.Journal, err = s.journal(set, f, rec); err != nil {
		return nil, err
	}
	r, err := s.compute(set, d, opt)
	if err != nil {
		return nil, err
	}
	defer r.Vectors.Close()
	var noise *noiseResult
	if set.noisy {
		if noise, err = s.count(set, d, rec); err != nil {
			return nil, err
		}
	}
	s.progress.end()
	rec.Counts["pairs"] = pairCount(d)
	rec.Choices = choicesOf(r)
	s.cautions(rec, d, set, r)
	err = s.phases.Time("write", func() error { return f.writeMatrices(d, set, r, noise) })
	if err != nil {
		return nil, err
	}
	if err := s.close(f, rec, recorded, func(w io.Writer) {
		summary(w, set, d, r)
		if noise != nil {
			noise.pairsLine(w)
		}
	}); err != nil {
		return nil, err
	}
	return r, nil
}

var methods = map[string]func(context.Context, *graphio.Network, *graphio.Samples, pairwise.Options) (*pairwise.Result, error){
	"multiscale": pairwise.Multiscale, "exact": pairwise.Exact, "kernel": pairwise.Kernel, "variation": pairwise.Variation,
	"flow": pairwise.Flow, "hierarchy": pairwise.Hierarchy,
}

// compute makes the matrix by the chosen method.
func (s *session) compute(set *settings, d *data, opt pairwise.Options) (*pairwise.Result, error) {
	if set.method != "certified" {
		return methods[set.method](s.ctx, d.net, d.samples, opt)
	}
	goal, err := set.goal.goal(set, d)
	if err != nil {
		return nil, err
	}
	return pairwise.Certified(s.ctx, d.net, d.samples, goal, opt)
}

func pairCount(d *data) int {
	n := d.samples.Len()
	if d.net.Directed() {
		return n * (n - 1)
	}
	return n * (n - 1) / 2
}

// cautions notes what a reader of the numbers should know and may not expect.
func (s *session) cautions(rec *record, d *data, set *settings, r *pairwise.Result) {
	say := func(text string) {
		s.note(text)
		rec.Warnings = append(rec.Warnings, text)
	}
	if d.net.Directed() && set.method != "exact" {
		say("the network is one-way, which " + set.method + " leaves aside: distances are the same in both directions; --method exact honours it")
	}
	switch c := r.Calibration; {
	case c == nil:
	case len(c.Pairs) == pairCount(d):
		say("with so few samples every pair was solved to calibrate: --method exact takes no longer and has no error")
	case c.HeldOut < 20:
		say(fmt.Sprintf("only %s held out to measure the error on: take it as a rough guess", several(c.HeldOut, "pair")))
	}
}

// patience is how long a user is taken to be willing to wait for all pairs.
const patience = 2 * time.Minute

// offerExact tells, after an estimate, when every pair could be solved in
// minutes. It is no part of the record, as it depends on the machine.
func (s *session) offerExact(d *data, r *pairwise.Result) {
	c := r.Calibration
	if c == nil || len(c.Pairs) == 0 || len(c.Pairs) == pairCount(d) {
		return
	}
	for _, p := range s.phases {
		if p.Name != "calibrate" {
			continue
		}
		took := time.Duration(p.Seconds * float64(pairCount(d)) / float64(len(c.Pairs)) * float64(time.Second))
		if took <= patience {
			s.note(fmt.Sprintf("all %s exactly would take some %s here: --method exact", several(pairCount(d), "pair"), several(1+int(took.Seconds()), "second")))
		}
	}
}

func (f *folder) writeMatrices(d *data, set *settings, r *pairwise.Result, noise *noiseResult) error {
	err := f.write("matrix.csv", func(w *bufio.Writer) error { return writeMatrix(w, r.Matrix) })
	if err == nil {
		err = f.write("pairs.csv", func(w *bufio.Writer) error {
			return writePairs(w, r.Matrix, set.method, d.net.Directed(), noise)
		})
	}
	if err == nil && r.Calibration != nil {
		err = f.write("calibration.csv", func(w *bufio.Writer) error {
			return writeCalibration(w, r.Matrix.Names, r.Calibration)
		})
	}
	if err == nil && r.Calibration != nil && r.Model != nil {
		err = f.write("calibration.json", func(w *bufio.Writer) error {
			_, err := r.Model.WriteTo(w)
			return err
		})
	}
	if err == nil && r.Vectors != nil {
		err = f.writeVectors(d, set, r)
	}
	return err
}

// already reports a folder that cannot be, or need not be, written.
func (s *session) already(set *settings, err error) error {
	if err == nil {
		_, err = fmt.Fprintf(s.stdout, "%s holds the results of this run already, whole and unchanged: nothing to do (--replace makes them anew)\n", set.out)
	}
	return err
}

// close finishes the results, and prints the summary and what became of them.
func (s *session) close(f *folder, rec, recorded *record, summary func(w io.Writer)) error {
	if err := s.ctx.Err(); err != nil {
		return err
	}
	rec.Phases = s.phases
	if err := f.commit(rec); err != nil {
		return err
	}
	summary(s.stdout)
	if recorded != nil {
		switch {
		case slices.Equal(rec.Outputs, recorded.Outputs):
			fmt.Fprintln(s.stdout, "replayed  the same bytes as recorded")
		case slices.Contains(rec.Warnings, lateWarning) || slices.Contains(recorded.Warnings, lateWarning):
			fmt.Fprintln(s.stdout, "replayed  other bytes than recorded, as the clock stopped the one run or the other")
		default:
			return fmt.Errorf("the repeated run gave other bytes than recorded; same version and processor?")
		}
	}
	if f.out != "" {
		fmt.Fprintf(s.stdout, "written   %s: %s\n", f.typed, f.names())
	}
	return nil
}

// summary is the matrix in a few lines.
func summary(w io.Writer, set *settings, d *data, r *pairwise.Result) {
	compared := "compared as shares"
	if set.mass == "amount" {
		compared = "compared as amounts"
		if set.unmatched > 0 {
			compared += fmt.Sprintf(", a unit of mass created or removed costing %v", set.unmatched)
		}
	}
	fmt.Fprintf(w, "network   %s\n", networkLine(d.net))
	fmt.Fprintf(w, "samples   %s; %s\n", samplesLine(d.samples), compared)
	fmt.Fprintf(w, "method    %s\n", methodLine(set, r))
	if pairCount(d) == 0 {
		return
	}
	near, far, middle := extremes(r.Matrix)
	for _, e := range []struct {
		word string
		p    [2]int
	}{{"nearest ", near}, {"farthest", far}} {
		fmt.Fprintf(w, "%s  %s  %s and %s\n", e.word, human(r.Matrix.At(e.p[0], e.p[1])), r.Matrix.Names[e.p[0]], r.Matrix.Names[e.p[1]])
	}
	fmt.Fprintf(w, "median    %s over %s\n", human(middle), several(pairCount(d), "pair"))
	if r.Certificate != nil {
		certificateLines(w, set, d, r)
	}
	fmt.Fprintf(w, "unit      %s\n", unitLine(set, r))
}

func methodLine(set *settings, r *pairwise.Result) string {
	method := set.method
	switch method {
	case "exact":
		return "exact: every pair solved and its proof checked"
	case "kernel":
		if set.unbiased {
			return "kernel: maximum mean discrepancy of counts under heat kernels, squared and unbiased"
		}
		return "kernel: maximum mean discrepancy under heat kernels"
	case "variation":
		return "variation: half the sum of node-by-node differences, blind to where nodes lie"
	case "certified":
		return certifiedLine(r)
	case "flow":
		return "flow: what it costs to move the mass as current flows; no distance is larger"
	}
	c := r.Calibration
	if method == "hierarchy" {
		if c == nil {
			return "hierarchy: distances along a spanning tree; exact where the network is a tree, else no distance is larger"
		}
		return "hierarchy, calibrated on " + qualityLine(c.Quality())
	}
	if c == nil && r.Model != nil {
		return "multiscale, by a calibration of an earlier run, on " + qualityLine(r.Model.Quality)
	}
	if c == nil {
		return "multiscale without calibration: the numbers are unscaled, they rank pairs but are no lengths"
	}
	return "multiscale, calibrated on " + qualityLine(r.Model.Quality)
}

func qualityLine(q *pairwise.Quality) string {
	known := func(x *float64) float64 {
		if x == nil {
			return math.NaN()
		}
		return *x
	}
	return fmt.Sprintf("%s solved exactly\n          on %d of them held out: median error %s, 95 %% within %s, rank correlation (Spearman) %s",
		several(q.Pairs, "pair"), q.HeldOut, percent(known(q.MedianError)), percent(known(q.P95)), human(known(q.Spearman)))
}

func unitLine(set *settings, r *pairwise.Result) string {
	switch {
	case set.method == "kernel" && set.unbiased:
		return "none; 0 on average, and below as often, for counts of one source"
	case set.method == "kernel":
		return "none; 0 for equal shares"
	case set.method == "variation" && set.mass == "share":
		return "share of the mass that differs, 0 to 1"
	case set.method == "variation":
		return "that of your masses"
	case set.method == "multiscale" && r.Model == nil:
		return "none (--calibrate N gives the unit of your edge lengths)"
	case set.mass == "amount":
		return "mass times edge length, in the units of your files"
	}
	return "that of your edge lengths: how far a unit of mass moves on average"
}

// extremes are the nearest and farthest pair and the median distance.
func extremes(m *pairwise.Matrix) (near, far [2]int, middle float64) {
	least, most := math.Inf(1), math.Inf(-1)
	var all []float64
	for i := range m.Names {
		for j := range m.Names {
			if i == j || j < i && !m.Directed {
				continue
			}
			x := m.At(i, j)
			all = append(all, x)
			if x < least {
				least, near = x, [2]int{i, j}
			}
			if x > most {
				most, far = x, [2]int{i, j}
			}
		}
	}
	slices.Sort(all)
	return near, far, median(all)
}
