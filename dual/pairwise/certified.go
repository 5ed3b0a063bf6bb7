package pairwise

import (
	"cmp"
	"context"
	"fmt"
	"math"
	"slices"
	"time"

	"example.org/barrow/exact"
	"example.org/barrow/graphio"
)

// A Goal is what Certified is to prove. Of the first four one counts: Top, if
// above 0, else Threshold, else Gap of each pair or, with Mean, of their mean.
type Goal struct {
	// Gap is how wide (upper − lower) / upper may be.
	Gap  float64
	Mean bool
	// Top proves which the Top nearest samples of every sample are.
	Top int
	// Threshold proves of every pair whether it is nearer than that.
	Threshold float64
	// Extremes also proves which pair is nearest and which farthest, and Groups,
	// lists of samples, which sample of each is nearest to all others of it.
	Extremes bool
	Groups   [][]int
	// Budget, if above 0, ends the work after that time, with the bounds so far.
	Budget time.Duration
}

// A Certificate says how far a goal was reached.
type Certificate struct {
	// Pairs of samples in all, and how many of them were solved exactly, those to
	// calibrate included.
	Pairs, Solved int
	// Settled is false where the budget ended first.
	Settled bool
	// MeanGap and MaxGap are of all pairs.
	MeanGap, MaxGap float64
	Medoids         []int // of Goal.Groups
}

// Certified bounds every pair from both sides, and solves pairs exactly where
// that tightens most what is asked for, until it is proved.
//
// Upper bounds: the flows of the samples as currents, through resistors of
// 1/length and as fitted to the samples' own flows (dual.Flow), and the triangle
// inequality by way of solved pairs. Lower bounds: differences of heights on
// potentials, which are distances from landmarks and the proofs of solved pairs
// (Kantorovich & Rubinstein 1958), and the reverse triangle inequality. Values
// are estimates, see Multiscale, clipped into their interval.
//
// With Options.Journal what was solved is kept, and a run that was cut off goes
// on from there, to the same result. Without a budget the result depends on
// nothing but the inputs, the goal and the seed.
//
// Errors: as Multiscale; ErrMethod on one-way networks.
func Certified(ctx context.Context, net *graphio.Network, samples *graphio.Samples, goal Goal, opt Options) (*Result, error) {
	if net.Directed() {
		return nil, fmt.Errorf("%w: bounds on one-way networks; want exact, which honours directions", ErrMethod)
	}
	compared, err := transported(net, samples, opt)
	if err != nil {
		return nil, err
	}
	started := time.Now()
	n := samples.Len()
	if err := opt.afford(matrixPart(n, false, true), matrixPart(n, false, false), solverPart(net, opt.threads()), termPart(net, opt.threads())); err != nil {
		return nil, err
	}
	r, err := Multiscale(ctx, net, samples, opt)
	if err != nil {
		return nil, err
	}
	c := &certifier{ctx: ctx, net: net, compared: compared, goal: goal, opt: opt, b: newBounds(samples.Names()), end: started.Add(goal.Budget)}
	if err := opt.Phases.Time("bound", func() error { return c.begin(r) }); err != nil {
		return nil, err
	}
	if err := opt.Phases.Time("exact", c.refine); err != nil {
		return nil, err
	}
	for k, x := range r.Matrix.Value {
		r.Matrix.Value[k] = min(max(x, c.b.Lower[k]), c.b.Upper[k])
		if c.b.gap(k) <= 1e-8 { // solved: what its flow costs
			r.Matrix.Value[k] = c.b.Upper[k]
		}
	}
	r.Matrix.Lower, r.Matrix.Upper = c.b.Lower, c.b.Upper
	r.Certificate = c.certificate()
	return r, nil
}

// A certifier works towards a goal.
type certifier struct {
	ctx      context.Context
	net      *graphio.Network
	compared *graphio.Samples
	goal     Goal
	opt      Options
	b        *bounds
	count    int // pairs solved
	settled  bool
	end      time.Time
	idle     int // witnesses in a row that raised nothing to speak of
}

const landmarkCount = 48

// begin bounds all pairs without solving any but those of the calibration.
func (c *certifier) begin(r *Result) error {
	if err := c.b.landmarks(c.ctx, c.net, c.compared, landmarkCount, c.opt); err != nil {
		return err
	}
	flows := [][]float64{nil}
	if r.Model != nil {
		for _, conductance := range r.Model.Flows {
			if conductance != nil {
				flows = append(flows, conductance)
			}
		}
	}
	for _, conductance := range flows {
		if err := c.b.ceilings(c.ctx, c.net, c.compared, conductance, c.opt); err != nil {
			return err
		}
	}
	for _, k := range c.opt.Known {
		if k.tight() {
			c.b.settle(k.I, k.J, k.Lower, k.Upper)
		} else {
			at := c.b.Index(k.I, k.J)
			c.b.Lower[at], c.b.Upper[at] = max(c.b.Lower[at], k.Lower), min(c.b.Upper[at], k.Upper)
		}
	}
	if r.Calibration == nil {
		return nil
	}
	for _, p := range r.Calibration.Pairs {
		c.b.settle(p.I, p.J, p.Exact*(1-1e-9), p.Exact)
		c.count++
	}
	return nil
}

// refine solves pairs until the goal is settled.
func (c *certifier) refine() error {
	report := c.opt.stage("exact")
	for {
		open := c.open()
		if len(open) == 0 {
			c.settled = true
			return nil
		}
		report(c.count, c.count+len(open))
		if c.goal.Budget > 0 && time.Now().After(c.end) {
			return nil
		}
		chosen := open[:min(len(open), batch)]
		slices.SortFunc(chosen, func(a, b pair) int { return cmp.Or(cmp.Compare(a.i, b.i), cmp.Compare(a.j, b.j)) })
		outcomes, err := c.outcomes(chosen)
		if err != nil {
			return err
		}
		for _, o := range outcomes {
			c.take(o)
		}
	}
}

// batch is how many pairs are solved before the next choice.
const batch = 64

// An outcome is what a solve proved.
type outcome struct {
	pair
	lower, upper float64
	height       []float64 // of all samples on the proof; nil for most
	slack        float64
}

func (c *certifier) take(o outcome) {
	c.b.settle(o.i, o.j, o.lower, o.upper)
	c.count++
	if o.height == nil {
		return
	}
	if c.b.witness(o.height, o.slack) > 0 {
		c.idle = 0
	} else {
		c.idle++
	}
}

// outcomes solves a batch, or finds in the journal what came of it before.
func (c *certifier) outcomes(batch []pair) ([]outcome, error) {
	if list := c.opt.Journal.replay(batch); list != nil {
		return list, nil
	}
	const run = 8
	list := make([]outcome, len(batch))
	gap := 0.0
	if c.goal.Top == 0 && c.goal.Threshold == 0 {
		gap = c.goal.Gap
	}
	witnesses := c.idle < 32
	err := work(c.ctx, c.opt.threads(), (len(batch)+run-1)/run, func(int, int) {}, func() func(int) error {
		solver, err := exact.NewSolver(c.net, exact.Options{Unmatched: c.opt.Unmatched, Gap: gap})
		return func(task int) error {
			if err != nil {
				return err
			}
			solver.Reset()
			for k := task * run; k < min(len(batch), (task+1)*run); k++ {
				r, err := solvePair(c.ctx, solver, c.compared, batch[k])
				if err != nil {
					return err
				}
				list[k] = outcome{pair: batch[k], lower: r.Lower * (1 - outward), upper: r.Upper * (1 + outward)}
				if witnesses && k == task*run {
					list[k].height, list[k].slack = heightsOn(r.Potential, c.compared)
				}
			}
			return nil
		}
	})
	if err != nil {
		return nil, err
	}
	return list, c.opt.Journal.append(list)
}

// open lists unsolved pairs that the goal still needs, the most telling first.
func (c *certifier) open() []pair {
	var list []pair
	switch {
	case c.goal.Top > 0:
		list = c.openTop()
	case c.goal.Threshold > 0:
		list = c.openPairs(func(at int) float64 {
			if c.b.Lower[at] >= c.goal.Threshold || c.b.Upper[at] < c.goal.Threshold {
				return 0
			}
			return c.b.gap(at)
		})
	case c.goal.Mean:
		if mean, _ := c.gaps(); mean > c.goal.Gap {
			list = c.openPairs(c.b.gap)
		}
	default:
		list = c.openPairs(func(at int) float64 {
			if g := c.b.gap(at); g > c.goal.Gap {
				return g
			}
			return 0
		})
	}
	if len(list) > 0 || !c.goal.Extremes && c.goal.Groups == nil {
		return list
	}
	if c.goal.Extremes {
		if list = c.openExtremes(); len(list) > 0 {
			return list
		}
	}
	for _, group := range c.goal.Groups {
		if list = c.openMedoid(group); len(list) > 0 {
			return list
		}
	}
	return nil
}

// openPairs is the unsolved pairs with a need above 0, the largest first.
func (c *certifier) openPairs(need func(at int) float64) []pair {
	type needed struct {
		pair
		need float64
	}
	var list []needed
	n := len(c.b.Names)
	at := 0
	for i := range n {
		for j := i + 1; j < n; j++ {
			if !c.b.solved[at] {
				if x := need(at); x > 0 {
					list = append(list, needed{pair{i, j}, x})
				}
			}
			at++
		}
	}
	slices.SortStableFunc(list, func(a, b needed) int { return cmp.Compare(b.need, a.need) })
	pairs := make([]pair, len(list))
	for k, x := range list {
		pairs[k] = x.pair
	}
	return pairs
}

// openTop is, of every sample whose nearest are not proved yet, the pair that
// may be nearest of those in question.
func (c *certifier) openTop() []pair {
	n := len(c.b.Names)
	k := min(c.goal.Top, n-1)
	chosen := map[int]bool{}
	var list []pair
	uppers := make([]float64, 0, n)
	for i := range n {
		uppers = uppers[:0]
		for j := range n {
			if j != i {
				uppers = append(uppers, c.b.Upper[c.b.Index(i, j)])
			}
		}
		slices.Sort(uppers)
		limit := uppers[k-1]
		rivals, best, least := 0, -1, math.Inf(1)
		for j := range n {
			if j == i {
				continue
			}
			at := c.b.Index(i, j)
			if l := c.b.Lower[at]; l < limit {
				rivals++
				if l < least && !c.b.solved[at] && !chosen[at] {
					best, least = j, l
				}
			}
		}
		if rivals > k && best >= 0 {
			chosen[c.b.Index(i, best)] = true
			list = append(list, pair{min(i, best), max(i, best)})
		}
	}
	return list
}

// openExtremes is the pairs that may be the nearest or the farthest, unless one
// is proved to be.
func (c *certifier) openExtremes() []pair {
	least, most := math.Inf(1), math.Inf(-1)
	for at := range c.b.Upper {
		least = min(least, c.b.Upper[at])
		most = max(most, c.b.Lower[at])
	}
	near, far := 0, 0
	for at := range c.b.Upper {
		if c.b.Lower[at] < least {
			near++
		}
		if c.b.Upper[at] > most {
			far++
		}
	}
	list := c.openPairs(func(at int) float64 {
		need := 0.0
		if near > 1 && c.b.Lower[at] < least {
			need = least / max(c.b.Lower[at], 1e-300)
		}
		if far > 1 && c.b.Upper[at] > most {
			need = max(need, c.b.Upper[at]/most)
		}
		return need
	})
	return list[:min(len(list), 16)]
}

// openMedoid is the pairs of a group's members that may be its medoid, unless
// one is proved to be.
func (c *certifier) openMedoid(group []int) []pair {
	lower, upper := c.sums(group)
	least := math.Inf(1)
	for _, u := range upper {
		least = min(least, u)
	}
	var rivals []int
	for k, l := range lower {
		if l < least {
			rivals = append(rivals, group[k])
		}
	}
	if len(rivals) < 2 {
		return nil
	}
	slices.Sort(rivals)
	in := make([]bool, len(c.b.Names))
	for _, i := range group {
		in[i] = true
	}
	n := len(c.b.Names)
	rival := make([]bool, n)
	for _, i := range rivals {
		rival[i] = true
	}
	var list []pair
	for i := range n {
		for j := i + 1; j < n; j++ {
			if in[i] && in[j] && (rival[i] || rival[j]) && !c.b.solved[c.b.Index(i, j)] && c.b.gap(c.b.Index(i, j)) > 0 {
				list = append(list, pair{i, j})
			}
		}
	}
	slices.SortStableFunc(list, func(a, b pair) int {
		width := func(p pair) float64 { k := c.b.Index(p.i, p.j); return c.b.Upper[k] - c.b.Lower[k] }
		return cmp.Compare(width(b), width(a))
	})
	return list[:min(len(list), 32)]
}

// sums bounds, for each member of a group, its distances to all others of it.
func (c *certifier) sums(group []int) (lower, upper []float64) {
	lower, upper = make([]float64, len(group)), make([]float64, len(group))
	for a, i := range group {
		for _, j := range group {
			if i != j {
				at := c.b.Index(i, j)
				lower[a] += c.b.Lower[at]
				upper[a] += c.b.Upper[at]
			}
		}
		lower[a] *= 1 - outward*float64(len(group))
		upper[a] *= 1 + outward*float64(len(group))
	}
	return lower, upper
}

func (c *certifier) gaps() (mean, most float64) {
	for at := range c.b.Upper {
		g := c.b.gap(at)
		mean += g / float64(len(c.b.Upper))
		most = max(most, g)
	}
	return mean, most
}

func (c *certifier) certificate() *Certificate {
	r := &Certificate{Pairs: len(c.b.Upper), Solved: c.count, Settled: c.settled}
	r.MeanGap, r.MaxGap = c.gaps()
	for _, group := range c.goal.Groups {
		_, upper := c.sums(group)
		best := 0
		for k, u := range upper {
			if u < upper[best] {
				best = k
			}
		}
		r.Medoids = append(r.Medoids, group[best])
	}
	return r
}
