package main

import (
	"bufio"
	"context"
	"errors"
	"fmt"
	"io"
	"math"
	"slices"
	"strconv"
	"strings"

	"example.org/barrow/dual"
	"example.org/barrow/dual/inference"
	"example.org/barrow/dual/pairwise"
	"example.org/barrow/graphio"
)

// testFlags are those of barrow test alone.
type testFlags struct {
	distances, against, without string
	by, given, numbers, tests   []string
	blocks, plots, where        string
	shift, together, pairs      bool
	permutations, stop          int
	level                       float64
}

var groupTests = []string{"pseudo-f", "energy", "kernel", "dispersion", "anosim"}

func (set *settings) testing() {
	f, t := set.flags, &set.test
	f.StringVar(&t.distances, "distances", "", "")
	f.StringVar(&set.groups, "groups", "", "")
	f.StringSliceVar(&t.by, "by", nil, "")
	f.StringSliceVar(&t.given, "given", nil, "")
	f.StringSliceVar(&t.numbers, "numbers", nil, "")
	f.StringSliceVar(&t.tests, "test", []string{"pseudo-f", "energy", "dispersion"}, "")
	f.StringVar(&t.blocks, "blocks", "", "")
	f.StringVar(&t.plots, "plots", "", "")
	f.BoolVar(&t.shift, "shift", false, "")
	f.BoolVar(&t.together, "together", false, "")
	f.BoolVar(&t.pairs, "pairs", false, "")
	f.StringVar(&t.where, "where", "", "")
	f.StringVar(&t.against, "against", "", "")
	f.StringVar(&t.without, "without", "", "")
	f.IntVar(&t.permutations, "permutations", 999, "")
	f.IntVar(&t.stop, "stop", 0, "")
	f.Float64Var(&t.level, "level", 0.05, "")
}

func (t *testFlags) check(set *settings) error {
	if set.groups == "" && t.against == "" {
		return usageError{"nothing to test: want --groups FILE --by COLUMN, or --against FILE"}
	}
	if len(t.by) == 0 && t.against == "" {
		return usageError{"--groups without --by; want --by COLUMN, or several separated by commas, A:B for an interaction"}
	}
	for _, name := range t.tests {
		if err := oneOf("--test", name, groupTests...); err != nil {
			return err
		}
	}
	if t.where != "" {
		if err := oneOf("--where", t.where, "districts", "nodes", "scales"); err != nil {
			return err
		}
	}
	if (t.where != "" || slices.Contains(t.tests, "kernel")) && (set.edges == "" || set.samples == "") {
		return usageError{"--where and --test kernel look at the samples themselves; want --edges FILE and --samples FILE"}
	}
	return nil
}

// testSamples runs the tests asked for.
func (s *session) testSamples(args []string) error {
	set := newSettings(s.command)
	set.input()
	set.comparison("multiscale")
	set.flags.StringVar(&set.calibrate, "calibrate", "auto", "")
	set.testing()
	set.flags.Uint64Var(&set.seed, "seed", 1, "")
	set.running()
	set.results("tests")
	j, err := s.open(set, args, func(rest []string) error {
		if err := flagsOnly(rest); err != nil {
			return err
		}
		return set.test.check(set)
	})
	if j == nil || err != nil {
		return err
	}
	defer j.f.discard()
	t := &tester{session: s, set: set, d: j.d, distances: j.d.distances}
	if t.distances == nil {
		if t.distances, err = s.distances(set, j.d, j.rec); err != nil {
			return err
		}
	}
	if err := s.phases.Time("test", t.run); err != nil {
		return err
	}
	return j.finish(t.write, t.summary)
}

// distances makes the matrix by the chosen method.
func (s *session) distances(set *settings, d *data, rec *record) (*pairwise.Matrix, error) {
	opt, err := s.options(set)
	if err != nil {
		return nil, err
	}
	r, err := methods[set.method](s.ctx, d.net, d.samples, opt)
	if err != nil {
		return nil, err
	}
	defer r.Vectors.Close()
	rec.Counts["pairs"] = pairCount(d)
	rec.Choices = choicesOf(r)
	if !r.Matrix.Directed {
		return r.Matrix, nil
	}
	const text = "distances differ by direction on this one-way network; the mean of both is taken"
	s.note(text)
	rec.Warnings = append(rec.Warnings, text)
	return undirected(r.Matrix), nil
}

// undirected is the mean of the distances there and back.
func undirected(m *pairwise.Matrix) *pairwise.Matrix {
	mean := &pairwise.Matrix{Names: m.Names}
	for i := range m.Names {
		for j := i + 1; j < len(m.Names); j++ {
			mean.Value = append(mean.Value, (m.At(i, j)+m.At(j, i))/2)
		}
	}
	return mean
}

// A tester gathers what the tests gave.
type tester struct {
	*session
	set       *settings
	d         *data
	distances *pairwise.Matrix

	factor inference.Variable
	scheme inference.Scheme
	lines  []testLine
	pairs  []pairLine
	where  *inference.Placement
	notes  []string
}

// A testLine is a row of tests.csv.
type testLine struct {
	test, term string
	inference.Outcome
	share  float64 // NaN where there is none
	groups []inference.Group
}

// A pairLine is a row of comparisons.csv.
type pairLine struct {
	test string
	inference.Comparison
}

func (t *tester) options() inference.Options {
	f := t.set.test
	return inference.Options{Permutations: f.permutations, Level: f.level, Stop: f.stop, Seed: t.set.seed, Threads: t.set.threads}
}

func (t *tester) run() error {
	if t.set.test.against != "" {
		if err := t.compareMatrices(); err != nil {
			return err
		}
	}
	if len(t.set.test.by) == 0 {
		return nil
	}
	return t.compareGroups()
}

// column is a column of the groups file, as numbers where that is asked for.
func (t *tester) column(name string) (inference.Variable, error) {
	v, err := inference.Column(t.d.groups, name, t.distances.Names)
	if err != nil || !slices.Contains(t.set.test.numbers, name) {
		return v, err
	}
	for i, label := range v.Labels {
		x, err := strconv.ParseFloat(label, 64)
		if err != nil {
			return v, fmt.Errorf("%w: %q in column %q for sample %q; want a number, or no --numbers %s", inference.ErrDesign, label, name, t.distances.Names[i], name)
		}
		v.Numbers = append(v.Numbers, x)
	}
	v.Labels = nil
	return v, nil
}

func (t *tester) restrictions() error {
	f := t.set.test
	t.scheme = inference.Scheme{Shift: f.shift, Together: f.together}
	for _, c := range []struct {
		name string
		to   *[]string
	}{{f.blocks, &t.scheme.Blocks}, {f.plots, &t.scheme.Plots}} {
		if c.name == "" {
			continue
		}
		v, err := inference.Column(t.d.groups, c.name, t.distances.Names)
		if err != nil {
			return err
		}
		*c.to = v.Labels
	}
	return nil
}

func (t *tester) compareGroups() error {
	if err := t.restrictions(); err != nil {
		return err
	}
	if err := t.model(); err != nil {
		return err
	}
	single := t.set.test.by[0]
	if strings.Contains(single, ":") || slices.Contains(t.set.test.numbers, single) {
		return nil
	}
	var err error
	if t.factor, err = t.column(single); err != nil {
		return err
	}
	for _, name := range t.set.test.tests {
		if name == "pseudo-f" {
			if t.set.test.pairs {
				if err := t.pairwise("pseudo-f", inference.PseudoF); err != nil {
					return err
				}
			}
			continue // model has it
		}
		if err := t.groupwise(name); err != nil {
			return err
		}
	}
	return t.locate()
}

// model is the pseudo-F of all terms in order.
func (t *tester) model() error {
	f := t.set.test
	if !slices.Contains(f.tests, "pseudo-f") && len(f.by) == 1 {
		return nil
	}
	design := inference.Design{Given: f.given, Terms: f.by}
	seen := map[string]bool{}
	for _, term := range slices.Concat(f.given, f.by) {
		for _, name := range strings.Split(term, ":") {
			if seen[name] {
				continue
			}
			seen[name] = true
			v, err := t.column(name)
			if err != nil {
				return err
			}
			design.Variables = append(design.Variables, v)
		}
	}
	table, err := inference.Model(t.ctx, t.distances, design, t.scheme, t.options())
	if err != nil {
		return err
	}
	for _, term := range table.Terms {
		if slices.Contains(f.by, term.Term) {
			t.lines = append(t.lines, testLine{"pseudo-f", term.Term, term.Outcome, term.Share, nil})
		}
	}
	return nil
}

func (t *tester) groupwise(name string) error {
	test := map[string]inference.Groupwise{"energy": inference.Energy, "anosim": inference.ANOSIM, "dispersion": inference.Dispersion, "kernel": t.kernel}[name]
	r, err := test(t.ctx, t.distances, t.factor, t.scheme, t.options())
	if err != nil {
		return err
	}
	share := math.NaN()
	if name == "energy" {
		share = r.Share
	}
	t.lines = append(t.lines, testLine{name, t.factor.Name, r.Outcome, share, r.Groups})
	if t.set.test.pairs && name != "kernel" {
		return t.pairwise(name, test)
	}
	return nil
}

func (t *tester) pairwise(name string, test inference.Groupwise) error {
	list, err := inference.Pairs(t.ctx, test, t.distances, t.factor, t.scheme, t.options())
	for _, c := range list {
		t.pairs = append(t.pairs, pairLine{name, c})
	}
	return err
}

// kernel is the discrepancy under heat kernels at all scales.
func (t *tester) kernel(ctx context.Context, d *pairwise.Matrix, v inference.Variable, scheme inference.Scheme, opt inference.Options) (*inference.GroupTest, error) {
	m, err := dual.NewMultiscale(t.d.net, dual.Options{})
	if err != nil {
		return nil, err
	}
	features, err := m.Features(ctx, t.d.samples, false, t.set.threads, nil)
	if err != nil {
		return nil, err
	}
	r, err := inference.MMD(ctx, inference.HeatKernels(d.Names, features), v, scheme, opt)
	if err != nil {
		return nil, err
	}
	return &r.GroupTest, nil
}

// locate says which places carry the difference.
func (t *tester) locate() error {
	var features *inference.Features
	var err error
	switch t.set.test.where {
	case "":
		return nil
	case "districts":
		features, err = inference.Districts(t.d.net, t.d.samples)
	case "nodes":
		features, err = inference.Nodes(t.d.net, t.d.samples, nil)
	case "scales":
		var m *dual.Multiscale
		if m, err = dual.NewMultiscale(t.d.net, dual.Options{}); err == nil {
			features, err = inference.Nodes(t.d.net, t.d.samples, m.Describe().Times)
		}
	}
	if err != nil {
		return err
	}
	t.where, err = inference.Where(t.ctx, features, t.factor, t.scheme, t.options())
	return err
}

// compareMatrices tests whether two matrices go together.
func (t *tester) compareMatrices() error {
	other, err := matched(t.d.against, t.distances)
	if err != nil {
		return err
	}
	opt := t.options()
	if t.d.without != nil {
		third, err := matched(t.d.without, t.distances)
		if err != nil {
			return err
		}
		r, err := inference.PartialMantel(t.ctx, t.distances, other, third, inference.Pearson, t.scheme, opt)
		if err != nil {
			return err
		}
		t.matrixLine(r)
		return nil
	}
	for _, how := range []inference.Correlation{inference.Pearson, inference.Spearman} {
		r, err := inference.Mantel(t.ctx, t.distances, other, how, t.scheme, opt)
		if err != nil {
			return err
		}
		if how == inference.Spearman {
			r.Test += " of ranks"
		}
		t.matrixLine(r)
	}
	a, err := inference.Coordinates(t.distances, 2)
	if err != nil {
		return err
	}
	b, err := inference.Coordinates(other, 2)
	if err != nil {
		return err
	}
	r, err := inference.Procrustes(t.ctx, a.Coordinates, b.Coordinates, t.scheme, opt)
	if err != nil {
		return err
	}
	t.matrixLine(r)
	return nil
}

func (t *tester) matrixLine(r *inference.MatrixTest) {
	t.lines = append(t.lines, testLine{r.Test, "matrices", r.Outcome, math.NaN(), nil})
	if r.Caution != "" && !slices.Contains(t.notes, r.Caution) {
		t.notes = append(t.notes, r.Caution)
	}
}

// matched brings a matrix into the order of another.
func matched(m, order *pairwise.Matrix) (*pairwise.Matrix, error) {
	at := map[string]int{}
	for i, name := range m.Names {
		at[name] = i
	}
	keep := make([]int, len(order.Names))
	for i, name := range order.Names {
		k, ok := at[name]
		if !ok {
			return nil, usageError{fmt.Sprintf("sample %q is not in the other matrix; want matrices of the same samples", name)}
		}
		keep[i] = k
	}
	if len(m.Names) != len(keep) {
		return nil, usageError{fmt.Sprintf("the other matrix has %s, this one %d; want matrices of the same samples", several(len(m.Names), "sample"), len(keep))}
	}
	return inference.Part(m, keep), nil
}

func (t *tester) write(f *folder) error {
	err := f.write("tests.csv", func(w *bufio.Writer) error {
		r := &row{w: w}
		if err := r.text("test,factor,statistic,p,p_error,permutations,exact,share").end(); err != nil {
			return err
		}
		for _, l := range t.lines {
			r.text(quoted([]string{l.test})[0]).text(quoted([]string{l.term})[0]).number(l.Statistic).number(l.P).number(l.Error)
			r.number(float64(l.Permutations)).text(yesNo(l.Exact)).number(l.share)
			if err := r.end(); err != nil {
				return err
			}
		}
		return nil
	})
	if err == nil && len(t.pairs) > 0 {
		err = f.write("comparisons.csv", t.writePairs)
	}
	if err == nil && t.where != nil {
		err = f.write("where.csv", t.writeWhere)
	}
	return err
}

func yesNo(b bool) string {
	if b {
		return "yes"
	}
	return "no"
}

func (t *tester) writePairs(w *bufio.Writer) error {
	r := &row{w: w}
	if err := r.text("test,a,b,statistic,p,holm,false_discovery").end(); err != nil {
		return err
	}
	for _, l := range t.pairs {
		names := quoted([]string{l.A, l.B})
		if err := r.text(l.test).text(names[0]).text(names[1]).number(l.Statistic).number(l.P).number(l.Holm).number(l.FalseDiscovery).end(); err != nil {
			return err
		}
	}
	return nil
}

func (t *tester) writeWhere(w *bufio.Writer) error {
	r := &row{w: w}
	r.text("place,statistic,p,adjusted")
	for _, g := range t.where.Groups {
		r.text(quoted([]string{"mean " + g})[0])
	}
	if err := r.end(); err != nil {
		return err
	}
	for _, p := range t.where.Places {
		r.text(quoted([]string{p.Feature})[0]).number(p.Statistic).number(p.P).number(p.Adjusted)
		for _, m := range p.Means {
			r.number(m)
		}
		if err := r.end(); err != nil {
			return err
		}
	}
	return nil
}

// summary is what the tests say, in lines.
func (t *tester) summary(w io.Writer) {
	fmt.Fprintf(w, "samples   %s\n", several(len(t.distances.Names), "sample"))
	var groups []inference.Group
	for _, l := range t.lines {
		if l.groups != nil {
			groups = l.groups
		}
	}
	if groups != nil {
		var list []string
		for _, g := range groups {
			list = append(list, fmt.Sprintf("%s (%d)", g.Label, g.Size))
		}
		fmt.Fprintf(w, "groups    %s: %s\n", t.factor.Name, shortened(list))
	}
	for _, l := range t.lines {
		how := fmt.Sprintf("%s permutations", count(l.Permutations))
		if l.Exact {
			how = fmt.Sprintf("all %s rearrangements", count(l.Permutations))
		}
		share := ""
		if !math.IsNaN(l.share) {
			share = fmt.Sprintf(", %s of the variation", percent(l.share))
		}
		fmt.Fprintf(w, "%-9s %s: %s, P = %s (%s)%s\n", "test", l.test+" by "+l.term, human(l.Statistic), human(l.P), how, share)
	}
	for _, text := range t.reading() {
		fmt.Fprintf(w, "reading   %s\n", text)
	}
	if t.where != nil {
		t.places(w)
	}
	for _, text := range t.notes {
		fmt.Fprintf(w, "caution   %s\n", text)
	}
	fmt.Fprintln(w, "caution   a small P is evidence of a difference, not of its size or its cause")
}

func shortened(list []string) string {
	const most = 8
	if len(list) > most {
		return strings.Join(list[:most], ", ") + fmt.Sprintf(" and %d more", len(list)-most)
	}
	return strings.Join(list, ", ")
}

// reading says what tests of place and of spread make together.
func (t *tester) reading() []string {
	level := t.set.test.level
	place, spread := math.NaN(), math.NaN()
	for _, l := range t.lines {
		switch {
		case l.test == "dispersion":
			spread = l.P
		case l.term == t.factor.Name && math.IsNaN(place):
			place = l.P
		}
	}
	at := percent(level)
	switch {
	case math.IsNaN(place) || math.IsNaN(spread):
		return nil
	case place > level && spread > level:
		return []string{fmt.Sprintf("nothing here tells the groups apart at %s", at)}
	case place > level:
		return []string{fmt.Sprintf("the groups differ in spread, and at %s not in place", at)}
	case spread > level:
		return []string{fmt.Sprintf("the groups differ in place; at %s they do not differ in spread", at)}
	}
	return []string{"the groups differ, in spread too: part or all of the difference in place may be that"}
}

// places lists where the difference is.
func (t *tester) places(w io.Writer) {
	level := t.set.test.level
	found := slices.Clone(t.where.Places)
	slices.SortStableFunc(found, func(a, b inference.Place) int {
		switch {
		case a.Adjusted != b.Adjusted:
			return int(math.Copysign(1, a.Adjusted-b.Adjusted))
		case a.Statistic != b.Statistic:
			return int(math.Copysign(1, b.Statistic-a.Statistic))
		}
		return 0
	})
	called := 0
	for _, p := range found {
		if p.Adjusted <= level {
			called++
		}
	}
	fmt.Fprintf(w, "where     %s of %d differ at %s, all taken together\n", several(called, "place"), len(found), percent(level))
	for _, p := range found[:min(called, 8)] {
		var means []string
		for g, m := range p.Means {
			means = append(means, fmt.Sprintf("%s %s", t.where.Groups[g], percent(m)))
		}
		fmt.Fprintf(w, "          %s: adjusted P = %s; mean share %s\n", p.Feature, human(p.Adjusted), shortened(means))
	}
}

// badDesign reports whether an error is of the samples or the question, not of
// the run.
func badDesign(err error) bool {
	for _, kind := range []error{inference.ErrDesign, inference.ErrFew, inference.ErrOption, inference.ErrMatrix, inference.ErrCounts} {
		if errors.Is(err, kind) {
			return true
		}
	}
	return false
}

// named holds names alone, for files that label samples.
func named(names []string) (*graphio.Samples, error) {
	list := make([]graphio.Sample, len(names))
	for i, name := range names {
		list[i].Name = name
	}
	return graphio.NewSamples(0, list)
}
