package main

import (
	"bufio"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"io"
	"math"
	"os"
	"path/filepath"
	"time"

	"example.org/barrow/dual/inference"
	"example.org/barrow/dual/pairwise"
)

// goalFlags are those of --method certified.
type goalFlags struct {
	gap, gapMean, threshold float64
	top                     int
	budget                  time.Duration
	by                      string
}

// goalNames are the flags that only certified takes.
var goalNames = []string{"gap", "gap-mean", "top", "threshold", "budget", "medoids-by"}

func (set *settings) goals() {
	f, g := set.flags, &set.goal
	f.Float64Var(&g.gap, "gap", 0.01, "")
	f.Float64Var(&g.gapMean, "gap-mean", 0, "")
	f.IntVar(&g.top, "top", 0, "")
	f.Float64Var(&g.threshold, "threshold", 0, "")
	f.DurationVar(&g.budget, "budget", 0, "")
	f.StringVar(&set.groups, "groups", "", "")
	f.StringVar(&g.by, "medoids-by", "", "")
}

func (g *goalFlags) check(set *settings) error {
	if set.method != "certified" {
		for _, name := range goalNames {
			if set.flags.Changed(name) && set.replay == "" {
				return usageError{fmt.Sprintf("--%s with --method %s; want --method certified, which works towards it", name, set.method)}
			}
		}
		return nil
	}
	for _, x := range []struct {
		name  string
		value float64
		most  float64
	}{{"gap", g.gap, 1}, {"gap-mean", g.gapMean, 1}, {"threshold", g.threshold, math.MaxFloat64}} {
		if !(x.value >= 0 && x.value < x.most) {
			return usageError{fmt.Sprintf("--%s %v; want 0 or more, like 0.01", x.name, x.value)}
		}
	}
	if g.top < 0 || g.budget < 0 {
		return usageError{"--top or --budget below 0; want a number of samples, or a time like 5m"}
	}
	if set.calibrate == "0" {
		return usageError{"--calibrate 0 with --method certified; want auto or some pairs: values are estimates within their bounds"}
	}
	if (g.by == "") != (set.groups == "") {
		return usageError{"--medoids-by and --groups go together; want --groups FILE --medoids-by COLUMN"}
	}
	return nil
}

// goal is what is to be proved.
func (g *goalFlags) goal(set *settings, d *data) (pairwise.Goal, error) {
	goal := pairwise.Goal{Gap: g.gap, Top: g.top, Threshold: g.threshold, Budget: g.budget, Extremes: true}
	if g.gapMean > 0 {
		goal.Gap, goal.Mean = g.gapMean, true
	}
	if g.by == "" {
		return goal, nil
	}
	v, err := inference.Column(d.groups, g.by, d.samples.Names())
	if err != nil {
		return goal, err
	}
	_, goal.Groups = labelled(v.Labels)
	return goal, nil
}

// labelled lists labels in their order and the samples of each.
func labelled(labels []string) (names []string, members [][]int) {
	at := map[string]int{}
	for i, l := range labels {
		k, known := at[l]
		if !known {
			k = len(names)
			at[l] = k
			names, members = append(names, l), append(members, nil)
		}
		members[k] = append(members[k], i)
	}
	return names, members
}

// journal opens what keeps the solves of a long run, nil for methods that do
// not solve and for runs that keep nothing.
func (s *session) journal(set *settings, f *folder, rec *record) (*pairwise.Journal, error) {
	if f.out == "" || set.method != "certified" && set.method != "exact" {
		return nil, nil
	}
	path := f.out + ".journal"
	if set.replace {
		if err := os.Remove(path); err != nil && !errors.Is(err, os.ErrNotExist) {
			return nil, err
		}
	}
	if nearestAbove(f.out) != filepath.Dir(f.out) {
		return nil, nil // the folder above is not there yet, and a run that fails makes none
	}
	j, err := pairwise.OpenJournal(path, rec.key())
	if errors.Is(err, pairwise.ErrJournal) {
		return nil, usageError{fmt.Sprintf("%s.journal holds what another run had solved: other inputs or other flags; want that run to end first, --replace to throw it away, or another --out", f.typed)}
	}
	if err != nil {
		return nil, err
	}
	if n := j.Found(); n > 0 {
		s.note(fmt.Sprintf("goes on from %s.journal, where an earlier run had got to", f.typed))
	}
	f.journal, f.kept, s.kept = j, path, f.typed+".journal"
	return j, nil
}

// key tells the journals of runs apart.
func (r *record) key() string {
	h := sha256.New()
	fmt.Fprintln(h, r.Version, r.Command, r.Arguments)
	for _, in := range r.Inputs {
		fmt.Fprintln(h, in.SHA256)
	}
	h.Write(r.decisive())
	return hex.EncodeToString(h.Sum(nil))
}

func certifiedLine(r *pairwise.Result) string {
	c := r.Certificate
	settled := "settled"
	if !c.Settled {
		settled = "stopped by --budget"
	}
	return fmt.Sprintf("certified: every distance lies between two bounds that are proved; %s with %s of %s solved\n          widest gap %s, mean %s (of upper − lower to upper)",
		settled, count(c.Solved), several(c.Pairs, "pair"), percent(c.MaxGap), percent(c.MeanGap))
}

// certificateLines say what is proved of the collection.
func certificateLines(w io.Writer, set *settings, d *data, r *pairwise.Result) {
	c := r.Certificate
	switch {
	case !c.Settled:
	case set.goal.top > 0:
		fmt.Fprintf(w, "proved    which %s are nearest to each sample\n", several(set.goal.top, "sample"))
	case set.goal.threshold > 0:
		near := 0
		for _, u := range r.Matrix.Upper {
			if u < set.goal.threshold {
				near++
			}
		}
		fmt.Fprintf(w, "proved    %s nearer than %s, all others are not\n", several(near, "pair"), human(set.goal.threshold))
	}
	if c.Settled {
		fmt.Fprintln(w, "proved    the nearest and the farthest pair above")
	}
	if set.goal.by != "" {
		labels, _ := d.groups.Labels(set.goal.by, r.Matrix.Names)
		names, _ := labelled(labels)
		proof := "proved to be"
		if !c.Settled {
			proof = "perhaps"
		}
		for k, m := range c.Medoids {
			fmt.Fprintf(w, "medoid    %s %s: %s, %s nearest to all others of it\n", set.goal.by, names[k], r.Matrix.Names[m], proof)
		}
	}
}

// rank proves the samples nearest to one.
func (s *session) rank(args []string) error {
	set := newSettings(s.command)
	set.input()
	set.flags.StringVar(&set.mass, "mass", "share", "")
	set.flags.Float64Var(&set.unmatched, "unmatched", 0, "")
	set.flags.IntVar(&set.goal.top, "top", 10, "")
	set.flags.StringVar(&set.from, "from", "", "")
	set.running()
	set.results("")
	set.method = "certified"
	j, err := s.open(set, args, func(rest []string) error {
		switch {
		case len(rest) != 1:
			return usageError{fmt.Sprintf("%s named; want one: barrow rank Q", several(len(rest), "sample"))}
		case set.samples == "" && set.from == "":
			return usageError{"no samples: want --samples FILE, or --from DIR of an earlier run"}
		case set.goal.top < 1:
			return usageError{fmt.Sprintf("--top %d; want 1 or more", set.goal.top)}
		}
		return nil
	})
	if j == nil || err != nil {
		return err
	}
	defer j.f.discard()
	if err := j.d.severalSamples(set); err != nil {
		return err
	}
	samples := j.d.samples
	query, ok := samples.Index(j.rest[0])
	if !ok {
		return oneFault(set.samples, fmt.Sprintf("no sample %q%s", j.rest[0], didYouMean(j.rest[0], samples.Names())), "a name like "+exampleNames(samples))
	}
	opt, err := s.options(set)
	if err != nil {
		return err
	}
	opt.Known = j.d.known
	list, certificate, err := pairwise.Rank(s.ctx, j.d.net, samples, query, set.goal.top, opt)
	if err != nil {
		return err
	}
	j.rec.Counts["solved"] = certificate.Solved
	write := func(f *folder) error {
		return f.write("ranking.csv", func(w *bufio.Writer) error { return writeRanking(w, samples.Names(), list) })
	}
	return j.finish(write, func(w io.Writer) {
		fmt.Fprintf(w, "network   %s\n", networkLine(j.d.net))
		fmt.Fprintf(w, "nearest   to %s, of %s; no other sample is nearer, proved with %s solved:\n", j.rest[0], several(certificate.Pairs, "other sample"), several(certificate.Solved, "pair"))
		for k, x := range list {
			fmt.Fprintf(w, "%9d  %s  %s\n", k+1, human(x.Distance), samples.At(x.Sample).Name)
		}
	})
}

func writeRanking(w *bufio.Writer, names []string, list []pairwise.Neighbour) error {
	names = quoted(names)
	r := &row{w: w}
	if err := r.text("rank,sample,distance,lower,upper").end(); err != nil {
		return err
	}
	for k, x := range list {
		if err := r.text(fmt.Sprint(k + 1)).text(names[x.Sample]).number(x.Distance).number(x.Lower).number(x.Upper).end(); err != nil {
			return err
		}
	}
	return nil
}
