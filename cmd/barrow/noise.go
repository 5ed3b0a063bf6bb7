package main

import (
	"bufio"
	"fmt"
	"io"
	"math"
	"slices"
	"strconv"

	"example.org/barrow/dual/inference"
	"example.org/barrow/dual/pairwise"
)

// noiseFlags are those of barrow noise alone.
type noiseFlags struct {
	draws      int
	dispersion string
	replicates string
	shift      float64
}

func (n *noiseFlags) check(set *settings) error {
	if n.draws < 19 {
		return usageError{fmt.Sprintf("--draws %d; want 19 or more, as P is at least 1/(draws+1)", n.draws)}
	}
	if n.dispersion != "auto" {
		if x, err := strconv.ParseFloat(n.dispersion, 64); err != nil || !(x > 0) || math.IsInf(x, 1) {
			return usageError{fmt.Sprintf("--dispersion %q; want a number above 0, 1 for plain counts, or auto with --groups FILE --replicates COLUMN", n.dispersion)}
		}
	} else if set.groups == "" || n.replicates == "" {
		return usageError{"--dispersion auto without replicates; want --groups FILE --replicates COLUMN (barrow noise has them), with one label for samples of one source"}
	}
	if set.mass == "amount" && set.unmatched == 0 {
		return usageError{"--mass amount without --unmatched; want a cost of unmatched mass, as noise changes totals"}
	}
	if n.shift < 0 || math.IsNaN(n.shift) {
		return usageError{fmt.Sprintf("--shift-of %v; want a distance above 0", n.shift)}
	}
	return nil
}

// noise tells distances from counting noise.
func (s *session) noise(args []string) error {
	set := newSettings(s.command)
	set.input()
	set.flags.StringVar(&set.mass, "mass", "share", "")
	set.flags.Float64Var(&set.unmatched, "unmatched", 0, "")
	set.flags.StringVar(&set.calibrate, "calibrate", "auto", "")
	set.flags.StringVar(&set.groups, "groups", "", "")
	set.flags.IntVar(&set.noise.draws, "draws", 199, "")
	set.flags.StringVar(&set.noise.dispersion, "dispersion", "1", "")
	set.flags.StringVar(&set.noise.replicates, "replicates", "", "")
	set.flags.Float64Var(&set.noise.shift, "shift-of", 0, "")
	set.flags.Uint64Var(&set.seed, "seed", 1, "")
	set.running()
	set.results("noise")
	set.method = "multiscale"
	j, err := s.open(set, args, func(rest []string) error {
		if err := flagsOnly(rest); err != nil {
			return err
		}
		if set.samples == "" {
			return usageError{"no samples: want --samples FILE"}
		}
		return set.noise.check(set)
	})
	if j == nil || err != nil {
		return err
	}
	defer j.f.discard()
	if err := j.d.severalSamples(set); err != nil {
		return err
	}
	n, err := s.count(set, j.d, j.rec)
	if err != nil {
		return err
	}
	return j.finish(func(f *folder) error { return n.write(f, set) }, func(w io.Writer) { n.summary(w, set, j.d) })
}

// noiseResult is what noise makes of the pairs.
type noiseResult struct {
	*inference.Noise
	names      []string
	adjusted   []float64
	dispersion float64
	calibrated *pairwise.Calibration
}

// count calibrates, and draws noise.
func (s *session) count(set *settings, d *data, rec *record) (*noiseResult, error) {
	dispersion, err := dispersionOf(set, d)
	if err != nil {
		return nil, err
	}
	opt, err := s.options(set)
	if err != nil {
		return nil, err
	}
	if opt.Calibrate == 0 {
		return nil, usageError{"--calibrate 0; want auto or some pairs: noise is told in the unit of length"}
	}
	if parts := massParts(d); parts > 1 && set.unmatched == 0 {
		return nil, usageError{fmt.Sprintf("the samples have mass in %d parts of the network, and counting noise moves mass between them; want --bridge LENGTH, or --mass amount --unmatched COST", parts)}
	}
	opt.KeepVectors = true
	r, err := pairwise.Multiscale(s.ctx, d.net, d.samples, opt)
	if err != nil {
		return nil, err
	}
	if err := r.Vectors.Close(); err != nil {
		return nil, err
	}
	rec.Counts["pairs"] = pairCount(d)
	rec.Choices = choicesOf(r)
	estimator, err := r.Model.Estimator(d.net)
	if err != nil {
		return nil, err
	}
	n := &noiseResult{names: d.samples.Names(), dispersion: dispersion, calibrated: r.Calibration}
	err = s.phases.Time("noise", func() error {
		n.Noise, err = inference.Floor(s.ctx, estimator, d.samples, inference.NoiseOptions{
			Shares: set.mass == "share", Dispersion: dispersion, Draws: set.noise.draws, Seed: set.seed, Threads: set.threads,
			Progress: func(done, total int) { s.progress.report("noise", done, total) },
		})
		return err
	})
	if err != nil {
		return nil, err
	}
	n.adjusted = inference.BenjaminiHochberg(n.P)
	return n, nil
}

// massParts is how many parts of the network hold mass of some sample.
func massParts(d *data) int {
	label, count := d.net.Components()
	held := make([]bool, count)
	parts := 0
	for i := range d.samples.Len() {
		for _, v := range d.samples.At(i).Nodes {
			if c := label[v]; !held[c] {
				held[c] = true
				parts++
			}
		}
	}
	return parts
}

func dispersionOf(set *settings, d *data) (float64, error) {
	if set.noise.dispersion != "auto" {
		return strconv.ParseFloat(set.noise.dispersion, 64)
	}
	v, err := inference.Column(d.groups, set.noise.replicates, d.samples.Names())
	if err != nil {
		return 0, err
	}
	return inference.Dispersed(d.samples, v)
}

func (n *noiseResult) write(f *folder, set *settings) error {
	err := f.write("pairs.csv", func(w *bufio.Writer) error {
		r := &row{w: w}
		if err := r.text("a,b,distance,floor,excess,p,false_discovery").end(); err != nil {
			return err
		}
		names := quoted(n.names)
		for i := range names {
			for j := i + 1; j < len(names); j++ {
				k := n.Distance.Index(i, j)
				distance, floor := n.Distance.Value[k], n.Floor.Value[k]
				r.text(names[i]).text(names[j]).number(distance).number(floor).number(distance - floor).number(n.P[k]).number(n.adjusted[k])
				if err := r.end(); err != nil {
					return err
				}
			}
		}
		return nil
	})
	if err != nil {
		return err
	}
	return f.write("noise.csv", func(w *bufio.Writer) error {
		r := &row{w: w}
		r.text("sample,counts,replicate,upper95")
		if set.noise.shift > 0 {
			r.text("needed")
		}
		if err := r.end(); err != nil {
			return err
		}
		for i, name := range quoted(n.names) {
			r.text(name).number(n.Counts[i]).number(n.Replicate[i]).number(n.Upper[i])
			if set.noise.shift > 0 {
				r.number(n.Needed(i, set.noise.shift))
			}
			if err := r.end(); err != nil {
				return err
			}
		}
		return nil
	})
}

func (n *noiseResult) summary(w io.Writer, set *settings, d *data) {
	fmt.Fprintf(w, "network   %s\n", networkLine(d.net))
	fmt.Fprintf(w, "samples   %s\n", samplesLine(d.samples))
	fmt.Fprintf(w, "drawn     %s of every sample at random, each compared as the samples are; dispersion %s\n", several(n.Draws, "halving"), human(n.dispersion))
	floors, distances := slices.Clone(n.Floor.Value), slices.Clone(n.Distance.Value)
	slices.Sort(floors)
	slices.Sort(distances)
	fmt.Fprintf(w, "floor     %s to %s, median %s: what counting alone makes of a distance, on average\n", human(floors[0]), human(floors[len(floors)-1]), human(median(floors)))
	fmt.Fprintf(w, "distance  %s to %s, median %s, in the unit of your edge lengths\n", human(distances[0]), human(distances[len(distances)-1]), human(median(distances)))
	n.pairsLine(w)
	if set.noise.shift > 0 {
		needed := make([]float64, len(n.Counts))
		for i := range needed {
			needed[i] = n.Needed(i, set.noise.shift)
		}
		slices.Sort(needed)
		fmt.Fprintf(w, "counts    a shift of %s stands out of the noise of samples of %s counts or more (median; %s to %s by sample)\n",
			human(set.noise.shift), human(median(needed)), human(needed[0]), human(needed[len(needed)-1]))
	}
}

// pairsLine counts the pairs that are more than noise.
func (n *noiseResult) pairsLine(w io.Writer) {
	alone, adjusted := 0, 0
	for k, p := range n.P {
		if p <= 0.05 {
			alone++
		}
		if n.adjusted[k] <= 0.05 {
			adjusted++
		}
	}
	more := ""
	if adjusted == 0 && alone > 0 {
		more = " (more --draws may tell)"
	}
	fmt.Fprintf(w, "noise     %s of %s differ by more than counting noise at 5 %%, each by itself; %s with at most 5 %% false among them%s\n",
		count(alone), several(len(n.P), "pair"), count(adjusted), more)
}
