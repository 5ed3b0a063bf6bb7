package main

import (
	"cmp"
	"context"
	"fmt"
	"io"
	"math"
	"slices"

	"example.org/barrow/dual"
	"example.org/barrow/exact"
	"example.org/barrow/graphio"
)

// pair compares two samples.
func (s *session) pair(args []string) error {
	_, err := s.makePair(args)
	return err
}

// makePair is pair, with its result for a caller that goes on.
func (s *session) makePair(args []string) (*comparison, error) {
	set := newSettings(s.command)
	set.input()
	set.comparison("exact")
	set.flags.Float64Var(&set.gap, "gap", 0, "")
	set.flags.DurationVar(&set.timeLimit, "time-limit", 0, "")
	set.flags.StringVar(&set.groups, "groups", "", "")
	set.flags.StringVar(&set.by, "by", "", "")
	set.flags.IntVar(&set.draws, "draws", 199, "")
	set.flags.Uint64Var(&set.seed, "seed", 1, "")
	set.results("")
	rest, err := set.parse(args)
	if err != nil {
		return nil, err
	}
	recorded, rest, err := s.settle(set, rest)
	if err != nil {
		return nil, err
	}
	if len(rest) != 2 {
		return nil, usageError{fmt.Sprintf("%s named; want two: barrow pair A B", several(len(rest), "sample"))}
	}
	switch {
	case (set.by == "") != (set.groups == ""):
		return nil, usageError{"--by and --groups go together; want --groups FILE --by COLUMN to compare group means"}
	case set.by != "" && (set.method != "exact" || set.draws < 19):
		return nil, usageError{"group means want --method exact, and --draws of 19 or more"}
	}
	s.progress.progressTo(s.stderr)
	d, err := s.load(set)
	if err != nil {
		return nil, err
	}
	return s.compare(set, d, rest, recorded)
}

// lateWarning is recorded of a run whose bytes depend on the clock.
const lateWarning = "stopped by --time-limit: another run may get further"

// A comparison is what is known of one pair.
type comparison struct {
	from, to               string
	distance, lower, upper float64       // NaN bounds where none are known
	proof                  *exact.Result // nil unless exact
	late                   bool          // the time limit came before the optimum
	why                    *explanation  // nil unless exact and with a flow
	redrawn                *redrawn      // nil unless of group means
	potential              []float64     // nil where there is none
}

// compare compares two loaded samples and writes the results, if there is a
// folder for them.
func (s *session) compare(set *settings, d *data, names []string, recorded *record) (*comparison, error) {
	if recorded != nil {
		if err := recorded.sameFiles(d.inputs); err != nil {
			return nil, err
		}
	}
	var p, q graphio.Sample
	var m *means
	var err error
	if set.by != "" {
		p, q, m, err = groupMeans(set, d, names)
	} else {
		p, q, err = chosen(set, d, names)
	}
	if err != nil {
		return nil, err
	}
	rec := s.newRecord(set, names, d)
	keep := set.out != "" || recorded != nil
	var f *folder
	if keep {
		same := false
		f, same, err = openFolder(set.out, set.replace, rec)
		defer f.discard()
		if same || err != nil {
			return nil, s.already(set, err)
		}
	}
	c, err := s.solve(set, d, p, q)
	if err != nil {
		if c != nil && c.proof != nil { // interrupted: say what is known, and keep nothing
			s.progress.end()
			c.summary(s.stdout, set, d)
		}
		return nil, err
	}
	s.progress.end()
	if c.proof != nil && !math.IsInf(c.upper, 1) {
		c.why = explain(d.net, c.proof)
	}
	if m != nil && c.why != nil {
		err := s.phases.Time("resample", func() error {
			c.redrawn, err = s.resample(set, d, m, c.why)
			return err
		})
		if err != nil {
			return nil, err
		}
		s.progress.end()
	}
	rec.Counts["pairs"] = 1
	if c.late {
		rec.Warnings = append(rec.Warnings, lateWarning)
	}
	show := func(w io.Writer) { c.summary(w, set, d) }
	if !keep {
		show(s.stdout)
		return c, nil
	}
	if err := s.phases.Time("write", func() error { return f.writeComparison(d, set.method, c) }); err != nil {
		return nil, err
	}
	return c, s.close(f, rec, recorded, show)
}

// chosen finds the two samples and checks that they can be compared.
func chosen(set *settings, d *data, names []string) (p, q graphio.Sample, err error) {
	var faults graphio.FaultList
	var two [2]graphio.Sample
	for k, name := range names {
		i, ok := d.samples.Index(name)
		if !ok {
			faults.Add(graphio.Fault{File: set.samples, Found: fmt.Sprintf("no sample %q%s", name, didYouMean(name, d.samples.Names())),
				Want: "a name like " + exampleNames(d.samples)})
			continue
		}
		two[k] = d.samples.At(i)
	}
	if err := faults.Err(); err != nil {
		return p, q, err
	}
	if names[0] == names[1] {
		return p, q, usageError{fmt.Sprintf("sample %q twice; want two samples", names[0])}
	}
	both, err := graphio.NewSamples(d.net.Order(), two[:])
	if err != nil {
		return p, q, err
	}
	if set.mass == "share" {
		if both, err = both.Shares(); err != nil {
			return p, q, err
		}
	}
	if movesMass(set.method) && set.unmatched == 0 {
		err = graphio.CheckConnected(d.net, both)
	}
	return both.At(0), both.At(1), err
}

func exampleNames(samples *graphio.Samples) string {
	names := samples.Names()
	switch len(names) {
	case 0:
		return "those of a samples file, which this one is without"
	case 1:
		return fmt.Sprintf("%q", names[0])
	}
	return fmt.Sprintf("%q or %q (%d in all)", names[0], names[len(names)-1], len(names))
}

// solve compares by the chosen method.
func (s *session) solve(set *settings, d *data, p, q graphio.Sample) (*comparison, error) {
	c := &comparison{from: p.Name, to: q.Name, lower: math.NaN(), upper: math.NaN()}
	switch set.method {
	case "variation":
		c.distance = dual.Variation(p, q)
		return c, nil
	case "exact":
		err := s.phases.Time("exact", func() error { return s.solveExactly(set, d, p, q, c) })
		return c, err
	}
	both, err := graphio.NewSamples(d.net.Order(), []graphio.Sample{p, q})
	if err != nil {
		return nil, err
	}
	err = s.phases.Time("embed", func() error {
		m, err := dual.NewMultiscale(d.net, dual.Options{})
		if err != nil {
			return err
		}
		if set.method == "kernel" {
			features, err := m.Features(s.ctx, both, false, 1, nil)
			if err == nil {
				c.distance = math.Sqrt(features.Biased(0, 1, dual.All))
			}
			return err
		}
		e, err := m.Embed(s.ctx, both, 1, nil)
		if err == nil {
			c.distance = e.Distance(0, 1, e.Theory())
			c.potential = m.Witness(p, q, e.Theory())
		}
		return err
	})
	if err != nil || c.potential == nil || set.unmatched > 0 || set.mass == "amount" {
		c.potential = nil
		return c, err
	}
	err = s.phases.Time("bound", func() error {
		c.lower, c.potential = dual.Certify(d.net, c.potential, p, q)
		return s.ctx.Err()
	})
	return c, err
}

// solveExactly solves to the end, to the gap or to the time limit. Interrupted,
// it fails, and c still holds the interval reached.
func (s *session) solveExactly(set *settings, d *data, p, q graphio.Sample, c *comparison) error {
	opt := exact.Options{Unmatched: set.unmatched, Gap: set.gap}
	if s.progress.shown() {
		opt.Watch = s.progress.interval
	}
	solver, err := exact.NewSolver(d.net, opt)
	if err != nil {
		return err
	}
	ctx := s.ctx
	if set.timeLimit > 0 {
		var cancel context.CancelFunc
		ctx, cancel = context.WithTimeout(ctx, set.timeLimit)
		defer cancel()
	}
	r, stopped := solver.Solve(ctx, p, q)
	if r == nil {
		return stopped
	}
	if stopped == nil || !math.IsInf(r.Upper, 1) { // else there is no flow to check yet
		if err := r.Verify(); err != nil {
			return err
		}
	}
	c.proof, c.potential = r, r.Potential
	c.distance, c.lower, c.upper = r.Distance(), r.Lower, r.Upper
	c.late = stopped != nil
	if stopped != nil && s.ctx.Err() == nil {
		if math.IsInf(r.Upper, 1) {
			return fmt.Errorf("after %v all that is known is that the distance is at least %s: the one-way edges leave no way found yet; want a longer --time-limit", set.timeLimit, human(r.Lower))
		}
		return nil
	}
	return stopped
}

// writeComparison writes pairs.csv and what proves it.
func (f *folder) writeComparison(d *data, method string, c *comparison) error {
	err := f.write("pairs.csv", c.table(method))
	switch {
	case err != nil:
		return err
	case c.proof != nil:
		if err := f.writeProof(d.net, c.proof); err != nil {
			return err
		}
		return c.why.write(f, d.net, c.redrawn)
	case c.potential != nil:
		return f.writePotential(d.net, c.potential)
	}
	return nil
}

// summary is the comparison in a few lines.
func (c *comparison) summary(w io.Writer, set *settings, d *data) {
	fmt.Fprintf(w, "network   %s\n", networkLine(d.net))
	fmt.Fprintf(w, "compared  %s with %s, as %ss\n", c.from, c.to, set.mass)
	if c.late && math.IsInf(c.upper, 1) {
		fmt.Fprintf(w, "distance  at least %s; the one-way edges leave no way found yet\n", human(c.lower))
		return
	}
	if c.late {
		fmt.Fprintf(w, "distance  %s to %s, %s\n", human(c.lower), human(c.upper), c.meaning(set))
	} else {
		fmt.Fprintf(w, "distance  %s, %s\n", human(c.distance), c.meaning(set))
	}
	if c.redrawn != nil {
		c.redrawn.summary(w)
	}
	switch {
	case c.late && set.timeLimit > 0:
		fmt.Fprintf(w, "proof     stopped by --time-limit at a gap of %s; both ends are proved\n", percent(c.proof.Gap()))
	case c.late:
		fmt.Fprintf(w, "proof     stopped at a gap of %s; both ends are proved\n", percent(c.proof.Gap()))
	case c.proof != nil && c.proof.Optimal:
		fmt.Fprintln(w, "proof     flow and potential agree: no way of moving the mass is shorter")
	case c.proof != nil:
		fmt.Fprintf(w, "proof     at least %s, at most %s: a gap of %s\n", human(c.lower), human(c.upper), percent(c.proof.Gap()))
	case !math.IsNaN(c.lower):
		fmt.Fprintf(w, "proof     the transport distance is at least %s, in the unit of your edge lengths\n", human(c.lower))
	}
	if c.proof != nil {
		c.heaviest(w, set, d.net)
	}
	if c.why != nil {
		c.why.summary(w, set, d.net)
	}
}

func (c *comparison) meaning(set *settings) string {
	switch {
	case set.method == "kernel":
		return "without unit; 0 for equal shares"
	case set.method == "variation" && set.mass == "share":
		return "the share of the mass that differs, blind to where nodes lie"
	case set.method == "variation":
		return "in the unit of your masses, blind to where nodes lie"
	case set.method == "multiscale":
		return "unscaled: no length (barrow matrix calibrates; --method exact is a length)"
	case set.mass == "amount":
		return "mass times edge length, in the units of your files"
	}
	return "in the unit of your edge lengths: a unit of mass moves that far on average"
}

// heaviest lists the links that carry most.
func (c *comparison) heaviest(w io.Writer, set *settings, net *graphio.Network) {
	const most = 5
	edges := net.EdgeList()
	order := make([]int, 0, len(edges))
	for i, f := range c.proof.Flow {
		if f != 0 {
			order = append(order, i)
		}
	}
	slices.SortStableFunc(order, func(i, j int) int {
		return cmp.Compare(math.Abs(c.proof.Flow[j]), math.Abs(c.proof.Flow[i]))
	})
	if u := c.proof.Unmatched; u != nil {
		removed, created := 0.0, 0.0
		for _, x := range u {
			removed += max(x, 0)
			created -= min(x, 0)
		}
		fmt.Fprintf(w, "unmatched %s removed, %s created\n", human(removed), human(created))
	}
	if len(order) == 0 {
		return
	}
	certain := c.proof.Unavoidable()
	star := "the heaviest"
	if certain != nil {
		star += " (* in every shortest way of moving it)"
	}
	fmt.Fprintf(w, "links     mass moves along %s; %s:\n", several(len(order), "edge"), star)
	for _, i := range order[:min(most, len(order))] {
		from, to, f := net.Name(int(edges[i].From)), net.Name(int(edges[i].To)), c.proof.Flow[i]
		if f < 0 {
			from, to, f = to, from, -f
		}
		mark := " "
		if certain != nil && certain[i] {
			mark = "*"
		}
		load := human(f)
		if set.mass == "share" {
			load = percent(f)
		}
		fmt.Fprintf(w, "        %s %8s  %s to %s\n", mark, load, from, to)
	}
}
