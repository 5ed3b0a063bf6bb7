package main

import (
	"bufio"
	"fmt"
	"io"
	"slices"
	"strings"

	"example.org/barrow/dual/inference"
	"example.org/barrow/dual/pairwise"
)

// shapeFlags are those of barrow shape alone.
type shapeFlags struct {
	linkage, ordinary          string
	clusters, axes, neighbours int
	level                      float64
}

var linkages = map[string]inference.Linkage{
	"average": inference.Average, "complete": inference.Complete, "single": inference.Single, "ward": inference.Ward,
}

// shape draws the collection: a map, a tree, clusters and outliers.
func (s *session) shape(args []string) error {
	set := newSettings(s.command)
	set.input()
	set.comparison("multiscale")
	set.flags.StringVar(&set.calibrate, "calibrate", "auto", "")
	set.flags.StringVar(&set.test.distances, "distances", "", "")
	var sh shapeFlags
	set.flags.StringVar(&sh.linkage, "linkage", "average", "")
	set.flags.IntVar(&sh.clusters, "clusters", 0, "")
	set.flags.IntVar(&sh.axes, "axes", 2, "")
	set.flags.IntVar(&sh.neighbours, "neighbours", 3, "")
	set.flags.StringVar(&set.groups, "groups", "", "")
	set.flags.StringVar(&sh.ordinary, "ordinary", "", "")
	set.flags.Float64Var(&sh.level, "level", 0.05, "")
	set.flags.Uint64Var(&set.seed, "seed", 1, "")
	set.running()
	set.results("shape")
	j, err := s.open(set, args, func(rest []string) error {
		if err := flagsOnly(rest); err != nil {
			return err
		}
		return oneOf("--linkage", sh.linkage, "average", "complete", "single", "ward")
	})
	if j == nil || err != nil {
		return err
	}
	defer j.f.discard()
	c := &collection{matrix: j.d.distances, flags: sh}
	if c.matrix == nil {
		if c.matrix, err = s.distances(set, j.d, j.rec); err != nil {
			return err
		}
	}
	if c.reference, err = sh.reference(j.d, c.matrix.Names); err != nil {
		return err
	}
	if err := s.phases.Time("shape", c.find); err != nil {
		return err
	}
	return j.finish(c.write, c.summary)
}

// A collection is what a matrix looks like as a whole.
type collection struct {
	matrix   *pairwise.Matrix
	flags    shapeFlags
	plane    *inference.Map
	tree     *inference.Tree
	clusters *inference.Clusters
	outliers []inference.Outlier

	reference []int // samples known to be ordinary; nil where none are
}

// reference is the samples with the label of --ordinary COLUMN=LABEL.
func (sh shapeFlags) reference(d *data, names []string) ([]int, error) {
	if sh.ordinary == "" {
		return nil, nil
	}
	column, label, ok := strings.Cut(sh.ordinary, "=")
	if !ok || d.groups == nil {
		return nil, usageError{fmt.Sprintf("--ordinary %q; want COLUMN=LABEL, with --groups FILE", sh.ordinary)}
	}
	v, err := inference.Column(d.groups, column, names)
	if err != nil {
		return nil, err
	}
	var list []int
	for i, l := range v.Labels {
		if l == label {
			list = append(list, i)
		}
	}
	if len(list) == 0 || len(list) == len(names) {
		return nil, usageError{fmt.Sprintf("--ordinary %s holds for %d of %d samples; want some that are ordinary and some to be tested", sh.ordinary, len(list), len(names))}
	}
	return list, nil
}

func (c *collection) find() (err error) {
	if c.plane, err = inference.Coordinates(c.matrix, c.flags.axes); err != nil {
		return err
	}
	if c.tree, err = inference.Cluster(c.matrix, linkages[c.flags.linkage]); err != nil {
		return err
	}
	if err := c.divide(); err != nil {
		return err
	}
	level, among := 1.0, len(c.matrix.Names)
	if c.reference != nil {
		level, among = c.flags.level, len(c.reference)+1
	}
	c.outliers, err = inference.Outliers(c.matrix, min(c.flags.neighbours, among-2), level, c.reference)
	return err
}

// divide finds clusters around medoids: as many as asked for, or the number, up
// to ten, whose mean silhouette is best.
func (c *collection) divide() error {
	n := len(c.matrix.Names)
	from, to := c.flags.clusters, c.flags.clusters
	if from == 0 {
		from, to = 2, min(10, n-1)
	}
	for k := from; k <= to; k++ {
		m, err := inference.Medoids(c.matrix, k)
		if err != nil {
			return err
		}
		if c.clusters == nil || m.Mean > c.clusters.Mean {
			c.clusters = m
		}
	}
	return nil
}

func (c *collection) write(f *folder) error {
	names := quoted(c.matrix.Names)
	table := func(file, header string, cells func(r *row, i int)) error {
		return f.write(file, func(w *bufio.Writer) error {
			r := &row{w: w}
			if err := r.text(header).end(); err != nil {
				return err
			}
			for i, name := range names {
				r.text(name)
				cells(r, i)
				if err := r.end(); err != nil {
					return err
				}
			}
			return nil
		})
	}
	_, axes := c.plane.Coordinates.Dims()
	header := "sample"
	for k := range axes {
		header += fmt.Sprintf(",axis%d", k+1)
	}
	err := table("map.csv", header, func(r *row, i int) {
		for k := range axes {
			r.number(c.plane.Coordinates.At(i, k))
		}
	})
	if err == nil {
		err = f.write("tree.nwk", func(w *bufio.Writer) error { _, err := w.WriteString(c.tree.Newick() + "\n"); return err })
	}
	if err == nil {
		err = table("clusters.csv", "sample,cluster,medoid,silhouette", func(r *row, i int) {
			label := c.clusters.Label[i]
			r.number(float64(label + 1)).text(names[c.clusters.Medoids[label]]).number(c.clusters.Silhouette[i])
		})
	}
	if err == nil {
		of := make([]inference.Outlier, len(names))
		for _, o := range c.outliers {
			of[o.Sample] = o
		}
		err = table("outliers.csv", "sample,score,excess,p,false_discovery", func(r *row, i int) {
			if of[i].Score == 0 && c.reference != nil { // ordinary, not tested
				r.text("").text("").text("").text("")
				return
			}
			r.number(of[i].Score).number(of[i].Excess).number(of[i].P).number(of[i].FalseDiscovery)
		})
	}
	return err
}

func (c *collection) summary(w io.Writer) {
	names := c.matrix.Names
	fmt.Fprintf(w, "samples   %s\n", several(len(names), "sample"))
	_, axes := c.plane.Coordinates.Dims()
	fmt.Fprintf(w, "map       the first %d axes keep %s of what a flat map can show of the squared distances\n", axes, percent(c.plane.Kept))
	fmt.Fprintf(w, "tree      %s linkage, correlation of its heights with the distances %s\n", c.flags.linkage, human(c.tree.CopheneticCorrelation(c.matrix)))
	size := make([]int, len(c.clusters.Medoids))
	for _, l := range c.clusters.Label {
		size[l]++
	}
	fmt.Fprintf(w, "clusters  %d around their medoids, mean silhouette %s\n", len(size), human(c.clusters.Mean))
	for k, m := range c.clusters.Medoids {
		fmt.Fprintf(w, "          %s around %s\n", several(size[k], "sample"), names[m])
	}
	far := slices.Clone(c.outliers)
	slices.SortStableFunc(far, func(a, b inference.Outlier) int {
		switch {
		case a.Excess > b.Excess:
			return -1
		case a.Excess < b.Excess:
			return 1
		}
		return 0
	})
	if c.reference != nil {
		var called []string
		for _, o := range far {
			if o.FalseDiscovery <= c.flags.level {
				called = append(called, names[o.Sample])
			}
		}
		list := ""
		if len(called) > 0 {
			list = ": " + shortened(called)
		}
		fmt.Fprintf(w, "apart     %s of %d tested against %d ordinary ones, with at most %s false among them%s\n",
			several(len(called), "sample"), len(c.outliers), len(c.reference), percent(c.flags.level), list)
		return
	}
	o := far[0]
	fmt.Fprintf(w, "farthest  %s, whose neighbour number %d is %s times as far as that of the middle sample\n", names[o.Sample], c.flags.neighbours, human(o.Excess))
}
